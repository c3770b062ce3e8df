"""Pictures of an open loop: on the complex plane, as sensitivities over frequency, and its worst case."""

from __future__ import annotations

from typing import Any

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg  # type: ignore[import]
from matplotlib.figure import Figure  # type: ignore[import]
from matplotlib.ticker import FuncFormatter, LogLocator, NullFormatter  # type: ignore[import]

import tauwright as tw
from tauwright.label_places import LabelPlaces
from tauwright.plot_style import (
    ACCENT, DOTS, FOUND, FOUND_DASHES, RULE, Array, Axes, Curve, draw_arrow, draw_plane, frequencies, open_loop, styled)
from tauwright.sheet_rows import number

__all__ = ["open_loop_figure", "sensitivity_figure", "worst_case_figure"]

_Box = tuple[float, float, float, float]
_LEVEL = 1.0 / np.sqrt(2.0)


def _figure(width: float, height: float) -> Figure:
    figure = Figure(figsize=(width, height))
    FigureCanvasAgg(figure)
    return figure


def _loop_at(margins: tw.LoopRobustness, w: Array) -> Curve:
    return open_loop(margins.process, margins.settings, margins.scan_time, margins.extra_delay, w)


def _frequencies(margins: tw.LoopRobustness) -> Array:
    return frequencies(margins.process, margins, margins.scan_time, margins.process.dead_time + margins.extra_delay)


def _require_loop(margins: tw.LoopRobustness) -> None:
    if not isinstance(margins, tw.LoopRobustness):
        raise TypeError(f"margins is {margins!r}; give what tauwright.robustness returned")


def _boxed(curves: list[Curve], points: list[complex]) -> _Box:
    """A part of the plane that shows -1, the origin and all points, and the curves only as far as they come near."""
    near = [c[(np.abs(c) < 1.6) & (c.real > -2.4)] for c in curves]
    x = np.concatenate([[-1.9, 0.9], *[c.real for c in near], [p.real for p in points]])
    y = np.concatenate([[-1.35, 0.75], *[c.imag for c in near], [p.imag for p in points]])
    return float(x.min()) - 0.15, float(x.max()) + 0.15, float(y.min()) - 0.1, float(y.max()) + 0.1


def _draw_approach(ax: Axes, places: LabelPlaces, closest: complex, color: str, style: Any, marker: str) -> None:
    """The circle about -1 that the curve touches, and the line to where it does."""
    turn = np.linspace(0.0, 2.0 * np.pi, 361)
    radius = abs(closest + 1.0)
    x, y = -1.0 + radius * np.cos(turn), radius * np.sin(turn)
    ax.plot(x, y, color=color, lw=0.9, ls=DOTS, zorder=2)
    ax.plot([-1.0, closest.real], [0.0, closest.imag], color=color, lw=0.9, ls=style, zorder=4)
    ax.plot([closest.real], [closest.imag], marker, ms=4.5, color=color, zorder=6)
    places.avoid(x, y, 0.7)
    places.avoid(np.array([-1.0, closest.real]), np.array([0.0, closest.imag]))


def _start_labels(ax: Axes, curves: list[Curve]) -> LabelPlaces:
    places = LabelPlaces(ax)
    turn = np.linspace(0.0, 2.0 * np.pi, 361)
    places.avoid(np.cos(turn), np.sin(turn), 0.3)
    for x, y in ((ax.get_xlim(), (0.0, 0.0)), ((0.0, 0.0), ax.get_ylim())):
        places.avoid(np.array(x), np.array(y), 0.3)
    places.avoid(np.linspace(-1.12, -0.95, 9), np.full(9, 0.05), 8.0)  # the mark of -1 and its name
    for curve in curves:
        places.avoid(curve.real, curve.imag)
    return places


def _closest(margins: tw.Robustness, loop: Any) -> complex | None:
    at = margins.max_sensitivity_frequency
    if margins.max_sensitivity is None or at is None or not np.isfinite(at) or at <= 0:
        return None
    return complex(loop(np.array([at]))[0])


def _verdict_line(margins: tw.Robustness) -> str:
    if margins.stable is None or margins.max_sensitivity is None:
        poles = f", {margins.unstable_poles} unstable closed-loop poles" if margins.unstable_poles else ""
        return f"{margins.verdict}{poles}"

    def shown(value: float | None, unit: str = "") -> str:
        return "none" if value is None or not np.isfinite(value) else f"{number(value, 3)}{unit}"

    return (f"stable; gain margin {shown(margins.gain_margin)}, phase margin {shown(margins.phase_margin_deg, chr(176))}, "
            f"delay margin {shown(margins.delay_margin, ' s')}, Ms {shown(margins.max_sensitivity)}")


def _sampled_note(scan_time: float | None, extra_delay: float) -> str:
    parts = [f"sampled every {number(scan_time)} s" if scan_time is not None else "",
             f"{number(extra_delay)} s of extra delay" if extra_delay else ""]
    note = ", ".join(p for p in parts if p)
    return f" ({note})" if note else ""


def open_loop_figure(margins: tw.LoopRobustness) -> Figure:
    """The open loop on the complex plane with its closest approach to -1, its distance 1/Ms and circle, and the crossovers
    that give the margins. `margins` is what robustness returned."""
    _require_loop(margins)
    with styled():
        figure = _figure(6.4, 5.4)
        ax = figure.add_axes((0.1, 0.1, 0.87, 0.76))
        w = _frequencies(margins)
        curve = _loop_at(margins, w)
        closest = _closest(margins, lambda at: _loop_at(margins, at))
        box = _boxed([curve], [closest] if closest is not None else [])
        draw_plane(ax, box)
        ax.plot(curve.real, curve.imag, color=ACCENT, zorder=3)
        draw_arrow(ax, curve, box, ACCENT)
        places = _start_labels(ax, [curve])
        if closest is not None:
            _draw_approach(ax, places, closest, ACCENT, "-", "o")
        _draw_crossovers(ax, places, margins)
        if closest is not None:
            _name_distance(places, closest, ACCENT)
        figure.text(0.1, 0.945, "How close the open loop comes to -1" + _sampled_note(margins.scan_time, margins.extra_delay),
                    fontsize=10, fontweight="bold")
        figure.text(0.1, 0.905, _verdict_line(margins), fontsize=8.5, parse_math=False)
        return figure


def _name_distance(places: LabelPlaces, closest: complex, color: str) -> None:
    middle = 0.5 * (closest - 1.0)
    places.add(middle.real, middle.imag, f"1/Ms = {number(abs(closest + 1.0), 3)}", color=color, bold=True)


def _draw_crossovers(ax: Axes, places: LabelPlaces, margins: tw.LoopRobustness) -> None:
    marks = []
    if margins.gain_crossovers:
        gain = min(margins.gain_crossovers, key=lambda c: c.phase_margin_deg)
        marks.append((gain.frequency_rad_s, "s", f"gain 1 at {number(gain.frequency_rad_s, 3)} rad/s,\n"
                      f"{number(gain.phase_margin_deg, 3)}\u00b0 from -1"))
    above = [c for c in margins.phase_crossovers if c.gain_factor > 1.0]
    if above:
        phase = min(above, key=lambda c: c.gain_factor)
        marks.append((phase.frequency_rad_s, "D", f"-180\u00b0 at {number(phase.frequency_rad_s, 3)} rad/s,\n"
                      f"gain 1/{number(phase.gain_factor, 3)}"))
    points = [complex(_loop_at(margins, np.array([at]))[0]) for at, _, _ in marks]
    for point, (_, marker, _) in zip(points, marks):
        ax.plot([point.real], [point.imag], marker, ms=4.4, mfc="white", mec="black", zorder=6)
        places.avoid(np.full(9, point.real), np.full(9, point.imag))
    for point, (_, _, text) in zip(points, marks):
        places.add(point.real, point.imag, text)


def sensitivity_figure(margins: tw.LoopRobustness) -> Figure:
    """|S| = |1/(1 + L)| (what a disturbance becomes) and |T| = |L/(1 + L)| over frequency, with peaks and bandwidths.
    `margins` is what robustness returned."""
    _require_loop(margins)
    with styled():
        figure = _figure(7.2, 4.4)
        ax = figure.add_axes((0.09, 0.12, 0.85, 0.72))
        w = _frequencies(margins)
        loop = _loop_at(margins, w)
        with np.errstate(all="ignore"):
            S, T = np.abs(1.0 / (1.0 + loop)), np.abs(loop / (1.0 + loop))
        peak = max(float(np.nanmax(S)), float(np.nanmax(T)))
        low = 10.0 ** np.floor(np.log10(0.02 * _LEVEL))
        shown = (S > low) & (T > 0.3 * low)
        first = int(np.argmax(shown)) if shown.any() else 0
        last = w.size - 1 - int(np.argmax((T > 0.6 * low)[::-1]))
        ax.set_xscale("log")
        ax.set_yscale("log")
        ax.set_xlim(w[first], w[max(last, first + 1)])
        ax.set_ylim(low, max(2.5, 2.2 * peak))
        for level, text in ((1.0, "1"), (_LEVEL, "1/\u221a2")):
            ax.axhline(level, color=RULE, lw=0.6, zorder=0)
            ax.text(1.008, level, text, transform=ax.get_yaxis_transform(), va="center", fontsize=7, color=FOUND)
        ax.plot(w, S, color=ACCENT, zorder=3)
        ax.plot(w, T, color="black", ls=FOUND_DASHES, lw=1.1, zorder=3)
        places = LabelPlaces(ax)
        for line in (S, T):
            places.avoid(w, line)
        for level in (1.0, _LEVEL):
            places.avoid(np.array(ax.get_xlim()), np.array([level, level]), 0.4)
        if margins.max_sensitivity is not None:
            _mark_peaks(ax, places, margins)
        _name_line(places, w, S, 3.0 * low, "|S|", ACCENT)
        _name_line(places, w[::-1], T[::-1], 3.0 * low, "|T|", "black")
        _plain_ticks(ax)
        ax.set_xlabel("angular frequency, rad/s")
        ax.set_ylabel("magnitude")
        figure.text(0.09, 0.93, "Sensitivity to disturbances |S| and to the model |T|"
                    + _sampled_note(margins.scan_time, margins.extra_delay), fontsize=10, fontweight="bold")
        figure.text(0.09, 0.88, _verdict_line(margins), fontsize=8.5, parse_math=False)
        return figure


def _plain_ticks(ax: Axes) -> None:
    """Decimal numbers at 1, 2 and 5 (over a long axis at 1 alone), and no typeset powers."""
    for axis, (low, high) in ((ax.xaxis, ax.get_xlim()), (ax.yaxis, ax.get_ylim())):
        axis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0) if high < 2e3 * low else (1.0,)))
        axis.set_major_formatter(FuncFormatter(lambda value, _: number(value)))
        axis.set_minor_formatter(NullFormatter())


def _name_line(places: LabelPlaces, w: Array, values: Array, level: float, text: str, color: str) -> None:
    """Beside the line where it first rises through the level."""
    k = int(np.argmax(values > level))
    places.add(float(w[k]), float(values[k]), text, color=color, bold=True)


def _mark_peaks(ax: Axes, places: LabelPlaces, margins: tw.LoopRobustness) -> None:
    low, high = ax.get_xlim()
    marks: list[tuple[float, float, str, str]] = []
    for peak, at, name in ((margins.max_sensitivity, margins.max_sensitivity_frequency, "Ms"),
                           (margins.max_complementary_sensitivity, margins.max_complementary_sensitivity_frequency, "Mt")):
        if peak is None or at is None or not np.isfinite(peak):
            continue
        where = "at rest" if at == 0.0 else "in the limit" if not np.isfinite(at) else f"at {number(at, 3)} rad/s"
        marks.append((min(max(at, low), high), peak, f"{name} {number(peak, 3)} {where}", "o" if low < at < high else ""))
    for at, name in ((margins.sensitivity_bandwidth, "|S|"), (margins.complementary_bandwidth, "|T|")):
        if at is not None and low < at < high:
            marks.append((at, _LEVEL, f"bandwidth of {name}\n{number(at, 3)} rad/s", "s"))
    for x, y, _, marker in marks:
        if marker:
            ax.plot([x], [y], marker, ms=4.5, mfc="white", mec="black", zorder=5)
        places.avoid(np.full(9, x), np.full(9, y))
    for x, y, text, _ in marks:
        places.add(x, y, text)


def worst_case_figure(worst: tw.WorstCase) -> Figure:
    """The nominal open loop and that of the worst member on the complex plane, each with its closest approach to -1.
    `worst` is what worst_case returned."""
    if not isinstance(worst, tw.WorstCase):
        raise TypeError(f"worst is {worst!r}; give what tauwright.worst_case returned")
    with styled():
        figure = _figure(6.4, 5.4)
        ax = figure.add_axes((0.1, 0.1, 0.87, 0.76))
        sides = []
        for process, name, color, style, marker in ((worst.process, "nominal", FOUND, FOUND_DASHES, "s"),
                                                    (worst.at, "worst member", ACCENT, "-", "o")):
            margins = tw.robustness(process, worst.settings, extra_delay=worst.extra_delay)
            curve = _loop_at(margins, _frequencies(margins))
            sides.append((margins, curve, _closest(margins, lambda at, m=margins: _loop_at(m, at)), name, color, style, marker))
        box = _boxed([side[1] for side in sides], [side[2] for side in sides if side[2] is not None])
        draw_plane(ax, box)
        places = _start_labels(ax, [side[1] for side in sides])
        for _, curve, closest, _, color, style, marker in sides:
            ax.plot(curve.real, curve.imag, color=color, ls=style, zorder=3)
            draw_arrow(ax, curve, box, color, 0.3)
            if closest is not None:
                _draw_approach(ax, places, closest, color, style, marker)
        for _, curve, closest, name, color, _, _ in sides:
            if closest is not None:
                _name_distance(places, closest, color)
            _name_curve(places, curve, box, name, color)
        figure.text(0.1, 0.945, "The worst of all members against the nominal loop", fontsize=10, fontweight="bold")
        figure.text(0.1, 0.905, f"nominal: {_verdict_line(sides[0][0])}\nworst: {_verdict_line(sides[1][0])}"
                    f"{', proved' if worst.certified else ''}", fontsize=8, va="center", parse_math=False)
        return figure


def _name_curve(places: LabelPlaces, curve: Curve, box: _Box, name: str, color: str) -> None:
    """Near where it comes into the picture."""
    inside = np.flatnonzero((curve.real > box[0]) & (curve.real < box[1]) & (curve.imag > box[2]) & (curve.imag < box[3]))
    if inside.size:
        far = np.flatnonzero(np.abs(curve[inside] - curve[inside[0]]) > 0.12)
        point = complex(curve[inside[far[0] if far.size else 0]])
        places.add(point.real, point.imag, name, color=color, bold=True)
