"""Folded jobs, kept by their last sequence number; and lists of jobs."""

from collections import OrderedDict
from contextlib import suppress
from dataclasses import dataclass
from threading import Lock
from typing import Any, Final

from fieldapp.records.file import Loaded
from fieldapp.records.fold import NoJobError, fold
from fieldapp.records.record import Record
from fieldapp.report.build import view_of
from fieldapp.report.view import JobView
from fieldapp.store.database import Database
from fieldapp.store.disk import DiskError
from fieldapp.store.people import Account
from fieldapp.store.records import RecordStore
from fieldapp.store.summaries import Page, Summary, folded, make_again, results_of

#: Jobs whose fold is kept in memory; one of 6,000 readings is some 15 MB.
KEPT: Final = 24
MOST_PER_PAGE: Final = 200
_RESULTS: Final = ("result", "places_meet", "places_short", "places_unproven", "bays_read", "bays_total")


@dataclass(frozen=True, slots=True)
class _Folded:
    seq: int
    records: tuple[Record, ...]
    view: JobView | None


class JobCache:
    """Jobs from all sides.

    A fold is kept with the sequence number of the last record in it, and used only while that is the last of the job. Records
    are never changed, so nothing else can make it stale.
    """

    def __init__(self, database: Database, records: RecordStore) -> None:
        self._database = database
        self._records = records
        self._kept: OrderedDict[str, _Folded] = OrderedDict()
        self._lock = Lock()

    def view(self, job: str) -> JobView | None:
        """A job as its records stand now; None where none describes it, or it was removed."""
        return self._folded(job).view

    def _folded(self, job: str) -> _Folded:
        with self._lock:
            found = self._kept.get(job)
            if found is not None:
                self._kept.move_to_end(job)
        if found is not None and found.seq == self._records.last_seq(job):
            return found
        # Only what came since is read; the fold itself is made anew, which takes its records in any order.
        new = self._records.numbered(job, found.seq if found else 0)
        records = (found.records if found else ()) + tuple(record for _, record in new)
        seq = new[-1][0] if new else (found.seq if found else 0)
        made = _Folded(seq, records, _view(records))
        with self._lock:
            held = self._kept.get(job)
            # Two threads may fold at once; the one that read later wins, whoever is done first.
            if seq and (held is None or held.seq <= seq):
                self._kept[job] = made
                self._kept.move_to_end(job)
                while len(self._kept) > KEPT:
                    self._kept.popitem(last=False)
        return made

    def summaries(self, account: Account, search: str = "", page: int = 1, per_page: int = 50) -> Page:
        """Jobs that the account may see, the latest active first; all words of `search` must be in what describes them.

        Only the rows of this page are reckoned, where records came since they were.
        """
        per_page = min(max(per_page, 1), MOST_PER_PAGE)
        page = max(page, 1)
        conditions, values = ["removed = 0"], list[Any]()
        if account.role == "applicator":
            conditions.append("job IN (SELECT job FROM shares WHERE firm = ?)")
            values.append(account.firm)
        for word in folded(search).split():
            conditions.append("instr(words, ?) > 0")
            values.append(word)
        where = " AND ".join(conditions)
        total = int(self._database.value(f"SELECT count(*) FROM summaries WHERE {where}", *values))
        rows = self._database.rows(
            f"SELECT job, last_seq, last_at, name, site, seq, {', '.join(_RESULTS)} FROM summaries WHERE {where}"
            " ORDER BY last_seq DESC LIMIT ? OFFSET ?",
            *values,
            per_page,
            (page - 1) * per_page,
        )
        return Page([self._summary(*row) for row in rows], total, page, per_page)

    def summary(self, job: str) -> Summary | None:
        """One job's row; None where there is none, or it was removed."""
        rows = self._database.rows(
            f"SELECT job, last_seq, last_at, name, site, seq, {', '.join(_RESULTS)} FROM summaries"
            " WHERE job = ? AND removed = 0",
            job,
        )
        return self._summary(*rows[0]) if rows else None

    def make_summaries_again(self) -> None:
        """Drop all rows of the lists and make them from the records."""
        with self._database.write() as connection:
            make_again(connection)

    def _summary(self, job: str, last_seq: int, last_at: str, name: str, site: str, seq: int, *results: Any) -> Summary:
        found = dict(zip(_RESULTS, results, strict=True))
        if seq < last_seq:
            made = self._folded(job)
            last_seq = made.seq
            if made.view is not None:
                found = results_of(made.view)
            self._keep_results(job, made.seq, found)
        return Summary(job=job, name=name, site=site, last_at=last_at, last_seq=last_seq, **found)

    def _keep_results(self, job: str, seq: int, found: dict[str, Any]) -> None:
        columns = ", ".join(f"{name} = ?" for name in found)
        # Without room on the disk the list is still told; it is only reckoned again next time.
        with suppress(DiskError), self._database.write() as connection:
            connection.execute(
                f"UPDATE summaries SET {columns}, seq = ? WHERE job = ? AND seq < ?", (*found.values(), seq, job, seq)
            )


def _view(records: tuple[Record, ...]) -> JobView | None:
    try:
        job = fold(records)
    except NoJobError:
        return None
    return view_of(Loaded(job, job.refused))
