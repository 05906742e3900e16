"""Photos on disk by their digest, byte for byte as they came; and clean renditions of them for pages."""

import re
import time
from hashlib import sha256
from pathlib import Path
from threading import BoundedSemaphore
from typing import IO, BinaryIO, Final, Literal

from PIL import Image, ImageOps

from fieldapp.store.disk import PART, disk_told, written_whole

FORMATS: Final = ("JPEG", "PNG", "WEBP")
#: Endings of originals by what Pillow calls their format; MPO is a JPEG with more pictures behind the first.
ENDINGS: Final = {"JPEG": ".jpg", "MPO": ".jpg", "PNG": ".png", "WEBP": ".webp"}
MOST_PIXELS: Final = 40_000_000
MOST_BYTES: Final = 30_000_000
LONGEST_SIDE: Final = 1600
THUMBNAIL_SIDE: Final = 320
_DIGEST: Final = re.compile(r"[0-9a-f]{64}")
_CHUNK: Final = 1 << 16
#: A kill leaves what was growing; after this long nobody is writing it any more. [s]
_STALE_S: Final = 86_400.0


class PhotoRefused(ValueError):  # noqa: N818 (the word of the interface: what is refused, not what went wrong)
    """A photo that was not taken: what was found and what is allowed."""

    def __init__(self, found: str, allowed: str) -> None:
        super().__init__(f"found {found}; allowed: {allowed}")
        self.found = found
        self.allowed = allowed


class PhotoStore:
    """Photos in one folder, each `<sha256>` with the ending of its format, as reports look for them."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder / "photos"
        self._incoming = folder / "photos" / "incoming"
        self._renditions = folder / "renditions"
        self._thumbnails = folder / "thumbnails"
        for each in (self._incoming, self._renditions, self._thumbnails):
            each.mkdir(parents=True, exist_ok=True)
        # A decoded picture is up to 160 MB: two at a time, whatever arrives.
        self._decoding = BoundedSemaphore(2)
        self._remove_stale()

    def put(self, digest: str, stream: BinaryIO | IO[bytes], length: int) -> Literal["stored", "already-there"]:
        """Keep a photo; when this returns, it is on the disk under its digest.

        Args:
            digest: SHA-256 in hex, as the record says it.
            stream: The bytes; read only where the photo is not here yet.
            length: How many bytes there are.
        Raises:
            PhotoRefused: no digest, another digest, no picture, or one too large.
            DiskError: nothing was kept.
        """
        _checked(digest)
        if self.original(digest) is not None:
            return "already-there"
        if not 0 < length <= MOST_BYTES:
            raise PhotoRefused(f"{length} bytes", f"1 to {MOST_BYTES} bytes")
        with disk_told(), written_whole(self.folder / digest, self._incoming) as growing:
            found = _copy(stream, growing.file, length)
            if found != digest:
                raise PhotoRefused(f"bytes whose SHA-256 is {found}", f"bytes whose SHA-256 is {digest}")
            growing.path = self.folder / f"{digest}{self._ending(growing.part)}"
        return "stored"

    def has(self, digest: str) -> int | None:
        """How many bytes of that photo are here; None where it is not."""
        found = self.original(digest)
        return None if found is None else found.stat().st_size

    def original(self, digest: str) -> Path | None:
        """The photo as it came; it may say where it was taken, so no page shows it."""
        _checked(digest)
        for ending in dict.fromkeys(ENDINGS.values()):
            path = self.folder / f"{digest}{ending}"
            if path.is_file():
                return path
        return None

    def rendition(self, digest: str) -> Path | None:
        """The photo for pages: upright, without place data, at most 1600 pixels; made once. None where it is not here."""
        return self._made(digest, self._renditions, LONGEST_SIDE)

    def thumbnail(self, digest: str) -> Path | None:
        """The same, at most 320 pixels."""
        return self._made(digest, self._thumbnails, THUMBNAIL_SIDE)

    def all(self) -> dict[str, Path]:
        """Every photo by its digest."""
        paths = sorted(path for path in self.folder.iterdir() if path.is_file() and _DIGEST.fullmatch(path.stem))
        return {path.stem: path for path in paths}

    def _made(self, digest: str, folder: Path, side: int) -> Path | None:
        path = folder / f"{_checked(digest)}.jpg"
        if path.is_file():
            return path
        original = self.original(digest)
        if original is None:
            return None
        with self._decoding, Image.open(original, formats=FORMATS) as image:
            picture = _clean(image, side)
            profile = image.info.get("icc_profile")
        with disk_told(), written_whole(path) as growing:
            # No exif: a picture on a page does not say where it was taken. Colours stay those of its profile.
            picture.save(growing.file, "JPEG", quality=82, optimize=True, icc_profile=profile)
        return path

    def _ending(self, path: Path) -> str:
        """The ending for a picture that can be shown whole.

        Raises:
            PhotoRefused: where it cannot.
        """
        allowed = f"a picture as {', '.join(FORMATS)} of at most {MOST_PIXELS // 1_000_000} million pixels"
        with self._decoding:
            try:
                with Image.open(path, formats=FORMATS) as image:
                    wide, high = image.size
                    if wide * high > MOST_PIXELS:
                        raise PhotoRefused(f"{wide} x {high} pixels", allowed)
                    ending = ENDINGS[image.format or ""]
                    # All of the file is read, but a JPEG is decoded at an eighth of its size, which is enough to see its end.
                    image.draft("RGB", (wide // 8 or 1, high // 8 or 1))
                    image.load()
            except PhotoRefused:
                raise
            except (Image.DecompressionBombError, Image.DecompressionBombWarning) as error:
                raise PhotoRefused("far more pixels than that", allowed) from error
            except Exception as error:
                # Pillow's readers raise whatever a broken file makes them stumble over: OSError, SyntaxError, struct.error...
                raise PhotoRefused(f"no picture that can be read ({type(error).__name__})", allowed) from error
        return ending

    def _remove_stale(self) -> None:
        before = time.time() - _STALE_S
        for folder in (self._incoming, self._renditions, self._thumbnails):
            for path in folder.iterdir():
                if path.suffix == PART and path.stat().st_mtime < before:
                    path.unlink(missing_ok=True)


def _checked(digest: str) -> str:
    """A digest and nothing else: no path leads out of the folder.

    Raises:
        PhotoRefused: where it is none.
    """
    if not _DIGEST.fullmatch(digest):
        raise PhotoRefused("something else", "a SHA-256 in 64 lower-case hex digits")
    return digest


def _copy(stream: BinaryIO | IO[bytes], out: IO[bytes], length: int) -> str:
    """Copies exactly so many bytes and returns their digest."""
    seen = sha256()
    left = length
    while left:
        chunk = stream.read(min(left, _CHUNK))
        if not chunk:
            raise PhotoRefused(f"{length - left} bytes", f"{length} bytes, as was announced")
        seen.update(chunk)
        out.write(chunk)
        left -= len(chunk)
    return seen.hexdigest()


def _clean(image: Image.Image, side: int) -> Image.Image:
    """A small, upright copy in RGB; what was transparent is white."""
    wide, high = image.size
    # A large JPEG is first decoded small, which is where the time goes.
    image.draft("RGB", (side * wide // max(wide, high) or 1, side * high // max(wide, high) or 1))
    try:
        upright = ImageOps.exif_transpose(image)
    except Exception:  # a broken Exif block raises anything; the picture itself is good
        upright = image
    if "A" in upright.getbands() or "transparency" in upright.info:
        over = upright.convert("RGBA")
        upright = Image.new("RGB", over.size, "white")
        upright.paste(over, mask=over.getchannel("A"))
    upright = upright.convert("RGB")
    upright.thumbnail((side, side))
    return upright
