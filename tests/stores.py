"""Stores, accounts, phones and an application with nothing but the calls of phones, for tests of the server."""

import json
from collections.abc import Iterator
from contextlib import contextmanager
from hashlib import sha256
from http.client import HTTPConnection
from io import BytesIO
from pathlib import Path
from typing import Any, Final

from flask import Flask
from flask.testing import FlaskClient
from flask_wtf.csrf import CSRFProtect  # type: ignore[import-untyped]
from PIL import Image

from fieldapp.store.accounts import Accounts
from fieldapp.store.people import Account
from fieldapp.store.store import Store
from fieldapp.web.session import EXTENSION
from fieldapp.web.sync import sync

PASSWORD: Final = "depth gauge 7"
FIRM: Final = "Demo crew 2"
#: A thirtieth of the work of the real one: what is tested here is not how slow it is.
QUICK: Final = "scrypt:1024:8:1"


class Clock:
    """A clock that tests turn."""

    def __init__(self) -> None:
        self.now = 1_780_000_000.0

    def __call__(self) -> float:
        return self.now


@contextmanager
def opened(folder: Path, clock: Clock | None = None) -> Iterator[Store]:
    """A store whose passwords are quickly hashed."""
    with Store(folder) as store:
        store.accounts = Accounts(store.database, clock or Clock(), QUICK)
        yield store


def person(store: Store, name: str, role: str = "inspector", firm: str | None = None) -> Account:
    return store.accounts.make(name, role, PASSWORD, firm)


def states(outcomes: list[Any]) -> list[str]:
    return [outcome.state for outcome in outcomes]


def minimal_app(store: Store) -> Flask:
    """Only the calls of phones, with the protection that the whole application has."""
    app = Flask("minimal")
    app.config.update(SECRET_KEY="for tests alone", WTF_CSRF_TIME_LIMIT=None)
    app.extensions[EXTENSION] = store
    CSRFProtect(app)
    app.register_blueprint(sync)
    return app


class Caller:
    """A client of the sync calls; refreshes its CSRF token as phones do."""

    def __init__(self, client: FlaskClient) -> None:
        self.client = client

    @property
    def headers(self) -> dict[str, str]:
        return {"X-CSRFToken": self.get("/api/session")["csrf"]}

    def get(self, path: str) -> Any:
        return self.client.get(path).json

    def post(self, path: str, value: Any) -> Any:
        return self.client.post(path, json=value, headers=self.headers)

    def sign_in(self, name: str, password: str = PASSWORD) -> Any:
        return self.post("/api/sign-in", {"name": name, "password": password, "device_label": "a phone"})

    def send(self, records: list[Any], device: str = "d-1", schema: Any = 1) -> Any:
        return self.post("/api/batch", {"schema": schema, "device": device, "records": records})

    def put(self, digest: str, content: bytes) -> Any:
        return self.client.put(f"/api/photo/{digest}", data=content, headers=self.headers)


class Phone:
    """The same over a real connection, which may break."""

    def __init__(self, port: int) -> None:
        self.port = port
        self.cookies: dict[str, str] = {}
        self.csrf = ""

    def call(self, method: str, path: str, body: bytes = b"", kind: str = "application/json") -> tuple[int, Any]:
        connection = HTTPConnection("127.0.0.1", self.port, timeout=20)
        try:
            cookie = "; ".join(f"{name}={value}" for name, value in self.cookies.items())
            headers = {"Cookie": cookie, "X-CSRFToken": self.csrf, "Content-Type": kind}
            connection.request(method, path, body, headers)
            reply = connection.getresponse()
            for name, value in reply.getheaders():
                if name.lower() == "set-cookie":
                    key, _, rest = value.partition("=")
                    self.cookies[key] = rest.partition(";")[0]
            content = reply.read()
            return reply.status, json.loads(content) if content else None
        finally:
            connection.close()

    def refresh(self) -> dict[str, Any]:
        _, session = self.call("GET", "/api/session")
        self.csrf = session["csrf"]
        return dict(session)

    def sign_in(self, name: str) -> None:
        self.refresh()
        body = json.dumps({"name": name, "password": PASSWORD, "device_label": "a phone"}).encode()
        status, _ = self.call("POST", "/api/sign-in", body)
        assert status == 200

    def send(self, records: list[Any], device: str = "d-1") -> tuple[int, Any]:
        body = json.dumps({"schema": 1, "device": device, "records": records}).encode()
        return self.call("POST", "/api/batch", body)

    def pull_all(self, limit: int = 500) -> list[dict[str, Any]]:
        found: list[dict[str, Any]] = []
        cursor, more = 0, True
        while more:
            status, page = self.call("GET", f"/api/changes?after={cursor}&limit={limit}")
            assert status == 200
            found += page["records"]
            cursor, more = page["cursor"], page["more"]
        return found


def picture(wide: int = 40, high: int = 30, kind: str = "JPEG", color: str = "sienna", **more: Any) -> bytes:
    out = BytesIO()
    Image.new("RGB", (wide, high), color).save(out, kind, **more)
    return out.getvalue()


def digest(content: bytes) -> str:
    return sha256(content).hexdigest()
