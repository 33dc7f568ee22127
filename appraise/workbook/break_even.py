"""The Break-even sheet: what prices an option takes to pay, one at a time and power against fuel."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

from appraise.workbook.break_even_block import (
    LAST,
    STATED_CARBON,
    STATED_FUEL,
    STATED_POWER,
    Block,
    section,
)
from appraise.workbook.cash_flow_measures import NOTHING
from appraise.workbook.cells import LABEL, TOTAL, YEAR_ZERO, Page, Sheet, ref
from appraise.workbook.charts import Axis, Chart, Series, scatter_chart
from appraise.workbook.looks import REDUCED_CHART_POINTS
from appraise.workbook.naming import name_of

if TYPE_CHECKING:
    from appraise.study import Study

TITLE = "Break-even"
NOTE = (
    "A price path is moved as a whole; its first year, in money of the price year, stands for it. Hours, "
    "bypassed hours, premium, fee and loss by the tie-in stay as they are. Money in thousand {currency}, "
    "cells hold {currency}. Grids: red with a minus, it does not pay; filled, it pays here and no longer one "
    "step further, so the filled cells trace the line where the net present value is zero; large, the prices "
    "as stated."
)
SUMMARY_TOP = 6
STATED_ROW = SUMMARY_TOP + 2
WIDTHS = (34.0, 12.0, 10.0, *([9.5] * (LAST - YEAR_ZERO + 1)))
CHART_CM, CHART_ROWS = 11.5, 23
BLOCK_ROWS = 22
STATED_SLOT = 3  # a triangle, unlike the lines


def break_even_sheet(study: Study) -> Sheet:
    """Break-even values of all options, their lines of zero in one chart, then a grid each."""
    page, grids, currency = Page(TITLE, "live"), study.grids, study.case.study.currency
    page.head("Break-even: what prices it takes", "In the chosen scenario.")
    page.width(WIDTHS)
    page.paragraph(4, LABEL, LAST, NOTE.format(currency=currency), "note_wrap")
    if not grids:
        page.put(SUMMARY_TOP, LABEL, "The case has no option beside the baseline.")
        return page.finish()
    chart_row = _summary(study, page)
    flows = {flow.option: flow for flow in study.runs[study.reference].flows}
    top = chart_row + CHART_ROWS + 1
    blocks = [
        Block(study, page, grid, flows[grid.option], top + number * BLOCK_ROWS)
        for number, grid in enumerate(grids)
    ]
    for block in blocks:
        block.write()
    page.chart(_chart(study, blocks, ref(chart_row, LABEL)))
    page.freeze(4, 1)
    page.printed(breaks_after=[block.top - 1 for block in blocks])
    return page.finish()


def _summary(study: Study, page: Page) -> int:
    """Prices as stated and the break-even values of every option; returns the first free row."""
    currency, prices = study.case.study.currency, study.runs[study.reference].prices
    section(page, SUMMARY_TOP, "Break-even values: each alone, the others as stated")
    money = f"thousand {currency}"
    heads = (
        f"power price {currency}/MWh",
        f"fuel price {currency}/MWh",
        f"carbon price {currency}/t",
        f"largest capital, {money}",
        f"its capital, {money}",
    )
    page.headings(SUMMARY_TOP + 1, ["Option", "", *heads])
    page.height(SUMMARY_TOP + 1, 56)
    page.put(STATED_ROW, LABEL, "Prices as stated, first year", "label")
    stated = ((STATED_POWER, "power"), (STATED_FUEL, "fuel"), (STATED_CARBON, "carbon"))
    for col, (name, kind) in enumerate(stated, TOTAL):
        formula = f"=INDEX(chosen__{kind},1,spend_years+1)"
        page.formula(STATED_ROW, col, formula, float(getattr(prices, kind)[0]), "number2 bold", name)
    row = STATED_ROW
    for index, option in enumerate(study.case.options):
        if option.baseline:
            continue
        row += 1
        run = study.measures[study.reference][index]
        page.put(row, LABEL, option.name, "label")
        for col, (name, value, style) in enumerate(
            (
                ("even_power", run.break_even_power_price, "number2"),
                ("even_fuel", run.break_even_fuel_price, "number2"),
                ("even_carbon", run.break_even_carbon_price, "number2"),
                ("largest_capital", run.largest_capex, "thousand"),
                ("capital_total", study.capital[index].total, "thousand"),
            ),
            TOTAL,
        ):
            shown = NOTHING if value is None else value
            page.formula(row, col, f"={name_of(name, option.key)}", shown, style)
    return row + 2


def _chart(study: Study, blocks: Sequence[Block], anchor: str) -> Chart:
    """Lines of zero of all options over the fuel price, and the prices as stated."""
    currency, prices = study.case.study.currency, study.runs[study.reference].prices
    # The look of the point is left out among the lines.
    series = [
        Series(block.name, TITLE, block.even_prices, x=block.fuel_prices, slot=i + (i >= STATED_SLOT))
        for i, block in enumerate(blocks)
    ]
    power, fuel = ref(STATED_ROW, TOTAL), ref(STATED_ROW, TOTAL + 1)
    point = Series(
        "prices as stated", TITLE, power, x=fuel, line=False, markers=True, slot=STATED_SLOT, direct=True
    )
    known = [(block.name, block.run.break_even_power_price) for block in blocks]
    said = "; ".join(f"{name} {value:,.2f}" for name, value in known if value is not None)
    chart = scatter_chart(
        "Power price at which the net present value is zero, over the fuel price",
        [*series, point],
        x=Axis(f"fuel price of the first year, {currency}/MWh", "0"),
        y=Axis(f"power price, {currency}/MWh", "0"),
        alt=f"Power price at which the net present value of each option is zero, over the fuel price, in "
        f"{currency}/MWh. The prices as stated are marked: as run {prices.fuel[0]:,.2f} for fuel and "
        f"{prices.power[0]:,.2f} for power. At that fuel price zero is at: {said or 'no power price'}.",
        anchor=anchor,
        size_cm=(sum(width * 7.0 + 5.0 for width in WIDTHS) / 96.0 * 2.54 - 0.2, CHART_CM),
    )
    return replace(chart, points=REDUCED_CHART_POINTS - 1.5)
