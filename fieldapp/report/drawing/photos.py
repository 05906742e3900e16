"""Photos beside a job file: found by their digest, checked, and set as they are or as a clean rendition."""

from contextlib import suppress
from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path
from typing import Any, Final

from PIL import Image, ImageOps
from reportlab.platypus import Flowable

from fieldapp.report.drawing.fonts import BOLD, REGULAR
from fieldapp.report.drawing.style import INK, RULE, SOFT
from fieldapp.report.drawing.text import lines, typeset
from fieldapp.report.model import Photo

#: Pixels above which a picture is refused, and those that a report needs along its longer side.
MOST_PIXELS: Final = 40_000_000
LONGEST_SIDE: Final = 1600
FORMATS: Final = ["JPEG", "PNG", "WEBP"]
COLUMNS: Final = 3


class NamedPath(str):
    """A path that the PDF names by the picture's digest, so that a report does not depend on where pictures lie."""

    digest: str

    def __new__(cls, path: str, digest: str) -> "NamedPath":
        """A path and its name."""
        made = super().__new__(cls, path)
        made.digest = digest
        return made

    def __str__(self) -> str:
        """The name that goes into the PDF."""
        return self.digest


@dataclass(frozen=True, slots=True)
class Picture:
    """A picture ready to be drawn, or why there is none."""

    path: NamedPath | None
    width: int = 4
    height: int = 3
    problem: str = ""


@dataclass(frozen=True, slots=True)
class PhotoFolder:
    """Photos in a folder, each named by its SHA-256; renditions are made in `scratch`."""

    folder: Path
    scratch: Path

    def picture(self, digest: str) -> Picture:
        """The picture of that digest, clean: turned upright, without place data, no larger than needed."""
        found = next(
            (
                path
                for end in (".jpg", ".jpeg", ".png", ".webp", "")
                if (path := self.folder / f"{digest}{end}").is_file()
            ),
            None,
        )
        if found is None:
            return Picture(None, problem="This photo does not lie beside the job file.")
        content = found.read_bytes()
        if sha256(content).hexdigest() != digest:
            return Picture(None, problem="The file beside the job is not the photo that was taken: its digest differs.")
        try:
            return self._clean(found, content, digest)
        except (OSError, ValueError, SyntaxError, Image.DecompressionBombError) as error:
            return Picture(None, problem=f"This photo cannot be shown: {error}.")

    def _clean(self, found: Path, content: bytes, digest: str) -> Picture:
        with Image.open(found, formats=FORMATS) as image:
            wide, high = image.size
            if wide * high > MOST_PIXELS:
                raise ValueError(f"{wide} x {high} pixels, more than {MOST_PIXELS // 1_000_000} million")
            is_plain = image.format == "JPEG" and image.mode in ("RGB", "L") and max(wide, high) <= LONGEST_SIDE
            if is_plain and "exif" not in image.info and "xmp" not in image.info and "comment" not in image.info:
                path = found
                if found.suffix != ".jpg":
                    path = self.scratch / f"{digest}.jpg"
                    path.write_bytes(content)
                return Picture(NamedPath(str(path), digest), wide, high)
            # A rendition: a large JPEG is first decoded small, which is where the time goes.
            image.draft("RGB", (LONGEST_SIDE, LONGEST_SIDE * min(wide, high) // max(wide, high)))
            upright = ImageOps.exif_transpose(image).convert("RGB")
            upright.thumbnail((LONGEST_SIDE, LONGEST_SIDE))
            path = self.scratch / f"{digest}.jpg"
            upright.save(path, "JPEG", quality=82, optimize=True)
            return Picture(NamedPath(str(path), digest), *upright.size)


class PhotoRow(Flowable):
    """Up to three photos side by side, each with its caption below."""

    GAP: Final = 12.0

    def __init__(self, photos: list[tuple[Photo, Picture]]) -> None:
        super().__init__()
        self.photos = photos

    def wrap(self, available_width: float, _available_height: float) -> tuple[float, float]:
        """Size of the row. [pt]"""
        self.width = available_width
        self.each = (available_width - self.GAP * (COLUMNS - 1)) / COLUMNS
        self.high = self.each * 0.75
        self.captions = [
            (
                lines(typeset(photo.caption, BOLD), BOLD, 7.8, self.each),
                lines(typeset(photo.detail), REGULAR, 7.2, self.each),
            )
            for photo, _ in self.photos
        ]
        below = max(len(title) * 9.6 + len(detail) * 8.8 for title, detail in self.captions)
        self.height = self.high + below + 14.0
        return available_width, self.height

    def draw(self) -> None:
        """Pictures to their proportions, upright ones letting the ground show at the sides."""
        canvas = self.canv
        for number, (_, picture) in enumerate(self.photos):
            x = number * (self.each + self.GAP)
            top = self.height
            self._draw_picture(canvas, picture, x, top)
            title, detail = self.captions[number]
            y = top - self.high - 10.0
            canvas.setFillColor(INK)
            canvas.setFont(BOLD, 7.8)
            for line in title:
                canvas.drawString(x, y, line)
                y -= 9.6
            canvas.setFillColor(SOFT)
            canvas.setFont(REGULAR, 7.2)
            for line in detail:
                canvas.drawString(x, y, line)
                y -= 8.8

    def _draw_picture(self, canvas: Any, picture: Picture, x: float, top: float) -> None:
        canvas.setStrokeColor(RULE)
        canvas.setLineWidth(0.6)
        if picture.path is None:
            canvas.rect(x, top - self.high, self.each, self.high, stroke=1, fill=0)
            canvas.setFillColor(SOFT)
            canvas.setFont(REGULAR, 7.6)
            y = top - self.high / 2
            for line in lines(typeset(picture.problem), REGULAR, 7.6, self.each - 16.0):
                canvas.drawString(x + 8.0, y, line)
                y -= 9.6
            return
        scale = min(self.each / picture.width, self.high / picture.height)
        wide, high = picture.width * scale, picture.height * scale
        at_x, at_y = x + (self.each - wide) / 2, top - self.high + (self.high - high) / 2
        canvas.drawImage(picture.path, at_x, at_y, wide, high)
        canvas.rect(x, top - self.high, self.each, self.high, stroke=1, fill=0)


def keep_warnings_as_errors() -> None:
    """A picture of an absurd size is an error for this project, not a warning."""
    with suppress(AttributeError):
        Image.MAX_IMAGE_PIXELS = MOST_PIXELS * 2
