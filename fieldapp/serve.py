"""The server: one process with many threads, which answers what was asked before it goes."""

import logging
import signal
import socket
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from threading import Event
from types import FrameType
from typing import Any, Final
from wsgiref.types import WSGIApplication

from waitress import create_server, wasyncore  # type: ignore[import-untyped]

from fieldapp.store.photos import MOST_BYTES
from fieldapp.store.store import Store

THREADS: Final = 16
#: Phones on slow links hold their connection for long; a body is collected whole before it takes a thread.
MOST_CONNECTIONS: Final = 1000
#: How long requests in flight are waited for after SIGTERM. [s]
PATIENCE_S: Final = 20.0
#: Where the first account is made; the token follows.
FIRST_ACCOUNT: Final = "/setup/"
LOOPBACK: Final = ("127.0.0.1", "::1", "localhost")


class CannotServeError(RuntimeError):
    """The address cannot be had; the message is a sentence for a person."""


def serve(
    folder: Path,
    bind: str,
    port: int,
    *,
    proxy: str | None = None,
    make_app: Callable[[Store], WSGIApplication] | None = None,
) -> None:
    """Serve a store until SIGTERM or Ctrl-C.

    Where there is no account yet, a one-time address is printed at which the first is made; there is no default password.

    Args:
        folder: The store; made where it is missing.
        bind: Address to listen on.
        port: Port to listen on; 0 for any that is free.
        proxy: Address of the TLS proxy in front, whose X-Forwarded headers are then believed.
        make_app: Makes the application; default: that of this project.
    Raises:
        CannotServeError: the address cannot be had.
        DiskError, NewerStoreError: the store cannot be opened.
    """
    with Store(folder) as store, listening(bind, port) as listener:
        app = (make_app or project_app)(store)
        address = address_of(listener)

        def ready() -> None:
            print(f"Bayreckon serves {store.folder} at {address} (stop with Ctrl-C)", flush=True)
            token = store.accounts.first_account_token()
            if token is not None:
                print(f"Make the first account, once, at {address}{FIRST_ACCOUNT}{token}", flush=True)

        run(app, listener, ready, proxy=proxy)


def run(
    app: WSGIApplication, listener: socket.socket, ready: Callable[[], None] | None = None, *, proxy: str | None = None
) -> None:
    """Answer requests until SIGTERM or SIGINT; then take no more, answer those in flight, and return.

    `ready` is called when both are so: a server that says where it is can also be told to stop.
    """
    logging.getLogger("waitress.queue").setLevel(logging.ERROR)  # a queue is no fault: fifty phones make one
    connections: dict[int, Any] = {}
    believed = {"trusted_proxy": proxy, "trusted_proxy_headers": "x-forwarded-for x-forwarded-proto x-forwarded-host"}
    server = create_server(
        app,
        map=connections,
        sockets=[listener],
        threads=THREADS,
        connection_limit=MOST_CONNECTIONS,
        max_request_body_size=MOST_BYTES + 1_000_000,
        asyncore_use_poll=True,
        clear_untrusted_proxy_headers=True,
        ident=None,
        **(believed if proxy else {}),
    )
    with _told_to_stop(server.pull_trigger) as stop:
        if ready is not None:
            ready()
        while not stop.is_set():
            wasyncore.loop(timeout=1.0, use_poll=True, map=connections, count=1)
        # The listening socket goes first, so that a client is refused rather than left hanging.
        wasyncore.dispatcher.close(server)
        until = time.monotonic() + PATIENCE_S
        while time.monotonic() < until and _in_flight(server.active_channels):
            wasyncore.loop(timeout=0.1, use_poll=True, map=connections, count=1)
        server.task_dispatcher.shutdown()
        server.trigger.close()
        wasyncore.close_all(connections)


def _in_flight(channels: dict[int, Any]) -> bool:
    """True while a request is being received, answered or sent."""
    return any(
        channel.requests or channel.request is not None or channel.total_outbufs_len for channel in channels.values()
    )


@contextmanager
def _told_to_stop(wake: Callable[[], None]) -> Iterator[Event]:
    stop = Event()

    def note(_number: int, _frame: FrameType | None) -> None:
        stop.set()
        wake()

    before = {number: signal.signal(number, note) for number in (signal.SIGTERM, signal.SIGINT)}
    try:
        yield stop
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)


@contextmanager
def listening(bind: str, port: int) -> Iterator[socket.socket]:
    """A socket that listens, or a sentence why not.

    Raises:
        CannotServeError: the address cannot be had.
    """
    try:
        family, kind, _, _, where = socket.getaddrinfo(bind, port, type=socket.SOCK_STREAM, flags=socket.AI_PASSIVE)[0]
        listener = socket.socket(family, kind)
    except OSError as error:
        raise CannotServeError(f"{bind} is no address of this machine: {error.strerror or error}") from error
    with listener:
        if sys.platform != "win32":
            listener.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        try:
            listener.bind(where)
            listener.listen(1024)
        except OSError as error:
            raise CannotServeError(f"port {port} at {bind} cannot be had: {error.strerror or error}") from error
        yield listener


def address_of(listener: socket.socket) -> str:
    """How a browser, or a phone where one can, reaches it."""
    host, port = listener.getsockname()[:2]
    if host in ("0.0.0.0", "::"):
        host = _outward(listener.family) or "localhost"
    return f"http://{f'[{host}]' if ':' in host else host}:{port}"


def is_reachable(address: str) -> bool:
    """True where another machine can reach this address."""
    return not any(address.startswith((f"http://{host}:", f"http://[{host}]:")) for host in LOOPBACK)


def _outward(family: socket.AddressFamily) -> str | None:
    """This machine's address towards others. Nothing is sent: connecting a datagram socket only picks the way."""
    elsewhere = "2001:db8::1" if family == socket.AF_INET6 else "192.0.2.1"
    with socket.socket(family, socket.SOCK_DGRAM) as probe:
        try:
            probe.connect((elsewhere, 9))
        except OSError:
            return None
        return str(probe.getsockname()[0])


def project_app(store: Store) -> WSGIApplication:
    """The application of this project; imported when it is asked for, since that loads every page."""
    from fieldapp.web.app import create_app  # noqa: PLC0415

    app: WSGIApplication = create_app(store)
    return app
