"""The report as a general contractor gets it: what it says, that it says it everywhere alike, and that it is drawn whole."""

import io
from collections.abc import Iterator
from hashlib import sha256
from pathlib import Path

import pytest
from PIL import Image
from pypdf import PdfReader

from fieldapp.records.file import load
from fieldapp.report.build import build_crew_sheet, build_report, view_of
from fieldapp.report.drawing.fonts import BOLD, REGULAR, glyphs
from fieldapp.report.drawing.pages import draw_crew_sheet, draw_report
from fieldapp.report.drawing.photos import PhotoFolder
from fieldapp.report.drawing.text import MISSING, typeset
from fieldapp.report.model import DepthChart, Report, Sentence
from fieldapp.report.view import JobView
from tests.sheets import SAMPLES, Sheet, sample

NO_PHOTOS = Path("/nonexistent")


def report_pdf(view: JobView, paper: str = "letter", photos: Path = NO_PHOTOS) -> bytes:
    out = io.BytesIO()
    draw_report(build_report(view), out, photos=photos, paper=paper)
    return out.getvalue()


def pages_of(content: bytes) -> list[str]:
    return [" ".join(page.extract_text().split()) for page in PdfReader(io.BytesIO(content)).pages]


def sentences(report: Report) -> Iterator[Sentence]:
    yield from (*report.alarms, *report.covering, *report.answer, *report.to_do)
    for section in report.sections:
        for part in section.parts:
            yield from part.prose


def charts(report: Report) -> Iterator[DepthChart]:
    for section in report.sections:
        yield from (part.chart for part in section.parts if part.chart is not None)


@pytest.mark.parametrize("name", SAMPLES)
def test_every_bay_that_a_sentence_names_as_short_is_hatched_in_its_chart(name: str) -> None:
    report = build_report(sample(name))
    hatched = {bay.key for chart in charts(report) for bay in chart.bays if bay.is_hatched}
    named = {key for sentence in sentences(report) for key in sentence.short_bays}
    assert named <= hatched


def test_a_low_spot_alone_is_hatched_too_since_a_sentence_names_its_bay() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=3)
    sheet.low_spot(1, 60.0)
    report = build_report(sheet.view())
    named = {key for sentence in report.answer for key in sentence.short_bays}
    assert named == {sheet.bays[1]}
    assert {bay.key for chart in charts(report) for bay in chart.bays if bay.is_hatched} == named


@pytest.mark.parametrize("name", SAMPLES)
def test_two_runs_are_equal_byte_for_byte(name: str, tmp_path: Path) -> None:
    view = sample(name)
    photos = tmp_path / "elsewhere"
    photos.mkdir()
    beside = Path("sample_jobs") / name
    for photo in beside.glob("*"):
        (photos / photo.name).write_bytes(photo.read_bytes())
    assert report_pdf(view, photos=beside) == report_pdf(sample(name), photos=photos)


@pytest.mark.parametrize("name", SAMPLES)
@pytest.mark.parametrize("paper", ["letter", "a4"])
def test_every_page_says_that_it_is_unsigned_with_job_number_of_pages_and_digest(name: str, paper: str) -> None:
    view = sample(name)
    content = report_pdf(view, paper)
    reader = PdfReader(io.BytesIO(content))
    size = {"letter": (612, 792), "a4": (595, 842)}[paper]
    texts = pages_of(content)
    assert (round(reader.pages[0].mediabox.width), round(reader.pages[0].mediabox.height)) == size
    for number, text in enumerate(texts, 1):
        assert "unsigned" in text
        assert view.digest[:4] in text
        assert f"page {number} of" in text
        assert typeset(view.job.name)[:30] in text


@pytest.mark.parametrize("name", SAMPLES)
def test_page_one_carries_the_answer_and_bookmarks_lead_to_every_chapter(name: str) -> None:
    view = sample(name)
    report = build_report(view)
    content = report_pdf(view)
    first = " ".join(pages_of(content)[:2])
    for sentence in report.covering:
        assert typeset(sentence.text).replace("\u00a0", " ")[:40] in first.replace("\u00a0", " ")
    reader = PdfReader(io.BytesIO(content))
    outline = [item.title for item in reader.outline if not isinstance(item, list)]
    assert outline == [report.title, *(section.title for section in report.sections)]
    assert reader.metadata is not None
    assert reader.metadata.title == f"{report.title}: {report.subtitle}"
    assert str(reader.metadata.get("/CreationDate"))[2:10] == view.dated[:10].replace("-", "")


@pytest.mark.parametrize("name", SAMPLES)
def test_every_character_drawn_has_a_glyph(name: str) -> None:
    report = build_report(sample(name))
    texts = [sentence.text for sentence in sentences(report)]
    texts += [
        text
        for section in report.sections
        for part in section.parts
        if part.table
        for row in part.table.rows
        for text in row
    ]
    texts += [text for pair in report.facts for text in pair] + list(report.not_said)
    for font in (REGULAR, BOLD):
        missing = {letter for text in texts for letter in typeset(text, font) if ord(letter) not in glyphs(font)}
        assert not missing
        assert MISSING not in "".join(typeset(text, font) for text in texts)


def test_a_letter_that_the_font_lacks_is_seen_as_a_hollow_square_and_not_lost_in_silence() -> None:
    assert typeset("漆 A") == f"{MISSING} A"


@pytest.mark.parametrize(
    ("plain", "set_text"),
    [
        ("2 7/8 in", "2\u2009⅞ in"),
        ("15/16 in", "¹⁵⁄₁₆ in"),
        ("4 1/16", "4\u2009¹⁄₁₆"),
        ("on 3/4/2026", "on 3/4/2026"),
        ("and/or", "and/or"),
        ("bays 12/8", "bays 12/8"),
    ],
)
def test_depths_are_set_as_the_trade_writes_them_and_dates_are_left_alone(plain: str, set_text: str) -> None:
    assert typeset(plain) == set_text


def test_a_job_in_which_nothing_was_read_is_unproven_throughout_and_its_report_says_so() -> None:
    view = Sheet.laid_out(bays=4).view()
    report = build_report(view)
    assert view.result.result == "unproven"
    assert {check.result for surface in view.result.surfaces for check in surface.checks} == {"unproven"}
    text = " ".join(pages_of(report_pdf(view)))
    assert "nothing was read yet" in text
    assert "meets everything asked" not in text
    assert all(sentence.result == "unproven" for sentence in report.answer)


def test_a_job_without_a_surface_is_unproven_and_still_has_a_report() -> None:
    view = Sheet.laid_out(bays=0, surface=False).view()
    assert view.result.result == "unproven"
    assert "No surface is laid out" in pages_of(report_pdf(view))[0]


def test_markup_in_names_is_printed_and_not_obeyed() -> None:
    hostile = "<b>Yard</b> & <font color='red'>sons"
    sheet = Sheet.even(depth_mm=101.6, name=hostile, bays=2)
    sheet.records[2]["body"]["name"] = f"{hostile} wall"
    sheet.write("visit", {"not_inspected": f"the {hostile} loft"})
    sheet.write("deficiency", {"bay": sheet.bays[0], "sort": "gap", "severity": "stop", "text": f"{hostile} gap"})
    text = " ".join(pages_of(report_pdf(sheet.view())))
    for what in ("", " wall", " loft", " gap"):
        assert f"{hostile}{what}" in text


@pytest.mark.parametrize("bays", [1, 2, 400])
def test_one_bay_and_four_hundred_are_drawn_with_every_depth_in_its_cell(bays: int) -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=bays, name="A very long name of a job that goes on and on for " * 3)
    text = " ".join(pages_of(report_pdf(sheet.view())))
    chart = text.split("Lowest, mean and highest")[0]
    assert chart.count(" 4") >= bays


def test_a_figure_that_misses_its_limit_is_never_printed_equal_to_it() -> None:
    # 101.5 mm is 3.996 in: to sixteenths it would read as the 4 in asked.
    text = " ".join(pages_of(report_pdf(Sheet.even(depth_mm=101.5, bays=3).view())))
    assert "just under 4 in" in text
    assert "lowest 4 in" not in text


def jpeg(*, orientation: int = 1, size: tuple[int, int] = (400, 300)) -> bytes:
    """A picture, red at its left, with a place in its data."""
    picture = Image.new("RGB", size, "white")
    picture.paste((200, 0, 0), (0, 0, size[0] // 4, size[1]))
    data = Image.Exif()
    data[0x0112] = orientation
    data.get_ifd(0x8825)[2] = (49.0, 53.0, 0.0)
    out = io.BytesIO()
    picture.save(out, "JPEG", exif=data)
    return out.getvalue()


def put(folder: Path, content: bytes, end: str = ".jpg") -> str:
    digest = sha256(content).hexdigest()
    (folder / f"{digest}{end}").write_bytes(content)
    return digest


def test_photos_are_turned_upright_and_carry_no_place_into_the_report(tmp_path: Path) -> None:
    scratch = tmp_path / "scratch"
    scratch.mkdir()
    # Orientation 6 (EXIF 2.3, tag 0x0112): the stored left side belongs at the top.
    picture = PhotoFolder(tmp_path, scratch).picture(put(tmp_path, jpeg(orientation=6)))
    assert picture.path is not None
    assert (picture.width, picture.height) == (300, 400)
    with Image.open(Path.joinpath(scratch, f"{picture.path.digest}.jpg")) as shown:
        assert not shown.getexif()
        red, _, blue = shown.convert("RGB").getpixel((150, 5))  # type: ignore[misc]
        assert red > 150 > blue


def test_a_photo_that_is_missing_altered_or_no_picture_says_so_in_its_place(tmp_path: Path) -> None:
    folder = PhotoFolder(tmp_path, tmp_path)
    altered = put(tmp_path, jpeg())
    path = tmp_path / f"{altered}.jpg"
    path.write_bytes(path.read_bytes() + b"x")
    garbage = put(tmp_path, b"not a picture at all")
    truncated = put(tmp_path, jpeg(orientation=6)[:900])
    assert "digest differs" in folder.picture(altered).problem
    assert "does not lie beside" in folder.picture("0" * 64).problem
    assert "cannot be shown" in folder.picture(garbage).problem
    assert "cannot be shown" in folder.picture(truncated).problem


def test_a_small_file_that_unpacks_to_an_absurd_size_is_refused_before_it_is_read(tmp_path: Path) -> None:
    out = io.BytesIO()
    Image.new("1", (9_000, 9_000)).save(out, "PNG")
    assert "million" in PhotoFolder(tmp_path, tmp_path).picture(put(tmp_path, out.getvalue(), ".png")).problem


@pytest.mark.parametrize("name", SAMPLES)
def test_the_crew_sheet_is_one_page_and_names_every_bay_that_lacks_foam(name: str) -> None:
    view = sample(name)
    out = io.BytesIO()
    draw_crew_sheet(build_crew_sheet(view), out)
    texts = pages_of(out.getvalue())
    assert len(texts) == 1
    # A bay that was touched up and not read again is named too: to be read before anything is added.
    lacking = {bay.label for s in view.result.surfaces for bay in s.bays if bay.touch_up.volume_m3}
    for label in lacking:
        assert label in texts[0]
    if not lacking and not any(s.touch_up.volume_m3 for s in view.result.surfaces):
        assert "Nothing to add" in texts[0]


def test_what_was_covered_what_somebody_objects_to_and_what_was_withdrawn_is_in_the_report() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=3)
    sheet.write("covered", {"bays": sheet.bays[:2], "text": "drywall hung"})
    sheet.write("objection", {"about": sheet.bays[2], "text": "read through a cable hole"})
    low = sheet.reading(0, 0, 20.0)
    sheet.write("withdrawal", {"record": low, "reason": "probe caught a nail"})
    text = " ".join(pages_of(report_pdf(sheet.view())))
    for told in ("1 and 2 covered 4 May 2026", "drywall hung", "read through a cable hole", "probe caught a nail"):
        assert told in text.replace("\u00a0", " ")


def test_inches_and_millimetres_are_shown_each_in_the_jobs_own_units() -> None:
    in_inches = " ".join(pages_of(report_pdf(Sheet.even(depth_mm=101.6, bays=2, units="ip").view())))
    in_mm = " ".join(pages_of(report_pdf(Sheet.even(depth_mm=101.6, bays=2, units="si").view(), "a4")))
    assert "4 in" in in_inches.replace("\u00a0", " ")
    assert "102 mm" in in_mm.replace("\u00a0", " ")
    assert "vapor" in in_inches
    assert "vapour" in in_mm
    assert "vapor " not in in_mm.replace("vapour", "")


def test_the_whole_path_from_lines_to_paper_takes_a_file_with_refused_lines() -> None:
    sheet = Sheet.even(depth_mm=101.6, bays=2)
    lines = [*sheet.lines(), b'{"id": "x"}', b"garbage"]
    view = view_of(load(lines))
    text = " ".join(pages_of(report_pdf(view)))
    assert len(view.refused) == 2
    assert "2 records could not be taken" in text or "2 records" in text
