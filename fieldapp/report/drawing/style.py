"""Tokens of the page: colours, sizes and measures, in points."""

from typing import Any, Final

from reportlab.lib.colors import Color, HexColor, white
from reportlab.lib.pagesizes import A4, letter
from reportlab.lib.styles import ParagraphStyle

from fieldapp.report.drawing.fonts import BOLD, REGULAR

PAPERS: Final = {"letter": letter, "a4": A4}

INK: Final = HexColor("#17202b")
SOFT: Final = HexColor("#5a6470")
RULE: Final = HexColor("#d9d3c6")
ACCENT: Final = HexColor("#8a2f4d")
FRAMING: Final = HexColor("#c9b58f")
PAPER: Final = white

_LIGHT: Final = (0xC3, 0xD0, 0xDF)
_DARK: Final = (0x1F, 0x3C, 0x5C)
SHADES: Final = 7


def shade(step: int) -> Color:
    """Shade of depth over the specified one, from light (0) to dark (SHADES - 1), in one hue."""
    share = step / (SHADES - 1)
    red, green, blue = (low + (high - low) * share for low, high in zip(_LIGHT, _DARK, strict=True))
    return Color(red / 255, green / 255, blue / 255)


def _luminance(colour: Color) -> float:
    """Relative luminance (WCAG 2.2)."""
    parts = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in colour.rgb()]
    return 0.2126 * parts[0] + 0.7152 * parts[1] + 0.0722 * parts[2]


def is_dark(step: int) -> bool:
    """True where white text stands out more than ink on that shade."""
    ground = _luminance(shade(step)) + 0.05
    return 1.05 / ground > ground / (_luminance(INK) + 0.05)


MARGIN: Final = 46.0
HEAD: Final = 30.0
FOOT: Final = 34.0
GAP: Final = 6.0


def _style(name: str, size: float, leading: float, font: str = REGULAR, **more: Any) -> ParagraphStyle:
    return ParagraphStyle(name, fontName=font, textColor=INK, fontSize=size, leading=leading, **more)


BODY: Final = _style("body", 9.2, 12.4)
BULLET: Final = _style("bullet", 9.2, 12.4, leftIndent=14, bulletIndent=2, spaceAfter=2.2)
LEAD: Final = _style("lead", 12.2, 16.2, BOLD)
ALARM: Final = _style("alarm", 10.4, 13.6, BOLD)
COVER: Final = _style("cover", 10.0, 13.2)
BOX: Final = _style("box", 8.4, 11.0)
