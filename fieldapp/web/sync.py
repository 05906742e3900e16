"""What phones call, under /api: JSON in and out, refusals too; never a redirect to a page. See DEVELOPERS.md, 'Sync'."""

import time
from typing import Any, Final, cast

from flask import Blueprint, Response, jsonify, request
from flask_wtf.csrf import CSRFError, generate_csrf  # type: ignore[import-untyped]
from werkzeug.exceptions import HTTPException

from fieldapp.records.fields import SHA256, Text
from fieldapp.store.decoding import NotJsonError, decode
from fieldapp.store.disk import DiskError
from fieldapp.store.moments import moment
from fieldapp.store.people import SignIn
from fieldapp.store.photos import MOST_BYTES, PhotoRefused
from fieldapp.store.throttle import SignInRefused
from fieldapp.web.session import give_cookie, now_signed_in, signed_in, store, take_cookie

#: The shape of a batch that is written today, and the oldest that is still taken.
SCHEMA: Final = 1
LEAST_SCHEMA: Final = 1
MOST_RECORDS: Final = 500
#: Largest bodies. [bytes]
LARGEST_BATCH: Final = 16_000_000
LARGEST_SIGN_IN: Final = 10_000

sync = Blueprint("sync", __name__, url_prefix="/api")


class Told(Exception):  # noqa: N818 (an answer that ends the call, not a fault)
    """A refusal as the client reads it: a code that stays, and a sentence for the person."""

    def __init__(self, status: int, code: str, message: str, **more: Any) -> None:
        super().__init__(message)
        self.status = status
        self.code = code
        self.more = more


def error_reply(status: int, code: str, message: str, **more: Any) -> Response:
    """The one shape of all refusals."""
    response = jsonify({"error": code, "message": message, **more})
    response.status_code = status
    return response


def somebody() -> SignIn:
    """Who is signed in.

    Raises:
        Told: 401, for nobody.
    """
    found = signed_in()
    if found is None:
        raise Told(401, "not-signed-in", "Nobody is signed in here. Sign in, and what is waiting will be sent.")
    return found


def _session() -> dict[str, Any]:
    found = signed_in()
    account = found.account if found else None
    return {
        "account": None
        if account is None
        else {name: getattr(account, name) for name in ("id", "name", "role", "firm")},
        "sign_in": found.id if found else None,
        "csrf": generate_csrf(),
        "server_time": moment(time.time()),
        "schema": SCHEMA,
        "least_schema": LEAST_SCHEMA,
        "store": store().identity,
    }


@sync.get("/session")
def session() -> Response:
    """Who is signed in, a fresh CSRF token, the server's time and identity, and the shapes it takes."""
    return jsonify(_session())


@sync.post("/sign-in")
def sign_in() -> Response:
    """Sign a device in for long. What was signed in on it before is signed out."""
    body = _json(LARGEST_SIGN_IN)
    name, password = _text(body, "name", 200), _text(body, "password", 2000)
    label = _text(body, "device_label", 200)
    before = signed_in()
    try:
        made = store().accounts.sign_in(name, password, kind="device", label=label, address=request.remote_addr or "")
    except SignInRefused as error:
        if error.retry_after_s is None:
            raise Told(401, "wrong-name-or-password", "Name or password is wrong.") from error
        wait = f"Too many tries. Try again in {error.retry_after_s} seconds."
        raise Told(429, "too-many-tries", wait, retry_after_s=error.retry_after_s) from error
    if before is not None:
        store().accounts.revoke(before.id)
    now_signed_in(made)
    reply = jsonify(_session())
    give_cookie(reply, made)
    return reply


@sync.post("/sign-out")
def sign_out() -> Response:
    """End this device's sign-in. Nothing on the device is touched."""
    before = signed_in()
    if before is not None:
        store().accounts.revoke(before.id)
    now_signed_in(None)
    reply = jsonify(_session())
    take_cookie(reply)
    return reply


@sync.post("/batch")
def batch() -> Response:
    """Take up to 500 records; answers, on the disk, what became of each, in their order."""
    sender = somebody()
    body = _json(LARGEST_BATCH)
    schema = body.get("schema")
    if not isinstance(schema, int) or isinstance(schema, bool) or not LEAST_SCHEMA <= schema <= SCHEMA:
        raise Told(400, "schema", f"Batches of schema {LEAST_SCHEMA} to {SCHEMA} are taken here; update the app.")
    device, records = _text(body, "device", 200), body.get("records")
    if not isinstance(records, list) or len(records) > MOST_RECORDS:
        raise Told(400, "records", f"A batch holds a list of at most {MOST_RECORDS} records.")
    outcomes = store().records.accept(records, sender.account, sign_in=sender.id, counted=True)
    return jsonify(
        {"outcomes": [outcome.as_json() for outcome in outcomes], "receipt": store().records.receipt(device)}
    )


@sync.get("/changes")
def changes() -> Response:
    """Records that came after a cursor, of the jobs that this account may see."""
    reader = somebody()
    after, limit = _whole("after", 0, 0, 2**53), _whole("limit", MOST_RECORDS, 1, MOST_RECORDS)
    pulled = store().records.pull(reader.account, after, limit, request.args.get("job"))
    return jsonify(
        {
            "records": pulled.records,
            "cursor": pulled.cursor,
            "more": pulled.more,
            "jobs": store().accounts.jobs_shared_with(reader.account),
        }
    )


@sync.route("/photo/<digest>", methods=["HEAD"])
def has_photo(digest: str) -> Response:
    """200 with its length where the photo is here, 404 where it is not."""
    somebody()
    found = store().photos.has(_digest(digest))
    response = Response(status=200 if found is not None else 404)
    if found is not None:
        response.content_length = found
    return response


@sync.put("/photo/<digest>")
def put_photo(digest: str) -> Response:
    """Take a photo; 201 when it is on the disk, 200 where it was already."""
    somebody()
    _digest(digest)
    if request.content_length is None:
        raise Told(411, "length", "Say how long the photo is (Content-Length).")
    if request.content_length > MOST_BYTES:
        raise Told(413, "too-large", f"A photo has at most {MOST_BYTES} bytes.")
    state = store().photos.put(digest, cast("Any", request.stream), request.content_length)
    response = jsonify({"state": state})
    response.status_code = 201 if state == "stored" else 200
    return response


@sync.before_request
def only_from_here() -> None:
    """What another site has a browser send is refused before anything is read; browsers say so themselves."""
    if request.method in ("POST", "PUT") and request.headers.get("Sec-Fetch-Site") == "cross-site":
        raise Told(403, "other-site", "This call came from another site.")


@sync.after_request
def not_kept(response: Response) -> Response:
    """Answers about a person's work are kept in no cache."""
    response.headers["Cache-Control"] = "no-store"
    return response


@sync.errorhandler(Told)
def _told(error: Told) -> Response:
    response = error_reply(error.status, error.code, str(error), **error.more)
    if "retry_after_s" in error.more:
        response.headers["Retry-After"] = str(error.more["retry_after_s"])
    return response


@sync.errorhandler(PhotoRefused)
def _photo_refused(error: PhotoRefused) -> Response:
    return error_reply(422, "photo", f"Not taken: {error}", found=error.found, allowed=error.allowed)


@sync.errorhandler(DiskError)
def _no_room(_error: DiskError) -> Response:
    message = "The server's disk took none of this. It stays on the device; send it again later."
    response = error_reply(507, "no-room", message)
    response.headers["Retry-After"] = "60"
    return response


@sync.errorhandler(CSRFError)
def _csrf(_error: CSRFError) -> Response:
    return error_reply(400, "csrf", "The token of this session is missing or old. Call /api/session and try again.")


@sync.errorhandler(HTTPException)
def _refused(error: HTTPException) -> Response:
    return http_error_reply(error)


def http_error_reply(error: HTTPException) -> Response:
    """Any other refusal as JSON: for the application's own handlers, where a path under /api fits no call."""
    code = (error.name or "error").lower().replace(" ", "-")
    return error_reply(error.code or 500, code, error.description or error.name)


def _json(largest: int) -> dict[str, Any]:
    if request.mimetype != "application/json":
        raise Told(415, "not-json", "Send JSON (Content-Type: application/json).")
    if (request.content_length or 0) > largest:
        raise Told(413, "too-large", f"This call takes at most {largest} bytes.")
    try:
        body, doubled = decode(request.get_data(cache=False))
    except NotJsonError as error:
        raise Told(400, "not-json", f"This is no JSON: {error}.") from error
    if not isinstance(body, dict):
        raise Told(400, "not-json", "Send a JSON object.")
    if isinstance(body.get("records"), list):
        body["records"] = [doubled.refused_or(record) for record in body["records"]]
    return body


def _text(body: dict[str, Any], name: str, most: int) -> str:
    found = body.get(name)
    if problem := Text(1, most).check(found, name):
        raise Told(400, name.replace("_", "-"), f"{name}: {problem.allowed} is asked for.")
    return str(found)


def _whole(name: str, default: int, low: int, high: int) -> int:
    found = request.args.get(name)
    if found is None:
        return default
    if not found.isascii() or not found.isdigit() or len(found) > 16 or not low <= int(found) <= high:
        raise Told(400, name, f"{name}: a whole number, {low} to {high}, is asked for.")
    return int(found)


def _digest(text: str) -> str:
    if not SHA256.fullmatch(text):
        raise Told(400, "digest", "A photo is named by its SHA-256 in 64 lower-case hex digits.")
    return text
