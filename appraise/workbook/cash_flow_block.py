"""One option's block on the Cash flow sheet: energies, the named lines, net flow, depreciation, tax."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

import numpy as np

from appraise.cash_flow import LINE_NAMES, present_value
from appraise.numerics import Array
from appraise.workbook.calendar_rows import ROWS, put_calendar
from appraise.workbook.cash_flow_calendar import TAX_LEFT
from appraise.workbook.cells import LABEL, TOTAL, Page, column, sheet_prefix, year_column
from appraise.workbook.naming import Timeline, name_of
from appraise.workbook.price_rows import TITLE as PRICES
from appraise.workbook.price_rows import chosen_row

if TYPE_CHECKING:
    from appraise.study import Study

ENERGIES = ("power", "weighted_power", "premium", "fuel", "peak_fuel")
ENERGY_LABELS = (
    "Extra power",
    "Extra power, weighted by price over mean",
    "Extra power that earns the premium",
    "Extra fuel",
    "Extra fuel of the peak boilers",
)
LINE_LABELS = (
    "Capital",
    "Grant",
    "Tie-in: margin lost while it stands",
    "Power",
    "Premium",
    "Fuel",
    "Carbon",
    "Fuel of the peak boilers",
    "Carbon of the peak boilers",
    "Fixed running cost and overhauls",
    "Variable running cost",
    "Network fee",
    "Residual",
    "Tax",
)


HEIGHT = 2 + len(ENERGIES) + len(LINE_NAMES) + 8 + 1  # rows of a block, the free one below it included
MARKS = 5  # helper rows of an option


class Block:
    """Rows of one option from `top` on, `HEIGHT` of them; its helper rows begin in row `marks`."""

    def __init__(self, study: Study, page: Page, option: int, top: int, marks: int) -> None:
        self.study, self.page, self.option, self.top = study, page, option, top
        self.case, self.time = study.case, Timeline.of(study.case)
        self.unit = f"thousand {study.case.study.currency}"
        self.key, self.name = study.case.options[option].key, study.case.options[option].name
        self.flow = study.runs[study.reference].flows[option]
        self.energy_row = top + 2
        self.line_row = self.energy_row + len(ENERGIES)
        after = self.line_row + len(LINE_NAMES)
        self.net, self.cumulative, self.discounted, self.cumulative_discounted = range(after, after + 4)
        self.book, self.depreciation, self.taxable, self.fixed_value = range(after + 4, after + 8)
        self.marks = marks
        self.sign, self.changes, self.simple, self.discount_payback = range(marks + 1, marks + 5)
        self.years = [column(year_column(t)) for t in range(self.time.number)]

    def line(self, name: str) -> int:
        """Row of a named line."""
        return self.line_row + LINE_NAMES.index(name)

    def energy(self, name: str) -> int:
        """Row of an energy."""
        return self.energy_row + ENERGIES.index(name)

    def rounding(self, flow_row: int) -> str:
        """What a running sum must differ from zero by."""
        cells = self.time.row(flow_row, absolute=True)
        return f"rounding_share*SUMPRODUCT(ABS({cells}))"

    def write(self) -> None:
        """The rows down to the taxable income."""
        self._heading()
        self._energies()
        self._lines()
        self._sums()
        self._taxed()

    def row(
        self,
        row: int,
        label: str,
        unit: str,
        text: Callable[[str], str],
        expect: Sequence[object] | Array,
        *,
        style: str = "thousand",
        name: str = "",
        total: str = "",
        total_expect: object = 0.0,
        label_style: str = "label",
    ) -> None:
        """A row over t with one formula, and what stands in the column of totals."""
        self.page.row_of_formulas(
            row, label, unit, text, list(expect), style, name=name, label_style=label_style
        )
        if total:
            self.page.formula(row, TOTAL, total, total_expect, style)

    def _heading(self) -> None:
        page, top = self.page, self.top
        page.put(top, LABEL, f"{self.name} against the baseline, chosen scenario", "section")
        put_calendar(
            page,
            top + 1,
            "Money in +, money out −; in thousands",
            lambda c: f"={c}${ROWS.calendar_year}",
            self.time.calendar,
            "present value (MWh: sum)",
        )
        page.height(top + 1, 28)

    def _energies(self) -> None:
        increment = self.flow.increment
        for kind, label in zip(ENERGIES, ENERGY_LABELS, strict=True):
            row = self.energy(kind)
            cells = ",".join(name_of("energy", kind, name, self.key) for name in self.case.scenarios)
            values = np.asarray(self.time.operating(getattr(increment, f"{kind}_MWh").tolist()))
            self.row(
                row,
                label,
                "MWh",
                lambda c, cells=cells: f"=INDEX(CHOOSE(chosen_index,{cells}),1,{c}${ROWS.t_index}+1)",  # type: ignore[misc]
                values,
                style="integer",
                name=name_of("chosen_energy", kind, self.key),
                total=f"=SUMPRODUCT({self.time.row(row)},operating)",
                total_expect=float(values.sum()),
                label_style="label_indent",
            )

    def _price(self, kind: str, c: str) -> str:
        return f"{sheet_prefix(PRICES)}{c}${chosen_row(kind)}"

    def _line_formula(self, name: str, c: str) -> str:
        """A line in the column `c`, in money of the basis."""
        factor = f"{c}${ROWS.basis_factor}"
        running = f"{c}${ROWS.operating}*{factor}"
        energy = {kind: f"{c}{self.energy(kind)}" for kind in ENERGIES}
        capital = name_of("capital_increment", self.key)
        t, k = f"{c}${ROWS.t_index}", f"{c}${ROWS.operating_year}"
        growth = f"{c}${ROWS.cost_growth}"
        co2, peak_co2 = "in_plant_boiler_co2_kg_per_MWh/1000", "in_plant_peak_boiler_co2_kg_per_MWh/1000"
        return {
            "capital": f"=-{capital}*{c}${ROWS.spend_share}*{factor}",
            "grant": f"=IF({capital}<>0,in_finance_grant,0)*{c}${ROWS.spend_share}*{factor}",
            "tie_in": f"=-IF({t}=spend_years-1,chosen_tie_in_loss,0)*{factor}",
            "power": f"={self._price('power', c)}*{energy['weighted_power']}*{running}",
            "premium": f"={self._price('premium', c)}*{energy['premium']}*{running}",
            "fuel": f"=-{self._price('fuel', c)}*{energy['fuel']}*{running}",
            "carbon": f"=-{self._price('carbon', c)}*{energy['fuel']}*{co2}*{running}",
            "peak_fuel": f"=-{self._price('peak_fuel', c)}*{energy['peak_fuel']}*{running}",
            "peak_carbon": f"=-{self._price('carbon', c)}*{energy['peak_fuel']}*{peak_co2}*{running}",
            "fixed_om": (
                f"=-(in_opex_fixed_share_of_capex*{capital}+in_opex_fixed_per_year+{c}${ROWS.overhauls})"
                f"*{growth}*{factor}"
            ),
            "variable_om": f"=-in_opex_variable_per_MWh*{growth}*{energy['power']}*{factor}",
            "network_fee": f"=-{self._price('fee', c)}*{energy['power']}*{running}",
            "residual": f"=IF({k}=years_counted,in_finance_residual_share*{capital},0)*{factor}",
            "tax": f"=-in_finance_tax_rate*{c}{self.taxable}*{c}${ROWS.deflator}",
        }[name]

    def _lines(self) -> None:
        flow = self.flow
        for name, label in zip(LINE_NAMES, LINE_LABELS, strict=True):
            row, values = self.line(name), getattr(flow.lines, name)
            self.row(
                row,
                label,
                self.unit,
                lambda c, name=name: self._line_formula(name, c),  # type: ignore[misc]
                values,
                name=name_of("line", name, self.key),
                total=self._present(row),
                total_expect=float(present_value(values, flow.discount_factor)),
            )

    def _present(self, row: int) -> str:
        return f"=SUMPRODUCT({self.time.row(row)},discount_factor)"

    def _sums(self) -> None:
        flow, first = self.flow, self.line_row
        last = self.line("tax")
        self.row(
            self.net,
            "Net flow",
            self.unit,
            lambda c: f"=SUM({c}{first}:{c}{last})",
            flow.net,
            style="thousand total",
            name=name_of("net", self.key),
            total=self._present(self.net),
            total_expect=float(flow.npv),
            label_style="label_total",
        )
        running = (
            (self.cumulative, self.net, "Net flow, running sum", flow.cumulative, "cumulative"),
            (
                self.cumulative_discounted,
                self.discounted,
                "Discounted net flow, running sum",
                flow.cumulative_discounted,
                "cumulative_discounted",
            ),
        )
        for row, source, label, values, name in running:
            self.row(
                row,
                label,
                self.unit,
                lambda c, source=source: f"=SUM(${self.years[0]}{source}:{c}{source})",  # type: ignore[misc]
                values,
                name=name_of(name, self.key),
            )
        self.row(
            self.discounted,
            "Net flow, discounted",
            self.unit,
            lambda c: f"={c}{self.net}*{c}${ROWS.discount_factor}",
            flow.discounted,
            name=name_of("discounted", self.key),
            total=f"=SUM({self.time.row(self.discounted)})",
            total_expect=float(flow.npv),
        )

    def _taxed(self) -> None:
        """Depreciation and taxable income, money of the day; what prices do not touch."""
        flow, time, page = self.flow, self.time, self.page
        spent = -float(flow.day_lines.capital.sum())
        granted = float(flow.day_lines.grant.sum()) if self.case.finance.grant_reduces_depreciation else 0.0
        capital, grant = time.row(self.line("capital")), time.row(self.line("grant"))
        page.put(self.book, LABEL, "Book value depreciated, money of the day")
        page.put(self.book, TOTAL - 1, self.unit, "unit")
        page.formula(
            self.book,
            TOTAL,
            f"=-SUMPRODUCT(({capital}+{grant}*IF(in_finance_grant_reduces_depreciation,1,0))/deflator)",
            spent - granted,
            "thousand",
        )
        self.row(
            self.depreciation,
            "Depreciation, money of the day",
            self.unit,
            lambda c: f"=$C${self.book}*{c}${ROWS.depreciation_share}",
            flow.depreciation,
        )
        first, last = self.line("tie_in"), self.line("residual")
        self.row(
            self.taxable,
            "Taxable income, money of the day",
            self.unit,
            lambda c: f"=SUM({c}{first}:{c}{last})/{c}${ROWS.deflator}-{c}{self.depreciation}",
            flow.taxable,
            name=name_of("taxable", self.key),
        )
        page.put(self.fixed_value, LABEL, "Present value after tax, no price in it")
        page.put(self.fixed_value, TOTAL - 1, self.unit, "unit")
        page.formula(
            self.fixed_value,
            TOTAL,
            f"=C{self.line('capital')}+C{self.line('grant')}+{TAX_LEFT}*(C{self.line('fixed_om')}+C{self.line('residual')})"
            f"+in_finance_tax_rate*SUMPRODUCT({time.row(self.depreciation)},deflator,discount_factor)",
            self.price_independent(),
            "thousand",
            name=name_of("fixed_value", self.key),
        )

    def price_independent(self) -> float:
        """Present value after tax of capital, grant, fixed cost, residual and the relief by depreciation."""
        flow, tax = self.flow, self.case.finance.tax_rate
        lines, factor = flow.lines, flow.discount_factor
        taxed = (1.0 - tax) * (lines.fixed_om + lines.residual)
        relief = tax * flow.depreciation * flow.deflator
        return float(present_value(lines.capital + lines.grant + taxed + relief, factor))
