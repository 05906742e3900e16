"""What was acknowledged is there once, whatever happened: killed at any moment, or on a disk that is full.

A kill cannot tell a commit that reached the disk from one that reached the page cache; that every connection waits for the
disk (synchronous = FULL) is held by `test_store`.
"""

import json
import random
import signal
import socket
import sqlite3
import threading
import time
from collections import Counter
from collections.abc import Iterator
from contextlib import closing
from dataclasses import dataclass, field
from http.client import HTTPException
from io import BytesIO
from pathlib import Path
from subprocess import Popen
from typing import Any

import pytest

from fieldapp.store.disk import DiskError
from fieldapp.store.store import DATABASE, Store
from tests.keeper import ACKNOWLEDGED, DEVICE, PHASES, record
from tests.serving import child
from tests.sheets import Sheet
from tests.stores import Caller, Phone, digest, minimal_app, opened, person, picture, states

RANDOM_KILLS, KILLS_AT_EACH_PHASE, KILLS_OVER_HTTP = 90, 10, 40
SEED = 20_261_201


def test_two_hundred_kills_are_made() -> None:
    assert RANDOM_KILLS + KILLS_AT_EACH_PHASE * len(PHASES) + KILLS_OVER_HTTP == 200


@dataclass
class Nursery:
    """Rounds of children that die."""

    process: Popen[str]
    folder: Path
    lost: Counter[str] = field(default_factory=Counter)

    def round(self, **order: Any) -> int:
        assert self.process.stdin is not None
        assert self.process.stdout is not None
        self.process.stdin.write(json.dumps(order) + "\n")
        self.process.stdin.flush()
        return int(self.process.stdout.readline())

    def acknowledged(self) -> list[str]:
        path = self.folder / ACKNOWLEDGED
        if not path.exists():
            return []
        # A line without its end was never acknowledged.
        whole, _, _ = path.read_text().rpartition("\n")
        return whole.split()

    def look(self) -> set[str]:
        """What of the acknowledged is missing. Everything else about the store must be in order."""
        with Store(self.folder) as store:
            assert store.database.rows("PRAGMA integrity_check") == [("ok",)]
            ids = [record_id for (record_id,) in store.database.rows("SELECT id FROM records")]
            photos = store.photos.all()
            for name, path in photos.items():
                assert digest(path.read_bytes()) == name, "a photo under its name is whole"
            # The counts of the one device are what its records say.
            ns = {n for (n,) in store.database.rows("SELECT n FROM records")}
            receipt = store.records.receipt(DEVICE)
            assert {*range(1, receipt + 1)} <= ns
            assert receipt + 1 not in ns
        assert len(ids) == len(set(ids)), "none is there twice"
        return set(self.acknowledged()) - set(ids) - set(photos)


@pytest.fixture
def nursery(tmp_path: Path) -> Iterator[Nursery]:
    folder = tmp_path / "data"
    with Store(folder):
        pass
    with child("-m", "tests.keeper", folder) as process:
        yield Nursery(process, folder)


def rounds(nursery: Nursery, phase: str, times: int, *, too_early: bool = False) -> set[str]:
    """So many kills; what was acknowledged and is not there."""
    chance = random.Random(f"{SEED} {phase}")
    for number in range(times):
        lives = {"lives_s": chance.uniform(0.01, 0.06)} if phase == "random" else {}
        died_by = nursery.round(phase=phase, too_early=too_early, seed=SEED + number, **lives)
        assert died_by == -signal.SIGKILL
        if not too_early:
            assert nursery.look() == set(), f"lost in round {number}"
    return nursery.look()


def test_a_kill_at_any_moment_loses_nothing_that_was_acknowledged(nursery: Nursery) -> None:
    assert rounds(nursery, "random", RANDOM_KILLS) == set()
    assert len(nursery.acknowledged()) > RANDOM_KILLS, "enough was acknowledged for this to say something"


@pytest.mark.parametrize("phase", PHASES)
def test_a_kill_at_this_phase_loses_nothing_that_was_acknowledged(nursery: Nursery, phase: str) -> None:
    assert rounds(nursery, phase, KILLS_AT_EACH_PHASE) == set()


@pytest.mark.parametrize("phase", ["random", "mid-insert", "before-commit", "mid-photo", "before-rename"])
def test_one_that_acknowledges_too_early_is_seen_to_lose(nursery: Nursery, phase: str) -> None:
    # The control: were the tests above blind, this one would find nothing missing either.
    assert rounds(nursery, phase, 30 if phase == "random" else 5, too_early=True) != set()


def test_a_kill_between_commit_and_reply_makes_no_second_record(nursery: Nursery) -> None:
    rounds(nursery, "after-commit", 1)
    with Store(nursery.folder) as store:
        unanswered = {r["id"] for r in store.records.pull(person(store, "office-1", "office"), 0).records}
        assert unanswered > set(nursery.acknowledged())
        before = store.records.counts()[0]
        again = store.records.accept([record(number) for number in range(1, before + 1)], None)
        assert set(states(again)) == {"already-there"}
        assert store.records.counts()[0] == before


# Over HTTP


class Sender(threading.Thread):
    """A phone that sends until all of its records and photos are acknowledged, whatever the server does."""

    def __init__(self, port: int, number: int) -> None:
        super().__init__()
        self.phone = Phone(port)
        self.name_there, self.signed_in = f"inspector-{number}", False
        self.device = f"d-{number}"
        self.records = [
            {**record(number * 10_000 + n), "by": self.name_there, "device": self.device, "n": n} for n in range(1, 601)
        ]
        self.photos = [picture(20 + number, 20 + n, "PNG") for n in range(12)]
        self.receipt = 0
        self.refused: list[Any] = []
        self.cut_off = 0

    def run(self) -> None:
        waiting = list(self.records)
        photos = list(self.photos)
        while waiting or photos:
            try:
                if not self.signed_in:
                    self.phone.sign_in(self.name_there)
                    self.signed_in = True
                if waiting:
                    status, reply = self.phone.send(waiting[:10], self.device)
                    if status != 200 or any(outcome["state"] == "refused" for outcome in reply["outcomes"]):
                        self.refused.append((status, reply))
                        return
                    waiting, self.receipt = waiting[10:], reply["receipt"]
                if photos and len(waiting) % 50 == 0:
                    status, reply = self.phone.call("PUT", f"/api/photo/{digest(photos[0])}", photos[0], "image/png")
                    if status not in (200, 201):
                        self.refused.append((status, reply))
                        return
                    photos = photos[1:]
            except (OSError, HTTPException):
                # Refused, reset, or cut off in mid-answer: not acknowledged, so it is sent again.
                self.cut_off += 1
                time.sleep(0.005)


def test_phones_that_send_again_lose_nothing_to_a_server_that_is_killed_forty_times(
    nursery: Nursery, unused_port: int
) -> None:
    senders = [Sender(unused_port, number) for number in (1, 2, 3)]
    with opened(nursery.folder) as store:
        for sender in senders:
            person(store, sender.name_there)
    for sender in senders:
        sender.start()
    chance = random.Random(SEED)
    for _ in range(KILLS_OVER_HTTP):
        assert nursery.round(port=unused_port, lives_s=chance.uniform(0.05, 0.12)) == -signal.SIGKILL
    while any(sender.is_alive() for sender in senders):
        # Told to stop, it stops by itself and says so.
        assert nursery.round(port=unused_port, lives_s=0.5, signal=signal.SIGTERM) == 0
    for sender in senders:
        sender.join()
    assert [sender.refused for sender in senders] == [[], [], []]
    assert sum(sender.cut_off for sender in senders) > KILLS_OVER_HTTP / 2, "the kills were felt"
    with Store(nursery.folder) as store:
        assert store.database.rows("PRAGMA integrity_check") == [("ok",)]
        kept = [json.loads(raw) for (raw,) in store.database.rows("SELECT raw FROM records ORDER BY id")]
        sent = sorted((r for sender in senders for r in sender.records), key=lambda r: str(r["id"]))
        assert kept == sent
        assert set(store.photos.all()) == {digest(photo) for sender in senders for photo in sender.photos}
        assert [store.records.receipt(sender.device) for sender in senders] == [600, 600, 600]


@pytest.fixture
def unused_port() -> int:
    with socket.create_server(("127.0.0.1", 0)) as listener:
        return int(listener.getsockname()[1])


# A full disk


def test_a_full_disk_refuses_a_batch_whole_and_takes_it_when_there_is_room(tmp_path: Path) -> None:
    with opened(tmp_path) as store:
        person(store, "inspector-1")
        caller = Caller(minimal_app(store).test_client())
        caller.sign_in("inspector-1")
        first, second = [Sheet.even(depth_mm=100.0, bays=40).records[part] for part in (slice(0, 3), slice(3, None))]
        caller.send(first)
        pages = store.database.value("PRAGMA page_count")
        # SQLite's own limit, which it tells as it tells a full disk: SQLITE_FULL.
        store.database.connection.execute(f"PRAGMA max_page_count = {pages + 4}")
        headers = caller.headers
        body = {"schema": 1, "device": "d-1", "records": second}
        reply: Any = caller.client.post("/api/batch", json=body, headers=headers)
        assert (reply.status_code, reply.json["error"], reply.headers["Retry-After"]) == (507, "no-room", "60")
        assert "stays on the device" in reply.json["message"]
        assert store.records.counts()[0] == len(first)
        assert store.records.receipt("d-1") == len(first)
        assert len(caller.get("/api/changes")["records"]) == len(first), "reading goes on"
        store.database.connection.execute("PRAGMA max_page_count = 1000000")
        reply = caller.client.post("/api/batch", json=body, headers=headers)
        assert {outcome["state"] for outcome in reply.json["outcomes"]} == {"accepted"}
        assert reply.json["receipt"] == len(first) + len(second)


FULL = """
import resource, sys
from io import BytesIO
from pathlib import Path
from fieldapp.store.disk import DiskError
from fieldapp.store.store import Store
from tests.keeper import record
from tests.stores import digest, picture

def limited(size):
    resource.setrlimit(resource.RLIMIT_FSIZE, (size, resource.RLIM_INFINITY))

def attempt(what):
    try:
        return what()
    except DiskError:
        return "refused"

with Store(Path(sys.argv[1])) as store:
    large = picture(900, 900, "PNG", color="white") + bytes(200_000)
    put = lambda: store.photos.put(digest(large), BytesIO(large), len(large))
    take = lambda: len(store.records.accept([record(n, x="x" * 5000) for n in range(1, 101)], None))
    files = lambda: len([p for p in store.folder.rglob("*") if p.is_file() and p.parent.name in ("photos", "incoming")])
    told = []
    # No file may grow beyond this: the system answers a write as a full disk does, in the middle of it.
    limited(150_000)
    told += [attempt(put), files(), attempt(take), store.records.counts()[0]]
    limited(resource.RLIM_INFINITY)
    told += [attempt(put), files(), attempt(take), store.records.counts()[0]]
    told += store.database.rows("PRAGMA integrity_check")
    print(told)
"""


def test_a_disk_that_fills_in_the_middle_of_a_write_keeps_nothing_half(tmp_path: Path) -> None:
    with child("-c", FULL, tmp_path / "data") as process:
        out, _ = process.communicate(timeout=30)
    assert out.strip() == "['refused', 0, 'refused', 0, 'stored', 1, 100, 100, ('ok',)]"


def test_a_photo_that_meets_a_full_disk_is_told_so_and_taken_later(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    content = picture()

    def full(_handle: int) -> None:
        raise OSError(28, "No space left on device")

    with opened(tmp_path) as store:
        person(store, "inspector-1")
        caller = Caller(minimal_app(store).test_client())
        caller.sign_in("inspector-1")
        with monkeypatch.context() as during:
            during.setattr("fieldapp.store.disk.os.fsync", full)
            reply = caller.put(digest(content), content)
        assert (reply.status_code, reply.json["error"]) == (507, "no-room")
        assert [path for path in store.photos.folder.rglob("*") if path.is_file()] == []
        assert caller.put(digest(content), content).status_code == 201


def test_a_reader_is_let_in_though_it_cannot_be_noted_that_it_was_seen(tmp_path: Path) -> None:
    with opened(tmp_path) as store:
        person(store, "Ada")
        made = store.accounts.sign_in("Ada", "depth gauge 7", kind="device", label="", address="")
        clock: Any = store.accounts._clock
        clock.now += 120.0
        store.database.connection.execute("PRAGMA query_only = ON")
        assert store.accounts.who(made.token) is not None
        store.database.connection.execute("PRAGMA query_only = OFF")


def test_a_folder_that_cannot_be_written_is_told_in_one_sentence(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("")
    with pytest.raises(DiskError, match="the disk did not take it"):
        Store(tmp_path / "file")


def test_another_process_that_writes_is_waited_for(tmp_path: Path) -> None:
    with Store(tmp_path) as store, closing(sqlite3.connect(tmp_path / DATABASE, isolation_level=None)) as other:
        other.execute("BEGIN IMMEDIATE")
        done: list[str] = []

        def accept() -> None:
            done.extend(states(store.records.accept([record(1)], None)))

        writer = threading.Thread(target=accept)
        writer.start()
        writer.join(0.1)
        assert done == []
        other.execute("COMMIT")
        writer.join()
        assert done == ["accepted"]


def test_a_photo_sent_by_two_phones_at_once_is_there_once(tmp_path: Path) -> None:
    content = picture(400, 400, "PNG")
    told: list[str] = []
    barrier = threading.Barrier(6)
    with Store(tmp_path) as store:

        def put() -> None:
            barrier.wait()
            told.append(store.photos.put(digest(content), BytesIO(content), len(content)))

        threads = [threading.Thread(target=put) for _ in range(6)]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
        assert "stored" in told
        assert [path.stem for path in store.photos.folder.rglob("*") if path.is_file()] == [digest(content)]
