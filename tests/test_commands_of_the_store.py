"""The commands that serve and keep: a whole round through processes of their own."""

import json
import os
import re
import signal
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import rfc8785

from tests.sheets import ROOT
from tests.test_command import run

TAMARACK = ROOT / "sample_jobs" / "tamarack-yard.jsonl"


def test_a_job_goes_in_out_and_through_a_backup_without_a_byte_changed(tmp_path: Path) -> None:
    taken = run("import", TAMARACK, "--data", tmp_path / "store")
    assert (taken.returncode, taken.stderr) == (0, "")
    again = run("import", TAMARACK, "--data", tmp_path / "store")
    assert " 0 records taken" in again.stdout
    assert run("backup", tmp_path / "kept", "--data", tmp_path / "store").returncode == 0
    assert run("restore", tmp_path / "kept", "--data", tmp_path / "second").returncode == 0
    job = json.loads(TAMARACK.read_text(encoding="utf-8").splitlines()[0])["job"]
    out = tmp_path / "out.jsonl"
    assert run("export", job, "-o", out, "--data", tmp_path / "second").returncode == 0
    # In canonical form (RFC 8785): 38.0 and 38 are one number.
    before, after = (
        sorted(rfc8785.dumps(json.loads(line)) for line in path.read_bytes().splitlines()) for path in (TAMARACK, out)
    )
    assert after == before
    photos = {path.name: path.read_bytes() for path in TAMARACK.with_suffix("").iterdir()}
    assert {path.name: path.read_bytes() for path in (tmp_path / "out").iterdir()} == photos


def test_what_cannot_be_done_is_told_in_one_sentence(tmp_path: Path) -> None:
    (tmp_path / "full").mkdir()
    (tmp_path / "full" / "file").write_text("x")
    for arguments in (
        ("import", tmp_path / "no.jsonl", "--data", tmp_path / "store"),
        ("export", "no-such-job", "-o", tmp_path / "x.jsonl", "--data", tmp_path / "store"),
        ("backup", tmp_path / "kept", "--data", tmp_path / "nothing-here"),
        ("restore", tmp_path / "full", "--data", tmp_path / "second"),
        ("demo", "--folder", tmp_path / "full", "--port", "0"),
        ("serve", "--data", tmp_path / "store", "--bind", "203.0.113.9", "--port", "0"),
    ):
        done = run(*arguments)
        assert done.returncode == 2, arguments
        assert done.stderr.count("\n") == 1, done.stderr
        assert "Traceback" not in done.stderr


@contextmanager
def served(*arguments: object) -> Iterator[tuple[subprocess.Popen[str], str]]:
    """A server in a process of its own; yields it with everything that it printed before it answered."""
    command = [sys.executable, "-u", "-m", "fieldapp.cli", *(str(argument) for argument in arguments), "--port", "0"]
    environment = {**os.environ, "PYTHONPATH": str(ROOT)}
    with subprocess.Popen(command, cwd=ROOT, env=environment, stdout=subprocess.PIPE, text=True) as process:
        assert process.stdout is not None
        told = ""
        try:
            while "http://" not in told or ("serves" in told and "/setup/" not in told):
                line = process.stdout.readline()
                assert line, f"the server ended: {told}"
                told += line
            yield process, told
        finally:
            process.kill()


def answer_of(address: str) -> str:
    for _ in range(100):
        try:
            with urllib.request.urlopen(address, timeout=5) as found:
                return str(found.read().decode())
        except urllib.error.URLError:
            time.sleep(0.05)
    raise AssertionError(f"no answer from {address}")


def test_the_demonstration_needs_nothing_and_shows_its_jobs(tmp_path: Path) -> None:
    with served("demo", "--folder", tmp_path / "demo") as (process, told):
        address = re.findall(r"http://\S+", told)[-1]
        assert "Sign in" in answer_of(f"{address}/sign-in")
        assert len(list((tmp_path / "demo" / "reports").glob("*.pdf"))) == 7
        for role in ("office", "inspector", "applicator"):
            assert f"({role})" in told
        process.send_signal(signal.SIGTERM)
        assert process.wait(20) == 0


def test_a_first_start_prints_where_the_first_account_is_made_and_has_no_default_password(tmp_path: Path) -> None:
    with served("serve", "--data", tmp_path / "store") as (process, told):
        (setup,) = re.findall(r"http://\S+/setup/\S+", told)
        assert "Make the first account" in answer_of(setup)
        assert "password" not in told.lower()
        process.send_signal(signal.SIGTERM)
        assert process.wait(20) == 0
