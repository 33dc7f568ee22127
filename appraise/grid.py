"""Net present value over power price and fuel price: where the investment stops to pay."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from appraise.cash_flow import CashFlow
from appraise.measures import after_tax
from appraise.numerics import Array

FACTORS = (0.5, 0.6, 0.7, 0.8, 0.9, 1.0, 1.1, 1.2, 1.3, 1.4, 1.5)


@dataclass(frozen=True, slots=True, eq=False)
class BreakEvenGrid:
    """One option in one scenario: whole price paths scaled, hours and bypass as they are.

    power_price, fuel_price : of the first operating year. npv : [fuel, power].
    """

    option: str
    scenario: str
    factors: tuple[float, ...]
    power_price: Array
    fuel_price: Array
    npv: Array


def break_even_grid(flow: CashFlow) -> BreakEvenGrid:
    """The grid of one flow. NPV is linear in each whole path, so every point is exact."""
    factors = np.array(FACTORS)
    power, fuel = after_tax(flow, flow.lines.power), after_tax(flow, flow.lines.fuel)
    npv = float(flow.npv) + (factors - 1.0) * power + (factors[:, None] - 1.0) * fuel
    return BreakEvenGrid(
        option=flow.option,
        scenario=flow.scenario,
        factors=FACTORS,
        power_price=factors * flow.prices.power[0],
        fuel_price=factors * flow.prices.fuel[0],
        npv=npv,
    )
