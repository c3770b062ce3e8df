"""Finds a free place beside a point for its label, so that labels keep off curves and each other."""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt

_Array = npt.NDArray[np.float64]
_Box = tuple[float, float, float, float]
_POINT = 1.0 / 72.0  # inches


def _filled(points: _Array, step: float) -> _Array:
    """The polyline with points added so that neighbors are at most a step apart (over a limit: as they are)."""
    lengths = np.hypot(*np.diff(points, axis=0).T)
    counts = np.clip(np.ceil(lengths / step), 1, 400).astype(int)
    keep = np.flatnonzero((lengths > 0.02 * step) | (counts > 1))
    parts = [points[:1]]
    for k in keep:
        share = np.arange(1, counts[k] + 1)[:, None] / counts[k]
        parts.append(points[k] + share * (points[k + 1] - points[k]))
    return np.concatenate(parts)


class LabelPlaces:
    """Labels of one axes whose limits are set for good. Tell it every curve first, then add labels, important ones first."""

    def __init__(self, ax: Any, font_size: float = 8.0) -> None:
        ax.apply_aspect()
        self._ax = ax
        self._dot = ax.figure.dpi * _POINT  # pixels of one point
        self._font = font_size
        self._obstacles = np.empty((0, 3))  # x, y in pixels and weight
        self._taken: list[_Box] = []
        frame = ax.bbox
        self._frame: _Box = (frame.x0, frame.y0, frame.x1, frame.y1)

    def avoid(self, x: _Array, y: _Array, weight: float = 1.0) -> None:
        """A curve in data coordinates."""
        x, y = np.atleast_1d(np.asarray(x, float)), np.atleast_1d(np.asarray(y, float))
        with np.errstate(all="ignore"):
            pixels = self._ax.transData.transform(np.column_stack([x, y]))
        low, high = np.array(self._frame[:2]) - 50.0, np.array(self._frame[2:]) + 50.0
        pixels = pixels[np.isfinite(pixels).all(axis=1)]
        inside = ((pixels > low) & (pixels < high)).all(axis=1)
        if not inside.any():
            return
        first, last = int(np.argmax(inside)), inside.size - int(np.argmax(inside[::-1]))
        filled = _filled(np.clip(pixels[first:last], low, high), 2.0 * self._dot)
        self._obstacles = np.vstack([self._obstacles, np.column_stack([filled, np.full(len(filled), weight)])])

    def _cost(self, box: _Box) -> float:
        x0, y0, x1, y1 = box
        hit = (self._obstacles[:, 0] > x0) & (self._obstacles[:, 0] < x1) & (self._obstacles[:, 1] > y0) & (self._obstacles[:, 1] < y1)
        cost = float(self._obstacles[hit, 2].sum())
        for a in self._taken:
            wide, tall = min(x1, a[2]) - max(x0, a[0]), min(y1, a[3]) - max(y0, a[1])
            if wide > 0 and tall > 0:
                cost += 20.0 + wide * tall / self._dot**2
        beyond = max(0.0, self._frame[0] - x0, self._frame[1] - y0, x1 - self._frame[2], y1 - self._frame[3])
        return cost + 3.0 * beyond

    def add(self, x: float, y: float, text: str, *, color: str = "black", bold: bool = False) -> None:
        """The label of a point in data coordinates, with a thin line to it where it had to go farther off."""
        lines = text.split("\n")
        width = (0.64 if bold else 0.56) * self._font * max(map(len, lines)) * self._dot
        height = 1.22 * self._font * len(lines) * self._dot
        px, py = (float(v) for v in self._ax.transData.transform((x, y)))
        best: tuple[float, float, float] | None = None
        for distance in (7.0, 12.0, 20.0, 32.0, 48.0, 70.0):
            for angle in np.arange(24) * (np.pi / 12.0):
                away = distance * self._dot
                cx = px + np.cos(angle) * (away + 0.5 * width)
                cy = py + np.sin(angle) * (away + 0.5 * height)
                pad = 2.0 * self._dot
                box = (cx - 0.5 * width - pad, cy - 0.5 * height - pad, cx + 0.5 * width + pad, cy + 0.5 * height + pad)
                cost = self._cost(box) + 0.12 * distance
                if best is None or cost < best[0] - 1e-9:
                    best = (cost, cx, cy)
        assert best is not None
        _, cx, cy = best
        self._taken.append((cx - 0.5 * width, cy - 0.5 * height, cx + 0.5 * width, cy + 0.5 * height))
        reach = float(np.hypot(max(0.0, abs(cx - px) - 0.5 * width), max(0.0, abs(cy - py) - 0.5 * height)))
        far = reach > 10.0 * self._dot
        self._ax.annotate(text, xy=(x, y), xytext=((cx - px) / self._dot, (cy - py) / self._dot), textcoords="offset points",
                          ha="center", va="center", color=color, fontsize=self._font, fontweight="bold" if bold else "normal",
                          parse_math=False, zorder=7, linespacing=1.1,
                          arrowprops={"arrowstyle": "-", "color": color, "lw": 0.5, "shrinkA": 1.0, "shrinkB": 3.0} if far else None)
