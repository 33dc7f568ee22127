"""Rows of the Cash flow sheet that hold what all options share, for that sheet and those that point at it."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, fields

from appraise.workbook.cells import TOTAL, Page

CASH_FLOW = "Cash flow"

MEASURES_TOP = 4
CALENDAR_TOP = 25  # the measures stand above, beside them the chart
ROW_POINTS = 12.75  # of a row on this sheet, so that two options fit on a printed page


@dataclass(frozen=True, slots=True)
class CalendarRows:
    """Rows over t; the calendar years are the heading of the block."""

    calendar_year: int
    t_index: int
    operating_year: int
    operating: int
    inflation_index: int
    deflator: int
    basis_factor: int
    discount_factor: int
    spend_share: int
    cost_growth: int
    overhauls: int
    depreciation_plan: int
    depreciation_share: int
    value_weight: int
    single: int  # first row of the single figures below


ROWS = CalendarRows(
    **{field.name: CALENDAR_TOP + offset for offset, field in enumerate(fields(CalendarRows), 1)}
)
BLOCKS_TOP = ROWS.single + 13


def put_calendar(
    page: Page,
    row: int,
    label: str,
    text: Callable[[str], str],
    years: Sequence[int],
    total: str,
    name: str = "",
) -> None:
    """The heading of a block over t: its label, "unit", what stands in the column of totals, calendar years.

    text : formula of a year, by the letters of its column
    """
    page.row_of_formulas(
        row,
        label,
        "unit",
        text,
        years,
        "year heading",
        label_style="heading_left",
        unit_style="heading",
        name=name,
    )
    page.put(row, TOTAL, total, "heading")
