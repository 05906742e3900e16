"""The shape of the database, numbered and forward only; run once, before anything is served."""

from contextlib import closing
from typing import Final

from sqlite_utils import Database as Tables
from sqlite_utils import Migrations

from fieldapp.store.database import Database

SHAPE: Final = Migrations("bayreckon")


class NewerStoreError(RuntimeError):
    """The folder was written by a later Bayreckon than this one; the message is a sentence for a person."""


def migrate(database: Database) -> None:
    """Bring the database to this version's shape, in one transaction.

    Raises:
        NewerStoreError: where a later version has shaped it already.
    """
    with database.write():
        tables = database.tables
        pending = {migration.name for migration in SHAPE.pending(tables)}
        later = sorted({migration.name for migration in SHAPE.applied(tables)} - (_steps() - pending))
        if later:
            raise NewerStoreError(f"{database.path} was written by a later version of Bayreckon ({later[-1]}).")
        SHAPE.apply(tables)


def _run(tables: Tables, script: str) -> None:
    """Statement by statement: sqlite3's executescript would commit the transaction that a migration runs in."""
    for statement in script.split(";\n\n"):
        tables.execute(statement)


@SHAPE()
def m0001_records(tables: Tables) -> None:
    """Records, append-only; what waits for its target; how far each device's count has come without a gap."""
    _run(
        tables,
        """
        CREATE TABLE records (
            seq INTEGER PRIMARY KEY AUTOINCREMENT,
            id TEXT NOT NULL UNIQUE,
            job TEXT NOT NULL,
            kind TEXT NOT NULL,
            at TEXT NOT NULL,
            by TEXT NOT NULL,
            device TEXT NOT NULL,
            n INTEGER,
            sha TEXT NOT NULL,
            raw TEXT NOT NULL,
            received_at TEXT NOT NULL,
            received_from TEXT NOT NULL
        ) STRICT;

        CREATE INDEX records_of_job ON records (job, seq);

        CREATE INDEX records_of_device ON records (device, n) WHERE n IS NOT NULL;

        CREATE INDEX descriptions_of_job ON records (job, at, id) WHERE kind = 'job';

        CREATE TRIGGER records_stay BEFORE DELETE ON records
            BEGIN SELECT RAISE(ABORT, 'records are never deleted'); END;

        CREATE TRIGGER records_hold BEFORE UPDATE ON records
            BEGIN SELECT RAISE(ABORT, 'records are never changed'); END;

        CREATE TABLE waiting (
            id TEXT PRIMARY KEY,
            target TEXT NOT NULL,
            job TEXT NOT NULL,
            at TEXT NOT NULL,
            by TEXT NOT NULL,
            device TEXT NOT NULL,
            n INTEGER,
            sha TEXT NOT NULL,
            raw TEXT NOT NULL,
            received_at TEXT NOT NULL,
            received_from TEXT NOT NULL
        ) STRICT;

        CREATE INDEX waiting_for ON waiting (target);

        CREATE INDEX waiting_of_device ON waiting (device, n) WHERE n IS NOT NULL;

        CREATE TABLE receipts (
            device TEXT PRIMARY KEY,
            n INTEGER NOT NULL
        ) STRICT
        """,
    )


@SHAPE()
def m0002_accounts(tables: Tables) -> None:
    """Who may do what: accounts, sign-ins and their events, jobs shared with firms, links for one job."""
    _run(
        tables,
        """
        CREATE TABLE meta (
            name TEXT PRIMARY KEY,
            value TEXT NOT NULL
        ) STRICT;

        CREATE TABLE accounts (
            id TEXT PRIMARY KEY,
            name TEXT NOT NULL UNIQUE,
            folded TEXT NOT NULL UNIQUE,
            role TEXT NOT NULL CHECK (role IN ('office', 'inspector', 'applicator')),
            firm TEXT,
            active INTEGER NOT NULL CHECK (active IN (0, 1)),
            password TEXT NOT NULL,
            made_at TEXT NOT NULL,
            CHECK (role <> 'applicator' OR firm IS NOT NULL)
        ) STRICT;

        CREATE TABLE sign_ins (
            id TEXT PRIMARY KEY,
            account TEXT NOT NULL REFERENCES accounts (id),
            kind TEXT NOT NULL CHECK (kind IN ('browser', 'device')),
            label TEXT NOT NULL,
            token_sha TEXT NOT NULL UNIQUE,
            made_at TEXT NOT NULL,
            last_seen TEXT NOT NULL,
            ended_at TEXT
        ) STRICT;

        CREATE INDEX sign_ins_of_account ON sign_ins (account);

        CREATE TABLE sign_in_events (
            seq INTEGER PRIMARY KEY AUTOINCREMENT,
            at TEXT NOT NULL,
            what TEXT NOT NULL,
            name TEXT NOT NULL,
            folded TEXT NOT NULL,
            address TEXT NOT NULL,
            label TEXT NOT NULL,
            sign_in TEXT NOT NULL
        ) STRICT;

        CREATE INDEX events_of_name ON sign_in_events (folded, at);

        CREATE INDEX events_of_address ON sign_in_events (address, at);

        CREATE TRIGGER events_stay BEFORE DELETE ON sign_in_events
            BEGIN SELECT RAISE(ABORT, 'sign-in events are never deleted'); END;

        CREATE TRIGGER events_hold BEFORE UPDATE ON sign_in_events WHEN OLD.what <> 'refused'
            BEGIN SELECT RAISE(ABORT, 'sign-in events are never changed'); END;

        CREATE TABLE shares (
            job TEXT NOT NULL,
            firm TEXT NOT NULL,
            made_at TEXT NOT NULL,
            PRIMARY KEY (firm, job)
        ) STRICT, WITHOUT ROWID;

        CREATE INDEX shares_of_job ON shares (job);

        CREATE TABLE links (
            id TEXT PRIMARY KEY,
            job TEXT NOT NULL,
            label TEXT NOT NULL,
            token_sha TEXT NOT NULL UNIQUE,
            made_by TEXT NOT NULL,
            made_at TEXT NOT NULL,
            expires_at TEXT NOT NULL,
            revoked_at TEXT
        ) STRICT;

        CREATE INDEX links_of_job ON links (job)
        """,
    )


@SHAPE()
def m0003_summaries(tables: Tables) -> None:
    """One row a job for lists; all of it can be dropped and made again from the records.

    What finds a job (name, words, last record) is written with the records; its results are as of `seq`, which may be behind.
    """
    _run(
        tables,
        """
        CREATE TABLE summaries (
            job TEXT PRIMARY KEY,
            last_seq INTEGER NOT NULL,
            last_at TEXT NOT NULL,
            name TEXT NOT NULL DEFAULT '',
            site TEXT NOT NULL DEFAULT '',
            words TEXT NOT NULL DEFAULT '',
            removed INTEGER NOT NULL DEFAULT 0,
            seq INTEGER NOT NULL DEFAULT 0,
            result TEXT NOT NULL DEFAULT 'unproven',
            places_meet INTEGER NOT NULL DEFAULT 0,
            places_short INTEGER NOT NULL DEFAULT 0,
            places_unproven INTEGER NOT NULL DEFAULT 0,
            bays_read INTEGER NOT NULL DEFAULT 0,
            bays_total INTEGER NOT NULL DEFAULT 0
        ) STRICT;

        CREATE INDEX summaries_latest ON summaries (removed, last_seq DESC)
        """,
    )


def _steps() -> set[str]:
    """Names of all steps that this version knows: those that an empty database still has before it."""
    with closing(Tables(memory=True)) as empty:
        return {migration.name for migration in SHAPE.pending(empty)}
