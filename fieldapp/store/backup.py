"""Backups: taken while the server runs, verified after writing, and restored by one command."""

import json
import secrets
import shutil
import sqlite3
import time
from contextlib import closing
from dataclasses import asdict, dataclass, replace
from hashlib import file_digest, sha256
from pathlib import Path
from typing import Any, Final

from fieldapp.store.disk import disk_told, sync_folder, written_whole
from fieldapp.store.moments import moment
from fieldapp.store.store import DATABASE

MANIFEST: Final = "backup.json"
_FORMAT: Final = 1


class BackupError(RuntimeError):
    """A backup that was not made, or is not whole; the message is a sentence for a person."""


@dataclass(frozen=True, slots=True)
class BackedUp:
    """What a backup holds. `waiting` are withdrawals whose target has not come yet.

    `photos_damaged` are digests of photos that were no longer what their name says when they were to be copied: a disk that
    fails. They are left out and told, so that one of them does not cost all others their backup.
    """

    made_at: str
    records: int
    waiting: int
    last_seq: int
    photos: int
    photos_damaged: tuple[str, ...] = ()


def backup(folder: Path, to: Path) -> BackedUp:
    """Copy a store, which may be in use, into a new folder; read all of the copy again before it gets its name.

    Raises:
        BackupError: there is no store, `to` is taken, or the copy is not what was copied.
        DiskError: there was no room; nothing is left.
    """
    to = to.resolve()
    source = folder / DATABASE
    if not source.is_file():
        raise BackupError(f"{folder} holds no {DATABASE}: there is nothing to back up")
    if to.exists():
        raise BackupError(f"{to} is there already; a backup is written into a new folder")
    part = to.with_name(f".{to.name}.{secrets.token_hex(4)}.part")
    with disk_told():
        try:
            (part / "photos").mkdir(parents=True)
            before = _records_in(source)
            _copy_database(source, part / DATABASE)
            # After the database: every photo that it acknowledges was on the disk before.
            photos, damaged = _copy_photos(folder / "photos", part / "photos")
            made = replace(_count(part / DATABASE, photos), photos_damaged=damaged)
            if (made.records, made.last_seq) < before:
                raise BackupError(f"{made.records} records were copied, but {before[0]} were there before")
            with written_whole(part / MANIFEST) as growing:
                text = json.dumps({"format": _FORMAT, **asdict(made)}, indent=1)
                growing.file.write(text.encode())
            verify(part)
            sync_folder(part / "photos")
            part.rename(to)
            sync_folder(to.parent)
        except BaseException:
            shutil.rmtree(part, ignore_errors=True)
            raise
    return made


def verify(backed_up: Path) -> BackedUp:
    """Read all of a backup: the database is whole, every record and photo has its digest, and none is missing.

    Raises:
        BackupError: naming what is wrong.
    """
    try:
        told = json.loads((backed_up / MANIFEST).read_bytes())
        if told.pop("format") != _FORMAT:
            raise BackupError(f"{backed_up} is a backup of another format than {_FORMAT}")
        told = BackedUp(**{**told, "photos_damaged": tuple(told["photos_damaged"])})
    except (OSError, ValueError, KeyError, TypeError) as error:
        raise BackupError(f"{backed_up} is no backup: its {MANIFEST} cannot be read") from error
    photos = _check_photos(backed_up / "photos")
    try:
        _check_database(backed_up / DATABASE)
        found = _count(backed_up / DATABASE, photos)
    except sqlite3.DatabaseError as error:
        raise BackupError(f"{backed_up / DATABASE} is not whole: {error}") from error
    found = replace(found, made_at=told.made_at, photos_damaged=told.photos_damaged)
    if found != told:
        raise BackupError(f"{backed_up} holds {found}, but {told} was written")
    return told


def restore(backed_up: Path, to_folder: Path) -> BackedUp:
    """Make a store of a backup, after verifying it.

    It gets an identity of its own: phones then know that what was acknowledged since the backup must be sent again.

    Raises:
        BackupError: the backup is not whole, or the folder is not empty.
        DiskError: there was no room; nothing is left.
    """
    to_folder = to_folder.resolve()
    told = verify(backed_up)
    if to_folder.exists() and (not to_folder.is_dir() or any(to_folder.iterdir())):
        raise BackupError(f"{to_folder} is not empty; a backup is restored into a new or empty folder")
    part = to_folder.with_name(f".{to_folder.name}.{secrets.token_hex(4)}.part")
    with disk_told():
        try:
            shutil.copytree(backed_up, part)
            verify(part)
            (part / MANIFEST).unlink()
            with closing(sqlite3.connect(part / DATABASE, isolation_level=None)) as connection:
                connection.execute("UPDATE meta SET value = ? WHERE name = 'identity'", (secrets.token_hex(8),))
            part.replace(to_folder)
            sync_folder(to_folder.parent)
        except BaseException:
            shutil.rmtree(part, ignore_errors=True)
            raise
    return told


def _copy_database(source: Path, to: Path) -> None:
    with closing(sqlite3.connect(source)) as original, closing(sqlite3.connect(to)) as copy:
        # In one step: it reads one state while others write on. In several, every write would have it start again.
        original.backup(copy, pages=-1)
        # One file, which can be read from where nothing can be written.
        copy.execute("PRAGMA journal_mode = DELETE")


def _copy_photos(source: Path, to: Path) -> tuple[int, tuple[str, ...]]:
    """How many were copied, and the digests of those that are damaged."""
    photos, damaged = 0, list[str]()
    for path in sorted(source.iterdir()):
        if not path.is_file():
            continue
        content = path.read_bytes()
        if sha256(content).hexdigest() != path.stem:
            damaged.append(path.stem)
            continue
        with written_whole(to / path.name) as growing:
            growing.file.write(content)
        photos += 1
    return photos, tuple(damaged)


def _records_in(database: Path) -> tuple[int, int]:
    with closing(_reader(database)) as connection:
        records, last = connection.execute("SELECT count(*), ifnull(max(seq), 0) FROM records").fetchone()
    return records, last


def _count(database: Path, photos: int) -> BackedUp:
    with closing(_reader(database)) as connection:
        (waiting,) = connection.execute("SELECT count(*) FROM waiting").fetchone()
    records, last = _records_in(database)
    return BackedUp(moment(time.time()), records, waiting, last, photos)


def _check_photos(folder: Path) -> int:
    photos = 0
    for path in sorted(folder.iterdir()):
        with path.open("rb") as content:
            if file_digest(content, "sha256").hexdigest() != path.stem:
                raise BackupError(f"the photo {path} is not what its name says")
        photos += 1
    return photos


def _check_database(database: Path) -> None:
    with closing(_reader(database)) as connection:
        problems: list[tuple[Any, ...]] = connection.execute("PRAGMA integrity_check").fetchall()
        problems += connection.execute("PRAGMA foreign_key_check").fetchall()
        rows = connection.execute("SELECT id, sha, raw FROM records UNION ALL SELECT id, sha, raw FROM waiting")
        altered = [record_id for record_id, sha, raw in rows if sha256(raw.encode()).hexdigest() != sha]
    if problems != [("ok",)]:
        raise BackupError(f"{database} is not whole: {problems[0]}")
    if altered:
        raise BackupError(f"{database} is not whole: record {altered[0]} is not what its digest says")


def _reader(database: Path) -> sqlite3.Connection:
    return sqlite3.connect(f"{database.resolve().as_uri()}?mode=ro", uri=True)
