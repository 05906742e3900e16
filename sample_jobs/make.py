"""`python -m sample_jobs.make`: writes every sample job anew, the same bytes each time. All of it is invented."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from sample_jobs import pictures
from sample_jobs.depths import Foam
from sample_jobs.writer import FOOT, INCH, Writer

HERE = Path(__file__).resolve().parent
INVENTED = "Invented demo job: every name, place, firm, product and figure in it is made up."
SOURCE = "invented for this demo; values in the range usual in the trade (common practice, no source)"
STATEMENT = "I read the depths at the points recorded here. I say nothing of what I did not read."

CLOSED: dict[str, Any] = {
    "name": "Demo closed-cell foam A",
    "cell": "closed",
    "resistance": {"rsi_per_m": 45.0},
    "permeability_ng_m": 2.3,
    "density_kg_m3": {"nominal": 32.0, "min": 28.0, "max": 38.0},
    "max_pass_mm": 2 * INCH,
    "min_pass_mm": INCH / 2,
    "pass_wait_min": 20,
    "reentry_h": 24,
    "loss_share": 0.12,
    "source": SOURCE,
}
OPEN: dict[str, Any] = {
    "name": "Demo open-cell foam B",
    "cell": "open",
    "resistance": {"rsi_per_m": 25.6},
    "permeability_ng_m": 55.0,
    "density_kg_m3": {"nominal": 8.0, "min": 6.8, "max": 12.0},
    "max_pass_mm": 6 * INCH,
    "min_pass_mm": 2 * INCH,
    "pass_wait_min": 10,
    "reentry_h": 24,
    "loss_share": 0.3,
    "source": SOURCE,
}
TABLED: dict[str, Any] = {
    **CLOSED,
    "name": "Demo closed-cell foam C",
    "resistance": {"table": [[25.0, 0.9], [50.0, 1.9], [75.0, 2.95], [100.0, 4.0]]},
    "max_pass_mm": 50.0,
    "min_pass_mm": 15.0,
    "max_depth_mm": 100.0,
}


@dataclass(frozen=True)
class Bays:
    """The bays of a surface as they are laid out: how many, their clear size and their grid."""

    number: int
    width_mm: float
    height_mm: float
    rows: int
    cols: int = 1
    more: dict[str, Any] | None = None

    def places(self) -> Iterable[tuple[int, int, float, float]]:
        """Row, column and where they lie across and down a bay (0..1)."""
        for row in range(self.rows):
            for col in range(self.cols):
                yield row, col, (col + 0.5) / self.cols, (row + 0.5) / self.rows


def lay_out(job: Writer, surface: str, bays: Bays, labels: Iterable[str] | None = None) -> list[str]:
    """Describe the bays of a surface; returns their keys in order."""
    keys = []
    for number, label in enumerate(labels or (str(n) for n in range(1, bays.number + 1))):
        key = job.new_key(f"{surface} bay {label}")
        size = {"width_mm": bays.width_mm, "height_mm": bays.height_mm, "rows": bays.rows, "cols": bays.cols}
        more = bays.more or {}
        job.write("bay", 1.0, key=key, surface=surface, label=label, order=number + 1, **size, **more)
        keys.append(key)
    return keys


def begin(name: str, start: datetime, title: str, units: str = "ip", **about: Any) -> Writer:
    """A job with its description."""
    job = Writer(name, start, metric=units == "si")
    told = {"client": "Demo general contractor", "engaged_by": "Demo owner", "note": INVENTED, **about}
    job.write("job", key=job.job, name=title, units=units, **told)
    return job


def foam(job: Writer, values: dict[str, Any]) -> str:
    """Describe a foam; returns its key."""
    key = job.new_key(str(values["name"]))
    job.write("foam", key=key, **values)
    return key


def surface(job: Writer, name: str, assembly: str, foam_key: str, bays_total: int, **about: Any) -> str:
    """Describe a surface; returns its key."""
    key = job.new_key(f"surface {name} {about.get('place', '')}")
    told = {"chosen": "all", "probe": {"kind": "pin probe", "graduation_mm": 1 if job.metric else INCH / 8}, **about}
    job.write("surface", key=key, name=name, assembly=assembly, foam=foam_key, bays_total=bays_total, **told)
    return key


def read_all(
    job: Writer, keys: list[str], bays: Bays, sprayed: Foam, skip: Iterable[int] = (), **more: Any
) -> dict[tuple[int, int, int], tuple[str, float]]:
    """Read every point of every bay; returns the record and the depth at each (bay, row, col)."""
    left_out = set(skip)
    found = {}
    for number, key in enumerate(keys):
        if number in left_out:
            continue
        job.device.at = job.device.at.replace(microsecond=(number * 137 % 1000) * 1000)
        for row, col, across, down in bays.places():
            depth = sprayed.depth_mm(number, len(keys), across, down)
            found[number, row, col] = (job.reading(key, row, col, depth, **more), depth)
    return found


def tamarack_yard() -> Writer:
    """A cold-zone roof, thin at the ridge, touched up in a second round; a rim; a knee wall partly read."""
    job = begin(
        "tamarack-yard",
        datetime(2026, 5, 3, 12, 40, tzinfo=UTC),
        "Tamarack Yard workshop",
        site="Invented site, Tamarack Yard, lot 4",
        contractor="Demo crew 2",
        tz="America/Winnipeg",
        climate_zone="6A",
        code="Demo county code, 2021 edition",
        permit_no="DEMO-118",
        project_no="TY-0412",
        spec_section="07 21 19",
    )
    a = foam(job, CLOSED)
    vapour = {"rule": "depth", "depth_mm": 3 * INCH}
    slope_bays = Bays(28, 14.5 * INCH, 12 * FOOT, 4)
    slope = surface(
        job,
        "North slope",
        "sloped-roof",
        a,
        28,
        spec={"depth_mm": 4 * INCH, "basis": "average-with-floor", "floor_mm": 3.5 * INCH, "rsi": 4.2, "cores_min": 3},
        vapour=vapour,
        numbered_from="the east gable",
        substrate="1/2 in plywood deck",
        max_depth_mm=7.25 * INCH,
        max_depth_reason="face of the rafters",
        framing={"material": "wood", "spacing_mm": 16 * INCH, "depth_mm": 7.25 * INCH, "share": 0.11},
        layers=[
            {"name": "gypsum board 1/2 in", "rsi": 0.079, "perm_ng": 2860.0},
            {"foam": True},
            {"name": "plywood deck", "rsi": 0.11, "perm_ng": 40.0},
        ],
    )
    slope_keys = lay_out(job, slope, slope_bays)
    rim_bays = Bays(16, 14.5 * INCH, 9.25 * INCH, 2)
    rim_spec = {"depth_mm": 3 * INCH, "basis": "minimum"}
    rim = surface(
        job, "Rim", "rim", a, 16, spec=rim_spec, vapour=vapour, max_depth_mm=5.5 * INCH, max_depth_reason="plate"
    )
    rim_keys = lay_out(job, rim, rim_bays)
    knee_bays = Bays(10, 14.5 * INCH, 4 * FOOT, 3)
    knee = surface(
        job, "Knee wall", "wall", a, 10, spec={"depth_mm": 3 * INCH, "basis": "minimum", "cores_min": 1}, vapour=vapour
    )
    knee_keys = lay_out(job, knee, knee_bays)

    sprayed = Foam(4.46 * INCH, 11, drift_mm=-6.0, crown_mm=6.0, reach_mm=54.0, hand_mm=9.0)
    job.device = job.crew
    job.write("conditions", surface=slope, air_c=16.0, rh=0.41, substrate_c=14.0, wood_mc=[0.12, 0.14, 0.13])
    job.write(
        "spray",
        14400.0,
        surfaces=[slope, rim, knee],
        foam=a,
        started="2026-05-03T13:45:00.000Z",
        finished="2026-05-03T17:30:00.000Z",
        lot_a="A-2604-17",
        lot_b="B-2604-09",
        drum_c=24.0,
        hose_c=52.0,
        heater_a_c=54.0,
        heater_b_c=54.0,
        pressure_a_kpa=8300.0,
        pressure_b_kpa=8300.0,
        passes=2,
        ventilation="two fans, supplied air",
        masked=["windows", "floor"],
    )
    for number in (3, 9, 15, 21):
        for row, col, across, down in slope_bays.places():
            depth = sprayed.depth_mm(number, 28, across, down) + 2.2 + 1.3 * ((number + row) % 3)
            job.reading(slope_keys[number], row, col, depth, purpose="self-check")

    job.device = job.inspector
    job.write(
        "visit",
        asked="depth, density and vapor depth before drywall",
        present=["Demo inspector A", "Demo crew 2"],
        not_inspected="the south slope, not sprayed yet; the loft behind the knee wall",
    )
    job.write("conditions", surface=slope, air_c=18.0, rh=0.44, substrate_c=17.0)
    job.photo(
        pictures.slope("the slope, ridge above", thin_at_ridge=True, seed=3),
        surface=slope,
        shows="overview",
        caption="North slope before touch-up",
    )
    job.photo(
        pictures.drum_label(
            ["Demo foam A", "B-side", "lot B-2604-09", "closed cell", "invented product"], "label of the B-side drum"
        ),
        surface=slope,
        shows="label",
        caption="Lot as delivered",
    )
    read = read_all(job, slope_keys, slope_bays, sprayed)
    thin = [number for number in range(28) if read[number, 0, 0][1] < 3.44 * INCH]
    lowest = min(thin, key=lambda number: read[number, 0, 0][1])
    job.photo(
        pictures.probe("2 7/8 in", 2.875, "probe at the ridge of the thinnest bay", 5),
        bay=slope_keys[lowest],
        row=0,
        col=0,
        about=read[lowest, 0, 0][0],
        shows="probe-scale",
        caption="Thinnest reading, at the ridge",
    )
    miskeyed = job.reading(slope_keys[7], 2, 0, 14.5 * INCH)
    job.write("withdrawal", 4.0, record=miskeyed, reason="mis-keyed")
    job.reading(slope_keys[8], 1, 0, read[8, 1, 0][1] + 0.9 * INCH)
    job.write(
        "low-spot",
        bay=slope_keys[23],
        round=1,
        purpose="inspection",
        depth_mm=3.25 * INCH,
        where="stud-edge",
        entered="3 1/4",
    )
    job.write(
        "low-spot",
        bay=slope_keys[5],
        round=1,
        purpose="inspection",
        depth_mm=3.625 * INCH,
        where="behind-pipe",
        entered="3 5/8",
    )
    deficiency = job.write(
        "deficiency",
        bay=slope_keys[18],
        sort="gap",
        severity="repair",
        text="Gap beside the vent pipe, full height of the bay.",
    )
    job.photo(
        pictures.gap_at_pipe("gap beside a vent pipe", mended=False, seed=8),
        bay=slope_keys[18],
        about=deficiency,
        shows="before",
        caption="Gap beside the vent pipe",
    )
    for number, (bay, mass) in enumerate(((2, 4.62), (14, 4.71), (25, 4.58)), 1):
        core = job.write(
            "core",
            bay=slope_keys[bay],
            row=2,
            col=0,
            label=f"N{number}",
            method="cylinder",
            diameter_mm=50.8,
            length_mm=70.0 + number,
            mass_g=mass,
            scale_step_g=0.01,
            calliper_step_mm=0.1,
            skin="without",
            foam_age_h=21,
            hole_filled=True,
        )
        if number == 1:
            job.photo(
                pictures.core_on_scale("4.62 g", "core N1 on the scale", 2),
                about=core,
                bay=slope_keys[bay],
                caption="Core N1",
            )
    read_all(job, rim_keys, rim_bays, Foam(3.55 * INCH, 4, drift_mm=3.0, crown_mm=4.0, hand_mm=6.0))
    read_all(
        job, knee_keys, knee_bays, Foam(3.62 * INCH, 9, drift_mm=3.0, crown_mm=6.0, hand_mm=7.0), skip=(6, 7, 8, 9)
    )

    _second_round(job, slope, slope_keys, slope_bays, read, thin, deficiency)
    job.sign("inspector", "Demo inspector A", STATEMENT, [rim], credential="Demo credential 7")
    job.sign("applicator", "Demo crew 2, lead", "I sprayed what is described here.")
    return job


def _second_round(
    job: Writer,
    slope: str,
    keys: list[str],
    bays: Bays,
    read: dict[tuple[int, int, int], tuple[str, float]],
    thin: list[int],
    deficiency: str,
) -> None:
    """The thin bays touched up; all but the last read again, the thinnest still short; the deficiency mended and accepted."""
    job.crew.at = job.inspector.at
    job.device = job.crew
    for number in thin:
        job.write("touch-up", bay=keys[number], round=2, text="ridge, one pass")
    repair = job.write("repair", deficiency=deficiency, text="Foamed the gap from both sides of the pipe.")
    job.photo(
        pictures.gap_at_pipe("the same place, filled", mended=True, seed=8),
        bay=keys[18],
        about=deficiency,
        shows="after",
        caption="Gap filled",
    )
    job.inspector.at = job.crew.at.replace(hour=21)
    job.device = job.inspector
    lowest = min(thin, key=lambda number: read[number, 0, 0][1])
    for number in thin[:-1]:
        for row, col, _, _ in bays.places():
            before = read[number, row, col][1]
            added = 0.62 * INCH if row == 0 else 0.04 * INCH
            if row == 0 and number == lowest:
                added = 0.3 * INCH
            job.reading(keys[number], row, col, before + added, round=2)
    job.write("acceptance", repair=repair, role="inspector", text="Seen, filled.")
    job.photo(
        pictures.slope("the slope after touch-up", thin_at_ridge=False, seed=3),
        surface=slope,
        shows="after",
        caption="North slope after touch-up",
    )


def hollow_road() -> Writer:
    """Open-cell walls with a separate retarder inside; windows, pipes and boxes; a deficiency still open."""
    job = begin(
        "hollow-road-walls",
        datetime(2026, 3, 9, 13, 5, tzinfo=UTC),
        "Hollow Road house, walls",
        site="Invented site, Hollow Road",
        contractor="Demo crew 5",
        tz="America/Chicago",
        climate_zone="5A",
        code="Demo city code, 2018 edition",
        permit_no="DEMO-4471",
        project_no="HR-22",
    )
    b = foam(job, OPEN)
    bays = Bays(14, 14.5 * INCH, 8 * FOOT, 3, 2)
    sheet = {"name": "Demo smart sheet", "perm_ng": 45.0, "side": "inside"}
    wall = surface(
        job,
        "South wall",
        "wall",
        b,
        14,
        spec={"depth_mm": 5.5 * INCH, "basis": "average", "rsi": 3.35, "under_area_share_max": 0.25},
        vapour={"rule": "separate", "retarder": sheet},
        numbered_from="the west corner",
        substrate="7/16 in OSB",
        max_depth_mm=5.75 * INCH,
        max_depth_reason="trimmed flush, sheet and drywall close over it",
        cover={"kind": "gypsum", "note": "1/2 in, to be hung"},
        framing={"material": "wood", "spacing_mm": 16 * INCH, "depth_mm": 5.5 * INCH, "share": 0.25},
        layers=[
            {"name": "gypsum board 1/2 in", "rsi": 0.079, "perm_ng": 2860.0},
            {"name": "Demo smart sheet", "rsi": 0.0, "perm_ng": 45.0},
            {"foam": True},
            {"name": "OSB 7/16 in", "rsi": 0.109, "perm_ng": 60.0},
            {"name": "siding", "rsi": 0.109, "perm_ng": 2000.0},
        ],
    )
    keys = lay_out(job, wall, bays)
    for number in (4, 5, 9):
        size = {"width_mm": bays.width_mm, "height_mm": bays.height_mm, "rows": bays.rows, "cols": bays.cols}
        job.write(
            "bay", key=keys[number], surface=wall, label=str(number + 1), order=number + 1, **size, opening_m2=0.42
        )
    job.device = job.inspector
    sprayed = Foam(5.62 * INCH, 21, drift_mm=5.0, crown_mm=14.0, reach_mm=9.0, hand_mm=7.0)
    face = 5.5 * INCH
    boxes = {(2, 2, 0): "pipe-or-box", (7, 2, 1): "pipe-or-box", (11, 0, 0): "no-access"}
    for number, key in enumerate(keys):
        for row, col, across, down in bays.places():
            if reason := boxes.get((number, row, col)):
                job.write(
                    "reading",
                    bay=key,
                    row=row,
                    col=col,
                    round=1,
                    purpose="inspection",
                    blocked=reason,
                    text="drain stack",
                )
            else:
                # Trimmed flush: nothing stands proud of the studs, and the gap below their face is what is read.
                depth = min(sprayed.depth_mm(number, 14, across, down), face)
                job.reading(key, row, col, depth, measured="face-gap")
    job.write(
        "deficiency", bay=keys[2], sort="void", severity="repair", text="Hollow behind the drain stack, a hand wide."
    )
    job.write("deficiency", bay=keys[6], sort="overspray", severity="note", text="Overspray on the window buck.")
    job.write(
        "low-spot",
        bay=keys[2],
        round=1,
        purpose="inspection",
        depth_mm=1.5 * INCH,
        where="behind-pipe",
        entered="1 1/2",
    )
    job.photo(
        pictures.window_wall("open-cell wall, trimmed flush", 14), surface=wall, shows="overview", caption="South wall"
    )
    job.write(
        "core",
        bay=keys[8],
        label="S1",
        method="displacement",
        volume_ml=410.0,
        mass_g=3.4,
        scale_step_g=0.1,
        skin="without",
    )
    return job


def riviere_basement() -> Writer:
    """A metric rim and foundation, foam with a table, everything meets; one rule by depth, one by permeance."""
    job = begin(
        "riviere-basement",
        datetime(2026, 4, 14, 14, 0, tzinfo=UTC),
        "Maison de la Rivière, sous-sol",
        "si",
        site="Lieu inventé, chemin de la Rivière",
        client="Entrepreneur général de démonstration",
        engaged_by="Propriétaire de démonstration",
        contractor="Équipe démo 3",
        tz="America/Toronto",
        climate_zone="7",
        project_no="MR-7",
        code="édition de démonstration",
    )
    c = foam(job, TABLED)
    rim_bays = Bays(18, 370.0, 240.0, 1, 2)
    rim = surface(
        job,
        "Solive de rive",
        "rim",
        c,
        18,
        spec={"depth_mm": 75.0, "basis": "minimum", "rsi": 2.9},
        vapour={"rule": "depth", "depth_mm": 75.0},
        numbered_from="le coin nord-est",
    )
    rim_keys = lay_out(job, rim, rim_bays, [f"R{number}" for number in range(1, 19)])
    wall_bays = Bays(
        12, 1200.0, 2100.0, 3, 3, {"rows_at_mm": [200.0, 1050.0, 1900.0], "cols_at_mm": [150.0, 600.0, 1050.0]}
    )
    wall = surface(
        job,
        "Mur de fondation",
        "foundation",
        c,
        12,
        spec={"depth_mm": 60.0, "basis": "minimum", "rsi": 2.3, "cores_min": 2},
        vapour={"rule": "permeance", "perm_ng": 60.0},
        substrate="béton coulé",
        cover={"kind": "gypsum", "product": "plaque 12,7 mm"},
        framing={"material": "none"},
        layers=[
            {"name": "plaque de plâtre 12,7 mm", "rsi": 0.08},
            {"foam": True},
            {"name": "béton 200 mm", "rsi": 0.1},
        ],
    )
    wall_keys = lay_out(job, wall, wall_bays, [f"F{number}" for number in range(1, 13)])
    job.device = job.inspector
    read_all(job, rim_keys, rim_bays, Foam(85.0, 31, drift_mm=3.0, crown_mm=6.0, hand_mm=6.0))
    read_all(job, wall_keys, wall_bays, Foam(74.0, 33, drift_mm=-3.0, crown_mm=7.0, reach_mm=3.0, hand_mm=7.0))
    for number, (bay, mass) in enumerate(((1, 8.05), (8, 8.31)), 1):
        job.write(
            "core",
            bay=wall_keys[bay],
            label=f"F-{number}",
            method="prism",
            width_mm=60.0,
            length_mm=70.0,
            depth_mm=59.0,
            mass_g=mass,
            scale_step_g=0.05,
            calliper_step_mm=0.5,
            skin="without",
        )
    job.write("pull", bay=wall_keys[4], kpa=210.0, broke="in-foam", note="plaque collée de 50 mm")
    job.photo(
        pictures.probe("84 mm", 84 / INCH, "probe in the rim, drawn to its scale in inches", 17),
        bay=rim_keys[3],
        shows="probe-scale",
        caption="Solive de rive, case R4",
    )
    job.sign("inspector", "Demo inspector C", STATEMENT)
    return job


def larch_hall() -> Writer:
    """A large floor read by random sample: 40 of 160 bays."""
    job = begin(
        "larch-hall-floor",
        datetime(2026, 2, 2, 13, 30, tzinfo=UTC),
        "Larch Hall, floor over the undercroft",
        site="Invented site, Larch Hall",
        contractor="Demo crew 8",
        tz="America/Denver",
        climate_zone="5B",
        project_no="LH-160",
    )
    a = foam(job, CLOSED)
    # Drawn once with random.Random(160).sample(range(1, 161), 40), and written down so that the draw is seen.
    drawn = sorted(
        {3, 6, 8, 13, 17, 20, 22, 29, 31, 36, 40, 41, 47, 50, 55, 58, 61, 66, 69, 72}
        | {77, 79, 84, 88, 90, 97, 101, 104, 109, 113, 118, 120, 126, 129, 133, 138, 144, 149, 153, 158}
    )
    bays = Bays(40, 22.5 * INCH, 10 * FOOT, 3)
    floor = surface(
        job,
        "Floor",
        "floor",
        a,
        160,
        chosen="random",
        seed="160",
        spec={"depth_mm": 3 * INCH, "basis": "minimum", "bays_share_min": 0.25, "under_area_share_max": 0.05},
        vapour={"rule": "depth", "depth_mm": 2.5 * INCH, "by_sample": True},
        numbered_from="the loading door",
        max_depth_mm=9.25 * INCH,
        max_depth_reason="face of the joists",
    )
    keys = lay_out(job, floor, bays, [str(label) for label in drawn])
    job.device = job.inspector
    read_all(job, keys, bays, Foam(3.47 * INCH, 44, drift_mm=4.0, crown_mm=6.0, reach_mm=12.0, hand_mm=9.0))
    job.write("visit", asked="a sample of 40 bays drawn at random", not_inspected="the 120 bays that were not drawn")
    return job


def alder_court() -> Writer:
    """Twelve identical units as places, one short, one not fully read."""
    job = begin(
        "alder-court-units",
        datetime(2026, 6, 8, 13, 0, tzinfo=UTC),
        "Alder Court, party walls of 12 units",
        site="Invented site, Alder Court",
        contractor="Demo crew 1",
        tz="America/New_York",
        climate_zone="4A",
        permit_no="DEMO-902",
        project_no="AC-12",
    )
    a = foam(job, {**CLOSED, "max_pass_mm": 1.5 * INCH})
    bays = Bays(8, 14.5 * INCH, 9 * FOOT, 3)
    walls: list[tuple[int, list[str]]] = []
    for unit in range(101, 113):
        place = job.new_key(f"unit {unit}")
        job.write("place", key=place, name=f"Unit {unit}", order=unit)
        wall = surface(
            job,
            f"Unit {unit} exterior wall",
            "wall",
            a,
            8,
            place=place,
            spec={"depth_mm": 3 * INCH, "basis": "minimum", "rsi": 3.2},
            vapour={"rule": "depth", "depth_mm": 3 * INCH},
            max_depth_mm=3.5 * INCH,
            max_depth_reason="face of the studs",
        )
        walls.append((unit, lay_out(job, wall, bays)))
    job.device = job.inspector
    for unit, keys in walls:
        mean = 3.02 * INCH if unit == 107 else 3.3 * INCH
        sprayed = Foam(mean, unit, drift_mm=2.0, crown_mm=3.0, reach_mm=3.0, hand_mm=4.2)
        read_all(job, keys, bays, sprayed, skip=(5, 6, 7) if unit == 111 else ())
    job.write("visit", asked="every bay of every unit", not_inspected="three bays of unit 111 behind stacked drywall")
    return job


def workbench_garage() -> Writer:
    """An applicator's self-check and nothing else."""
    job = begin(
        "workbench-garage",
        datetime(2026, 7, 1, 15, 0, tzinfo=UTC),
        "Workbench garage, ceiling",
        site="Invented site, back lane",
        contractor="Demo crew 2",
        climate_zone="3A",
        tz="UTC",
    )
    b = foam(job, OPEN)
    bays = Bays(9, 22.5 * INCH, 11 * FOOT, 3)
    ceiling = surface(
        job,
        "Ceiling slope",
        "sloped-roof",
        b,
        9,
        spec={"depth_mm": 7 * INCH, "basis": "average-with-floor", "floor_mm": 6 * INCH},
        vapour={"rule": "none", "reason": "zone 3A, unvented, ventilated garage below"},
        probe={"kind": "pin probe", "direction": "plumb", "pitch_deg": 18.0},
    )
    keys = lay_out(job, ceiling, bays)
    job.device = job.crew
    sprayed = Foam(7.9 * INCH, 52, drift_mm=6.0, crown_mm=12.0, reach_mm=24.0, hand_mm=8.0)
    read_all(job, keys, bays, sprayed, purpose="self-check")
    return job


def quarry_lane() -> Writer:
    """Laid out, and nothing read yet."""
    job = begin(
        "quarry-lane-before",
        datetime(2026, 7, 6, 15, 0, tzinfo=UTC),
        "Quarry Lane addition",
        site="Invented site, Quarry Lane",
        climate_zone="5A",
        tz="America/New_York",
    )
    a = foam(job, CLOSED)
    wall = surface(
        job,
        "East wall",
        "wall",
        a,
        6,
        spec={"depth_mm": 3 * INCH},
        vapour={"rule": "depth", "depth_mm": 3 * INCH},
    )
    lay_out(job, wall, Bays(6, 14.5 * INCH, 8 * FOOT, 3))
    return job


JOBS: tuple[Callable[[], Writer], ...] = (
    tamarack_yard,
    hollow_road,
    riviere_basement,
    larch_hall,
    alder_court,
    workbench_garage,
    quarry_lane,
)


def main() -> None:
    """Write them all."""
    for make in JOBS:
        job = make()
        job.save(HERE)
        print(f"{job.name}: {len(job.records)} records, {len(job.photos)} photos")


if __name__ == "__main__":
    main()
