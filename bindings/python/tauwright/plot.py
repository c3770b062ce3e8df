"""The tuning sheet as one page to pin up, and pictures of results. Needs Matplotlib; uses no global drawing state.

figure_of(record, sheet) returns the page, save_figure(record, sheet, path) writes it. open_loop_figure(margins) and
sensitivity_figure(margins) draw what robustness returned, trend_figure(trend) a trend, worst_case_figure(worst) a worst case;
each returns a Matplotlib Figure with an Agg canvas, and is what the results' own plot() calls.
"""

from __future__ import annotations

import os
import textwrap
import warnings
from pathlib import PurePath
from typing import Any

import numpy as np
import numpy.typing as npt
from matplotlib.backends.backend_agg import FigureCanvasAgg  # type: ignore[import]
from matplotlib.figure import Figure  # type: ignore[import]

import tauwright as tw
from tauwright.loop_plots import open_loop_figure, sensitivity_figure, worst_case_figure
from tauwright.plot_style import (
    ACCENT, FOUND, FOUND_DASHES, RULE, SAMPLE, SHADE, Array, Axes, Curve, draw_arrow, draw_plane, limits, open_loop, styled,
    time_scale)
from tauwright.sheet_rows import Row, margins_rows, number, settings_rows
from tauwright.trend_plots import trend_figure

__all__ = ["figure_of", "open_loop_figure", "save_figure", "sensitivity_figure", "trend_figure", "worst_case_figure"]

_TREND_TITLE = "The loop: trends to expect"
_GAP_FACTOR = 5.0  # a step of the stamps this many times the usual one is a gap


def _unit(value_range: tw.Range | None, fallback: str) -> str:
    return value_range.unit if value_range is not None and value_range.unit else fallback


def _left_out(t: Array, good: npt.NDArray[np.bool_]) -> list[tuple[float, float]]:
    """The stretches without a usable sample: runs of bad ones with their neighbors, and holes in the stamps."""
    usable = np.flatnonzero(good)
    steps = np.diff(t)
    usual = float(np.median(steps)) if steps.size else 0.0
    stretches = []
    for a, b in zip(usable[:-1], usable[1:]):
        if b > a + 1 or t[b] - t[a] > _GAP_FACTOR * usual:
            stretches.append((float(t[a]), float(t[b])))
    if usable.size and usable[0] > 0:
        stretches.insert(0, (float(t[0]), float(t[usable[0]])))
    if usable.size and usable[-1] < t.size - 1:
        stretches.append((float(t[usable[-1]]), float(t[-1])))
    return stretches


def _message(ax: Axes, text: str, height: float = 0.5) -> None:
    wrapped = "\n".join(textwrap.fill(line, 58) for line in text.splitlines())
    ax.text(0.5, height, wrapped, transform=ax.transAxes, ha="center", va="center", color="black", parse_math=False,
            bbox={"facecolor": "white", "edgecolor": RULE, "linewidth": 0.6, "pad": 5.0}, zorder=5)


def _title_over_key(ax: Axes, text: str) -> None:
    """The title, with the key to the lines in one row under it, outside the data."""
    ax.set_title(text, pad=17)
    handles, _ = ax.get_legend_handles_labels()
    if handles:
        ax.legend(loc="lower left", bbox_to_anchor=(-0.01, 0.995), ncol=5, handlelength=2.4, borderaxespad=0.2,
                  columnspacing=1.4, handletextpad=0.5)


def _draw_record(top: Axes, bottom: Axes, record: tw.Record, sheet: tw.TuningSheet) -> None:
    scale, unit = time_scale(float(record.time_s[-1] - record.time_s[0]))
    t = (record.time_s - record.time_s[0]) / scale
    good, value, output = record.good, record.process_value, record.output
    fitted = sheet.fit.fitted(record)
    for ax in (top, bottom):
        for i, (a, b) in enumerate(_left_out(t, good)):
            ax.axvspan(a, b, color=SHADE, lw=0, zorder=0, label="no usable samples" if ax is top and i == 0 else None)
    top.plot(t[good], value[good], ".", ms=3.4, color=SAMPLE, mew=0, label="samples", zorder=2)
    if fitted.size:
        top.plot(t, fitted, color=ACCENT, lw=1.1, label="fitted model", zorder=3)
    if not good.all():
        # On the lower edge: what a bad sample says is not to be read as a value.
        top.plot(t[~good], np.full(int((~good).sum()), 0.035), "x", ms=4, mew=0.9, color="black",
                 transform=top.get_xaxis_transform(), label="left out (bad)", zorder=4)
    top.set_ylim(*limits(value[good], fitted))
    _title_over_key(top, "The test: record and fitted model")
    top.set_ylabel(f"process value, {_unit(sheet.process_value_range, 'as recorded')}", parse_math=False)
    top.tick_params(labelbottom=False)

    bottom.plot(t, output, drawstyle="steps-post", color="black", lw=1.1)
    bottom.set_ylim(*limits(output))
    bottom.set_xlim(float(t[0]), float(t[-1]) if t.size > 1 else float(t[0]) + 1.0)
    bottom.set_ylabel(f"output, {_unit(sheet.output_range, 'as rec.')}", parse_math=False)
    begins = f" from {sheet.first_stamp}" if sheet.first_stamp else ""
    bottom.set_xlabel(f"time, {unit}{begins}", parse_math=False)


def _why_no_trend(sheet: tw.TuningSheet) -> str | None:
    duty = sheet.duty
    if sheet.model is None or sheet.speed is None:
        return "No trend: no model could be fitted."
    if duty.scan_time is None:
        return "No trend: no scan time was given."
    if sheet.gain_unit != "%/%":
        return "No trend: ranges of process value and output were not given."
    if duty.setpoint_step == 0 and duty.load_step == 0:
        return "No trend: the duty has no set-point step and no load step."
    if sheet.settings is None and sheet.as_found_settings is None:
        return "No trend: no settings as found were given."
    if sheet.trend_horizon > 1e6 * duty.scan_time:
        return "No trend: it would take more than a million scans."
    return None


def _withheld(sheet: tw.TuningSheet, most: int = 3) -> str:
    reasons = [f"- {reason}" for reason in sheet.withheld[:most]]
    more = len(sheet.withheld) - most
    return "SETTINGS WITHHELD\n" + "\n".join(reasons) + (f"\n- and {more} more: see the sheet" if more > 0 else "")


def _setpoint_label(sheet: tw.TuningSheet) -> str:
    step = sheet.duty.setpoint_step
    return f"set point, {step:+g} % of span" if step != 0 else "set point"


def _mark_load(ax: Axes, sheet: tw.TuningSheet, scale: float) -> None:
    duty = sheet.duty
    if duty.load_step != 0 and duty.load_time <= sheet.trend_horizon:
        ax.axvline(duty.load_time / scale, color=RULE, lw=0.8, zorder=0)
        ax.text(duty.load_time / scale, 0.99, f" load {duty.load_step:+g} % of output", transform=ax.get_xaxis_transform(),
                va="top", ha="left", fontsize=7.5)


def _draw_trends(top: Axes, bottom: Axes, sheet: tw.TuningSheet) -> None:
    top.tick_params(labelbottom=False)
    pv_range, op_range = sheet.process_value_range, sheet.output_range
    top.set_ylabel(f"process value, {_unit(pv_range, '%')}", parse_math=False)
    bottom.set_ylabel(f"output, {_unit(op_range, '%')}", parse_math=False)
    bottom.set_xlabel("time, s")
    problem = _why_no_trend(sheet)
    if problem is not None or pv_range is None or op_range is None or sheet.model is None:
        _title_over_key(top, _TREND_TITLE)
        _message(top, problem or "" if sheet.settings is not None else f"{_withheld(sheet)}\n{problem or ''}")
        for ax in (top, bottom):
            ax.set_xticks([])
            ax.set_yticks([])
        bottom.set_xlabel("")
        return
    scale, unit = time_scale(sheet.trend_horizon)
    values: list[Array] = []
    outputs: list[Array] = []
    found: dict[str, Any] = {"color": FOUND, "ls": FOUND_DASHES, "zorder": 2}
    proposed: dict[str, Any] = {"color": ACCENT, "ls": "-", "zorder": 3}
    for settings, name, style in ((sheet.as_found_settings, "as found", found), (sheet.settings, "proposed", proposed)):
        if settings is None:
            continue
        trend = tw.simulate(sheet.model, settings, sheet.duty, horizon=sheet.trend_horizon)
        t = trend.time_s / scale
        value = pv_range.low + trend.process_value * (pv_range.span / 100.0)
        setpoint = pv_range.low + trend.setpoint * (pv_range.span / 100.0)
        output = op_range.low + trend.output * (op_range.span / 100.0)
        if not values:
            top.plot(t, setpoint, color="black", lw=0.9, ls=(0, (1, 1.5)), label=_setpoint_label(sheet), zorder=1)
            values.append(setpoint)
        top.plot(t, value, label=name, **style)
        bottom.plot(t, output, drawstyle="steps-post", **{**style, "lw": 1.0})
        values.append(value)
        outputs.append(output)
    _mark_load(top, sheet, scale)
    low, high = limits(*values)
    top.set_ylim(low, high + 0.06 * (high - low))
    bottom.set_ylim(*limits(*outputs))
    bottom.set_xlim(0.0, sheet.trend_horizon / scale)
    bottom.set_xlabel(f"time, {unit}")
    _title_over_key(top, _TREND_TITLE)
    if sheet.settings is None:
        _message(top, _withheld(sheet), height=0.2)


def _frequencies(sheet: tw.TuningSheet) -> Array:
    assert sheet.speed is not None
    dead_time = sheet.speed.effective_dead_time
    pace = max(sheet.speed.time_constant + dead_time, 1e-12)
    # Three turns of the dead time say everything; a spiral of many more only blackens the paper.
    highest = min(1e3 / pace, 6.0 * np.pi / dead_time) if dead_time > 0 else 1e3 / pace
    if sheet.duty.scan_time is not None:
        highest = np.pi / sheet.duty.scan_time
    return np.geomspace(min(1e-4 / pace, 1e-3 * highest), highest, 8001)


def _draw_closest(ax: Axes, sheet: tw.TuningSheet, settings: tw.PidSettings, margins: tw.Robustness) -> None:
    peak, at = margins.max_sensitivity, margins.max_sensitivity_frequency
    if peak is None or at is None or not np.isfinite(peak) or not np.isfinite(at):
        return
    turn = np.linspace(0.0, 2.0 * np.pi, 361)
    ax.plot(-1.0 + np.cos(turn) / peak, np.sin(turn) / peak, color=ACCENT, lw=0.9, ls=(0, (1, 1.2)),
            label=f"circle of closest approach,\nradius 1/Ms = {number(1.0 / peak, 3)},\nreached at {number(at, 3)} rad/s")
    assert sheet.model is not None
    closest = complex(open_loop(sheet.model, settings, sheet.duty.scan_time, 0.0, np.array([at]))[0])
    ax.plot([-1.0, closest.real], [0.0, closest.imag], color="black", lw=0.9)
    ax.plot([closest.real], [closest.imag], "o", ms=3.5, color=ACCENT)
    middle = 0.5 * (closest - 1.0)
    # Beside the line, on the side away from the real axis.
    ax.annotate(f"Ms = {number(peak, 3)}", xy=(middle.real, middle.imag), xytext=(2, -6 if closest.imag < 0 else 6),
                textcoords="offset points", ha="right", va="top" if closest.imag < 0 else "bottom", fontsize=8,
                fontweight="bold", bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.8, "alpha": 0.85}, zorder=5)


def _draw_curve(ax: Axes, curve: Curve, box: tuple[float, float, float, float], **style: Any) -> None:
    ax.plot(curve.real, curve.imag, **style)
    draw_arrow(ax, curve, box, style["color"])


def _draw_plane(ax: Axes, sheet: tw.TuningSheet) -> None:
    ax.set_title("How close the open loop comes to -1")
    box = (-2.6, 2.2, -1.75, 0.95)
    draw_plane(ax, box)
    if sheet.model is None or sheet.speed is None or (sheet.settings is None and sheet.as_found_settings is None):
        _message(ax, "No settings, no open loop.")
        return
    w, scan_time = _frequencies(sheet), sheet.duty.scan_time
    if sheet.as_found_settings is not None:
        _draw_curve(ax, open_loop(sheet.model, sheet.as_found_settings, scan_time, 0.0, w), box, color=FOUND, ls=FOUND_DASHES, lw=1.2, label="as found")
    if sheet.settings is not None and sheet.margins is not None:
        _draw_curve(ax, open_loop(sheet.model, sheet.settings, scan_time, 0.0, w), box, color=ACCENT, label="proposed")
        _draw_closest(ax, sheet, sheet.settings, sheet.margins)
    elif sheet.as_found_settings is not None and sheet.as_found_margins is not None:
        _draw_closest(ax, sheet, sheet.as_found_settings, sheet.as_found_margins)
    ax.legend(loc="lower right", handlelength=2.6, borderaxespad=0.2)


def _write_rows(ax: Axes, y: float, step: float, heading: Row, rows: list[Row]) -> float:
    for label, found, proposed in (heading, *rows):
        weight = "bold" if (label, found, proposed) == heading else "normal"
        ax.text(0.0, y, label, fontweight=weight, va="top", parse_math=False)
        ax.text(0.53, y, found, fontweight=weight, va="top", ha="left", color=FOUND, parse_math=False)
        ax.text(0.78, y, proposed, fontweight="bold", va="top", ha="left", parse_math=False)
        y -= step
    return y


def _model_line(sheet: tw.TuningSheet) -> str:
    fit = sheet.fit
    if fit.model is None:
        return "no model could be fitted"
    errors = fit.standard_errors

    def shown(value: float, key: str, unit: str) -> str:
        error = f" \u00b1 {number(errors[key], 2)}" if errors.get(key) else ""
        # One word for the line breaks: a value is not to be parted from its unit.
        return f"{number(value)}{error} {unit}".replace(" ", "\u00a0")

    pv, op = _unit(sheet.process_value_range, "pv unit"), _unit(sheet.output_range, "output unit")
    if fit.form == "integrating_plus_dead_time":
        parts = [f"slope {shown(fit.gain, 'slope', f'{pv}/s per {op}')}"]
    else:
        parts = [f"gain {shown(fit.gain, 'gain', f'{pv} per {op}')}", f"lag {shown(fit.lags[0], 'lag_1', 's')}"]
    parts.append(f"dead time {shown(fit.dead_time, 'dead_time', 's')}")
    return ", ".join(parts)


def _write_panel(ax: Axes, sheet: tw.TuningSheet) -> None:
    ax.set_axis_off()
    ax.set_xlim(0.0, 1.0)
    ax.set_ylim(0.0, 1.0)
    step = 0.0475
    y = 1.0
    settings, margins = settings_rows(sheet), margins_rows(sheet)
    if sheet.settings is None:
        ax.text(0.0, y, "Settings to enter: none, withheld", fontweight="bold", va="top", fontsize=9)
        y -= 1.4 * step
        for reason in sheet.withheld[:3]:
            lines = textwrap.wrap("- " + reason, 84, subsequent_indent="  ")
            ax.text(0.0, y, "\n".join(lines), va="top", parse_math=False, linespacing=1.25)
            y -= step * len(lines)
        y -= 0.4 * step
    found = "as found" if sheet.as_found_settings is not None else ""
    if settings:
        heading = "Settings to enter" if sheet.settings is not None else "Settings"
        equation = f" ({sheet.form.equation} form)" if sheet.form is not None else " (ideal form)"
        y = _write_rows(ax, y, step, (heading + equation, found, "proposed" if sheet.settings is not None else ""), settings)
        y -= 0.35 * step
    if margins:
        y = _write_rows(ax, y, step, ("Margins of these numbers", "", ""), margins)
        y -= 0.35 * step
    texts = [f"Process: {_model_line(sheet)}."]
    if sheet.speed is not None:
        texts.append(f"Closed-loop time constant {number(sheet.speed.time_constant)} s: {sheet.speed.reason}.")
    texts.append(f"Advice: {sheet.advice}.")
    texts += [f"- {finding.message}" for finding in sheet.findings if finding.message not in sheet.withheld]
    if sheet.weak_margins_accepted_by:
        texts.append(f"Weak margins were accepted by {sheet.weak_margins_accepted_by}.")
    lines = [line for text in texts for line in textwrap.wrap(text, 84, subsequent_indent="  " if text[0] == "-" else "")]
    room = max(1, int(y / step))
    if len(lines) > room:
        lines[room - 1:] = ["... more on the sheet"]
    ax.text(0.0, y, "\n".join(lines), va="top", parse_math=False, linespacing=1.3)


def _write_margin_notes(figure: Figure, sheet: tw.TuningSheet) -> None:
    name = sheet.loop_name or (PurePath(sheet.source).stem if sheet.source else "Loop without a name")
    figure.text(0.055, 0.962, name, fontsize=13, fontweight="bold", parse_math=False, va="baseline")
    source = PurePath(sheet.source).name if sheet.source else "arrays"
    figure.text(0.975, 0.962, f"record {source}, SHA-256 {sheet.input_sha256[:16]}..., tauwright {sheet.library_version}",
                ha="right", fontsize=7.5, color=FOUND, parse_math=False, va="baseline")
    figure.text(0.055, 0.022, "Advice, not authority: a calculation from the data and model shown. A competent person responsible "
                "for the plant reviews it before use and may reject it.\nNot for safety functions. All cautions, the change "
                "record and the roll-back values are on the tuning sheet.", fontsize=8, va="bottom", linespacing=1.3,
                fontweight="bold")


def _compose(record: tw.Record, sheet: tw.TuningSheet) -> Figure:
    figure = Figure(figsize=(11.69, 8.27))  # A4, landscape
    FigureCanvasAgg(figure)
    grid = {"left": 0.055, "right": 0.975}
    upper = figure.add_gridspec(2, 2, **grid, top=0.905, bottom=0.535, height_ratios=[3, 1], hspace=0.08, wspace=0.14)
    lower = figure.add_gridspec(1, 2, **grid, top=0.455, bottom=0.115, width_ratios=[1.0, 1.0], wspace=0.14)
    record_top = figure.add_subplot(upper[0, 0])
    trend_top = figure.add_subplot(upper[0, 1])
    _draw_record(record_top, figure.add_subplot(upper[1, 0], sharex=record_top), record, sheet)
    _draw_trends(trend_top, figure.add_subplot(upper[1, 1], sharex=trend_top), sheet)
    _draw_plane(figure.add_subplot(lower[0, 0]), sheet)
    _write_panel(figure.add_subplot(lower[0, 1]), sheet)
    _write_margin_notes(figure, sheet)
    figure.align_ylabels()
    return figure


def figure_of(record: tw.Record, sheet: tw.TuningSheet) -> Figure:
    """One page: the record with its fit, the trends to expect, the open loop and its closest approach to -1, and the
    numbers. `sheet` is what tune(record, ...) returned. The Figure carries an Agg canvas; savefig writes it."""
    with styled():
        return _compose(record, sheet)


def save_figure(record: tw.Record, sheet: tw.TuningSheet, path: str | os.PathLike[str]) -> None:
    """Writes the page of figure_of to a file; the format follows from its ending."""
    with styled(), warnings.catch_warnings():
        # A name may hold characters that the font lacks; boxes stand in for them.
        warnings.filterwarnings("ignore", message="Glyph .* missing from current font")
        _compose(record, sheet).savefig(os.fspath(path), dpi=150)
