from itertools import product

import numpy as np
import pytest

import tauwright as tw
from conftest import refusal

S = 1j * np.geomspace(1e-3, 10, 60)


def response_of(entered, form, s):
    """Independent computation: the equation of the form evaluated from the very numbers keyed in, in NumPy."""
    sign = -1 if form.action_as == "action_switch" and entered.action == "direct" else 1
    ti_unit = 60 if form.integral_unit == "minutes" else 1
    td_unit = 60 if form.derivative_unit == "minutes" else 1
    scale = 1.0
    if form.gain_unit == "engineering":
        scale = form.output_range.span / form.process_value_range.span
    gain = sign * (100 / entered.proportional_band if form.gain_as == "proportional_band" else entered.gain / scale)
    if form.integral_as == "time":
        ti, off = entered.integral_time * ti_unit, entered.integral_time == form.integral_off
    elif form.integral_as == "repeats":
        off = entered.repeats == form.integral_off
        ti = np.inf if off else ti_unit / entered.repeats
    else:
        off = entered.integral_gain == form.integral_off
        ti = np.inf if off else gain / (sign * entered.integral_gain / ti_unit / scale)
    integral = 0 if off else 1 / (ti * s)
    if form.equation == "parallel":
        td = (entered.derivative_gain or 0) * td_unit / scale / abs(gain)
        td *= -1 if (entered.derivative_gain or 0) < 0 else 1
    else:
        td = (entered.derivative_time or 0) * td_unit
    if td == 0:
        tf = 0.0
    elif form.filter_as == "ratio":
        tf = td / (form.fixed_filter or entered.filter_ratio)
    else:
        tf = (entered.filter_time or 0) * td_unit
    filtered = 1 / (entered.measurement_filter_time * s + 1)
    if form.equation == "series":
        # Without derivative action a series controller has no lead and no filter.
        return gain * (1 + integral) * ((td * s + 1) / (tf * s + 1) if td else 1) * filtered
    return gain * (1 + integral + td * s / (tf * s + 1)) * filtered


SETTINGS = [
    tw.PidSettings(2.5, integral_time=120),
    tw.PidSettings(-2.5, integral_time=120, derivative_time=20, filter_time=4, measurement_filter_time=2),
    tw.PidSettings(0.7),
    tw.PidSettings(0.7, derivative_time=20, filter_time=5),
]


@pytest.mark.parametrize("equation, gain_as, integral_as, filter_as", product(
    ["ideal", "series", "parallel"], ["gain", "proportional_band"], ["time", "repeats", "gain"], ["time", "ratio"]))
@pytest.mark.parametrize("unit", ["seconds", "minutes"])
@pytest.mark.parametrize("settings", SETTINGS, ids=str)
def test_forms_keep_the_response(settings, equation, gain_as, integral_as, filter_as, unit):
    for gain_unit, action_as in product(("percent", "engineering"), ("action_switch", "sign")):
        if gain_as == "proportional_band" and (gain_unit == "engineering" or (action_as == "sign" and settings.gain < 0)):
            continue
        form = tw.ControllerForm(equation, gain_as=gain_as, gain_unit=gain_unit, integral_as=integral_as, integral_unit=unit,
                                 derivative_unit=unit, filter_as=filter_as, action_as=action_as,
                                 process_value_range=(0, 120, "degC"), output_range=(0, 50, "t/h"))
        entered = tw.entered_as(settings, form)
        np.testing.assert_allclose(response_of(entered, form, S), settings(S), rtol=1e-11)
        back = tw.settings_from(entered, form)
        np.testing.assert_allclose(back(S), settings(S), rtol=1e-11)


def test_settings_at_a_complex_number():
    # closed form of the definition
    c = tw.PidSettings(2, integral_time=10, derivative_time=3, filter_time=0.5, measurement_filter_time=1)
    expected = 2 * (1 + 1 / (10 * S) + 3 * S / (0.5 * S + 1)) / (S + 1)
    np.testing.assert_allclose(c(S), expected, rtol=1e-14)
    np.testing.assert_allclose(tw.transfer_function(c)(S), expected, rtol=1e-13)
    assert type(c(0.1j)) is complex
    alone = tw.PidSettings(integral_gain=0.02)
    np.testing.assert_allclose(alone(S), 0.02 / S, rtol=1e-15)
    assert (c.integral_gain, alone.integral_gain, tw.PidSettings(2).integral_gain) == (0.2, 0.02, 0.0)
    assert c == tw.PidSettings(2, integral_time=10, derivative_time=3, filter_time=0.5, measurement_filter_time=1,
                               integral_gain=0.2)
    assert c != alone and c != "c"
    assert repr(c) == ("PidSettings(gain=2, integral_time=10 s, derivative_time=3 s, filter_time=0.5 s, "
                       "measurement_filter_time=1 s)")
    assert repr(alone) == "PidSettings(gain=0, integral_gain=0.02 1/s)"
    with pytest.raises(AttributeError):
        c.gain = 3


@pytest.mark.parametrize("arguments, code", [
    ({}, "out_of_domain"), ({"gain": float("nan")}, "not_finite"), ({"gain": 1, "integral_time": 0}, "out_of_domain"),
    ({"gain": 1, "integral_time": -5}, "out_of_domain"), ({"gain": 1, "derivative_time": -1}, "out_of_domain"),
    ({"gain": 1, "filter_time": float("inf")}, "not_finite"), ({"gain": 1, "measurement_filter_time": -1}, "out_of_domain"),
    ({"gain": 1, "setpoint_weight": -0.1}, "out_of_domain"), ({"derivative_time": 1, "integral_gain": 1}, "out_of_domain"),
    ({"gain": 1, "integral_gain": 1}, "conflicting_arguments"),
    ({"gain": 1, "integral_time": 2, "integral_gain": 1}, "conflicting_arguments"),
])
def test_settings_are_checked_when_made(arguments, code):
    with refusal(code):
        tw.PidSettings(**arguments)


def test_series_needs_a_real_equivalent():
    # closed form: exists when integral time >= 4 derivative times (no filter); at equality both are half
    series = tw.ControllerForm("series")
    entered = tw.entered_as(tw.PidSettings(2, integral_time=40, derivative_time=10), series)
    assert (entered.gain, entered.integral_time, entered.derivative_time) == (1, 20, 20)
    with refusal("no_equivalent"):
        tw.entered_as(tw.PidSettings(2, integral_time=39, derivative_time=10), series)
    with refusal("no_equivalent"):
        tw.entered_as(tw.PidSettings(integral_gain=0.1), series)


def test_display_limits_and_off():
    settings = tw.PidSettings(1.2345, integral_time=77)
    form = tw.ControllerForm(gain_as="proportional_band", integral_as="repeats", integral_unit="minutes", gain_resolution=0.5,
                             integral_resolution=0.01)
    entered = tw.entered_as(settings, form)
    # closed form: nearest multiples of 100/1.2345 = 81.004 and 60/77 = 0.7792
    assert (entered.proportional_band, entered.repeats, entered.gain, entered.integral_time) == (81.0, 0.78, None, None)
    with refusal("action_would_be_lost"):
        tw.entered_as(settings, tw.ControllerForm(integral_as="repeats", integral_resolution=0.1))
    with refusal("outside_field_limits"):
        tw.entered_as(settings, tw.ControllerForm(gain_limits=(None, 1)))
    off = tw.ControllerForm(integral_off=9999)
    assert tw.entered_as(tw.PidSettings(2), off).integral_time == 9999
    assert tw.settings_from(tw.Entered(2, integral_time=9999), off).integral_time is None
    assert tw.ControllerForm(gain_limits=[0, None]).gain_limits == (0, None) and off.gain_limits is None


def test_form_and_entered_are_values():
    form = tw.ControllerForm("series", gain_as="proportional_band", integral_as="repeats", integral_unit="minutes",
                             derivative_unit="minutes", process_value_range=[0, 120, "degC"])
    assert (form.equation, form.gain_as, form.integral_as, form.integral_unit) == (
        "series", "proportional_band", "repeats", "minutes")
    assert form.process_value_range == tw.Range(0, 120, "degC") and form.output_range is None
    assert form != tw.ControllerForm() == tw.ControllerForm()
    assert "equation=series" in repr(form) and "\n" not in repr(form)
    assert repr(tw.Entered(proportional_band=50, repeats=1.2)) == "Entered(proportional_band=50 %, repeats=1.2, action=reverse)"


@pytest.mark.parametrize("arguments, code", [
    ({"equation": "seres"}, "unknown_name"), ({"integral_unit": "hours"}, "unknown_name"),
    ({"gain_unit": "engineering"}, "missing_range"), ({"gain_resolution": -1}, "out_of_domain"),
    ({"gain_limits": (2, 1)}, "out_of_domain"), ({"gain_limits": 5}, "wrong_length"), ({"output_range": (5, 5)}, "out_of_domain"),
    ({"output_range": (0, "a")}, "out_of_domain"), ({"output_range": (1, 2, 3, 4)}, "wrong_length"),
    ({"gain_unit": "engineering", "gain_as": "proportional_band", "output_range": (0, 1), "process_value_range": (0, 1)},
     "conflicting_arguments"),
])
def test_forms_are_checked_when_made(arguments, code):
    with refusal(code):
        tw.ControllerForm(**arguments)


def test_entered_numbers_that_do_not_fit_the_form():
    with refusal("missing_argument"):
        tw.settings_from(tw.Entered(2), tw.ControllerForm())
    with refusal("conflicting_arguments"):
        tw.settings_from(tw.Entered(2, integral_time=5, repeats=3), tw.ControllerForm())
    with refusal("unknown_name"):
        tw.Entered(2, action="up")
