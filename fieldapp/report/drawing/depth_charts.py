"""Draws depth charts straight on the canvas; fills, hatches and numbers each in few operations."""

from collections import defaultdict
from typing import Any, Final

from reportlab.platypus import Flowable

from fieldapp.report.drawing.fonts import BOLD, REGULAR
from fieldapp.report.drawing.hatching import Box, cross, hatch, hatch_gap, shade_step, upright
from fieldapp.report.drawing.style import (
    ACCENT,
    FRAMING,
    INK,
    PAPER,
    SHADES,
    SOFT,
    is_dark,
    shade,
)
from fieldapp.report.drawing.text import fitted, lines, typeset, width
from fieldapp.report.model import Cell, ChartBay, DepthChart

NUMBER: Final = 6.6
LABEL: Final = 6.4
LEAST_NUMBER: Final = 4.6
GUTTER: Final = 13.0
FRAME: Final = 1.4
TALLEST: Final = 176.0
WIDEST_BAY: Final = 58.0
KEY_WIDTH: Final = 150.0


class _Pen:
    """Collects what a band draws and puts it down in few operations: frames, shades, hatches, outlines, numbers."""

    def __init__(self, canvas: Any, size: float) -> None:
        self.canvas = canvas
        self.size = size
        self.frames: list[Box] = []
        self.shades: dict[int, list[Box]] = defaultdict(list)
        self.outlined: list[Box] = []
        self.dashed: list[Box] = []
        self.knocked: list[Box] = []
        self.dark_numbers: list[tuple[float, float, str]] = []
        self.light_numbers: list[tuple[float, float, str]] = []
        self.hatches, self.crosses, self.upright = canvas.beginPath(), canvas.beginPath(), canvas.beginPath()

    def cell(self, cell: Cell, box: Box) -> None:
        """A point: unread dashed, over shaded, under hatched, bare crossed, blocked outlined with its letter."""
        text = typeset(cell.text)
        if cell.state == "unread":
            self.dashed.append(box)
            return
        if cell.state == "over":
            step = shade_step(cell.level)
            self.shades[step].append(box)
            if not cell.too_deep:
                self._number(text, box, self.light_numbers if is_dark(step) else self.dark_numbers)
                return
            upright(self.upright, box, 2.4)
        elif cell.state == "under":
            hatch(self.hatches, box, hatch_gap(cell.level))
        elif cell.state == "bare":
            cross(self.crosses, box)
        self.outlined.append(box)
        if text:
            self._number(text, box, self.dark_numbers, knock=True)

    def low_spot(self, text: str, is_under: bool, box: Box) -> None:
        """The thinnest place between the points, below its bay."""
        self.outlined.append(box)
        if is_under:
            hatch(self.hatches, box, 3.0)
        self._number(typeset(text), box, self.dark_numbers, knock=is_under)

    def _number(self, text: str, box: Box, among: list[tuple[float, float, str]], *, knock: bool = False) -> None:
        wide = width(text, REGULAR, self.size)
        x, y = box[0] + (box[2] - wide) / 2, box[1] + box[3] / 2 - self.size * 0.34
        among.append((x, y, text))
        if knock:
            # Paper behind a number that stands on a hatch.
            self.knocked.append((x - 0.8, y - self.size * 0.22, wide + 1.6, self.size * 1.02))

    def paint(self) -> None:
        """From the ground up."""
        canvas = self.canvas
        canvas.setFillColor(FRAMING)
        self._boxes(self.frames, fill=1)
        for step, boxes in self.shades.items():
            canvas.setFillColor(shade(step))
            self._boxes(boxes, fill=1)
        for path, colour, weight in ((self.hatches, INK, 0.45), (self.crosses, INK, 0.45), (self.upright, PAPER, 0.6)):
            canvas.setStrokeColor(colour)
            canvas.setLineWidth(weight)
            canvas.drawPath(path, stroke=1, fill=0)
        canvas.setStrokeColor(INK)
        canvas.setLineWidth(0.7)
        self._boxes(self.outlined, fill=0)
        canvas.setFillColor(PAPER)
        self._boxes(self.knocked, fill=1)
        canvas.setLineWidth(0.5)
        canvas.setDash(1.6, 1.4)
        self._boxes(self.dashed, fill=0)
        canvas.setDash()
        self._numbers(self.dark_numbers, INK)
        self._numbers(self.light_numbers, PAPER)

    def _boxes(self, boxes: list[Box], *, fill: int) -> None:
        if boxes:
            path = self.canvas.beginPath()
            for box in boxes:
                path.rect(*box)
            self.canvas.drawPath(path, stroke=1 - fill, fill=fill)

    def _numbers(self, numbers: list[tuple[float, float, str]], colour: Any) -> None:
        if numbers:
            text = self.canvas.beginText()
            text.setFont(REGULAR, self.size)
            text.setFillColor(colour)
            for x, y, number in numbers:
                text.setTextOrigin(x, y)
                text.textOut(number)
            self.canvas.drawText(text)


def _bands(bays: tuple[ChartBay, ...], room: float, scale: float) -> list[list[ChartBay]]:
    """Bays in bands that fit the room, each band about as long as the others."""
    widths = [bay.width_mm * scale + FRAME for bay in bays]
    number = max(1, -int(-sum(widths) // (room + FRAME)))
    while True:
        goal = sum(widths) / number
        bands: list[list[ChartBay]] = [[]]
        used = start = 0.0
        for bay, wide in zip(bays, widths, strict=True):
            if bands[-1] and (used - start + wide > room + FRAME or used + wide / 2 > goal * len(bands) + 0.01):
                bands.append([])
                start = used
            bands[-1].append(bay)
            used += wide
        if len(bands) <= number + 1:
            return bands
        number += 1


class DepthChartFlow(Flowable):
    """A depth chart, in as many bands of bays as the width asks."""

    def __init__(
        self,
        chart: DepthChart,
        *,
        with_key: bool = True,
        tallest: float = TALLEST,
        number: float = NUMBER,
        widest_bay: float = WIDEST_BAY,
    ) -> None:
        super().__init__()
        self.chart = chart
        self.with_key = with_key
        self.tallest = tallest
        self.number = number
        self.label = LABEL + (number - NUMBER)
        self.widest_bay = widest_bay

    def wrap(self, available_width: float, _available_height: float) -> tuple[float, float]:
        """Size of the chart. [pt]"""
        self.width = available_width
        self._lay_out()
        return available_width, self.height

    def split(self, available_width: float, available_height: float) -> list[Flowable]:
        """Between bands."""
        self.wrap(available_width, available_height)
        fitting = int((available_height - self._key_height()) // self.band_height)
        if fitting < 1 or fitting >= len(self.bands):
            return []
        number = sum(len(band) for band in self.bands[:fitting])
        first = DepthChart(self.chart.bays[:number], *self._rest())
        second = DepthChart(self.chart.bays[number:], *self._rest())
        return [
            DepthChartFlow(first, with_key=False, tallest=self.tallest),
            DepthChartFlow(second, with_key=self.with_key, tallest=self.tallest),
        ]

    def _rest(self) -> tuple[str, str, str, tuple[str, str, str], tuple[str, ...]]:
        chart = self.chart
        return chart.start, chart.top, chart.bottom, chart.key, chart.notes

    def _lay_out(self) -> None:
        bays = self.chart.bays
        room = self.width - GUTTER
        texts = {typeset(cell.text) for bay in bays for cell in bay.cells} | {
            typeset(bay.low_spot or "") for bay in bays
        }
        widest = max((width(text, REGULAR, self.number) for text in texts), default=0.0) + 2.4
        narrowest = min(bay.width_mm * min(bay.col_shares) for bay in bays)
        flattest = min(bay.height_mm * min(bay.row_shares) for bay in bays)
        tallest_mm = max(bay.height_mm for bay in bays)
        widest_mm = max(bay.width_mm for bay in bays)
        # One scale for both directions, so that bays stand to proportion: large enough for the numbers, then as large as fills
        # the width. Only where that is too flat to read or too tall to print are heights stretched or squeezed, all alike.
        scale = min(widest / narrowest, room / widest_mm)
        self.bands = _bands(bays, room, scale)
        filling = min((room - FRAME * len(band)) / sum(bay.width_mm for bay in band) for band in self.bands)
        scale = max(scale, min(filling, self.widest_bay / widest_mm))
        upright_scale = max(scale, (self.number + 2.2) / flattest)
        upright_scale = min(upright_scale, self.tallest / tallest_mm)
        self.across, self.up = scale, upright_scale
        self.size = self.number
        if narrowest * scale < widest:
            self.size = max(LEAST_NUMBER, self.number * narrowest * scale / widest)
        self.spot_high = self.size * 1.24
        self.cells_height = tallest_mm * upright_scale
        self.spots = self.spot_high + 2.0 if any(bay.low_spot for bay in bays) else 0.0
        self.band_height = self.cells_height + self.spots + self.label + 9.0
        self.height = self.band_height * len(self.bands) + self._key_height()

    def _key_height(self) -> float:
        if not self.with_key:
            return 0.0
        notes = self._note_lines()
        return max(25.0, len(notes) * 8.6 + 8.0)

    def _note_lines(self) -> list[str]:
        words = [*self.chart.notes]
        if self.chart.start:
            words.insert(0, f"bays counted from {self.chart.start}")
        text = typeset(" · ".join(words))
        return lines(text, REGULAR, 7.0, self.width - KEY_WIDTH - GUTTER - 24.0) if text else []

    def draw(self) -> None:
        """Band by band from the top."""
        top = self.height
        for band in self.bands:
            self._draw_band(band, top)
            top -= self.band_height
        if self.with_key:
            self._draw_key(top)

    def _draw_band(self, band: list[ChartBay], top: float) -> None:
        pen = _Pen(self.canv, self.size)
        x = GUTTER
        for bay in band:
            wide, high = bay.width_mm * self.across, bay.height_mm * self.up
            pen.frames.append((x - FRAME, top - high - 1.5, FRAME, high + 3.0))
            y = top
            places = iter(bay.cells)
            for row_share in bay.row_shares:
                y -= high * row_share
                cell_x = x
                for col_share in bay.col_shares:
                    pen.cell(next(places), (cell_x, y, wide * col_share, high * row_share))
                    cell_x += wide * col_share
            if bay.low_spot is not None:
                pen.low_spot(
                    bay.low_spot,
                    bay.low_spot_under,
                    (x + 0.6, top - high - self.spot_high - 1.2, wide - 1.2, self.spot_high),
                )
            x += wide + FRAME
        last = band[-1].height_mm * self.up
        pen.frames.append((x - FRAME, top - last - 1.5, FRAME, last + 3.0))
        pen.paint()
        self._labels(band, top)

    def _labels(self, band: list[ChartBay], top: float) -> None:
        canvas = self.canv
        canvas.setFillColor(INK)
        canvas.setFont(BOLD, self.label)
        y = top - self.cells_height - self.spots - self.label - 1.0
        x = GUTTER
        widest = max(width(typeset(bay.label, BOLD), BOLD, self.label) for bay in band)
        narrowest = min(bay.width_mm * self.across for bay in band)
        every = 1 if widest + 1.5 <= narrowest + FRAME else int(widest / (narrowest + FRAME)) + 1
        for number, bay in enumerate(band):
            wide = bay.width_mm * self.across
            if number % every == 0:
                label = fitted(typeset(bay.label, BOLD), BOLD, self.label, max(wide * every, 14.0))
                canvas.drawCentredString(x + wide / 2, y, label)
            x += wide + FRAME
        canvas.setFont(REGULAR, 6.4)
        canvas.setFillColor(SOFT)
        if self.cells_height < 50.0:
            canvas.saveState()
            canvas.translate(6.6, top - self.cells_height / 2)
            canvas.rotate(90)
            canvas.drawCentredString(0, 0, self.chart.top if self.cells_height < 22.0 else f"{self.chart.top} up")
            canvas.restoreState()
            return
        for word, at, anchor in ((self.chart.top, top, "right"), (self.chart.bottom, top - self.cells_height, "left")):
            canvas.saveState()
            canvas.translate(6.6, at)
            canvas.rotate(90)
            (canvas.drawRightString if anchor == "right" else canvas.drawString)(0, 0, word.upper())
            canvas.restoreState()

    def _draw_key(self, top: float) -> None:
        canvas = self.canv
        low, asked, high = (typeset(text) for text in self.chart.key)
        canvas.setFont(REGULAR, 7.0)
        canvas.setFillColor(SOFT)
        y = top - 12.0
        for line in self._note_lines():
            canvas.drawString(GUTTER, y, line)
            y -= 8.6
        if not low:
            return
        x, y, cell, tall = self.width - KEY_WIDTH, top - 21.0, KEY_WIDTH / 2 / 3, 9.0
        canvas.setLineWidth(0.5)
        canvas.setStrokeColor(INK)
        path = canvas.beginPath()
        for number in range(3):
            box = (x + number * cell, y, cell, tall)
            hatch(path, box, hatch_gap(1.0 - number / 2))
            canvas.rect(*box, stroke=1, fill=0)
        canvas.drawPath(path, stroke=1, fill=0)
        middle = x + 3 * cell
        step = KEY_WIDTH / 2 / SHADES
        for number in range(SHADES):
            canvas.setFillColor(shade(number))
            canvas.rect(middle + number * step, y, step, tall, stroke=0, fill=1)
        canvas.setStrokeColor(ACCENT)
        canvas.setLineWidth(1.8)
        canvas.line(middle, y - 2.0, middle, y + tall + 2.0)
        canvas.setFillColor(INK)
        canvas.drawString(x, y + tall + 2.6, low)
        canvas.drawRightString(x + KEY_WIDTH, y + tall + 2.6, high)
        canvas.setFillColor(ACCENT)
        canvas.setFont(BOLD, 7.2)
        canvas.drawCentredString(middle, y + tall + 3.4, asked)
