"""Small jobs for tests of the report and the command: a surface with even bays, written as an inspector would."""

import json
from dataclasses import dataclass, field
from functools import lru_cache
from pathlib import Path
from typing import Any

from fieldapp.records.file import load
from fieldapp.report.build import view_of
from fieldapp.report.view import JobView

ROOT = Path(__file__).resolve().parent.parent
SAMPLES = sorted(path.stem for path in (ROOT / "sample_jobs").glob("*.jsonl"))


@lru_cache(maxsize=32)
def sample(name: str) -> JobView:
    """A sample job, seen for its report."""
    with (ROOT / "sample_jobs" / f"{name}.jsonl").open("rb") as lines:
        return view_of(load(lines))


def key(number: int) -> str:
    return f"00000000-0000-7000-8000-{number:012x}"


@dataclass
class Sheet:
    """Records of a small job, written one after the other."""

    records: list[dict[str, Any]] = field(default_factory=list)
    bays: list[str] = field(default_factory=list)

    def write(self, kind: str, body: dict[str, Any]) -> str:
        number = len(self.records) + 1
        minutes, seconds = divmod(number, 60)
        at = f"2026-05-04T{14 + minutes // 60:02d}:{minutes % 60:02d}:{seconds:02d}.000Z"
        envelope = {"id": key(9000 + number), "job": key(1), "kind": kind, "at": at, "by": "inspector-1"}
        self.records.append({**envelope, "device": "d-1", "n": number, "body": body})
        return key(9000 + number)

    @classmethod
    def laid_out(cls, *, bays: int, units: str = "ip", name: str = "Sheet", surface: bool = True) -> "Sheet":
        sheet = cls()
        sheet.write("job", {"key": key(1), "name": name, "units": units, "note": "invented"})
        foam = {"cell": "closed", "resistance": {"rsi_per_m": 45.0}, "permeability_ng_m": 2.3, "max_pass_mm": 50.8}
        sheet.write("foam", {"key": key(2), "name": "Demo foam", **foam})
        if not surface:
            return sheet
        spec = {"depth_mm": 101.6, "basis": "minimum"}
        vapour = {"rule": "depth", "depth_mm": 76.2}
        about = {"key": key(3), "name": "North wall", "assembly": "wall", "foam": key(2), "bays_total": bays}
        sheet.write("surface", {**about, "chosen": "all", "spec": spec, "vapour": vapour})
        size = {"width_mm": 368.3, "height_mm": 2438.4, "rows": 3, "cols": 1}
        for number in range(bays):
            sheet.bays.append(key(100 + number))
            sheet.write(
                "bay", {"key": key(100 + number), "surface": key(3), "label": f"{number + 1}", "order": number, **size}
            )
        return sheet

    @classmethod
    def even(cls, *, depth_mm: float, bays: int, units: str = "ip", name: str = "Sheet") -> "Sheet":
        sheet = cls.laid_out(bays=bays, units=units, name=name)
        for bay in range(bays):
            for row in range(3):
                sheet.reading(bay, row, depth_mm)
        return sheet

    def reading(self, bay: int, row: int, depth_mm: float) -> str:
        where = {"bay": self.bays[bay], "row": row, "col": 0, "round": 1, "purpose": "inspection"}
        return self.write("reading", {**where, "depth_mm": depth_mm})

    def low_spot(self, bay: int, depth_mm: float) -> str:
        where = {"bay": self.bays[bay], "round": 1, "purpose": "inspection", "where": "stud-edge"}
        return self.write("low-spot", {**where, "depth_mm": depth_mm})

    def lines(self) -> list[bytes]:
        return [json.dumps(record).encode() for record in self.records]

    def view(self) -> JobView:
        return view_of(load(self.lines()))
