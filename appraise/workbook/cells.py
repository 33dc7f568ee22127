"""The builder of a sheet, and with it everything that a module needs to make one.

`Page` is the builder, `Sheet` the frozen result. A value that no cell may hold (NaN, infinity, a date before
March 1900), a formula without its expected value and a second cell in the same place are refused where they
are put; what can only be seen with the whole book at hand is refused by `appraise.workbook.faults`.
Rows and columns count from 1, as in a spreadsheet.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from math import ceil
from typing import TYPE_CHECKING

from appraise.workbook.addresses import (
    LABEL,
    LAST_COLUMN,
    LAST_ROW,
    TOTAL,
    UNIT,
    YEAR_ZERO,
    area,
    column,
    ref,
    ref_to,
    sheet_prefix,
    year_column,
)
from appraise.workbook.looks import HIGHLIGHTS, LEGEND, STYLES
from appraise.workbook.sheet import Cell, HighlightRule, ListRule, Marking, NumberRule, Printing, Sheet
from appraise.workbook.values import ERROR_CODES, SheetFault, Value, plain_value, quoted

if TYPE_CHECKING:
    from appraise.workbook.charts import Chart

DEFAULT_WIDTH = 9.0  # characters
DEFAULT_HEIGHT = 15.0  # points
WIDTH_POINTS = 11.8  # a column is measured in characters of 11 points; running text is a little narrower
LINE_SPACING = 1.35

__all__ = [
    "ERROR_CODES",
    "LABEL",
    "TOTAL",
    "UNIT",
    "YEAR_ZERO",
    "Cell",
    "HighlightRule",
    "ListRule",
    "Marking",
    "NumberRule",
    "Page",
    "Printing",
    "Sheet",
    "SheetFault",
    "Value",
    "area",
    "column",
    "quoted",
    "ref",
    "ref_to",
    "sheet_prefix",
    "year_column",
]


class Page:
    """Builder of one sheet. Every method that puts something refuses a fault at once, with its place."""

    def __init__(self, title: str, marking: Marking = "live") -> None:
        """
        title : the sheet's tab, 31 characters at most
        marking : "live" (formulas follow the inputs), "as run" (values of the run) or "input"
        """
        self.title = title
        self.marking: Marking = marking
        self._cells: dict[tuple[int, int], Cell] = {}
        self._widths: dict[int, float] = {}
        self._heights: dict[int, float] = {}
        self._freeze = ""
        self._printing = Printing()
        self._merges: list[str] = []
        self._names: dict[str, str] = {}
        self._rules: list[ListRule | NumberRule | HighlightRule] = []
        self._charts: list[Chart] = []

    # -- cells

    def put(
        self,
        row: int,
        col: int,
        value: object,
        style: str = "text",
        name: str = "",
        note: str = "",
        link: str = "",
    ) -> str:
        """A value (None for an empty cell that has a style); returns its address."""
        where = self._where(row, col)
        self._place(row, col, Cell(plain_value(value, where), style, "", name, note, link))
        return ref(row, col)

    def formula(
        self,
        row: int,
        col: int,
        text: str,
        expect: object,
        style: str = "number",
        name: str = "",
        note: str = "",
    ) -> str:
        """A formula, beginning with "=", and the value that Python has for it; returns its address.

        expect : number, text ("" for an empty text), truth value, or one of `ERROR_CODES`; never None
        """
        where = self._where(row, col)
        if not text.startswith("=") or len(text) < 2:
            raise SheetFault(f"{where}: a formula begins with =, this one is {text!r}")
        value = plain_value(expect, where)
        if value is None:
            raise SheetFault(f"{where}: formula {text} without its expected value")
        self._place(row, col, Cell(value, style, text, name, note))
        return ref(row, col)

    def row_of(
        self,
        row: int,
        label: str,
        unit: str,
        values: Sequence[object],
        style: str = "number",
        *,
        first: int = YEAR_ZERO,
        label_style: str = "label",
        unit_style: str = "unit",
        name: str = "",
    ) -> str:
        """A labelled row of values from column `first` on, named `name`. Returns the area of the values."""
        self._row_head(row, label, unit, label_style, unit_style)
        for offset, value in enumerate(values):
            self.put(row, first + offset, value, style)
        return self._row_area(row, first, len(values), name)

    def row_of_formulas(
        self,
        row: int,
        label: str,
        unit: str,
        text: Callable[[str], str],
        expect: Sequence[object],
        style: str = "number",
        *,
        first: int = YEAR_ZERO,
        label_style: str = "label",
        unit_style: str = "unit",
        name: str = "",
    ) -> str:
        """A labelled row with one formula, the same in all columns.

        text : formula by the letters of the column, `lambda c: f"={c}5*{c}6"`
        expect : Python's values, one for each column from `first` on
        Returns the area of the formulas.
        """
        self._row_head(row, label, unit, label_style, unit_style)
        for offset, value in enumerate(expect):
            self.formula(row, first + offset, text(column(first + offset)), value, style)
        return self._row_area(row, first, len(expect), name)

    def headings(
        self, row: int, titles: Sequence[object], style: str = "heading", first: int = LABEL
    ) -> None:
        """Titles of columns, side by side."""
        for offset, title in enumerate(titles):
            self.put(row, first + offset, title, style)

    def head(self, title: str, detail: str = "") -> None:
        """Rows 1 and 2: the title, and how far the figures follow the inputs. Content begins in row 4."""
        self.put(1, 1, title, "title")
        says = {
            "live": "Live: the figures follow the inputs, except those in italics, which are of the run.",
            "as run": "As run: values of the run in italics; they do not follow a changed input.",
            "input": "Inputs: cells with a dotted frame may be changed; live sheets follow.",
        }
        self.put(2, 1, f"{says[self.marking]} {detail}".rstrip(), "note")

    def legend(self, row: int, col: int) -> int:
        """Samples and meanings of the looks, two columns wide; returns the first free row below."""
        for offset, (style, sample, meaning) in enumerate(LEGEND):
            self.put(row + offset, col, sample, style)
            self.put(row + offset, col + 1, meaning, "note")
        return row + len(LEGEND)

    def paragraph(
        self,
        row: int,
        col: int,
        last_col: int,
        text: str,
        style: str = "text_wrap",
        least_lines: int = 1,
        formula: str = "",
    ) -> None:
        """Text, or what `formula` comes to, that wraps over merged columns; set the widths before."""
        points = STYLES[style].points if style in STYLES else 0.0
        width = sum(self._widths.get(c, DEFAULT_WIDTH) for c in range(col, last_col + 1))
        per_line = max(1.0, width * WIDTH_POINTS / max(points, 1.0))
        lines = sum(max(1, ceil(len(line) / per_line)) for line in text.split("\n"))
        self.formula(row, col, formula, text, style) if formula else self.put(row, col, text, style)
        if last_col > col:
            self.merge(row, col, row, last_col)
        needed = max(lines, least_lines) * points * LINE_SPACING + 2
        self.height(row, max(self._heights.get(row, 0.0), needed))

    # -- looks and print

    def width(self, widths: Mapping[int, float] | Sequence[float], first: int = 1) -> None:
        """Widths in characters: by column, or in sequence from column `first`."""
        self._widths.update(widths if isinstance(widths, Mapping) else dict(enumerate(widths, first)))

    def height(self, row: int, points: float) -> None:
        """Height of a row in points."""
        self._heights[row] = points

    def points(self, row: int) -> float:
        """Height of a row, as set so far."""
        return self._heights.get(row, DEFAULT_HEIGHT)

    def freeze(self, row: int, col: int) -> None:
        """Rows above and columns left of this cell stay in sight."""
        self._freeze = ref(row, col)

    def merge(self, row: int, col: int, last_row: int, last_col: int) -> None:
        """One cell out of many; only the first may hold something. For text that wraps, never for data."""
        self._merges.append(area(row, col, last_row, last_col))

    def printed(
        self,
        *,
        landscape: bool = True,
        repeat_rows: tuple[int, int] | None = None,
        area: str = "",
        pages_tall: int = 0,
        breaks_after: Sequence[int] = (),
    ) -> None:
        """Print settings; see `Printing`."""
        self._printing = Printing(landscape, repeat_rows, area, pages_tall, tuple(breaks_after))

    def highlight(self, area: str, formula: str, look: str) -> None:
        """Give `area` a look where a formula, written for its first cell, holds: '=$C5="OK"', "ok"."""
        if look not in HIGHLIGHTS:
            raise SheetFault(f"{self.title}: highlight {look!r} unknown; known are {', '.join(HIGHLIGHTS)}")
        self._rules.append(HighlightRule(area, formula, look))

    # -- inputs, names, charts

    def validate_list(self, row: int, col: int, source: str | Sequence[str]) -> None:
        """A cell that takes one of a list: "=Inputs!$B$3:$B$6", "=scenario_names", or fixed words."""
        if isinstance(source, str):
            self._rules.append(ListRule(ref(row, col), source=source))
        else:
            self._rules.append(ListRule(ref(row, col), choices=tuple(source)))

    def validate_number(
        self,
        row: int,
        col: int,
        low: float | None = None,
        high: float | None = None,
        *,
        whole: bool = False,
        message: str = "",
        last_row: int | None = None,
        last_col: int | None = None,
    ) -> None:
        """A cell, or a rectangle, that takes numbers from `low` to `high` only."""
        where = ref(row, col) if (last_row, last_col) == (None, None) else ""
        where = where or area(row, col, last_row or row, last_col or col)
        self._rules.append(NumberRule(where, low, high, whole, message))

    def name(
        self, name: str, row: int, col: int, last_row: int | None = None, last_col: int | None = None
    ) -> None:
        """Define a name for a cell or a rectangle."""
        if name.lower() in {known.lower() for known in self._names}:
            raise SheetFault(f"{self.title}: name {name} is defined twice")
        self._names[name] = area(row, col, last_row or row, last_col or col, absolute=True)

    def chart(self, chart: Chart) -> None:
        """Place a chart made by one of the functions of `appraise.workbook.charts`."""
        self._charts.append(chart)

    def finish(self) -> Sheet:
        """The sheet, complete and frozen."""
        return Sheet(
            self.title,
            self.marking,
            dict(sorted(self._cells.items())),
            dict(self._widths),
            dict(self._heights),
            self._freeze,
            self._printing,
            tuple(self._merges),
            dict(self._names),
            tuple(self._rules),
            tuple(self._charts),
        )

    def _where(self, row: int, col: int) -> str:
        if not (1 <= row <= LAST_ROW and 1 <= col <= LAST_COLUMN):
            raise SheetFault(f"{self.title}: no cell in row {row}, column {col}")
        return sheet_prefix(self.title) + ref(row, col)

    def _place(self, row: int, col: int, cell: Cell) -> None:
        if (row, col) in self._cells:
            raise SheetFault(f"{self._where(row, col)} is put twice")
        if cell.style not in STYLES:
            raise SheetFault(f"{self._where(row, col)}: style {cell.style!r} is unknown")
        self._cells[row, col] = cell

    def _row_head(self, row: int, label: str, unit: str, label_style: str, unit_style: str) -> None:
        self.put(row, LABEL, label, label_style)
        self.put(row, UNIT, unit, unit_style)

    def _row_area(self, row: int, first: int, count: int, name: str) -> str:
        last = first + max(count, 1) - 1
        if name:
            self.name(name, row, first, row, last)
        return area(row, first, row, last)
