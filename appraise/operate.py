"""One option through the hours of a year, as far as its own equations and the plant's limits go."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from appraise.cycle.design import Design, OptionDesign
from appraise.cycle.solve import solve
from appraise.cycle.task import Conditions, Mask, Rest, Solution, Task, overlaid
from appraise.cycle.turbine import exhaust_state
from appraise.demand import Demand
from appraise.numerics import Array
from appraise.steam_fits import volume_ph

# Where demand is this far above what the limits allow at the design point, the solve starts from here.
_FAR_ABOVE_LIMIT = 1.6
_AT_LIMIT = 1.0 - 1e-8


@dataclass(frozen=True, slots=True, eq=False)
class Run:
    """What the solve gives for the hours it was asked for; every array but `hour` is [.., point].

    hour : which hour of the series each point is. solution : at the demand, or at the plant's limit.
    """

    hour: NDArray[np.intp]
    solution: Solution
    at_steam_limit: Mask
    at_heat_limit: Mask
    at_fuel_limit: Mask


def operate(
    made: Design, option: OptionDesign, asked: Demand, wanted: Mask, earlier: tuple[Rest, ...] = ()
) -> Run:
    """Solve the wanted hours: at the demand, and at the first limit of the plant where that is less.

    earlier : where a similar option came to rest in these hours.
    """
    plant, hour = made.plant, np.flatnonzero(wanted)
    heat = asked.heat_MW[hour]
    start = np.minimum(heat, _FAR_ABOVE_LIMIT * _limit_at_design(made))
    task = Task(
        plant,
        option.train,
        option.sizes,
        made.reference,
        _conditions(made, asked, hour, start),
        np.zeros(hour.size, dtype=bool),
        number=hour,
        earlier=earlier,
    )
    solution = solve(task)
    over = np.flatnonzero((_use(made, solution) > 1.0).any(axis=0) | (start < heat))
    if over.size:
        solution = overlaid(solution, solve(replace(task.take(over), limited=True)), over)
    limited = np.zeros(hour.size, dtype=bool)
    limited[over] = True
    steam, fuel, condensing = (_use(made, solution) >= _AT_LIMIT) & limited
    return Run(hour, solution, steam, condensing, fuel)


def _conditions(made: Design, asked: Demand, hour: NDArray[np.intp], heat: Array) -> Conditions:
    supply, back = asked.supply_C[hour], asked.return_C[hour]
    water = None
    if made.plant.series:
        ends = made.plant.network.enthalpy(np.stack([back, supply]))
        water = asked.heat_MW[hour] * 1e3 / (ends[1] - ends[0])
    return Conditions(heat, back, supply, water, flue_gas=True)


def _use(made: Design, at: Solution) -> Array:
    """Live steam, fuel and heat of the turbine condensers over their limits [3, point]."""
    plant = made.plant
    condensing = at.conditions.heat_MW - at.flue_gas_MW
    return np.stack(
        [
            at.feed.live_steam_kg_s / plant.max_kg_s,
            at.energy.fuel_MW / plant.max_fuel_MW,
            condensing / plant.max_heat_MW,
        ]
    )


def _limit_at_design(made: Design) -> float:
    """Heat that the limits would allow if everything grew in proportion from the design point, MW."""
    use = float(_use(made, made.baseline.solution).max())
    return float(made.conditions.heat_MW[0]) / use


def least_heat(made: Design, share: float) -> float:
    """Heat at which live steam would be `share` of its minimum if all went in proportion, MW."""
    steam = float(made.baseline.solution.feed.live_steam_kg_s[0])
    return share * made.plant.min_kg_s / steam * float(made.conditions.heat_MW[0])


@dataclass(frozen=True, slots=True, eq=False)
class StageRows:
    """What decides on sizes, by stage from the cold end [stage, point].

    `section_MW` is the shaft power of the tail section that exhausts into the stage, 0 for the hottest;
    `condensate_pump_MW` is at stage 1 for drains in cascade.
    """

    heat_MW: Array
    moisture: Array
    exhaust_m3_s: Array
    steam_kg_s: Array
    section_MW: Array
    condensate_pump_MW: Array
    network_pump_MW: Array


def stage_rows(made: Design, at: Solution) -> StageRows:
    """What decides on the sizes of stages at each point."""
    shells = at.shells
    flange = exhaust_state(shells.shell_bar, made.plant.exhaust_loss_share)
    return StageRows(
        heat_MW=at.network_kg_s * np.diff(shells.water_kJ_kg, axis=0) / 1e3,
        moisture=shells.moisture,
        exhaust_m3_s=np.cumsum(shells.steam_kg_s, axis=0) * volume_ph(flange, shells.steam_kJ_kg),
        steam_kg_s=shells.steam_kg_s,
        section_MW=at.energy.section_MW,
        condensate_pump_MW=at.condensate_pump_MW,
        network_pump_MW=at.energy.network_pump_MW,
    )
