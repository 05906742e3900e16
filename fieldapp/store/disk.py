"""Files that are there whole or not at all, and the one error for a disk that took nothing."""

import os
import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from tempfile import NamedTemporaryFile
from typing import IO, Final

#: Primary SQLite codes that say 'the disk did not take it', or another process held it for too long.
_DISK_CODES: Final = {
    sqlite3.SQLITE_FULL,
    sqlite3.SQLITE_IOERR,
    sqlite3.SQLITE_READONLY,
    sqlite3.SQLITE_CANTOPEN,
    sqlite3.SQLITE_BUSY,
}
#: Ending of files that are still growing.
PART: Final = ".part"


class DiskError(OSError):
    """The disk is full or failing: nothing of what was sent is kept, and it may be sent again."""


@contextmanager
def disk_told() -> Iterator[None]:
    """Turns what SQLite and the system say of a disk that took nothing into `DiskError`."""
    try:
        yield
    except sqlite3.OperationalError as error:
        # Extended codes keep the primary one in their low byte.
        if error.sqlite_errorcode & 0xFF in _DISK_CODES:
            raise DiskError(f"the disk did not take it: {error}") from error
        raise
    except DiskError:
        raise
    except OSError as error:
        raise DiskError(f"the disk did not take it: {error.strerror or error}") from error


@dataclass(slots=True)
class Growing:
    """A file that is being written; `path` may still be set otherwise until it is whole."""

    file: IO[bytes]
    path: Path

    @property
    def part(self) -> Path:
        """Where its bytes are for now, all of them that were written so far."""
        self.file.flush()
        return Path(self.file.name)


@contextmanager
def written_whole(path: Path, scratch: Path | None = None) -> Iterator[Growing]:
    """A file to write, which takes its name only when all of it is on the disk; on any error nothing is left.

    Args:
        path: Where it will be.
        scratch: Folder, on the same file system, where it grows; default: beside `path`.
    """
    with NamedTemporaryFile(dir=scratch or path.parent, prefix=".", suffix=PART, delete=False) as out:
        growing = Growing(out, path)
        try:
            yield growing
            part = growing.part
            os.fsync(out.fileno())
            part.chmod(0o644)
            part.replace(growing.path)
        except BaseException:
            Path(out.name).unlink(missing_ok=True)
            raise
    sync_folder(growing.path.parent)


def sync_folder(folder: Path) -> None:
    """Makes a rename in this folder last through a power cut."""
    if os.name == "nt":  # folders cannot be opened there, and need not be
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)
