"""The store keeps every record as it came, once; takes a batch whole; and says of each record what became of it."""

import json
import os
import sqlite3
import threading
import zlib
from io import BytesIO
from pathlib import Path
from typing import Any

import pytest
import rfc8785
from PIL import Image

from fieldapp.records.digest import covers
from fieldapp.records.file import load
from fieldapp.records.fold import fold
from fieldapp.records.job import Job
from fieldapp.store import jobs as jobs_module
from fieldapp.store.database import Database
from fieldapp.store.migrations import SHAPE, NewerStoreError, migrate
from fieldapp.store.photos import MOST_BYTES, PhotoRefused
from fieldapp.store.store import DATABASE, Store
from tests.jobs import JOB, Notebook
from tests.sheets import ROOT, SAMPLES, Sheet, key
from tests.stores import FIRM, digest, opened, person, picture, states


@pytest.fixture
def store(tmp_path: Path) -> Any:
    with opened(tmp_path / "data") as made:
        yield made


def test_every_connection_waits_for_the_disk_and_keeps_foreign_keys(store: Store) -> None:
    found: list[tuple[Any, ...]] = []

    def ask() -> None:
        names = ("synchronous", "journal_mode", "foreign_keys", "busy_timeout")
        found.append(tuple(store.database.value(f"PRAGMA {name}") for name in names))

    ask()
    other = threading.Thread(target=ask)
    other.start()
    other.join()
    # SQLite's documentation of PRAGMA synchronous: 2 is FULL.
    assert found == [(2, "wal", 1, 30_000)] * 2


@pytest.mark.parametrize("table", ["records", "sign_in_events"])
def test_what_was_written_is_neither_changed_nor_deleted(store: Store, table: str) -> None:
    store.records.accept(Sheet.laid_out(bays=1).records, None)
    somebody = person(store, "inspector-1")
    store.accounts.sign_in(somebody.name, "depth gauge 7", kind="device", label="", address="")
    with pytest.raises(sqlite3.IntegrityError, match="never deleted"):
        store.database.connection.execute(f"DELETE FROM {table}")
    with pytest.raises(sqlite3.IntegrityError, match="never changed"):
        store.database.connection.execute(f"UPDATE {table} SET at = ''")


def test_a_number_is_refused_where_the_table_asks_for_text(store: Store) -> None:
    with pytest.raises(sqlite3.IntegrityError, match="cannot store"):
        store.database.connection.execute("INSERT INTO meta (name, value) VALUES ('x', x'00')")


def test_a_store_is_shaped_once_and_opened_again_as_it_was(tmp_path: Path) -> None:
    with Store(tmp_path) as first:
        identity = first.identity
        first.records.accept(Sheet.laid_out(bays=1).records, None)
    with Store(tmp_path) as again:
        assert again.identity == identity
        assert len(again.records.of_job(JOB)) == 4


def test_a_store_of_a_later_version_is_not_touched(tmp_path: Path) -> None:
    with Store(tmp_path) as made, made.database.write() as connection:
        connection.execute(
            "INSERT INTO _sqlite_migrations (migration_set, name, applied_at) VALUES (?, 'm9999_later', '')",
            (SHAPE.name,),
        )
    with pytest.raises(NewerStoreError, match="m9999_later"):
        Store(tmp_path)


def test_a_migration_that_fails_leaves_nothing_behind(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def fails(_database: Any) -> None:
        raise RuntimeError

    database = Database(tmp_path / DATABASE)
    # The second step fails after the first has made its tables.
    monkeypatch.setattr(SHAPE._migrations[1], "fn", fails)
    with pytest.raises(RuntimeError):
        migrate(database)
    assert database.tables.table_names() == []
    database.close()


def test_a_write_that_fails_is_taken_back_and_the_next_one_goes_through(store: Store) -> None:
    insert = "INSERT INTO meta (name, value) VALUES ('x', '1')"

    def fail_within() -> None:
        with store.database.write() as connection:
            connection.execute(insert)
            raise RuntimeError

    with pytest.raises(RuntimeError):
        fail_within()
    with store.database.write() as connection:
        connection.execute(insert)
    assert store.database.value("SELECT count(*) FROM meta WHERE name = 'x'") == 1


def test_a_record_is_kept_to_the_last_unknown_field(store: Store) -> None:
    record = {**Sheet.laid_out(bays=1).records[0], "later": {"a": [1.5, "é", None, True]}}
    store.records.accept([record], None)
    (kept,) = store.records.of_job(JOB)
    assert kept.raw == record
    assert kept.canonical == rfc8785.dumps(record)
    assert [json.loads(line) for line in store.records.export_lines(JOB)] == [record]


def test_the_same_record_twice_is_there_once(store: Store) -> None:
    records = Sheet.even(depth_mm=101.6, bays=2).records
    first = store.records.accept(records, None)
    again = store.records.accept([*records, *records], None)
    assert set(states(first)) == {"accepted"}
    assert set(states(again)) == {"already-there"}
    assert [o.seq for o in again] == [o.seq for o in first] * 2
    assert store.records.counts()[0] == len(records)


def test_key_order_and_number_form_make_no_other_content(store: Store) -> None:
    (record, *_) = Sheet.laid_out(bays=1).records
    store.records.accept([{**record, "x": 3}], None)
    turned = dict(reversed(list({**record, "x": 3.0}.items())))
    assert states(store.records.accept([turned], None)) == ["already-there"]


def test_the_same_id_with_other_content_is_refused_by_name_and_the_first_stays(store: Store) -> None:
    (record, *_) = Sheet.laid_out(bays=1).records
    store.records.accept([record], None)
    (outcome,) = store.records.accept([{**record, "by": "somebody else"}], None)
    assert (outcome.state, outcome.field, outcome.found) == ("refused", "id", record["id"])
    assert store.records.of_job(JOB)[0].raw == record


def test_one_bad_record_never_costs_the_batch(store: Store) -> None:
    records: list[Any] = Sheet.even(depth_mm=101.6, bays=1).records
    bad: list[Any] = [
        None,
        7,
        [],
        "x",
        {},
        {**records[0], "id": "no"},
        {**records[-1], "id": key(1), "body": {"depth_mm": -1}},
    ]
    deep: Any = []
    for _ in range(600):
        deep = [deep]
    bad.append({**records[0], "id": key(2), "later": deep})
    bad.append({**records[0], "id": key(3), "kind": deep})
    bad.append({**records[0], "id": key(4), "later": "x" * 1_000_001})
    bad.append({**records[0], "id": key(5), "later": float("nan")})
    mixed = [item for pair in zip(records, [*bad, *bad], strict=False) for item in pair]
    outcomes = store.records.accept(mixed, None)
    assert states(outcomes[::2]) == ["accepted"] * (len(outcomes) // 2)
    assert states(outcomes[1::2]) == ["refused"] * (len(outcomes) // 2)
    assert all(outcome.field and outcome.allowed for outcome in outcomes[1::2])


def test_sequence_numbers_rise_in_the_order_of_commits_whoever_writes(store: Store) -> None:
    books = [Sheet.even(depth_mm=100.0, bays=10).records for _ in range(4)]
    for number, records in enumerate(books):
        for record in records:
            record["id"] = f"{number:08d}{record['id'][8:]}"
            record["job"] = record["body"]["key"] if record["kind"] == "job" else record["job"]
    seen: list[int] = []

    def write(records: list[dict[str, Any]]) -> None:
        for start in range(0, len(records), 5):
            store.records.accept(records[start : start + 5], None)
            cursor = seen[-1] if seen else 0
            seen.extend(store.records.pull(office, cursor).seqs)

    office = person(store, "office-1", "office")
    threads = [threading.Thread(target=write, args=(records,)) for records in books]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    everything = store.records.pull(office, 0, 10_000).seqs
    assert everything == sorted(set(everything))
    assert len(everything) == sum(len(records) for records in books)
    # Whoever read on from a cursor while others wrote missed nothing.
    assert set(seen) == set(everything)


def test_a_receipt_ends_at_the_first_hole_and_goes_on_when_it_is_filled(store: Store) -> None:
    records = Sheet.even(depth_mm=101.6, bays=2).records
    first, hole, rest = records[:3], records[3], records[4:]
    store.records.accept(rest, None)
    assert store.records.receipt("d-1") == 0
    store.records.accept(first, None)
    assert store.records.receipt("d-1") == 3
    store.records.accept([hole], None)
    assert store.records.receipt("d-1") == len(records)
    assert store.records.receipt("another") == 0


def test_a_pull_goes_through_everything_in_pages_and_stops(store: Store) -> None:
    records = Sheet.even(depth_mm=101.6, bays=5).records
    store.records.accept(records, None)
    office = person(store, "office-1", "office")
    found, cursor, more = [], 0, True
    while more:
        page = store.records.pull(office, cursor, 7)
        assert len(page.records) <= 7
        found += page.records
        cursor, more = page.cursor, page.more
    assert found == records
    assert store.records.pull(office, cursor) == ([], [], cursor, False)


def test_a_pull_of_large_records_comes_in_smaller_answers(store: Store) -> None:
    records = [{**r, "later": "x" * 900_000} for r in Sheet.even(depth_mm=101.6, bays=2).records[:6]]
    store.records.accept(records, None)
    page = store.records.pull(person(store, "office-1", "office"), 0)
    assert (len(page.records), page.more) == (2, True)


# Jobs


@pytest.mark.parametrize("name", SAMPLES)
def test_a_job_in_the_store_is_the_job_of_its_file(store: Store, name: str) -> None:
    lines = (ROOT / "sample_jobs" / f"{name}.jsonl").read_bytes().splitlines()
    store.records.accept([json.loads(line) for line in reversed(lines)], None)
    job = load(lines).job
    view = store.jobs.view(job.key)
    assert view is not None
    assert view.digest == covers(job.records)
    assert view.job == job


def test_a_folded_job_is_kept_while_nothing_comes_and_never_longer(
    store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    book = Notebook.begun(bays=1)
    folds: list[int] = []

    def counted(records: Any) -> Job:
        folds.append(1)
        return fold(records)

    monkeypatch.setattr(jobs_module, "fold", counted)
    for number, record in enumerate([*book.records, *[book.records[-1]] * 2]):
        store.records.accept([record], None)
        view, again = store.jobs.view(JOB), store.jobs.view(JOB)
        assert view is again
        assert view is not None
        assert len(view.job.records) == min(number + 1, len(book.records))
    # A repeat is no new record, so it costs no fold.
    assert len(folds) == len(book.records)


def test_what_another_process_wrote_is_seen(store: Store) -> None:
    book = Notebook.begun(bays=1)
    store.records.accept(book.records, None)
    assert store.jobs.view(JOB) is not None
    book.read(0, 50.0)
    with Store(store.folder) as other:
        other.records.accept(book.records, None)
    view = store.jobs.view(JOB)
    assert view is not None
    assert len(view.job.of("reading")) == 1


def test_an_unknown_and_a_removed_job_have_no_view(store: Store) -> None:
    assert store.jobs.view(key(77)) is None
    book = Notebook.begun(bays=1)
    book.remove(JOB)
    store.records.accept(book.records, None)
    assert store.jobs.view(JOB) is None
    assert store.jobs.summaries(person(store, "office-1", "office")).total == 0


def samples_in(store: Store) -> None:
    for name in SAMPLES:
        lines = (ROOT / "sample_jobs" / f"{name}.jsonl").read_bytes().splitlines()
        store.records.accept([json.loads(line) for line in lines], None)


def test_the_list_says_of_each_job_what_its_reckoning_says(store: Store) -> None:
    samples_in(store)
    office = person(store, "office-1", "office")
    page = store.jobs.summaries(office)
    assert page.total == len(SAMPLES)
    # By the design of the sample jobs; see their README.
    by_name = {row.name: row for row in page.rows}
    units = by_name["Alder Court, exterior walls of 12 units"]
    assert (units.result, units.places_meet, units.places_short, units.places_unproven) == ("short", 10, 1, 1)
    floor = by_name["Larch Hall, floor over the undercroft"]
    assert (floor.bays_read, floor.bays_total) == (40, 160)
    assert [row.last_seq for row in page.rows] == sorted((row.last_seq for row in page.rows), reverse=True)


def test_the_list_can_be_dropped_and_is_the_same_again(store: Store) -> None:
    samples_in(store)
    office = person(store, "office-1", "office")
    before = store.jobs.summaries(office)
    store.jobs.make_summaries_again()
    assert store.jobs.summaries(office) == before


def test_the_list_follows_every_record(store: Store) -> None:
    book = Notebook.begun(bays=1)
    store.records.accept(book.records, None)
    office = person(store, "office-1", "office")
    assert store.jobs.summaries(office).rows[0].result == "unproven"
    book.read_bay(0, 101.6)
    book.again(JOB, name="North hall")
    store.records.accept(book.records, None)
    (row,) = store.jobs.summaries(office).rows
    assert (row.result, row.bays_read, row.name, row.last_at) == ("meets", 1, "North hall", book.records[-1]["at"])


@pytest.mark.parametrize(
    ("search", "found"),
    [
        ("riviere", 1),
        ("RIVIÈRE sous", 1),
        ("lane", 2),
        ("yard lane", 0),
        ("%", 0),
        ("_", 0),
        ("' OR 1=1 --", 0),
        ("", 7),
    ],
)
def test_jobs_are_found_by_all_words_without_case_or_accents(store: Store, search: str, found: int) -> None:
    samples_in(store)
    assert store.jobs.summaries(person(store, "office-1", "office"), search).total == found


def test_pages_of_the_list_hold_every_job_once(store: Store) -> None:
    samples_in(store)
    office = person(store, "office-1", "office")
    pages = [store.jobs.summaries(office, page=number, per_page=3) for number in (1, 2, 3, 4)]
    assert [len(page.rows) for page in pages] == [3, 3, 1, 0]
    assert {page.pages for page in pages} == {3}
    assert len({row.job for page in pages for row in page.rows}) == 7


def test_a_firm_lists_the_jobs_that_are_shared_with_it(store: Store) -> None:
    samples_in(store)
    crew = person(store, "crew-1", "applicator", FIRM)
    assert store.jobs.summaries(crew).total == 0
    job = store.jobs.summaries(person(store, "office-1", "office")).rows[0].job
    store.accounts.share_job(job, FIRM)
    assert [row.job for row in store.jobs.summaries(crew).rows] == [job]


# Photos


def test_a_photo_is_kept_byte_for_byte_under_its_digest(store: Store) -> None:
    content = picture(exif=_with_place())
    assert store.photos.put(digest(content), BytesIO(content), len(content)) == "stored"
    assert store.photos.put(digest(content), BytesIO(b""), 0) == "already-there"
    original = store.photos.original(digest(content))
    assert original is not None
    assert original.read_bytes() == content
    assert store.photos.has(digest(content)) == len(content)
    assert original.name == f"{digest(content)}.jpg"


def test_what_pages_show_is_upright_small_and_says_no_place(store: Store) -> None:
    content = picture(2400, 1200, exif=_with_place())
    store.photos.put(digest(content), BytesIO(content), len(content))
    for path, longest in (
        (store.photos.rendition(digest(content)), 1600),
        (store.photos.thumbnail(digest(content)), 320),
    ):
        assert path is not None
        with Image.open(path) as shown:
            # Turned a quarter by its Exif orientation, 6: what was wide is high.
            assert shown.size == (longest // 2, longest)
            assert not shown.getexif()


def test_a_rendition_is_made_once(store: Store) -> None:
    content = picture()
    store.photos.put(digest(content), BytesIO(content), len(content))
    first = store.photos.rendition(digest(content))
    assert first is not None
    made_at = first.stat().st_mtime_ns
    again = store.photos.rendition(digest(content))
    assert again is not None
    assert again.stat().st_mtime_ns == made_at


@pytest.mark.parametrize("mode", ["1", "L", "LA", "P", "RGBA", "CMYK", "I;16", "F"])
def test_pictures_of_every_mode_have_a_rendition(store: Store, mode: str) -> None:
    kind = {"CMYK": "JPEG", "F": "TIFF"}.get(mode, "PNG")
    out = BytesIO()
    Image.new(mode, (50, 40)).save(out, kind)
    content = out.getvalue()
    if kind == "TIFF":
        assert _refused(store, digest(content), content).allowed.startswith("a picture as JPEG, PNG, WEBP")
        return
    store.photos.put(digest(content), BytesIO(content), len(content))
    path = store.photos.rendition(digest(content))
    assert path is not None
    with Image.open(path) as shown:
        assert (shown.mode, shown.size) == ("RGB", (50, 40))


def test_no_photo_no_rendition(store: Store) -> None:
    assert store.photos.has("0" * 64) is None
    assert store.photos.rendition("0" * 64) is None
    assert store.photos.thumbnail("0" * 64) is None


def _with_place() -> Image.Exif:
    exif = Image.Exif()
    exif[0x0112] = 6  # orientation
    exif.get_ifd(0x8825)[1] = "N"  # GPS
    exif[0x010E] = "at the site"
    return exif


def _refused(store: Store, name: str, content: bytes, length: int | None = None) -> PhotoRefused:
    with pytest.raises(PhotoRefused) as caught:
        store.photos.put(name, BytesIO(content), len(content) if length is None else length)
    kept = [path for path in store.photos.folder.rglob("*") if path.is_file()]
    assert kept == [], "nothing is left of what was refused"
    return caught.value


def bomb() -> bytes:
    """A PNG of 30,000 x 30,000 pixels in few bytes: its size is written into the header of a small one."""
    content = picture(10, 10, "PNG")
    head = b"IHDR" + (30_000).to_bytes(4, "big") * 2 + content[24:29]
    return content[:12] + head + zlib.crc32(head).to_bytes(4, "big") + content[33:]


@pytest.mark.parametrize(
    "content",
    [
        b"not a picture",
        picture(400, 300)[:-200],
        picture(40, 30, "PNG")[:-30],
        picture(40, 30, "GIF"),
        picture(40, 30, "BMP"),
        b"PK\x03\x04" + bytes(1000),
        b"<svg xmlns='http://www.w3.org/2000/svg'/>",
        bomb(),
        picture(7000, 6000, "PNG"),
        picture(10_000, 9_500, "PNG"),
    ],
    ids=["text", "cut JPEG", "cut PNG", "GIF", "BMP", "zip", "SVG", "bomb", "42 million pixels", "95 million pixels"],
)
def test_what_is_no_picture_that_can_be_shown_is_refused(store: Store, content: bytes) -> None:
    refusal = _refused(store, digest(content), content)
    assert "JPEG, PNG, WEBP" in refusal.allowed


def test_a_photo_that_is_not_what_its_digest_says_is_refused(store: Store) -> None:
    content, other = picture(), picture(color="navy")
    assert digest(other) in _refused(store, digest(content), other).found


@pytest.mark.parametrize(
    "name", ["", "..", "../../etc/passwd", "A" * 64, "0" * 63, "0" * 65, "0" * 63 + "/", "0" * 64 + "\n", "０" * 64]
)
def test_a_path_in_a_digest_is_refused_at_every_door(store: Store, name: str) -> None:
    photos = store.photos
    for door in (photos.has, photos.original, photos.rendition, photos.thumbnail):
        with pytest.raises(PhotoRefused):
            door(name)
    _refused(store, name, picture())


def test_a_photo_shorter_than_announced_or_too_large_is_refused(store: Store) -> None:
    content = picture()
    assert _refused(store, digest(content), content, len(content) + 1).found == f"{len(content)} bytes"
    _refused(store, digest(content), content, MOST_BYTES + 1)
    _refused(store, digest(content), b"", 0)


def test_what_a_kill_left_growing_is_cleared_a_day_later(tmp_path: Path) -> None:
    with Store(tmp_path) as store:
        incoming = store.photos.folder / "incoming"
    (incoming / ".old.part").write_bytes(b"x")
    (incoming / ".new.part").write_bytes(b"x")
    os.utime(incoming / ".old.part", (0, 0))
    with Store(tmp_path):
        assert [path.name for path in incoming.iterdir()] == [".new.part"]
