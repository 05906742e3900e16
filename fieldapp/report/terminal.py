"""The result as a person reads it in a terminal: surface by surface, check by check, the short first."""

from collections.abc import Iterator
from textwrap import fill
from typing import Final

from fieldapp.report.sentences import alarms, answer
from fieldapp.report.steps import to_do
from fieldapp.report.terms import check_name
from fieldapp.report.view import JobView, SurfaceView

WIDTH: Final = 96
MARKS: Final = {"meets": "[#]", "short": "[_]", "unproven": "[ ]"}


def told(view: JobView) -> Iterator[str]:
    """Line by line."""
    kind = "applicator's self-check" if view.is_self_check else "inspection"
    yield f"{view.job.name}: {view.result.result} ({kind})"
    if note := view.text("note"):
        yield note
    yield ""
    for sentence in (*alarms(view), *answer(view)):
        yield fill(sentence.text, WIDTH)
    for surface in view.surfaces:
        yield ""
        yield from _surface(view, surface)
    if steps := to_do(view):
        yield ""
        yield "What to do"
        for number, sentence in enumerate(steps, 1):
            yield fill(f"{number:2}. {sentence.text}", WIDTH, subsequent_indent="    ")
    yield ""
    yield f"digest {view.digest}"


def _surface(view: JobView, surface: SurfaceView) -> Iterator[str]:
    result = surface.result
    place = next((f" ({p.name})" for p in view.job.places if p.key == result.place), "")
    yield f"{MARKS[result.result]} {surface.name}{place}: {result.result}"
    for check in result.checks:
        lead = f"    {check_name(check.id, view.words.vapor):<17}{check.word:<9} "
        yield fill(f"{lead}{check.found}  (asked: {check.asked})", WIDTH, subsequent_indent=" " * len(lead))
    short = sorted(
        (bay for bay in result.bays if bay.result == "short"), key=lambda bay: -(bay.touch_up.volume_m3 or 0.0)
    )
    for bay in short[:12]:
        lowest = "" if bay.min_mm is None else f"lowest {surface.words.depth_held(bay.min_mm, surface.point_limit_mm)}"
        add = ""
        if bay.touch_up.volume_m3:
            add = f"add up to {surface.words.depth(bay.touch_up.deepest_missing_mm or 0.0)}"
        waits = "touched up, waits to be read again" if bay.waiting_for_reading else ""
        yield f"      bay {bay.label}: " + "; ".join(part for part in (lowest, add, waits) if part)
    if len(short) > 12:
        yield f"      and {len(short) - 12} more short bays"
