"""The plant around the condensers as numbers: what every option shares."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from appraise.case.fields import Curve
from appraise.case.load import Case
from appraise.cycle.turbine import live_steam
from appraise.numerics import Array
from appraise.steam import liquid_enthalpy_p
from appraise.steam_fits import NetworkWater


@dataclass(frozen=True, slots=True)
class HeaterData:
    """High-pressure feed heater on its own bleed; the pressure is that at the design point."""

    bleed_bar: float
    terminal_difference_K: float


@dataclass(frozen=True, slots=True)
class FlueGasData:
    """Flue-gas condenser: heat per fuel at a return temperature, falling with warmer return."""

    heat_per_fuel: float
    at_return_C: float
    slope_per_K: float

    def heat_per_fuel_at(self, return_C: Array) -> Array:
        """Heat over fuel at a network return temperature, never below 0."""
        return np.maximum(0.0, self.heat_per_fuel - self.slope_per_K * (return_C - self.at_return_C))


@dataclass(frozen=True, slots=True, eq=False)
class PlantData:
    """Constants of the plant, in the units of the names; enthalpies in kJ/kg, flows in kg/s.

    Limits are infinite where the case sets none.
    """

    h1: float
    s1: float
    max_kg_s: float
    min_kg_s: float
    max_fuel_MW: float
    main_efficiency: float
    part_load: Curve
    mechanical_efficiency: float
    generator_efficiency: float
    generator_limit_MW: float
    exhaust_loss_share: float
    boiler_efficiency: Curve
    boiler_bar: float
    boiler_hf: float  # saturated liquid at boiler pressure: what the blowdown carries away
    blowdown_share: float
    makeup_C: float
    deaerator_bar: float
    deaerator_slides: bool
    deaerator_minimum_bar: float
    bleed_bar: float
    heater: HeaterData | None
    pump_efficiency: float
    existing_difference_K: float
    max_heat_MW: float
    auxiliary_MW: float
    flue_gas: FlueGasData | None
    series: bool  # peak boilers behind the condensers in the same water
    network: NetworkWater
    network_pump_efficiency: float

    def efficiency_at(self, load: Array) -> Array:
        """Isentropic efficiency of the main section at part load."""
        return np.asarray(self.main_efficiency * self.part_load.at(load))


def _limit(value: float | None) -> float:
    return np.inf if value is None else value


def plant_data(case: Case) -> PlantData:
    """Read the plant's constants off the case."""
    p = case.plant
    h1, s1 = live_steam(p.live_steam.pressure_bar, p.live_steam.temperature_C)
    heater, gas = p.feed.heater, p.flue_gas_condenser
    return PlantData(
        h1=h1,
        s1=s1,
        max_kg_s=p.live_steam.max_kg_s,
        min_kg_s=p.live_steam.min_kg_s,
        max_fuel_MW=_limit(p.boiler.max_fuel_MW),
        main_efficiency=p.turbine.efficiency,
        part_load=p.turbine.part_load,
        mechanical_efficiency=p.turbine.mechanical_efficiency,
        generator_efficiency=p.turbine.generator_efficiency,
        generator_limit_MW=_limit(p.turbine.generator_limit_MW),
        exhaust_loss_share=p.turbine.exhaust_loss_share,
        boiler_efficiency=p.boiler.efficiency,
        boiler_bar=p.boiler.pressure_bar,
        boiler_hf=float(liquid_enthalpy_p(p.boiler.pressure_bar)),
        blowdown_share=p.boiler.blowdown_share,
        makeup_C=p.boiler.makeup_C,
        deaerator_bar=p.feed.deaerator_bar,
        deaerator_slides=p.feed.deaerator_control == "sliding",
        deaerator_minimum_bar=p.feed.deaerator_minimum_bar,
        bleed_bar=p.feed.bleed_bar,
        heater=None if heater is None else HeaterData(heater.bleed_bar, heater.terminal_difference_K),
        pump_efficiency=p.feed.pump_efficiency,
        existing_difference_K=p.condenser.terminal_difference_K,
        max_heat_MW=_limit(p.condenser.max_heat_MW),
        auxiliary_MW=p.auxiliary_MW,
        flue_gas=None if gas is None else FlueGasData(gas.heat_per_fuel, gas.at_return_C, gas.slope_per_K),
        series=p.peak_boiler.connection == "series",
        network=NetworkWater.at(case.network.pressure_bar),
        network_pump_efficiency=case.network.pump_efficiency,
    )
