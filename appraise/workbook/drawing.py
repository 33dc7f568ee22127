"""A `Chart` as openpyxl's own, with everything said that programs would otherwise guess differently.

Left unsaid, an axis is hidden in some programs, a line is rounded in others, negative bars turn white, and
previews without a calculator draw nothing for want of stored values.
"""

from __future__ import annotations

from collections.abc import Mapping
from datetime import datetime
from typing import Any

from openpyxl.chart import AreaChart, BarChart, LineChart, ScatterChart
from openpyxl.chart.axis import ChartLines, DateAxis, NumericAxis, TextAxis
from openpyxl.chart.data_source import (
    AxDataSource,
    NumData,
    NumDataSource,
    NumRef,
    NumVal,
    StrData,
    StrRef,
    StrVal,
)
from openpyxl.chart.label import DataLabel, DataLabelList
from openpyxl.chart.legend import Legend, LegendEntry
from openpyxl.chart.marker import Marker
from openpyxl.chart.series import Series as NativeSeries
from openpyxl.chart.series import SeriesLabel, XYSeries
from openpyxl.chart.shapes import GraphicalProperties
from openpyxl.chart.text import RichText, Text
from openpyxl.chart.title import Title
from openpyxl.drawing.colors import ColorChoice
from openpyxl.drawing.fill import PatternFillProperties
from openpyxl.drawing.line import LineProperties
from openpyxl.drawing.text import (
    CharacterProperties,
    Font,
    Paragraph,
    ParagraphProperties,
    RegularTextRun,
    RichTextProperties,
)

from appraise.workbook.addresses import cells_in, corners, ref_to
from appraise.workbook.cells import Sheet
from appraise.workbook.charts import HATCHED_SLOT, Axis, Chart, Series
from appraise.workbook.looks import FONT, GREY, SLATE, WHITE
from appraise.workbook.values import ERROR_CODES, Value, clean_text

GRID = "D9D9D9"
EMU_PER_POINT = 12_700

# Colour, dash, marker and hatching ("" is a full fill) of the series, in order.
Slot = tuple[Any, Any, Any, Any]
SLOTS: tuple[Slot, ...] = (
    ("1F3A5F", "solid", "circle", ""),
    ("C8641B", "dash", "diamond", "wdUpDiag"),
    ("1D6A72", "sysDot", "square", "pct25"),
    ("7A7A7A", "dashDot", "triangle", "dkHorz"),
    ("7A3E78", "lgDash", "x", "smCheck"),
    ("4B6B1F", "lgDashDot", "plus", "dkVert"),
)
HATCHED: Slot = ("1F3A5F", "solid", "circle", "wdUpDiag")


def native_chart(chart: Chart, sheets: Mapping[str, Sheet]) -> Any:
    """The chart for openpyxl's `add_chart`.

    sheets : the book's sheets by title, whose values go into the chart's caches
    """
    made = _MAKERS[chart.kind](chart)
    for order, series in enumerate(chart.series):
        made.series.append(_series(chart, series, order, sheets))
    made.title = _title(clean_text(chart.title), chart.points + 2.0, bold=True, chart=chart, sheets=sheets)
    made.width, made.height = chart.size_cm
    made.anchor = chart.anchor
    made.roundedCorners = False
    made.visible_cells_only = False
    made.display_blanks = "gap"
    made.graphical_properties = GraphicalProperties(solidFill=WHITE, ln=LineProperties(noFill=True))
    made.legend = _legend(chart)
    return made


def _line(chart: Chart) -> Any:
    made = LineChart(varyColors=False)
    made.grouping = "standard"
    made.x_axis = _axis(TextAxis(axId=10, crossAx=100), chart.x, "b", chart.points)
    made.y_axis = _axis(NumericAxis(axId=100, crossAx=10), chart.y, "l", chart.points)
    return made


def _scatter(chart: Chart) -> Any:
    made = ScatterChart(varyColors=False, scatterStyle="lineMarker")
    made.x_axis = _axis(NumericAxis(axId=10, crossAx=100), chart.x, "b", chart.points)
    made.y_axis = _axis(NumericAxis(axId=100, crossAx=10), chart.y, "l", chart.points)
    return made


def _bars(chart: Chart) -> Any:
    lying = chart.horizontal
    made = BarChart(varyColors=False, gapWidth=chart.gap)
    made.type = "bar" if lying else "col"
    made.grouping = "stacked" if chart.stacked else "clustered"
    made.overlap = 100 if chart.stacked or chart.kind == "tornado" else 0
    made.x_axis = _axis(TextAxis(axId=10, crossAx=100), chart.x, "l" if lying else "b", chart.points)
    if chart.gap:
        made.x_axis.tickLblSkip = 1  # every bar has its name, however low the chart
    made.y_axis = _axis(NumericAxis(axId=100, crossAx=10), chart.y, "b" if lying else "l", chart.points)
    if lying:  # lying bars count from below; the first category belongs on top, the numbers at the foot
        made.x_axis.scaling.orientation = "maxMin"
        made.y_axis.crosses = "max"
        made.y_axis.tickLblPos = "nextTo"
    if chart.labels:
        made.dataLabels = _labels(chart.labels, chart.points - 1.0)
    return made


def _duration(chart: Chart) -> Any:
    made = AreaChart(varyColors=False)
    made.grouping = "stacked" if chart.stacked else "standard"
    # An axis of dates with a day as its unit is the one category axis that spaces its points truly.
    axis = DateAxis(axId=10, crossAx=100)
    axis.baseTimeUnit = axis.majorTimeUnit = "days"
    axis.auto = False
    made.x_axis = _axis(axis, chart.x, "b", chart.points)
    made.y_axis = _axis(NumericAxis(axId=100, crossAx=10), chart.y, "l", chart.points)
    made.y_axis.crossBetween = "midCat"
    return made


_MAKERS = {"line": _line, "scatter": _scatter, "bar": _bars, "tornado": _bars, "duration": _duration}


def _axis(axis: Any, given: Axis, position: str, points: float) -> Any:
    axis.delete = False
    axis.axPos = position
    axis.title = _title(clean_text(given.title), points, upright=position == "l") if given.title else None
    axis.number_format = given.number_format
    axis.numFmt.sourceLinked = False
    axis.majorTickMark, axis.minorTickMark = "out", None
    axis.tickLblPos = "low"
    axis.crosses = "autoZero"
    axis.txPr = _text_properties(points)
    axis.graphicalProperties = GraphicalProperties(ln=_pen(GREY, 0.75))
    is_scale = isinstance(axis, NumericAxis)
    axis.majorGridlines = ChartLines(spPr=GraphicalProperties(ln=_pen(GRID, 0.5))) if is_scale else None
    if is_scale:
        axis.scaling.min, axis.scaling.max = given.low, given.high
        axis.scaling.logBase = 10 if given.log else None
    if type(axis) is not TextAxis:  # an axis of dates is a text axis too, with steps
        axis.majorUnit = given.step
    elif given.step is not None:
        axis.tickLblSkip = axis.tickMarkSkip = round(given.step)
    return axis


def _series(chart: Chart, series: Series, order: int, sheets: Mapping[str, Sheet]) -> Any:
    numbers = NumDataSource(numRef=_numbers(series.sheet, series.values, sheets))
    made: Any
    if chart.kind == "scatter":
        made = XYSeries(idx=order, order=order, yVal=numbers)
        made.xVal = AxDataSource(numRef=_numbers(series.sheet, series.x, sheets))
    else:
        made = NativeSeries(idx=order, order=order, val=numbers)
        if chart.categories and chart.kind == "duration":
            made.cat = AxDataSource(numRef=_numbers(*chart.categories, sheets))
        elif chart.categories:
            made.cat = AxDataSource(strRef=_texts(*chart.categories, sheets))
    made.tx = _series_label(series, sheets)
    slot = series.slot if series.slot >= 0 else order
    _paint(made, chart, series, HATCHED if series.slot == HATCHED_SLOT else SLOTS[slot % len(SLOTS)])
    return made


def _series_label(series: Series, sheets: Mapping[str, Sheet]) -> SeriesLabel:
    if series.label_cell:
        return SeriesLabel(strRef=_texts(series.sheet, series.label_cell, sheets))
    return SeriesLabel(v=clean_text(series.label))


def _paint(made: Any, chart: Chart, series: Series, slot: Slot) -> None:
    colour, dash, symbol, hatching = slot
    if chart.kind in ("line", "scatter"):
        made.smooth = series.smooth
        pen = _pen(colour, 1.75, dash) if series.line else LineProperties(noFill=True)
        made.graphicalProperties = GraphicalProperties(ln=pen)
        made.marker = _marker(symbol if series.markers else "none", colour)
        if series.direct:
            made.dLbls = _direct_label(len(cells_in(series.values)) - 1, colour, chart.points)
        return
    made.graphicalProperties = GraphicalProperties(ln=_pen(colour, 0.75))
    if hatching:
        made.graphicalProperties.pattFill = PatternFillProperties(
            prst=hatching, fgClr=_colour(colour), bgClr=_colour(WHITE)
        )
    else:
        made.graphicalProperties.solidFill = colour
    if chart.kind in ("bar", "tornado"):
        made.invertIfNegative = False


def _colour(rgb: Any) -> ColorChoice:
    return ColorChoice(srgbClr=rgb)


def _marker(symbol: Any, colour: str) -> Marker:
    if symbol == "none":
        return Marker(symbol="none")
    return Marker(symbol=symbol, size=7, spPr=GraphicalProperties(solidFill=colour, ln=_pen(colour, 0.75)))


def _labels(number_format: str, points: float) -> DataLabelList:
    return DataLabelList(
        numFmt=number_format,
        txPr=_text_properties(points),
        showVal=True,
        showLegendKey=False,
        showCatName=False,
        showSerName=False,
        showPercent=False,
    )


def _direct_label(index: int, colour: str, points: float) -> DataLabelList:
    off: dict[str, Any] = {
        "showLegendKey": False,
        "showVal": False,
        "showCatName": False,
        "showPercent": False,
    }
    label = DataLabel(
        idx=index, dLblPos="t", showSerName=True, txPr=_text_properties(points, colour, bold=True), **off
    )
    return DataLabelList(dLbl=[label], showSerName=False, **off)


def _legend(chart: Chart) -> Legend | None:
    direct = [index for index, series in enumerate(chart.series) if series.direct]
    if not chart.legend or len(direct) == len(chart.series):
        return None
    legend = Legend()
    legend.position = "b"
    legend.overlay = False
    legend.txPr = _text_properties(chart.points)
    legend.legendEntry = [LegendEntry(idx=index, delete=True) for index in direct]
    return legend


def _title(
    text: str,
    points: float,
    *,
    bold: bool = False,
    upright: bool = False,
    chart: Chart | None = None,
    sheets: Mapping[str, Sheet] | None = None,
) -> Title:
    body = RichTextProperties(rot=-5_400_000, vert="horz") if upright else RichTextProperties()
    look = _characters(points, SLATE if bold else GREY, bold)
    paragraph = ParagraphProperties(defRPr=look)
    if chart is not None and sheets is not None and chart.title_cell:
        linked = Text(strRef=_texts(*chart.title_cell, sheets))
        return Title(
            tx=linked,
            overlay=False,
            txPr=RichText(bodyPr=body, p=[Paragraph(pPr=paragraph, r=[], endParaRPr=look)]),
        )
    run = RegularTextRun(rPr=look, t=text)
    rich = RichText(bodyPr=body, p=[Paragraph(pPr=paragraph, r=[run])])
    return Title(tx=Text(rich=rich), overlay=False)


def _text_properties(points: float, colour: str = GREY, bold: bool = False) -> RichText:
    look = _characters(points, colour, bold)
    return RichText(
        bodyPr=RichTextProperties(),
        p=[Paragraph(pPr=ParagraphProperties(defRPr=look), r=[], endParaRPr=look)],
    )


def _characters(points: float, colour: str, bold: bool) -> CharacterProperties:
    return CharacterProperties(sz=round(100 * points), b=bold, solidFill=colour, latin=Font(typeface=FONT))


def _pen(colour: str, points: float, dash: Any = "solid") -> LineProperties:
    return LineProperties(solidFill=colour, w=round(points * EMU_PER_POINT), prstDash=dash)


def _reference(title: str, address: str) -> str:
    return ref_to(title, *corners(address))


def _values(title: str, address: str, sheets: Mapping[str, Sheet]) -> list[tuple[int, Value]]:
    """Index and value of the cells of an area that show something."""
    cells = [sheets[title].cells.get(place) for place in cells_in(address)]
    return [(index, cell.value) for index, cell in enumerate(cells) if cell and cell.value not in (None, "")]


def _numbers(title: str, address: str, sheets: Mapping[str, Sheet]) -> NumRef:
    points = [
        NumVal(idx=index, v=float(value))
        for index, value in _values(title, address, sheets)
        if isinstance(value, int | float) and not isinstance(value, bool)
    ]
    count = len(cells_in(address))
    return NumRef(
        f=_reference(title, address), numCache=NumData(formatCode="General", ptCount=count, pt=points)
    )


def _texts(title: str, address: str, sheets: Mapping[str, Sheet]) -> StrRef:
    points = [
        StrVal(idx=index, v=_shown(value))
        for index, value in _values(title, address, sheets)
        if value not in ERROR_CODES
    ]
    return StrRef(f=_reference(title, address), strCache=StrData(ptCount=len(cells_in(address)), pt=points))


def _shown(value: Value) -> str:
    if isinstance(value, datetime):
        return value.strftime("%Y-%m-%d")
    return clean_text(value) if isinstance(value, str) else f"{value:g}"
