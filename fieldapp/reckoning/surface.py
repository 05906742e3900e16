"""One surface: its bays, their sums, and what follows from them. The checks themselves are in `checks`."""

from dataclasses import dataclass
from math import isfinite, sqrt

from fieldapp.reckoning import checks
from fieldapp.reckoning.bay_results import bay_result, depth_or_vapour_short
from fieldapp.reckoning.bays import (
    NO_TOUCH_UP,
    BayFigures,
    Shortfall,
    bay_figures,
    bay_shortfall,
    point_limit_mm,
    touch_up,
)
from fieldapp.reckoning.cores import density_figures
from fieldapp.reckoning.inputs import CountedSurface
from fieldapp.reckoning.limits import depth_meets
from fieldapp.reckoning.resistance import conductance, films_rsi, steel_frame_rsi, wood_frame_u
from fieldapp.reckoning.results import (
    BayResult,
    DepthFigures,
    ResistanceFigures,
    Sampling,
    SurfaceResult,
    TouchUp,
    UnderSpray,
    VapourFigures,
    worst,
)
from fieldapp.reckoning.sampling import CONFIDENCE, SampledBay, mean_lower_bound_mm, short_bays_at_most
from fieldapp.reckoning.vapour import vapour_class
from fieldapp.reckoning.wording import Wording


def reckon_surface(surface: CountedSurface, climate_zone: str | None, wording: Wording) -> SurfaceResult:
    """Everything that is reckoned of one surface.

    Args:
        surface: The surface as counted.
        climate_zone: Climate zone of the job, '1A' to '8', or None.
        wording: How quantities are written in the checks.
    """
    because = _unproven_because(surface)
    series_rsi = films_rsi(surface.assembly, surface.film_in_rsi, surface.film_out_rsi)
    limit_mm = point_limit_mm(surface.foam, surface.spec, surface.vapour)
    min_pass_mm = (surface.foam.min_pass_mm if surface.foam else None) or 0.0
    figures = [bay_figures(bay, surface.foam, series_rsi) for bay in surface.bays]
    lacks = [
        bay_shortfall(bay, found, surface.spec, limit_mm, min_pass_mm)
        for bay, found in zip(surface.bays, figures, strict=True)
    ]
    sums = _sums(figures)
    max_depth_mm = greatest_depth_mm(surface)
    bays = tuple(
        bay_result(surface, bay, found, lack, series_rsi, max_depth_mm, because is None)
        for bay, found, lack in zip(surface.bays, figures, lacks, strict=True)
    )
    bays_total = max(surface.bays_total_stated, len(bays))
    sampling = _sampling(surface, figures, bays, bays_total)
    seen = checks.Seen(
        surface=surface,
        climate_zone=climate_zone,
        bays=bays,
        bays_total=bays_total,
        points_read=sums.points_read,
        read_share=_read_share(surface, sums, bays_total),
        depth_mm=_depths(sums, figures),
        rsi=_resistances(surface, figures, sums, series_rsi),
        under_spray=_under_spray(sums, lacks),
        density=density_figures(surface.cores, surface.foam),
        max_depth_mm=max_depth_mm,
        sampling=sampling,
        unproven_because=because,
    )
    asked = checks.of_surface(seen, wording)
    return SurfaceResult(
        key=surface.key,
        place=surface.place,
        name=surface.name,
        result="unproven" if because else worst([check.result for check in asked]),
        unproven_because=because,
        bays_total=bays_total,
        bays_laid_out=len(bays),
        bays_read=sum(bay.is_read for bay in bays),
        points=sum(bay.points for bay in bays),
        points_read=sums.points_read,
        points_blocked=sum(bay.points_blocked for bay in bays),
        points_disagreeing=sum(bay.disagreeing for bay in surface.bays),
        points_read_again=sum(bay.read_again for bay in surface.bays),
        area_m2=sums.area_laid_out_m2(surface),
        area_read_m2=sums.area_m2,
        read_share=seen.read_share,
        depth_mm=seen.depth_mm,
        rsi=seen.rsi,
        u_w_m2k=_framed_u(surface, sums, figures, seen.rsi.delivered),
        under_spray=seen.under_spray,
        vapour=_vapour_figures(surface, sums, bays),
        density=seen.density,
        touch_up=_touch_up(surface, sums, lacks, limit_mm, max_depth_mm),
        sampling=sampling,
        checks=asked,
        bays=bays,
    )


def greatest_depth_mm(surface: CountedSurface) -> float | None:
    """The lower of the foam's and the surface's greatest depth; None where neither is given. [mm]"""
    given = [surface.max_depth_mm, surface.foam.max_depth_mm if surface.foam else None]
    return min((depth for depth in given if depth is not None), default=None)


def _unproven_because(surface: CountedSurface) -> str | None:
    if surface.foam is None:
        return "its foam is not described, or was removed"
    return None if surface.bays else "no bays are laid out"


@dataclass(slots=True)
class _Sums:
    points_read: int = 0
    area_m2: float = 0.0
    sum_depth_mm: float = 0.0
    area_depth: float = 0.0
    conductance: float = 0.0
    flow: float | None = 0.0

    @property
    def mean_mm(self) -> float | None:
        return self.area_depth / self.area_m2 if self.points_read else None

    def area_laid_out_m2(self, surface: CountedSurface) -> float:
        total = 0.0
        for bay in surface.bays:
            total += bay.area_m2
        return total


def _sums(figures: list[BayFigures]) -> _Sums:
    sums = _Sums()
    for bay in figures:
        sums.points_read += bay.points_read
        sums.area_m2 += bay.area_m2
        sums.sum_depth_mm += bay.sum_depth_mm
        sums.area_depth += bay.area_depth
        sums.conductance += bay.conductance
        sums.flow = None if sums.flow is None or bay.flow is None else sums.flow + bay.flow
    return sums


def _read_share(surface: CountedSurface, sums: _Sums, bays_total: int) -> float:
    """Share of the surface that was read: of the area laid out, and that as the bays laid out are of all. (0..1)"""
    area_m2 = sums.area_laid_out_m2(surface)
    return sums.area_m2 / area_m2 * len(surface.bays) / bays_total if area_m2 > 0.0 else 0.0


def _depths(sums: _Sums, figures: list[BayFigures]) -> DepthFigures:
    sd = None
    if sums.points_read > 1:
        middle = sums.sum_depth_mm / sums.points_read
        squares = 0.0
        for bay in figures:
            if bay.points_read:
                off = bay.sum_depth_mm / bay.points_read - middle
                squares += bay.squares_mm2 + bay.points_read * off * off
        sd = sqrt(squares / (sums.points_read - 1))
    return DepthFigures(
        mean=sums.mean_mm,
        min=min((bay.lowest_mm for bay in figures if bay.lowest_mm is not None), default=None),
        max=max((bay.high_mm for bay in figures if bay.high_mm is not None), default=None),
        sd=sd,
    )


def _resistances(
    surface: CountedSurface, figures: list[BayFigures], sums: _Sums, series_rsi: float
) -> ResistanceFigures:
    foam, mean_mm = surface.foam, sums.mean_mm
    if foam is None or mean_mm is None:
        return ResistanceFigures(None, None, None, None, False)
    nominal = foam.resistance.rsi(mean_mm)
    delivered = sums.area_m2 / sums.conductance - series_rsi
    in_assembly = None
    layers_rsi = _layers_rsi(surface)
    if surface.layers and layers_rsi is not None:
        with_layers = series_rsi + layers_rsi
        in_assembly = 1.0 / _clear_u(surface, sums, with_layers) - with_layers
    return ResistanceFigures(
        nominal=nominal,
        delivered=delivered,
        uneven_loss=nominal - delivered,
        in_assembly=in_assembly,
        beyond_tested=any(bay.beyond_tested for bay in figures),
    )


def _layers_rsi(surface: CountedSurface) -> float | None:
    """All layers but the foam; None where one of them has no resistance given. [m2K/W]"""
    total = 0.0
    for layer in surface.layers:
        if layer.is_foam:
            continue
        if layer.rsi is None:
            return None
        total += layer.rsi
    return total


def _clear_u(surface: CountedSurface, sums: _Sums, series_rsi: float) -> float:
    """U through the foam alone, between framing, with another resistance in series than the films. [W/(m2K)]"""
    assert surface.foam is not None
    rsi = surface.foam.resistance.rsi
    total = 0.0
    for bay in surface.bays:
        for depth, area in zip(bay.depths_mm, bay.areas_m2, strict=True):
            if depth is not None:
                total += conductance(area, series_rsi + rsi(depth))
    return total / sums.area_m2


def _framed_u(
    surface: CountedSurface, sums: _Sums, figures: list[BayFigures], delivered_rsi: float | None
) -> float | None:
    """U of the surface with its framing; None where anything for it is not given, or outside the steel table."""
    framing, layers_rsi = surface.framing, _layers_rsi(surface)
    if framing is None or layers_rsi is None or delivered_rsi is None:
        return None
    series_rsi = films_rsi(surface.assembly, surface.film_in_rsi, surface.film_out_rsi) + layers_rsi
    if framing.material == "steel":
        if framing.depth_mm is None or framing.spacing_mm is None:
            return None
        effective = steel_frame_rsi(delivered_rsi, framing.depth_mm, framing.spacing_mm)
        return None if effective is None else 1.0 / (series_rsi + effective)
    clear_u = _clear_u(surface, sums, series_rsi)
    if not isfinite(clear_u):
        return None
    if framing.material == "none":
        return clear_u
    if framing.share is None or framing.depth_mm is None:
        return None
    return wood_frame_u(clear_u, framing.share, framing.depth_mm, series_rsi)


def _under_spray(sums: _Sums, lacks: list[Shortfall]) -> UnderSpray:
    if not sums.points_read:
        return UnderSpray(None, None, None, None)
    under = deep = missing = 0.0
    for lack in lacks:
        under += lack.under_m2
        deep += lack.deep_under_m2
        missing += lack.missing_m3
    return UnderSpray(under / sums.area_m2, deep / sums.area_m2, under, missing)


def _touch_up(
    surface: CountedSurface, sums: _Sums, lacks: list[Shortfall], limit_mm: float, max_depth_mm: float | None
) -> TouchUp:
    if not sums.points_read:
        return NO_TOUCH_UP
    volume = order = after = after_order = deepest = highest = 0.0
    for lack in lacks:
        volume += lack.touch_up_m3
        order += lack.order_m3
        after += lack.area_after
        after_order += lack.area_after_order
        deepest = max(deepest, lack.deepest_mm)
        highest = max(highest, lack.highest_after_mm)
    if surface.spec.asks_mean:
        # What the mean still lacks is spread over the area read; thin places take it best, so this is a least depth.
        mean_lack = _mean_lack_mm(surface.spec.depth_mm, after / sums.area_m2)
        order_lack = _mean_lack_mm(surface.spec.depth_mm, after_order / sums.area_m2)
        volume += mean_lack * sums.area_m2 / 1000.0
        order += order_lack * sums.area_m2 / 1000.0
        deepest = max(deepest, mean_lack)
        highest = max(highest, limit_mm + mean_lack if mean_lack else 0.0)
    return touch_up(volume, order, deepest, highest, surface.foam, max_depth_mm)


def _mean_lack_mm(asked_mm: float, mean_mm: float) -> float:
    return 0.0 if depth_meets(mean_mm, asked_mm) else asked_mm - mean_mm


def _sampling(
    surface: CountedSurface, figures: list[BayFigures], bays: tuple[BayResult, ...], bays_total: int
) -> Sampling:
    read = [
        (bay, found, result) for bay, found, result in zip(surface.bays, figures, bays, strict=True) if found.is_read
    ]
    if not read or not (surface.chosen == "random" or len(read) == bays_total) or surface.foam is None:
        return Sampling(CONFIDENCE, None, None)
    sample = [
        SampledBay(bay.area_m2, found.area_depth / found.area_m2, found.variance_mm2, found.points_read)
        for bay, found, _ in read
    ]
    # Where no bay could be judged, none is known not to be short: nothing can be said of the others.
    judged = any({bay.lowest_depth, bay.vapour} & {"short", "meets"} for _, _, bay in read)
    short_read = sum(depth_or_vapour_short(result) for _, _, result in read)
    known_short = sum(depth_or_vapour_short(result) for result in bays)
    return Sampling(
        CONFIDENCE,
        mean_lower_bound_mm(sample, bays_total),
        max(known_short, short_bays_at_most(bays_total, len(read), short_read)) if judged else None,
    )


def _vapour_figures(surface: CountedSurface, sums: _Sums, bays: tuple[BayResult, ...]) -> VapourFigures:
    rule = surface.vapour.rule
    counted = rule in ("depth", "permeance")
    results = [bay.vapour for bay in bays]
    foam = surface.foam
    permeance = None
    if foam and foam.permeability_ng_m is not None and sums.points_read and sums.flow is not None:
        permeance = sums.flow * foam.permeability_ng_m * 1000.0 / sums.area_m2
    return VapourFigures(
        rule=rule,
        required_mm=surface.vapour.depth_mm if rule == "depth" else None,
        bays_meets=results.count("meets") if counted else None,
        bays_short=results.count("short") if counted else None,
        bays_unproven=results.count("unproven") if counted else None,
        permeance_ng=permeance,
        retarder_class=None if permeance is None else vapour_class(permeance),
    )
