"""Writes records as phones would: ids, times and counts without a clock and without chance, so that each run is the same."""

import json
from dataclasses import dataclass, field
from datetime import UTC, datetime, timedelta
from hashlib import sha256
from pathlib import Path
from typing import Any

from fieldapp.records.digest import about_surfaces, covers
from fieldapp.records.record import Record, read_record

INCH = 25.4
FOOT = 304.8


def stable_uuid(seed: str, at: datetime) -> str:
    """A UUID shaped as version 7 (RFC 9562): the time in front, the rest from the seed's digest."""
    stamp = f"{int(at.timestamp() * 1000):012x}"
    rest = sha256(seed.encode()).hexdigest()
    variant = "89ab"[int(rest[3], 16) % 4]
    return f"{stamp[:8]}-{stamp[8:]}-7{rest[:3]}-{variant}{rest[4:7]}-{rest[7:19]}"


def instant(at: datetime) -> str:
    """A time as records write it: UTC, milliseconds."""
    return at.astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%S.") + f"{at.microsecond // 1000:03d}Z"


def eighths(depth_mm: float) -> tuple[float, str]:
    """A depth as a person reads it off a probe in eighths of an inch: exact millimetres, and what was typed."""
    steps = max(0, round(depth_mm / INCH * 8))
    whole, part = divmod(steps, 8)
    below = 8
    while part and part % 2 == 0:
        part, below = part // 2, below // 2
    typed = f"{whole} {part}/{below}" if part and whole else f"{part}/{below}" if part else f"{whole}"
    return steps * INCH / 8, typed


def millimetres(depth_mm: float) -> tuple[float, str]:
    """A depth as a person reads it off a probe in millimetres."""
    whole = max(0, round(depth_mm))
    return float(whole), str(whole)


def _exact(value: Any) -> Any:
    """Numbers as they are meant: 3 in is 76.2 mm, not the 76.19999999999999 that binary arithmetic makes of it."""
    if isinstance(value, float):
        return round(value, 6)
    if isinstance(value, dict):
        return {name: _exact(part) for name, part in value.items()}
    return [_exact(part) for part in value] if isinstance(value, list) else value


@dataclass
class Device:
    """A phone in somebody's hand, with its own count and its own time."""

    name: str
    by: str
    at: datetime
    n: int = 0


@dataclass
class Writer:
    """A job under way. `device` is the phone that writes; time moves on with every record."""

    name: str
    start: datetime
    metric: bool = False
    records: list[dict[str, Any]] = field(default_factory=list)
    photos: dict[str, bytes] = field(default_factory=dict)

    def __post_init__(self) -> None:
        """The job's id, and the office's desk that sets it up."""
        self.job = stable_uuid(f"{self.name} job", self.start)
        self.inspector = Device("d-7f3a", "demo-inspector-a", self.start + timedelta(hours=26))
        self.crew = Device("d-21c8", "demo-applicator-2", self.start + timedelta(hours=1))
        self.device = Device("d-0d11", "demo-office", self.start)

    def new_key(self, what: str) -> str:
        """A key for a thing."""
        return stable_uuid(f"{self.name} {what}", self.device.at)

    def write(self, kind: str, seconds: float = 9.0, **body: Any) -> str:
        """Write a record, so many seconds after the last one on this device; returns its id."""
        device = self.device
        device.n += 1
        device.at += timedelta(seconds=seconds)
        record_id = stable_uuid(f"{self.name} {device.name} {device.n}", device.at)
        envelope = {
            "id": record_id,
            "job": self.job,
            "kind": kind,
            "at": instant(device.at),
            "by": device.by,
            "device": device.name,
        }
        self.records.append({**envelope, "n": device.n, "body": _exact(body)})
        return record_id

    def reading(self, bay: str, row: int, col: int, depth_mm: float, **more: Any) -> str:
        """A depth as it is read off the probe."""
        exact, typed = (millimetres if self.metric else eighths)(depth_mm)
        told = {"round": 1, "purpose": "inspection", "depth_mm": exact, "entered": typed, **more}
        return self.write("reading", 7.0, bay=bay, row=row, col=col, **told)

    def photo(self, content: bytes, **body: Any) -> str:
        """A picture, kept beside the job by its digest."""
        digest = sha256(content).hexdigest()
        self.photos[digest] = content
        size = {"bytes": len(content), "width": 1200, "height": 900}
        return self.write("photo", 20.0, sha256=digest, media_type="image/jpeg", **size, **body)

    def taken(self) -> list[Record]:
        """The records so far, as a reader takes them; none may be refused."""
        found = [read_record(record) for record in self.records]
        refused = [record for record in found if not isinstance(record, Record)]
        if refused:
            raise ValueError(f"{self.name}: {refused[0]}")
        return [record for record in found if isinstance(record, Record)]

    def sign(self, role: str, name: str, statement: str, surfaces: list[str] | None = None, **more: Any) -> None:
        """Sign what stands so far, for the whole job or for named surfaces."""
        records = self.taken()
        spoken_of = about_surfaces(records, surfaces) if surfaces else records
        told: dict[str, Any] = {"role": role, "name": name, "statement": statement, "strokes": SCRAWL, **more}
        if surfaces:
            told["surfaces"] = surfaces
        self.write("signature", 60.0, **told, covers=covers(spoken_of))

    def save(self, folder: Path) -> None:
        """The job file, and its photos beside it."""
        self.taken()
        lines = [json.dumps(record, ensure_ascii=False, separators=(",", ":")) for record in self.records]
        (folder / f"{self.name}.jsonl").write_text("\n".join(lines) + "\n", encoding="utf-8")
        if self.photos:
            beside = folder / self.name
            beside.mkdir(exist_ok=True)
            for stale in set(beside.glob("*.jpg")) - {beside / f"{digest}.jpg" for digest in self.photos}:
                stale.unlink()
            for digest, content in self.photos.items():
                (beside / f"{digest}.jpg").write_bytes(content)


#: A drawn signature: two strokes in a box from 0 to 1.
SCRAWL = [
    [
        [0.08, 0.62],
        [0.14, 0.3],
        [0.2, 0.66],
        [0.27, 0.34],
        [0.34, 0.6],
        [0.46, 0.44],
        [0.58, 0.57],
        [0.72, 0.4],
        [0.9, 0.52],
    ],
    [[0.12, 0.78], [0.48, 0.72], [0.88, 0.76]],
]
