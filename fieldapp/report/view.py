"""A job seen for its report: each surface with its description, its counted readings and its result side by side."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import UTC, datetime, tzinfo
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

from fieldapp.reckoning.bays import passes, point_limit_mm
from fieldapp.reckoning.inputs import CountedBay, CountedSurface, Foam
from fieldapp.reckoning.limits import depth_meets, depth_over
from fieldapp.reckoning.results import BayResult, JobResult, SurfaceResult
from fieldapp.reckoning.surface import greatest_depth_mm
from fieldapp.reckoning.wording import Wording, bay_list
from fieldapp.records.counting import BayCount, Counted
from fieldapp.records.job import Job, Thing
from fieldapp.records.record import Record, Refusal

MONTHS = [
    "January",
    "February",
    "March",
    "April",
    "May",
    "June",
    "July",
    "August",
    "September",
    "October",
    "November",
    "December",
]


@dataclass(frozen=True, slots=True)
class ToAdd:
    """Foam to add now. What was touched up and not read again is left out: it is read first, nobody knows what it lacks.

    `bays` is empty where only a mean is lacking; volumes in m3, depth in mm.
    """

    bays: tuple[BayResult, ...]
    missing_m3: float
    order_m3: float
    deepest_mm: float
    passes: int | None


@dataclass(frozen=True, slots=True)
class SurfaceView:
    """One surface from all sides."""

    thing: Thing
    counted: CountedSurface
    result: SurfaceResult
    counts: Mapping[str, BayCount]
    words: Wording

    @property
    def name(self) -> str:
        """Its name."""
        return self.result.name

    @property
    def foam(self) -> Foam | None:
        """Its foam, where it is described."""
        return self.counted.foam

    @property
    def point_limit_mm(self) -> float:
        """The depth under which a point is short: the basis's for single points, and what the vapour rule asks. [mm]"""
        return max(self.counted.spec.single_point_mm, self.vapour_depth_mm or 0.0)

    @property
    def vapour_depth_mm(self) -> float | None:
        """The depth that the vapour rule asks of this foam, by depth or by permeance; None where it asks none. [mm]"""
        rule, foam = self.counted.vapour, self.foam
        if foam is None:
            return None
        if rule.rule == "depth" and foam.is_closed:
            return rule.depth_mm
        if rule.rule == "permeance" and foam.permeability_ng_m and rule.perm_ng:
            return foam.permeability_ng_m * 1000.0 / rule.perm_ng
        return None

    @property
    def max_depth_mm(self) -> float | None:
        """The greatest depth allowed. [mm]"""
        return greatest_depth_mm(self.counted)

    @property
    def touch_up_limit_mm(self) -> float:
        """The depth to which a touch-up brings a point. [mm]"""
        return point_limit_mm(self.foam, self.counted.spec, self.counted.vapour)

    @property
    def waiting(self) -> list[BayResult]:
        """Bays touched up and not read again."""
        return [bay for bay in self.result.bays if bay.waiting_for_reading]

    def to_add(self) -> ToAdd:
        """What to add now."""
        whole = self.result.touch_up
        lacking = [bay for bay in self.result.bays if bay.touch_up.volume_m3]
        bays = tuple(bay for bay in lacking if not bay.waiting_for_reading)
        if len(bays) == len(lacking):
            return ToAdd(
                bays, whole.volume_m3 or 0.0, whole.order_m3 or 0.0, whole.deepest_missing_mm or 0.0, whole.passes
            )
        deepest = max((bay.touch_up.deepest_missing_mm or 0.0 for bay in bays), default=0.0)
        return ToAdd(
            bays=bays,
            missing_m3=sum(bay.touch_up.volume_m3 or 0.0 for bay in bays),
            order_m3=sum(bay.touch_up.order_m3 or 0.0 for bay in bays),
            deepest_mm=deepest,
            passes=passes(deepest, self.foam.max_pass_mm if self.foam else None),
        )

    def is_under(self, depth_mm: float) -> bool:
        """True where a depth is under the specified depth or the vapour depth: hatched in the charts."""
        asked = max(self.counted.spec.depth_mm, self.vapour_depth_mm or 0.0)
        return not depth_meets(depth_mm, asked)

    def is_too_deep(self, depth_mm: float) -> bool:
        """True where a depth passes the greatest one allowed."""
        return self.max_depth_mm is not None and depth_over(depth_mm, self.max_depth_mm)

    def pairs(self) -> list[tuple[CountedBay, BayResult]]:
        """Bays as counted with their results, in order."""
        return list(zip(self.counted.bays, self.result.bays, strict=True))

    def named(self, bays: list[BayResult]) -> str:
        """Bays by name; many in no order are only counted."""
        text = bay_list([bay.label for bay in bays], [bay.label for bay in self.result.bays])
        return text if len(text) <= 72 else f"{len(bays)} bays"

    def short(self, part: str) -> list[BayResult]:
        """Bays that are short in `lowest_depth` or `vapour`, or too deep (`over`)."""
        if part == "over":
            return [bay for bay in self.result.bays if bay.max_mm is not None and self.is_too_deep(bay.max_mm)]
        return [bay for bay in self.result.bays if getattr(bay, part) == "short"]

    def unread(self) -> list[BayResult]:
        """Bays laid out and not read."""
        return [bay for bay in self.result.bays if not bay.is_read]

    def is_short(self, check_id: str) -> bool:
        """True where that check is short."""
        check = self.result.check(check_id)
        return check is not None and check.result == "short"


@dataclass(frozen=True, slots=True)
class JobView:
    """A job from all sides."""

    job: Job
    counted: Counted
    result: JobResult
    refused: tuple[Refusal, ...]
    digest: str

    @property
    def words(self) -> Wording:
        """How quantities are written."""
        return Wording(self.job.units)

    @property
    def surfaces(self) -> list[SurfaceView]:
        """All surfaces in order."""
        return [
            SurfaceView(thing, counted, result, self.counted.bays, self.words)
            for thing, counted, result in zip(
                self.job.surfaces, self.counted.reckoned.surfaces, self.result.surfaces, strict=True
            )
        ]

    @property
    def is_self_check(self) -> bool:
        """True where the job rests on the applicator's own readings."""
        return self.result.purpose == "self-check"

    @property
    def dated(self) -> str:
        """Time of the latest record. (RFC 3339, UTC)"""
        return self.job.records[-1].at

    def text(self, name: str) -> str:
        """A text of the job's description, or nothing."""
        return str(self.job.about.body.get(name) or "")

    def zone(self) -> tzinfo:
        """The site's time zone; UTC where none is given or the name is unknown."""
        try:
            return ZoneInfo(self.text("tz") or "UTC")
        except (ZoneInfoNotFoundError, ValueError, OSError):
            return UTC

    def local(self, at: str) -> datetime:
        """A record's time at the site."""
        return datetime.fromisoformat(at[:-1]).replace(tzinfo=UTC).astimezone(self.zone())

    def date(self, at: str) -> str:
        """'4 May 2026'."""
        local = self.local(at)
        return f"{local.day} {MONTHS[local.month - 1]} {local.year}"

    def clock(self, at: str) -> str:
        """'14:03', or '14:03 UTC' where the site's zone is not known."""
        local = self.local(at)
        utc = " UTC" if self.zone() is UTC or self.text("tz") in ("UTC", "Etc/UTC") else ""
        return f"{local.hour:02d}:{local.minute:02d}{utc}"

    def span(self, records: list[Record]) -> str:
        """'4 May 2026, 14:03 to 15:20', or two dates where they differ."""
        if not records:
            return "nothing was read"
        first, last = min(r.at for r in records), max(r.at for r in records)
        if self.date(first) == self.date(last):
            return f"{self.date(first)}, {self.clock(first)} to {self.clock(last)}"
        return f"{self.date(first)} to {self.date(last)}"
