"""The report's font: two static weights made once from the variable font of a package, kept in the user's cache folder."""

import os
import tempfile
from functools import lru_cache
from importlib.metadata import version
from importlib.resources import files
from pathlib import Path
from typing import Final

from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont

REGULAR: Final = "Bayreckon"
BOLD: Final = "Bayreckon-Semibold"
_WEIGHTS: Final = {REGULAR: 400, BOLD: 600}


def cache_folder() -> Path:
    """Where made files are kept: XDG_CACHE_HOME or ~/.cache, else the temporary folder."""
    base = os.environ.get("XDG_CACHE_HOME") or str(Path("~/.cache").expanduser())
    folder = Path(base) / "bayreckon"
    try:
        folder.mkdir(parents=True, exist_ok=True)
        if os.access(folder, os.W_OK):
            return folder
    except OSError:
        pass
    folder = Path(tempfile.gettempdir()) / f"bayreckon-{os.getuid()}"
    folder.mkdir(mode=0o700, parents=True, exist_ok=True)
    return folder


@lru_cache(maxsize=1)
def register() -> None:
    """Register both weights with reportlab; makes them first where they were never made (about a second)."""
    for name, weight in _WEIGHTS.items():
        pdfmetrics.registerFont(TTFont(name, str(_static_weight(weight))))


@lru_cache(maxsize=4)
def glyphs(name: str) -> frozenset[int]:
    """Code points that a registered font can draw."""
    register()
    font = pdfmetrics.getFont(name)
    assert isinstance(font, TTFont)
    return frozenset(font.face.charToGlyph)


def _static_weight(weight: int) -> Path:
    made_from = f"{version('fontpkg-source-sans-3')}-{version('fonttools')}"
    path = cache_folder() / f"source-sans-3-{made_from}-{weight}-2.ttf"
    if path.exists():
        return path
    from fontTools import subset  # noqa: PLC0415 (a second's import, needed once on a machine)
    from fontTools.ttLib import TTFont as FontFile  # noqa: PLC0415
    from fontTools.varLib import instancer  # noqa: PLC0415

    source = files("fontpkg_source_sans_3") / "files" / "SourceSans3[wght].ttf"
    font = FontFile(str(source), recalcTimestamp=False)
    for layout in ("GSUB", "GPOS", "GDEF", "STAT"):
        if layout in font:
            del font[layout]
    options = subset.Options(layout_features=[], notdef_outline=True, recalc_timestamp=False)
    subsetter = subset.Subsetter(options)
    subsetter.populate(unicodes=font.getBestCmap())
    subsetter.subset(font)
    static = instancer.instantiateVariableFont(font, {"wght": weight}, inplace=True, optimize=False)
    # Two weights under one name would be taken for one font by PDF libraries.
    for record in static["name"].names:
        if record.nameID in (1, 4, 6, 16):
            record.string = f"SourceSans3-{weight}"
    # Written aside and renamed, so that a second process never reads half a font.
    handle, aside = tempfile.mkstemp(dir=path.parent, suffix=".ttf")
    os.close(handle)
    static.save(aside)
    os.replace(aside, path)
    return path
