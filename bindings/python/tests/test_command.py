"""python -m tauwright, the picture, and requests from JSON."""

import json
import os
import subprocess
import sys
import warnings
from pathlib import Path

import numpy as np
import pytest
from matplotlib.image import imread

import tauwright as tw
from conftest import bump_test, first_order_step, integrating_step
from tauwright.plot import figure_of, save_figure
from tauwright.request import RequestError, read_request, request_from

ENVIRONMENT = {**os.environ, "PYTHONPATH": str(Path(tw.__file__).parents[1]), "PYTHONDONTWRITEBYTECODE": "1"}
ENVIRONMENT.pop("DISPLAY", None)


def command(*arguments, cwd):
    return subprocess.run([sys.executable, "-W", "error", "-m", "tauwright", *map(str, arguments)], cwd=cwd, env=ENVIRONMENT,
                          capture_output=True, text=True)


def test_the_whole_command(tmp_path, washer):
    done = command(*washer, "--out", tmp_path / "new" / "folder", cwd=tmp_path)
    assert done.returncode == 0 and done.stderr == "", done.stderr
    lines = done.stdout.splitlines()
    sheet_path, picture_path = Path(lines[-2]), Path(lines[-1])
    assert (sheet_path.name, picture_path.name) == ("bottle_washer_sheet.json", "bottle_washer_sheet.png")
    sheet = tw.TuningSheet.from_json(sheet_path.read_text(encoding="utf-8"))
    assert sheet.text().rstrip("\n") in done.stdout
    assert tw.differences(sheet, tw.tune(tw.read_record(str(washer[0])), read_request(washer[1]))) == ()
    assert json.loads(sheet_path.read_text())["schema"] == "tauwright-tuning-sheet"
    picture = imread(picture_path)
    assert picture.shape[0] > 1000 and picture.shape[1] > 1400 and np.ptp(picture[..., :3]) > 0.9


def test_without_a_request_it_writes_here(tmp_path, washer):
    done = command(washer[0], cwd=tmp_path)
    assert done.returncode == 0, done.stderr
    assert done.stdout.splitlines()[-2:] == ["bottle_washer_sheet.json", "bottle_washer_sheet.png"]
    assert sorted(p.name for p in tmp_path.iterdir()) == ["bottle_washer_sheet.json", "bottle_washer_sheet.png"]


@pytest.mark.parametrize("request_text, says", [
    ('{"time_constnt": 3}', "time_constnt"), ('{"form": {"equation": "seres"}}', "seres"), ('{"form": {"color": 1}}', "color"),
    ('{"duty": {"scan_time": "fast"}}', "request.duty.scan_time is 'fast'; give a number"), ("{", "JSON"), ("[]", "object"),
    ('{"time_constant": true}', "True"), ('{"time_constant": NaN}', "NaN"), ('{"time_constant": -3}', "-3"),
    ('{"safety_function": true}', "safety"), ('{"loop_name": "a", "loop_name": "b"}', "twice"),
    ('{"identify": {"fixed": {"lag": 3}}}', "lag"), ('{"duty": {"seed": -1}}', "whole"),
    ('{"form": {"gain_limits": [1]}}', "gain_limits")])
def test_bad_requests_are_one_line(tmp_path, washer, request_text, says):
    path = tmp_path / "request.json"
    path.write_text(request_text)
    done = command(washer[0], path, cwd=tmp_path)
    assert done.returncode == 2 and done.stdout == ""
    assert done.stderr.count("\n") == 1 and done.stderr.startswith("tauwright: ") and says in done.stderr
    assert [p.name for p in tmp_path.iterdir()] == ["request.json"]  # nothing half-made is left


def test_bad_records_are_one_line(tmp_path):
    (tmp_path / "record.csv").write_text("time_s,output,process_value\n0,1,a\n")
    for name, says in (("nothing.csv", "nothing.csv"), ("record.csv", "line 2")):
        done = command(name, cwd=tmp_path)
        assert done.returncode == 2 and done.stderr.count("\n") == 1 and says in done.stderr
    done = command("record.csv", "missing.json", cwd=tmp_path)
    assert done.returncode == 2 and done.stderr.count("\n") == 1
    assert [p.name for p in tmp_path.iterdir()] == ["record.csv"]


def test_a_folder_that_cannot_be_written(tmp_path, washer):
    (tmp_path / "taken").write_text("a file")
    done = command(washer[0], "--out", "taken", cwd=tmp_path)
    assert done.returncode == 2 and done.stderr.count("\n") == 1 and "taken" in done.stderr and done.stdout == ""


def test_request_from_plain_data():
    request = request_from({
        "time_constant": 12, "loop_name": "L", "safety_function": False, "accept_weak_margins_by": None,
        "form": {"equation": "series", "output_range": [0, 50, "t/h"], "process_value_range": [0, 9], "gain_limits": [None, 5]},
        "duty": {"scan_time": 0.5, "seed": 7}, "as_found": {"gain": 2, "integral_time": 30, "action": "direct"},
        "identify": {"form": "auto", "drift": True, "fixed": {"offset": None, "gain": 2}}})
    assert request.time_constant == 12 and request.duty == tw.Duty(scan_time=0.5, seed=7)
    assert request.form == tw.ControllerForm("series", output_range=(0, 50, "t/h"), process_value_range=(0, 9), gain_limits=(None, 5))
    assert request.as_found == tw.Entered(2, integral_time=30, action="direct")
    with pytest.raises(RequestError, match="'colour'"):
        request_from({"colour": 1})
    duty = request_from({"duty": {
        "scan_time": 1, "setpoint_ramp_time": 5, "load_ramp_time": 6, "output_rate_limit": 2, "disturbance": [1, 2.5],
        "valve": {"stick": 0.5, "travel_rate_per_s": None}, "transmitter": {"lag": 3}}}).duty
    assert duty == tw.Duty(scan_time=1, setpoint_ramp_time=5, load_ramp_time=6, output_rate_limit=2, disturbance=[1, 2.5],
                           valve=tw.ValveSettings(stick=0.5), transmitter=tw.TransmitterSettings(lag=3))
    for wrong, says in (({"valve": 3}, "give an object"), ({"valve": {"stuck": 1}}, "request.duty.valve has the unknown key 'stuck'"),
                        ({"transmitter": {"lag": "long"}}, "request.duty.transmitter.lag"), ({"disturbance": [1, "a"]}, "list of numbers"),
                        ({"disturbance": 1}, "list of numbers")):
        with pytest.raises(RequestError, match=says):
            request_from({"duty": wrong})
    with pytest.raises(tw.Error, match="dead_band"):
        request_from({"duty": {"valve": {"dead_band": -1}}})


def every_kind_of_sheet():
    ranges = {"output_range": (0, 100, "%"), "process_value_range": (0, 200, "degC")}
    arrays = bump_test(5, lambda t: first_order_step(t, 0.8, 30.0, 7.3))
    duty = tw.Duty(5, load_step=4, load_time=200, scan_time=1)
    form = tw.ControllerForm(gain_resolution=0.01, integral_resolution=0.1)
    yield "bare arrays", tw.Record(*arrays), None
    yield "no scan time", tw.Record(*arrays, **ranges), tw.TuningRequest(loop_name="a $x_ name")
    yield "no as-found", tw.Record(*arrays, **ranges), tw.TuningRequest(form=form, duty=duty, loop_name="\u65e5")
    yield "unstable as-found", tw.Record(*arrays, **ranges), tw.TuningRequest(
        form=form, duty=duty, as_found=tw.Entered(40, integral_time=10))
    noise = bump_test(6, lambda t: 0 * t, noise=30)[2]
    yield "withheld with as-found", tw.Record(arrays[0], arrays[1], noise), tw.TuningRequest(
        form=tw.ControllerForm(**ranges), duty=duty, as_found=tw.Entered(4, integral_time=10))
    yield "no move", tw.Record(arrays[0], 0 * arrays[1], arrays[2]), tw.TuningRequest(duty=duty)
    lost = np.ones(400, bool)
    lost[:5] = lost[100:140] = lost[-3:] = False
    integrating = bump_test(7, lambda t: integrating_step(t, 0.01, 9.4), sizes=(10, -20, 10))
    yield "integrating, samples lost", tw.Record(*integrating, lost, **ranges), tw.TuningRequest(duty=duty)
    yield "tiny", tw.Record([0, 1, 2, 3, 4, 5], [0, 1, 1, 1, 1, 1], [0, 0, 1, 2, 3, 3.5]), None


@pytest.mark.parametrize("name, record, request_", every_kind_of_sheet(), ids=lambda x: x if isinstance(x, str) else "")
def test_every_kind_of_sheet_is_drawn(tmp_path, name, record, request_):
    sheet = tw.tune(record, request_)
    figure = figure_of(record, sheet)
    words = " ".join(text.get_text() for axes in figure.axes for text in axes.texts)
    assert ("withheld" in words.lower()) == (sheet.settings is None)
    if sheet.settings is not None and sheet.margins.max_sensitivity is not None:
        assert "Ms = " in words
    assert any("Advice, not authority" in text.get_text() for text in figure.texts)
    for suffix in ("png", "pdf"):
        with warnings.catch_warnings():
            warnings.filterwarnings("ignore", category=DeprecationWarning)
            save_figure(record, sheet, tmp_path / f"page.{suffix}")
        assert (tmp_path / f"page.{suffix}").stat().st_size > 5000
