"""A job file: one record a line (JSON Lines, UTF-8). Lines in; the job, and each refused line with its reason, out."""

import json
from collections import Counter, defaultdict
from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import Any, Final

from fieldapp.records.fields import shown
from fieldapp.records.fold import NoJobError, fold
from fieldapp.records.job import Job
from fieldapp.records.record import Record, Refusal, read_record

#: Longest line that can be a record. [bytes]
LONGEST_LINE: Final = 1_000_000
#: Largest file that can be a job: a thousand times a large one. [bytes]
LARGEST_FILE: Final = 100_000_000


class NothingToReckonError(ValueError):
    """A file that holds no job; the message is one sentence for a person."""


@dataclass(frozen=True, slots=True)
class Loaded:
    """A job from a file, and what was refused on the way, in order of lines."""

    job: Job
    refused: tuple[Refusal, ...]


def load(lines: Iterable[bytes]) -> Loaded:
    """Read a job file.

    One bad record never costs the others. Records of another job are refused by line; which job the file holds is said by
    its records of kind `job` (by the most records, where several have one).

    Raises:
        NothingToReckonError: where nothing in it is a job.
    """
    records: list[tuple[int, Record]] = []
    refused: list[Refusal] = []
    contents: dict[str, set[bytes]] = defaultdict(set)
    lines_seen = 0
    for number, line in enumerate(lines, 1):
        text = line.strip()
        if number == 1:
            text = text.removeprefix(b"\xef\xbb\xbf")
        if not text:
            continue
        lines_seen += 1
        found = _read_line(text)
        if isinstance(found, Record):
            records.append((number, found))
            contents[found.id].add(found.canonical)
        else:
            refused.append(replace(found, line=number))
            contents[found.id].add(text)
    if not lines_seen:
        raise NothingToReckonError("is empty")
    if not records:
        first = refused[0]
        raise NothingToReckonError(f"holds no record that can be read; {first.sentence()}")
    job_key = _which_job([record for _, record in records], refused)
    refused.extend(
        Refusal(record.id, "job", record.job, f"the job of this file, {job_key}", number)
        for number, record in records
        if record.job != job_key
    )
    records = [(number, record) for number, record in records if record.job == job_key]
    clashing = {record_id for record_id, different in contents.items() if record_id and len(different) > 1}
    try:
        job = fold((record for _, record in records), clashing)
    except NoJobError as error:
        raise NothingToReckonError(f"holds nothing to reckon: {error}") from error
    lines_of: dict[str, list[int]] = defaultdict(list)
    for number, record in records:
        lines_of[record.id].append(number)
    refused.extend(replace(refusal, line=number) for refusal in job.refused for number in lines_of[refusal.id])
    return Loaded(job, tuple(sorted(refused, key=lambda refusal: (refusal.line or 0, refusal.field))))


def _read_line(text: bytes) -> Record | Refusal:
    if len(text) > LONGEST_LINE:
        return Refusal("", "record", f"{len(text)} bytes", f"at most {LONGEST_LINE} bytes")
    try:
        value: Any = _DECODER.decode(text.decode("utf-8"))
    except UnicodeDecodeError:
        return Refusal("", "record", "bytes that are not UTF-8", "a line of UTF-8 text")
    except RecursionError:
        return Refusal("", "record", "values nested too deeply", "a record as documented")
    except ValueError as error:
        return Refusal("", "record", shown(text.decode("utf-8", "replace")), f"one JSON object ({error})")
    return read_record(value)


def _no_name_twice(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    """Of two values under one name nobody can say which is meant."""
    found = dict(pairs)
    if len(found) != len(pairs):
        name = next(name for name, times in Counter(name for name, _ in pairs).items() if times > 1)
        raise ValueError(f"the name {name!r} stands twice")
    return found


_DECODER: Final = json.JSONDecoder(object_pairs_hook=_no_name_twice)


def _which_job(records: list[Record], refused: list[Refusal]) -> str:
    told = {record.job for record in records if record.kind == "job"}
    if not told:
        reason = "no record of kind 'job' says which job this is"
        if refused:
            reason += f"; refused first: {refused[0].sentence()}"
        raise NothingToReckonError(f"holds nothing to reckon: {reason}")
    sizes = Counter(record.job for record in records if record.job in told)
    return min(sizes, key=lambda key: (-sizes[key], key))
