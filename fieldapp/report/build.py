"""Puts the report together: page one in the order in which it is read, then the chapters."""

import re
import unicodedata

from fieldapp.reckoning.job import reckon
from fieldapp.reckoning.wording import count, listed
from fieldapp.records.counting import count as count_job
from fieldapp.records.digest import covers
from fieldapp.records.file import Loaded
from fieldapp.report.back_matter import appendix_section, cautions_section, method_section, other_photos
from fieldapp.report.charts import touch_up_chart
from fieldapp.report.model import CrewSheet, Report, Section, SurfaceLine, Table
from fieldapp.report.sentences import alarms, answer, covering
from fieldapp.report.steps import to_do
from fieldapp.report.surface_section import surface_section, touch_up_table
from fieldapp.report.terms import BASES
from fieldapp.report.view import JobView, SurfaceView

UNSIGNED = "unsigned"


def view_of(loaded: Loaded) -> JobView:
    """Count and reckon a loaded job."""
    counted = count_job(loaded.job)
    return JobView(loaded.job, counted, reckon(counted.reckoned), loaded.refused, covers(loaded.job.records))


def short_digest(digest: str) -> str:
    """The first twelve digits in fours, as people compare them."""
    return " ".join(digest[start : start + 4] for start in (0, 4, 8))


def build_report(view: JobView) -> Report:
    """The whole report of a job."""
    chapters = [surface_section(view, surface) for surface in view.surfaces]
    shown = {photo.sha256 for chapter in chapters for part in chapter.parts for photo in part.photos}
    others = other_photos(view, shown)
    sections: list[Section] = [*chapters, *([others] if others else []), method_section(view), cautions_section(view)]
    sections.append(appendix_section(view))
    return Report(
        title=view.job.name,
        subtitle=_subtitle(view),
        facts=_facts(view),
        alarms=alarms(view),
        covering=covering(view),
        answer=answer(view),
        table_head=_table_head(view),
        table=tuple(_line(view, surface) for surface in view.surfaces),
        to_do=to_do(view),
        not_said=_not_said(view),
        sections=tuple(sections),
        status=UNSIGNED,
        digest=view.digest,
        dated=view.dated,
        file_stem=file_stem(view, ""),
        keywords=("spray foam", "depth inspection", f"digest {view.digest}"),
    )


def _subtitle(view: JobView) -> str:
    return "Applicator's self-check of spray foam depth" if view.is_self_check else "Spray foam depth inspection"


def file_stem(view: JobView, kind: str) -> str:
    """A file name from project, place, revision and date."""
    place = view.job.places[0].name if len(view.job.places) == 1 else ""
    parts = [view.text("project_no"), view.job.name, place, kind, UNSIGNED, view.local(view.dated).date().isoformat()]
    return "_".join(slug for part in parts if (slug := _slug(part)))


def _slug(text: str) -> str:
    kept = unicodedata.normalize("NFC", text)
    return re.sub(r"[^\w-]+", "-", kept).strip("-_")[:60]


def _facts(view: JobView) -> tuple[tuple[str, str], ...]:
    readings = [r for r in view.job.of("reading") if r.body["purpose"] == view.result.purpose]
    role = "applicator" if view.is_self_check else "inspector"
    # A signature gives an account its person's name.
    names = {record.by: str(record.body["name"]) for record in view.job.of("signature") if record.body["role"] == role}
    readers = sorted({names.get(record.by, record.by) for record in readings})
    lots = sorted(
        {
            f"A-side {record.body.get('lot_a') or 'not noted'}, B-side {record.body.get('lot_b') or 'not noted'}"
            for record in view.job.of("spray")
        }
    )
    foams = sorted({f"{s.foam.name} ({s.foam.cell} cell)" for s in view.surfaces if s.foam is not None})
    places = [place.name for place in view.job.places]
    number = view.text("project_no")
    facts = [
        ("Site", view.text("site")),
        ("Place", listed(places) if 0 < len(places) <= 3 else count(len(places), "place") if places else ""),
        ("Permit", view.text("permit_no")),
        ("Report", f"{number + ' · ' if number else ''}{short_digest(view.digest)}, {UNSIGNED}"),
        ("Read", view.span(readings)),
        ("Self-checked by" if view.is_self_check else "Inspected by", listed(readers) if readers else "nobody yet"),
        ("Asked for by", view.text("engaged_by")),
        ("For", view.text("client")),
        ("Applicator", view.text("contractor")),
        ("Foam", "; ".join(foams) or "not described"),
        ("Lots", "; ".join(lots) or "not noted"),
        ("Specification", ", ".join(t for t in (view.text("spec_section"), view.text("submittal_no")) if t)),
        ("Note", view.text("note")),
    ]
    return tuple((label, text) for label, text in facts if text)


def _table_head(view: JobView) -> tuple[str, ...]:
    vapor = view.words.vapor.capitalize()
    return ("Surface", "Result", "Asked", "Read", "Lowest", "Mean", "Area under", "Delivered R", vapor, "Density")


def _line(view: JobView, surface: SurfaceView) -> SurfaceLine:
    words, result, spec = surface.words, surface.result, surface.counted.spec
    depth, under = result.depth_mm, result.under_spray
    limit = surface.point_limit_mm
    blank = ("–", "")
    cells = [
        (words.depth(spec.depth_mm), BASES[spec.basis]),
        (f"{result.bays_read} of {result.bays_total}", "bays"),
        blank if depth.min is None else (words.depth_held(depth.min, limit), ""),
        blank if depth.mean is None else (words.depth_held(depth.mean, spec.depth_mm), ""),
        blank
        if under.area_share is None
        else (words.percent(under.area_share), f"{words.percent(result.read_share)} read"),
        blank
        if result.rsi.delivered is None
        else (words.r_held(result.rsi.delivered, spec.rsi or 0.0), f"asked {words.r(spec.rsi)}" if spec.rsi else ""),
        _vapour_cell(surface),
        _density_cell(surface),
    ]
    place = next((p.name for p in view.job.places if p.key == result.place), "")
    below = f"{surface.foam.cell} cell" if surface.foam else "foam not described"
    word = next((c.word for c in result.checks if c.result == "short"), result.result)
    return SurfaceLine(
        key=result.key,
        name=(surface.name, f"{place}, {below}" if place and place not in surface.name else below),
        result=result.result,
        word=word if result.result == "short" else result.result,
        cells=tuple(cells),
    )


def _vapour_cell(surface: SurfaceView) -> tuple[str, str]:
    check, figures = surface.result.check("vapour"), surface.result.vapour
    word = check.word if check else ""
    if figures.bays_meets is None:
        return (word, {"separate": "separate sheet", "none": "nothing asked"}.get(figures.rule, ""))
    return (word, f"{figures.bays_meets} of {surface.result.bays_total} bays")


def _density_cell(surface: SurfaceView) -> tuple[str, str]:
    figures, check = surface.result.density, surface.result.check("density")
    if figures.mean_kg_m3 is None:
        return ("no core", f"{surface.counted.spec.cores_min} asked" if surface.counted.spec.cores_min else "")
    below = count(figures.cores, "core")
    return (surface.words.density(figures.mean_kg_m3), f"{below}, {check.word}" if check else below)


def _not_said(view: JobView) -> tuple[str, ...]:
    told = [f"Not inspected: {r.body['not_inspected']}" for r in view.job.of("visit") if r.body.get("not_inspected")]
    uncovered = [s.name for s in view.surfaces if not (s.thing.body.get("cover") or {}).get("kind")]
    if uncovered:
        names = "any surface" if len(uncovered) == len(view.surfaces) else listed(uncovered)
        told.append(
            f"Nothing is said about fire protection over the foam: no thermal or ignition barrier is listed for {names}. "
            "No welding or cutting near bare foam."
        )
    told.append(
        "Between the points nobody read: delivered R is at most what is printed, and a sample supports, it does not prove."
    )
    pulled = "" if view.job.of("pull") else "adhesion, "
    told.append(f"Not tested here: {pulled}chemistry and ratio of the foam, air leakage, what the foam hides.")
    if view.is_self_check:
        told.append("These are the applicator's own readings; no inspector took part.")
    if view.refused:
        told.append(
            f"{count(len(view.refused), 'record')} could not be taken and is not in this report; see under method."
        )
    return tuple(told)


def _wait(surface: SurfaceView, passes: int | None) -> str:
    foam = surface.foam
    if passes is not None and passes < 2:
        return "–"
    return f"{foam.pass_wait_min:g} min" if foam and foam.pass_wait_min else "by the sheet"


def build_crew_sheet(view: JobView) -> CrewSheet:
    """One page for the crew: what to add where."""
    surfaces = []
    notes: list[str] = []
    for surface in view.surfaces:
        chart = touch_up_chart(surface, view.job.bays[surface.result.key])
        add = surface.to_add()
        if not chart.bays and not add.missing_m3:
            continue
        words, limit = surface.words, surface.touch_up_limit_mm
        rows = (
            (
                words.depth(limit) if limit else f"mean {words.depth(surface.counted.spec.depth_mm)}",
                words.depth(add.deepest_mm),
                words.foam(add.missing_m3),
                words.foam(add.order_m3),
                "ask the sheet" if add.passes is None else str(add.passes),
                _wait(surface, add.passes),
            ),
        )
        head = ("Bring to", "Deepest to add", "Missing", "To order", "Passes, at least", "Wait between")
        surfaces.append((surface.name, chart, Table(head, rows, (1 / 6,) * 6), touch_up_table(surface, waiting=False)))
        if surface.result.touch_up.exceeds_max_depth and surface.max_depth_mm is not None:
            notes.append(
                f"{surface.name}: would exceed {words.depth(surface.max_depth_mm)} (limit entered): ask first."
            )
    notes.append("Data sheet decides. Foam must have cooled between passes. Never spray into rising foam.")
    for surface in view.surfaces:
        if surface.waiting:
            notes.append(
                f"{surface.name}: {surface.named(surface.waiting)} touched up already; read before adding more."
            )
    notes.append("Each bay is short until it is read again.")
    return CrewSheet(
        title=view.job.name,
        subtitle="Touch-up, bay by bay",
        surfaces=tuple(surfaces),
        notes=tuple(notes),
        status=UNSIGNED,
        digest=view.digest,
        dated=view.dated,
        file_stem=file_stem(view, "crew"),
    )
