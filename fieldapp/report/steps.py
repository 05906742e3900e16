"""What to do next: foam to add, then what to read, weigh, mend, accept and settle."""

from fieldapp.reckoning.wording import count, listed
from fieldapp.records.repairs import deficiency_histories
from fieldapp.report.model import Sentence
from fieldapp.report.sentences import is_short_low_spot, passes_text
from fieldapp.report.terms import SORTS, where_found
from fieldapp.report.view import JobView, SurfaceView


def to_do(view: JobView) -> tuple[Sentence, ...]:
    """What to do next, in order: foam to add, then what to read, weigh, mend, accept and settle."""
    steps: list[Sentence] = []
    for surface in sorted(view.surfaces, key=lambda s: -(s.result.touch_up.volume_m3 or 0.0)):
        steps.extend(_foam_steps(surface))
    for surface in view.surfaces:
        steps.extend(_reading_steps(surface))
        steps.extend(_settling_steps(surface))
    for history in deficiency_histories(view.job):
        body = history.deficiency.body
        if body["severity"] == "note" or history.state == "accepted":
            continue
        where = where_found(view, history.deficiency)
        if history.state == "open":
            steps.append(Sentence(f"Repair: {SORTS[body['sort']]}, {where}."))
        else:
            steps.append(Sentence(f"Have an inspector accept the repair of: {SORTS[body['sort']]}, {where}."))
    return tuple(steps)


def _foam_steps(view: SurfaceView) -> list[Sentence]:
    """What to add where and how, and what to read again after it: one step for a surface."""
    words, foam, add = view.words, view.foam, view.to_add()
    said: list[str] = []
    if add.missing_m3:
        amount = f"{words.foam(add.missing_m3)} missing"
        if add.order_m3 > add.missing_m3:
            amount += f", order {words.foam(add.order_m3)}"
        where = view.named(list(add.bays)) if add.bays else "over the area read, thin bays first"
        said.append(f"{where}: add up to {words.depth(add.deepest_mm)}, {passes_text(view, add.passes)}; {amount}")
    spots = [bay for bay in view.result.bays if is_short_low_spot(bay) and not bay.touch_up.volume_m3]
    if spots:
        each = listed([f"bay {bay.label} ({words.depth(bay.low_spot_mm or 0.0)})" for bay in spots])
        said.append(f"fill the low spot of {each} to {words.depth(view.touch_up_limit_mm)}")
    short = [bay for bay in view.result.bays if "short" in (bay.lowest_depth, bay.vapour)]
    again = [bay for bay in short if not bay.waiting_for_reading]
    if again:
        first = [bay for bay in again if bay.vapour == "short"]
        which = "them" if len(again) > 1 else "it"
        order = f", {view.named(first)} first" if first and len(first) < len(again) else ""
        said.append(f"read {which} again before anything covers {which}{order}")
    if view.waiting:
        which = "them" if len(view.waiting) > 1 else "it"
        said.append(f"{view.named(view.waiting)}, touched up and not read again: read {which} before adding any more")
    if not said:
        return []
    text = f"{view.name}, {'; '.join(said)}." if add.missing_m3 else f"{view.name}: {'; '.join(said)}."
    if foam is not None and foam.pass_wait_min and (add.passes or 0) > 1:
        text += f" Wait {foam.pass_wait_min:g} min between passes by the data sheet; the foam must have cooled."
    if view.result.touch_up.exceeds_max_depth and view.max_depth_mm is not None:
        text += f" Some of it would exceed {words.depth(view.max_depth_mm)}, the limit entered: ask before spraying."
    return [Sentence(text, frozenset(bay.key for bay in (*add.bays, *spots, *again)))]


def _reading_steps(view: SurfaceView) -> list[Sentence]:
    steps: list[Sentence] = []
    if unread := view.unread():
        steps.append(Sentence(f"{view.name}: read {view.named(unread)}."))
    missing = view.result.bays_total - view.result.bays_laid_out
    coverage = view.result.check("coverage")
    if missing and coverage is not None and coverage.result != "meets":
        steps.append(Sentence(f"{view.name}: lay out and read the other {count(missing, 'bay')}."))
    held = sum(core.word != "with skin" for core in view.result.density.each)
    lacking = view.counted.spec.cores_min - held
    if lacking > 0:
        steps.append(Sentence(f"{view.name}: weigh {count(lacking, 'more core' if held else 'core')}, without skin."))
    return steps


def _settling_steps(view: SurfaceView) -> list[Sentence]:
    steps: list[Sentence] = []
    if view.counted.spec.basis is None:
        depth = view.words.depth(view.counted.spec.depth_mm)
        text = f"ask what the contract means by {depth}: a minimum, an average, or an average with a floor."
        steps.append(Sentence(f"{view.name}: {text}"))
    if disagreeing := [bay for bay in view.result.bays if bay.points_disagreeing]:
        text = f"readings of one point disagree in {view.named(disagreeing)}: read it again and withdraw the wrong one."
        steps.append(Sentence(f"{view.name}: {text}"))
    if view.result.unproven_because and view.foam is None:
        steps.append(Sentence(f"{view.name}: describe its foam; without it nothing can be reckoned."))
    return steps
