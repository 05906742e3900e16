"""The wheel is whole: built from the checkout and run where nothing of the checkout is."""

import json
import subprocess
import sys
from pathlib import Path
from zipfile import ZipFile

from tests.sheets import ROOT, Sheet


def run(*command: object, cwd: Path) -> str:
    done = subprocess.run([str(word) for word in command], cwd=cwd, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


def test_the_wheel_reckons_and_reports_in_a_clean_environment(tmp_path: Path) -> None:
    run(sys.executable, "-m", "build", "--wheel", "--outdir", tmp_path, ".", cwd=ROOT)
    (wheel,) = tmp_path.glob("*.whl")
    names = ZipFile(wheel).namelist()
    tracked = run("git", "ls-files", "templates", "static", "sample_jobs", cwd=ROOT).split()
    assert {f"fieldapp/{name}" for name in tracked} <= set(names)
    assert not [name for name in names if name.startswith("tests/")]

    run(sys.executable, "-m", "venv", "clean", cwd=tmp_path)
    run("clean/bin/pip", "install", "--quiet", "--disable-pip-version-check", wheel, cwd=tmp_path)
    job = tmp_path / "job.jsonl"
    job.write_bytes(b"\n".join(Sheet.even(depth_mm=101.6, bays=2).lines()))
    assert json.loads(run("clean/bin/bayreckon", "reckon", "--json", job, cwd=tmp_path))["result"] == "meets"
    assert Path(tmp_path / run("clean/bin/bayreckon", "report", job, cwd=tmp_path).strip()).stat().st_size > 10_000
