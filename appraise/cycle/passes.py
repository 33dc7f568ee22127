"""One evaluation of all equations of the cycle at a given state of the iteration."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from appraise.cycle.energy import Energy, energy
from appraise.cycle.feedwater import Bleeds, FeedWater, deaerator_pressure, feed_water, pump_rise
from appraise.cycle.shells import Shells, Throttle, solve_shells
from appraise.cycle.sliding import shares_reached
from appraise.cycle.stages import Train
from appraise.cycle.task import Layout, Task
from appraise.numerics import Array
from appraise.steam_fits import liquid_volume

_HEAT_BOUNDS = (0.02, 20.0)  # of the factor on the heat asked for
_OPENING_BOUNDS = (1e-3, 5.0)  # of the pressure behind a valve over that before it
_FLUE_GAS_BOUNDS = (0.0, 0.8)  # of its share of the plant's heat


@dataclass(frozen=True, slots=True, eq=False)
class Water:
    """The network water on its way through the plant; temperatures [stage + 1, point] between the stages."""

    heat_MW: Array  # of the plant
    flue_gas_MW: Array
    flow_kg_s: Array
    temperature_C: Array

    @property
    def condensing_MW(self) -> Array:
        """Heat of the turbine condensers."""
        return np.asarray(self.heat_MW - self.flue_gas_MW)


@dataclass(frozen=True, slots=True, eq=False)
class Pass:
    """Everything that follows from one state."""

    water: Water
    efficiency: Array
    shells: Shells
    throttle: Throttle
    condensate_kg_s: Array
    condensate_kJ_kg: Array
    condensate_pump_MW: Array
    feed: FeedWater
    load: Array


def design_shares(train: Train) -> Array:
    """Shares of the rise reached after each stage but the hottest [stage - 1, 1]."""
    return np.cumsum([s.share for s in train.stages])[:-1, None]


def heat_factor(layout: Layout, state: Array) -> Array:
    """Factor on the heat asked for, kept in bounds; 1 where no heat is sought [1 or point]."""
    rows = state[layout.heat]
    return np.clip(rows[0], *_HEAT_BOUNDS) if len(rows) else np.ones(1)


def network_water(task: Task, layout: Layout, state: Array) -> Water:
    """Flow and temperatures of the network water.

    The temperatures between the stages share the rise across the turbine condensers: behind a flue-gas
    condenser, and up to their own outlet where peak boilers follow in the same water.
    """
    at, network = task.conditions, task.plant.network
    heat = at.heat_MW * heat_factor(layout, state)
    gas_share = state[layout.flue_gas]
    gas = heat * np.clip(gas_share[0], *_FLUE_GAS_BOUNDS) if len(gas_share) else np.zeros(heat.shape)
    ends = network.enthalpy(np.stack([at.return_C, at.supply_C]))
    flow = heat * 1e3 / (ends[1] - ends[0]) if at.network_kg_s is None else at.network_kg_s
    inlet, outlet = at.return_C, at.supply_C
    if task.with_flue_gas:
        inlet = network.temperature(np.minimum(ends[0] + gas * 1e3 / flow, ends[1]))
    if at.network_kg_s is not None:
        # On its way the iteration may ask for more than the supply; at rest it does not.
        outlet = network.temperature(np.minimum(ends[0] + heat * 1e3 / flow, ends[1]))
    slides = task.sections > 0 and not task.held
    reached = shares_reached(state[layout.shares]) if slides else design_shares(task.train)
    inner = inlet + reached * (outlet - inlet)
    return Water(heat, gas, flow, np.vstack([inlet[None], inner, outlet[None]]))


def evaluate(task: Task, layout: Layout, state: Array) -> Pass:
    """Water, steam and feed at a state [unknown, point]."""
    plant, reference = task.plant, task.reference
    water = network_water(task, layout, state)
    zone_C = water.temperature_C[:-1].copy()
    rise = np.diff(water.temperature_C, axis=0)
    for row, stage in zip(state[layout.zones], task.cooled, strict=True):
        zone_C[stage] += np.clip(row, 0.0, 0.9) * rise[stage]
    efficiency = plant.efficiency_at(state[layout.load])
    throttle = Throttle(
        opening=np.clip(state[layout.openings], *_OPENING_BOUNDS) if task.held else None,
        flow_share=state[layout.flows] if task.train.tail.varies and task.sections else None,
    )
    shells = solve_shells(
        plant,
        task.train,
        task.sizes,
        network_kg_s=water.flow_kg_s,
        water_C=water.temperature_C,
        zone_C=zone_C,
        efficiency=efficiency,
        throttle=throttle,
    )
    condensate = shells.steam_kg_s.sum(axis=0)
    bleeds = _bleeds(task, shells, condensate)
    deaerator_bar = deaerator_pressure(plant, bleeds.deaerator_bar)
    h_c, pump_MW = _condensate(task, shells, deaerator_bar)
    feed = feed_water(
        plant,
        condensate_kg_s=condensate,
        condensate_kJ_kg=h_c,
        bleeds=bleeds,
        deaerator_bar=deaerator_bar,
        efficiency=efficiency,
        on_live_steam=task.on_live_steam,
    )
    steam = feed.live_steam_kg_s
    load = steam / reference.live_steam_kg_s if reference else np.ones(steam.shape)
    return Pass(water, efficiency, shells, throttle, condensate, h_c, pump_MW, feed, load)


def _bleeds(task: Task, shells: Shells, condensate_kg_s: Array) -> Bleeds:
    if task.reference is not None:
        return task.reference.bleed.pressures(shells.flange_bar[-1], condensate_kg_s)
    plant, points = task.plant, condensate_kg_s.shape
    heater = None if plant.heater is None else np.full(points, plant.heater.bleed_bar)
    return Bleeds(np.full(points, plant.bleed_bar), heater)


def _condensate(task: Task, shells: Shells, deaerator_bar: Array) -> tuple[Array, Array]:
    """Mixed enthalpy after the condensate pumps, kJ/kg [point], and their work, MW [stage, point]."""
    plant = task.plant
    total = shells.steam_kg_s.sum(axis=0)
    drawn = shells.steam_kg_s if task.train.pumped else total[None]
    last = slice(None) if task.train.pumped else slice(0, 1)
    volume = shells.saturated_drain_m3_kg[last].copy()
    for stage in task.cooled if task.train.pumped else ():
        volume[stage] = liquid_volume(shells.shell_bar[stage], shells.drain_C[stage])
    rise = pump_rise(volume, deaerator_bar - shells.shell_bar[last], plant.pump_efficiency)
    mixed = (drawn * (shells.drain_kJ_kg[last] + rise)).sum(axis=0) / total
    work = np.zeros(shells.steam_kg_s.shape)
    work[last] = drawn * rise / 1e3
    return mixed, work


def energy_of(task: Task, now: Pass) -> Energy:
    """Power and fuel of a pass."""
    return energy(
        task.plant,
        task.train,
        design_kg_s=task.sizes.network_kg_s,
        load=now.load,
        condensing_MW=now.water.condensing_MW,
        network_kg_s=now.water.flow_kg_s,
        condensate_kg_s=now.condensate_kg_s,
        condensate_pump_MW=now.condensate_pump_MW,
        feed=now.feed,
        shells=now.shells,
    )
