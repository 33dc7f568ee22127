"""Condensate pumps, deaerator, feed pump and high-pressure heater. Elementwise on arrays [point]."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from appraise.cycle.plant import PlantData
from appraise.cycle.turbine import bleed_pressure, main_line_enthalpy
from appraise.numerics import Array
from appraise.steam_fits import Saturation, liquid_enthalpy, saturation

_MOST_OF_BOILER = 1.05  # greatest bleed pressure over the boiler's that the equations are asked for


@dataclass(frozen=True, slots=True, eq=False)
class BleedLaw:
    """The baseline's design values that the cone law refers to, in every option.

    heater_bar : 0 without a high-pressure heater.
    """

    condensate_kg_s: float
    bleed_bar: float
    heater_bar: float
    exhaust_bar: float  # at the flange

    def pressures(self, exhaust_bar: Array, condensate_kg_s: Array) -> Bleeds:
        """Bleed pressures at another exhaust pressure and flow."""
        ratio = condensate_kg_s / self.condensate_kg_s

        def at(design_bar: float) -> Array:
            return bleed_pressure(exhaust_bar, ratio, design_bar, self.exhaust_bar)

        return Bleeds(at(self.bleed_bar), at(self.heater_bar) if self.heater_bar else None)


@dataclass(frozen=True, slots=True, eq=False)
class Bleeds:
    """Pressures at the bleeds, bar [point]; `heater_bar` None without a high-pressure heater."""

    deaerator_bar: Array
    heater_bar: Array | None


@dataclass(frozen=True, slots=True, eq=False)
class FeedWater:
    """Deaerator, feed pump and heater at each point; enthalpies kJ/kg, flows kg/s."""

    live_steam_kg_s: Array
    bleed_kg_s: Array
    bleed_bar: Array
    bleed_kJ_kg: Array  # enthalpy of the steam to the deaerator
    heater_kg_s: Array
    heater_bar: Array  # 0 without a heater
    heater_kJ_kg: Array
    deaerator_bar: Array
    deaerator_kJ_kg: Array  # feed water leaving the deaerator
    pumped_kJ_kg: Array  # feed water after the feed pump
    feed_kJ_kg: Array  # feed water to the boiler
    makeup_kJ_kg: Array


def pump_rise(volume_m3_kg: Array, rise_bar: Array, efficiency: float) -> Array:
    """Enthalpy rise over a pump, kJ/kg: v Δp/η, 0 where the pressure falls. 1 bar m3 = 100 kJ."""
    return np.asarray(volume_m3_kg * np.maximum(0.0, rise_bar) * 100.0 / efficiency)


def deaerator_pressure(plant: PlantData, bleed_bar: Array) -> Array:
    """Pressure in the deaerator, bar: held [1], or sliding 5 % below its bleed down to a minimum [point]."""
    if not plant.deaerator_slides:
        return np.array([plant.deaerator_bar])
    sliding = np.minimum(plant.deaerator_bar, 0.95 * bleed_bar)
    return np.asarray(np.maximum(sliding, plant.deaerator_minimum_bar))


def _bleed_state(plant: PlantData, bleed_bar: Array) -> Saturation:
    """Saturation state at a bleed.

    On its way the iteration may ask for pressures that no steam table has. A bleed this far above the boiler
    is no operation (`not_below_live_steam`), whatever its pressure.
    """
    return saturation(np.minimum(bleed_bar, _MOST_OF_BOILER * plant.boiler_bar))


@dataclass(frozen=True, slots=True, eq=False)
class _Heater:
    """What the heater takes and gives at each point: steam, its drain, and the feed it wants to make."""

    bar: Array
    steam: Array
    drain: Array
    feed: Array

    @classmethod
    def at(cls, plant: PlantData, bleed_bar: Array, efficiency: Array) -> _Heater:
        assert plant.heater is not None
        state = _bleed_state(plant, bleed_bar)
        # Feed water that a heater with desuperheater would bring to the boil leaves as saturated liquid.
        boiling_C = saturation(np.asarray(plant.boiler_bar)).temperature_C
        outlet_C = np.minimum(state.temperature_C - plant.heater.terminal_difference_K, boiling_C)
        feed = liquid_enthalpy(np.full(bleed_bar.shape, plant.boiler_bar), outlet_C)
        return cls(bleed_bar, main_line_enthalpy(plant.h1, plant.s1, efficiency, state), state.hf, feed)


def feed_water(
    plant: PlantData,
    *,
    condensate_kg_s: Array,
    condensate_kJ_kg: Array,
    bleeds: Bleeds,
    deaerator_bar: Array,
    efficiency: Array,
    on_live_steam: NDArray[np.bool_],
) -> FeedWater:
    """Mass and energy balance of deaerator, feed pump and heater, in closed form.

    Feed flow is (1 + b) m1, b the blowdown share made up with cold water. Where `on_live_steam`, throttled
    live steam heats the deaerator instead of the bleed. deaerator_bar : [point], or [1] where it is held.
    The heater's share of live steam is
    g = (1 + b)(h_feed - h_pumped)/(h_heater - h_drain), 0 where it would cool the feed; its drain goes to the
    deaerator. Where the water there is hotter than the deaerator needs, the bleed is 0 and the deaerator's
    outlet floats on the energy balance.
    """
    bleed = main_line_enthalpy(plant.h1, plant.s1, efficiency, _bleed_state(plant, bleeds.deaerator_bar))
    steam = np.where(on_live_steam, plant.h1, bleed)
    at_da = saturation(deaerator_bar)
    h_mu = liquid_enthalpy(deaerator_bar, np.asarray(plant.makeup_C))
    h_c, b, zero = condensate_kJ_kg, plant.blowdown_share, np.zeros(condensate_kg_s.shape)

    def at_points(values: Array) -> Array:
        return np.broadcast_to(values, zero.shape)

    rise = pump_rise(at_da.vf, plant.boiler_bar - deaerator_bar, plant.pump_efficiency)
    heater = None if bleeds.heater_bar is None else _Heater.at(plant, bleeds.heater_bar, efficiency)

    def heater_share(deaerator_kJ_kg: Array) -> Array:
        if heater is None:
            return zero
        wanted = (1.0 + b) * (heater.feed - deaerator_kJ_kg - rise) / (heater.steam - heater.drain)
        return np.asarray(np.maximum(0.0, wanted))

    g, drain = heater_share(at_da.hf), zero if heater is None else heater.drain
    fall = steam - h_c
    m1 = condensate_kg_s * fall / ((1.0 - g) * steam + b * h_mu + g * drain - (1.0 + b) * at_da.hf)
    h_da, floating = at_da.hf, (1.0 - g) * m1 < condensate_kg_s
    if floating.any():
        afloat = _floating_enthalpy(plant, heater, h_c, h_mu, rise)
        h_da = np.where(floating, afloat, h_da)
        g = np.where(floating, heater_share(afloat), g)
        m1 = np.where(floating, condensate_kg_s / (1.0 - g), m1)
    pumped = h_da + rise
    feed = pumped if heater is None else np.where(g > 0.0, heater.feed, pumped)
    return FeedWater(
        live_steam_kg_s=m1,
        bleed_kg_s=(1.0 - g) * m1 - condensate_kg_s,
        bleed_bar=bleeds.deaerator_bar,
        bleed_kJ_kg=steam,
        heater_kg_s=g * m1,
        heater_bar=zero if heater is None else heater.bar,
        heater_kJ_kg=zero if heater is None else heater.steam,
        deaerator_bar=at_points(deaerator_bar),
        deaerator_kJ_kg=at_points(h_da),
        pumped_kJ_kg=at_points(pumped),
        feed_kJ_kg=at_points(feed),
        makeup_kJ_kg=at_points(h_mu),
    )


def not_below_live_steam(
    plant: PlantData, exhaust_kJ_kg: Array, feed: FeedWater, on_live_steam: NDArray[np.bool_]
) -> NDArray[np.bool_]:
    """Where hot exhaust, deaerator bleed and heater bleed lie at live-steam pressure or above [3, point].

    All three stand on the main section's line, on which enthalpy falls just as pressure does; throttled live
    steam does not. No turbine works against its own supply, so such a point is no operation: an option runs
    as the baseline, and where the baseline itself has none the plant stands still and peak boilers make the
    heat, as below its least flow. Hours whose supply temperature alone forbids it are mistakes in the series
    and refused before anything is solved (`limits`).
    """
    bleed = np.where(on_live_steam, 0.0, feed.bleed_kJ_kg)
    return np.asarray(np.stack([exhaust_kJ_kg, bleed, feed.heater_kJ_kg]) >= plant.h1)


def _floating_enthalpy(
    plant: PlantData, heater: _Heater | None, h_c: Array, h_mu: Array, rise: Array
) -> Array:
    """Outlet enthalpy of a deaerator without steam, kJ/kg: linear with the heater's share g in it.

    (1 - g) h_c + b h_mu + g h_drain = (1 + b) h; where g would be negative the heater is out.
    """
    b = plant.blowdown_share
    alone = (h_c + b * h_mu) / (1.0 + b)
    if heater is None:
        return np.asarray(alone)
    per_kJ = (1.0 + b) / (heater.steam - heater.drain)
    most = per_kJ * (heater.feed - rise)
    joined = ((1.0 - most) * h_c + b * h_mu + most * heater.drain) / (1.0 + b + per_kJ * (heater.drain - h_c))
    return np.where(joined + rise < heater.feed, joined, alone)
