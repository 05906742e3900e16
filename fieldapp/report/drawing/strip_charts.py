"""Draws strip charts: lowest, mean and highest depth of each bay against the lines that they are held to."""

from typing import Final

from reportlab.platypus import Flowable

from fieldapp.report.drawing.fonts import BOLD, REGULAR
from fieldapp.report.drawing.hatching import hatch
from fieldapp.report.drawing.style import ACCENT, INK, RULE, SOFT, shade
from fieldapp.report.drawing.text import typeset, width
from fieldapp.report.model import StripChart

#: Line of the specified depth, then those of floor and vapour depth.
DASHES: Final = (((), 0), ((4.0, 2.0), 0), ((1.2, 1.6), 0))


class StripChartFlow(Flowable):
    """Lowest to highest depth of each bay as an upright bar, its mean as a notch, against the specified depth."""

    HEIGHT: Final = 84.0
    LEFT: Final = 26.0
    RIGHT: Final = 6.0

    def __init__(self, chart: StripChart) -> None:
        super().__init__()
        self.chart = chart

    def wrap(self, available_width: float, _available_height: float) -> tuple[float, float]:
        """Size of the chart. [pt]"""
        self.width = available_width
        self.height = self.HEIGHT
        return available_width, self.height

    def _y(self, depth_mm: float) -> float:
        return 14.0 + (self.height - 26.0) * depth_mm / self.chart.top_mm

    def draw(self) -> None:
        """Grid, bars, then the lines that they are held against."""
        canvas, chart = self.canv, self.chart
        left, right = self.LEFT, self.width - self.RIGHT
        canvas.setFont(REGULAR, 6.6)
        canvas.setLineWidth(0.4)
        canvas.setStrokeColor(RULE)
        canvas.setFillColor(SOFT)
        for depth, text in chart.ticks:
            canvas.line(left, self._y(depth), right, self._y(depth))
            canvas.drawRightString(left - 4.0, self._y(depth) - 2.2, typeset(text))
        step = (right - left) / len(chart.strips)
        bar = min(9.0, step * 0.62)
        spec = chart.lines[0][0]
        solid, outline, hatches = canvas.beginPath(), canvas.beginPath(), canvas.beginPath()
        notches, spots = canvas.beginPath(), canvas.beginPath()
        for number, strip in enumerate(chart.strips):
            x = left + step * (number + 0.5)
            if strip.low_mm is not None and strip.high_mm is not None and strip.mean_mm is not None:
                low, high = self._y(strip.low_mm), max(self._y(strip.high_mm), self._y(strip.low_mm) + 0.8)
                under = min(max(self._y(spec), low), high)
                if high > under:
                    solid.rect(x - bar / 2, under, bar, high - under)
                if under > low:
                    box = (x - bar / 2, low, bar, under - low)
                    outline.rect(*box)
                    hatch(hatches, box, 2.6)
                mean = self._y(strip.mean_mm)
                notches.moveTo(x - bar / 2 - 1.6, mean)
                notches.lineTo(x + bar / 2 + 1.6, mean)
            if strip.low_spot_mm is not None:
                y = self._y(strip.low_spot_mm)
                spots.moveTo(x, y)
                spots.lineTo(x - 2.6, y - 4.4)
                spots.lineTo(x + 2.6, y - 4.4)
                spots.close()
        canvas.setFillColor(shade(3))
        canvas.drawPath(solid, stroke=0, fill=1)
        canvas.setStrokeColor(INK)
        canvas.setLineWidth(0.5)
        canvas.drawPath(hatches, stroke=1, fill=0)
        canvas.drawPath(outline, stroke=1, fill=0)
        canvas.setLineWidth(1.1)
        canvas.drawPath(notches, stroke=1, fill=0)
        canvas.setFillColor(INK)
        canvas.drawPath(spots, stroke=0, fill=1)
        self._lines(left, right)
        self._bay_labels(left, step)

    def _lines(self, left: float, right: float) -> None:
        canvas, chart = self.canv, self.chart
        canvas.setStrokeColor(ACCENT)
        canvas.setFillColor(ACCENT)
        canvas.setFont(BOLD, 6.8)
        canvas.setLineWidth(1.2)
        x, y = left, self.height - 7.0
        for number, (depth, text) in enumerate(chart.lines):
            canvas.setDash(*DASHES[number])
            canvas.line(left, self._y(depth), right, self._y(depth))
            canvas.line(x, y + 2.2, x + 13.0, y + 2.2)
            canvas.setDash()
            shown = typeset(text, BOLD)
            canvas.drawString(x + 16.0, y, shown)
            x += 30.0 + width(shown, BOLD, 6.8)
        canvas.setFillColor(SOFT)
        canvas.setFont(REGULAR, 6.8)
        said = "bar: lowest to highest reading, hatched below the specified depth; notch: mean"
        if any(strip.low_spot_mm is not None for strip in chart.strips):
            said += "; wedge: low spot"
        canvas.drawString(x, y, said)

    def _bay_labels(self, left: float, step: float) -> None:
        canvas = self.canv
        canvas.setFillColor(INK)
        canvas.setFont(BOLD, 6.0)
        labels = [typeset(strip.label, BOLD) for strip in self.chart.strips]
        widest = max(width(label, BOLD, 6.0) for label in labels) + 2.0
        every = max(1, int(widest / step) + (1 if widest > step else 0))
        for number, label in enumerate(labels):
            if number % every == 0:
                canvas.drawCentredString(left + step * (number + 0.5), 4.0, label)
