"""Depth charts and strip charts as data: what each cell says, and whether it is shaded, hatched, crossed or empty."""

from fieldapp.reckoning.inputs import CountedBay
from fieldapp.reckoning.limits import DEPTH_TOLERANCE_MM
from fieldapp.reckoning.strips import strip_shares
from fieldapp.reckoning.units import MM_PER_INCH
from fieldapp.records.job import Thing
from fieldapp.report.model import Cell, ChartBay, DepthChart, Strip, StripChart
from fieldapp.report.terms import BLOCKED, ends
from fieldapp.report.view import SurfaceView


def depth_cell(view: SurfaceView, bay: CountedBay, place: int) -> Cell:
    """What the chart shows at a point."""
    depth = bay.depths_mm[place]
    if depth is None:
        reason = bay.blocked.get(place)
        return Cell(BLOCKED[reason][0], "blocked") if reason else Cell("", "unread")
    if depth <= DEPTH_TOLERANCE_MM:
        return Cell("0", "bare", 1.0)
    asked = max(view.counted.spec.depth_mm, view.vapour_depth_mm or 0.0)
    text = view.words.depth_number(depth)
    if view.is_under(depth):
        return Cell(text, "under", min(1.0, (asked - depth) / (0.4 * asked)))
    return Cell(text, "over", min(1.0, (depth - asked) / (0.5 * asked)), view.is_too_deep(depth))


def _chart_bay(view: SurfaceView, thing: Thing, bay: CountedBay, cells: tuple[Cell, ...]) -> ChartBay:
    body = thing.body
    low = min(bay.low_spots_mm, default=None)
    return ChartBay(
        key=bay.key,
        label=bay.label,
        width_mm=float(body["width_mm"]),
        height_mm=float(body["height_mm"]),
        row_shares=strip_shares(body.get("rows_at_mm"), bay.rows, body["height_mm"]),
        col_shares=strip_shares(body.get("cols_at_mm"), bay.cols, body["width_mm"]),
        cells=cells,
        low_spot=None if low is None else view.words.depth_number(low),
        low_spot_under=low is not None and view.is_under(low),
    )


def bay_things(view: SurfaceView, things: tuple[Thing, ...]) -> list[tuple[Thing, CountedBay]]:
    """Bays as described and as counted, in order."""
    return list(zip(things, view.counted.bays, strict=True))


def depth_chart(view: SurfaceView, things: tuple[Thing, ...]) -> DepthChart:
    """The depth chart of a surface.

    Args:
        view: The surface.
        things: The descriptions of its bays, in order.
    """
    bays = tuple(
        _chart_bay(view, thing, bay, tuple(depth_cell(view, bay, place) for place in range(len(bay.depths_mm))))
        for thing, bay in bay_things(view, things)
    )
    top, bottom = ends(view.counted.assembly)
    words, spec = view.words, view.counted.spec
    asked = max(spec.depth_mm, view.vapour_depth_mm or 0.0)
    lowest, highest = view.result.depth_mm.min, view.result.depth_mm.max
    return DepthChart(
        bays=bays,
        start=view.thing.body.get("numbered_from") or "",
        top=top,
        bottom=bottom,
        key=(
            words.depth_number(min(lowest, asked)) if lowest is not None else "",
            words.depth(asked),
            words.depth_number(max(highest, asked)) if highest is not None else "",
        ),
        notes=_notes(view, bays, asked),
    )


def _notes(view: SurfaceView, bays: tuple[ChartBay, ...], asked_mm: float) -> tuple[str, ...]:
    """The key in words, of what occurs in this chart alone."""
    cells = [cell for bay in bays for cell in bay.cells]
    states = {cell.state for cell in cells}
    notes: list[str] = []
    if "under" in states:
        notes.append(f"hatched: under {view.words.depth(asked_mm)}, denser the more is missing")
    if "bare" in states:
        notes.append("crossed: bare")
    if any(cell.too_deep for cell in cells) and view.max_depth_mm is not None:
        notes.append(f"upright lines: deeper than {view.words.depth(view.max_depth_mm)}")
    letters = {bay.blocked[place] for bay in view.counted.bays for place in bay.blocked}
    notes.extend(f"{BLOCKED[reason][0]}: {BLOCKED[reason][1]}" for reason in sorted(letters))
    if "unread" in states:
        notes.append("dashed and empty: not read")
    if any(bay.low_spot for bay in bays):
        notes.append("below a bay: the thinnest low spot found in it")
    return tuple(notes)


def touch_up_chart(view: SurfaceView, things: tuple[Thing, ...]) -> DepthChart:
    """The short bays of a surface with what each point still needs, for the crew."""
    words, limit = view.words, view.touch_up_limit_mm
    chosen: list[ChartBay] = []
    for thing, bay in bay_things(view, things):
        cells: list[Cell] = []
        for place in range(len(bay.depths_mm)):
            cell = depth_cell(view, bay, place)
            depth = bay.depths_mm[place]
            if depth is not None and depth < limit - DEPTH_TOLERANCE_MM:
                cells.append(Cell(f"+{words.depth_number(limit - depth)}", cell.state, cell.level))
            else:
                cells.append(Cell("" if depth is not None else cell.text, "over" if depth is not None else cell.state))
        low = min(bay.low_spots_mm, default=None)
        low_short = low is not None and low < limit - DEPTH_TOLERANCE_MM
        lacks = low_short or any(cell.text.startswith("+") for cell in cells)
        # A bay that was touched up and not read again is read first; nobody knows what it lacks now.
        if lacks and not bay.waiting:
            made = _chart_bay(view, thing, bay, tuple(cells))
            spot = f"+{words.depth_number(limit - low)}" if low is not None and low_short else None
            chosen.append(
                ChartBay(
                    made.key,
                    made.label,
                    made.width_mm,
                    made.height_mm,
                    made.row_shares,
                    made.col_shares,
                    made.cells,
                    spot,
                    low_short,
                )
            )
    top, bottom = ends(view.counted.assembly)
    start = view.thing.body.get("numbered_from") or ""
    return DepthChart(tuple(chosen), start, top, bottom, ("", words.depth(limit), ""), ())


def strip_chart(view: SurfaceView) -> StripChart | None:
    """Lowest, mean and highest depth by bay against the specified and the vapour depth; None where nothing was read."""
    if view.result.depth_mm.max is None:
        return None
    words, spec = view.words, view.counted.spec
    lines = [(spec.depth_mm, f"specified {words.depth(spec.depth_mm)}")]
    if spec.basis == "average-with-floor" and spec.floor_mm is not None:
        lines.append((spec.floor_mm, f"floor {words.depth(spec.floor_mm)}"))
    if (vapour_mm := view.vapour_depth_mm) is not None:
        lines.append((vapour_mm, f"{words.vapor} depth {words.depth(vapour_mm)}"))
    apart = [
        line for number, line in enumerate(lines) if all(abs(line[0] - other[0]) > 0.5 for other in lines[:number])
    ]
    highest = max(view.result.depth_mm.max, *(depth for depth, _ in apart))
    step = MM_PER_INCH if view.words.is_ip else 25.0
    while highest / step > 7:
        step *= 2
    steps = int(highest / step) + 1
    ticks = tuple((step * n, view.words.depth_number(step * n)) for n in range(steps + 1))
    pairs = view.pairs()
    return StripChart(
        strips=tuple(
            Strip(bay.label, _low_reading(bay), result.mean_mm, result.max_mm, result.low_spot_mm)
            for bay, result in pairs
        ),
        lines=tuple(apart),
        top_mm=step * steps,
        ticks=ticks,
    )


def _low_reading(bay: CountedBay) -> float | None:
    return min((depth for depth in bay.depths_mm if depth is not None), default=None)
