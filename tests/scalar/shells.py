"""District-heating condensers: one shell, then the whole train from the hottest to the coldest.

Indices count from the cold end: ``shells[0]`` meets the return water.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise

from . import steam
from .expansion import MainLine, Section, tail_section
from .plain import Option, Plant
from .steam import State


class NoSolution(Exception):
    """The option cannot run like this; off design the hour runs as the baseline."""


class AgainstPressure(NoSolution):
    """Exhaust or bleed not below live steam; where this is true of the baseline the plant stands still."""


@dataclass(frozen=True)
class Rating:
    """What fixes the saturation temperature: a stated terminal difference, or UA in kW/K at this flow."""

    terminal_difference_K: float | None = None
    UA: float | None = None


@dataclass(frozen=True)
class Shell:
    water_in_C: float
    water_out_C: float
    heat_kW: float
    saturation_C: float
    pressure_bar: float
    steam: State
    steam_kg_s: float
    drain: State
    after_drain_cooler_C: float
    heat_capacity: float

    @property
    def leaving_UA(self) -> float:
        """UA (kW/K) that the terminal difference means over the condensing zone T_x ... T_out."""
        return self.heat_capacity * math.log(
            (self.saturation_C - self.after_drain_cooler_C) / (self.saturation_C - self.water_out_C)
        )


@dataclass(frozen=True)
class Water:
    """Water through one shell; c is the mean heat capacity between inlet and outlet."""

    network_bar: float
    flow_kg_s: float
    in_C: float
    out_C: float

    @property
    def heat_kW(self) -> float:
        hot, cold = steam.at(self.network_bar, self.out_C), steam.at(self.network_bar, self.in_C)
        return self.flow_kg_s * (hot.enthalpy - cold.enthalpy)

    @property
    def heat_capacity(self) -> float:
        return self.heat_kW / (self.out_C - self.in_C)

    def warmed_C(self, heat_kW: float) -> float:
        start = steam.at(self.network_bar, self.in_C).enthalpy
        return steam.at_enthalpy(self.network_bar, start + heat_kW / self.flow_kg_s).temperature_C


def drain_state(pressure_bar: float, cooled_C: float | None) -> State:
    """Saturated liquid, or liquid at ``cooled_C`` where that lies below saturation."""
    liquid = steam.saturated(pressure_bar, 0.0)
    if cooled_C is None or cooled_C >= liquid.temperature_C:
        return liquid
    return steam.at(pressure_bar, cooled_C)


def shell(
    water: Water,
    rating: Rating,
    steam_at: Callable[[float], State],
    cooled_C: float | None,
    drained_kg_s: float,
    drained_enthalpy: float,
    loss: float,
) -> Shell:
    """One shell; ``drained_*`` is what cascades in from the hotter ones (0 kg/s when it does not)."""
    heat, c = water.heat_kW, water.heat_capacity

    def at_saturation(saturation_C: float) -> Shell:
        pressure = steam.saturation_pressure(saturation_C)
        exhaust, drain = steam_at(pressure / (1.0 - loss)), drain_state(pressure, cooled_C)
        own = heat - drained_kg_s * (drained_enthalpy - drain.enthalpy)
        flow = own / (exhaust.enthalpy - drain.enthalpy)
        after = water.in_C
        if cooled_C is not None:
            saturated_drain = steam.saturated(pressure, 0.0).enthalpy
            after = water.warmed_C((flow + drained_kg_s) * (saturated_drain - drain.enthalpy))
        return Shell(water.in_C, water.out_C, heat, saturation_C, pressure, exhaust, flow, drain, after, c)

    if rating.terminal_difference_K is not None:
        return at_saturation(water.out_C + rating.terminal_difference_K)
    effectiveness = 1.0 - math.exp(-rating.UA / c)  # heat_capacity is flow times c, kW/K

    def required_C(after_C: float) -> float:
        return after_C + (water.out_C - after_C) / effectiveness

    hottest = required_C(water.in_C)
    if cooled_C is None:
        return at_saturation(hottest)

    def miss(saturation_C: float) -> float:
        return saturation_C - required_C(at_saturation(saturation_C).after_drain_cooler_C)

    return at_saturation(steam.root(miss, water.out_C, hottest + 1e-9))


@dataclass(frozen=True)
class Fixed:
    """What the design point fixed for the tail: phi and design flow of each section, cold to hot."""

    phi: tuple[float, ...]
    flow_kg_s: tuple[float, ...]


@dataclass
class Memory:
    """Where the last solve of the same hour ended: a good place to start the next from, and nothing more."""

    load: float = 1.0
    fractions: tuple[float, ...] | None = None
    flows: tuple[float, ...] | None = None


@dataclass(frozen=True)
class Train:
    shells: tuple[Shell, ...]
    sections: tuple[Section, ...]

    @property
    def flows(self) -> tuple[float, ...]:
        """Flow into the section above each shell but the hottest, kg/s."""
        total, flows = 0.0, []
        for s in self.shells[:-1]:
            total += s.steam_kg_s
            flows.append(total)
        return tuple(flows)

    @property
    def exhaust_kg_s(self) -> float:
        return sum(s.steam_kg_s for s in self.shells)

    def buildable(self) -> bool:
        pressures = [s.pressure_bar for s in self.shells]
        rising = all(cold < hot for cold, hot in pairwise(pressures))
        return rising and all(s.steam_kg_s > 0.0 for s in self.shells)


def train(
    plant: Plant,
    option: Option,
    ratings: tuple[Rating, ...],
    line: MainLine,
    flow_kg_s: float,
    temperatures_C: tuple[float, ...],
    fixed: Fixed | None = None,
    held: bool = False,
    memory: Memory | None = None,
) -> Train:
    """All shells at given water temperatures (return ... supply).

    A tail efficiency or a valve that depends on the section's flow is settled by repetition.
    """
    memory = memory or Memory()
    design = fixed.flow_kg_s if fixed else (1.0,) * (option.stages - 1)
    guess = memory.flows or design
    for _ in range(200):
        valves = fixed if held else None
        found = _once(plant, option, ratings, line, flow_kg_s, temperatures_C, guess, design, valves)
        if fixed is None or option.stages == 1 or (option.tail_part_load.flat and not held):
            return found
        if max(abs(a / b - 1.0) for a, b in zip(found.flows, guess, strict=True)) < 1e-13:
            memory.flows = found.flows
            return found
        guess = found.flows
    raise NoSolution("section flows do not settle")


def _once(plant, option, ratings, line, flow_kg_s, temperatures_C, flows, design, valves) -> Train:
    found: list[Shell] = []  # hot to cold while it grows
    sections: list[Section] = []
    for i in reversed(range(option.stages)):
        water = Water(plant.network_bar, flow_kg_s, temperatures_C[i], temperatures_C[i + 1])
        cooled = water.in_C + option.drain_approach_K if option.subcooled and i > 0 else None
        drained = sum(s.steam_kg_s for s in found) if not option.pumped else 0.0
        drained_enthalpy = found[-1].drain.enthalpy if found else 0.0
        if found:
            needed = (flows[i] / valves.phi[i]) ** 2 if valves else None

            def feeding(p_bar: float, i=i, above=found[-1].steam, needed=needed) -> Section:
                return tail_section(plant, option, above, p_bar, flows[i] / design[i], needed)

            def steam_at(p_bar: float, feeding=feeding) -> State:
                return feeding(p_bar).outlet
        else:
            steam_at = line.at
        new = shell(water, ratings[i], steam_at, cooled, drained, drained_enthalpy, plant.exhaust_loss)
        if found:
            sections.append(feeding(new.steam.pressure_bar))
        found.append(new)
    return Train(tuple(reversed(found)), tuple(reversed(sections)))
