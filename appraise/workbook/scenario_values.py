"""Lower part of the Scenarios sheet: loss by the tie-in and present value of every line, by scenario.

What an energy earns is linear in its price, so one sum of products a line gives the present value in any
scenario: price × energy × present value of 1 in that year.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from appraise.cash_flow import present_value
from appraise.workbook.cash_flow_calendar import TAX_LEFT
from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page, area, ref
from appraise.workbook.naming import input_name, name_of

if TYPE_CHECKING:
    from appraise.case.load import Case
    from appraise.study import Study

CO2 = "in_plant_boiler_co2_kg_per_MWh/1000"
PEAK_CO2 = "in_plant_peak_boiler_co2_kg_per_MWh/1000"

# Line, what it is called, its price, its energy, sign, and what stands between the two.
PRICED_LINES: tuple[tuple[str, str, str, str, str, str], ...] = (
    ("power", "power", "power", "weighted_power", "", ""),
    ("premium", "premium", "premium", "premium", "", ""),
    ("network_fee", "network fee", "fee", "power", "-", ""),
    ("fuel", "fuel", "fuel", "fuel", "-", ""),
    ("carbon", "carbon", "carbon", "fuel", "-", f"*{CO2}"),
    ("peak_fuel", "peak fuel", "peak_fuel", "peak_fuel", "-", ""),
    ("peak_carbon", "peak carbon", "carbon", "peak_fuel", "-", f"*{PEAK_CO2}"),
)
# The same for the tie-in: what is lost is positive; what peak boilers burn instead is lost too.
TIE_SIGNS = {
    "power": "",
    "premium": "",
    "network_fee": "-",
    "fuel": "-",
    "carbon": "-",
    "peak_fuel": "",
    "peak_carbon": "",
}


def tie_times(case: Case) -> str:
    """Expression of the multiplier of the tie-in, 0 where the case has none."""
    return "0" if case.capex.tie_in is None else input_name("capex.tie_in.multiplier")


class Values:
    """Writes both tables from a row on; `npv_cell` says where an option's net present value stands."""

    def __init__(self, study: Study, page: Page, top: int) -> None:
        self.study, self.case, self.page, self.top = study, study.case, page, top
        self.scenarios = list(study.case.scenarios)
        self.options = [i for i, option in enumerate(study.case.options) if not option.baseline]
        self.values_top = top + len(self.scenarios) + 5
        self.columns = len(PRICED_LINES) + 2  # and variable cost, tie-in

    def row(self, scenario: int, option: int) -> int:
        """Row of one option in one scenario."""
        return self.values_top + 2 + scenario * len(self.options) + self.options.index(option)

    @property
    def npv_column(self) -> int:
        """Column of the net present value: after the lines, their sum after tax and the rest."""
        return TOTAL + self.columns + 2

    def npv_cell(self, scenario: int, option: int) -> str:
        """Address of the net present value of one option in one scenario."""
        return ref(self.row(scenario, option), self.npv_column)

    def write(self) -> int:
        """Both tables; returns the first free row."""
        self._tie_in()
        self._values()
        return self.row(len(self.scenarios) - 1, self.options[-1]) + 2 if self.options else self.values_top

    # -- tie-in

    def _tie_in(self) -> None:
        """What the baseline would have earned in the dates of the tie-in, at prices of the first year."""
        page, currency, period = self.page, self.case.study.currency, self.case.capex.tie_in
        days = "no days given" if period is None else f"{period.from_} to {period.to}, both included"
        page.put(
            self.top,
            LABEL,
            f"Tie-in, {days}: lost by the baseline while it stands (+ is a loss); every other option pays "
            "it. Prices of the first year of operation, money of the price year",
            "section",
        )
        for col in range(UNIT, TOTAL + len(PRICED_LINES) + 1):
            page.put(self.top, col, None, "section")
        page.headings(self.top + 1, ["Scenario", "unit", *(line[1] for line in PRICED_LINES), "margin lost"])
        page.height(self.top + 1, 30)
        last = TOTAL + len(PRICED_LINES) - 1
        for number, scenario in enumerate(self.scenarios):
            row, expected = self.top + 2 + number, self._tie_values(number)
            page.put(row, LABEL, self.study.runs[number].prices.title, "label")
            page.put(row, UNIT, currency, "unit")
            for offset, (line, _, price, energy, _, factor) in enumerate(PRICED_LINES):
                formula = (
                    f"={TIE_SIGNS[line]}{name_of('tie', energy, scenario)}"
                    f"*INDEX({name_of('price', price, scenario)},1,spend_years+1){factor}"
                )
                page.formula(row, TOTAL + offset, formula, expected[line], "money")
            margin = float(sum(expected.values()))
            cells = area(row, TOTAL, row, last)
            page.formula(
                row, last + 1, f"=SUM({cells})", margin, "money bold", name_of("tie_in_loss", scenario)
            )
        self._chosen_loss(self.top + 2 + len(self.scenarios), last + 1)

    def _chosen_loss(self, row: int, col: int) -> None:
        """The chosen scenario's parts times the multiplier, by line, and their sum."""
        period, reference = self.case.capex.tie_in, self.study.reference
        factor = 0.0 if period is None else period.multiplier
        parts, first = self._tie_values(reference), self.top + 2
        self.page.put(row, LABEL, "Chosen scenario, times the multiplier of the tie-in", "label_total")
        self.page.put(row, UNIT, self.case.study.currency, "unit_total")
        for offset, (line, *_) in enumerate(PRICED_LINES):
            cells = ",".join(ref(first + i, TOTAL + offset) for i in range(len(self.scenarios)))
            formula = f"=CHOOSE(chosen_index,{cells})*{tie_times(self.case)}"
            self.page.formula(
                row, TOTAL + offset, formula, parts[line] * factor, "money total", name_of("chosen_tie", line)
            )
        total = f"=SUM({area(row, TOTAL, row, col - 1)})"
        loss = sum(parts.values()) * factor
        self.page.formula(row, col, total, loss, "money total", "chosen_tie_in_loss")

    def _tie_values(self, scenario: int) -> dict[str, float]:
        """Python's parts of the margin lost in one scenario, by line."""
        prices, lost = self.study.runs[scenario].prices, self.study.runs[scenario].traded[0].tie_in
        plant = self.case.plant.boiler.co2_kg_per_MWh / 1000.0
        peak = self.case.plant.peak_boiler.co2_kg_per_MWh / 1000.0
        carbon = float(prices.carbon[0])
        parts = {
            "power": lost.weighted_power_MWh * prices.power[0],
            "premium": lost.premium_MWh * prices.premium[0],
            "network_fee": -lost.power_MWh * prices.fee[0],
            "fuel": -lost.fuel_MWh * prices.fuel[0],
            "carbon": -lost.fuel_MWh * carbon * plant,
            "peak_fuel": lost.peak_fuel_MWh * prices.peak_fuel[0],
            "peak_carbon": lost.peak_fuel_MWh * carbon * peak,
        }
        return {line: float(value) for line, value in parts.items()}

    # -- present values

    def _values(self) -> None:
        page, row = self.page, self.values_top
        page.put(row, LABEL, "Present value of each line before tax, by scenario and option", "section")
        for col in range(UNIT, self.npv_column + 1):
            page.put(row, col, None, "section")
        titles = [line[1] for line in PRICED_LINES]
        heads = [
            *titles,
            "variable cost",
            "tie-in",
            "sum after tax",
            "capital, grant, fixed cost, residual, after tax",
            "net present value",
        ]
        page.headings(row + 1, ["Scenario: option", "unit", *heads])
        page.height(row + 1, 70)
        for scenario in range(len(self.scenarios)):
            for option in self.options:
                self._value_row(scenario, option)

    def _value_row(self, scenario: int, option: int) -> None:
        page, row, name = self.page, self.row(scenario, option), self.scenarios[scenario]
        key, flow = self.case.options[option].key, self.study.runs[scenario].flows[option]
        title = self.study.runs[scenario].prices.title
        page.put(row, LABEL, f"{title}: {self.case.options[option].name}", "label_wrap")
        page.put(row, UNIT, self.case.study.currency, "unit")

        def worth(line: str) -> float:
            return float(present_value(getattr(flow.lines, line), flow.discount_factor))

        for offset, (line, _, price, energy, sign, factor) in enumerate(PRICED_LINES):
            formula = (
                f"={sign}SUMPRODUCT({name_of('price', price, name)},{name_of('energy', energy, name, key)},"
                f"value_weight){factor}"
            )
            page.formula(row, TOTAL + offset, formula, worth(line), "money")
        col = TOTAL + len(PRICED_LINES)
        sold = name_of("energy", "power", name, key)
        formula = f"=-in_opex_variable_per_MWh*SUMPRODUCT({sold},cost_growth,value_weight)"
        page.formula(row, col, formula, worth("variable_om"), "money")
        formula = f"=-{name_of('tie_in_loss', name)}*{tie_times(self.case)}*tie_in_weight"
        page.formula(row, col + 1, formula, worth("tie_in"), "money")
        lines = (*(line[0] for line in PRICED_LINES), "variable_om", "tie_in")
        left = 1.0 - self.case.finance.tax_rate
        after = left * sum(worth(line) for line in lines)
        cells = area(row, TOTAL, row, col + 1)
        page.formula(row, col + 2, f"={TAX_LEFT}*SUM({cells})", after, "money")
        fixed = float(flow.npv) - after
        page.formula(row, col + 3, f"={name_of('fixed_value', key)}", fixed, "money")
        total = f"={ref(row, col + 2)}+{ref(row, col + 3)}"
        page.formula(row, col + 4, total, float(flow.npv), "money bold", name_of("npv", name, key))
