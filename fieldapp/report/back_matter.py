"""What follows the surfaces: how it was measured and computed, what was refused or withdrawn, cautions, every reading."""

from fieldapp.reckoning.wording import count, listed
from fieldapp.records.digest import about_surfaces, covers
from fieldapp.records.record import Record
from fieldapp.report.model import Part, Section, Sentence, Table
from fieldapp.report.noted import photo_of
from fieldapp.report.terms import BLOCKED, ROLES
from fieldapp.report.view import JobView

METHOD = (
    "Depth is read at the points of each bay's grid; a point stands for its share of the bay's area (equal shares, or the "
    "strips that reach half way to the next point where positions are given). Of several readings at one point in one round "
    "the lowest counts; after a touch-up the last round read at that point counts. Unread points are unread, never zero; "
    "bare points are zero and count. Low spots count for lowest depth, floor and vapor depth of their bay, never for means.",
    "A depth meets a limit when it is at most 0.05 mm under it, which absorbs the conversion of inches alone; all other "
    "figures meet within one part in a thousand million. Figures are compared unrounded and printed rounded half up; one "
    "that misses its limit is never printed equal to it.",
    "Delivered R: heat flows through uneven foam in parallel paths, so conductances average, not resistances: "
    "1 / mean of 1/(Rs + R(d)), less Rs, with Rs the two surface films alone, weighted by area. It is the upper limit of "
    "resistance, and thin spots between the points are unread: 'at most'. Source: parallel-path method, ISO 6946 upper limit; "
    "films as in ANSI/ASHRAE/IES 90.1 appendix A, in part from memory.",
    "Nominal R is the foam's R at the mean depth. The loss to unevenness is nominal less delivered.",
    "Permeance of a bay: flows in parallel, the area's mean of permeability over depth. Classes I, II and III: up to 0.1, 1 "
    "and 10 perm (International Residential Code 2021, table R702.7(1); ASTM E96, procedure A).",
    "Area under depth: the share of the area read that is under the specified depth; its missing volume is what those points "
    "lack. Where depth is plentiful elsewhere it does not make up for it.",
    "Density: mass over volume of each core; plus-minus from half a step of scale and calliper, in quadrature (JCGM 100:2008, "
    "5.1). Cores with skin are not held against limits of core density.",
    "Touch-up: each point to the larger of the contract's limit for a single point and the vapor depth, and the mean where "
    "the contract asks one. To order: thin gaps raised to the foam's least pass, divided by what is not lost. Passes: deepest "
    "missing depth over the foam's greatest pass, rounded up.",
    "What the sample supports, at 95 %, one-sided: lower bound of the mean by two-stage cluster sampling with finite "
    "population correction and Student's t (Cochran; Abramowitz and Stegun 26.7.3-4); most bays that can still be short by "
    "the hypergeometric distribution, exact. Only where all bays were read or they were picked at random.",
    "Agreement of self-check and inspection: bias and bias ± 1.96 sd (Bland and Altman 1999).",
    "U with wood framing: parallel paths, softwood 8.67 m²K/W per metre. U with steel framing: effective cavity R as printed "
    "in ANSI/ASHRAE/IES 90.1 table A9.2-2, interpolated, never extrapolated; from memory, to be checked against the adopted "
    "code.",
    "Digest: SHA-256 over the canonical JSON (RFC 8785) of all records but signatures, sorted by id.",
)


def method_section(job: JobView) -> Section:
    """How it was measured and computed; editions; signatures; what was refused, withdrawn or read again."""
    parts = [Part("", tuple(Sentence(text.replace("vapor", job.words.vapor)) for text in METHOD), bulleted=True)]
    code = job.text("code") or "no edition of a code is named in the records"
    zone = job.text("climate_zone") or "not given"
    parts.append(Part("Editions", (Sentence(f"Code: {code}. Climate zone: {zone}."),)))
    parts.append(_foams(job))
    for part in (_spray(job), _visits(job), _signatures(job)):
        if part is not None:
            parts.append(part)
    parts.append(_what_was_left_out(job))
    return Section("method", "How it was measured and computed", "", tuple(parts))


def _foams(job: JobView) -> Part:
    words = job.words
    told: list[Sentence] = []
    for foam in {view.foam.key: view.foam for view in job.surfaces if view.foam is not None}.values():
        body = job.job.foams[foam.key].body
        said = [f"{foam.name}, {foam.cell} cell"]
        if body["resistance"].get("table"):
            rows = [f"{words.depth(d)} {words.r(r)}" for d, r in body["resistance"]["table"]]
            said.append(f"R by the table {', '.join(rows)}")
        else:
            step = 25.4 if words.is_ip else 25.0
            per = foam.resistance.rsi(step)
            said.append(f"{words.r(per)} for each {words.depth(step)}, a per-depth figure: ask for the maker's table")
        if foam.permeability_ng_m is not None:
            said.append(f"{words.permeance(foam.permeability_ng_m * 1000.0 / 25.4)} at {words.depth(25.4)}")
        limits = (foam.density_min_kg_m3, foam.density_max_kg_m3)
        named = [words.density(limit) for limit in limits if limit is not None]
        if named:
            said.append(f"density {' to '.join(named)}")
        if foam.max_pass_mm is not None:
            said.append(f"greatest pass {words.depth(foam.max_pass_mm)}")
        if foam.loss_share:
            said.append(f"{words.percent(foam.loss_share)} lost in spraying")
        if body.get("evaluation_report"):
            said.append(f"evaluation report {body['evaluation_report']}")
        said.append(f"source of these values: {foam.source or 'not given'}")
        told.append(Sentence("; ".join(said) + "."))
    return Part("Foam", tuple(told) or (Sentence("No foam is described."),), bulleted=True)


def _spray(job: JobView) -> Part | None:
    names = {surface.key: surface.name for surface in job.job.surfaces}
    rows: list[tuple[str, ...]] = []
    for record in job.job.of("spray"):
        body = record.body
        when = body.get("started") or record.at
        times = [job.clock(body[name]) for name in ("started", "finished") if body.get(name)]
        temperatures = [
            f"{label} {job.words.temperature(body[name])}"
            for label, name in (("drum", "drum_c"), ("hose", "hose_c"), ("A", "heater_a_c"), ("B", "heater_b_c"))
            if body.get(name) is not None
        ]
        rows.append(
            (
                f"{job.date(when)} {' to '.join(times)}".strip(),
                listed([names[key] for key in body["surfaces"] if key in names] or ["not in this job now"]),
                f"A {body.get('lot_a') or 'not noted'}, B {body.get('lot_b') or 'not noted'}",
                ", ".join(temperatures) or "not noted",
            )
        )
    if not rows:
        return None
    table = Table(("When", "Surfaces", "Lots", "Temperatures"), tuple(rows), (0.27, 0.25, 0.24, 0.24))
    return Part("Spray log", table=table)


def _visits(job: JobView) -> Part | None:
    told = []
    for record in job.job.of("visit"):
        body = record.body
        said = [f"{job.date(record.at)}, {record.by}"]
        said += [f"asked: {body['asked']}"] if body.get("asked") else []
        said += [f"present: {listed(body['present'])}"] if body.get("present") else []
        said += [f"not inspected: {body['not_inspected']}"] if body.get("not_inspected") else []
        said += [str(body["note"])] if body.get("note") else []
        told.append(Sentence("; ".join(said)))
    return Part("Visits", tuple(told), bulleted=True) if told else None


def _signatures(job: JobView) -> Part | None:
    """Who signed which state of which surface; a signature for an earlier state is told as such."""
    names = {surface.key: surface.name for surface in job.job.surfaces}
    told = []
    for record in job.job.of("signature"):
        body = record.body
        keys = body.get("surfaces")
        spoken_of = about_surfaces(job.job.records, keys) if keys else list(job.job.records)
        what = listed([names.get(key, "a surface no longer in this job") for key in keys]) if keys else "the whole job"
        stands = covers(spoken_of) == body["covers"]
        state = "the records as they stand" if stands else "an EARLIER STATE of the records; they have changed since"
        who = ", ".join(part for part in (body["name"], ROLES[body["role"]], body.get("credential")) if part)
        told.append(
            Sentence(f"{who}, {job.date(record.at)}, for {what}: covers {state}. Statement: {body['statement']}")
        )
    return Part("Signatures among the records", tuple(told), bulleted=True) if told else None


def _what_was_left_out(job: JobView) -> Part:
    told: list[Sentence] = []
    again = sum(surface.points_read_again for surface in job.result.surfaces)
    disagreeing = sum(surface.points_disagreeing for surface in job.result.surfaces)
    told.append(
        Sentence(
            f"{count(again, 'point')} {'was' if again == 1 else 'were'} read more than once in a round (the lowest counts); "
            f"at {count(disagreeing, 'point')} the readings disagree by more than the larger of "
            f"{job.words.depth(12.7)} and 15 %."
        )
    )
    unopened = sum(len(bay.unopened) for bay in job.counted.bays.values())
    if unopened:
        told.append(
            Sentence(f"{count(unopened, 'reading')} of a round that no touch-up opened count with the round before.")
        )
    for pair in job.job.withdrawn:
        what = withdrawn_text(job, pair.fact)
        told.append(
            Sentence(f"Withdrawn {job.date(pair.by.at)} by {pair.by.by}: {what}. Reason: {pair.by.body['reason']}")
        )
    told.extend(
        Sentence(f"A withdrawal of {job.date(record.at)} acts on nothing earlier in this job.")
        for record in job.job.idle
    )
    told.extend(Sentence(f"Refused: {refusal.sentence()}.") for refusal in job.refused[:200])
    if len(job.refused) > 200:
        told.append(Sentence(f"And {len(job.refused) - 200} more records were refused."))
    if not job.refused:
        told.append(Sentence("No record was refused."))
    return Part("Read again, withdrawn, refused", tuple(told), bulleted=True)


def withdrawn_text(job: JobView, record: Record) -> str:
    """What a withdrawn fact said."""
    body = record.body
    bay = job.job.bay(body["bay"]) if isinstance(body.get("bay"), str) else None
    where = f" in bay {bay.name}" if bay else ""
    if record.kind in ("reading", "low-spot") and body.get("depth_mm") is not None:
        return f"{record.kind} of {job.words.depth(body['depth_mm'])}{where}, {job.date(record.at)}"
    return f"{record.kind}{where}, {job.date(record.at)}"


CAUTIONS = (
    "The maker's data sheet, the local code and licensed practice decide; this report replaces none of them.",
    "Before probing or cutting: find cable and pipe routes; dead circuits or an insulated probe; do not force the probe.",
    "Thick or hurried passes have started fires. Keep to the data sheet's greatest pass and waiting time; the foam must have "
    "cooled; never spray into rising foam.",
    "Do not bag or pile fresh foam, trimmings or purge: it heats. Spread it outdoors, out of reach. Fill core holes.",
    "Uncured foam and its vapors hold isocyanates. Re-entry only after the data sheet's hours, ventilated and cleaned; "
    "a touch-up starts the time anew. The applicator's protection is the sheet's.",
    "No welding or cutting near bare foam. Foam on flues, on fixtures not rated for contact or in panels is a stop; see to "
    "combustion air in a tight house.",
    "In old buildings: where old insulation, lead paint or asbestos is suspected, stop.",
    "Scope: building insulation sprayed in place; not roofing foam on top of a roof, not injected foam.",
)


def cautions_section(job: JobView) -> Section:
    """The usual cautions, and when re-entry is possible by the sheet, where records say so."""
    told = [Sentence(text) for text in CAUTIONS]
    for record in job.job.of("spray"):
        foam = next((v.foam for v in job.surfaces if v.foam and v.foam.key == record.body["foam"]), None)
        if foam is None or foam.reentry_h is None or not record.body.get("finished"):
            continue
        finished = record.body["finished"]
        told.append(
            Sentence(
                f"Re-entry after the spraying that ended {job.date(finished)}, {job.clock(finished)}: not before "
                f"{foam.reentry_h:g} h later by the data sheet, ventilated and cleaned; the applicator decides."
            )
        )
    return Section("cautions", "Cautions", "", (Part("", tuple(told), bulleted=True),), new_page=False)


def appendix_section(job: JobView) -> Section:
    """Every reading: bay, point, depth, local time, who, round, photo; withdrawn ones are not in it."""
    photos = {record.body.get("about") for record in job.job.of("photo")}
    at_point = {
        (record.body.get("bay"), record.body.get("row"), record.body.get("col"))
        for record in job.job.of("photo")
        if record.body.get("row") is not None
    }
    parts: list[Part] = []
    readings: dict[str, list[Record]] = {}
    for record in job.job.of("reading"):
        readings.setdefault(record.body["bay"], []).append(record)
    for view in job.surfaces:
        rows: list[tuple[str, ...]] = []
        for bay in view.counted.bays:
            own = sorted(
                readings.get(bay.key, ()), key=lambda r: (r.body["round"], r.body["row"], r.body["col"], r.order)
            )
            for record in own:
                body = record.body
                where = (bay.key, body["row"], body["col"])
                depth = body.get("depth_mm")
                factor = view.counts[bay.key].factor
                found = BLOCKED[body["blocked"]][1] if depth is None else view.words.depth_number(depth * factor)
                local = job.local(record.at)
                by = record.by if body["purpose"] == "inspection" else f"{record.by} (s)"
                rows.append(
                    (
                        bay.label,
                        f"{body['row'] + 1}.{body['col'] + 1}",
                        found,
                        f"{local.year}-{local.month:02d}-{local.day:02d} {local.hour:02d}:{local.minute:02d}",
                        by,
                        f"{body['round']:g}",
                        "yes" if record.id in photos or where in at_point else "",
                    )
                )
        if rows:
            head = ("Bay", "Point", view.words.depth_unit, "Local time", "By", "Round", "Photo")
            widths = (0.1, 0.09, 0.14, 0.25, 0.26, 0.08, 0.08)
            parts.append(Part(view.name, table=Table(head, tuple(rows), widths, frozenset({2}), columns=2)))
    lead = (
        "Points are row.column, row 1 at the top or ridge, column 1 at the left; (s): self-check. Withdrawn readings are told "
        "under method."
    )
    if not parts:
        lead = "Nothing was read."
    return Section("appendix", "Appendix: every reading", "", (Part("", (Sentence(lead),)), *parts))


def other_photos(job: JobView, shown: set[str]) -> Section | None:
    """Photos that belong to no bay and no surface."""
    found = tuple(photo_of(job, r, None, None, None) for r in job.job.of("photo") if r.body["sha256"] not in shown)
    return Section("photos", "Other photos", "", (Part("", photos=found),), new_page=False) if found else None
