"""Imports point downwards only, and the pure rooms touch no file, clock, network, chance or paper."""

import ast
from collections.abc import Iterator
from pathlib import Path

import pytest

from tests.sheets import ROOT

MATHEMATICS = {"collections", "dataclasses", "decimal", "functools", "itertools", "math", "typing"}
TEXT = {"json", "re", "hashlib", "datetime", "unicodedata", "textwrap", "xml"}

#: For each room what it may import: rooms of this project, and modules from outside. The longest name that fits rules.
ROOMS: dict[str, tuple[set[str], set[str]]] = {
    "fieldapp/reckoning": ({"fieldapp.reckoning"}, MATHEMATICS),
    "fieldapp/records": ({"fieldapp.reckoning", "fieldapp.records"}, MATHEMATICS | TEXT | {"rfc8785"}),
    "fieldapp/report": (
        {"fieldapp.reckoning", "fieldapp.records", "fieldapp.report"},
        # zoneinfo reads the time zone tables; nothing else here reads anything.
        MATHEMATICS | TEXT | {"zoneinfo"},
    ),
    "fieldapp/report/drawing": (
        {"fieldapp.reckoning", "fieldapp.report"},
        MATHEMATICS | TEXT | {"reportlab", "PIL", "fontTools", "importlib", "os", "pathlib", "tempfile", "contextlib"},
    ),
}
PURE = ("fieldapp/reckoning", "fieldapp/records", "fieldapp/report")
#: Calls that read or write the world.
IMPURE_CALLS = {
    "open",
    "print",
    "input",
    "exec",
    "eval",
    "now",
    "today",
    "utcnow",
    "time",
    "sleep",
    "urandom",
    "getenv",
}


def room_of(path: Path) -> str | None:
    name = path.relative_to(ROOT).as_posix()
    return max((room for room in ROOMS if name.startswith(f"{room}/")), key=len, default=None)


def modules() -> Iterator[tuple[str, Path]]:
    for path in sorted((ROOT / "fieldapp").rglob("*.py")):
        room = room_of(path)
        if room is not None:
            yield room, path


def imported(tree: ast.Module) -> Iterator[str]:
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, "imports name the whole path"
            yield node.module or ""


def forbidden(room: str, source: str) -> list[str]:
    """What a source imports or calls that its room may not."""
    own, outside = ROOMS[room]
    tree = ast.parse(source)
    wrong = []
    for name in imported(tree):
        if name.split(".")[0] == "fieldapp":
            if not any(name == allowed or name.startswith(f"{allowed}.") for allowed in own):
                wrong.append(name)
            if "drawing" in name and not room.endswith("drawing"):
                wrong.append(name)
        elif name.split(".")[0] not in outside:
            wrong.append(name)
    if room in PURE:
        for node in ast.walk(tree):
            if isinstance(node, ast.Call):
                called = node.func.id if isinstance(node.func, ast.Name) else getattr(node.func, "attr", "")
                if called in IMPURE_CALLS:
                    wrong.append(f"{called}() in line {node.lineno}")
    return wrong


@pytest.mark.parametrize(
    ("room", "path"), list(modules()), ids=lambda value: value.name if isinstance(value, Path) else value
)
def test_a_module_imports_only_what_its_room_may(room: str, path: Path) -> None:
    assert forbidden(room, path.read_text()) == []


@pytest.mark.parametrize(
    ("room", "source"),
    [
        ("fieldapp/reckoning", "import os"),
        ("fieldapp/reckoning", "from fieldapp.records.job import Job"),
        ("fieldapp/records", "import random"),
        ("fieldapp/records", "from fieldapp.report.model import Report"),
        ("fieldapp/records", "def f():\n    return open('x')"),
        ("fieldapp/report", "from reportlab.pdfgen.canvas import Canvas"),
        ("fieldapp/report", "from fieldapp.report.drawing.pages import draw_report"),
        ("fieldapp/report", "from datetime import datetime\nx = datetime.now()"),
        ("fieldapp/report/drawing", "import sqlite3"),
        ("fieldapp/report/drawing", "from fieldapp.records.fold import fold"),
    ],
)
def test_the_guard_sees_what_is_forbidden(room: str, source: str) -> None:
    assert forbidden(room, source)


def test_every_pure_folder_says_what_it_may_not_do() -> None:
    for room in PURE:
        told = ast.get_docstring(ast.parse((ROOT / room / "__init__.py").read_text())) or ""
        assert "may not" in told
