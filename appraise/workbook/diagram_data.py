"""Points of the diagrams: temperature over heat of the condensers, enthalpy over entropy of the expansion.

A `Curve` may have gaps, so that stages stay apart in one series.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import ceil, floor

import numpy as np

from appraise.cycle.balance import Balance, State
from appraise.cycle.design import OptionDesign
from appraise.cycle.plant import PlantData
from appraise.cycle.turbine import main_line_enthalpy
from appraise.numerics import Array
from appraise.steam import (
    enthalpy_pt,
    entropy_pt,
    liquid_enthalpy_p,
    liquid_entropy_p,
    vapour_enthalpy_p,
    vapour_entropy_p,
)
from appraise.steam_fits import NetworkWater, entropy_ph, saturation

LEAST_RATIO = 0.9  # isobars nearer to one another than this are drawn once
LOWEST_BAR, HIGHEST_BAR = 0.02, 215.0  # of the dome; above, the library's saturation values get rough
LEAST_PART = 0.05  # of the width: a dashed line with a shorter last piece is drawn beyond its end
HOTTEST_C = 790.0  # below the end of the steam tables' region


@dataclass(frozen=True, slots=True)
class Curve:
    """One line of a diagram, as many x as y; a None among the y is a gap."""

    label: str
    x: tuple[float, ...]
    y: tuple[float | None, ...]


@dataclass(frozen=True, slots=True)
class Window:
    """What a diagram shows, in round figures."""

    x_low: float
    x_high: float
    y_low: float
    y_high: float

    def inside(self, margin: float) -> Window:
        """The same without a share of it at every edge but the lower, which labels need."""
        return Window(
            self.x_low + margin * (self.x_high - self.x_low),
            self.x_high - margin * (self.x_high - self.x_low),
            self.y_low,
            self.y_high - margin * (self.y_high - self.y_low),
        )


# --- temperature over heat --------------------------------------------------------------------------------


def temperature_curves(balance: Balance, water: NetworkWater) -> tuple[Curve, ...]:
    """Network water, condensing steam and, where drains are cooled, the drain; heat from the cold end, MW.

    Steam is drawn at its saturation temperature, as the condensers are rated.
    """
    water_x: list[float] = []
    water_y: list[float | None] = []
    steam_x: list[float] = []
    steam_y: list[float | None] = []
    drain_x: list[float] = []
    drain_y: list[float | None] = []
    start = 0.0
    for stage in balance.stages:
        h_in, h_zone, h_out = water.enthalpy(
            np.array([stage.water_in_C, stage.drain_zone_C, stage.water_out_C])
        )
        zone = start + stage.heat_MW * float((h_zone - h_in) / (h_out - h_in))
        end = start + stage.heat_MW
        water_x += [start, zone, end]
        water_y += [stage.water_in_C, stage.drain_zone_C, stage.water_out_C]
        steam_x += [zone, end, end]
        steam_y += [stage.saturation_C, stage.saturation_C, None]
        if zone > start:
            drain_x += [start, zone, zone]
            drain_y += [stage.drain_C, stage.saturation_C, None]
        start = end
    curves = [Curve("condensing steam", tuple(steam_x), tuple(steam_y))]
    if drain_x:
        curves.append(Curve("drain", tuple(drain_x), tuple(drain_y)))
    return (*curves, Curve("network water", tuple(water_x), tuple(water_y)))


def temperature_window(balances: Sequence[Balance]) -> Window:
    """The same for all options, so that the diagrams compare by eye."""
    stages = [stage for balance in balances for stage in balance.stages]
    coldest = min(stage.water_in_C for stage in stages)
    hottest = max(stage.saturation_C for stage in stages)
    most = max(balance.heat_MW for balance in balances)
    step = 10.0 ** floor(np.log10(most)) / 2.0
    return Window(0.0, ceil(most / step) * step, floor(coldest / 10) * 10.0, ceil(hottest / 10) * 10.0)


# --- enthalpy over entropy --------------------------------------------------------------------------------


def steam_states(balance: Balance) -> tuple[State, ...]:
    """The states on the expansion line: all steam, no water."""
    return tuple(s for s in balance.states if not s.label.startswith(("condensate", "feed water")))


def exhausts(balance: Balance) -> tuple[State, ...]:
    """Exhausts of the sections, hot to cold."""
    return tuple(s for s in balance.states if s.label.startswith("exhaust"))


def main_line(balance: Balance, option: OptionDesign, plant: PlantData, number: int = 16) -> Curve:
    """Expansion of the main section, from the stop valve to its exhaust."""
    hot = exhausts(balance)[0]
    start = balance.states[0].pressure_bar
    pressure = np.geomspace(start, hot.pressure_bar, number)
    at = saturation(pressure)
    efficiency = np.broadcast_to(option.solution.efficiency[0], pressure.shape)
    enthalpy = main_line_enthalpy(plant.h1, plant.s1, efficiency, at)
    return Curve(balance.name, _points(entropy_ph(at, enthalpy)), _points(enthalpy))


def tail_line(balance: Balance) -> Curve | None:
    """The new sections, straight from flange to flange; None for a single stage."""
    states = exhausts(balance)
    if len(states) < 2:
        return None
    return Curve(
        f"{balance.name}: new sections",
        tuple(s.entropy_kJ_kgK for s in states),
        tuple(s.enthalpy_kJ_kg for s in states),
    )


def expansion_window(balances: Sequence[Balance]) -> Window:
    """Frame of the expansion lines with some air around them."""
    states = [state for balance in balances for state in steam_states(balance)]
    s = [state.entropy_kJ_kgK for state in states]
    h = [state.enthalpy_kJ_kg for state in states]
    return Window(
        floor((min(s) - 0.15) * 4) / 4,
        ceil((max(s) + 0.25) * 4) / 4,
        floor((min(h) - 150.0) / 100) * 100.0,
        ceil((max(h) + 60.0) / 100) * 100.0,
    )


def isobar_pressures(balances: Sequence[Balance], baseline: int) -> tuple[float, ...]:
    """Pressures worth a line, high to low: live steam, bleeds, exhausts; the baseline's first choice."""
    ordered = [balances[baseline], *(b for i, b in enumerate(balances) if i != baseline)]
    kept: list[float] = []
    for state in (state for balance in ordered for state in steam_states(balance)):
        p = state.pressure_bar
        if all(min(p, other) / max(p, other) < LEAST_RATIO for other in kept):
            kept.append(p)
    return tuple(sorted(kept, reverse=True))


def isobar(pressure_bar: float, window: Window, number: int = 20) -> Curve | None:
    """The part of an isobar inside the window, the upper end last; None where none is inside."""
    at = saturation(np.array([pressure_bar]))
    hf, hg, sf, sg = (float(v[0]) for v in (at.hf, at.hg, at.sf, at.sg))
    entropy: list[float] = []
    enthalpy: list[float] = []
    wettest = max(0.0, (window.x_low - sf) / (sg - sf), (window.y_low - hf) / (hg - hf))
    driest = min(1.0, (window.x_high - sf) / (sg - sf), (window.y_high - hf) / (hg - hf))
    if wettest < driest:
        entropy += [sf + x * (sg - sf) for x in (wettest, driest)]
        enthalpy += [hf + x * (hg - hf) for x in (wettest, driest)]
    if driest == 1.0 and hg < window.y_high:
        s, h = _superheated(pressure_bar, sg, window, number)
        entropy += _points(s)
        enthalpy += _points(h)
    return Curve(f"{pressure_bar:.3g} bar", tuple(entropy), tuple(enthalpy)) if entropy else None


def _superheated(pressure_bar: float, sg: float, window: Window, number: int) -> tuple[Array, Array]:
    """Entropy and enthalpy of superheated steam at one pressure, from the left to the right or upper edge."""
    saturated = float(saturation(np.array([pressure_bar])).temperature_C[0])
    grid = np.linspace(saturated + 0.01, HOTTEST_C, 2000)
    s, h = entropy_pt(pressure_bar, grid), enthalpy_pt(pressure_bar, grid)
    start = grid[0] if window.x_low <= sg else np.interp(window.x_low, s, grid)
    end = min(np.interp(window.y_high, h, grid), np.interp(window.x_high, s, grid))
    part = (np.interp(end, grid, s) - np.interp(start, grid, s)) / (window.x_high - window.x_low)
    if part < LEAST_PART:
        return np.zeros(0), np.zeros(0)
    t = np.linspace(start, end, max(2, round(number * float(part))))
    return entropy_pt(pressure_bar, t), enthalpy_pt(pressure_bar, t)


def vapour_line(window: Window, number: int = 40) -> Curve:
    """Dry saturated steam inside the window, from low to high pressure, so that it ends at the left."""
    pressure = np.geomspace(LOWEST_BAR / 2, HIGHEST_BAR, 200)
    return _inside("saturated steam", vapour_entropy_p(pressure), vapour_enthalpy_p(pressure), window, number)


def moisture_line(moisture: float, window: Window, number: int = 20) -> Curve | None:
    """Wet steam of one moisture inside the window; None where it is outside."""
    at = saturation(np.geomspace(40.0, LOWEST_BAR / 2, 400))
    x = 1.0 - moisture
    curve = _inside(
        f"moisture {moisture:.0%}",
        at.sf + x * (at.sg - at.sf),
        at.hf + x * (at.hg - at.hf),
        window,
        number,
    )
    return curve if len(curve.x) > 1 else None


def dome(number: int = 24) -> Curve:
    """The whole dome: boiling water up to near the critical point, and down as dry saturated steam."""
    liquid = np.geomspace(LOWEST_BAR, HIGHEST_BAR, number)
    vapour = liquid[::-1]
    return Curve(
        "saturation",
        _points(np.concatenate([liquid_entropy_p(liquid), vapour_entropy_p(vapour)])),
        _points(np.concatenate([liquid_enthalpy_p(liquid), vapour_enthalpy_p(vapour)])),
    )


def bleed_points(balance: Balance) -> Curve:
    """Where steam is bled from the main section of one option."""
    states = [s for s in steam_states(balance) if s.label.endswith("bleed")]
    return Curve("bleed", tuple(s.entropy_kJ_kgK for s in states), tuple(s.enthalpy_kJ_kg for s in states))


def water_points(balance: Balance) -> Curve:
    """Condensate and feed water of one option."""
    states = [s for s in balance.states if s not in steam_states(balance)]
    return Curve(
        "condensate and feed water",
        tuple(s.entropy_kJ_kgK for s in states),
        tuple(s.enthalpy_kJ_kg for s in states),
    )


def _inside(label: str, s: Array, h: Array, window: Window, number: int) -> Curve:
    inside = (s >= window.x_low) & (s <= window.x_high) & (h >= window.y_low) & (h <= window.y_high)
    index = np.flatnonzero(inside)
    if index.size > number:
        index = index[np.unique(np.linspace(0, index.size - 1, number).round().astype(int))]
    return Curve(label, _points(s[index]), _points(h[index]))


def _points(values: Array) -> tuple[float, ...]:
    return tuple(float(v) for v in values)
