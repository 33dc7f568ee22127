"""The two tables of the Decision sheet: options side by side, and the values at which nothing is gained."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

from appraise.emissions import carbon_change
from appraise.measures import payback
from appraise.workbook.cash_flow_measures import NOTHING, payback_words
from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page, area, ref
from appraise.workbook.decision_words import BASIS_FORMULA, basis
from appraise.workbook.naming import Timeline, name_of
from appraise.workbook.values import quoted_text

if TYPE_CHECKING:
    from appraise.study import Study

PER_MILLE = 1e3  # MWh per MWh is shown as kWh per MWh
FAR = 10  # times the planned price: beyond it a break-even price tells only that the price does not matter
BEYOND = f"over {FAR} × planned"


class Table:
    """Writes both tables; `row` is the next free one, `rows` where the rows of named cells stand."""

    def __init__(self, study: Study, page: Page, row: int) -> None:
        self.study, self.case, self.page, self.row = study, study.case, page, row
        self.currency, self.options = study.case.study.currency, study.case.options
        self.base = next(i for i, option in enumerate(self.options) if option.baseline)
        self.last = TOTAL + len(self.options) - 1
        self.run, self.told = study.runs[study.reference], study.measures[study.reference]
        self.figures = study.year_figures[study.reference]
        self.rows: dict[str, int] = {}

    def cells(self, name: str) -> str:
        """Cells of a row over all options."""
        return self.row_cells(self.rows[name])

    def row_cells(self, row: int) -> str:
        """Cells of a row over all options, by its number."""
        return area(row, TOTAL, row, self.last, absolute=True)

    def back(self, index: int, discounted: bool = False) -> float | str:
        """Years of operation until an option has paid its capital back, or why there are none."""
        flow = self.run.flows[index]
        back = payback(flow.discounted if discounted else flow.net, Timeline.of(self.case).spend)
        return payback_words(back.note) if back.years is None else back.years

    def options_table(self) -> None:
        """What each option does and what it is worth."""
        self._heading("Options against the plant as it stands")
        self._energies()
        self._carbon()
        self._money()
        self._paybacks()
        self._scenarios()
        for name in ("npv", "worst"):
            self.page.highlight(self.cells(name), f"={ref(self.rows[name], TOTAL)}<0", "negative")
        boiler = self.case.plant.boiler
        zero = "" if boiler.co2_kg_per_MWh else f" CO₂ of {boiler.fuel or 'the plant’s fuel'} counts as zero."
        formula = f"{BASIS_FORMULA}&{quoted_text(zero)}"
        self.page.formula(self.row, LABEL, formula, basis(self.study) + zero, "note")
        self.row += 1

    # -- rows

    def _heading(self, title: str, more: str = "") -> None:
        page = self.page
        page.put(self.row, LABEL, title, "heading_left")
        page.put(self.row, UNIT, "unit", "heading")
        page.headings(self.row, [option.name for option in self.options], first=TOTAL)
        if more:
            page.put(self.row, self.last + 1, more, "heading")
        page.height(self.row, 42)
        self.row += 1

    def _head(self, label: str, unit: str) -> None:
        self.page.put(self.row, LABEL, label, "label")
        self.page.put(self.row, UNIT, unit, "unit")

    def _as_run(self, label: str, unit: str, kind: str, values: Sequence[float | None]) -> None:
        self._head(label, unit)
        for index, value in enumerate(values):
            if value is None:
                self.page.put(self.row, TOTAL + index, "–", "text_right as run")
            else:
                self.page.put(self.row, TOTAL + index, value, f"{kind} as run")
        self.row += 1

    def _live(
        self,
        name: str,
        label: str,
        unit: str,
        style: str,
        expect: Callable[[int], float | str],
        baseline: float | str | None,
    ) -> None:
        """A row of the options' own named cells; `baseline` stands for one it has not, else None."""
        self._head(label, unit)
        for index, option in enumerate(self.options):
            col = TOTAL + index
            if index == self.base and baseline is not None:
                kind = "text_right" if isinstance(baseline, str) else style
                self.page.put(self.row, col, baseline, kind)
            else:
                self.page.formula(self.row, col, f"={name_of(name, option.key)}", expect(index), style)
        self.rows[name] = self.row
        self.row += 1

    # -- what stands in them

    def _energies(self) -> None:
        figures, money = self.figures, self.currency
        self._as_run("Extra power, first year", "MWh", "integer", [f.extra_power_MWh for f in figures])
        points = [PER_MILLE * balance.extra_power_per_heat for balance in self.study.balances]
        self._as_run("Extra power per heat, design point", "kWh/MWh", "number1", points)
        ratios = [f.extra_power_per_heat for f in figures]
        ratios = [None if ratio is None else PER_MILLE * ratio for ratio in ratios]
        self._as_run("Extra power per heat, year", "kWh/MWh", "number1", ratios)
        efficiencies = [f.incremental_efficiency for f in figures]
        self._as_run("Extra power per extra fuel", "MWh/MWh", "number2", efficiencies)
        captured = [f.capture_price for f in figures]
        self._as_run("Price the extra power captures", f"{money}/MWh", "number1", captured)
        self._as_run("  of the year's mean price", "%", "percent0", [f.capture_ratio for f in figures])

    def _carbon(self) -> None:
        """CO₂ from the stacks, and with the grid power that the extra power displaces, side by side."""
        figures, base = self.figures, self.figures[self.base]
        self._as_run(
            "Change of CO₂ from the stacks", "t/a", "integer", [f.co2_t - base.co2_t for f in figures]
        )
        changes = [
            carbon_change(self.case, f.extra_power_MWh, f.extra_fuel_MWh, f.extra_peak_fuel_MWh)
            for f in figures
        ]
        label = f"  less grid power displaced, {self.case.emissions.grid_kg_per_MWh:,.10g} kg/MWh"
        self._as_run(label, "t/a", "integer", [float(change.with_displaced) for change in changes])

    def _money(self) -> None:
        told, money, flows = self.told, self.currency, self.run.flows
        self._live("extra_capital", "Capital", money, "money", lambda i: float(flows[i].capital), 0)
        gains = [f.first_year_gain for f in self.figures]
        self._live("first_gain", "Gain of the first year, before tax", money, "money", lambda i: gains[i], 0)
        self._live("npv", "Net present value", money, "money key", lambda i: told[i].npv, 0)
        rate = "Internal rate of return"
        self._live("irr", rate, "per year", "percent1", lambda i: _or(told[i].irr, NOTHING), "–")

    def _paybacks(self) -> None:
        label = "Payback, from the start of operation"
        self._live("payback", label, "years", "number1", self.back, "–")
        self._live(
            "discounted_payback",
            "  discounted",
            "years",
            "number1",
            lambda i: self.back(i, discounted=True),
            "–",
        )

    def _scenarios(self) -> None:
        compared, money = self.study.comparison, self.currency
        self._live(
            "times_best",
            "Scenarios in which it is best",
            f"of {len(self.case.scenarios)}",
            "integer",
            lambda i: compared.best.count(i),
            None,
        )
        label = "Net present value in the worst scenario"
        self._live("worst", label, money, "money", lambda i: float(compared.worst[i]), 0)
        label = "Largest regret: cost against a scenario's best"
        regrets = compared.largest_regret
        self._live("largest_regret", label, money, "money", lambda i: float(regrets[i]), None)

    # -- break-even values

    def break_evens(self) -> None:
        """Where the net present value of each option becomes zero, beside what is planned."""
        self.row += 1
        self._heading("Break-even values (net present value zero)", "as planned")
        told, prices = self.told, self.run.prices
        for kind, label, unit, style, values in (
            ("power", "Power price", "MWh", "number1", [one.break_even_power_price for one in told]),
            ("fuel", "Fuel price", "MWh", "number1", [one.break_even_fuel_price for one in told]),
            ("carbon", "Carbon price", "t", "integer", [one.break_even_carbon_price for one in told]),
        ):
            planned = float(getattr(prices, kind)[0])
            self._price(kind, label, f"{self.currency}/{unit}", style, values, planned)
        capitals = [_or(one.largest_capex, NOTHING) for one in told]
        self._live("largest_capital", "Capital", self.currency, "money", lambda i: capitals[i], "–")
        self.page.put(self.row - 1, self.last + 1, "Capital above", "text_right")

    def _price(
        self, kind: str, label: str, unit: str, style: str, values: Sequence[float | None], planned: float
    ) -> None:
        """One price that makes each option worth nothing; far beyond what is planned, a word."""
        page, row, at = self.page, self.row, ref(self.row, self.last + 1, True)
        self._head(f"{label}, first year, whole path scaled", unit)
        for index, (option, value) in enumerate(zip(self.options, values, strict=True)):
            col = TOTAL + index
            if index == self.base:
                page.put(row, col, "–", "text_right")
                continue
            cell = name_of(f"even_{kind}", option.key)
            far = value is not None and value > FAR * planned > 0.0
            formula = f'=IF(ISNUMBER({cell}),IF(AND({at}>0,{cell}>{FAR}*{at}),"{BEYOND}",{cell}),{cell})'
            page.formula(row, col, formula, BEYOND if far else _or(value, NOTHING), style)
        page.formula(row, self.last + 1, f"=INDEX(chosen__{kind},1,spend_years+1)", planned, style)
        self.row += 1


def _or(value: float | None, word: str) -> float | str:
    return word if value is None else value
