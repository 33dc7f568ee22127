"""The Cash flow sheet: measures, a chart of running sums, what options share, a block for each option."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from appraise.workbook.calendar_rows import (
    BLOCKS_TOP,
    CALENDAR_TOP,
    CASH_FLOW,
    MEASURES_TOP,
    ROW_POINTS,
    ROWS,
)
from appraise.workbook.cash_flow_block import HEIGHT, MARKS, Block
from appraise.workbook.cash_flow_calendar import Calendar
from appraise.workbook.cash_flow_depreciation import write_depreciation, write_unit_of_capital
from appraise.workbook.cash_flow_marks import write_marks
from appraise.workbook.cash_flow_measures import MeasuresTable
from appraise.workbook.cells import LABEL, TOTAL, YEAR_ZERO, Page, Sheet, area, ref, year_column
from appraise.workbook.charts import Axis, Chart, Series, line_chart
from appraise.workbook.looks import REDUCED_YEARS_POINTS

if TYPE_CHECKING:
    from appraise.study import Study


LEAST_CHART_COLUMNS = 8
LOSSES = "Losses are credited at once: the owner is taken to have other taxable profit."


def cash_flow_sheet(study: Study) -> Sheet:
    """Every option but the baseline, in the chosen scenario, live."""
    page = Page(CASH_FLOW, "live")
    basis = study.case.finance.basis
    money = (
        f"{basis}, money of {study.case.study.price_year}" if basis == "real" else "nominal, money of the day"
    )
    currency = study.case.study.currency
    shown = f"Money in thousand {currency}, cells hold {currency}."
    page.head("Cash flow and measures", f"As run: {money}. {shown}")
    page.put(3, LABEL, LOSSES, "note")
    calendar = Calendar(study, page)
    width = _width(study)
    page.width([42, 12.5, max(12.8, width + 2.0)] + [width] * calendar.time.number)
    end = BLOCKS_TOP + HEIGHT * (len(study.case.options) - 1)
    for row in range(MEASURES_TOP, end):
        page.height(row, ROW_POINTS)
    blocks = _blocks(study, page)
    calendar.write()
    write_depreciation(calendar)
    write_unit_of_capital(calendar)
    for block in blocks:
        block.write()
        write_marks(block)
    if blocks:
        page.put(end + 1, LABEL, "Helper rows: signs and paybacks; not printed", "section")
    free = MeasuresTable(study, page, blocks).write()
    page.put(
        free,
        LABEL,
        "The net present value (NPV) decides, the others inform. Prices: first year, hours as run.",
        "note",
    )
    if blocks:
        page.chart(_running_sums(study, page, blocks, width))
    page.freeze(4, YEAR_ZERO)
    last = year_column(calendar.time.number - 1)
    page.printed(
        area=area(1, 1, end - 1, max(last, _chart_columns(blocks)[1])),
        breaks_after=[block.top - 1 for block in blocks[::2]],
    )
    return page.finish()


def _blocks(study: Study, page: Page) -> list[Block]:
    """One block for each option but the baseline, below one another."""
    built = [index for index, option in enumerate(study.case.options) if not option.baseline]
    marks_top = BLOCKS_TOP + HEIGHT * len(built) + 2
    return [
        Block(study, page, index, BLOCKS_TOP + HEIGHT * place, marks_top + MARKS * place)
        for place, index in enumerate(built)
    ]


def _chart_columns(blocks: list[Block]) -> tuple[int, int]:
    """First and last column of the chart: from beside the measures to the last year, but wide enough."""
    first = TOTAL + 2 * len(blocks) + 1
    last = year_column(blocks[0].time.number - 1) if blocks else first
    return first, max(last, first + LEAST_CHART_COLUMNS)


def cumulative_rows(study: Study) -> dict[str, int]:
    """Row of each option's running sum of the net flow, by key, for charts on other sheets."""
    return {block.key: block.cumulative for block in _blocks(study, Page(CASH_FLOW, "live"))}


def _width(study: Study) -> float:
    """Characters that the greatest running sum of the run needs, in thousands as shown, and a little more."""
    flows = study.runs[study.reference].flows
    greatest = max(float(abs(flow.cumulative).max()) for flow in flows)
    return max(7.2, len(f"-{greatest / 1000.0:,.1f}") * 0.8 + 0.8)


def _running_sums(study: Study, page: Page, blocks: list[Block], width: float) -> Chart:
    """Running sum of the net flow of all options by calendar year."""
    time, currency = blocks[0].time, study.case.study.currency
    first, last = _chart_columns(blocks)
    pixels = (last - first + 1) * (width * 7.0 + 5.0)
    points = sum(page.points(row) for row in range(MEASURES_TOP, CALENDAR_TOP - 1))
    says = [
        f"{block.name} falls to {block.flow.cumulative.min():,.0f}, ends at {block.flow.cumulative[-1]:,.0f}"
        for block in blocks
    ]
    chart = line_chart(
        "Net flow, running sum from the first spend",
        [Series(block.name, CASH_FLOW, time.row(block.cumulative)) for block in blocks],
        (CASH_FLOW, time.row(ROWS.calendar_year)),
        x="year",
        y=Axis(f"thousand {currency}", "#,##0,"),
        alt=f"Running sum of each option's net flow, {currency}, as run: {'; '.join(says)}.",
        anchor=ref(MEASURES_TOP, first),
        size_cm=(pixels / 96.0 * 2.54 - 0.6, points / 72.0 * 2.54),
    )
    return replace(chart, points=REDUCED_YEARS_POINTS)
