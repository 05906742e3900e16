"""JSON from outside: text in, values out; an object that says one name twice is found out, since nobody knows what it means."""

import json
from collections import Counter
from typing import Any, Final

from fieldapp.records.record import Refusal

#: Whole numbers longer than this are no numbers of ours, and Python would refuse the whole text for one. [digits]
_LONGEST_WHOLE: Final = 400


class NotJsonError(ValueError):
    """Text that is no JSON; the message says where."""


def decode(text: bytes) -> tuple[Any, "Doubled"]:
    """A JSON value, and the objects in it that say a name twice.

    NaN and infinities pass here, so that they cost their own record and not the batch; a record with one is refused.

    Raises:
        NotJsonError: no UTF-8, no JSON, or nested too deeply.
    """
    doubled = Doubled()
    try:
        letters = text.decode("utf-8")
        try:
            value = json.loads(letters, object_pairs_hook=doubled.note)
        except json.JSONDecodeError:
            raise
        except ValueError:
            # A whole number of thousands of digits. Rare, so the slower reading of numbers is for this alone.
            doubled = Doubled()
            value = json.loads(letters, object_pairs_hook=doubled.note, parse_int=_whole)
    except UnicodeDecodeError as error:
        raise NotJsonError("bytes that are not UTF-8") from error
    except RecursionError as error:
        raise NotJsonError("values nested too deeply") from error
    except ValueError as error:
        raise NotJsonError(str(error)) from error
    return value, doubled


class Doubled:
    """Objects that said a name twice."""

    def __init__(self) -> None:
        # The objects are kept, not only their identity: a freed one would lend its identity to another.
        self._found: dict[int, tuple[dict[str, Any], str]] = {}

    def note(self, pairs: list[tuple[str, Any]]) -> dict[str, Any]:
        """An object from its pairs."""
        made = dict(pairs)
        if len(made) != len(pairs):
            name = next(name for name, times in Counter(name for name, _ in pairs).items() if times > 1)
            self._found[id(made)] = (made, name)
        return made

    def refused_or(self, value: Any) -> Any:
        """A refusal where such an object lies in this value, else the value itself."""
        if not self._found:
            return value
        name = self._within(value)
        if name is None:
            return value
        record_id = value.get("id") if isinstance(value, dict) else None
        found = f"the name {name[:60]!r} twice in one object"
        return Refusal(record_id if isinstance(record_id, str) else "", "record", found, "each name once")

    def _within(self, value: Any) -> str | None:
        left = [value]
        while left:
            item = left.pop()
            if isinstance(item, dict):
                if id(item) in self._found:
                    return self._found[id(item)][1]
                left.extend(item.values())
            elif isinstance(item, list):
                left.extend(item)
        return None


def _whole(digits: str) -> int | float:
    return int(digits) if len(digits) <= _LONGEST_WHOLE else float("inf")
