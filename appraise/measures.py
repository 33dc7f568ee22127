"""Measures of a cash flow: net present value and what informs beside it.

Flows are in axis t, and flow[0] is t = 0: undiscounted. A measure that does not exist is None, never NaN; a
rate of return that does not exist says why. The net present value decides, the others inform.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike
from scipy.optimize import brentq

from appraise.cash_flow import CashFlow, Increment, cash_flow, present_value
from appraise.numerics import Array
from appraise.prices import ScenarioPrices

if TYPE_CHECKING:
    from appraise.case.load import Case

ROUNDING = 1e-12
"""A flow below this share of the greatest one is a residue of rounding and counts as zero."""


@dataclass(frozen=True, slots=True)
class Measures:
    """All measures of one option in one scenario; money and prices of the basis of the analysis.

    Prices per MWh (carbon: per tonne) and `largest_capex` are price-year money.
    """

    npv: float
    irr: float | None
    irr_reason: str | None
    mirr: float | None
    simple_payback_years: float | None
    discounted_payback_years: float | None
    payback_note: str | None
    profitability_index: float | None
    levelised_cost: float | None
    break_even_power_price: float | None
    break_even_fuel_price: float | None
    break_even_carbon_price: float | None
    largest_capex: float | None


@dataclass(frozen=True, slots=True)
class Rate:
    """An internal rate of return, or the reason why there is none."""

    value: float | None
    reason: str | None


@dataclass(frozen=True, slots=True)
class Payback:
    """Years of operation until the money is back, or None; `note` says what the number hides."""

    years: float | None
    note: str | None


def measures(flow: CashFlow) -> Measures:
    """All measures of one flow without leading axes."""
    simple, discounted = payback(flow.net, flow.spend_years), payback(flow.discounted, flow.spend_years)
    finance, lines, prices = flow.case.finance, flow.lines, flow.prices
    reinvestment = finance.discount_rate if finance.reinvestment_rate is None else finance.reinvestment_rate
    rate = internal_rate(flow.net)
    return Measures(
        npv=float(flow.npv),
        irr=rate.value,
        irr_reason=rate.reason,
        mirr=modified_rate(flow.net, finance.discount_rate, reinvestment),
        simple_payback_years=simple.years,
        discounted_payback_years=discounted.years,
        payback_note=_payback_note(simple, discounted),
        profitability_index=profitability_index(flow),
        levelised_cost=levelised_cost(flow),
        break_even_power_price=break_even_price(flow, prices.power, lines.power),
        break_even_fuel_price=break_even_price(flow, prices.fuel, lines.fuel),
        break_even_carbon_price=break_even_price(flow, prices.carbon, lines.carbon + lines.peak_carbon),
        largest_capex=largest_capital(flow),
    )


def net_present_value(rate: ArrayLike, flows: ArrayLike) -> Array:
    """Sum of flow[t]/(1 + rate)^t over the last axis. rate : number or [...]. flows : [..., t]."""
    flows = np.asarray(flows, dtype=float)
    t = np.arange(flows.shape[-1], dtype=float)
    return present_value(flows, (1.0 + np.asarray(rate, dtype=float)[..., None]) ** -t)


def without_rounding(flows: ArrayLike) -> Array:
    """The flows [t] with residues of rounding set to zero."""
    flows = np.asarray(flows, dtype=float)
    size = np.abs(flows)
    return np.where(size > ROUNDING * size.max(initial=0.0), flows, 0.0)


def sign_changes(flows: ArrayLike) -> int:
    """How often the sign changes along the flows [t] that are not zero."""
    signs = np.sign(without_rounding(flows))
    signs = signs[signs != 0.0]
    return int((signs[1:] != signs[:-1]).sum())


def internal_rate(flows: ArrayLike) -> Rate:
    """Rate at which the net present value of flows [t] is zero; above −100 %.

    With one change of sign there is exactly one (Descartes' rule of signs on the polynomial in 1/(1 +
    rate)); with none there is none, and with several the number would be no measure.
    """
    flows = without_rounding(flows)
    changes = sign_changes(flows)
    if changes == 0:
        return Rate(None, f"no sign change: {_without_change(flows)}")
    if changes > 1:
        return Rate(None, f"several sign changes: {changes}, so the rate may not be unique")
    used = np.trim_zeros(flows / np.abs(flows).max())
    return Rate(1.0 / _discount_root(used) - 1.0, None)


def _without_change(flows: Array) -> str:
    """Why flows of one sign have no rate of return."""
    if not flows.any():
        return "no flows at all"
    return "every flow is a gain" if flows.max() > 0.0 else "every flow is a loss"


def _discount_root(flows: Array) -> float:
    """The positive root x = 1/(1 + rate) of Σ flow[t]·x^t, whose flows change sign once."""

    def value(x: float) -> float:
        return float(np.polynomial.polynomial.polyval(x, flows))

    # The first sign rules near x = 0 and the last one far out, so walking outwards from 1 must meet the root.
    low = high = 1.0
    while value(low) * flows[0] <= 0.0:
        low /= 2.0
    while value(high) * flows[-1] <= 0.0:
        high *= 2.0
    return float(brentq(value, low, high, xtol=1e-16, rtol=4.0 * np.finfo(float).eps))


def modified_rate(flows: ArrayLike, finance_rate: float, reinvestment_rate: float) -> float | None:
    """[FV of positive flows at the reinvestment rate / PV of negative flows at the finance rate]^(1/T) − 1.

    flows : [t], T the last t. None unless there are both gains and losses.
    """
    flows = without_rounding(flows)
    last = flows.size - 1
    gains, losses = np.maximum(flows, 0.0), np.minimum(flows, 0.0)
    if not gains.any() or not losses.any():
        return None
    future = float(net_present_value(reinvestment_rate, gains)) * (1.0 + reinvestment_rate) ** last
    present = -float(net_present_value(finance_rate, losses))
    return float((future / present) ** (1.0 / last) - 1.0)


def payback(flows: ArrayLike, spend_years: int) -> Payback:
    """Years of operation until the running sum of flows [t] is back at zero, linear within the year.

    Operation begins at t = `spend_years`: 100 spent at t = 0 and 50 a year from t = 1 gives 2.0. Pass
    discounted flows for the discounted payback.
    """
    flows = without_rounding(flows)
    total = np.cumsum(flows)
    total = np.where(np.abs(total) > ROUNDING * np.abs(flows).sum(), total, 0.0)
    if not (total < 0.0).any():
        return Payback(None, "nothing to pay back: the running sum is never negative")
    crossings = [t for t in range(spend_years, flows.size) if total[t - 1] < 0.0 <= total[t]]
    if not crossings and (total[spend_years - 1 :] >= 0.0).all():
        return Payback(0.0, "paid back before operation begins")
    if not crossings:
        return Payback(None, "never paid back")
    t = crossings[0]
    years = t - spend_years - float(total[t - 1] / flows[t])
    falls = [year for year in range(t + 1, flows.size) if total[year] < 0.0]
    note = f"falls below zero again in year {falls[0] - spend_years + 1} of operation" if falls else None
    return Payback(years, note)


def _payback_note(simple: Payback, discounted: Payback) -> str | None:
    """One note for both paybacks; each is named where they differ."""
    if simple.note == discounted.note:
        return simple.note
    named = (("simple", simple.note), ("discounted", discounted.note))
    return "; ".join(f"{name}: {note}" for name, note in named if note)


def profitability_index(flow: CashFlow) -> float | None:
    """1 + NPV / PV(capital less grant); None where no capital is spent on balance."""
    spent = -float(present_value(flow.lines.capital + flow.lines.grant, flow.discount_factor))
    return 1.0 + float(flow.npv) / spent if spent > 0.0 else None


def after_tax(flow: CashFlow, line: Array) -> float:
    """Present value of a taxed line [t] of the flow, with the tax it brings in the same year."""
    return float(present_value(line, flow.discount_factor)) * (1.0 - flow.case.finance.tax_rate)


def levelised_cost(flow: CashFlow) -> float | None:
    """Constant price-year price per extra net MWh, in place of power and premium, at which NPV = 0.

    None where the discounted extra power is zero.
    """
    sold = np.concatenate([np.zeros(flow.spend_years), flow.increment.power_MWh])
    worth = after_tax(flow, sold * flow.inflation_factor * flow.deflator)
    if worth == 0.0:
        return None
    without = float(flow.npv) - after_tax(flow, flow.lines.power + flow.lines.premium)
    return -without / worth


def break_even_scale(flow: CashFlow, line: Array) -> float | None:
    """Factor on a taxed line [t] at which NPV = 0; None where the line is worth nothing, or next to it."""
    worth = after_tax(flow, line)
    scale = math.inf if worth == 0.0 else 1.0 - float(flow.npv) / worth
    return scale if math.isfinite(scale) else None


def break_even_price(flow: CashFlow, path: Array, line: Array) -> float | None:
    """First-year price when the whole path [operating year] behind a line is scaled to NPV = 0.

    Hours, bypass, premium, fee and tie-in stay. None where the line is worth nothing.
    """
    scale = break_even_scale(flow, line)
    return None if scale is None else float(path[0]) * scale


def capital_value(case: Case, prices: ScenarioPrices, increment: Increment) -> float:
    """Change of NPV per unit of capital: the spend, with O&M, depreciation and residual scaling along."""
    none = np.zeros(case.study.years)
    idle = Increment(increment.option, increment.scenario, none, none, none, none, none, 0.0)
    # Two amounts, because the grant and the yearly costs that do not scale are in both and drop out.
    one, two = cash_flow(case, prices, idle, np.array([1.0, 2.0])).npv
    return float(two - one)


def largest_capital(flow: CashFlow) -> float | None:
    """Total of the option at which NPV = 0, the grant kept as an amount; negative where even a gift loses.

    None without any flow, and where more capital does not lower the NPV.
    """
    per_unit = capital_value(flow.case, flow.prices, flow.increment)
    if not flow.net.any() or per_unit >= 0.0:
        return None
    return float(flow.capital) + flow.avoided - float(flow.npv) / per_unit
