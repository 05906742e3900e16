"""`python -m sample_jobs.make`: writes every sample job anew, the same bytes each time. All of it is invented."""

from collections.abc import Callable
from pathlib import Path

from sample_jobs.basement import riviere_basement
from sample_jobs.many import alder_court, larch_hall
from sample_jobs.roof import tamarack_yard
from sample_jobs.small import quarry_lane, workbench_garage
from sample_jobs.walls import hollow_road
from sample_jobs.writer import Writer

HERE = Path(__file__).resolve().parent


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
