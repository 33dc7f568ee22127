"""What an item of capital rests on: money of a year and currency, and a correlation ready to be asked."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import partial
from typing import TYPE_CHECKING

import numpy as np

from appraise.correlations import Source, power_law
from appraise.errors import Problem
from appraise.published_costs import PUBLISHED

if TYPE_CHECKING:
    from appraise.case.load import Case
    from appraise.case.money import CapexItem, Correlation


class Faults(dict[Problem, None]):
    """Problems in the order found, each once: several options meet the same one."""

    def add(self, where: str, message: str) -> None:
        """One more problem."""
        self[Problem(where, message)] = None


@dataclass(frozen=True, slots=True)
class Money:
    """How money of a year and a currency becomes money of the study."""

    year: int
    currency: str
    index_factor: float
    exchange: float
    location_factor: float

    @property
    def factor(self) -> float:
        """All three together."""
        return self.index_factor * self.exchange * self.location_factor


@dataclass(frozen=True, slots=True)
class Law:
    """A correlation ready to be asked: cost of one unit of a size, within a range."""

    size: str
    unit: str
    per_size_unit: float
    minimum: float
    maximum: float
    cost: Callable[[float], float]
    money: Money
    source: str
    note: str


def item_path(item: CapexItem, key: str) -> str:
    """Dotted path of a key of an item, by the key of the item."""
    return f"capex.items.{item.key}.{key}"


def law_of(case: Case, item: CapexItem, correlation: Correlation, faults: Faults) -> Law | None:
    """The published correlation or one's own; None after a fault."""
    if correlation.name is not None:
        return _published_law(case, item, correlation, faults)
    own = correlation
    assert own.size is not None
    assert own.reference_cost is not None
    assert own.reference_size is not None
    assert own.exponent is not None
    return Law(
        size=own.size,
        unit=unit_of(own.size),
        per_size_unit=1.0,
        minimum=own.minimum or 0.0,
        maximum=math.inf if own.maximum is None else own.maximum,
        cost=partial(
            power_law,
            reference_cost=own.reference_cost,
            reference_size=own.reference_size,
            exponent=own.exponent,
            fixed=own.fixed or 0.0,
        ),
        money=money_of(case, item, faults),
        source="",
        note="",
    )


def _published_law(case: Case, item: CapexItem, asked: Correlation, faults: Faults) -> Law | None:
    where, mine = item_path(item, "correlation"), Faults()
    published = PUBLISHED.get(asked.name or "")
    if published is None:
        faults.add(f"{where}.name", f'"{asked.name}" given; allowed: {", ".join(PUBLISHED)}')
        return None
    pressure = asked.pressure_bar_gauge or 0.0
    for key, message in published.faults(asked.material, pressure):
        mine.add(f"{where}.{key}", message)
    size = asked.size or published.size
    if unit_of(size) != unit_of(published.size):
        allowed = f"a size in {unit_of(published.size)}, such as {published.size}"
        mine.add(f"{where}.size", f'"{size}" given; allowed: {allowed}')
    source = published.source
    for key, given, own in (("year", item.year, source.year), ("currency", item.currency, source.currency)):
        if given is not None and given != own:
            message = f"{given} given; allowed: {own}, that of the published correlation"
            mine.add(item_path(item, key), message)
    money = _published_money(case, item, source, mine)
    faults.update(mine)
    if mine:
        return None
    return Law(
        size=size,
        unit=published.unit,
        per_size_unit=published.per_size_unit,
        minimum=published.minimum,
        maximum=published.maximum,
        cost=lambda each: published.cost(each, asked.material, pressure),
        money=money,
        source=f"{source.text}; {published.mark}",
        note="; ".join(filter(None, (published.covers, published.caution))),
    )


def unit_of(size: str) -> str:
    """The unit in the name of a size: "m2" of "area_m2", "kg_s" of "steam_kg_s"."""
    return next(unit for unit in ("kg_s", "m3_s", "m2", "MW", "kW") if size.endswith(unit))


def money_of(case: Case, item: CapexItem, faults: Faults) -> Money:
    """Factors on an item that states its own year and currency, or the study's."""
    year = case.study.price_year if item.year is None else item.year
    currency = item.currency or case.study.currency
    index = _index_factor(case, item, year, faults)
    return Money(year, currency, index, _exchange(case, item, currency, faults), case.capex.location_factor)


def _published_money(case: Case, item: CapexItem, source: Source, faults: Faults) -> Money:
    """Factors on a published correlation, from the date of its own index rather than the mean of its year."""
    index = case.capex.index
    if index is not None and source.year != case.study.price_year and source.year not in index.year:
        message = f"{source.year} missing; required: the base year of the correlation of {item.key}"
        faults.add("capex.index.year", message)
        factor = 1.0
    else:
        factor = _index_factor(case, item, source.year, faults) * source.annual_index / source.index
    exchange = _exchange(case, item, source.currency, faults)
    return Money(source.year, source.currency, factor, exchange, case.capex.location_factor)


def _index_factor(case: Case, item: CapexItem, year: int, faults: Faults) -> float:
    """Index of the price year over that of `year`, linear between the years of the table."""
    price_year, index = case.study.price_year, case.capex.index
    if year == price_year:
        return 1.0
    if index is None:
        message = f"missing; required to bring {item.key} from {year} to {price_year}"
        faults.add("capex.index", message)
        return 1.0
    for wanted in (year, price_year):
        if not index.year[0] <= wanted <= index.year[-1]:
            covered = f"{index.year[0]} to {index.year[-1]}"
            message = f"{wanted} needed by {item.key}; allowed: {covered}, the years of the table"
            faults.add("capex.index.year", message)
            return 1.0
    before, now = np.interp((year, price_year), index.year, index.value)
    return float(now / before)


def _exchange(case: Case, item: CapexItem, currency: str, faults: Faults) -> float:
    """One unit of a currency in money of the study."""
    if currency == case.study.currency:
        return 1.0
    rates: Mapping[str, float] = case.capex.exchange
    if currency not in rates:
        faults.add(f"capex.exchange.{currency}", f"missing; required by {item.key}: a number above 0")
        return 1.0
    return rates[currency]
