"""One record: its envelope, its order among others, and why it may be refused."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Final

import rfc8785

from fieldapp.records.fields import UUID, Fields, Instant, Pattern, Text, Whole, shown
from fieldapp.records.kinds import KINDS, check_body

_ID: Final = Pattern(UUID, "a UUID in lower case")

ENVELOPE: Final = Fields(
    {
        "id": _ID,
        "job": _ID,
        "kind": Text(1, 60),
        "at": Instant(),
        "by": Text(1, 200),
        "device": Text(1, 200),
    },
    {"n": Whole(1), "clock": Text()},
)


@dataclass(frozen=True, slots=True)
class Refusal:
    """A record that was not taken: where it stands, the field, what was found and what is allowed."""

    id: str
    field: str
    found: str
    allowed: str
    line: int | None = None

    def as_json(self) -> dict[str, Any]:
        """As `bayreckon reckon --json` lists it."""
        return {
            "line": self.line,
            "id": self.id,
            "field": self.field,
            "found": self.found,
            "allowed": self.allowed,
        }

    def sentence(self) -> str:
        """One line for a person."""
        where = f"line {self.line}" if self.line is not None else f"record {self.id}"
        return f"{where}: {self.field}: found {self.found}; allowed: {self.allowed}"


@dataclass(frozen=True, slots=True)
class Record:
    """A record that was taken.

    `raw` is the whole of it, fields that nobody here knows included, and `canonical` its canonical JSON (RFC 8785): two
    records are the same where these bytes are, and digests are taken over them.
    """

    id: str
    job: str
    kind: str
    at: str
    by: str
    device: str
    body: Mapping[str, Any]
    raw: Mapping[str, Any]
    canonical: bytes

    @property
    def order(self) -> tuple[str, str]:
        """Records stand in order of this."""
        return (self.at, self.id)

    @property
    def describes(self) -> bool:
        """True where it describes a thing; all others, unknown kinds too, are facts."""
        kind = KINDS.get(self.kind)
        return kind is not None and kind.describes


def read_record(value: Any) -> Record | Refusal:
    """A record from a JSON value, or why not. The value is not changed."""
    if not isinstance(value, dict):
        return Refusal("", "record", shown(value), "an object with id, job, kind, at, by, device and body")
    found_id = value.get("id")
    record_id = found_id if isinstance(found_id, str) else ""
    problem = ENVELOPE.check(value, "") or check_body(value["kind"], value.get("body"))
    if problem is None and value["kind"] == "job" and value["body"]["key"] != value["job"]:
        return Refusal(record_id, "key", shown(value["body"]["key"]), f"the job's own id, {value['job']}")
    if problem is not None:
        return Refusal(shown(record_id), problem.field, problem.found, problem.allowed)
    try:
        canonical = rfc8785.dumps(value)
    except (rfc8785.CanonicalizationError, UnicodeEncodeError, RecursionError) as error:
        return Refusal(record_id, "record", shown(str(error)), "values that have a canonical JSON form (RFC 8785)")
    return Record(
        id=value["id"],
        job=value["job"],
        kind=value["kind"],
        at=value["at"],
        by=value["by"],
        device=value["device"],
        body=value["body"],
        raw=value,
        canonical=canonical,
    )
