import hashlib
import json
import math
import threading

import numpy as np
import pytest

import tauwright as tw
from conftest import bump_test, first_order_step, integrating_step, refusal

FORM = tw.ControllerForm("series", gain_as="proportional_band", integral_as="repeats", integral_unit="minutes",
                         derivative_unit="minutes", gain_resolution=0.1, integral_resolution=0.01)
DUTY = tw.Duty(5, load_step=4, load_time=300, scan_time=1.0)


def test_the_whole_street(record):
    sheet = tw.tune(record, tw.TuningRequest(form=FORM, duty=DUTY, as_found=tw.Entered(proportional_band=50, repeats=2.0),
                                             loop_name="TIC-1"))
    fit = tw.identify(record)
    gain = fit.gain * 100 / 200  # percent of span
    # closed form: the rule of tune.hpp, from the fit
    D = fit.dead_time + 0.5
    tc = max(D, 0.1 * fit.lags[0], 3.0, 2 * fit.standard_errors["dead_time"])
    assert sheet.speed.time_constant == pytest.approx(tc, rel=1e-12) and sheet.speed.effective_dead_time == pytest.approx(D)
    kc, ti = fit.lags[0] / (gain * (tc + D)), min(fit.lags[0], 4 * (tc + D))
    # What is to be entered is rounded to the display; settings and margins are those of the rounded numbers.
    assert sheet.entered.proportional_band == pytest.approx(100 / kc, abs=0.05 + 1e-9)
    assert sheet.entered.repeats == pytest.approx(60 / ti, abs=0.005 + 1e-9)
    assert sheet.settings == tw.settings_from(sheet.entered, sheet.form)
    assert sheet.margins == tw.robustness(sheet.model, sheet.settings, scan_time=1.0)
    assert sheet.model.gain == pytest.approx(gain) and sheet.model.dead_time == fit.dead_time
    trend = tw.simulate(sheet.model, sheet.settings, sheet.duty, horizon=sheet.trend_horizon)
    assert sheet.figures == tw.figures(trend)
    assert sheet.duty.rest_output == 40 and sheet.duty.rest_process_value == pytest.approx(fit.offset / 2)
    # As found: 100 / 50 and 60 / 2, no derivative.
    assert sheet.as_found_settings == tw.PidSettings(2, integral_time=30)
    assert sheet.as_found_margins == tw.robustness(sheet.model, sheet.as_found_settings, scan_time=1.0)
    assert sheet.as_found_entered == tw.Entered(proportional_band=50, repeats=2.0) and sheet.as_found_figures is not None
    assert sheet.withheld == () and sheet.advice == "tune" and sheet.gain_unit == "%/%"
    assert sheet.loop_name == "TIC-1" and sheet.library_version == tw.__version__
    text = sheet.text()
    # The hash is one word that no line break may part.
    assert text.isascii() and all(len(line) <= 78 or sheet.input_sha256 in line for line in text.splitlines())
    for word in ("TIC-1", "Advice, not authority", sheet.input_sha256, repr(sheet.entered.proportional_band)):
        assert word in text
    assert any("Advice, not authority" in c for c in sheet.cautions)
    assert "\n" not in repr(sheet)


def test_hash_is_of_the_arrays(record):
    # independent computation: hashlib
    arrays = b"".join(a.astype("<f8").tobytes() for a in (record.time_s, record.output, record.process_value))
    expected = hashlib.sha256(arrays + record.good.astype("u1").tobytes()).hexdigest()
    assert tw.tune(record).input_sha256 == expected


def test_hash_is_of_the_file(washer):
    assert tw.tune(tw.read_record(washer[0])).input_sha256 == hashlib.sha256(washer[0].read_bytes()).hexdigest()


def test_time_constant_asked_for(record):
    sheet = tw.tune(record, tw.TuningRequest(25.0, form=tw.ControllerForm()))
    assert sheet.speed.time_constant == 25
    assert sheet.settings.gain == pytest.approx(sheet.fit.lags[0] / (sheet.model.gain * (25 + sheet.fit.dead_time)), rel=1e-12)
    assert sheet.figures is None  # no scan time


def test_integrating():
    arrays = bump_test(92, lambda t: integrating_step(t, 0.01, 9.4), sizes=(10, -20, 10))
    sheet = tw.tune(tw.Record(*arrays, output_range=(0, 100, "%"), process_value_range=(0, 100, "%")), tw.TuningRequest(duty=DUTY))
    D = sheet.fit.dead_time + 0.5
    tc = 3 * D
    # closed form: the integrating rule, Kc = (2 tc + D) / (slope (tc + D)^2), Ti = 2 tc + D
    assert sheet.settings.gain == pytest.approx((2 * tc + D) / (sheet.fit.gain * (tc + D)**2), rel=1e-9)
    assert sheet.settings.integral_time == pytest.approx(2 * tc + D, rel=1e-9)


def test_withheld_is_a_value():
    t = np.arange(200.0)
    noise = np.random.default_rng(93).standard_normal(200)
    sheet = tw.tune(tw.Record(t, np.full(200, 40.0), noise), None)
    assert sheet.settings is None and sheet.entered is None and sheet.margins is None and sheet.figures is None
    assert sheet.withheld and sheet.model is None and sheet.speed is None and sheet.advice == "test_again"
    assert "settings=withheld" in repr(sheet) and "NO SETTINGS" in sheet.text()


def test_weak_margins_need_a_name(record):
    fast = tw.TuningRequest(2.0, form=tw.ControllerForm())
    assert tw.tune(record, fast).settings is None
    named = tw.TuningRequest(2.0, form=tw.ControllerForm(), accept_weak_margins_by="R. Weaver")
    sheet = tw.tune(record, named)
    assert sheet.margins.max_sensitivity > 2 and sheet.weak_margins_accepted_by == "R. Weaver"
    assert named.accept_weak_margins_by == "R. Weaver" and fast.accept_weak_margins_by is None


def test_json_is_read_back_and_compared(record):
    request = tw.TuningRequest(form=FORM, duty=DUTY, as_found=tw.Entered(proportional_band=50, repeats=2.0), loop_name="A \u00b0C \"x\"")
    sheet = tw.tune(record, request)
    data = json.loads(sheet.json())  # independent computation: Python's own reader
    assert data["schema"] == "tauwright-tuning-sheet" and data["loop_name"] == 'A \u00b0C "x"'
    again = tw.TuningSheet.from_json(sheet.json())
    assert tw.differences(sheet, again) == () and again.json() == sheet.json() and again.text() == sheet.text()
    assert again.settings == sheet.settings and again.margins == sheet.margins and again.model == sheet.model
    other = tw.tune(record, tw.TuningRequest(form=FORM, duty=DUTY, time_constant=20))
    found = {d.path: d for d in tw.differences(sheet, other)}
    assert json.loads(found["/speed/time_constant_s"].later) == 20
    assert found["/loop_name"].earlier == json.dumps('A \u00b0C "x"', ensure_ascii=False)
    assert "/input_sha256" not in found and "->" in repr(found["/loop_name"])
    for text, code in (("", "file_malformed"), ("{}", "schema_unsupported"), ('{"schema":"x"}', "schema_unsupported"),
                       (sheet.json().replace('"schema_version": 2', '"schema_version": 99'), "schema_unsupported"),
                       (sheet.json().replace('"loop_name"', '"lop_name"'), "file_malformed")):
        with refusal(code):
            tw.TuningSheet.from_json(text)


def test_identify_options_reach_the_fit(record):
    sheet = tw.tune(record, tw.TuningRequest(identify={"form": "first_order_plus_dead_time", "fixed": {"dead_time": 7}}))
    assert sheet.fit.dead_time == 7 and sheet.fit.form_reason == "asked for"
    assert sheet.speed.effective_dead_time == 7


def test_refusals(record):
    bare = tw.Record(record.time_s, record.output, record.process_value)
    cases = [
        (record, {"safety_function": True}, "safety_function"), (bare, {"form": tw.ControllerForm()}, "missing_range"),
        (record, {"form": tw.ControllerForm(output_range=(0, 50, "%"))}, "conflicting_arguments"),
        (record, {"as_found": tw.Entered(2, integral_time=9)}, "missing_argument"),
        (record, {"time_constant": -1.0}, "out_of_domain"), (record, {"time_constant": math.nan}, "not_finite"),
        (record, {"form": tw.ControllerForm(), "as_found": tw.Entered(repeats=2)}, "conflicting_arguments"),
    ]
    for given, arguments, code in cases:
        with refusal(code):
            tw.tune(given, tw.TuningRequest(**arguments))
    for options in ({"forn": "auto"}, {"form": "second"}, {"fixed": {"lag": 3}}):
        with refusal("unknown_name"):
            tw.TuningRequest(identify=options)
    for options in (3, {"fixed": 3}, {"fixed": {"gain": "a"}}, {"drift": "yes"}):
        with refusal("out_of_domain"):
            tw.TuningRequest(identify=options)


def test_other_threads_run_meanwhile():
    arrays = bump_test(94, lambda t: first_order_step(t, 0.8, 300.0, 73.0), samples=300_000, period=0.1)
    record = tw.Record(*arrays)
    sheets, turns = [], 0
    worker = threading.Thread(target=lambda: sheets.append(tw.tune(record)))
    worker.start()
    while worker.is_alive():
        turns += 1
    worker.join()
    assert sheets[0].fit.gain == pytest.approx(0.8, rel=0.01) and turns > 1000


def test_the_worst_case_over_the_fit_is_on_the_sheet():
    # invariant: the sheet's is the one of the fit's 95 % region, within what half a scan for the sampling blurs
    t, u, y = bump_test(3, lambda t: first_order_step(t, 0.8, 30.0, 7.3))
    record = tw.Record(t, u, y + 0.05 * np.random.default_rng(5).standard_normal(len(t)), output_range=(0, 100, "%"),
                       process_value_range=(0, 200, "degC"))
    sheet = tw.tune(record, tw.TuningRequest(duty=tw.Duty(4, scan_time=0.5, valve=tw.ValveSettings(stick=0.5))))
    again = tw.worst_case(sheet.model, sheet.settings, tw.Uncertainty.from_fit(sheet.fit), extra_delay=0.25)
    assert sheet.worst_case.certified
    assert sheet.worst_case.max_sensitivity == pytest.approx(again.max_sensitivity, rel=0.05)
    assert sheet.as_found_worst_case is None
    assert sheet.valve_cycle.existence == "persists" and not sheet.valve_cycle.retuning_cures
