"""Rules for single fields: each says what is allowed, and finds what is not.

A rule returns None for a good value, else a `Problem` that names the field, what was found and what is allowed.
"""

import json
import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from datetime import datetime
from typing import Any, Final, Protocol

import rfc8785

UUID: Final = re.compile(r"[0-9a-f]{8}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{12}")
SHA256: Final = re.compile(r"[0-9a-f]{64}")
INSTANT: Final = re.compile(r"\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.\d{3}Z")
LONGEST_FOUND: Final = 80
#: Everything that could end a line, and other characters that no terminal should see.
_BREAKS: Final = re.compile("[\x00-\x1f\x7f-\x9f\u2028\u2029]+")
#: Whole numbers beyond this have no exact place in JSON numbers (RFC 8785, RFC 7493).
LARGEST_WHOLE: Final = 2**53 - 1


@dataclass(frozen=True, slots=True)
class Problem:
    """What is wrong with one field."""

    field: str
    found: str
    allowed: str


class Rule(Protocol):
    """Anything that can check a value."""

    def check(self, value: Any, name: str) -> Problem | None:
        """None where the value is good."""


def shown(value: Any) -> str:
    """A found value as text of one line, cut to a readable length; as canonical JSON, so that every language shows it alike."""
    text = value
    if not isinstance(value, str):
        try:
            text = rfc8785.dumps(value).decode()
        except RecursionError:
            text = "values nested too deeply"
        except (rfc8785.CanonicalizationError, UnicodeEncodeError):
            # NaN, infinities, whole numbers beyond 2^53, half surrogates.
            text = json.dumps(value, ensure_ascii=False, separators=(",", ":"))
    text = _BREAKS.sub(" ", text.encode("utf-8", "replace").decode())
    return text if len(text) <= LONGEST_FOUND else f"{text[: LONGEST_FOUND - 1]}…"


def plain(number: float) -> str:
    """A bound as people write it, and as JSON does."""
    return rfc8785.dumps(number).decode()


@dataclass(frozen=True, slots=True)
class Number:
    """A finite number within bounds; `above` leaves the lower bound itself out, `below` the upper."""

    low: float | None = None
    high: float | None = None
    above: bool = False
    below: bool = False

    def check(self, value: Any, name: str) -> Problem | None:
        """Booleans and texts are no numbers."""
        good = isinstance(value, (int, float)) and not isinstance(value, bool) and abs(value) <= LARGEST_WHOLE
        # NaN and infinities fail this comparison too; those below are written to be true for good values.
        if good:
            over_low = self.low is None or (value > self.low if self.above else value >= self.low)
            under_high = self.high is None or (value < self.high if self.below else value <= self.high)
            if over_low and under_high:
                return None
        return Problem(name, shown(value), self.allowed)

    @property
    def allowed(self) -> str:
        """The bounds in words."""
        if self.low is None and self.high is None:
            return "a number"
        if self.high is None:
            return f"a number {'over' if self.above else 'of at least'} {plain(self.low or 0.0)}"
        start = "over " if self.above else ""
        end = "under " if self.below else ""
        return f"{start}{plain(self.low or 0.0)} to {end}{plain(self.high)}"


@dataclass(frozen=True, slots=True)
class Whole:
    """A whole number within bounds."""

    low: int
    high: int = LARGEST_WHOLE

    def check(self, value: Any, name: str) -> Problem | None:
        """Also takes 3.0, which JSON does not tell from 3."""
        whole = isinstance(value, int) or (isinstance(value, float) and value.is_integer())
        if whole and not isinstance(value, bool) and self.low <= value <= self.high:
            return None
        top = f" to {self.high}" if self.high != LARGEST_WHOLE else " or more"
        return Problem(name, shown(value), f"a whole number, {self.low}{top}")


@dataclass(frozen=True, slots=True)
class Text:
    """Text of a bounded length; `least` 1 asks for something other than blanks."""

    least: int = 0
    most: int = 10_000

    def check(self, value: Any, name: str) -> Problem | None:
        """Half a surrogate pair is no text: it cannot be written as UTF-8."""
        if not isinstance(value, str):
            return Problem(name, shown(value), "text")
        if len(value.strip()) < self.least or len(value) > self.most:
            return Problem(name, shown(value), f"text of {self.least} to {self.most} characters")
        if not value.isascii() and any("\ud800" <= letter <= "\udfff" for letter in value):
            return Problem(name, shown(value), "text without lone surrogates")
        return None


@dataclass(frozen=True, slots=True)
class OneOf:
    """One of a list of words."""

    words: tuple[str, ...]

    def check(self, value: Any, name: str) -> Problem | None:
        """Exactly as spelled."""
        if isinstance(value, str) and value in self.words:
            return None
        return Problem(name, shown(value), f"one of {', '.join(self.words)}")


@dataclass(frozen=True, slots=True)
class Pattern:
    """Text of one form."""

    form: re.Pattern[str]
    allowed: str

    def check(self, value: Any, name: str) -> Problem | None:
        """The whole text must match."""
        if isinstance(value, str) and self.form.fullmatch(value):
            return None
        return Problem(name, shown(value), self.allowed)


@dataclass(frozen=True, slots=True)
class Instant:
    """RFC 3339, UTC, milliseconds: one form only, so that text order is time order."""

    def check(self, value: Any, name: str) -> Problem | None:
        """A date that is in no calendar is refused too."""
        if isinstance(value, str) and INSTANT.fullmatch(value):
            try:
                datetime.fromisoformat(value[:-1])
            except ValueError:
                pass
            else:
                return None
        return Problem(name, shown(value), "a UTC time such as 2026-05-04T14:03:11.123Z")


@dataclass(frozen=True, slots=True)
class Flag:
    """true or false."""

    def check(self, value: Any, name: str) -> Problem | None:
        """Only the JSON booleans."""
        return None if isinstance(value, bool) else Problem(name, shown(value), "true or false")


@dataclass(frozen=True, slots=True)
class ListOf:
    """A list, each item by one rule."""

    item: Rule
    least: int = 0
    most: int = 100_000

    def check(self, value: Any, name: str) -> Problem | None:
        """Names the item that is wrong by its place, counted from 0."""
        if not isinstance(value, list) or not self.least <= len(value) <= self.most:
            return Problem(name, shown(value), f"a list of at least {self.least}" if self.least else "a list")
        for place, item in enumerate(value):
            if problem := self.item.check(item, f"{name}[{place}]"):
                return problem
        return None


def no_more(_body: Mapping[str, Any]) -> Problem | None:
    """The usual case: nothing depends on anything else."""
    return None


@dataclass(frozen=True, slots=True)
class Fields:
    """An object: fields that must be there, fields that may be, and what they owe each other.

    Fields that are not named here are kept and passed on untouched.
    """

    must: Mapping[str, Rule] = field(default_factory=dict)
    may: Mapping[str, Rule] = field(default_factory=dict)
    more: Callable[[Mapping[str, Any]], Problem | None] = no_more

    def check(self, value: Any, name: str) -> Problem | None:
        """Names the field by its path. A field that is null is absent."""
        if not isinstance(value, dict):
            return Problem(name or "body", shown(value), "an object with named fields")
        start = f"{name}." if name else ""
        for key, rule in self.must.items():
            if value.get(key) is None:
                return Problem(f"{start}{key}", "nothing", allowed_by(rule))
            if problem := rule.check(value[key], f"{start}{key}"):
                return problem
        for key, rule in self.may.items():
            if value.get(key) is not None and (problem := rule.check(value[key], f"{start}{key}")):
                return problem
        if problem := self.more(value):
            return Problem(f"{start}{problem.field}", problem.found, problem.allowed)
        return None


def allowed_by(rule: Rule) -> str:
    """What a rule allows, in words, for a field that is missing."""
    problem = rule.check(None, "")
    return problem.allowed if problem else "a value"


def numbers(*names: str, low: float | None = None, high: float | None = None) -> dict[str, Rule]:
    """Several number fields by one rule."""
    return {name: Number(low, high) for name in names}


def texts(*names: str) -> dict[str, Rule]:
    """Several text fields."""
    return {name: Text() for name in names}
