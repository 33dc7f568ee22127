"""Depreciation by year on the Cash flow sheet, and what one unit of capital is worth in all."""

from __future__ import annotations

import numpy as np

from appraise.case.money import Depreciation
from appraise.cash_flow import depreciation_shares
from appraise.measures import capital_value
from appraise.numerics import Array
from appraise.workbook.calendar_rows import ROWS
from appraise.workbook.cash_flow_calendar import TAX_LEFT, Calendar
from appraise.workbook.cells import YEAR_ZERO

YEARS = 'IF(in_finance_depreciation_years="",years_counted,in_finance_depreciation_years)'
RATE = "in_finance_depreciation_rate"
TABLE = "in_finance_depreciation_shares"


def write_depreciation(calendar: Calendar) -> None:
    """Rows of the shares written off, by the method in the inputs; zeros where the case has none."""
    given = calendar.case.finance.depreciation
    if given is None:
        _write_none(calendar)
    else:
        _write_method(calendar, given)


def _write_none(calendar: Calendar) -> None:
    page, last = calendar.page, YEAR_ZERO + calendar.time.number - 1
    zeros = [0] * calendar.time.number
    page.row_of(ROWS.depreciation_plan, "Depreciation: none in the case", "–", zeros, "percent1")
    page.row_of(ROWS.depreciation_share, "Depreciated, share of the book value", "–", zeros, "percent1")
    page.name("depreciation_share", ROWS.depreciation_share, YEAR_ZERO, ROWS.depreciation_share, last)


def _by_method(given: Depreciation, years: str, rate: str, table: str) -> str:
    """An expression by the method in the inputs; #N/A for a method whose numbers the case does not give."""
    text = "NA()"
    for method, way in (("table", table), ("declining_balance", rate), ("straight_line", years)):
        if method != "table" or given.shares:
            text = f'IF(in_finance_depreciation_method="{method}",{way},{text})'
    return text


def _write_method(calendar: Calendar, given: Depreciation) -> None:
    years = calendar.time.years
    size = len(given.shares or ()) if given.method == "table" else given.years or years
    end = min(size, years)
    calendar.single(
        "Year of operation in which the rest is written off",
        "a",
        f"=MIN({_by_method(given, YEARS, YEARS, f'ROWS({TABLE})')},years_counted)",
        end,
        "integer",
        "plan_end",
    )
    shares = depreciation_shares(given, years)
    before = np.where(np.arange(1, years + 1) < end, shares, 0.0)
    k, plan = ROWS.operating_year, ROWS.depreciation_plan
    way = _by_method(
        given,
        f"1/{YEARS}",
        f'IF({RATE}="",NA(),{RATE}*(1-{RATE})^({{c}}{k}-1))',
        f"INDEX({TABLE},{{c}}{k})",
    )
    calendar.row(
        plan,
        "Plan of depreciation before its last year",
        "–",
        lambda c: f"=IF(AND({c}{k}>=1,{c}{k}<plan_end),{way.format(c=c)},0)",
        calendar.time.operating(before.tolist()),
        "percent1",
        "depreciation_plan",
    )
    calendar.row(
        ROWS.depreciation_share,
        "Depreciated, share of the book value",
        "–",
        lambda c: f"={c}{plan}+IF({c}{k}=plan_end,1-SUM(depreciation_plan),0)",
        calendar.time.operating(shares.tolist()),
        "percent1",
        "depreciation_share",
    )
    calendar.total(ROWS.depreciation_share, 1.0, "percent1")


def write_unit_of_capital(calendar: Calendar) -> None:
    """What one unit of capital does to the net present value, part by part."""
    spent, running, relief, residual = _unit_parts(calendar)
    first = calendar.single_row
    for label, formula, expect in (
        ("One unit of capital: spent", "=-SUMPRODUCT(spend_share,basis_factor,discount_factor)", spent),
        (
            "  its running cost, after tax",
            f"=-{TAX_LEFT}*in_opex_fixed_share_of_capex*SUMPRODUCT(cost_growth,value_weight)",
            running,
        ),
        (
            "  tax relief of its depreciation",
            "=in_finance_tax_rate*SUMPRODUCT(spend_share,inflation_index)"
            "*SUMPRODUCT(depreciation_share,deflator,discount_factor)",
            relief,
        ),
        (
            "  its residual, after tax",
            f"={TAX_LEFT}*in_finance_residual_share*SUMPRODUCT((operating_year=years_counted)*value_weight)",
            residual,
        ),
    ):
        calendar.single(label, "–", formula, expect, "factor", "")
    flow = calendar.flow
    calendar.single(
        "Net present value of one unit of capital",
        "–",
        f"=SUM(C{first}:C{calendar.single_row - 1})",
        capital_value(flow.case, flow.prices, flow.increment),
        "factor total",
        "unit_of_capital",
        "with everything that scales along; the grant does not",
    )


def _unit_parts(calendar: Calendar) -> tuple[float, float, float, float]:
    """Spend, running cost, tax relief and residual of one unit of capital, at present value."""
    flow, finance = calendar.flow, calendar.case.finance
    left, money = 1.0 - finance.tax_rate, flow.inflation_factor * flow.deflator
    shares: Array = np.asarray(
        calendar.time.operating(depreciation_shares(finance.depreciation, calendar.time.years).tolist())
    )
    written_off = float((shares * flow.deflator * flow.discount_factor).sum())
    return (
        -float((calendar.spend * money * flow.discount_factor).sum()),
        -left * calendar.case.opex.fixed_share_of_capex * float((calendar.growth * calendar.worth).sum()),
        finance.tax_rate * float((calendar.spend * flow.inflation_factor).sum()) * written_off,
        left * finance.residual_share * float(calendar.worth[-1]),
    )
