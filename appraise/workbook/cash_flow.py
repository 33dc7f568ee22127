"""The Cash flow sheet: measures, a chart of running sums, what options share, a block for each option."""

from __future__ import annotations

from typing import TYPE_CHECKING

from appraise.workbook.calendar_rows import BLOCKS_TOP, CASH_FLOW, CHART_TOP, ROWS
from appraise.workbook.cash_flow_block import Block
from appraise.workbook.cash_flow_calendar import Calendar
from appraise.workbook.cash_flow_depreciation import write_depreciation, write_unit_of_capital
from appraise.workbook.cash_flow_marks import write_marks
from appraise.workbook.cash_flow_measures import MeasuresTable
from appraise.workbook.cells import LABEL, YEAR_ZERO, Page, Sheet, ref
from appraise.workbook.charts import Axis, Chart, Series, line_chart

if TYPE_CHECKING:
    from appraise.study import Study


def cash_flow_sheet(study: Study) -> Sheet:
    """Every option but the baseline, in the chosen scenario, live."""
    page = Page(CASH_FLOW, "live")
    basis = study.case.finance.basis
    money = (
        f"{basis}, money of {study.case.study.price_year}" if basis == "real" else "nominal, money of the day"
    )
    page.head("Cash flow and measures", f"As run: {money}, {study.case.study.currency}.")
    calendar = Calendar(study, page)
    page.width([49, 10, _width(study) + 1.5] + [_width(study)] * calendar.time.number)
    blocks = _blocks(study, page)
    calendar.write()
    write_depreciation(calendar)
    write_unit_of_capital(calendar)
    for block in blocks:
        block.write()
        write_marks(block)
    free = MeasuresTable(study, page, blocks).write()
    page.put(
        free,
        LABEL,
        "The net present value decides, the others inform. Prices: first year, hours as run.",
        "note",
    )
    if blocks:
        page.chart(_running_sums(study, blocks))
    page.freeze(4, YEAR_ZERO)
    page.printed(breaks_after=[block.top - 1 for block in blocks[::2]])
    return page.finish()


def _blocks(study: Study, page: Page) -> list[Block]:
    """One block for each option but the baseline, below one another."""
    blocks: list[Block] = []
    top = BLOCKS_TOP
    for index, option in enumerate(study.case.options):
        if not option.baseline:
            blocks.append(Block(study, page, index, top))
            top = blocks[-1].next_row
    return blocks


def cumulative_rows(study: Study) -> dict[str, int]:
    """Row of each option's running sum of the net flow, by key, for charts on other sheets."""
    return {block.key: block.cumulative for block in _blocks(study, Page(CASH_FLOW, "live"))}


def _width(study: Study) -> float:
    """Characters that the greatest running sum of the run needs, with room for one digit more."""
    flows = study.runs[study.reference].flows
    greatest = max(float(abs(flow.cumulative).max()) for flow in flows)
    return max(8.0, len(f"-{greatest:,.0f}") * 0.95 + 1.0)


def _running_sums(study: Study, blocks: list[Block]) -> Chart:
    """Running sum of the net flow of all options by calendar year."""
    time, currency = blocks[0].time, study.case.study.currency
    says = [
        f"{block.name} falls to {block.flow.cumulative.min():,.0f}, ends at {block.flow.cumulative[-1]:,.0f}"
        for block in blocks
    ]
    return line_chart(
        "Net flow, running sum from the first spend",
        [Series(block.name, CASH_FLOW, time.row(block.cumulative)) for block in blocks],
        (CASH_FLOW, time.row(ROWS.calendar_year)),
        x="year",
        y=Axis(f"{currency}, basis of the analysis", "#,##0"),
        alt=f"Running sum of each option's net flow, {currency}, as run: {'; '.join(says)}.",
        anchor=ref(CHART_TOP, LABEL),
        size_cm=(30.0, 9.8),
    )
