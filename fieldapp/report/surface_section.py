"""The chapter of one surface: charts, figures, checks, vapour depth, density, touch-up, sample, rounds, photos, repairs."""

from collections.abc import Callable

from fieldapp.reckoning.vapour import vapour_class
from fieldapp.reckoning.wording import count
from fieldapp.report import noted
from fieldapp.report.charts import depth_chart, strip_chart
from fieldapp.report.model import Part, Section, Sentence, Table
from fieldapp.report.sentences import is_short_low_spot, of_read, surface_sentence
from fieldapp.report.terms import ASSEMBLIES, BASES, BROKE, CHOSEN, check_name
from fieldapp.report.view import JobView, SurfaceView

RIGHT = frozenset


def surface_section(job: JobView, view: SurfaceView) -> Section:
    """Everything that the report says of one surface."""
    makers: tuple[Callable[[JobView, SurfaceView], Part | None], ...] = (
        _chart,
        _strips,
        _figures,
        _checks,
        _vapour,
        _density,
        _pulls,
        _touch_up,
        _sample,
        _rounds,
        _self_check,
        noted.deficiencies,
        noted.objections,
        noted.low_spots,
        noted.conditions,
        noted.covered,
        noted.photos,
    )
    parts = (part for make in makers if (part := make(job, view)) is not None)
    foam = view.foam
    kind = f"{foam.cell} cell, {foam.name}" if foam else "foam not described"
    place = next((f"{p.name}, " for p in job.job.places if p.key == view.result.place), "")
    worst = next((check for check in view.result.checks if check.result == view.result.result), None)
    return Section(
        key=view.result.key,
        title=view.name,
        subtitle=f"{place}{ASSEMBLIES[view.counted.assembly]}, {kind}, {count(view.result.bays_total, 'bay')}",
        parts=(Part("", prose=(surface_sentence(view),)), *parts),
        result=view.result.result,
        word=worst.word if worst is not None and view.result.result == "short" and worst.word else view.result.result,
    )


def _chart(job: JobView, view: SurfaceView) -> Part | None:
    if not view.result.bays:
        return None
    return Part("Depth at each point", chart=depth_chart(view, job.job.bays[view.result.key]))


def _strips(_job: JobView, view: SurfaceView) -> Part | None:
    strips = strip_chart(view)
    return None if strips is None else Part("Lowest, mean and highest depth of each bay", strips=strips)


def _figures(job: JobView, view: SurfaceView) -> Part:
    words, result, spec = view.words, view.result, view.counted.spec
    floor = (
        f", nowhere under {words.depth(spec.floor_mm)}" if spec.basis == "average-with-floor" and spec.floor_mm else ""
    )
    rows: list[tuple[str, str]] = [
        ("Asked", f"{words.depth(spec.depth_mm)}, {BASES[spec.basis]}{floor}"),
        ("Area laid out; read", f"{words.area(result.area_m2)}; {words.area(result.area_read_m2)}"),
        ("Points; read; blocked", f"{result.points:,}; {result.points_read:,}; {result.points_blocked:,}"),
    ]
    depth, rsi, under = result.depth_mm, result.rsi, result.under_spray
    if depth.mean is not None and depth.max is not None:
        rows.append(("Mean depth", words.fine_depth(depth.mean)))
        low = words.depth(depth.min) if depth.min is not None else ""
        rows.append(("Lowest; highest depth", f"{low}; {words.depth(depth.max)}"))
    if depth.sd is not None:
        rows.append(("Standard deviation of the readings", words.fine_depth(depth.sd)))
    if under.area_share is not None and under.deep_area_share is not None and under.missing_m3 is not None:
        share = f"{words.percent(under.area_share)} {of_read(view)}"
        rows.append((f"Area under {words.depth(spec.depth_mm)}", share))
        rows.append(("Area under 70 % of that", words.percent(under.deep_area_share)))
        rows.append(("Foam missing to that depth", words.foam(under.missing_m3)))
    if rsi.delivered is not None and rsi.nominal is not None and rsi.uneven_loss is not None:
        rows.append(("Delivered R, at most, by these readings", words.r(rsi.delivered)))
        rows.append(("Nominal R at the mean depth", words.r(rsi.nominal)))
        rows.append(("Loss to unevenness", words.r(max(rsi.uneven_loss, 0.0))))
        if rsi.beyond_tested:
            rows.append(("Depths outside the foam's tested table", "yes: the R there rests on no test"))
    if rsi.in_assembly is not None:
        rows.append(("Foam's R in the assembly with its layers", words.r(rsi.in_assembly)))
    if result.u_w_m2k is not None:
        rows.append((_framing_name(view), words.u(result.u_w_m2k)))
    rows.extend(_setting(view))
    return Part("Figures", table=Table(("", ""), tuple(rows), (0.52, 0.48), columns=2))


def _framing_name(view: SurfaceView) -> str:
    framing = view.counted.framing
    material = framing.material if framing else "none"
    if material == "steel":
        return "U with steel framing (table from memory: check it)"
    return "U with wood framing, parallel paths" if material == "wood" else "U of the clear field"


def _setting(view: SurfaceView) -> list[tuple[str, str]]:
    body, words = view.thing.body, view.words
    rows: list[tuple[str, str]] = []
    probe = body.get("probe") or {}
    held = "plumb, times the cosine of the pitch" if probe.get("direction") == "plumb" else "square to the surface"
    kind = f"{probe['kind']}, " if probe.get("kind") else ""
    rows.append(("Probe", f"{kind}held {held}"))
    rows.append(("Which bays", CHOSEN[view.counted.chosen] + (f", seed {body['seed']}" if body.get("seed") else "")))
    for label, name in (("Substrate", "substrate"), ("Bays counted from", "numbered_from")):
        if body.get(name):
            rows.append((label, str(body[name])))
    if view.max_depth_mm is not None:
        reason = f" ({body['max_depth_reason']})" if body.get("max_depth_reason") else ""
        rows.append(("Greatest depth allowed", f"{words.depth(view.max_depth_mm)}{reason}"))
    cover = body.get("cover") or {}
    rows.append(("Cover over the foam", ", ".join(str(cover[n]) for n in cover if cover[n]) or "not listed"))
    return rows


def _checks(_job: JobView, view: SurfaceView) -> Part:
    rows = tuple(
        (check_name(check.id, view.words.vapor), check.word, check.asked, check.found) for check in view.result.checks
    )
    marks = {number: check.result for number, check in enumerate(view.result.checks)}
    return Part(
        "Checks", table=Table(("Check", "Result", "Asked", "Found"), rows, (0.16, 0.13, 0.33, 0.38), marks=marks)
    )


def _vapour(_job: JobView, view: SurfaceView) -> Part | None:
    if view.counted.vapour.rule not in ("depth", "permeance") or not view.result.points_read:
        return None
    words = view.words
    rows: list[tuple[str, ...]] = []
    marks = {}
    for number, bay in enumerate(view.result.bays):
        if bay.vapour is None:
            continue
        marks[number] = bay.vapour
        lowest = "" if bay.min_mm is None else words.depth_held(bay.min_mm, view.vapour_depth_mm or 0.0)
        perm = "" if bay.permeance_ng is None else words.permeance(bay.permeance_ng).split(" ", 1)[0]
        retarder = "" if bay.permeance_ng is None else vapour_class(bay.permeance_ng) or "none"
        rows.append((bay.label, bay.vapour, lowest, perm, retarder))
    head = ("Bay", "Result", "Lowest", f"Permeance, {words.permeance(1.0).split(' ', 1)[1]}", "Class")
    title = f"{words.vapor.capitalize()} depth, bay by bay"
    prose: tuple[Sentence, ...] = ()
    if view.foam is not None and view.foam.permeability_ng_m is None:
        prose = (Sentence("The foam's permeability is not given, so no permeance is reckoned."),)
    table = Table(head, tuple(rows), (0.12, 0.21, 0.17, 0.36, 0.14), RIGHT({2, 3}), marks, columns=2)
    return Part(title, prose, table)


def _density(_job: JobView, view: SurfaceView) -> Part | None:
    each = view.result.density.each
    if not each:
        return None
    words, foam = view.words, view.foam
    low = foam.density_min_kg_m3 if foam else None
    high = foam.density_max_kg_m3 if foam else None
    rows = tuple(
        (
            core.label,
            next((bay.label for bay in view.result.bays if bay.key == core.bay), ""),
            words.density_held(core.kg_m3, low, high),
            "" if core.plus_minus_kg_m3 is None else words.plus_minus(core.plus_minus_kg_m3),
            {"with skin": "with skin: not held against the limits of core density", "no limits": "no limits given"}.get(
                core.word, "a limit lies within the plus-minus: unproven" if core.word == "unproven" else core.word
            ),
        )
        for core in each
    )
    head = ("Core", "Bay", "Density", "Plus-minus", "Against the foam's limits")
    return Part("Density, core by core", table=Table(head, rows, (0.16, 0.1, 0.17, 0.17, 0.4), RIGHT({2, 3})))


def _pulls(job: JobView, view: SurfaceView) -> Part | None:
    keys = {bay.key: bay.label for bay in view.result.bays}
    pulls = [record for record in job.job.of("pull") if record.body["bay"] in keys]
    told = tuple(
        Sentence(
            f"Bay {keys[record.body['bay']]}: "
            + (f"{record.body['kpa']:g} kPa" if record.body.get("kpa") is not None else "pulled by hand")
            + f", {BROKE[record.body.get('broke')]}. {record.body.get('note') or ''}".rstrip()
        )
        for record in pulls
    )
    return Part("Adhesion, pulled", told, bulleted=True) if told else None


def _touch_up(_job: JobView, view: SurfaceView) -> Part | None:
    words, repair = view.words, view.result.touch_up
    table = touch_up_table(view)
    if table is None and not repair.volume_m3:
        return None
    prose: list[Sentence] = []
    if repair.volume_m3 and repair.order_m3 is not None:
        mass = f", {words.mass(repair.mass_kg)} at nominal density" if repair.mass_kg else ""
        prose.append(
            Sentence(
                f"In all {words.foam(repair.volume_m3)} are missing{mass}; to order {words.foam(repair.order_m3)}, least "
                "pass and losses included. It would bring the depth to specification, if read again."
            )
        )
    return Part("Touch-up, bay by bay", tuple(prose), table)


def touch_up_table(view: SurfaceView, *, waiting: bool = True) -> Table | None:
    """What each bay lacks, the most missing first; None where nothing can be said bay by bay.

    Args:
        view: The surface.
        waiting: Whether bays that were touched up and not read again are listed too.
    """
    words = view.words
    bays = [bay for bay in view.result.bays if bay.touch_up.volume_m3 or is_short_low_spot(bay)]
    bays = [bay for bay in bays if waiting or not bay.waiting_for_reading]
    bays.sort(key=lambda bay: -(bay.touch_up.volume_m3 or 0.0))
    rows = tuple(
        (
            bay.label,
            words.depth(bay.touch_up.deepest_missing_mm or 0.0) if bay.touch_up.volume_m3 else "low spot only",
            words.foam(bay.touch_up.volume_m3 or 0.0) if bay.touch_up.volume_m3 else "",
            words.foam(bay.touch_up.order_m3 or 0.0) if bay.touch_up.volume_m3 else "",
            "ask the sheet" if bay.touch_up_passes is None else str(bay.touch_up_passes),
            "waits to be read again" if bay.waiting_for_reading else "",
        )
        for bay in bays
    )
    head = ("Bay", "Deepest to add", "Missing", "To order", "Passes", "")
    return Table(head, rows, (0.14, 0.18, 0.18, 0.18, 0.12, 0.2), RIGHT({1, 2, 3, 4})) if rows else None


def _sample(_job: JobView, view: SurfaceView) -> Part | None:
    result, words = view.result, view.words
    if not result.bays_read:
        return None
    read = f"{result.bays_read} of {count(result.bays_total, 'bay')} were read"
    most = result.sampling.short_bays_at_most
    if result.bays_read == result.bays_total:
        told = ["Every bay was read; between the points nobody did."]
    elif view.counted.chosen != "random":
        told = [f"{read}, and not as a random sample: they say nothing of the bays that were not read."]
    elif most is None:
        told = [f"{read}, picked at random; what is asked of a single bay is not stated, so none can be judged."]
    else:
        told = [
            f"{read}, picked at random. With 95 % confidence at most {most} of the {result.bays_total} can be short in "
            f"lowest depth or {words.vapor} depth."
        ]
    if result.sampling.mean_lower_mm is not None:
        told.append(
            f"The readings support a mean depth of at least {words.fine_depth(result.sampling.mean_lower_mm)} "
            "(95 %, one-sided)."
        )
    return Part("What the sample supports", (Sentence(" ".join(told)),))


def _rounds(_job: JobView, view: SurfaceView) -> Part | None:
    """Bays that were touched up or read in more than one round, first round against last."""
    words = view.words
    rows: list[tuple[str, ...]] = []
    for bay, result in view.pairs():
        found = view.counts[bay.key]
        if not found.opened and found.last_round == 1:
            continue
        before = [found.depth_mm(place, 1) for place in range(len(bay.depths_mm))]
        read = [depth for depth in before if depth is not None]
        first = words.depth(min(read)) if read else "not read"
        mean_before = _mean(before, bay.areas_m2)
        if result.waiting_for_reading:
            after, mean_after = "not read again", ""
        else:
            now = [depth for depth in bay.depths_mm if depth is not None]
            after = words.depth(min(now)) if now else "not read"
            mean_after = "" if result.mean_mm is None else words.depth(result.mean_mm)
        means = "" if mean_before is None else words.depth(mean_before)
        rows.append((bay.label, first, means, str(max(found.opened, default=1)), after, mean_after, result.result))
    if not rows:
        return None
    head = ("Bay", "Round 1: lowest", "mean", "Touch-up opened", "Now: lowest", "mean", "Result")
    table = Table(head, tuple(rows), (0.1, 0.16, 0.12, 0.18, 0.18, 0.12, 0.14), RIGHT({1, 2, 4, 5}))
    return Part("Rounds, before and after touch-up", (), table)


def _mean(depths: list[float | None], areas: tuple[float, ...]) -> float | None:
    total = area_read = 0.0
    for depth, area in zip(depths, areas, strict=True):
        if depth is not None:
            total += depth * area
            area_read += area
    return total / area_read if area_read else None


def _self_check(job: JobView, view: SurfaceView) -> Part | None:
    """Shown once, with the first surface."""
    agreement = job.result.agreement
    if agreement is None or job.result.surfaces[0].key != view.result.key:
        return None
    words = view.words
    text = (
        f"At {agreement.pairs} points of this job the applicator's self-check and the inspection were read in the same "
        f"round. Inspection less self-check is {words.signed_depth(agreement.bias_mm)} on average; 95 % of such differences "
        f"lie between {words.signed_depth(agreement.lower_mm)} and {words.signed_depth(agreement.upper_mm)} (limits of "
        "agreement)."
    )
    return Part("Self-check against inspection", (Sentence(text),))
