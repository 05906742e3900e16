"""Walls in open cell, where the vapor retarder is a sheet of its own."""

from datetime import UTC, datetime

from sample_jobs import pictures
from sample_jobs.depths import Foam
from sample_jobs.layout import OPEN, Bays, begin, foam, lay_out, surface
from sample_jobs.writer import FOOT, INCH, Writer, eighths


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
        spec={"depth_mm": 5.25 * INCH, "basis": "average", "rsi": 3.35, "under_area_share_max": 0.25},
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
    windows = (4, 5, 9)
    for number in windows:
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
                    text="drain stack" if reason == "pipe-or-box" else "shelving in the way",
                )
            else:
                # Trimmed flush: nothing stands proud of the studs. In the bays with windows the gap below their face is read.
                depth = min(sprayed.depth_mm(number, 14, across, down), face)
                if number in windows:
                    exact, _ = eighths(depth)
                    gap = eighths(face - exact)[1]
                    job.reading(key, row, col, depth, measured="face-gap", entered=gap)
                else:
                    job.reading(key, row, col, depth)
    void = job.write(
        "deficiency", bay=keys[2], sort="void", severity="repair", text="Hollow behind the drain stack, a hand wide."
    )
    job.photo(
        pictures.void_behind_pipe("hollow behind the drain stack", 15),
        bay=keys[2],
        about=void,
        shows="before",
        caption="Hollow behind the drain stack, bay 3",
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
