"""Which reading counts: from a folded job to the job that is reckoned.

Purposes are counted apart. At a point the highest round with a reading counts, and within a round the lowest depth that was
not withdrawn, so reading a point again until it passes changes nothing.
"""

from collections import defaultdict
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from math import cos, radians
from typing import Final

from fieldapp.reckoning.inputs import (
    CountedBay,
    CountedJob,
    CountedSurface,
    Deficiencies,
    Layer,
    Place,
)
from fieldapp.reckoning.limits import depth_over
from fieldapp.records.described import (
    described_areas_m2,
    described_core,
    described_foam,
    described_framing,
    described_spec,
    described_vapour,
)
from fieldapp.records.job import Job, Thing
from fieldapp.records.kinds import bay_area_m2
from fieldapp.records.record import Record
from fieldapp.records.repairs import deficiency_histories

#: Readings of one point, purpose and round disagree when they differ by more than the larger of these. [mm], share
DISAGREE_MM: Final = 12.7
DISAGREE_SHARE: Final = 0.15


@dataclass(slots=True)
class PointRounds:
    """All readings of one point that stand, by the round with which they count."""

    rounds: dict[int, list[Record]] = field(default_factory=dict)

    @property
    def last_round(self) -> int:
        """The highest round with a reading; the one that counts."""
        return max(self.rounds)

    def depths_mm(self, number: int, factor: float = 1.0) -> list[float]:
        """Depths read in a round, as they count. [mm]"""
        found = self.rounds.get(number, ())
        return [record.body["depth_mm"] * factor for record in found if record.body.get("depth_mm") is not None]

    def blocked(self, number: int) -> str | None:
        """Why the point could not be read in a round; None where a depth was read, or nothing."""
        found = self.rounds.get(number, [])
        reasons = [record.body["blocked"] for record in found if record.body.get("blocked")]
        return reasons[-1] if reasons and not self.depths_mm(number) else None


@dataclass(slots=True)
class BayCount:
    """The readings and low spots of a bay for one purpose. `points` is by place in the grid, row by row.

    `unopened` are readings of a round that no touch-up opened; they count with the round before.
    """

    factor: float
    opened: frozenset[int]
    points: dict[int, PointRounds] = field(default_factory=dict)
    low_spots: dict[int, list[Record]] = field(default_factory=dict)
    unopened: list[Record] = field(default_factory=list)

    @property
    def last_round(self) -> int:
        """Highest round with any reading; 1 where there is none."""
        return max((point.last_round for point in self.points.values()), default=1)

    @property
    def waiting(self) -> bool:
        """True where a touch-up opened a round in which nothing was read yet."""
        return max(self.opened, default=1) > self.last_round

    def counting_low_spots(self) -> list[Record]:
        """Those of the highest round that has any."""
        return self.low_spots[max(self.low_spots)] if self.low_spots else []

    def low_spot_mm(self, record: Record) -> float:
        """Depth of a low spot as it counts. [mm]"""
        return float(record.body["depth_mm"]) * self.factor

    def depth_mm(self, point: int, number: int | None = None) -> float | None:
        """The depth that counts at a point, of the last round or of a given one: the lowest of that round. [mm]"""
        rounds = self.points.get(point)
        if rounds is None:
            return None
        return min(rounds.depths_mm(number or rounds.last_round, self.factor), default=None)

    def disagreeing(self, point: int) -> bool:
        """True where readings of the counting round differ by more than probing explains."""
        depths = self.points[point].depths_mm(self.points[point].last_round, self.factor)
        return len(depths) > 1 and depth_over(max(depths) - min(depths), max(DISAGREE_MM, DISAGREE_SHARE * max(depths)))

    def read_again(self, point: int) -> bool:
        """True where any round holds more than one depth."""
        rounds = self.points[point]
        return any(len(rounds.depths_mm(number)) > 1 for number in rounds.rounds)


@dataclass(frozen=True, slots=True)
class Counted:
    """A job as counted for its report: what is reckoned, and the readings behind each bay."""

    reckoned: CountedJob
    bays: Mapping[str, BayCount]


def report_purpose(job: Job) -> str:
    """'inspection', or 'self-check' where the whole job has no inspection reading but self-checks."""
    purposes = {record.body["purpose"] for kind in ("reading", "low-spot") for record in job.of(kind)}
    return "self-check" if purposes == {"self-check"} else "inspection"


def count(job: Job) -> Counted:
    """Count a job for the purpose that its report rests on."""
    purpose = report_purpose(job)
    counts = _bay_counts(job, purpose)
    other = _bay_counts(job, "self-check") if purpose == "inspection" else {}
    cores = _by_bay(job.of("core"))
    noted = _deficiencies(job)
    places = tuple(Place(place.key, place.name) for place in job.places)
    surfaces = tuple(
        _surface(job, surface, counts, cores, noted.get(surface.key, Deficiencies()), {p.key for p in places})
        for surface in job.surfaces
    )
    reckoned = CountedJob(
        key=job.key,
        name=job.name,
        units=job.units,
        purpose=purpose,
        surfaces=surfaces,
        places=places,
        climate_zone=job.about.body.get("climate_zone"),
        pair_differences_mm=tuple(_pair_differences_mm(counts, other)),
    )
    return Counted(reckoned, counts)


def plumb_factor(surface: Thing) -> float:
    """What a reading is multiplied by: the cosine of the pitch where the probe is held plumb, else 1."""
    probe = surface.body.get("probe") or {}
    return cos(radians(probe["pitch_deg"])) if probe.get("direction") == "plumb" else 1.0


def _by_bay(records: Iterable[Record]) -> dict[str, list[Record]]:
    found: dict[str, list[Record]] = defaultdict(list)
    for record in records:
        found[record.body["bay"]].append(record)
    return found


def _bay_counts(job: Job, purpose: str) -> dict[str, BayCount]:
    readings = _by_bay(record for record in job.of("reading") if record.body["purpose"] == purpose)
    low_spots = _by_bay(record for record in job.of("low-spot") if record.body["purpose"] == purpose)
    touch_ups = _by_bay(job.of("touch-up"))
    counts: dict[str, BayCount] = {}
    for surface in job.surfaces:
        factor = plumb_factor(surface)
        for bay in job.bays[surface.key]:
            opened = frozenset(int(record.body["round"]) for record in touch_ups.get(bay.key, ()))
            count_ = BayCount(factor, opened)
            cols = int(bay.body["cols"])
            for record in readings.get(bay.key, ()):
                place = int(record.body["row"]) * cols + int(record.body["col"])
                point = count_.points.setdefault(place, PointRounds())
                point.rounds.setdefault(_counts_with(record, count_), []).append(record)
            for record in low_spots.get(bay.key, ()):
                count_.low_spots.setdefault(_counts_with(record, count_), []).append(record)
            counts[bay.key] = count_
    return counts


def _counts_with(record: Record, bay: BayCount) -> int:
    """The round with which a reading counts: its own where a touch-up opened it, else the last one opened before."""
    written = int(record.body["round"])
    counts_with = max((number for number in bay.opened if number <= written), default=1)
    if counts_with != written:
        bay.unopened.append(record)
    return counts_with


def _pair_differences_mm(inspection: Mapping[str, BayCount], self_check: Mapping[str, BayCount]) -> list[float]:
    differences: list[float] = []
    for key, bay in inspection.items():
        other = self_check.get(key)
        if other is None:
            continue
        for place in sorted(bay.points.keys() & other.points.keys()):
            for number in sorted(bay.points[place].rounds.keys() & other.points[place].rounds.keys()):
                ours, theirs = bay.depth_mm(place, number), other.depth_mm(place, number)
                if ours is not None and theirs is not None:
                    differences.append(ours - theirs)
    return differences


def _deficiencies(job: Job) -> dict[str, Deficiencies]:
    """States of what is noted as stop or repair, by surface."""
    owner = {bay.key: key for key, bays in job.bays.items() for bay in bays}
    states: dict[str, list[str]] = defaultdict(list)
    for history in deficiency_histories(job):
        body = history.deficiency.body
        surface = body.get("surface") or owner.get(body.get("bay") or "")
        if surface is not None and body["severity"] != "note":
            states[surface].append(history.state)
    return {
        key: Deficiencies(found.count("open"), found.count("repaired"), found.count("accepted"))
        for key, found in states.items()
    }


def _surface(
    job: Job,
    surface: Thing,
    counts: Mapping[str, BayCount],
    cores: Mapping[str, list[Record]],
    noted: Deficiencies,
    places: set[str],
) -> CountedSurface:
    body = surface.body
    foam = job.foams.get(body["foam"])
    bays = job.bays[surface.key]
    place = body.get("place")
    return CountedSurface(
        key=surface.key,
        name=surface.name,
        assembly=body["assembly"],
        foam=None if foam is None else described_foam(foam),
        bays_total_stated=int(body["bays_total"]),
        spec=described_spec(body["spec"]),
        vapour=described_vapour(body["vapour"]),
        bays=tuple(_counted_bay(bay, counts[bay.key]) for bay in bays),
        place=place if place in places else None,
        chosen=body.get("chosen"),
        cores=tuple(described_core(record, bay) for bay in bays for record in cores.get(bay.key, ())),
        deficiencies=noted,
        max_depth_mm=body.get("max_depth_mm"),
        film_in_rsi=body.get("film_in_rsi"),
        film_out_rsi=body.get("film_out_rsi"),
        framing=described_framing(body.get("framing")),
        layers=tuple(
            Layer(layer.get("name") or "foam", layer.get("rsi"), layer.get("foam") is True)
            for layer in body.get("layers") or ()
        ),
    )


def _counted_bay(bay: Thing, found: BayCount) -> CountedBay:
    rows, cols = int(bay.body["rows"]), int(bay.body["cols"])
    blocked: dict[int, str] = {}
    for place, point in found.points.items():
        if (reason := point.blocked(point.last_round)) is not None:
            blocked[place] = reason
    return CountedBay(
        key=bay.key,
        label=bay.name,
        rows=rows,
        cols=cols,
        area_m2=bay_area_m2(bay.body),
        depths_mm=tuple(found.depth_mm(place) for place in range(rows * cols)),
        areas_m2=described_areas_m2(bay.body),
        blocked=blocked,
        low_spots_mm=tuple(found.low_spot_mm(record) for record in found.counting_low_spots()),
        round=found.last_round,
        waiting=found.waiting,
        disagreeing=sum(found.disagreeing(place) for place in found.points),
        read_again=sum(found.read_again(place) for place in found.points),
    )
