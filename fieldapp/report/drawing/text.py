"""Text as it is set: true fractions, and nothing that the font cannot draw."""

import re
from functools import lru_cache
from typing import Final
from xml.sax.saxutils import escape

from reportlab.lib.utils import simpleSplit
from reportlab.pdfbase.pdfmetrics import stringWidth

from fieldapp.report.drawing.fonts import REGULAR, glyphs

_FRACTION: Final = re.compile(r"(?<![\d/.])(?:(\d+) )?(\d{1,2})/(2|4|8|16)(?![\d/])")
_WHOLE: Final = {
    (1, 8): "⅛",
    (1, 4): "¼",
    (3, 8): "⅜",
    (1, 2): "½",
    (5, 8): "⅝",
    (3, 4): "¾",
    (7, 8): "⅞",
}
_RAISED: Final = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")
_LOWERED: Final = str.maketrans("0123456789", "₀₁₂₃₄₅₆₇₈₉")
_THIN: Final = "\u2009"
_NO_BREAK: Final = "\u00a0"
#: Stands where the font has no glyph, so that a missing letter is seen.
MISSING: Final = "□"
_KEEP: Final = re.compile(
    r"(?<=\d) (?=(?:in|mm|ft²|m²|%|board|pcf|perm|litres|kg|lb|ng|°F|°C|min|h|of)\b)|(?<=\bbay) (?=\S)"
)


def _fraction(match: re.Match[str]) -> str:
    whole, top, below = match.group(1), int(match.group(2)), int(match.group(3))
    if top >= below:
        return match.group(0)
    made = _WHOLE.get((top, below)) or f"{str(top).translate(_RAISED)}⁄{str(below).translate(_LOWERED)}"
    return f"{whole}{_THIN}{made}" if whole else made


@lru_cache(maxsize=20_000)
def typeset(text: str, font: str = REGULAR) -> str:
    """Text with true fractions; a character that the font cannot draw becomes a hollow square."""
    if "/" in text:
        text = _FRACTION.sub(_fraction, text)
    known = glyphs(font)
    if all(ord(letter) in known for letter in text):
        return text
    return "".join(letter if ord(letter) in known or letter in "\n\t" else MISSING for letter in text)


def prose(text: str, font: str = REGULAR) -> str:
    """Markup for a paragraph: escaped, numbers kept with their units."""
    return escape(_KEEP.sub(_NO_BREAK, typeset(text, font)))


def width(text: str, font: str, size: float) -> float:
    """Width of typeset text. [pt]"""
    return float(stringWidth(text, font, size))


def fitted(text: str, font: str, size: float, room: float) -> str:
    """Typeset text, cut with an ellipsis where it does not fit."""
    if width(text, font, size) <= room:
        return text
    while text and width(text + "…", font, size) > room:
        text = text[:-1]
    return text.rstrip() + "…"


def lines(text: str, font: str, size: float, room: float) -> list[str]:
    """Typeset text broken to a width; words longer than it are broken too."""
    if len(text) * size * 0.36 < room and width(text, font, size) <= room:
        return [text]
    broken: list[str] = []
    for line in simpleSplit(text, font, size, room):
        rest = line
        while width(rest, font, size) > room and len(rest) > 1:
            cut = len(rest) - 1
            while cut > 1 and width(rest[:cut], font, size) > room:
                cut -= 1
            broken.append(rest[:cut])
            rest = rest[cut:]
        broken.append(rest)
    return broken or [""]
