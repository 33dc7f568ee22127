"""What every option buys and sells against the baseline, by operating year: where physics meets prices.

An hour's extra power, fuel and peak fuel are sums of the year's solve; only two rules need the hours
themselves together with a price: the bypass and the floor of a premium.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from appraise.case.hours import Hours
from appraise.case.load import Case
from appraise.cash_flow import Increment
from appraise.cycle.task import Mask
from appraise.demand import in_dates
from appraise.numerics import Array
from appraise.prices import ScenarioPrices
from appraise.year import OptionYear, Years

Amount = float | Array


@dataclass(frozen=True, slots=True, eq=False)
class Extra:
    """One option's hours less the baseline's, as energy a year: [knot, hour], MWh."""

    power: Array
    fuel: Array
    peak_fuel: Array

    @classmethod
    def of(cls, case: Case, option: int, years: Years) -> Extra:
        """Difference of one option, with availability in it, over the number of years in the series."""
        pairs = [(solved[option], solved[years.baseline]) for solved in years.solved]
        share = years.shares[option] / years.solved[0][option].years
        boiler = case.plant.peak_boiler.efficiency
        return cls(
            power=share * np.stack([o.power_net_MW - b.power_net_MW for o, b in pairs]),
            fuel=share * np.stack([o.fuel_MW - b.fuel_MW for o, b in pairs]),
            peak_fuel=share * np.stack([b.heat_MW - o.heat_MW for o, b in pairs]) / boiler,
        )


@dataclass(frozen=True, slots=True, eq=False)
class Traded:
    """One option in one scenario: the increment by operating year, and the hours run as the baseline.

    bypassed : [hour] of the first operating year; None where the option has no bypass.
    tie_in : of the baseline, the same for every option of a scenario.
    """

    increment: Increment
    bypassed: Mask | None
    tie_in: TieIn


def traded(
    case: Case, hours: Hours, years: Years, prices: ScenarioPrices, shape: Array
) -> tuple[Traded, ...]:
    """Every option in one scenario, in the case's order. `shape` is price over its mean [hour]."""
    lost = tie_in(case, hours, years, prices, shape)
    return tuple(_one(case, index, years, prices, shape, lost) for index in range(len(case.options)))


def _one(case: Case, index: int, years: Years, prices: ScenarioPrices, shape: Array, lost: TieIn) -> Traded:
    option, weights = case.options[index], years.weights(case.study.years)
    is_base = index == years.baseline
    extra = Extra.of(case, index, years)
    floor = _floor(case, prices.name)
    kept = _kept_hours(case, extra, years, prices, shape) if option.bypass else None
    counted = prices.power[:, None] * shape >= floor if floor is not None else None
    if kept is None and counted is None:
        power, fuel, peak = (
            weights @ rows.sum(axis=1) for rows in (extra.power, extra.fuel, extra.peak_fuel)
        )
        weighted, premium = weights @ (extra.power @ shape), power
    else:
        run = np.ones((len(weights), shape.size)) if kept is None else kept
        hourly = (weights @ extra.power) * run
        power, weighted = hourly.sum(axis=1), hourly @ shape
        premium = power if counted is None else (hourly * counted).sum(axis=1)
        fuel = ((weights @ extra.fuel) * run).sum(axis=1)
        peak = ((weights @ extra.peak_fuel) * run).sum(axis=1)
    increment = Increment(
        option=option.key,
        scenario=prices.name,
        power_MWh=power,
        weighted_power_MWh=weighted,
        premium_MWh=premium,
        fuel_MWh=fuel,
        peak_fuel_MWh=peak,
        tie_in=0.0 if is_base else lost.margin(case, prices),
    )
    return Traded(increment, None if kept is None else kept[0] == 0.0, lost)


def _floor(case: Case, scenario: str) -> float | None:
    premium = case.scenarios[scenario].power_premium
    return None if premium is None else premium.not_below


def _co2_t_per_MWh(case: Case) -> tuple[float, float]:
    """Stack CO2 of the plant's and of the peak boilers' fuel."""
    return case.plant.boiler.co2_kg_per_MWh / 1e3, case.plant.peak_boiler.co2_kg_per_MWh / 1e3


def _kept_hours(case: Case, extra: Extra, years: Years, prices: ScenarioPrices, shape: Array) -> Array:
    """1 where the hour earns at least what the baseline does at that year's prices, else 0 [year, hour]."""
    plant_co2, peak_co2 = _co2_t_per_MWh(case)
    fuel = (prices.fuel + prices.carbon * plant_co2)[:, None]
    peak = (prices.peak_fuel + prices.carbon * peak_co2)[:, None]
    power = prices.power[:, None] * shape
    floor = _floor(case, prices.name)
    premium = prices.premium[:, None] * (1.0 if floor is None else power >= floor)
    value = power + premium - (prices.fee + variable_cost(case))[:, None]
    w = years.weights(case.study.years)
    margin = (w @ extra.power) * value - (w @ extra.fuel) * fuel - (w @ extra.peak_fuel) * peak
    return np.asarray(margin >= 0.0, dtype=float)


def variable_cost(case: Case) -> Array:
    """Variable operating cost per MWh of extra power by operating year, price-year money."""
    opex = case.opex
    return np.asarray(opex.variable_per_MWh * (1.0 + opex.change_per_year) ** np.arange(case.study.years))


@dataclass(frozen=True, slots=True, eq=False)
class TieIn:
    """What the baseline would have made and burned in the dates of the tie-in, MWh a year; numbers or [draw].

    `weighted_power_MWh` counts each hour with its price over the mean, `peak_fuel_MWh` is what the peak
    boilers would burn for the plant's heat.
    """

    power_MWh: Amount
    weighted_power_MWh: Amount
    premium_MWh: Amount
    fuel_MWh: Amount
    peak_fuel_MWh: Amount

    def margin(self, case: Case, prices: ScenarioPrices) -> Array:
        """The baseline's margin lost, price-year money, at the prices of the first operating year [...]."""
        plant_co2, peak_co2 = _co2_t_per_MWh(case)
        carbon = prices.carbon[..., 0]
        return np.asarray(
            self.weighted_power_MWh * prices.power[..., 0]
            + self.premium_MWh * prices.premium[..., 0]
            - self.power_MWh * prices.fee[..., 0]
            - self.fuel_MWh * (prices.fuel[..., 0] + carbon * plant_co2)
            + self.peak_fuel_MWh * (prices.peak_fuel[..., 0] + carbon * peak_co2)
        )


def tie_in(case: Case, hours: Hours, years: Years, prices: ScenarioPrices, shape: Array) -> TieIn:
    """Energies of the baseline in the dates of the tie-in, at first-year demand; all 0 without dates."""
    period, base = case.capex.tie_in, years.solved[0][years.baseline]
    if period is None:
        return TieIn(0.0, 0.0, 0.0, 0.0, 0.0)
    inside = in_dates(hours.time, ((period.from_, period.to),))
    floor = _floor(case, prices.name)
    counted = np.ones(shape.size) if floor is None else prices.power[0] * shape >= floor
    share = case.year.availability / base.years

    def total(values: Array) -> float:
        return share * float(values[inside].sum())

    return TieIn(
        power_MWh=total(base.power_net_MW),
        weighted_power_MWh=total(base.power_net_MW * shape),
        premium_MWh=total(base.power_net_MW * counted),
        fuel_MWh=total(base.fuel_MW),
        peak_fuel_MWh=total(base.heat_MW) / case.plant.peak_boiler.efficiency,
    )


@dataclass(frozen=True, slots=True)
class YearFigures:
    """One option in one scenario: the first operating year, energies in MWh, money of the price year."""

    scenario: str
    option: str
    heat_MWh: float
    peak_heat_MWh: float
    power_gross_MWh: float
    power_net_MWh: float
    fuel_MWh: float
    peak_fuel_MWh: float
    power_value: float
    extra_power_MWh: float
    extra_fuel_MWh: float
    extra_peak_fuel_MWh: float
    extra_power_per_heat: float | None
    incremental_efficiency: float | None
    extra_power_on_bleed_MWh: float
    heat_on_bleed_MWh: float
    extra_power_on_live_steam_MWh: float
    heat_on_live_steam_MWh: float
    hours_on: float
    hours_at_limit: float
    hours_bypassed: float
    hours_as_baseline: float
    hours_at_fuel_limit: float
    hours_at_generator_limit: float
    power_lost_MWh: float
    hours_deaerator_on_live_steam: float
    hours_could_gain: float
    hours_below_tail_minimum: float
    hours_throttled: float
    hours_with_heater: float
    flue_gas_heat_MWh: float
    capture_price: float | None
    capture_ratio: float | None
    first_year_gain: float
    co2_t: float


@dataclass(frozen=True, slots=True, eq=False)
class _FirstYear:
    """The first operating year of one option, with the baseline's values in the hours that are bypassed.

    share : of its own operation in the sums. rest : while its tail is out and it runs as the baseline.
    """

    option: OptionYear
    base: OptionYear
    off: Mask
    share: float
    rest: float

    @classmethod
    def of(cls, case: Case, years: Years, index: int, bypassed: Mask | None) -> _FirstYear:
        option, base = years.solved[0][index], years.solved[0][years.baseline]
        off = np.zeros(option.on.shape, dtype=bool) if bypassed is None else bypassed
        share = years.shares[index] / option.years
        return cls(option, base, off, share, case.year.availability / option.years - share)

    def merged(self, name: str) -> NDArray[Any]:
        """Values of every hour."""
        return np.asarray(np.where(self.off, getattr(self.base, name), getattr(self.option, name)))

    def hours(self, name: str) -> float:
        """Hours a year in which a flag is set."""
        return self.option.hours(self.merged(name))

    def total(self, name: str, among: Mask | None = None, weight: Array | float = 1.0) -> float:
        """Sum over the hours, or some of them, with availability in it."""
        values = (self.share * self.merged(name) + self.rest * getattr(self.base, name)) * weight
        return float(values.sum() if among is None else values[among].sum())

    def extra(self, among: Mask) -> float:
        """Extra net power in some of the hours, MWh."""
        gained = np.where(self.off, 0.0, self.option.power_net_MW - self.base.power_net_MW)
        return float((self.share * gained)[among].sum())


def year_figures(
    case: Case, years: Years, index: int, run: Traded, prices: ScenarioPrices, shape: Array, gain: float
) -> YearFigures:
    """The first operating year of one option. `gain` is the sum of its operating lines in that year."""
    year = _FirstYear.of(case, years, index, run.bypassed)
    option, is_base, first_price = year.option, index == years.baseline, prices.power[0]
    inc = run.increment
    power, d_fuel, d_peak = float(inc.power_MWh[0]), float(inc.fuel_MWh[0]), float(inc.peak_fuel_MWh[0])
    heat, fuel = year.total("heat_MW"), year.total("fuel_MW")
    peak_heat = years.demand_MWh - heat
    peak_fuel = peak_heat / case.plant.peak_boiler.efficiency
    plant_co2, peak_co2 = _co2_t_per_MWh(case)
    capture = None if is_base or not power else first_price * float(inc.weighted_power_MWh[0]) / power
    live = year.merged("on_live_steam") & option.on
    bleed = option.on & ~live
    return YearFigures(
        scenario=prices.name,
        option=option.key,
        heat_MWh=heat,
        peak_heat_MWh=peak_heat,
        power_gross_MWh=year.total("power_gross_MW"),
        power_net_MWh=year.total("power_net_MW"),
        fuel_MWh=fuel,
        peak_fuel_MWh=peak_fuel,
        power_value=year.total("power_net_MW", weight=first_price * shape),
        extra_power_MWh=power,
        extra_fuel_MWh=d_fuel,
        extra_peak_fuel_MWh=d_peak,
        extra_power_per_heat=power / heat if heat else None,
        incremental_efficiency=None if is_base or d_fuel + d_peak == 0 else power / (d_fuel + d_peak),
        extra_power_on_bleed_MWh=year.extra(bleed),
        heat_on_bleed_MWh=year.total("heat_MW", bleed),
        extra_power_on_live_steam_MWh=year.extra(live),
        heat_on_live_steam_MWh=year.total("heat_MW", live),
        hours_on=option.hours(option.on),
        hours_at_limit=year.hours("at_limit"),
        hours_bypassed=option.hours(year.off),
        hours_as_baseline=option.hours(option.as_baseline),
        hours_at_fuel_limit=year.hours("at_fuel_limit"),
        hours_at_generator_limit=year.hours("at_generator_limit"),
        power_lost_MWh=year.total("power_lost_MW"),
        hours_deaerator_on_live_steam=option.hours(live),
        hours_could_gain=option.hours(option.could_gain),
        hours_below_tail_minimum=option.hours(option.below_tail_minimum),
        hours_throttled=option.hours(option.throttled & ~year.off),
        hours_with_heater=year.hours("heater_in_use"),
        flue_gas_heat_MWh=year.total("flue_gas_MW"),
        capture_price=capture,
        capture_ratio=None if capture is None or not first_price else capture / float(first_price),
        first_year_gain=gain,
        co2_t=fuel * plant_co2 + peak_fuel * peak_co2,
    )
