"""Native charts as data: what is drawn, from which cells, and what it says to those who cannot see it.

The functions return a `Chart` that a `Page` places; `appraise.workbook.drawing` turns it into the file's own
chart, with the values of the cells stored beside the references so that previews draw something.
A series is told from its neighbours by dash, marker or hatching as well as by colour.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from appraise.workbook.values import SheetFault

Kind = Literal["line", "scatter", "bar", "tornado", "duration"]

SIZE_CM = (17.0, 8.5)
HATCHED_SLOT = 6  # the colour of the first series, hatched: the other end of the same thing


@dataclass(frozen=True, slots=True)
class Series:
    """One line, set of points or set of bars.

    label : text of the legend
    sheet, values : title of the sheet and the cells of the numbers, one row or one column ("D5:H5")
    x : cells of the abscissae on the same sheet, scatter only
    label_cell : cell of that sheet that holds the legend's text, where it may change; "" for the fixed label
    smooth : a rounded curve; only for what has no kinks
    line, markers : what is drawn at the points of a scatter or line
    slot : which of the house's colours with dash, marker and hatching; -1 for the next in order
    direct : write the label at the last point instead of in the legend (line and scatter)
    """

    label: str
    sheet: str
    values: str
    x: str = ""
    label_cell: str = ""
    smooth: bool = False
    line: bool = True
    markers: bool = False
    slot: int = -1
    direct: bool = False


@dataclass(frozen=True, slots=True)
class Axis:
    """An axis: title with unit, number format, and limits where they are not left to the program.

    step : between ticks; of categories, every how many are named
    """

    title: str
    number_format: str = "#,##0"
    low: float | None = None
    high: float | None = None
    step: float | None = None
    log: bool = False


@dataclass(frozen=True, slots=True)
class Chart:
    """A chart and its place.

    title : fixed title; `title_cell` ("Tornado", "B3") holds it instead where it follows the figures
    categories : sheet and cells of the categories, None for scatter
    alt : what the chart shows, in a sentence or two, for screen readers
    anchor : cell under the upper left corner; size_cm : width and height
    labels : number format of the values written at bars, "" for none; gap : between bars, % of a bar
    points : size of its text, that of the title 2 more; larger where a page is printed much reduced
    """

    kind: Kind
    title: str
    series: tuple[Series, ...]
    x: Axis
    y: Axis
    alt: str
    anchor: str
    size_cm: tuple[float, float] = SIZE_CM
    title_cell: tuple[str, str] | None = None
    categories: tuple[str, str] | None = None
    stacked: bool = False
    horizontal: bool = False
    labels: str = ""
    legend: bool = True
    gap: int = 60
    points: float = 9.0

    def __post_init__(self) -> None:
        if not self.series:
            raise SheetFault(f"chart {self.title!r} without a series")
        if not self.alt.strip():
            raise SheetFault(f"chart {self.title!r} without a description")


def line_chart(
    title: str,
    series: Sequence[Series],
    categories: tuple[str, str],
    *,
    x: Axis | str,
    y: Axis | str,
    alt: str,
    anchor: str,
    size_cm: tuple[float, float] = SIZE_CM,
    title_cell: tuple[str, str] | None = None,
) -> Chart:
    """Lines over categories, as years: `categories` is (sheet, cells)."""
    return Chart(
        "line", title, tuple(series), _axis(x, "0"), _axis(y), alt, anchor, size_cm, title_cell, categories
    )


def scatter_chart(
    title: str,
    series: Sequence[Series],
    *,
    x: Axis | str,
    y: Axis | str,
    alt: str,
    anchor: str,
    size_cm: tuple[float, float] = SIZE_CM,
    title_cell: tuple[str, str] | None = None,
) -> Chart:
    """Points or curves over numbers; every series brings its own `x`."""
    for one in series:
        if not one.x:
            raise SheetFault(f"chart {title!r}: series {one.label!r} has no x")
    return Chart("scatter", title, tuple(series), _axis(x), _axis(y), alt, anchor, size_cm, title_cell)


def bar_chart(
    title: str,
    series: Sequence[Series],
    categories: tuple[str, str],
    *,
    x: Axis | str,
    y: Axis | str,
    alt: str,
    anchor: str,
    size_cm: tuple[float, float] = SIZE_CM,
    title_cell: tuple[str, str] | None = None,
    stacked: bool = False,
    horizontal: bool = False,
    labels: str = "",
    gap: int = 60,
) -> Chart:
    """Bars over categories, side by side or stacked, upright or lying.

    x : axis of the categories, y : axis of the values (also when the bars lie)
    labels : number format of the value written at each bar, "" for none
    gap : distance of the bars in per cent of a bar; 0 for a histogram
    """
    return Chart(
        "bar",
        title,
        tuple(series),
        _axis(x, "General"),
        _axis(y),
        alt,
        anchor,
        size_cm,
        title_cell,
        categories,
        stacked,
        horizontal,
        labels,
        legend=len(series) > 1,
        gap=gap,
    )


def tornado_chart(
    title: str,
    low: Series,
    high: Series,
    categories: tuple[str, str],
    *,
    y: Axis | str,
    alt: str,
    anchor: str,
    size_cm: tuple[float, float] = (17.0, 10.0),
    title_cell: tuple[str, str] | None = None,
) -> Chart:
    """Lying bars to both sides of zero, the first category on top.

    The series hold the *change against the base*, so that bars begin at zero; say the base in the title.
    """
    return Chart(
        "tornado",
        title,
        (low, high),
        Axis("", "General"),
        _axis(y),
        alt,
        anchor,
        size_cm,
        title_cell,
        categories,
        horizontal=True,
        gap=35,
    )


def area_duration_chart(
    title: str,
    series: Sequence[Series],
    hours: tuple[str, str],
    *,
    x: Axis | str,
    y: Axis | str,
    alt: str,
    anchor: str,
    size_cm: tuple[float, float] = SIZE_CM,
    title_cell: tuple[str, str] | None = None,
) -> Chart:
    """Areas over sorted hours with true spacing, stacked where there are several.

    hours : sheet and cells of the hour of each point, whole numbers in rising order
    """
    return Chart(
        "duration",
        title,
        tuple(series),
        _axis(x),
        _axis(y),
        alt,
        anchor,
        size_cm,
        title_cell,
        hours,
        stacked=len(series) > 1,
        legend=len(series) > 1,
    )


def _axis(given: Axis | str, number_format: str = "#,##0") -> Axis:
    return given if isinstance(given, Axis) else Axis(given, number_format)
