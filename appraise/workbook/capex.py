"""The Capex sheet: what every option costs, how sure that is, when it is spent, how each item came about."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from math import ceil
from typing import TYPE_CHECKING

from appraise.capex import OptionCapital, estimate_class
from appraise.workbook.capex_estimates import TITLE as ESTIMATES_TITLE
from appraise.workbook.capex_estimates import put_estimates
from appraise.workbook.capex_items import AMOUNT, HIGH, LAST, LOW, Rows, put_blocks, put_factors, section
from appraise.workbook.capex_sizes import TITLE as SIZES_TITLE
from appraise.workbook.capex_sizes import put_sizes
from appraise.workbook.cells import LABEL, TOTAL, UNIT, YEAR_ZERO, Page, Sheet, area, ref
from appraise.workbook.charts import Axis, Series, bar_chart
from appraise.workbook.naming import Timeline, input_name, name_of

if TYPE_CHECKING:
    from appraise.study import Study

TITLE = "Capex"
WIDTHS = (44.0, 12.0) + (12.0,) * (LAST - 2)
TOP = 4
FIRST_OPTION = TOTAL
CHART_SERIES = 6  # as many as differ in look; the smaller items are taken together
CHART_CM = (15.0, 12.0)
HEADING_CHARACTERS, HEADING_POINTS = 11, 14.0  # of a line in the heading of an option
PAGE_ROWS = 44  # as many as surely fit on a printed page


def capex_sheet(study: Study) -> Sheet:
    """Capital of all options in money of the price year, and what set the sizes that were bought."""
    return _Capex(study).sheet()


class _Capex:
    """The page, and the first rows of its parts from the top down."""

    def __init__(self, study: Study) -> None:
        self.study, self.case = study, study.case
        self.capital: Sequence[OptionCapital] = study.capital
        self.time = Timeline.of(study.case)
        self.page = Page(TITLE, "live")
        self.unit = study.case.study.currency
        self.last_option = FIRST_OPTION + len(self.capital) - 1
        bought = {cost.key for one in self.capital for cost in one.items}
        self.items = [item for item in self.case.capex.items if item.key in bought]
        self.first_item = TOP + 2
        self.total = self.first_item + len(self.items)
        self.classes = self.total + 8
        self.spend = self.classes + len(self.capital) + 1
        self.chart_data = self.spend + len(self.capital) + 3
        self.charted = self._charted()
        detail = self.chart_data + (len(self.charted) + 3 if self._grouped else 0)
        self.rows = Rows.of(self.case, self.capital, detail)
        self.ends = [self.rows.end]  # first rows of the parts below the options' blocks

    def sheet(self) -> Sheet:
        """Put everything on the page."""
        page = self.page
        page.width(WIDTHS)
        page.head(
            "Capital",
            f"{self.unit} of {self.case.study.price_year}; sizes and the cost by correlation are of the run.",
        )
        self._matrix()
        self._accuracy()
        if self.items:
            self._chart()
        self._spend()
        put_factors(page, self.case, self.capital, self.rows)
        put_blocks(page, self.case, self.capital, self.rows)
        self._sizes(self._sources())
        page.freeze(TOP, UNIT)
        page.printed(breaks_after=self._breaks())
        return page.finish()

    def _breaks(self) -> list[int]:
        """Rows after which a page ends: before the detail, and before a block that would be torn."""
        breaks = [self.chart_data - 1]
        for top, end in pairwise([*self.rows.blocks, *self.ends]):
            if end - breaks[-1] > PAGE_ROWS:
                breaks.append(top - 1)
        return breaks

    # -- capital by item and option

    def _headings(self, row: int, label: str) -> None:
        self.page.headings(row, [label, "unit", *(option.name for option in self.case.options)])
        lines = max(ceil(len(option.name) / HEADING_CHARACTERS) for option in self.case.options)
        self.page.height(row, max(2, lines) * HEADING_POINTS + 3)

    def _matrix(self) -> None:
        page = self.page
        section(page, TOP, "Capital by item and option, with the multiplier")
        self._headings(TOP + 1, "item")
        places = [self.rows.costs(self.capital, number) for number in range(len(self.capital))]
        for row, item in enumerate(self.items, self.first_item):
            page.put(row, LABEL, item.name, "label")
            page.put(row, UNIT, self.unit, "unit")
            for number, one in enumerate(self.capital):
                col = FIRST_OPTION + number
                if item.key not in places[number]:
                    page.put(row, col, 0, "money")
                    continue
                first, last = places[number][item.key]
                amount = one.multiplier * sum(cost.amount for cost in one.items if cost.key == item.key)
                cells = area(first, AMOUNT, last, AMOUNT)
                page.formula(row, col, f"=in_capex_multiplier*SUM({cells})", amount, "money")
        self._totals()

    def _totals(self) -> None:
        """Total, low, high, what the baseline would have spent, and the increment of the cash flow."""
        base = next(n for n, option in enumerate(self.case.options) if option.baseline)
        total, low, high, down, up, avoided, extra = range(self.total, self.total + 7)
        for row, label, unit in (
            (total, "total", self.unit),
            (low, "low: every item at the low end of its accuracy", self.unit),
            (high, "high: every item at the high end of its accuracy", self.unit),
            (down, "low against total", "%"),
            (up, "high against total", "%"),
            (avoided, "less: what the baseline would have spent", self.unit),
            (extra, "increment: what enters the cash flow", self.unit),
        ):
            strong = row in (total, extra)
            self.page.put(row, LABEL, label, "label_total" if strong else "label")
            self.page.put(row, UNIT, unit, "unit_total" if strong else "unit")
        baseline = ref(total, FIRST_OPTION + base, True)
        for number, one in enumerate(self.capital):
            col = FIRST_OPTION + number
            cell, key = ref(total, col), one.option
            items = area(self.first_item, col, total - 1, col)
            put = self.page.formula
            put(
                total,
                col,
                f"=SUM({items})" if self.items else "=0",
                one.total,
                "money total",
                name_of("capital_total", key),
            )
            put(low, col, self._bound(number, LOW), one.low, "money", name_of("capital_low", key))
            put(high, col, self._bound(number, HIGH), one.high, "money", name_of("capital_high", key))
            for row, bound, value in ((down, low, one.low), (up, high, one.high)):
                share = value / one.total - 1.0 if one.total else 0.0
                put(row, col, f"=IF({cell}=0,0,{ref(bound, col)}/{cell}-1)", share, "percent0")
            put(avoided, col, f"=-{baseline}", -one.avoided, "money")
            put(
                extra,
                col,
                f"={cell}+{ref(avoided, col)}",
                one.extra,
                "money total",
                name_of("capital_increment", key),
            )

    def _bound(self, number: int, col: int) -> str:
        """Formula of the low or high total of an option, from its block."""
        if not self.capital[number].items:
            return "=0"
        return f"={ref(self.rows.sums(self.capital, number) + 1, col)}"

    def _accuracy(self) -> None:
        self.page.put(self.classes - 1, LABEL, "Class of the estimate", "label")
        self.page.put(self.classes - 1, UNIT, "class", "unit")
        for number, (option, one) in enumerate(zip(self.case.options, self.capital, strict=True)):
            if one.items:
                grade, text = estimate_class(one)
                self.page.put(self.classes - 1, FIRST_OPTION + number, grade, "integer as run")
            else:
                text = "nothing is bought"
            line = f"{option.name}: {text}"
            self.page.paragraph(self.classes + number, LABEL, self.last_option, line, "note_wrap")

    # -- chart

    def _charted(self) -> list[tuple[str, list[int]]]:
        """Legend and matrix rows of every series: the largest items alone, the others together."""
        largest = {
            item.key: max(
                sum(cost.amount for cost in one.items if cost.key == item.key) for one in self.capital
            )
            for item in self.items
        }
        by_size = sorted(largest, key=lambda key: -largest[key])
        alone = by_size if len(by_size) <= CHART_SERIES else by_size[: CHART_SERIES - 1]
        rows = {item.key: self.first_item + n for n, item in enumerate(self.items)}
        names = {item.key: item.name for item in self.items}
        found = [(names[key], [rows[key]]) for key in alone]
        others = [rows[key] for key in by_size if key not in alone]
        return [*found, (f"{len(others)} smaller items", sorted(others))] if others else found

    @property
    def _grouped(self) -> bool:
        return len(self.items) > CHART_SERIES

    def _chart(self) -> None:
        series = []
        for number, (label, rows) in enumerate(self.charted):
            row = rows[0]
            if self._grouped:
                row = self.chart_data + 2 + number
                self._chart_row(row, label, rows)
            cells = area(row, FIRST_OPTION, row, self.last_option)
            series.append(Series(label, TITLE, cells, slot=number))
        if self._grouped:
            section(
                self.page, self.chart_data, "Shown in the chart: the largest items, and the others together"
            )
            self._headings(self.chart_data + 1, "item")
        told = "; ".join(
            f"{option.name} {one.total:,.0f} {self.unit}"
            for option, one in zip(self.case.options, self.capital, strict=True)
        )
        self.page.chart(
            bar_chart(
                f"Capital by item and option, {self.unit} of {self.case.study.price_year}",
                series,
                (TITLE, area(TOP + 1, FIRST_OPTION, TOP + 1, self.last_option)),
                x="",
                y=Axis(f"thousand {self.unit}", "#,##0,"),
                alt=f"Stacked bars of capital by item, one bar for each option. Totals: {told}.",
                anchor=ref(TOP + 2, self.last_option + 2),
                size_cm=CHART_CM,
                stacked=True,
            )
        )

    def _chart_row(self, row: int, label: str, rows: Sequence[int]) -> None:
        self.page.put(row, LABEL, label, "label")
        self.page.put(row, UNIT, self.unit, "unit")
        for number, one in enumerate(self.capital):
            col = FIRST_OPTION + number
            keys = {self.items[r - self.first_item].key for r in rows}
            amount = one.multiplier * sum(cost.amount for cost in one.items if cost.key in keys)
            cells = ",".join(ref(r, col) for r in rows)
            self.page.formula(row, col, f"=SUM({cells})", amount, "money")

    # -- spending by year

    def _spend(self) -> None:
        """The increment of every option over the years of spending; t = 0 is the first."""
        page, row, number = self.page, self.spend, self.time.spend
        shares = self.case.capex.spend
        section(page, row, "Spent by year, price-year money: the increment against the baseline")
        first = self.case.study.first_year - number
        page.put(row + 1, LABEL, "calendar year", "heading_left")
        page.put(row + 1, UNIT, "unit", "heading")
        page.put(row + 1, TOTAL, "total", "heading")
        for t in range(number):
            ordinal = f"COLUMNS({ref(row, YEAR_ZERO, 'column')}:{ref(row, YEAR_ZERO + t)})"
            text = f"=in_study_first_year-ROWS(in_capex_spend)+{ordinal}-1"
            page.formula(row + 1, YEAR_ZERO + t, text, first + t, "year heading")
        page.put(row + 2, LABEL, "share of the capital", "label")
        page.put(row + 2, UNIT, "%", "unit")
        page.formula(row + 2, TOTAL, f"=SUM({self._years(row + 2)})", sum(shares), "percent1")
        for t, share in enumerate(shares):
            page.formula(row + 2, YEAR_ZERO + t, f"={input_name(f'capex.spend[{t}]')}", share, "percent1")
        at = row + 3
        for option, one in zip(self.case.options, self.capital, strict=True):
            if option.baseline:
                continue
            page.row_of_formulas(
                at,
                option.name,
                self.unit,
                lambda c, at=at: f"=$C{at}*{c}${row + 2}",  # type: ignore[misc]
                [one.extra * share for share in shares],
                "money",
            )
            page.formula(at, TOTAL, f"={name_of('capital_increment', one.option)}", one.extra, "money bold")
            at += 1

    def _years(self, row: int) -> str:
        return area(row, YEAR_ZERO, row, YEAR_ZERO + self.time.spend - 1)

    # -- sources and doubts

    def _sources(self) -> int:
        """Where every cost comes from, and what is doubtful; returns the first free row."""
        page, top = self.page, self.rows.end
        section(page, top, "Where the items come from")
        costs = {cost.key: cost for one in self.capital for cost in one.items}
        for row, item in enumerate(self.items, top + 1):
            cost = costs[item.key]
            page.put(row, LABEL, item.name, "label_wrap")
            said = [cost.source or "no source stated"]
            if item.correlation is not None and item.correlation.name is not None and cost.note:
                said.append(cost.note)
            page.paragraph(row, UNIT, LAST, "; ".join(said), "note_wrap")
        doubts = {
            f"{item.name}: {warning}": None
            for one in self.capital
            for item in one.items
            for warning in item.warnings
        }
        top += len(self.items) + 2
        section(page, top, "What is doubtful")
        lines = list(doubts) or ["Nothing lies outside the range of its correlation or is very old."]
        for row, text in enumerate(lines, top + 1):
            page.paragraph(row, LABEL, LAST, text, "note_wrap")
        self.ends.append(top + len(lines) + 2)
        return self.ends[-1]

    # -- sizes

    def _sizes(self, row: int) -> None:
        """What was sized, and by which hour or the design point."""
        if any(one.stages for one in self.study.physics.sizes):
            section(self.page, row, SIZES_TITLE)
            row = put_sizes(self.page, row + 1, self.study)
            self.ends.append(row)
        if self.study.estimates:
            section(self.page, row, ESTIMATES_TITLE)
            self.ends.append(put_estimates(self.page, row + 1, self.study))
