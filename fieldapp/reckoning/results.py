"""The shape of a reckoning's result; field by field what `bayreckon reckon --json` prints, numbers unrounded.

None stands where there is nothing to say.
"""

from collections.abc import Sequence
from dataclasses import dataclass, fields, is_dataclass
from typing import Any, Literal

from fieldapp.reckoning.sampling import Agreement

Result = Literal["meets", "short", "unproven"]


def worst(results: Sequence[Result]) -> Result:
    """Short where any is short, else unproven where any is or there is none, else meets."""
    if "short" in results:
        return "short"
    return "unproven" if "unproven" in results or not results else "meets"


@dataclass(frozen=True, slots=True)
class Check:
    """One check of a surface: its result, the word that fits it, what was asked and what was found."""

    id: str
    result: Result
    word: str
    asked: str
    found: str


@dataclass(frozen=True, slots=True)
class DepthFigures:
    """Depths of a surface; the lowest includes low spots. [mm]"""

    mean: float | None
    min: float | None
    max: float | None
    sd: float | None


@dataclass(frozen=True, slots=True)
class ResistanceFigures:
    """Resistances of a surface's foam. [m2K/W]"""

    nominal: float | None
    delivered: float | None
    uneven_loss: float | None
    in_assembly: float | None
    beyond_tested: bool


@dataclass(frozen=True, slots=True)
class UnderSpray:
    """Area under the specified depth, as shares of the area read; volume missing to it."""

    area_share: float | None
    deep_area_share: float | None
    area_m2: float | None
    missing_m3: float | None


@dataclass(frozen=True, slots=True)
class VapourFigures:
    """What the vapour rule asks and in how many bays it is met."""

    rule: str
    required_mm: float | None
    bays_meets: int | None
    bays_short: int | None
    bays_unproven: int | None
    permeance_ng: float | None
    retarder_class: str | None


@dataclass(frozen=True, slots=True)
class CoreResult:
    """A core's density and how it stands against the foam's limits."""

    record: str
    bay: str
    label: str
    kg_m3: float
    plus_minus_kg_m3: float | None
    word: str


@dataclass(frozen=True, slots=True)
class DensityFigures:
    """Densities of a surface's cores. [kg/m3]"""

    cores: int
    mean_kg_m3: float | None
    min_kg_m3: float | None
    max_kg_m3: float | None
    each: tuple[CoreResult, ...]


@dataclass(slots=True)  # not frozen: one is made for every bay, and freezing triples that
class TouchUp:
    """What would bring a surface or a bay to specification, if read again."""

    volume_m3: float | None
    board_feet: float | None
    order_m3: float | None
    order_board_feet: float | None
    mass_kg: float | None
    passes: int | None
    deepest_missing_mm: float | None
    exceeds_max_depth: bool


@dataclass(frozen=True, slots=True)
class Sampling:
    """What the sample supports (95 %, one-sided)."""

    confidence: float
    mean_lower_mm: float | None
    short_bays_at_most: int | None


@dataclass(slots=True)  # not frozen: one is made for every bay, and freezing triples that
class BayResult:
    """One bay."""

    key: str
    label: str
    result: Result
    round: int
    points: int
    points_read: int
    points_blocked: int
    mean_mm: float | None
    min_mm: float | None
    max_mm: float | None
    delivered_rsi: float | None
    permeance_ng: float | None
    under_area_share: float | None
    missing_m3: float | None
    vapour: Result | None
    touch_up_passes: int | None
    is_read: bool
    waiting_for_reading: bool
    points_disagreeing: int
    low_spot_mm: float | None
    lowest_depth: Result | None
    touch_up: TouchUp


@dataclass(frozen=True, slots=True)
class SurfaceResult:
    """One surface."""

    key: str
    place: str | None
    name: str
    result: Result
    unproven_because: str | None
    bays_total: int
    bays_laid_out: int
    bays_read: int
    points: int
    points_read: int
    points_blocked: int
    points_disagreeing: int
    points_read_again: int
    area_m2: float
    area_read_m2: float
    read_share: float
    depth_mm: DepthFigures
    rsi: ResistanceFigures
    u_w_m2k: float | None
    under_spray: UnderSpray
    vapour: VapourFigures
    density: DensityFigures
    touch_up: TouchUp
    sampling: Sampling
    checks: tuple[Check, ...]
    bays: tuple[BayResult, ...]

    def check(self, check_id: str) -> Check | None:
        """The check of that id, where it was asked."""
        return next((check for check in self.checks if check.id == check_id), None)


@dataclass(frozen=True, slots=True)
class PlaceResult:
    """One place, from its surfaces."""

    key: str
    name: str
    result: Result


@dataclass(frozen=True, slots=True)
class JobResult:
    """The whole job."""

    key: str
    name: str
    units: str
    purpose: str
    result: Result
    agreement: Agreement | None
    places: tuple[PlaceResult, ...]
    surfaces: tuple[SurfaceResult, ...]


def as_json(result: JobResult, refused: Sequence[dict[str, Any]], digest: str) -> dict[str, Any]:
    """The result as plain JSON values, in the order in which it is printed (format 1)."""
    return {
        "format": 1,
        "job": {"key": result.key, "name": result.name, "units": result.units},
        "purpose": result.purpose,
        "result": result.result,
        "refused": list(refused),
        "digest": digest,
        "agreement": _plain(result.agreement),
        "places": _plain(result.places),
        "surfaces": _plain(result.surfaces),
    }


def _plain(value: Any) -> Any:
    if is_dataclass(value):
        return {field.name: _plain(getattr(value, field.name)) for field in fields(value)}
    if isinstance(value, tuple):
        return [_plain(item) for item in value]
    return value
