"""The calls of phones: JSON in and out whatever is sent, one outcome a record, and one job from any way of sending it."""

import json
import random
import threading
import time
from collections.abc import Iterator
from io import BytesIO
from pathlib import Path
from typing import Any

import pytest
from flask import Flask
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fieldapp.records.digest import covers
from fieldapp.records.fold import fold
from fieldapp.records.kinds import KINDS
from fieldapp.store.people import Account
from fieldapp.store.store import Store
from fieldapp.web.session import COOKIE
from tests.jobs import JOB, Notebook, taken
from tests.serving import served
from tests.sheets import Sheet, key
from tests.stores import FIRM, PASSWORD, Caller, Phone, digest, minimal_app, opened, person, picture


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    with opened(tmp_path / "data") as made:
        yield made


@pytest.fixture
def app(store: Store) -> Flask:
    return minimal_app(store)


@pytest.fixture
def inspector(store: Store) -> Account:
    return person(store, "inspector-1")


@pytest.fixture
def caller(app: Flask, inspector: Account) -> Caller:
    """Somebody who is signed in."""
    made = Caller(app.test_client())
    assert made.sign_in(inspector.name).status_code == 200
    return made


# Signing in


def test_a_session_says_who_is_signed_in_and_what_is_taken(app: Flask, store: Store, inspector: Account) -> None:
    caller = Caller(app.test_client())
    before = caller.get("/api/session")
    assert (before["account"], before["least_schema"], before["store"]) == (None, 1, store.identity)
    after = caller.sign_in("inspector-1").json
    assert after["account"] == {"id": inspector.id, "name": "inspector-1", "role": "inspector", "firm": None}
    assert caller.get("/api/session")["account"] == after["account"]
    out = caller.post("/api/sign-out", {}).json
    assert out["account"] is None
    assert store.accounts.sign_ins() == []


@pytest.mark.parametrize("secure", [False, True])
def test_the_token_is_out_of_reach_of_scripts_and_of_other_sites(app: Flask, inspector: Account, secure: bool) -> None:
    client = app.test_client()
    base = "https://localhost" if secure else "http://localhost"
    session: Any = client.get("/api/session", base_url=base)
    csrf = session.json["csrf"]
    reply = client.post(
        "/api/sign-in",
        json={"name": inspector.name, "password": PASSWORD, "device_label": "x"},
        headers={"X-CSRFToken": csrf, "Referer": f"{base}/"},
        base_url=base,
    )
    (cookie,) = [value for value in reply.headers.getlist("Set-Cookie") if value.startswith(f"{COOKIE}=")]
    parts = {part.strip().split("=")[0] for part in cookie.split(";")[1:]}
    assert parts >= {"HttpOnly", "SameSite", "Max-Age", "Path"}
    assert "SameSite=Lax" in cookie
    assert ("Secure" in parts) is secure
    token = cookie.partition("=")[2].partition(";")[0]
    assert token not in reply.get_data(as_text=True)


def test_a_wrong_password_is_told_and_too_many_say_how_long_to_wait(app: Flask, inspector: Account) -> None:
    caller = Caller(app.test_client())
    for name in (inspector.name, "nobody"):
        reply = caller.sign_in(name, "wrong")
        assert (reply.status_code, reply.json["error"]) == (401, "wrong-name-or-password")
    for _ in range(4):
        caller.sign_in(inspector.name, "wrong")
    reply = caller.sign_in(inspector.name)
    assert (reply.status_code, reply.json["error"]) == (429, "too-many-tries")
    assert reply.headers["Retry-After"] == str(reply.json["retry_after_s"]) == "300"


def test_signing_in_again_leaves_one_sign_in_on_the_device(caller: Caller, store: Store) -> None:
    caller.sign_in("inspector-1")
    assert len(store.accounts.sign_ins()) == 1


def test_a_revoked_phone_is_told_so_by_the_next_call(caller: Caller, store: Store) -> None:
    store.accounts.revoke(store.accounts.sign_ins()[0].id)
    reply = caller.send([])
    assert (reply.status_code, reply.json["error"]) == (401, "not-signed-in")


CALLS = [
    ("POST", "/api/batch"),
    ("GET", "/api/changes"),
    ("PUT", f"/api/photo/{'0' * 64}"),
    ("HEAD", f"/api/photo/{'0' * 64}"),
]


@pytest.mark.parametrize(("method", "path"), CALLS)
def test_nobody_is_answered_401_in_json_and_never_sent_to_a_page(app: Flask, method: str, path: str) -> None:
    caller = Caller(app.test_client())
    for cookie in ("", "x", "0" * 43):
        caller.client.set_cookie(COOKIE, cookie)
        body: dict[str, Any] | None = {} if method == "POST" else None
        reply: Any = caller.client.open(path, method=method, json=body, headers=caller.headers)
        assert (reply.status_code, reply.mimetype, reply.location) == (401, "application/json", None)
        if method != "HEAD":
            assert reply.json["error"] == "not-signed-in"


@pytest.mark.parametrize("path", ["/api/sign-in", "/api/sign-out", "/api/batch", f"/api/photo/{'0' * 64}"])
def test_what_changes_anything_asks_for_the_token_of_the_session(caller: Caller, path: str) -> None:
    method = "PUT" if "photo" in path else "POST"
    for headers in ({}, {"X-CSRFToken": "no"}):
        reply: Any = caller.client.open(path, method=method, json={}, headers=headers)
        assert (reply.status_code, reply.json["error"]) == (400, "csrf")


def test_the_token_of_a_phone_that_lay_a_month_is_still_good(caller: Caller, monkeypatch: pytest.MonkeyPatch) -> None:
    headers = caller.headers
    now = time.time()
    monkeypatch.setattr("time.time", lambda: now + 30 * 86_400.0)
    body = {"schema": 1, "device": "d-1", "records": []}
    assert caller.client.post("/api/batch", json=body, headers=headers).status_code == 200


def test_what_another_site_has_a_browser_send_is_refused(caller: Caller) -> None:
    headers = {**caller.headers, "Sec-Fetch-Site": "cross-site"}
    reply: Any = caller.client.post("/api/batch", json={"schema": 1, "device": "d", "records": []}, headers=headers)
    assert (reply.status_code, reply.json["error"]) == (403, "other-site")


def test_no_answer_is_kept_in_a_cache(caller: Caller) -> None:
    for method, path in [*CALLS, ("GET", "/api/session")]:
        assert caller.client.open(path, method=method).headers["Cache-Control"] == "no-store"


# Batches


def test_a_batch_is_answered_record_by_record_in_its_order_with_a_receipt(caller: Caller) -> None:
    records = Sheet.even(depth_mm=101.6, bays=1).records
    wrong = {**records[2], "id": key(1), "body": {**records[2]["body"], "assembly": "hedge"}}
    reply = caller.send([records[0], wrong, records[1], records[0], 7]).json
    assert [outcome["state"] for outcome in reply["outcomes"]] == [
        "accepted",
        "refused",
        "accepted",
        "already-there",
        "refused",
    ]
    assert [outcome["id"] for outcome in reply["outcomes"]][:3] == [records[0]["id"], key(1), records[1]["id"]]
    told = reply["outcomes"][1]
    assert (told["field"], told["found"]) == ("assembly", "hedge")
    assert told["allowed"].startswith("one of wall, sloped-roof")
    assert reply["receipt"] == 2


def test_a_record_without_its_count_is_refused_over_sync(caller: Caller) -> None:
    (record, *_) = Sheet.laid_out(bays=1).records
    del record["n"]
    (told,) = caller.send([record]).json["outcomes"]
    assert (told["state"], told["field"]) == ("refused", "n")


@pytest.mark.parametrize(
    ("text", "field"),
    [
        ('"x": NaN', "record"),
        ('"x": 1e999', "record"),
        ('"x": -Infinity', "record"),
        ('"x": "\\ud800"', "record"),
        ('"x": 1, "x": 2', "record"),
        ('"x": [{"y": {"z": 1, "z": 1}}]', "record"),
        ('"id": "00000000-0000-7000-8000-000000000009"', "record"),
        (f'"x": {"9" * 5000}', "record"),
        ('"x": 9007199254740993', "record"),
    ],
)
def test_what_json_lets_through_costs_its_own_record_alone(caller: Caller, text: str, field: str) -> None:
    good, bad, *_ = Sheet.laid_out(bays=1).records
    spoiled = json.dumps(bad)[:-1] + f", {text}}}"
    body = f'{{"schema": 1, "device": "d-1", "records": [{spoiled}, {json.dumps(good)}]}}'
    reply: Any = caller.client.post("/api/batch", data=body, headers=caller.headers, content_type="application/json")
    assert reply.status_code == 200
    first, second = reply.json["outcomes"]
    assert (first["state"], first["field"], second["state"]) == ("refused", field, "accepted")


@pytest.mark.parametrize(
    ("body", "code"),
    [
        (b"", "not-json"),
        (b"{", "not-json"),
        (b"\xff\xfe", "not-json"),
        (b"[]", "not-json"),
        (b"null", "not-json"),
        (b"[" * 100_000, "not-json"),
        (b'{"schema": 1, "device": "d", "records": {}}', "records"),
        (b'{"schema": 1, "device": "d"}', "records"),
        (b'{"schema": 1, "device": "", "records": []}', "device"),
        (b'{"schema": 1, "device": 7, "records": []}', "device"),
        (b'{"schema": 1, "device": "\\ud800", "records": []}', "device"),
        (b'{"schema": 2, "device": "d", "records": []}', "schema"),
        (b'{"schema": 0, "device": "d", "records": []}', "schema"),
        (b'{"schema": true, "device": "d", "records": []}', "schema"),
        (b'{"schema": "1", "device": "d", "records": []}', "schema"),
        (b'{"schema": 1, "device": "d", "records": [%s]}' % b",".join([b"1"] * 501), "records"),
        (b'{"schema": 1, "device": "d", "records": [%s]}' % b",".join([b"1"] * 1_000_000), "records"),
    ],
)
def test_a_body_that_is_no_batch_is_refused_with_a_code_and_a_sentence(caller: Caller, body: bytes, code: str) -> None:
    reply: Any = caller.client.post("/api/batch", data=body, headers=caller.headers, content_type="application/json")
    assert (reply.status_code, reply.json["error"]) == (400, code)
    assert reply.json["message"].endswith((".", "app."))


def test_a_body_that_is_too_large_or_no_json_is_refused(caller: Caller) -> None:
    large = b'{"records": "' + b"x" * 17_000_000 + b'"}'
    reply: Any = caller.client.post("/api/batch", data=large, headers=caller.headers, content_type="application/json")
    assert (reply.status_code, reply.json["error"]) == (413, "too-large")
    reply = caller.client.post("/api/batch", data=b"a=1", headers=caller.headers, content_type="text/plain")
    assert (reply.status_code, reply.json["error"]) == (415, "not-json")


WRONG: list[Any] = [None, True, 7, -1, 1e300, "", "x" * 20_000, [], [[]], {}, {"key": {}}]


@pytest.mark.parametrize("kind", [*KINDS, "something-new"])
def test_wrong_types_in_every_field_are_refused_or_kept_and_never_an_error(
    caller: Caller, store: Store, kind: str
) -> None:
    rules = KINDS[kind].body if kind in KINDS else None
    names = [*rules.must, *rules.may] if rules else ["x"]
    envelope = Sheet.laid_out(bays=1).records[0]
    records = [
        {**envelope, "id": key(5000 + number * 20 + place), "kind": kind, "body": {**({"key": JOB}), name: wrong}}
        for number, name in enumerate(names)
        for place, wrong in enumerate(WRONG)
    ]
    records += [
        {**envelope, "id": key(8000 + place), name: wrong}
        for name in ("job", "kind", "at", "by", "device", "n", "body")
        for place, wrong in enumerate(WRONG)
    ]
    for start in range(0, len(records), 500):
        reply = caller.send(records[start : start + 500])
        assert reply.status_code == 200
        assert {outcome["state"] for outcome in reply.json["outcomes"]} <= {"accepted", "refused", "already-there"}
    store.jobs.view(JOB)


def test_markup_and_sql_are_text_like_any_other(caller: Caller, store: Store) -> None:
    name = "'); DROP TABLE records; -- <script>alert(1)</script> =1+1"
    sheet = Sheet.laid_out(bays=1, name=name)
    caller.send(sheet.records)
    assert [record["body"]["name"] for record in caller.get("/api/changes")["records"][:1]] == [name]
    assert store.jobs.summaries(person(store, "office-1", "office"), "script").rows[0].name == name


# Pulling


@pytest.mark.parametrize(
    "query", ["after=-1", "after=x", "after=1e3", "after=", "limit=0", "limit=501", "limit=x", "after=²"]
)
def test_a_cursor_that_is_no_number_is_refused(caller: Caller, query: str) -> None:
    reply: Any = caller.client.get(f"/api/changes?{query}")
    assert (reply.status_code, reply.json["error"]) == (400, query.partition("=")[0])


def test_a_firm_is_told_which_jobs_it_sees_and_fetches_one_that_was_shared_later(
    app: Flask, store: Store, caller: Caller
) -> None:
    records = Sheet.even(depth_mm=101.6, bays=1).records
    caller.send(records)
    assert caller.get("/api/changes")["jobs"] is None
    person(store, "crew-1", "applicator", FIRM)
    crew = Caller(app.test_client())
    crew.sign_in("crew-1")
    assert crew.get("/api/changes") == {"records": [], "cursor": 0, "more": False, "jobs": []}
    store.accounts.share_job(JOB, FIRM)
    # Its cursor may have passed these long ago; the list of jobs is what tells it to ask for one by itself.
    assert crew.get("/api/changes?after=999")["jobs"] == [JOB]
    assert crew.get(f"/api/changes?after=0&job={JOB}")["records"] == records


# Photos


def test_a_photo_is_asked_for_sent_and_found_again(caller: Caller, store: Store) -> None:
    content = picture()
    path = f"/api/photo/{digest(content)}"
    assert caller.client.head(path).status_code == 404
    assert (caller.put(digest(content), content).status_code, caller.put(digest(content), content).status_code) == (
        201,
        200,
    )
    reply: Any = caller.client.head(path)
    assert (reply.status_code, reply.content_length) == (200, len(content))
    assert store.photos.has(digest(content)) == len(content)


def test_a_photo_that_is_refused_says_what_was_found_and_what_is_allowed(caller: Caller, store: Store) -> None:
    for name, content in (
        (digest(b"text"), b"text"),
        (digest(picture()), picture(color="navy")),
        ("0" * 64, picture()[:99]),
    ):
        reply = caller.put(name, content)
        assert (reply.status_code, reply.json["error"]) == (422, "photo")
        assert reply.json["found"]
        assert reply.json["allowed"]
        assert store.photos.has(name) is None


@pytest.mark.parametrize("name", ["0" * 63, "A" * 64, "..%2f..%2fetc%2fpasswd", "%2e%2e", "0" * 64 + "%0a"])
def test_a_path_in_a_digest_is_no_photo(caller: Caller, store: Store, name: str) -> None:
    reply: Any = caller.client.put(f"/api/photo/{name}", data=picture(), headers=caller.headers)
    assert reply.status_code in (400, 404)
    assert [path for path in store.photos.folder.rglob("*") if path.is_file()] == []


def test_a_photo_larger_than_any_is_refused_before_it_is_read(caller: Caller) -> None:
    announced = {"CONTENT_LENGTH": "30000001"}
    path = f"/api/photo/{'0' * 64}"
    reply: Any = caller.client.put(path, environ_overrides=announced, headers=caller.headers)
    assert (reply.status_code, reply.json["error"]) == (413, "too-large")


def test_a_photo_without_its_length_is_refused(caller: Caller) -> None:
    headers = {**caller.headers, "Transfer-Encoding": "chunked"}
    reply: Any = caller.client.put(f"/api/photo/{'0' * 64}", input_stream=BytesIO(b"x"), headers=headers)
    assert (reply.status_code, reply.json["error"]) == (411, "length")


# One job from any way of sending it


def story() -> list[dict[str, Any]]:
    """A job with something of everything that could depend on order."""
    book = Notebook.begun(bays=2)
    first = book.read(0, 90.0)
    book.read(0, 95.0)
    book.read_bay(1, 101.6)
    gone = book.withdraw(first)
    book.withdraw(gone)
    book.touch_up(2)
    book.read(0, 110.0, round=2)
    mended = book.repair(book.deficiency())
    book.accept(mended)
    book.again(JOB, name="Later name")
    book.remove(book.bays[1])
    book.spot(80.0)
    return book.records


@pytest.fixture(scope="module")
def server(tmp_path_factory: pytest.TempPathFactory) -> Iterator[tuple[Store, int]]:
    folder = tmp_path_factory.mktemp("any-order")
    with opened(folder) as store:
        person(store, "inspector-1")
        with served(minimal_app(store)) as port:
            yield store, port


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.data())
def test_any_order_any_split_and_any_repetition_give_the_same_job(
    server: tuple[Store, int], data: st.DataObject
) -> None:
    store, port = server
    number = int(store.database.value("SELECT count(DISTINCT job) FROM records"))
    text = json.dumps(story()).replace("00000000-0000-7000-", f"00000000-{number + 1:04x}-7000-")
    records = json.loads(text)
    device = f"d-{number}"
    for record in records:
        record["device"] = device
    sent = data.draw(st.permutations([*records, *data.draw(st.lists(st.sampled_from(records), max_size=10))]))
    cuts = sorted(data.draw(st.lists(st.integers(0, len(sent)), max_size=6)))
    batches = [sent[start:end] for start, end in zip([0, *cuts], [*cuts, len(sent)], strict=True)]
    phone = Phone(port)
    phone.sign_in("inspector-1")
    for batch in batches:
        status, reply = phone.send(batch, device)
        assert status == 200
        assert {outcome["state"] for outcome in reply["outcomes"]} <= {"accepted", "already-there"}
    view = store.jobs.view(records[0]["job"])
    assert view is not None
    expected = fold(taken(records))
    assert view.job == expected
    assert view.digest == covers(expected.records)
    assert reply["receipt"] == len(records)
    _, page = phone.call("GET", f"/api/changes?job={records[0]['job']}")
    assert sorted(page["records"], key=lambda r: r["id"]) == sorted(records, key=lambda r: r["id"])


def test_many_phones_at_once_lose_nothing_and_are_all_answered(tmp_path: Path) -> None:
    # Twelve here, so that it stays quick; every one of them sends parts of one job and repeats some of them.
    phones, size = 12, 25
    books = []
    for number in range(phones):
        records = Sheet.even(depth_mm=100.0, bays=30).records
        text = json.dumps(records).replace("00000000-0000-7000-", f"00000000-{number + 1:04x}-7000-")
        own = json.loads(text)
        for record in own:
            record["device"] = f"d-{number}"
        books.append(own)
    photos = [picture(40 + number) for number in range(phones)]
    failed: list[Any] = []
    with opened(tmp_path) as store, served(minimal_app(store)) as port:
        person(store, "inspector-1")

        def work(number: int) -> None:
            phone = Phone(port)
            phone.sign_in("inspector-1")
            own = books[number]
            order = random.Random(number).sample(range(0, len(own), size), len(range(0, len(own), size)))
            for start in [*order, order[0]]:
                status, reply = phone.send(own[start : start + size], f"d-{number}")
                if status != 200 or any(outcome["state"] == "refused" for outcome in reply["outcomes"]):
                    failed.append((status, reply))
            status, _ = phone.call("PUT", f"/api/photo/{digest(photos[number])}", photos[number], "image/jpeg")
            if status != 201 or reply["receipt"] != len(own):
                failed.append(status)

        threads = [threading.Thread(target=work, args=(number,)) for number in range(phones)]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
        assert failed == []
        everything = Phone(port)
        everything.sign_in("inspector-1")
        pulled = everything.pull_all(200)
    assert len(pulled) == phones * len(books[0])
    assert {record["id"] for record in pulled} == {record["id"] for own in books for record in own}
