"""The elevation of a truss as a native chart: lines of the members, their names and the panel letters as labels.

The points stand on a sheet of their own, so that the drawing can be checked and changed in the workbook.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from typing import Any

from rooftruss.output.picture import Label, Picture
from rooftruss.output.schedule import display, unsigned_zero
from rooftruss.output.workbook.sheet import Page
from rooftruss.output.workbook.styles import plain

POSITIONS = {"above": "t", "below": "b", "left": "l", "right": "r", "on": "ctr"}
LINES = {
    "top chord": ("22303C", 28000),
    "bottom chord": ("22303C", 28000),
    "web": ("5B6B78", 15000),
    "support": ("22303C", 9500),
}
MARGIN, LABEL_ROOM = 1.2, 1.1  # around the drawing, at the sides and above and below [cm]


@dataclass(frozen=True, slots=True)
class Frame:
    """Size of the chart and of the drawing in it [cm]; the drawing has one scale in both directions."""

    width: float
    height: float
    drawing_width: float
    drawing_height: float


def frame_of(picture: Picture, width: float, tallest: float) -> Frame:
    """The largest true-to-scale drawing in a chart of this width that is no taller than `tallest` [cm]."""
    left, bottom, right, top = picture.box
    ratio = (top - bottom) / (right - left)
    across = min(width - 2 * MARGIN, (tallest - 2 * LABEL_ROOM) / ratio)
    return Frame(width, across * ratio + 2 * LABEL_ROOM, across, across * ratio)


class PointSheet:
    """Writes the points of the drawings, three columns for each list: word, x, y; and gives references to them."""

    def __init__(self, page: Page) -> None:
        self.page = page
        self.shown = display("length", page.units)

    def column(self, heading: str, points: Sequence[tuple[str, float, float]], first: int) -> tuple[Any, Any]:
        """Put a list under the current row at sheet column `first`; references to its x and its y."""
        from openpyxl.chart import Reference

        page, top = self.page, self.page.row
        for k, text in enumerate((heading, "x", "y")):
            page.put(first + k, text, "head", align="right" if k else "left")
        page.row += 1
        for k, text in enumerate(("", self.shown.label, self.shown.label)):
            page.put(first + k, text, "unit", align="right" if k else "left")
        for word, *place in points:
            page.row += 1
            page.put(first, word)
            for k, value in enumerate(place, start=1):
                number = unsigned_zero(round(self.shown.of(value), 6), self.shown.number_format)
                page.put(first + k, number, "body", self.shown.number_format)
        last, page.row = page.row, top
        x, y = (Reference(page.sheet, min_col=first + k, min_row=top + 2, max_row=last) for k in (1, 2))
        return x, y


def elevation(picture: Picture, points: PointSheet, frame: Frame) -> Any:
    """Chart of a picture; writes its points under the current row of the point sheet."""
    from openpyxl.chart import ScatterChart
    from openpyxl.chart.layout import Layout, ManualLayout

    chart: Any = ScatterChart()
    chart.style, chart.legend, chart.scatterStyle = 2, None, "lineMarker"
    chart.width, chart.height = frame.width, frame.height
    chart.layout = Layout(
        manualLayout=ManualLayout(
            layoutTarget="inner",
            xMode="edge",
            yMode="edge",
            x=(frame.width - frame.drawing_width) / 2 / frame.width,
            y=(frame.height - frame.drawing_height) / 2 / frame.height,
            w=frame.drawing_width / frame.width,
            h=frame.drawing_height / frame.height,
        )
    )
    left, bottom, right, top = picture.box
    for axis, low, high in ((chart.x_axis, left, right), (chart.y_axis, bottom, top)):
        axis.delete, axis.majorGridlines = True, None
        axis.scaling.min, axis.scaling.max = points.shown.of(low), points.shown.of(high)
    chart.graphical_properties = _no_frame()
    _series(chart, picture, points)
    return chart


def _series(chart: Any, picture: Picture, points: PointSheet) -> None:
    start = points.page.row
    strokes = [(path.name, stroke) for path in picture.paths for stroke in path.strokes]
    flat = [(name, *point) for name, stroke in strokes for point in stroke]
    x, y = points.column("Line", flat, 9)
    at = start + 2
    for name, stroke in strokes:
        chart.series.append(_line(name, _part(x, at, len(stroke)), _part(y, at, len(stroke))))
        at += len(stroke)
    lists = (
        ("Panel point", picture.panel_points, 1, True),
        ("Name of", picture.member_names, 5, False),
        ("Bearing", picture.bearings, 13, True),
    )
    for heading, labels, first, bold in lists:
        refs = points.column(heading, [(label.text, *label.at) for label in labels], first)
        chart.series.append(_labels(heading, labels, *refs, bold=bold))
    points.page.row = start + 2 + max(len(flat), len(picture.member_names), len(picture.panel_points)) + 1


def _part(reference: Any, first: int, count: int) -> Any:
    from openpyxl.chart import Reference

    return Reference(reference.worksheet, min_col=reference.min_col, min_row=first, max_row=first + count - 1)


def _line(name: str, x: Any, y: Any) -> Any:
    from openpyxl.chart import Series
    from openpyxl.chart.marker import Marker
    from openpyxl.chart.shapes import GraphicalProperties
    from openpyxl.drawing.line import LineProperties

    series = Series(y, x, title=name)
    colour, width = LINES[name]
    series.marker, series.smooth = Marker(symbol="none"), False
    series.spPr = GraphicalProperties(ln=LineProperties(solidFill=colour, w=width, cap="rnd"))
    return series


def _labels(heading: str, labels: Sequence[Label], x: Any, y: Any, *, bold: bool) -> Any:
    from openpyxl.chart import Series
    from openpyxl.chart.label import DataLabelList
    from openpyxl.chart.marker import Marker
    from openpyxl.chart.shapes import GraphicalProperties
    from openpyxl.drawing.line import LineProperties

    series = Series(y, x, title=heading)
    series.marker, series.smooth = Marker(symbol="none"), False
    series.spPr = GraphicalProperties(ln=LineProperties(noFill=True))
    made = [_word(k, label, bold) for k, label in enumerate(labels) if label.position]
    series.dLbls = DataLabelList(dLbl=made, **dict.fromkeys(SHOWN, False))
    return series


SHOWN = ("showLegendKey", "showVal", "showCatName", "showSerName", "showPercent", "showBubbleSize")


def _word(number: int, label: Label, bold: bool) -> Any:
    """Label of one point with its own text; a name that stands on its line has a white ground."""
    from openpyxl.chart.shapes import GraphicalProperties
    from openpyxl.chart.text import RichText, Text
    from openpyxl.drawing.line import LineProperties
    from openpyxl.drawing.text import CharacterProperties, Paragraph, RegularTextRun

    look = CharacterProperties(sz=900 if bold else 800, b=bold, solidFill="22303C")
    text = Text(rich=RichText(p=[Paragraph(r=[RegularTextRun(t=plain(label.text), rPr=look)])]))
    ground = GraphicalProperties(solidFill="FFFFFF", ln=LineProperties(noFill=True)) if label.position == "on" else None
    flags = dict.fromkeys(SHOWN, False) | {"showVal": True}
    return _text_label()(idx=number, tx=text, spPr=ground, dLblPos=POSITIONS[label.position], **flags)


@cache
def _text_label() -> type:
    """openpyxl's point label with the text element that the file format has and openpyxl leaves out."""
    from openpyxl.chart.label import DataLabel
    from openpyxl.chart.text import Text
    from openpyxl.descriptors import Typed

    def init(self: Any, *, tx: Any, **rest: Any) -> None:
        self.tx = tx
        DataLabel.__init__(self, **rest)

    # A class of openpyxl knows how to write only the elements in its own body, so those of DataLabel are named again.
    elements = {name: getattr(DataLabel, name) for name in DataLabel.__elements__}
    own = {"tagname": "dLbl", "tx": Typed(expected_type=Text, allow_none=True), "__init__": init}
    own["__elements__"] = ("idx", "tx", *DataLabel.__elements__[1:])
    return type("TextLabel", (DataLabel,), {**elements, **own})


def _no_frame() -> Any:
    from openpyxl.chart.shapes import GraphicalProperties
    from openpyxl.drawing.line import LineProperties

    return GraphicalProperties(ln=LineProperties(noFill=True), noFill=True)
