"""A job as its records describe it: what `fold` makes. Bodies stay as they were written."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from fieldapp.records.record import Record, Refusal


@dataclass(frozen=True, slots=True)
class Thing:
    """A thing with its latest description; `history` holds all of them, the latest last."""

    key: str
    body: Mapping[str, Any]
    history: tuple[Record, ...]

    @property
    def is_removed(self) -> bool:
        """True where its latest description takes it out of the job."""
        return self.body.get("removed") is True

    @property
    def name(self) -> str:
        """Its name, or a bay's label."""
        return str(self.body.get("name") or self.body.get("label") or "")


@dataclass(frozen=True, slots=True)
class Withdrawn:
    """A fact that was taken out of the reckoning, and the withdrawal that did it."""

    fact: Record
    by: Record


@dataclass(frozen=True, slots=True)
class Job:
    """One job, folded.

    `records` are all that were taken, in order; `facts` those that stand (not withdrawn, not about removed things), by kind
    and in order. Places, surfaces and bays are in the order in which people see them.
    """

    key: str
    about: Thing
    places: tuple[Thing, ...]
    foams: Mapping[str, Thing]
    surfaces: tuple[Thing, ...]
    bays: Mapping[str, tuple[Thing, ...]]
    facts: Mapping[str, tuple[Record, ...]]
    withdrawn: tuple[Withdrawn, ...]
    records: tuple[Record, ...]
    refused: tuple[Refusal, ...] = ()
    idle: tuple[Record, ...] = field(default=())

    @property
    def name(self) -> str:
        """Its name."""
        return self.about.name

    @property
    def units(self) -> str:
        """'ip' or 'si'."""
        return str(self.about.body["units"])

    def of(self, kind: str) -> tuple[Record, ...]:
        """Facts of a kind that stand, in order."""
        return self.facts.get(kind, ())

    def bay(self, key: str) -> Thing | None:
        """A bay by its key."""
        return next((bay for bays in self.bays.values() for bay in bays if bay.key == key), None)

    def surface_of(self, bay_key: str) -> Thing | None:
        """The surface of a bay."""
        owner = next((key for key, bays in self.bays.items() if any(bay.key == bay_key for bay in bays)), None)
        return next((surface for surface in self.surfaces if surface.key == owner), None)
