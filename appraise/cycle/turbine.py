"""Expansion, moisture, bleed pressure and swallowing. Elementwise on arrays of any shape."""

from __future__ import annotations

import numpy as np

from appraise.numerics import Array
from appraise.steam import (
    enthalpy_pt,
    entropy_pt,
)
from appraise.steam_fits import Saturation, enthalpy_ps, entropy_ph, saturation, volume_ph

_HIGHEST_FLANGE_BAR = 210.0


def live_steam(pressure_bar: float, temperature_C: float) -> tuple[float, float]:
    """Enthalpy, kJ/kg, and entropy, kJ/(kg K), at the stop valve."""
    return float(enthalpy_pt(pressure_bar, temperature_C)), float(entropy_pt(pressure_bar, temperature_C))


def flange_pressure(shell_bar: Array, exhaust_loss_share: float) -> Array:
    """Pressure at the exhaust flange, bar, above that in the shell by the exhaust loss."""
    return np.asarray(shell_bar / (1.0 - exhaust_loss_share))


def main_line_enthalpy(h1: float, s1: float, efficiency: Array, at: Saturation) -> Array:
    """Enthalpy on the main section's expansion line: h1 less efficiency times the isentropic drop."""
    return np.asarray(h1 - efficiency * (h1 - enthalpy_ps(at, np.asarray(s1))))


def moisture(at: Saturation, enthalpy_kJ_kg: Array) -> Array:
    """Liquid share y = max(0, 1 - x) of steam at a pressure and enthalpy."""
    return np.asarray(np.maximum(0.0, (at.hg - enthalpy_kJ_kg) / (at.hg - at.hf)))


def tail_enthalpy(
    inlet: Saturation, h_in: Array, outlet: Saturation, efficiency: Array | float, baumann_factor: float
) -> Array:
    """Outlet enthalpy of a tail section whose dry efficiency suffers by mean moisture (Baumann's rule).

    h = h_in - eta (1 - a (y_in + y_out)/2) dh_s with y_out of the outlet itself, in closed form.
    """
    drop = h_in - enthalpy_ps(outlet, entropy_ph(inlet, h_in))
    latent = outlet.hg - outlet.hf
    k = 0.5 * efficiency * drop * baumann_factor
    dry = h_in - efficiency * drop * (1.0 - 0.5 * baumann_factor * moisture(inlet, h_in))
    return np.where(dry >= outlet.hg, dry, (dry * latent + k * outlet.hg) / (latent + k))


def bleed_pressure(
    exhaust_bar: Array, flow_ratio: Array, design_bleed_bar: float, design_exhaust_bar: float
) -> Array:
    """Bleed pressure, bar, by the cone law (Stodola): p² = p_exhaust² + (M/M0)² (p0² - p_exhaust,0²)."""
    span = design_bleed_bar**2 - design_exhaust_bar**2
    return np.asarray(np.sqrt(exhaust_bar**2 + flow_ratio**2 * span))


def swallowing(inlet: Saturation, h_in: Array, outlet_bar: Array) -> Array:
    """Flow that a section passes per unit of its constant (Stodola's ellipse in p and v).

    sqrt(p_in/v_in (1 - (p_out/p_in)²)); 0 where the outlet pressure is not below the inlet's.
    """
    ratio = np.minimum(outlet_bar / inlet.pressure_bar, 1.0)
    return np.asarray(np.sqrt(inlet.pressure_bar / volume_ph(inlet, h_in) * (1.0 - ratio * ratio)))


def exhaust_state(shell_bar: Array, exhaust_loss_share: float) -> Saturation:
    """Saturation state at the flange above a shell.

    The iteration may pass by pressures that no steam table has; from here on they are above every live steam.
    """
    return saturation(np.minimum(flange_pressure(shell_bar, exhaust_loss_share), _HIGHEST_FLANGE_BAR))
