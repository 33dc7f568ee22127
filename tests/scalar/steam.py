"""Water and steam at one state, IAPWS-IF97: forward equations only, inverted with Brent's method.

Units: bar, degrees C, kJ/kg, kJ/kgK, m3/kg.
"""

import os
import sys
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache

from scipy.optimize import brentq

os.environ["COOLPROP_DISABLE_SUPERANCILLARIES_ENTIRELY"] = "1"


def _quiet_backend():
    """The IF97 backend, built while the C library's greeting on standard output goes nowhere."""
    sys.stdout.flush()
    kept, nowhere = os.dup(1), os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, 1)
    try:
        import CoolProp.CoolProp as coolprop

        return coolprop, coolprop.AbstractState("IF97", "Water")
    finally:
        os.dup2(kept, 1)
        os.close(kept)
        os.close(nowhere)


_coolprop, _backend = _quiet_backend()

_KELVIN = 273.15
_HOTTEST_C = 799.9  # upper end of region 2 is 1073.15 K


@dataclass(frozen=True)
class State:
    """One state; ``quality`` is None outside the dome."""

    pressure_bar: float
    temperature_C: float
    enthalpy: float
    entropy: float
    volume: float
    quality: float | None = None

    @property
    def moisture(self) -> float:
        """Liquid share y = max(0, 1 - x); zero for superheated steam."""
        return 0.0 if self.quality is None else max(0.0, 1.0 - self.quality)


def _read(quality: float | None) -> State:
    return State(
        _backend.p() / 1e5,
        _backend.T() - _KELVIN,
        _backend.hmass() / 1e3,
        _backend.smass() / 1e3,
        1.0 / _backend.rhomass(),
        quality,
    )


@lru_cache(maxsize=20_000)
def saturated(pressure_bar: float, quality: float) -> State:
    """Saturated liquid (quality 0) or vapour (quality 1) at a pressure."""
    _backend.update(_coolprop.PQ_INPUTS, pressure_bar * 1e5, quality)
    return _read(quality)


def saturation_temperature(pressure_bar: float) -> float:
    return saturated(pressure_bar, 0.0).temperature_C


def saturation_pressure(temperature_C: float) -> float:
    _backend.update(_coolprop.QT_INPUTS, 0.0, temperature_C + _KELVIN)
    return _backend.p() / 1e5


def at(pressure_bar: float, temperature_C: float) -> State:
    """Single-phase state; on the saturation line itself the backend answers with the liquid."""
    _backend.update(_coolprop.PT_INPUTS, pressure_bar * 1e5, temperature_C + _KELVIN)
    return _read(None)


def _wet(liquid: State, vapour: State, quality: float) -> State:
    def lever(name: str) -> float:
        low = getattr(liquid, name)
        return low + quality * (getattr(vapour, name) - low)

    return State(
        liquid.pressure_bar,
        liquid.temperature_C,
        lever("enthalpy"),
        lever("entropy"),
        lever("volume"),
        quality,
    )


def _from(name: str, pressure_bar: float, value: float) -> State:
    """State at a pressure with the given enthalpy or entropy, in whichever phase that falls."""
    liquid, vapour = saturated(pressure_bar, 0.0), saturated(pressure_bar, 1.0)
    low, high = getattr(liquid, name), getattr(vapour, name)
    if low <= value <= high:
        return _wet(liquid, vapour, (value - low) / (high - low))
    edge = liquid.temperature_C

    def miss(temperature_C: float) -> float:
        # the saturation line belongs to two phases: give the bracket the phase it lies in
        if temperature_C == edge:
            return (low if value < low else high) - value
        return getattr(at(pressure_bar, temperature_C), name) - value

    bracket = (0.01, edge) if value < low else (edge, _HOTTEST_C)
    return at(pressure_bar, root(miss, *bracket))


def at_enthalpy(pressure_bar: float, enthalpy: float) -> State:
    return _from("enthalpy", pressure_bar, enthalpy)


def at_entropy(pressure_bar: float, entropy: float) -> State:
    return _from("entropy", pressure_bar, entropy)


def root(function: Callable[[float], float], low: float, high: float, relative: float = 8.9e-16) -> float:
    """Brent's method, to the last digits a double has unless told otherwise."""
    return brentq(function, low, high, xtol=1e-13, rtol=relative, maxiter=200)
