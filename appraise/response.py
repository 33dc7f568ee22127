"""A fitted response that stands in for the full solve of plant and year in thousands of draws.

Plant, year and capital are solved at a few nodes spread over the drivers' distributions, on a part of the
hours; energies and capital are polynomials of the drivers through them, scaled so that the case itself comes
out as solved in full. What that costs in accuracy is measured by draws solved in full.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields, replace
from itertools import combinations, permutations
from typing import Any

import numpy as np
from scipy.stats import qmc

from appraise.capex import capital
from appraise.case.hours import Hours
from appraise.case.load import Case, case_from
from appraise.cash_flow import Increment
from appraise.chain import Physics, run_scenario, solve_physics
from appraise.errors import AppraiseError, SolveError
from appraise.numerics import Array
from appraise.trade import TieIn
from appraise.workers import each

_ENERGIES = ("power_MWh", "weighted_power_MWh", "premium_MWh", "fuel_MWh", "peak_fuel_MWh")
_TIE_IN = tuple(field.name for field in fields(TieIn))
_EDGE = 0.002  # probability left out at either end of a distribution when nodes are placed
_EXTRA_NODES = 14

Edit = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Fineness:
    """How finely a response is made.

    hour_step : 1 for all hours, k for every k-th. density : nodes for each coefficient. bent : also fourth
    powers, and products of a square and another driver, for plants that change their regime.
    """

    hour_step: int
    density: float
    bent: bool


@dataclass(frozen=True, slots=True, eq=False)
class Sums:
    """All that the money of a draw needs of its plant, year and capital; leading axes [draw].

    energies : [..., option, kind, operating year]; tie_in : [..., kind]; capital : [..., option], against the
    baseline, without the multiplier on the total.
    """

    energies: Array
    tie_in: Array
    capital: Array

    def increment(self, case: Case, scenario: str, option: int, tie_in: Array) -> Increment:
        """What one option trades, by draw."""
        kinds = {name: self.energies[..., option, k, :] for k, name in enumerate(_ENERGIES)}
        return Increment(option=case.options[option].key, scenario=scenario, tie_in=tie_in, **kinds)

    def tie_in_energies(self) -> TieIn:
        """Energies of the tie-in by draw."""
        return TieIn(**{name: self.tie_in[..., k] for k, name in enumerate(_TIE_IN)})

    def flat(self) -> Array:
        """One row of numbers for each draw."""
        lead = self.capital.shape[:-1]
        return np.concatenate([self.energies.reshape(*lead, -1), self.tie_in, self.capital], axis=-1)

    def like(self, flat: Array) -> Sums:
        """Sums of this shape, with any leading axes, from rows of numbers."""
        number, lead = self.energies.size, flat.shape[:-1]
        ends = (number, number + self.tie_in.size)
        return Sums(
            flat[..., : ends[0]].reshape(*lead, *self.energies.shape),
            flat[..., ends[0] : ends[1]],
            flat[..., ends[1] :],
        )


def sums_of(case: Case, hours: Hours, physics: Physics, scenario: str) -> Sums:
    """The sums of one solved case."""
    bought = capital(case, physics.sizes)
    run = run_scenario(case, hours, physics, bought, scenario)
    energies = [[getattr(one.increment, name) for name in _ENERGIES] for one in run.traded]
    tie = run.traded[0].tie_in
    factor = case.capex.multiplier
    return Sums(
        energies=np.array(energies),
        tie_in=np.array([float(getattr(tie, name)) for name in _TIE_IN]),
        capital=np.array([paid.extra / factor if factor else 0.0 for paid in bought]),
    )


def part_of(hours: Hours, heat_MW: Array, step: int) -> Hours:
    """Every `step`-th hour in the order of heat, to stand for them all: same years, fewer rows."""
    if step == 1:
        return hours
    index = np.sort(np.argsort(heat_MW, kind="stable")[step // 2 :: step])
    columns = {
        name: None if (column := getattr(hours, name)) is None else column[index]
        for name in ("heat_MW", "outdoor_C", "supply_C", "return_C", "power_price")
    }
    others = {name: column[index] for name, column in hours.other_prices.items()}
    share = index.size / hours.time.size
    return replace(
        hours,
        time=hours.time[index],
        other_prices=others,
        number_of_years=hours.number_of_years * share,
        **columns,
    )


@dataclass(frozen=True, slots=True, eq=False)
class Response:
    """Polynomial in the drivers, in units of their spread around their middle.

    coefficients : [term, number]. bent : see `Fineness`. nodes : how many it was fitted to.
    """

    middle: Array
    spread: Array
    coefficients: Array
    start: Sums
    scale: Array
    bent: bool
    nodes: int

    def __call__(self, values: Array) -> Sums:
        """Sums at values of the drivers [draw, driver]."""
        flat = _terms((values - self.middle) / self.spread, self.bent) @ self.coefficients
        return self.start.like(flat * self.scale)


def _terms(z: Array, bent: bool) -> Array:
    """1, z, z², z³ of each driver and the products of pairs [point, term]; `bent` adds z⁴ and z² z'."""
    drivers = range(z.shape[1])
    pairs = [z[:, i] * z[:, j] for i, j in combinations(drivers, 2)]
    powers = [z**k for k in (1, 2, 3)]
    more = [z**4, *(z[:, [i]] ** 2 * z[:, [j]] for i, j in permutations(drivers, 2))] if bent else []
    return np.column_stack([np.ones(len(z)), *powers, *pairs, *more])


def _number_of_terms(drivers: int, bent: bool) -> int:
    """How many coefficients a response of so many drivers has."""
    return int(_terms(np.zeros((1, drivers)), bent).shape[1])


def node_probabilities(drivers: int, fineness: Fineness, seed: int) -> Array:
    """Where to solve [node, driver]: scrambled Sobol points, denser towards the ends of the distributions.

    The arcsine spacing is that of Chebyshev's nodes: a polynomial through even spacing strays at its ends.
    """
    number = round(fineness.density * (_number_of_terms(drivers, fineness.bent) + _EXTRA_NODES))
    points = qmc.Sobol(drivers, rng=np.random.default_rng(seed)).random_base2(int(np.ceil(np.log2(number))))
    return np.asarray(np.clip(0.5 - 0.5 * np.cos(np.pi * points[:number]), _EDGE, 1.0 - _EDGE))


def fitted(
    case: Case,
    hours: Hours,
    physics: Physics,
    scenario: str,
    edits: Sequence[Edit],
    values: Array,
    fineness: Fineness,
) -> Response:
    """Solve the nodes and fit. edits : data of the case at each node; values : of its drivers [node, driver].

    Nodes that cannot be built are left out; raises SolveError where too few are left.
    """
    from appraise.demand import demand

    reduced = part_of(hours, demand(case, hours).heat_MW, fineness.hour_step)
    start = sums_of(case, hours, physics, scenario)
    known = solve_physics(case, reduced)

    def solved(edit: Edit) -> Array | None:
        try:
            edited = case_from(edit)
            return sums_of(edited, reduced, solve_physics(edited, reduced, known), scenario).flat()
        except AppraiseError:
            return None

    rows = list(each(solved, edits))
    kept = [index for index, row in enumerate(rows) if row is not None]
    if len(kept) < _number_of_terms(values.shape[1], fineness.bent) + 2:
        raise SolveError(f"draws: only {len(kept)} of {len(rows)} nodes of the response could be solved")
    middle, spread = values.mean(axis=0), values.std(axis=0)
    spread = np.where(spread > 0, spread, 1.0)
    base = sums_of(case, reduced, known, scenario).flat()
    target = np.array([rows[index] for index in kept])
    terms = _terms((values[kept] - middle) / spread, fineness.bent)
    coefficients = np.linalg.lstsq(terms, target, rcond=None)[0]
    whole = start.flat()
    scale = np.divide(whole, base, out=np.ones_like(whole), where=base != 0.0)
    return Response(middle, spread, np.asarray(coefficients), start, scale, fineness.bent, len(kept))
