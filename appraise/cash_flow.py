"""Yearly money of an option against the baseline: named lines by t, built in money of the day.

Axes: the last one is the operating year in what goes in and t in what comes out; leading axes (draws)
broadcast. Numbers that are not yearly (capital, tie-in, rates) carry the leading axes only. Money in is
positive, money out negative, in every line.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, fields
from functools import reduce
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from appraise.capex import OptionCapital
from appraise.numerics import Array
from appraise.prices import ScenarioPrices, compounded
from appraise.timeline import Calendar, with_t

if TYPE_CHECKING:
    from appraise.case.load import Case
    from appraise.case.money import Depreciation


@dataclass(frozen=True, slots=True, eq=False)
class Increment:
    """What an option buys and sells more than the baseline, by operating year.

    Energies are [operating year] or [draw, operating year]. `weighted_power_MWh` is the sum over the hours
    of extra power × price shape, so that path × weighted power is the money. `premium_MWh` is the power
    that earns the premium. `tie_in` is the baseline's margin lost while the work is done (positive is a
    loss), price-year money, before `capex.tie_in.multiplier`; a number or [draw].
    """

    option: str
    scenario: str
    power_MWh: Array
    weighted_power_MWh: Array
    premium_MWh: Array
    fuel_MWh: Array
    peak_fuel_MWh: Array
    tie_in: ArrayLike


@dataclass(frozen=True, slots=True, eq=False)
class Lines:
    """The named lines, each [..., t]; their sum is the net flow."""

    capital: Array
    grant: Array
    tie_in: Array
    power: Array
    premium: Array
    fuel: Array
    carbon: Array
    peak_fuel: Array
    peak_carbon: Array
    fixed_om: Array
    variable_om: Array
    network_fee: Array
    residual: Array
    tax: Array

    def total(self) -> Array:
        """Net flow, [..., t]."""
        return _sum(getattr(self, name) for name in LINE_NAMES)

    def operating(self) -> Array:
        """Sum of the lines of operation, before tax, [..., t]."""
        return _sum(getattr(self, name) for name in OPERATING_LINES)

    def each(self, change: Callable[[Array], Array]) -> Lines:
        """The same lines after `change` on each."""
        return Lines(**{name: change(getattr(self, name)) for name in LINE_NAMES})


LINE_NAMES = tuple(field.name for field in fields(Lines))
OPERATING_LINES = (
    "power",
    "premium",
    "fuel",
    "carbon",
    "peak_fuel",
    "peak_carbon",
    "fixed_om",
    "variable_om",
    "network_fee",
)


@dataclass(frozen=True, slots=True, eq=False)
class CashFlow:
    """One option in one scenario by t, and all it was made from; t = 0 is the first spend.

    capital : the option's total less the baseline's, a number or [draw]. avoided : the baseline's total.

    lines, net : on the basis of the analysis: deflated to the price year where it is real, else money of
    the day.
    day_lines : the lines in money of the day, as built and taxed. depreciation, taxable : money of the day.
    inflation_factor : money of the day over price-year money. deflator : what the basis divides out again.
    years : calendar year. All arrays end in axis t; `discounted` = net × discount_factor, `cumulative` sums
    net.
    """

    case: Case
    prices: ScenarioPrices
    increment: Increment
    capital: Array
    avoided: float
    spend_years: int
    years: Array
    inflation_factor: Array
    deflator: Array
    discount_factor: Array
    day_lines: Lines
    depreciation: Array
    taxable: Array
    lines: Lines
    net: Array
    cumulative: Array
    discounted: Array
    cumulative_discounted: Array

    @property
    def option(self) -> str:
        """Key of the option."""
        return self.increment.option

    @property
    def scenario(self) -> str:
        """Name of the scenario."""
        return self.increment.scenario

    @property
    def npv(self) -> Array:
        """Net present value at t = 0, [...]."""
        return np.asarray(self.discounted.sum(axis=-1))


def _sum(arrays: Iterable[Array]) -> Array:
    """Sum of arrays that broadcast against each other."""
    return np.asarray(reduce(np.add, arrays))


def present_value(line: ArrayLike, discount_factor: Array) -> Array:
    """Sum of line × discount factor over t, [...]. line[0] is t = 0, undiscounted (not so in a sheet)."""
    return np.asarray((np.asarray(line) * discount_factor).sum(axis=-1))


def grant_amount(case: Case, option: str, capital: ArrayLike) -> Array:
    """The grant in price-year money [...]: none for the baseline, and none where no capital is spent."""
    spent = np.asarray(capital, dtype=float) != 0.0
    return np.asarray(np.where(spent & (option != case.baseline.key), case.finance.grant, 0.0))


def fixed_cost(case: Case, option: str, capital: ArrayLike) -> Array:
    """Fixed operating cost with overhauls, [..., operating year], positive, price-year money.

    Share of capital before grant, yearly cost beside it, and overhauls in every n-th year of operation (the
    last year of life included), all with the yearly real change. The baseline carries none.
    """
    opex, years = case.opex, case.study.years
    yearly = with_t(opex.fixed_share_of_capex) * with_t(capital)
    if option != case.baseline.key:
        overhauls = np.zeros(years)
        for overhaul in opex.overhauls:
            overhauls[overhaul.every_years - 1 :: overhaul.every_years] += overhaul.amount
        yearly = yearly + with_t(opex.fixed_per_year) + overhauls
    return np.asarray(yearly * compounded(1.0, opex.change_per_year, years))


def depreciation_shares(depreciation: Depreciation | None, life: int) -> Array:
    """Share of the book written off in each operating year, [operating year]; zeros where there is no method.

    What is left goes in the last year of the table, of the stated years or of the life, whichever comes
    first.
    """
    shares = np.zeros(life)
    if depreciation is None:
        return shares
    plan = _plan(depreciation, life)
    last = min(plan.size, life) - 1
    shares[:last] = plan[:last]
    shares[last] = 1.0 - shares.sum()
    return shares


def _plan(depreciation: Depreciation, life: int) -> Array:
    """Share of the book written off each year as the method has it, over its own years (else the life)."""
    if depreciation.shares is not None and depreciation.method == "table":
        return np.asarray(depreciation.shares, dtype=float)
    years = depreciation.years or life
    if depreciation.rate is not None and depreciation.method == "declining_balance":
        return declining_balance(depreciation.rate, years)
    return np.full(years, 1.0 / years)


def declining_balance(rate: float, years: int) -> Array:
    """rate × (1 − rate)^k for k = 0 … years − 1: the same rate on what is left, [year]."""
    return np.asarray(rate * (1.0 - rate) ** np.arange(years))


def cash_flow(
    case: Case, prices: ScenarioPrices, increment: Increment, capital: OptionCapital | ArrayLike
) -> CashFlow:
    """All lines of one option in one scenario.

    capital : what the option costs; as a number or [draw], its total less the baseline's (which the retrofit
    avoids), price-year money.
    """
    extra, avoided = (
        (capital.extra, capital.avoided) if isinstance(capital, OptionCapital) else (capital, 0.0)
    )
    paid = np.asarray(extra, dtype=float)
    calendar = Calendar.of(case)
    untaxed = _untaxed_lines(case, calendar, prices, increment, paid)
    depreciation = _depreciation(case, calendar, untaxed["capital"], untaxed["grant"])
    taxed = (*OPERATING_LINES, "tie_in", "residual")
    taxable = _sum(untaxed[name] for name in taxed) - depreciation
    tax = -with_t(case.finance.tax_rate) * taxable
    shape = np.broadcast_shapes(
        taxable.shape, tax.shape, untaxed["capital"].shape, calendar.discount_factor.shape
    )
    built = Lines(tax=tax, **untaxed).each(lambda line: np.broadcast_to(line + 0.0, shape))
    lines = built.each(lambda line: np.asarray(line * calendar.deflator))
    net = lines.total()
    discounted = net * calendar.discount_factor
    return CashFlow(
        case=case,
        prices=prices,
        increment=increment,
        capital=paid,
        avoided=avoided,
        spend_years=calendar.spend_years,
        years=calendar.years,
        inflation_factor=calendar.inflation_factor,
        deflator=calendar.deflator,
        discount_factor=calendar.discount_factor,
        day_lines=built,
        depreciation=depreciation,
        taxable=taxable,
        lines=lines,
        net=net,
        cumulative=np.cumsum(net, axis=-1),
        discounted=discounted,
        cumulative_discounted=np.cumsum(discounted, axis=-1),
    )


def _untaxed_lines(
    case: Case, calendar: Calendar, prices: ScenarioPrices, increment: Increment, capital: Array
) -> dict[str, Array]:
    """Every line but the tax, by name, in money of the day."""
    spend, period = case.capex.spend, case.capex.tie_in
    co2_t_MWh = case.plant.boiler.co2_kg_per_MWh / 1000.0
    peak_co2_t_MWh = case.plant.peak_boiler.co2_kg_per_MWh / 1000.0
    variable = compounded(case.opex.variable_per_MWh, case.opex.change_per_year, case.study.years)
    fixed = fixed_cost(case, increment.option, capital)
    lost = np.asarray(increment.tie_in, dtype=float) * (0.0 if period is None else period.multiplier)
    residual = np.asarray(case.finance.residual_share) * capital
    operating = calendar.operating
    return {
        "capital": calendar.spent(-capital, spend),
        "grant": calendar.spent(grant_amount(case, increment.option, capital), spend),
        "tie_in": calendar.once(-lost, calendar.spend_years - 1),
        "power": operating(prices.power * increment.weighted_power_MWh),
        "premium": operating(prices.premium * increment.premium_MWh),
        "fuel": operating(-prices.fuel * increment.fuel_MWh),
        "carbon": operating(-prices.carbon * increment.fuel_MWh * co2_t_MWh),
        "peak_fuel": operating(-prices.peak_fuel * increment.peak_fuel_MWh),
        "peak_carbon": operating(-prices.carbon * increment.peak_fuel_MWh * peak_co2_t_MWh),
        "fixed_om": operating(-fixed),
        "variable_om": operating(-variable * increment.power_MWh),
        "network_fee": operating(-prices.fee * increment.power_MWh),
        "residual": calendar.once(residual, -1),
    }


def _depreciation(case: Case, calendar: Calendar, capital: Array, grant: Array) -> Array:
    """Depreciation in money of the day, [..., t]: on what was spent, not inflated further.

    The book may be negative (avoided spending, or a grant above the capital) and is then written back.
    """
    book = -capital.sum(axis=-1)
    if case.finance.grant_reduces_depreciation:
        book = book - grant.sum(axis=-1)
    shares = depreciation_shares(case.finance.depreciation, calendar.operating_years)
    before = np.zeros(calendar.spend_years)
    return np.asarray(with_t(book) * np.concatenate([before, shares]))
