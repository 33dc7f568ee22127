"""The Decision sheet: question, recommendation, reason, the options side by side, on one printed page."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

from appraise.measures import payback
from appraise.workbook.cash_flow_measures import NOTHING, payback_words
from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page, Sheet, area, ref
from appraise.workbook.decision_charts import CHART_ROWS, LAST_WIDTH, OPTION_WIDTH, decision_charts
from appraise.workbook.decision_words import (
    BASIS_FORMULA,
    Best,
    Cells,
    basis,
    leaning,
    origin,
    question,
    reason,
    reason_formula,
    verdict,
    verdict_formula,
)
from appraise.workbook.naming import CHOSEN_SCENARIO, Timeline, name_of

if TYPE_CHECKING:
    from appraise.study import Study

TITLE = "Decision"
CHOSEN_ROW, VERDICT_ROW, TABLE_TOP = 6, 9, 13
PER_MILLE = 1e3  # MWh per MWh is shown as kWh per MWh
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
        self.others = [i for i in range(len(self.options)) if i != self.base]
        self.last = TOTAL + len(self.options) - 1
        self.run, self.told = study.runs[study.reference], study.measures[study.reference]
        self.figures = study.year_figures[study.reference]
        self.row, self.best_row = TABLE_TOP, 0
        self.rows: dict[str, int] = {}

    def sheet(self) -> Sheet:
        """Put everything on the page. The words come last: they need the places of the table."""
        page = self.page
        page.width([46, 12] + [OPTION_WIDTH] * max(len(self.options), 3) + [LAST_WIDTH])
        page.head(self.case.study.title)
        page.put(3, LABEL, origin(self.study), "note")
        page.height(3, 20)
        self._question()
        self._options_table()
        self._break_evens()
        self._status()
        self._charts()
        page.paragraph(self.row, LABEL, self._wide(), CAUTION, "note_wrap")
        self.best_row = self.row + 2
        self._words()
        page.printed(landscape=False, pages_tall=1, area=area(1, LABEL, self.row, self._wide()))
        return page.finish()

    def _wide(self) -> int:
        """Last column that texts and charts may use."""
        return max(self.last, TOTAL + 2) + 1

    def _cells(self, row: int) -> str:
        return area(row, TOTAL, row, self.last, absolute=True)

    def _question(self) -> None:
        page, about = self.page, self.case.study
        text = question(self.options[self.base].name, len(self.others), about.years, about.first_year)
        page.paragraph(4, LABEL, self._wide(), text)
        page.put(CHOSEN_ROW, LABEL, "Price scenario: choose one, the money follows", "label")
        page.put(CHOSEN_ROW, TOTAL, about.reference_scenario, "text input", name=CHOSEN_SCENARIO)
        page.validate_list(CHOSEN_ROW, TOTAL, "=scenario_names")
        page.formula(
            CHOSEN_ROW,
            TOTAL + 1,
            "=INDEX(scenario_titles,chosen_index,1)",
            self.run.prices.title,
            "label_indent",
            "chosen_title",
        )

    # -- the options side by side

    def _heading(self, title: str, more: str = "") -> None:
        page = self.page
        page.put(self.row, LABEL, title, "heading_left")
        page.put(self.row, UNIT, "unit", "heading")
        page.headings(self.row, [option.name for option in self.options], first=TOTAL)
        if more:
            page.put(self.row, self.last + 1, more, "heading")
        page.height(self.row, 42)
        self.row += 1

    def _as_run(self, label: str, unit: str, kind: str, values: Sequence[float | None]) -> None:
        page = self.page
        page.put(self.row, LABEL, label, "label")
        page.put(self.row, UNIT, unit, "unit")
        for index, value in enumerate(values):
            if value is None:
                page.put(self.row, TOTAL + index, "–", "text_right as run")
            else:
                page.put(self.row, TOTAL + index, value, f"{kind} as run")
        self.row += 1

    def _live(
        self,
        name: str,
        label: str,
        unit: str,
        style: str,
        expect: Callable[[int], float | str],
        baseline: float | str,
    ) -> None:
        """A row of the option's own named cells; `baseline` is what stands for the baseline."""
        page = self.page
        page.put(self.row, LABEL, label, "label")
        page.put(self.row, UNIT, unit, "unit")
        for index, option in enumerate(self.options):
            if index == self.base:
                page.put(
                    self.row, TOTAL + index, baseline, "text_right" if isinstance(baseline, str) else style
                )
            else:
                page.formula(self.row, TOTAL + index, f"={name_of(name, option.key)}", expect(index), style)
        self.rows[name] = self.row
        self.row += 1

    def _options_table(self) -> None:
        figures, told, money = self.figures, self.told, self.currency
        base_co2 = figures[self.base].co2_t
        self._heading("Options against the plant as it is")
        self._as_run("Extra power, first year", "MWh", "integer", [f.extra_power_MWh for f in figures])
        points = [PER_MILLE * balance.extra_power_per_heat for balance in self.study.balances]
        self._as_run("Extra power per heat, design point", "kWh/MWh", "number1", points)
        ratios = [f.extra_power_per_heat for f in figures]
        ratios = [None if ratio is None else PER_MILLE * ratio for ratio in ratios]
        self._as_run("Extra power per heat, year", "kWh/MWh", "number1", ratios)
        self._as_run(
            "Extra power per extra fuel", "MWh/MWh", "number2", [f.incremental_efficiency for f in figures]
        )
        self._as_run(
            "Price the extra power captures", f"{money}/MWh", "number1", [f.capture_price for f in figures]
        )
        self._as_run("  of the year's mean price", "%", "percent0", [f.capture_ratio for f in figures])
        self._as_run("Change of CO₂ from the stacks", "t/a", "integer", [f.co2_t - base_co2 for f in figures])
        flows, spend = self.run.flows, Timeline.of(self.case).spend
        self._live("extra_capital", "Capital", money, "money", lambda i: float(flows[i].capital), 0)
        self._live(
            "first_gain",
            "Gain of the first year, before tax",
            money,
            "money",
            lambda i: figures[i].first_year_gain,
            0,
        )
        self._live("npv", "Net present value", money, "money key", lambda i: told[i].npv, 0)
        self._live(
            "irr", "Internal rate of return", "per year", "percent1", lambda i: _or(told[i].irr, NOTHING), "–"
        )

        def years(index: int) -> float | str:
            back = payback(flows[index].net, spend)
            return payback_words(back.note) if back.years is None else back.years

        self._live("payback", "Payback, counted from the start of operation", "years", "number1", years, "–")
        compared = self.study.comparison
        self._live(
            "worst",
            "Net present value in the worst scenario",
            money,
            "money",
            lambda i: float(compared.worst[i]),
            0,
        )
        self._live(
            "largest_regret",
            "Largest regret: cost against a scenario's best",
            money,
            "money",
            lambda i: float(compared.largest_regret[i]),
            float(compared.largest_regret[self.base]),
        )
        self.page.highlight(self._cells(self.rows["npv"]), f"={ref(self.rows['npv'], TOTAL)}<0", "negative")
        self.page.highlight(
            self._cells(self.rows["worst"]), f"={ref(self.rows['worst'], TOTAL)}<0", "negative"
        )
        self._basis()

    def _basis(self) -> None:
        """What the money above rests on, live."""
        self.page.formula(self.row, LABEL, BASIS_FORMULA, basis(self.study), "note")
        self.row += 1

    def _break_evens(self) -> None:
        """Where the net present value of each option becomes zero, beside what is planned."""
        self.row += 1
        self._heading("What could change the answer: values at which nothing is gained", "as planned")
        told, prices, money = self.told, self.run.prices, self.currency
        for kind, label, unit, planned, value in (
            (
                "power",
                "Power price, first year, whole path scaled",
                "MWh",
                prices.power,
                "break_even_power_price",
            ),
            (
                "fuel",
                "Fuel price, first year, whole path scaled",
                "MWh",
                prices.fuel,
                "break_even_fuel_price",
            ),
            (
                "carbon",
                "Carbon price, first year, whole path scaled",
                "t",
                prices.carbon,
                "break_even_carbon_price",
            ),
        ):
            self._live(
                f"even_{kind}",
                label,
                f"{money}/{unit}",
                "number1",
                lambda i, value=value: _or(getattr(told[i], value), NOTHING),  # type: ignore[misc]
                "–",
            )
            formula = f"=INDEX(chosen__{kind},1,spend_years+1)"
            self.page.formula(self.row - 1, self.last + 1, formula, float(planned[0]), "number1")
        self._live(
            "largest_capital", "Capital", money, "money", lambda i: _or(told[i].largest_capex, NOTHING), "–"
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
        page, compared = self.page, self.study.comparison
        reference = self.study.reference
        place, npv = compared.best[reference], self._cells(self.rows["npv"])
        page.put(VERDICT_ROW - 1, LABEL, "Recommendation", "section")
        for col in range(UNIT, self._wide() + 1):
            page.put(VERDICT_ROW - 1, col, None, "section")
        words = "Helper, not printed: column of the best option in the chosen scenario"
        page.put(self.best_row, LABEL, words, "note")
        page.formula(
            self.best_row, TOTAL, f"=MATCH(MAX({npv}),{npv},0)", place + 1, "integer", name="live_best"
        )
        cells = Cells(
            names=self._cells(TABLE_TOP),
            npv=npv,
            capital=self._cells(self.rows["extra_capital"]),
            payback=self._cells(self.rows["payback"]),
            worst=self._cells(self.rows["worst"]),
            best="live_best",
            baseline=self.base + 1,
            scenario="chosen_title",
        )
        told = self.told[place]
        best = Best(
            name=self.options[place].name,
            npv=told.npv,
            capital=float(self.run.flows[place].capital),
            payback=told.simple_payback_years,
            worst=float(compared.worst[place]),
            is_baseline=place == self.base,
            scenario=self.run.prices.title,
        )
        texts = (
            (verdict_formula(cells, self.currency), verdict(best, self.currency), "verdict", 40.0),
            (reason_formula(cells, self.currency), reason(best, self.currency), "text_wrap bold", 30.0),
        )
        for offset, (formula, expect, style, points) in enumerate(texts):
            page.formula(VERDICT_ROW + offset, LABEL, formula, expect, style)
            page.merge(VERDICT_ROW + offset, LABEL, VERDICT_ROW + offset, self._wide())
            page.height(VERDICT_ROW + offset, points)
        page.paragraph(VERDICT_ROW + 2, LABEL, self._wide(), leaning(self.study), least_lines=2)


def _or(value: float | None, word: str) -> float | str:
    return word if value is None else value
