"""The checks of a surface, in their order. To add one: write a function here and name it in `CHECKS`."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Final

from fieldapp.reckoning.inputs import CountedSurface
from fieldapp.reckoning.limits import at_least, at_most, depth_meets, depth_over
from fieldapp.reckoning.results import (
    BayResult,
    Check,
    DensityFigures,
    DepthFigures,
    ResistanceFigures,
    Result,
    Sampling,
    UnderSpray,
)
from fieldapp.reckoning.sampling import short_bays_at_most
from fieldapp.reckoning.vapour import SEPARATE_RETARDER_NG, sheet_must_be_inside
from fieldapp.reckoning.wording import SHORT_WORDS, Wording, bay_list, count

NOTHING_READ: Final = "nothing was read"
NO_BASIS: Final = "the contract's basis is not stated"


@dataclass(frozen=True, slots=True)
class Seen:
    """Everything that the checks of a surface look at."""

    surface: CountedSurface
    climate_zone: str | None
    bays: tuple[BayResult, ...]
    bays_total: int
    points_read: int
    read_share: float
    depth_mm: DepthFigures
    rsi: ResistanceFigures
    under_spray: UnderSpray
    density: DensityFigures
    max_depth_mm: float | None
    sampling: Sampling
    unproven_because: str | None

    @property
    def bays_read(self) -> int:
        """Bays that were read."""
        return sum(bay.is_read for bay in self.bays)

    @property
    def anything_read(self) -> bool:
        """True where a depth was read anywhere, between the points too."""
        return self.depth_mm.min is not None

    def named(self, bays: Iterable[BayResult]) -> str:
        """Bays by name, in order."""
        return bay_list([bay.label for bay in bays], [bay.label for bay in self.bays])


def of_surface(seen: Seen, words: Wording) -> tuple[Check, ...]:
    """All checks that the surface is asked, in order."""
    found = [check for make in CHECKS if (check := make(seen, words)) is not None]
    if seen.unproven_because is None:
        return tuple(found)
    return tuple(Check(check.id, "unproven", "unproven", check.asked, seen.unproven_because) for check in found)


def _check(check_id: str, result: Result, asked: str, found: str, word: str | None = None) -> Check:
    if result == "short":
        return Check(check_id, result, word or SHORT_WORDS.get(check_id, "short"), asked, found)
    return Check(check_id, result, result, asked, found)


def _held(meets: bool) -> Result:
    return "meets" if meets else "short"


def coverage(seen: Seen, words: Wording) -> Check:
    """Every laid-out bay is read, and enough of all bays are."""
    share_min = seen.surface.spec.bays_share_min
    read, total = seen.bays_read, seen.bays_total
    unread = [bay for bay in seen.bays if not bay.is_read]
    meets = bool(seen.bays) and not unread and at_least(read / total, share_min)
    asked = f"all of {count(total, 'bay')} read"
    if share_min < 1.0:
        asked = f"{words.percent(share_min)} of {count(total, 'bay')} read, and every bay laid out"
    found = f"{read} of {count(total, 'bay')} read"
    if unread and read:
        found += f"; not read: {seen.named(unread)}"
    if total > len(seen.bays):
        found += f"; {total - len(seen.bays)} not laid out"
    if seen.surface.bays_total_stated < len(seen.bays):
        found += f"; {seen.surface.bays_total_stated} were said to be there, {len(seen.bays)} are laid out"
    return _check("coverage", "meets" if meets else "unproven", asked, found)


def mean_depth(seen: Seen, words: Wording) -> Check | None:
    """The mean depth, where the basis asks one."""
    spec, mean = seen.surface.spec, seen.depth_mm.mean
    if spec.basis == "minimum":
        return None
    asked = f"mean {words.depth(spec.depth_mm)}"
    if spec.basis is None:
        asked = f"{words.depth(spec.depth_mm)}; {NO_BASIS}"
    if mean is None:
        return _check("mean-depth", "unproven", asked, NOTHING_READ)
    found = f"mean {words.depth_held(mean, spec.depth_mm)}"
    if spec.basis is None:
        return _check("mean-depth", "unproven", asked, found)
    return _check("mean-depth", _held(depth_meets(mean, spec.depth_mm)), asked, found)


def lowest_depth(seen: Seen, words: Wording) -> Check | None:
    """Every single reading and low spot, where the basis asks something of each."""
    spec, lowest = seen.surface.spec, seen.depth_mm.min
    if spec.basis == "average":
        return None
    limit = spec.single_point_mm
    asked = f"nowhere under {words.depth(limit)}"
    if spec.basis is None:
        asked = f"{words.depth(limit)}; {NO_BASIS}"
    if lowest is None:
        return _check("lowest-depth", "unproven", asked, NOTHING_READ)
    where = next(bay for bay in seen.bays if bay.min_mm == lowest)
    low_spot = ", a low spot" if where.low_spot_mm == lowest else ""
    found = f"lowest {words.depth_held(lowest, limit)} (bay {where.label}{low_spot})"
    if spec.basis is None:
        return _check("lowest-depth", "unproven", asked, found)
    short = [bay for bay in seen.bays if bay.lowest_depth == "short"]
    if short:
        found += f"; short in {seen.named(short)}"
    return _check("lowest-depth", _held(not short), asked, found)


def under_spray(seen: Seen, words: Wording) -> Check | None:
    """The share of the area under the specified depth, where the contract limits it."""
    limit, share = seen.surface.spec.under_area_share_max, seen.under_spray.area_share
    if limit is None:
        return None
    depth = words.depth(seen.surface.spec.depth_mm)
    asked = f"at most {words.percent(limit)} of the area under {depth}"
    if share is None:
        return _check("under-spray", "unproven", asked, NOTHING_READ)
    found = f"{words.percent_held(share, limit)} of the {words.percent(seen.read_share)} read is under {depth}"
    return _check("under-spray", _held(at_most(share, limit)), asked, found)


def delivered_r(seen: Seen, words: Wording) -> Check | None:
    """The resistance asked, held against delivered R (or nominal, where the contract says so)."""
    spec = seen.surface.spec
    if spec.rsi is None:
        return None
    value = seen.rsi.nominal if spec.r_basis == "nominal" else seen.rsi.delivered
    asked = f"{words.r(spec.rsi)} {spec.r_basis}"
    if value is None:
        return _check("delivered-r", "unproven", asked, NOTHING_READ)
    text = words.r_held(value, spec.rsi)
    found = f"{text} at the mean depth" if spec.r_basis == "nominal" else f"at most {text} by these readings"
    if seen.rsi.beyond_tested:
        found += "; some depths lie outside the foam's tested table"
    return _check("delivered-r", _held(at_least(value, spec.rsi)), asked, found)


def vapour(seen: Seen, words: Wording) -> Check:
    """The vapour rule, whichever of the four it is."""
    rule = seen.surface.vapour
    if rule.rule == "depth":
        asked = f"{words.depth(rule.depth_mm or 0.0)} as {words.vapor} depth in every bay"
        if rule.measure == "bay-mean":
            asked = f"{words.depth(rule.depth_mm or 0.0)} as {words.vapor} depth, mean of every bay"
        return _vapour_by_bay(seen, words, asked)
    if rule.rule == "permeance":
        asked = f"at most {words.permeance(rule.perm_ng or 0.0)} in every bay"
        return _vapour_by_bay(seen, words, asked)
    if not seen.anything_read:
        return _check("vapour", "unproven", _other_rule(seen, words), NOTHING_READ)
    return _vapour_separate(seen, words) if rule.rule == "separate" else _vapour_none(seen, words)


def _other_rule(seen: Seen, words: Wording) -> str:
    rule = seen.surface.vapour
    if rule.rule == "none":
        return f"no {words.vapor} rule: {rule.reason}"
    return f"a separate {words.vapor} retarder of at most {words.permeance(SEPARATE_RETARDER_NG)}"


def _vapour_by_bay(seen: Seen, words: Wording, asked: str) -> Check:
    foam = seen.surface.foam
    if not seen.anything_read or foam is None:
        return _check("vapour", "unproven", asked, NOTHING_READ)
    short = [bay for bay in seen.bays if bay.vapour == "short"]
    meeting = sum(bay.vapour == "meets" for bay in seen.bays)
    total = seen.bays_total
    if short:
        if seen.surface.vapour.rule == "depth" and not foam.is_closed:
            return _check("vapour", "short", asked, f"open-cell foam retards no {words.vapor} at any depth")
        return _check("vapour", "short", asked, f"not reached in {seen.named(short)}")
    if seen.surface.vapour.rule == "permeance" and foam.permeability_ng_m is None:
        return _check("vapour", "unproven", asked, "the foam's permeability is not given")
    if meeting == total:
        return _check("vapour", "meets", asked, f"reached in all of {count(total, 'bay')}")
    if seen.surface.vapour.by_sample and seen.bays_read and seen.surface.chosen == "random":
        most = short_bays_at_most(total, seen.bays_read, 0)
        return _check("vapour", "meets", asked, f"by sample: up to {most} of {total} may be short")
    found = f"reached in {meeting} of {count(total, 'bay')}; {total - meeting} not read"
    if seen.surface.vapour.by_sample:
        found += ", and those read were not picked at random"
    return _check("vapour", "unproven", asked, found)


def _vapour_separate(seen: Seen, words: Wording) -> Check:
    rule, zone = seen.surface.vapour, seen.climate_zone
    asked = _other_rule(seen, words)
    perm, side = rule.retarder_perm_ng or 0.0, rule.retarder_side
    if zone is not None and sheet_must_be_inside(zone):
        asked += f", inside (zone {zone})"
    found = f"{rule.retarder_name}, {words.permeance_held(perm, SEPARATE_RETARDER_NG)}, {side}"
    tight = at_most(perm, SEPARATE_RETARDER_NG)
    if tight and side != "inside" and zone is None:
        return _check("vapour", "unproven", asked, f"{found}; the climate zone is not given")
    meets = tight and (side == "inside" or zone is None or not sheet_must_be_inside(zone))
    return _check("vapour", _held(meets), asked, found, word="against")


def _vapour_none(seen: Seen, words: Wording) -> Check:
    rule, zone, foam = seen.surface.vapour, seen.climate_zone, seen.surface.foam
    asked = _other_rule(seen, words)
    if foam is not None and not foam.is_closed and not rule.accepted_by:
        if zone is None:
            return _check("vapour", "unproven", asked, "open cell, and the climate zone is not given")
        if sheet_must_be_inside(zone):
            found = f"open cell in zone {zone}: the code official's word is needed"
            return _check("vapour", "unproven", asked, found)
    accepted = f", accepted by {rule.accepted_by}" if rule.accepted_by else ""
    return _check("vapour", "meets", asked, f"nothing is asked{accepted}")


def density(seen: Seen, words: Wording) -> Check | None:
    """Enough cores, none of them light or heavy, or so near a limit that nobody can say."""
    spec, found = seen.surface.spec, seen.density
    if not spec.cores_min and not found.cores:
        return None
    foam = seen.surface.foam
    low = foam.density_min_kg_m3 if foam else None
    high = foam.density_max_kg_m3 if foam else None
    limits = " to ".join(words.density(limit) for limit in (low, high) if limit is not None)
    if low is None or high is None:
        limits = f"{'at least' if high is None else 'at most'} {limits}" if limits else "no limits named for the foam"
    asked = f"{count(spec.cores_min, 'core')}, {limits}" if spec.cores_min else limits
    if not found.cores:
        return _check("density", "unproven", asked, "no core weighed")
    each = found.each
    text = f"{count(found.cores, 'core')}, " + listed_densities(seen, words)
    off = [word for word in ("light", "heavy") if any(core.word == word for core in each)]
    if off:
        return _check("density", "short", asked, text, word=" and ".join(off))
    skinned = sum(core.word == "with skin" for core in each)
    if skinned:
        text += f"; {skinned} with skin, not held against these limits"
    held = found.cores - skinned
    enough = held >= max(spec.cores_min, 1)
    if any(core.word == "unproven" for core in each):
        return _check("density", "unproven", asked, f"{text}; a limit lies within the plus-minus")
    return _check("density", "meets" if enough else "unproven", asked, text)


def listed_densities(seen: Seen, words: Wording) -> str:
    """Lowest to highest density of the cores."""
    foam, found = seen.surface.foam, seen.density
    low = foam.density_min_kg_m3 if foam else None
    high = foam.density_max_kg_m3 if foam else None
    assert found.min_kg_m3 is not None
    assert found.max_kg_m3 is not None
    texts = [words.density_held(value, low, high) for value in (found.min_kg_m3, found.max_kg_m3)]
    return texts[0] if texts[0] == texts[1] else " to ".join(texts)


def over_depth(seen: Seen, words: Wording) -> Check | None:
    """No depth above the foam's tested limit, the framing's face or a code limit."""
    limit, high = seen.max_depth_mm, seen.depth_mm.max
    if limit is None:
        return None
    asked = f"nowhere over {words.depth(limit)}"
    if high is None:
        return _check("over-depth", "unproven", asked, NOTHING_READ)
    deep = [bay for bay in seen.bays if bay.max_mm is not None and depth_over(bay.max_mm, limit)]
    found = f"highest {words.depth_held_below(high, limit)}"
    if deep:
        found += f"; too deep in {seen.named(deep)}"
    return _check("over-depth", _held(not deep), asked, found)


def deficiencies(seen: Seen, words: Wording) -> Check | None:
    """Everything noted as stop or repair is repaired, and an inspector has accepted it."""
    noted = seen.surface.deficiencies
    if not noted.open and not noted.repaired and not noted.accepted:
        return None
    states = ((noted.open, "open"), (noted.repaired, "repaired, not accepted"), (noted.accepted, "accepted"))
    found = ", ".join(f"{number} {state}" for number, state in states if number)
    result: Result = "short" if noted.open else "unproven" if noted.repaired else "meets"
    return _check("deficiencies", result, "each repaired and accepted", found)


#: In the order in which they are asked and reported.
CHECKS: Final[tuple[Callable[[Seen, Wording], Check | None], ...]] = (
    coverage,
    mean_depth,
    lowest_depth,
    under_spray,
    delivered_r,
    vapour,
    density,
    over_depth,
    deficiencies,
)
