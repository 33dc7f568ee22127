"""Price paths of a scenario by operating year, and the hourly shape of the power price."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from appraise.errors import CaseError, Problem
from appraise.numerics import Array

if TYPE_CHECKING:
    from appraise.case.fields import PricePath
    from appraise.case.hours import Hours
    from appraise.case.load import Case


@dataclass(frozen=True, slots=True, eq=False)
class ScenarioPrices:
    """One scenario by operating year, price-year money per MWh (carbon: per tonne of CO2).

    Arrays are [operating year], or [draw, operating year]; index 0 is the first year of operation. `power` is
    the year's mean over all hours. `premium` is zero after its years. `fee` may be negative: an avoided
    tariff.
    """

    name: str
    title: str
    power: Array
    fuel: Array
    peak_fuel: Array
    carbon: Array
    premium: Array
    fee: Array

    @classmethod
    def stacked(cls, draws: Sequence[ScenarioPrices]) -> ScenarioPrices:
        """Several variants of one scenario as one, with a leading axis [draw]."""
        arrays = {
            f.name: np.stack([getattr(one, f.name) for one in draws])
            for f in fields(cls)
            if f.name not in ("name", "title")
        }
        return cls(name=draws[0].name, title=draws[0].title, **arrays)


def compounded(start: ArrayLike, change_per_year: ArrayLike, years: int) -> Array:
    """start × (1 + change)^k for k = 0 … years − 1; returns [..., operating year].

    k = 0 is the first year of operation: nothing changes before it.
    """
    k = np.arange(years)
    return np.asarray(np.asarray(start)[..., None] * (1.0 + np.asarray(change_per_year)[..., None]) ** k)


def interpolated(year: Sequence[float], value: Sequence[float], first_year: int, years: int) -> Array:
    """Linear between the stated calendar years and held outside them; returns [operating year]."""
    return np.asarray(np.interp(first_year + np.arange(years), year, value))


def path_values(path: PricePath, first_year: int, years: int) -> Array:
    """A price path by operating year, [operating year], in price-year money."""
    if path.year is not None and path.value is not None:
        return interpolated(path.year, path.value, first_year, years)
    return compounded(path.start, path.change_per_year, years)


def scenario_prices(case: Case, name: str) -> ScenarioPrices:
    """All price paths of the scenario called `name`. Raises CaseError for an unknown name."""
    if name not in case.scenarios:
        known = ", ".join(case.scenarios)
        raise CaseError([Problem(f"scenarios.{name}", f"no such scenario; known scenarios: {known}")])
    scenario, first, years = case.scenarios[name], case.study.first_year, case.study.years
    premium = scenario.power_premium
    granted = np.zeros(years)
    if premium is not None:
        granted[: premium.years] = premium.value
    return ScenarioPrices(
        name=name,
        title=scenario.title or name,
        power=path_values(scenario.power, first, years),
        fuel=path_values(scenario.fuel, first, years),
        peak_fuel=path_values(scenario.peak_fuel, first, years),
        carbon=path_values(scenario.carbon, first, years),
        premium=granted,
        fee=np.full(years, float(scenario.network_fee)),
    )


def price_shape(case: Case, hours: Hours, name: str) -> Array:
    """Hourly power price of a scenario over its mean [hour]; ones where the series carries no price.

    The mean is over all rows, so the shape averages to 1 and negative hours stay negative. Raises CaseError
    for a mean that is zero or negative: no price path can scale such a column.
    """
    column = case.scenarios[name].price_column
    values = hours.price(column)
    if values is not None:
        return shape_of(values, column)
    if column != "power_price":
        where = f"scenarios.{name}.price_column"
        raise CaseError([Problem(where, f'"{column}" given; allowed: a column of the series')])
    return np.ones(hours.time.size)


def shape_of(column: Array, name: str) -> Array:
    """A price column over its mean, any shape. Raises CaseError for a mean that is not above 0."""
    mean = float(np.mean(column))
    if not mean > 0.0:
        raise CaseError([Problem(f"year.series, column {name}", f"mean of {mean:g} given; allowed: above 0")])
    return np.asarray(column / mean)
