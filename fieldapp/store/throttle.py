"""How often somebody may try the door. It counts the events in the database, so a restart forgives nothing."""

import math
import sqlite3
from collections.abc import Callable
from threading import Lock
from typing import Final, NamedTuple
from zlib import crc32

from fieldapp.store.database import Database
from fieldapp.store.moments import moment, seconds_of


class SignInRefused(Exception):  # noqa: N818 (the word of the interface: what is refused, not what went wrong)
    """No sign-in: a wrong name or password, which are told alike; or, with `retry_after_s`, too many tries."""

    def __init__(self, retry_after_s: int | None) -> None:
        super().__init__("too many tries" if retry_after_s else "wrong name or password")
        self.retry_after_s = retry_after_s


class Limit(NamedTuple):
    """At most so many failed tries within a time [s], of the same name or address."""

    where: str
    most: int
    within_s: float


#: A name from one address; any names from one address (a whole office behind one); a name from anywhere.
LIMITS: Final = (
    Limit("folded = :folded AND address = :address", 5, 300.0),
    Limit("address = :address", 40, 900.0),
    Limit("folded = :folded", 100, 3600.0),
)

#: Locks for names; two names that share one only wait for each other.
_TURNS: Final = 64


class Door:
    """Notes every try before its password is looked at: one that is cut off counts as failed."""

    def __init__(self, database: Database, clock: Callable[[], float]) -> None:
        self._database = database
        self._clock = clock
        self._turns = [Lock() for _ in range(_TURNS)]

    def turn(self, folded: str) -> Lock:
        """Tries of one name come one after the other.

        So many guesses at once are not all looked at before the first is counted, and many phones that sign in rightly at once
        by one name are not taken for guesses.
        """
        return self._turns[crc32(storable(folded).encode()) % _TURNS]

    def knock(self, name: str, folded: str, address: str, label: str) -> int:
        """Count a try as failed until `opened`; returns its number.

        Raises:
            SignInRefused: with the time to wait, where there were too many.
        """
        with self._database.write() as connection:
            wait_s = self._wait_s(connection, folded, address)
            if wait_s <= 0.0:
                return self.note(connection, "refused", name, folded, address, label, "")
            # Told once, and not again for each further try: nobody fills the disk by knocking.
            last = connection.execute(
                "SELECT what FROM sign_in_events WHERE folded = ? AND address = ? ORDER BY seq DESC LIMIT 1",
                (folded, address),
            ).fetchone()
            if last is not None and last[0] != "throttled":
                self.note(connection, "throttled", name, folded, address, label, "")
        raise SignInRefused(math.ceil(wait_s))

    def opened(self, connection: sqlite3.Connection, number: int, sign_in: str) -> None:
        """That try was good."""
        connection.execute("UPDATE sign_in_events SET what = 'signed-in', sign_in = ? WHERE seq = ?", (sign_in, number))

    def note(
        self, connection: sqlite3.Connection, what: str, name: str, folded: str, address: str, label: str, sign_in: str
    ) -> int:
        """Write an event."""
        values = (
            moment(self._clock()),
            what,
            storable(name),
            storable(folded),
            address[:100],
            storable(label),
            sign_in,
        )
        inserted = connection.execute(
            "INSERT INTO sign_in_events (at, what, name, folded, address, label, sign_in) VALUES (?, ?, ?, ?, ?, ?, ?)",
            values,
        )
        return int(inserted.lastrowid or 0)

    def _wait_s(self, connection: sqlite3.Connection, folded: str, address: str) -> float:
        """Until the oldest of the tries that fill a limit is out of its time. [s]"""
        now, wait_s = self._clock(), 0.0
        for limit in LIMITS:
            oldest = connection.execute(
                f"SELECT at FROM sign_in_events WHERE {limit.where} AND what = 'refused' AND at > :since"
                " ORDER BY at DESC LIMIT 1 OFFSET :skip",
                {
                    "folded": storable(folded),
                    "address": address[:100],
                    "since": moment(now - limit.within_s),
                    "skip": limit.most - 1,
                },
            ).fetchone()
            if oldest is not None:
                wait_s = max(wait_s, seconds_of(oldest[0]) + limit.within_s - now)
        return wait_s


def storable(text: str, most: int = 200) -> str:
    """What a stranger typed, as it can be kept: bounded, and without halves of surrogate pairs."""
    return text[:most].encode("utf-8", "replace").decode()
