"""The Decision sheet: question, recommendation, reason, the options side by side, on one printed page."""

from __future__ import annotations

from typing import TYPE_CHECKING

from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page, Sheet, area, ref
from appraise.workbook.decision_charts import CHART_ROWS, LAST_WIDTH, OPTION_WIDTH, decision_charts
from appraise.workbook.decision_run_words import run_formula, run_words
from appraise.workbook.decision_table import Table
from appraise.workbook.decision_words import (
    Best,
    Cells,
    origin,
    question,
    reason,
    reason_formula,
    standing,
    standing_formula,
    verdict,
    verdict_formula,
)
from appraise.workbook.naming import CHOSEN_SCENARIO, name_of

if TYPE_CHECKING:
    from appraise.study import Study

TITLE = "Decision"
CHOSEN_ROW, VERDICT_ROW, TABLE_TOP = 6, 9, 14
OUTDATED = "Technical inputs were changed: run again; heat balances, hours and sizes are out of date."
IN_STEP = "All technical inputs are those of the run."
CAUTION = (
    "Pre-feasibility only and no investment advice. Blading, last-row moisture, thrust and overspeed are for "
    "the turbine maker, pressure parts and tube rupture for the local code and licensed engineers; "
    "see Cautions."
)


def decision_sheet(study: Study) -> Sheet:
    """The page that management reads."""
    return _Decision(study).sheet()


class _Decision:
    """The page from top to bottom; `row` is the next free one."""

    def __init__(self, study: Study) -> None:
        self.study, self.case, self.page = study, study.case, Page(TITLE, "live")
        self.currency = study.case.study.currency
        self.options = study.case.options
        self.base = next(i for i, option in enumerate(self.options) if option.baseline)
        self.table = Table(study, self.page, TABLE_TOP)
        self.row = self.helper_row = TABLE_TOP

    def sheet(self) -> Sheet:
        """Put everything on the page. The words come last: they need the places of the table."""
        page = self.page
        page.width([46, 12] + [OPTION_WIDTH] * max(len(self.options), 3) + [LAST_WIDTH])
        page.head(self.case.study.title)
        page.put(3, LABEL, origin(self.study), "note")
        page.height(3, 20)
        self._question()
        self.table.options_table()
        self.table.break_evens()
        self.row = self.table.row
        self._status()
        self._charts()
        page.paragraph(self.row, LABEL, self._wide(), CAUTION, "note_wrap")
        self.helper_row = self.row + 2
        self._words()
        page.printed(landscape=False, pages_tall=1, area=area(1, LABEL, self.row, self._wide()))
        return page.finish()

    def _wide(self) -> int:
        """Last column that texts and charts may use."""
        return max(self.table.last, TOTAL + 2) + 1

    def _question(self) -> None:
        page, about = self.page, self.case.study
        text = question(self.options[self.base].name, len(self.options) - 1, about.years, about.first_year)
        page.paragraph(4, LABEL, self._wide(), text)
        page.put(CHOSEN_ROW, LABEL, "Price scenario: choose one, the money follows", "label")
        page.put(CHOSEN_ROW, TOTAL, about.reference_scenario, "text input", name=CHOSEN_SCENARIO)
        page.validate_list(CHOSEN_ROW, TOTAL, "=scenario_names")
        page.formula(
            CHOSEN_ROW,
            TOTAL + 1,
            "=INDEX(scenario_titles,chosen_index,1)",
            self.table.run.prices.title,
            "label_indent",
            "chosen_title",
        )

    def _status(self) -> None:
        page, metered = self.page, self.case.year.metered is not None
        self.row += 1
        page.formula(
            self.row, LABEL, f'=IF(changed_technical>0,"{OUTDATED}","{IN_STEP}")', IN_STEP, "text_wrap bold"
        )
        page.merge(self.row, LABEL, self.row, self._wide())
        page.highlight(ref(self.row, LABEL), "=changed_technical>0", "caution")
        passed = sum(check.passed for check in self.study.checks)
        total = len(self.study.checks)
        compared = "was compared" if metered else "was not compared"
        text = f"of {{}} checks are in order. The baseline's year {compared} with meters."
        words = text.split("{}")
        page.formula(
            self.row + 1,
            LABEL,
            f'=checks_passed&" {words[0]}"&checks_total&"{words[1]}"',
            f"{passed} {words[0]}{total}{words[1]}",
            "text",
        )
        self.row += 3

    def _charts(self) -> None:
        for chart in decision_charts(self.study, self.row, self._wide()):
            self.page.chart(chart)
            self.row += CHART_ROWS + 1 if chart.kind == "line" else 0

    # -- words

    def _words(self) -> None:
        page, cells = self.page, self._helpers()
        page.put(VERDICT_ROW - 1, LABEL, "Recommendation", "section")
        for col in range(UNIT, self._wide() + 1):
            page.put(VERDICT_ROW - 1, col, None, "section")
        best, money = self._best(), self.currency
        row = VERDICT_ROW
        for text, formula, style, lines in (
            (verdict(best, money), verdict_formula(cells, money), "verdict", 2),
            (reason(best, money), reason_formula(cells, money), "text_wrap bold", 2),
            (standing(best, money), standing_formula(cells, money, len(self.options) > 1), "text_wrap", 3),
            (run_words(self.study), run_formula(self.study, cells.best), "text_wrap as run", 4),
        ):
            page.paragraph(row, LABEL, self._wide(), text, style, lines, formula)
            row += 1

    def _helpers(self) -> Cells:
        """Where the words find what they need; rows below the printed page hold what no table has."""
        page, table, first = self.page, self.table, self.helper_row
        place, npv = self.study.comparison.best[self.study.reference], table.cells("npv")
        page.put(
            first, LABEL, "Helpers, not printed: column of the best option in the chosen scenario", "note"
        )
        page.formula(first, TOTAL, f"=MATCH(MAX({npv}),{npv},0)", place + 1, "integer", name="live_best")
        others, above, below = first + 1, first + 2, first + 3
        page.put(others, LABEL, "  net present value of all the others", "note")
        page.put(above, LABEL, "  what the capital may exceed its estimate by", "note")
        page.put(below, LABEL, "  what it may fall short of it by", "note")
        for index, (option, paid) in enumerate(zip(self.options, self.study.capital, strict=True)):
            col, key = TOTAL + index, option.key
            total, high, low = (name_of(f"capital_{part}", key) for part in ("total", "high", "low"))
            formula = f'=IF(live_best={index + 1},"",{ref(table.rows["npv"], col)})'
            value = self._npv(index)
            page.formula(others, col, formula, "" if index == place else value, "money")
            page.formula(above, col, f"={high}-{total}", paid.high - paid.total, "money")
            page.formula(below, col, f"={total}-{low}", paid.total - paid.low, "money")
        return Cells(
            names=table.row_cells(TABLE_TOP),
            npv=npv,
            capital=table.cells("extra_capital"),
            payback=table.cells("payback"),
            discounted=table.cells("discounted_payback"),
            worst=table.cells("worst"),
            times=table.cells("times_best"),
            regret=table.cells("largest_regret"),
            others=table.row_cells(others),
            above=table.row_cells(above),
            below=table.row_cells(below),
            best="live_best",
            baseline=self.base + 1,
            scenario="chosen_title",
        )

    def _npv(self, index: int) -> float:
        """Of an option in the chosen scenario; the baseline's is 0."""
        return 0.0 if index == self.base else self.table.told[index].npv

    def _best(self) -> Best:
        """The words in numbers of the run."""
        study, table, compared = self.study, self.table, self.study.comparison
        place = compared.best[study.reference]
        others = [i for i in range(len(self.options)) if i != place]
        second = max(others, key=self._npv) if others else None
        calmest = int(compared.largest_regret.argmin())
        paid = study.capital[place]
        behind_paid = paid if second is None else study.capital[second]
        return Best(
            name=self.options[place].name,
            npv=self._npv(place),
            capital=float(table.run.flows[place].capital),
            payback=table.back(place),
            discounted=table.back(place, discounted=True),
            worst=float(compared.worst[place]),
            is_baseline=place == self.base,
            scenario=table.run.prices.title,
            times=compared.best.count(place),
            scenarios=len(study.runs),
            regret=float(compared.largest_regret[place]),
            calmest=self.options[calmest].name,
            least_regret=float(compared.largest_regret[calmest]),
            second="" if second is None else self.options[second].name,
            behind=0.0 if second is None else self._npv(place) - self._npv(second),
            above=paid.high - paid.total,
            below=behind_paid.total - behind_paid.low,
        )
