"""What was noted of a surface beside its depths: deficiencies, objections, low spots, conditions, covering, photos."""

from fieldapp.reckoning.inputs import CountedBay
from fieldapp.reckoning.wording import bay_list
from fieldapp.records.record import Record
from fieldapp.records.repairs import DeficiencyHistory, deficiency_histories
from fieldapp.report.model import Part, Photo, Sentence, Table
from fieldapp.report.sentences import capital
from fieldapp.report.terms import SORTS, WHERE, ends
from fieldapp.report.view import JobView, SurfaceView


def _own_histories(job: JobView, view: SurfaceView) -> list[tuple[DeficiencyHistory, str]]:
    labels = {bay.key: f"bay {bay.label}" for bay in view.result.bays}
    found = []
    for history in deficiency_histories(job.job):
        body = history.deficiency.body
        where = labels.get(body.get("bay") or "")
        if where is None and body.get("surface") == view.result.key:
            where = "the surface"
        if where is not None:
            found.append((history, where))
    return found


def deficiencies(job: JobView, view: SurfaceView) -> Part | None:
    """Each deficiency with what became of it."""
    rows: list[tuple[str, ...]] = []
    for history, where in _own_histories(job, view):
        body = history.deficiency.body
        happened = [f"noted {job.date(history.deficiency.at)} by {history.deficiency.by}"]
        happened += [
            f"repair {job.date(r.at)} by {r.by}: {r.body.get('text') or ''}".rstrip(": ") for r in history.repairs
        ]
        happened += [f"accepted {job.date(r.at)} by {r.by}" for r in history.acceptances]
        noted = f"{SORTS[body['sort']]}. {body.get('text') or ''}".strip()
        state = "note" if body["severity"] == "note" else history.state
        rows.append((where, body["severity"], noted, state, "; ".join(happened)))
    if not rows:
        return None
    head = ("Where", "Severity", "What", "State", "History")
    return Part("Deficiencies", table=Table(head, tuple(rows), (0.12, 0.11, 0.3, 0.12, 0.35)))


def objections(job: JobView, view: SurfaceView) -> Part | None:
    """Objections to the surface, its bays or what was recorded of them."""
    own = {view.result.key, *(bay.key for bay in view.result.bays)}
    own |= {record.id for record in job.job.records if own.intersection(_touches(record))}
    told = tuple(
        Sentence(f"{record.by}, {job.date(record.at)}: {record.body['text']}")
        for record in job.job.of("objection")
        if record.body["about"] in own
    )
    return Part("Objections", told, bulleted=True) if told else None


def _touches(record: Record) -> list[str]:
    return [key for key in (record.body.get("bay"), record.body.get("surface")) if isinstance(key, str)]


def low_spots(job: JobView, view: SurfaceView) -> Part | None:
    """Low spots that count."""
    rows: list[tuple[str, ...]] = []
    for bay in view.counted.bays:
        for record in view.counts[bay.key].counting_low_spots():
            depth = view.words.depth(view.counts[bay.key].low_spot_mm(record))
            rows.append((bay.label, depth, WHERE[record.body["where"]], f"{job.date(record.at)}, {record.by}"))
    if not rows:
        return None
    table = Table(("Bay", "Depth", "Where", "Found"), tuple(rows), (0.12, 0.16, 0.32, 0.4), frozenset({1}))
    return Part("Low spots found between the points", table=table)


def conditions(job: JobView, view: SurfaceView) -> Part | None:
    """Conditions while spraying and inspecting."""
    keys = {view.result.key, *(bay.key for bay in view.result.bays)}
    told: list[Sentence] = []
    for record in job.job.of("conditions"):
        about = {record.body.get("surface"), record.body.get("bay")}
        if not about & keys and (about != {None} or job.result.surfaces[0].key != view.result.key):
            continue
        told.append(Sentence(_conditions_text(job, record)))
    return Part("Conditions", tuple(told), bulleted=True) if told else None


def _conditions_text(job: JobView, record: Record) -> str:
    words, body = job.words, record.body
    said = []
    if body.get("air_c") is not None:
        said.append(f"air {words.temperature(body['air_c'])}")
    if body.get("rh") is not None:
        said.append(f"relative humidity {words.percent(body['rh'])}")
    if body.get("substrate_c") is not None:
        said.append(f"substrate {words.temperature(body['substrate_c'])}")
    if body.get("wood_mc"):
        said.append(f"wood moisture {', '.join(words.percent(share) for share in body['wood_mc'])}")
    if body.get("note"):
        said.append(str(body["note"]))
    return f"{job.date(record.at)}, {job.clock(record.at)}: {'; '.join(said) or 'nothing noted'}"


def covered(job: JobView, view: SurfaceView) -> Part | None:
    """Bays that were hidden, from when on."""
    labels = {bay.key: bay.label for bay in view.result.bays}
    told = []
    for record in job.job.of("covered"):
        hidden = [labels[key] for key in record.body["bays"] if key in labels]
        if hidden:
            bays = bay_list(hidden, list(labels.values()))
            text = f"{bays} covered {job.date(record.at)}, {record.by}. {record.body.get('text') or ''}"
            told.append(Sentence(capital(text.rstrip())))
    return Part("Covered", tuple(told), bulleted=True) if told else None


def photos(job: JobView, view: SurfaceView) -> Part | None:
    """Photos of the surface and its bays, in the order of the bays."""
    labels = {bay.key: bay for bay in view.counted.bays}
    about = {record.id: record for record in job.job.records}
    photos: list[tuple[int, Photo]] = []
    order = {bay.key: number for number, bay in enumerate(view.counted.bays, 1)}
    for record in job.job.of("photo"):
        subject = about.get(record.body.get("about") or "")
        bay_key = record.body.get("bay") or (subject.body.get("bay") if subject else None)
        surface_key = record.body.get("surface") or (subject.body.get("surface") if subject else None)
        if bay_key in labels:
            photos.append((order[bay_key], photo_of(job, record, view, labels[bay_key], subject)))
        elif surface_key == view.result.key:
            photos.append((0, photo_of(job, record, view, None, subject)))
    photos.sort(key=lambda pair: pair[0])
    return Part("Photos", photos=tuple(photo for _, photo in photos)) if photos else None


def photo_of(
    job: JobView, record: Record, view: SurfaceView | None, bay: CountedBay | None, subject: Record | None
) -> Photo:
    """A photo with what it shows, where, when and by whom."""
    body = record.body
    where = []
    if bay is not None:
        where.append(f"bay {bay.label}")
        row, col = body.get("row"), body.get("col")
        if row is not None and view is not None:
            where.append(point_name(view, bay, int(row), int(col or 0)))
    if subject is not None and subject.body.get("depth_mm") is not None and view is not None:
        where.append(f"reads {view.words.depth(subject.body['depth_mm'])}")
    detail = ", ".join([*where, f"{job.date(record.at)} {job.clock(record.at)}", record.by])
    return Photo(body["sha256"], body.get("caption") or (body.get("shows") or "photo").replace("-", " "), detail)


def point_name(view: SurfaceView, bay: CountedBay, row: int, col: int) -> str:
    """'point 3 from the ridge', with its column where there are several."""
    top, _ = ends(view.counted.assembly)
    text = f"point {row + 1} from the {top}" if bay.rows > 1 else f"point {col + 1} from the left"
    return f"{text}, {col + 1} from the left" if bay.rows > 1 and bay.cols > 1 else text
