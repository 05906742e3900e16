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
HOLLOW, MARK = "#4a3f2a", "#8a2f4d"

#: Of a probe in its foam: 80 pixels an inch.
PIXELS_PER_MM = 80 / 25.4

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


def probe(read: tuple[float, str], caption: str, seed: int, *, metric: bool = False) -> bytes:
    """A probe in foam between two rafters, cut open so that the depth that was read (mm, as typed) stands on its scale."""
    depth_mm, typed = read
    # The step of the marks, and every how many of them one is middling or numbered: eighths of an inch, or 5 mm.
    mark_mm, middle, numbered = (5.0, 1, 2) if metric else (3.175, 4, 8)
    image, draw = _begin("#e7e2d6")
    draw.rectangle((0, 640, 1200, 700), fill=DECK, outline=WOOD_DARK, width=4)
    draw.text((470, 652), "sheathing", fill=INK, font=_font(30))
    surface = int(640 - PIXELS_PER_MM * depth_mm)
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
    for step in range(int(560 / (PIXELS_PER_MM * mark_mm)) + 1):
        y = round(640 - step * mark_mm * PIXELS_PER_MM)
        long = 34 if step % numbered == 0 else 18 if step % middle == 0 else 10
        draw.line((614, y, 614 + long, y), fill=INK, width=3)
        if step % numbered == 0:
            number = step // numbered * (10 if metric else 1)
            draw.text((656, y - (13 if metric else 18)), str(number), fill=INK, font=_font(24 if metric else 32))
    draw.line((420, surface, 586, surface), fill=MARK, width=6)
    draw.text((250, surface - 90), f"{typed} mm" if metric else f"{typed} in", fill=MARK, font=_font(62))
    return _finish(image, caption)


def slope(caption: str, *, thin_at_ridge: bool, seed: int) -> bytes:
    """Bays of a sloped roof from below: the ridge at the top, thin foam showing as a lower, darker band."""
    image, draw = _begin()
    _foam(draw, (0, 60, 60, 820), seed + 9)
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


def _ragged(draw: Draw, box: tuple[int, int, int, int], seed: int, fill: str) -> None:
    """An upright patch with uneven edges, as foam tears or fills."""
    left, top, right, bottom = box
    chance = Random(seed)
    edge = [(y, chance.randint(-16, 16), chance.randint(-16, 16)) for y in range(top, bottom + 1, 46)]
    outline = [(left + out, y) for y, out, _ in edge] + [(right + out, y) for y, _, out in reversed(edge)]
    draw.polygon(outline, fill=fill)


def _pipe(draw: Draw) -> None:
    draw.rectangle((512, 0, 668, 820), fill=STEEL, outline=STEEL_DARK, width=5)
    draw.rectangle((548, 0, 574, 820), fill="#cfd6dc")


def gap_at_pipe(caption: str, *, mended: bool, seed: int) -> bytes:
    """A pipe through foam: with a gap beside it, or filled with newer, paler foam."""
    image, draw = _begin()
    _foam(draw, (0, 0, 1200, 820), seed)
    for left, right, more in ((420, 560, 5), (620, 726, 6)):
        _ragged(draw, (left, 40, right, 800), seed + more, FOAM_LIGHT if mended else HOLLOW)
        if mended:
            chance = Random(seed + more + 10)
            for _ in range(60):
                x, y, size = chance.randint(left - 8, right - 8), chance.randint(50, 770), chance.randint(9, 19)
                draw.ellipse((x + 2, y + 3, x + size + 4, y + size + 3), fill=FOAM_DARK)
                draw.ellipse((x, y, x + size + 2, y + size), fill="#f1ead6")
    _rafter(draw, 20)
    _rafter(draw, 1096)
    _pipe(draw)
    return _finish(image, caption)


def void_behind_pipe(caption: str, seed: int) -> bytes:
    """A stud bay seen from above, cut across: foam in front of a pipe and beside it, nothing behind."""
    image, draw = _begin("#e7e2d6")
    draw.rectangle((0, 120, 1200, 186), fill=DECK, outline=WOOD_DARK, width=4)
    draw.text((500, 132), "sheathing", fill=INK, font=_font(30))
    draw.rectangle((180, 186, 1020, 640), fill=FOAM)
    chance = Random(seed)
    for _ in range(420):
        x, y, size = chance.randint(188, 1004), chance.randint(194, 626), chance.randint(3, 9)
        draw.ellipse((x, y, x + size, y + size), outline=FOAM_DARK, width=2)
    draw.polygon([(430, 186), (770, 186), (742, 290), (700, 390), (500, 390), (462, 296)], fill=HOLLOW)
    draw.ellipse((480, 270, 720, 510), fill=STEEL, outline=STEEL_DARK, width=6)
    draw.ellipse((510, 300, 690, 480), fill=PAPER, outline=STEEL_DARK, width=4)
    draw.text((556, 370), "drain", fill=INK, font=_font(32))
    for left in (96, 1020):
        draw.rectangle((left, 186, left + 84, 640), fill=WOOD, outline=WOOD_DARK, width=4)
    draw.line((840, 236, 716, 236), fill=MARK, width=6)
    draw.text((850, 212), "hollow", fill=MARK, font=_font(44))
    draw.text((380, 680), "face of the studs, room side", fill=INK, font=_font(34))
    return _finish(image, caption)


def substrate(caption: str, seed: int) -> bytes:
    """A bay before spraying: bare plywood between two rafters, a joint of two sheets, nails in a row."""
    image, draw = _begin(DECK)
    chance = Random(seed)
    for _ in range(90):
        x, y, long = chance.randint(0, 1180), chance.randint(0, 815), chance.randint(60, 300)
        draw.arc((x, y, x + long, y + chance.randint(8, 34)), 190, 350, fill="#b8945f", width=2)
    draw.line((0, 430, 1200, 430), fill=WOOD_DARK, width=7)
    for y in (404, 456):
        for x in range(220, 1000, 110):
            draw.ellipse((x, y - 6, x + 12, y + 6), fill=STEEL_DARK)
    _rafter(draw, 60, wide=110)
    _rafter(draw, 1030, wide=110)
    for top, words in ((60, "plywood deck"), (470, "joint of two sheets")):
        draw.text((400, top), words, fill=INK, font=_font(40))
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
