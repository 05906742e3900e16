"""The office's pages: who gets in, what they see, and what no page ever does."""

import io
import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from flask import Flask
from flask.testing import FlaskClient
from pypdf import PdfReader

from fieldapp.records.file import load
from fieldapp.store.jobfile import import_job, take_loaded
from fieldapp.store.people import ROLES
from fieldapp.store.store import Store
from fieldapp.web.app import HEADERS, create_app
from fieldapp.web.doors import ANYONE, OPEN_ENDPOINTS, open_to
from tests.sheets import ROOT, Sheet, key

PASSWORD = "long enough for anyone"
HOSTILE = '<script>alert(1)</script> & "quotes" {{ 7 * 7 }}'


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    with Store(tmp_path / "store") as made:
        for name, role, firm in (
            ("office", "office", None),
            ("ines", "inspector", None),
            ("ari", "applicator", "crew 2"),
        ):
            made.accounts.make(name, role, PASSWORD, firm)
        yield made


@pytest.fixture
def app(store: Store) -> Flask:
    return create_app(store)


def token_of(page: str) -> str:
    found = re.search(r'name="csrf_token"[^>]*value="([^"]+)"', page)
    assert found, "no CSRF token in the page"
    return found.group(1)


def signed_in(app: Flask, name: str) -> FlaskClient:
    client = app.test_client()
    token = token_of(client.get("/sign-in").get_data(as_text=True))
    answer = client.post("/sign-in", data={"name": name, "password": PASSWORD, "csrf_token": token})
    assert answer.status_code == 302
    return client


def a_job(store: Store, **more: Any) -> str:
    take_loaded(store, load(Sheet.even(depth_mm=101.6, bays=2, **more).lines()), None)
    return key(1)


def pages(app: Flask) -> list[str]:
    """Every path that answers GET, filled in."""
    filled = {"uuid:key": key(1), "digest": "0" * 64, "token": "x" * 20, "path:filename": "css/desk.css"}
    rules = [rule for rule in app.url_map.iter_rules() if "GET" in (rule.methods or set())]
    return [re.sub(r"<([^>]+)>", lambda match: filled[match.group(1)], rule.rule) for rule in rules]


def test_every_view_says_who_may_use_it(app: Flask) -> None:
    for endpoint, view in app.view_functions.items():
        if not endpoint.startswith(OPEN_ENDPOINTS):
            assert set(getattr(view, "open_to", {"nobody said"})) <= {*ROLES, ANYONE}, endpoint


def test_a_view_that_says_nothing_is_open_to_nobody(app: Flask) -> None:
    app.add_url_rule("/forgotten", "desk.forgotten", lambda: "secret")
    assert signed_in(app, "office").get("/forgotten").status_code == 403
    with pytest.raises(ValueError, match="roles of"):
        open_to("everybody")


def test_without_a_sign_in_there_is_only_the_door(app: Flask, store: Store) -> None:
    a_job(store)
    client = app.test_client()
    for path in pages(app):
        if path.startswith(("/api/", "/static/", "/sign-in", "/setup/")):
            continue
        with client.get(path) as answer:
            assert (answer.status_code, answer.headers.get("Location")) == (302, "/sign-in"), path


@pytest.mark.parametrize("name", ["office", "ines", "ari", ""])
def test_every_answer_carries_the_headers_and_none_clears_a_browsers_storage(
    name: str, app: Flask, store: Store
) -> None:
    a_job(store)
    client = signed_in(app, name) if name else app.test_client()
    for path in [*pages(app), "/no-such-page", "/api/no-such-call"]:
        with client.get(path) as answer:
            for header, value in HEADERS.items():
                assert answer.headers[header] == value, path
            assert "Clear-Site-Data" not in answer.headers
            assert answer.status_code < 500
            text = answer.get_data(as_text=True) if answer.mimetype == "text/html" else ""
            assert not re.search(r"<script|<style|\sstyle=|\son\w+=|javascript:", text), path


def test_cookies_are_out_of_reach_of_scripts_and_of_other_sites(app: Flask) -> None:
    client = app.test_client()
    token = token_of(client.get("/sign-in").get_data(as_text=True))
    form = {"name": "office", "password": PASSWORD, "csrf_token": token}
    plain = client.post("/sign-in", data=form).headers.getlist("Set-Cookie")
    assert plain
    for cookie in plain:
        assert "HttpOnly" in cookie
        assert "SameSite=Lax" in cookie
        assert "Secure" not in cookie
    client = app.test_client()
    page = client.get("/sign-in", base_url="https://localhost").get_data(as_text=True)
    answer = client.post(
        "/sign-in",
        data={**form, "csrf_token": token_of(page)},
        base_url="https://localhost",
        headers={"Referer": "https://localhost/sign-in"},
    )
    assert any("bayreckon=" in cookie and "Secure" in cookie for cookie in answer.headers.getlist("Set-Cookie"))
    assert "Strict-Transport-Security" in answer.headers


def test_a_form_without_its_token_is_refused_in_words(app: Flask) -> None:
    answer = app.test_client().post("/sign-in", data={"name": "office", "password": PASSWORD})
    assert answer.status_code == 400
    assert "load it again" in answer.get_data(as_text=True)


def test_a_wrong_password_keeps_the_name_and_says_what_is_wrong(app: Flask) -> None:
    client = app.test_client()
    token = token_of(client.get("/sign-in").get_data(as_text=True))
    answer = client.post("/sign-in", data={"name": "office", "password": "wrong", "csrf_token": token})
    text = answer.get_data(as_text=True)
    assert answer.status_code == 401
    assert "Name or password is wrong" in text
    assert 'value="office"' in text
    assert "wrong&#34;" not in text


def test_signing_out_ends_the_sign_in_itself_and_not_only_the_cookie(app: Flask, store: Store) -> None:
    client = signed_in(app, "office")
    cookie = client.get_cookie("bayreckon")
    assert cookie is not None
    client.post("/sign-out", data={"csrf_token": token_of(client.get("/").get_data(as_text=True))})
    assert store.accounts.who(cookie.value) is None
    assert client.get("/").status_code == 302


def test_the_first_account_is_made_once_at_the_address_that_was_printed(tmp_path: Path) -> None:
    with Store(tmp_path / "new") as store:
        token = store.accounts.first_account_token()
        client = create_app(store).test_client()
        assert client.get("/setup/guess").status_code == 404
        page = client.get(f"/setup/{token}").get_data(as_text=True)
        form = {"name": "first", "password": PASSWORD, "csrf_token": token_of(page)}
        assert client.post(f"/setup/{token}", data={**form, "password": "x"}).status_code == 200
        assert client.post(f"/setup/{token}", data=form).status_code == 302
        assert [account.role for account in store.accounts.all()] == ["office"]
        assert client.get(f"/setup/{token}").status_code == 404


def test_an_applicator_sees_the_jobs_shared_with_the_firm_and_no_other(app: Flask, store: Store) -> None:
    job = a_job(store, name="Sheet by the river")
    ari = signed_in(app, "ari")
    assert "by the river" not in ari.get("/").get_data(as_text=True)
    for path in (f"/job/{job}", f"/job/{job}/report.pdf", f"/job/{job}/crew.pdf", f"/job/{job}/photo/{'0' * 64}.jpg"):
        assert ari.get(path).status_code == 404
    store.accounts.share_job(job, "crew 2")
    assert "by the river" in ari.get("/").get_data(as_text=True)
    assert ari.get(f"/job/{job}").status_code == 200


def test_the_list_is_searched_by_any_words_in_any_order(app: Flask, store: Store) -> None:
    a_job(store, name="Étage du moulin")
    office = signed_in(app, "office")
    for words, found in (("moulin etage", True), ("ÉTAGE", True), ("windmill", False), ("%", False), ("'; --", False)):
        assert ("Étage du moulin" in office.get("/", query_string={"search": words}).get_data(as_text=True)) is found


def test_a_jobs_page_says_what_the_report_says(app: Flask, store: Store) -> None:
    done = import_job(store, ROOT / "sample_jobs" / "tamarack-yard.jsonl")
    office = signed_in(app, "office")
    text = " ".join(office.get(f"/job/{done.job}").get_data(as_text=True).split())
    for told in (
        "Do not cover North slope",
        "touched up and not read again",
        "Knee wall is unproven",
        "demo-inspector-a",
    ):
        assert told in text
    assert text.count("<svg") > 3
    pdf = office.get(f"/job/{done.job}/report.pdf")
    assert pdf.mimetype == "application/pdf"
    assert "Do not cover" in PdfReader(io.BytesIO(pdf.data)).pages[0].extract_text()
    (photo, *_) = sorted(store.records.photos_of([done.job]))
    for small in ("", "?small=1"):
        answer = office.get(f"/job/{done.job}/photo/{photo}.jpg{small}")
        assert (answer.status_code, answer.mimetype) == (200, "image/jpeg")
        answer.close()
    assert office.get(f"/job/{done.job}/photo/{'1' * 64}.jpg").status_code == 404


def test_markup_in_every_text_is_shown_and_not_obeyed(app: Flask, store: Store) -> None:
    sheet = Sheet.even(depth_mm=50.0, bays=2, name=HOSTILE)
    sheet.records[0]["body"] |= dict.fromkeys(["site", "client", "contractor", "code", "permit_no", "note"], HOSTILE)
    sheet.records[2]["body"] |= {"name": HOSTILE, "numbered_from": HOSTILE, "substrate": HOSTILE}
    sheet.records[3]["body"]["label"] = HOSTILE[:50]
    sheet.write("deficiency", {"bay": sheet.bays[0], "sort": "gap", "severity": "stop", "text": HOSTILE})
    take_loaded(store, load(sheet.lines()), None)
    office = signed_in(app, "office")
    for path in ("/", f"/job/{key(1)}", f"/?search={HOSTILE}"):
        text = office.get(path).get_data(as_text=True)
        assert "<script" not in text
        assert "49" not in re.sub(r"[\d.]{3,}", "", text.split("Report (PDF)")[0].split("<main")[1])
        assert "&lt;script&gt;" in text
    assert office.get(f"/job/{key(1)}/report.pdf").status_code == 200
