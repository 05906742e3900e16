"""Links for a general contractor: one job's report, unguessable, expiring, revocable."""

import secrets
import time
from collections.abc import Callable
from dataclasses import dataclass
from hashlib import sha256
from typing import Final

from fieldapp.store.database import Database
from fieldapp.store.moments import moment

MOST_DAYS: Final = 366


@dataclass(frozen=True, slots=True)
class Link:
    """A link that was made; the token itself is kept nowhere. Times RFC 3339, UTC."""

    id: str
    job: str
    label: str
    made_by: str
    made_at: str
    expires_at: str
    revoked_at: str | None


class Links:
    """Links to jobs, kept only as their digest."""

    def __init__(self, database: Database, clock: Callable[[], float] = time.time) -> None:
        self._database = database
        self._clock = clock

    def make(self, job: str, made_by: str, days: int, label: str) -> str:
        """A new link's token, told this once.

        Raises:
            ValueError: days out of bounds.
        """
        if not 1 <= days <= MOST_DAYS:
            raise ValueError(f"days: found {days}; allowed: 1 to {MOST_DAYS}")
        token, now = secrets.token_urlsafe(32), self._clock()
        with self._database.write() as connection:
            connection.execute(
                "INSERT INTO links (id, job, label, token_sha, made_by, made_at, expires_at) VALUES (?, ?, ?, ?, ?, ?, ?)",
                (
                    secrets.token_hex(8),
                    job,
                    label[:200],
                    _digest(token),
                    made_by,
                    moment(now),
                    moment(now + days * 86_400.0),
                ),
            )
        return token

    def open(self, token: str) -> str | None:
        """The job that a link is for; None for one that is unknown, expired or revoked."""
        job: str | None = self._database.value(
            "SELECT job FROM links WHERE token_sha = ? AND revoked_at IS NULL AND expires_at > ?",
            _digest(token),
            moment(self._clock()),
        )
        return job

    def revoke(self, link_id: str) -> None:
        """End a link; an unknown one ends nothing."""
        with self._database.write() as connection:
            connection.execute(
                "UPDATE links SET revoked_at = ? WHERE id = ? AND revoked_at IS NULL", (moment(self._clock()), link_id)
            )

    def of_job(self, job: str) -> list[Link]:
        """All links of a job, the latest first."""
        rows = self._database.rows(
            "SELECT id, job, label, made_by, made_at, expires_at, revoked_at FROM links WHERE job = ?"
            " ORDER BY made_at DESC, id",
            job,
        )
        return [Link(*row) for row in rows]


def _digest(token: str) -> str:
    # The text itself is digested, not the bytes it stands for: in base64 two last letters may stand for the same bytes.
    return sha256(token.encode("utf-8", "surrogatepass")).hexdigest()
