"""A demonstration that needs nothing set up: a folder of its own with the sample jobs, their photos and their reports."""

import io
import secrets
import socket
import sys
import tempfile
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Final
from wsgiref.types import WSGIApplication

import segno

from fieldapp.assets import asset_dir
from fieldapp.report.build import build_report
from fieldapp.report.drawing.pages import draw_report
from fieldapp.serve import address_of, is_reachable, listening, project_app, run
from fieldapp.store.disk import written_whole
from fieldapp.store.jobfile import import_job
from fieldapp.store.store import Store

FIRM: Final = "Demo crew 2"
#: One account of each role. The sample jobs were written by others; these see them all the same.
PEOPLE: Final = (
    ("Demo office", "office", None),
    ("Demo inspector", "inspector", None),
    ("Demo applicator", "applicator", FIRM),
)


class DemoError(RuntimeError):
    """The demonstration cannot start; the message is a sentence for a person."""


@dataclass(frozen=True, slots=True)
class Demo:
    """What was made: the jobs, the reports' paths, and name, role and password of each account."""

    jobs: tuple[str, ...]
    reports: tuple[Path, ...]
    accounts: tuple[tuple[str, str, str], ...]


def demo(
    bind: str = "127.0.0.1",
    port: int = 8765,
    folder: Path | None = None,
    *,
    make_app: Callable[[Store], WSGIApplication] | None = None,
) -> None:
    """Make a fresh store with the sample jobs, print the accounts and the address, and serve until told to stop.

    Args:
        bind: Address to listen on; one that phones can reach has its code printed to scan.
        port: Port; 0 for any that is free.
        folder: A new or empty folder; default: a temporary one, which goes when the demonstration ends.
        make_app: Makes the application; default: that of this project.
    Raises:
        DemoError: the folder is not empty.
        CannotServeError: the address cannot be had.
    """
    # The address first: nothing is made where it cannot be had.
    with listening(bind, port) as listener:
        if folder is None:
            with tempfile.TemporaryDirectory(prefix="bayreckon-demo-") as scratch:
                _serve(Path(scratch), listener, make_app or project_app)
        else:
            _serve(folder, listener, make_app or project_app)


def furnish(store: Store, reports: Path) -> Demo:
    """Load the sample jobs with their photos, make an account of each role, and write the jobs' reports."""
    jobs = [import_job(store, path).job for path in sorted(asset_dir("sample_jobs").glob("*.jsonl"))]
    reports.mkdir(parents=True, exist_ok=True)
    written: list[Path] = []
    for job in jobs:
        store.accounts.share_job(job, FIRM)
        view = store.jobs.view(job)
        if view is None:
            continue
        report, content = build_report(view), io.BytesIO()
        draw_report(report, content, photos=store.photos.folder, paper="letter" if view.words.is_ip else "a4")
        path = reports / f"{report.file_stem}.pdf"
        with written_whole(path) as growing:
            growing.file.write(content.getbuffer())
        written.append(path)
    accounts = []
    for name, role, firm in PEOPLE:
        password = secrets.token_urlsafe(9)
        store.accounts.make(name, role, password, firm)
        accounts.append((name, role, password))
    return Demo(tuple(jobs), tuple(written), tuple(accounts))


def told(made: Demo, folder: Path, address: str) -> list[str]:
    """What is printed, once."""
    lines = [f"Demonstration with {len(made.jobs)} invented jobs in {folder}", "", "Sign in as"]
    lines += [f"  {name:<16} password {password}   ({role})" for name, role, password in made.accounts]
    lines += ["", f"Reports: {made.reports[0].parent}" if made.reports else "", f"Open {address} (stop with Ctrl-C)"]
    return lines


def _serve(folder: Path, listener: socket.socket, make_app: Callable[[Store], WSGIApplication]) -> None:
    if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
        raise DemoError(f"{folder} is not empty; a demonstration is made in a new or empty folder")
    with Store(folder / "data") as store:
        made, address = furnish(store, folder / "reports"), address_of(listener)

        def ready() -> None:
            print("\n".join(told(made, folder, address)))
            if is_reachable(address):
                segno.make(address, error="m").terminal(out=sys.stdout, compact=True)
            sys.stdout.flush()

        run(make_app(store), listener, ready)
