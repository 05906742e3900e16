"""Lays a report out on pages: furniture, page one, chapters, photos; and the crew sheet."""

from collections.abc import Iterable
from datetime import UTC, datetime
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any, BinaryIO, Final

from reportlab import rl_config
from reportlab.lib.utils import TimeStamp
from reportlab.pdfgen.canvas import Canvas
from reportlab.platypus import (
    BaseDocTemplate,
    CondPageBreak,
    Flowable,
    Frame,
    KeepTogether,
    PageBreak,
    PageTemplate,
    Paragraph,
    Spacer,
)

from fieldapp.report.drawing.depth_charts import DepthChartFlow
from fieldapp.report.drawing.fonts import BOLD, REGULAR, register
from fieldapp.report.drawing.marks import draw_mark
from fieldapp.report.drawing.photos import COLUMNS, PhotoFolder, PhotoRow
from fieldapp.report.drawing.strip_charts import StripChartFlow
from fieldapp.report.drawing.style import (
    ACCENT,
    ALARM,
    BODY,
    BOX,
    BULLET,
    COVER,
    FOOT,
    HEAD,
    INK,
    LEAD,
    MARGIN,
    PAPERS,
    RULE,
    SOFT,
)
from fieldapp.report.drawing.tables import SummaryFlow, TableFlow
from fieldapp.report.drawing.text import fitted, lines, prose, typeset, width
from fieldapp.report.model import CrewSheet, Part, Report, Section, Sentence

# Pictures go into the file as the bytes they are: ASCII85 would add a quarter to its size and most of the time.
rl_config.useA85 = 0

TOTAL: Final = "page-total"


class Title(Flowable):
    """A heading that is also a bookmark; with a mark and a word where it has a result."""

    def __init__(self, section: Section | None, text: str, subtitle: str, size: float, key: str, level: int) -> None:
        super().__init__()
        self.section = section
        self.text = text
        self.subtitle = subtitle
        self.size = size
        self.key = key
        self.level = level

    def wrap(self, available_width: float, _available_height: float) -> tuple[float, float]:
        """Size of the heading. [pt]"""
        self.width = available_width
        room = available_width - (86.0 if self.section and self.section.result else 0.0)
        self.title_lines = lines(typeset(self.text, BOLD), BOLD, self.size, room)
        self.sub_lines = lines(typeset(self.subtitle), REGULAR, 9.4, available_width) if self.subtitle else []
        self.height = len(self.title_lines) * self.size * 1.18 + len(self.sub_lines) * 12.0 + 4.0
        return available_width, self.height

    def draw(self) -> None:
        """Text, mark and outline entry."""
        canvas = self.canv
        canvas.bookmarkPage(self.key)
        canvas.addOutlineEntry(self.text, self.key, level=self.level)
        canvas.setFillColor(INK)
        canvas.setFont(BOLD, self.size)
        y = self.height - self.size
        for line in self.title_lines:
            canvas.drawString(0, y, line)
            y -= self.size * 1.18
        if self.section is not None and self.section.result is not None:
            word = self.section.word
            canvas.setFont(BOLD, 11.5)
            wide = width(word, BOLD, 11.5)
            canvas.drawString(self.width - wide, self.height - self.size, word)
            draw_mark(canvas, self.width - wide - 18.0, self.height - self.size - 1.6, self.section.result, 11.5)
        canvas.setFillColor(SOFT)
        canvas.setFont(REGULAR, 9.4)
        y += self.size * 1.18 - self.size * 0.2 - 11.0
        for line in self.sub_lines:
            canvas.drawString(0, y, line)
            y -= 12.0


class FactsFlow(Flowable):
    """Labels over texts in four columns, ruled above and below."""

    COLUMNS: Final = 4

    def __init__(self, facts: tuple[tuple[str, str], ...]) -> None:
        super().__init__()
        self.facts = facts

    def wrap(self, available_width: float, _available_height: float) -> tuple[float, float]:
        """Size of the grid. [pt]"""
        self.width = available_width
        self.each = available_width / self.COLUMNS
        self.cells: list[tuple[int, int, str, list[str]]] = []
        row = column = 0
        self.heights: list[float] = []
        for label, text in self.facts:
            broken = lines(typeset(text), REGULAR, 9.0, self.each - 10.0)
            span = 1
            if len(broken) > 3:
                span = 2
                broken = lines(typeset(text), REGULAR, 9.0, self.each * 2 - 10.0)
            if column + span > self.COLUMNS:
                row, column = row + 1, 0
            if row == len(self.heights):
                self.heights.append(0.0)
            self.heights[row] = max(self.heights[row], 11.0 + len(broken) * 11.0 + 5.0)
            self.cells.append((row, column, label, broken))
            column += span
        self.height = sum(self.heights) + 10.0
        return available_width, self.height

    def draw(self) -> None:
        """Row by row."""
        canvas = self.canv
        canvas.setStrokeColor(INK)
        canvas.setLineWidth(1.1)
        canvas.line(0, self.height - 1.0, self.width, self.height - 1.0)
        for row, column, label, broken in self.cells:
            y = self.height - 6.0 - sum(self.heights[:row]) - 9.0
            x = column * self.each
            canvas.setFillColor(SOFT)
            canvas.setFont(REGULAR, 7.4)
            canvas.drawString(x, y, label)
            canvas.setFillColor(INK)
            canvas.setFont(REGULAR, 9.0)
            for line in broken:
                y -= 11.0
                canvas.drawString(x, y, line)
        canvas.setStrokeColor(RULE)
        canvas.setLineWidth(0.6)
        canvas.line(0, 1.0, self.width, 1.0)


class Beside(Flowable):
    """A paragraph with something at its left: a bar in the accent colour, a result mark, or a box around it all."""

    def __init__(self, paragraph: Paragraph, kind: str, sentence: Sentence | None = None, indent: float = 16.0) -> None:
        super().__init__()
        self.paragraph = paragraph
        self.kind = kind
        self.sentence = sentence
        self.indent = indent

    def wrap(self, available_width: float, available_height: float) -> tuple[float, float]:
        """Size with its indent. [pt]"""
        _, high = self.paragraph.wrap(available_width - self.indent, available_height)
        self.width, self.height = available_width, high + (4.0 if self.kind == "bar" else 2.0)
        return available_width, self.height

    def draw(self) -> None:
        """What stands beside, then the paragraph."""
        canvas = self.canv
        if self.kind == "bar":
            canvas.setFillColor(ACCENT)
            canvas.rect(0, 0, 4.4, self.height, stroke=0, fill=1)
        elif self.sentence is not None and self.sentence.result is not None:
            draw_mark(canvas, 1.8, self.height - 11.6, self.sentence.result, 9.0)
        self.paragraph.drawOn(canvas, self.indent, 1.0)


class Boxed(Flowable):
    """Paragraphs in a ruled box with a title in it."""

    def __init__(self, title: str, paragraphs: list[Paragraph]) -> None:
        super().__init__()
        self.title = title
        self.paragraphs = paragraphs

    def wrap(self, available_width: float, available_height: float) -> tuple[float, float]:
        """Size of the box. [pt]"""
        self.width = available_width
        self.heights = [p.wrap(available_width - 20.0, available_height)[1] + 2.0 for p in self.paragraphs]
        self.height = sum(self.heights) + 26.0
        return available_width, self.height

    def draw(self) -> None:
        """Box, title, paragraphs."""
        canvas = self.canv
        canvas.setStrokeColor(SOFT)
        canvas.setLineWidth(0.7)
        canvas.rect(0, 0, self.width, self.height - 2.0, stroke=1, fill=0)
        canvas.setFillColor(INK)
        canvas.setFont(BOLD, 9.0)
        canvas.drawString(10.0, self.height - 15.0, self.title)
        y = self.height - 19.0
        for paragraph, high in zip(self.paragraphs, self.heights, strict=True):
            y -= high
            paragraph.drawOn(canvas, 10.0, y)


class _Canvas(Canvas):
    """Numbers pages 'n of m' by a form that is filled when the last page is known."""

    def save(self) -> None:
        """Fill in the total, then write."""
        self.beginForm(TOTAL, 0, -4, 40, 12)
        self.setFont(REGULAR, 7.4)
        self.setFillColor(SOFT)
        self.drawString(0, 0, str(self.getPageNumber() - 1))
        self.endForm()
        super().save()


def _heading(text: str) -> Flowable:
    style = LEAD.clone("heading", fontSize=11.2, leading=14.0, spaceBefore=9.0, spaceAfter=3.0)
    return Paragraph(prose(text, BOLD), style)


def _bullets(sentences: Iterable[Sentence], numbered: bool = False) -> list[Flowable]:
    return [
        Paragraph(prose(sentence.text), BULLET, bulletText=f"{number}." if numbered else "–")
        for number, sentence in enumerate(sentences, 1)
    ]


def _page_one(report: Report) -> list[Flowable]:
    story: list[Flowable] = [
        Title(None, report.title, report.subtitle, 21.0, "top", 0),
        Spacer(0, 5),
        FactsFlow(report.facts),
        Spacer(0, 7),
    ]
    for alarm in report.alarms:
        story += [Beside(Paragraph(prose(alarm.text, BOLD), ALARM), "bar"), Spacer(0, 5)]
    for sentence in report.covering:
        story.append(Beside(Paragraph(prose(sentence.text), COVER), "mark", sentence, 17.0))
    # The answer is what is read first; the longer it is, the smaller it can be set and still be.
    length = sum(len(sentence.text) for sentence in report.answer)
    size = 12.4 if length < 320 else 11.2 if length < 560 else 10.2
    style = LEAD.clone("answer", fontSize=size, leading=size * 1.34)
    told = "<br/>".join(prose(sentence.text, BOLD) for sentence in report.answer)
    story += [Spacer(0, 8), Beside(Paragraph(told, style), "bar", None, 14.0), Spacer(0, 9)]
    if report.table:
        story += [SummaryFlow(report.table_head, report.table), Spacer(0, 3)]
    if report.to_do:
        steps = LEAD.clone(
            "steps", fontSize=9.2, leading=12.0, fontName=REGULAR, bulletFontName=BOLD, bulletFontSize=9.2
        )
        numbered: list[Flowable] = [
            Paragraph(
                prose(sentence.text),
                steps.clone("step", leftIndent=15, bulletIndent=1, spaceAfter=2.0),
                bulletText=f"{number}.",
            )
            for number, sentence in enumerate(report.to_do, 1)
        ]
        story += [KeepTogether([_heading("What to do"), numbered[0]]), *numbered[1:]]
    box = [Paragraph(prose(text), BOX) for text in report.not_said]
    story += [Spacer(0, 8), Boxed("Not inspected, not said", box)]
    return story


def _part(part: Part, photos: PhotoFolder) -> list[Flowable]:
    head: list[Flowable] = [_heading(part.title)] if part.title else []
    body: list[Flowable] = []
    if part.bulleted:
        body += _bullets(part.prose)
    else:
        body += [Paragraph(prose(sentence.text), BODY) for sentence in part.prose]
    if part.chart is not None:
        body.append(DepthChartFlow(part.chart))
    if part.strips is not None:
        body.append(StripChartFlow(part.strips))
    if part.table is not None:
        body.append(TableFlow(part.table))
    for start in range(0, len(part.photos), COLUMNS):
        row = part.photos[start : start + COLUMNS]
        body.append(PhotoRow([(photo, photos.picture(photo.sha256)) for photo in row]))
    if not head or not body:
        return [*head, *body]
    first = body[0]
    if isinstance(first, (TableFlow, DepthChartFlow)):
        # These split; only keep the heading with a useful beginning.
        return [CondPageBreak(90.0), *head, *body]
    return [KeepTogether([*head, first]), *body[1:]]


def _chapter(section: Section, photos: PhotoFolder) -> list[Flowable]:
    story: list[Flowable] = [PageBreak() if section.new_page else CondPageBreak(140.0)]
    if not section.new_page:
        story.append(Spacer(0, 14))
    story += [Title(section, section.title, section.subtitle, 16.0, section.key, 0), Spacer(0, 4)]
    for part in section.parts:
        story += _part(part, photos)
        story.append(Spacer(0, 4))
    return story


def _stamp(dated: str) -> TimeStamp:
    """The PDF's own date: that of the latest record, so that two runs are equal byte for byte."""
    when = datetime.fromisoformat(dated[:-1]).replace(tzinfo=UTC)
    stamp = TimeStamp(invariant=1)
    stamp.t = when.timestamp()
    stamp.lt = when.timetuple()
    stamp.YMDhms = tuple(when.timetuple())[:6]
    return stamp


class _Document(BaseDocTemplate):
    """A document with running head and foot."""

    def __init__(self, out: BinaryIO, paper: str, told: Report | CrewSheet, *, landscape: bool = False) -> None:
        self.told = told
        size = PAPERS[paper]
        super().__init__(
            out,
            pagesize=size,
            leftMargin=MARGIN,
            rightMargin=MARGIN,
            topMargin=HEAD + 12.0,
            bottomMargin=FOOT + 12.0,
            title=f"{told.title}: {told.subtitle}",
            author="Bayreckon",
            subject=told.subtitle,
            creator="Bayreckon",
            keywords=list(told.keywords) if isinstance(told, Report) else [],
            lang="en-US",
            invariant=1,
        )
        wide, high = size
        frame = Frame(MARGIN, FOOT + 12.0, wide - 2 * MARGIN, high - HEAD - FOOT - 24.0, 0, 0, 0, 0, id="page")
        self.addPageTemplates([PageTemplate("page", [frame], onPage=self._furniture)])

    def _furniture(self, canvas: Any, document: Any) -> None:
        wide, high = document.pagesize
        told = self.told
        if document.page == 1:
            canvas._doc._timeStamp = _stamp(told.dated)
            canvas._doc.info.dateFormatter = None
        canvas.saveState()
        canvas.setFillColor(SOFT)
        canvas.setFont(REGULAR, 7.4)
        if document.page > 1:
            canvas.drawString(MARGIN, high - HEAD, fitted(typeset(told.title), REGULAR, 7.4, wide * 0.5))
            canvas.drawRightString(wide - MARGIN, high - HEAD, told.subtitle)
            canvas.setStrokeColor(RULE)
            canvas.setLineWidth(0.5)
            canvas.line(MARGIN, high - HEAD - 4.0, wide - MARGIN, high - HEAD - 4.0)
        canvas.setStrokeColor(RULE)
        canvas.setLineWidth(0.5)
        canvas.line(MARGIN, FOOT + 5.0, wide - MARGIN, FOOT + 5.0)
        digest = " ".join(told.digest[start : start + 4] for start in range(0, 16, 4))
        canvas.drawString(MARGIN, FOOT - 5.0, f"Bayreckon · {told.status} · records digest {digest} …")
        page = f"page {document.page} of "
        x = wide - MARGIN - 14.0
        canvas.drawRightString(x, FOOT - 5.0, page)
        canvas.translate(x, FOOT - 5.0)
        canvas.doForm(TOTAL)
        canvas.restoreState()


def draw_report(report: Report, out: BinaryIO, *, photos: Path, paper: str = "letter") -> None:
    """Write a report as PDF.

    Args:
        report: What is said.
        out: Where the bytes go.
        photos: Folder with the job's photos, each named by its SHA-256.
        paper: 'letter' or 'a4'.
    """
    register()
    with TemporaryDirectory() as scratch:
        folder = PhotoFolder(photos, Path(scratch))
        story = _page_one(report)
        for section in report.sections:
            story += _chapter(section, folder)
        _Document(out, paper, report).build(story, canvasmaker=_Canvas)


def draw_crew_sheet(sheet: CrewSheet, out: BinaryIO, *, paper: str = "letter") -> None:
    """Write the crew sheet as PDF: touch-up by bay, no prose."""
    register()
    story: list[Flowable] = [Title(None, sheet.title, sheet.subtitle, 18.0, "top", 0), Spacer(0, 6)]
    bays = sum(len(chart.bays) for _, chart, _, _ in sheet.surfaces)
    # One page: the more there is to say, the smaller each of it.
    tallest = max(60.0, 330.0 / max(len(sheet.surfaces), 1))
    number = 13.0 if bays <= 14 else 9.5 if bays <= 30 else 6.6
    for place, (name, chart, sums, each) in enumerate(sheet.surfaces):
        story += [Title(None, name, "", 14.0, f"surface-{place}", 0), TableFlow(sums, size=10.0), Spacer(0, 6)]
        if chart.bays:
            story += [
                DepthChartFlow(chart, with_key=False, tallest=tallest, number=number, widest_bay=84.0),
                Spacer(0, 4),
            ]
        if each is not None and bays <= 30:
            story += [TableFlow(each, size=9.4), Spacer(0, 8)]
    if not sheet.surfaces:
        story.append(Paragraph("Nothing to add, by these readings.", LEAD))
    story += [Paragraph(prose(note), BODY) for note in sheet.notes]
    _Document(out, paper, sheet).build(story, canvasmaker=_Canvas)
