"""What stands on the picture's text panel: the numbers of a sheet as rows of label, as found, proposed."""

from __future__ import annotations

import math

import tauwright as tw

Row = tuple[str, str, str]

_SHORT_UNIT = {"seconds": "s", "minutes": "min"}


def number(x: float, digits: int = 4) -> str:
    """A number to be read: few digits, no exponent where it can be helped."""
    text = f"{x:.{digits}g}"
    return f"{float(text):.0f}" if "e+" in text and abs(x) < 1e7 else text


def _exact(x: float) -> str:
    """A number to be keyed in: every digit where the display rounds, six where nothing does."""
    text = repr(x).removesuffix(".0")
    return text if len(text) <= 8 else number(x, 6)


def _with_unit(x: float | None, unit: str) -> str:
    return "" if x is None else f"{_exact(x)} {unit}".rstrip()


def _fields(sheet: tw.TuningSheet, settings: tw.PidSettings | None, entered: tw.Entered | None) -> dict[str, str]:
    if settings is None:
        return {}
    if entered is not None and sheet.form is not None:
        ti, td = _SHORT_UNIT[sheet.form.integral_unit], _SHORT_UNIT[sheet.form.derivative_unit]
        gain_unit = "%/%" if sheet.form.gain_unit == "percent" else "eng. units"
        fields = {
            "Gain": _with_unit(entered.gain, gain_unit),
            "Proportional band": _with_unit(entered.proportional_band, "%"),
            "Integral time": _with_unit(entered.integral_time, ti),
            "Repeats": _with_unit(entered.repeats, f"per {ti}"),
            "Integral gain": _with_unit(entered.integral_gain, f"per {ti}"),
            "Derivative time": _with_unit(entered.derivative_time, td),
            "Derivative gain": _with_unit(entered.derivative_gain, td),
            "Derivative filter time": _with_unit(entered.filter_time, td),
            "Derivative filter ratio": _with_unit(entered.filter_ratio, ""),
            "Action": entered.action,
        }
    else:
        # The long name of a unit that is not percent has no room here; the sheet's text has it.
        unit = "%/%" if sheet.gain_unit == "%/%" else ""
        fields = {
            "Gain": _with_unit(settings.gain, unit),
            "Integral time": "none" if settings.integral_time is None else _with_unit(settings.integral_time, "s"),
            "Derivative time": _with_unit(settings.derivative_time, "s"),
        }
        if settings.gain == 0:
            fields["Integral gain"] = _with_unit(settings.integral_gain, "1/s")
        if settings.derivative_time > 0:
            fields["Derivative filter time"] = _with_unit(settings.filter_time, "s")
    if settings.measurement_filter_time > 0:
        fields["Measurement filter"] = _with_unit(settings.measurement_filter_time, "s")
    if settings.setpoint_weight != 1:
        fields["Set-point weight"] = _exact(settings.setpoint_weight)
    return fields


def _margin(x: float | None, unit: str = "") -> str:
    if x is None:
        return "-"
    return f"{number(x, 3)} {unit}".rstrip() if math.isfinite(x) else "no limit"


def _margins(margins: tw.Robustness | None) -> dict[str, str]:
    if margins is None:
        return {}
    if margins.verdict != "stable":
        return {"Verdict": margins.verdict}
    return {
        "Gain margin": _margin(margins.gain_margin),
        "Phase margin": _margin(margins.phase_margin_deg, "deg"),
        "Delay margin": _margin(margins.delay_margin, "s"),
        "Largest sensitivity Ms": _margin(margins.max_sensitivity),
    }


def _figures(figures: tw.Figures | None) -> dict[str, str]:
    if figures is None:
        return {}
    rows = {}
    if figures.overshoot_percent is not None:
        rows["Overshoot"] = _margin(figures.overshoot_percent, "%")
        rows["Settling time (2 %)"] = "beyond trend" if figures.settling_time is None else _margin(figures.settling_time, "s")
    if figures.peak_load_error is not None:
        rows["Peak load error"] = _margin(figures.peak_load_error, "% of span")
    rows["Valve travel"] = _margin(figures.valve_travel, "%")
    return rows


def _side_by_side(found: dict[str, str], proposed: dict[str, str]) -> list[Row]:
    labels = [*proposed, *(label for label in found if label not in proposed)]
    rows = [(label, found.get(label, ""), proposed.get(label, "")) for label in labels]
    return [row for row in rows if row[1] or row[2]]


def settings_rows(sheet: tw.TuningSheet) -> list[Row]:
    """The fields to key in, beside those to roll back to."""
    return _side_by_side(_fields(sheet, sheet.as_found_settings, sheet.as_found_entered),
                         _fields(sheet, sheet.settings, sheet.entered))


def margins_rows(sheet: tw.TuningSheet) -> list[Row]:
    """Margins of those numbers, and the figures of their trends."""
    found, proposed = _margins(sheet.as_found_margins), _margins(sheet.margins)
    if "Verdict" in found and proposed:
        proposed = {"Verdict": "stable", **proposed}
    return (_side_by_side(found, proposed)
            + _side_by_side(_figures(sheet.as_found_figures), _figures(sheet.figures)))
