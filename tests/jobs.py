"""A notebook that writes whole jobs for tests; ids and times follow the order of writing."""

import json
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from fieldapp.reckoning.job import reckon
from fieldapp.reckoning.results import JobResult
from fieldapp.records.counting import count
from fieldapp.records.file import load
from fieldapp.records.record import Record, read_record
from tests.sheets import Sheet, key

JOB, FOAM, SURFACE = key(1), key(2), key(3)


@dataclass
class Notebook(Sheet):
    """A sheet with a method for what is read, noted, mended, described anew, removed and withdrawn."""

    @classmethod
    def begun(cls, *, bays: int = 1) -> "Notebook":
        """A wall of closed-cell foam, 101.6 mm asked as a minimum, 76.2 mm as vapour depth; three points a bay."""
        made = cls.laid_out(bays=bays)
        return cls(made.records, made.bays)

    @classmethod
    def read_through(cls, depth_mm: float, *, bays: int = 1) -> "Notebook":
        """The same, with one depth read at every point."""
        book = cls.begun(bays=bays)
        for bay in range(bays):
            book.read_bay(bay, depth_mm)
        return book

    def body(self, thing: str) -> dict[str, Any]:
        """The latest body with that key; change it in place before anything is loaded."""
        found: dict[str, Any] = [record["body"] for record in self.records if record["body"].get("key") == thing][-1]
        return found

    def again(self, thing: str, **changes: Any) -> str:
        """Describe a thing anew."""
        kind = next(record["kind"] for record in self.records if record["body"].get("key") == thing)
        return self.write(kind, {**self.body(thing), **changes})

    def remove(self, thing: str) -> str:
        kind = next(record["kind"] for record in self.records if record["body"].get("key") == thing)
        return self.write(kind, {"key": thing, "removed": True})

    def read(self, row: int, depth_mm: float | None = None, **more: Any) -> str:
        """A reading of the first bay, round 1, for inspection, unless told otherwise."""
        where = {"bay": self.bays[0], "row": row, "col": 0, "round": 1, "purpose": "inspection"}
        depth = {} if depth_mm is None else {"depth_mm": depth_mm}
        return self.write("reading", {**where, **depth, **more})

    def read_bay(self, bay: int, depth_mm: float, **more: Any) -> list[str]:
        """One depth at each of its three points."""
        return [self.read(row, depth_mm, bay=self.bays[bay], **more) for row in range(3)]

    def spot(self, depth_mm: float, **more: Any) -> str:
        """A low spot of the first bay."""
        where = {"bay": self.bays[0], "round": 1, "purpose": "inspection", "where": "stud-edge"}
        return self.write("low-spot", {**where, "depth_mm": depth_mm, **more})

    def touch_up(self, number: int, bay: int = 0) -> str:
        """A touch-up that opens a round."""
        return self.write("touch-up", {"bay": self.bays[bay], "round": number})

    def core(self, mass_g: float, **more: Any) -> str:
        """A core of the first bay; 100 ml by displacement unless told otherwise."""
        sizes: dict[str, Any] = {"method": "displacement", "volume_ml": 100.0}
        return self.write("core", {"bay": self.bays[0], **sizes, "mass_g": mass_g, **more})

    def deficiency(self, severity: str = "repair", **about: Any) -> str:
        return self.write("deficiency", {"sort": "gap", "severity": severity, **(about or {"surface": SURFACE})})

    def repair(self, deficiency: str) -> str:
        return self.write("repair", {"deficiency": deficiency})

    def accept(self, repair: str, role: str = "inspector") -> str:
        return self.write("acceptance", {"repair": repair, "role": role})

    def withdraw(self, record: str) -> str:
        return self.write("withdrawal", {"record": record, "reason": "mis-keyed"})


def taken(records: Iterable[Mapping[str, Any]]) -> list[Record]:
    """Those of these records that can be read."""
    return [record for raw in records if isinstance(record := read_record(raw), Record)]


def reckoned(records: Iterable[Mapping[str, Any]]) -> JobResult:
    """The result of a job file with these records."""
    return reckon(count(load(json.dumps(record).encode() for record in records).job).reckoned)
