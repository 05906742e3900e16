"""Who is signed in: the cookie that carries the token, read once a request."""

from typing import Final

from flask import Response, current_app, g, request

from fieldapp.store.accounts import LASTS_S
from fieldapp.store.people import SignIn
from fieldapp.store.store import Store

COOKIE: Final = "bayreckon"
#: Under this name the factory keeps the store in `app.extensions`.
EXTENSION: Final = "bayreckon"


def store() -> Store:
    """The store of this application."""
    found: Store = current_app.extensions[EXTENSION]
    return found


def signed_in() -> SignIn | None:
    """Who sends this request; None for nobody."""
    if "sign_in" not in g:
        token = request.cookies.get(COOKIE, "")
        g.sign_in = store().accounts.who(token) if token else None
    found: SignIn | None = g.sign_in
    return found


def now_signed_in(made: SignIn | None) -> None:
    """From here on in this request, this is who is signed in."""
    g.sign_in = made


def give_cookie(response: Response, made: SignIn) -> None:
    """Have the browser keep the token of a sign-in that was just made, out of reach of scripts."""
    seconds = int(LASTS_S[made.kind])
    response.set_cookie(COOKIE, made.token, seconds, path="/", secure=_is_secure(), httponly=True, samesite="Lax")


def take_cookie(response: Response) -> None:
    """Have the browser forget it."""
    response.delete_cookie(COOKIE, path="/", secure=_is_secure(), httponly=True, samesite="Lax")


def _is_secure() -> bool:
    return request.is_secure or bool(current_app.config["SESSION_COOKIE_SECURE"])
