"""The report as data: everything that a drawing needs, in reading order, every number already text.

Only the charts carry bare numbers, as shares and proportions for the pen.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from fieldapp.reckoning.results import Result

CellState = Literal["over", "under", "bare", "blocked", "unread"]


@dataclass(frozen=True, slots=True)
class Sentence:
    """A sentence, with the keys of the bays that it names as short; each of those is hatched in its chart."""

    text: str
    short_bays: frozenset[str] = frozenset()
    result: Result | None = None


@dataclass(frozen=True, slots=True)
class SurfaceLine:
    """A surface in the table of page one: pairs of a main text and the small one below it, column by column."""

    key: str
    name: tuple[str, str]
    result: Result
    word: str
    cells: tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True)
class Cell:
    """A point in a depth chart. `level` 0..1 says how much over (shade) or how much missing (density of the hatch)."""

    text: str
    state: CellState
    level: float = 0.0
    too_deep: bool = False


@dataclass(frozen=True, slots=True)
class ChartBay:
    """A bay in a depth chart: its proportions, its cells row by row, and its thinnest low spot where one was found."""

    key: str
    label: str
    width_mm: float
    height_mm: float
    row_shares: tuple[float, ...]
    col_shares: tuple[float, ...]
    cells: tuple[Cell, ...]
    low_spot: str | None = None
    low_spot_under: bool = False

    @property
    def is_hatched(self) -> bool:
        """True where anything in it is drawn as under depth, bare or too deep."""
        return self.low_spot_under or any(cell.state in ("under", "bare") or cell.too_deep for cell in self.cells)


@dataclass(frozen=True, slots=True)
class DepthChart:
    """The picture of a surface: bays in order and to proportion, each point against the specified depth."""

    bays: tuple[ChartBay, ...]
    start: str
    top: str
    bottom: str
    key: tuple[str, str, str]
    notes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Strip:
    """A bay in a strip chart; depths in mm."""

    label: str
    low_mm: float | None
    mean_mm: float | None
    high_mm: float | None
    low_spot_mm: float | None


@dataclass(frozen=True, slots=True)
class StripChart:
    """Lowest, mean and highest depth of each bay against horizontal lines: the specified depth first, then a floor and the
    vapour depth where they differ from it; (depth_mm, text) for each line.
    """

    strips: tuple[Strip, ...]
    lines: tuple[tuple[float, str], ...]
    top_mm: float
    ticks: tuple[tuple[float, str], ...]


@dataclass(frozen=True, slots=True)
class Table:
    """A table of texts. `widths` are shares of the page's width; `right` are the columns set to the right.

    `marks` names a result to be drawn before the first cell of a row.
    """

    head: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    widths: tuple[float, ...]
    right: frozenset[int] = frozenset()
    marks: Mapping[int, Result] = field(default_factory=dict)
    columns: int = 1


@dataclass(frozen=True, slots=True)
class Photo:
    """A photo by its digest, with what it shows and where."""

    sha256: str
    caption: str
    detail: str


@dataclass(frozen=True, slots=True)
class Part:
    """A titled part of a section: any of prose, a table, charts, photos."""

    title: str
    prose: tuple[Sentence, ...] = ()
    table: Table | None = None
    chart: DepthChart | None = None
    strips: StripChart | None = None
    photos: tuple[Photo, ...] = ()
    bulleted: bool = False


@dataclass(frozen=True, slots=True)
class Section:
    """A chapter of the report; one for each surface, then method, cautions, appendix."""

    key: str
    title: str
    subtitle: str
    parts: tuple[Part, ...]
    result: Result | None = None
    word: str = ""
    new_page: bool = True


@dataclass(frozen=True, slots=True)
class Report:
    """A whole report.

    `dated` is the time of the latest record (RFC 3339, UTC): a report has no clock of its own.
    """

    title: str
    subtitle: str
    facts: tuple[tuple[str, str], ...]
    alarms: tuple[Sentence, ...]
    covering: tuple[Sentence, ...]
    answer: tuple[Sentence, ...]
    table_head: tuple[str, ...]
    table: tuple[SurfaceLine, ...]
    to_do: tuple[Sentence, ...]
    not_said: tuple[str, ...]
    sections: tuple[Section, ...]
    status: str
    digest: str
    dated: str
    file_stem: str
    keywords: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class CrewSheet:
    """One page for the crew: what to add where, no prose; for each surface its name, the chart of what each point lacks, the
    sums, and the same bay by bay.
    """

    title: str
    subtitle: str
    surfaces: tuple[tuple[str, DepthChart, Table, Table | None], ...]
    notes: tuple[str, ...]
    status: str
    digest: str
    dated: str
    file_stem: str
