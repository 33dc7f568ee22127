"""District-heating condensers: rating, drains and heat balance. Steam outside the tubes, water inside."""

from __future__ import annotations

import numpy as np

from appraise.numerics import Array


def transfer_units(saturation_C: Array, inlet_C: Array, outlet_C: Array) -> Array:
    """NTU of a condenser from its temperatures: ln((T_sat - T_in)/(T_sat - T_out)), one side condensing."""
    return np.asarray(np.log((saturation_C - inlet_C) / (saturation_C - outlet_C)))


def saturation_from_rating(
    inlet_C: Array, outlet_C: Array, conductance_kW_K: Array, flow_kg_s: Array, heat_capacity: Array
) -> Array:
    """Saturation temperature, °C, that a surface of known UA needs to heat water from inlet to outlet.

    T_sat = T_in + (T_out - T_in)/(1 - exp(-UA/(m c))): effectiveness of a condenser, one side at constant
    temperature. heat_capacity in kJ/(kg K), conductance in kW/K.
    """
    units = conductance_kW_K / (flow_kg_s * heat_capacity)
    return np.asarray(inlet_C + (outlet_C - inlet_C) / -np.expm1(-units))


def part_flow_conductance(design_kW_K: float, flow_ratio: Array, exponent: float) -> Array:
    """UA at another water flow: UA0 (m/m0)^n, kW/K."""
    return np.asarray(design_kW_K * flow_ratio**exponent)


def condensed_steam(
    water_heat_kW: Array, drain_inflow_kg_s: Array, drain_gain_kJ_kg: Array, steam_kJ_kg: Array, drain: Array
) -> Array:
    """Steam a shell condenses, kg/s, beside what the drain from above gives on its way down."""
    return np.asarray((water_heat_kW - drain_inflow_kg_s * drain_gain_kJ_kg) / (steam_kJ_kg - drain))


def log_mean_difference(hot_end_K: Array, cold_end_K: Array) -> Array:
    """Logarithmic mean of two end differences, K. Both must be above 0."""
    hot, cold = np.broadcast_arrays(np.asarray(hot_end_K, float), np.asarray(cold_end_K, float))
    if (hot <= 0).any() or (cold <= 0).any():
        raise ValueError("end temperature differences must be above 0 K")
    ratio = hot / cold
    near = np.abs(ratio - 1.0) < 1e-6
    safe = np.where(near, 2.0, ratio)
    return np.where(near, 0.5 * (hot + cold), cold * (safe - 1.0) / np.log(safe))
