"""The year: every option in every hour, with the rules that decide what is really gained.

Arrays are [hour], before availability, 0 where the plant stands still.
"""

from __future__ import annotations

from collections.abc import Container, Mapping
from dataclasses import dataclass, fields
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from appraise.case.hours import Hours
from appraise.case.load import Case
from appraise.cycle.design import Design, OptionDesign
from appraise.cycle.task import Mask, Rest
from appraise.demand import Demand, changes, demand
from appraise.numerics import Array
from appraise.operate import Run, StageRows, least_heat, operate, stage_rows

# No option needs anywhere near this much more live steam than the baseline at equal heat, so hours in which
# the baseline stays this far below its least flow cannot come into question; nor can hours with less than
# half the heat that goes with the least flow at the design point.
_NEAR_LEAST_FLOW = 0.7
_SURELY_OFF = 0.5


Number = TypeVar("Number", np.float64, np.bool_)


@dataclass(frozen=True, slots=True, eq=False)
class Peaks:
    """Greatest value of each row over the hours in operation, and the hour that has it (-1: none)."""

    value: Array
    hour: NDArray[np.intp]


@dataclass(frozen=True, slots=True, eq=False)
class Greatest:
    """Greatest values over all hours in operation; those of stages are [stage], cold to hot.

    `closure` is the largest residual of the energy balance, relative to the boiler's heat.
    """

    live_steam_kg_s: Peaks
    closure: Peaks
    heat_MW: Peaks
    moisture: Peaks
    exhaust_m3_s: Peaks
    steam_kg_s: Peaks
    section_MW: Peaks
    condensate_pump_MW: Peaks
    network_pump_MW: Peaks


@dataclass(frozen=True, slots=True, eq=False)
class OptionYear:
    """One option over the hours of one operating year.

    Where `as_baseline`, the option found no operation of its own and the baseline's values stand.
    """

    key: str
    on: Mask
    heat_MW: Array
    peak_heat_MW: Array
    flue_gas_MW: Array
    power_gross_MW: Array
    power_net_MW: Array
    power_lost_MW: Array  # gross, at a generator's limit
    fuel_MW: Array
    live_steam_kg_s: Array
    on_live_steam: Mask  # the deaerator
    heater_in_use: Mask
    at_steam_limit: Mask
    at_heat_limit: Mask
    at_fuel_limit: Mask
    at_generator_limit: Mask
    throttled: Mask  # valves hold the temperatures between the stages
    as_baseline: Mask
    below_tail_minimum: Mask  # of those: a tail section below its least flow
    could_gain: Mask  # the option could run, the baseline could not
    no_operation: Mask  # of the baseline: enough heat is asked for, but at temperatures it cannot serve
    greatest: Greatest
    years: float
    rests: tuple[Rest, ...]

    @property
    def at_limit(self) -> Mask:
        """Live steam or heat at its limit."""
        return self.at_steam_limit | self.at_heat_limit

    def hours(self, mask: Mask) -> float:
        """Hours a year in which a flag is set."""
        return float(np.count_nonzero(mask)) / self.years


@dataclass(frozen=True, slots=True, eq=False)
class YearRuns:
    """Hours in which the baseline runs or is near its least flow, and the options of one year by key."""

    near: Mask
    options: Mapping[str, OptionYear]

    def rests(self, key: str) -> tuple[Rest, ...]:
        """Where an option of that key came to rest."""
        return self.options[key].rests if key in self.options else ()


@dataclass(frozen=True, slots=True, eq=False)
class Years:
    """The operating years that were solved, and how to get at those between.

    knots : operating years that were solved; one, where nothing changes. solved : [knot][option].
    near : [knot], hours in which the baseline runs or is near its least flow.
    shares : availability of each option's own operation.
    """

    baseline: int
    knots: tuple[int, ...]
    solved: tuple[tuple[OptionYear, ...], ...]
    near: tuple[Mask, ...]
    shares: tuple[float, ...]
    demand_MWh: float  # of the first operating year

    def at(self, number: int) -> YearRuns:
        """The runs of one knot, or of the last where there are fewer."""
        number = min(number, len(self.solved) - 1)
        return YearRuns(self.near[number], {one.key: one for one in self.solved[number]})

    def weights(self, number: int) -> Array:
        """Weights [operating year, knot] that give any year from the solved ones."""
        return lagrange_weights(np.array(self.knots, dtype=float), np.arange(number, dtype=float))


def solve_years(
    case: Case, hours: Hours, made: Design, known: Years | None = None, same: Container[str] = ()
) -> Years:
    """Solve the operating years that differ: one where nothing changes, else first, middle and last.

    What lies between follows from the polynomial through them. known : years of a similar case in the same
    hours, to start from; the options whose keys are in `same` are taken from it as they are.
    """
    last = case.study.years - 1
    knots = tuple(sorted({0, last // 2, last})) if changes(case) else (0,)
    asked = [demand(case, hours, k) for k in knots]
    solved, near = [], []
    for number, one in enumerate(asked):
        before = None if known is None else known.at(number)
        runs, tried = solve_year(one, made, case.year.extra_running, before, same)
        solved.append(runs)
        near.append(tried)
    return Years(
        baseline=next(i for i, option in enumerate(case.options) if option.baseline),
        knots=knots,
        solved=tuple(solved),
        near=tuple(near),
        shares=tuple(
            case.year.availability * (case.tail_of(option).availability if option.stages > 1 else 1.0)
            for option in case.options
        ),
        demand_MWh=float(asked[0].heat_MW.sum()) / asked[0].years,
    )


def lagrange_weights(knots: Array, x: Array) -> Array:
    """Weights [x, knot] of the polynomial through values at the knots."""
    others = ~np.eye(knots.size, dtype=bool)
    return np.array(
        [np.prod((x[:, None] - knots[o]) / (knots[j] - knots[o]), axis=1) for j, o in enumerate(others)]
    ).T


def solve_year(
    asked: Demand, made: Design, extra_running: bool, known: YearRuns | None = None, same: Container[str] = ()
) -> tuple[tuple[OptionYear, ...], Mask]:
    """Run every option through the hours of one operating year, in the case's order.

    Returns the runs, and the hours in which the baseline runs or is near its least flow.
    known : of a similar case in the same hours, to start from; its options in `same` are taken over.
    """
    before = known or YearRuns(np.zeros(0, dtype=bool), {})
    base_key = made.baseline.train.key
    if base_key in same:
        base, near = before.options[base_key], before.near
    else:
        base, near = _baseline_year(asked, made, extra_running, before.rests(base_key))

    def run(option: OptionDesign) -> OptionYear:
        key = option.train.key
        if key == base_key:
            return base
        if key in same:
            return before.options[key]
        own = operate(made, option, asked, near, before.rests(key))
        return _option_year(made, option, asked, own, base, extra_running)

    return tuple(run(option) for option in made.options), near


def _baseline_year(
    asked: Demand, made: Design, extra_running: bool, earlier: tuple[Rest, ...]
) -> tuple[OptionYear, Mask]:
    wanted = asked.available & (asked.heat_MW > 0) & (asked.heat_MW >= least_heat(made, _SURELY_OFF))
    run = operate(made, made.baseline, asked, wanted, earlier)
    near = np.zeros_like(wanted)
    near[run.hour] = run.solution.feed.live_steam_kg_s >= _NEAR_LEAST_FLOW * made.plant.min_kg_s
    return _option_year(made, made.baseline, asked, run, None, extra_running), near


@dataclass(frozen=True, slots=True, eq=False)
class _When:
    """In which hours an option is on, runs as the baseline, could run alone, or has no operation [hour]."""

    on: Mask
    borrowed: Mask
    could_gain: Mask
    no_operation: Mask

    @classmethod
    def of(cls, valid: Mask, enough: Mask, base: OptionYear | None, extra_running: bool) -> _When:
        """valid : a steady operation was found. enough : it needs at least the least live steam."""
        runs, none = valid & enough, np.zeros_like(valid)
        if base is None:
            return cls(runs, none, none, ~valid & enough)
        borrowed = base.on & ~valid
        # Nobody starts a boiler for the few hours that only the option could run.
        on = (runs | borrowed) if extra_running else base.on & (runs | borrowed)
        return cls(on, borrowed, runs & ~base.on, none)


def _option_year(
    made: Design, option: OptionDesign, asked: Demand, run: Run, base: OptionYear | None, extra_running: bool
) -> OptionYear:
    """Decide on and off, and take the baseline's values where the option has no operation of its own."""
    size, at, hour = asked.heat_MW.size, run.solution, run.hour

    def spread(values: NDArray[Number]) -> NDArray[Number]:
        full = np.zeros(size, dtype=values.dtype)
        full[hour] = values
        return full

    enough = at.feed.live_steam_kg_s >= made.plant.min_kg_s
    when = _When.of(spread(at.valid), spread(enough), base, extra_running)
    own = when.on & ~when.borrowed

    def taken(name: str, values: NDArray[Number]) -> NDArray[Number]:
        mine = spread(values)
        mine[~own] = 0
        if base is not None:
            mine[when.borrowed] = getattr(base, name)[when.borrowed]
        return mine

    heat = taken("heat_MW", at.conditions.heat_MW)
    few = np.asarray((at.section_share < option.train.tail.min_flow_share).any(axis=0))
    throttled = np.asarray((at.opening < 1.0).any(axis=0))
    return OptionYear(
        key=option.train.key,
        on=when.on,
        heat_MW=heat,
        peak_heat_MW=asked.heat_MW - heat,
        flue_gas_MW=taken("flue_gas_MW", at.flue_gas_MW),
        power_gross_MW=taken("power_gross_MW", at.energy.power_gross_MW),
        power_net_MW=taken("power_net_MW", at.energy.power_net_MW),
        power_lost_MW=taken("power_lost_MW", at.energy.power_lost_MW),
        fuel_MW=taken("fuel_MW", at.energy.fuel_MW),
        live_steam_kg_s=taken("live_steam_kg_s", at.feed.live_steam_kg_s),
        on_live_steam=taken("on_live_steam", at.on_live_steam),
        heater_in_use=taken("heater_in_use", at.feed.heater_kg_s > 0),
        at_steam_limit=taken("at_steam_limit", run.at_steam_limit),
        at_heat_limit=taken("at_heat_limit", run.at_heat_limit),
        at_fuel_limit=taken("at_fuel_limit", run.at_fuel_limit),
        at_generator_limit=taken("at_generator_limit", at.energy.power_lost_MW > 0),
        throttled=taken("throttled", throttled),
        as_baseline=when.borrowed,
        below_tail_minimum=when.borrowed & spread(few),
        could_gain=when.could_gain,
        no_operation=when.no_operation,
        greatest=_greatest(made, run, own),
        years=asked.years,
        rests=run.solution.rests,
    )


def _greatest(made: Design, run: Run, own: Mask) -> Greatest:
    points = np.flatnonzero(own[run.hour])

    def top(values: Array) -> Peaks:
        rows = np.atleast_2d(values)
        if points.size == 0:
            return Peaks(np.zeros(len(rows)), np.full(len(rows), -1))
        chosen = points[np.argmax(rows[:, points], axis=1)]
        return Peaks(rows[np.arange(len(rows)), chosen], run.hour[chosen])

    stages = stage_rows(made, run.solution)
    return Greatest(
        live_steam_kg_s=top(run.solution.feed.live_steam_kg_s),
        closure=top(run.solution.energy.closure),
        **{field.name: top(getattr(stages, field.name)) for field in fields(StageRows)},
    )
