"""The Draws sheet: what thousands of whole studies came to, in words, figures and charts, as run."""

from __future__ import annotations

from math import ceil
from typing import TYPE_CHECKING

import numpy as np

from appraise.case.money import Driver
from appraise.draws import Risk
from appraise.levers import Levers
from appraise.numerics import Array
from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page, Sheet, area
from appraise.workbook.draws_charts import (
    CURVE_CM,
    HISTOGRAM_CM,
    LAST,
    TITLE,
    WIDTHS,
    bars_cm,
    cumulative_curves,
    option_charts,
)
from appraise.workbook.draws_figures import Figures
from appraise.workbook.draws_leaning import below_stated, leaning_badly, lower_words
from appraise.workbook.draws_words import (
    RANKS,
    distribution_words,
    method_of_draws,
    method_words,
    option_words,
    together_words,
)
from appraise.workbook.input_rows import input_rows
from appraise.workbook.tornado_drivers import driver_unit, value_now

if TYPE_CHECKING:
    from appraise.study import Study

ROW_CM = 15.0 / 72.0 * 2.54  # a row of 15 points
OF_PATH = "× path"
OF_DEVIATION, OF_CHECKED = "share of the standard deviation", "share of the draws checked"


def draws_sheet(study: Study) -> Sheet | None:
    """Words and summary; curves and drivers; an option a page; figures of the charts. None without draws."""
    return None if study.risk is None else _Draws(study, study.risk).sheet()


class _Draws:
    """The page from top to bottom; `row` is the next free one."""

    def __init__(self, study: Study, risk: Risk) -> None:
        self.study, self.case, self.risk, self.page = study, study.case, risk, Page(TITLE, "as run")
        self.currency, self.options = study.case.study.currency, study.case.options
        self.others = [i for i, option in enumerate(self.options) if not option.baseline]
        self.drivers = [driver for driver in study.case.drivers if driver.distribution is not None]
        self.scenario = list(study.case.scenarios).index(risk.scenario)
        self.last_col = max(LAST, TOTAL + len(self.options) - 1)
        self.row = 4
        self.breaks: list[int] = []

    def sheet(self) -> Sheet:
        """Put everything on the page. Charts come last: they need the places of their figures."""
        page = self.page
        page.head("Draws: how sure the answer is")
        page.width([*WIDTHS, *([WIDTHS[-1]] * (self.last_col - LAST))])
        self._words()
        self._summary()
        self._method()
        self._break()
        curves_row = self._room(CURVE_CM) if self.others else 0
        self._drivers()
        places = [self._option(index) for index in self.others]
        printed = area(1, 1, self.row - 1, self.last_col)
        if self.others:
            names = [self.options[index].name for index in self.others]
            risks = [self.risk.options[index] for index in self.others]
            figures = Figures(page, self.row + 1, risks, names, self.currency)
            figures.write()
            for chart in (cumulative_curves(figures, curves_row), *option_charts(figures, places)):
                page.chart(chart)
        page.freeze(4, 1)
        page.printed(area=printed, breaks_after=self.breaks)
        return page.finish()

    def _section(self, title: str) -> None:
        self.page.put(self.row, LABEL, title, "section")
        for col in range(UNIT, self.last_col + 1):
            self.page.put(self.row, col, None, "section")
        self.row += 1

    def _paragraph(self, text: str, style: str = "text_wrap") -> None:
        self.page.paragraph(self.row, LABEL, LAST, text, style)
        self.row += 1

    def _under_rule(self, text: str, style: str = "text_wrap") -> None:
        """A paragraph right under the rule of a section, with some air between."""
        self.page.height(self.row, 4.0)
        self.row += 1
        self._paragraph(text, style)

    def _room(self, centimetres: float) -> int:
        """Rows for a chart of this height; returns the first of them."""
        first = self.row
        self.row += ceil(centimetres / ROW_CM) + 1
        return first

    def _break(self) -> None:
        """A new printed page from here on."""
        self.breaks.append(self.row - 1)

    # -- what came of it

    def _words(self) -> None:
        title = self.study.runs[self.scenario].prices.title
        self._paragraph(method_of_draws(self.risk.options[0].number, title, self.currency))
        for option, risk in zip(self.options, self.risk.options, strict=True):
            self._paragraph(option_words(option.name, risk, option.baseline, self.currency), "text_wrap bold")
        stated = self.study.comparison.npv[self.scenario]
        lower = [i for i in self.others if below_stated(self.risk.options[i], float(stated[i]))]
        if lower:
            first = max(lower, key=lambda i: self.risk.options[i].mean)
            bad = leaning_badly(self.case, self.risk, self.drivers, self.risk.options[first])
            words = lower_words([self.options[i].name for i in lower], bad)
            if words:
                self._paragraph(words)
        self.row += 1

    def _figure(self, label: str, unit: str, kind: str, values: list[float], of_what: str = "") -> None:
        """A row of figures of the run, and behind them what they are a share of."""
        self.page.put(self.row, LABEL, label, "label")
        self.page.put(self.row, UNIT, unit, "unit")
        for offset, value in enumerate(values):
            self.page.put(self.row, TOTAL + offset, value, f"{kind} as run")
        if of_what:
            self.page.put(self.row, TOTAL + len(values), of_what, "label_indent")
        self.row += 1

    def _summary(self) -> None:
        page, money, risks = self.page, f"thousand {self.currency}", self.risk.options
        self._section("Net present value against the baseline over all draws")
        page.headings(self.row, ["Figure", "unit", *[option.name for option in self.options]])
        page.height(self.row, 42)
        self.row += 1
        stated = [float(v) for v in self.study.comparison.npv[self.scenario]]
        self._figure("As stated, nothing drawn", money, "thousand", stated)
        self._figure("Mean", money, "thousand", [r.mean for r in risks])
        self._figure("Standard deviation", money, "thousand", [r.standard_deviation for r in risks])
        self._figure("P5: one draw in twenty is lower", money, "thousand", [r.p5 for r in risks])
        self._figure("P50: half of the draws are lower", money, "thousand", [r.p50 for r in risks])
        self._figure("P95: one draw in twenty is higher", money, "thousand", [r.p95 for r in risks])
        self._figure(
            "Standard error of the mean, by the number", money, "thousand", [r.standard_error for r in risks]
        )
        self._figure(
            "Chance of a positive value", "of draws", "percent1", [r.chance_npv_positive for r in risks]
        )
        spread = [(r.chance_npv_positive * (1.0 - r.chance_npv_positive) / r.number) ** 0.5 for r in risks]
        self._figure("  its standard error, by the number", "of draws", "percent1", spread)
        self._figure("Chance to be the best option", "of draws", "percent1", [r.chance_best for r in risks])
        self._figure("Number of draws", "–", "integer", [r.number for r in risks])
        self.row += 1

    def _method(self) -> None:
        self._section("Error of the method")
        error = self.risk.method_error
        self._under_rule(method_words(error))
        if error is None:
            return
        self._figure(
            "Root mean square of the difference", "%", "percent2", [error.root_mean_square], OF_DEVIATION
        )
        self._figure("Largest difference", "%", "percent2", [error.largest], OF_DEVIATION)
        self._figure("Shift of the chance of a positive value", "%", "percent2", [error.shift], OF_CHECKED)
        self._figure("Draws checked", "–", "integer", [error.checked])
        self._figure("Full solutions behind the response", "–", "integer", [error.nodes])
        self._figure("Hours of the year in each of them", "h", "integer", [error.hours])

    # -- what was drawn

    def _drivers(self) -> None:
        page = self.page
        self._section("What was drawn")
        heads = ["Driver", "unit", "as stated", "P5 drawn", "P50 drawn", "P95 drawn", "distribution"]
        page.headings(self.row, heads)
        for col in range(LABEL + len(heads), LAST + 1):
            page.put(self.row, col, None, "heading")
        page.merge(self.row, LABEL + len(heads) - 1, self.row, LAST)
        units = {row.path: row.unit for row in input_rows(self.case)}
        for driver, drawn in zip(self.drivers, self.risk.values.T, strict=True):
            self.row += 1
            self._driver(driver, drawn, units)
        self.row += 1
        labels = set(self.risk.labels)
        pairs = [pair for pair in self.case.draws.correlations if labels.issuperset(pair.between)]
        self._paragraph(together_words(pairs), "note_wrap")

    def _driver(self, driver: Driver, drawn: Array, units: dict[str, str]) -> None:
        """One line: what the case has, what was drawn, from what."""
        page, row = self.page, self.row
        scaled = Levers(self.risk.scenario).is_price_path(driver.path)
        unit = OF_PATH if scaled else driver_unit(driver.path, self.risk.scenario, units)
        now = "1" if scaled else value_now(self.case, driver, unit)
        page.put(row, LABEL, driver.label, "label")
        page.put(row, UNIT, unit or "–", "unit")
        page.put(row, TOTAL, now, "text_right as run")
        kind = "percent2" if unit.startswith("%") else "number3"
        for offset, value in enumerate(np.percentile(drawn, (5, 50, 95)), 1):
            page.put(row, TOTAL + offset, float(value), f"{kind} as run")
        assert driver.distribution is not None
        page.put(row, TOTAL + 4, distribution_words(driver.distribution, unit), "label_indent")

    # -- one option

    def _option(self, index: int) -> tuple[int, int]:
        """Table and room for the charts of one option, on a page of its own; returns the charts' rows."""
        self._break()
        page, risk = self.page, self.risk.options[index]
        self._section(f"{self.options[index].name}: what its net present value hangs on, and how it spreads")
        self._under_rule(RANKS, "note_wrap")
        top = self.row
        page.headings(top, ["Driver, strongest first", "rank corr."])
        for label, rank in risk.rank_correlation:
            self.row += 1
            page.put(self.row, LABEL, label, "label")
            page.put(self.row, UNIT, rank, "number2 as run")
        self.row = max(self.row, top + ceil(bars_cm(risk) / ROW_CM)) + 1
        return top, self._room(HISTOGRAM_CM)
