"""Who may use which page: every view says so, and a request to one that does not is refused."""

from collections.abc import Callable
from typing import Any, Final, TypeVar

from flask import abort, current_app, redirect, request, url_for
from werkzeug.wrappers import Response

from fieldapp.store.people import ROLES
from fieldapp.web.session import signed_in

View = TypeVar("View", bound=Callable[..., Any])
ANYONE: Final = "anyone"
#: Calls under /api answer for themselves, in JSON; files of the app itself hold nothing of anyone's.
OPEN_ENDPOINTS: Final = ("sync.", "static")


def open_to(*roles: str) -> Callable[[View], View]:
    """Say which roles may use a view; `ANYONE` for those without a sign-in too."""
    if not roles or not set(roles) <= {*ROLES, ANYONE}:
        raise ValueError(f"roles of {ROLES} or '{ANYONE}' are asked for, found {roles}")

    def note(view: View) -> View:
        view.open_to = roles  # type: ignore[attr-defined]
        return view

    return note


def guard() -> Response | None:
    """Before every request: nobody gets in where it is not said that they may."""
    endpoint = request.endpoint
    if endpoint is None or endpoint.startswith(OPEN_ENDPOINTS):
        return None
    roles: tuple[str, ...] = getattr(current_app.view_functions[endpoint], "open_to", ())
    if ANYONE in roles:
        return None
    found = signed_in()
    if found is None:
        return redirect(url_for("desk.sign_in"))
    if found.account.role not in roles:
        abort(403, "This page is not for your role.")
    return None
