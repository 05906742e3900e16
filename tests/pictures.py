"""`python -m tests.pictures`: the README's pictures, from the report of the first sample job. Needs pdftoppm."""

import io
import subprocess
from pathlib import Path
from tempfile import TemporaryDirectory

from PIL import Image

from fieldapp.report.build import build_report
from fieldapp.report.drawing.pages import draw_report
from tests.sheets import ROOT, sample

NAME = "tamarack-yard"
OUT = ROOT / "sample_jobs" / "pictures"
DOTS_PER_INCH = 110


def page(pdf: Path, number: int) -> Image.Image:
    """A page as a picture."""
    command = ["pdftoppm", "-r", str(DOTS_PER_INCH), "-f", str(number), "-l", str(number), "-png", str(pdf)]
    return Image.open(io.BytesIO(subprocess.run(command, check=True, capture_output=True).stdout))


def save(picture: Image.Image, name: str) -> None:
    """A small PNG in few colours."""
    OUT.mkdir(exist_ok=True)
    picture.convert("P", palette=Image.Palette.ADAPTIVE, colors=64).save(OUT / name, optimize=True)


def main() -> None:
    """Page one, and the upper half of the first surface's chapter."""
    with TemporaryDirectory() as folder:
        pdf = Path(folder) / "report.pdf"
        with pdf.open("wb") as out:
            draw_report(build_report(sample(NAME)), out, photos=ROOT / "sample_jobs" / NAME)
        save(page(pdf, 1), "page-one.png")
        wide, high = page(pdf, 2).size
        save(page(pdf, 2).crop((0, 0, wide, high * 62 // 100)), "depth-chart.png")


if __name__ == "__main__":
    main()
