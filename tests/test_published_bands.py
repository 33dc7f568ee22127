"""Defaults and the demo plants within the ranges that are published or usual.

A range says what would be odd, not what is right: a value inside it is plausible, no more.
"""

from functools import cache
from pathlib import Path

import numpy as np
import pytest
from published import check_within, published, values

from appraise.capex import capital
from appraise.case.load import LoadedCase, load_case
from appraise.case.money import Opex
from appraise.case.plant import Feed, NewCondenser, Turbine
from appraise.checks import MOISTURE_LIMIT
from appraise.cycle.balance import Balance, design_balances
from appraise.cycle.design import Design, design
from appraise.demand import demand
from appraise.sizing import option_size

INPUTS = Path(__file__).parents[1] / "inputs"
ATMOSPHERE_BAR = 1.01325
EVERY_CASE = pytest.mark.parametrize("name", ["marrowby", "hollowmere", "smallest"])


@cache
def loaded(name: str) -> LoadedCase:
    return load_case(INPUTS / f"{name}.toml")


@cache
def designed(name: str) -> tuple[Design, dict[str, Balance]]:
    """The design point of a case, and the balance of every option by its key."""
    case = loaded(name).case
    made = design(case)
    return made, {balance.key: balance for balance in design_balances(case, made)}


def within(table: str, calculated: float) -> None:
    check_within("bands", table, calculated)


# --- what stands where nothing is said --------------------------------------------------------------------


def test_heat_transfer_where_nothing_is_given() -> None:
    default = NewCondenser(terminal_difference_K=3.0, drain_approach_K=7.0)
    within("U of steam condensers", default.u_condensing_W_m2K)
    within("U with water in the tubes", default.u_condensing_W_m2K)
    within("U of water to water", default.u_drain_W_m2K)


def test_machines_where_nothing_is_given() -> None:
    within("Generator efficiency", 100.0 * Turbine(efficiency=0.8).generator_efficiency)
    within("Running cost", 100.0 * Opex().fixed_share_of_capex)


def test_warning_of_moisture_comes_at_the_upper_limit() -> None:
    values("bands", "Limits of moisture")["high"].check(100.0 * MOISTURE_LIMIT)


# --- the plants of the cases ------------------------------------------------------------------------------


@EVERY_CASE
def test_exchangers_and_network(name: str) -> None:
    case = loaded(name).case
    within("Terminal difference", case.plant.condenser.terminal_difference_K)
    within("Terminal difference", case.new_condenser.terminal_difference_K)
    within("Drain approach", case.new_condenser.drain_approach_K)
    within("U with water in the tubes", case.new_condenser.u_condensing_W_m2K)
    within("U of water to water", case.new_condenser.u_drain_W_m2K)
    within("Supply of existing networks", case.plant.design.supply_C)
    within("Return of existing networks", case.plant.design.return_C)


@EVERY_CASE
def test_machines(name: str) -> None:
    case = loaded(name).case
    within("Generator efficiency", 100.0 * case.plant.turbine.generator_efficiency)
    for option in case.options:
        within("Generator efficiency", 100.0 * case.tail_of(option).generator_efficiency)
    within("Running cost", 100.0 * case.opex.fixed_share_of_capex)


@EVERY_CASE
def test_deaerators_stay_above_the_atmosphere(name: str) -> None:
    """Absolute pressure in the case, gauge pressure in the source; also where a sliding one stops."""
    feed = loaded(name).case.plant.feed
    least = values("bands", "Deaerator")["least"]
    lowest = feed.deaerator_minimum_bar if feed.deaerator_control == "sliding" else feed.deaerator_bar
    assert lowest - ATMOSPHERE_BAR >= least.value
    default = Feed(deaerator_bar=2.0, bleed_bar=4.0).deaerator_minimum_bar
    assert default - ATMOSPHERE_BAR >= least.value - least.tolerance


@EVERY_CASE
def test_exhausts_stay_drier_than_the_stricter_limit(name: str) -> None:
    limit = values("bands", "Limits of moisture")["low"].value
    for balance in designed(name)[1].values():
        assert all(100.0 * stage.moisture < limit for stage in balance.stages)


def test_outages_of_the_wood_fired_plant() -> None:
    rows, case = values("bands", "Outages"), loaded("marrowby").case
    rows["forced"].check(100.0 * (1.0 - case.year.availability))
    days = sum(
        (np.datetime64(f"2026-{outage.to}") - np.datetime64(f"2026-{outage.from_}")).astype(int) + 1
        for outage in case.year.outages
    )
    rows["planned"].check(days / 7.0)


def test_life_and_least_load_of_the_wood_fired_plant() -> None:
    case = loaded("marrowby").case
    within("Life", case.study.years)
    live = case.plant.live_steam
    within("Least load", 100.0 * live.min_kg_s / live.max_kg_s)


@pytest.mark.parametrize("name", ["marrowby", "smallest"])
def test_power_of_the_wood_fired_plants(name: str) -> None:
    """They burn 27 and 61 MW; the published ones of 20 and 80 MW have flue-gas condensers in their heat."""
    base = designed(name)[1]["single"]
    within("Net power of fuel", 100.0 * base.power_net_MW / base.fuel_MW)


# --- money ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("key", ["single-large", "two-stage", "two-stage-subcooled"])
def test_extra_power_is_cheaper_than_a_new_plant(key: str) -> None:
    """Else nobody would rebuild; money of 2026 against money of 2015."""
    made, balances = designed("marrowby")
    sizes = [option_size(option, made.plant, ()) for option in made.options]
    paid = {bought.option: bought for bought in capital(loaded("marrowby").case, sizes)}[key]
    extra_MW = balances[key].power_net_MW - balances["single"].power_net_MW
    assert paid.extra / 1e6 / extra_MW < values("bands", "New plant")["low"].value


def test_capital_of_the_demo() -> None:
    case = loaded("marrowby").case
    items = {item.key: item for item in case.capex.items}
    within("Setting of exchangers", items["installation"].share)
    exponent = items["condenser"].correlation.exponent
    ends = [row.value for row in published("cost", "Local exponents, U-tube")]
    assert min(ends) <= exponent <= max(ends)


def test_finance_of_the_demo() -> None:
    case = loaded("marrowby").case
    assert case.finance.basis == "real"
    within("Discount rate", 100.0 * case.finance.discount_rate)


def test_risk_of_the_demo() -> None:
    case = loaded("marrowby").case
    wood = {driver.label: driver.distribution for driver in case.drivers}["Wood price"]
    assert wood.kind == "lognormal"  # skewed to the right
    within("Spread of the wood price", 100.0 * np.log(wood.p90 / wood.p10) / (2.0 * 1.2815515655446004))
    ranks = {frozenset(pair.between): pair.rank for pair in case.draws.correlations}
    within("Wood and power price", ranks[frozenset(("Wood price", "Power price"))])


# --- the year ---------------------------------------------------------------------------------------------


def heat_by_day(name: str) -> np.ndarray:
    """Demand of a case, [day, hour of the day]."""
    found = loaded(name)
    return demand(found.case, found.hours).heat_MW.reshape(-1, 24)


@pytest.mark.parametrize("row", published("bands", "Share of heat by capacity"), ids=str)
def test_what_part_of_the_year_a_capacity_covers(row) -> None:
    heat = heat_by_day("marrowby")
    capacity = row.given["capacity"] * heat.mean(axis=1).max()
    share = float(np.minimum(heat, capacity).sum() / heat.sum())
    if row.name == "low":
        assert share >= row.value - row.tolerance
    else:
        assert share <= row.value + row.tolerance


def test_hours_of_full_demand() -> None:
    heat = heat_by_day("marrowby")
    within("Hours of full demand", heat.sum() / heat.max())
    within("Hours of full demand", heat.sum() / heat.mean(axis=1).max())
