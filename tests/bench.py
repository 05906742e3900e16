"""`python -m tests.bench`: how fast the work is, as ratios to floors measured in the same run.

Each row is the median of several runs of the work over the median of its floor, taken in turn so that a machine that slows
down slows both. Goals stand beside; nothing here is part of the test suite.
"""

import gc
import io
import json
import random
import resource
import subprocess
import sys
import time
from collections.abc import Callable
from hashlib import sha256
from math import exp, sin
from pathlib import Path
from statistics import median
from tempfile import TemporaryDirectory

import numpy as np
from PIL import Image, ImageDraw
from reportlab.lib.pagesizes import letter
from reportlab.pdfgen.canvas import Canvas

from fieldapp.reckoning.inputs import CountedBay, CountedJob, CountedSurface, Foam, Spec, Vapour
from fieldapp.reckoning.job import reckon
from fieldapp.reckoning.resistance import PerMetre
from fieldapp.records.file import load
from fieldapp.report.build import build_report, view_of
from fieldapp.report.drawing.fonts import REGULAR, register
from fieldapp.report.drawing.pages import draw_report
from fieldapp.report.model import Report

ROUNDS = 5
RS = 0.15
RSI_PER_M = 45.0
PERMEABILITY = 2.3
SPEC_MM = 88.9


def timed(work: Callable[[], object]) -> float:
    """Seconds of one run, garbage of earlier runs collected first."""
    gc.collect()
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def in_turn(work: Callable[[], object], floor: Callable[[], object], rounds: int = ROUNDS) -> tuple[float, float]:
    """Median seconds of the work and of its floor, after one run of each to warm up."""
    work()
    floor()
    pairs = [(timed(work), timed(floor)) for _ in range(rounds)]
    return median(pair[0] for pair in pairs), median(pair[1] for pair in pairs)


def sprayed_mm(bay: int, row: int, seed: random.Random) -> float:
    """A depth as foam lies: thin at the top of a bay, drifting along the surface."""
    return 95.0 - 18.0 * exp(-row) + 6.0 * sin(bay / 7.0) + seed.gauss(0.0, 3.0)


def counted_job(readings: int, points: int = 12) -> CountedJob:
    """A job as counted, of so many readings in bays of twelve points."""
    seed = random.Random(readings)
    foam = Foam("f", "Demo foam", "closed", PerMetre(RSI_PER_M), PERMEABILITY, 32.0, max_pass_mm=50.8, min_pass_mm=12.7)
    bays = tuple(
        CountedBay(
            key=str(number),
            label=str(number),
            rows=points,
            cols=1,
            area_m2=1.2,
            depths_mm=tuple(sprayed_mm(number, row, seed) for row in range(points)),
            areas_m2=(1.2 / points,) * points,
            blocked={},
        )
        for number in range(readings // points)
    )
    surface = CountedSurface(
        key="s",
        name="Bench",
        assembly="wall",
        foam=foam,
        bays_total_stated=len(bays),
        spec=Spec(SPEC_MM, "minimum", rsi=4.0, under_area_share_max=0.1),
        vapour=Vapour("depth", 76.2),
        bays=bays,
        chosen="all",
    )
    return CountedJob("j", "Bench", "ip", "inspection", (surface,))


def the_same_sums_in_numpy(job: CountedJob) -> Callable[[], object]:
    """The figures of every bay and of the surface, from the same lists, by numpy."""
    bays = job.surfaces[0].bays

    def sums() -> object:
        depth = np.array([depth for bay in bays for depth in bay.depths_mm], dtype=float)
        area = np.array([area for bay in bays for area in bay.areas_m2])
        sizes = np.array([len(bay.depths_mm) for bay in bays])
        starts = np.concatenate(([0], np.cumsum(sizes)[:-1]))
        bay_area = np.add.reduceat(area, starts)
        mean = np.add.reduceat(area * depth, starts) / bay_area
        low, high = np.minimum.reduceat(depth, starts), np.maximum.reduceat(depth, starts)
        delivered = bay_area / np.add.reduceat(area / (RS + depth * RSI_PER_M / 1000.0), starts) - RS
        permeance = np.add.reduceat(area * PERMEABILITY * 1000.0 / depth, starts) / bay_area
        lack = np.maximum(SPEC_MM - depth, 0.0)
        under = np.add.reduceat(np.where(lack > 0.05, area, 0.0), starts) / bay_area
        deep = np.add.reduceat(np.where(depth < 0.7 * SPEC_MM, area, 0.0), starts)
        missing = np.add.reduceat(area * lack, starts) / 1000.0
        order = np.add.reduceat(area * np.where(lack > 0.05, np.maximum(lack, 12.7), 0.0), starts)
        deepest = np.maximum.reduceat(lack, starts)
        variance = np.add.reduceat((depth - np.repeat(np.add.reduceat(depth, starts) / sizes, sizes)) ** 2, starts)
        figures = (mean, low, high, delivered, permeance, under, deep, missing, order, deepest, variance)
        return depth.std(ddof=1), [figure.tolist() for figure in figures]

    return sums


def bench_job(folder: Path, bays: int, points: int, photos: int) -> Path:
    """A job file as an inspector leaves it, with photos beside it."""
    seed = random.Random(7)
    key = "00000000-0000-7000-8000-{:012x}".format
    records: list[str] = []
    job, foam, surface = key(1), key(2), key(3)

    def write(kind: str, body: dict[str, object]) -> None:
        number = len(records) + 1
        minute, second = divmod(number // 4, 60)
        at = f"2026-05-{4 + minute // 1440:02d}T{minute // 60 % 24:02d}:{minute % 60:02d}:{second:02d}.{number % 1000:03d}Z"
        envelope = {
            "id": key(10_000 + number),
            "job": job,
            "kind": kind,
            "at": at,
            "by": "inspector-1",
            "device": "d-1",
        }
        records.append(json.dumps({**envelope, "n": number, "body": body}))

    write("job", {"key": job, "name": "Bench job, invented", "units": "ip", "tz": "America/Winnipeg"})
    resistance = {"rsi_per_m": RSI_PER_M}
    passes = {"max_pass_mm": 50.8, "min_pass_mm": 12.7, "loss_share": 0.1, "permeability_ng_m": PERMEABILITY}
    write("foam", {"key": foam, "name": "Demo foam", "cell": "closed", "resistance": resistance, **passes})
    spec = {"depth_mm": SPEC_MM, "basis": "minimum"}
    vapour = {"rule": "depth", "depth_mm": 76.2}
    about = {
        "key": surface,
        "name": "Bench wall",
        "assembly": "wall",
        "foam": foam,
        "bays_total": bays,
        "chosen": "all",
    }
    write("surface", {**about, "spec": spec, "vapour": vapour})
    for bay in range(bays):
        size = {"width_mm": 368.3, "height_mm": 2438.4, "rows": points, "cols": 1}
        write("bay", {"key": key(100 + bay), "surface": surface, "label": str(bay + 1), "order": bay, **size})
    for bay in range(bays):
        for row in range(points):
            eighths = round(sprayed_mm(bay, row, seed) / 25.4 * 8)
            where = {"bay": key(100 + bay), "row": row, "col": 0, "round": 1, "purpose": "inspection"}
            write("reading", {**where, "depth_mm": eighths * 25.4 / 8, "entered": f"{eighths}/8"})
    beside = folder / "bench"
    beside.mkdir()
    for number in range(photos):
        content = noisy_jpeg(number)
        digest = sha256(content).hexdigest()
        (beside / f"{digest}.jpg").write_bytes(content)
        shape = {"bytes": len(content), "width": 1600, "height": 1200, "media_type": "image/jpeg"}
        write("photo", {"sha256": digest, **shape, "bay": key(100 + number), "caption": f"Bay {number + 1}"})
    path = folder / "bench.jsonl"
    path.write_text("\n".join(records) + "\n")
    return path


def noisy_jpeg(number: int) -> bytes:
    """A picture of 1600 x 1200 that takes about as many bytes as a photo of foam."""
    grain = Image.effect_noise((560, 420), 34.0).resize((1600, 1200)).convert("RGB")
    ImageDraw.Draw(grain).text((40, 40), f"drawn for the benchmark, {number}", fill=(0, 0, 0), font_size=48)
    out = io.BytesIO()
    grain.save(out, "JPEG", quality=76)
    return out.getvalue()


def floor_of_drawing(report: Report, photos: Path) -> Callable[[], object]:
    """As many chart cells with their numbers, table cells and the same JPEGs, straight onto a canvas."""
    cells = [cell.text for s in report.sections for p in s.parts if p.chart for b in p.chart.bays for cell in b.cells]
    texts = [text for s in report.sections for p in s.parts if p.table for row in p.table.rows for text in row]
    paths = [str(path) for path in sorted(photos.glob("*.jpg"))]

    def draw() -> object:
        canvas = Canvas(io.BytesIO(), pagesize=letter, invariant=1)
        for number, text in enumerate(cells):
            if number % 400 == 0 and number:
                canvas.showPage()
            x, y = 20 + number % 20 * 28, 20 + number // 20 % 20 * 36
            canvas.setFillGray(0.8)
            canvas.rect(x, y, 26, 34, stroke=0, fill=1)
            canvas.setFillGray(0)
            canvas.setFont(REGULAR, 7)
            canvas.drawString(x + 4, y + 12, text)
        for number, text in enumerate(texts):
            if number % 700 == 0:
                canvas.showPage()
                canvas.setFont(REGULAR, 7)
            canvas.drawString(20 + number % 14 * 40, 20 + number // 14 % 50 * 15, text)
        for path in paths:
            canvas.showPage()
            canvas.drawImage(path, 36, 36, 540, 405)
        canvas.save()
        return canvas

    return draw


def peak_mb_of_report(job: Path) -> float:
    """Peak memory of the whole command in a process of its own. [MB]"""
    code = (
        "import sys\nfrom fieldapp.cli import main\n"
        "main(['report', sys.argv[1], '-o', sys.argv[2]])\n"
        "print(next(line.split()[1] for line in open('/proc/self/status') if line.startswith('VmHWM')))"
    )
    command = [sys.executable, "-c", code, str(job), str(job.with_suffix(".pdf"))]
    done = subprocess.run(command, check=True, capture_output=True, text=True)
    return int(done.stdout.split()[-1]) / 1024


def row(name: str, found: str, goal: str, detail: str) -> None:
    """One line of the table."""
    print(f"| {name:<52} | {found:>8} | {goal:>9} | {detail:<58} |")


def main() -> None:
    """Print the table."""
    register()
    print(f"| {'what':<52} | {'found':>8} | {'goal':>9} | {'measured':<58} |")
    print(f"|{'-' * 54}|{'-' * 10}|{'-' * 11}|{'-' * 60}|")
    job = counted_job(100_000)
    ours, floor = in_turn(lambda: reckon(job), the_same_sums_in_numpy(job))
    detail = f"{ours * 1000:.0f} ms against {floor * 1000:.1f} ms"
    row("reckoning 100,000 readings / the same sums in numpy", f"{ours / floor:.1f}x", "12x", detail)
    per: dict[int, float] = {}
    for readings in (1_000, 10_000, 100_000, 1_000_000):
        sized = counted_job(readings)
        times = 5 if readings < 1_000_000 else 3
        per[readings] = median(timed(lambda sized=sized: reckon(sized)) for _ in range(times)) / readings * 1e6  # type: ignore[misc]
    shown = ", ".join(f"{micro:.2f}" for micro in per.values())
    row(
        "a reading in 1,000,000 / a reading in 1,000",
        f"{per[1_000_000] / per[1_000]:.2f}x",
        "linear",
        f"{shown} us a reading",
    )
    with TemporaryDirectory() as folder:
        path = bench_job(Path(folder), bays=300, points=12, photos=60)
        photos = path.with_suffix("")

        def whole() -> object:
            with path.open("rb") as lines:
                report = build_report(view_of(load(lines)))
            out = io.BytesIO()
            draw_report(report, out, photos=photos)
            return out

        with path.open("rb") as lines:
            report = build_report(view_of(load(lines)))
        ours, floor = in_turn(whole, floor_of_drawing(report, photos))
        detail = f"{ours * 1000:.0f} ms against {floor * 1000:.0f} ms; 300 bays, 3,600 readings, 60 photos"
        row("report from its job file / cells and JPEGs on a canvas", f"{ours / floor:.2f}x", "3x", detail)
        row("peak memory of that report, whole process", f"{peak_mb_of_report(path):.0f} MB", "200 MB", "")
        size = path.with_suffix(".pdf").stat().st_size
        bytes_of_photos = sum(photo.stat().st_size for photo in photos.glob("*.jpg"))
        allowed = bytes_of_photos * 1.05 + 1e6
        detail = f"{size / 1e6:.1f} MB; photos {bytes_of_photos / 1e6:.1f} MB"
        row("file / 1.05 of its photos' bytes and 1 MB", f"{size / allowed:.2f}", "1", detail)
    with TemporaryDirectory() as folder:
        path = bench_job(Path(folder), bays=334, points=12, photos=0)
        command = [sys.executable, "-m", "fieldapp.cli", "reckon", str(path)]
        bare = [sys.executable, "-c", "pass"]
        ours, floor = in_turn(
            lambda: subprocess.run(command, check=True, capture_output=True),
            lambda: subprocess.run(bare, check=True, capture_output=True),
        )
        detail = f"Python alone {floor * 1000:.0f} ms; 4,008 readings"
        row("`bayreckon reckon` of 4,000 readings, whole process", f"{ours * 1000:.0f} ms", "500 ms", detail)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    print(f"\nmedians of {ROUNDS} runs, work and floor in turn; this process peaked at {peak:.0f} MB")


if __name__ == "__main__":
    main()
