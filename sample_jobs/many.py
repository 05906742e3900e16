"""Jobs too large to read as one: a floor by random sample, and units that are reported one by one."""

from datetime import UTC, datetime
from random import Random

from sample_jobs.depths import Foam
from sample_jobs.layout import CLOSED, Bays, begin, foam, lay_out, read_all, surface
from sample_jobs.writer import FOOT, INCH, Writer

#: Of the draw; it stands in the surface, so that anybody can draw the same bays again.
SEED = 160


def larch_hall() -> Writer:
    """A large floor read by random sample: 40 of 160 bays, drawn here as the surface says; depths go by the bay's place."""
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
    drawn = sorted(Random(SEED).sample(range(1, 161), 40))
    bays = Bays(40, 22.5 * INCH, 10 * FOOT, 3)
    floor = surface(
        job,
        "Floor",
        "floor",
        a,
        160,
        chosen="random",
        seed=str(SEED),
        spec={"depth_mm": 3 * INCH, "basis": "minimum", "bays_share_min": 0.25, "under_area_share_max": 0.05},
        vapour={"rule": "depth", "depth_mm": 2.5 * INCH, "by_sample": True},
        numbered_from="the loading door",
        max_depth_mm=9.25 * INCH,
        max_depth_reason="face of the joists",
    )
    keys = lay_out(job, floor, bays, [str(label) for label in drawn])
    job.device = job.inspector
    sprayed = Foam(3.55 * INCH, 44, drift_mm=12.0, crown_mm=6.0, reach_mm=12.0, hand_mm=9.0)
    read_all(job, keys, bays, sprayed, stands=[label - 1 for label in drawn])
    job.write("visit", asked="a sample of 40 bays drawn at random", not_inspected="the 120 bays that were not drawn")
    return job


def alder_court() -> Writer:
    """Twelve identical units as places, one short, one not fully read."""
    job = begin(
        "alder-court-units",
        datetime(2026, 6, 8, 13, 0, tzinfo=UTC),
        "Alder Court, exterior walls of 12 units",
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
