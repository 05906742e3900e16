"""What must hold for any job: properties, on jobs that hypothesis makes up."""

from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldapp.reckoning.bays import bay_figures
from fieldapp.reckoning.inputs import CountedBay, CountedSurface, Foam, Spec, Vapour
from fieldapp.reckoning.resistance import PerMetre, Table, delivered_rsi
from fieldapp.reckoning.results import Result, SurfaceResult
from fieldapp.reckoning.vapour import permeance_ng
from tests.counted import CLOSED, reckoned

DEPTH = st.one_of(st.just(0.0), st.floats(0.0, 200.0, width=32), st.sampled_from([76.2, 3 * 25.4, 76.1, 76.15, 88.9]))
AREA = st.floats(0.01, 3.0)
RANK: dict[Result, int] = {"short": 0, "unproven": 1, "meets": 2}


@st.composite
def bays(draw: st.DrawFn, label: str = "1") -> CountedBay:
    count = draw(st.integers(1, 6))
    depths = tuple(draw(st.lists(st.one_of(st.none(), DEPTH), min_size=count, max_size=count)))
    areas = tuple(draw(st.lists(AREA, min_size=count, max_size=count)))
    empty = [place for place, depth in enumerate(depths) if depth is None]
    reasons = st.sampled_from(["pipe-or-box", "no-access", "already-covered", "unsafe"])
    blocked = {place: draw(reasons) for place in empty if draw(st.booleans())}
    low_spots = tuple(draw(st.lists(DEPTH, max_size=2)))
    return CountedBay(f"b{label}", label, count, 1, sum(areas), depths, areas, blocked, low_spots)


@st.composite
def surfaces(draw: st.DrawFn, straight: bool = False) -> CountedSurface:
    count = draw(st.integers(1, 5))
    made = tuple(draw(bays(label=str(number))) for number in range(count))
    table = Table(((25.0, 0.9), (50.0, 2.0), (100.0, 4.3)))
    resistance = PerMetre(draw(st.floats(10.0, 60.0))) if straight or draw(st.booleans()) else table
    foam = replace(
        CLOSED,
        resistance=resistance,
        max_pass_mm=50.0,
        min_pass_mm=draw(st.sampled_from([0.0, 12.7])),
        loss_share=0.1,
        cell=draw(st.sampled_from(["closed", "closed", "open"])),
    )
    spec = draw(
        st.builds(
            Spec,
            depth_mm=st.sampled_from([50.8, 76.2, 101.6]),
            basis=st.sampled_from(["minimum", "average", "average-with-floor", None]),
            floor_mm=st.just(45.0),
            rsi=st.sampled_from([None, 2.0, 3.5]),
            under_area_share_max=st.sampled_from([None, 0.0, 0.2]),
        )
    )
    vapour = draw(
        st.sampled_from(
            [
                Vapour("depth", 76.2),
                Vapour("depth", 76.2, measure="bay-mean"),
                Vapour("permeance", perm_ng=57.2),
                Vapour("none", reason="x"),
            ]
        )
    )
    return CountedSurface(
        key="s",
        name="S",
        assembly=draw(st.sampled_from(["wall", "floor", "sloped-roof"])),
        foam=foam,
        bays_total_stated=count + draw(st.integers(0, 2)),
        spec=spec,
        vapour=vapour,
        bays=made,
        chosen=draw(st.sampled_from(["all", "random", None])),
        max_depth_mm=draw(st.sampled_from([None, 150.0])),
    )


def figures(result: SurfaceResult) -> list[float | None]:
    """Every figure of a surface that does not depend on the order of its parts."""
    touch_up = result.touch_up
    return [
        result.depth_mm.mean,
        result.depth_mm.min,
        result.depth_mm.max,
        result.rsi.nominal,
        result.rsi.delivered,
        result.under_spray.area_share,
        result.under_spray.deep_area_share,
        result.under_spray.missing_m3,
        result.vapour.permeance_ng,
        touch_up.volume_m3,
        touch_up.order_m3,
        touch_up.passes,
        result.area_read_m2,
    ]


def same(a: SurfaceResult, b: SurfaceResult) -> None:
    for one, other in zip(figures(a), figures(b), strict=True):
        assert (one is None) == (other is None)
        if one is not None and other is not None:
            assert one == pytest.approx(other, rel=1e-9, abs=1e-12)


@given(surfaces(straight=True))
def test_delivered_r_is_never_above_r_at_the_mean_depth(made: CountedSurface) -> None:
    rsi = reckoned(made).rsi
    if rsi.delivered is not None and rsi.nominal is not None and rsi.uneven_loss is not None:
        assert rsi.delivered <= rsi.nominal * (1 + 1e-9) + 1e-12
        assert rsi.uneven_loss >= -1e-9


@given(DEPTH, st.integers(1, 6), st.floats(10.0, 60.0))
def test_only_where_depth_is_even_does_nothing_get_lost(depth_mm: float, points: int, rsi_per_m: float) -> None:
    foam = replace(CLOSED, resistance=PerMetre(rsi_per_m))
    made = CountedBay("b", "1", points, 1, float(points), (depth_mm,) * points, (1.0,) * points, {})
    base = CountedSurface("s", "S", "wall", foam, 1, Spec(50.0, "minimum"), Vapour("none", reason="x"), (made,))
    even = reckoned(base).rsi
    assert even.uneven_loss == pytest.approx(0.0, abs=1e-9)
    if points > 1:
        uneven = replace(made, depths_mm=(depth_mm + 5.0, *made.depths_mm[1:]))
        loss = reckoned(replace(base, bays=(uneven,))).rsi.uneven_loss
        assert loss is not None
        assert loss > 1e-9


@given(surfaces(), st.data())
def test_splitting_a_cell_in_two_equal_cells_changes_nothing(made: CountedSurface, data: st.DataObject) -> None:
    number = data.draw(st.integers(0, len(made.bays) - 1))
    bay = made.bays[number]
    place = data.draw(st.integers(0, len(bay.depths_mm) - 1))
    # A blocked point would count twice among the points: the third that may be blocked is of points, not of area.
    if bay.depths_mm[place] is None:
        return
    half = bay.areas_m2[place] / 2
    split = replace(
        bay,
        rows=bay.rows + 1,
        depths_mm=(*bay.depths_mm[: place + 1], *bay.depths_mm[place:]),
        areas_m2=(*bay.areas_m2[:place], half, half, *bay.areas_m2[place + 1 :]),
        blocked={at if at < place else at + 1: reason for at, reason in bay.blocked.items()},
    )
    divided = replace(made, bays=(*made.bays[:number], split, *made.bays[number + 1 :]))
    same(reckoned(made), reckoned(divided))


@given(surfaces(), st.randoms(use_true_random=False))
def test_the_order_of_points_and_bays_changes_no_result(made: CountedSurface, chance: object) -> None:
    shuffled = []
    for bay in made.bays:
        order = list(range(len(bay.depths_mm)))
        chance.shuffle(order)  # type: ignore[attr-defined]
        shuffled.append(
            replace(
                bay,
                depths_mm=tuple(bay.depths_mm[place] for place in order),
                areas_m2=tuple(bay.areas_m2[place] for place in order),
                blocked={order.index(place): reason for place, reason in bay.blocked.items()},
            )
        )
    chance.shuffle(shuffled)  # type: ignore[attr-defined]
    before, after = reckoned(made), reckoned(replace(made, bays=tuple(shuffled)))
    same(before, after)
    assert [(c.id, c.result) for c in before.checks] == [(c.id, c.result) for c in after.checks]
    assert {bay.key: bay.result for bay in before.bays} == {bay.key: bay.result for bay in after.bays}


@given(surfaces())
def test_inches_or_millimetres_the_same_result(made: CountedSurface) -> None:
    ip, si = reckoned(made, units="ip"), reckoned(made, units="si")
    assert figures(ip) == figures(si)
    assert [(c.id, c.result, c.word) for c in ip.checks] == [(c.id, c.result, c.word) for c in si.checks]


@given(surfaces(), st.data())
def test_reading_less_never_turns_a_surface_into_one_that_meets(made: CountedSurface, data: st.DataObject) -> None:
    number = data.draw(st.integers(0, len(made.bays) - 1))
    bay = made.bays[number]
    place = data.draw(st.integers(0, len(bay.depths_mm) - 1))
    depths = (*bay.depths_mm[:place], None, *bay.depths_mm[place + 1 :])
    blocked = {at: reason for at, reason in bay.blocked.items() if at != place}
    less = replace(
        made, bays=(*made.bays[:number], replace(bay, depths_mm=depths, blocked=blocked), *made.bays[number + 1 :])
    )
    assert reckoned(less).result != "meets"


@given(surfaces(), st.data(), st.floats(0.1, 40.0))
def test_more_foam_at_a_point_never_makes_depth_vapour_or_r_worse(
    made: CountedSurface, data: st.DataObject, more_mm: float
) -> None:
    number = data.draw(st.integers(0, len(made.bays) - 1))
    bay = made.bays[number]
    place = data.draw(st.integers(0, len(bay.depths_mm) - 1))
    depth = bay.depths_mm[place]
    if depth is None:
        return
    depths = (*bay.depths_mm[:place], depth + more_mm, *bay.depths_mm[place + 1 :])
    deeper = replace(made, bays=(*made.bays[:number], replace(bay, depths_mm=depths), *made.bays[number + 1 :]))
    before, after = reckoned(made), reckoned(deeper)
    for check_id in ("mean-depth", "lowest-depth", "under-spray", "delivered-r", "vapour"):
        old, new = before.check(check_id), after.check(check_id)
        if old is not None and new is not None:
            assert RANK[new.result] >= RANK[old.result]


@given(surfaces())
def test_a_touch_up_as_reckoned_brings_every_point_to_its_limit(made: CountedSurface) -> None:
    result = reckoned(made)
    foam: Foam | None = made.foam
    limit = max(made.spec.single_point_mm, 76.2 if made.vapour.rule == "depth" and foam and foam.is_closed else 0.0)
    volume = order = 0.0
    for bay in made.bays:
        for depth, area in zip(bay.depths_mm, bay.areas_m2, strict=True):
            if depth is not None and depth < limit - 0.05:
                volume += area * (limit - depth) / 1000
                order += area * max(limit - depth, foam.min_pass_mm or 0.0) / 1000 if foam else 0.0
    if result.touch_up.volume_m3 is not None and not made.spec.asks_mean:
        assert result.touch_up.volume_m3 == pytest.approx(volume, rel=1e-9, abs=1e-15)
        assert result.touch_up.order_m3 == pytest.approx(order / 0.9, rel=1e-9, abs=1e-15)


@given(bays(), st.floats(10.0, 60.0), st.booleans())
def test_the_loops_written_for_speed_agree_with_the_formulas(bay: CountedBay, rsi_per_m: float, table: bool) -> None:
    resistance = Table(((25.0, 0.9), (50.0, 2.0), (100.0, 4.3))) if table else PerMetre(rsi_per_m)
    foam = replace(CLOSED, resistance=resistance)
    found = bay_figures(bay, foam, 0.15)
    read = [(d, a) for d, a in zip(bay.depths_mm, bay.areas_m2, strict=True) if d is not None]
    if not read:
        assert found.delivered_rsi(0.15) is None
        return
    depths, areas = [d for d, _ in read], [a for _, a in read]
    assert found.delivered_rsi(0.15) == pytest.approx(
        delivered_rsi(depths, areas, resistance, 0.15), rel=1e-12, abs=1e-12
    )
    assert foam.permeability_ng_m is not None
    expected = permeance_ng(depths, areas, foam.permeability_ng_m)
    assert found.permeance_ng(foam) == (None if expected is None else pytest.approx(expected, rel=1e-12))
    assert found.beyond_tested == any(resistance.beyond_tested(depth) for depth in depths)
    if len(depths) > 1:
        middle = sum(depths) / len(depths)
        variance = sum((d - middle) ** 2 for d in depths) / (len(depths) - 1)
        assert found.variance_mm2 == pytest.approx(variance, rel=1e-6, abs=1e-6)


@given(st.floats(0.05, 0.95), st.floats(5.0, 30.0))
@settings(max_examples=50)
def test_a_surface_of_two_depths_loses_the_square_of_their_relative_spread(share: float, mean_r: float) -> None:
    # Two levels R(1 -+ d) of total resistance in equal areas: parallel R is exactly R(1 - d^2), by hand.
    series = 1e-9
    foam = PerMetre(1000.0)
    low, high = mean_r * (1 - share), mean_r * (1 + share)
    assert delivered_rsi([low, high], [1.0, 1.0], foam, series) == pytest.approx(mean_r * (1 - share**2), rel=1e-6)
