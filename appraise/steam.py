"""Water and steam after IAPWS R7-97(2012), "IAPWS-IF97", through CoolProp. The only module that imports it.

Units everywhere: bar (absolute), °C, kJ/kg, kJ/(kg K), m3/kg. Any shape goes in and the same shape comes out.
A value that is not finite raises SolveError.

These are the direct functions: one library call a point. `steam_fits` has the same ones ten times faster.
"""

from __future__ import annotations

import contextlib
import os
from collections.abc import Iterator

import numpy as np
from numpy.typing import ArrayLike

from appraise.errors import SolveError
from appraise.numerics import Array

# The library then loads in a tenth of the time; IF97 does not use these tables.
os.environ.setdefault("COOLPROP_DISABLE_SUPERANCILLARIES_ENTIRELY", "1")


@contextlib.contextmanager
def _silenced_stdout() -> Iterator[None]:
    """Send what a C library prints while it loads to nowhere: standard output belongs to the user's data."""
    saved = os.dup(1)
    try:
        with open(os.devnull, "w") as nowhere:
            os.dup2(nowhere.fileno(), 1)
        yield
    finally:
        os.dup2(saved, 1)
        os.close(saved)


with _silenced_stdout():
    from CoolProp.CoolProp import PropsSI

_FLUID = "IF97::Water"
_KELVIN = 273.15
_PASCAL = 1e5


def _call(output: str, name1: str, value1: Array, name2: str, value2: Array) -> Array:
    """One array call of the library: SI in and out, flat inside, loud on anything it refuses."""
    first, second = np.broadcast_arrays(value1, value2)
    if first.size == 0:
        return np.zeros(first.shape)
    try:
        flat = np.asarray(PropsSI(output, name1, first.ravel(), name2, second.ravel(), _FLUID))
    except ValueError:  # no element of them has a value
        flat = np.full(first.size, np.nan)
    bad = np.flatnonzero(~np.isfinite(flat))
    if bad.size:
        state = (f"{_shown(name, v.ravel()[bad[0]])}" for name, v in ((name1, first), (name2, second)))
        raise SolveError(
            f"the steam tables (IAPWS-IF97) have no {_WORDS[output]} at {', '.join(state)} "
            f"(element {bad[0]} of {flat.size})"
        )
    return flat.reshape(first.shape)


_WORDS = {
    "T": "temperature",
    "P": "pressure",
    "H": "enthalpy",
    "S": "entropy",
    "D": "density",
    "C": "heat capacity",
}


def _shown(name: str, value: float) -> str:
    """One coordinate of a state, SI, in the units of the house."""
    if name == "Q":
        return "saturation"
    scale, offset, unit = {
        "P": (1 / _PASCAL, 0.0, "bar"),
        "T": (1.0, _KELVIN, "°C"),
        "H": (1e-3, 0.0, "kJ/kg"),
        "S": (1e-3, 0.0, "kJ/(kg K)"),
    }[name]
    return f"{value * scale - offset:g} {unit}"


def saturation_temperature_p(pressure_bar: ArrayLike) -> Array:
    """Saturation temperature, °C. IAPWS-IF97 region 4, equation 31."""
    p = np.asarray(pressure_bar, dtype=float) * _PASCAL
    return _call("T", "P", p, "Q", np.zeros(())) - _KELVIN


def saturation_pressure_t(temperature_C: ArrayLike) -> Array:
    """Saturation pressure, bar. IAPWS-IF97 region 4, equation 30."""
    t = np.asarray(temperature_C, dtype=float) + _KELVIN
    return _call("P", "T", t, "Q", np.zeros(())) / _PASCAL


def _saturated(output: str, pressure_bar: ArrayLike, quality: float) -> Array:
    p = np.asarray(pressure_bar, dtype=float) * _PASCAL
    return _call(output, "P", p, "Q", np.full((), quality))


def liquid_enthalpy_p(pressure_bar: ArrayLike) -> Array:
    """Enthalpy of saturated liquid hf, kJ/kg."""
    return _saturated("H", pressure_bar, 0.0) / 1e3


def vapour_enthalpy_p(pressure_bar: ArrayLike) -> Array:
    """Enthalpy of saturated vapour hg, kJ/kg."""
    return _saturated("H", pressure_bar, 1.0) / 1e3


def liquid_entropy_p(pressure_bar: ArrayLike) -> Array:
    """Entropy of saturated liquid sf, kJ/(kg K)."""
    return _saturated("S", pressure_bar, 0.0) / 1e3


def vapour_entropy_p(pressure_bar: ArrayLike) -> Array:
    """Entropy of saturated vapour sg, kJ/(kg K)."""
    return _saturated("S", pressure_bar, 1.0) / 1e3


def liquid_volume_p(pressure_bar: ArrayLike) -> Array:
    """Specific volume of saturated liquid vf, m3/kg."""
    return np.asarray(1.0 / _saturated("D", pressure_bar, 0.0))


def vapour_volume_p(pressure_bar: ArrayLike) -> Array:
    """Specific volume of saturated vapour vg, m3/kg."""
    return np.asarray(1.0 / _saturated("D", pressure_bar, 1.0))


def _single_phase(output: str, pressure_bar: ArrayLike, temperature_C: ArrayLike) -> Array:
    p = np.asarray(pressure_bar, dtype=float) * _PASCAL
    return _call(output, "P", p, "T", np.asarray(temperature_C, dtype=float) + _KELVIN)


def enthalpy_pt(pressure_bar: ArrayLike, temperature_C: ArrayLike) -> Array:
    """Enthalpy of water (below saturation) or superheated steam, kJ/kg. IAPWS-IF97 equations 7 and 15."""
    return _single_phase("H", pressure_bar, temperature_C) / 1e3


def entropy_pt(pressure_bar: ArrayLike, temperature_C: ArrayLike) -> Array:
    """Entropy of water or superheated steam, kJ/(kg K). IAPWS-IF97 equations 7 and 15."""
    return _single_phase("S", pressure_bar, temperature_C) / 1e3


def volume_pt(pressure_bar: ArrayLike, temperature_C: ArrayLike) -> Array:
    """Specific volume of water or superheated steam, m3/kg. IAPWS-IF97 equations 7 and 15."""
    return np.asarray(1.0 / _single_phase("D", pressure_bar, temperature_C))


def superheated_temperature(pressure_bar: Array, target: Array, of: str) -> Array:
    """Temperature of superheated steam at a given enthalpy (of="H") or entropy (of="S"), °C.

    The library's own inverses are IAPWS-IF97 backward equations, up to 23 mK off; Newton on the forward
    equation from there, with cp (and cp/T) as slope, takes that to rounding.
    """
    p, lowest = pressure_bar, saturation_temperature_p(pressure_bar) + 1e-9
    t = _call("T", "P", p * _PASCAL, of, target * 1e3) - _KELVIN
    forward = enthalpy_pt if of == "H" else entropy_pt
    for _ in range(3):
        t = np.maximum(t, lowest)
        slope = _single_phase("C", p, t) / 1e3
        if of == "S":
            slope = slope / (t + _KELVIN)
        t = t - (forward(p, t) - target) / slope
    return np.maximum(t, lowest)


def superheated_temperature_ph(pressure_bar: ArrayLike, enthalpy_kJ_kg: ArrayLike) -> Array:
    """Temperature of superheated steam from pressure and enthalpy (h at or above hg), °C."""
    p, h = np.broadcast_arrays(np.asarray(pressure_bar, float), np.asarray(enthalpy_kJ_kg, float))
    return superheated_temperature(p, h, "H")


def superheated_temperature_ps(pressure_bar: ArrayLike, entropy_kJ_kgK: ArrayLike) -> Array:
    """Temperature of superheated steam from pressure and entropy (s at or above sg), °C."""
    p, s = np.broadcast_arrays(np.asarray(pressure_bar, float), np.asarray(entropy_kJ_kgK, float))
    return superheated_temperature(p, s, "S")
