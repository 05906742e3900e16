"""Which reading counts."""

import itertools
from math import cos, radians
from typing import Any

import pytest

from fieldapp.reckoning.job import reckon
from fieldapp.reckoning.results import BayResult, SurfaceResult
from fieldapp.records.counting import count
from fieldapp.records.file import load
from tests.counted import check
from tests.jobs import FOAM, SURFACE, Notebook, reckoned
from tests.sheets import Sheet, key


class Bay(Sheet):
    """One bay of three points, 4 in asked as a minimum."""

    @classmethod
    def empty(cls) -> "Bay":
        made = cls.laid_out(bays=1)
        return cls(made.records, made.bays)

    def read(self, row: int, depth_mm: float | None, number: int = 1, purpose: str = "inspection", **more: Any) -> str:
        where = {"bay": self.bays[0], "row": row, "col": 0, "round": number, "purpose": purpose}
        told = {"depth_mm": depth_mm} if depth_mm is not None else {}
        return self.write("reading", {**where, **told, **more})

    def touch_up(self, number: int) -> str:
        return self.write("touch-up", {"bay": self.bays[0], "round": number})

    def surface(self) -> SurfaceResult:
        return reckon(count(load(self.lines()).job).reckoned).surfaces[0]

    def bay(self) -> BayResult:
        return self.surface().bays[0]

    def depths(self) -> tuple[float | None, ...]:
        return count(load(self.lines()).job).reckoned.surfaces[0].bays[0].depths_mm


def test_reading_a_point_again_until_it_passes_changes_nothing() -> None:
    sheet = Bay.empty()
    for depth in (95.0, 99.0, 110.0):
        sheet.read(0, depth)
    assert sheet.depths()[0] == 95.0
    assert sheet.surface().points_read_again == 1


def test_after_a_touch_up_the_new_round_counts_point_by_point() -> None:
    sheet = Bay.empty()
    for row in range(3):
        sheet.read(row, 80.0)
    sheet.touch_up(2)
    assert sheet.depths() == (80.0, 80.0, 80.0)
    assert sheet.bay().waiting_for_reading
    assert sheet.bay().result == "short"
    sheet.read(0, 105.0, 2)
    assert sheet.depths() == (105.0, 80.0, 80.0)
    assert not sheet.bay().waiting_for_reading
    assert sheet.bay().round == 2


def test_a_round_that_no_touch_up_opened_counts_with_the_round_before_and_is_told() -> None:
    sheet = Bay.empty()
    sheet.read(0, 80.0)
    sheet.read(0, 105.0, 2)
    assert sheet.depths()[0] == 80.0
    counted = count(load(sheet.lines()).job)
    assert [record.body["depth_mm"] for record in counted.bays[sheet.bays[0]].unopened] == [105.0]
    sheet.touch_up(3)
    sheet.read(0, 110.0, 3)
    assert sheet.depths()[0] == 110.0


def test_a_withdrawn_touch_up_opens_nothing() -> None:
    sheet = Bay.empty()
    sheet.read(0, 80.0)
    opened = sheet.touch_up(2)
    sheet.read(0, 105.0, 2)
    assert sheet.depths()[0] == 105.0
    sheet.write("withdrawal", {"record": opened, "reason": "wrong bay"})
    assert sheet.depths()[0] == 80.0


def test_a_blocked_point_counts_only_where_its_round_has_no_depth() -> None:
    sheet = Bay.empty()
    sheet.read(0, None, blocked="pipe-or-box")
    assert (sheet.depths()[0], sheet.bay().points_blocked) == (None, 1)
    sheet.read(0, 90.0)
    assert (sheet.depths()[0], sheet.bay().points_blocked) == (90.0, 0)
    sheet.touch_up(2)
    sheet.read(0, None, 2, blocked="already-covered")
    assert (sheet.depths()[0], sheet.bay().points_blocked) == (None, 1)


@pytest.mark.parametrize(
    ("blocked", "is_read"),
    [
        ([], True),
        (["pipe-or-box"], True),  # a third of the points
        (["pipe-or-box", "no-access"], False),
        (["already-covered"], False),
    ],
)
def test_a_bay_is_read_with_at_most_a_third_of_its_points_blocked_and_none_covered(
    blocked: list[str], is_read: bool
) -> None:
    sheet = Bay.empty()
    for row in range(3):
        if row < len(blocked):
            sheet.read(row, None, blocked=blocked[row])
        else:
            sheet.read(row, 105.0)
    assert sheet.bay().is_read is is_read
    assert sheet.bay().result == ("meets" if is_read else "unproven")


def test_low_spots_of_the_highest_round_that_has_any_count_for_the_lowest_and_never_for_the_mean() -> None:
    sheet = Bay.empty()
    for row in range(3):
        sheet.read(row, 105.0)
    spot = {"bay": sheet.bays[0], "purpose": "inspection", "where": "stud-edge"}
    sheet.write("low-spot", {**spot, "round": 1, "depth_mm": 60.0})
    found = sheet.surface()
    assert (found.depth_mm.min, found.depth_mm.mean, found.under_spray.area_share) == (60.0, 105.0, 0.0)
    assert found.bays[0].vapour == "short"
    sheet.touch_up(2)
    for row in range(3):
        sheet.read(row, 106.0, 2)
    assert sheet.bay().result == "short"
    sheet.write("low-spot", {**spot, "round": 2, "depth_mm": 102.0})
    assert sheet.bay().result == "meets"


def test_a_probe_held_plumb_on_a_slope_reads_too_much() -> None:
    # 5.0 in plumb at 6:12 (26.565 degrees) is 4.472 in square to the deck; at 12:12, 3.536. Trigonometry.
    for pitch, square in ((26.565, 4.472), (45.0, 3.536)):
        sheet = Bay.empty()
        sheet.records[2]["body"]["probe"] = {"direction": "plumb", "pitch_deg": pitch}
        sheet.read(0, 127.0)
        (depth, *_) = sheet.depths()
        assert depth == pytest.approx(square * 25.4, abs=0.013)
        assert depth == pytest.approx(127.0 * cos(radians(pitch)))


@pytest.mark.parametrize(
    ("depths", "disagree"),
    [
        ((60.0, 72.0), False),
        ((60.0, 72.75), False),  # 12.7 mm and the twentieth that every depth has
        ((60.0, 72.8), True),
        ((200.0, 226.0), False),  # 15 % of 226 is 33.9
        ((200.0, 240.0), True),
    ],
)
def test_readings_of_a_point_disagree_beyond_half_an_inch_and_fifteen_per_cent(
    depths: tuple[float, float], disagree: bool
) -> None:
    sheet = Bay.empty()
    second = [sheet.read(1, depth) for depth in depths][-1]
    assert sheet.surface().points_disagreeing == int(disagree)
    sheet.write("withdrawal", {"record": second, "reason": "wrong"})
    assert sheet.surface().points_disagreeing == 0


def test_self_check_and_inspection_are_counted_apart() -> None:
    sheet = Bay.empty()
    for row in range(3):
        sheet.read(row, 110.0, purpose="self-check")
    job = load(sheet.lines()).job
    assert count(job).reckoned.purpose == "self-check"
    assert sheet.bay().result == "meets"
    sheet.read(0, 90.0)
    counted = count(load(sheet.lines()).job).reckoned
    assert counted.purpose == "inspection"
    assert sheet.depths() == (90.0, None, None)
    assert reckon(counted).agreement is None


def test_agreement_pairs_points_that_were_read_for_both_in_one_round() -> None:
    sheet = Bay.empty()
    for row, (ours, theirs) in enumerate(((100.0, 103.0), (95.0, 99.0), (90.0, 90.0))):
        sheet.read(row, ours)
        sheet.read(row, ours + 1.0)
        sheet.read(row, theirs, purpose="self-check")
    sheet.touch_up(2)
    sheet.read(0, 120.0, 2)
    found = reckon(count(load(sheet.lines()).job).reckoned).agreement
    assert found is not None
    # Differences -3, -4, 0 of the lowest in round 1; round 2 has no pair. Mean -7/3; sd sqrt(13/3) = 2.0817.
    assert found.pairs == 3
    assert found.bias_mm == pytest.approx(-7 / 3)
    assert found.sd_mm == pytest.approx(2.081666, abs=1e-6)


def test_positions_of_rows_give_the_points_their_strips() -> None:
    sheet = Bay.empty()
    sheet.records[3]["body"]["rows_at_mm"] = [0.0, 1219.2, 2438.4]
    areas = count(load(sheet.lines()).job).reckoned.surfaces[0].bays[0].areas_m2
    gross = 0.3683 * 2.4384
    assert areas == pytest.approx((gross / 4, gross / 2, gross / 4))


def test_the_area_that_was_given_goes_before_width_times_height_and_the_opening_comes_off() -> None:
    sheet = Bay.empty()
    sheet.records[3]["body"].update(area_m2=2.0, opening_m2=0.5)
    bay = count(load(sheet.lines()).job).reckoned.surfaces[0].bays[0]
    assert bay.area_m2 == 1.5
    assert sum(bay.areas_m2) == pytest.approx(1.5)


def test_only_an_inspector_closes_a_deficiency() -> None:
    sheet = Bay.empty()
    for row in range(3):
        sheet.read(row, 105.0)
    deficiency = sheet.write("deficiency", {"surface": key(3), "sort": "gap", "severity": "repair"})
    sheet.write("deficiency", {"surface": key(3), "sort": "overspray", "severity": "note"})
    states = []
    for step in ("open", "repaired", "by the applicator", "by the inspector"):
        if step == "repaired":
            repair = sheet.write("repair", {"deficiency": deficiency})
        elif step == "by the applicator":
            sheet.write("acceptance", {"repair": repair, "role": "applicator"})
        elif step == "by the inspector":
            sheet.write("acceptance", {"repair": repair, "role": "inspector"})
        check = sheet.surface().check("deficiencies")
        assert check is not None
        states.append((check.result, check.word))
    assert states == [("short", "open"), ("unproven", "unproven"), ("unproven", "unproven"), ("meets", "meets")]


@pytest.mark.parametrize(
    ("opened", "written", "counts_with"),
    [((), 2, 1), ((), 9, 1), ((2,), 3, 2), ((3,), 2, 1), ((3,), 3, 3), ((2, 3), 3, 3), ((2, 5), 4, 2)],
)
def test_a_reading_counts_with_the_last_round_that_was_opened_up_to_its_own(
    opened: tuple[int, ...], written: int, counts_with: int
) -> None:
    book = Notebook.begun()
    for number in opened:
        book.touch_up(number)
    book.read(0, 90.0, round=written)
    (bay,) = reckoned(book.records).surfaces[0].bays
    assert bay.round == counts_with
    flagged = count(load(book.lines()).job).bays[book.bays[0]].unopened
    assert len(flagged) == int(counts_with != written)


def test_a_touch_up_of_another_bay_opens_nothing_here() -> None:
    book = Notebook.read_through(80.0, bays=2)
    book.touch_up(2, bay=1)
    book.read_bay(0, 110.0, round=2)
    first, second = reckoned(book.records).surfaces[0].bays
    assert (first.min_mm, first.round, first.waiting_for_reading) == (80.0, 1, False)
    assert (second.min_mm, second.round, second.waiting_for_reading) == (80.0, 1, True)


def test_a_wrong_reading_is_withdrawn_and_the_next_lowest_counts() -> None:
    book = Notebook.begun()
    wrong, low, _ = (book.read(0, depth) for depth in (9.0, 90.0, 95.0))
    lowest = []
    for record in (wrong, low):
        book.withdraw(record)
        found = reckoned(book.records).surfaces[0]
        lowest.append((found.depth_mm.min, found.points_read_again))
    assert lowest == [(90.0, 1), (95.0, 0)]


def test_no_clock_decides_which_reading_of_a_round_counts() -> None:
    for depths in ((90.0, 110.0), (110.0, 90.0)):
        book = Notebook.begun()
        for depth in depths:
            book.read(0, depth)
        assert reckoned(book.records).surfaces[0].depth_mm.max == 90.0


def test_low_spots_are_counted_by_their_own_purpose_and_round() -> None:
    book = Notebook.read_through(110.0)
    book.spot(40.0, purpose="self-check")
    assert reckoned(book.records).surfaces[0].depth_mm.min == 110.0
    # Round 2 was opened by nothing: its low spot counts with round 1, and the lower of the two with it.
    book.spot(70.0)
    book.spot(60.0, round=2)
    assert reckoned(book.records).surfaces[0].bays[0].low_spot_mm == 60.0
    book.touch_up(2)
    assert reckoned(book.records).surfaces[0].bays[0].low_spot_mm == 60.0
    book.spot(104.0, round=2)
    assert reckoned(book.records).surfaces[0].bays[0].low_spot_mm == 60.0
    book.touch_up(3)
    book.spot(105.0, round=3)
    assert reckoned(book.records).surfaces[0].bays[0].low_spot_mm == 105.0


def test_a_low_spot_read_plumb_is_no_deeper_than_it_is() -> None:
    # 150 mm read plumb at 60 degrees is 75 mm square to the deck: under a vapour depth of 76.2 mm.
    book = Notebook.begun()
    book.body(SURFACE)["probe"] = {"direction": "plumb", "pitch_deg": 60}
    book.read_bay(0, 240.0)
    assert reckoned(book.records).surfaces[0].bays[0].vapour == "meets"
    book.spot(150.0)
    found = reckoned(book.records).surfaces[0]
    assert found.depth_mm.min == pytest.approx(75.0)
    assert found.depth_mm.mean == pytest.approx(120.0)
    assert found.bays[0].vapour == "short"


def test_a_job_without_an_inspection_reading_that_stands_rests_on_the_self_check() -> None:
    book = Notebook.begun()
    book.read_bay(0, 110.0, purpose="self-check")
    inspected = book.read(0, 90.0)
    assert reckoned(book.records).purpose == "inspection"
    book.withdraw(inspected)
    found = reckoned(book.records)
    assert (found.purpose, found.result, found.agreement) == ("self-check", "meets", None)


def test_agreement_pairs_each_round_by_itself() -> None:
    book = Notebook.begun()
    book.touch_up(2)
    # Inspection less self-check: 100 - 104 in round 1, 121 - 120 in round 2. What is blocked or read once has no pair.
    for ours, theirs, number in ((100.0, 104.0, 1), (121.0, 120.0, 2)):
        book.read(0, ours, round=number)
        book.read(0, theirs, round=number, purpose="self-check")
    book.read(1, blocked="no-access")
    book.read(1, 90.0, purpose="self-check")
    book.read(2, 90.0, round=2)
    book.read(2, 95.0, purpose="self-check")
    found = reckoned(book.records).agreement
    assert found is not None
    # Mean (-4 + 1)/2 = -1.5; sd = 5/sqrt(2) = 3.535534; limits -1.5 -+ 1.96 sd = -8.429646 and 5.429646.
    assert (found.pairs, found.bias_mm) == (2, -1.5)
    assert (found.lower_mm, found.upper_mm) == pytest.approx((-8.429646, 5.429646), abs=1e-6)


def test_of_two_blocked_readings_and_a_depth_the_depth_counts_whatever_came_last() -> None:
    told: tuple[dict[str, Any], ...] = ({"blocked": "pipe-or-box"}, {"blocked": "no-access"}, {"depth_mm": 105.0})
    for order in itertools.permutations(told):
        book = Notebook.begun()
        for found in order:
            book.read(0, **found)
        bay = reckoned(book.records).surfaces[0].bays[0]
        assert (bay.min_mm, bay.points_read, bay.points_blocked) == (105.0, 1, 0)


def test_a_deficiency_of_a_bay_is_one_of_its_surface_and_leaves_with_the_bay() -> None:
    book = Notebook.read_through(110.0, bays=2)
    stop = book.deficiency("stop", bay=book.bays[1])
    assert check(reckoned(book.records).surfaces[0], "deficiencies") == ("short", "open")
    # Two repairs were proposed; an inspector accepts the second.
    book.repair(stop)
    acceptance = book.accept(book.repair(stop))
    assert check(reckoned(book.records).surfaces[0], "deficiencies") == ("meets", "meets")
    book.withdraw(acceptance)
    assert check(reckoned(book.records).surfaces[0], "deficiencies") == ("unproven", "unproven")
    book.remove(book.bays[1])
    assert reckoned(book.records).surfaces[0].check("deficiencies") is None


def test_cores_are_weighed_by_the_volume_of_their_method() -> None:
    # By hand: pi/4 x 50^2 x 40 mm = 78.5398 cm3, 2.5 g: 31.8310 kg/m3. 50 x 50 x 40 mm = 100 cm3, 3.2 g: 32. 100 ml, 3.3 g: 33.
    book = Notebook.read_through(110.0)
    book.core(2.5, method="cylinder", diameter_mm=50, length_mm=40)
    book.core(3.2, method="prism", width_mm=50, length_mm=50, depth_mm=40)
    book.core(3.3)
    gone = book.core(9.9)
    book.withdraw(gone)
    found = reckoned(book.records).surfaces[0].density
    assert found.cores == 3
    assert (found.min_kg_m3, found.max_kg_m3) == pytest.approx((31.830989, 33.0))
    assert found.mean_kg_m3 == pytest.approx((31.830989 + 32.0 + 33.0) / 3)


@pytest.mark.parametrize(("least", "expected"), [(31.5, "unproven"), (31.0, "meets"), (33.0, "light")])
def test_a_core_is_only_as_sure_as_its_scale_and_calliper(least: float, expected: str) -> None:
    # Steps 0.1 g and 0.1 mm on 2.5 g, 50 and 40 mm: sqrt((0.05/2.5)^2 + (2 x 0.05/50)^2 + (0.05/40)^2) = 2.0138 %, and that of
    # 31.831 kg/m3 is 0.641: between 31.190 and 32.472.
    book = Notebook.read_through(110.0)
    book.body(FOAM)["density_kg_m3"] = {"min": least}
    steps = {"scale_step_g": 0.1, "calliper_step_mm": 0.1}
    book.core(2.5, method="cylinder", diameter_mm=50, length_mm=40, **steps)
    assert check(reckoned(book.records).surfaces[0], "density")[1] == expected
