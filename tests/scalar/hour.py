"""One hour of one option: limits, peak boilers, flue-gas condenser, the baseline's leave to run."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

from . import steam
from .balance import Balance, check_pressures, settled
from .design import Design, OptionDesign
from .plain import Plant
from .report import Point, stages_of, states_of
from .shells import AgainstPressure, Memory, NoSolution, Rating, Train
from .sliding import settle


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


def run(plant: Plant, sized: OptionDesign, reference, hour: Hour, heat_MW: float, memory: Memory) -> Run:
    """The plant delivering ``heat_MW`` in this hour, without limits; raises NoSolution."""
    h = _water(plant)
    cold = h(hour.return_C)
    flow = (hour.heat_MW if plant.series else heat_MW) * 1e3 / (h(hour.supply_C) - cold)
    out_C = hour.supply_C
    if plant.series and heat_MW < hour.heat_MW:
        out_C = steam.at_enthalpy(plant.network_bar, cold + heat_MW * 1e3 / flow).temperature_C

    ratio = plant.flue_gas.ratio(hour.return_C) if plant.flue_gas else 0.0

    def settle_gas(on_live: bool) -> Run:
        """Fuel and flue-gas heat together, the deaerator's steam being chosen: secants on the latter."""
        gas, before = ratio * 1.5 * (1.0 - 1.5 * ratio) * heat_MW, None
        for _ in range(60):
            in_C = hour.return_C
            if gas > 0.0:
                in_C = steam.at_enthalpy(plant.network_bar, cold + gas * 1e3 / flow).temperature_C
            found = _turbine(plant, sized, reference, flow, in_C, out_C, memory, on_live)
            miss = ratio * found.fuel_MW - gas
            if abs(miss) < 1e-12 * heat_MW:
                return Run(found, heat_MW, gas)
            step = miss
            if before is not None and before[1] != miss:
                step = -miss * (gas - before[0]) / (miss - before[1])
            before, gas = (gas, miss), gas + step
        raise NoSolution("flue-gas heat does not settle")

    found = settle_gas(on_live=False)
    return settle_gas(on_live=True) if found.balance.bleed_too_low else found


def _water(plant: Plant) -> Callable[[float], float]:
    return lambda temperature_C: steam.at(plant.network_bar, temperature_C).enthalpy


def _turbine(
    plant, sized: OptionDesign, reference, flow, in_C, out_C, memory: Memory, on_live: bool
) -> Balance:
    o, share = sized.option, flow / reference.network_kg_s
    exponents = (*([o.flow_exponent] * (o.stages - 1)), plant.flow_exponent)
    ratings = tuple(Rating(UA=UA0 * share**n) for UA0, n in zip(sized.UA0, exponents, strict=True))

    def train_at(line) -> Train:
        return settle(plant, o, ratings, line, flow, in_C, out_C, sized.fixed, memory)

    return settled(plant, o, reference, train_at, flow, memory, on_live)


def _use(plant: Plant, found: Run) -> dict[str, float]:
    """Live steam, heat of the turbine condensers and fuel over their limits."""
    use = {"live steam": found.balance.feed.live_kg_s / plant.max_kg_s}
    if plant.max_heat_MW is not None:
        use["heat"] = (found.heat_MW - found.flue_gas_MW) / plant.max_heat_MW
    if plant.max_fuel_MW is not None:
        use["fuel"] = found.balance.fuel_MW / plant.max_fuel_MW
    return use


def _limited(
    plant: Plant, sized: OptionDesign, reference, hour: Hour, in_reach: bool = True
) -> tuple[Run, str]:
    """The run at the least of demand and limits, and the name of the limit that holds it.

    ``in_reach``: whether a limit could matter at all, where the demand itself allows no operation.
    """
    memory = Memory()

    def at(heat_MW: float) -> Run:
        return run(plant, sized, reference, hour, heat_MW, memory)

    def excess(heat_MW: float) -> float:
        return max(_use(plant, at(heat_MW)).values()) - 1.0

    start = hour.heat_MW
    if plant.max_heat_MW is not None and plant.flue_gas is None:
        start = min(start, plant.max_heat_MW)
    within, beyond = start, None
    while True:  # from the demand down to a heat within all limits
        try:
            found = at(within)
            over = max(_use(plant, found).values()) - 1.0
        except (NoSolution, ValueError, IndexError):  # far above its limits a plant may have no operation
            if not in_reach or beyond is not None or within < 0.2 * start:
                raise
            memory = Memory()
            within *= 0.93
            continue
        if over <= 1e-12:
            break
        beyond = within
        within *= min(0.98, 0.99 / (1.0 + over))
    if within == start:
        return found, "" if start == hour.heat_MW else "heat"
    if beyond is None:
        raise NoSolution("no operation at the demand")
    found = at(steam.root(excess, within, beyond, 1e-11))
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
        stages=stages_of(b.train),
        states=states_of(plant, b),
        balance=b,
    )


def _own(design: Design, key: str, hour: Hour, in_reach: bool = True) -> Point:
    """The option by itself, limits and minimum flow applied; raises NoSolution."""
    plant, sized = design.plant, design.options[key]
    found, limit = _limited(plant, sized, design.reference, hour, in_reach)
    check_pressures(plant, found.balance.train, found.balance.feed)
    if found.balance.feed.live_kg_s < plant.min_kg_s:
        return _off(plant, hour)
    return _on(plant, hour, found, limit)


def _baseline(design: Design, hour: Hour) -> Point:
    """The baseline by its own rules; off where its steam would have to flow against the pressure."""
    try:
        return _own(design, design.baseline_key, hour)
    except AgainstPressure:
        return _off(design.plant, hour)


def points(design: Design, heat_MW: float, supply_C: float, return_C: float) -> dict[str, Point]:
    """One hour of every option with all its rules."""
    plant, hour = design.plant, Hour(heat_MW, supply_C, return_C)
    if heat_MW <= 0.0:
        return {key: _off(plant, Hour(0.0, supply_C, return_C)) for key in design.options}
    base = _baseline(design, hour)
    others = {key: _beside(design, key, hour, base) for key in design.options if key != design.baseline_key}
    return {design.baseline_key: base, **others}


def off(design: Design, heat_MW: float, supply_C: float, return_C: float) -> dict[str, Point]:
    """One hour in which the plant stands still."""
    return {key: _off(design.plant, Hour(heat_MW, supply_C, return_C)) for key in design.options}


def _beside(design: Design, key: str, hour: Hour, base: Point) -> Point:
    """An option beside the baseline: it waits for it, and runs as it where it cannot run by itself."""
    plant = design.plant
    near = base.limit != "" or base.live_steam_kg_s > 0.85 * plant.max_kg_s
    near |= plant.max_fuel_MW is not None and base.fuel_MW > 0.85 * plant.max_fuel_MW
    near |= plant.max_heat_MW is not None and base.heat_MW > 0.85 * plant.max_heat_MW
    try:
        mine = _own(design, key, hour, near)
    except NoSolution as error:
        return replace(base, as_baseline=base.on, why=str(error) if base.on else "")
    if mine.on and not base.on and not plant.extra_running:
        return _off(plant, hour, could_gain=True)
    return mine


def point(
    data: dict[str, Any], design: Design, option_key: str, heat_MW: float, supply_C: float, return_C: float
) -> Point:
    """One hour of one option with all its rules; ``data`` is only kept for the caller's convenience."""
    hour = Hour(heat_MW, supply_C, return_C)
    if heat_MW <= 0.0:
        return _off(design.plant, hour)
    base = _baseline(design, hour)
    return base if option_key == design.baseline_key else _beside(design, option_key, hour, base)
