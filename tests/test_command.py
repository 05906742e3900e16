"""The command as a person runs it: what it prints, where, and with which exit status."""

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
from pypdf import PdfReader

from tests.sheets import ROOT, SAMPLES, Sheet


def run(*arguments: object, cwd: Path = ROOT, **more: str) -> subprocess.CompletedProcess[str]:
    """Run the command in a process of its own."""
    command = [sys.executable, "-m", "fieldapp.cli", *(str(argument) for argument in arguments)]
    environment = {**os.environ, "PYTHONPATH": str(ROOT), **more}
    return subprocess.run(command, cwd=cwd, env=environment, capture_output=True, text=True, check=False)


def written(tmp_path: Path, content: bytes) -> Path:
    path = tmp_path / "job.jsonl"
    path.write_bytes(content)
    return path


def job_file(tmp_path: Path, sheet: Sheet, *more: bytes) -> Path:
    return written(tmp_path, b"\n".join([*sheet.lines(), *more]) + b"\n")


@pytest.mark.parametrize("name", SAMPLES)
def test_a_sample_job_is_reckoned_with_every_record_taken(name: str) -> None:
    done = run("reckon", f"sample_jobs/{name}.jsonl")
    assert (done.returncode, done.stderr) == (0, "")
    assert "digest " in done.stdout


def test_json_is_the_documented_shape_and_nothing_else_is_on_standard_output(tmp_path: Path) -> None:
    done = run("reckon", "--json", job_file(tmp_path, Sheet.even(depth_mm=101.6, bays=2)))
    found = json.loads(done.stdout)
    assert done.returncode == 0
    assert list(found)[:9] == [
        "format",
        "job",
        "purpose",
        "result",
        "refused",
        "digest",
        "agreement",
        "places",
        "surfaces",
    ]
    assert found["format"] == 1
    assert found["result"] == "meets"
    assert found["surfaces"][0]["depth_mm"]["mean"] == pytest.approx(101.6)


def test_a_refused_record_is_told_by_line_and_field_and_costs_no_other(tmp_path: Path) -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    bad = sheet.reading(0, 0, -3)
    path = job_file(tmp_path, sheet)
    done = run("reckon", "--json", path)
    refused = json.loads(done.stdout)["refused"]
    assert done.returncode == 3
    assert [(row["id"], row["field"], row["found"], row["allowed"]) for row in refused] == [
        (bad, "depth_mm", "-3", "0 to 1000")
    ]
    assert refused[0]["line"] == len(sheet.records)
    assert f"line {len(sheet.records)}: depth_mm: found -3; allowed: 0 to 1000" in done.stderr
    assert json.loads(done.stdout)["surfaces"][0]["points_read"] == 6


@pytest.mark.parametrize(
    ("content", "told"),
    [
        (b"", "is empty"),
        (b"\n\n  \n", "is empty"),
        (b"total garbage\nmore of it\n", "holds no record that can be read"),
        (bytes(range(256)) * 40, "holds no record that can be read"),
        (b'{"a": 1}\n', "holds no record that can be read"),
        (b"[" * 100_000, "holds no record that can be read"),
    ],
    ids=["empty", "blank", "garbage", "binary", "other JSON", "deep"],
)
@pytest.mark.parametrize("command", ["reckon", "report"])
def test_a_file_that_is_no_job_gets_one_clear_sentence(command: str, content: bytes, told: str, tmp_path: Path) -> None:
    done = run(command, written(tmp_path, content), cwd=tmp_path)
    assert done.returncode == 2
    assert told in done.stderr
    assert done.stderr.count("\n") == 1
    assert done.stdout == ""


def test_a_file_of_200_mb_is_refused_without_being_read(tmp_path: Path) -> None:
    path = tmp_path / "huge.jsonl"
    with path.open("wb") as out:
        out.truncate(200_000_000)
    done = run("reckon", path)
    assert done.returncode == 2
    assert "is 200 MB; a job file has at most 100 MB" in done.stderr
    assert done.stderr.count("\n") == 1


@pytest.mark.parametrize("arguments", [("reckon", "no-such.jsonl"), ("reckon", "."), (), ("reckon",), ("measure", "x")])
def test_wrong_usage_is_one_line_and_no_traceback(arguments: tuple[str, ...]) -> None:
    done = run(*arguments)
    assert done.returncode == 2
    assert done.stderr.startswith("bayreckon: ")
    assert done.stderr.count("\n") == 1


def test_a_report_that_cannot_be_written_says_so_and_leaves_nothing(tmp_path: Path) -> None:
    path = job_file(tmp_path, Sheet.even(depth_mm=101.6, bays=2))
    done = run("report", path, "-o", tmp_path / "no" / "such" / "folder.pdf")
    assert done.returncode == 2
    assert "cannot be written" in done.stderr
    assert [found.name for found in tmp_path.iterdir()] == ["job.jsonl"]


def test_a_report_is_named_from_the_job_its_state_and_its_date(tmp_path: Path) -> None:
    path = job_file(tmp_path, Sheet.even(depth_mm=101.6, bays=2, name="Süd/Hof 3"))
    done = run("report", path, "-o", tmp_path)
    assert done.returncode == 0
    assert done.stdout.strip() == str(tmp_path / "Süd-Hof-3_unsigned_2026-05-04.pdf")
    assert len(PdfReader(done.stdout.strip()).pages) > 3


def test_the_reader_of_our_output_may_leave_early(tmp_path: Path) -> None:
    path = job_file(tmp_path, Sheet.even(depth_mm=101.6, bays=40))
    command = f"{sys.executable} -m fieldapp.cli reckon --json {path} | head -1"
    done = subprocess.run(
        ["bash", "-o", "pipefail", "-c", command], cwd=ROOT, capture_output=True, text=True, check=False
    )
    assert done.stderr == ""


def test_reckoning_imports_nothing_that_only_paper_needs() -> None:
    heavy = "reportlab PIL fontTools flask numpy sqlite_utils"
    code = f"import sys, fieldapp.cli; print([name for name in {heavy!r}.split() if name in sys.modules])"
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
