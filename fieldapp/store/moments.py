"""Times as the store writes them: RFC 3339, UTC, milliseconds; text order is time order."""

from datetime import UTC, datetime


def moment(seconds: float) -> str:
    """A time of the clock, in seconds since 1970, as text."""
    return datetime.fromtimestamp(seconds, UTC).isoformat(timespec="milliseconds").replace("+00:00", "Z")


def seconds_of(text: str) -> float:
    """The same, backwards. [s]"""
    return datetime.fromisoformat(text).timestamp()
