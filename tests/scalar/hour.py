"""One hour of one option: limits, peak boilers, flue-gas condenser, the baseline's leave to run."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

from . import steam
from .balance import Balance, balance
from .design import Design, OptionDesign
from .plain import Plant
from .shells import NoSolution, Rating, Train
from .sliding import settle
from .steam import State


@dataclass(frozen=True)
class StagePoint:
    shell_bar: float
    saturation_C: float
    water_in_C: float
    water_out_C: float
    steam_kg_s: float
    steam_kJ_kg: float
    moisture: float
    drain_kJ_kg: float
    heat_MW: float


@dataclass(frozen=True)
class Point:
    """One hour; off means every number of the plant is zero and the peak boilers carry the demand."""

    on: bool
    as_baseline: bool
    why: str  # what keeps the option from running by itself
    heat_MW: float
    power_gross_MW: float
    power_net_MW: float
    power_lost_MW: float  # at the shaft
    gross_lost_MW: float  # at the terminals
    fuel_MW: float
    live_steam_kg_s: float
    bleed_kg_s: float
    heater_bleed_kg_s: float
    bleed_bar: float
    network_kg_s: float
    flue_gas_MW: float
    peak_heat_MW: float
    peak_fuel_MW: float
    deaerator_on_live_steam: bool
    limit: str  # which one holds the plant below the demand: live steam, heat, fuel, or ""
    could_gain: bool
    closure: float
    stages: tuple[StagePoint, ...]
    states: dict[str, State]
    balance: Balance | None

    @property
    def at_limit(self) -> bool:
        return self.limit != ""


def _stages(found: Train) -> tuple[StagePoint, ...]:
    return tuple(
        StagePoint(
            s.pressure_bar,
            s.saturation_C,
            s.water_in_C,
            s.water_out_C,
            s.steam_kg_s,
            s.steam.enthalpy,
            s.steam.moisture,
            s.drain.enthalpy,
            s.heat_kW / 1e3,
        )
        for s in found.shells
    )


def _states(plant: Plant, found: Balance) -> dict[str, State]:
    water, shells = found.feed, found.train.shells
    states = {"live steam": steam.at(plant.live_bar, plant.live_C)}
    if water.heater_bleed is not None:
        states["heater bleed"] = water.heater_bleed
    states["deaerator bleed"] = water.bleed
    for k in reversed(range(len(shells))):
        states[f"exhaust {k + 1}"] = shells[k].steam
    after = {
        "condensate after pump": (water.deaerator_bar, water.condensate_enthalpy),
        "feed water after deaerator": (water.deaerator_bar, water.deaerator_enthalpy),
        "feed water to boiler": (plant.boiler_bar, water.boiler_inlet_enthalpy),
    }
    return states | {label: steam.at_enthalpy(*state) for label, state in after.items()}


@dataclass(frozen=True)
class Hour:
    """What the network asks for."""

    heat_MW: float
    supply_C: float
    return_C: float


@dataclass(frozen=True)
class Run:
    """The plant at some heat: its balance with what the flue gas adds."""

    balance: Balance
    heat_MW: float
    flue_gas_MW: float


def run(plant: Plant, sized: OptionDesign, reference, hour: Hour, heat_MW: float) -> Run:
    """The plant delivering ``heat_MW`` in this hour, without limits; raises NoSolution."""
    h = _water(plant)
    cold = h(hour.return_C)
    flow = (hour.heat_MW if plant.series else heat_MW) * 1e3 / (h(hour.supply_C) - cold)
    out_C = hour.supply_C
    if plant.series and heat_MW < hour.heat_MW:
        out_C = steam.at_enthalpy(plant.network_bar, cold + heat_MW * 1e3 / flow).temperature_C

    def with_flue_gas(heat: float) -> Balance:
        in_C = hour.return_C
        if heat > 0.0:
            in_C = steam.at_enthalpy(plant.network_bar, cold + heat * 1e3 / flow).temperature_C
        return _turbine(plant, sized, reference, flow, in_C, out_C)

    ratio = plant.flue_gas.ratio(hour.return_C) if plant.flue_gas else 0.0
    first = with_flue_gas(0.0)
    if ratio == 0.0:
        return Run(first, heat_MW, 0.0)
    recovered = steam.root(lambda q: ratio * with_flue_gas(q).fuel_MW - q, 0.0, ratio * first.fuel_MW, 1e-12)
    return Run(with_flue_gas(recovered), heat_MW, recovered)


def _water(plant: Plant) -> Callable[[float], float]:
    return lambda temperature_C: steam.at(plant.network_bar, temperature_C).enthalpy


def _turbine(plant, sized: OptionDesign, reference, flow: float, in_C: float, out_C: float) -> Balance:
    o, share = sized.option, flow / reference.network_kg_s
    exponents = (*([o.flow_exponent] * (o.stages - 1)), plant.flow_exponent)
    ratings = tuple(Rating(UA=UA0 * share**n) for UA0, n in zip(sized.UA0, exponents, strict=True))

    def train_at(line) -> Train:
        return settle(plant, o, ratings, line, flow, in_C, out_C, sized.fixed)

    return balance(plant, o, reference, train_at, flow)


def _use(plant: Plant, found: Run) -> dict[str, float]:
    """Live steam, heat of the turbine condensers and fuel over their limits."""
    use = {"live steam": found.balance.feed.live_kg_s / plant.max_kg_s}
    if plant.max_heat_MW is not None:
        use["heat"] = (found.heat_MW - found.flue_gas_MW) / plant.max_heat_MW
    if plant.max_fuel_MW is not None:
        use["fuel"] = found.balance.fuel_MW / plant.max_fuel_MW
    return use


def _limited(plant: Plant, sized: OptionDesign, reference, hour: Hour) -> tuple[Run, str]:
    """The run at the least of demand and limits, and the name of the limit that holds it."""

    def excess(heat_MW: float) -> float:
        return max(_use(plant, run(plant, sized, reference, hour, heat_MW)).values()) - 1.0

    start = hour.heat_MW
    if plant.max_heat_MW is not None and plant.flue_gas is None:
        start = min(start, plant.max_heat_MW)
    within, beyond, refused = start, None, None
    while True:  # from the demand down to a heat within all limits
        try:
            over = excess(within)
        except (NoSolution, ValueError) as error:  # far above its limits a plant may have no operation at all
            over, refused = None, error
        if over is not None and over <= 1e-12:
            break
        beyond = within if over is not None else None
        within *= 0.93 if over is None else min(0.97, 0.99 / (1.0 + over))
        if within < 0.02 * hour.heat_MW:
            raise NoSolution("no heat within the limits") from refused
    if within == start:
        return run(plant, sized, reference, hour, within), "" if start == hour.heat_MW else "heat"
    if beyond is None:
        raise NoSolution("no operation at the demand") from refused
    found = run(plant, sized, reference, hour, steam.root(excess, within, beyond, 1e-11))
    use = _use(plant, found)
    return found, max(use, key=use.get)


def _off(plant: Plant, hour: Hour, could_gain: bool = False) -> Point:
    return Point(
        on=False,
        as_baseline=False,
        why="",
        heat_MW=0.0,
        power_gross_MW=0.0,
        power_net_MW=0.0,
        power_lost_MW=0.0,
        gross_lost_MW=0.0,
        fuel_MW=0.0,
        live_steam_kg_s=0.0,
        bleed_kg_s=0.0,
        heater_bleed_kg_s=0.0,
        bleed_bar=0.0,
        network_kg_s=0.0,
        flue_gas_MW=0.0,
        peak_heat_MW=hour.heat_MW,
        peak_fuel_MW=hour.heat_MW / plant.peak_efficiency,
        deaerator_on_live_steam=False,
        limit="",
        could_gain=could_gain,
        closure=0.0,
        stages=(),
        states={},
        balance=None,
    )


def _on(plant: Plant, hour: Hour, found: Run, limit: str) -> Point:
    b = found.balance
    missing = max(0.0, hour.heat_MW - found.heat_MW)
    return Point(
        on=True,
        as_baseline=False,
        why="",
        heat_MW=found.heat_MW,
        power_gross_MW=b.power_gross_MW,
        power_net_MW=b.power_net_MW,
        power_lost_MW=b.power_lost_MW,
        gross_lost_MW=b.gross_lost_MW,
        fuel_MW=b.fuel_MW,
        live_steam_kg_s=b.feed.live_kg_s,
        bleed_kg_s=b.feed.bleed_kg_s,
        heater_bleed_kg_s=b.feed.heater_kg_s,
        bleed_bar=b.feed.bleed_bar,
        network_kg_s=b.network_kg_s,
        flue_gas_MW=found.flue_gas_MW,
        peak_heat_MW=missing,
        peak_fuel_MW=missing / plant.peak_efficiency,
        deaerator_on_live_steam=b.on_live,
        limit=limit,
        could_gain=False,
        closure=b.closure,
        stages=_stages(b.train),
        states=_states(plant, b),
        balance=b,
    )


def _own(design: Design, key: str, hour: Hour) -> Point:
    """The option by itself, limits and minimum flow applied; raises NoSolution."""
    plant, sized = design.plant, design.options[key]
    found, limit = _limited(plant, sized, design.reference, hour)
    if found.balance.feed.live_kg_s < plant.min_kg_s:
        return _off(plant, hour)
    return _on(plant, hour, found, limit)


def points(design: Design, heat_MW: float, supply_C: float, return_C: float) -> dict[str, Point]:
    """One hour of every option with all its rules."""
    plant, hour = design.plant, Hour(heat_MW, supply_C, return_C)
    if heat_MW <= 0.0:
        return {key: _off(plant, Hour(0.0, supply_C, return_C)) for key in design.options}
    base = _own(design, design.baseline_key, hour)
    others = {key: _beside(design, key, hour, base) for key in design.options if key != design.baseline_key}
    return {design.baseline_key: base, **others}


def off(design: Design, heat_MW: float, supply_C: float, return_C: float) -> dict[str, Point]:
    """One hour in which the plant stands still."""
    return {key: _off(design.plant, Hour(heat_MW, supply_C, return_C)) for key in design.options}


def _beside(design: Design, key: str, hour: Hour, base: Point) -> Point:
    """An option beside the baseline: it waits for it, and runs as it where it cannot run by itself."""
    try:
        mine = _own(design, key, hour)
    except NoSolution as error:
        return replace(base, as_baseline=base.on, why=str(error) if base.on else "")
    if mine.on and not base.on and not design.plant.extra_running:
        return _off(design.plant, hour, could_gain=True)
    return mine


def point(
    data: dict[str, Any], design: Design, option_key: str, heat_MW: float, supply_C: float, return_C: float
) -> Point:
    """One hour of one option with all its rules; ``data`` is only kept for the caller's convenience."""
    hour = Hour(heat_MW, supply_C, return_C)
    if heat_MW <= 0.0:
        return _off(design.plant, hour)
    base = _own(design, design.baseline_key, hour)
    return base if option_key == design.baseline_key else _beside(design, option_key, hour, base)
