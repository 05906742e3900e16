"""One batch on its way into the tables, inside one transaction."""

import sqlite3
from hashlib import sha256
from typing import Any, Final, Literal

from fieldapp.records.record import Record, Refusal
from fieldapp.store.people import Account
from fieldapp.store.summaries import touch

_COLUMNS: Final = "id, job, kind, at, by, device, n, sha, raw, received_at, received_from"
_INSERT: Final = (
    f"INSERT INTO records ({_COLUMNS}) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?) ON CONFLICT (id) DO NOTHING"
)

Taken = tuple[Literal["accepted", "already-there"], int | None]


class Intake:
    """Takes records one by one; `finish` then writes what is derived from them: receipts and the lists' rows."""

    def __init__(self, connection: sqlite3.Connection, writer: Account | None, sign_in: str, now: str) -> None:
        self._connection = connection
        self._writer = writer
        self._from = (now, sign_in)
        self._limited = writer is not None and writer.role != "office"
        self._shared: set[str] | None = None
        if writer is not None and writer.role == "applicator":
            rows = connection.execute("SELECT job FROM shares WHERE firm = ?", (writer.firm,))
            self._shared = {job for (job,) in rows}
        # Hardly ever does anything wait; where nothing does, no record is asked about it.
        self._anything_waits = connection.execute("SELECT 1 FROM waiting LIMIT 1").fetchone() is not None
        self._devices: set[str] = set()
        self._jobs: dict[str, tuple[int, str, bool]] = {}

    def take(self, record: Record, barred: Refusal | None) -> Taken | Refusal:
        """Keep a record, or say why not. What is here already, to the byte, is never refused."""
        sha = sha256(record.canonical).hexdigest()
        refusal = barred or self._barred_by_job(record)
        if refusal is not None:
            kept = self._kept(record.id)
            return ("already-there", kept[0]) if kept is not None and kept[1] == sha else refusal
        if self._limited and record.kind == "withdrawal":
            return self._take_withdrawal(record, sha)
        if self._anything_waits and (kept := self._kept(record.id)) is not None:
            return _same_or_refused(record, sha, kept)
        return self._insert(record, sha)

    def finish(self) -> None:
        """Write what follows from the records just taken."""
        for device in sorted(self._devices):
            _advance_receipt(self._connection, device)
        for job, (seq, at, described) in sorted(self._jobs.items()):
            touch(self._connection, job, seq, at, described=described)

    def _barred_by_job(self, record: Record) -> Refusal | None:
        if self._shared is None or record.job in self._shared:
            return None
        return Refusal(record.id, "job", record.job, "a job that is shared with your firm")

    def _insert(self, record: Record, sha: str) -> Taken | Refusal:
        n = record.raw.get("n")
        raw = record.canonical.decode()
        who = (record.at, record.by, record.device, n, sha, raw, *self._from)
        inserted = self._connection.execute(_INSERT, (record.id, record.job, record.kind, *who))
        if inserted.rowcount == 0:
            kept = self._kept(record.id)
            assert kept is not None, "only the id is unique"
            return _same_or_refused(record, sha, kept)
        seq = int(inserted.lastrowid or 0)
        self._note(record.job, seq, record.at, record.device, n, describes_job=record.kind == "job")
        if self._anything_waits:
            self._release(record.id, record.by)
        return ("accepted", seq)

    def _take_withdrawal(self, record: Record, sha: str) -> Taken | Refusal:
        """Only the author of a fact, or the office, withdraws it.

        A target that has not come yet has no author to compare with, and any order of batches must give the same job. So the
        withdrawal is kept aside until it comes.
        """
        kept = self._kept(record.id)
        if kept is not None:
            return _same_or_refused(record, sha, kept)
        target = record.body["record"]
        author = self._connection.execute("SELECT by FROM records WHERE id = ?", (target,)).fetchone()
        if author is None:
            n = record.raw.get("n")
            who = (record.at, record.by, record.device, n, sha, record.canonical.decode(), *self._from)
            self._connection.execute(
                "INSERT INTO waiting (id, target, job, at, by, device, n, sha, raw, received_at, received_from)"
                " VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)",
                (record.id, target, record.job, *who),
            )
            self._anything_waits = True
            if n is not None:
                self._devices.add(record.device)
            return ("accepted", None)
        if author[0] != record.by:
            return Refusal(record.id, "record", target, "a fact of your own; the office withdraws others")
        return self._insert(record, sha)

    def _release(self, record_id: str, author: str) -> None:
        """What waited for this record, and comes from its author, joins the records; and what waited for that."""
        come = [record_id]
        while come:
            rows = self._connection.execute(
                "SELECT id, job, at, by, device, n, sha, raw, received_at, received_from FROM waiting"
                " WHERE target = ? AND by = ? ORDER BY at, id",
                (come.pop(), author),
            ).fetchall()
            for waiting_id, job, at, by, device, n, *rest in rows:
                values = (waiting_id, job, "withdrawal", at, by, device, n, *rest)
                inserted = self._connection.execute(_INSERT, values)
                self._connection.execute("DELETE FROM waiting WHERE id = ?", (waiting_id,))
                self._note(job, int(inserted.lastrowid or 0), at, device, n, describes_job=False)
                come.append(waiting_id)

    def _kept(self, record_id: str) -> tuple[int | None, str] | None:
        """Sequence number and digest of what is kept under an id."""
        row: tuple[int | None, str] | None = self._connection.execute(
            "SELECT seq, sha FROM records WHERE id = ?1 UNION ALL SELECT NULL, sha FROM waiting WHERE id = ?1",
            (record_id,),
        ).fetchone()
        return row

    def _note(self, job: str, seq: int, at: str, device: str, n: Any, *, describes_job: bool) -> None:
        if n is not None:
            self._devices.add(device)
        _, latest, described = self._jobs.get(job, (0, "", False))
        self._jobs[job] = (seq, max(latest, at), described or describes_job)


def _same_or_refused(record: Record, sha: str, kept: tuple[int | None, str]) -> Taken | Refusal:
    if kept[1] == sha:
        return ("already-there", kept[0])
    return Refusal(record.id, "id", record.id, "one content for one id; another was here first and stays")


def _advance_receipt(connection: sqlite3.Connection, device: str) -> None:
    """From the count that was reached, on through what has come since, to the first hole."""
    found = connection.execute("SELECT n FROM receipts WHERE device = ?", (device,)).fetchone()
    reached = before = found[0] if found else 0
    counts = connection.execute(
        "SELECT n FROM records WHERE device = ?1 AND n > ?2"
        " UNION SELECT n FROM waiting WHERE device = ?1 AND n > ?2 ORDER BY n",
        (device, reached),
    )
    for (n,) in counts:
        if n != reached + 1:
            break
        reached = n
    if reached != before:
        connection.execute(
            "INSERT INTO receipts (device, n) VALUES (?, ?) ON CONFLICT (device) DO UPDATE SET n = excluded.n",
            (device, reached),
        )
