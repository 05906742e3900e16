"""The result marks: a box, a fill, a line across. Filled over the line: meets; under it: short; dashed and empty: unproven."""

from typing import Any

from fieldapp.reckoning.results import Result
from fieldapp.report.drawing.style import ACCENT, INK, PAPER

WIDTH = 13.5


def draw_mark(canvas: Any, x: float, y: float, result: Result, size: float = 9.0) -> None:
    """Draw a mark with its lower left corner at x, y. [pt]"""
    canvas.saveState()
    canvas.setLineWidth(size * 0.09)
    canvas.setStrokeColor(INK)
    line = y + size * 0.58
    if result == "unproven":
        canvas.setDash(size * 0.16, size * 0.13)
        canvas.setFillColor(PAPER)
        canvas.rect(x, y, size, size, stroke=1, fill=0)
        canvas.setDash()
    else:
        canvas.rect(x, y, size, size, stroke=1, fill=0)
        canvas.setFillColor(INK)
        height = size * (0.92 if result == "meets" else 0.4)
        canvas.rect(x, y, size, height, stroke=0, fill=1)
    canvas.setStrokeColor(ACCENT)
    canvas.setLineWidth(size * 0.14)
    canvas.line(x - size * 0.24, line, x + size * 1.24, line)
    if result == "meets":
        # Across the fill the line is paper, or it would drown in it.
        canvas.setStrokeColor(PAPER)
        canvas.setLineWidth(size * 0.1)
        canvas.line(x + size * 0.1, line, x + size * 0.9, line)
    canvas.restoreState()
