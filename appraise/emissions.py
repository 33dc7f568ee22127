"""Stack CO2, the change with displaced grid power, and primary energy saving of cogeneration."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from appraise.numerics import Array

if TYPE_CHECKING:
    from appraise.case.load import Case

HIGH_EFFICIENCY_SAVING = 0.10
"""Least saving of high-efficiency cogeneration of 1 MW electric and more: Directive 2012/27/EU, Annex II."""


@dataclass(frozen=True, slots=True, eq=False)
class CarbonChange:
    """An option's change against the baseline, tonnes of CO2; positive is more. Any shape.

    stack : plant and peak boilers together. displaced : grid emissions the extra net power displaces.
    with_displaced : stack less displaced. The grid factor is a stated one, not measured at the plant.
    """

    stack: Array
    displaced: Array
    with_displaced: Array


def stack_co2_t(case: Case, fuel_MWh: ArrayLike, peak_fuel_MWh: ArrayLike) -> Array:
    """Stack CO2 of plant and peak fuel in tonnes; any shape, increments too."""
    plant, peak = case.plant.boiler.co2_kg_per_MWh, case.plant.peak_boiler.co2_kg_per_MWh
    return np.asarray((np.asarray(fuel_MWh) * plant + np.asarray(peak_fuel_MWh) * peak) / 1000.0)


def carbon_change(
    case: Case, power_MWh: ArrayLike, fuel_MWh: ArrayLike, peak_fuel_MWh: ArrayLike
) -> CarbonChange:
    """Change of CO2 from an option's extra net power, extra plant fuel and extra peak fuel, any shape."""
    stack = stack_co2_t(case, fuel_MWh, peak_fuel_MWh)
    displaced = np.asarray(np.asarray(power_MWh) * case.emissions.grid_kg_per_MWh / 1000.0)
    return CarbonChange(stack, displaced, np.asarray(stack - displaced))


def primary_energy_saving(
    heat_efficiency: ArrayLike,
    power_efficiency: ArrayLike,
    heat_reference: ArrayLike,
    power_reference: ArrayLike,
) -> Array:
    """Primary energy saving as a share of the fuel of separate production; any shape.

    PES = 1 − 1/(η_heat/η_ref,heat + η_power/η_ref,power), efficiencies over the year and on gross power.
    Source: Directive 2012/27/EU, Annex II (b).
    """
    separate = np.asarray(heat_efficiency) / heat_reference + np.asarray(power_efficiency) / power_reference
    return np.asarray(1.0 - 1.0 / separate)


def plant_saving(case: Case, heat_MWh: float, power_gross_MWh: float, fuel_MWh: float) -> float | None:
    """Primary energy saving of one year of the plant without peak boilers; None where it does not run.

    All power counts as cogenerated, as it does for a back-pressure turbine at 75 % total efficiency and more:
    Directive 2012/27/EU, Annex I.
    """
    if fuel_MWh <= 0.0 or heat_MWh + power_gross_MWh <= 0.0:
        return None
    reference = case.emissions
    saving = primary_energy_saving(
        heat_MWh / fuel_MWh, power_gross_MWh / fuel_MWh, reference.heat_reference, reference.power_reference
    )
    return float(saving)


def is_high_efficiency(saving: float) -> bool:
    """Whether a saving reaches the 10 % of high-efficiency cogeneration."""
    return saving >= HIGH_EFFICIENCY_SAVING
