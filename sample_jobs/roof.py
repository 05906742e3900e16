"""A roof that was thin at its ridge: everything a job can hold, in one."""

from datetime import UTC, datetime, timedelta

from sample_jobs import pictures
from sample_jobs.depths import Foam
from sample_jobs.layout import CLOSED, STATEMENT, Bays, begin, foam, lay_out, read_all, surface
from sample_jobs.writer import FOOT, INCH, Writer, eighths, instant


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
    job.photo(
        pictures.substrate("the deck before spraying, dry and swept", 12),
        surface=slope,
        shows="substrate",
        caption="Plywood deck before spraying",
    )
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

    # A day after spraying and more: the inspector keeps out for the re-entry time of the sheet.
    job.inspector.at = job.start + timedelta(hours=30)
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
        pictures.probe(eighths(read[lowest, 0, 0][1]), "probe at the ridge of the thinnest bay", 5),
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
            foam_age_h=26,
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

    _second_round(job, slope, a, slope_keys, slope_bays, read, thin, deficiency)
    job.sign("inspector", "Demo inspector A", STATEMENT, [rim], credential="Demo credential 7")
    job.crew.at = job.inspector.at
    job.device = job.crew
    job.sign("applicator", "Demo crew 2, lead", "I sprayed what is described here.")
    return job


def _second_round(
    job: Writer,
    slope: str,
    foam_key: str,
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
    began = job.device.at
    job.device.at += timedelta(minutes=50)
    job.write(
        "spray",
        surfaces=[slope],
        foam=foam_key,
        started=instant(began),
        finished=instant(job.device.at),
        lot_a="A-2604-17",
        lot_b="B-2604-09",
        drum_c=23.0,
        hose_c=52.0,
        heater_a_c=54.0,
        heater_b_c=54.0,
        pressure_a_kpa=8300.0,
        pressure_b_kpa=8300.0,
        passes=1,
        note="touch-up at the ridge",
    )
    repair = job.write("repair", deficiency=deficiency, text="Foamed the gap from both sides of the pipe.")
    job.photo(
        pictures.gap_at_pipe("the same place, filled", mended=True, seed=8),
        bay=keys[18],
        about=deficiency,
        shows="after",
        caption="Gap filled",
    )
    job.inspector.at = job.crew.at + timedelta(hours=26)
    job.device = job.inspector
    lowest, mended = min(thin, key=lambda number: read[number, 0, 0][1]), thin[0]
    for number in thin[:-1]:
        for row, col, _, _ in bays.places():
            before = read[number, row, col][1]
            added = 0.62 * INCH if row == 0 else 0.04 * INCH
            if row == 0 and number == lowest:
                added = 0.3 * INCH
            again = job.reading(keys[number], row, col, before + added, round=2)
            if row == 0 and number == mended:
                job.photo(
                    pictures.probe(eighths(before + added), "the ridge of a touched-up bay, read again", 6),
                    bay=keys[number],
                    row=row,
                    col=col,
                    about=again,
                    shows="after",
                    caption="Ridge after touch-up, read again",
                )
    job.write("acceptance", repair=repair, role="inspector", text="Seen, filled.")
    job.photo(
        pictures.slope("the slope after touch-up", thin_at_ridge=False, seed=3),
        surface=slope,
        shows="after",
        caption="North slope after touch-up",
    )
