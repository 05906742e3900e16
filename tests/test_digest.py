"""The digest that a signature covers: the right records, in the canonical form of RFC 8785."""

import json
from hashlib import sha256

from fieldapp.records.digest import about_surfaces, covers
from fieldapp.records.file import load
from fieldapp.records.record import Record, read_record
from tests.sheets import Sheet, key


def taken(sheet: Sheet) -> list[Record]:
    return [record for raw in sheet.records if isinstance(record := read_record(raw), Record)]


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
