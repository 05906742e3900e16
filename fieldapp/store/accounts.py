"""Accounts and sign-ins: passwords by scrypt, tokens kept only as their digest, a throttle that survives a restart."""

import secrets
import sqlite3
import time
import unicodedata
from collections.abc import Callable
from contextlib import suppress
from hashlib import sha256
from hmac import compare_digest
from threading import BoundedSemaphore
from typing import Any, Final

from werkzeug.security import check_password_hash, generate_password_hash

from fieldapp.store.database import Database
from fieldapp.store.disk import DiskError
from fieldapp.store.moments import moment, seconds_of
from fieldapp.store.people import ROLES, Account, SignIn, SignInEvent, SignInKind
from fieldapp.store.throttle import Door, SignInRefused, storable

PASSWORD_METHOD: Final = "scrypt:32768:8:1"
LEAST_PASSWORD: Final = 10
MOST_PASSWORD: Final = 1000
MOST_NAME: Final = 60
#: How long a sign-in lasts after it was last used. A phone may lie in a truck over a winter. [s]
LASTS_S: Final[dict[str, float]] = {"browser": 7 * 86_400.0, "device": 400 * 86_400.0}
#: `last_seen` is written no more often than this. [s]
SEEN_EVERY_S: Final = 60.0
_FIRST_TOKEN: Final = "first_account_token"
_ACCOUNT: Final = "a.id, a.name, a.role, a.firm, a.active"


class AccountRefused(ValueError):  # noqa: N818 (the word of the interface: what is refused, not what went wrong)
    """An account that was not made or changed: the field, what was found and what is allowed; never a password."""

    def __init__(self, field: str, found: str, allowed: str) -> None:
        super().__init__(f"{field}: found {found}; allowed: {allowed}")
        self.field = field
        self.found = found
        self.allowed = allowed


class Accounts:
    """Who may sign in, who is signed in, and which firm sees which job."""

    def __init__(
        self, database: Database, clock: Callable[[], float] = time.time, method: str = PASSWORD_METHOD
    ) -> None:
        self._database = database
        self._clock = clock
        self._method = method
        self._door = Door(database, clock)
        # What an unknown name is checked against: the same work as for a known one, and never true.
        self._nobody = f"{method}${secrets.token_hex(8)}${'0' * 128}"
        # A hash takes 32 MB and a tenth of a second: two at a time, so that a crowd at the door stops nobody inside.
        self._hashing = BoundedSemaphore(2)

    # Accounts

    def first_account_token(self) -> str | None:
        """A new one-time token for making the first account; None when there is an account. Earlier ones are void."""
        token = secrets.token_urlsafe(32)
        with self._database.write() as connection:
            if _any_account(connection):
                return None
            connection.execute(
                "INSERT INTO meta (name, value) VALUES (?, ?) ON CONFLICT (name) DO UPDATE SET value = excluded.value",
                (_FIRST_TOKEN, _digest(token)),
            )
        return token

    def is_first_token(self, token: str) -> bool:
        """True where this token may still make the first account."""
        kept = self._database.value("SELECT value FROM meta WHERE name = ?", _FIRST_TOKEN)
        return kept is not None and compare_digest(kept, _digest(token)) and not _any_account(self._database.connection)

    def make_first(self, token: str, name: str, password: str) -> Account:
        """Make the first account, of the office, once.

        Raises:
            AccountRefused: a wrong or used token, or as `make` does.
        """
        if not self.is_first_token(token):
            raise AccountRefused("token", "another", "the one-time address that the last start printed, used once")
        row = self._new(name, "office", password, None)
        with self._database.write() as connection:
            # Asked again inside the transaction: of two that come at once, one makes it.
            if not connection.execute("DELETE FROM meta WHERE name = ?", (_FIRST_TOKEN,)).rowcount:
                raise AccountRefused("token", "one that was used", "an address that was not used")
            return _insert(connection, row)

    def make(self, name: str, role: str, password: str, firm: str | None = None) -> Account:
        """Make an account.

        Raises:
            AccountRefused: a name that is taken or none, an unknown role, an applicator without a firm, a short password.
        """
        row = self._new(name, role, password, firm)
        with self._database.write() as connection:
            return _insert(connection, row)

    def set_password(self, account_id: str, password: str) -> None:
        """Give an account another password; whoever is signed in by the old one is signed out.

        Raises:
            AccountRefused: an unknown account or a password out of bounds.
        """
        account = self.account(account_id)
        if account is None:
            raise AccountRefused("account", "nobody", "an account")
        hashed = self._hashed(account.name, password)
        with self._database.write() as connection:
            connection.execute("UPDATE accounts SET password = ? WHERE id = ?", (hashed, account_id))
            self._end_all(connection, account_id)

    def deactivate(self, account_id: str) -> None:
        """End an account and its sign-ins. Its records and its name stay.

        Raises:
            AccountRefused: for the last account of the office, without which nobody could make another.
        """
        with self._database.write() as connection:
            office = "SELECT id FROM accounts WHERE role = 'office' AND active = 1"
            if [account for (account,) in connection.execute(office)] == [account_id]:
                raise AccountRefused("account", "the last account of the office", "any other")
            connection.execute("UPDATE accounts SET active = 0 WHERE id = ?", (account_id,))
            self._end_all(connection, account_id)

    def account(self, account_id: str) -> Account | None:
        """One account by its id."""
        rows = self._database.rows(f"SELECT {_ACCOUNT} FROM accounts a WHERE id = ?", account_id)
        return _account(rows[0]) if rows else None

    def all(self) -> list[Account]:
        """All accounts, by name."""
        return [_account(row) for row in self._database.rows(f"SELECT {_ACCOUNT} FROM accounts a ORDER BY folded")]

    # Sign-ins

    def sign_in(self, name: str, password: str, *, kind: SignInKind, label: str, address: str) -> SignIn:
        """Sign in by name and password.

        Raises:
            SignInRefused: a wrong name or password, told alike and after the same time; or too many tries.
        """
        known = _folded(name)
        with self._door.turn(known):
            attempt = self._door.knock(name, known, address, label)
            rows = self._database.rows(f"SELECT {_ACCOUNT}, a.password FROM accounts a WHERE folded = ?", known)
            hashed = rows[0][5] if rows else self._nobody
            with self._hashing:
                good = check_password_hash(hashed, storable(password, MOST_PASSWORD + 1))
            if not rows or not good or not rows[0][4]:
                raise SignInRefused(None)
            return self._let_in(_account(rows[0]), kind, storable(label), attempt)

    def _let_in(self, account: Account, kind: SignInKind, label: str, attempt: int) -> SignIn:
        now = moment(self._clock())
        token = secrets.token_urlsafe(32)
        made = SignIn(secrets.token_hex(8), account, kind, label, now, now, token)
        with self._database.write() as connection:
            connection.execute(
                "INSERT INTO sign_ins (id, account, kind, label, token_sha, made_at, last_seen)"
                " VALUES (?, ?, ?, ?, ?, ?, ?)",
                (made.id, account.id, kind, label, _digest(token), now, now),
            )
            self._door.opened(connection, attempt, made.id)
        return made

    def who(self, token: str) -> SignIn | None:
        """Whose token this is; None for one that is unknown, ended, unused for too long, or of an ended account."""
        found = self._sign_ins("s.token_sha = ? AND s.ended_at IS NULL AND a.active = 1", _digest(token))
        if not found:
            return None
        sign_in, now = found[0], self._clock()
        unseen_s = now - seconds_of(sign_in.last_seen)
        if unseen_s > LASTS_S[sign_in.kind]:
            return None
        if unseen_s >= SEEN_EVERY_S:
            # A full disk must not keep anybody from reading.
            with suppress(DiskError), self._database.write() as connection:
                connection.execute("UPDATE sign_ins SET last_seen = ? WHERE id = ?", (moment(now), sign_in.id))
        return sign_in

    def sign_out(self, token: str) -> None:
        """End the sign-in of this token; an unknown one ends nothing."""
        self._end("token_sha", _digest(token), "signed-out")

    def revoke(self, sign_in_id: str) -> None:
        """End a sign-in from the office: a phone that was lost, say."""
        self._end("id", sign_in_id, "revoked")

    def sign_ins(self) -> list[SignIn]:
        """All that have not ended, the last seen first."""
        return self._sign_ins("s.ended_at IS NULL")

    def events(self, limit: int = 200) -> list[SignInEvent]:
        """What happened at the door, the latest first."""
        rows = self._database.rows(
            "SELECT at, what, name, address, label, sign_in FROM sign_in_events ORDER BY seq DESC LIMIT ?", limit
        )
        return [SignInEvent(*row) for row in rows]

    # Jobs shared with firms

    def share_job(self, job: str, firm: str) -> None:
        """Let a firm's applicators see a job."""
        with self._database.write() as connection:
            connection.execute(
                "INSERT INTO shares (job, firm, made_at) VALUES (?, ?, ?) ON CONFLICT DO NOTHING",
                (job, firm.strip(), moment(self._clock())),
            )

    def unshare(self, job: str, firm: str) -> None:
        """Let them see it no more; what they wrote stays."""
        with self._database.write() as connection:
            connection.execute("DELETE FROM shares WHERE job = ? AND firm = ?", (job, firm.strip()))

    def shares(self, job: str) -> list[str]:
        """Firms that see a job."""
        return [firm for (firm,) in self._database.rows("SELECT firm FROM shares WHERE job = ? ORDER BY firm", job)]

    def jobs_shared_with(self, account: Account) -> list[str] | None:
        """The jobs that an applicator sees; None for those who see all."""
        if account.role != "applicator":
            return None
        return [
            job for (job,) in self._database.rows("SELECT job FROM shares WHERE firm = ? ORDER BY job", account.firm)
        ]

    def may_see(self, account: Account, job: str) -> bool:
        """True where the account may see a job."""
        if account.role != "applicator":
            return True
        return bool(self._database.rows("SELECT 1 FROM shares WHERE firm = ? AND job = ?", account.firm, job))

    # Within

    def _new(self, name: str, role: str, password: str, firm: str | None) -> tuple[Any, ...]:
        if role not in ROLES:
            raise AccountRefused("role", role[:80], f"one of {', '.join(ROLES)}")
        name = unicodedata.normalize("NFC", name.strip())
        if not 0 < len(name) <= MOST_NAME or not name.isprintable() or not _is_text(name):
            raise AccountRefused("name", name[:80] or "nothing", f"a name of 1 to {MOST_NAME} characters")
        firm = (firm or "").strip() or None
        if role == "applicator" and firm is None:
            raise AccountRefused("firm", "nothing", "the firm whose jobs this applicator sees")
        hashed = self._hashed(name, password)
        return (secrets.token_hex(8), name, _folded(name), role, firm, 1, hashed, moment(self._clock()))

    def _hashed(self, name: str, password: str) -> str:
        if not LEAST_PASSWORD <= len(password) <= MOST_PASSWORD:
            allowed = f"{LEAST_PASSWORD} to {MOST_PASSWORD} characters"
            raise AccountRefused("password", f"{len(password)} characters", allowed)
        if not _is_text(password):
            raise AccountRefused("password", "half a character", "text")
        if _folded(password) == _folded(name):
            raise AccountRefused("password", "the name", "another word than the name")
        with self._hashing:
            return generate_password_hash(password, self._method)

    def _sign_ins(self, where: str, *values: Any) -> list[SignIn]:
        rows = self._database.rows(
            f"SELECT {_ACCOUNT}, s.id, s.kind, s.label, s.made_at, s.last_seen FROM sign_ins s"
            f" JOIN accounts a ON a.id = s.account WHERE {where} ORDER BY s.last_seen DESC, s.id",
            *values,
        )
        return [SignIn(row[5], _account(row), *row[6:]) for row in rows]

    def _end(self, column: str, value: str, what: str) -> None:
        with self._database.write() as connection:
            self._end_where(connection, f"s.{column} = ?", value, what)

    def _end_all(self, connection: sqlite3.Connection, account_id: str) -> None:
        self._end_where(connection, "s.account = ?", account_id, "revoked")

    def _end_where(self, connection: sqlite3.Connection, where: str, value: str, what: str) -> None:
        rows = connection.execute(
            "SELECT s.id, s.label, a.name FROM sign_ins s JOIN accounts a ON a.id = s.account"
            f" WHERE {where} AND s.ended_at IS NULL",
            (value,),
        ).fetchall()
        now = moment(self._clock())
        for sign_in, label, name in rows:
            connection.execute("UPDATE sign_ins SET ended_at = ? WHERE id = ?", (now, sign_in))
            self._door.note(connection, what, name, _folded(name), "", label, sign_in)


def _any_account(connection: sqlite3.Connection) -> bool:
    return connection.execute("SELECT 1 FROM accounts LIMIT 1").fetchone() is not None


def _insert(connection: sqlite3.Connection, row: tuple[Any, ...]) -> Account:
    inserted = connection.execute(
        "INSERT INTO accounts (id, name, folded, role, firm, active, password, made_at) VALUES (?, ?, ?, ?, ?, ?, ?, ?)"
        " ON CONFLICT DO NOTHING",
        row,
    )
    if not inserted.rowcount:
        raise AccountRefused("name", row[1], "a name that nobody has or had; it stands in records")
    return Account(row[0], row[1], row[3], row[4], True)


def _account(row: tuple[Any, ...]) -> Account:
    return Account(row[0], row[1], row[2], row[3], bool(row[4]))


def _folded(name: str) -> str:
    """Names that people would take for each other are one name."""
    return storable(unicodedata.normalize("NFKC", name.strip()).casefold())


def _is_text(text: str) -> bool:
    return storable(text, len(text)) == text


def _digest(token: str) -> str:
    # A token is 256 bits of chance: a plain digest of it cannot be guessed back, and is looked up by index.
    return sha256(token.encode("utf-8", "surrogatepass")).hexdigest()
