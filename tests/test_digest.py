"""The digest that a signature covers: the right records, in the canonical form of RFC 8785."""

import json
import struct
from hashlib import sha256
from typing import Any

import pytest

from fieldapp.records.digest import about_surfaces, covers
from fieldapp.records.file import load
from fieldapp.records.record import Record
from tests import jobs
from tests.jobs import FOAM, JOB, SURFACE, Notebook
from tests.sheets import Sheet, key


def taken(sheet: Sheet) -> list[Record]:
    return jobs.taken(sheet.records)


def test_the_digest_is_sha256_over_the_records_sorted_by_id_without_signatures() -> None:
    # For plain ASCII, whole numbers and no exponents, RFC 8785 is what a plain JSON writer gives with sorted names.
    sheet = Sheet.laid_out(bays=2)
    for record in sheet.records:
        record["body"] = {
            k: v
            for k, v in record["body"].items()
            if not isinstance(v, (float, dict)) or k in ("spec", "vapour", "resistance")
        }
        for name in ("spec", "vapour"):
            if name in record["body"]:
                record["body"][name]["depth_mm"] = 100
        if "resistance" in record["body"]:
            record["body"]["resistance"] = {"rsi_per_m": 45}
        if record["kind"] == "bay":
            record["body"].update(width_mm=400, height_mm=2400)
        if record["kind"] == "foam":
            record["body"].pop("max_pass_mm", None)
    # Ids against the order of time, so that it is seen which of the two sorts.
    for number, record in enumerate(sheet.records):
        record["id"] = key(9999 - number)
    signature = {"role": "inspector", "name": "A", "statement": "s", "strokes": [], "covers": "0" * 64}
    plain = sorted(sheet.records, key=lambda record: str(record["id"]))
    expected = sha256(json.dumps(plain, sort_keys=True, separators=(",", ":")).encode()).hexdigest()
    assert len(taken(sheet)) == len(sheet.records)
    assert covers(taken(sheet)) == expected
    sheet.write("signature", signature)
    assert covers(taken(sheet)) == expected


def test_numbers_take_the_canonical_form_of_rfc_8785() -> None:
    # RFC 8785, section 3.2.3 and appendix B: 1e30 is 1e+30, 4.50 is 4.5, 2e-3 is 0.002, 0.000000000000000000000000001 is 1e-27.
    sheet = Sheet()
    sheet.write(
        "job",
        {"key": key(1), "name": "J", "units": "si", "numbers": [333333333.33333329, 1e30, 4.50, 2e-3, 1e-27, 56.0]},
    )
    (record,) = taken(sheet)
    assert b'"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27,56]' in record.canonical


def test_a_signature_for_a_surface_is_voided_by_its_own_bays_and_not_by_others() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    sheet.write("surface", {**sheet.records[2]["body"], "key": key(4), "name": "Other", "bays_total": 1})
    size = {"width_mm": 400, "height_mm": 2400, "rows": 1, "cols": 1}
    sheet.write("bay", {"key": key(50), "surface": key(4), "label": "X", "order": 1, **size})
    signed = covers(about_surfaces(taken(sheet), [key(3)]))
    picture = {"sha256": "0" * 64, "media_type": "image/jpeg", "bytes": 1, "width": 1, "height": 1, "caption": "in May"}
    sheet.write("photo", {**picture, "bay": key(50)})
    sheet.write("visit", {"note": "about no surface"})
    assert covers(about_surfaces(taken(sheet), [key(3)])) == signed
    deficiency = sheet.write("deficiency", {"bay": key(50), "sort": "gap", "severity": "note"})
    sheet.write("repair", {"deficiency": deficiency})
    assert covers(about_surfaces(taken(sheet), [key(3)])) == signed
    reading = sheet.reading(0, 0, 90.0)
    changed = covers(about_surfaces(taken(sheet), [key(3)]))
    assert changed != signed
    sheet.write("withdrawal", {"record": reading, "reason": "mis-keyed"})
    assert covers(about_surfaces(taken(sheet), [key(3)])) not in (signed, changed)


def test_facts_about_facts_are_drawn_in_to_any_depth() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=1)
    deficiency = sheet.write("deficiency", {"bay": sheet.bays[0], "sort": "gap", "severity": "repair"})
    repair = sheet.write("repair", {"deficiency": deficiency})
    acceptance = sheet.write("acceptance", {"repair": repair, "role": "inspector"})
    objection = sheet.write("objection", {"about": acceptance, "text": "no"})
    ids = {record.id for record in about_surfaces(taken(sheet), [key(3)])}
    assert {deficiency, repair, acceptance, objection} <= ids


def test_the_digest_does_not_depend_on_the_order_of_lines() -> None:
    lines = Sheet.even(depth_mm=101.6, bays=2).lines()
    assert covers(load(lines).job.records) == covers(load(lines[::-1]).job.records)


#: Doubles by their bits, with their only form. Source: RFC 8785, appendix B.
DOUBLES = [
    ("0000000000000000", "0"),
    ("8000000000000000", "0"),
    ("0000000000000001", "5e-324"),
    ("8000000000000001", "-5e-324"),
    ("7fefffffffffffff", "1.7976931348623157e+308"),
    ("ffefffffffffffff", "-1.7976931348623157e+308"),
    ("4340000000000000", "9007199254740992"),
    ("c340000000000000", "-9007199254740992"),
    ("4430000000000000", "295147905179352830000"),
    ("44b52d02c7e14af5", "9.999999999999997e+22"),
    ("44b52d02c7e14af6", "1e+23"),
    ("44b52d02c7e14af7", "1.0000000000000001e+23"),
    ("444b1ae4d6e2ef4e", "999999999999999700000"),
    ("444b1ae4d6e2ef4f", "999999999999999900000"),
    ("444b1ae4d6e2ef50", "1e+21"),
    ("3eb0c6f7a0b5ed8c", "9.999999999999997e-7"),
    ("3eb0c6f7a0b5ed8d", "0.000001"),
    ("41b3de4355555553", "333333333.3333332"),
    ("41b3de4355555554", "333333333.33333325"),
    ("41b3de4355555555", "333333333.3333333"),
    ("41b3de4355555556", "333333333.3333334"),
    ("41b3de4355555557", "333333333.33333343"),
    ("becbf647612f3696", "-0.0000033333333333333333"),
    ("43143ff3c1cb0959", "1424953923781206.2"),
]


@pytest.mark.parametrize(("bits", "text"), DOUBLES, ids=[text for _, text in DOUBLES])
def test_a_number_has_one_form_in_every_language(bits: str, text: str) -> None:
    (number,) = struct.unpack(">d", bytes.fromhex(bits))
    assert f'"units":"si","weather":{text}}}'.encode() in canonical({"weather": number})


def test_names_are_sorted_by_their_utf_16_units() -> None:
    # RFC 8785, section 3.2.3: by code points the face, U+1F600, would stand after U+FB33.
    names = ["\u20ac", "\r", "\ufb33", "1", "\U0001f600", "\u0080", "\u00f6"]
    rising = ["\r", "1", "\u0080", "\u00f6", "\u20ac", "\U0001f600", "\ufb33"]
    whole = ",".join(f"{json.dumps(name, ensure_ascii=False)}:0" for name in rising)
    assert f'"weather":{{{whole}}}'.encode() in canonical({"weather": dict.fromkeys(names, 0)})


def canonical(more: dict[str, Any]) -> bytes:
    """The canonical form of a job's description that holds more than anybody knows."""
    book = Notebook()
    book.write("job", {"key": JOB, "name": "J", "units": "si", **more})
    (record,) = taken(book)
    return record.canonical


def test_the_digest_of_a_file_is_told_by_its_records_and_not_by_how_they_were_written() -> None:
    sheet = Sheet.even(depth_mm=100, bays=2)
    digest = covers(load(sheet.lines()).job.records)
    loose = [json.dumps(dict(reversed(raw.items())), indent=None, separators=(" , ", " : ")) for raw in sheet.records]
    respelled = [line.replace('"depth_mm" : 100', '"depth_mm" : 1.00e2').encode() for line in loose]
    assert covers(load([*respelled, *sheet.lines()]).job.records) == digest
    # A field that nobody knows is part of what was signed.
    sheet.records[-1]["weather"] = "sun"
    assert covers(load(sheet.lines()).job.records) != digest


#: Records about the second of two surfaces, or about none: a signature for the first says nothing of them.
ELSEWHERE: list[tuple[str, dict[str, Any]]] = [
    (
        "photo",
        {"sha256": "0" * 64, "media_type": "image/jpeg", "bytes": 1, "width": 1, "height": 1, "caption": "after"},
    ),
    ("reading", {"row": 0, "col": 0, "round": 1, "purpose": "inspection", "depth_mm": 90}),
    ("low-spot", {"round": 1, "purpose": "inspection", "depth_mm": 90, "where": "plate"}),
    ("touch-up", {"round": 2}),
    ("core", {"method": "displacement", "volume_ml": 100, "mass_g": 3}),
    ("pull", {"kpa": 100}),
    ("deficiency", {"sort": "gap", "severity": "stop"}),
    ("conditions", {"air_c": 20}),
    ("visit", {"asked": "depths"}),
]


@pytest.mark.parametrize(("kind", "body"), ELSEWHERE, ids=[kind for kind, _ in ELSEWHERE])
def test_a_fact_of_one_surface_voids_the_signature_of_that_surface_alone(kind: str, body: dict[str, Any]) -> None:
    book = Notebook.begun(bays=2)
    book.write("surface", {**book.body(SURFACE), "key": key(4), "name": "South wall"})
    book.again(book.bays[1], surface=key(4))
    # The second bay was laid out on the first wall once, so a third one that never was stands for the other wall.
    book.write("bay", {**book.body(book.bays[1]), "key": key(150), "surface": key(4)})
    ours, theirs = ([covers(about_surfaces(taken(book), [name]))] for name in (SURFACE, key(4)))
    about_bay = kind not in ("visit",)
    book.write(kind, {**body, **({"bay": key(150)} if about_bay else {})})
    ours.append(covers(about_surfaces(taken(book), [SURFACE])))
    theirs.append(covers(about_surfaces(taken(book), [key(4)])))
    assert ours[0] == ours[1]
    assert (theirs[0] != theirs[1]) is about_bay


@pytest.mark.parametrize("thing", ["job", "place", "foam", "surface", "bay"])
def test_a_signature_for_a_surface_covers_the_things_that_it_rests_on(thing: str) -> None:
    book = Notebook.begun()
    book.write("place", {"key": key(7), "name": "Unit 7"})
    book.again(SURFACE, place=key(7))
    book.write("foam", {**book.body(FOAM), "key": key(8), "name": "Used elsewhere"})
    book.write("place", {"key": key(9), "name": "Another unit"})
    signed = covers(about_surfaces(taken(book), [SURFACE]))
    for stranger in (key(8), key(9)):
        book.again(stranger, name="described anew")
    assert covers(about_surfaces(taken(book), [SURFACE])) == signed
    keys = {"job": JOB, "place": key(7), "foam": FOAM, "surface": SURFACE, "bay": book.bays[0]}
    book.again(keys[thing], note="described anew")
    assert covers(about_surfaces(taken(book), [SURFACE])) != signed
