"""What a person would say on the telephone: what is short, where, how much, and what would mend it."""

from collections import defaultdict

from fieldapp.reckoning.results import BayResult, Result
from fieldapp.reckoning.wording import count, listed
from fieldapp.records.repairs import deficiency_histories
from fieldapp.report.model import Sentence
from fieldapp.report.terms import SORTS, ends, where_found
from fieldapp.report.view import JobView, SurfaceView

#: Of the points under depth, so many must lie in one row or at the edges before a sentence says where.
MOSTLY = 0.7
RESULTS: tuple[Result, ...] = ("meets", "short", "unproven")


def capital(text: str) -> str:
    """First letter large, the rest as it is."""
    return text[:1].upper() + text[1:]


def _is_are(number: int) -> str:
    return "is" if number == 1 else "are"


def of_read(view: SurfaceView) -> str:
    """'of all' or 'of the 60 % read': never a share without how much was read."""
    share = view.words.percent(view.result.read_share)
    return "of the area, all read" if share == "100 %" else f"of the {share} read"


def of_bays(view: SurfaceView) -> str:
    """'of its 28 bays', or 'of the 40 bays read (of 160)'."""
    read, total = view.result.bays_read, view.result.bays_total
    return f"of its {count(total, 'bay')}" if read == total else f"of the {count(read, 'bay')} read (of {total})"


def where_thin(view: SurfaceView) -> str:
    """', along the ridge' where most points under depth lie in one row or at the edges; else nothing."""
    rows: dict[str, int] = defaultdict(int)
    under = 0
    grid = {(bay.rows, bay.cols) for bay in view.counted.bays}
    for bay in view.counted.bays:
        for place, depth in enumerate(bay.depths_mm):
            if depth is None or not view.is_under(depth):
                continue
            under += 1
            row, col = divmod(place, bay.cols)
            rows["top" if row == 0 else "bottom" if row == bay.rows - 1 else "between"] += 1
            rows["edges"] += bay.cols > 2 and col in (0, bay.cols - 1)
    top, bottom = ends(view.counted.assembly)
    if under < 3:
        return ""
    if min((number for number, _ in grid), default=1) > 1:
        if rows["top"] >= MOSTLY * under:
            return f", mostly along the {top}"
        if rows["bottom"] >= MOSTLY * under:
            return f", mostly along the {bottom}"
    return ", mostly at the framing" if rows["edges"] >= MOSTLY * under else ""


def surface_clauses(view: SurfaceView) -> list[tuple[str, list[BayResult]]]:
    """What is short on a surface, clause by clause, each with the bays that it names."""
    words, spec, result = view.words, view.counted.spec, view.result
    found: list[tuple[str, list[BayResult]]] = []
    if low := view.short("lowest_depth"):
        worst = min(low, key=lambda bay: bay.min_mm if bay.min_mm is not None else 0.0)
        lowest = words.depth_held(worst.min_mm or 0.0, spec.single_point_mm)
        limit = words.depth(spec.single_point_mm)
        asked = "allowed anywhere" if spec.basis == "average-with-floor" else "specified"
        if result.bays_total == 1:
            found.append((f"it is {lowest} deep at its thinnest, under the {limit} {asked}", low))
        else:
            text = f"{len(low)} {of_bays(view)} {_is_are(len(low))} under the {limit} {asked}"
            found.append((f"{text}{where_thin(view)}, the lowest {lowest} (bay {worst.label})", low))
    if view.is_short("mean-depth") and result.depth_mm.mean is not None:
        mean = words.depth_held(result.depth_mm.mean, spec.depth_mm)
        found.append((f"its mean depth is {mean} where {words.depth(spec.depth_mm)} is specified", []))
    if view.is_short("vapour"):
        clause, bays = _vapour_clause(view)
        if low and bays == low and view.counted.vapour.depth_mm == spec.single_point_mm:
            before, named = found.pop()
            found.append((f"{before}; {words.depth(spec.single_point_mm)} is also its {words.vapor} depth", named))
        else:
            found.append((clause, bays))
    if view.is_short("under-spray") and result.under_spray.area_share is not None:
        share, most = result.under_spray.area_share, spec.under_area_share_max or 0.0
        text = f"{words.percent_held(share, most)} of the area read is under {words.depth(spec.depth_mm)}"
        found.append((f"{text}, where {words.percent(most)} is allowed", []))
    value = result.rsi.nominal if spec.r_basis == "nominal" else result.rsi.delivered
    if view.is_short("delivered-r") and value is not None and spec.rsi is not None:
        text = f"it delivers at most {words.r_held(value, spec.rsi)} where {words.r(spec.rsi)} is asked"
        found.append((text, []))
    if (check := result.check("density")) is not None and check.result == "short":
        off = [core.label for core in result.density.each if core.word in ("light", "heavy")]
        found.append((f"core {listed(off)} {_is_are(len(off))} {check.word}", []))
    if deep := view.short("over"):
        found.append((f"the foam is deeper than allowed in {view.named(deep)}", deep))
    open_ones = view.counted.deficiencies.open
    if open_ones:
        found.append((f"{count(open_ones, 'deficiency', 'deficiencies')} {_is_are(open_ones)} open", []))
    return found


def _vapour_clause(view: SurfaceView) -> tuple[str, list[BayResult]]:
    words, rule = view.words, view.counted.vapour
    short = view.short("vapour")
    if rule.rule == "separate":
        return f"the separate {words.vapor} retarder goes against the rule for it", []
    if rule.rule == "permeance":
        limit = words.permeance(rule.perm_ng or 0.0)
        return f"in {view.named(short)} more {words.vapor} passes than the {limit} specified", short
    if view.foam is not None and not view.foam.is_closed:
        return f"open-cell foam retards no {words.vapor} at any depth", []
    depth = words.depth(rule.depth_mm or 0.0)
    which = "mean depth" if rule.measure == "bay-mean" else "foam"
    return f"in {view.named(short)} the {which} does not reach the {depth} specified as {words.vapor} depth", short


def unproven_reasons(view: SurfaceView) -> list[str]:
    """Why a surface that is not short cannot be said to meet."""
    result = view.result
    if result.unproven_because:
        return [result.unproven_because]
    if not result.points_read:
        return ["nothing was read yet"]
    reasons: list[str] = []
    if unread := view.unread():
        reasons.append(f"{view.named(unread)} {'was' if len(unread) == 1 else 'were'} not read")
    missing = result.bays_total - result.bays_laid_out
    coverage = result.check("coverage")
    if missing and coverage is not None and coverage.result != "meets":
        reasons.append(f"{count(missing, 'bay')} {'was' if missing == 1 else 'were'} not laid out")
    if view.counted.spec.basis is None:
        reasons.append("the contract's basis for the depth is not stated")
    for check in result.checks:
        if check.result == "unproven" and check.id in ("density", "deficiencies"):
            reasons.append(check.found if check.id == "density" else f"deficiencies: {check.found}")
        if check.result == "unproven" and check.id == "vapour" and not unread and not missing:
            reasons.append(check.found)
    return reasons or [f"{check.id}: {check.found}" for check in result.checks if check.result == "unproven"]


def passes_text(view: SurfaceView, passes: int | None) -> str:
    """'in at least 2 passes', or that only the data sheet can say."""
    if passes is None:
        return "in passes as the data sheet allows (no greatest pass is entered)"
    return f"in at least {count(passes, 'pass', 'passes')}"


def surface_sentence(view: SurfaceView) -> Sentence:
    """One surface in a sentence or two."""
    if view.result.result == "meets":
        text = f"{view.name} meets everything asked, by these readings.{_low_spot_beside(view)}"
        return Sentence(text, result="meets")
    if view.result.result == "unproven":
        return Sentence(f"{view.name} is unproven: {'; '.join(unproven_reasons(view))}.", result="unproven")
    clauses = surface_clauses(view)
    text = f"{view.name} is short: {'; '.join(clause for clause, _ in clauses)}."
    if view.waiting:
        wait = "wait" if len(view.waiting) > 1 else "waits"
        text += f" {capital(view.named(view.waiting))}, touched up, {wait} to be read again."
    most = view.result.sampling.short_bays_at_most
    if most is not None and view.result.bays_read < view.result.bays_total:
        text += f" By this sample up to {most} of {view.result.bays_total} bays can be short."
    text += _low_spot_beside(view)
    if view.unread():
        text += f" Besides, {view.named(view.unread())} {'was' if len(view.unread()) == 1 else 'were'} not read."
    add = view.to_add()
    if add.missing_m3:
        text += f" About {view.words.foam(add.missing_m3)} more, {passes_text(view, add.passes)},"
        text += " would bring its depth to specification, if read again."
    return Sentence(text, frozenset(bay.key for _, bays in clauses for bay in bays), "short")


def _low_spot_beside(view: SurfaceView) -> str:
    """A low spot that an average does not ask about is told all the same: it lets heat and vapor through."""
    spots = [bay for bay in view.result.bays if bay.low_spot_mm is not None and view.is_under(bay.low_spot_mm)]
    if view.counted.spec.single_point_mm or not spots:
        return ""
    worst = min(spots, key=lambda bay: bay.low_spot_mm or 0.0)
    depth = view.words.depth(worst.low_spot_mm or 0.0)
    return f" The thinnest place found is {depth} (bay {worst.label}); an average does not ask about it."


def answer(view: JobView) -> tuple[Sentence, ...]:
    """The whole job as one would say it on the telephone: the short first, then the unproven, then what meets."""
    by_result: dict[Result, list[SurfaceView]] = {"short": [], "unproven": [], "meets": []}
    for surface in view.surfaces:
        by_result[surface.result.result].append(surface)
    if not view.surfaces:
        return (Sentence("No surface is laid out, so nothing is proven.", result="unproven"),)
    short = sorted(by_result["short"], key=lambda s: -(s.result.touch_up.volume_m3 or 0.0))
    told = _places(view) + [surface_sentence(surface) for surface in short[:3]]
    if short[3:]:
        names = listed([surface.name for surface in short[3:]])
        told.append(Sentence(f"{names} {_is_are(len(short) - 3)} short too; each is told below.", result="short"))
    if len(by_result["unproven"]) <= 3:
        told.extend(surface_sentence(surface) for surface in by_result["unproven"])
    else:
        names = listed([surface.name for surface in by_result["unproven"]])
        told.append(Sentence(f"Unproven are {names}; what is missing is told below.", result="unproven"))
    meeting = by_result["meets"]
    if len(meeting) > 3:
        others = "other " if len(meeting) < len(view.surfaces) else ""
        told.append(
            Sentence(
                f"The {others}{count(len(meeting), 'surface')} {'meet' if len(meeting) > 1 else 'meets'} everything "
                "asked, by these readings.",
                result="meets",
            )
        )
    elif meeting:
        names = listed([surface.name for surface in meeting])
        verb = "meets" if len(meeting) == 1 else "meet"
        told.append(Sentence(f"{names} {verb} everything asked, by these readings.", result="meets"))
    return tuple(told)


def _places(view: JobView) -> list[Sentence]:
    """How many places meet, where there are several."""
    places = [place.result for place in view.result.places]
    if len(places) < 2:
        return []
    words = {"meets": "meets" if places.count("meets") == 1 else "meet"}
    counts = [
        f"{places.count(result)} {words.get(result, f'{_is_are(places.count(result))} {result}')}"
        for result in RESULTS
        if places.count(result)
    ]
    return [Sentence(f"Of {len(places)} places {listed(counts)}.", result=view.result.result)]


def alarms(view: JobView) -> tuple[Sentence, ...]:
    """What stands above every result: stops, and foam on heat sources, that no inspector has accepted."""
    told: list[Sentence] = []
    for history in deficiency_histories(view.job):
        body = history.deficiency.body
        if history.state == "accepted" or (body["severity"] != "stop" and body["sort"] != "foam-on-heat-source"):
            continue
        where = where_found(view, history.deficiency)
        text = f"Stop: {SORTS[body['sort']]}, {where}. {body.get('text') or ''}".strip()
        if body["sort"] == "foam-on-heat-source":
            text += " Foam on a flue, on a fixture not rated for contact or in a panel can start a fire."
        told.append(Sentence(text))
    return tuple(told)


def covering(view: JobView) -> tuple[Sentence, ...]:
    """Surface by surface, whether anything in the depths speaks against covering it."""
    told: list[Sentence] = []
    meeting = [s.name for s in view.surfaces if s.result.result == "meets"]
    for surface in view.surfaces:
        result = surface.result.result
        if result == "short":
            text = f"Do not cover {surface.name}: {listed(_cover_words(surface))}."
            named = frozenset(bay.key for part in ("lowest_depth", "vapour", "over") for bay in surface.short(part))
            told.append(Sentence(text, named, "short"))
        elif result == "unproven":
            text = f"Do not cover {surface.name} yet: {unproven_reasons(surface)[0]}, so nothing is proven."
            told.append(Sentence(text, result="unproven"))
    if meeting:
        names = f"{len(meeting)} surfaces" if len(meeting) > 6 else listed(meeting)
        if len(meeting) > 6 and len(meeting) < len(view.surfaces):
            names = f"the other {names}"
        told.append(
            Sentence(f"Nothing found in depth against covering {names}; the code official decides.", result="meets")
        )
    return tuple(told)


def _cover_words(view: SurfaceView) -> list[str]:
    found = [check.id for check in view.result.checks if check.result == "short"]
    depth = [check for check in found if check in ("lowest-depth", "vapour", "mean-depth", "under-spray")]
    told: list[str] = []
    if depth:
        bays = {bay.key for part in ("lowest_depth", "vapour") for bay in view.short(part)}
        told.append(f"short in {len(bays)} {of_bays(view)}" if bays else "short in depth")
    if "delivered-r" in found and not depth:
        told.append("short in R")
    if deep := view.short("over"):
        told.append(f"too deep in {count(len(deep), 'bay')}")
    if "density" in found:
        told.append("density outside the foam's limits")
    if "deficiencies" in found:
        told.append("a deficiency is open")
    return told


def is_short_low_spot(bay: BayResult) -> bool:
    """True where a bay is short and a low spot was found in it."""
    return bay.low_spot_mm is not None and "short" in (bay.lowest_depth, bay.vapour)
