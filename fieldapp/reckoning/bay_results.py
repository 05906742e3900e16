"""The result of one bay, from its figures."""

from fieldapp.reckoning.bays import NO_TOUCH_UP, BayFigures, Shortfall, touch_up
from fieldapp.reckoning.inputs import CountedBay, CountedSurface
from fieldapp.reckoning.limits import at_most, depth_meets, depth_over
from fieldapp.reckoning.results import BayResult, Result


def bay_result(
    surface: CountedSurface,
    bay: CountedBay,
    found: BayFigures,
    lack: Shortfall,
    series_rsi: float,
    max_depth_mm: float | None,
    provable: bool,
) -> BayResult:
    """One bay's result: lowest depth, greatest depth, vapour depth and its own reading.

    Args:
        surface: Its surface.
        bay: The bay as counted.
        found: Its figures.
        lack: What it lacks.
        series_rsi: Films in series with the foam. [m2K/W]
        max_depth_mm: Greatest depth allowed. [mm]
        provable: False where the surface is unproven throughout.
    """
    foam = surface.foam
    lowest_depth = _bay_lowest_depth(surface, found) if provable else "unproven"
    vapour = _bay_vapour(surface, found, provable)
    too_deep = max_depth_mm is not None and found.high_mm is not None and depth_over(found.high_mm, max_depth_mm)
    result: Result = "meets" if found.is_read else "unproven"
    if not provable or "unproven" in (lowest_depth, vapour):
        result = "unproven"
    if provable and (too_deep or "short" in (lowest_depth, vapour)):
        result = "short"
    repair = NO_TOUCH_UP
    if found.points_read:
        repair = touch_up(lack.touch_up_m3, lack.order_m3, lack.deepest_mm, lack.highest_after_mm, foam, max_depth_mm)
    return BayResult(
        key=bay.key,
        label=bay.label,
        result=result,
        round=bay.round,
        points=found.points,
        points_read=found.points_read,
        points_blocked=len(bay.blocked),
        mean_mm=found.mean_mm,
        min_mm=found.lowest_mm,
        max_mm=found.high_mm,
        delivered_rsi=found.delivered_rsi(series_rsi) if foam else None,
        permeance_ng=found.permeance_ng(foam) if foam else None,
        under_area_share=lack.under_m2 / found.area_m2 if found.points_read else None,
        missing_m3=lack.missing_m3 if found.points_read else None,
        vapour=vapour,
        touch_up_passes=repair.passes,
        is_read=found.is_read,
        waiting_for_reading=bay.waiting,
        points_disagreeing=bay.disagreeing,
        low_spot_mm=min(bay.low_spots_mm, default=None),
        lowest_depth=lowest_depth,
        touch_up=repair,
    )


def _bay_lowest_depth(surface: CountedSurface, found: BayFigures) -> Result | None:
    """None where the basis asks nothing of a single point; unproven where no basis is stated."""
    spec = surface.spec
    if spec.basis == "average":
        return None
    if spec.basis is None:
        return "unproven"
    if found.lowest_mm is not None and not depth_meets(found.lowest_mm, spec.single_point_mm):
        return "short"
    return "meets" if found.is_read else "unproven"


def _bay_vapour(surface: CountedSurface, found: BayFigures, provable: bool) -> Result | None:
    """None under rules that ask nothing of a bay."""
    vapour, foam = surface.vapour, surface.foam
    if vapour.rule not in ("depth", "permeance"):
        return None
    if not provable or foam is None or found.lowest_mm is None:
        return "unproven"
    if vapour.rule == "permeance":
        return _bay_permeance(found, foam.permeability_ng_m, found.permeance_ng(foam), vapour.perm_ng or 0.0)
    if not foam.is_closed:
        return "short"
    depth_mm = found.lowest_mm
    if vapour.measure == "bay-mean":
        if not found.is_read or found.mean_mm is None:
            return "unproven"
        depth_mm = found.mean_mm
    if not depth_meets(depth_mm, vapour.depth_mm or 0.0):
        return "short"
    return "meets" if found.is_read else "unproven"


def _bay_permeance(
    found: BayFigures, permeability_ng_m: float | None, permeance_ng: float | None, limit_ng: float
) -> Result:
    if permeability_ng_m is None or not found.points_read:
        return "unproven"
    if permeance_ng is None:
        return "short"
    if not found.is_read:
        # A mean over part of a bay can still fall on either side.
        return "unproven"
    return "meets" if at_most(permeance_ng, limit_ng) else "short"


def depth_or_vapour_short(bay: BayResult) -> bool:
    """True where a bay is short in lowest depth or by the vapour rule."""
    return "short" in (bay.lowest_depth, bay.vapour)
