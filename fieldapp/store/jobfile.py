"""Job files out and in, with the photos beside them: in through the same door as everything else."""

import shutil
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Final

from fieldapp.records.file import Loaded, load
from fieldapp.records.record import Refusal
from fieldapp.store.disk import disk_told, written_whole
from fieldapp.store.people import Account
from fieldapp.store.photos import PhotoRefused
from fieldapp.store.records import Outcome
from fieldapp.store.store import Store

#: Records in one transaction: long imports let others write in between.
_BATCH: Final = 500


@dataclass(slots=True)
class Imported:
    """What became of a job file: counts, and what was refused with its reason."""

    job: str
    accepted: int = 0
    already_there: int = 0
    refused: list[Refusal] = field(default_factory=list)
    photos_stored: int = 0
    photos_already_there: int = 0
    photos_missing: list[str] = field(default_factory=list)
    photos_refused: list[tuple[str, PhotoRefused]] = field(default_factory=list)


@dataclass(frozen=True, slots=True)
class Exported:
    """What was written: records, photos, and the photos that were never received."""

    records: int
    photos: int
    photos_missing: list[str]


def import_job(store: Store, path: Path, writer: Account | None = None) -> Imported:
    """Take a job file and the photos in the folder of the same name beside it. A second time changes nothing.

    Raises:
        OSError: the file cannot be read.
        NothingToReckonError: it holds no job.
        DiskError: the store's disk took no more; what was taken stays, and the import may be repeated.
    """
    with path.open("rb") as lines:
        loaded = load(lines)
    done = take_loaded(store, loaded, writer)
    beside = path.with_suffix("")
    for digest in sorted(store.records.photos_of([done.job])):
        _import_photo(store, beside, digest, done)
    return done


def take_loaded(store: Store, loaded: Loaded, writer: Account | None) -> Imported:
    """Take the records of a job file that was read; its photos may follow."""
    done = Imported(loaded.job.key, refused=list(loaded.refused))
    for outcome in _accepted(store, [dict(record.raw) for record in loaded.job.records], writer):
        if outcome.state == "accepted":
            done.accepted += 1
        elif outcome.state == "already-there":
            done.already_there += 1
        else:
            done.refused.append(Refusal(outcome.id, outcome.field, outcome.found, outcome.allowed))
    return done


def export_job(store: Store, job: str, path: Path) -> Exported:
    """Write a job file, and its photos as they came into the folder of the same name beside it.

    Raises:
        KeyError: a job without records.
        DiskError: not written; what was there before is whole.
    """
    if not store.records.last_seq(job):
        raise KeyError(job)
    beside, photos, missing, records = path.with_suffix(""), 0, list[str](), 0
    with disk_told():
        # Photos first: a job file that is there has its photos.
        for digest in sorted(store.records.photos_of([job])):
            original = store.photos.original(digest)
            if original is None:
                missing.append(digest)
                continue
            beside.mkdir(exist_ok=True)
            with written_whole(beside / original.name) as growing, original.open("rb") as content:
                shutil.copyfileobj(content, growing.file)
            photos += 1
        with written_whole(path) as growing:
            for line in store.records.export_lines(job):
                growing.file.write(line)
                records += 1
    return Exported(records, photos, missing)


def _accepted(store: Store, values: list[Any], writer: Account | None) -> Iterator[Outcome]:
    for start in range(0, len(values), _BATCH):
        yield from store.records.accept(values[start : start + _BATCH], writer)


def _import_photo(store: Store, beside: Path, digest: str, done: Imported) -> None:
    if store.photos.has(digest) is not None:
        done.photos_already_there += 1
        return
    found = next((beside / f"{digest}{end}" for end in _ENDS if (beside / f"{digest}{end}").is_file()), None)
    if found is None:
        done.photos_missing.append(digest)
        return
    try:
        with found.open("rb") as content:
            store.photos.put(digest, content, found.stat().st_size)
        done.photos_stored += 1
    except PhotoRefused as error:
        done.photos_refused.append((digest, error))


_ENDS: Final = (".jpg", ".jpeg", ".png", ".webp", "")
