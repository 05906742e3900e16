"""Backups are whole or are none, and a store that is restored is the store that was backed up. Job files go out and come in."""

import json
import shutil
import sqlite3
import threading
from collections.abc import Callable, Iterator
from contextlib import closing
from io import BytesIO
from pathlib import Path

import pytest

from fieldapp.records.file import NothingToReckonError, load
from fieldapp.store.backup import MANIFEST, BackupError, backup, restore, verify
from fieldapp.store.jobfile import export_job, import_job
from fieldapp.store.store import DATABASE, Store
from tests.jobs import JOB, Notebook
from tests.sheets import ROOT, SAMPLES, Sheet, key
from tests.stores import digest, opened, person, picture, states

FOLDER = ROOT / "sample_jobs"


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    """A store with a job, its photos, an account and a withdrawal that waits."""
    with opened(tmp_path / "data") as made:
        import_job(made, FOLDER / "tamarack-yard.jsonl")
        inspector = person(made, "inspector-1")
        book = Notebook.begun(bays=1)
        book.withdraw(key(1))
        made.records.accept(book.records, inspector)
        yield made


def everything(store: Store) -> tuple[object, ...]:
    tables = ("records", "waiting", "receipts", "accounts", "sign_ins", "shares", "links")
    rows = [store.database.rows(f"SELECT * FROM {table} ORDER BY 1") for table in tables]
    return *rows, {name: path.read_bytes() for name, path in store.photos.all().items()}


def test_a_backup_restored_is_the_store_that_was_backed_up(store: Store, tmp_path: Path) -> None:
    made = backup(store.folder, tmp_path / "backup")
    assert (made.records, made.waiting, made.photos) == (store.records.counts()[0], 1, 9)
    assert verify(tmp_path / "backup") == made
    restore(tmp_path / "backup", tmp_path / "restored")
    with Store(tmp_path / "restored") as again:
        assert everything(again) == everything(store)
        # Phones must know that what was acknowledged since may be gone.
        assert again.identity != store.identity


def test_a_restored_store_goes_on(store: Store, tmp_path: Path) -> None:
    last = store.records.counts()[1]
    backup(store.folder, tmp_path / "backup")
    (tmp_path / "restored").mkdir()
    restore(tmp_path / "backup", tmp_path / "restored")
    with opened(tmp_path / "restored") as again:
        record = {**Sheet.laid_out(bays=1).records[0], "id": key(1), "kind": "visit", "body": {}}
        (outcome,) = again.records.accept([record], None)
        assert outcome.state == "accepted"
        assert outcome.seq is not None
        assert outcome.seq > last
        assert again.accounts.sign_in("inspector-1", "depth gauge 7", kind="device", label="", address="")


def test_a_backup_taken_while_others_write_is_one_state_of_the_store(store: Store, tmp_path: Path) -> None:
    stop, sizes = threading.Event(), [0]

    def write() -> None:
        number = 0
        while not stop.is_set():
            number += 1
            batch = [{**Sheet.laid_out(bays=1).records[0], "id": key(number * 10 + step)} for step in range(5)]
            for place, record in enumerate(batch):
                record["n"] = number * 10 + place
                record["device"] = "d-busy"
            store.records.accept(batch, None)
            content = picture(20 + number % 900, 20)
            store.photos.put(digest(content), BytesIO(content), len(content))
            sizes[0] = number * 5

    before = store.records.counts()[0]
    writer = threading.Thread(target=write)
    writer.start()
    made = [backup(store.folder, tmp_path / f"backup-{number}") for number in range(5)]
    stop.set()
    writer.join()
    assert sizes[0] > 0
    records = [each.records for each in made]
    assert records == sorted(records)
    # Batches are whole in each of them.
    assert {(count - before) % 5 for count in records} == {0}
    assert all(verify(tmp_path / f"backup-{number}") == each for number, each in enumerate(made))


def _flip(path: Path) -> None:
    content = bytearray(path.read_bytes())
    content[len(content) // 2] ^= 1
    path.write_bytes(content)


def _alter_a_record(folder: Path) -> None:
    with closing(sqlite3.connect(folder / DATABASE, isolation_level=None)) as connection:
        connection.execute("DROP TRIGGER records_hold")
        connection.execute("UPDATE records SET raw = replace(raw, '\"by\"', '\"bY\"') WHERE seq = 7")


def _drop_a_record(folder: Path) -> None:
    with closing(sqlite3.connect(folder / DATABASE, isolation_level=None)) as connection:
        connection.execute("DROP TRIGGER records_stay")
        connection.execute("DELETE FROM records WHERE seq = 7")


def _spoil_a_page(folder: Path) -> None:
    with (folder / DATABASE).open("r+b") as file:
        file.seek(4096 * 3)
        file.write(b"\xff" * 4096)


DAMAGE: dict[str, Callable[[Path], object]] = {
    "a flipped bit in a photo": lambda folder: _flip(next((folder / "photos").iterdir())),
    "a photo gone": lambda folder: next((folder / "photos").iterdir()).unlink(),
    "a photo too many": lambda folder: (folder / "photos" / f"{digest(b'x')}.jpg").write_bytes(b"x"),
    "a record altered": _alter_a_record,
    "a record gone": _drop_a_record,
    "a page spoilt": _spoil_a_page,
    "half a database": lambda folder: (folder / DATABASE).write_bytes((folder / DATABASE).read_bytes()[:20_000]),
    "no database": lambda folder: (folder / DATABASE).unlink(),
    "no manifest": lambda folder: (folder / MANIFEST).unlink(),
    "another format": lambda folder: (folder / MANIFEST).write_text('{"format": 2}'),
}


@pytest.mark.parametrize("damage", DAMAGE)
def test_a_backup_that_is_not_whole_is_found_out_and_not_restored(store: Store, tmp_path: Path, damage: str) -> None:
    backup(store.folder, tmp_path / "backup")
    DAMAGE[damage](tmp_path / "backup")
    with pytest.raises(BackupError):
        restore(tmp_path / "backup", tmp_path / "restored")
    assert not (tmp_path / "restored").exists()


def test_a_backup_goes_into_a_new_folder_and_a_store_into_an_empty_one(store: Store, tmp_path: Path) -> None:
    backup(store.folder, tmp_path / "backup")
    with pytest.raises(BackupError, match="there already"):
        backup(store.folder, tmp_path / "backup")
    with pytest.raises(BackupError, match="not empty"):
        restore(tmp_path / "backup", store.folder)
    with pytest.raises(BackupError, match="nothing to back up"):
        backup(tmp_path, tmp_path / "other")


def test_a_backup_that_fails_leaves_nothing(store: Store, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def fails(_folder: Path) -> None:
        raise BackupError("broken")

    monkeypatch.setattr("fieldapp.store.backup.verify", fails)
    with pytest.raises(BackupError):
        backup(store.folder, tmp_path / "backup")
    assert [path.name for path in tmp_path.iterdir()] == ["data"]


def test_a_photo_that_rotted_costs_no_other_its_backup_and_is_named(store: Store, tmp_path: Path) -> None:
    name, path = sorted(store.photos.all().items())[0]
    _flip(path)
    made = backup(store.folder, tmp_path / "backup")
    assert (made.photos, made.photos_damaged) == (8, (name,))
    assert verify(tmp_path / "backup") == made


# Job files


@pytest.mark.parametrize("name", SAMPLES)
def test_a_job_file_that_comes_in_goes_out_the_same_with_its_photos(tmp_path: Path, name: str) -> None:
    with Store(tmp_path / "data") as store:
        done = import_job(store, FOLDER / f"{name}.jsonl")
        lines = (FOLDER / f"{name}.jsonl").read_bytes().splitlines()
        assert (done.accepted, done.refused, done.photos_missing, done.photos_refused) == (len(lines), [], [], [])
        out = export_job(store, done.job, tmp_path / "out.jsonl")
    assert load((tmp_path / "out.jsonl").read_bytes().splitlines()) == load(lines)
    beside = {path.name: path.read_bytes() for path in (FOLDER / name).glob("*")}
    assert {path.name: path.read_bytes() for path in (tmp_path / "out").glob("*")} == beside
    assert (out.records, out.photos) == (len(lines), len(beside))


def test_a_job_file_that_comes_twice_changes_nothing(store: Store) -> None:
    before = everything(store)
    done = import_job(store, FOLDER / "tamarack-yard.jsonl")
    assert (done.accepted, done.photos_stored, done.photos_already_there) == (0, 0, 9)
    assert everything(store) == before


def test_refused_lines_and_photos_are_told_and_cost_no_others(store: Store, tmp_path: Path) -> None:
    lines = (FOLDER / "hollow-road-walls.jsonl").read_bytes().splitlines()
    (tmp_path / "job.jsonl").write_bytes(b"\n".join([*lines[:-1], b"{broken", lines[-1], b'{"id": 7}']))
    shutil.copytree(FOLDER / "hollow-road-walls", tmp_path / "job")
    first, second = sorted((tmp_path / "job").iterdir())
    _flip(first)
    second.unlink()
    done = import_job(store, tmp_path / "job.jsonl")
    assert (done.accepted, [refusal.line for refusal in done.refused]) == (len(lines), [len(lines), len(lines) + 2])
    assert ([name for name, _ in done.photos_refused], done.photos_missing) == ([first.stem], [second.stem])
    assert export_job(store, done.job, tmp_path / "out.jsonl").photos_missing == sorted([first.stem, second.stem])


def test_what_the_store_has_already_under_another_content_is_refused_by_id(store: Store, tmp_path: Path) -> None:
    records = Notebook.begun(bays=1).records
    records[-1]["note"] = "altered"
    (tmp_path / "job.jsonl").write_text("\n".join(json.dumps(record) for record in records))
    done = import_job(store, tmp_path / "job.jsonl")
    assert [(refusal.id, refusal.field) for refusal in done.refused] == [(records[-1]["id"], "id")]


def test_a_file_without_a_job_and_a_job_without_records_are_told(store: Store, tmp_path: Path) -> None:
    (tmp_path / "job.jsonl").write_text("hello")
    with pytest.raises(NothingToReckonError):
        import_job(store, tmp_path / "job.jsonl")
    with pytest.raises(KeyError):
        export_job(store, key(77), tmp_path / "out.jsonl")
    assert not (tmp_path / "out.jsonl").exists()


def test_a_file_out_replaces_an_older_one_only_when_it_is_whole(
    store: Store, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    out = tmp_path / "out.jsonl"
    out.write_text("older")

    def cut(_job: str) -> Iterator[bytes]:
        yield b"{}\n"
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(store.records, "export_lines", cut)
    with pytest.raises(OSError, match="did not take it"):
        export_job(store, JOB, out)
    assert out.read_text() == "older"
    assert states(store.records.accept(Notebook.begun(bays=1).records, None))
