"""What must hold for any job: laws of the reckoning on generated jobs, and its sums against numpy."""

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, fields, is_dataclass, replace

import numpy as np
import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from fieldapp.reckoning.bays import bay_figures
from fieldapp.reckoning.inputs import (
    Core,
    CountedBay,
    CountedJob,
    CountedSurface,
    Deficiencies,
    Foam,
    Framing,
    Layer,
    Place,
    Spec,
    Vapour,
)
from fieldapp.reckoning.job import reckon
from fieldapp.reckoning.limits import DEPTH_TOLERANCE_MM
from fieldapp.reckoning.resistance import PerMetre, Resistance, Table, delivered_rsi, parallel_u
from fieldapp.reckoning.results import JobResult, SurfaceResult, as_json, worst
from fieldapp.reckoning.strips import point_areas_m2, strip_shares
from fieldapp.reckoning.vapour import permeance_ng

LAWS = settings(
    max_examples=80, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large]
)
RANK = {"meets": 2, "unproven": 1, "short": 0}

# --- jobs ------------------------------------------------------------------------------------------------------------

TABLES = st.lists(st.tuples(st.integers(10, 60), st.floats(0.2, 2.0)), min_size=1, max_size=5).map(
    # Depths and resistances rise together, as on a data sheet.
    lambda steps: Table(
        tuple((float(sum(s[0] for s in steps[: k + 1])), sum(s[1] for s in steps[: k + 1])) for k in range(len(steps)))
    )
)
PER_METRE = st.floats(15.0, 55.0).map(PerMetre)
#: Whole millimetres, sixteenths of an inch, and anything; none so near to bare that a permeance means nothing.
DEPTHS = st.one_of(
    st.integers(0, 150).map(float), st.integers(0, 96).map(lambda number: number / 16 * 25.4), st.floats(1.0, 150.0)
)
REASONS = st.sampled_from(["pipe-or-box", "no-access", "unsafe", "already-covered"])


@st.composite
def positions(draw: st.DrawFn, count: int, length_mm: float) -> list[float] | None:
    """Where the points of a row or column are, or None where they are equally spaced."""
    if draw(st.booleans()):
        return None
    steps = draw(st.lists(st.floats(0.05, 1.0), min_size=count + 1, max_size=count + 1))
    edges = np.cumsum(steps) / sum(steps) * length_mm
    return [float(at) for at in edges[:-1]]


@st.composite
def bays(draw: st.DrawFn, number: int) -> CountedBay:
    """A bay: even, fully read, or with points unread or blocked."""
    rows, cols = draw(st.integers(1, 4)), draw(st.integers(1, 3))
    width_mm, height_mm = draw(st.sampled_from([368.3, 571.5, 1000.0])), draw(st.floats(300.0, 3000.0))
    row_shares = strip_shares(draw(positions(rows, height_mm)), rows, height_mm)
    col_shares = strip_shares(draw(positions(cols, width_mm)), cols, width_mm)
    area_m2 = width_mm * height_mm / 1e6
    count = rows * cols
    depths: list[float | None]
    if draw(st.integers(0, 3)) == 0:
        depths = [draw(DEPTHS)] * count
    else:
        depths = list(draw(st.lists(DEPTHS, min_size=count, max_size=count)))
    blocked: dict[int, str] = {}
    if draw(st.integers(0, 2)) == 0:
        for point in draw(st.sets(st.integers(0, count - 1))):
            depths[point] = None
            if draw(st.booleans()):
                blocked[point] = draw(REASONS)
    return CountedBay(
        key=f"bay-{number}",
        label=f"{number}",
        rows=rows,
        cols=cols,
        area_m2=area_m2,
        depths_mm=tuple(depths),
        areas_m2=point_areas_m2(area_m2, row_shares, col_shares),
        blocked=blocked,
        low_spots_mm=tuple(draw(st.lists(DEPTHS, max_size=2))) if draw(st.integers(0, 3)) == 0 else (),
    )


@st.composite
def foams(draw: st.DrawFn, resistances: st.SearchStrategy[Resistance]) -> Foam:
    return Foam(
        key="foam",
        name="Foam",
        cell=draw(st.sampled_from(["closed", "closed", "closed", "open"])),
        resistance=draw(resistances),
        permeability_ng_m=draw(st.none() | st.floats(0.5, 60.0)),
        density_nominal_kg_m3=draw(st.none() | st.floats(8.0, 50.0)),
        density_min_kg_m3=draw(st.none() | st.floats(20.0, 32.0)),
        # Odd figures, so that no pass ends where rounding could decide.
        max_pass_mm=draw(st.sampled_from([None, 37.123, 50.017])),
        min_pass_mm=draw(st.sampled_from([None, 12.7])),
        max_depth_mm=draw(st.none() | st.floats(60.0, 200.0)),
        loss_share=draw(st.sampled_from([None, 0.15])),
    )


@st.composite
def vapours(draw: st.DrawFn) -> Vapour:
    rule = draw(st.sampled_from(["depth", "depth", "permeance", "separate", "none"]))
    if rule == "depth":
        depth_mm, measure = draw(st.sampled_from([50.8, 63.5, 76.2])), draw(st.sampled_from(["lowest", "bay-mean"]))
        return Vapour(rule=rule, depth_mm=depth_mm, measure=measure, by_sample=draw(st.booleans()))
    if rule == "permeance":
        return Vapour(rule=rule, perm_ng=draw(st.floats(10.0, 200.0)), by_sample=draw(st.booleans()))
    if rule == "separate":
        side = draw(st.sampled_from(["inside", "outside"]))
        perm_ng = draw(st.sampled_from([3.0, 57.2, 100.0]))
        return Vapour(rule=rule, retarder_name="film", retarder_perm_ng=perm_ng, retarder_side=side)
    return Vapour(rule=rule, reason="not asked", accepted_by=draw(st.sampled_from([None, "the code official"])))


@st.composite
def specs(draw: st.DrawFn) -> Spec:
    basis = draw(st.sampled_from([None, "minimum", "minimum", "average", "average-with-floor"]))
    depth_mm = draw(st.sampled_from([50.8, 76.2, 88.9]))
    return Spec(
        depth_mm=depth_mm,
        basis=basis,
        floor_mm=depth_mm - 12.7 if basis == "average-with-floor" else None,
        rsi=draw(st.none() | st.floats(0.5, 5.0)),
        r_basis=draw(st.sampled_from(["delivered", "delivered", "nominal"])),
        under_area_share_max=draw(st.sampled_from([None, 0.0, 0.05, 0.3])),
        bays_share_min=draw(st.sampled_from([1.0, 1.0, 0.2])),
        cores_min=draw(st.sampled_from([0, 0, 1])),
    )


LAYERS = (Layer("gypsum", 0.079), Layer("", is_foam=True), Layer("sheathing", 0.11))
FRAMINGS = st.sampled_from([None, Framing("wood", 406.4, 139.7, 0.25), Framing("steel", 406.4, 152.4), Framing("none")])
CORES = st.sampled_from([(), (Core("", "bay-0", "0", "", 3.0, 100e-6),), (Core("", "bay-0", "0", "", 2.2, 100e-6),)])


@st.composite
def surfaces(draw: st.DrawFn, key: str, resistances: st.SearchStrategy[Resistance]) -> CountedSurface:
    laid_out = draw(st.integers(1, 5))
    return CountedSurface(
        key=key,
        name=key,
        assembly=draw(st.sampled_from(["wall", "sloped-roof", "floor", "rim"])),
        foam=draw(foams(resistances)),
        bays_total_stated=laid_out + draw(st.sampled_from([0, 0, 0, 1, 30])),
        spec=draw(specs()),
        vapour=draw(vapours()),
        bays=tuple(draw(bays(number)) for number in range(laid_out)),
        place="place",
        chosen=draw(st.sampled_from([None, "all", "random", "where-it-looked-thin"])),
        cores=draw(CORES),
        deficiencies=draw(st.sampled_from([Deficiencies(), Deficiencies(accepted=1), Deficiencies(open=1)])),
        max_depth_mm=draw(st.sampled_from([None, 139.7])),
        framing=draw(FRAMINGS),
        layers=draw(st.sampled_from([(), LAYERS])),
    )


@st.composite
def jobs(draw: st.DrawFn, resistances: st.SearchStrategy[Resistance] = PER_METRE | TABLES, most: int = 2) -> CountedJob:
    """A job of one surface or two; held clear of the edges where rounding of a sum alone could decide."""
    job = CountedJob(
        key="job",
        name="Job",
        units=draw(st.sampled_from(["ip", "si"])),
        purpose="inspection",
        surfaces=tuple(draw(surfaces(f"surface-{n}", resistances)) for n in range(draw(st.integers(1, most)))),
        places=(Place("place", "Place"), Place("empty", "Empty")),
        climate_zone=draw(st.sampled_from([None, "3A", "4C", "6"])),
    )
    assume(all(clear_of_edges(surface) for surface in job.surfaces))
    return job


def read_points(bay: CountedBay) -> list[tuple[float, float]]:
    """(depth in mm, area in m2) of the points that were read."""
    return [(d, a) for d, a in zip(bay.depths_mm, bay.areas_m2, strict=True) if d is not None]


def arrays(*bays_: CountedBay) -> tuple[np.ndarray, np.ndarray]:
    """Depths and areas of all points read, for numpy."""
    points = [point for bay in bays_ for point in read_points(bay)]
    return np.array([d for d, _ in points]), np.array([a for _, a in points])


def clear_of_edges(surface: CountedSurface) -> bool:
    """False where a mean lies within a billionth of a millimetre of where a depth begins to meet its limit."""
    limits = [limit for limit in (surface.spec.depth_mm, surface.vapour.depth_mm) if limit is not None]
    for group in (surface.bays, *((bay,) for bay in surface.bays)):
        depths, areas = arrays(*group)
        if depths.size:
            mean = float(np.average(depths, weights=areas))
            if any(abs(mean - (limit - DEPTH_TOLERANCE_MM)) < 1e-9 for limit in limits):
                return False
    return True


def with_bays(job: CountedJob, index: int, new: Sequence[CountedBay]) -> CountedJob:
    """The job with other bays in one of its surfaces."""
    surface = replace(job.surfaces[index], bays=tuple(new))
    return replace(job, surfaces=(*job.surfaces[:index], surface, *job.surfaces[index + 1 :]))


def with_bay(job: CountedJob, index: int, place: int, new: CountedBay) -> CountedJob:
    """The job with one bay changed."""
    old = job.surfaces[index].bays
    return with_bays(job, index, (*old[:place], new, *old[place + 1 :]))


@dataclass(frozen=True, slots=True)
class At:
    """A point of a job."""

    surface: int
    bay: int
    point: int
    depth_mm: float


def points_read(job: CountedJob) -> list[At]:
    return [
        At(s, b, p, depth)
        for s, surface in enumerate(job.surfaces)
        for b, bay in enumerate(surface.bays)
        for p, depth in enumerate(bay.depths_mm)
        if depth is not None
    ]


def with_depth(job: CountedJob, at: At, depth_mm: float | None) -> CountedJob:
    """The job with another depth, or none, at one point."""
    bay = job.surfaces[at.surface].bays[at.bay]
    depths = (*bay.depths_mm[: at.point], depth_mm, *bay.depths_mm[at.point + 1 :])
    return with_bay(job, at.surface, at.bay, replace(bay, depths_mm=depths))


def results(found: JobResult) -> list[tuple[str, str, str]]:
    """Every check of every surface: its id, result and word."""
    return [(check.id, check.result, check.word) for surface in found.surfaces for check in surface.checks]


#: Text differs by units, and a check names bays in their order.
TEXT = frozenset({"asked", "found"})


def assert_same(ours: object, theirs: object, leaving_out: frozenset[str] = TEXT, path: str = "") -> None:
    """Two results agree: floats to 1e-9, all else exactly, what is left out aside."""
    if is_dataclass(ours) and is_dataclass(theirs):
        for field in fields(ours):
            if field.name not in leaving_out:
                here = f"{path}.{field.name}"
                assert_same(getattr(ours, field.name), getattr(theirs, field.name), leaving_out, here)
    elif isinstance(ours, tuple) and isinstance(theirs, tuple):
        assert len(ours) == len(theirs), path
        for number, (one, other) in enumerate(zip(ours, theirs, strict=True)):
            assert_same(one, other, leaving_out, f"{path}[{number}]")
    elif isinstance(ours, float) and isinstance(theirs, float):
        assert math.isclose(ours, theirs, rel_tol=1e-9, abs_tol=1e-9), (path, ours, theirs)
    else:
        assert ours == theirs, path


# --- resistance ------------------------------------------------------------------------------------------------------


@LAWS
@given(job=jobs(PER_METRE))
def test_uneven_foam_never_delivers_what_its_mean_depth_promises(job: CountedJob) -> None:
    # Jensen's inequality: equal only where all depths are.
    for surface, found in zip(job.surfaces, reckon(job).surfaces, strict=True):
        assert surface.foam is not None
        groups = [(surface.bays, found.rsi.nominal, found.rsi.delivered)]
        for bay, each in zip(surface.bays, found.bays, strict=True):
            nominal = None if each.mean_mm is None else surface.foam.resistance.rsi(each.mean_mm)
            groups.append(((bay,), nominal, each.delivered_rsi))
        for group, nominal, delivered in groups:
            depths, _ = arrays(*group)
            if nominal is None or delivered is None:
                assert not depths.size
                continue
            assert delivered <= nominal + 1e-12
            if np.ptp(depths) == 0.0:
                assert delivered == pytest.approx(nominal, rel=1e-9, abs=1e-12)
            elif np.ptp(depths) > 1.0:
                assert delivered < nominal


@LAWS
@given(bay=bays(0), foam=foams(PER_METRE | TABLES), series_rsi=st.floats(0.05, 1.0))
def test_the_sums_written_out_for_speed_are_the_plain_formulas(bay: CountedBay, foam: Foam, series_rsi: float) -> None:
    found = bay_figures(bay, foam, series_rsi)
    points = read_points(bay)
    depths, areas = [d for d, _ in points], [a for _, a in points]
    if not points:
        assert found.delivered_rsi(series_rsi) is found.permeance_ng(foam) is found.mean_mm is found.low_mm is None
        return
    assert found.delivered_rsi(series_rsi) == pytest.approx(
        delivered_rsi(depths, areas, foam.resistance, series_rsi), rel=1e-9, abs=1e-12
    )
    assert found.area_m2 / found.conductance == pytest.approx(
        1.0 / parallel_u(depths, areas, foam.resistance, series_rsi), rel=1e-12
    )
    if foam.permeability_ng_m is None:
        assert found.permeance_ng(foam) is None
    else:
        plain = permeance_ng(depths, areas, foam.permeability_ng_m)
        assert found.permeance_ng(foam) == (None if plain is None else pytest.approx(plain, rel=1e-12))
    assert found.beyond_tested == any(foam.resistance.beyond_tested(depth) for depth in depths)
    assert (found.low_mm, found.high_mm) == (min(depths), max(depths))
    assert found.lowest_mm == min([*depths, *bay.low_spots_mm])
    assert (found.variance_mm2 is None) == (len(depths) < 2)
    if len(depths) > 1:
        assert found.variance_mm2 == pytest.approx(float(np.var(depths, ddof=1)), rel=1e-9, abs=1e-9)


# --- sums ------------------------------------------------------------------------------------------------------------


@LAWS
@given(bay=bays(0))
def test_the_areas_of_points_are_the_area_of_their_bay(bay: CountedBay) -> None:
    assert math.fsum(bay.areas_m2) == pytest.approx(bay.area_m2, rel=1e-12)
    assert min(bay.areas_m2) > 0.0


@LAWS
@given(job=jobs())
def test_means_spreads_and_shares_are_numpy_s(job: CountedJob) -> None:
    for surface, found in zip(job.surfaces, reckon(job).surfaces, strict=True):
        depths, areas = arrays(*surface.bays)
        assert found.points_read == depths.size
        assert found.area_m2 == pytest.approx(math.fsum(bay.area_m2 for bay in surface.bays), rel=1e-12)
        assert found.area_read_m2 == pytest.approx(float(areas.sum()), rel=1e-12)
        if not depths.size:
            assert found.depth_mm.mean is found.depth_mm.sd is found.under_spray.area_share is None
            continue
        assert found.depth_mm.mean == pytest.approx(float(np.average(depths, weights=areas)), rel=1e-12)
        assert found.depth_mm.max == depths.max()
        assert found.depth_mm.min == min([*depths, *(low for bay in surface.bays for low in bay.low_spots_mm)])
        if depths.size > 1:
            assert found.depth_mm.sd == pytest.approx(float(depths.std(ddof=1)), rel=1e-9, abs=1e-9)
        asked = surface.spec.depth_mm
        under = depths < asked - DEPTH_TOLERANCE_MM
        deep = depths < 0.7 * asked - DEPTH_TOLERANCE_MM
        area = float(areas.sum())
        assert found.under_spray.area_share == pytest.approx(float(areas[under].sum()) / area, abs=1e-12)
        assert found.under_spray.deep_area_share == pytest.approx(float(areas[deep].sum()) / area, abs=1e-12)
        missing_m3 = float((areas * (asked - depths))[under].sum()) / 1000.0
        assert found.under_spray.missing_m3 == pytest.approx(missing_m3, abs=1e-12)


@LAWS
@given(job=jobs())
def test_a_touch_up_is_numpy_s_sum_of_what_is_missing(job: CountedJob) -> None:
    for surface, found in zip(job.surfaces, reckon(job).surfaces, strict=True):
        depths, areas = arrays(*surface.bays)
        if not depths.size:
            continue
        spec, foam = surface.spec, surface.foam
        assert foam is not None
        limit = {"average": 0.0, "average-with-floor": spec.floor_mm}.get(spec.basis or "", spec.depth_mm) or 0.0
        if surface.vapour.rule == "depth" and foam.cell == "closed":
            limit = max(limit, surface.vapour.depth_mm or 0.0)
        lack = np.where(depths < limit - DEPTH_TOLERANCE_MM, limit - depths, 0.0)
        sprayed = np.where(lack > 0.0, np.maximum(lack, foam.min_pass_mm or 0.0), 0.0)
        area = float(areas.sum())
        volume, order = float((areas * lack).sum()), float((areas * sprayed).sum())
        if spec.basis in ("average", "average-with-floor"):
            for added, in_place in ((lack, True), (sprayed, False)):
                mean_lack = spec.depth_mm - float(np.average(depths + added, weights=areas))
                assume(abs(mean_lack - DEPTH_TOLERANCE_MM) > 1e-9)
                # A mean that meets, within its twentieth of a millimetre, lacks nothing.
                more = area * mean_lack if mean_lack > DEPTH_TOLERANCE_MM else 0.0
                volume, order = (volume + more, order) if in_place else (volume, order + more)
        assert found.touch_up.volume_m3 == pytest.approx(volume / 1000.0, rel=1e-9, abs=1e-12)
        lost = 1.0 - (foam.loss_share or 0.0)
        assert found.touch_up.order_m3 == pytest.approx(order / 1000.0 / lost, rel=1e-9, abs=1e-12)
        # Bay by bay the gaps at points add up to the surface's.
        gaps = math.fsum(each.touch_up.volume_m3 or 0.0 for each in found.bays)
        assert gaps == pytest.approx(float((areas * lack).sum()) / 1000.0, rel=1e-9, abs=1e-12)


@LAWS
@given(job=jobs())
def test_depths_capped_at_what_is_asked_have_no_greater_mean(job: CountedJob) -> None:
    for surface, found in zip(job.surfaces, reckon(job).surfaces, strict=True):
        if found.depth_mm.mean is None or found.under_spray.missing_m3 is None:
            continue
        capped_mm = surface.spec.depth_mm - found.under_spray.missing_m3 * 1000.0 / found.area_read_m2
        # Depths within a twentieth of a millimetre under the limit count as full.
        assert capped_mm <= found.depth_mm.mean + DEPTH_TOLERANCE_MM + 1e-9
        assert capped_mm <= surface.spec.depth_mm + 1e-9
        assert found.under_spray.deep_area_share is not None
        assert found.under_spray.area_share is not None
        assert 0.0 <= found.under_spray.deep_area_share <= found.under_spray.area_share <= 1.0 + 1e-12


# --- what changes nothing --------------------------------------------------------------------------------------------


@LAWS
@given(job=jobs())
def test_the_same_job_in_inches_and_millimetres_has_the_same_results_and_numbers(job: CountedJob) -> None:
    ip, si = (reckon(replace(job, units=units)) for units in ("ip", "si"))
    assert results(ip) == results(si)
    assert replace(ip, units="", surfaces=()) == replace(si, units="", surfaces=())
    for one, other in zip(ip.surfaces, si.surfaces, strict=True):
        # Bit for bit: units are text and nothing else.
        assert replace(one, checks=()) == replace(other, checks=())


@LAWS
@given(job=jobs(), data=st.data())
def test_the_order_of_the_points_of_a_bay_changes_nothing(job: CountedJob, data: st.DataObject) -> None:
    index = data.draw(st.integers(0, len(job.surfaces) - 1))
    place = data.draw(st.integers(0, len(job.surfaces[index].bays) - 1))
    bay = job.surfaces[index].bays[place]
    order = data.draw(st.permutations(range(len(bay.depths_mm))))
    shuffled = replace(
        bay,
        depths_mm=tuple(bay.depths_mm[point] for point in order),
        areas_m2=tuple(bay.areas_m2[point] for point in order),
        blocked={order.index(point): reason for point, reason in bay.blocked.items()},
        low_spots_mm=bay.low_spots_mm[::-1],
    )
    assert_same(reckon(with_bay(job, index, place, shuffled)), reckon(job))


@LAWS
@given(job=jobs(), data=st.data())
def test_the_order_of_bays_and_surfaces_changes_nothing_but_their_order(job: CountedJob, data: st.DataObject) -> None:
    index = data.draw(st.integers(0, len(job.surfaces) - 1))
    before = job.surfaces[index].bays
    order = data.draw(st.permutations(range(len(before))))
    found, as_it_was = reckon(with_bays(job, index, [before[place] for place in order])), reckon(job)
    assert_same(found, as_it_was, TEXT | {"bays"})
    assert_same(found.surfaces[index].bays, tuple(as_it_was.surfaces[index].bays[place] for place in order))
    turned = reckon(replace(job, surfaces=job.surfaces[::-1]))
    assert turned.surfaces == as_it_was.surfaces[::-1]
    assert (turned.result, turned.places) == (as_it_was.result, as_it_was.places)


@LAWS
@given(job=jobs(), data=st.data())
def test_two_equal_cells_in_place_of_one_change_nothing(job: CountedJob, data: st.DataObject) -> None:
    index = data.draw(st.integers(0, len(job.surfaces) - 1))
    place = data.draw(st.integers(0, len(job.surfaces[index].bays) - 1))
    bay = job.surfaces[index].bays[place]
    # Blocked points count by number, so where there are any all cells are split.
    point = None if bay.blocked else data.draw(st.integers(0, len(bay.depths_mm) - 1))
    depths: list[float | None] = []
    areas: list[float] = []
    blocked: dict[int, str] = {}
    for old, (depth, area) in enumerate(zip(bay.depths_mm, bay.areas_m2, strict=True)):
        parts = 2 if point is None or point == old else 1
        for _ in range(parts):
            if old in bay.blocked:
                blocked[len(depths)] = bay.blocked[old]
            depths.append(depth)
            areas.append(area / parts)
    split = replace(bay, depths_mm=tuple(depths), areas_m2=tuple(areas), blocked=blocked)
    # How many points there are is told, and the spread between readings and the bound on the mean count readings.
    counts = {"points", "points_read", "points_blocked", "sd", "mean_lower_mm"}
    assert_same(reckon(with_bay(job, index, place, split)), reckon(job), TEXT | counts)


@LAWS
@given(job=jobs())
def test_a_reckoning_is_the_same_each_time_and_all_its_numbers_are_finite(job: CountedJob) -> None:
    found = reckon(job)
    assert found == reckon(job)
    assert all(math.isfinite(number) for number in numbers(as_json(found, [], "")))


def numbers(value: object) -> Iterator[float]:
    if isinstance(value, float):
        yield value
    elif isinstance(value, dict):
        for item in value.values():
            yield from numbers(item)
    elif isinstance(value, list):
        for item in value:
            yield from numbers(item)


# --- what never gets better or worse ---------------------------------------------------------------------------------


@LAWS
@given(job=jobs(), data=st.data())
def test_taking_a_reading_away_never_proves_anything(job: CountedJob, data: st.DataObject) -> None:
    points = points_read(job)
    assume(points)
    at = data.draw(st.sampled_from(points))
    before = reckon(job).surfaces[at.surface]
    found = reckon(with_depth(job, at, None)).surfaces[at.surface]
    vapour = job.surfaces[at.surface].vapour
    # Unread is never counted as meeting: not for the bay, not for its surface.
    coverage = found.check("coverage")
    assert coverage is not None
    assert coverage.result == "unproven"
    assert found.result != "meets"
    assert found.bays[at.bay].result != "meets"
    assert not found.bays[at.bay].is_read
    if vapour.rule in ("depth", "permeance"):
        assert found.bays[at.bay].vapour != "meets"
        assert (found.vapour.bays_meets or 0) <= (before.vapour.bays_meets or 0)
        check = found.check("vapour")
        assert check is not None
        assert check.result != "meets" or vapour.by_sample
    assert found.bays_read <= before.bays_read
    # Nor is it a zero: the least of what is left is not less.
    if found.depth_mm.min is not None and before.depth_mm.min is not None:
        assert found.depth_mm.min >= before.depth_mm.min


@LAWS
@given(job=jobs(), data=st.data(), more_mm=st.floats(0.01, 80.0))
def test_more_foam_at_a_point_makes_nothing_worse_but_too_deep(
    job: CountedJob, data: st.DataObject, more_mm: float
) -> None:
    points = points_read(job)
    assume(points)
    at = data.draw(st.sampled_from(points))
    deeper = with_depth(job, at, at.depth_mm + more_mm)
    before, found = reckon(job).surfaces[at.surface], reckon(deeper).surfaces[at.surface]
    for check in before.checks:
        if check.id != "over-depth":
            now = found.check(check.id)
            assert now is not None
            assert RANK[now.result] >= RANK[check.result], check.id
    for lower, upper in (
        (before.depth_mm.mean, found.depth_mm.mean),
        (before.depth_mm.min, found.depth_mm.min),
        (before.rsi.nominal, found.rsi.nominal),
        (before.rsi.delivered, found.rsi.delivered),
        (found.under_spray.area_share, before.under_spray.area_share),
        (found.under_spray.missing_m3, before.under_spray.missing_m3),
        (found.touch_up.volume_m3, before.touch_up.volume_m3),
        (found.u_w_m2k, before.u_w_m2k if found.u_w_m2k is not None else None),
        (found.vapour.permeance_ng, before.vapour.permeance_ng),
    ):
        if lower is not None and upper is not None:
            assert lower <= upper + 1e-9
    bay_before, bay_now = before.bays[at.bay], found.bays[at.bay]
    for was, now_is in ((bay_before.vapour, bay_now.vapour), (bay_before.lowest_depth, bay_now.lowest_depth)):
        assert (was is None) == (now_is is None)
        if was is not None and now_is is not None:
            assert RANK[now_is] >= RANK[was]
    # The mean and what it delivers rise, and not merely hold.
    assert found.depth_mm.mean is not None
    assert before.depth_mm.mean is not None
    assert found.depth_mm.mean > before.depth_mm.mean


@LAWS
@given(job=jobs())
def test_a_surface_is_no_better_than_its_worst_check_and_a_job_than_its_worst_surface(job: CountedJob) -> None:
    found = reckon(job)
    for surface, each in zip(job.surfaces, found.surfaces, strict=True):
        assert each.result == worst([check.result for check in each.checks])
        assert_counts_of_bays_add_up(each)
        lengths = (surface.vapour.rule in ("depth", "permeance"), each.vapour.bays_meets is not None)
        assert lengths in {(True, True), (False, False)}
        # A short bay leaves no surface that meets.
        if any(bay.result == "short" for bay in each.bays):
            assert each.result == "short"
        if each.result == "meets":
            assert all(bay.result == "meets" for bay in each.bays)
    ranks = [RANK[each.result] for each in found.surfaces]
    assert RANK[found.result] == min(ranks)
    # A place has the result of its surfaces; one without surfaces has nothing proven.
    assert [place.result for place in found.places] == [found.result, "unproven"]


def assert_counts_of_bays_add_up(found: SurfaceResult) -> None:
    counts = (found.vapour.bays_meets, found.vapour.bays_short, found.vapour.bays_unproven)
    if None not in counts:
        assert sum(count or 0 for count in counts) == found.bays_laid_out
    assert found.bays_read <= found.bays_laid_out <= found.bays_total
    assert found.points_read + found.points_blocked <= found.points
    most = found.sampling.short_bays_at_most
    if most is not None:
        short = sum("short" in (bay.vapour, bay.lowest_depth) for bay in found.bays)
        assert short <= most <= found.bays_total
