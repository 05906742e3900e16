"""What the sample jobs share: foams, bays in a grid, and the readings of a surface."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from sample_jobs.depths import Foam
from sample_jobs.writer import INCH, Writer

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
    job: Writer,
    keys: list[str],
    bays: Bays,
    sprayed: Foam,
    skip: Iterable[int] = (),
    stands: Sequence[int] | None = None,
    **more: Any,
) -> dict[tuple[int, int, int], tuple[str, float]]:
    """Read every point of every bay; returns the record and the depth at each (bay, row, col).

    `stands` tells where along the surface each bay stands (0, 1, ...), where only some of its bays are laid out.
    """
    left_out = set(skip)
    where = stands or range(len(keys))
    found = {}
    for number, key in enumerate(keys):
        if number in left_out:
            continue
        job.device.at = job.device.at.replace(microsecond=(number * 137 % 1000) * 1000)
        for row, col, across, down in bays.places():
            depth = sprayed.depth_mm(where[number], where[-1] + 1, across, down)
            found[number, row, col] = (job.reading(key, row, col, depth, **more), depth)
    return found
