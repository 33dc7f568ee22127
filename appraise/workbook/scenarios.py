"""The Scenarios sheet: options against each other in all scenarios; the baseline, worth 0, competes."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING

from appraise.numerics import Array
from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page, Sheet, area, ref
from appraise.workbook.charts import Axis, Chart, Series, bar_chart
from appraise.workbook.looks import REDUCED_CHART_POINTS
from appraise.workbook.naming import name_of
from appraise.workbook.scenario_values import Values
from appraise.workbook.scenario_words import best_formula, best_words, regret_formula, regret_words

if TYPE_CHECKING:
    from appraise.study import Study

TITLE = "Scenarios"
WORDS_ROW, MATRIX_TOP = 4, 7
CHART_CM, CHART_ROWS, LEAST_CHART_COLUMNS = 10.6, 21, 6
WIDTH = 12.5


def scenarios_sheet(study: Study) -> Sheet:
    """Matrix of net present values, best option, worst case, regret; the parts they are made of below."""
    return _Scenarios(study).sheet()


def matrix_cells(study: Study) -> tuple[str, list[str]]:
    """Cells of the scenarios' titles, and of each option's net present values, for charts on other sheets."""
    at = _Scenarios(study)
    columns = [area(at.matrix, TOTAL + i, at.worst - 1, TOTAL + i) for i in range(len(at.options))]
    return area(at.matrix, LABEL, at.worst - 1, LABEL), columns


class _Scenarios:
    """The page: sentence, matrix, regret, chart, the run's own values, then the parts."""

    def __init__(self, study: Study) -> None:
        self.study, self.case, self.page = study, study.case, Page(TITLE, "live")
        self.scenarios, self.options = list(study.case.scenarios), study.case.options
        self.titles = [run.prices.title for run in study.runs]
        self.names = [option.name for option in self.options]
        self.base = [option.baseline for option in self.options].index(True)
        self.last = TOTAL + len(self.options) - 1
        height = len(self.scenarios)
        self.matrix = MATRIX_TOP + 2
        self.worst = self.matrix + height
        self.counts = self.worst + 1
        self.regret_top = self.counts + 2
        self.regret = self.regret_top + 2
        self.largest = self.regret + height
        self.run_top = self.largest + 2
        end = max(self.run_top + height + 4, self.regret_top + CHART_ROWS + 1)
        self.values = Values(study, self.page, end)

    def sheet(self) -> Sheet:
        """Put everything on the page."""
        page = self.page
        page.head("Scenarios", "All scenarios at once, whichever is chosen.")
        page.width([46, 6] + [WIDTH] * max(len(self.options) + 2, self.values.columns + 3))
        self._words()
        self._matrix()
        self._regret()
        self._as_run()
        if len(self.options) > 1:
            page.chart(self._chart())
        self.values.write()
        page.freeze(4, TOTAL)
        page.printed(breaks_after=[self.values.top - 1])
        return page.finish()

    def _row(self, row: int) -> str:
        """Cells of a row over all options."""
        return area(row, TOTAL, row, self.last)

    def _words(self) -> None:
        """The sentence over the matrix, in two cells."""
        page, comparison, currency = self.page, self.study.comparison, self.case.study.currency
        names, counts = self._row(MATRIX_TOP + 1), self._row(self.counts)
        scenarios = area(self.matrix, LABEL, self.worst - 1, LABEL)
        page.formula(
            WORDS_ROW,
            LABEL,
            best_formula(counts, names, scenarios, self.base),
            best_words(comparison.best, self.names, self.base),
            "verdict",
        )
        page.formula(
            WORDS_ROW + 1,
            LABEL,
            regret_formula(self._row(self.largest), self._row(self.worst), names, currency),
            regret_words(comparison.largest_regret, comparison.worst, self.names, currency),
            "text_wrap bold",
        )
        for row, points in ((WORDS_ROW, 24), (WORDS_ROW + 1, 20)):
            page.merge(row, LABEL, row, TOTAL + 11)
            page.height(row, points)

    def _section(self, row: int, title: str) -> None:
        """A title with its rule over the table."""
        self.page.put(row, LABEL, title, "section")
        for col in range(UNIT, self.last + 1):
            self.page.put(row, col, None, "section")

    def _headings(self, row: int, label: str, *more: str | None) -> None:
        self.page.headings(row, [label, "unit", *self.names, *more])
        self.page.height(row, 42)

    def _summary(
        self, row: int, label: str, formula: Callable[[str], str], expect: Array, style: str, name: str
    ) -> None:
        """A row under a matrix: `formula` of the cells of one option's column."""
        self.page.put(row, LABEL, label, "label_total")
        self.page.put(row, UNIT, self.case.study.currency, "unit_total")
        above = row - len(self.scenarios)
        for index, option in enumerate(self.options):
            col = TOTAL + index
            cells = area(above, col, row - 1, col)
            self.page.formula(
                row, col, formula(cells), float(expect[index]), style, name_of(name, option.key)
            )

    def _matrix(self) -> None:
        page, comparison, currency = self.page, self.study.comparison, self.case.study.currency
        self._section(
            MATRIX_TOP, f"Net present value against “{self.names[self.base]}”, the plant as it stands"
        )
        self._headings(MATRIX_TOP + 1, "Scenario", "best option", None, "helper: its column")
        page.merge(MATRIX_TOP + 1, self.last + 1, MATRIX_TOP + 1, self.last + 2)
        names = area(MATRIX_TOP + 1, TOTAL, MATRIX_TOP + 1, self.last, absolute=True)
        for number, scenario in enumerate(self.scenarios):
            row = self.matrix + number
            page.put(row, LABEL, self.titles[number], "label")
            page.put(row, UNIT, currency, "unit")
            for index in range(len(self.options)):
                value = float(comparison.npv[number, index])
                if index == self.base:
                    page.put(row, TOTAL + index, 0, "money")
                else:
                    page.formula(
                        row, TOTAL + index, f"={self.values.npv_cell(number, index)}", value, "money"
                    )
            cells = self._row(row)
            best = comparison.best[number]
            place = ref(row, self.last + 3)
            text = f"=INDEX({names},1,{place})"
            page.formula(
                row, self.last + 1, text, self.names[best], "label_indent", name_of("best", scenario)
            )
            page.formula(row, self.last + 3, f"=MATCH(MAX({cells}),{cells},0)", best + 1, "integer helper")
        self._summary(
            self.worst,
            "Worst of the scenarios",
            lambda c: f"=MIN({c})",
            comparison.worst,
            "money total",
            "worst",
        )
        self._counts()
        top = area(self.matrix, TOTAL, self.worst - 1, self.last)
        first = ref(self.matrix, TOTAL)
        cells = f"{ref(self.matrix, TOTAL, 'column')}:{ref(self.matrix, self.last, 'column')}"
        page.highlight(top, f"={first}=MAX({cells})", "ok")
        page.highlight(area(self.matrix, TOTAL, self.worst, self.last), f"={first}<0", "negative")

    def _counts(self) -> None:
        """In how many scenarios each option is best."""
        page, best = self.page, self.study.comparison.best
        page.put(self.counts, LABEL, "Scenarios in which it is best", "label")
        page.put(self.counts, UNIT, f"of {len(self.scenarios)}", "unit")
        found = area(self.matrix, self.last + 3, self.worst - 1, self.last + 3, absolute=True)
        for index, option in enumerate(self.options):
            col = TOTAL + index
            here = f"{ref(self.counts, TOTAL, 'column')}:{ref(self.counts, col)}"
            formula = f"=COUNTIF({found},COLUMNS({here}))"
            page.formula(
                self.counts, col, formula, best.count(index), "integer", name_of("times_best", option.key)
            )

    def _regret(self) -> None:
        page, comparison = self.page, self.study.comparison
        self._section(self.regret_top, "Regret: what an option costs against the best one of the scenario")
        self._headings(self.regret_top + 1, "Scenario")
        for number, scenario in enumerate(self.scenarios):
            row, source = self.regret + number, self.matrix + number
            page.put(row, LABEL, self.titles[number], "label")
            page.put(row, UNIT, self.case.study.currency, "unit")
            for index, option in enumerate(self.options):
                col = TOTAL + index
                page.formula(
                    row,
                    col,
                    f"=MAX({area(source, TOTAL, source, self.last, absolute=True)})-{ref(source, col)}",
                    float(comparison.regret[number, index]),
                    "money",
                    name_of("regret", scenario, option.key),
                )
        self._summary(
            self.largest,
            "Largest regret",
            lambda c: f"=MAX({c})",
            comparison.largest_regret,
            "money total",
            "largest_regret",
        )
        first = ref(self.largest, TOTAL)
        cells = area(self.largest, TOTAL, self.largest, self.last, absolute=True)
        page.highlight(self._row(self.largest), f"={first}=MIN({cells})", "ok")

    def _as_run(self) -> None:
        """Python's own matrix."""
        page, comparison = self.page, self.study.comparison
        self._section(self.run_top, f"As run: net present value against “{self.names[self.base]}”")
        self._headings(self.run_top + 1, "Scenario")
        for number in range(len(self.scenarios)):
            row = self.run_top + 2 + number
            page.put(row, LABEL, self.titles[number], "label")
            page.put(row, UNIT, self.case.study.currency, "unit")
            for index in range(len(self.options)):
                page.put(row, TOTAL + index, float(comparison.npv[number, index]), "money as run")
        row = self.run_top + 2 + len(self.scenarios)
        page.put(
            row,
            LABEL,
            "Energies are of the run in every scenario; prices, capital and finance are live.",
            "note",
        )

    def _chart(self) -> Chart:
        comparison, currency = self.study.comparison, self.case.study.currency
        others = [index for index in range(len(self.options)) if index != self.base]
        columns = max(LEAST_CHART_COLUMNS, self.values.npv_column - self.last - 1)
        says = "; ".join(
            f"{title}: " + ", ".join(f"{self.names[i]} {comparison.npv[n, i]:,.0f}" for i in others)
            for n, title in enumerate(self.titles)
        )
        chart = bar_chart(
            f"Net present value by scenario, against “{self.names[self.base]}”",
            [
                Series(self.names[i], TITLE, area(self.matrix, TOTAL + i, self.worst - 1, TOTAL + i))
                for i in others
            ],
            (TITLE, area(self.matrix, LABEL, self.worst - 1, LABEL)),
            x="",
            y=Axis(f"thousand {currency}", "#,##0,"),
            alt=f"Net present value of each option by scenario, {currency}, as run. {says}.",
            anchor=ref(self.regret_top, self.last + 2),
            size_cm=(columns * (WIDTH * 7.0 + 5.0) / 96.0 * 2.54, CHART_CM),
        )
        return replace(chart, points=REDUCED_CHART_POINTS)
