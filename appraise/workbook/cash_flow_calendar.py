"""Common part of the Cash flow sheet: when what happens, and what money is worth then."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

import numpy as np

from appraise.cash_flow import CashFlow
from appraise.measures import ROUNDING
from appraise.numerics import Array
from appraise.prices import compounded
from appraise.workbook.calendar_rows import CALENDAR_TOP, ROWS, put_calendar
from appraise.workbook.cells import LABEL, TOTAL, UNIT, YEAR_ZERO, Page
from appraise.workbook.naming import Timeline, input_name

if TYPE_CHECKING:
    from appraise.study import Study

TAX_LEFT = "(1-in_finance_tax_rate)"


class Calendar:
    """Writes the rows of the calendar and, below them, single figures with names of their own."""

    def __init__(self, study: Study, page: Page) -> None:
        self.study, self.case, self.page = study, study.case, page
        self.time = Timeline.of(study.case)
        self.flow: CashFlow = study.runs[study.reference].flows[-1]
        self.single_row = ROWS.single

    def write(self) -> None:
        """Everything common to the options."""
        self._years()
        self._money()
        self._costs()
        self._singles()

    # -- rows over t

    def row(
        self,
        row: int,
        label: str,
        unit: str,
        text: Callable[[str], str],
        expect: Sequence[float] | Array,
        style: str,
        name: str,
    ) -> None:
        """A named row with one formula."""
        self.page.row_of_formulas(row, label, unit, text, list(expect), style, name=name)

    def _years(self) -> None:
        page, time = self.page, self.time
        page.put(CALENDAR_TOP, LABEL, "Calendar and what all options share", "section")
        put_calendar(
            page,
            ROWS.calendar_year,
            "Calendar year",
            lambda c: f"=in_study_first_year-spend_years+{c}{ROWS.t_index}",
            time.calendar,
            "total",
            "calendar_year",
        )
        page.row_of(
            ROWS.t_index,
            "t, years since the first spend",
            "–",
            list(range(time.number)),
            "integer",
            name="t_index",
        )
        t = ROWS.t_index
        k = [int(value) for value in time.operating(list(range(1, time.years + 1)))]
        self.row(
            ROWS.operating_year,
            "Year of operation",
            "–",
            lambda c: (
                f"=IF(AND({c}{t}>=spend_years,{c}{t}<spend_years+years_counted),{c}{t}-spend_years+1,0)"
            ),
            k,
            "integer",
            "operating_year",
        )
        self.row(
            ROWS.operating,
            "In operation: 1, else 0",
            "–",
            lambda c: f"=IF({c}{ROWS.operating_year}>0,1,0)",
            [int(value > 0) for value in k],
            "integer",
            "operating",
        )
        self.total(ROWS.operating, time.years, "integer")

    def total(self, row: int, expect: float, style: str) -> None:
        """The sum of a row, in the column of totals."""
        self.page.formula(row, TOTAL, f"=SUM({self.time.row(row)})", expect, style)

    def _money(self) -> None:
        flow, r = self.flow, ROWS
        self.row(
            r.inflation_index,
            "Money of the day per price-year money",
            "–",
            lambda c: f"=(1+in_finance_inflation)^({c}{r.calendar_year}-in_study_price_year)",
            flow.inflation_factor,
            "factor",
            "inflation_index",
        )
        self.row(
            r.deflator,
            "Deflator of the basis (1 if nominal)",
            "–",
            lambda c: f'=IF(in_finance_basis="real",1/{c}{r.inflation_index},1)',
            flow.deflator,
            "factor",
            "deflator",
        )
        self.row(
            r.basis_factor,
            "Money of the basis per price-year money",
            "–",
            lambda c: f"={c}{r.inflation_index}*{c}{r.deflator}",
            flow.inflation_factor * flow.deflator,
            "factor",
            "basis_factor",
        )
        self.row(
            r.discount_factor,
            "Discount factor",
            "–",
            lambda c: f"=(1+in_finance_discount_rate)^-{c}{r.t_index}",
            flow.discount_factor,
            "factor",
            "discount_factor",
        )
        self.row(
            r.value_weight,
            "Present value of 1 paid in operation",
            "–",
            lambda c: f"={c}{r.operating}*{c}{r.basis_factor}*{c}{r.discount_factor}",
            self.worth,
            "factor",
            "value_weight",
        )
        self.total(r.value_weight, float(self.worth.sum()), "factor")

    @property
    def running(self) -> Array:
        """1 in operation, else 0, [t]."""
        return np.asarray(self.time.operating([1.0] * self.time.years))

    @property
    def worth(self) -> Array:
        """Present value of one unit of price-year money at each t in operation."""
        flow = self.flow
        return np.asarray(self.running * flow.inflation_factor * flow.deflator * flow.discount_factor)

    @property
    def spend(self) -> Array:
        """Share of the capital spent at each t."""
        return np.array([*self.case.capex.spend, *([0.0] * self.time.years)])

    @property
    def growth(self) -> Array:
        """Real growth of yearly costs in operation, [t]."""
        grown = compounded(1.0, self.case.opex.change_per_year, self.time.years)
        return np.asarray(self.time.operating(grown.tolist()))

    def _costs(self) -> None:
        r, opex, years = ROWS, self.case.opex, self.time.years
        self.row(
            r.spend_share,
            "Share of capital spent",
            "–",
            lambda c: f"=IF({c}{r.t_index}<spend_years,INDEX(in_capex_spend,{c}{r.t_index}+1),0)",
            self.spend,
            "percent1",
            "spend_share",
        )
        self.total(r.spend_share, 1.0, "percent1")
        self.row(
            r.cost_growth,
            "Real growth of yearly costs, in operation",
            "–",
            lambda c: f"={c}{r.operating}*(1+in_opex_change_per_year)^({c}{r.operating_year}-1)",
            self.growth,
            "factor",
            "cost_growth",
        )
        every = [
            (input_name(f"opex.overhauls[{i}].every_years"), input_name(f"opex.overhauls[{i}].amount"))
            for i in range(len(opex.overhauls))
        ]
        due = "+".join(f"(MOD({{k}},{years})=0)*{amount}" for years, amount in every) or "0"
        amounts = [
            sum(one.amount for one in opex.overhauls if k % one.every_years == 0) for k in range(1, years + 1)
        ]
        self.row(
            r.overhauls,
            "Overhauls, before growth",
            f"thousand {self.case.study.currency}",
            lambda c: f"={c}{r.operating}*({due.format(k=f'{c}{r.operating_year}')})",
            self.time.operating(amounts),
            "thousand",
            "overhauls",
        )
        self.total(r.overhauls, float(sum(amounts)), "thousand")

    # -- single figures

    def single(
        self, label: str, unit: str, formula: str, expect: object, style: str, name: str, note: str = ""
    ) -> None:
        """One figure in the column of totals, in the next row."""
        self.page.put(self.single_row, LABEL, label, "label")
        self.page.put(self.single_row, UNIT, unit, "unit")
        self.page.formula(self.single_row, TOTAL, formula, expect, style, name)
        if note:
            self.page.put(self.single_row, YEAR_ZERO, f" {note}", "note")
        self.single_row += 1

    def _singles(self) -> None:
        time, flow = self.time, self.flow
        self.single("Years of spending", "a", "=ROWS(in_capex_spend)", time.spend, "integer", "spend_years")
        self.single(
            "Years of operation counted",
            "a",
            "=MAX(1,MIN(in_study_years,COLUMNS(t_index)-spend_years))",
            time.years,
            "integer",
            "years_counted",
            "as the inputs say, but no more than were run: further years need a new run",
        )
        last = time.spend - 1
        self.single(
            "Present value of 1 in the last spend",
            "–",
            "=INDEX(basis_factor,1,spend_years)*INDEX(discount_factor,1,spend_years)",
            float(flow.inflation_factor[last] * flow.deflator[last] * flow.discount_factor[last]),
            "factor",
            "tie_in_weight",
            "the tie-in falls in that year",
        )
        self.page.put(self.single_row, LABEL, "Residue of rounding, share of the flow", "label")
        self.page.put(self.single_row, UNIT, "–", "unit")
        self.page.put(self.single_row, TOTAL, ROUNDING, "tiny", name="rounding_share")
        self.single_row += 1
