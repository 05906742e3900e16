"""The application: what is asked of every request and answer, and which pages there are."""

import os
import secrets
from collections.abc import Mapping
from typing import Any, Final

from flask import Flask, Response, render_template, request
from flask_wtf.csrf import CSRFError, CSRFProtect  # type: ignore[import-untyped]
from werkzeug.exceptions import HTTPException

from fieldapp.assets import asset_dir
from fieldapp.store.photos import MOST_BYTES
from fieldapp.store.store import Store
from fieldapp.web.desk import desk
from fieldapp.web.doors import guard
from fieldapp.web.session import EXTENSION
from fieldapp.web.sync import http_error_reply, sync

KEY_FILE: Final = "cookie-key"
HEADERS: Final[Mapping[str, str]] = {
    # Nothing inline, nothing from elsewhere, no frame around us.
    "Content-Security-Policy": (
        "default-src 'self'; img-src 'self' blob:; object-src 'none'; base-uri 'none'; frame-ancestors 'none'; "
        "form-action 'self'"
    ),
    "X-Content-Type-Options": "nosniff",
    # CSRF protection over HTTPS looks at the referrer, so it is not withheld from ourselves.
    "Referrer-Policy": "same-origin",
    "Cross-Origin-Opener-Policy": "same-origin",
}


def create_app(store: Store, settings: Mapping[str, Any] | None = None) -> Flask:
    """Make the application for a store.

    Args:
        store: Where everything is kept.
        settings: Flask's own settings, such as TRUSTED_HOSTS or SESSION_COOKIE_SECURE.
    """
    app = Flask(__name__, template_folder=str(asset_dir("templates")), static_folder=str(asset_dir("static")))
    app.config.update(
        SECRET_KEY=_cookie_key(store),
        SESSION_COOKIE_NAME="bayreckon-form",
        SESSION_COOKIE_HTTPONLY=True,
        SESSION_COOKIE_SAMESITE="Lax",
        SESSION_COOKIE_SECURE=False,
        MAX_CONTENT_LENGTH=MOST_BYTES,
        MAX_FORM_MEMORY_SIZE=1_000_000,
        MAX_FORM_PARTS=1000,
        # A form may lie open on a desk for days; the token still belongs to its session.
        WTF_CSRF_TIME_LIMIT=None,
    )
    app.config.update(settings or {})
    app.extensions[EXTENSION] = store
    app.jinja_env.trim_blocks = app.jinja_env.lstrip_blocks = True
    CSRFProtect(app)
    app.before_request(guard)
    app.after_request(_headers)
    app.register_error_handler(HTTPException, _refused)
    app.register_blueprint(sync)
    app.register_blueprint(desk)
    return app


def _cookie_key(store: Store) -> bytes:
    """The key that signs form cookies: made once, readable by the service alone."""
    path = store.folder / KEY_FILE
    try:
        handle = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600)
    except FileExistsError:
        return path.read_bytes()
    with os.fdopen(handle, "wb") as out:
        out.write(secrets.token_bytes(32))
    return path.read_bytes()


def _headers(response: Response) -> Response:
    for name, value in HEADERS.items():
        response.headers.setdefault(name, value)
    if request.is_secure:
        response.headers.setdefault("Strict-Transport-Security", "max-age=31536000")
    if request.endpoint != "static":
        response.headers.setdefault("Cache-Control", "no-store")
    return response


def _refused(error: HTTPException) -> Response | tuple[str, int]:
    """A page for people, JSON for what calls under /api."""
    if request.path.startswith("/api/"):
        return http_error_reply(error)
    told = "This page was open for too long, or came from another site. Go back, load it again and send it once more."
    text = told if isinstance(error, CSRFError) else error.description or ""
    return render_template("desk/refused.html", title=error.name or "Refused", text=text), error.code or 500
