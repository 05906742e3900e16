"""Surfaces as counted, for tests of the reckoning that need no records."""

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from fieldapp.reckoning.inputs import CountedBay, CountedJob, CountedSurface, Foam, Spec, Vapour
from fieldapp.reckoning.job import reckon
from fieldapp.reckoning.resistance import PerMetre
from fieldapp.reckoning.results import JobResult, SurfaceResult
from fieldapp.reckoning.units import MM_PER_INCH, NG_M_PER_PERM_INCH, RSI_PER_R

CLOSED = Foam(
    "f", "Demo foam", "closed", PerMetre(6.0 * RSI_PER_R / 0.0254), 2.0 * NG_M_PER_PERM_INCH, 32.0, 28.0, 38.0
)
OPEN = replace(CLOSED, cell="open")
NO_RULE = Vapour("none", reason="not asked in this test")


def bay(
    depths_mm: Sequence[float | None], areas_m2: Sequence[float] | None = None, label: str = "1", **more: Any
) -> CountedBay:
    """A bay of one column with these depths; equal areas unless given."""
    areas = tuple(areas_m2 or [1.0] * len(depths_mm))
    told: dict[str, Any] = {"blocked": {}, **more}
    return CountedBay(f"bay-{label}", label, len(depths_mm), 1, sum(areas), tuple(depths_mm), areas, **told)


def surface(bays: Sequence[CountedBay], **more: Any) -> CountedSurface:
    """A wall with these bays."""
    told: dict[str, Any] = {
        "foam": CLOSED,
        "bays_total_stated": len(bays),
        "spec": Spec(3 * MM_PER_INCH, "minimum"),
        "vapour": NO_RULE,
        "chosen": "all",
        **more,
    }
    return CountedSurface(key="s", name="Wall", assembly=told.pop("assembly", "wall"), bays=tuple(bays), **told)


def job(*surfaces: CountedSurface, **more: Any) -> CountedJob:
    told: dict[str, Any] = {"units": "ip", "purpose": "inspection", **more}
    return CountedJob("j", "Job", surfaces=tuple(surfaces), **told)


def reckoned(made: CountedSurface, **more: Any) -> SurfaceResult:
    """The result of a job of one surface."""
    result: JobResult = reckon(job(made, **more))
    return result.surfaces[0]


def inches(*depths: float) -> list[float | None]:
    return [depth * MM_PER_INCH for depth in depths]


def check(result: SurfaceResult, check_id: str) -> tuple[str, str]:
    """Result and word of a check."""
    found = result.check(check_id)
    assert found is not None, f"{check_id} was not asked"
    return found.result, found.word
