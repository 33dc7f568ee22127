"""What the design point fixes: the baseline's 0-values, every condenser's UA0, every tail section's phi."""

import dataclasses
import math
from dataclasses import dataclass
from typing import Any

from . import steam
from .balance import Balance, balance, check_pressures
from .calibration import calibrated
from .expansion import coefficient, main_line
from .feed import Reference, feed
from .plain import Option, Plant, baseline_key, option, option_keys, plant
from .shells import Fixed, NoSolution, Rating, Train, Water, train
from .sliding import between, cumulative


@dataclass(frozen=True)
class OptionDesign:
    """Sizes of one option (kW/K, cold to hot) and its balance at the design point."""

    option: Option
    UA0: tuple[float, ...]
    fixed: Fixed
    balance: Balance

    @property
    def phi(self) -> tuple[float, ...]:
        return self.fixed.phi


@dataclass(frozen=True)
class Design:
    plant: Plant
    reference: Reference
    baseline_key: str
    options: dict[str, OptionDesign]

    @property
    def M0(self) -> float:
        return self.reference.exhaust_kg_s

    @property
    def p_N0(self) -> float:
        return self.reference.exhaust_bar

    @property
    def p_e0(self) -> float:
        return self.plant.bleed_bar

    @property
    def m1_0(self) -> float:
        return self.reference.live_kg_s

    @property
    def m_dh0(self) -> float:
        return self.reference.network_kg_s

    @property
    def baseline(self) -> OptionDesign:
        return self.options[self.baseline_key]


def design(data: dict[str, Any]) -> Design:
    """Design-point solve of the baseline, then of every option."""
    key = baseline_key(data)
    base = option(data, key)
    p = calibrated(plant(data), lambda trial: _at_test(trial, base))
    reference = _reference(p, base)
    UA0 = existing_UA0(p, reference)
    sized = {k: size(p, option(data, k), reference, UA0) for k in option_keys(data)}
    return Design(p, reference, key, sized)


def network_flow(p: Plant, heat_MW: float, supply_C: float, return_C: float) -> float:
    rise = steam.at(p.network_bar, supply_C).enthalpy - steam.at(p.network_bar, return_C).enthalpy
    return heat_MW * 1e3 / rise


def _reference(p: Plant, base: Option) -> Reference:
    """The baseline at load 1 with its stated terminal difference and its stated bleed pressure."""
    flow = network_flow(p, p.heat_MW, p.supply_C, p.return_C)
    line = main_line(p, 1.0)
    stated = (Rating(terminal_difference_K=p.terminal_difference_K),)
    found = train(p, base, stated, line, flow, (p.return_C, p.supply_C))
    heater_bar = p.heater.bleed_bar if p.heater else None
    water = feed(p, base, found, line, p.bleed_bar, heater_bar, on_live=False)
    return Reference(found.exhaust_kg_s, found.shells[-1].steam.pressure_bar, water.live_kg_s, flow)


def _at_test(p: Plant, base: Option) -> Balance:
    """The baseline of a trial plant, sized at the design point, at the conditions of its test."""
    reference = _reference(p, base)
    test = p.measured
    flow = network_flow(p, test.heat_MW, test.supply_C, test.return_C)
    UA = existing_UA0(p, reference) * base.area_factor * (flow / reference.network_kg_s) ** p.flow_exponent
    temperatures = (test.return_C, test.supply_C)

    def train_at(line) -> Train:
        return train(p, base, (Rating(UA=UA),), line, flow, temperatures)

    return balance(p, base, reference, train_at, flow)


def existing_UA0(p: Plant, reference: Reference) -> float:
    """ln((T_sat - T_in)/(T_sat - T_out)) m_dh0 c of the existing condenser, kW/K."""
    saturation = p.supply_C + p.terminal_difference_K
    ntu = math.log((saturation - p.return_C) / (saturation - p.supply_C))
    return ntu * Water(p.network_bar, reference.network_kg_s, p.return_C, p.supply_C).heat_capacity


def size(p: Plant, o: Option, reference: Reference, UA0: float, hottest_stated: bool = False) -> OptionDesign:
    """One option at its own shares of the rise; new condensers meet their stated terminal difference."""
    stated = Rating(terminal_difference_K=o.terminal_difference_K)
    hottest = stated if hottest_stated else Rating(UA=UA0 * o.area_factor)
    ratings = (*([stated] * (o.stages - 1)), hottest)
    temperatures = between(p.return_C, p.supply_C, cumulative(o))
    flow = reference.network_kg_s

    def train_at(line) -> Train:
        return train(p, o, ratings, line, flow, temperatures)

    found = balance(p, o, reference, train_at, flow)
    if not found.train.buildable():
        raise NoSolution(f"option {o.key} cannot be built at the design point")
    check_pressures(p, found.train, found.feed)
    shells, sections, flows = found.train.shells, found.train.sections, found.train.flows
    phi = tuple(coefficient(m, s.inlet, s.out_bar) for m, s in zip(flows, sections, strict=True))
    sizes = (*(s.leaving_UA for s in shells[:-1]), UA0 * o.area_factor)
    return OptionDesign(o, sizes, Fixed(phi, flows), found)


def ideal_gain_share(data: dict[str, Any], key: str) -> float:
    """Extra gross power at the design point over that of sixteen equal stages, all at the new stages' TTD."""
    found = design(data)
    mine, base = found.options[key], found.baseline
    if mine.option.baseline:
        return 0.0
    free = dataclasses.replace(found.plant, generator_limit_MW=None)
    wide = dataclasses.replace(mine.option, stages=16, shares=(1.0 / 16,) * 16, tail_limit_MW=None)
    ideal = size(free, wide, found.reference, base.UA0[-1], hottest_stated=True)
    floor = size(free, base.option, found.reference, base.UA0[-1])
    gain = mine.balance.power_gross_MW - base.balance.power_gross_MW
    return gain / (ideal.balance.power_gross_MW - floor.balance.power_gross_MW)
