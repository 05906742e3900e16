"""Imports point downwards only, and the pure rooms touch no file, clock, network, chance or paper."""

import ast
import re
from collections.abc import Iterator
from pathlib import Path

import pytest

from tests.sheets import ROOT

MATHEMATICS = {"collections", "dataclasses", "decimal", "functools", "itertools", "math", "typing"}
SYSTEM = {
    "contextlib",
    "hmac",
    "io",
    "os",
    "pathlib",
    "secrets",
    "shutil",
    "tempfile",
    "threading",
    "time",
    "types",
    "zlib",
}
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
    "fieldapp/store": (
        {"fieldapp.reckoning", "fieldapp.records", "fieldapp.report", "fieldapp.store"},
        MATHEMATICS | TEXT | SYSTEM | {"sqlite_utils", "sqlite3", "PIL", "werkzeug"},
    ),
    "fieldapp/web": (
        {"fieldapp.assets", "fieldapp.records", "fieldapp.report", "fieldapp.store", "fieldapp.web"},
        MATHEMATICS | TEXT | {"flask", "flask_wtf", "werkzeug", "wtforms", "io", "os", "secrets", "time"},
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
    "__import__",
    "breakpoint",
}
#: Built-in names for the same.
IMPURE_NAMES = {"open", "print", "input", "exec", "eval", "compile", "__import__", "__builtins__", "breakpoint"}


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
        if name == "fieldapp":
            continue  # its version, and nothing else stands there
        if name.split(".")[0] == "fieldapp":
            if not any(name == allowed or name.startswith(f"{allowed}.") for allowed in own):
                wrong.append(name)
            if "drawing" in name and room in PURE:
                wrong.append(name)
        elif name.split(".")[0] not in outside:
            wrong.append(name)
    if room in PURE:
        for node in ast.walk(tree):
            if isinstance(node, ast.Call):
                called = node.func.id if isinstance(node.func, ast.Name) else getattr(node.func, "attr", "")
                if called in IMPURE_CALLS:
                    wrong.append(f"{called}() in line {node.lineno}")
            # Named is as bad as called: `read = open` is one step from reading.
            elif isinstance(node, ast.Name) and isinstance(node.ctx, ast.Load) and node.id in IMPURE_NAMES:
                wrong.append(f"{node.id} in line {node.lineno}")
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
        ("fieldapp/reckoning", "import logging"),
        ("fieldapp/reckoning", "from time import time"),
        ("fieldapp/reckoning", "def f():\n    import random"),
        ("fieldapp/records", "import io, json"),
        ("fieldapp/records", "import sqlite3"),
        ("fieldapp/records", "from pathlib import Path"),
        ("fieldapp/records", "import flask"),
        ("fieldapp/records", "read = open"),
        ("fieldapp/records", "x = __import__('os')"),
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


def test_every_room_has_its_row() -> None:
    # A new room is a new row in ROOMS; without one, nothing would hold it.
    folders = {path.parent.relative_to(ROOT).as_posix() for path in (ROOT / "fieldapp").rglob("*.py")}
    assert folders - {"fieldapp"} == set(ROOMS)


#: The phone's rooms: what the modules of a folder may import, as paths that start in static/js.
PHONE_ROOMS = {"reckoning": ("reckoning/",), "records": ("records/", "reckoning/")}
SCRIPTS = [path for room in PHONE_ROOMS for path in sorted((ROOT / "static" / "js" / room).glob("*.js"))]
#: What pure modules never name: the page, storage, network, clock and chance.
NOT_PURE = (
    "document",
    "window",
    "indexedDB",
    "localStorage",
    "fetch(",
    "Date.now",
    "new Date()",
    "Math.random",
    "innerHTML",
)


@pytest.mark.parametrize("path", SCRIPTS, ids=lambda path: f"{path.parent.name}/{path.name}")
def test_a_module_of_the_phone_imports_only_what_its_room_may(path: Path) -> None:
    source = path.read_text()
    for name in re.findall(r'from "([^"]+)"', source):
        reached = (path.parent / name).resolve().relative_to(ROOT / "static" / "js").as_posix()
        assert reached.startswith(PHONE_ROOMS[path.parent.name])
        assert (path.parent / name).is_file()
    assert not [word for word in NOT_PURE if word in source]


def test_both_languages_have_the_same_rooms_by_the_same_names() -> None:
    # Python alone has the file reader's lines and the typed shapes; the phone alone its values and canonical JSON.
    for room, only_python in (("reckoning", {"inputs", "results"}), ("records", {"file", "job"})):
        here = {path.stem for path in (ROOT / "fieldapp" / room).glob("*.py")} - {"__init__"} - only_python
        there = {path.stem for path in (ROOT / "static" / "js" / room).glob("*.js")} - {"canonical", "load"}
        assert here == there
