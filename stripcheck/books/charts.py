"""Native charts that hold in grey print: patterns, dashes and markers beside the colours, axes with titles and units.

A chart reads cells, and carries the values that they have now, so that a viewer that does not calculate draws it too.
Form: DrawingML charts, ECMA-376 part 1, chapter 21.2 (from memory), as openpyxl writes them.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from openpyxl.chart import BarChart, LineChart, ScatterChart
from openpyxl.chart.axis import ChartLines
from openpyxl.chart.data_source import AxDataSource, NumData, NumDataSource, NumRef, NumVal, StrData, StrRef, StrVal
from openpyxl.chart.label import DataLabelList
from openpyxl.chart.layout import Layout
from openpyxl.chart.legend import LegendEntry
from openpyxl.chart.marker import Marker
from openpyxl.chart.series import Series, SeriesLabel, XYSeries
from openpyxl.chart.shapes import GraphicalProperties
from openpyxl.chart.text import RichText
from openpyxl.chart.title import Title
from openpyxl.drawing.fill import ColorChoice, PatternFillProperties
from openpyxl.drawing.line import LineProperties
from openpyxl.drawing.spreadsheet_drawing import AnchorMarker, TwoCellAnchor
from openpyxl.drawing.text import CharacterProperties, Paragraph, ParagraphProperties, RegularTextRun
from openpyxl.utils import range_boundaries
from openpyxl.utils.cell import get_column_letter

from stripcheck.sheet.pages import Pages

POINT = 12_700  # EMU, the unit of lengths in a chart
DARK, MIDDLE, PALE, RED, BLACK = "1F4E79", "7FA8CF", "D5E3F0", "B3440B", "000000"
GRID = "D9D9D9"


@dataclass(frozen=True)
class Look:
    """How a series looks: colour; ``pattern`` of a bar, "" solid and "none" not drawn at all; ``dash``, "" for a solid line
    and "none" for no line; and ``marker``, "" for none."""

    colour: str = DARK
    pattern: str = ""
    dash: str = ""
    marker: str = ""
    width: float = 1.75


@dataclass(frozen=True)
class Row:
    """A series: its name, the cells of its values, and how it looks; ``places``: the cells along the other axis, of points.

    ``labels``: where the figures stand that its bars show, as their cells have them: "outside", "inside", or "" for nowhere.
    """

    name: str
    values: str
    look: Look
    places: str = ""
    labels: str = ""


def bars(pages: Pages, title: str, categories: str, rows: Sequence[Row], axis: tuple[str, str], *, stacked: bool = False,
         lines: Sequence[Row] = (), unnamed: int = 0) -> BarChart:  # fmt: skip
    """Upright bars by category, beside or upon each other, and lines over them.

    ``categories`` and the rows' cells are references such as ``Tables!$E$5:$E$8``; ``axis``: titles along and up;
    ``unnamed``: so many of the first rows are left out of the legend.
    """
    chart = BarChart()
    chart.type, chart.grouping = "col", "stacked" if stacked else "clustered"
    chart.overlap, chart.gapWidth = (100, 40) if stacked else (-5, 70)
    for row in rows:
        series = _series(pages, row, categories)
        series.graphicalProperties, series.invertIfNegative = _bar_look(row.look), False
        if row.labels:
            series.dLbls = _labels(row.labels)
        chart.series.append(series)
    if lines:
        chart += _lines(pages, categories, lines)
    _dressed(chart, title, axis)
    chart.legend.legendEntry = [LegendEntry(idx=i, delete=True) for i in range(unnamed)]
    return chart


def points(pages: Pages, title: str, rows: Sequence[Row], axis: tuple[str, str]) -> ScatterChart:
    """Lines through points of two numbers; ``axis``: titles along and up."""
    chart = ScatterChart()
    chart.style, chart.scatterStyle = 13, "lineMarker"
    for row in rows:
        series = XYSeries(
            tx=SeriesLabel(v=row.name), xVal=AxDataSource(numRef=_numbers(pages, row.places)),
            yVal=NumDataSource(numRef=_numbers(pages, row.values)),
        )  # fmt: skip
        series.graphicalProperties, series.marker, series.smooth = _line_look(row.look), _marker(row.look), False
        chart.series.append(series)
    _dressed(chart, title, axis)
    chart.x_axis.majorGridlines = None
    chart.x_axis.number_format, chart.x_axis.tickLblPos = "0", "low"
    return chart


def _lines(pages: Pages, categories: str, rows: Sequence[Row]) -> LineChart:
    chart = LineChart()
    for row in rows:
        series = _series(pages, row, categories)
        series.graphicalProperties, series.marker, series.smooth = _line_look(row.look), _marker(row.look), False
        chart.series.append(series)
    return chart


def _series(pages: Pages, row: Row, categories: str) -> Any:
    return Series(
        tx=SeriesLabel(v=row.name), cat=AxDataSource(strRef=_texts(pages, categories)),
        val=NumDataSource(numRef=_numbers(pages, row.values)),
    )  # fmt: skip


def _dressed(chart: Any, title: str, axis: tuple[str, str]) -> Any:
    chart.title = _title(title, 1100, True)
    for one, words in ((chart.x_axis, axis[0]), (chart.y_axis, axis[1])):
        one.delete, one.title = False, _title(words, 900, False)
        one.txPr = _small(850)
        one.graphicalProperties = GraphicalProperties(ln=LineProperties(solidFill="8C8C8C"))
        one.majorTickMark = "out"
    chart.y_axis.majorGridlines = ChartLines(spPr=GraphicalProperties(ln=LineProperties(solidFill=GRID)))
    chart.y_axis.number_format, chart.y_axis.scaling.min = "#,##0", 0
    chart.legend.position = "b"
    chart.legend.txPr = _small(850)
    return chart


def _title(words: str, size: int, bold: bool) -> Title:
    """A title that takes room of its own instead of lying over the plot."""
    look = CharacterProperties(sz=size, b=bold, solidFill=ColorChoice(srgbClr="1F2A36"))
    title = Title(overlay=False, layout=Layout(manualLayout=None))
    title.tx = _rich(words, look)
    return title


def _rich(words: str, look: CharacterProperties) -> Any:
    from openpyxl.chart.text import Text

    run = RegularTextRun(rPr=look, t=words)
    return Text(rich=RichText(p=[Paragraph(pPr=ParagraphProperties(defRPr=look), r=[run])]))


def _bar_look(look: Look) -> GraphicalProperties:
    if look.pattern == "none":
        return GraphicalProperties(noFill=True, ln=LineProperties(noFill=True))
    edge = LineProperties(solidFill="404040", w=int(0.75 * POINT))
    if not look.pattern:
        return GraphicalProperties(solidFill=look.colour, ln=edge)
    fill = PatternFillProperties(prst=look.pattern, fgClr=ColorChoice(srgbClr=look.colour), bgClr=ColorChoice(srgbClr="FFFFFF"))
    return GraphicalProperties(pattFill=fill, ln=edge)


def _line_look(look: Look) -> GraphicalProperties:
    if look.dash == "none":
        return GraphicalProperties(ln=LineProperties(noFill=True))
    return GraphicalProperties(
        ln=LineProperties(solidFill=look.colour, w=int(look.width * POINT), prstDash=look.dash or "solid")
    )


def _marker(look: Look) -> Marker:
    if not look.marker:
        return Marker(symbol="none")
    marker = Marker(symbol=look.marker, size=7)
    marker.graphicalProperties = GraphicalProperties(solidFill=look.colour, ln=LineProperties(solidFill=look.colour))
    return marker


def _labels(where: str) -> DataLabelList:
    labels = DataLabelList(showVal=True, showSerName=False, showCatName=False, showLegendKey=False, showPercent=False)
    labels.position = {"outside": "outEnd", "inside": "inEnd"}[where]
    labels.txPr = _small(800, "FFFFFF" if where == "inside" else BLACK)
    return labels


def _small(size: int, colour: str = BLACK) -> RichText:
    look = CharacterProperties(sz=size, solidFill=ColorChoice(srgbClr=colour))
    return RichText(p=[Paragraph(pPr=ParagraphProperties(defRPr=look), endParaRPr=None)])


# --- the cells, with the values that they have now


def _values(pages: Pages, cells: str) -> list[Any]:
    """What a range of cells such as ``Tables!$E$5:$E$8`` holds."""
    name, _, area = cells.rpartition("!")
    sheet = pages.book[name.strip("'")]
    kept = pages.cached.get(sheet.title, {})
    left, top, right, bottom = range_boundaries(area.replace("$", ""))
    at = [f"{get_column_letter(column)}{row}" for row in range(top, bottom + 1) for column in range(left, right + 1)]
    return [kept.get(cell, sheet[cell].value) for cell in at]


def _numbers(pages: Pages, cells: str) -> NumRef:
    values = _values(pages, cells)
    kept = [NumVal(idx=i, v=repr(float(value))) for i, value in enumerate(values) if isinstance(value, int | float)]
    return NumRef(f=cells, numCache=NumData(formatCode="General", ptCount=len(values), pt=kept))


def _texts(pages: Pages, cells: str) -> StrRef:
    values = _values(pages, cells)
    kept = [StrVal(idx=i, v=str(value)) for i, value in enumerate(values) if value not in (None, "")]
    return StrRef(f=cells, strCache=StrData(ptCount=len(values), pt=kept))


def place(sheet: Any, chart: Any, cells: str) -> None:
    """Put a chart over cells such as "A4:C17", so that it keeps to them whatever the font makes of their width."""
    left, top, right, bottom = range_boundaries(cells)
    corners = AnchorMarker(col=left - 1, row=top - 1), AnchorMarker(col=right, row=bottom)
    chart.anchor = TwoCellAnchor("twoCell", _from=corners[0], to=corners[1])
    sheet.add_chart(chart)
