"""A figure as SVG: the same bytes for the same figure, every text escaped by the writer.

It is told apart by hatching, dashes and marks and not by colour, so that it may be printed in black.
"""

from collections.abc import Iterable

from faultloop.reports.figure import PLOT_HEIGHT, PLOT_LEFT, PLOT_WIDTH, Figure, Region
from faultloop.reports.paths import fast_edge, outline, slow_edge
from faultloop.reports.scale import Axis
from faultloop.reports.sheet import FAINT as _FAINT
from faultloop.reports.sheet import GREY as _GREY
from faultloop.reports.sheet import INK as _INK
from faultloop.reports.sheet import LARGE as _LARGE
from faultloop.reports.sheet import MARGIN, Sheet
from faultloop.reports.sheet import PAPER as _PAPER
from faultloop.reports.sheet import PLAIN as _PLAIN
from faultloop.reports.sheet import SMALL as _SMALL
from faultloop.reports.sheet import number as _number
from faultloop.reports.sheet import put as _put

WIDTH = 720.0
ROOM = WIDTH - 2 * MARGIN
_LEGEND_LEFT = 64.0
# Ink, hatching angle and dashes of an overcurrent and of a residual device.
_STYLES: dict[bool, tuple[str, float, dict[str, str]]] = {
    False: ("#17405c", 45, {}),
    True: ("#7a4a00", -45, {"stroke_dasharray": "9 3"}),
}
_DEADLINE_DASH = "14 4 2 4"


class _Drawing(Sheet):
    """One figure being drawn from the top down."""

    def __init__(self, figure: Figure) -> None:
        self.figure = figure
        super().__init__(figure.key, figure.language, figure.title, figure.description, WIDTH)
        for region in figure.regions:
            ink, angle, _ = _STYLES[region.residual]
            self._hatching(_hatch(region), ink, angle, step=7)
        if figure.span is not None:
            self._hatching("span", _INK, 90, step=4)

    def _hatching(self, name: str, ink: str, angle: float, step: float) -> None:
        turned = f"rotate({angle})"
        box = {"patternUnits": "userSpaceOnUse", "patternTransform": turned}
        pattern = _put(self.defs, "pattern", id=self.id(name), width=step, height=step, **box)
        _put(pattern, "rect", width=step, height=step, fill=ink, fill_opacity=0.10)
        _put(pattern, "line", x1=0, y1=0, x2=step, y2=0, stroke=ink, stroke_width=1, stroke_opacity=0.55)

    def fill(self, name: str) -> str:
        """Reference to a hatching."""
        return f"url(#{self.id(name)})"


def _hatch(region: Region) -> str:
    return "residual" if region.residual else "overcurrent"


def svg_bytes(figure: Figure) -> bytes:
    """Draw a figure: heading, plot, key in words, footer."""
    drawing = _Drawing(figure)
    drawing.y = MARGIN - 6
    drawing.lines(figure.title, _LARGE, font_weight="bold")
    drawing.lines(figure.subtitle, _PLAIN, after=20)
    x, y = figure.axes(drawing.y)
    _put_grid(drawing, x, y)
    _put_span(drawing, x, y)
    for region in figure.regions:
        _put_region(drawing, region, x, y)
    _put_deadline(drawing, x, y)
    _put_labels(drawing, x, y)
    _put_key(drawing)
    drawing.y += 6
    for line in figure.footer:
        drawing.lines(line, _SMALL, fill="#333333")
    return drawing.written()


def _put_grid(drawing: _Drawing, x: Axis, y: Axis) -> None:
    grid = _put(drawing.sheet, "g", class_="grid", fill="none")
    top, bottom = y.at(y.greatest), y.at(y.least)
    for heavy in (False, True):
        lines = [f"M{_number(x.at(v))} {_number(top)}V{_number(bottom)}" for v, decade in x.lines() if decade == heavy]
        lines += [f"M{_number(PLOT_LEFT)} {_number(y.at(v))}h{_number(PLOT_WIDTH)}" for v, d in y.lines() if d == heavy]
        ink, thick = (_GREY, 0.9) if heavy else (_FAINT, 0.5)
        _put(grid, "path", d="".join(lines), stroke=ink, stroke_width=thick)
    _put(grid, "rect", x=PLOT_LEFT, y=top, width=PLOT_WIDTH, height=PLOT_HEIGHT, stroke=_INK, stroke_width=1)


def _put_labels(drawing: _Drawing, x: Axis, y: Axis) -> None:
    bottom = y.at(y.least)
    for value, label in x.ticks():
        drawing.write(label, x.at(value), bottom + 18, font_size=11, text_anchor="middle", class_="tick")
    for value, label in y.ticks():
        drawing.write(label, PLOT_LEFT - 7, y.at(value) + 4, font_size=11, text_anchor="end", class_="tick")
    drawing.write(drawing.figure.current_axis, PLOT_LEFT + PLOT_WIDTH / 2, bottom + 37, text_anchor="middle")
    middle = y.at(y.greatest) + PLOT_HEIGHT / 2
    turned = f"rotate(-90 20 {_number(middle)})"
    drawing.write(drawing.figure.time_axis, 20, middle, text_anchor="middle", transform=turned)
    drawing.y = bottom + 44


def _path(places: Iterable[tuple[float, float]]) -> str:
    return "M" + "L".join(f"{_number(x)} {_number(y)}" for x, y in places)


def _put_region(drawing: _Drawing, region: Region, x: Axis, y: Axis) -> None:
    ink, _, dashes = _STYLES[region.residual]
    group = _put(drawing.sheet, "g", class_="band", stroke=ink, fill="none", stroke_linejoin="round")
    inside = {"fill": drawing.fill(_hatch(region)), "stroke": "none"}
    _put(group, "path", class_="region", d=_path(outline(region, x, y)) + "Z", **inside)
    _put(group, "path", class_="greatest-time", d=_path(slow_edge(region, x, y)), stroke_width=2.6, **dashes)
    if fast := fast_edge(region, x, y):
        _put(group, "path", class_="least-time", d=_path(fast), stroke_width=1.1, **dashes)
    for current, time in region.fast:
        _put(group, "circle", cx=x.at(current), cy=y.at(time), r=3, fill=_PAPER, stroke_width=1.2)
    for current, time in region.slow:
        _put(group, "circle", cx=x.at(current), cy=y.at(time), r=3.4, fill=ink)


def _put_span(drawing: _Drawing, x: Axis, y: Axis) -> None:
    span = drawing.figure.span
    if span is None:
        return
    left = PLOT_LEFT if span.least is None else x.at(span.least)
    right = PLOT_LEFT + PLOT_WIDTH if span.greatest is None else x.at(span.greatest)
    top = y.at(y.greatest)
    group = _put(drawing.sheet, "g", class_="fault-current")
    box = {"x": left, "y": top, "width": max(right - left, 1.5), "height": PLOT_HEIGHT}
    _put(group, "rect", fill=drawing.fill("span"), **box)
    for end, place in ((span.least, left), (span.greatest, right)):
        if end:
            _put(group, "line", x1=place, x2=place, y1=top, y2=top + PLOT_HEIGHT, stroke=_INK, stroke_width=1.2)


def _put_deadline(drawing: _Drawing, x: Axis, y: Axis) -> None:
    deadline = drawing.figure.deadline
    if deadline is not None:
        place = {"x1": x.start, "x2": x.start + x.length, "y1": y.at(deadline.time_s), "y2": y.at(deadline.time_s)}
        dashes = {"class_": "deadline", "stroke_dasharray": _DEADLINE_DASH}
        _put(drawing.sheet, "line", stroke=_INK, stroke_width=1.8, **place, **dashes)


def _put_key(drawing: _Drawing) -> None:
    """What the marks mean, each with its numbers: nothing can be read from the plot alone."""
    figure = drawing.figure
    for region in figure.regions:
        ink, _, dashes = _STYLES[region.residual]
        _swatch(drawing, drawing.fill(_hatch(region)), ink)
        drawing.lines(region.words, _PLAIN, _LEGEND_LEFT)
        _stroke(drawing, ink, 2.6, ink, **dashes)
        drawing.lines(region.slow_words, _PLAIN, _LEGEND_LEFT)
        if region.fast:
            _stroke(drawing, ink, 1.1, _PAPER, **dashes)
        drawing.lines(region.fast_words, _PLAIN, _LEGEND_LEFT, after=5)
    if figure.span is not None:
        _swatch(drawing, drawing.fill("span"), _INK)
        drawing.lines(figure.span.words, _PLAIN, _LEGEND_LEFT)
    if figure.deadline is not None:
        _stroke(drawing, _INK, 1.8, None, stroke_dasharray=_DEADLINE_DASH)
        drawing.lines(figure.deadline.words, _PLAIN, _LEGEND_LEFT)
    drawing.y += 5
    for note in figure.notes:
        drawing.lines(note, _PLAIN)


def _swatch(drawing: _Drawing, fill: str, ink: str) -> None:
    box = {"x": MARGIN, "y": drawing.y + 5, "width": 38, "height": 11}
    _put(drawing.sheet, "rect", fill=fill, stroke=ink, stroke_width=0.8, **box)


def _stroke(drawing: _Drawing, ink: str, thick: float, dot: str | None, **dashes: str) -> None:
    middle = drawing.y + 11
    place = {"x1": MARGIN, "x2": MARGIN + 38, "y1": middle, "y2": middle}
    _put(drawing.sheet, "line", stroke=ink, stroke_width=thick, **place, **dashes)
    if dot is not None:
        _put(drawing.sheet, "circle", cx=MARGIN + 19, cy=middle, r=3, fill=dot, stroke=ink)
