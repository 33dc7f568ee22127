"""What a sheet is: cells with a value, or a formula and the value that Python computed for it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Literal

from appraise.workbook.values import Value

if TYPE_CHECKING:
    from appraise.workbook.charts import Chart

Marking = Literal["live", "as run", "input"]


@dataclass(frozen=True, slots=True)
class Cell:
    """One cell. `formula` "" means that `value` is written; else `value` is what the formula must come to.

    name : defined name of the workbook for this cell, "" for none
    note : comment that opens over the cell, "" for none
    link : title of a sheet of this workbook that a click leads to, "" for none
    """

    value: Value
    style: str = "text"
    formula: str = ""
    name: str = ""
    note: str = ""
    link: str = ""


@dataclass(frozen=True, slots=True)
class ListRule:
    """The cells of `area` take one of `choices`, or what stands in `source` ("=Inputs!$B$3:$B$6")."""

    area: str
    source: str = ""
    choices: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class NumberRule:
    """The cells of `area` take a number between `low` and `high` (either may be None), `whole` or not."""

    area: str
    low: float | None
    high: float | None
    whole: bool = False
    message: str = ""


@dataclass(frozen=True, slots=True)
class HighlightRule:
    """The cells of `area` look like `look` where `formula` holds, written for the area's first cell."""

    area: str
    formula: str
    look: str


@dataclass(frozen=True, slots=True)
class Printing:
    """How a sheet is printed: always A4 and fitted to the width of a page.

    area : "A1:K40", or "" for everything in use, charts included
    repeat_rows : first and last row repeated on every page, or None
    pages_tall : number of pages to fit the height to, 0 for as many as it takes
    """

    landscape: bool = True
    repeat_rows: tuple[int, int] | None = None
    area: str = ""
    pages_tall: int = 0
    breaks_after: tuple[int, ...] = ()


@dataclass(frozen=True, slots=True, eq=False)
class Sheet:
    """A finished sheet: everything that is written, nothing that is computed."""

    title: str
    marking: Marking
    cells: Mapping[tuple[int, int], Cell]
    widths: Mapping[int, float] = field(default_factory=dict)
    heights: Mapping[int, float] = field(default_factory=dict)
    freeze: str = ""
    printing: Printing = Printing()
    merges: tuple[str, ...] = ()
    names: Mapping[str, str] = field(default_factory=dict)
    rules: tuple[ListRule | NumberRule | HighlightRule, ...] = ()
    charts: tuple[Chart, ...] = ()
