"""Records in, one job out: any order, any repeats, one and the same job; the input is not changed."""

from collections import defaultdict
from collections.abc import Iterable, Mapping

from fieldapp.records.digest import spoken_of_by
from fieldapp.records.fields import shown
from fieldapp.records.job import Job, Thing, Withdrawn
from fieldapp.records.record import Record, Refusal

_BAY_FACTS = frozenset({"reading", "low-spot", "touch-up", "core", "pull", "photo", "deficiency", "conditions"})
#: Of these, the ones that may name a surface instead of a bay.
_SURFACE_FACTS = frozenset({"photo", "deficiency", "conditions"})
#: Of these, the ones that name a point by row and column; in others such fields are somebody else's words.
_POINT_FACTS = frozenset({"reading", "core", "photo"})


class NoJobError(ValueError):
    """The records hold no description of a job, or the job was removed."""


def fold(records: Iterable[Record], clashing: Iterable[str] = ()) -> Job:
    """Fold records to the job that they describe.

    Args:
        records: Records of one job, in any order, repeats allowed.
        clashing: Ids that are known to be shared by differing records; refused as those found here are.
    Raises:
        NoJobError: where no record describes the job.
    """
    taken, refused = _one_of_each(records, set(clashing))
    taken, homeless = _bays_without_surface(taken)
    refused.extend(homeless)
    things = _described(taken)
    abouts = things["job"]
    if not abouts:
        raise NoJobError("no record of kind 'job' says which job this is")
    job_key = min(abouts, key=lambda key: abouts[key].history[0].order)
    if abouts[job_key].is_removed:
        raise NoJobError("the job was removed")
    surfaces = {key: thing for key, thing in things["surface"].items() if not thing.is_removed}
    bays_of: dict[str, list[Thing]] = {key: [] for key in surfaces}
    for bay in things["bay"].values():
        if not bay.is_removed and bay.body["surface"] in bays_of:
            bays_of[bay.body["surface"]].append(bay)
    known = set(things["bay"])
    live = {bay.key: bay for bays in bays_of.values() for bay in bays}
    refused.extend(_misfits(taken, live, known, set(things["surface"])))
    gone = {refusal.id for refusal in refused}
    taken = [record for record in taken if record.id not in gone]
    withdrawn, idle = _withdrawals(taken)
    out = {pair.fact.id for pair in withdrawn}
    removed_things = _removed(things, known, live)
    facts: dict[str, list[Record]] = defaultdict(list)
    for record in taken:
        if not record.describes and record.id not in out and not removed_things.intersection(_belongs_to(record)):
            facts[record.kind].append(record)
    places = _in_order(thing for thing in things["place"].values() if not thing.is_removed)
    return Job(
        key=job_key,
        about=abouts[job_key],
        places=places,
        foams={key: foam for key, foam in things["foam"].items() if not foam.is_removed},
        surfaces=_surfaces_in_order(surfaces.values(), places),
        bays={key: _in_order(bays) for key, bays in bays_of.items()},
        facts={kind: tuple(found) for kind, found in facts.items()},
        withdrawn=withdrawn,
        records=tuple(taken),
        refused=tuple(sorted(refused, key=lambda refusal: (refusal.id, refusal.field))),
        idle=idle,
    )


def _one_of_each(records: Iterable[Record], clashing: set[str]) -> tuple[list[Record], list[Refusal]]:
    """Each record once, in order; records that share an id but not their content are all refused."""
    by_id: dict[str, Record] = {}
    for record in records:
        before = by_id.setdefault(record.id, record)
        if before.canonical != record.canonical:
            clashing.add(record.id)
    refused = [
        Refusal(record_id, "id", record_id, "one content for one id; nobody can say which of these is true")
        for record_id in by_id
        if record_id in clashing
    ]
    return sorted((r for r in by_id.values() if r.id not in clashing), key=lambda r: r.order), refused


def _bays_without_surface(taken: list[Record]) -> tuple[list[Record], list[Refusal]]:
    """Descriptions of bays of a surface that was never described are refused; an earlier, good one still stands."""
    surfaces = {record.body["key"] for record in taken if record.kind == "surface"}
    homeless = {
        record.id
        for record in taken
        if record.kind == "bay" and record.body.get("removed") is not True and record.body["surface"] not in surfaces
    }
    refused = [
        Refusal(record.id, "surface", shown(record.body["surface"]), "the key of a surface of this job")
        for record in taken
        if record.id in homeless
    ]
    return [record for record in taken if record.id not in homeless], refused


def _described(taken: list[Record]) -> dict[str, dict[str, Thing]]:
    """Things by kind and key, each with its history; the latest description of a key describes it."""
    histories: dict[str, dict[str, list[Record]]] = {k: {} for k in ("job", "place", "foam", "surface", "bay")}
    for record in taken:
        if record.describes:
            histories[record.kind].setdefault(record.body["key"], []).append(record)
    return {
        kind: {key: Thing(key, history[-1].body, tuple(history)) for key, history in by_key.items()}
        for kind, by_key in histories.items()
    }


def _misfits(taken: list[Record], live: Mapping[str, Thing], known: set[str], surfaces: set[str]) -> list[Refusal]:
    """Facts about bays and surfaces that are not there, and points outside a bay's grid."""
    refused: list[Refusal] = []
    for record in taken:
        owner = record.body.get("surface") if record.kind in _SURFACE_FACTS else None
        if owner is not None and owner not in surfaces:
            refused.append(Refusal(record.id, "surface", shown(owner), "the key of a surface of this job"))
            continue
        if record.kind in _BAY_FACTS and (key := record.body.get("bay")) is not None:
            if key not in known:
                refused.append(Refusal(record.id, "bay", shown(key), "the key of a bay of this job"))
            elif key in live and record.kind in _POINT_FACTS and (misfit := _outside(record, live[key])):
                refused.append(misfit)
        elif record.kind == "covered":
            unknown = [key for key in record.body["bays"] if key not in known]
            if unknown:
                refused.append(Refusal(record.id, "bays", shown(unknown[0]), "keys of bays of this job"))
    return refused


def _outside(record: Record, bay: Thing) -> Refusal | None:
    for name, count in (("row", int(bay.body["rows"])), ("col", int(bay.body["cols"]))):
        value = record.body.get(name)
        if value is not None and value >= count:
            return Refusal(record.id, name, shown(value), f"0 to {count - 1} in bay {shown(bay.name)}")
    return None


def _withdrawals(taken: list[Record]) -> tuple[tuple[Withdrawn, ...], tuple[Record, ...]]:
    """What is withdrawn by what; and withdrawals that act on nothing.

    A withdrawal acts on facts that stand earlier than itself, another withdrawal included. Going from the latest to the
    earliest, whether a withdrawal itself still stands is settled before it is asked what it takes out.
    """
    by_id = {record.id: record for record in taken}
    out: dict[str, Record] = {}
    idle: list[Record] = []
    for record in reversed(taken):
        if record.kind != "withdrawal" or record.id in out:
            continue
        target = by_id.get(record.body["record"])
        if target is None or target.describes or target.order >= record.order:
            idle.append(record)
        else:
            out.setdefault(target.id, record)
    withdrawn = (Withdrawn(by_id[fact_id], by) for fact_id, by in out.items())
    return tuple(sorted(withdrawn, key=lambda pair: pair.fact.order)), tuple(reversed(idle))


def _removed(things: Mapping[str, Mapping[str, Thing]], known: set[str], live: Mapping[str, Thing]) -> set[str]:
    """Keys of bays and surfaces that were taken out of the job, whose facts leave the reckoning with them."""
    surfaces = {key for key, thing in things["surface"].items() if thing.is_removed}
    return surfaces | (known - live.keys())


def _belongs_to(record: Record) -> list[str]:
    """What a fact goes with when that is removed: one bay or surface, or all of several."""
    return [] if record.kind in ("covered", "spray", "signature") else spoken_of_by(record)


def _in_order(things: Iterable[Thing]) -> tuple[Thing, ...]:
    return tuple(sorted(things, key=lambda thing: (float(thing.body.get("order") or 0.0), thing.history[0].order)))


def _surfaces_in_order(surfaces: Iterable[Thing], places: tuple[Thing, ...]) -> tuple[Thing, ...]:
    """By place, then as they were first described."""
    rank = {place.key: number for number, place in enumerate(places, 1)}
    return tuple(sorted(surfaces, key=lambda s: (rank.get(s.body.get("place") or "", 0), s.history[0].order)))
