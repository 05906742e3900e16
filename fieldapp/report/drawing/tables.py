"""Tables of plain texts, drawn line by line with one text object a block; long ones are balanced in columns."""

from dataclasses import dataclass
from typing import Any, Final

from reportlab.platypus import Flowable

from fieldapp.reckoning.results import Result
from fieldapp.report.drawing.fonts import BOLD, REGULAR
from fieldapp.report.drawing.marks import WIDTH as MARK_WIDTH
from fieldapp.report.drawing.marks import draw_mark
from fieldapp.report.drawing.style import INK, RULE, SOFT
from fieldapp.report.drawing.text import lines, typeset, width
from fieldapp.report.model import SurfaceLine, Table

SIZE: Final = 8.2
LEADING: Final = 10.2
PAD: Final = 5.0
RIGHT_PAD: Final = 14.0
COLUMN_GAP: Final = 18.0


@dataclass(slots=True)
class _Row:
    """A row with its cells broken to lines."""

    cells: list[list[str]]
    mark: Result | None
    height: float


class TableFlow(Flowable):
    """A table; splits between rows and repeats its head."""

    def __init__(self, table: Table, rows: list[_Row] | None = None, *, size: float = SIZE) -> None:
        super().__init__()
        self.table = table
        self.rows = rows
        self.size = size if table.columns == 1 else size - 0.6
        self.leading = self.size + 2.0 if table.columns == 1 else LEADING - 0.9

    def wrap(self, available_width: float, _available_height: float) -> tuple[float, float]:
        """Size of the table. [pt]"""
        self.width = available_width
        columns = self.table.columns
        self.block = (available_width - COLUMN_GAP * (columns - 1)) / columns
        if self.rows is None:
            self.rows = [self._row(number, row) for number, row in enumerate(self.table.rows)]
        self.blocks = self._balanced(self.rows)
        self.head = self.leading + 5.0 if any(self.table.head) else 1.0
        self.height = self.head + max((sum(row.height for row in block) for block in self.blocks), default=0.0) + 2.0
        return available_width, self.height

    def _row(self, number: int, row: tuple[str, ...]) -> _Row:
        mark = self.table.marks.get(number)
        cells = []
        for column, text in enumerate(row):
            room = self.block * self.table.widths[column] - (RIGHT_PAD if column in self.table.right else PAD)
            if mark is not None and column == 1:
                room -= MARK_WIDTH
            cells.append(lines(typeset(text), REGULAR, self.size, room))
        return _Row(cells, mark, max(len(cell) for cell in cells) * self.leading + 2.4)

    def _balanced(self, rows: list[_Row]) -> list[list[_Row]]:
        """Rows dealt to columns from the left, each as high as it must be."""
        columns = self.table.columns
        if columns == 1:
            return [rows]
        total = sum(row.height for row in rows)
        blocks: list[list[_Row]] = [[] for _ in range(columns)]
        at, used = 0, 0.0
        for row in rows:
            if at < columns - 1 and used + row.height / 2 > total / columns:
                at, used = at + 1, 0.0
            blocks[at].append(row)
            used += row.height
        return blocks

    def split(self, _available_width: float, available_height: float) -> list[Flowable]:
        """As many rows as fit, the rest below the repeated head on the next page."""
        assert self.rows is not None
        room = (available_height - self.head - 4.0) * self.table.columns
        used, fitting = 0.0, 0
        for row in self.rows:
            # A column may close early by part of a row; leave that much.
            if used + row.height > room - (self.table.columns - 1) * row.height:
                break
            used += row.height
            fitting += 1
        if fitting < 2 or fitting >= len(self.rows):
            return []
        return [self._part(self.rows[:fitting]), self._part(self.rows[fitting:])]

    def _part(self, rows: list[_Row]) -> "TableFlow":
        part = TableFlow(self.table, rows)
        part.size, part.leading = self.size, self.leading
        return part

    def draw(self) -> None:
        """Block by block."""
        for number, block in enumerate(self.blocks):
            if block:
                self._draw_block(block, number * (self.block + COLUMN_GAP))

    def _draw_block(self, rows: list[_Row], left: float) -> None:
        canvas, table = self.canv, self.table
        starts = [left]
        for share in table.widths:
            starts.append(starts[-1] + self.block * share)
        y = self.height
        if any(table.head):
            canvas.setFillColor(SOFT)
            canvas.setFont(BOLD, self.size - 0.4)
            for column, title in enumerate(table.head):
                text = typeset(title, BOLD)
                if column in table.right:
                    canvas.drawRightString(starts[column + 1] - RIGHT_PAD, y - self.leading, text)
                else:
                    canvas.drawString(starts[column], y - self.leading, text)
            y -= self.head
            canvas.setStrokeColor(INK)
            canvas.setLineWidth(0.8)
            canvas.line(left, y + 1.6, left + self.block, y + 1.6)
        rules = canvas.beginPath()
        pen = canvas.beginText()
        pen.setFont(REGULAR, self.size)
        pen.setFillColor(INK)
        marks: list[tuple[float, float, Result]] = []
        for row in rows:
            base = y - self.leading + 1.4
            for column, cell in enumerate(row.cells):
                x = starts[column]
                if row.mark is not None and column == 1:
                    marks.append((x + 1.4, base - 1.0, row.mark))
                    x += MARK_WIDTH
                for number, line in enumerate(cell):
                    if not line:
                        continue
                    if column in table.right:
                        x = starts[column + 1] - RIGHT_PAD - width(line, REGULAR, self.size)
                    pen.setTextOrigin(x, base - number * self.leading)
                    pen.textOut(line)
            y -= row.height
            rules.moveTo(left, y + 1.0)
            rules.lineTo(left + self.block, y + 1.0)
        canvas.setStrokeColor(RULE)
        canvas.setLineWidth(0.4)
        canvas.drawPath(rules, stroke=1, fill=0)
        canvas.drawText(pen)
        for x, base, mark in marks:
            draw_mark(canvas, x, base, mark, 7.2)


class SummaryFlow(Flowable):
    """The table of page one: a surface a row, a main text and a small one below it in each cell."""

    WIDTHS: Final = (0.17, 0.122, 0.098, 0.075, 0.085, 0.085, 0.085, 0.1, 0.09, 0.09)
    MAIN: Final = 8.8
    BELOW: Final = 7.0

    def __init__(self, head: tuple[str, ...], rows: tuple[SurfaceLine, ...]) -> None:
        super().__init__()
        self.head = head
        self.rows = rows

    def wrap(self, available_width: float, _available_height: float) -> tuple[float, float]:
        """Size of the table. [pt]"""
        self.width = available_width
        self.laid = [self._lay(row) for row in self.rows]
        self.height = 18.0 + sum(height for _, height in self.laid)
        return available_width, self.height

    def _lay(self, row: SurfaceLine) -> tuple[list[tuple[list[str], list[str]]], float]:
        texts = [row.name, (row.word, ""), *row.cells]
        cells = []
        tallest = 0.0
        for column, (main, below) in enumerate(texts):
            room = self.width * self.WIDTHS[column] - PAD - (MARK_WIDTH if column == 1 else 0.0)
            font = BOLD if column < 2 else REGULAR
            cell = (
                lines(typeset(main, font), font, self.MAIN, room),
                lines(typeset(below), REGULAR, self.BELOW, room) if below else [],
            )
            cells.append(cell)
            tallest = max(tallest, len(cell[0]) * 10.8 + len(cell[1]) * 8.4)
        return cells, tallest + 7.0

    def split(self, available_width: float, available_height: float) -> list[Flowable]:
        """Between rows."""
        self.wrap(available_width, available_height)
        used, fitting = 18.0, 0
        for _, height in self.laid:
            if used + height > available_height:
                break
            used += height
            fitting += 1
        if fitting < 1 or fitting >= len(self.rows):
            return []
        return [SummaryFlow(self.head, self.rows[:fitting]), SummaryFlow(self.head, self.rows[fitting:])]

    def draw(self) -> None:
        """Head, then rows."""
        canvas = self.canv
        starts = [0.0]
        for share in self.WIDTHS:
            starts.append(starts[-1] + self.width * share)
        y = self.height
        canvas.setFillColor(SOFT)
        canvas.setFont(BOLD, 7.8)
        for column, title in enumerate(self.head):
            canvas.drawString(starts[column], y - 9.0, title)
        y -= 14.0
        canvas.setStrokeColor(INK)
        canvas.setLineWidth(1.0)
        canvas.line(0, y, self.width, y)
        for row, (cells, height) in zip(self.rows, self.laid, strict=True):
            self._draw_row(row, cells, starts, y)
            y -= height
            canvas.setStrokeColor(RULE)
            canvas.setLineWidth(0.5)
            canvas.line(0, y, self.width, y)

    def _draw_row(
        self, row: SurfaceLine, cells: list[tuple[list[str], list[str]]], starts: list[float], top: float
    ) -> None:
        canvas: Any = self.canv
        for column, (main, below) in enumerate(cells):
            x, y = starts[column], top - 11.4
            if column == 1:
                draw_mark(canvas, x + 1.6, y - 1.2, row.result, 8.2)
                x += MARK_WIDTH
            canvas.setFillColor(INK)
            canvas.setFont(BOLD if column < 2 else REGULAR, self.MAIN)
            for line in main:
                canvas.drawString(x, y, line)
                y -= 10.8
            canvas.setFillColor(SOFT)
            canvas.setFont(REGULAR, self.BELOW)
            y += 1.8
            for line in below:
                canvas.drawString(x, y, line)
                y -= 8.4
