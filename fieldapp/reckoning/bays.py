"""Figures of one bay: one pass over its points, a second one only where something is short.

The reckoning of a large job is these loops; they are written out plainly because every figure of every point is a few
float operations and a call costs as much as all of them. The formulas are those of `resistance` and `vapour`, and a test
holds the two together.
"""

from dataclasses import dataclass
from math import ceil, inf

from fieldapp.reckoning.inputs import CountedBay, Foam, Spec, Vapour
from fieldapp.reckoning.limits import DEPTH_TOLERANCE_MM, least_meeting_mm
from fieldapp.reckoning.resistance import PerMetre, Table
from fieldapp.reckoning.results import TouchUp
from fieldapp.reckoning.units import M3_PER_BOARD_FOOT

#: A bay with more than this share of its points blocked was not read.
BLOCKED_SHARE_MAX = 1.0 / 3.0


@dataclass(slots=True)
class BayFigures:
    """Sums over the points of a bay that were read; areas in m2, depths in mm.

    `conductance` is sum(a / (Rs + R(d))), `flow` is sum(a / d); `flow` is None where a point is bare.
    """

    points: int
    points_read: int
    area_m2: float
    sum_depth_mm: float
    squares_mm2: float
    area_depth: float
    low_mm: float | None
    high_mm: float | None
    lowest_mm: float | None
    conductance: float
    flow: float | None
    beyond_tested: bool
    is_read: bool

    @property
    def mean_mm(self) -> float | None:
        """Area-weighted mean depth. [mm]"""
        return self.area_depth / self.area_m2 if self.points_read else None

    @property
    def variance_mm2(self) -> float | None:
        """Sample variance of the depths, unweighted; None under two points. [mm2]"""
        return self.squares_mm2 / (self.points_read - 1) if self.points_read > 1 else None

    def permeance_ng(self, foam: Foam) -> float | None:
        """Permeance of the points read; None without points, permeability, or where one is bare. [ng/(Pa s m2)]"""
        if not self.points_read or self.flow is None or foam.permeability_ng_m is None:
            return None
        return self.flow * foam.permeability_ng_m * 1000.0 / self.area_m2

    def delivered_rsi(self, series_rsi: float) -> float | None:
        """Resistance that the foam delivers to parallel heat flow. [m2K/W]"""
        return self.area_m2 / self.conductance - series_rsi if self.points_read else None


def bay_figures(bay: CountedBay, foam: Foam | None, series_rsi: float) -> BayFigures:
    """All sums over a bay's points that were read.

    Args:
        bay: The bay with its counted depths.
        foam: Its foam; without one, conductance and flow stay 0.
        series_rsi: Films in series with the foam; Rs. [m2K/W]
    """
    read = 0
    area = sum_depth = shifted = shifted_squares = area_depth = conductance = flow = 0.0
    low = high = shift = 0.0
    bare = beyond = False
    resistance = foam.resistance if foam else None
    rsi_per_mm = resistance.rsi_per_m / 1000.0 if isinstance(resistance, PerMetre) else 0.0
    for depth, point_area in zip(bay.depths_mm, bay.areas_m2, strict=True):
        if depth is None:
            continue
        if read == 0:
            low = high = shift = depth
        elif depth < low:
            low = depth
        elif depth > high:
            high = depth
        read += 1
        area += point_area
        sum_depth += depth
        # Shifted by the first depth: even bays have exactly no spread, and nothing large cancels.
        off = depth - shift
        shifted += off
        shifted_squares += off * off
        area_depth += point_area * depth
        if resistance is not None:
            rsi = series_rsi + (rsi_per_mm * depth if rsi_per_mm else resistance.rsi(depth))
            # Without films a bare point conducts without bound, and the bay delivers nothing.
            conductance += point_area / rsi if rsi > 0.0 else inf
        if depth > DEPTH_TOLERANCE_MM:
            flow += point_area / depth
        else:
            bare = True
    if isinstance(resistance, Table) and read:
        least = low if low > DEPTH_TOLERANCE_MM else _least_not_bare(bay)
        beyond = resistance.beyond_tested(least) or resistance.beyond_tested(high)
    squares = shifted_squares - shifted * shifted / read if read else 0.0
    points = len(bay.depths_mm)
    return BayFigures(
        points=points,
        points_read=read,
        area_m2=area,
        sum_depth_mm=sum_depth,
        squares_mm2=squares if squares > 0.0 else 0.0,
        area_depth=area_depth,
        low_mm=low if read else None,
        high_mm=high if read else None,
        lowest_mm=_lowest(bay, low if read else None),
        conductance=conductance,
        flow=None if bare else flow,
        beyond_tested=beyond,
        is_read=read > 0
        and read + len(bay.blocked) == points
        and len(bay.blocked) <= points * BLOCKED_SHARE_MAX
        and "already-covered" not in bay.blocked.values(),
    )


def _least_not_bare(bay: CountedBay) -> float:
    """The least depth of foam, bare points aside; 0 where all are bare. [mm]"""
    return min((d for d in bay.depths_mm if d is not None and d > DEPTH_TOLERANCE_MM), default=0.0)


def _lowest(bay: CountedBay, low_mm: float | None) -> float | None:
    found = [*bay.low_spots_mm] if low_mm is None else [low_mm, *bay.low_spots_mm]
    return min(found) if found else None


@dataclass(slots=True)
class Shortfall:
    """What a bay's read points lack: to the specified depth, and to the point limit of a touch-up. Volumes in m3."""

    under_m2: float = 0.0
    deep_under_m2: float = 0.0
    missing_m3: float = 0.0
    touch_up_m3: float = 0.0
    order_m3: float = 0.0
    deepest_mm: float = 0.0
    highest_after_mm: float = 0.0
    area_after: float = 0.0
    area_after_order: float = 0.0


def point_limit_mm(foam: Foam | None, spec: Spec, vapour: Vapour) -> float:
    """The depth to which a touch-up brings every point: the basis's, and closed cell's vapour depth. [mm]

    Open-cell foam is left out of the vapour depth: no depth of it retards vapour, so none is worth spraying for it.
    """
    limit = spec.single_point_mm
    if vapour.rule == "depth" and vapour.depth_mm is not None and (foam is None or foam.is_closed):
        limit = max(limit, vapour.depth_mm)
    return limit


def bay_shortfall(bay: CountedBay, figures: BayFigures, spec: Spec, limit_mm: float, min_pass_mm: float) -> Shortfall:
    """What the read points of a bay lack.

    Args:
        bay: The bay.
        figures: Its figures.
        spec: The specification; under-spray is held against its depth.
        limit_mm: The point limit of a touch-up. [mm]
        min_pass_mm: Least depth that can be sprayed in a pass; a smaller gap is ordered as this. [mm]
    """
    if figures.low_mm is None:
        return Shortfall()
    meets_spec = least_meeting_mm(spec.depth_mm)
    meets_deep = least_meeting_mm(0.7 * spec.depth_mm)
    meets_limit = least_meeting_mm(limit_mm)
    meets_both = max(meets_spec, meets_limit)
    if figures.low_mm >= meets_both:
        return Shortfall(area_after=figures.area_depth, area_after_order=figures.area_depth)
    under = deep_under = missing = added = ordered = deepest = highest_after = 0.0
    for depth, area in zip(bay.depths_mm, bay.areas_m2, strict=True):
        if depth is None or depth >= meets_both:
            continue
        if depth < meets_spec:
            under += area
            missing += area * (spec.depth_mm - depth)
            if depth < meets_deep:
                deep_under += area
        if depth < meets_limit:
            lack = limit_mm - depth
            sprayed = lack if lack > min_pass_mm else min_pass_mm
            added += area * lack
            ordered += area * sprayed
            if lack > deepest:
                deepest = lack
            if depth + sprayed > highest_after:
                highest_after = depth + sprayed
    return Shortfall(
        under_m2=under,
        deep_under_m2=deep_under,
        missing_m3=missing / 1000.0,
        touch_up_m3=added / 1000.0,
        order_m3=ordered / 1000.0,
        deepest_mm=deepest,
        highest_after_mm=highest_after,
        area_after=figures.area_depth + added,
        area_after_order=figures.area_depth + ordered,
    )


def passes(deepest_missing_mm: float, max_pass_mm: float | None) -> int | None:
    """Passes that the deepest missing depth takes; 0 where nothing is missing, None without the sheet's greatest pass."""
    if deepest_missing_mm <= DEPTH_TOLERANCE_MM:
        return 0
    if max_pass_mm is None:
        return None
    return ceil((deepest_missing_mm - DEPTH_TOLERANCE_MM) / max_pass_mm)


def touch_up(
    volume_m3: float,
    order_m3: float,
    deepest_mm: float,
    highest_after_mm: float,
    foam: Foam | None,
    max_depth_mm: float | None,
) -> TouchUp:
    """A touch-up from its volumes: what is missing in place, what to order, and in how many passes.

    Args:
        volume_m3: Missing in place. [m3]
        order_m3: The same with thin gaps raised to the least pass, before losses. [m3]
        deepest_mm: Deepest missing depth. [mm]
        highest_after_mm: Greatest depth that would result where foam is added. [mm]
        foam: The foam, for its losses, passes and density.
        max_depth_mm: Greatest allowed depth. [mm]
    """
    ordered = order_m3 / (1.0 - ((foam.loss_share if foam else None) or 0.0))
    nominal = foam.density_nominal_kg_m3 if foam else None
    return TouchUp(
        volume_m3=volume_m3,
        board_feet=volume_m3 / M3_PER_BOARD_FOOT,
        order_m3=ordered,
        order_board_feet=ordered / M3_PER_BOARD_FOOT,
        mass_kg=None if nominal is None else volume_m3 * nominal,
        passes=passes(deepest_mm, foam.max_pass_mm if foam else None),
        deepest_missing_mm=deepest_mm,
        exceeds_max_depth=max_depth_mm is not None
        and volume_m3 > 0.0
        and highest_after_mm > max_depth_mm + DEPTH_TOLERANCE_MM,
    )


#: Nothing was read, so nothing can be said of a touch-up.
NO_TOUCH_UP = TouchUp(None, None, None, None, None, None, None, False)
