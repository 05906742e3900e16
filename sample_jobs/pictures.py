"""Pictures for the sample jobs, drawn here; each says on its face that it is drawn."""

import io
from math import cos, sin
from random import Random

from PIL import Image, ImageDraw, ImageFont

SIZE = (1200, 900)
PAPER, INK = "#fbf9f4", "#17202b"
FOAM, FOAM_DARK, FOAM_LIGHT = "#d8c9a4", "#b8a67c", "#e9dfc4"
WOOD, WOOD_DARK, DECK = "#b98a55", "#8d6438", "#caa877"
STEEL, STEEL_DARK = "#aab4bd", "#6d7984"

Draw = ImageDraw.ImageDraw


def _font(size: int) -> ImageFont.FreeTypeFont | ImageFont.ImageFont:
    return ImageFont.load_default(size)


def _begin(ground: str = PAPER) -> tuple[Image.Image, Draw]:
    image = Image.new("RGB", SIZE, ground)
    return image, ImageDraw.Draw(image)


def _finish(image: Image.Image, caption: str) -> bytes:
    draw = ImageDraw.Draw(image)
    draw.rectangle((0, 820, 1200, 900), fill=INK)
    draw.text((28, 842), f"Drawn for this demo, not a photograph: {caption}", fill="#ffffff", font=_font(30))
    out = io.BytesIO()
    image.save(out, "JPEG", quality=72, optimize=True)
    return out.getvalue()


def _foam(draw: Draw, box: tuple[int, int, int, int], seed: int, bump: int = 26) -> None:
    """A field of foam: overlapping rounded lumps, lit from above."""
    left, top, right, bottom = box
    draw.rectangle(box, fill=FOAM)
    chance = Random(seed)
    for _ in range((right - left) * (bottom - top) // 2600):
        x, y = chance.uniform(left, right), chance.uniform(top, bottom)
        size = chance.uniform(bump * 0.5, bump * 1.3)
        inside = (max(left, x - size), max(top, y - size * 0.7), min(right, x + size), min(bottom, y + size * 0.7))
        if inside[2] - inside[0] < 6 or inside[3] - inside[1] < 6:
            continue
        draw.ellipse((inside[0] + 3, inside[1] + 4, inside[2] + 3, inside[3] + 4), fill=FOAM_DARK)
        draw.ellipse(inside, fill=FOAM if chance.random() < 0.6 else FOAM_LIGHT)


def _rafter(draw: Draw, x: int, top: int = 0, bottom: int = 820, wide: int = 84) -> None:
    draw.rectangle((x, top, x + wide, bottom), fill=WOOD, outline=WOOD_DARK, width=4)
    for line in range(14, wide - 6, 17):
        draw.line((x + line, top, x + line + 6, bottom), fill=WOOD_DARK, width=2)


def probe(depth: str, inches: float, caption: str, seed: int) -> bytes:
    """A probe in foam between two rafters, cut open so that the depth can be read off its scale of inches."""
    image, draw = _begin("#e7e2d6")
    draw.rectangle((0, 640, 1200, 700), fill=DECK, outline=WOOD_DARK, width=4)
    draw.text((470, 652), "sheathing", fill=INK, font=_font(30))
    surface = int(640 - 80 * inches)
    chance = Random(seed)
    top = [(x, surface + int(14 * sin((x - 600) / 70)) + chance.randint(-3, 3)) for x in range(180, 1021, 20)]
    draw.polygon([(180, 640), *top, (1020, 640)], fill=FOAM, outline=FOAM_DARK)
    for _ in range(260):
        x, y = chance.randint(190, 1010), chance.randint(surface + 24, 632)
        size = chance.randint(3, 9)
        draw.ellipse((x, y, x + size, y + size), outline=FOAM_DARK, width=2)
    _rafter(draw, 96, 120, 640)
    _rafter(draw, 1020, 120, 640)
    draw.rectangle((586, 60, 614, 640), fill=STEEL, outline=STEEL_DARK, width=3)
    for step in range(0, 57):
        y = 640 - step * 10
        if y < 80:
            break
        long = 34 if step % 8 == 0 else 18 if step % 4 == 0 else 10
        draw.line((614, y, 614 + long, y), fill=INK, width=3)
        if step % 8 == 0:
            draw.text((656, y - 18), str(step // 8), fill=INK, font=_font(32))
    draw.line((420, surface, 586, surface), fill="#8a2f4d", width=6)
    draw.text((250, surface - 76), depth, fill="#8a2f4d", font=_font(62))
    return _finish(image, caption)


def slope(caption: str, *, thin_at_ridge: bool, seed: int) -> bytes:
    """Bays of a sloped roof from below: the ridge at the top, thin foam showing as a lower, darker band."""
    image, draw = _begin()
    for number in range(4):
        left = 60 + number * 280
        _foam(draw, (left + 60, 60, left + 280, 820), seed + number)
        if thin_at_ridge:
            draw.rectangle((left + 60, 60, left + 280, 210), fill="#9d8a60")
            _foam(draw, (left + 82, 76, left + 254, 204), seed + 40 + number, 12)
            draw.line((left + 60, 212, left + 280, 216), fill=FOAM_LIGHT, width=8)
    for number in range(5):
        _rafter(draw, 60 + number * 280 - 14, 0)
    draw.rectangle((0, 0, 1200, 66), fill=WOOD, outline=WOOD_DARK, width=4)
    draw.text((520, 14), "ridge board", fill=INK, font=_font(34))
    return _finish(image, caption)


def drum_label(lines: list[str], caption: str) -> bytes:
    """The label of a drum of an invented foam."""
    image, draw = _begin("#d8d3c8")
    draw.rounded_rectangle((170, 40, 1030, 800), 60, fill="#5a6470", outline=INK, width=6)
    draw.rectangle((170, 150, 1030, 176), fill="#3d4650")
    draw.rectangle((170, 690, 1030, 716), fill="#3d4650")
    draw.rectangle((260, 220, 940, 650), fill=PAPER, outline=INK, width=5)
    for number, line in enumerate(lines):
        draw.text((296, 250 + number * 74), line, fill=INK, font=_font(50 if number == 0 else 38))
    return _finish(image, caption)


def gap_at_pipe(caption: str, *, mended: bool, seed: int) -> bytes:
    """A pipe through foam: with a gap behind it, or filled."""
    image, draw = _begin()
    _foam(draw, (140, 30, 1060, 820), seed)
    _rafter(draw, 56)
    _rafter(draw, 1060)
    if not mended:
        draw.polygon([(430, 60), (520, 40), (536, 790), (440, 800), (404, 500)], fill="#4a3f2a")
        draw.polygon([(660, 120), (712, 90), (720, 700), (676, 760)], fill="#4a3f2a")
    if mended:
        for left, right, more in ((420, 540, 5), (640, 740, 6)):
            draw.rectangle((left - 4, 96, right + 4, 784), fill=FOAM_DARK)
            _foam(draw, (left, 100, right, 780), seed + more, 18)
    draw.rectangle((512, 0, 668, 820), fill=STEEL, outline=STEEL_DARK, width=5)
    draw.rectangle((548, 0, 574, 820), fill="#cfd6dc")
    return _finish(image, caption)


def core_on_scale(mass: str, caption: str, seed: int) -> bytes:
    """A core sample on a small scale."""
    image, draw = _begin("#e4e8ea")
    draw.rounded_rectangle((220, 560, 980, 790), 36, fill="#3d4650", outline=INK, width=5)
    draw.rectangle((300, 530, 900, 566), fill=STEEL, outline=STEEL_DARK, width=4)
    draw.rounded_rectangle((450, 620, 750, 730), 14, fill="#c8d3bf", outline=INK, width=4)
    draw.text((482, 638), mass, fill=INK, font=_font(70))
    draw.rectangle((470, 240, 730, 500), fill=FOAM)
    draw.ellipse((470, 455, 730, 530), fill=FOAM_DARK)
    chance = Random(seed)
    for _ in range(170):
        x, y = chance.randint(480, 716), chance.randint(250, 492)
        size = chance.randint(3, 8)
        draw.ellipse((x, y, x + size, y + size), outline=FOAM_DARK, width=2)
    draw.ellipse((470, 202, 730, 278), fill=FOAM_LIGHT, outline=FOAM_DARK, width=4)
    for step in range(12):
        at = (600 + 78 * cos(step * 2.4) * (step / 12), 240 + 22 * sin(step * 2.4) * (step / 12))
        draw.ellipse((*at, at[0] + 7, at[1] + 5), outline=FOAM_DARK, width=2)
    return _finish(image, caption)


def window_wall(caption: str, seed: int) -> bytes:
    """An open-cell wall trimmed flush, with a window in its middle bay."""
    image, draw = _begin()
    for number, (left, right) in enumerate(((60, 340), (340, 860), (860, 1140))):
        _foam(draw, (left, 40, right, 820), seed + number, 9)
    draw.rectangle((390, 170, 810, 600), fill="#bcd0df", outline=WOOD_DARK, width=14)
    draw.line((600, 170, 600, 600), fill=WOOD_DARK, width=10)
    draw.line((390, 385, 810, 385), fill=WOOD_DARK, width=10)
    for x in (26, 306, 866, 1130):
        _rafter(draw, x, 0, 820, 70)
    draw.rectangle((0, 0, 1200, 52), fill=WOOD, outline=WOOD_DARK, width=4)
    return _finish(image, caption)
