"""The append-only table of records: what is accepted, what is already there, what is refused and why."""

import json
import time
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import Any, Final, Literal, NamedTuple

from fieldapp.records.file import LONGEST_LINE
from fieldapp.records.record import Record, Refusal, read_record
from fieldapp.store.database import Database
from fieldapp.store.intake import Intake
from fieldapp.store.moments import moment
from fieldapp.store.people import Account
from fieldapp.store.rules import refused_for

#: Most text of records in one answer to a pull: phones read it on slow links. [characters]
LARGEST_PULL: Final = 2_000_000


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of one record: `seq` where it is kept, else the field, what was found and what is allowed."""

    id: str
    state: Literal["accepted", "already-there", "refused"]
    seq: int | None = None
    field: str = ""
    found: str = ""
    allowed: str = ""

    def as_json(self) -> dict[str, Any]:
        """As the batch call answers. Written out: `asdict` copies deeply, a seventh of the time of a batch."""
        return {
            "id": self.id,
            "state": self.state,
            "seq": self.seq,
            "field": self.field,
            "found": self.found,
            "allowed": self.allowed,
        }


class Pulled(NamedTuple):
    """Records after a cursor, each with its sequence number; ask again from `cursor` while there is `more`."""

    records: list[dict[str, Any]]
    seqs: list[int]
    cursor: int
    more: bool


class RecordStore:
    """Records in the order in which they came. Nothing is ever changed or deleted; the database refuses both."""

    def __init__(self, database: Database) -> None:
        self._database = database

    def accept(
        self, values: Sequence[Any], writer: Account | None, *, sign_in: str = "", counted: bool = False
    ) -> list[Outcome]:
        """Take a batch in one transaction; what is returned is on the disk.

        One bad record never costs the others.

        Args:
            values: JSON values; a `Refusal` stands for one that could not even be read.
            writer: Who sends them; None for the office's own command, which is trusted.
            sign_in: The sign-in that sent them.
            counted: True over sync, where `n` is required.
        Returns:
            An outcome for each value, in their order. A withdrawal of a record that is not here yet is accepted without a
            sequence number: it waits, and joins the records when its target comes and has the same author.
        Raises:
            DiskError: nothing of the batch was kept.
        """
        # All that can be judged without the database is judged before the writer's lock is taken.
        read = [_read(value, counted=counted) for value in values]
        barred = [refused_for(item, writer) if isinstance(item, Record) else item for item in read]
        if not any(isinstance(item, Record) for item in read):
            return [_refused(item) for item in barred if item is not None]
        outcomes: list[Outcome] = []
        with self._database.write() as connection:
            intake = Intake(connection, writer, sign_in, moment(time.time()))
            for item, bar in zip(read, barred, strict=True):
                if isinstance(item, Refusal):
                    outcomes.append(_refused(item))
                    continue
                found = intake.take(item, bar)
                outcomes.append(_refused(found) if isinstance(found, Refusal) else Outcome(item.id, *found))
            intake.finish()
        return outcomes

    def pull(self, account: Account, after: int, limit: int = 500, job: str | None = None) -> Pulled:
        """Records that came after a cursor, of the jobs that the account may see, or of one of these.

        Sequence numbers are given under one writer's lock, so none ever appears behind a cursor.
        """
        conditions = ["seq > ?"]
        wanted: list[Any] = [after]
        if account.role == "applicator":
            conditions.append("job IN (SELECT job FROM shares WHERE firm = ?)")
            wanted.append(account.firm)
        if job is not None:
            conditions.append("job = ?")
            wanted.append(job)
        rows = self._database.connection.execute(
            f"SELECT seq, raw FROM records WHERE {' AND '.join(conditions)} ORDER BY seq LIMIT ?", (*wanted, limit + 1)
        )
        seqs: list[int] = []
        records: list[dict[str, Any]] = []
        size, more = 0, False
        for seq, raw in rows:
            size += len(raw)
            if len(records) == limit or (records and size > LARGEST_PULL):
                more = True
                break
            seqs.append(seq)
            records.append(json.loads(raw))
        return Pulled(records, seqs, seqs[-1] if seqs else after, more)

    def of_job(self, job: str, after: int = 0) -> list[Record]:
        """The records of a job that came after a sequence number, in the order in which they came."""
        return [record for _, record in self.numbered(job, after)]

    def numbered(self, job: str, after: int = 0) -> list[tuple[int, Record]]:
        """The same, each with its sequence number."""
        rows = self._database.rows("SELECT seq, raw FROM records WHERE job = ? AND seq > ? ORDER BY seq", job, after)
        return [(seq, _stored(raw)) for seq, raw in rows]

    def find(self, record_id: str) -> Record | None:
        """One record by its id."""
        raw = self._database.value("SELECT raw FROM records WHERE id = ?", record_id)
        return None if raw is None else _stored(raw)

    def came_from(self, job: str) -> dict[str, tuple[str, str]]:
        """For each record of a job the time of receipt and the sign-in that sent it."""
        rows = self._database.rows("SELECT id, received_at, received_from FROM records WHERE job = ?", job)
        return {record_id: (at, sign_in) for record_id, at, sign_in in rows}

    def last_seq(self, job: str) -> int:
        """The highest sequence number of a job; 0 where it has no records."""
        return int(self._database.value("SELECT max(seq) FROM records WHERE job = ?", job) or 0)

    def receipt(self, device: str) -> int:
        """The highest count of a device up to which every record is here; a hole ends it."""
        return int(self._database.value("SELECT n FROM receipts WHERE device = ?", device) or 0)

    def counts(self) -> tuple[int, int]:
        """How many records there are, and the last sequence number."""
        ((records, last),) = self._database.rows("SELECT count(*), ifnull(max(seq), 0) FROM records")
        return records, last

    def export_lines(self, job: str) -> Iterator[bytes]:
        """A job as the lines of a job file, in the records' own order."""
        rows = self._database.connection.execute("SELECT raw FROM records WHERE job = ? ORDER BY at, id", (job,))
        for (raw,) in rows:
            yield raw.encode() + b"\n"

    def photos_of(self, jobs: Iterable[str]) -> set[str]:
        """Digests of all photos that these jobs speak of."""
        found: set[str] = set()
        for job in jobs:
            rows = self._database.rows(
                "SELECT json_extract(raw, '$.body.sha256') FROM records WHERE job = ? AND kind = 'photo'", job
            )
            found.update(digest for (digest,) in rows)
        return found


def _read(value: Any, *, counted: bool) -> Record | Refusal:
    if isinstance(value, Refusal):
        return value
    try:
        record = read_record(value)
    except RecursionError:
        return Refusal("", "record", "values nested too deeply", "a record as documented")
    if isinstance(record, Refusal):
        return record
    if len(record.canonical) > LONGEST_LINE:
        return Refusal(record.id, "record", f"{len(record.canonical)} bytes", f"at most {LONGEST_LINE} bytes")
    if counted and record.raw.get("n") is None:
        return Refusal(record.id, "n", "nothing", "the device's own count of its records, 1 or more")
    return record


def _stored(raw: str) -> Record:
    """A record from the table, which holds its canonical form and was checked when it came."""
    value = json.loads(raw)
    return Record(
        id=value["id"],
        job=value["job"],
        kind=value["kind"],
        at=value["at"],
        by=value["by"],
        device=value["device"],
        body=value["body"],
        raw=value,
        canonical=raw.encode(),
    )


def _refused(refusal: Refusal) -> Outcome:
    return Outcome(refusal.id, "refused", None, refusal.field, refusal.found, refusal.allowed)
