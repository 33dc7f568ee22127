"""Fast steam properties: Chebyshev fits of the direct functions of `steam`, made once per process.

The hourly solve needs some millions of points, and a fit costs a tenth of a library call. The fits agree with
the library to 1e-9 of the value (a test measures it); outside the fitted range the library itself is called,
so a value is never extrapolated. Units as in `steam`: bar, °C, kJ/kg, kJ/(kg K), m3/kg.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from appraise.errors import SolveError
from appraise.numerics import Array, Fit, Fit2
from appraise.steam import (
    enthalpy_pt,
    entropy_pt,
    liquid_enthalpy_p,
    liquid_entropy_p,
    liquid_volume_p,
    saturation_pressure_t,
    saturation_temperature_p,
    superheated_temperature,
    superheated_temperature_ph,
    superheated_temperature_ps,
    vapour_enthalpy_p,
    vapour_entropy_p,
    vapour_volume_p,
    volume_pt,
)

Mask = NDArray[np.bool_]

_LOWEST_BAR, _HIGHEST_BAR = 0.00612, 19.0  # range of the saturation fits


@dataclass(frozen=True, slots=True, eq=False)
class Saturation:
    """Both ends of the dome at a set of pressures; every field has their shape."""

    pressure_bar: Array
    temperature_C: Array
    hf: Array
    hg: Array
    sf: Array
    sg: Array
    vf: Array
    vg: Array


def _dome_rows(p: Array) -> Array:
    functions = (liquid_enthalpy_p, vapour_enthalpy_p, liquid_entropy_p, vapour_entropy_p, liquid_volume_p)
    return np.stack([f(p) for f in functions] + [np.log(vapour_volume_p(p))])


@cache
def _temperature_fit() -> Fit:
    low, high = np.log([_LOWEST_BAR, _HIGHEST_BAR])
    return Fit.of(lambda x: saturation_temperature_p(np.exp(x)), float(low), float(high), 24)


@cache
def _pressure_fit() -> Fit:
    low, high = saturation_temperature_p([_LOWEST_BAR, _HIGHEST_BAR])
    return Fit.of(lambda t: np.log(saturation_pressure_t(t)), float(low), float(high), 24)


@cache
def _dome_fit() -> Fit:
    """hf, hg, sf, sg, vf and ln vg over the saturation temperature."""
    low, high = saturation_temperature_p([_LOWEST_BAR, _HIGHEST_BAR])
    return Fit.of(lambda t: _dome_rows(saturation_pressure_t(t)), float(low), float(high), 24)


def saturation_pressure(temperature_C: Array) -> Array:
    """Fast saturation pressure, bar."""
    fit = _pressure_fit()
    if not fit.covers(temperature_C):
        return saturation_pressure_t(temperature_C)
    return np.asarray(np.exp(fit(temperature_C)[0]))


def saturation(pressure_bar: Array) -> Saturation:
    """Fast saturation state at a pressure: temperature, enthalpies, entropies and volumes of both phases."""
    x = np.log(pressure_bar)
    fit = _temperature_fit()
    t = fit(x)[0] if fit.covers(x) else saturation_temperature_p(pressure_bar)
    return saturation_at(pressure_bar, t)


def saturation_at(pressure_bar: Array, temperature_C: Array) -> Saturation:
    """As `saturation`, where the saturation temperature of that pressure is known already."""
    dome = _dome_fit()
    rows = dome(temperature_C) if dome.covers(temperature_C) else _dome_rows(pressure_bar)
    hf, hg, sf, sg, vf, log_vg = rows
    return Saturation(pressure_bar, temperature_C, hf, hg, sf, sg, vf, np.exp(log_vg))


def _superheated_fit(value: Callable[[Array, Array], Array], span: float, base: str) -> Fit2:
    """Fit a property of superheated steam over ln p and the excess over the saturated vapour."""
    low, high = np.log([0.01, 9.0])

    def function(x: Array, excess: Array) -> Array:
        p = np.exp(x)
        start = vapour_enthalpy_p(p) if base == "H" else vapour_entropy_p(p)
        return value(p, superheated_temperature(p, start + excess, base))

    return Fit2.of(function, (float(low), float(high)), (0.0, span), (22, 36))


@cache
def _entropy_fit() -> Fit2:
    return _superheated_fit(lambda p, t: entropy_pt(p, t) - vapour_entropy_p(p), 700.0, "H")


@cache
def _volume_fit() -> Fit2:
    return _superheated_fit(lambda p, t: np.log(volume_pt(p, t) / vapour_volume_p(p)), 700.0, "H")


@cache
def _enthalpy_fit() -> Fit2:
    return _superheated_fit(lambda p, t: enthalpy_pt(p, t) - vapour_enthalpy_p(p), 1.4, "S")


def _superheated(
    fit: Fit2, direct: Callable[[Array, Array], Array], p: Array, excess: Array, absolute: Array
) -> Array:
    """Value over that of the saturated vapour: by the fit where it reaches, by the library elsewhere."""
    x = np.log(p)
    inside = fit.covers(x, excess)
    if inside.all():
        return fit(x, excess)
    result = np.empty(p.shape)
    result[inside] = fit(x[inside], excess[inside])
    result[~inside] = direct(p[~inside], absolute[~inside])
    return result


def _wet_or_superheated(wet: Array, vapour: Array, superheated: Callable[[Mask], Array], dry: Mask) -> Array:
    """Lever-rule value where wet, vapour plus excess where superheated."""
    if not dry.any():
        return wet
    result = np.asarray(wet).copy()
    result[dry] = vapour[dry] + superheated(dry)
    return result


def enthalpy_ps(at: Saturation, entropy_kJ_kgK: Array) -> Array:
    """Enthalpy at a pressure (given as its saturation state) and entropy, wet or superheated."""
    s = np.broadcast_to(entropy_kJ_kgK, at.hf.shape)
    wet = at.hf + (s - at.sf) / (at.sg - at.sf) * (at.hg - at.hf)

    def superheated(dry: Mask) -> Array:
        p, sg = at.pressure_bar[dry], at.sg[dry]
        return _superheated(
            _enthalpy_fit(),
            lambda p_, s_: enthalpy_pt(p_, superheated_temperature_ps(p_, s_)) - vapour_enthalpy_p(p_),
            p,
            s[dry] - sg,
            s[dry],
        )

    return _wet_or_superheated(wet, at.hg, superheated, ~(s <= at.sg))


def entropy_ph(at: Saturation, enthalpy_kJ_kg: Array) -> Array:
    """Entropy at a pressure (given as its saturation state) and enthalpy, wet or superheated."""
    h = np.broadcast_to(enthalpy_kJ_kg, at.hf.shape)
    wet = at.sf + (h - at.hf) / (at.hg - at.hf) * (at.sg - at.sf)

    def superheated(dry: Mask) -> Array:
        p = at.pressure_bar[dry]
        return _superheated(
            _entropy_fit(),
            lambda p_, h_: entropy_pt(p_, superheated_temperature_ph(p_, h_)) - vapour_entropy_p(p_),
            p,
            h[dry] - at.hg[dry],
            h[dry],
        )

    return _wet_or_superheated(wet, at.sg, superheated, ~(h <= at.hg))


def volume_ph(at: Saturation, enthalpy_kJ_kg: Array) -> Array:
    """Specific volume of the wet mixture or of superheated steam, m3/kg."""
    h = np.broadcast_to(enthalpy_kJ_kg, at.hf.shape)
    wet = at.vf + (h - at.hf) / (at.hg - at.hf) * (at.vg - at.vf)
    dry = np.asarray(~(h <= at.hg))  # not "h > hg": a missing value must reach the library, which is loud
    if not dry.any():
        return wet
    p, excess = at.pressure_bar[dry], h[dry] - at.hg[dry]
    ratio = _superheated(
        _volume_fit(),
        lambda p_, h_: np.log(volume_pt(p_, superheated_temperature_ph(p_, h_)) / vapour_volume_p(p_)),
        p,
        excess,
        h[dry],
    )
    result = np.asarray(wet).copy()
    result[dry] = at.vg[dry] * np.exp(ratio)
    return result


# --- liquid -----------------------------------------------------------------------------------------------


@cache
def _liquid_fits() -> tuple[Fit2, Fit2]:
    """Enthalpy and volume of liquid over temperature and excess of pressure over saturation."""

    def state(t: Array, excess: Array) -> tuple[Array, Array]:
        # At zero excess the library cannot tell liquid from vapour: a hair above saturation it can.
        return saturation_pressure_t(t) * (1 + 1e-9) + excess, t

    ranges = (2.0, 208.0), (0.0, 30.0)
    return (
        Fit2.of(lambda t, e: enthalpy_pt(*state(t, e)), *ranges, (24, 5)),
        Fit2.of(lambda t, e: volume_pt(*state(t, e)), *ranges, (24, 5)),
    )


def _liquid(which: int, pressure_bar: Array, temperature_C: Array) -> Array:
    p, t = np.broadcast_arrays(pressure_bar, temperature_C)
    excess = p - saturation_pressure(t)
    # Rounding may put a saturated drain a hair below its saturation pressure.
    excess = np.where((excess < 0) & (excess > -1e-6 * p), 0.0, excess)
    fit = _liquid_fits()[which]
    inside = fit.covers(t, excess)
    if inside.all():
        return fit(t, excess)
    direct = (enthalpy_pt, volume_pt)[which]
    result = np.empty(t.shape)
    result[inside] = fit(t[inside], excess[inside])
    # A hair above saturation, as in the fit.
    result[~inside] = direct(np.where(excess == 0.0, p * (1 + 1e-9), p)[~inside], t[~inside])
    return result


def liquid_enthalpy(pressure_bar: Array, temperature_C: Array) -> Array:
    """Enthalpy of compressed or just saturated water, kJ/kg."""
    return _liquid(0, pressure_bar, temperature_C)


def liquid_volume(pressure_bar: Array, temperature_C: Array) -> Array:
    """Specific volume of compressed or just saturated water, m3/kg."""
    return _liquid(1, pressure_bar, temperature_C)


@dataclass(frozen=True, slots=True, eq=False)
class NetworkWater:
    """District-heating water at one pressure: h(T), v(T) and T(h), from 0 °C to just below boiling.

    Raises SolveError outside that range.
    """

    pressure_bar: float
    _forward: Fit
    _inverse: Fit

    @classmethod
    def at(cls, pressure_bar: float) -> NetworkWater:
        """Fit the line of one network pressure."""
        return _network_water(pressure_bar)

    def enthalpy(self, temperature_C: Array) -> Array:
        """h(T), kJ/kg."""
        return np.asarray(self._water(self._forward, temperature_C, "temperature, °C")[0])

    def volume(self, temperature_C: Array) -> Array:
        """v(T), m3/kg."""
        return np.asarray(self._water(self._forward, temperature_C, "temperature, °C")[1])

    def temperature(self, enthalpy_kJ_kg: Array) -> Array:
        """T(h), °C."""
        return np.asarray(self._water(self._inverse, enthalpy_kJ_kg, "enthalpy, kJ/kg")[0])

    def _water(self, fit: Fit, x: Array, name: str) -> Array:
        if not fit.covers(x):
            wrong = np.ravel(x)[~((np.ravel(x) >= fit.low) & (np.ravel(x) <= fit.high))][0]
            raise SolveError(
                f"network water at {self.pressure_bar:g} bar: {name} {wrong:g} is not between "
                f"{fit.low:.1f} and {fit.high:.1f}"
            )
        return fit(x)


@cache
def _network_water(pressure_bar: float) -> NetworkWater:
    low, high = 0.0, float(saturation_temperature_p(pressure_bar)) - 0.1
    forward = Fit.of(
        lambda t: np.stack([enthalpy_pt(pressure_bar, t), volume_pt(pressure_bar, t)]), low, high, 24
    )
    ends = forward(np.array([low, high]))[0]

    def temperature(h: Array) -> Array:
        t = low + (h - ends[0]) / (ends[1] - ends[0]) * (high - low)
        for _ in range(30):
            t = t - (forward(t)[0] - h) / 4.2
        return np.asarray(t)

    inverse = Fit.of(temperature, float(ends[0]), float(ends[1]), 24)
    return NetworkWater(pressure_bar, forward, inverse)
