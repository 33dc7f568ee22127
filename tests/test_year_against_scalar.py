"""The year in arrays against the independent scalar solver, hour by hour, rule by rule.

Invented cases switch the rules on; every one of them must act in at least five of the hours compared, so that
a rule that is missing, or wrong, or no longer reached by any hour shows.
"""

import math
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache

import numpy as np
import pytest
from scalar.hour import Point
from scalar.prices import prices as scalar_prices
from scalar.rules import RULES, rules_of
from scalar.year import Row, Year, solved_years
from year_cases import YearCase, cases, hard_hours

from appraise.case import load
from appraise.case.hours import Hours
from appraise.case.load import Case
from appraise.cycle.design import design
from appraise.prices import price_shape, scenario_prices
from appraise.trade import Traded, YearFigures, traded, year_figures
from appraise.year import OptionYear, Years, solve_years

CLOSE = 1e-8  # relative, on every quantity of every hour and every sum
LEAST_HOURS = 5
CASES = {case.name: case for case in cases()}

QUANTITIES = (
    "heat_MW",
    "power_net_MW",
    "power_gross_MW",
    "fuel_MW",
    "peak_heat_MW",
    "flue_gas_MW",
    "power_lost_MW",
    "live_steam_kg_s",
)


@dataclass(frozen=True)
class Difference:
    """One quantity of one option in one hour (-1: a sum over all), the package's and the scalar solver's."""

    case: str
    option: str
    quantity: str
    year: int
    hour: int
    mine: float
    theirs: float
    scale: float

    @property
    def size(self) -> float:
        """Relative; infinite where one of the two is no number."""
        off = abs(self.mine - self.theirs) / self.scale
        return math.inf if math.isnan(off) else off

    def __str__(self) -> str:
        when = f"year {self.year}" + (f", hour {self.hour}" if self.hour >= 0 else ", sum")
        return (
            f"{self.case}: {self.option}, {when}: {self.quantity} is {self.mine:.9g}, "
            f"by the scalar solver {self.theirs:.9g} ({self.size:.1e} relative)"
        )


@dataclass(frozen=True)
class Compared:
    """All differences of one case, and which rules acted in which of its hours."""

    differences: tuple[Difference, ...]
    rules: tuple[frozenset[str], ...]  # by compared hour

    def fault(self) -> str:
        """Empty where all agrees; else how much does not, the worst, and the worst hour where both run."""
        wrong = [d for d in self.differences if not d.size < CLOSE]
        if not wrong:
            return ""
        said = [f"{len(wrong)} of {len(self.differences)} differ", str(max(wrong, key=lambda d: d.size))]
        running = [d for d in wrong if d.mine and d.theirs and d.hour >= 0]
        if running:
            said.append(str(max(running, key=lambda d: d.size)))
        return "; ".join(said)


def case_of(data) -> Case:
    """The case as the package reads it."""
    return load.case_from(data)


def hours_of(case: YearCase) -> Hours:
    """The hours of a case as the package has them; their dates fall in one leap year."""

    def column(name: str) -> np.ndarray | None:
        values = [getattr(row, name) for row in case.rows]
        return None if None in values else np.array(values, dtype=float)

    def start(row: Row) -> np.datetime64:
        return np.datetime64(f"2024-{row.month:02d}-{row.day:02d}T12", "h")

    return Hours(
        time=np.array([start(row) for row in case.rows]),
        heat_MW=column("heat_MW"),
        outdoor_C=column("outdoor_C"),
        supply_C=column("supply_C"),
        return_C=column("return_C"),
        power_price=column("price"),
        number_of_years=case.years,
    )


@cache
def compared(name: str) -> Compared:
    """Solve a case of the list both ways, once."""
    return both_ways(CASES[name])


def both_ways(case: YearCase) -> Compared:
    """Solve a case both ways."""
    theirs = Year(case.data, case.rows, case.years, case.scenario)
    mine, hours = case_of(case.data), hours_of(case)
    years = solve_years(mine, hours, design(mine))
    assert years.knots == theirs.knots
    prices, shape = scenario_prices(mine, case.scenario), price_shape(mine, hours, case.scenario)
    sold = traded(mine, hours, years, prices, shape)
    found: list[Difference] = []
    for index, option in enumerate(mine.options):
        for knot in range(len(years.knots)):
            found += _hours(case, theirs, knot, years.solved[knot][index])
        figures = year_figures(mine, years, index, sold[index], prices, shape, 0.0)
        found += _sums(case, theirs, option.key, years, figures)
        found += _increments(case, theirs, option.key, sold[index], figures)
        if sold[index].bypassed is not None:
            found += _bypasses(case, theirs, option.key, sold[index])
    acting = [
        rules_of(theirs, hour, knot) for knot in range(len(years.knots)) for hour in range(len(case.rows))
    ]
    return Compared(tuple(found), tuple(map(frozenset, acting)))


def _hours(case: YearCase, theirs: Year, knot: int, mine: OptionYear) -> Iterator[Difference]:
    """Every quantity and flag of one option in every hour of one solved year."""

    def difference(quantity: str, hour: int, one: float, other: float, scale: float) -> Difference:
        return Difference(case.name, mine.key, quantity, theirs.knots[knot], hour, one, other, scale)

    for hour in range(len(case.rows)):
        point = theirs.point(mine.key, hour, knot)
        for quantity, other in _numbers(theirs, mine.key, hour, knot).items():
            one = float(getattr(mine, quantity)[hour])
            yield difference(quantity, hour, one, other, max(abs(other), 0.01))
        for flag, other in _flags(theirs, point).items():
            yield difference(flag, hour, float(getattr(mine, flag)[hour]), float(other), 1.0)


def _numbers(theirs: Year, key: str, hour: int, knot: int) -> dict[str, float]:
    point = theirs.point(key, hour, knot)
    numbers = {name: getattr(point, name) for name in QUANTITIES if name != "power_lost_MW"}
    return numbers | {"power_lost_MW": point.gross_lost_MW}


def _flags(theirs: Year, point: Point) -> dict[str, bool]:
    flags = {
        "on": point.on,
        "as_baseline": point.as_baseline,
        "on_live_steam": point.deaerator_on_live_steam,
        "heater_in_use": point.heater_bleed_kg_s > 0.0,
        "at_generator_limit": point.power_lost_MW > 0.0,
        "at_steam_limit": point.limit == "live steam",
        "at_heat_limit": point.limit == "heat",
        "at_fuel_limit": point.limit == "fuel",
        "below_tail_minimum": point.as_baseline and "minimum flow" in point.why,
    }
    if not theirs.design.plant.extra_running:
        flags["could_gain"] = point.could_gain
    return flags


def _sums(case: YearCase, theirs: Year, key: str, years: Years, figures: YearFigures) -> Iterator[Difference]:
    """First-year energies with availability, the tail's own, and bypass in them."""
    sums = theirs.sums(key)
    pairs = {
        "power_net_MWh": (figures.power_net_MWh, sums.power),
        "power_gross_MWh": (figures.power_gross_MWh, sums.gross),
        "fuel_MWh": (figures.fuel_MWh, sums.fuel),
        "heat_MWh": (figures.heat_MWh, sums.heat),
        "peak_heat_MWh": (figures.peak_heat_MWh, sums.missing),
    }
    for name, (one, other) in pairs.items():
        yield Difference(case.name, key, name, 0, -1, one, other, max(abs(other), 1e-3 * years.demand_MWh))


def _increments(
    case: YearCase, theirs: Year, key: str, sold: Traded, figures: YearFigures
) -> Iterator[Difference]:
    """What is bought and sold beside the baseline in every operating year."""
    names = {
        "power_MWh": "power",
        "weighted_power_MWh": "weighted",
        "premium_MWh": "supported",
        "fuel_MWh": "fuel",
        "peak_fuel_MWh": "peak",
    }
    scale = 1e-2 * figures.power_net_MWh
    for k in range(case.data["study"]["years"]):
        other = theirs.increment(key, k)
        for name, short in names.items():
            one = float(getattr(sold.increment, name)[k])
            yield Difference(case.name, key, name, k, -1, one, other[short], max(abs(other[short]), scale))


def _bypasses(case: YearCase, theirs: Year, key: str, sold: Traded) -> Iterator[Difference]:
    now = scalar_prices(case.data, case.scenario, 0)
    assert sold.bypassed is not None
    for hour in range(len(case.rows)):
        other = theirs.bypassed(key, hour, 0, now)
        yield Difference(case.name, key, "bypassed", 0, hour, float(sold.bypassed[hour]), float(other), 1.0)


@pytest.mark.parametrize("name", CASES)
def test_every_hour_and_sum(name: str) -> None:
    """On or off, heat, powers, fuel and flags of every option in every hour; sums and increments by year."""
    fault = compared(name).fault()
    assert not fault, fault


@pytest.mark.parametrize("case", hard_hours(), ids=lambda case: case.name)
def test_hours_hard_to_solve(case: YearCase) -> None:
    """A tail at 15 % of its design flow, or six of them far below: there is a solution to be found."""
    fault = both_ways(case).fault()
    assert not fault, fault


def table() -> tuple[str, Counter[str], int]:
    """Hours compared and the worst difference in them, by rule; hours by rule; all hours."""
    counts: Counter[str] = Counter()
    worst: dict[str, float] = dict.fromkeys(RULES, 0.0)
    total = 0
    for name, case in CASES.items():
        found = compared(name)
        total += len(found.rules)
        by_hour = [0.0] * len(found.rules)
        years = solved_years(case.data)
        for d in found.differences:
            if d.hour >= 0:
                at = years.index(d.year) * len(case.rows) + d.hour
                by_hour[at] = max(by_hour[at], d.size)
        for acting, size in zip(found.rules, by_hour, strict=True):
            counts.update(acting)
            for rule in acting:
                worst[rule] = max(worst[rule], size)
    lines = [f"{rule:44}{counts[rule]:6}{worst[rule]:12.1e}" for rule in RULES]
    head = f"{'rule':44}{'hours':>6}{'worst':>12}"
    return "\n".join([head, *lines, f"{'hours in all':44}{total:6}"]), counts, total


def test_every_rule_acts_in_five_hours() -> None:
    """A rule that no hour reaches is a rule that nobody compares."""
    text, counts, total = table()
    print("\n" + text)
    assert set(counts) <= set(RULES)
    assert min(counts[rule] for rule in RULES) >= LEAST_HOURS, "\n" + text
    assert total >= 400, "\n" + text
