"""The solve of one option at many operating points: the same at the design point and in every hour."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from appraise.cycle.energy import Energy
from appraise.cycle.feedwater import not_below_live_steam
from appraise.cycle.passes import Pass, design_shares, energy_of, evaluate, heat_factor
from appraise.cycle.rests import begin, rest_of
from appraise.cycle.sliding import fractions_of, improved_fractions, shares_reached
from appraise.cycle.task import Layout, Mask, Rest, Solution, Task, overlaid
from appraise.errors import SolveError
from appraise.numerics import Array, FixedPoint, fixed_point, joined

_LEAST_SHARE, _GREATEST_SHARE = 0.01, 0.99  # of the rise, for every temperature between two stages
_CAREFUL = ((0.5, 0.05), (0.15, 0.02))  # damping and longest step of the second and third try
_CAREFUL_STEPS = 500
_AT_REST = 1e-10
_BLOCK = 8192  # points
_OPEN = 1.0 + 1e-9  # opening of a valve above which it would have to raise the pressure


def _start(task: Task, layout: Layout) -> Array:
    state = np.zeros((layout.number, task.conditions.heat_MW.size))
    state[layout.load] = 0.9
    state[layout.openings] = 0.95
    state[layout.flows] = 0.9
    state[layout.heat] = 1.0
    state[layout.flue_gas] = 0.05 if task.with_flue_gas else 0.0
    if task.sections and not task.held:
        state[layout.shares] = fractions_of(design_shares(task.train))
    return state


def _step(task: Task, layout: Layout, state: Array) -> Array:
    """Improve every unknown once: substitution, and a Newton step with an estimated slope for the shares."""
    now = evaluate(task, layout, state)
    improved = np.empty_like(state)
    improved[layout.load] = now.load
    water_C, rise = now.shells.water_C, np.diff(now.shells.water_C, axis=0)
    for row, stage in enumerate(task.cooled):
        improved[layout.zones.start + row] = (now.shells.zone_C[stage] - water_C[stage]) / rise[stage]
    if task.sections and not task.held:
        improved[layout.shares] = improved_fractions(
            task.sizes.section_constant, now.water.flow_kg_s, now.shells
        )
    if task.sections and task.held:
        improved[layout.openings] = _improved_openings(task, now)
    if task.sections and task.train.tail.varies:
        improved[layout.flows] = _section_share(task, now)
    if task.limited or task.with_flue_gas:
        result = energy_of(task, now)
        if task.limited:
            improved[layout.heat] = heat_factor(layout, state) * _room(task, now, result)
        if task.with_flue_gas:
            improved[layout.flue_gas] = _flue_gas_share(task, now, result)
    return improved


def _section_share(task: Task, now: Pass) -> Array:
    """Flow of each tail section over its design flow [stage - 1, point]."""
    design = np.array(task.sizes.section_kg_s)[:, None]
    return np.asarray(np.cumsum(now.shells.steam_kg_s, axis=0)[:-1] / design)


def _improved_openings(task: Task, now: Pass) -> Array:
    """Pressure behind each valve, over that before it, at which its section passes what is needed.

    Passed flow goes nearly as sqrt(p'² - p_out²), so p'² - p_out² is scaled with (needed/passed)².
    """
    assert now.throttle.opening is not None
    before = now.shells.flange_bar[1:] * (1.0 - task.train.tail.inlet_loss_share)
    after, outlet = before * now.throttle.opening, now.shells.flange_bar[:-1]
    passed = np.array(task.sizes.section_constant)[:, None] * now.shells.passing
    needed = np.cumsum(now.shells.steam_kg_s, axis=0)[:-1]
    span = np.maximum(after**2 - outlet**2, 1e-4 * outlet**2)
    ratio = np.clip(needed / np.maximum(passed, 1e-6), 0.0, 5.0)
    return np.asarray(np.sqrt(outlet**2 + ratio**2 * span) / before)


def _room(task: Task, now: Pass, result: Energy) -> Array:
    """Factor by which the first limit of the plant lets the heat grow."""
    plant = task.plant
    steam = plant.max_kg_s / now.feed.live_steam_kg_s
    fuel = plant.max_fuel_MW / result.fuel_MW
    return np.minimum(np.minimum(steam, fuel), plant.max_heat_MW / now.water.condensing_MW)


def _flue_gas_share(task: Task, now: Pass, result: Energy) -> Array:
    """Heat of the flue-gas condenser at this fuel, over the plant's heat."""
    gas = task.plant.flue_gas
    assert gas is not None
    return np.asarray(result.fuel_MW * gas.heat_per_fuel_at(task.conditions.return_C) / now.water.heat_MW)


def _solve_state(task: Task) -> tuple[Array, Mask, Rest]:
    """Iterate one task to rest: the state [unknown, point], where it lies within its bounds, and the rest."""
    layout = Layout.of(task)
    begun = begin(task, _start(task, layout))
    found = _iterated(task, layout, begun.state, begun.inverse)
    astray = np.flatnonzero(begun.near & ~(found.converged & _within(layout, found.x)))
    if astray.size:
        part = task.take(astray)
        found = overlaid(found, _iterated(part, layout, _start(part, layout), None), astray)
    state, converged = found.x, found.converged
    for damping, longest in _CAREFUL:
        if converged.all():
            break
        state, converged = _careful(task, layout, state, converged, damping, longest)
    if not converged.all() and not task.sections:
        _refuse(task, converged)
    inside = _within(layout, state) & converged
    return state, inside, rest_of(task, state, found.inverse, inside & found.converged)


def _iterated(task: Task, layout: Layout, start: Array, inverse: Array | None) -> FixedPoint:
    """Points do not touch each other, so long series go in blocks that stay in the processor's cache."""
    points = np.arange(start.shape[1])
    if points.size <= _BLOCK:
        return fixed_point(lambda x, index: _step(task.take(index), layout, x), start, inverse=inverse)
    blocks = np.split(points, range(_BLOCK, points.size, _BLOCK))
    return joined(
        [
            _iterated(task.take(i), layout, start[:, i], None if inverse is None else inverse[:, :, i])
            for i in blocks
        ]
    )


def _within(layout: Layout, state: Array) -> Mask:
    """Whether every temperature between two stages lies where a tail section can hold it."""
    shares = shares_reached(state[layout.shares])
    return np.asarray(((shares >= _LEAST_SHARE) & (shares <= _GREATEST_SHARE)).all(axis=0))


def _refuse(task: Task, converged: Mask) -> None:
    first, at = int(np.flatnonzero(~converged)[0]), task.conditions
    raise SolveError(
        f"{task.train.key}: no steady operation found at {at.heat_MW[first]:.3f} MW, "
        f"{at.supply_C[first]:.2f}/{at.return_C[first]:.2f} °C ({int((~converged).sum())} such points)"
    )


def _careful(
    task: Task, layout: Layout, state: Array, converged: Mask, damping: float, longest: float
) -> tuple[Array, Mask]:
    """Damped substitution in short steps for the few points where the accelerated iteration ran astray."""
    index = np.flatnonzero(~converged)
    rest = task.take(index)
    x = _start(rest, layout)
    for _ in range(_CAREFUL_STEPS):
        change = _step(rest, layout, x) - x
        x = x + np.clip(damping * change, -longest, longest)
        if np.abs(change).max() <= _AT_REST:
            break
    state, converged = state.copy(), converged.copy()
    state[:, index] = x
    converged[index] = np.abs(change).max(axis=0) <= _AT_REST
    return state, converged


def solve(task: Task) -> Solution:
    """Solve a task with the rules that choose between regimes.

    Where valves hold the temperatures between the stages but a section could not pass its steam even with
    the valve open, the temperatures slide.
    """
    if not (task.train.held and task.sections):
        return _on_bleed_or_live_steam(task)
    held = _on_bleed_or_live_steam(replace(task, held=True))
    open_valves = np.flatnonzero((held.opening > _OPEN).any(axis=0))
    if open_valves.size == 0:
        return held
    return overlaid(held, _on_bleed_or_live_steam(task.take(open_valves)), open_valves)


def _on_bleed_or_live_steam(task: Task) -> Solution:
    """First on the bleed; where its pressure falls below the deaerator's, again on throttled live steam."""
    solution = _solution(task, *_solve_state(task))
    low = ~task.on_live_steam & (solution.feed.bleed_bar < solution.feed.deaerator_bar)
    if not low.any():
        return solution
    index = np.flatnonzero(low)
    again = replace(
        task.take(index),
        on_live_steam=np.ones(index.size, dtype=bool),
        earlier=(*task.earlier, *solution.rests),
    )
    return overlaid(solution, _solution(again, *_solve_state(again)), index)


def _solution(task: Task, state: Array, inside: Mask, rest: Rest) -> Solution:
    now = evaluate(task, Layout.of(task), state)
    shells, number = now.shells, task.train.number - 1
    flow = np.ones((number, inside.size))
    valid = inside & (shells.steam_kg_s > 0).all(axis=0) & (np.diff(shells.shell_bar, axis=0) > 0).all(axis=0)
    high = not_below_live_steam(task.plant, shells.steam_kJ_kg[-1], now.feed, task.on_live_steam)
    valid &= ~high.any(axis=0)
    if task.sections:
        flow = _section_share(task, now)
        valid &= (flow >= task.train.tail.min_flow_share).all(axis=0)
    opening = np.ones(flow.shape) if now.throttle.opening is None else now.throttle.opening
    return Solution(
        conditions=replace(task.conditions, heat_MW=now.water.heat_MW),
        network_kg_s=now.water.flow_kg_s,
        flue_gas_MW=now.water.flue_gas_MW,
        efficiency=now.efficiency,
        shells=shells,
        opening=opening,
        section_share=flow,
        condensate_kg_s=now.condensate_kg_s,
        condensate_kJ_kg=now.condensate_kJ_kg,
        condensate_pump_MW=now.condensate_pump_MW,
        feed=now.feed,
        energy=energy_of(task, now),
        on_live_steam=task.on_live_steam,
        valid=valid,
        rests=(rest,),
    )
