"""Thousands of whole studies: what the investment is worth when nobody knows the drivers exactly."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import stats

from appraise.case.hours import Hours
from appraise.case.load import Case, case_from
from appraise.case.money import Driver
from appraise.case.paths import changed
from appraise.cash_flow import cash_flow
from appraise.chain import Physics, Progress, case_npv
from appraise.levers import MULTIPLIER, YEARS, Levers, with_numbers
from appraise.numerics import Array
from appraise.prices import scenario_prices
from appraise.response import Fineness, Response, Sums, fitted, node_probabilities, sums_of
from appraise.sampling import correlated, latin_hypercube, quantile, wanted_correlation
from appraise.workers import each

_BLOCK = 2000  # draws whose money is held at once
# The second only where the first is not accurate enough.
_FINENESS = (Fineness(2, 1.4, bent=False), Fineness(1, 2.4, bent=True))
METHOD_LIMIT = 0.01
FEWEST_CHECKED = 12

Data = Mapping[str, Any]
Chosen = NDArray[np.intp]


@dataclass(frozen=True, slots=True)
class MethodError:
    """How far the fitted response is from draws solved in full, none of which it was fitted to.

    All relative to the deviation of the NPV of the option that comes off worst; `shift` is the change of the
    chance of a positive NPV among the checked draws.
    """

    checked: int
    root_mean_square: float
    largest: float
    shift: float
    nodes: int
    hours: int


@dataclass(frozen=True, slots=True, eq=False)
class OptionRisk:
    """NPV of one option over all draws."""

    option: str
    scenario: str
    number: int
    mean: float
    standard_deviation: float
    p5: float
    p50: float
    p95: float
    standard_error: float
    chance_npv_positive: float
    chance_best: float
    rank_correlation: tuple[tuple[str, float], ...]  # driver's label and Spearman's rank correlation
    npv: Array


@dataclass(frozen=True, slots=True, eq=False)
class Risk:
    """All options over the same draws; `values` [draw, driver] by the order of `labels`."""

    scenario: str
    labels: tuple[str, ...]
    values: Array
    options: tuple[OptionRisk, ...]
    method_error: MethodError | None


def risk(
    case: Case, data: Data, hours: Hours, physics: Physics, number: int, verify: int, progress: Progress
) -> Risk | None:
    """Draw, solve and sum up; None where there is nothing to draw.

    verify : how many draws are solved in full to measure the method's error, where a response is used.
    Raises CaseError for correlations that cannot be and drivers that cannot be drawn.
    """
    drivers = tuple(driver for driver in case.drivers if driver.distribution is not None)
    if not drivers or number == 0:
        return None
    return _Draws(case, data, hours, physics, drivers).run(number, verify, progress)


class _Draws:
    """One run: samples, response, money."""

    def __init__(
        self, case: Case, data: Data, hours: Hours, physics: Physics, drivers: tuple[Driver, ...]
    ) -> None:
        self.case, self.data, self.hours, self.physics, self.drivers = case, data, hours, physics, drivers
        self.scenario = case.draws.scenario or case.study.reference_scenario
        self.levers = Levers(self.scenario)
        self.solved = [i for i, driver in enumerate(drivers) if not self._is_money(driver)]
        self.baseline = next(i for i, option in enumerate(case.options) if option.baseline)

    def _is_money(self, driver: Driver) -> bool:
        """Whether the money takes the driver as an array; else it needs plant, year and capital again."""
        return self.levers.takes(driver.path)

    def run(self, number: int, verify: int, progress: Progress) -> Risk:
        """Sample, fit, evaluate, and measure the error; refine once where it is too large."""
        random = np.random.default_rng(self.case.draws.seed)
        labels = tuple(driver.label for driver in self.drivers)
        pairs = [(*pair.between, pair.rank) for pair in self.case.draws.correlations]
        wanted = wanted_correlation(labels, [p for p in pairs if p[0] in labels and p[1] in labels])
        probability = latin_hypercube(number, len(labels), random)
        if not np.array_equal(wanted, np.eye(len(labels))):
            probability = correlated(probability, wanted, random)
        values = self._values(probability)
        checked = np.sort(random.choice(number, min(verify, number), replace=False))
        exact = self._in_full(values[checked], progress) if self.solved else None
        for fineness in _FINENESS:
            npv, response = self._evaluated(values, fineness)
            error = None
            if exact is not None and response is not None:
                error = self._error(npv, checked, exact, response, fineness.hour_step)
            if error is None or error.root_mean_square <= METHOD_LIMIT:
                break
        progress(1.0, "draws")
        options = tuple(self._summary(npv, values, labels, i) for i in range(len(self.case.options)))
        return Risk(self.scenario, labels, values, options, error)

    def _values(self, probability: Array) -> Array:
        columns = []
        for index, driver in enumerate(self.drivers):
            assert driver.distribution is not None
            drawn = quantile(driver.distribution, probability[:, index])
            columns.append(np.round(drawn) if driver.path == YEARS else drawn)
        return np.column_stack(columns)

    # -- a draw as an edited case

    def _edited(self, data: Data, row: Array, only: list[int]) -> Data:
        """Data of the case with some drivers at the values of one draw."""
        for index in only:
            driver, value = self.drivers[index], float(row[index])
            if self.levers.is_price_path(driver.path):
                data = changed(self.case, data, driver.path, f"{(value - 1.0) * 100.0!r}%", self.scenario)
            else:
                data = changed(self.case, data, driver.path, value, self.scenario)
        return data

    def _in_full(self, rows: Array, progress: Progress) -> Array:
        """NPV [draw, option] of draws solved in full."""

        def solved(row: Array) -> Array:
            edited = case_from(self._edited(self.data, row, list(range(len(self.drivers)))))
            return case_npv(edited, self.hours, self.scenario, self.physics)

        found = []
        for npv in each(solved, list(rows)):
            found.append(npv)
            progress(0.6 * len(found) / len(rows), "draws solved in full")
        return np.array(found)

    # -- all draws

    def _evaluated(self, values: Array, fineness: Fineness) -> tuple[Array, Response | None]:
        """NPV [draw, option] of all draws, and the response that made them if there is one."""
        data = self._longest(values)
        longest = case_from(data)
        if self.solved:
            probability = node_probabilities(len(self.solved), fineness, self.case.draws.seed)
            nodes = np.zeros((len(probability), len(self.drivers)))
            for column, index in enumerate(self.solved):
                distribution = self.drivers[index].distribution
                assert distribution is not None
                nodes[:, index] = quantile(distribution, probability[:, column])
            edits = [self._edited(data, row, self.solved) for row in nodes]
            response = fitted(
                longest, self.hours, self.physics, self.scenario, edits, nodes[:, self.solved], fineness
            )
        else:
            response = None
        start = sums_of(longest, self.hours, self.physics, self.scenario)
        blocks = []
        for first in range(0, len(values), _BLOCK):
            rows = values[first : first + _BLOCK]
            flat = np.broadcast_to(start.flat(), (len(rows), start.flat().size))
            sums = start.like(flat) if response is None else response(rows[:, self.solved])
            blocks.append(self._money(rows, sums))
        return np.concatenate(blocks), response

    def _longest(self, values: Array) -> Data:
        """Data of the case with as many years of operation as any draw has."""
        years = [int(values[:, i].max()) for i, d in enumerate(self.drivers) if d.path == YEARS]
        if not years:
            return self.data
        return changed(self.case, self.data, YEARS, max(years))

    def _money(self, rows: Array, sums: Sums) -> Array:
        """NPV [draw, option] from the sums, draws of equal life together."""
        place = next((i for i, driver in enumerate(self.drivers) if driver.path == YEARS), None)
        if place is None:
            return self._cash(self.case, rows, sums)
        npv = np.zeros((len(rows), len(self.case.options)))
        for life in np.unique(rows[:, place]):
            chosen = np.flatnonzero(rows[:, place] == life)
            case = case_from(changed(self.case, self.data, YEARS, int(life)))
            npv[chosen] = self._cash(case, rows[chosen], _taken(sums, chosen, int(life)))
        return npv

    def _cash(self, case: Case, rows: Array, sums: Sums) -> Array:
        drawn = {d.path: rows[:, i] for i, d in enumerate(self.drivers) if self._is_money(d)}
        prices = self.levers.prices(case, scenario_prices(case, self.scenario), drawn)
        with_arrays = with_numbers(case, drawn, self.scenario)
        multiplier = drawn.get(MULTIPLIER, case.capex.multiplier)
        lost = sums.tie_in_energies().margin(with_arrays, prices)
        columns = []
        for option in range(len(case.options)):
            margin = np.zeros_like(lost) if option == self.baseline else lost
            increment = sums.increment(case, self.scenario, option, margin)
            columns.append(
                cash_flow(with_arrays, prices, increment, sums.capital[:, option] * multiplier).npv
            )
        return np.stack(np.broadcast_arrays(*columns), axis=1)

    # -- what came of it

    def _error(self, npv: Array, checked: Chosen, exact: Array, response: Response, step: int) -> MethodError:
        others = [i for i in range(npv.shape[1]) if i != self.baseline]
        off = npv[checked][:, others] - exact[:, others]
        deviation = npv[:, others].std(axis=0)
        relative = np.abs(off) / np.where(deviation > 0, deviation, 1.0)
        shift = np.abs((npv[checked] > 0).mean(axis=0) - (exact > 0).mean(axis=0))
        return MethodError(
            checked=len(checked),
            root_mean_square=float(np.sqrt((relative**2).mean(axis=0)).max()),
            largest=float(relative.max()),
            shift=float(shift.max()),
            nodes=response.nodes,
            hours=self.hours.time.size // step,
        )

    def _summary(self, npv: Array, values: Array, labels: tuple[str, ...], option: int) -> OptionRisk:
        own = npv[:, option]
        best = np.argmax(npv, axis=1) == option
        deviation = float(own.std(ddof=1)) if own.size > 1 else 0.0
        p5, p50, p95 = (float(v) for v in np.percentile(own, [5, 50, 95]))
        ranks = []
        for label, column in zip(labels, values.T, strict=True):
            constant = own.min() == own.max() or column.min() == column.max()
            ranks.append((label, 0.0 if constant else float(stats.spearmanr(column, own).statistic)))
        return OptionRisk(
            option=self.case.options[option].key,
            scenario=self.scenario,
            number=own.size,
            mean=float(own.mean()),
            standard_deviation=deviation,
            p5=p5,
            p50=p50,
            p95=p95,
            standard_error=deviation / float(np.sqrt(own.size)),
            chance_npv_positive=float((own > 0).mean()),
            chance_best=float(best.mean()),
            rank_correlation=tuple(sorted(ranks, key=lambda pair: -abs(pair[1]))),
            npv=own,
        )


def _taken(sums: Sums, chosen: Chosen, years: int) -> Sums:
    return replace(
        sums,
        energies=sums.energies[chosen][..., :years],
        tie_in=sums.tie_in[chosen],
        capital=sums.capital[chosen],
    )
