"""The command `bayreckon`: reads files and arguments, calls, and replies. Heavy libraries are imported where they are used.

Exit 0: done, every record taken. 3: done, some records refused (listed on standard error). 2: nothing to reckon, or wrong
usage; one clear line on standard error.
"""

import argparse
import io
import json
import os
import sys
import tempfile
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import NoReturn

from fieldapp import __version__
from fieldapp.reckoning.results import as_json
from fieldapp.records.file import LARGEST_FILE, Loaded, NothingToReckonError, load
from fieldapp.report.build import build_crew_sheet, build_report, view_of
from fieldapp.report.terminal import told
from fieldapp.report.view import JobView

DONE, NOTHING, SOME_REFUSED = 0, 2, 3
MOST_TOLD = 50


class _Parser(argparse.ArgumentParser):
    """Wrong usage in one line."""

    def error(self, message: str) -> NoReturn:
        """One sentence, exit 2."""
        self.exit(NOTHING, f"bayreckon: {message}; see 'bayreckon --help'\n")


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; returns its exit status."""
    parser = _parser()
    options = parser.parse_args(arguments)
    try:
        status: int = options.run(options)
        sys.stdout.flush()
    except (NothingToReckonError, _ToldError) as error:
        print(f"bayreckon: {error}", file=sys.stderr)
        return NOTHING
    except BrokenPipeError:
        # The reader of our output has gone (`| head`): not an error of ours.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return DONE
    return status


def _parser() -> argparse.ArgumentParser:
    parser = _Parser(prog="bayreckon", description="Depth readings of sprayed foam, reckoned bay by bay and reported.")
    parser.add_argument("--version", action="version", version=f"bayreckon {__version__}")
    commands = parser.add_subparsers(title="commands", required=True, metavar="COMMAND", parser_class=_Parser)
    reckon = commands.add_parser("reckon", help="print the result of a job file")
    reckon.add_argument("job", type=Path, metavar="JOB.jsonl", help="a job file: one record a line")
    reckon.add_argument("--json", action="store_true", help="print the whole reckoning as JSON")
    reckon.set_defaults(run=_reckon)
    report = commands.add_parser("report", help="write the report of a job file as PDF")
    report.add_argument(
        "job", type=Path, metavar="JOB.jsonl", help="a job file; its photos lie in the folder JOB beside it"
    )
    report.add_argument(
        "-o", "--output", type=Path, metavar="OUT.pdf", help="file or folder to write to; default: a name from the job"
    )
    report.add_argument("--paper", choices=("letter", "a4"), help="default: letter for jobs in inches, else a4")
    report.add_argument("--crew", action="store_true", help="the crew sheet instead: touch-up by bay, one page")
    report.set_defaults(run=_report)
    demo = commands.add_parser("demo", help="a demonstration on the sample jobs; nothing else to set up")
    demo.add_argument("--folder", type=Path, help="a new folder for it; default: a temporary one")
    demo.set_defaults(run=_demo)
    serve = commands.add_parser("serve", help="serve a store to phones and desks")
    serve.add_argument("--data", type=Path, required=True, metavar="DIR", help="the store; made where it is missing")
    serve.add_argument(
        "--proxy", metavar="ADDRESS", help="address of the TLS proxy in front, whose headers are believed"
    )
    serve.set_defaults(run=_serve)
    for server in (demo, serve):
        server.add_argument(
            "--bind", default="127.0.0.1", metavar="ADDRESS", help="address to listen on; default: %(default)s"
        )
        server.add_argument("--port", type=int, default=8765, help="default: %(default)s; 0 for any that is free")
    taken = commands.add_parser("import", help="take a job file, with its photos, into a store")
    taken.add_argument("job", type=Path, metavar="JOB.jsonl")
    taken.set_defaults(run=_import)
    given = commands.add_parser("export", help="write a job of a store as a job file, its photos beside it")
    given.add_argument("key", metavar="KEY", help="the job's id")
    given.add_argument("-o", "--output", type=Path, required=True, metavar="JOB.jsonl")
    given.set_defaults(run=_export)
    for storing in (taken, given):
        storing.add_argument("--data", type=Path, required=True, metavar="DIR", help="the store")
    backup = commands.add_parser("backup", help="copy a store, which may be in use, and verify the copy")
    backup.add_argument("--data", type=Path, required=True, metavar="DIR", help="the store")
    backup.add_argument("to", type=Path, metavar="NEW_FOLDER")
    backup.set_defaults(run=_backup)
    restore = commands.add_parser("restore", help="make a store of a backup, after verifying it")
    restore.add_argument("backup", type=Path, metavar="BACKUP")
    restore.add_argument("--data", type=Path, required=True, metavar="NEW_FOLDER")
    restore.set_defaults(run=_restore)
    return parser


def _load(path: Path) -> Loaded:
    try:
        size = path.stat().st_size
        if path.is_dir():
            raise NothingToReckonError(f"{path} is a folder; a job file is asked for")
        if size > LARGEST_FILE:
            raise NothingToReckonError(
                f"{path} is {size // 1_000_000} MB; a job file has at most {LARGEST_FILE // 1_000_000} MB"
            )
        with path.open("rb") as lines:
            return load(lines)
    except OSError as error:
        raise NothingToReckonError(f"{path} cannot be read: {error.strerror or error}") from error
    except NothingToReckonError as error:
        text = str(error)
        raise NothingToReckonError(text if text.startswith(str(path)) else f"{path} {text}") from error


def _tell_refused(view: JobView) -> int:
    if not view.refused:
        return DONE
    for refusal in view.refused[:MOST_TOLD]:
        print(f"bayreckon: refused: {refusal.sentence()}", file=sys.stderr)
    if len(view.refused) > MOST_TOLD:
        print(f"bayreckon: and {len(view.refused) - MOST_TOLD} more refused; --json lists them all", file=sys.stderr)
    return SOME_REFUSED


def _reckon(options: argparse.Namespace) -> int:
    view = view_of(_load(options.job))
    if options.json:
        refused = [refusal.as_json() for refusal in view.refused]
        plain = as_json(view.result, refused, view.digest)
        print(json.dumps(plain, ensure_ascii=False, allow_nan=False, indent=1))
    else:
        for line in told(view):
            print(line)
    return _tell_refused(view)


def _report(options: argparse.Namespace) -> int:
    # Half a second of reportlab and Pillow, which only paper needs.
    from fieldapp.report.drawing.pages import draw_crew_sheet, draw_report  # noqa: PLC0415

    view = view_of(_load(options.job))
    paper = options.paper or ("letter" if view.words.is_ip else "a4")
    sheet = build_crew_sheet(view) if options.crew else None
    report = None if options.crew else build_report(view)
    stem = (sheet or report).file_stem  # type: ignore[union-attr]
    path: Path = options.output or Path(f"{stem}.pdf")
    if path.is_dir():
        path = path / f"{stem}.pdf"
    content = io.BytesIO()
    if sheet is not None:
        draw_crew_sheet(sheet, content, paper=paper)
    elif report is not None:
        draw_report(report, content, photos=options.job.with_suffix(""), paper=paper)
    _write(path, content.getbuffer())
    print(path)
    return _tell_refused(view)


class _ToldError(Exception):
    """Anything that ends a command with one sentence."""


@contextmanager
def _one_sentence() -> Iterator[None]:
    """What the store and the server say of themselves, as the command's one line."""
    from fieldapp.demo import DemoError  # noqa: PLC0415
    from fieldapp.serve import CannotServeError  # noqa: PLC0415
    from fieldapp.store.backup import BackupError  # noqa: PLC0415
    from fieldapp.store.migrations import NewerStoreError  # noqa: PLC0415

    try:
        yield
    except (DemoError, CannotServeError, BackupError, NewerStoreError, OSError) as error:
        raise _ToldError(str(error)) from error


def _demo(options: argparse.Namespace) -> int:
    with _one_sentence():
        from fieldapp.demo import demo  # noqa: PLC0415

        demo(options.bind, options.port, options.folder)
    return DONE


def _serve(options: argparse.Namespace) -> int:
    with _one_sentence():
        from fieldapp.serve import serve  # noqa: PLC0415

        serve(options.data, options.bind, options.port, proxy=options.proxy)
    return DONE


def _import(options: argparse.Namespace) -> int:
    with _one_sentence():
        from fieldapp.store.jobfile import import_job  # noqa: PLC0415
        from fieldapp.store.store import Store  # noqa: PLC0415

        with Store(options.data) as store:
            done = import_job(store, options.job)
    print(f"job {done.job}: {done.accepted} records taken, {done.already_there} were there already")
    print(f"photos: {done.photos_stored} taken, {done.photos_already_there} were there already")
    for refusal in done.refused[:MOST_TOLD]:
        print(f"bayreckon: refused: {refusal.sentence()}", file=sys.stderr)
    for digest in done.photos_missing:
        print(f"bayreckon: the photo {digest} does not lie beside the job file", file=sys.stderr)
    for digest, error in done.photos_refused:
        print(f"bayreckon: the photo {digest} is refused: {error}", file=sys.stderr)
    return SOME_REFUSED if done.refused or done.photos_refused else DONE


def _export(options: argparse.Namespace) -> int:
    with _one_sentence():
        from fieldapp.store.jobfile import export_job  # noqa: PLC0415
        from fieldapp.store.store import Store  # noqa: PLC0415

        with Store(options.data) as store:
            try:
                done = export_job(store, options.key, options.output)
            except KeyError as error:
                raise _ToldError(f"there is no job {options.key} in {options.data}") from error
    missing = f", {len(done.photos_missing)} never received" if done.photos_missing else ""
    print(f"{options.output}: {done.records} records, {done.photos} photos{missing}")
    return DONE


def _backup(options: argparse.Namespace) -> int:
    with _one_sentence():
        from fieldapp.store.backup import backup  # noqa: PLC0415

        done = backup(options.data, options.to)
    print(f"{options.to}: {done.records} records, {done.photos} photos, verified")
    for digest in done.photos_damaged:
        print(f"bayreckon: the photo {digest} is damaged in the store and not in the backup", file=sys.stderr)
    return SOME_REFUSED if done.photos_damaged else DONE


def _restore(options: argparse.Namespace) -> int:
    with _one_sentence():
        from fieldapp.store.backup import restore  # noqa: PLC0415

        done = restore(options.backup, options.data)
    print(f"{options.data}: {done.records} records, {done.photos} photos")
    return DONE


def _write(path: Path, content: memoryview) -> None:
    """Written aside and renamed: a full disk or a kill leaves what was there whole."""
    try:
        handle, aside = tempfile.mkstemp(dir=path.parent, suffix=".part")
        try:
            with os.fdopen(handle, "wb") as out:
                out.write(content)
            os.chmod(aside, 0o644)
            os.replace(aside, path)
        except BaseException:
            os.unlink(aside)
            raise
    except OSError as error:
        raise NothingToReckonError(f"{path} cannot be written: {error.strerror or error}") from error


if __name__ == "__main__":
    sys.exit(main())
