"""Shades and hatches: how much over is a shade of one hue, how much missing the density of a hatch."""

from typing import Any

from fieldapp.report.drawing.style import SHADES

#: x, y of the lower left corner, width, height. [pt]
Box = tuple[float, float, float, float]


def shade_step(level: float) -> int:
    """Step of the ramp for a share 0..1 of how far a depth is over the specified one."""
    return min(SHADES - 1, int(level * SHADES))


def hatch_gap(level: float) -> float:
    """Distance of hatch lines: denser the more is missing. [pt]"""
    return 4.6 - 2.6 * min(1.0, level)


def hatch(path: Any, box: Box, gap: float) -> None:
    """Add rising lines at 45 degrees through a box (x, y, width, height) to a path."""
    x, y, wide, high = box
    start = -high + gap / 2
    while start < wide:
        from_x, to_x = max(0.0, start), min(wide, start + high)
        if to_x > from_x:
            path.moveTo(x + from_x, y + from_x - start)
            path.lineTo(x + to_x, y + to_x - start)
        start += gap


def cross(path: Any, box: Box) -> None:
    """Add both diagonals of a box to a path: bare."""
    x, y, wide, high = box
    path.moveTo(x, y)
    path.lineTo(x + wide, y + high)
    path.moveTo(x, y + high)
    path.lineTo(x + wide, y)


def upright(path: Any, box: Box, gap: float) -> None:
    """Add upright lines through a box to a path: too deep."""
    x, y, wide, high = box
    at = gap / 2
    while at < wide:
        path.moveTo(x + at, y)
        path.lineTo(x + at, y + high)
        at += gap
