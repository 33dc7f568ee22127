"""What one hour of one option comes to, as the solver hands it out."""

from dataclasses import dataclass

from . import steam
from .balance import Balance
from .plain import Plant
from .shells import Train
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


def stages_of(found: Train) -> tuple[StagePoint, ...]:
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


def states_of(plant: Plant, found: Balance) -> dict[str, State]:
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
