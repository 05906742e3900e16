"""The digest that a signature covers: SHA-256 over the canonical JSON (RFC 8785) of the records that it speaks of."""

from collections.abc import Iterable
from hashlib import sha256

from fieldapp.records.record import Record


def covers(records: Iterable[Record]) -> str:
    """SHA-256, in hex, of the records without signatures, sorted by id."""
    spoken_of = sorted((record for record in records if record.kind != "signature"), key=lambda record: record.id)
    return sha256(b"[" + b",".join(record.canonical for record in spoken_of) + b"]").hexdigest()


def about_surfaces(records: Iterable[Record], surface_keys: Iterable[str]) -> list[Record]:
    """The records that a signature for named surfaces speaks of.

    The job, the places and foams that the surfaces use, the surfaces, their bays, and every fact about any of these or about
    such a fact. Records that belong to other surfaces alone are left out, so they can change without voiding it.
    """
    all_records = [record for record in records if record.kind != "signature"]
    wanted = set(surface_keys)
    things = set(wanted)
    for record in all_records:
        if record.kind == "surface" and record.body["key"] in wanted:
            things.update(key for key in (record.body.get("foam"), record.body.get("place")) if key)
        elif record.kind == "bay" and record.body.get("surface") in wanted:
            things.add(record.body["key"])
    taken = [
        record for record in all_records if record.kind == "job" or (record.describes and record.body["key"] in things)
    ]
    things.update(record.body["key"] for record in taken)
    facts = [record for record in all_records if not record.describes]
    # Facts about facts (an acceptance of a repair of a deficiency of a bay): repeat until nothing more is drawn in.
    while True:
        more = [record for record in facts if things.intersection(spoken_of_by(record))]
        if not more:
            return taken
        taken.extend(more)
        things.update(record.id for record in more)
        drawn = {record.id for record in more}
        facts = [record for record in facts if record.id not in drawn]


def spoken_of_by(record: Record) -> list[str]:
    """Keys and ids of everything that a fact is about."""
    body = record.body
    single = (body.get(name) for name in ("bay", "surface", "about", "record", "deficiency", "repair"))
    several = [key for name in ("bays", "surfaces") for key in (body.get(name) or [])]
    return [key for key in single if isinstance(key, str)] + several
