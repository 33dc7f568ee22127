"""Power, fuel and closure of a cycle. Elementwise on arrays [point]; flows in kg/s, results in MW."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from appraise.cycle.feedwater import FeedWater
from appraise.cycle.plant import PlantData
from appraise.cycle.shells import Shells
from appraise.cycle.stages import Train
from appraise.numerics import Array


@dataclass(frozen=True, slots=True, eq=False)
class Energy:
    """What a plant in operation takes and gives at each point [point], MW; `closure` is relative.

    Shaft powers are before what a generator's limit takes away; `power_lost_MW` is that, at the terminals.
    """

    shaft_main_MW: Array
    shaft_tail_MW: Array
    power_gross_MW: Array
    power_net_MW: Array
    power_lost_MW: Array
    fuel_MW: Array
    pump_MW: Array  # condensate and feed pumps
    section_MW: Array  # shaft power of the tail section that exhausts into each stage [stage, point]
    network_pump_MW: Array  # through each new condenser [stage, point]
    closure: Array


def shaft_power(
    plant: PlantData, feed: FeedWater, shells: Shells, condensate_kg_s: Array
) -> tuple[Array, Array]:
    """Shaft power of the main section [point], and of the section into each stage [stage, point], MW."""
    h = shells.steam_kJ_kg
    main = (
        feed.heater_kg_s * (plant.h1 - feed.heater_kJ_kg)
        + feed.bleed_kg_s * (plant.h1 - feed.bleed_kJ_kg)
        + condensate_kg_s * (plant.h1 - h[-1])
    )
    sections = np.zeros(h.shape)
    sections[:-1] = np.cumsum(shells.steam_kg_s, axis=0)[:-1] * np.diff(h, axis=0) / 1e3
    return np.asarray(main / 1e3), sections


@dataclass(frozen=True, slots=True, eq=False)
class _Terminals:
    """Power at the generators' terminals, what their limits take away there and at the shaft, MW."""

    gross: Array
    lost: Array
    lost_shaft: Array


def _terminals(plant: PlantData, train: Train, main: Array, tail: Array) -> _Terminals:
    """A tail without a generator of its own shares the plant's machine and its limit."""
    to_main = plant.mechanical_efficiency * plant.generator_efficiency
    to_tail = train.tail.mechanical_efficiency * train.tail.generator_efficiency
    own = train.tail.generator_limit_MW
    if own is None:
        gross = main * to_main + tail * to_tail
        lost = np.maximum(0.0, gross - plant.generator_limit_MW)
        return _Terminals(gross - lost, lost, lost / to_main)
    lost_main = np.maximum(0.0, main * to_main - plant.generator_limit_MW)
    lost_tail = np.maximum(0.0, tail * to_tail - own)
    gross = main * to_main - lost_main + tail * to_tail - lost_tail
    return _Terminals(gross, lost_main + lost_tail, lost_main / to_main + lost_tail / to_tail)


def network_pumping(
    plant: PlantData, train: Train, shells: Shells, network_kg_s: Array, design_kg_s: float
) -> Array:
    """Power to push the network water through each stage, MW [stage, point]; drop as flow squared."""
    ratio = network_kg_s / design_kg_s
    rows = np.zeros(shells.steam_kg_s.shape)
    for row, stage, inlet in zip(rows, train.stages, shells.water_C[:-1], strict=True):
        if stage.network_pressure_drop_bar > 0:
            drop = stage.network_pressure_drop_bar * ratio**2
            row[:] = network_kg_s * plant.network.volume(inlet) * drop * 0.1
    return np.asarray(rows / plant.network_pump_efficiency)


def energy(
    plant: PlantData,
    train: Train,
    *,
    design_kg_s: float,
    load: Array,
    condensing_MW: Array,
    network_kg_s: Array,
    condensate_kg_s: Array,
    condensate_pump_MW: Array,
    feed: FeedWater,
    shells: Shells,
) -> Energy:
    """Power and fuel, and how well the plant's energy balance closes (relative to the boiler's heat).

    F = [m1 (h1 - h_feed) + b m1 (hf(p_boiler) - h_feed)]/eta_boiler, less what a generator's limit takes off
    the shaft, and closure F eta + pumps + b m1 h_makeup = P_shaft + Q + b m1 hf(p_boiler).
    design_kg_s : network water at the design point. condensing_MW : heat of the turbine condensers.
    """
    b, m1 = plant.blowdown_share, feed.live_steam_kg_s
    boiler = plant.boiler_efficiency.at(load)
    main, sections = shaft_power(plant, feed, shells, condensate_kg_s)
    tail = np.asarray(sections.sum(axis=0))
    out = _terminals(plant, train, main, tail)
    absorbed = (m1 * (plant.h1 - feed.feed_kJ_kg) + b * m1 * (plant.boiler_hf - feed.feed_kJ_kg)) / 1e3
    fuel = (absorbed - out.lost_shaft) / boiler
    feed_pump = (1.0 + b) * m1 * (feed.pumped_kJ_kg - feed.deaerator_kJ_kg) / 1e3
    pumps = condensate_pump_MW.sum(axis=0) + feed_pump
    network = network_pumping(plant, train, shells, network_kg_s, design_kg_s)
    vacuum = sum(stage.vacuum_auxiliary_MW for stage in train.stages)
    net = out.gross - pumps - plant.auxiliary_MW - network.sum(axis=0) - vacuum
    supplied = fuel * boiler + pumps + b * m1 * feed.makeup_kJ_kg / 1e3
    given = main + tail - out.lost_shaft + condensing_MW + b * m1 * plant.boiler_hf / 1e3
    return Energy(
        shaft_main_MW=main,
        shaft_tail_MW=tail,
        power_gross_MW=out.gross,
        power_net_MW=np.asarray(net),
        power_lost_MW=out.lost,
        fuel_MW=fuel,
        pump_MW=pumps,
        section_MW=sections,
        network_pump_MW=network,
        closure=np.asarray(np.abs(supplied - given) / (fuel * boiler)),
    )
