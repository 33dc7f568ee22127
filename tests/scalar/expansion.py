"""Steam on its way down: the main section's line, a tail section, the throttle before it.

Pressures are flange pressures, p_shell / (1 - exhaust loss share).
"""

import math
from dataclasses import dataclass

from . import steam
from .plain import Option, Plant
from .steam import State


@dataclass(frozen=True)
class MainLine:
    """h(p) = h1 - eta (h1 - h_s(p, s1)): every bleed and the hot exhaust lie on it."""

    live: State
    efficiency: float

    def at(self, pressure_bar: float) -> State:
        ideal = steam.at_entropy(pressure_bar, self.live.entropy)
        drop = self.live.enthalpy - ideal.enthalpy
        return steam.at_enthalpy(pressure_bar, self.live.enthalpy - self.efficiency * drop)


def main_line(plant: Plant, load: float) -> MainLine:
    live = steam.at(plant.live_bar, plant.live_C)
    return MainLine(live, plant.efficiency * plant.part_load.at(load))


def tail_expansion(inlet: State, out_bar: float, efficiency: float, baumann: float) -> State:
    """Exhaust of a tail section: the dry efficiency less Baumann's share of the mean moisture, by root."""
    drop = inlet.enthalpy - steam.at_entropy(out_bar, inlet.entropy).enthalpy
    liquid, vapour = steam.saturated(out_bar, 0.0).enthalpy, steam.saturated(out_bar, 1.0).enthalpy

    def miss(enthalpy: float) -> float:
        moisture_out = max(0.0, (vapour - enthalpy) / (vapour - liquid))
        wet = 1.0 - baumann * (inlet.moisture + moisture_out) / 2.0
        return inlet.enthalpy - efficiency * wet * drop - enthalpy

    low, high = sorted((inlet.enthalpy, inlet.enthalpy - drop))
    return steam.at_enthalpy(out_bar, steam.root(miss, low - 1.0, high + 1.0))


def swallowing(inlet: State, out_bar: float) -> float:
    """p_in / v_in (1 - (p_out/p_in)^2), the square of the flow per phi; negative against the pressure."""
    return inlet.pressure_bar / inlet.volume * (1.0 - (out_bar / inlet.pressure_bar) ** 2)


@dataclass(frozen=True)
class Section:
    """One tail section as it runs; ``inlet`` is the state behind losses and valve."""

    inlet: State
    out_bar: float
    open_swallowing: float
    outlet: State


def tail_section(
    plant: Plant, option: Option, above: State, out_bar: float, flow_share: float, needed: float | None
) -> Section:
    """The section from the exhaust state ``above`` to ``out_bar``.

    ``flow_share`` is flow over design flow; ``needed`` is (flow/phi)^2 a held valve throttles to, None when
    there is no valve or it is open.
    """
    inlet = steam.at_enthalpy(above.pressure_bar * (1.0 - option.inlet_loss), above.enthalpy)
    opened = swallowing(inlet, out_bar)
    if needed is not None and opened > needed:
        inlet = _throttled(inlet, out_bar, needed)
    efficiency = option.tail_efficiency * option.tail_part_load.at(flow_share)
    outlet = tail_expansion(inlet, out_bar, efficiency, option.baumann)
    return Section(inlet, out_bar, opened, outlet)


def _throttled(inlet: State, out_bar: float, needed: float) -> State:
    def spare(pressure_bar: float) -> float:
        return swallowing(steam.at_enthalpy(pressure_bar, inlet.enthalpy), out_bar) - needed

    return steam.at_enthalpy(steam.root(spare, out_bar, inlet.pressure_bar), inlet.enthalpy)


def coefficient(flow: float, inlet: State, out_bar: float) -> float:
    """phi of a section that passes ``flow`` between these states."""
    return flow / math.sqrt(swallowing(inlet, out_bar))
