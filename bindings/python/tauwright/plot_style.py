"""What the pictures share: style, scales, labels that keep out of each other's way, and the open loop to draw."""

from __future__ import annotations

from typing import Any, Optional, Union

import numpy as np
import numpy.typing as npt
from matplotlib import rc_context, rcParamsDefault  # type: ignore[import]

import tauwright as tw

Axes = Any
Array = npt.NDArray[np.float64]
Curve = npt.NDArray[np.complex128]
Controller = Optional[Union[tw.PidSettings, tw.InternalModelController]]

# One accent that prints as a dark gray; lines differ by style as well, never by color alone.
ACCENT, FOUND, SAMPLE, SHADE, RULE = "#0b4a80", "#5f5f5f", "#8c8c8c", "#e3e3e3", "#c4c4c4"
FOUND_DASHES = (0, (4, 2))
DOTS = (0, (1, 1.3))
_STYLE: dict[str, Any] = {
    "font.size": 8.0, "axes.titlesize": 9.0, "axes.labelsize": 8.0, "xtick.labelsize": 7.5, "ytick.labelsize": 7.5,
    "legend.fontsize": 7.5, "legend.frameon": False, "axes.spines.top": False, "axes.spines.right": False,
    "axes.linewidth": 0.6, "lines.linewidth": 1.3, "axes.titlelocation": "left", "axes.titleweight": "bold",
}


def styled() -> Any:
    """A context in which everything is drawn in this style, whatever the user's own settings."""
    return rc_context({**rcParamsDefault, "backend": "agg", **_STYLE})


def time_scale(span_s: float) -> tuple[float, str]:
    for seconds, unit in ((86400.0, "days"), (3600.0, "h"), (60.0, "min")):
        if span_s >= 5.0 * seconds:
            return seconds, unit
    return 1.0, "s"


def limits(*arrays: Array) -> tuple[float, float]:
    values = np.concatenate([a[np.isfinite(a)] for a in arrays])
    if values.size == 0:
        return 0.0, 1.0
    low, high = float(values.min()), float(values.max())
    margin = 0.07 * (high - low) or 0.05 * abs(high) or 1.0
    return low - margin, high + margin


def spread(heights: list[float], gap: float, low: float, high: float) -> list[float]:
    """The heights moved apart to at least `gap`, each as little as may be, within low and high."""
    order = sorted(range(len(heights)), key=lambda i: heights[i])
    groups: list[tuple[list[int], float]] = []  # members in order, and the height of the lowest
    for i in order:
        members, base = [i], heights[i]
        while groups and base < groups[-1][1] + gap * len(groups[-1][0]):
            members = groups.pop()[0] + members
            base = float(np.mean([heights[k] - gap * j for j, k in enumerate(members)]))
            base = max(low, min(base, high - gap * (len(members) - 1)))
        groups.append((members, max(low, min(base, high - gap * (len(members) - 1)))))
    moved = list(heights)
    for members, base in groups:
        for j, k in enumerate(members):
            moved[k] = base + gap * j
    return moved


def label_ends(ax: Axes, labels: list[tuple[float, str, str]], gap: float = 0.085) -> None:
    """Names (end value, text, color) of lines at their right ends, outside the axes and apart from each other."""
    low, high = ax.get_ylim()
    ends = [(min(max(value, low), high) - low) / (high - low) for value, _, _ in labels]
    for end, height, (_, text, color) in zip(ends, spread(ends, gap, 0.0, 1.0), labels):
        ax.annotate(text, xy=(1.0, end), xytext=(1.022, height), xycoords="axes fraction", va="center", ha="left",
                    color=color, annotation_clip=False, parse_math=False,
                    arrowprops={"arrowstyle": "-", "color": color, "lw": 0.5, "shrinkA": 0.5, "shrinkB": 0.0})


def _block(settings: tw.PidSettings, scan_time: float, q: Curve) -> Curve:
    """The PID block as it runs, at q = 1 - 1/z: backward differences."""
    c = tw.discretize(settings, scan_time=scan_time)
    derivative = c.derivative_per_scan * q / (c.derivative_smoothing + (1.0 - c.derivative_smoothing) * q)
    smoothed = c.measurement_smoothing / (c.measurement_smoothing + (1.0 - c.measurement_smoothing) * q)
    return np.asarray((c.gain + c.integral_per_scan / q + derivative) * smoothed)


def open_loop(process: tw.TransferFunction, settings: Controller, scan_time: float | None, extra_delay: float, w: Array) -> Curve:
    """The open loop that robustness analyzes, at angular frequencies above 0."""
    delayed = process.with_dead_time(process.dead_time + extra_delay) if extra_delay else process
    if scan_time is not None and isinstance(settings, tw.PidSettings):
        q: Curve = -np.expm1(-1j * w * scan_time)
        return np.asarray(tw.held(delayed, scan_time).at_frequency(w) * _block(settings, scan_time, q))
    s = 1j * w
    loop = delayed(s)
    return np.asarray(loop if settings is None else loop * settings(s))


def frequencies(process: tw.TransferFunction, margins: tw.Robustness, scan_time: float | None, delay: float) -> Array:
    """From far below what matters in the loop to far above it; in a sampled loop up to half the sampling frequency."""
    marks = [c.frequency_rad_s for c in margins.gain_crossovers]
    marks += [c.frequency_rad_s for c in margins.phase_crossovers[:3]]
    marks += [f for f in (margins.max_sensitivity_frequency, margins.sensitivity_bandwidth, margins.complementary_bandwidth)
              if f is not None]
    marks += [1.0 / abs(t) for t in (*process.lags, *(pair[0] for pair in process.lag_pairs)) if t]
    marks += [1.0 / delay] if delay > 0 else []
    marks = [m for m in marks if 0.0 < m < np.inf] or [1.0]
    low, high = 1e-3 * min(marks), 1e2 * max(marks)
    if delay > 0:  # three turns say everything; a spiral of many more only blackens the paper
        high = min(high, max(6.0 * np.pi / delay, 2.0 * max(marks)))
    if scan_time is not None:
        high = np.pi / scan_time
        low = min(low, 1e-3 * high)
    return np.geomspace(low, high, 8001)


def draw_arrow(ax: Axes, curve: Curve, box: tuple[float, float, float, float], color: str, share: float = 0.22) -> None:
    """Where the curve is well inside the box, toward higher frequency."""
    inside = np.flatnonzero((curve.real > box[0]) & (curve.real < box[1]) & (curve.imag > box[2]) & (curve.imag < box[3]))
    if inside.size < 3:
        return
    length = np.concatenate([[0.0], np.cumsum(np.abs(np.diff(curve[inside])))])
    k = inside[int(np.searchsorted(length, share * length[-1]))]
    if k + 1 < curve.size:
        ax.annotate("", xy=(curve[k + 1].real, curve[k + 1].imag), xytext=(curve[k].real, curve[k].imag),
                    arrowprops={"arrowstyle": "-|>", "color": color, "lw": 0, "mutation_scale": 12})


def draw_plane(ax: Axes, box: tuple[float, float, float, float]) -> None:
    """The complex plane without curves: axes, unit circle, -1."""
    ax.set_xlabel("real part of L")
    ax.set_ylabel("imaginary part of L")
    ax.set_xlim(box[0], box[1])
    ax.set_ylim(box[2], box[3])
    ax.set_aspect("equal", adjustable="box")
    ax.axhline(0.0, color=RULE, lw=0.6, zorder=0)
    ax.axvline(0.0, color=RULE, lw=0.6, zorder=0)
    turn = np.linspace(0.0, 2.0 * np.pi, 361)
    ax.plot(np.cos(turn), np.sin(turn), color=RULE, lw=0.6, zorder=0)
    ax.text(0.72, 0.73, "|L| = 1", fontsize=7, color=FOUND, ha="left", va="bottom")
    ax.plot([-1.0], [0.0], "+", ms=9, mew=1.6, color="black", zorder=6)
    ax.text(-1.03, 0.05, "-1", ha="right", va="bottom", fontweight="bold")
