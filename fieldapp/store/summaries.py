"""One row a job, so that ten thousand are listed as quickly as a hundred. All of it is derived from the records."""

import json
import sqlite3
import unicodedata
from dataclasses import dataclass
from typing import Any, Final

from fieldapp.reckoning.results import Result
from fieldapp.report.view import JobView

#: Fields of a job's description by whose words it is found.
_SEARCHED: Final = ("name", "site", "client", "contractor", "engaged_by", "permit_no", "project_no")


@dataclass(frozen=True, slots=True)
class Summary:
    """A job in a list. Its results are those of all its records up to `last_seq`; `last_at` is RFC 3339, UTC."""

    job: str
    name: str
    site: str
    result: Result
    places_meet: int
    places_short: int
    places_unproven: int
    bays_read: int
    bays_total: int
    last_at: str
    last_seq: int


@dataclass(frozen=True, slots=True)
class Page:
    """Some of the rows that were asked for, and how many there are in all."""

    rows: list[Summary]
    total: int
    page: int
    per_page: int

    @property
    def pages(self) -> int:
        """How many pages there are; 1 where there is nothing."""
        return max(1, -(-self.total // self.per_page))


def folded(text: str) -> str:
    """Text as it is compared in a search: without case and accents."""
    parts = unicodedata.normalize("NFKD", text.casefold())
    return "".join(letter for letter in parts if not unicodedata.combining(letter))


def touch(connection: sqlite3.Connection, job: str, seq: int, at: str, *, described: bool) -> None:
    """Note, in the transaction that keeps the records, that a job has new ones; its results are now behind."""
    connection.execute(
        "INSERT INTO summaries (job, last_seq, last_at) VALUES (?, ?, ?) ON CONFLICT (job) DO UPDATE"
        " SET last_seq = excluded.last_seq, last_at = max(last_at, excluded.last_at)",
        (job, seq, at),
    )
    if described:
        _describe(connection, job)


def make_again(connection: sqlite3.Connection) -> None:
    """Drop the rows and make them from the records; results follow when they are asked for."""
    connection.execute("DELETE FROM summaries")
    rows = connection.execute("SELECT job, max(seq), max(at) FROM records GROUP BY job").fetchall()
    for job, seq, at in rows:
        touch(connection, job, seq, at, described=True)


def _describe(connection: sqlite3.Connection, job: str) -> None:
    """What finds a job in a list, from its latest description."""
    found = connection.execute(
        "SELECT raw FROM records WHERE job = ? AND kind = 'job' ORDER BY at DESC, id DESC LIMIT 1", (job,)
    ).fetchone()
    if found is None:
        return
    body = json.loads(found[0])["body"]
    if body.get("removed") is True:
        connection.execute("UPDATE summaries SET removed = 1 WHERE job = ?", (job,))
        return
    words = folded(" ".join(str(body.get(name) or "") for name in _SEARCHED))
    connection.execute(
        "UPDATE summaries SET removed = 0, name = ?, site = ?, words = ? WHERE job = ?",
        (body["name"], body.get("site") or "", words, job),
    )


def results_of(view: JobView) -> dict[str, Any]:
    """The columns that take a reckoning."""
    places = [place.result for place in view.result.places]
    return {
        "result": view.result.result,
        "places_meet": places.count("meets"),
        "places_short": places.count("short"),
        "places_unproven": places.count("unproven"),
        "bays_read": sum(surface.bays_read for surface in view.result.surfaces),
        "bays_total": sum(surface.bays_total for surface in view.result.surfaces),
    }
