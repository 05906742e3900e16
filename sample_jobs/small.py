"""Small jobs: an applicator's self-check, and a job before its first reading."""

from datetime import UTC, datetime

from sample_jobs.depths import Foam
from sample_jobs.layout import CLOSED, OPEN, Bays, begin, foam, lay_out, read_all, surface
from sample_jobs.writer import FOOT, INCH, Writer


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
