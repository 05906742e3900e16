"""The checks of a surface in their order: when each is asked, when it meets, and the word that fits it."""

import json
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldapp.reckoning.inputs import Core, CountedBay, Deficiencies, Place, Spec, Vapour
from fieldapp.reckoning.job import reckon
from fieldapp.reckoning.results import as_json
from fieldapp.reckoning.units import MM_PER_INCH
from fieldapp.reckoning.wording import Wording
from fieldapp.records.digest import covers
from fieldapp.records.file import load
from fieldapp.records.kinds import ZONES
from tests.counted import CLOSED, OPEN, bay, check, job, reckoned, surface
from tests.jobs import FOAM, SURFACE, Notebook, taken
from tests.jobs import reckoned as jobs_reckoned
from tests.sheets import key

DEPTH_RULE = Vapour("depth", 76.2)


def even(depth_mm: float | None, label: str = "1", points: int = 3) -> CountedBay:
    return bay([depth_mm] * points, label=label)


def test_checks_stand_in_their_order() -> None:
    spec = Spec(80.0, "average-with-floor", 70.0, rsi=3.0, under_area_share_max=0.1, cores_min=1)
    found = reckoned(
        surface([even(90.0)], spec=spec, vapour=DEPTH_RULE, max_depth_mm=100.0, deficiencies=Deficiencies(accepted=1))
    )
    assert [one.id for one in found.checks] == [
        "coverage",
        "mean-depth",
        "lowest-depth",
        "under-spray",
        "delivered-r",
        "vapour",
        "density",
        "over-depth",
        "deficiencies",
    ]


def test_what_is_not_asked_is_not_checked() -> None:
    found = reckoned(surface([even(90.0)]))
    assert [one.id for one in found.checks] == ["coverage", "lowest-depth", "vapour"]


@pytest.mark.parametrize(
    ("bays", "total", "share", "result"),
    [
        ([90.0, 90.0], 2, 1.0, "meets"),
        ([90.0, None], 2, 1.0, "unproven"),
        ([90.0, 90.0], 4, 1.0, "unproven"),
        ([90.0, 90.0], 4, 0.5, "meets"),
        ([90.0, None], 4, 0.25, "unproven"),  # enough by share, but a bay laid out was not read
        ([90.0, 90.0], 1, 1.0, "meets"),  # one bay was said to be there, two are: the laid-out number is used
    ],
)
def test_coverage(bays: list[float | None], total: int, share: float, result: str) -> None:
    made = [even(depth, str(number)) for number, depth in enumerate(bays)]
    found = reckoned(surface(made, bays_total_stated=total, spec=Spec(76.2, "minimum", bays_share_min=share)))
    assert check(found, "coverage")[0] == result
    assert found.bays_total == max(total, len(bays))


def test_fewer_bays_said_than_laid_out_is_told() -> None:
    found = reckoned(surface([even(90.0, "1"), even(90.0, "2")], bays_total_stated=1)).check("coverage")
    assert found is not None
    assert "1 were said to be there, 2 are laid out" in found.found


@pytest.mark.parametrize(
    ("spec", "mean", "lowest", "result"),
    [
        (Spec(80.0, "average"), "meets", None, "meets"),
        (Spec(90.0, "average"), "short", None, "short"),
        (Spec(80.0, "average-with-floor", 60.0), "meets", "meets", "meets"),
        (Spec(80.0, "average-with-floor", 70.0), "meets", "short", "short"),
        (Spec(60.0, "minimum"), None, "meets", "meets"),
        (Spec(80.0, "minimum"), None, "short", "short"),
        (Spec(60.0), "unproven", "unproven", "unproven"),
    ],
)
def test_the_basis_says_what_the_depth_means(spec: Spec, mean: str | None, lowest: str | None, result: str) -> None:
    # Depths 65, 80, 95: mean 80, lowest 65.
    found = reckoned(surface([bay([65.0, 80.0, 95.0])], spec=spec))
    for check_id, expected in (("mean-depth", mean), ("lowest-depth", lowest)):
        one = found.check(check_id)
        assert (one.result if one else None) == expected
    assert found.result == result


def test_without_a_basis_the_figures_are_given_and_the_reason_is_said() -> None:
    found = reckoned(surface([even(60.0)], spec=Spec(76.2))).check("lowest-depth")
    assert found is not None
    assert "basis is not stated" in found.asked
    assert "2 3/8 in" in found.found


@pytest.mark.parametrize(("most", "result"), [(0.5, "meets"), (0.25, "meets"), (0.24, "short")])
def test_under_spray_is_limited_by_area(most: float, result: str) -> None:
    found = reckoned(surface([bay([70.0, 80.0, 80.0, 80.0])], spec=Spec(76.2, "average", under_area_share_max=most)))
    assert check(found, "under-spray")[0] == result


def test_an_even_depth_that_gives_exactly_the_r_asked_for_meets_it() -> None:
    rsi = CLOSED.resistance.rsi(76.2)
    found = reckoned(surface([even(76.2)], spec=Spec(76.2, "minimum", rsi=rsi)))
    assert check(found, "delivered-r")[0] == "meets"
    found = reckoned(surface([even(76.2)], spec=Spec(76.2, "minimum", rsi=rsi * (1 + 1e-6))))
    assert check(found, "delivered-r") == ("short", "short")


def test_the_contract_may_ask_nominal_r() -> None:
    uneven = bay([40.0, 112.4])
    rsi = CLOSED.resistance.rsi(76.2)
    for r_basis, result in (("nominal", "meets"), ("delivered", "short")):
        found = reckoned(surface([uneven], spec=Spec(76.2, "average", rsi=rsi, r_basis=r_basis)))
        assert check(found, "delivered-r")[0] == result


@pytest.mark.parametrize(
    ("depths", "total", "result", "counts"),
    [
        ([80.0, 80.0], 2, "meets", (2, 0, 0)),
        ([80.0, 76.1], 2, "short", (1, 1, 0)),
        ([80.0, None], 2, "unproven", (1, 0, 1)),
        ([76.1, None], 2, "short", (0, 1, 1)),
        ([80.0, 80.0], 3, "unproven", (2, 0, 0)),
    ],
)
def test_vapour_depth_is_met_only_when_every_bay_is_read_and_meets(
    depths: list[float | None], total: int, result: str, counts: tuple[int, int, int]
) -> None:
    made = [even(depth, str(number)) for number, depth in enumerate(depths)]
    found = reckoned(surface(made, bays_total_stated=total, vapour=DEPTH_RULE))
    assert check(found, "vapour")[0] == result
    assert (found.vapour.bays_meets, found.vapour.bays_short, found.vapour.bays_unproven) == counts


def test_one_thin_point_makes_a_bay_short_before_it_is_read_through() -> None:
    found = reckoned(surface([bay([70.0, None, None])], vapour=DEPTH_RULE))
    assert found.bays[0].vapour == "short"


def test_under_bay_mean_the_mean_stands_in_for_the_lowest_once_the_bay_is_read() -> None:
    rule = replace(DEPTH_RULE, measure="bay-mean")
    assert reckoned(surface([bay([60.0, 95.0])], vapour=rule)).bays[0].vapour == "meets"
    assert reckoned(surface([bay([60.0, 80.0])], vapour=rule)).bays[0].vapour == "short"
    assert reckoned(surface([bay([60.0, None])], vapour=rule)).bays[0].vapour == "unproven"


def test_by_sample_meets_with_the_number_that_may_still_be_short() -> None:
    made = [even(80.0, str(number)) for number in range(20)]
    spec = Spec(76.2, "minimum", bays_share_min=0.3)
    rule = replace(DEPTH_RULE, by_sample=True)
    found = reckoned(surface(made, bays_total_stated=60, chosen="random", spec=spec, vapour=rule)).check("vapour")
    assert found is not None
    assert (found.result, found.found) == ("meets", "by sample: up to 6 of 60 may be short")
    # Picked by eye, a sample supports nothing of the bays that were not read.
    by_eye = reckoned(surface(made, bays_total_stated=60, chosen="every-kth", spec=spec, vapour=rule))
    assert check(by_eye, "vapour")[0] == "unproven"


def test_open_cell_is_short_of_vapour_depth_at_any_depth_and_no_foam_is_ordered_for_it() -> None:
    found = reckoned(surface([even(500.0)], foam=OPEN, vapour=DEPTH_RULE))
    assert check(found, "vapour") == ("short", "short")
    thin = reckoned(surface([even(70.0)], foam=OPEN, vapour=DEPTH_RULE, spec=Spec(60.0, "minimum")))
    assert thin.touch_up.volume_m3 == 0.0
    assert check(reckoned(surface([even(None)], foam=OPEN, vapour=DEPTH_RULE)), "vapour")[0] == "unproven"


@pytest.mark.parametrize(
    ("depths", "foam", "result"),
    [
        ([60.0, 60.0], CLOSED, "meets"),  # 2 perm inch over 60 mm: 0.847 perm
        ([45.0, 45.0], CLOSED, "short"),  # 1.129 perm
        ([60.0, 0.0], CLOSED, "short"),  # bare: unbounded
        ([60.0, None], CLOSED, "unproven"),
        ([60.0, 60.0], replace(CLOSED, permeability_ng_m=None), "unproven"),
    ],
)
def test_permeance_is_held_bay_by_bay(depths: list[float | None], foam: Any, result: str) -> None:
    made = surface([bay(depths)], foam=foam, vapour=Vapour("permeance", perm_ng=57.2), spec=Spec(40.0, "average"))
    assert check(reckoned(made), "vapour")[0] == result


@pytest.mark.parametrize(
    ("perm_ng", "side", "zone", "expected"),
    [
        (57.2, "inside", "6A", ("meets", "meets")),
        (57.3, "inside", "6A", ("short", "against")),
        (20.0, "outside", "6A", ("short", "against")),
        (20.0, "outside", "4C", ("short", "against")),
        (20.0, "outside", "4A", ("meets", "meets")),
        (20.0, "outside", None, ("unproven", "unproven")),
        (20.0, "inside", None, ("meets", "meets")),
    ],
)
def test_a_separate_retarder_must_be_tight_and_inside_where_it_is_cold(
    perm_ng: float, side: str, zone: str | None, expected: tuple[str, str]
) -> None:
    # International Residential Code R702.7, editions to 2018: class I or II on the inside in zones 5 to 8 and marine 4.
    rule = Vapour("separate", retarder_name="sheet", retarder_perm_ng=perm_ng, retarder_side=side)
    found = reckoned(surface([even(140.0)], foam=OPEN, vapour=rule), climate_zone=zone)
    assert check(found, "vapour") == expected
    assert (found.vapour.bays_meets, found.bays[0].vapour) == (None, None)


@pytest.mark.parametrize(
    ("foam", "zone", "accepted_by", "result"),
    [
        (OPEN, "5A", None, "unproven"),
        (OPEN, "5A", "the code official", "meets"),
        (OPEN, "3A", None, "meets"),
        (OPEN, None, None, "unproven"),
        (CLOSED, "7", None, "meets"),
    ],
)
def test_no_vapour_rule_needs_the_code_officials_word_where_open_cell_stands_in_the_cold(
    foam: Any, zone: str | None, accepted_by: str | None, result: str
) -> None:
    rule = Vapour("none", reason="as drawn", accepted_by=accepted_by)
    assert check(reckoned(surface([even(140.0)], foam=foam, vapour=rule), climate_zone=zone), "vapour")[0] == result


def core(density: float, **more: Any) -> Core:
    return Core("r", "bay-1", "1", "C1", density, 1e-3, **more)


@pytest.mark.parametrize(
    ("cores", "least", "expected"),
    [
        ([core(32.0)], 1, ("meets", "meets")),
        ([core(32.0)], 2, ("unproven", "unproven")),
        ([], 1, ("unproven", "unproven")),
        ([core(27.0)], 1, ("short", "light")),
        ([core(39.0)], 0, ("short", "heavy")),
        ([core(27.0), core(39.0)], 0, ("short", "light and heavy")),
        # Half of a 4 g step on 28 g is 7 %: the limit of 28 lies inside the plus-minus.
        (
            [core(28.5, scale_step_g=4.0, calliper_step_mm=0.1, sizes_mm=((100.0, 1), (100.0, 1), (100.0, 1)))],
            1,
            ("unproven",) * 2,
        ),
        # A core with skin says nothing about a core density, light or not.
        ([core(50.0, with_skin=True)], 1, ("unproven", "unproven")),
        ([core(50.0, with_skin=True), core(32.0)], 1, ("meets", "meets")),
    ],
)
def test_density_core_by_core(cores: list[Core], least: int, expected: tuple[str, str]) -> None:
    found = reckoned(surface([even(90.0)], cores=tuple(cores), spec=Spec(76.2, "minimum", cores_min=least)))
    assert check(found, "density") == expected


def test_over_depth_holds_the_lower_of_the_foams_and_the_surfaces_limit() -> None:
    foam = replace(CLOSED, max_depth_mm=120.0)
    for limit, result in ((None, "short"), (130.0, "short"), (121.0, "short")):
        assert check(reckoned(surface([even(121.0)], foam=foam, max_depth_mm=limit)), "over-depth")[0] == result
    assert check(reckoned(surface([even(120.05)], foam=foam)), "over-depth")[0] == "meets"
    assert check(reckoned(surface([even(121.0)], foam=foam)), "over-depth")[1] == "too deep"


@pytest.mark.parametrize(
    ("noted", "expected"),
    [
        (Deficiencies(open=1, accepted=3), ("short", "open")),
        (Deficiencies(repaired=1), ("unproven", "unproven")),
        (Deficiencies(accepted=1), ("meets", "meets")),
    ],
)
def test_deficiencies_are_closed_one_and_all(noted: Deficiencies, expected: tuple[str, str]) -> None:
    assert check(reckoned(surface([even(90.0)], deficiencies=noted)), "deficiencies") == expected


def test_where_nothing_was_read_everything_is_unproven() -> None:
    spec = Spec(80.0, "average-with-floor", 70.0, rsi=3.0, under_area_share_max=0.1, cores_min=1)
    for rule in (
        DEPTH_RULE,
        Vapour("none", reason="r"),
        Vapour("separate", retarder_perm_ng=5.0, retarder_side="inside"),
    ):
        found = reckoned(surface([even(None)], spec=spec, vapour=rule, max_depth_mm=100.0))
        assert {one.result for one in found.checks} == {"unproven"}
        assert found.touch_up.volume_m3 is None
        assert found.rsi.delivered is None


def test_without_bays_or_foam_a_surface_is_unproven_throughout_and_says_why() -> None:
    for made, reason in ((surface([]), "no bays"), (surface([even(10.0)], foam=None), "foam")):
        found = reckoned(made)
        assert found.result == "unproven"
        assert {one.result for one in found.checks} == {"unproven"}
        assert all(reason in one.found for one in found.checks)


def test_a_job_without_surfaces_is_unproven_and_a_place_is_as_its_surfaces() -> None:
    assert reckon(job()).result == "unproven"
    good = replace(surface([even(90.0)]), key="a", place="p")
    bad = replace(surface([even(60.0)]), key="b", place="q")
    found = reckon(job(good, bad, places=(Place("p", "P"), Place("q", "Q"), Place("r", "R"))))
    assert [place.result for place in found.places] == ["meets", "short", "unproven"]
    assert found.result == "short"


def test_a_bare_point_without_any_film_conducts_all_there_is_and_stops_no_reckoning() -> None:
    # Nothing resists at the bare half, so by parallel paths nothing is resisted at all.
    made = surface([bay([0.0, 76.2])], film_in_rsi=0.0, film_out_rsi=0.0, spec=Spec(76.2, "average", rsi=1.0))
    found = reckoned(made)
    assert check(found, "delivered-r")[0] != "meets"
    assert found.rsi.delivered is None or found.rsi.delivered == pytest.approx(0.0, abs=1e-9)
    # Without a bare point no film is needed: 76.2 mm everywhere deliver what they promise.
    assert reckoned(replace(made, bays=(even(76.2),))).rsi.delivered == pytest.approx(CLOSED.resistance.rsi(76.2))


#: Zones 4C and 5 to 8.
COLD = {"4C", "5A", "5B", "5C", "6A", "6B", "7", "8"}


@pytest.mark.parametrize("zone", ZONES)
def test_the_cold_zones_are_marine_four_and_five_to_eight(zone: str) -> None:
    sheet = Vapour("separate", retarder_name="sheet", retarder_perm_ng=20.0, retarder_side="outside")
    found = reckoned(surface([even(140.0)], foam=OPEN, vapour=sheet), climate_zone=zone)
    assert check(found, "vapour") == (("short", "against") if zone in COLD else ("meets", "meets"))
    nothing = Vapour("none", reason="as drawn")
    found = reckoned(surface([even(140.0)], foam=OPEN, vapour=nothing), climate_zone=zone)
    assert check(found, "vapour")[0] == ("unproven" if zone in COLD else "meets")


@given(st.floats(0.1, 300.0), st.sampled_from([38.0, 50.8, 76.2, 88.9, 101.6]), st.sampled_from(["ip", "si"]))
def test_no_depth_or_r_that_misses_is_written_equal_to_its_limit(depth_mm: float, limit_mm: float, units: str) -> None:
    words = Wording(units)
    rsi = CLOSED.resistance.rsi(limit_mm)
    spec = Spec(limit_mm, "average-with-floor", limit_mm, rsi=rsi)
    found = reckoned(surface([even(depth_mm)], spec=spec), units=units)
    for check_id, start, limit in (
        ("mean-depth", "mean ", words.depth(limit_mm)),
        ("lowest-depth", "lowest ", words.depth(limit_mm)),
        ("delivered-r", "at most ", words.r(rsi)),
    ):
        one = found.check(check_id)
        assert one is not None
        assert one.result == "short" or depth_mm >= limit_mm - 0.05
        if one.result == "short":
            assert not one.found.startswith(f"{start}{limit}")


def test_a_job_worked_by_hand_from_its_records_to_its_numbers() -> None:
    # 40 m2K/W a metre: 75 mm give 3.0, 100 mm give 4.0; films 0.12 + 0.03. A bay of 1 m2 with 75 and 100 mm, one of 2 m2 with
    # 100 and 100 mm.
    book = Notebook.begun(bays=2)
    book.body(FOAM).update(resistance={"rsi_per_m": 40}, permeability_ng_m=2.0, density_kg_m3={"nominal": 32})
    book.body(SURFACE).update(spec={"depth_mm": 100, "basis": "minimum", "rsi": 3.8, "under_area_share_max": 0.1})
    for number, area_m2 in enumerate((1.0, 2.0)):
        book.body(book.bays[number]).update(rows=2, area_m2=area_m2)
    for number, depths in enumerate(((75.0, 100.0), (100.0, 100.0))):
        for row, depth_mm in enumerate(depths):
            book.read(row, depth_mm, bay=book.bays[number])
    job = jobs_reckoned(book.records)
    (found,) = job.surfaces
    first, second = found.bays
    # Mean (0.5 x 75 + 2.5 x 100)/3; sd of 75, 100, 100, 100 about 93.75: sqrt(468.75/3) = 12.5.
    assert (found.depth_mm.mean, found.depth_mm.sd) == pytest.approx((287.5 / 3, 12.5))
    # 0.5/3.15 + 2.5/4.15 = 0.7611398 W/K over 3 m2: 3/0.7611398 - 0.15 = 3.791457; at the mean depth 3.833333.
    assert (found.rsi.nominal, found.rsi.delivered) == pytest.approx((3.833333, 3.791457), abs=1e-6)
    assert found.rsi.uneven_loss == pytest.approx(0.041876, abs=1e-6)
    # The first bay: 1/(0.5/3.15 + 0.5/4.15) - 0.15 = 3.431507.
    assert (first.delivered_rsi, second.delivered_rsi) == pytest.approx((3.431507, 4.0), abs=1e-6)
    # 0.5 of 3 m2 lack 25 mm: 0.0125 m3, 5.2972 board feet of 0.002359737 m3, 0.4 kg at 32 kg/m3, one pass of 50.8 mm.
    assert (found.under_spray.area_share, found.under_spray.missing_m3) == pytest.approx((1 / 6, 0.0125))
    assert found.under_spray.deep_area_share == 0.0
    assert (found.touch_up.volume_m3, found.touch_up.board_feet) == pytest.approx((0.0125, 5.2972), abs=1e-4)
    assert found.touch_up.mass_kg == pytest.approx(0.4)
    assert found.touch_up.passes == 1
    # 0.5 x 2/0.075 + 0.5 x 2/0.1 = 23.3333 over 1 m2; 20 over the other 2 m2: 63.3333/3 = 21.1111.
    assert (first.permeance_ng, found.vapour.permeance_ng) == pytest.approx((23.333333, 21.111111))
    assert (found.vapour.bays_meets, found.vapour.bays_short, found.vapour.bays_unproven) == (1, 1, 0)
    # Both of two bays read: (2/3)^2 x 312.5/2 / 4 = 17.3611 = 4.166667^2; t(0.95, 1) = tan(0.45 pi) = 6.313752.
    assert found.sampling.mean_lower_mm == pytest.approx(287.5 / 3 - 6.313752 * 4.166667, abs=1e-4)
    assert found.sampling.short_bays_at_most == 1
    assert [(one.id, one.result) for one in found.checks] == [
        ("coverage", "meets"),
        ("lowest-depth", "short"),
        ("under-spray", "short"),
        ("delivered-r", "short"),
        ("vapour", "short"),
    ]
    assert (first.result, second.result, found.result, job.result) == ("short", "meets", "short", "short")


# --- touch-up: worked by hand ----------------------------------------------------------------------------------------------

SHEET = replace(CLOSED, min_pass_mm=12.7, max_pass_mm=25.4, loss_share=0.2)


def test_touch_up_under_a_minimum() -> None:
    # Asked 100 mm; 95, 90, 100, 40 on 1 m2 each: missing 5 + 10 + 60 = 75 mm m2 = 0.075 m3.
    # To order: 12.7 + 12.7 + 60 = 85.4 -> 0.0854 / 0.8 = 0.10675 m3. Passes: (60 - 0.05) / 25.4 = 2.36 -> 3. Mass: 0.075 x 32.
    found = reckoned(surface([bay([95.0, 90.0, 100.0, 40.0])], foam=SHEET, spec=Spec(100.0, "minimum"))).touch_up
    assert found.volume_m3 == pytest.approx(0.075)
    assert found.order_m3 == pytest.approx(0.10675)
    assert found.board_feet == pytest.approx(0.075 / 0.002359737216)
    assert found.mass_kg == pytest.approx(2.4)
    assert found.passes == 3


def test_touch_up_takes_the_larger_of_the_basis_and_the_vapour_depth() -> None:
    # Floor 60, vapour depth 76.2: 70 lacks 6.2; the mean of max(70, 76.2) and 90 is 83.1, over the 80 asked.
    spec = Spec(80.0, "average-with-floor", 60.0)
    found = reckoned(surface([bay([70.0, 90.0])], foam=SHEET, spec=spec, vapour=DEPTH_RULE)).touch_up
    assert found.volume_m3 == pytest.approx(0.0062)


def test_touch_up_under_an_average_adds_what_the_mean_still_lacks() -> None:
    # 70 and 80 against a mean of 80 over 2 m2: the mean, 75, lacks 5: 0.010 m3, in one pass.
    found = reckoned(surface([bay([70.0, 80.0])], foam=SHEET, spec=Spec(80.0, "average"))).touch_up
    assert found.volume_m3 == pytest.approx(0.010)
    assert found.passes == 1
    # With a floor of 78: 70 lacks 8; the mean of 78 and 80 is 79, lacks 1 more over 2 m2: 0.008 + 0.002.
    found = reckoned(surface([bay([70.0, 80.0])], foam=SHEET, spec=Spec(80.0, "average-with-floor", 78.0))).touch_up
    assert found.volume_m3 == pytest.approx(0.010)


def test_nothing_missing_takes_no_pass_and_without_the_sheets_pass_nobody_can_say() -> None:
    assert reckoned(surface([even(80.0)], foam=CLOSED)).touch_up.passes == 0
    assert reckoned(surface([even(70.0)], foam=CLOSED)).touch_up.passes is None


def test_a_touch_up_past_the_greatest_depth_says_so() -> None:
    # To 100 by passes of at least 12.7: 95 becomes 107.7, over 105.
    made = surface([bay([95.0, 100.0])], foam=SHEET, spec=Spec(100.0, "minimum"), max_depth_mm=105.0)
    assert reckoned(made).touch_up.exceeds_max_depth
    assert not reckoned(replace(made, max_depth_mm=110.0)).touch_up.exceeds_max_depth


# --- what the sample supports ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("chosen", "total", "supported"),
    [("random", 10, True), ("all", 5, True), ("all", 10, False), ("every-kth", 10, False), (None, 10, False)],
)
def test_only_a_random_sample_or_all_bays_support_a_statement(chosen: str | None, total: int, supported: bool) -> None:
    made = [bay([80.0 + number, 82.0], label=str(number)) for number in range(5)]
    found = reckoned(surface(made, bays_total_stated=total, chosen=chosen)).sampling
    assert (found.mean_lower_mm is not None) is supported
    assert (found.short_bays_at_most is not None) is supported


def test_where_no_bay_can_be_judged_none_is_counted_as_not_short() -> None:
    made = [even(80.0, str(number)) for number in range(20)]
    found = reckoned(surface(made, bays_total_stated=60, chosen="random", spec=Spec(76.2)))
    assert found.sampling.short_bays_at_most is None


def test_bays_known_to_be_short_are_among_those_that_can_be() -> None:
    made = [even(80.0, str(number)) for number in range(9)] + [bay([40.0, None], label="x")]
    found = reckoned(surface(made, bays_total_stated=10, chosen="random"))
    assert found.bays_read == 9
    assert found.sampling.short_bays_at_most == 1


# --- the JSON --------------------------------------------------------------------------------------------------------------

SHAPE: dict[str, Any] = {
    "format": 1,
    "job": {"key": 0, "name": 0, "units": 0},
    "purpose": 0,
    "result": 0,
    "refused": 0,
    "digest": 0,
    "agreement": 0,
    "places": [{"key": 0, "name": 0, "result": 0}],
}
SURFACE_SHAPE: dict[str, Any] = {
    **dict.fromkeys(
        [
            "key",
            "place",
            "name",
            "result",
            "bays_total",
            "bays_laid_out",
            "bays_read",
            "points",
            "points_read",
            "points_blocked",
        ],
        0,
    ),
    **dict.fromkeys(["points_disagreeing", "points_read_again", "area_m2", "area_read_m2", "u_w_m2k"], 0),
    "depth_mm": dict.fromkeys(["mean", "min", "max", "sd"], 0),
    "rsi": dict.fromkeys(["nominal", "delivered", "uneven_loss", "in_assembly", "beyond_tested"], 0),
    "under_spray": dict.fromkeys(["area_share", "deep_area_share", "area_m2", "missing_m3"], 0),
    "vapour": dict.fromkeys(["rule", "required_mm", "bays_meets", "bays_short", "bays_unproven", "permeance_ng"], 0),
    "density": dict.fromkeys(["cores", "mean_kg_m3", "min_kg_m3", "max_kg_m3"], 0),
    "touch_up": dict.fromkeys(["volume_m3", "board_feet", "order_board_feet", "mass_kg", "passes"], 0),
    "sampling": dict.fromkeys(["confidence", "mean_lower_mm", "short_bays_at_most"], 0),
    "checks": [dict.fromkeys(["id", "result", "word", "asked", "found"], 0)],
    "bays": [
        dict.fromkeys(
            [
                "key",
                "label",
                "result",
                "round",
                "points",
                "points_read",
                "points_blocked",
                "mean_mm",
                "min_mm",
                "max_mm",
                "delivered_rsi",
                "permeance_ng",
                "under_area_share",
                "missing_m3",
                "vapour",
                "touch_up_passes",
            ],
            0,
        )
    ],
}


def lacking(expected: Any, found: Any, path: str = "") -> list[str]:
    """Keys of the documented shape that a result does not have."""
    if isinstance(expected, dict):
        missing = [f"{path}.{name}" for name in expected if name not in found]
        return missing + [
            one for name in expected if name in found for one in lacking(expected[name], found[name], f"{path}.{name}")
        ]
    if isinstance(expected, list):
        return [one for item in found for one in lacking(expected[0], item, f"{path}[]")]
    return []


def test_the_json_has_every_key_that_is_documented() -> None:
    made = replace(surface([even(90.0)], vapour=DEPTH_RULE), place="p")
    plain = as_json(reckon(job(made, places=(Place("p", "P"),))), [], "0" * 64)
    assert lacking(SHAPE, plain) == []
    assert lacking(SURFACE_SHAPE, plain["surfaces"][0]) == []
    assert plain["format"] == 1
    assert plain["surfaces"][0]["sampling"]["confidence"] == 0.95


def test_vapor_is_spelled_as_the_jobs_units_go() -> None:
    for units, spelled in (("ip", "vapor depth"), ("si", "vapour depth")):
        found = reckoned(surface([even(90.0)], vapour=DEPTH_RULE), units=units).check("vapour")
        assert found is not None
        assert spelled in found.asked


def test_a_share_near_nothing_is_written_so_that_the_miss_is_seen() -> None:
    thin = bay([70.0, 80.0], [0.4, 99.6])
    found = reckoned(surface([thin], spec=Spec(76.2, "average", under_area_share_max=0.003))).check("under-spray")
    assert found is not None
    assert found.found.startswith("0.4 % of the")


def test_a_depth_that_misses_is_never_written_equal_to_its_limit() -> None:
    found = reckoned(surface([even(101.5)], spec=Spec(4 * MM_PER_INCH, "minimum"))).check("lowest-depth")
    assert found is not None
    assert found.result == "short"
    assert "just under 4 in" in found.found


def test_what_is_printed_of_a_file_has_every_key_that_is_documented_and_nothing_but_json() -> None:
    book = Notebook.read_through(110.0, bays=2)
    book.write("place", {"key": key(7), "name": "Unit 7"})
    book.again(SURFACE, place=key(7))
    for row, depth_mm in enumerate((108.0, 112.0, 109.0)):
        book.read(row, depth_mm, purpose="self-check")
    bad = book.read(0, -3)
    loaded = load(book.lines())
    refused = [one.as_json() for one in loaded.refused]
    plain = as_json(jobs_reckoned(book.records), refused, covers(loaded.job.records))
    assert lacking(SHAPE, plain) == []
    assert lacking(SURFACE_SHAPE, plain["surfaces"][0]) == []
    line = len(book.records)
    assert refused == [{"line": line, "id": bad, "field": "depth_mm", "found": "-3", "allowed": "0 to 1000"}]
    assert plain["digest"] == covers(taken(book.records))
    assert plain["agreement"]["pairs"] == 3
    assert json.loads(json.dumps(plain, allow_nan=False)) == plain
