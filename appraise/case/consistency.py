"""What the tables of a case say against each other, without steam tables.

Each check speaks as soon as the tables it needs are in order, so that one faulty table hides no other fault.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Mapping, Sequence
from typing import Any, TypeVar

import numpy as np

from appraise.case.fields import Table
from appraise.case.hours import FIRST_ROW, RANGES, Array, Hours
from appraise.case.model import Case, note_entries
from appraise.case.money import CapexItem, Draws, PriceIndex
from appraise.case.paths import Data, NoSuchPath, positions, target_of
from appraise.case.plant import Boiler, Feed, LiveSteam, Study
from appraise.case.words import listed, nearest, shown
from appraise.errors import Problem

T = TypeVar("T", bound=Table)
Faults = Iterator[tuple[str, str]]


class Found:
    """The tables of a case that are in order, and the data they were read from."""

    def __init__(self, tables: Sequence[Table], data: Data) -> None:
        self._tables = tables
        self.data = data

    def all(self, kind: type[T]) -> list[T]:
        """All tables of one kind, in the order of the file."""
        return [table for table in self._tables if type(table) is kind]

    def one(self, kind: type[T]) -> T | None:
        """The only table of a kind; None where it is absent or faulty."""
        return next(iter(self.all(kind)), None)

    def table(self, *way: str) -> Any:
        """What the data has along a way of keys; an empty mapping where it has nothing."""
        node: Any = self.data
        for key in way:
            node = node.get(key, {}) if isinstance(node, Mapping) else {}
        return node

    def keys(self, *way: str) -> list[str]:
        """The keys of a list of tables, or the names of a table of tables."""
        node = self.table(*way)
        return list(node) if isinstance(node, Mapping) else list(positions(node))

    def rows(self, *way: str) -> list[Mapping[str, Any]]:
        """A list of tables as the data has it; what is no table counts as an empty one."""
        node = self.table(*way)
        tables = node if isinstance(node, list | tuple) else ()
        return [table if isinstance(table, Mapping) else {} for table in tables]

    def some_scenario(self) -> str | None:
        """The reference scenario, or where it is faulty any other: all have the same keys."""
        study, names = self.one(Study), self.keys("scenarios")
        if study is not None and study.reference_scenario in names:
            return study.reference_scenario
        return next(iter(names), None)


def contradictions(found: Found) -> list[Problem]:
    """Everything that does not fit together."""
    return [Problem(where, message) for check in _CHECKS for where, message in check(found)]


def _pressures(found: Found) -> Faults:
    steam, boiler, feed = found.one(LiveSteam), found.one(Boiler), found.one(Feed)
    if steam is None:
        return
    live = f"the live steam's {steam.pressure_bar:g} bar"
    if boiler is not None and boiler.pressure_bar < steam.pressure_bar:
        yield "plant.boiler.pressure_bar", f"{boiler.pressure_bar:g} bar given; allowed: at least {live}"
    if feed is not None and feed.bleed_bar >= steam.pressure_bar:
        yield "plant.feed.bleed_bar", f"{feed.bleed_bar:g} bar given; allowed: below {live}"
    if feed is not None and feed.heater is not None and feed.heater.bleed_bar >= steam.pressure_bar:
        where = "plant.feed.heater.bleed_bar"
        yield where, f"{feed.heater.bleed_bar:g} bar given; allowed: below {live}"


def _keys(found: Found) -> Faults:
    for way in (("options",), ("capex", "items")):
        keys = [table.get("key") for table in found.rows(*way)]
        for index, key in enumerate(keys):
            if isinstance(key, str) and key in keys[:index]:
                where = f"{'.'.join(way)}[{index + 1}].key"
                yield where, f"{shown(key)} given again; allowed: a key of its own"


def _lookalikes(found: Found) -> Faults:
    """Names that a workbook could not tell apart: its names know letters, digits and single underscores."""
    for way in (("options",), ("capex", "items"), ("scenarios",)):
        names = list(dict.fromkeys(found.keys(*way)))
        seen: dict[str, str] = {}
        for name in names:
            first = seen.setdefault(re.sub(r"[^a-z0-9]+", "_", name.lower()).strip("_"), name)
            if first != name:
                allowed = "names that differ in letters or digits"
                yield (
                    f"{'.'.join(way)}.{name}",
                    f"{shown(name)} given beside {shown(first)}; allowed: {allowed}",
                )


def _baseline(found: Found) -> Faults:
    if not isinstance(found.table("options"), list | tuple):
        return
    marked = [str(option.get("key")) for option in found.rows("options") if option.get("baseline") is True]
    if len(marked) != 1:
        given = f"{len(marked)} baselines ({listed(marked)})" if marked else "no baseline"
        yield "options", f"{given} given; allowed: exactly one option with baseline = true"


def _scenarios(found: Found) -> Faults:
    names = found.keys("scenarios")
    for name in names:
        if not re.fullmatch(r"[A-Za-z0-9_-]+", name):
            yield "scenarios", f"name {shown(name)} given; allowed: letters from A to Z, digits, _ and -"
        column = found.table("scenarios", name, "price_column")
        if column in ("time", *RANGES) and column != "power_price":
            yield f"scenarios.{name}.price_column", f"{shown(column)} given; allowed: a column of prices"
    study, draws = found.one(Study), found.one(Draws)
    asked = (
        ("study.reference_scenario", study.reference_scenario if study else None),
        ("draws.scenario", draws.scenario if draws else None),
    )
    for where, asked_name in asked:
        if asked_name is not None and asked_name not in names:
            yield where, f"{shown(asked_name)} given; {nearest(asked_name, names, 'scenario')}"


def _drivers(found: Found) -> Faults:
    labels: list[str] = []
    for index, driver in enumerate(found.rows("drivers")):
        where, path, label = f"drivers[{index + 1}]", driver.get("path"), driver.get("label")
        if isinstance(path, str) and path.strip():
            yield from _driver_path(found, f"{where}.path", path)
        if isinstance(label, str) and label in labels:
            yield f"{where}.label", f"{shown(label)} given again; allowed: a label of its own"
        labels += [label] if isinstance(label, str) else []
    draws = found.one(Draws)
    for index, pair in enumerate(draws.correlations if draws else ()):
        where = f"draws.correlations[{index + 1}].between"
        for label in pair.between:
            if label not in labels:
                yield where, f"{shown(label)} given; {nearest(label, labels, 'label')}"
        if pair.between[0] == pair.between[1]:
            yield where, f"{shown(pair.between[0])} given twice; allowed: two different drivers"


def _driver_path(found: Found, where: str, path: str) -> Faults:
    if path.startswith("scenario.") and found.some_scenario() is None:
        return
    try:
        target = target_of(found.data, path, found.some_scenario())
    except NoSuchPath as error:
        yield where, f"leads nowhere: {shown(path)} given; {error}"
        return
    if not target.is_numeric:
        yield where, f"{shown(path)} given; allowed: the path of a number, list, curve or price path"


def _notes(found: Found) -> Faults:
    for place, _ in note_entries(found.table("notes")):
        path = " ".join(".".join(map(str, place)).split())
        try:
            target_of(found.data, path, found.some_scenario())
        except NoSuchPath as error:
            yield f"notes.{path}", f"leads nowhere; {error}"


def _capital(found: Found) -> Faults:
    options, items = found.keys("options"), found.all(CapexItem)
    known = found.keys("capex", "items")
    exchange, study = found.keys("capex", "exchange"), found.one(Study)
    for item in items:
        where = f"capex.items.{item.key}"
        for option in item.only or ():
            if option not in options:
                yield f"{where}.only", f"{shown(option)} given; {nearest(option, options, 'option')}"
        foreign = item.currency if study is not None and item.currency != study.currency else None
        if study is not None and foreign is not None and foreign not in exchange:
            yield (
                f"{where}.currency",
                f"{shown(foreign)} given; allowed: {study.currency}, or a currency of capex.exchange "
                f"({listed(exchange)})",
            )
        for other in item.share_of or ():
            if other != "all" and other not in known:
                yield f"{where}.share_of", f"{shown(other)} given; {nearest(other, known, 'item')}"
        if item.share_of is not None and "all" in item.share_of and len(item.share_of) > 1:
            yield f"{where}.share_of", 'a list with "all" given; allowed: "all" alone, or keys'
    yield from _circles({item.key: item.share_of or () for item in items})


def _circles(shares: Mapping[str, Sequence[str]]) -> Faults:
    """Shares of items that are, in turn, shares of the first."""
    for start in shares:
        reached, waiting = set[str](), list(shares[start])
        while waiting:
            key = waiting.pop()
            if key not in reached:
                reached.add(key)
                waiting += shares.get(key, ())
        if start in reached:
            yield (
                f"capex.items.{start}.share_of",
                "refers back to itself; allowed: shares without a circle",
            )


def _index(found: Found) -> Faults:
    index, study = found.one(PriceIndex), found.one(Study)
    if index is None:
        return
    span = f"a year of capex.index, {index.year[0]} to {index.year[-1]}"
    years = {} if study is None else {"study.price_year": study.price_year}
    years |= {f"capex.items.{i.key}.year": i.year for i in found.all(CapexItem) if i.year is not None}
    for where, year in years.items():
        if not index.year[0] <= year <= index.year[-1]:
            yield where, f"{year} given; allowed: {span}"


def hours_contradictions(case: Case, hours: Hours) -> list[Problem]:
    """Where the hours, as the case bends and completes them, have no supply above the return."""
    year, curve = case.year, case.network.heating_curve

    def temperature(name: str, offset_K: float) -> Array | None:
        column: Array | None = getattr(hours, name)
        if column is None and curve is not None and hours.outdoor_C is not None:
            column = np.interp(hours.outdoor_C, curve.outdoor_C, getattr(curve, name))
        return None if column is None else column + offset_K

    supply, back = (
        temperature("supply_C", year.supply_offset_K),
        temperature("return_C", year.return_offset_K),
    )
    if supply is None or back is None or (back < supply).all():
        return []
    crossed = np.flatnonzero(back >= supply)
    row = int(crossed[0])
    message = (
        f"{len(crossed)} hours with offsets or heating curve have a return not below the supply, first row "
        f"{row + FIRST_ROW} ({back[row]:g} and {supply[row]:g} °C); allowed: supply above return"
    )
    return [Problem("year.series", message)]


_CHECKS: tuple[Callable[[Found], Faults], ...] = (
    _pressures,
    _keys,
    _lookalikes,
    _baseline,
    _scenarios,
    _capital,
    _index,
    _drivers,
    _notes,
)
