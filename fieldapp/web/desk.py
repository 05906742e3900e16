"""Pages for a desk: sign in, the list of jobs, a job with its charts and checks, its report."""

import io
from collections.abc import Mapping
from dataclasses import dataclass

from flask import Blueprint, Response, abort, flash, redirect, render_template, request, send_file, url_for
from flask_wtf import FlaskForm  # type: ignore[import-untyped]
from werkzeug.wrappers import Response as Answer
from wtforms import PasswordField, StringField  # type: ignore[import-untyped]
from wtforms.validators import InputRequired, Length  # type: ignore[import-untyped]

from fieldapp.report.build import build_crew_sheet, build_report
from fieldapp.report.charts import depth_chart
from fieldapp.report.drawing.pages import draw_crew_sheet, draw_report
from fieldapp.report.model import Section
from fieldapp.report.view import JobView, SurfaceView
from fieldapp.store.accounts import AccountRefused
from fieldapp.store.people import ROLES, Account, SignIn
from fieldapp.store.throttle import SignInRefused
from fieldapp.web.doors import ANYONE, open_to
from fieldapp.web.session import give_cookie, now_signed_in, signed_in, store, take_cookie
from fieldapp.web.svg import Picture, picture

desk = Blueprint("desk", __name__)


class NameAndPassword(FlaskForm):  # type: ignore[misc]
    """A name and a password."""

    name = StringField("Name", [InputRequired("Your name is asked for."), Length(max=200)])
    password = PasswordField("Password", [InputRequired("Your password is asked for."), Length(max=2000)])


@dataclass(frozen=True, slots=True)
class SurfacePage:
    """One surface on a job's page."""

    view: SurfaceView
    section: Section
    chart: Picture | None
    notes: tuple[str, ...]


@desk.app_context_processor
def _who() -> dict[str, object]:
    found = signed_in()
    return {"me": found.account if found else None}


@desk.get("/")
@open_to(*ROLES)
def jobs() -> str:
    """The jobs that one may see, the latest active first."""
    search = request.args.get("search", "")[:200]
    page = request.args.get("page", 1, type=int)
    found = store().jobs.summaries(_me(), search, page)
    return render_template("desk/jobs.html", page=found, search=search)


@desk.get("/job/<uuid:key>")
@open_to(*ROLES)
def job(key: object) -> str:
    """One job: what a person would say, then surface by surface."""
    view = _view(str(key))
    report = build_report(view)
    chapters = {section.key: section for section in report.sections}
    surfaces = [_surface_page(view, surface, chapters[surface.result.key]) for surface in view.surfaces]
    came_from = store().records.came_from(str(key))
    devices = {sign_in.id: sign_in for sign_in in store().accounts.sign_ins()}
    return render_template(
        "desk/job.html", job=view, report=report, surfaces=surfaces, writers=_writers(view, came_from, devices)
    )


@desk.get("/job/<uuid:key>/report.pdf")
@open_to(*ROLES)
def report_pdf(key: object) -> Response:
    """The report, made now from the records as they stand."""
    view = _view(str(key))
    report, content = build_report(view), io.BytesIO()
    draw_report(report, content, photos=store().photos.folder, paper="letter" if view.words.is_ip else "a4")
    return _pdf(content, report.file_stem)


@desk.get("/job/<uuid:key>/crew.pdf")
@open_to(*ROLES)
def crew_pdf(key: object) -> Response:
    """The crew sheet."""
    view = _view(str(key))
    sheet, content = build_crew_sheet(view), io.BytesIO()
    draw_crew_sheet(sheet, content, paper="letter" if view.words.is_ip else "a4")
    return _pdf(content, sheet.file_stem)


@desk.get("/job/<uuid:key>/photo/<digest>.jpg")
@open_to(*ROLES)
def photo(key: object, digest: str) -> Response:
    """A photo of that job, upright and without place data; small ones for lists."""
    if digest not in store().records.photos_of([_view(str(key)).job.key]):
        abort(404, "No such photo in this job.")
    small = request.args.get("small") is not None
    path = store().photos.thumbnail(digest) if small else store().photos.rendition(digest)
    if path is None:
        abort(404, "This photo has not been received yet.")
    return send_file(path, mimetype="image/jpeg")


@desk.route("/sign-in", methods=["GET", "POST"])
@open_to(ANYONE)
def sign_in() -> str | Answer | tuple[str, int]:
    """Name and password; wrong ones are throttled."""
    form = NameAndPassword()
    if not form.validate_on_submit():
        return render_template("desk/sign_in.html", form=form, title="Sign in", why="")
    label = (request.user_agent.string or "a browser")[:200]
    try:
        made = store().accounts.sign_in(
            form.name.data, form.password.data, kind="browser", label=label, address=request.remote_addr or ""
        )
    except SignInRefused as error:
        wait = error.retry_after_s
        why = "Name or password is wrong." if wait is None else f"Too many tries. Try again in {wait} seconds."
        page = render_template("desk/sign_in.html", form=form, title="Sign in", why=why)
        return page, 401 if wait is None else 429
    now_signed_in(made)
    answer = redirect(url_for("desk.jobs"))
    give_cookie(answer, made)  # type: ignore[arg-type]
    return answer


@desk.post("/sign-out")
@open_to(*ROLES)
def sign_out() -> Answer:
    """End this sign-in."""
    found = signed_in()
    if found is not None:
        store().accounts.revoke(found.id)
    answer = redirect(url_for("desk.sign_in"))
    take_cookie(answer)  # type: ignore[arg-type]
    return answer


@desk.route("/setup/<token>", methods=["GET", "POST"])
@open_to(ANYONE)
def setup(token: str) -> str | Answer:
    """The first account, made once at the address that the server printed."""
    if not store().accounts.is_first_token(token):
        abort(404, "There is an account already, or this is not the address that was printed.")
    form = NameAndPassword()
    why = ""
    if form.validate_on_submit():
        try:
            store().accounts.make_first(token, form.name.data, form.password.data)
        except AccountRefused as error:
            why = f"{error.field}: {error.allowed} is asked for."
        else:
            flash("The account is made. Sign in with it.")
            return redirect(url_for("desk.sign_in"))
    return render_template("desk/sign_in.html", form=form, title="Make the first account", why=why)


def _me() -> Account:
    found = signed_in()
    if found is None:
        abort(403)
    return found.account


def _view(key: str) -> JobView:
    """A job that one may see; others do not exist."""
    view = store().jobs.view(key) if store().accounts.may_see(_me(), key) else None
    if view is None:
        abort(404, "There is no such job, or it is not shared with you.")
    return view


def _surface_page(view: JobView, surface: SurfaceView, section: Section) -> SurfacePage:
    if not surface.result.bays:
        return SurfacePage(surface, section, None, ())
    chart = depth_chart(surface, view.job.bays[surface.result.key])
    return SurfacePage(surface, section, picture(chart), chart.notes)


def _writers(
    view: JobView, came_from: Mapping[str, tuple[str, str]], devices: Mapping[str, SignIn]
) -> list[tuple[str, str, int, str]]:
    """Who wrote how many records from which device, and when the last of them came."""
    found: dict[tuple[str, str], tuple[int, str]] = {}
    for record in view.job.records:
        at, sign_in = came_from.get(record.id, ("", ""))
        label = devices[sign_in].label if sign_in in devices else record.device
        number, last = found.get((record.by, label), (0, ""))
        found[record.by, label] = (number + 1, max(last, at))
    return [(by, label, number, last) for (by, label), (number, last) in sorted(found.items())]


def _pdf(content: io.BytesIO, stem: str) -> Response:
    content.seek(0)
    return send_file(content, mimetype="application/pdf", download_name=f"{stem}.pdf")
