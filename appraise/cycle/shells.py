"""One pass through the condensers of an option, from the hottest shell to the coldest.

Each shell sees only its own steam and the drain from above, so one loop serves any number of stages. Arrays
are [stage, point], cold to hot; `water_C` has one row more, the temperatures between the stages.
"""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from appraise.cycle.condensers import condensed_steam, part_flow_conductance, saturation_from_rating
from appraise.cycle.plant import PlantData
from appraise.cycle.stages import Stage, Train
from appraise.cycle.turbine import exhaust_state, main_line_enthalpy, moisture, swallowing, tail_enthalpy
from appraise.numerics import Array
from appraise.steam_fits import Saturation, liquid_enthalpy, saturation, saturation_at, saturation_pressure

_HOTTEST_SHELL_C = 350.0  # saturation at 165.3 bar


@dataclass(frozen=True, slots=True, eq=False)
class Sizes:
    """What the design point fixes for one option.

    conductance_kW_K : per stage; None where the stage is still to be sized (its terminal difference holds).
    section_constant : per tail section, cold to hot: flow over `swallowing`; empty before it is known.
    section_kg_s : design flow of each section; empty before it is known.
    """

    conductance_kW_K: tuple[float | None, ...]
    section_constant: tuple[float, ...]
    section_kg_s: tuple[float, ...]
    network_kg_s: float


@dataclass(frozen=True, slots=True, eq=False)
class Shells:
    """The condensers and the steam that reaches them."""

    water_C: Array  # [stage + 1, point]
    water_kJ_kg: Array  # [stage + 1, point]
    zone_C: Array  # water after the drain-cooling zone [stage, point]
    saturation_C: Array
    shell_bar: Array
    flange_bar: Array
    steam_kJ_kg: Array
    moisture: Array  # at the flange
    saturated_drain_kJ_kg: Array
    saturated_drain_m3_kg: Array
    drain_kJ_kg: Array
    drain_C: Array
    steam_kg_s: Array
    passing: Array  # what each section passes per unit of its constant [stage - 1, point]
    log_slope: Array  # d ln p/dT of saturation [stage, point], 1/K


_ROWS = tuple(f.name for f in fields(Shells) if f.name not in ("water_C", "water_kJ_kg", "passing"))


def _stage_saturation(
    stage: Stage, conductance: float | None, sizes: Sizes, flow: Array, c: Array, zone_C: Array, out_C: Array
) -> Array:
    """Saturation temperature of a stage: from its stated difference, or rated with its surface."""
    if conductance is None:
        assert stage.terminal_difference_K is not None
        return np.asarray(out_C + stage.terminal_difference_K)
    ua = part_flow_conductance(conductance, flow / sizes.network_kg_s, stage.flow_exponent)
    # A surface far too small asks for any temperature; from here on it is above every live steam.
    return np.minimum(saturation_from_rating(zone_C, out_C, ua, flow, c), _HOTTEST_SHELL_C)


def _drain(stage: Stage, shell: Saturation, water_in_C: Array) -> tuple[Array, Array]:
    """Temperature and enthalpy of the drain that leaves a shell."""
    if stage.drain_approach_K is None:
        return shell.temperature_C, shell.hf
    cooled = np.minimum(water_in_C + stage.drain_approach_K, shell.temperature_C)
    enthalpy = np.where(cooled < shell.temperature_C, liquid_enthalpy(shell.pressure_bar, cooled), shell.hf)
    return cooled, enthalpy


def _zone_C(plant: PlantData, stage: Stage, inlet_C: Array, water_kJ_kg: Array, subcooling: Array) -> Array:
    """Water after the drain-cooling zone, at most as hot as the stage makes it.

    water_kJ_kg : before and after the stage [2, point]. subcooling : heat of the drain per kg of water.
    """
    if stage.drain_approach_K is None:
        return inlet_C
    return plant.network.temperature(np.clip(water_kJ_kg[0] + subcooling, *water_kJ_kg))


@dataclass(frozen=True, slots=True, eq=False)
class Throttle:
    """How the steam enters the tail sections [stage - 1, point], cold to hot.

    opening : pressure behind the valve over that before it, 1 for open. flow_share : flow over design flow.
    Either is None where nothing depends on it.
    """

    opening: Array | None
    flow_share: Array | None


def _section_inlet(
    train: Train, above: Saturation, throttle: Throttle, i: int, outlet_bar: Array
) -> Saturation:
    """State of saturation before the blading of section i, behind inlet loss and valve.

    No valve throttles below what stands behind the section, whatever the iteration asks of it.
    """
    kept = 1.0 - train.tail.inlet_loss_share
    if throttle.opening is None:
        return above if kept == 1.0 else saturation(above.pressure_bar * kept)
    return saturation(np.maximum(above.pressure_bar * (kept * throttle.opening[i]), outlet_bar))


def _section_efficiency(train: Train, throttle: Throttle, i: int) -> Array | float:
    if throttle.flow_share is None:
        return train.tail.efficiency * float(train.tail.part_load.at(np.ones(1))[0])
    return np.asarray(train.tail.efficiency * train.tail.part_load.at(throttle.flow_share[i]))


def solve_shells(
    plant: PlantData,
    train: Train,
    sizes: Sizes,
    *,
    network_kg_s: Array,
    water_C: Array,
    zone_C: Array,
    efficiency: Array,
    throttle: Throttle,
) -> Shells:
    """Pressures, expansion and steam flows of all stages for given water temperatures.

    network_kg_s, efficiency (of the main section) : [point]; water_C : [stage + 1, point];
    zone_C : water after each drain-cooling zone [stage, point], like `throttle` from the previous pass.
    """
    number, points = train.number, network_kg_s.size
    water_h = plant.network.enthalpy(water_C)
    rise = np.diff(water_h, axis=0)
    c = rise / np.diff(water_C, axis=0)
    rows = {name: np.empty((number, points)) for name in _ROWS}
    passing = np.zeros((max(number - 1, 0), points))
    above_h = above_drain = inflow = np.zeros(points)
    above: Saturation | None = None
    for i in range(number - 1, -1, -1):
        stage = train.stages[i]
        t_sat = _stage_saturation(
            stage, sizes.conductance_kW_K[i], sizes, network_kg_s, c[i], zone_C[i], water_C[i + 1]
        )
        shell = saturation_at(saturation_pressure(t_sat), t_sat)
        flange = exhaust_state(shell.pressure_bar, plant.exhaust_loss_share)
        if above is None:
            h = main_line_enthalpy(plant.h1, plant.s1, efficiency, flange)
        else:
            inlet = _section_inlet(train, above, throttle, i, flange.pressure_bar)
            passing[i] = swallowing(inlet, above_h, flange.pressure_bar)
            dry = _section_efficiency(train, throttle, i)
            h = tail_enthalpy(inlet, above_h, flange, dry, train.tail.baumann_factor)
        drain_C, drain_h = _drain(stage, shell, water_C[i])
        cascading = np.zeros(points) if train.pumped else inflow
        steam = condensed_steam(network_kg_s * rise[i], cascading, above_drain - drain_h, h, drain_h)
        subcooling = (steam + cascading) * (shell.hf - drain_h) / network_kg_s
        found = {
            "zone_C": _zone_C(plant, stage, water_C[i], water_h[i : i + 2], subcooling),
            "saturation_C": t_sat,
            "shell_bar": shell.pressure_bar,
            "flange_bar": flange.pressure_bar,
            "steam_kJ_kg": h,
            "moisture": moisture(flange, h),
            "saturated_drain_kJ_kg": shell.hf,
            "saturated_drain_m3_kg": shell.vf,
            "drain_kJ_kg": drain_h,
            "drain_C": drain_C,
            "steam_kg_s": steam,
            # Clausius and Clapeyron: dp/dT = (hg - hf)/(T v), the volume of the liquid left out.
            "log_slope": (shell.hg - shell.hf) / ((t_sat + 273.15) * shell.pressure_bar * 100.0 * shell.vg),
        }
        for name, value in found.items():
            rows[name][i] = value
        inflow = inflow + steam
        above, above_h, above_drain = flange, h, drain_h
    return Shells(water_C=water_C, water_kJ_kg=water_h, passing=passing, **rows)
