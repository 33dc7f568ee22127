"""The Tornado sheet: for each option what moves its net present value most, sorted, with a chart."""

from __future__ import annotations

from dataclasses import replace
from math import ceil
from typing import TYPE_CHECKING

from appraise.case.money import Driver
from appraise.sensitivity import Tornado
from appraise.workbook.cells import LABEL, Page, Sheet, area, ref
from appraise.workbook.charts import HATCHED_SLOT, Axis, Series, tornado_chart
from appraise.workbook.looks import REDUCED_CHART_POINTS
from appraise.workbook.naming import name_of
from appraise.workbook.tornado_bars import NO_EFFECT, Bars

if TYPE_CHECKING:
    from appraise.study import Study

TITLE = "Tornado"
TOP = 6
FOULED = "plant.condenser.terminal_difference_K"
ROW_CM = 15.0 / 72.0 * 2.54  # a row of 15 points
PAGE_CM = 39.0  # height of what surely fits on a printed page, at the scale that the width asks for
(DRIVER, HOW, UNIT, NOW, LOW, HIGH, NPV_LOW, NPV_HIGH, DOWN, UP, SWING, PLACE, REASON) = range(1, 14)
LAST_PRINTED = REASON
WIDTHS = (36.0, 8.0, 9.5, 10.0, 8.5, 8.5, 11.5, 11.5, 11.5, 11.5, 11.5, 8.0, 14.0)
HEADINGS = (
    "Driver",
    "live or as run",
    "unit",
    "in the run",
    "low",
    "high",
    "NPV at low",
    "NPV at high",
    "change at low",
    "change at high",
    "swing",
    "row in the case",
    "remark",
)
NOTE = (
    "Each driver alone goes to its low and its high end, the rest stays as it is. Live bars follow the "
    "inputs and the chosen scenario, with the hours as run. Bars as run were solved in the reference "
    "scenario; after a change of inputs they keep their difference to the net present value of the run. A "
    "share, as −25 %, multiplies what is in the run; any other end replaces it. Drivers of no effect keep "
    "their line. NPV: net present value. How the bars are made stands below and is not printed."
)


def tornado_sheet(study: Study) -> Sheet:
    """A sorted table and a chart for each option but the baseline; how the bars are made below."""
    page = Page(TITLE, "live")
    page.head("Tornado: one driver at a time")
    page.width([*WIDTHS, 12, 12, 38])
    page.paragraph(4, LABEL, LAST_PRINTED, NOTE, "note_wrap")
    page.paragraph(5, LABEL, LAST_PRINTED, direction_words(study), "note_wrap")
    drivers = [driver for driver in study.case.drivers if driver.low is not None and driver.high is not None]
    if not drivers or not study.tornado:
        page.put(TOP, LABEL, "The case names no driver with a low and a high end, or no option to vary.")
        return page.finish()
    height = len(drivers) + 3 + ceil(_chart_cm(len(drivers)) / ROW_CM) + 2
    bars_top = TOP + height * len(study.tornado)
    breaks = []
    for number, tornado in enumerate(study.tornado):
        bars = Bars(study, page, tornado, drivers, bars_top + number * (len(drivers) + 5))
        bars.write()
        top = TOP + number * height
        _Sorted(study, page, tornado, bars, top).write()
        breaks.append(top + height - 1)
    page.freeze(4, 2)
    page.printed(landscape=False, area=area(1, 1, breaks[-1], LAST_PRINTED), breaks_after=breaks[:-1])
    return page.finish()


def direction_words(study: Study) -> str:
    """Why a worse existing condenser can raise the gain, "" where none of the bars says so."""
    raised = [
        (bar.label, option.name)
        for tornado in study.tornado
        for option in study.case.options
        if option.key == tornado.option
        for bar in tornado.bars
        if bar.path == FOULED and bar.npv_low is not None and bar.npv_high is not None
        if bar.npv_high > bar.npv_low
    ]
    if not raised:
        return ""
    names = ", ".join(f"“{name}”" for _, name in raised)
    return (
        f"“{raised[0][0]}” seems to work the wrong way: a more fouled existing condenser raises the value of "
        f"{names}, because the plant it is compared with is worse."
    )


def _chart_cm(drivers: int) -> float:
    """Height of a chart of so many bars: generous, as far as the page has room below the table."""
    room = PAGE_CM - ROW_CM * (drivers + 10)
    return max(8.0, 0.5 * drivers + 3.0, min(1.1 * drivers + 3.0, room))


CHART_WIDTH_CM = sum(width * 7.0 + 5.0 for width in WIDTHS) / 96.0 * 2.54 - 0.2


class _Sorted:
    """The sorted table and the chart of one option."""

    def __init__(self, study: Study, page: Page, tornado: Tornado, bars: Bars, top: int) -> None:
        self.page, self.tornado, self.bars, self.top = page, tornado, bars, top
        self.currency = study.case.study.currency
        self.name = next(o.name for o in study.case.options if o.key == tornado.option)
        self.npv = name_of("npv", tornado.option)
        self.first = top + 2
        self.last = self.first + len(bars.drivers) - 1

    def write(self) -> None:
        """Title, table, chart."""
        page, base = self.page, self.tornado.base_npv
        page.formula(
            self.top,
            LABEL,
            f'="{_quotable(self.name)}: change of net present value, base "&FIXED({self.npv}/1000,0)'
            f'&" thousand {self.currency}"',
            f"{self.name}: change of net present value, base {base / 1000.0:,.0f} thousand {self.currency}",
            "section",
        )
        for col in range(LABEL + 1, LAST_PRINTED + 1):
            page.put(self.top, col, None, "section")
        page.headings(self.top + 1, HEADINGS)
        page.height(self.top + 1, 30)
        for number, index in enumerate(self.bars.order):
            self._row(self.first + number, index)
        page.highlight(area(self.first, HOW, self.last, HOW), f'={ref(self.first, HOW)}="live"', "chosen")
        self._chart()

    def _row(self, row: int, index: int) -> None:
        """One line of the table: what stands in the list of bars at the place of this rank."""
        page, bars, base = self.page, self.bars, self.tornado.base_npv
        driver: Driver = bars.drivers[index]
        bar, place = bars.bars[index], ref(row, PLACE, "column")
        here = f"{ref(self.first, PLACE, True)}:{ref(row, PLACE, 'column')}"
        rank = f"=MATCH(ROWS({here}),{bars.column('rank')},0)"
        page.formula(row, PLACE, rank, index + 1, "integer")

        def pick(col: int, source: str, expect: object, style: str, ending: str = "") -> None:
            page.formula(row, col, f"=INDEX({bars.column(source)},{place}){ending}", expect, style)

        pick(DRIVER, "driver", driver.label, "label")
        pick(HOW, "how", bars.how(index), "text_centre")
        pick(UNIT, "unit", bars.unit(index), "unit", '&""')
        pick(NOW, "now", bars.now(index), "text_right")
        pick(LOW, "low_text", bars.text(index, driver.low), "text_right")
        pick(HIGH, "high_text", bars.text(index, driver.high), "text_right")
        ends = (("npv_low", NPV_LOW, DOWN, bar.npv_low), ("npv_high", NPV_HIGH, UP, bar.npv_high))
        for source, col, change, value in ends:
            pick(col, source, "no value" if value is None else value, "money")
            moved = "" if value is None else value - base
            cell = ref(row, col)
            page.formula(row, change, f'=IF(ISNUMBER({cell}),{cell}-{self.npv},"")', moved, "money")
        pick(SWING, "swing", bars.swing(index), "money bold")
        # An empty cell looked up would read 0.
        reason = f'INDEX({bars.column("reason")},{place})&""'
        formula = f'=IF({reason}<>"",{reason},IF({ref(row, SWING)}=0,"{NO_EFFECT}",""))'
        page.formula(row, REASON, formula, bars.remark(index), "note")

    def _chart(self) -> None:
        rows = self.first, self.last
        low, high = (area(rows[0], col, rows[1], col) for col in (DOWN, UP))
        widest = [self.bars.drivers[index].label for index in self.bars.order[:3]]
        chart = tornado_chart(
            f"{self.name}: change of net present value",
            Series("driver at its low end", TITLE, low, slot=HATCHED_SLOT),
            Series("driver at its high end", TITLE, high, slot=0),
            (TITLE, area(rows[0], DRIVER, rows[1], DRIVER)),
            y=Axis(f"change, thousand {self.currency}", "#,##0,"),
            alt=f"Change of the net present value of {self.name} with one driver at its low (hatched) or its "
            f"high end, {self.currency}, as run around {self.tornado.base_npv:,.0f}. "
            f"Widest: {', '.join(widest)}.",
            anchor=ref(self.last + 2, LABEL),
            size_cm=(CHART_WIDTH_CM, _chart_cm(len(self.bars.drivers))),
            title_cell=(TITLE, ref(self.top, LABEL)),
        )
        self.page.chart(replace(chart, points=REDUCED_CHART_POINTS))


def _quotable(text: str) -> str:
    return text.replace('"', '""')
