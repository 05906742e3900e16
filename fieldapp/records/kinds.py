"""The kinds of records: for each, the fields of its body. To add a kind, add a row to `KINDS`.

Units stand in the names: mm, m2, m3, kg/m3, g, ml, C, Pa, m2K/W.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Final

from fieldapp.reckoning.limits import at_least
from fieldapp.records.fields import (
    SHA256,
    UUID,
    Fields,
    Flag,
    Instant,
    ListOf,
    Number,
    OneOf,
    Pattern,
    Problem,
    Rule,
    Text,
    Whole,
    numbers,
    plain,
    shown,
    texts,
)

#: The deepest reading that can be meant in millimetres; more was entered in another unit.
DEEPEST_MM: Final = 1000.0

KEY: Final = Pattern(UUID, "a UUID in lower case")
DIGEST: Final = Pattern(SHA256, "a SHA-256 in 64 lower-case hex digits")
NAME: Final = Text(1, 200)
DEPTH: Final = Number(0.0, DEEPEST_MM)
#: What stands for 'over 0': a millionth of any unit here is nothing, and less than that divides to infinity.
LEAST: Final = 1e-6
LENGTH: Final = Number(LEAST, 100_000.0)
POSITIVE: Final = Number(LEAST, 1e9)
SHARE: Final = Number(0.0, 1.0)
ASSEMBLIES: Final = ("wall", "sloped-roof", "attic-floor", "rim", "floor", "foundation")
ZONES: Final = ("1A", "1B", "2A", "2B", "3A", "3B", "3C", "4A", "4B", "4C", "5A", "5B", "5C", "6A", "6B", "7", "8")
PURPOSES: Final = ("inspection", "self-check")
BLOCKED: Final = ("pipe-or-box", "no-access", "already-covered", "unsafe")
WHERE: Final = ("stud-edge", "plate", "corner", "behind-pipe", "at-box", "other")
SORTS: Final = (
    "void",
    "gap",
    "pulled-away",
    "shrinkage",
    "blister",
    "scorched",
    "brittle-or-dark",
    "soft-or-sticky",
    "odour",
    "lift-separated",
    "cracked",
    "missed",
    "scooped",
    "overspray",
    "vent-path-closed",
    "foam-on-heat-source",
    "box-filled",
    "other",
)
ROLES: Final = ("inspector", "applicator", "witness", "received")
SHOWS: Final = ("probe-scale", "before", "after", "substrate", "label", "overview")


@dataclass(frozen=True, slots=True)
class Kind:
    """A kind of record: whether it describes a thing or states a fact, and its body."""

    body: Fields
    describes: bool = False


def _foam_resistance(body: Mapping[str, Any]) -> Problem | None:
    per_metre, table = body.get("rsi_per_m"), body.get("table")
    if (per_metre is None) == (table is None):
        return Problem("rsi_per_m", "both" if table else "nothing", "either rsi_per_m or a table")
    return None if table is None else _rising_table(table)


def _rising_table(table: list[list[float]]) -> Problem | None:
    depth_before, rsi_before = 0.0, 0.0
    for place, row in enumerate(table):
        if len(row) != 2 or not 0.0 < row[0] <= DEEPEST_MM or row[1] <= 0.0:
            allowed = f"[depth_mm, rsi], both over 0, depths to {plain(DEEPEST_MM)}"
            return Problem(f"table[{place}]", shown(row), allowed)
        if row[0] <= depth_before or row[1] < rsi_before:
            allowed = f"a depth over {plain(depth_before)} with at least the resistance {plain(rsi_before)}"
            return Problem(f"table[{place}]", shown(row), allowed)
        depth_before, rsi_before = row
    return None


def _density(body: Mapping[str, Any]) -> Problem | None:
    low, high = body.get("min"), body.get("max")
    if low is not None and high is not None and high < low:
        return Problem("max", shown(high), f"at least min, {plain(low)}")
    return None


def _spec(body: Mapping[str, Any]) -> Problem | None:
    floor = body.get("floor_mm")
    if body.get("basis") == "average-with-floor":
        if floor is None:
            return Problem("floor_mm", "nothing", "the least depth of a single point, since the basis names a floor")
        if floor > body["depth_mm"]:
            return Problem("floor_mm", shown(floor), f"at most depth_mm, {plain(body['depth_mm'])}")
    return None


def _vapour(body: Mapping[str, Any]) -> Problem | None:
    needs = {"depth": "depth_mm", "permeance": "perm_ng", "separate": "retarder", "none": "reason"}[body["rule"]]
    if body.get(needs) is None:
        return Problem(needs, "nothing", f"a value, since the rule is {body['rule']}")
    return None


def _probe(body: Mapping[str, Any]) -> Problem | None:
    if body.get("direction") == "plumb" and body.get("pitch_deg") is None:
        return Problem("pitch_deg", "nothing", "the pitch, since the probe is held plumb")
    return None


def _layer(body: Mapping[str, Any]) -> Problem | None:
    if body.get("foam") is not True and body.get("name") is None:
        return Problem("name", "nothing", 'a name, or {"foam": true} where the foam stands')
    return None


def bay_area_m2(body: Mapping[str, Any]) -> float:
    """Area of a bay without its opening. [m2]"""
    gross = body.get("area_m2")
    if gross is None:
        gross = body["width_mm"] * body["height_mm"] / 1e6
    return float(gross) - float(body.get("opening_m2") or 0.0)


def _bay(body: Mapping[str, Any]) -> Problem | None:
    opening = body.get("opening_m2") or 0.0
    gross = bay_area_m2({**body, "opening_m2": None})
    if at_least(opening, gross):
        return Problem("opening_m2", shown(opening), f"under the bay's area, {plain(gross)}")
    if body["rows"] * body["cols"] > 10_000:
        return Problem("rows", shown(body["rows"]), "at most 10000 points in a bay")
    for name, count, length in (("rows_at_mm", "rows", "height_mm"), ("cols_at_mm", "cols", "width_mm")):
        if (at := body.get(name)) is not None and (problem := _positions(name, at, body[count], body[length])):
            return problem
    return None


def _positions(name: str, at_mm: list[float], count: int, length_mm: float) -> Problem | None:
    if len(at_mm) != count:
        return Problem(name, shown(at_mm), f"{count} positions, one for each point")
    before = -1.0
    for place, position in enumerate(at_mm):
        if position <= before or not 0.0 <= position <= length_mm:
            start = "0" if before < 0.0 else f"over {plain(before)}"
            return Problem(f"{name}[{place}]", shown(position), f"rising, {start} to {plain(length_mm)}")
        before = position
    return None


def _reading(body: Mapping[str, Any]) -> Problem | None:
    depth, blocked = body.get("depth_mm"), body.get("blocked")
    if (depth is None) == (blocked is None):
        allowed = f"a depth, 0 to {plain(DEEPEST_MM)}, or blocked with its reason; not both"
        return Problem("depth_mm", "nothing" if depth is None else shown(depth), allowed)
    return None


CORE_SIZES: Final = {
    "cylinder": ("diameter_mm", "length_mm"),
    "prism": ("width_mm", "length_mm", "depth_mm"),
    "displacement": ("volume_ml",),
}


def _core(body: Mapping[str, Any]) -> Problem | None:
    for name in CORE_SIZES[body["method"]]:
        if body.get(name) is None:
            return Problem(name, "nothing", f"a size over 0, since the method is {body['method']}")
    return None


def _bay_or_surface(body: Mapping[str, Any]) -> Problem | None:
    if body.get("bay") is None and body.get("surface") is None:
        return Problem("bay", "nothing", "the key of a bay or a surface")
    return None


def _pull(body: Mapping[str, Any]) -> Problem | None:
    if body.get("kpa") is None and body.get("by_hand") is None:
        return Problem("kpa", "nothing", "kpa, or by_hand")
    return None


_POINT: Final[Mapping[str, Rule]] = {"row": Whole(0), "col": Whole(0)}

KINDS: Final[Mapping[str, Kind]] = {
    "job": Kind(
        Fields(
            {"key": KEY, "name": NAME, "units": OneOf(("ip", "si"))},
            {
                **texts("site", "client", "contractor", "tz", "code", "permit_no", "project_no", "spec_section"),
                **texts("submittal_no", "engaged_by", "note"),
                "climate_zone": OneOf(ZONES),
                "design": Fields(
                    may={
                        **numbers("indoor_c", "outdoor_c", low=-80.0, high=80.0),
                        "indoor_rh": SHARE,
                        "outdoor_rh": SHARE,
                    }
                ),
            },
        ),
        describes=True,
    ),
    "place": Kind(Fields({"key": KEY, "name": NAME}, {"order": Number()}), describes=True),
    "foam": Kind(
        Fields(
            {
                "key": KEY,
                "name": NAME,
                "cell": OneOf(("closed", "open")),
                "resistance": Fields(
                    may={"rsi_per_m": POSITIVE, "table": ListOf(ListOf(Number(), 2, 2), 1)},
                    more=_foam_resistance,
                ),
            },
            {
                "permeability_ng_m": POSITIVE,
                "density_kg_m3": Fields(may={"nominal": POSITIVE, "min": POSITIVE, "max": POSITIVE}, more=_density),
                "max_pass_mm": POSITIVE,
                "max_depth_mm": POSITIVE,
                **numbers("min_pass_mm", "pass_wait_min", "reentry_h", low=0.0),
                "loss_share": Number(0.0, 0.9),
                **texts("evaluation_report", "source"),
            },
        ),
        describes=True,
    ),
    "surface": Kind(
        Fields(
            {
                "key": KEY,
                "name": NAME,
                "assembly": OneOf(ASSEMBLIES),
                "foam": KEY,
                "bays_total": Whole(0, 1_000_000),
                "spec": Fields(
                    {"depth_mm": Number(LEAST, DEEPEST_MM)},
                    {
                        "basis": OneOf(("minimum", "average-with-floor", "average")),
                        "floor_mm": DEPTH,
                        "rsi": POSITIVE,
                        "r_basis": OneOf(("delivered", "nominal")),
                        "under_area_share_max": SHARE,
                        "bays_share_min": SHARE,
                        "cores_min": Whole(0, 10_000),
                    },
                    _spec,
                ),
                "vapour": Fields(
                    {"rule": OneOf(("depth", "permeance", "separate", "none"))},
                    {
                        "depth_mm": Number(LEAST, DEEPEST_MM),
                        "measure": OneOf(("lowest", "bay-mean")),
                        "by_sample": Flag(),
                        "perm_ng": Number(0.0),
                        "retarder": Fields(
                            {"name": NAME, "perm_ng": Number(0.0), "side": OneOf(("inside", "outside"))}
                        ),
                        "reason": Text(1),
                        "accepted_by": Text(),
                    },
                    _vapour,
                ),
            },
            {
                "place": KEY,
                "chosen": OneOf(("all", "random", "every-kth", "where-it-looked-thin")),
                **texts("numbered_from", "substrate", "max_depth_reason"),
                "probe": Fields(
                    may={
                        "kind": Text(),
                        "graduation_mm": POSITIVE,
                        "direction": OneOf(("square", "plumb")),
                        "pitch_deg": Number(0.0, 90.0, below=True),
                    },
                    more=_probe,
                ),
                "max_depth_mm": POSITIVE,
                "cover": Fields(may=texts("kind", "product", "note")),
                "framing": Fields(
                    {"material": OneOf(("wood", "steel", "none"))},
                    {"spacing_mm": POSITIVE, "depth_mm": POSITIVE, "share": SHARE},
                ),
                "layers": ListOf(
                    Fields(
                        may={
                            "name": NAME,
                            "foam": Flag(),
                            "air_permeable": Flag(),
                            **numbers("rsi", "perm_ng", "permeability_ng_m", "depth_mm", low=0.0),
                        },
                        more=_layer,
                    ),
                    most=100,
                ),
                **numbers("film_in_rsi", "film_out_rsi", low=0.0),
            },
        ),
        describes=True,
    ),
    "bay": Kind(
        Fields(
            {
                "key": KEY,
                "surface": KEY,
                "label": Text(1, 60),
                "order": Number(),
                "width_mm": LENGTH,
                "height_mm": LENGTH,
                "rows": Whole(1, 1000),
                "cols": Whole(1, 1000),
            },
            {
                "opening_m2": Number(0.0),
                "area_m2": POSITIVE,
                "rows_at_mm": ListOf(Number(0.0), 1),
                "cols_at_mm": ListOf(Number(0.0), 1),
            },
            _bay,
        ),
        describes=True,
    ),
    "reading": Kind(
        Fields(
            {"bay": KEY, "row": Whole(0), "col": Whole(0), "round": Whole(1, 1000), "purpose": OneOf(PURPOSES)},
            {
                "depth_mm": DEPTH,
                "blocked": OneOf(BLOCKED),
                "measured": OneOf(("probe", "face-gap")),
                **texts("entered", "text"),
            },
            _reading,
        )
    ),
    "low-spot": Kind(
        Fields(
            {
                "bay": KEY,
                "round": Whole(1, 1000),
                "purpose": OneOf(PURPOSES),
                "depth_mm": DEPTH,
                "where": OneOf(WHERE),
            },
            {**numbers("x_mm", "y_mm"), "entered": Text()},
        )
    ),
    "touch-up": Kind(Fields({"bay": KEY, "round": Whole(2, 1000)}, texts("text"))),
    "core": Kind(
        Fields(
            {"bay": KEY, "method": OneOf(tuple(CORE_SIZES)), "mass_g": POSITIVE},
            {
                **_POINT,
                "label": Text(0, 60),
                **{name: POSITIVE for sizes in CORE_SIZES.values() for name in sizes},
                **numbers("scale_step_g", "calliper_step_mm", "foam_age_h", low=0.0),
                "skin": OneOf(("with", "without")),
                "hole_filled": Flag(),
                "note": Text(),
            },
            _core,
        )
    ),
    "pull": Kind(
        Fields(
            {"bay": KEY},
            {
                "kpa": Number(0.0),
                "broke": OneOf(("in-foam", "at-substrate", "between-lifts")),
                "note": Text(),
            },
            _pull,
        )
    ),
    "photo": Kind(
        Fields(
            {
                "sha256": DIGEST,
                "media_type": Text(1, 100),
                "bytes": Whole(1),
                "width": Whole(1, 100_000),
                "height": Whole(1, 100_000),
            },
            {"caption": Text(), "shows": OneOf(SHOWS), "bay": KEY, "surface": KEY, "about": KEY, **_POINT},
        )
    ),
    "deficiency": Kind(
        Fields(
            {"sort": OneOf(SORTS), "severity": OneOf(("stop", "repair", "note"))},
            {"bay": KEY, "surface": KEY, "text": Text()},
            _bay_or_surface,
        )
    ),
    "repair": Kind(Fields({"deficiency": KEY}, texts("text"))),
    "acceptance": Kind(Fields({"repair": KEY, "role": NAME}, texts("text"))),
    "conditions": Kind(
        Fields(
            may={
                "surface": KEY,
                "bay": KEY,
                **numbers("air_c", "substrate_c", low=-80.0, high=100.0),
                "rh": SHARE,
                "wood_mc": ListOf(SHARE),
                "note": Text(),
            }
        )
    ),
    "spray": Kind(
        Fields(
            {"surfaces": ListOf(KEY, 1), "foam": KEY},
            {
                "started": Instant(),
                "finished": Instant(),
                **texts("lot_a", "lot_b", "ventilation", "note"),
                **numbers("drum_c", "hose_c", "heater_a_c", "heater_b_c", low=-80.0, high=200.0),
                **numbers("pressure_a_kpa", "pressure_b_kpa", "kg", low=0.0),
                "passes": Whole(0, 1000),
                "masked": ListOf(Text()),
            },
        )
    ),
    "covered": Kind(Fields({"bays": ListOf(KEY, 1)}, texts("text"))),
    "visit": Kind(Fields(may={**texts("asked", "not_inspected", "note"), "present": ListOf(Text())})),
    "objection": Kind(Fields({"about": KEY, "text": Text(1)})),
    "signature": Kind(
        Fields(
            {
                "role": OneOf(ROLES),
                "name": NAME,
                "statement": Text(1),
                "strokes": ListOf(ListOf(ListOf(SHARE, 2, 2))),
                "covers": DIGEST,
            },
            {"credential": Text(), "surfaces": ListOf(KEY, 1)},
        )
    ),
    "withdrawal": Kind(Fields({"record": KEY, "reason": Text(1)})),
}

REMOVED: Final = Fields({"key": KEY, "removed": Flag()})


def check_body(kind: str, body: Any) -> Problem | None:
    """What is wrong with the body of a record of that kind; None for a good one and for kinds not known here."""
    if not isinstance(body, dict):
        return Problem("body", shown(body), "an object with named fields")
    known = KINDS.get(kind)
    if known is None:
        return None
    if known.describes and body.get("removed") is not None:
        if body["removed"] is True:
            return REMOVED.check(body, "")
        return Flag().check(body["removed"], "removed") or known.body.check(body, "")
    return known.body.check(body, "")
