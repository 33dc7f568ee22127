"""The chain for one case: physics once, then the money of any scenario from it.

Everything that varies a case (the study itself, its sensitivities, draws) goes through here, so that all of
them compute the same thing.
"""

from __future__ import annotations

from collections.abc import Callable, Hashable, Mapping
from dataclasses import dataclass

import numpy as np

from appraise.capex import OptionCapital, capital
from appraise.case.hours import Hours
from appraise.case.load import Case
from appraise.case.plant import Option
from appraise.cash_flow import CashFlow, cash_flow
from appraise.cycle.design import Design, design
from appraise.cycle.limits import steam_problems
from appraise.demand import changes
from appraise.errors import CaseError
from appraise.numerics import Array
from appraise.prices import ScenarioPrices, price_shape, scenario_prices
from appraise.sizing import OptionSize, option_size
from appraise.trade import Traded, traded
from appraise.year import Years, solve_years

Progress = Callable[[float, str], None]


@dataclass(frozen=True, slots=True, eq=False)
class Physics:
    """Everything of a case that prices do not touch, in the order of its options."""

    key: Hashable
    option_keys: Mapping[str, Hashable]
    hours: Hours
    design: Design
    years: Years
    sizes: tuple[OptionSize, ...]


def physics_key(case: Case) -> Hashable:
    """The part of a case that its physics depends on: two cases with equal keys share it."""
    horizon = case.study.years if changes(case) else 0
    return (case.plant, case.tail, case.new_condenser, case.options, case.network, case.year, horizon)


def option_key(case: Case, option: Option) -> Hashable:
    """The part of a case that one option's year depends on, beside the baseline."""
    equipment = (case.tail_of(option), case.new_condenser_of(option)) if option.stages > 1 else ()
    horizon = case.study.years if changes(case) else 0
    # Availability and meters come in after the hours are solved.
    year = case.year.model_copy(update={"availability": 1.0, "metered": None})
    return (case.plant, case.network, year, case.baseline, option, equipment, horizon)


def solve_physics(case: Case, hours: Hours, known: Physics | None = None) -> Physics:
    """Design point, year and sizes; `known` is handed back where it is the same plant in the same year.

    Where only some options differ from those of `known`, in the same hours, only they are run again.

    Raises CaseError where the steam tables or the design point refuse the case, SolveError where an hour
    has no solution.
    """
    key = physics_key(case)
    if known is not None and known.key == key:
        return known
    problems = steam_problems(case, hours)
    if problems:
        raise CaseError(problems)
    made = design(case)
    keys = {option.key: option_key(case, option) for option in case.options}
    years = _years(case, hours, made, keys, known)
    sizes = tuple(
        option_size(option, made.plant, tuple(solved[i] for solved in years.solved))
        for i, option in enumerate(made.options)
    )
    return Physics(key, keys, hours, made, years, sizes)


def _years(
    case: Case, hours: Hours, made: Design, keys: Mapping[str, Hashable], known: Physics | None
) -> Years:
    """The years, begun where those of `known` came to rest, with the runs of options that it has already."""
    if known is None or known.hours is not hours:
        return solve_years(case, hours, made)
    same = {key for key, value in keys.items() if known.option_keys.get(key) == value}
    return solve_years(case, hours, made, known.years, same if case.baseline.key in same else ())


@dataclass(frozen=True, slots=True, eq=False)
class ScenarioRun:
    """The money of every option in one scenario, in the order of the options."""

    prices: ScenarioPrices
    shape: Array  # of the power price, mean 1 [hour]
    traded: tuple[Traded, ...]
    flows: tuple[CashFlow, ...]

    @property
    def npv(self) -> Array:
        """Net present value by option."""
        return np.array([float(flow.npv) for flow in self.flows])


def run_scenario(
    case: Case, hours: Hours, physics: Physics, bought: tuple[OptionCapital, ...], name: str
) -> ScenarioRun:
    """Trade and cash flow of every option in one scenario."""
    prices = scenario_prices(case, name)
    shape = price_shape(case, hours, name)
    exchanged = traded(case, hours, physics.years, prices, shape)
    flows = tuple(
        cash_flow(case, prices, one.increment, paid) for one, paid in zip(exchanged, bought, strict=True)
    )
    return ScenarioRun(prices, shape, exchanged, flows)


def case_npv(case: Case, hours: Hours, scenario: str, known: Physics | None = None) -> Array:
    """Net present value of every option of a whole case in one scenario [option]."""
    physics = solve_physics(case, hours, known)
    return run_scenario(case, hours, physics, capital(case, physics.sizes), scenario).npv
