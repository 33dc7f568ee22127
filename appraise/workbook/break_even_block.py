"""One grid of the Break-even sheet: an option's net present value over power price and fuel price.

A net present value is linear in the level of a whole price path, so each cell of a grid is the value as it
stands plus what the power line and the fuel line gain by the other level.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from appraise.cash_flow import CashFlow
from appraise.grid import BreakEvenGrid
from appraise.measures import after_tax
from appraise.workbook.cash_flow_calendar import TAX_LEFT
from appraise.workbook.cash_flow_measures import NOTHING
from appraise.workbook.cells import LABEL, TOTAL, UNIT, YEAR_ZERO, Page, area, ref
from appraise.workbook.naming import name_of

if TYPE_CHECKING:
    from appraise.study import Study

STATED_POWER, STATED_FUEL, STATED_CARBON = (
    "stated_power_price",
    "stated_fuel_price",
    "stated_carbon_price",
)
LAST = YEAR_ZERO + 10
ROW_POINTS = 19.0  # of a grid: the one cell in large figures fits, and it is easy to read across


def section(page: Page, row: int, title: str) -> None:
    """A title with its rule over the width of the page."""
    page.put(row, LABEL, title, "section")
    for col in range(UNIT, LAST + 1):
        page.put(row, col, None, "section")


def worth_formula(line: str, option: str) -> str:
    """Present value of a line of the cash flow after tax."""
    return f"={TAX_LEFT}*SUMPRODUCT({name_of('line', line, option)},discount_factor)"


class Block:
    """The grid of one option: power prices go down, fuel prices go across."""

    def __init__(self, study: Study, page: Page, grid: BreakEvenGrid, flow: CashFlow, top: int) -> None:
        self.page, self.grid, self.flow, self.top = page, grid, flow, top
        self.currency = study.case.study.currency
        place = [option.key for option in study.case.options].index(grid.option)
        self.name = study.case.options[place].name
        self.run = study.measures[study.reference][place]
        self.npv = name_of("npv", grid.option)
        self.power, self.fuel = (after_tax(flow, line) for line in (flow.lines.power, flow.lines.fuel))
        self.power_cell, self.fuel_cell = ref(top + 3, TOTAL, True), ref(top + 4, TOTAL, True)
        self.scale_row, self.price_row = top + 5, top + 6
        self.first = top + 7
        self.last = self.first + len(grid.factors) - 1
        self.last_col = YEAR_ZERO + len(grid.factors) - 1
        self.even_row = self.last + 2  # an empty row between: it would look like a neighbour

    @property
    def fuel_prices(self) -> str:
        """Cells of the fuel prices."""
        return area(self.price_row, YEAR_ZERO, self.price_row, self.last_col)

    @property
    def even_prices(self) -> str:
        """Cells of the break-even power price at each of them."""
        return area(self.even_row, YEAR_ZERO, self.even_row, self.last_col)

    def write(self) -> None:
        """Title, sentence, worth of the two lines, grid, line of zero."""
        section(self.page, self.top, f"{self.name}: net present value over power price and fuel price")
        self._sentence()
        self._worth()
        self._heads()
        self._cells()
        self._marks()
        self._zero_line()

    def _sentence(self) -> None:
        """Whether it pays as stated, and how far the power price is from where that turns."""
        even, unit = name_of("even_power", self.grid.option), f" {self.currency}/MWh in the first year, "
        formula = (
            f'=IF({self.npv}>0,"Pays as stated","Does not pay as stated")&IF(ISNUMBER({even}),'
            f'"; the net present value is zero at a power price of "&FIXED({even},2)&"{unit}"'
            f'&FIXED(ABS({even}/{STATED_POWER}-1)*100,0)&" % "'
            f'&IF({even}<{STATED_POWER},"below","above")&" the price as stated.",'
            f'"; the power price does not decide.")'
        )
        value, price = self.run.break_even_power_price, float(self.flow.prices.power[0])
        words = "Pays as stated" if self.run.npv > 0 else "Does not pay as stated"
        if value is None:
            words += "; the power price does not decide."
        else:
            side = "below" if value < price else "above"
            words += (
                f"; the net present value is zero at a power price of {value:,.2f}{unit}"
                f"{abs(value / price - 1) * 100:,.0f} % {side} the price as stated."
            )
        self.page.formula(self.top + 1, LABEL, formula, words, "text bold")

    def _worth(self) -> None:
        """Present values that the grid is made of."""
        page, option = self.page, self.grid.option
        rows = (
            ("Net present value as stated", f"={self.npv}", self.run.npv),
            ("Extra power, worth after tax", worth_formula("power", option), self.power),
            ("Extra fuel, worth after tax", worth_formula("fuel", option), self.fuel),
        )
        for row, (label, formula, value) in enumerate(rows, self.top + 2):
            page.put(row, LABEL, label, "label")
            page.put(row, UNIT, f"thousand {self.currency}", "unit")
            page.formula(row, TOTAL, formula, value, "thousand")

    def _heads(self) -> None:
        """Scales and first-year prices of both paths; those as stated are marked."""
        page, unit = self.page, f"{self.currency}/MWh"
        page.put(self.scale_row, LABEL, "Fuel price across: path scaled to", "heading_left")
        page.put(self.price_row, LABEL, f"  in the first year, {unit}", "heading_left")
        page.headings(self.scale_row, ["power price:", ""], first=UNIT)
        page.headings(self.price_row, ["scaled to", unit], first=UNIT)
        for offset, factor in enumerate(self.grid.factors):
            row, col = self.first + offset, YEAR_ZERO + offset
            page.put(self.scale_row, col, factor, "percent0 heading")
            fuel = f"={STATED_FUEL}*{ref(self.scale_row, col)}"
            page.formula(self.price_row, col, fuel, float(self.grid.fuel_price[offset]), "number2 heading")
            page.height(row, ROW_POINTS)
            page.put(row, UNIT, factor, "percent0 heading")
            power = f"={STATED_POWER}*{ref(row, UNIT)}"
            page.formula(row, TOTAL, power, float(self.grid.power_price[offset]), "number2 heading")
            if factor == 1.0:
                page.put(row, LABEL, "power price as stated ►", "text_right bold")
                page.put(self.last + 1, col, "▲ as stated", "text_right bold")
        page.put(self.first, LABEL, "Power price down", "label")

    def _cells(self) -> None:
        """The grid."""
        for down, power_factor in enumerate(self.grid.factors):
            for across, fuel_factor in enumerate(self.grid.factors):
                row, col = self.first + down, YEAR_ZERO + across
                self.page.formula(
                    row,
                    col,
                    f"={self.npv}+({ref(row, UNIT, 'column')}-1)*{self.power_cell}"
                    f"+({ref(self.scale_row, col, 'row')}-1)*{self.fuel_cell}",
                    float(self.grid.npv[across, down]),
                    "thousand key" if power_factor == fuel_factor == 1.0 else "thousand",
                )

    def _marks(self) -> None:
        """Fill what pays beside what does not; prices in the heads are no such neighbours."""
        cells = area(self.first, YEAR_ZERO, self.last, self.last_col)
        here = ref(self.first, YEAR_ZERO)
        tests = []
        for row, col, inside in (
            (self.first - 1, YEAR_ZERO, f"ROW({here})>{self.first}"),
            (self.first + 1, YEAR_ZERO, f"ROW({here})<{self.last}"),
            (self.first, YEAR_ZERO - 1, f"COLUMN({here})>{YEAR_ZERO}"),
            (self.first, YEAR_ZERO + 1, f"COLUMN({here})<{self.last_col}"),
        ):
            tests.append(f"AND({inside},{ref(row, col)}<0)")
        self.page.highlight(cells, f"=AND({here}>=0,OR({','.join(tests)}))", "ok")
        self.page.highlight(cells, f"={here}<0", "negative")

    def _zero_line(self) -> None:
        """At each fuel price the power price with a net present value of zero."""
        page = self.page
        page.put(self.even_row, LABEL, "Zero at a power price of", "label_total")
        page.put(self.even_row, UNIT, f"{self.currency}/MWh", "unit_total")
        page.put(self.even_row, TOTAL, None, "unit_total")
        for offset, price in enumerate(self._even()):
            col = YEAR_ZERO + offset
            page.formula(
                self.even_row,
                col,
                f'=IF({self.power_cell}=0,"{NOTHING}",{STATED_POWER}*(1-({self.npv}'
                f"+({ref(self.scale_row, col)}-1)*{self.fuel_cell})/{self.power_cell}))",
                NOTHING if price is None else price,
                "number2 total",
            )

    def _even(self) -> list[float | None]:
        factors = np.array(self.grid.factors)
        if self.power == 0.0:
            return [None] * factors.size
        npv = self.run.npv + (factors - 1.0) * self.fuel
        return [float(v) for v in float(self.flow.prices.power[0]) * (1.0 - npv / self.power)]
