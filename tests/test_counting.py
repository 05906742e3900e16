"""Which reading counts."""

from math import cos, radians
from typing import Any

import pytest

from fieldapp.reckoning.job import reckon
from fieldapp.reckoning.results import BayResult, SurfaceResult
from fieldapp.records.counting import count
from fieldapp.records.file import load
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
