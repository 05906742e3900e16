"""The server starts with what it needs, tells it once, and answers what was asked before it goes."""

import re
import signal
import socket
import subprocess
import time
from collections.abc import Iterator
from contextlib import contextmanager
from http.client import HTTPConnection
from pathlib import Path

import pytest
from pypdf import PdfReader

from fieldapp.demo import DemoError, demo, furnish, told
from fieldapp.serve import CannotServeError, address_of, is_reachable, listening, serve
from fieldapp.store.store import Store
from tests.serving import child
from tests.sheets import SAMPLES
from tests.stores import opened

SLOW = """
import sys, time
from pathlib import Path
from fieldapp.serve import serve
from tests.stores import minimal_app

def make_app(store):
    app = minimal_app(store)
    @app.get("/slow")
    def slow():
        time.sleep(0.6)
        return "x" * 3_000_000
    return app

serve(Path(sys.argv[1]), "127.0.0.1", 0, make_app=make_app)
"""


@contextmanager
def slow_server(folder: Path) -> Iterator[tuple[subprocess.Popen[str], int, list[str]]]:
    with child("-c", SLOW, folder) as process:
        assert process.stdout is not None
        lines = [process.stdout.readline(), process.stdout.readline()]
        port = int(re.findall(r"http://127\.0\.0\.1:(\d+)", lines[0])[0])
        yield process, port, lines


def test_the_first_start_prints_a_one_time_address_and_no_password(tmp_path: Path) -> None:
    with slow_server(tmp_path) as (process, port, lines):
        process.send_signal(signal.SIGTERM)
        assert process.wait(10) == 0
    token = re.findall(rf"http://127\.0\.0\.1:{port}/setup/(\S+)$", lines[1])[0]
    with opened(tmp_path) as store:
        assert store.accounts.make_first(token, "Ada", "depth gauge 7").role == "office"


def test_told_to_stop_it_answers_what_is_in_flight_and_takes_no_more(tmp_path: Path) -> None:
    with slow_server(tmp_path) as (process, port, _):
        running = HTTPConnection("127.0.0.1", port, timeout=10)
        running.request("GET", "/slow")
        # Another request is in the middle of being sent.
        half = socket.create_connection(("127.0.0.1", port), timeout=10)
        half.sendall(b"POST /api/batch HTTP/1.1\r\nHost: x\r\nConnection: close\r\nContent-Length: 10\r\n\r\n01234")
        idle = socket.create_connection(("127.0.0.1", port), timeout=10)
        time.sleep(0.2)
        process.send_signal(signal.SIGTERM)
        time.sleep(0.1)
        with pytest.raises(ConnectionRefusedError):
            socket.create_connection(("127.0.0.1", port), timeout=1)
        half.sendall(b"56789")
        reply = running.getresponse()
        assert (reply.status, len(reply.read())) == (200, 3_000_000)
        assert half.recv(100).startswith(b"HTTP/1.1 400 ")
        assert process.wait(10) == 0
        for connection in (running, half, idle):
            connection.close()


def test_an_address_that_cannot_be_had_is_told_and_nothing_is_made(tmp_path: Path) -> None:
    with socket.create_server(("127.0.0.1", 0)) as taken:
        port = taken.getsockname()[1]
        with pytest.raises(CannotServeError, match=f"port {port}"):
            demo("127.0.0.1", port, tmp_path / "demo")
        with pytest.raises(CannotServeError, match=f"port {port}"):
            serve(tmp_path / "data", "127.0.0.1", port)
    with pytest.raises(CannotServeError, match="no address"):
        serve(tmp_path / "data", "no.such.name.invalid", 0)
    assert not (tmp_path / "demo").exists()


def test_an_address_is_one_that_can_be_opened() -> None:
    with listening("127.0.0.1", 0) as here:
        assert not is_reachable(address_of(here))
    with listening("0.0.0.0", 0) as anywhere:
        assert "0.0.0.0" not in address_of(anywhere)


def test_a_demonstration_has_every_sample_job_its_photos_its_report_and_an_account_of_each_role(tmp_path: Path) -> None:
    with opened(tmp_path / "data") as store:
        made = furnish(store, tmp_path / "reports")
        assert len(made.jobs) == len(SAMPLES)
        assert all(store.jobs.view(job) is not None for job in made.jobs)
        assert all(store.photos.has(photo) for photo in store.records.photos_of(made.jobs))
        signed_in = [
            store.accounts.sign_in(name, password, kind="browser", label="", address="")
            for name, _, password in made.accounts
        ]
        assert [each.account.role for each in signed_in] == ["office", "inspector", "applicator"]
        assert len({password for _, _, password in made.accounts}) == 3
        # The applicator's firm sees the jobs too.
        assert store.jobs.summaries(signed_in[2].account).total == len(SAMPLES)
    assert len(made.reports) == len(SAMPLES)
    assert all(len(PdfReader(path).pages) > 1 for path in made.reports)
    printed = "\n".join(told(made, tmp_path, "http://127.0.0.1:1"))
    assert all(printed.count(password) == 1 for _, _, password in made.accounts)
    assert str(tmp_path / "reports") in printed


def test_a_demonstration_is_never_made_over_something_else(tmp_path: Path) -> None:
    (tmp_path / "work").write_text("")
    with pytest.raises(DemoError, match="not empty"):
        demo("127.0.0.1", 0, tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == ["work"]


def test_a_store_that_has_an_account_prints_no_address_for_the_first(tmp_path: Path) -> None:
    with Store(tmp_path) as store:
        store.accounts.make("Ada", "office", "depth gauge 7")
        assert store.accounts.first_account_token() is None
