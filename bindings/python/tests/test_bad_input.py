"""Every kind of bad input, and the code it gets; the codes are those of core/errors.def, the same in C and C++."""

import math

import numpy as np
import pytest

import tauwright as tw
from conftest import refusal

HEAD = "time_s,output,process_value\n"
NAN, INF = math.nan, math.inf


@pytest.mark.parametrize("text, code, says", [
    ("", "file_malformed", "empty"),
    (HEAD, "record_too_short", "no samples"),
    ("# only a comment\n", "file_malformed", "header row"),
    ("\x00\x01\x02\xff" * 50, "file_malformed", ""),
    ("\x89PNG\r\n\x1a\n" + "\x00" * 40, "file_malformed", ""),
    (HEAD + "0,40,20\n1,open,21\n", "file_malformed", "line 3"),
    (HEAD + "0,40,20\n1,40,n/a\n", "file_malformed", "line 3"),
    (HEAD + '0,40,"20,5"\n', "file_malformed", "decimal comma"),
    (HEAD + "0,40,20,5\n", "file_malformed", "4 fields"),
    (HEAD + "0,40\n", "file_malformed", "2 fields"),
    ("time_s;output;process_value\n0;40;20\n", "file_malformed", "';'"),
    ("time_s,output\n0,40\n", "file_malformed", "process_value"),
    ("time_s,output,output,process_value\n0,1,2,3\n", "file_malformed", "twice"),
    (HEAD + "0,40,20\n1,40,nan\n", "not_finite", "line 3"),
    (HEAD + "0,40,20\n1,inf,20\n", "not_finite", "line 3"),
    (HEAD + "0,40,20\nnan,40,20\n", "not_finite", "line 3"),
    (HEAD + "0,40,20\n1,40,1e999\n", "file_malformed", "line 3"),
    (HEAD + "0,40,20\n0,40,21\n", "time_not_increasing", "line 3"),
    (HEAD + "5,40,20\n4,40,21\n", "time_not_increasing", "line 3"),
    ("time,output,process_value\n2026-03-01T08:30:00Z,40,20\n2026-03-01T08:30:01,40,20\n", "time_zone_missing", "line 3"),
    ("time,output,process_value\n2026-03-01T08:30:00,40,20\n", "time_zone_missing", "offset"),
    ("time,output,process_value\nMarch 1st,40,20\n", "file_malformed", "RFC 3339"),
    ("time,output,process_value\n2026-02-30T08:30:00Z,40,20\n", "file_malformed", "line 2"),
    ("# output_range: 100 0 %\n" + HEAD + "0,40,20\n", "out_of_domain", "output_range"),
    ("# output_range: 5 5 %\n" + HEAD + "0,40,20\n", "out_of_domain", "output_range"),
    ("# output_range: low high\n" + HEAD + "0,40,20\n", "file_malformed", "output_range"),
    ("time_s,output,process_value,quality\n0,40,20,fair\n", "file_malformed", "good or bad"),
    ("time_s,output,process_value,mode\n0,40,20,cascade\n", "file_malformed", "manual or automatic"),
])
def test_files(tmp_path, text, code, says):
    path = tmp_path / "record.csv"
    path.write_bytes(text.encode("latin-1"))
    with refusal(code) as refused:
        tw.read_record(path)
    assert says in refused.message and str(path) in refused.message
    with refusal(code):
        tw.read_record_text(text.encode("latin-1"))


def test_files_that_cannot_be_read(tmp_path):
    for path in (tmp_path / "not there.csv", tmp_path):
        with refusal("file_not_readable") as refused:
            tw.read_record(path)
        assert str(path) in refused.message


T = np.arange(10.0)


@pytest.mark.parametrize("arguments, code, says", [
    ((T, T[:5], T), "wrong_length", "output"), ((T, T, T[:5]), "wrong_length", "process_value"),
    ((T, T, T, T[:5] > 0), "wrong_length", "good"), ((T, T, T, []), "wrong_length", "good"),
    (([], [], []), "record_too_short", "time_s"),
    ((T.reshape(2, 5), T, T), "wrong_length", "time_s has 2 dimensions"), ((5.0, T, T), "wrong_length", "time_s"),
    ((T, [[1, 2], [3]], T), "wrong_length", "output"),
    ((T, T.astype(str), T), "out_of_domain", "output"), ((T, T * 1j, T), "out_of_domain", "output"),
    ((T, [None] * 10, T), "out_of_domain", "output"), ((T, None, T), "wrong_length", "output"),
    ((T.astype("datetime64[s]"), T, T), "out_of_domain", "seconds"),
    ((T, T, np.ma.masked_less(T, 3)), "out_of_domain", "process_value"),
    ((T, T, T, T), "out_of_domain", "good[2]"), ((T, T, T, ["yes"] * 10), "out_of_domain", "good"),
    ((np.where(T == 4, NAN, T), T, T), "not_finite", "time_s[4]"), ((T, np.where(T == 4, INF, T), T), "not_finite", "output[4]"),
    ((T, T, np.where(T == 4, NAN, T)), "not_finite", "process_value[4]"),
    ((np.where(T == 4, 3, T), T, T), "time_not_increasing", "time_s[4]"), ((T[::-1], T, T), "time_not_increasing", "time_s[1]"),
])
def test_arrays(arguments, code, says):
    with refusal(code) as refused:
        tw.Record(*arguments)
    assert says in refused.message


@pytest.mark.parametrize("arguments, code, says", [
    ({"setpoint": T[:3]}, "wrong_length", "setpoint"), ({"setpoint": T * NAN}, "not_finite", "setpoint[0]"),
    ({"mode": [1] * 9}, "wrong_length", "mode"), ({"mode": ["auto"] * 10}, "unknown_name", "mode[0]"),
    ({"mode": T}, "out_of_domain", "mode[2]"), ({"mode": [None] * 10}, "out_of_domain", "mode[0]"),
    ({"output_range": (0, 0)}, "out_of_domain", "output_range"), ({"output_range": (100, 0)}, "out_of_domain", "output_range"),
    ({"process_value_range": (0, NAN)}, "not_finite", "process_value_range"), ({"output_range": 100}, "wrong_length", "output_range"),
    ({"output_range": (0,)}, "wrong_length", "output_range"), ({"output_range": ("a", "b")}, "out_of_domain", "output_range"),
])
def test_what_goes_with_the_arrays(arguments, code, says):
    with refusal(code) as refused:
        tw.Record(T, T, T, **arguments)
    assert says in refused.message


def moved(n=10):
    return np.where(np.arange(n) < n // 2, 40.0, 50.0)


def test_records_that_cannot_be_fitted():
    for make in (tw.identify, tw.tune):
        with refusal("no_usable_sample"):
            make(tw.Record(T, moved(), T * NAN, np.zeros(10, bool)))
        with refusal("record_too_short"):
            make(tw.Record(T[:4], moved(4), T[:4]))
        # A constant output and a constant process value are outcomes, not errors: nothing is tuned from them.
        for record in (tw.Record(T, np.full(10, 40.0), T), tw.Record(T, moved(), np.full(10, 3.0))):
            answer = make(record)
            assert answer.advice not in ("tune", "tune_with_care") and answer.findings
            assert tw.tune(record).settings is None


@pytest.mark.parametrize("options, code", [
    ({"form": "second_order"}, "unknown_name"), ({"form": "automatic"}, "unknown_name"), ({"fixed": {"lag": 3}}, "unknown_name"),
    ({"fixed": {"gain": NAN}}, "not_finite"), ({"fixed": {"gain": 0}}, "out_of_domain"), ({"fixed": {"lag_1": 0}}, "out_of_domain"),
    ({"fixed": {"lag_1": -2}}, "out_of_domain"), ({"fixed": {"dead_time": -1}}, "out_of_domain"),
    ({"fixed": {"gain": 1, "slope": 1}}, "conflicting_arguments"), ({"fixed": {"gain": "1"}}, "out_of_domain"),
    ({"fixed": [1]}, "out_of_domain"),
    ({"fixed": {"slope": 1}, "form": "first_order_plus_dead_time"}, "conflicting_arguments")])
def test_options_of_a_fit(record, options, code):
    with refusal(code) as refused:
        tw.identify(record, **options)
    if code == "unknown_name":
        assert "use one of" in refused.message


@pytest.mark.parametrize("make, code", [
    (lambda: tw.first_order_plus_dead_time(1, 0, 1), "out_of_domain"), (lambda: tw.first_order_plus_dead_time(1, -3, 1), "out_of_domain"),
    (lambda: tw.first_order_plus_dead_time(1, 3, -1), "out_of_domain"), (lambda: tw.first_order_plus_dead_time(0, 3, 1), "out_of_domain"),
    (lambda: tw.first_order_plus_dead_time(NAN, 3, 1), "not_finite"), (lambda: tw.first_order_plus_dead_time(1, INF, 1), "not_finite"),
    (lambda: tw.second_order_plus_dead_time(1, 3, 0, 1), "out_of_domain"), (lambda: tw.integrating_plus_dead_time(0, 1), "out_of_domain"),
    (lambda: tw.integrating_plus_dead_time(1, -1), "out_of_domain"), (lambda: tw.integrating_plus_dead_time(1, 1, -1), "out_of_domain"),
    (lambda: tw.oscillatory_plus_dead_time(1, 0, 0.5, 1), "out_of_domain"),
    (lambda: tw.oscillatory_plus_dead_time(1, 5, -0.5, 1), "out_of_domain"),
    (lambda: tw.TransferFunction.from_factors(1, lags=[0]), "out_of_domain"),
    (lambda: tw.TransferFunction.from_factors(1, leads=[NAN]), "not_finite"),
    (lambda: tw.TransferFunction.from_factors(1, integrators=-1), "out_of_domain"),
    (lambda: tw.TransferFunction.from_factors(1, lags=3.0), "wrong_length"),
    (lambda: tw.TransferFunction.from_factors(1, lag_pairs=[(1, 2, 3)]), "wrong_length"),
    (lambda: tw.TransferFunction.from_factors(1, lag_pairs=[(0, 1)]), "out_of_domain"),
    (lambda: tw.TransferFunction.from_polynomials([], [1, 1]), "out_of_domain"),
    (lambda: tw.TransferFunction.from_polynomials([1], [0, 0]), "out_of_domain"),
    (lambda: tw.TransferFunction.from_polynomials([NAN], [1, 1]), "not_finite"),
    (lambda: tw.TransferFunction.from_polynomials([1], [1, 1], dead_time=-1), "out_of_domain"),
    (lambda: tw.TransferFunction.from_polynomials("12", [1, 1]), "wrong_length"),
    (lambda: tw.first_order_plus_dead_time(1, 2, 3)(["a"]), "out_of_domain"),
    (lambda: tw.step_response(tw.first_order_plus_dead_time(1, 2, 3), [0, NAN]), "not_finite"),
    (lambda: tw.step_response(tw.first_order_plus_dead_time(1, 2, 3), [[0.0]]), "wrong_length"),
    (lambda: tw.step_response(tw.TransferFunction.from_factors(1, leads=[1], lags=[2]), [0.0]), "unsupported_form"),
    (lambda: tw.in_percent(tw.first_order_plus_dead_time(1, 2, 3), process_value_range=(5, 5), output_range=(0, 1)), "out_of_domain"),
    (lambda: tw.discretize(tw.PidSettings(1), scan_time=0), "out_of_domain"),
    (lambda: tw.discretize(tw.PidSettings(1), scan_time=NAN), "not_finite"),
])
def test_models_and_settings(make, code):
    with refusal(code):
        make()


def test_wrong_kinds_are_type_errors():
    # What is no number, no record or no known keyword is refused as Python refuses it everywhere.
    for make in (lambda: tw.first_order_plus_dead_time("1", 2, 3), lambda: tw.identify(T), lambda: tw.tune(None),
                 lambda: tw.PidSettings(gain=1, gian=2), lambda: tw.Duty(1, 2), lambda: tw.robustness(3),
                 lambda: tw.read_record(3), lambda: tw.first_order_plus_dead_time(1, 2, 3) * 2):
        with pytest.raises(TypeError):
            make()


def test_bytes_that_are_not_utf_8(tmp_path, washer):
    # A unit or a path in an older code page is shown with a substitute; nothing fails on the way to the sheet.
    text = washer[0].read_bytes().replace(b"degC", b"\xb0C")
    path = tmp_path / "k\u00fchlung.csv"
    path.write_bytes(text)
    try:
        record = tw.read_record(path)
    except tw.Error as error:  # refusing it with the line is as good
        assert error.code == "file_malformed" and "UTF-8" in str(error)
        return
    assert record.process_value_range.unit == "\ufffdC" and "\ufffdC" in repr(record)
    sheet = tw.tune(record)
    assert "\ufffdC" in sheet.text()
    again = tw.TuningSheet.from_json(sheet.json())
    assert [d.path for d in tw.differences(sheet, again)] in ([], ["/process_value_range/unit"])
    with refusal("file_not_readable"):
        tw.read_record(b"/nowhere/\xfc.csv")
