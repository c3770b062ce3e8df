"""Pictures of closed-loop trends."""

from __future__ import annotations

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg  # type: ignore[import]
from matplotlib.figure import Figure  # type: ignore[import]

import tauwright as tw
from tauwright.plot_style import ACCENT, DOTS, FOUND, FOUND_DASHES, RULE, SAMPLE, Array, Axes, label_ends, limits, styled, time_scale

__all__ = ["trend_figure"]

_Label = tuple[float, str, str]


def _differs(a: Array, b: Array) -> bool:
    return a.size == b.size and bool(np.any(a != b))


def _sticks(trend: tw.Trend) -> bool:
    return _differs(trend.valve_position, trend.output)


def _mark_load(ax: Axes, trend: tw.Trend, scale: float) -> None:
    duty = trend.duty
    if duty.load_step == 0 or duty.load_time > trend.time_s[-1]:
        return
    start, ramp = duty.load_time / scale, duty.load_ramp_time / scale
    if ramp > 0:
        ax.axvspan(start, start + ramp, color="#efefef", lw=0, zorder=0)
    ax.axvline(start, color=RULE, lw=0.8, zorder=0)
    over = f" over {duty.load_ramp_time:g} s" if ramp > 0 else ""
    ax.text(start, 1.01, f" load {duty.load_step:+g}{over}", transform=ax.get_xaxis_transform(), va="bottom", ha="left", fontsize=7.5)


def _draw_limits(ax: Axes, trends: list[tw.Trend]) -> None:
    """The limits of the output where the trends come near them."""
    duty = trends[0].duty
    low, high = ax.get_ylim()
    reach = 0.6 * (high - low)
    for value, word, va in ((duty.output_low, "low limit", "bottom"), (duty.output_high, "high limit", "top")):
        if low - reach < value < high + reach:
            low, high = min(low, value - 0.04 * (high - low)), max(high, value + 0.04 * (high - low))
            ax.axhline(value, color="black", lw=0.7, ls=DOTS, zorder=1)
            ax.annotate(word, xy=(0.004, value), xycoords=ax.get_yaxis_transform(), xytext=(0, 2 if va == "bottom" else -2),
                        textcoords="offset points", va=va, fontsize=7, color=FOUND)
    ax.set_ylim(low, high)


def _draw_values(ax: Axes, t: list[Array], trends: list[tw.Trend], names: tuple[str, str]) -> None:
    main = trends[-1]
    labels: list[_Label] = []
    ax.plot(t[-1], main.setpoint, color="black", lw=0.9, ls=DOTS, drawstyle="steps-post" if main.duty.setpoint_ramp_time == 0 else
            "default", zorder=2)
    labels.append((float(main.setpoint[-1]), "set point", "black"))
    if len(trends) == 1 and _differs(main.measured, main.process_value):
        ax.plot(t[0], main.measured, color=SAMPLE, lw=0.6, zorder=1)
        labels.append((float(main.measured[-1]), "measured", SAMPLE))
    if len(trends) == 2:
        ax.plot(t[0], trends[0].process_value, color=FOUND, ls=FOUND_DASHES, zorder=3)
        labels.append((float(trends[0].process_value[-1]), names[0], FOUND))
        if not np.array_equal(trends[0].setpoint, main.setpoint[: trends[0].setpoint.size]):
            ax.plot(t[0], trends[0].setpoint, color=FOUND, lw=0.7, ls=DOTS, drawstyle="steps-post", zorder=2)
    ax.plot(t[-1], main.process_value, color=ACCENT, zorder=4)
    labels.append((float(main.process_value[-1]), names[1] if len(trends) == 2 else "process value", ACCENT))
    shown = [x for trend in trends for x in (trend.process_value, trend.setpoint)]
    ax.set_ylim(*limits(*shown, *([main.measured] if len(trends) == 1 else [])))
    label_ends(ax, labels)
    ax.set_ylabel("process value")


def _draw_column(ax: Axes, t: list[Array], trends: list[tw.Trend], column: str, name: str, names: tuple[str, str]) -> None:
    """One column of every trend, as it is held from scan to scan; of a single trend's output the valve with it."""
    labels: list[_Label] = []
    values: list[Array] = [getattr(trend, column) for trend in trends]
    if len(trends) == 2:
        ax.plot(t[0], values[0], color=FOUND, ls=FOUND_DASHES, lw=1.0, drawstyle="steps-post", zorder=3)
        labels.append((float(values[0][-1]), names[0], FOUND))
    ax.plot(t[-1], values[-1], color=ACCENT, lw=1.1, drawstyle="steps-post", zorder=4)
    labels.append((float(values[-1][-1]), names[1] if len(trends) == 2 else name, ACCENT))
    if len(trends) == 1 and column == "output" and _sticks(trends[0]):
        position = trends[0].valve_position
        ax.plot(t[0], position, color="black", ls=(0, (6, 1.5, 1, 1.5)), lw=1.0, drawstyle="steps-post", zorder=5)
        labels.append((float(position[-1]), "valve", "black"))
        values.append(position)
    ax.set_ylim(*limits(*values))
    _draw_limits(ax, trends)
    label_ends(ax, labels, 0.16 if len(trends) == 2 else 0.125)
    ax.set_ylabel(name)


def _draw_load(ax: Axes, t: Array, trend: tw.Trend) -> None:
    ax.plot(t, trend.load, color="black", lw=0.9, drawstyle="steps-post")
    ax.set_ylim(*limits(trend.load))
    ax.set_ylabel("load")


def trend_figure(trend: tw.Trend, *, as_found: tw.Trend | None = None, labels: tuple[str, str] = ("as found", "proposed")) -> Figure:
    """Set point and process value above, output and valve position below, with the load marked; the record of a
    disturbance in a row of its own. `as_found` is drawn beneath `trend`; `labels` name the two, in that order."""
    for name, value in (("trend", trend), ("as_found", as_found)):
        if not isinstance(value, tw.Trend) and not (name == "as_found" and value is None):
            raise TypeError(f"{name} is {value!r}; give what tauwright.simulate or continuous_trend returned")
    trends = [trend] if as_found is None else [as_found, trend]
    valves = len(trends) == 2 and any(map(_sticks, trends))
    disturbed = trend.duty.disturbance.size > 0
    heights = [3.0, 2.0] + [1.6] * valves + [0.8] * disturbed
    inches = 0.85 + 0.71 * sum(heights)
    with styled():
        figure = Figure(figsize=(7.2, inches))
        FigureCanvasAgg(figure)
        grid = figure.add_gridspec(len(heights), 1, height_ratios=heights, left=0.09, right=0.865, top=1.0 - 0.5 / inches,
                                   bottom=0.42 / inches, hspace=0.2)
        rows = [figure.add_subplot(grid[0])]
        rows += [figure.add_subplot(grid[i], sharex=rows[0]) for i in range(1, len(heights))]
        scale, unit = time_scale(float(trend.time_s[-1] - trend.time_s[0]))
        t = [x.time_s / scale for x in trends]
        _draw_values(rows[0], t, trends, labels)
        _draw_column(rows[1], t, trends, "output", "output", labels)
        if valves:
            _draw_column(rows[2], t, trends, "valve_position", "valve position", labels)
        if disturbed:
            _draw_load(rows[-1], t[-1], trend)
        for row in rows[1:]:
            if trend.duty.load_step != 0:
                row.axvline(trend.duty.load_time / scale, color=RULE, lw=0.8, zorder=0)
        for row in rows[:-1]:
            row.tick_params(labelbottom=False)
        _mark_load(rows[0], trend, scale)
        rows[0].set_xlim(0.0, float(max(x[-1] for x in t)))
        rows[-1].set_xlabel(f"time, {unit}")
        figure.text(0.09, 1.0 - 0.2 / inches, "Closed-loop trend" if as_found is None else
                    f"Closed-loop trends, {labels[0]} and {labels[1]}", fontsize=10, fontweight="bold", va="center")
        figure.align_ylabels()
        return figure
