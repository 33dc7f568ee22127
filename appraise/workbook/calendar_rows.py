"""Rows of the Cash flow sheet that hold what all options share, for that sheet and those that point at it."""

from __future__ import annotations

from dataclasses import dataclass, fields

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
