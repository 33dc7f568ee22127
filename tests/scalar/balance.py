"""One option at one water flow and temperature pair: load settled, power, fuel and closure."""

import math
from collections.abc import Callable
from dataclasses import dataclass

from . import steam
from .expansion import MainLine, main_line
from .feed import Feed, Reference, cone_bar, feed
from .plain import Option, Plant
from .shells import AgainstPressure, Memory, NoSolution, Train


@dataclass(frozen=True)
class Balance:
    train: Train
    feed: Feed
    load: float
    on_live: bool
    live_enthalpy: float
    network_kg_s: float
    heat_MW: float
    power_main_MW: float
    power_tail_MW: float
    power_lost_MW: float  # shaft power above the generators' limits
    lost_main_MW: float
    lost_tail_MW: float
    gross_lost_MW: float  # both at the terminals
    power_gross_MW: float
    power_net_MW: float
    pump_MW: float
    new_stage_MW: float
    fuel_MW: float
    closure: float

    @property
    def bleed_too_low(self) -> bool:
        return self.feed.bleed_bar < self.feed.deaerator_bar


def balance(
    plant: Plant,
    option: Option,
    reference: Reference,
    train_at: Callable[[MainLine], Train],
    network_kg_s: float,
    memory: Memory | None = None,
) -> Balance:
    """First on the bleed; where that lies below the deaerator, again on throttled live steam."""
    inputs = (plant, option, reference, train_at, network_kg_s, memory or Memory())
    found = settled(*inputs, on_live=False)
    if found.bleed_too_low:
        return settled(*inputs, on_live=True)
    return found


def settled(plant, option, reference, train_at, network_kg_s, memory: Memory, on_live: bool) -> Balance:
    """The load that sets the efficiency must be the load that comes out: secants on their difference."""
    load, before = memory.load, None
    for _ in range(100):
        line = main_line(plant, load)
        found = train_at(line)
        water = feed_at(plant, option, reference, found, line, on_live)
        comes_out = water.live_kg_s / reference.live_kg_s
        miss = comes_out - load
        resting = before is not None and abs(miss) >= abs(before[1])  # rounding is all that is left
        if abs(miss) < (1e-11 if resting else 1e-13) * max(1.0, load) or plant.part_load.flat:
            memory.load = comes_out
            return _powers(plant, option, reference, found, water, line, comes_out, on_live, network_kg_s)
        step = miss
        if before is not None and before[1] != miss:
            step = -miss * (load - before[0]) / (miss - before[1])
        before, load = (load, miss), load + step
    raise NoSolution("load does not settle")


def check_pressures(plant: Plant, found: Train, water: Feed) -> None:
    """Nothing on the expansion line may stand at the pressure of live steam or above it."""
    highest = max(found.shells[-1].steam.pressure_bar, water.bleed_bar, water.heater_bar or 0.0)
    if highest >= plant.live_bar:
        raise AgainstPressure(f"{highest:.3f} bar on the line from {plant.live_bar:g} bar")


def feed_at(plant, option, reference, found: Train, line: MainLine, on_live: bool) -> Feed:
    exhaust = found.exhaust_kg_s, found.shells[-1].steam.pressure_bar
    bleed_bar = cone_bar(reference, plant.bleed_bar, *exhaust)
    heater_bar = cone_bar(reference, plant.heater.bleed_bar, *exhaust) if plant.heater else None
    return feed(plant, option, found, line, bleed_bar, heater_bar, on_live)


def shaft_MW(found: Train, water: Feed, live_enthalpy: float) -> tuple[float, float]:
    """Main and tail section, MW: each stretch of the expansion times the flow that passes it."""
    top, hot = live_enthalpy, found.shells[-1].steam.enthalpy
    first = water.heater_bleed.enthalpy if water.heater_bleed else water.bleed.enthalpy
    main = water.live_kg_s * (top - first)
    main += (water.live_kg_s - water.heater_kg_s) * (first - water.bleed.enthalpy)
    main += found.exhaust_kg_s * (water.bleed.enthalpy - hot)
    tail = 0.0
    for k, flow in enumerate(found.flows):
        tail += flow * (found.shells[k + 1].steam.enthalpy - found.shells[k].steam.enthalpy)
    return main / 1e3, tail / 1e3


def new_stage_MW(plant: Plant, option: Option, reference: Reference, found: Train, flow: float) -> float:
    """Network pumping through each new condenser, and its vacuum auxiliaries."""
    total = 0.0
    for s in found.shells[:-1]:
        volume = steam.at(plant.network_bar, s.water_in_C).volume
        drop = option.pressure_drop_bar * (flow / reference.network_kg_s) ** 2
        total += flow * volume * drop * 0.1 / plant.network_pump_efficiency + option.vacuum_MW
    return total


@dataclass(frozen=True)
class _Terminals:
    """Gross power, and what the limits take: shaft power of either machine, power at the terminals, MW."""

    gross: float
    lost_main: float
    lost_tail: float
    lost_gross: float


def _generators(plant: Plant, option: Option, main: float, tail: float) -> _Terminals:
    """Limits of the plant's machine and of the tail's own; without one the tail turns the plant's."""
    own = plant.mechanical * plant.generator
    tails = option.tail_mechanical * option.tail_generator
    free = main * own + tail * tails
    plant_limit = math.inf if plant.generator_limit_MW is None else plant.generator_limit_MW
    if option.tail_limit_MW is None:
        lost, lost_tail = max(0.0, free - plant_limit) / own, 0.0
    else:
        lost = max(0.0, main - plant_limit / own)
        lost_tail = max(0.0, tail - option.tail_limit_MW / tails)
    lost_gross = lost * own + lost_tail * tails
    return _Terminals(free - lost_gross, lost, lost_tail, lost_gross)


def _powers(plant, option, reference, found, water, line, load, on_live, network_kg_s) -> Balance:
    b, m1, h1 = plant.blowdown, water.live_kg_s, line.live.enthalpy
    boiling = steam.saturated(plant.boiler_bar, 0.0).enthalpy
    efficiency = plant.boiler_efficiency.at(load)
    main, tail = shaft_MW(found, water, h1)
    made = _generators(plant, option, main, tail)
    lost = made.lost_main + made.lost_tail
    raised = m1 * (h1 - water.boiler_inlet_enthalpy) + b * m1 * (boiling - water.boiler_inlet_enthalpy)
    fuel = (raised / 1e3 - lost) / efficiency
    heat = sum(s.heat_kW for s in found.shells) / 1e3
    pumps = water.pump_kW / 1e3
    new = new_stage_MW(plant, option, reference, found, network_kg_s)
    into = fuel * efficiency + pumps + b * m1 * water.makeup_enthalpy / 1e3
    out = main + tail - lost + heat + b * m1 * boiling / 1e3
    return Balance(
        train=found,
        feed=water,
        load=load,
        on_live=on_live,
        live_enthalpy=h1,
        network_kg_s=network_kg_s,
        heat_MW=heat,
        power_main_MW=main,
        power_tail_MW=tail,
        power_lost_MW=lost,
        lost_main_MW=made.lost_main,
        lost_tail_MW=made.lost_tail,
        gross_lost_MW=made.lost_gross,
        power_gross_MW=made.gross,
        power_net_MW=made.gross - pumps - plant.auxiliary_MW - new,
        pump_MW=pumps,
        new_stage_MW=new,
        fuel_MW=fuel,
        closure=(into - out) / (fuel * efficiency),
    )
