"""Folding: any order, any repeats, any split of the same records give one and the same job, and the input is not changed."""

import copy
import json
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldapp.reckoning.job import reckon
from fieldapp.reckoning.results import as_json
from fieldapp.records.counting import count
from fieldapp.records.digest import covers
from fieldapp.records.file import load
from fieldapp.records.fold import NoJobError, fold
from fieldapp.records.job import Job
from fieldapp.records.record import Record
from tests.jobs import FOAM, SURFACE, Notebook, reckoned, taken
from tests.sheets import Sheet, key


@st.composite
def stories(draw: st.DrawFn) -> Sheet:
    """A job with a history: things described anew and removed, facts of all sorts, withdrawals of withdrawals, stray facts."""
    sheet = Sheet.laid_out(bays=3)
    about = {record["body"]["key"]: record["body"] for record in sheet.records if "key" in record["body"]}
    facts: list[str] = []
    for _ in range(draw(st.integers(0, 14))):
        bay = draw(st.sampled_from([*sheet.bays, key(999)]))
        what = draw(
            st.sampled_from(
                [
                    "reading",
                    "reading",
                    "reading",
                    "low-spot",
                    "touch-up",
                    "anew",
                    "removed",
                    "withdrawal",
                    "core",
                    "deficiency",
                ]
            )
        )
        number = draw(st.integers(1, 3))
        depth = draw(st.sampled_from([0.0, 60.0, 76.2, 101.6, 120.0]))
        purpose = draw(st.sampled_from(["inspection", "self-check"]))
        if what == "reading":
            where = {"bay": bay, "row": draw(st.integers(0, 3)), "col": 0, "round": number, "purpose": purpose}
            facts.append(sheet.write("reading", {**where, "depth_mm": depth}))
        elif what == "low-spot":
            told = {"bay": bay, "round": number, "purpose": purpose, "depth_mm": depth, "where": "plate"}
            facts.append(sheet.write("low-spot", told))
        elif what == "touch-up":
            facts.append(sheet.write("touch-up", {"bay": bay, "round": number + 1}))
        elif what == "core":
            facts.append(sheet.write("core", {"bay": bay, "method": "displacement", "volume_ml": 100, "mass_g": 3.0}))
        elif what == "deficiency":
            facts.append(sheet.write("deficiency", {"bay": bay, "sort": "gap", "severity": "repair"}))
        elif what == "withdrawal" and facts:
            facts.append(sheet.write("withdrawal", {"record": draw(st.sampled_from(facts)), "reason": "mis-keyed"}))
        else:
            thing = draw(st.sampled_from([*sheet.bays, key(3), key(2)]))
            kind = "bay" if thing in sheet.bays else "surface" if thing == key(3) else "foam"
            if what == "removed":
                sheet.write(kind, {"key": thing, "removed": True})
            elif thing in about:
                sheet.write(kind, {**about[thing], "name": f"anew {number}", "label": f"anew {number}"})
    return sheet


def records_of(sheet: Sheet) -> list[Record]:
    return taken(sheet.records)


def whole(job: Job) -> dict[str, Any]:
    """Everything that is reckoned of a job, as it would be printed."""
    return as_json(reckon(count(job).reckoned), [refusal.as_json() for refusal in job.refused], covers(job.records))


@given(stories(), st.randoms(use_true_random=False))
def test_any_order_and_any_repeats_fold_to_one_and_the_same_job(sheet: Sheet, chance: Any) -> None:
    records = records_of(sheet)
    once = fold(records)
    mixed = records + chance.choices(records, k=len(records) // 2)
    chance.shuffle(mixed)
    again = fold(mixed)
    assert again == once
    assert json.dumps(whole(again)) == json.dumps(whole(once))


@given(stories(), st.randoms(use_true_random=False))
def test_a_file_in_any_order_gives_the_same_result_line_numbers_aside(sheet: Sheet, chance: Any) -> None:
    lines = sheet.lines()
    once = load(lines)
    chance.shuffle(lines)
    again = load(lines)
    assert again.job == once.job
    assert {(r.id, r.field) for r in again.refused} == {(r.id, r.field) for r in once.refused}


@given(stories())
def test_folding_leaves_its_input_untouched(sheet: Sheet) -> None:
    before = copy.deepcopy(sheet.records)
    fold(records_of(sheet))
    assert sheet.records == before


@given(stories())
def test_nothing_is_lost_every_record_taken_is_kept_or_refused(sheet: Sheet) -> None:
    job = fold(records_of(sheet))
    kept = {record.id for record in job.records}
    refused = {refusal.id for refusal in job.refused}
    assert kept | refused == {raw["id"] for raw in sheet.records}
    assert not kept & refused


def test_a_withdrawn_reading_leaves_the_reckoning_and_stays_in_the_history() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=1)
    low = sheet.reading(0, 0, 50.0)
    assert load(sheet.lines()).job.of("reading")[-1].id == low
    sheet.write("withdrawal", {"record": low, "reason": "mis-keyed"})
    job = load(sheet.lines()).job
    assert low not in {record.id for record in job.of("reading")}
    assert low in {record.id for record in job.records}
    assert [(pair.fact.id, pair.by.body["reason"]) for pair in job.withdrawn] == [(low, "mis-keyed")]


def test_a_withdrawal_that_is_withdrawn_lets_what_it_took_out_count_again() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=1)
    low = sheet.reading(0, 0, 50.0)
    first = sheet.write("withdrawal", {"record": low, "reason": "mis-keyed"})
    second = sheet.write("withdrawal", {"record": first, "reason": "it was right"})
    assert low in {record.id for record in load(sheet.lines()).job.of("reading")}
    sheet.write("withdrawal", {"record": second, "reason": "no, it was not"})
    assert low not in {record.id for record in load(sheet.lines()).job.of("reading")}


def test_a_withdrawal_acts_only_on_what_stands_earlier_and_never_on_descriptions() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=1)
    early = sheet.write("withdrawal", {"record": key(9000 + len(sheet.records) + 2), "reason": "before its time"})
    late = sheet.reading(0, 0, 50.0)
    described = sheet.write(
        "withdrawal", {"record": sheet.records[3]["id"], "reason": "a bay is described anew instead"}
    )
    job = load(sheet.lines()).job
    assert late in {record.id for record in job.of("reading")}
    assert [record.id for record in job.idle] == [early, described]
    assert len(job.bays[key(3)]) == 1


def test_what_belongs_to_a_removed_bay_leaves_the_reckoning_and_returns_with_it() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    body = next(record["body"] for record in sheet.records if record["body"].get("key") == sheet.bays[1])
    sheet.write("bay", {"key": sheet.bays[1], "removed": True})
    job = load(sheet.lines()).job
    assert [bay.key for bay in job.bays[key(3)]] == [sheet.bays[0]]
    assert len(job.of("reading")) == 3
    assert len(job.records) == len(sheet.records)
    sheet.write("bay", body)
    assert len(load(sheet.lines()).job.of("reading")) == 6


def test_what_belongs_to_a_removed_surface_leaves_with_it() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    sheet.write("surface", {"key": key(3), "removed": True})
    loaded = load(sheet.lines())
    assert loaded.refused == ()
    assert loaded.job.surfaces == ()
    assert loaded.job.of("reading") == ()
    assert reckon(count(loaded.job).reckoned).result == "unproven"


def test_the_latest_description_counts_whatever_order_it_arrives_in() -> None:
    sheet = Sheet.even(depth_mm=80.0, bays=1)
    body = {**sheet.records[2]["body"], "spec": {"depth_mm": 76.2, "basis": "minimum"}}
    sheet.write("surface", body)
    for lines in (sheet.lines(), sheet.lines()[::-1]):
        assert reckon(count(load(lines).job).reckoned).result == "meets"


def test_records_that_name_no_job_cannot_be_folded() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=1)
    with pytest.raises(NoJobError, match="which job this is"):
        fold(records_of(sheet)[1:])
    sheet.write("job", {"key": key(1), "removed": True})
    with pytest.raises(NoJobError, match="removed"):
        fold(records_of(sheet))


@st.composite
def corrections(draw: st.DrawFn) -> Notebook:
    """Readings, and withdrawals of anything before or after them, by clocks that run together or apart."""
    book = Notebook.begun()
    names = [key(9000 + len(book.records) + number) for number in range(1, 9)]
    for _ in names:
        if draw(st.booleans()):
            book.read(0, draw(st.sampled_from([80.0, 90.0, 110.0])))
        else:
            book.withdraw(draw(st.sampled_from(names)))
        # A few instants, so that many records share one and the id decides.
        book.records[-1]["at"] = f"2026-05-05T10:00:0{draw(st.integers(0, 3))}.000Z"
    return book


@given(corrections())
def test_a_fact_stands_unless_a_later_withdrawal_that_stands_itself_takes_it_out(book: Notebook) -> None:
    # The rule as it is said, one fact at a time; it ends because each step is later than the one before.
    order = {raw["id"]: (raw["at"], raw["id"]) for raw in book.records}
    withdrawals = [raw for raw in book.records if raw["kind"] == "withdrawal"]

    def stands(fact: str) -> bool:
        return not any(
            raw["body"]["record"] == fact and order[raw["id"]] > order[fact] and stands(raw["id"])
            for raw in withdrawals
        )

    job = load(book.lines()).job
    for kind in ("reading", "withdrawal"):
        expected = {raw["id"] for raw in book.records if raw["kind"] == kind and stands(raw["id"])}
        assert {record.id for record in job.of(kind)} == expected
    assert {pair.fact.id for pair in job.withdrawn} == {fact for fact in order if not stands(fact)}
    assert {record.id for record in job.records} == order.keys()


@given(st.permutations(["a", "b", "c"]), st.lists(st.integers(0, 2), min_size=3, max_size=3))
def test_of_descriptions_the_latest_counts_and_of_two_at_one_instant_the_later_id(
    labels: list[str], instants: list[int]
) -> None:
    book = Notebook.begun()
    for label, instant in zip(labels, instants, strict=True):
        book.again(book.bays[0], label=label)
        book.records[-1]["at"] = f"2026-05-05T10:00:0{instant}.000Z"
    # Ids rise as they are written, so that the last of the latest instant counts.
    latest = max(range(3), key=lambda number: (instants[number], number))
    for lines in (book.lines(), book.lines()[::-1]):
        (bay,) = load(lines).job.bays[SURFACE]
        assert (bay.name, len(bay.history)) == (labels[latest], 4)


@given(stories(), st.data())
def test_two_phones_that_wrote_apart_make_the_job_that_one_would_have(sheet: Sheet, data: st.DataObject) -> None:
    records = records_of(sheet)
    ours = data.draw(st.lists(st.booleans(), min_size=len(records), max_size=len(records)))
    first = [record for record, mine in zip(records, ours, strict=True) if mine]
    second = [record for record, mine in zip(records, ours, strict=True) if not mine]
    assert fold(first + second) == fold(second + first) == fold(records)


def test_a_surface_whose_foam_was_removed_is_unproven_until_it_is_described_again() -> None:
    book = Notebook.read_through(110.0)
    described = book.body(FOAM)
    book.remove(FOAM)
    assert reckoned(book.records).result == "unproven"
    assert "foam" in (reckoned(book.records).surfaces[0].unproven_because or "")
    book.write("foam", described)
    assert reckoned(book.records).result == "meets"


def test_a_removed_place_leaves_its_surfaces_in_the_job() -> None:
    book = Notebook.read_through(110.0)
    book.write("place", {"key": key(7), "name": "Unit 7"})
    book.again(SURFACE, place=key(7))
    placed = reckoned(book.records)
    assert [(place.name, place.result) for place in placed.places] == [("Unit 7", "meets")]
    assert placed.surfaces[0].place == key(7)
    book.remove(key(7))
    left = reckoned(book.records)
    assert (left.places, left.surfaces[0].place, left.result) == ((), None, "meets")


def test_a_removed_surface_comes_back_with_its_bays_and_readings() -> None:
    book = Notebook.read_through(110.0, bays=2)
    described = book.body(SURFACE)
    before = reckoned(book.records)
    book.remove(SURFACE)
    assert reckoned(book.records).surfaces == ()
    book.write("surface", described)
    assert reckoned(book.records) == before


def test_a_bay_moved_to_another_surface_takes_its_readings_with_it() -> None:
    book = Notebook.read_through(110.0, bays=2)
    book.write("surface", {**book.body(SURFACE), "key": key(4), "name": "South wall"})
    book.again(book.bays[1], surface=key(4))
    assert [(found.name, found.points_read) for found in reckoned(book.records).surfaces] == [
        ("North wall", 3),
        ("South wall", 3),
    ]
