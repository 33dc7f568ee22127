"""The two charts of the Decision sheet, side by side over the width of the page."""

from __future__ import annotations

from collections.abc import Iterator
from math import ceil
from typing import TYPE_CHECKING

from appraise.workbook.calendar_rows import CASH_FLOW, ROWS
from appraise.workbook.cash_flow import cumulative_rows
from appraise.workbook.cells import LABEL, TOTAL, ref
from appraise.workbook.charts import Axis, Chart, Series, bar_chart, line_chart
from appraise.workbook.naming import Timeline
from appraise.workbook.scenarios import TITLE as SCENARIOS
from appraise.workbook.scenarios import matrix_cells

if TYPE_CHECKING:
    from appraise.study import Study

OPTION_WIDTH, LAST_WIDTH = 17.0, 13.0  # columns of the sheet, of an option and the last
CHART_CM, CHART_ROWS = 11.0, 22  # height, and the rows of 15 points that it covers
LEFT_CM = 14.0
MOST_YEARS = 8  # named on the axis of a chart of half the page's width


def decision_charts(study: Study, row: int, last_col: int) -> Iterator[Chart]:
    """Running sums of the net flow, and net present values by scenario; none without an option to build.

    row : of their upper edges; last_col : of the page
    """
    others = [index for index, option in enumerate(study.case.options) if not option.baseline]
    if others:
        yield _running_sums(study, others, row)
        yield _values(study, others, row, last_col)


def _running_sums(study: Study, others: list[int], row: int) -> Chart:
    time, money, options = Timeline.of(study.case), study.case.study.currency, study.case.options
    rows = cumulative_rows(study)
    return line_chart(
        "Net flow, running sum, chosen scenario",
        [Series(options[i].name, CASH_FLOW, time.row(rows[options[i].key])) for i in others],
        (CASH_FLOW, time.row(ROWS.calendar_year)),
        x=Axis("year", "0", step=float(ceil(time.number / MOST_YEARS))),
        y=Axis(f"thousand {money}", "#,##0,"),
        alt=f"Running sum of the net flow of each option, {money}, by year.",
        anchor=ref(row, LABEL),
        size_cm=(LEFT_CM, CHART_CM),
    )


def _values(study: Study, others: list[int], row: int, last_col: int) -> Chart:
    money, options = study.case.study.currency, study.case.options
    titles, columns = matrix_cells(study)
    pixels = (last_col - TOTAL - 1) * (OPTION_WIDTH * 7.0 + 5.0) + LAST_WIDTH * 7.0
    return bar_chart(
        "Net present value by scenario",
        [Series(options[i].name, SCENARIOS, columns[i]) for i in others],
        (SCENARIOS, titles),
        x="",
        y=Axis(f"thousand {money}", "#,##0,"),
        alt=f"Net present value of each option in each scenario, {money}; the plant as it stands at 0.",
        anchor=ref(row, TOTAL + 1),
        size_cm=(pixels / 96.0 * 2.54, CHART_CM),
    )
