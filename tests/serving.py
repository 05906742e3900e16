"""The real server in a thread or in a process of its own, for tests over HTTP."""

import logging
import os
import signal
import socket
import subprocess
import sys
import threading
import time
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from wsgiref.types import WSGIApplication

from waitress import create_server, wasyncore  # type: ignore[import-untyped]

from tests.sheets import ROOT


@contextmanager
def served(app: WSGIApplication) -> Iterator[int]:
    """Waitress in a thread of this process, on a free port of loopback."""
    listener = socket.create_server(("127.0.0.1", 0), backlog=256)
    connections: dict[int, object] = {}
    logging.getLogger("waitress.queue").setLevel(logging.ERROR)
    server = create_server(app, map=connections, sockets=[listener], threads=8)
    stop = threading.Event()

    def loop() -> None:
        while not stop.is_set():
            wasyncore.loop(timeout=0.5, map=connections, count=1)

    thread = threading.Thread(target=loop)
    thread.start()
    try:
        yield listener.getsockname()[1]
    finally:
        stop.set()
        server.pull_trigger()
        thread.join()
        server.task_dispatcher.shutdown()
        server.trigger.close()
        wasyncore.close_all(connections)
        listener.close()


@contextmanager
def child(*arguments: object, **environment: str) -> Iterator[subprocess.Popen[str]]:
    """A Python of its own that runs one of the tests' own programs; killed, if it still lives, at the end."""
    process = subprocess.Popen(
        [sys.executable, "-W", "error", *map(str, arguments)],
        cwd=ROOT,
        env={**os.environ, "PYTHONPATH": str(ROOT), **environment},
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
    )
    try:
        yield process
    finally:
        with suppress(ProcessLookupError):
            process.send_signal(signal.SIGKILL)
        process.wait()
        for pipe in (process.stdin, process.stdout):
            if pipe is not None:
                with suppress(BrokenPipeError):
                    pipe.close()


def wait_for(path: Path, seconds: float = 10.0) -> str:
    """The text of a file that another process writes."""
    until = time.monotonic() + seconds
    while time.monotonic() < until:
        if path.exists() and (text := path.read_text()):
            return text
        time.sleep(0.005)
    raise TimeoutError(path)
