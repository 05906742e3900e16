"""A nursery for processes that are killed: it imports everything once, and forks a child for each round.

`python -m tests.keeper FOLDER` reads one round a line (JSON) and answers with the signal or status by which its child ended.
"""

import json
import os
import random
import signal
import sys
import time
from collections.abc import Callable
from io import BytesIO
from pathlib import Path
from typing import Any, Final

from fieldapp.serve import listening, run
from fieldapp.store import disk, intake
from fieldapp.store.store import Store
from tests.sheets import key
from tests.stores import digest, minimal_app, opened, picture

JOB: Final = key(1)
DEVICE: Final = "d-1"
ACKNOWLEDGED: Final = "acknowledged.txt"
#: Where a child kills itself; at 'random' it is killed from outside.
PHASES: Final = (
    "before-read",
    "mid-insert",
    "before-commit",
    "after-commit",
    "mid-photo",
    "before-rename",
    "after-rename",
)


def record(number: int, **body: Any) -> dict[str, Any]:
    """The record of that count."""
    envelope = {"id": key(number), "job": JOB, "kind": "visit", "at": "2026-05-04T14:00:00.000Z"}
    return {**envelope, "by": "inspector-1", "device": DEVICE, "n": number, "body": {"note": f"{number}", **body}}


def die() -> None:
    """As if the power went: nothing is flushed, closed or told."""
    os.kill(os.getpid(), signal.SIGKILL)


class Writer:
    """Writes batches and photos for ever, and notes each that was acknowledged."""

    def __init__(self, store: Store, folder: Path, order: dict[str, Any]) -> None:
        self.store = store
        self.phase: str = order["phase"]
        self.too_early: bool = order["too_early"]
        self.chance = random.Random(order["seed"])
        self.out = os.open(folder / ACKNOWLEDGED, os.O_WRONLY | os.O_CREAT | os.O_APPEND)
        self.number = store.records.counts()[0]
        self.after = self.chance.randrange(1, 4)
        self._arrange()

    def acknowledge(self, *names: str) -> None:
        os.write(self.out, (" ".join(names) + "\n").encode())

    def _arrange(self) -> None:
        """Put the child's own death where the phase says."""
        if self.phase == "mid-insert":
            self._die_within(intake.Intake, "take")
        elif self.phase == "before-commit":
            self._die_within(intake.Intake, "finish", after=True)
        elif self.phase == "before-rename":
            self._die_within(os, "fsync", after=True)
        elif self.phase == "after-rename":
            self._die_within(disk, "sync_folder")

    def _die_within(self, owner: Any, name: str, *, after: bool = False) -> None:
        real: Callable[..., Any] = getattr(owner, name)
        left = self.chance.randrange(1, 12)

        def fatal(*values: Any, **more: Any) -> Any:
            nonlocal left
            left -= 1
            if left <= 0 and not after:
                die()
            found = real(*values, **more)
            if left <= 0:
                die()
            return found

        setattr(owner, name, fatal)

    def go(self) -> None:
        while True:
            self.batch()
            self.photo()

    def batch(self) -> None:
        size = self.chance.randrange(1, 9)
        values = [record(self.number + step) for step in range(1, size + 1)]
        ids = [value["id"] for value in values]
        self.after -= 1
        if self.phase == "before-read" and not self.after:
            die()
        if self.too_early:
            self.acknowledge(*ids)
        outcomes = self.store.records.accept(values, None)
        if self.phase == "after-commit" and not self.after:
            die()
        assert {outcome.state for outcome in outcomes} <= {"accepted", "already-there"}
        self.number += size
        if not self.too_early:
            self.acknowledge(*ids)

    def photo(self) -> None:
        content = picture(32, 32, "PNG", color=f"#{self.chance.randrange(1 << 24):06x}")
        if self.too_early:
            self.acknowledge(digest(content))
        self.store.photos.put(digest(content), self.stream(content), len(content))
        if not self.too_early:
            self.acknowledge(digest(content))

    def stream(self, content: bytes) -> BytesIO:
        return Deadly(content) if self.phase == "mid-photo" and self.after <= 0 else BytesIO(content)


class Deadly(BytesIO):
    """Bytes in the middle of which the reader dies."""

    def read(self, size: int | None = -1) -> bytes:
        if self.tell():
            die()
        return super().read(min(size or 50, 50))


def write(folder: Path, order: dict[str, Any]) -> None:
    with Store(folder) as store:
        Writer(store, folder, order).go()


def serve(folder: Path, order: dict[str, Any]) -> None:
    with opened(folder) as store, listening("127.0.0.1", order["port"]) as listener:
        run(minimal_app(store), listener)


def round_of(folder: Path, order: dict[str, Any]) -> int:
    """One child, from its birth to its end. Returns its status, negative for a signal."""
    child = os.fork()
    if not child:
        try:
            (serve if "port" in order else write)(folder, order)
            os._exit(0)
        except BaseException as error:
            print(repr(error), file=sys.stderr, flush=True)
            os._exit(1)
    if "lives_s" in order:
        time.sleep(order["lives_s"])
        os.kill(child, order.get("signal", signal.SIGKILL))
    return _end_of(child)


def _end_of(child: int) -> int:
    """How a child ended; one that never came to the place where it was to die is ended by another signal."""
    until = time.monotonic() + 15.0
    while True:
        found, status = os.waitpid(child, os.WNOHANG)
        if found:
            return os.waitstatus_to_exitcode(status)
        if time.monotonic() > until:
            os.kill(child, signal.SIGABRT)
        time.sleep(0.001)


def main() -> None:
    folder = Path(sys.argv[1])
    for line in sys.stdin:
        print(round_of(folder, json.loads(line)), flush=True)


if __name__ == "__main__":
    main()
