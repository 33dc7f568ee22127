"""The whole study of a case, composed: heat balances, year, capital, money, sensitivity, checks."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date

import numpy as np

from appraise.capex import OptionCapital, capital
from appraise.case.hours import Hours
from appraise.case.load import Case, LoadedCase
from appraise.cash_flow import CashFlow
from appraise.chain import Physics, Progress, ScenarioRun, run_scenario, solve_physics
from appraise.checks import Check, checks
from appraise.cycle.balance import Balance, design_balances
from appraise.cycle.balance import point_balances as balances_at
from appraise.cycle.design import design
from appraise.cycle.limits import boiling_problems, steam_problems
from appraise.draws import FEWEST_CHECKED, Risk, risk
from appraise.errors import CaseError
from appraise.estimates import Estimate, estimates
from appraise.grid import BreakEvenGrid, break_even_grid
from appraise.measures import Measures, measures
from appraise.moves import Move, gain_moves
from appraise.numerics import Array
from appraise.optimum import DesignChoice, design_choice
from appraise.sensitivity import Tornado, tornado
from appraise.trade import YearFigures, year_figures


@dataclass(frozen=True, slots=True, eq=False)
class Comparison:
    """Options against each other in every scenario; the baseline, worth 0, competes.

    npv, regret : [scenario, option]; worst, largest_regret : [option]; best : option by scenario, as index.
    """

    npv: Array
    regret: Array
    worst: Array
    largest_regret: Array
    best: tuple[int, ...]

    @classmethod
    def of(cls, npv: Array) -> Comparison:
        """Compare; `npv` is [scenario, option]. Of equal options the first in the case counts as best."""
        regret = npv.max(axis=1, keepdims=True) - npv
        best = tuple(int(i) for i in np.argmax(npv, axis=1))
        return cls(npv, regret, npv.min(axis=0), regret.max(axis=0), best)


@dataclass(frozen=True, slots=True, eq=False)
class Study:
    """All results of a case. Tuples follow the case's order of options and of scenarios."""

    loaded: LoadedCase
    dated: date  # what the case says, else the day of the run
    physics: Physics
    balances: tuple[Balance, ...]
    capital: tuple[OptionCapital, ...]
    estimates: tuple[Estimate, ...]
    runs: tuple[ScenarioRun, ...]
    measures: tuple[tuple[Measures, ...], ...]  # [scenario][option]
    year_figures: tuple[tuple[YearFigures, ...], ...]  # [scenario][option]
    comparison: Comparison
    tornado: tuple[Tornado, ...]
    moves: tuple[Move, ...]
    grids: tuple[BreakEvenGrid, ...]  # every option but the baseline, in the reference scenario
    risk: Risk | None
    design_choice: DesignChoice | None  # of the best option with several stages
    checks: tuple[Check, ...]

    @property
    def case(self) -> Case:
        """The case as validated."""
        return self.loaded.case

    @property
    def hours(self) -> Hours:
        """The series as read."""
        return self.loaded.hours

    @property
    def reference(self) -> int:
        """Index of the reference scenario."""
        return list(self.case.scenarios).index(self.case.study.reference_scenario)


def balances(case: Case) -> tuple[Balance, ...]:
    """Heat balance of every option at the design point. Raises CaseError."""
    _refuse_wet(case)
    return design_balances(case, design(case))


def point_balances(case: Case, heat_MW: float, supply_C: float, return_C: float) -> tuple[Balance, ...]:
    """Heat balance of every option at another point, with the sizes of the design point. Raises CaseError."""
    _refuse_wet(case)
    too_hot = tuple(boiling_problems(case, "supply of the operating point", supply_C))
    if too_hot:
        raise CaseError(too_hot)
    return balances_at(case, design(case), heat_MW, supply_C, return_C)


def _refuse_wet(case: Case) -> None:
    problems = steam_problems(case, None)
    if problems:
        raise CaseError(problems)


def run_study(
    loaded: LoadedCase,
    progress: Progress = lambda fraction, label: None,
    draws: int | None = None,
    verify: int = FEWEST_CHECKED,
    today: date | None = None,
) -> Study:
    """Solve everything the case asks for.

    progress : hears a fraction from 0 to 1 and what is being done. draws : in place of the case's number.
    verify : how many draws are solved in full to measure the error of the method.
    today : the study's date where the case has none; left out, the day by this computer's clock.
    """
    case, hours = loaded.case, loaded.hours
    dated = _date_of(case, today)
    progress(0.0, "design point and year")
    physics = solve_physics(case, hours)
    bought = capital(case, physics.sizes)
    runs = tuple(run_scenario(case, hours, physics, bought, name) for name in case.scenarios)
    comparison = Comparison.of(np.stack([run.npv for run in runs]))
    progress(0.15, "measures")
    figures = tuple(tuple(_figures(case, physics, run, i) for i in range(len(case.options))) for run in runs)
    told = tuple(tuple(measures(flow) for flow in run.flows) for run in runs)
    reference = list(case.scenarios).index(case.study.reference_scenario)
    base_npv, data = comparison.npv[reference], loaded.data
    bars = tornado(case, data, hours, physics, base_npv, _part(progress, 0.2, 0.5))
    progress(0.5, "what moves the gain")
    moves = gain_moves(case, data, hours, physics)
    number = case.draws.number if draws is None else draws
    drawn = risk(case, data, hours, physics, number, verify, _part(progress, 0.55, 0.8))
    progress(0.8, "design choice")
    choice = chosen_design(case, hours, base_npv)
    progress(0.95, "checks")
    return Study(
        loaded=loaded,
        dated=dated,
        physics=physics,
        balances=design_balances(case, physics.design),
        capital=bought,
        estimates=estimates(case, physics.sizes),
        runs=runs,
        measures=told,
        year_figures=figures,
        comparison=comparison,
        tornado=bars,
        moves=moves,
        grids=tuple(
            break_even_grid(flow)
            for flow, option in zip(runs[reference].flows, case.options, strict=True)
            if not option.baseline
        ),
        risk=drawn,
        design_choice=choice,
        checks=checks(case, hours, physics, bought, runs, None if drawn is None else drawn.method_error),
    )


def _part(progress: Progress, start: float, end: float) -> Progress:
    """What a part of the work says of itself, as a part of the whole."""
    return lambda fraction, label: progress(start + (end - start) * fraction, label)


def _date_of(case: Case, today: date | None) -> date:
    given = case.study.date
    return date.fromisoformat(given) if given is not None else today or date.today()


def design_of(loaded: LoadedCase, key: str | None) -> DesignChoice | None:
    """Design choice of one option, or of the best one with several stages. None where there is none."""
    case, hours = loaded.case, loaded.hours
    physics = solve_physics(case, hours)
    bought = capital(case, physics.sizes)
    npv = run_scenario(case, hours, physics, bought, case.study.reference_scenario).npv
    if key is None:
        return chosen_design(case, hours, npv)
    index = next(i for i, option in enumerate(case.options) if option.key == key)
    return design_choice(case, hours, key, float(npv[index]))


def chosen_design(case: Case, hours: Hours, npv: Array) -> DesignChoice | None:
    """Design choice of the option with several stages that is worth most; None where there is none."""
    several = [(float(npv[i]), option.key) for i, option in enumerate(case.options) if option.stages > 1]
    if not several:
        return None
    worth, key = max(several)
    return design_choice(case, hours, key, worth)


def _figures(case: Case, physics: Physics, run: ScenarioRun, index: int) -> YearFigures:
    flow = run.flows[index]
    return year_figures(
        case, physics.years, index, run.traded[index], run.prices, run.shape, first_year_gain(case, flow)
    )


def first_year_gain(case: Case, flow: CashFlow) -> float:
    """Sum of the operating lines in the first operating year, before tax, on the basis of the analysis."""
    return float(flow.lines.operating()[len(case.capex.spend)])
