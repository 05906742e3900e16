"""`python -m tests`: everything that must hold before a commit, in one command; the first failure says what to do."""

import os
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
PYTHON = sys.executable

STEPS: tuple[tuple[str, list[str], str], ...] = (
    ("format", [PYTHON, "-m", "ruff", "format", "--check", "."], "run: python -m ruff format ."),
    ("lint", [PYTHON, "-m", "ruff", "check", "."], "mend what is named, or run: python -m ruff check --fix ."),
    ("types", [PYTHON, "-m", "mypy"], "every function is typed; mend what is named"),
    (
        "tests",
        [PYTHON, "-m", "pytest", *sys.argv[1:]],
        "run the failing test alone: python -m pytest tests/FILE::TEST -vv",
    ),
)


def main() -> int:
    """Run the steps in order; arguments are passed on to pytest."""
    environment = {**os.environ, "PYTHONWARNINGS": "default"}
    for name, command, advice in STEPS:
        print(f"== {name}", flush=True)
        if subprocess.run(command, cwd=ROOT, env=environment, check=False).returncode:
            print(f"== {name} failed: {advice}", file=sys.stderr)
            return 1
    return 0


if __name__ == "__main__":
    sys.exit(main())
