"""What a solve of the cycle is asked, what it iterates, and what it gives."""

from __future__ import annotations

from dataclasses import dataclass, fields, is_dataclass, replace
from typing import Any, NamedTuple, TypeVar

import numpy as np
from numpy.typing import NDArray

from appraise.cycle.energy import Energy
from appraise.cycle.feedwater import BleedLaw, FeedWater
from appraise.cycle.plant import PlantData
from appraise.cycle.shells import Shells, Sizes
from appraise.cycle.stages import Train
from appraise.numerics import Array

Mask = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, eq=False)
class Reference:
    """The baseline's design point, which part load and the cone law refer to."""

    live_steam_kg_s: float
    bleed: BleedLaw


@dataclass(frozen=True, slots=True, eq=False)
class Conditions:
    """What the network asks at each point [point].

    heat_MW : of turbine condensers and flue-gas condenser together.
    network_kg_s : all the water of the network, where peak boilers stand behind the condensers in it; else
        None, and the condensers heat their own share of the water to the supply temperature.
    flue_gas : whether a flue-gas condenser of the plant takes part; it does not at the design point.
    """

    heat_MW: Array
    return_C: Array
    supply_C: Array
    network_kg_s: Array | None = None
    flue_gas: bool = False

    def take(self, index: NDArray[np.intp]) -> Conditions:
        """The chosen points."""
        water = None if self.network_kg_s is None else self.network_kg_s[index]
        return Conditions(
            self.heat_MW[index], self.return_C[index], self.supply_C[index], water, self.flue_gas
        )


class Regime(NamedTuple):
    """Which equations an iteration solves, and for how many unknowns."""

    held: bool
    limited: bool
    on_live_steam: bool
    unknowns: int


@dataclass(frozen=True, slots=True, eq=False)
class Rest:
    """Where the iteration of some points came to rest, for a later one to start from.

    number : of each point, whatever the caller counts, such as hours; rising.
    """

    regime: Regime
    number: NDArray[np.intp]
    state: Array  # [unknown, point]
    inverse: Array  # [unknown, unknown, point]


@dataclass(frozen=True, slots=True, eq=False)
class Task:
    """One option at many points, with what the solve may vary.

    limited : the heat is sought at which the first limit of the plant (live steam, fuel, heat of the turbine
        condensers) is just reached, starting from the heat of the conditions.
    held : the temperatures between the stages are held by valves; else they slide.
    reference : None for the baseline at its own design point, where load is 1 and the bleeds as stated.
    number : of each point, by which rests know it. earlier : where similar points came to rest before.
    """

    plant: PlantData
    train: Train
    sizes: Sizes
    reference: Reference | None
    conditions: Conditions
    on_live_steam: Mask
    limited: bool = False
    held: bool = False
    number: NDArray[np.intp] | None = None
    earlier: tuple[Rest, ...] = ()

    def take(self, index: NDArray[np.intp]) -> Task:
        """The chosen points."""
        number = None if self.number is None else self.number[index]
        return replace(
            self,
            conditions=self.conditions.take(index),
            on_live_steam=self.on_live_steam[index],
            number=number,
        )

    @property
    def sections(self) -> int:
        """Number of tail sections whose size is known: 0 while an option is being sized."""
        return len(self.sizes.section_constant)

    @property
    def cooled(self) -> tuple[int, ...]:
        """Stages with a drain-cooling zone."""
        return tuple(i for i, s in enumerate(self.train.stages) if s.drain_approach_K is not None)

    @property
    def with_flue_gas(self) -> bool:
        """Whether a flue-gas condenser heats the water before the turbine condensers."""
        return self.conditions.flue_gas and self.plant.flue_gas is not None


@dataclass(frozen=True, slots=True, eq=False)
class Layout:
    """Where each unknown stands in the state [unknown, point]; every one is of the order of 1.

    load; shares: temperatures between stages, where they slide; openings: of the valves, where they are held;
    zones: drain-cooling zones; flows: of the sections over design, where their efficiency depends on it;
    heat: factor on the heat asked for; flue_gas: its share of the plant's heat.
    """

    shares: slice
    openings: slice
    zones: slice
    flows: slice
    heat: slice
    flue_gas: slice
    number: int
    load: int = 0

    @classmethod
    def of(cls, task: Task) -> Layout:
        """Lay out the unknowns that this task has."""
        sizes = (
            0 if task.held else task.sections,
            task.sections if task.held else 0,
            len(task.cooled),
            task.sections if task.train.tail.varies else 0,
            int(task.limited),
            int(task.with_flue_gas),
        )
        ends = np.cumsum((1, *sizes)).tolist()
        shares, openings, zones, flows, heat, flue_gas = map(slice, ends[:-1], ends[1:])
        return cls(shares, openings, zones, flows, heat, flue_gas, ends[-1])


@dataclass(frozen=True, slots=True, eq=False)
class Solution:
    """The cycle at each point. `valid` is False where no operation of this option was found.

    conditions.heat_MW is the heat made, below the one asked for where a limit was reached.
    """

    conditions: Conditions
    network_kg_s: Array
    flue_gas_MW: Array
    efficiency: Array  # of the main section
    shells: Shells
    opening: Array  # of the valve before each tail section [stage - 1, point]
    section_share: Array  # flow of each tail section over its design flow; 1 while it is being sized
    condensate_kg_s: Array
    condensate_kJ_kg: Array  # after the condensate pumps, mixed
    condensate_pump_MW: Array  # [stage, point]; all at stage 1 for drains in cascade
    feed: FeedWater
    energy: Energy
    on_live_steam: Mask
    valid: Mask
    rests: tuple[Rest, ...] = ()


Result = TypeVar("Result")


def overlaid(whole: Result, part: Result, index: NDArray[np.intp]) -> Result:
    """A record of arrays [.., point] with the points `index` taken from `part`; tuples of both are joined."""
    changes: dict[str, Any] = {}
    for field in fields(whole):  # type: ignore[arg-type]
        mine, theirs = getattr(whole, field.name), getattr(part, field.name)
        if isinstance(mine, np.ndarray):
            merged = mine.copy()
            merged[..., index] = theirs
            changes[field.name] = merged
        elif is_dataclass(mine):
            changes[field.name] = overlaid(mine, theirs, index)
        elif isinstance(mine, tuple):
            changes[field.name] = (*mine, *theirs)
    return replace(whole, **changes)  # type: ignore[type-var]
