"""What is refused, by line, id, field, found and allowed; one bad record never costs the others."""

import copy
import itertools
import json
import math
from collections.abc import Iterator
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldapp.reckoning.job import reckon
from fieldapp.reckoning.results import as_json
from fieldapp.records.counting import count
from fieldapp.records.fields import Fields, ListOf, Number, Rule, Whole
from fieldapp.records.file import LONGEST_LINE, Loaded, NothingToReckonError, load
from fieldapp.records.kinds import KINDS
from fieldapp.records.record import Record, Refusal, read_record
from tests.jobs import Notebook
from tests.sheets import Sheet, key

#: Steps from a body to a field: names, and places in lists.
Path = tuple[str | int, ...]


def with_line(line: bytes, **changes: int) -> Loaded:
    """An even job of two bays with one more line."""
    return load([*Sheet.even(depth_mm=101.6, bays=2).lines(), line])


def changed(body: dict[str, Any], kind: str = "reading") -> tuple[Loaded, str]:
    """An even job with one more record; returns its id too."""
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    record = sheet.write(kind, body)
    return load(sheet.lines()), record


def a_reading(**more: Any) -> dict[str, Any]:
    body = {"bay": key(100), "row": 0, "col": 0, "round": 1, "purpose": "inspection", "depth_mm": 90.0, **more}
    return {name: value for name, value in body.items() if value != "absent"}


BAD_READINGS: list[tuple[dict[str, Any], str, str, str]] = [
    ({"depth_mm": "3 1/2"}, "depth_mm", "3 1/2", "0 to 1000"),
    ({"depth_mm": -3}, "depth_mm", "-3", "0 to 1000"),
    ({"depth_mm": 1016}, "depth_mm", "1016", "0 to 1000"),
    ({"depth_mm": 1000.1}, "depth_mm", "1000.1", "0 to 1000"),
    ({"depth_mm": float("nan")}, "depth_mm", "NaN", "0 to 1000"),
    ({"depth_mm": float("inf")}, "depth_mm", "Infinity", "0 to 1000"),
    ({"depth_mm": True}, "depth_mm", "true", "0 to 1000"),
    ({"depth_mm": [90]}, "depth_mm", "[90]", "0 to 1000"),
    ({"depth_mm": "absent"}, "depth_mm", "nothing", "a depth, 0 to 1000, or blocked with its reason; not both"),
    ({"blocked": "no-access"}, "depth_mm", "90", "a depth, 0 to 1000, or blocked with its reason; not both"),
    (
        {"depth_mm": "absent", "blocked": "too-lazy"},
        "blocked",
        "too-lazy",
        "one of pipe-or-box, no-access, already-covered, unsafe",
    ),
    ({"row": 3}, "row", "3", "0 to 2 in bay 1"),
    ({"col": 1}, "col", "1", "0 to 0 in bay 1"),
    ({"row": -1}, "row", "-1", "a whole number, 0 or more"),
    ({"row": 0.5}, "row", "0.5", "a whole number, 0 or more"),
    ({"round": 0}, "round", "0", "a whole number, 1 to 1000"),
    ({"purpose": "guess"}, "purpose", "guess", "one of inspection, self-check"),
    ({"bay": key(777)}, "bay", key(777), "the key of a bay of this job"),
    ({"bay": "7"}, "bay", "7", "a UUID in lower case"),
    ({"bay": "absent"}, "bay", "nothing", "a UUID in lower case"),
]


@pytest.mark.parametrize(("change", "field", "found", "allowed"), BAD_READINGS)
def test_a_bad_reading_is_refused_by_name_and_costs_no_other(
    change: dict[str, Any], field: str, found: str, allowed: str
) -> None:
    loaded, record = changed(a_reading(**change))
    (refusal,) = loaded.refused
    assert (refusal.id, refusal.field, refusal.found, refusal.allowed) == (record, field, found, allowed)
    assert refusal.line == len(Sheet.even(depth_mm=101.6, bays=2).records) + 1
    assert reckon(count(loaded.job).reckoned).surfaces[0].points_read == 6


def a_bay(**more: Any) -> dict[str, Any]:
    body = {
        "key": key(70),
        "surface": key(3),
        "label": "X",
        "order": 9,
        "width_mm": 400,
        "height_mm": 2400,
        "rows": 3,
        "cols": 1,
    }
    return {**body, **more}


BAD_BAYS: list[tuple[dict[str, Any], str]] = [
    ({"rows": 0, "cols": 0}, "rows"),
    ({"cols": 0}, "cols"),
    ({"width_mm": 0}, "width_mm"),
    ({"area_m2": 0}, "area_m2"),
    ({"opening_m2": 0.96}, "opening_m2"),
    ({"opening_m2": 5}, "opening_m2"),
    ({"rows_at_mm": [100, 1200]}, "rows_at_mm"),
    ({"rows_at_mm": [100, 1200, 1200]}, "rows_at_mm[2]"),
    ({"rows_at_mm": [100, 1200, 2401]}, "rows_at_mm[2]"),
    ({"rows_at_mm": [-1, 1200, 2400]}, "rows_at_mm[0]"),
    ({"cols_at_mm": [401]}, "cols_at_mm[0]"),
    ({"rows": 1000, "cols": 1000}, "rows"),
    ({"surface": key(999)}, "surface"),
]


@pytest.mark.parametrize(("change", "field"), BAD_BAYS)
def test_a_bay_that_cannot_be_is_refused_by_name(change: dict[str, Any], field: str) -> None:
    loaded, record = changed(a_bay(**change), "bay")
    assert [(refusal.id, refusal.field) for refusal in loaded.refused] == [(record, field)]
    assert len(loaded.job.bays[key(3)]) == 2


@pytest.mark.parametrize(
    ("width_mm", "height_mm", "opening_m2"),
    # Width times height, in m2, to its last decimal place: 0.8042 x 1.8023 and so on.
    [(804.2, 1802.3, 1.44940966), (764.5, 1050.7, 0.80326015), (699.9, 3881.3, 2.71652187), (400, 2400, 0.96)],
)
def test_an_opening_as_large_as_its_bay_is_refused_whatever_floating_point_makes_of_it(
    width_mm: float, height_mm: float, opening_m2: float
) -> None:
    loaded, record = changed(a_bay(width_mm=width_mm, height_mm=height_mm, opening_m2=opening_m2), "bay")
    assert [(refusal.id, refusal.field) for refusal in loaded.refused] == [(record, "opening_m2")]


def test_a_bay_moved_to_a_surface_that_is_not_there_stays_where_it_was() -> None:
    book = Notebook.read_through(101.6, bays=2)
    moved = book.again(book.bays[0], surface=key(999))
    loaded = load(book.lines())
    # The bad description is refused; the good one before it, and what was read, are not.
    assert [(refusal.id, refusal.field) for refusal in loaded.refused] == [(moved, "surface")]
    assert reckon(count(loaded.job).reckoned).surfaces[0].points_read == 6


def a_foam(resistance: Any) -> dict[str, Any]:
    return {"key": key(2), "name": "F", "cell": "closed", "resistance": resistance}


@pytest.mark.parametrize(
    ("resistance", "field"),
    [
        ({}, "resistance.rsi_per_m"),
        ({"rsi_per_m": 45, "table": [[25, 1]]}, "resistance.rsi_per_m"),
        ({"rsi_per_m": 0}, "resistance.rsi_per_m"),
        ({"table": []}, "resistance.table"),
        ({"table": [[25, 1], [25, 2]]}, "resistance.table[1]"),
        ({"table": [[50, 2], [25, 1]]}, "resistance.table[1]"),
        ({"table": [[25, 2], [50, 1]]}, "resistance.table[1]"),
        ({"table": [[0, 1]]}, "resistance.table[0]"),
        ({"table": [[25]]}, "resistance.table[0]"),
        ("R-6", "resistance"),
    ],
)
def test_a_foam_whose_resistance_is_missing_or_falls_is_refused(resistance: Any, field: str) -> None:
    loaded, record = changed(a_foam(resistance), "foam")
    assert [(refusal.id, refusal.field) for refusal in loaded.refused] == [(record, field)]
    # The foam as it was described before still stands.
    assert reckon(count(loaded.job).reckoned).result == "meets"


def test_a_surface_whose_only_foam_was_refused_is_unproven_throughout_with_that_reason() -> None:
    sheet = Sheet.even(depth_mm=50.0, bays=2)
    sheet.records[1]["body"].pop("resistance")
    loaded = load(sheet.lines())
    surface = reckon(count(loaded.job).reckoned).surfaces[0]
    assert [refusal.field for refusal in loaded.refused] == ["resistance"]
    assert surface.result == "unproven"
    assert {check.result for check in surface.checks} == {"unproven"}
    assert {bay.result for bay in surface.bays} == {"unproven"}
    assert all("foam" in check.found for check in surface.checks)


def test_two_descriptions_of_one_bay_are_a_correction_and_both_are_kept() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    body = next(record["body"] for record in sheet.records if record["body"].get("key") == sheet.bays[0])
    sheet.write("bay", {**body, "label": "1a", "width_mm": 200.0})
    loaded = load(sheet.lines())
    assert loaded.refused == ()
    bay = loaded.job.bays[key(3)][0]
    assert (bay.name, len(bay.history)) == ("1a", 2)


def test_records_of_another_job_are_refused_by_line() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    stranger = {**sheet.records[-1], "id": key(5000), "job": key(8)}
    loaded = load([*sheet.lines(), json.dumps(stranger).encode()])
    assert [(r.id, r.field, r.line) for r in loaded.refused] == [(key(5000), "job", len(sheet.records) + 1)]


@pytest.mark.parametrize("other_is_bad", [False, True])
def test_of_two_records_under_one_id_nobody_can_say_which_is_true_so_both_are_refused(other_is_bad: bool) -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    twin = json.loads(json.dumps(sheet.records[-1]))
    twin["body"]["depth_mm"] = -1 if other_is_bad else 12.0
    loaded = load([*sheet.lines(), json.dumps(twin).encode()])
    assert {refusal.id for refusal in loaded.refused} == {twin["id"]}
    assert {refusal.line for refusal in loaded.refused} == {len(sheet.records), len(sheet.records) + 1}
    assert reckon(count(loaded.job).reckoned).surfaces[0].points_read == 5


def test_the_same_record_twice_is_the_same_record_once() -> None:
    lines = Sheet.even(depth_mm=101.6, bays=2).lines()
    spaced = json.dumps(json.loads(lines[-1]), indent=None, separators=(" , ", " : ")).encode()
    loaded = load([*lines, *lines, spaced])
    assert loaded.refused == ()
    assert reckon(count(loaded.job).reckoned).surfaces[0].points_read == 6


SPEC = {"depth_mm": 76.2, "basis": "minimum"}


@pytest.mark.parametrize(
    ("change", "field"),
    [
        ({"spec": {"depth_mm": 76.2, "basis": "average-with-floor"}}, "spec.floor_mm"),
        ({"spec": {"depth_mm": 76.2, "basis": "average-with-floor", "floor_mm": 80}}, "spec.floor_mm"),
        ({"spec": {"basis": "minimum"}}, "spec.depth_mm"),
        ({"spec": {**SPEC, "basis": "about"}}, "spec.basis"),
        ({"spec": {**SPEC, "bays_share_min": 1.5}}, "spec.bays_share_min"),
        ({"vapour": {"rule": "depth"}}, "vapour.depth_mm"),
        ({"vapour": {"rule": "permeance"}}, "vapour.perm_ng"),
        ({"vapour": {"rule": "separate"}}, "vapour.retarder"),
        (
            {"vapour": {"rule": "separate", "retarder": {"name": "x", "perm_ng": 5, "side": "left"}}},
            "vapour.retarder.side",
        ),
        ({"vapour": {"rule": "none"}}, "vapour.reason"),
        ({"probe": {"direction": "plumb"}}, "probe.pitch_deg"),
        ({"probe": {"direction": "plumb", "pitch_deg": 90}}, "probe.pitch_deg"),
        ({"assembly": "deck"}, "assembly"),
        ({"layers": [{"rsi": 1}]}, "layers[0].name"),
        ({"framing": {"material": "bamboo"}}, "framing.material"),
    ],
)
def test_a_surface_that_contradicts_itself_is_refused_by_name(change: dict[str, Any], field: str) -> None:
    body = {"key": key(4), "name": "W", "assembly": "wall", "foam": key(2), "bays_total": 1, "spec": SPEC}
    loaded, record = changed({**body, "vapour": {"rule": "none", "reason": "r"}, **change}, "surface")
    assert [(refusal.id, refusal.field) for refusal in loaded.refused] == [(record, field)]


@pytest.mark.parametrize(
    ("change", "field"),
    [
        ({"id": "ABC"}, "id"),
        ({"id": key(5000).upper().replace("0", "A")}, "id"),
        ({"at": "2026-05-04T14:03:11Z"}, "at"),
        ({"at": "2026-05-04 14:03:11.123Z"}, "at"),
        ({"at": "2026-02-30T14:03:11.123Z"}, "at"),
        ({"at": "2026-05-04T14:03:11.123+02:00"}, "at"),
        ({"n": 0}, "n"),
        ({"by": ""}, "by"),
        ({"kind": 5}, "kind"),
        ({"body": []}, "body"),
        ({"body": None}, "body"),
        ({"note": "\ud800"}, "record"),
        ({"number": 2**60}, "record"),
    ],
)
def test_an_envelope_that_is_off_is_refused_by_name(change: dict[str, Any], field: str) -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    record = {**sheet.records[-1], "id": key(5000), **change}
    loaded = load([*sheet.lines(), json.dumps(record).encode()])
    assert [refusal.field for refusal in loaded.refused] == [field]


@pytest.mark.parametrize(
    "line",
    [
        b"garbage",
        b"\x00\xff\xfe",
        b'{"id": ',
        b"[]",
        b"7",
        b'{"id": "a", "id": "b"}',
        b"[" * 100_000,
        b'{"x": "' + b"y" * LONGEST_LINE + b'"}',
        b'{"depth": 1e999}',
    ],
    ids=["garbage", "binary", "cut", "list", "number", "name twice", "deep", "long", "infinite"],
)
def test_a_line_that_is_no_record_is_refused_and_costs_no_other(line: bytes) -> None:
    loaded = with_line(line)
    assert len(loaded.refused) == 1
    assert reckon(count(loaded.job).reckoned).result == "meets"


@pytest.mark.parametrize("depth", [50, 300, 450, 600, 900, 2000])
@pytest.mark.parametrize("where", ["alone", "in a known field", "in an unknown field"])
def test_values_nested_however_deeply_never_stop_the_reader(depth: int, where: str) -> None:
    nested = "[" * depth + "]" * depth
    line = nested
    if where != "alone":
        record = {**Sheet.even(depth_mm=101.6, bays=2).records[-1], "id": key(5000)}
        record["body"] = {**record["body"], "purpose" if where == "in a known field" else "weather": "HERE"}
        line = json.dumps(record).replace('"HERE"', nested)
    loaded = with_line(line.encode())
    assert reckon(count(loaded.job).reckoned).result == "meets"
    # In a field that nobody knows it is kept, as long as it can be read at all.
    assert len(loaded.refused) == 1 or where == "in an unknown field"


def test_a_byte_order_mark_carriage_returns_and_blank_lines_are_no_trouble() -> None:
    lines = Sheet.even(depth_mm=101.6, bays=2).lines()
    loaded = load([b"\xef\xbb\xbf" + lines[0] + b"\r\n", b"\r\n", *(line + b"\r\n" for line in lines[1:])])
    assert loaded.refused == ()


def test_fields_and_kinds_that_are_not_known_are_kept_untouched() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    sheet.records[-1]["body"]["weather"] = {"sun": True}
    unknown = sheet.write("thermogram", {"anything": [1, 2, {"x": None}]})
    loaded = load(sheet.lines())
    assert loaded.refused == ()
    kept = {record.id: record.raw for record in loaded.job.records}
    assert kept[unknown]["body"] == {"anything": [1, 2, {"x": None}]}
    assert kept[sheet.records[-2]["id"]]["body"]["weather"] == {"sun": True}


#: A good body of every kind, as the contract names its fields.
GOOD: dict[str, dict[str, Any]] = {
    "job": {"key": key(1), "name": "J", "units": "ip"},
    "place": {"key": key(9), "name": "P"},
    "foam": a_foam({"rsi_per_m": 45}),
    "surface": {
        **{"key": key(4), "name": "W", "assembly": "wall", "foam": key(2), "bays_total": 1, "spec": SPEC},
        "vapour": {"rule": "depth", "depth_mm": 76.2},
    },
    "bay": a_bay(),
    "reading": a_reading(),
    "low-spot": {"bay": key(100), "round": 1, "purpose": "inspection", "depth_mm": 50, "where": "corner"},
    "touch-up": {"bay": key(100), "round": 2},
    "core": {"bay": key(100), "method": "cylinder", "diameter_mm": 50, "length_mm": 40, "mass_g": 2.5},
    "pull": {"bay": key(100), "kpa": 150},
    "photo": {"sha256": "0" * 64, "media_type": "image/jpeg", "bytes": 9, "width": 4, "height": 3},
    "deficiency": {"bay": key(100), "sort": "void", "severity": "repair"},
    "repair": {"deficiency": key(500)},
    "acceptance": {"repair": key(500), "role": "inspector"},
    "conditions": {"air_c": 20},
    "spray": {"surfaces": [key(3)], "foam": key(2)},
    "covered": {"bays": [key(100)]},
    "visit": {"asked": "depth"},
    "objection": {"about": key(3), "text": "no"},
    "signature": {"role": "inspector", "name": "A", "statement": "s", "strokes": [[[0, 1]]], "covers": "0" * 64},
    "withdrawal": {"record": key(500), "reason": "mis-keyed"},
}


def read_body(kind: str, body: Any) -> Record | Refusal:
    envelope = {"id": key(6000), "job": key(1), "at": "2026-05-04T14:03:11.123Z", "by": "a", "device": "d"}
    return read_record({**envelope, "kind": kind, "body": body})


def test_every_kind_of_the_contract_is_known() -> None:
    assert set(KINDS) == set(GOOD)
    assert all(isinstance(read_body(kind, body), Record) for kind, body in GOOD.items())


@pytest.mark.parametrize(
    ("kind", "field"), [(kind, field) for kind, body in GOOD.items() for field in body if kind != "conditions"]
)
def test_dropping_a_required_field_or_giving_it_a_wrong_type_refuses_by_its_name(kind: str, field: str) -> None:
    without = {name: value for name, value in GOOD[kind].items() if name != field}
    found = read_body(kind, without)
    # A visit asks for nothing; a deficiency can name a surface instead of its bay, and says so under the same name.
    if kind != "visit":
        assert isinstance(found, Refusal)
        assert found.field.split(".")[0] == field
        assert found.found == "nothing"
    wrong = read_body(kind, {**GOOD[kind], field: True})
    assert isinstance(wrong, Refusal)
    assert wrong.field.split(".")[0] == field


#: Parts that a body may have, with what they must hold; by kind and path.
PARTS: dict[tuple[str, str], Any] = {
    ("job", "design"): {},
    ("foam", "density_kg_m3"): {},
    ("surface", "vapour.retarder"): {"name": "film", "perm_ng": 5, "side": "inside"},
    ("surface", "probe"): {},
    ("surface", "cover"): {},
    ("surface", "framing"): {"material": "wood"},
}


def paths(rule: Rule, path: Path = ()) -> Iterator[tuple[Path, Rule]]:
    """Every field of a kind with its rule, parts of parts included; of lists, the first item."""
    if path:
        yield path, rule
    if isinstance(rule, Fields):
        for name, inner in {**rule.must, **rule.may}.items():
            yield from paths(inner, (*path, name))
    elif isinstance(rule, ListOf):
        yield from paths(rule.item, (*path, 0))


def written(path: Path) -> str:
    """A path as refusals name it: 'layers[0].rsi'."""
    return "".join(f"[{step}]" if isinstance(step, int) else f".{step}" for step in path).removeprefix(".")


def with_value(kind: str, path: Path, value: Any) -> dict[str, Any]:
    """A good body of a kind with a value put at a path; parts on the way to it are made."""
    body: dict[str, Any] = copy.deepcopy(GOOD[kind])
    if kind == "foam" and "table" in path:
        body["resistance"] = {}
    at: Any = body
    for place, (step, after) in enumerate(itertools.pairwise(path), 1):
        made = [] if isinstance(after, int) else PARTS.get((kind, written(path[:place])), {})
        if isinstance(step, int):
            at[:] = at[:1] or [copy.deepcopy(made)]
        else:
            at.setdefault(step, copy.deepcopy(made))
        at = at[step]
    if isinstance(at, list):
        # Two, since rows of a table and points of a stroke are pairs; the first is refused first.
        at[:] = [value, 0.5]
    else:
        at[path[-1]] = value
    return body


FIELDS = [(kind, path, rule) for kind, known in KINDS.items() for path, rule in paths(known.body)]


@pytest.mark.parametrize(("kind", "path", "rule"), FIELDS, ids=[f"{kind} {written(path)}" for kind, path, _ in FIELDS])
def test_a_known_field_of_a_wrong_type_is_refused_by_its_path(kind: str, path: Path, rule: Rule) -> None:
    wrong: tuple[Any, ...] = ("", 7, []) if isinstance(rule, Fields) else ({"no": "such"}, [{}])
    for value in wrong[:1] if isinstance(rule, ListOf) else wrong:
        found = read_body(kind, with_value(kind, path, value))
        assert isinstance(found, Refusal)
        assert found.field == written(path)
        assert found.allowed


@pytest.mark.parametrize("kind", [kind for kind, known in KINDS.items() if known.describes])
def test_a_thing_is_removed_by_true_and_by_nothing_that_looks_like_it(kind: str) -> None:
    for value in ("no", "true", 1, [True]):
        found = read_body(kind, {**GOOD[kind], "removed": value})
        assert isinstance(found, Refusal)
        assert found.field == "removed"
    assert isinstance(read_body(kind, {**GOOD[kind], "removed": False}), Record)


def edges(rule: Number | Whole) -> list[float]:
    """What a number may be at the least and at the most by the rule of its field; and next to nothing, where it may be 0."""
    if isinstance(rule, Whole):
        return [rule.low, rule.high]
    low = -(2.0**53 - 1) if rule.low is None else math.nextafter(rule.low, math.inf) if rule.above else rule.low
    high = 2.0**53 - 1 if rule.high is None else math.nextafter(rule.high, -math.inf) if rule.below else rule.high
    return [low, math.nextafter(0.0, 1.0) if low == 0.0 else low, high]


EDGES = [
    (kind, path, value)
    for kind in ("job", "place", "foam", "surface", "bay", "reading", "low-spot", "core", "conditions")
    for path, rule in paths(KINDS[kind].body)
    if isinstance(rule, (Number, Whole))
    for value in dict.fromkeys(edges(rule))
]
#: The things that the notebook below describes, by kind; a record of such a kind takes the place of the one there is.
THINGS = {"job": key(1), "foam": key(2), "surface": key(3), "bay": key(100)}
CORE_METHODS = {"width_mm": "prism", "depth_mm": "prism", "volume_ml": "displacement"}


@pytest.mark.parametrize(
    ("kind", "path", "value"), EDGES, ids=[f"{kind} {written(path)} {value:g}" for kind, path, value in EDGES]
)
def test_a_number_at_the_edge_of_what_is_allowed_never_stops_the_reckoning(kind: str, path: Path, value: float) -> None:
    book = Notebook.begun(bays=2)
    for row, depth in enumerate((80.0, 100.0, 120.0)):
        book.read(row, depth)
    book.again(key(2), density_kg_m3={"nominal": 32, "min": 30, "max": 40})
    steps = {"scale_step_g": 0.1, "calliper_step_mm": 0.1}
    book.core(3.0, method="cylinder", diameter_mm=50, length_mm=50, **steps)
    body = with_value(kind, path, value)
    if kind == "core":
        sizes = {"diameter_mm": 50, "width_mm": 50, "length_mm": 50, "depth_mm": 50, "volume_ml": 100}
        body = {**sizes, **steps, **body, "method": CORE_METHODS.get(str(path[0]), "cylinder")}
    if kind in THINGS:
        body = {**book.body(THINGS[kind]), **{str(path[0]): body[str(path[0])]}, "key": THINGS[kind]}
    book.write(kind, body)
    loaded = load(book.lines())
    plain = as_json(reckon(count(loaded.job).reckoned), [one.as_json() for one in loaded.refused], "")
    json.dumps(plain, allow_nan=False)


@pytest.mark.parametrize("field", ["id", "job", "kind", "at", "by", "purpose", "bay", "entered", "shutter\ud800"])
def test_half_a_surrogate_is_refused_in_words_that_can_be_written(field: str) -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    record = {**copy.deepcopy(sheet.records[-1]), "id": key(5000)}
    (record if field in record else record["body"])[field] = "\ud800"
    loaded = load([*sheet.lines(), json.dumps(record).encode()])
    (refusal,) = loaded.refused
    assert refusal.line == len(sheet.records) + 1
    assert json.dumps(refusal.as_json(), ensure_ascii=False).encode()
    assert refusal.sentence().encode()


@pytest.mark.parametrize(
    "number", ["NaN", "Infinity", "-Infinity", "1e999", "-1e999", "1e308", "-0.1", "1" + "0" * 400]
)
def test_a_number_that_no_probe_reads_is_refused_as_it_stands_in_the_file(number: str) -> None:
    line = json.dumps({**Sheet.even(depth_mm=101.6, bays=2).records[-1], "id": key(5000)})
    loaded = with_line(line.replace("101.6", number).encode())
    assert [(one.id, one.field, one.allowed) for one in loaded.refused] == [(key(5000), "depth_mm", "0 to 1000")]


@pytest.mark.parametrize("number", ["NaN", "-Infinity", "1e999"])
def test_a_number_without_an_end_is_refused_in_fields_that_nobody_knows_too(number: str) -> None:
    line = json.dumps({**Sheet.even(depth_mm=101.6, bays=2).records[-1], "id": key(5000)})
    loaded = with_line(line.replace('"body": {', f'"body": {{"weather": {number}, ').encode())
    assert [one.id for one in loaded.refused] == [key(5000)]


def test_a_removed_thing_needs_only_its_key() -> None:
    assert isinstance(read_body("bay", {"key": key(100), "removed": True}), Record)
    assert isinstance(read_body("bay", {"removed": True}), Refusal)


JSON = st.recursive(
    st.none() | st.booleans() | st.floats() | st.integers() | st.text(max_size=8),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=6), inner, max_size=3),
    max_leaves=8,
)


@given(st.sampled_from(sorted(GOOD)), st.data())
def test_whatever_stands_in_a_field_the_reader_answers_and_never_fails(kind: str, data: st.DataObject) -> None:
    body = dict(GOOD[kind])
    names = sorted({*body, *KINDS[kind].body.may})
    for _ in range(data.draw(st.integers(1, 3))):
        body[data.draw(st.sampled_from(names))] = data.draw(JSON)
    sheet = Sheet.even(depth_mm=101.6, bays=1)
    sheet.write(kind, body)
    try:
        loaded = load([json.dumps(record).encode() for record in sheet.records])
    except NothingToReckonError:
        assert kind == "job"
        return
    reckon(count(loaded.job).reckoned)
    for refusal in loaded.refused:
        assert refusal.field
        assert refusal.allowed


@given(st.lists(st.binary(max_size=60), max_size=5))
def test_a_file_of_anything_is_told_in_one_sentence(lines: list[bytes]) -> None:
    with pytest.raises(NothingToReckonError) as told:
        load(lines)
    assert "\n" not in str(told.value)


@pytest.mark.parametrize("kind", ["low-spot", "touch-up", "pull", "deficiency", "conditions"])
def test_a_field_that_a_kind_does_not_know_is_kept_whatever_it_is_called(kind: str) -> None:
    # Rows and columns are fields of readings, cores and photos; here they are somebody else's words.
    for value in ("top", [0], {"from": 1}, 99):
        loaded, record = changed({**GOOD[kind], "bay": key(100), "row": value, "col": value}, kind)
        assert loaded.refused == ()
        assert [one.body["row"] for one in loaded.job.records if one.id == record] == [value]


def places_in(value: Any, path: Path = ()) -> Iterator[Path]:
    """Every place in a JSON value below its root."""
    inner = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    for step, item in inner:
        yield (*path, step)
        yield from places_in(item, (*path, step))


@given(st.data())
def test_records_changed_anywhere_are_taken_or_refused_and_never_stop_the_reader(data: st.DataObject) -> None:
    book = Notebook.read_through(101.6, bays=2)
    for kind in data.draw(st.lists(st.sampled_from(sorted(GOOD)), max_size=4)):
        book.write(kind, copy.deepcopy(GOOD[kind]))
    for _ in range(data.draw(st.integers(1, 4))):
        record: Any = data.draw(st.sampled_from(book.records))
        path = data.draw(st.sampled_from(list(places_in(record))))
        at = record
        for step in path[:-1]:
            at = at[step]
        at[path[-1]] = data.draw(JSON)
    try:
        loaded = load(book.lines())
    except NothingToReckonError:
        return
    reckon(count(loaded.job).reckoned)
    # Each line is in the job, or told of; none is lost on the way.
    kept = [record.id for record in loaded.job.records]
    refused = {one.line for one in loaded.refused}
    assert all(record["id"] in kept or line in refused for line, record in enumerate(book.records, 1))


@given(st.data())
def test_a_line_damaged_on_the_way_costs_no_other(data: st.DataObject) -> None:
    lines = Sheet.even(depth_mm=101.6, bays=2).lines()
    damaged = bytearray(lines[-1])
    for at in data.draw(st.lists(st.integers(0, len(damaged) - 1), min_size=1, max_size=3)):
        damaged[at] = data.draw(st.integers(0, 255))
    loaded = load([*lines[:-1], bytes(damaged)])
    assert reckon(count(loaded.job).reckoned).surfaces[0].points_read >= 5
    assert all(one.line == len(lines) for one in loaded.refused)


@pytest.mark.parametrize("text", ["two\nlines", "two\r\nlines", "two\u2028lines", "two\x85lines"])
def test_what_is_refused_is_told_in_one_line_whatever_was_typed(text: str) -> None:
    book = Notebook.read_through(101.6)
    book.again(book.bays[0], label=text)
    book.read(0, 90.0, purpose=text)
    book.read(99, 90.0, entered=text)
    told = [refusal.sentence() for refusal in load(book.lines()).refused]
    assert len(told) == 2
    with pytest.raises(NothingToReckonError) as nothing:
        load([json.dumps({**book.records[0], "id": text}).encode()])
    assert [len(sentence.splitlines()) for sentence in (*told, str(nothing.value))] == [1, 1, 1]
