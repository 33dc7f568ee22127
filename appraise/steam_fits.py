"""Fast steam properties: Chebyshev fits of the direct functions of `steam`, made once per process.

The hourly solve needs some millions of points, and a fit costs a tenth of a library call. The fits agree with
the library to 1e-9 of the value (a test measures it); outside the fitted ranges the library itself is
called, so a value is never extrapolated. Exhausts lie in the first range of a property, bleeds at higher
pressure in the later ones, each fitted when a point first falls into it. Units as in `steam`: bar, °C, kJ/kg,
kJ/(kg K), m3/kg.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache, partial

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
    vapour_enthalpy_p,
    vapour_entropy_p,
    vapour_volume_p,
    volume_pt,
)

Mask = NDArray[np.bool_]

Property = Callable[[Array, Array], Array]
Rectangles = tuple[tuple[tuple[float, float], tuple[float, float]], ...]

# Up to 165.2 bar, because above 165.29 IAPWS-IF97 has another equation for the vapour. The two overlap a
# little, so that rounding leaves no point between them.
_SATURATED_BAR = ((0.00612, 19.0), (18.999, 165.2))


def _superheated(spans: tuple[float, float, float]) -> Rectangles:
    """Ranges of ln p and of the excess over the saturated vapour."""
    edges = [float(x) for x in np.log([0.01, 9.0, 60.0, 165.2])]
    return tuple(((edges[i], edges[i + 1]), (0.0, span)) for i, span in enumerate(spans))


# The excess goes to 620 °C, the hottest live steam, in the two ranges of high pressure.
_SUPERHEATED = {"H": _superheated((700.0, 975.0, 1065.0)), "S": _superheated((1.4, 1.52, 1.48))}
_SUPERHEATED_TERMS = ((22, 36), (16, 30), (16, 30))
# Liquid: temperature and excess of pressure over saturation, to the boiler's greatest.
_LIQUID: Rectangles = (
    ((2.0, 208.0), (0.0, 30.0)),
    ((2.0, 208.0), (0.0, 200.0)),
    ((208.0, 349.0), (0.0, 200.0)),
)
_LIQUID_TERMS = ((24, 5), (24, 8), (28, 16))


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
def _temperature_fit(number: int) -> Fit:
    low, high = np.log(_SATURATED_BAR[number])
    return Fit.of(lambda x: saturation_temperature_p(np.exp(x)), float(low), float(high), 24)


@cache
def _pressure_fit(number: int) -> Fit:
    low, high = saturation_temperature_p(_SATURATED_BAR[number])
    return Fit.of(lambda t: np.log(saturation_pressure_t(t)), float(low), float(high), 24)


@cache
def _dome_fit(number: int) -> Fit:
    """hf, hg, sf, sg, vf and ln vg over the saturation temperature."""
    low, high = saturation_temperature_p(_SATURATED_BAR[number])
    return Fit.of(lambda t: _dome_rows(saturation_pressure_t(t)), float(low), float(high), 24)


def _saturated(fits: Callable[[int], Fit], x: Array, direct: Callable[[Mask], Array]) -> Array:
    """Values [function, *shape of x] by the fit that reaches a point, by the library where none does."""
    fit = fits(0)
    if fit.covers(x):
        return fit(x)
    outside, above = ~((x >= fit.low) & (x <= fit.high)), fits(1)
    rows = fit(np.where(outside, fit.low, x))
    upper = outside & (x >= above.low) & (x <= above.high)
    if upper.any():
        rows[:, upper] = above(x[upper])
    beyond = np.asarray(outside & ~upper)
    if beyond.any():
        rows[:, beyond] = direct(beyond)
    return rows


def saturation_pressure(temperature_C: Array) -> Array:
    """Fast saturation pressure, bar."""
    rows = _saturated(
        _pressure_fit, temperature_C, lambda out: np.log(saturation_pressure_t(temperature_C[out]))
    )
    return np.asarray(np.exp(rows[0]))


def saturation(pressure_bar: Array) -> Saturation:
    """Fast saturation state at a pressure: temperature, enthalpies, entropies and volumes of both phases."""
    x = np.log(pressure_bar)
    rows = _saturated(_temperature_fit, x, lambda out: saturation_temperature_p(pressure_bar[out]))
    return saturation_at(pressure_bar, rows[0])


def saturation_at(pressure_bar: Array, temperature_C: Array) -> Saturation:
    """As `saturation`, where the saturation temperature of that pressure is known already."""
    rows = _saturated(_dome_fit, temperature_C, lambda out: _dome_rows(pressure_bar[out]))
    hf, hg, sf, sg, vf, log_vg = rows
    return Saturation(pressure_bar, temperature_C, hf, hg, sf, sg, vf, np.exp(log_vg))


def _by_range(
    fits: Callable[[int], Fit2], rectangles: Rectangles, x: Array, y: Array, direct: Callable[[Mask], Array]
) -> Array:
    """Values by the first fit that reaches a point, by the library where none does."""
    left = ~fits(0).covers(x, y)
    if not left.any():
        return fits(0)(x, y)
    result = np.empty(x.shape)
    result[~left] = fits(0)(x[~left], y[~left])
    for number, ((left_x, right_x), (low_y, high_y)) in enumerate(rectangles[1:], 1):
        here = left & (x >= left_x) & (x <= right_x) & (y >= low_y) & (y <= high_y)
        if here.any():
            result[here] = fits(number)(x[here], y[here])
            left &= ~here
    if left.any():
        result[left] = direct(left)
    return result


def _entropy_rise(p: Array, t: Array) -> Array:
    return entropy_pt(p, t) - vapour_entropy_p(p)


def _enthalpy_rise(p: Array, t: Array) -> Array:
    return enthalpy_pt(p, t) - vapour_enthalpy_p(p)


def _volume_rise(p: Array, t: Array) -> Array:
    return np.asarray(np.log(volume_pt(p, t) / vapour_volume_p(p)))


@cache
def _superheated_fit(rise: Property, base: str, number: int) -> Fit2:
    """What a property rises over that of the saturated vapour, over ln p and the excess in h or s (base)."""

    def function(x: Array, excess: Array) -> Array:
        p = np.exp(x)
        start = vapour_enthalpy_p(p) if base == "H" else vapour_entropy_p(p)
        return rise(p, superheated_temperature(p, start + excess, base))

    return Fit2.of(function, *_SUPERHEATED[base][number], _SUPERHEATED_TERMS[number])


def _over_vapour(rise: Property, base: str, p: Array, value: Array, of_vapour: Array) -> Array:
    """Rise of a property of superheated steam at pressure and enthalpy or entropy."""

    def direct(out: Mask) -> Array:
        return rise(p[out], superheated_temperature(p[out], value[out], base))

    fits = partial(_superheated_fit, rise, base)
    return _by_range(fits, _SUPERHEATED[base], np.log(p), value - of_vapour, direct)


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
        return _over_vapour(_enthalpy_rise, "S", at.pressure_bar[dry], s[dry], at.sg[dry])

    return _wet_or_superheated(wet, at.hg, superheated, ~(s <= at.sg))


def entropy_ph(at: Saturation, enthalpy_kJ_kg: Array) -> Array:
    """Entropy at a pressure (given as its saturation state) and enthalpy, wet or superheated."""
    h = np.broadcast_to(enthalpy_kJ_kg, at.hf.shape)
    wet = at.sf + (h - at.hf) / (at.hg - at.hf) * (at.sg - at.sf)

    def superheated(dry: Mask) -> Array:
        return _over_vapour(_entropy_rise, "H", at.pressure_bar[dry], h[dry], at.hg[dry])

    return _wet_or_superheated(wet, at.sg, superheated, ~(h <= at.hg))


def volume_ph(at: Saturation, enthalpy_kJ_kg: Array) -> Array:
    """Specific volume of the wet mixture or of superheated steam, m3/kg."""
    h = np.broadcast_to(enthalpy_kJ_kg, at.hf.shape)
    wet = at.vf + (h - at.hf) / (at.hg - at.hf) * (at.vg - at.vf)
    dry = np.asarray(~(h <= at.hg))  # not "h > hg": a missing value must reach the library, which is loud
    if not dry.any():
        return wet
    result = np.asarray(wet).copy()
    rise = _over_vapour(_volume_rise, "H", at.pressure_bar[dry], h[dry], at.hg[dry])
    result[dry] = at.vg[dry] * np.exp(rise)
    return result


# --- liquid -----------------------------------------------------------------------------------------------


@cache
def _liquid_fit(library: Property, number: int) -> Fit2:
    """A property of liquid over temperature and excess of pressure over saturation."""

    def function(t: Array, excess: Array) -> Array:
        # At zero excess the library cannot tell liquid from vapour: a hair above saturation it can.
        return library(saturation_pressure_t(t) * (1 + 1e-9) + excess, t)

    return Fit2.of(function, *_LIQUID[number], _LIQUID_TERMS[number])


def _liquid(library: Property, pressure_bar: Array, temperature_C: Array) -> Array:
    p, t = np.broadcast_arrays(pressure_bar, temperature_C)
    excess = p - saturation_pressure(t)
    # Rounding may put a saturated drain a hair below its saturation pressure.
    excess = np.where((excess < 0) & (excess > -1e-6 * p), 0.0, excess)

    def direct(out: Mask) -> Array:
        # A hair above saturation, as in the fit.
        return library(np.where(excess == 0.0, p * (1 + 1e-9), p)[out], t[out])

    return _by_range(partial(_liquid_fit, library), _LIQUID, t, excess, direct)


def liquid_enthalpy(pressure_bar: Array, temperature_C: Array) -> Array:
    """Enthalpy of compressed or just saturated water, kJ/kg."""
    return _liquid(enthalpy_pt, pressure_bar, temperature_C)


def liquid_volume(pressure_bar: Array, temperature_C: Array) -> Array:
    """Specific volume of compressed or just saturated water, m3/kg."""
    return _liquid(volume_pt, pressure_bar, temperature_C)


@dataclass(frozen=True, slots=True, eq=False)
class NetworkWater:
    """District-heating water at one pressure: h(T), v(T) and T(h), from 0 °C to just below boiling.

    Raises SolveError outside that range.
    """

    pressure_bar: float
    _enthalpy: Fit
    _volume: Fit
    _temperature: Fit

    @classmethod
    def at(cls, pressure_bar: float) -> NetworkWater:
        """Fit the line of one network pressure."""
        return _network_water(pressure_bar)

    def enthalpy(self, temperature_C: Array) -> Array:
        """h(T), kJ/kg."""
        return np.asarray(self._water(self._enthalpy, temperature_C, "temperature, °C")[0])

    def volume(self, temperature_C: Array) -> Array:
        """v(T), m3/kg."""
        return np.asarray(self._water(self._volume, temperature_C, "temperature, °C")[0])

    def temperature(self, enthalpy_kJ_kg: Array) -> Array:
        """T(h), °C."""
        return np.asarray(self._water(self._temperature, enthalpy_kJ_kg, "enthalpy, kJ/kg")[0])

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
    enthalpy = Fit.of(lambda t: enthalpy_pt(pressure_bar, t), low, high, 24)
    volume = Fit.of(lambda t: volume_pt(pressure_bar, t), low, high, 24)
    ends = enthalpy(np.array([low, high]))[0]

    def temperature(h: Array) -> Array:
        t = low + (h - ends[0]) / (ends[1] - ends[0]) * (high - low)
        for _ in range(30):
            t = t - (enthalpy(t)[0] - h) / 4.2
        return np.asarray(t)

    inverse = Fit.of(temperature, float(ends[0]), float(ends[1]), 24)
    return NetworkWater(pressure_bar, enthalpy, volume, inverse)
