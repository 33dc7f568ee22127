"""The heat balance of one option at one operating point, as an engineer reads it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from appraise.case.load import Case
from appraise.case.plant import Option
from appraise.cycle.design import (
    Design,
    OptionDesign,
    ideal_power_gross_MW,
    unlimited_gross_MW,
    why_not,
)
from appraise.cycle.energy import Energy
from appraise.cycle.solve import solve
from appraise.cycle.task import Conditions, Solution, Task
from appraise.cycle.turbine import exhaust_state
from appraise.errors import CaseError, SolveError
from appraise.numerics import Array
from appraise.steam import entropy_pt, liquid_entropy_p, superheated_temperature_ph
from appraise.steam_fits import entropy_ph, liquid_enthalpy, saturation, volume_ph

_JUST_ABOVE = 1.0 + 1e-9  # a limit that is only just reached is kept


@dataclass(frozen=True, slots=True)
class State:
    """Steam or water at one place of the cycle. `quality` is None outside the wet region."""

    label: str
    pressure_bar: float
    temperature_C: float
    enthalpy_kJ_kg: float
    entropy_kJ_kgK: float
    quality: float | None
    flow_kg_s: float


@dataclass(frozen=True, slots=True)
class StageBalance:
    """One condenser; `exhaust_m3_s` is the volume of all steam through its exhaust flange."""

    shell_bar: float
    saturation_C: float
    water_in_C: float
    water_out_C: float
    terminal_difference_K: float
    steam_kg_s: float
    steam_kJ_kg: float
    moisture: float
    exhaust_m3_s: float
    drain_kJ_kg: float
    drain_C: float
    drain_zone_C: float  # water after the drain-cooling zone
    heat_MW: float
    area_m2: float | None  # None for the existing condenser


@dataclass(frozen=True, slots=True)
class Balance:
    """One option at one point, beside the baseline at equal heat.

    remarks : where the point lies beyond a limit of the plant, which here only warns.
    """

    key: str
    name: str
    heat_MW: float
    power_gross_MW: float
    power_net_MW: float
    fuel_MW: float
    live_steam_kg_s: float
    bleed_kg_s: float
    heater_bleed_kg_s: float
    bleed_bar: float
    network_kg_s: float
    power_to_heat: float
    total_efficiency: float
    extra_power_per_heat: float
    incremental_efficiency: float | None
    ideal_gain_share: float | None
    closure: float
    deaerator_on_live_steam: bool
    runs_as_baseline: bool
    remarks: tuple[str, ...]
    stages: tuple[StageBalance, ...]
    states: tuple[State, ...]


@dataclass(frozen=True, slots=True, eq=False)
class _Point:
    """One option solved at one point; `running` is the option, or the baseline where it runs as that."""

    option: OptionDesign
    solution: Solution
    running: OptionDesign

    @property
    def energy(self) -> Energy:
        """Power and fuel at the point."""
        return self.solution.energy


def design_balances(case: Case, made: Design) -> tuple[Balance, ...]:
    """Heat balance of every option at the design point, with its share of the ideal gain."""
    points = [_Point(o, o.solution, o) for o in made.options]
    base = next(p for p in points if p.option.train.key == made.baseline.train.key)
    shares = [
        0.0 if point is base else _ideal_share(case, option, made, point.option)
        for option, point in zip(case.options, points, strict=True)
    ]
    return tuple(_balance(case, made, p, base, s) for p, s in zip(points, shares, strict=True))


def _ideal_share(case: Case, option: Option, made: Design, sized: OptionDesign) -> float | None:
    """Extra gross power over that of the ideal.

    None where the ideal, with the stated terminal difference in its hottest stage too, cannot be built or
    makes no more power than the baseline: a share of that says nothing.
    """
    gross = unlimited_gross_MW(made.baseline)
    try:
        ideal = ideal_power_gross_MW(case, option, made) - gross
    except CaseError:
        return None
    return (unlimited_gross_MW(sized) - gross) / ideal if ideal > 0.0 else None


def point_balances(
    case: Case, made: Design, heat_MW: float, supply_C: float, return_C: float
) -> tuple[Balance, ...]:
    """Heat balance of every option at another point, sizes as at the design point. Limits only warn."""
    at = Conditions(np.array([heat_MW]), np.array([return_C]), np.array([supply_C]))
    points = [_Point(o, option_at(made, o, at), o) for o in made.options]
    base = next(p for p in points if p.option.train.key == made.baseline.train.key)
    if not base.solution.valid[0]:
        why = why_not(made.plant, base.solution)
        raise SolveError(f"the baseline has no operation at this point: {why}")
    chosen = [p if p.solution.valid[0] else replace(base, option=p.option) for p in points]
    return tuple(
        replace(_balance(case, made, p, base, None), runs_as_baseline=q is not p)
        for p, q in zip(chosen, points, strict=True)
    )


def option_at(made: Design, option: OptionDesign, at: Conditions) -> Solution:
    """One option at other conditions, with the sizes of its design point."""
    none = np.zeros(at.heat_MW.size, dtype=bool)
    return solve(Task(made.plant, option.train, option.sizes, made.reference, at, none))


def _balance(case: Case, made: Design, at: _Point, base: _Point, ideal_share: float | None) -> Balance:
    is_base = at.option.train.key == base.option.train.key
    heat = float(at.solution.conditions.heat_MW[0])
    extra = float(at.energy.power_net_MW[0] - base.energy.power_net_MW[0])
    extra_fuel = float(at.energy.fuel_MW[0] - base.energy.fuel_MW[0])
    feed = at.solution.feed
    gross, fuel = float(at.energy.power_gross_MW[0]), float(at.energy.fuel_MW[0])
    return Balance(
        key=at.option.train.key,
        name=next(o.name for o in case.options if o.key == at.option.train.key),
        heat_MW=heat,
        power_gross_MW=gross,
        power_net_MW=float(at.energy.power_net_MW[0]),
        fuel_MW=fuel,
        live_steam_kg_s=float(feed.live_steam_kg_s[0]),
        bleed_kg_s=float(feed.bleed_kg_s[0]),
        heater_bleed_kg_s=float(feed.heater_kg_s[0]),
        bleed_bar=float(feed.bleed_bar[0]),
        network_kg_s=float(at.solution.network_kg_s[0]),
        power_to_heat=gross / heat,
        total_efficiency=(gross + heat) / fuel,
        extra_power_per_heat=0.0 if is_base else extra / heat,
        incremental_efficiency=None if is_base or extra_fuel == 0.0 else extra / extra_fuel,
        ideal_gain_share=ideal_share,
        closure=float(at.energy.closure[0]),
        deaerator_on_live_steam=bool(at.solution.on_live_steam[0]),
        runs_as_baseline=False,
        remarks=tuple(_beyond(case, made, at, base)),
        stages=_stages(made, at),
        states=_states(case, made, at),
    )


def _beyond(case: Case, made: Design, at: _Point, base: _Point) -> Iterator[str]:
    """What the plant could not do of this, by the limits that shape the hours of the year."""
    plant, feed = made.plant, at.solution.feed
    steam, least = float(feed.live_steam_kg_s[0]), plant.min_kg_s
    for what, unit, value, key, limit in (
        ("live steam", "kg/s", steam, "max_kg_s", plant.max_kg_s),
        ("heat", "MW", float(at.solution.conditions.heat_MW[0]), "max_heat_MW", plant.max_heat_MW),
        ("fuel", "MW", float(at.energy.fuel_MW[0]), "max_fuel_MW", plant.max_fuel_MW),
    ):
        if value > limit * _JUST_ABOVE:
            yield f"{_apart(value, limit)} {unit} of {what}, above {key} {limit:g}: the plant cannot do this"
    alone = float(base.solution.feed.live_steam_kg_s[0])
    if steam < least:
        flow = f"{_apart(steam, least)} kg/s of live steam"
        yield f"{flow}, below min_kg_s {least:g}: the plant would stand still"
    elif alone < least and not case.year.extra_running:
        yield f"the baseline would stand still here, below min_kg_s {least:g}, and the option with it"
    yield from _lost_power(made, at)


def _lost_power(made: Design, at: _Point) -> Iterator[str]:
    """Power that the limits of generators take away at the terminals."""
    tail, lost_MW = at.running.train.tail, float(at.energy.power_lost_MW[0])
    own, lost_tail_MW = tail.generator_limit_MW, 0.0
    if own is not None:
        terminals = tail.mechanical_efficiency * tail.generator_efficiency
        lost_tail_MW = max(0.0, float(at.energy.shaft_tail_MW[0]) * terminals - own)
    for lost, key, limit in (
        (lost_MW - lost_tail_MW, "generator_limit_MW", made.plant.generator_limit_MW),
        (lost_tail_MW, "the tail's generator_limit_MW", own),
    ):
        if limit is not None and lost > 1e-9 * limit:
            yield f"{lost:.3f} MW of power above {key} {limit:g} is lost"


def _apart(value: float, limit: float) -> str:
    """A number with one decimal, or as many more as set it apart from the limit."""
    texts = [f"{value:.{decimals}f}" for decimals in range(1, 10)]
    return next((text for text in texts if (float(text) - limit) * (value - limit) > 0.0), texts[-1])


def _stages(made: Design, at: _Point) -> tuple[StageBalance, ...]:
    shells, train = at.solution.shells, at.running.train
    flange = exhaust_state(shells.shell_bar, made.plant.exhaust_loss_share)
    volume = np.cumsum(shells.steam_kg_s, axis=0) * volume_ph(flange, shells.steam_kJ_kg)
    heat = at.solution.network_kg_s * np.diff(shells.water_kJ_kg, axis=0) / 1e3

    def one(rows: Array, i: int) -> float:
        return float(rows[i, 0])

    return tuple(
        StageBalance(
            shell_bar=one(shells.shell_bar, i),
            saturation_C=one(shells.saturation_C, i),
            water_in_C=one(shells.water_C, i),
            water_out_C=one(shells.water_C, i + 1),
            terminal_difference_K=one(shells.saturation_C, i) - one(shells.water_C, i + 1),
            steam_kg_s=one(shells.steam_kg_s, i),
            steam_kJ_kg=one(shells.steam_kJ_kg, i),
            moisture=one(shells.moisture, i),
            exhaust_m3_s=one(volume, i),
            drain_kJ_kg=one(shells.drain_kJ_kg, i),
            drain_C=one(shells.drain_C, i),
            drain_zone_C=one(shells.zone_C, i),
            heat_MW=one(heat, i),
            area_m2=None if train.stages[i].existing else at.running.surface[i].total_m2,
        )
        for i in range(shells.shell_bar.shape[0])
    )


def _states(case: Case, made: Design, at: _Point) -> tuple[State, ...]:
    plant, feed, shells = made.plant, at.solution.feed, at.solution.shells
    steam = case.plant.live_steam
    m1 = float(feed.live_steam_kg_s[0])
    through = np.cumsum(shells.steam_kg_s[:, 0])
    flange = shells.flange_bar[:, 0]
    exhausts = [
        _steam_state(f"exhaust {i + 1}", float(flange[i]), float(shells.steam_kJ_kg[i, 0]), float(through[i]))
        for i in range(flange.size - 1, -1, -1)
    ]
    deaerator_bar, feed_flow = float(feed.deaerator_bar[0]), m1 * (1.0 + plant.blowdown_share)
    condensate = (
        deaerator_bar,
        float(at.solution.condensate_kJ_kg[0]),
        float(at.solution.condensate_kg_s[0]),
    )
    heater = []
    if plant.heater is not None:
        bleed = float(feed.heater_bar[0]), float(feed.heater_kJ_kg[0]), float(feed.heater_kg_s[0])
        heater.append(_steam_state("heater bleed", *bleed))
    return (
        State("live steam", steam.pressure_bar, steam.temperature_C, plant.h1, plant.s1, None, m1),
        *heater,
        _steam_state(
            "deaerator bleed", float(feed.bleed_bar[0]), float(feed.bleed_kJ_kg[0]), float(feed.bleed_kg_s[0])
        ),
        *exhausts,
        _water_state("condensate after pump", *condensate),
        _water_state("feed water after deaerator", deaerator_bar, float(feed.deaerator_kJ_kg[0]), feed_flow),
        _water_state("feed water to boiler", plant.boiler_bar, float(feed.feed_kJ_kg[0]), feed_flow),
    )


def _steam_state(label: str, pressure_bar: float, enthalpy: float, flow_kg_s: float) -> State:
    at = saturation(np.array([pressure_bar]))
    h = np.array([enthalpy])
    entropy = float(entropy_ph(at, h)[0])
    if enthalpy > at.hg[0]:
        t = float(superheated_temperature_ph(pressure_bar, enthalpy))
        return State(label, pressure_bar, t, enthalpy, entropy, None, flow_kg_s)
    quality = float((enthalpy - at.hf[0]) / (at.hg[0] - at.hf[0]))
    return State(label, pressure_bar, float(at.temperature_C[0]), enthalpy, entropy, quality, flow_kg_s)


def _water_state(label: str, pressure_bar: float, enthalpy: float, flow_kg_s: float) -> State:
    """Water from pressure and enthalpy: Newton on the forward equation, cp near 4.2 kJ/(kg K)."""
    t = _water_temperature(pressure_bar, enthalpy)
    entropy = _water_entropy(pressure_bar, t)
    return State(label, pressure_bar, t, enthalpy, entropy, None, flow_kg_s)


def _water_temperature(pressure_bar: float, enthalpy: float) -> float:
    hottest = float(saturation(np.array([pressure_bar])).temperature_C[0])
    t, p = np.array([min(enthalpy / 4.2, hottest)]), np.array([pressure_bar])
    for _ in range(40):
        t = np.minimum(t - (liquid_enthalpy(p, t) - enthalpy) / 4.25, hottest)
    return float(t[0])


def _water_entropy(pressure_bar: float, temperature_C: float) -> float:
    hottest = float(saturation(np.array([pressure_bar])).temperature_C[0])
    if temperature_C >= hottest - 1e-6:
        return float(liquid_entropy_p(pressure_bar))
    return float(entropy_pt(pressure_bar, temperature_C))
