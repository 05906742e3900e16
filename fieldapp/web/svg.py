"""Depth charts as shapes of an SVG picture, from the same charts as the report's."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final

from fieldapp.report.model import CellState, ChartBay, DepthChart

FRAME: Final = 3.0
LEAST_CELL: Final = 34.0
TALLEST: Final = 330.0
LABEL: Final = 18.0
SPOT: Final = 18.0
SHADES: Final = 7


@dataclass(frozen=True, slots=True)
class Shape:
    """A cell: its box, what it shows and how. `step` is its shade, 0 to 6."""

    x: float
    y: float
    width: float
    height: float
    text: str
    state: CellState
    step: int
    too_deep: bool

    @property
    def kind(self) -> str:
        """The class that says how it is drawn."""
        return "deep" if self.too_deep else f"over shade-{self.step}" if self.state == "over" else self.state


@dataclass(frozen=True, slots=True)
class Label:
    """A bay's name below its cells."""

    x: float
    y: float
    text: str


@dataclass(frozen=True, slots=True)
class Picture:
    """A depth chart ready to be drawn."""

    width: float
    height: float
    shapes: tuple[Shape, ...]
    labels: tuple[Label, ...]


def picture(chart: DepthChart) -> Picture:
    """Bays side by side and to proportion, wide enough for their numbers; heights squeezed alike where they are too tall."""
    narrowest = min(bay.width_mm * min(bay.col_shares) for bay in chart.bays)
    tallest_mm = max(bay.height_mm for bay in chart.bays)
    flattest = min(bay.height_mm * min(bay.row_shares) for bay in chart.bays)
    across = LEAST_CELL / narrowest
    up = min(max(across, 20.0 / flattest), TALLEST / tallest_mm)
    cells = tallest_mm * up
    shapes: list[Shape] = []
    labels: list[Label] = []
    x = FRAME
    for bay in chart.bays:
        wide = bay.width_mm * across
        shapes.extend(_cells(bay, x, wide, bay.height_mm * up))
        if bay.low_spot is not None:
            state: CellState = "under" if bay.low_spot_under else "blocked"
            shapes.append(Shape(x, cells + 2.0, wide, SPOT, bay.low_spot, state, 0, too_deep=False))
        labels.append(Label(x + wide / 2, cells + SPOT + LABEL, bay.label))
        x += wide + FRAME
    return Picture(x, cells + SPOT + LABEL + 6.0, tuple(shapes), tuple(labels))


def _cells(bay: ChartBay, left: float, wide: float, high: float) -> Iterator[Shape]:
    places = iter(bay.cells)
    y = 0.0
    for row in bay.row_shares:
        x = left
        for col in bay.col_shares:
            cell = next(places)
            step = min(SHADES - 1, int(cell.level * SHADES))
            yield Shape(x, y, wide * col, high * row, cell.text, cell.state, step, cell.too_deep)
            x += wide * col
        y += high * row
