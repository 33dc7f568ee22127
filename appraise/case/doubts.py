"""What is allowed in a case but worth a second look before its results are believed."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from appraise.case.fields import Array, PricePath
from appraise.case.hours import Hours
from appraise.case.model import Case
from appraise.case.money import CapexItem, Driver
from appraise.case.paths import value_in_force
from appraise.case.plant import Option
from appraise.case.words import listed
from appraise.errors import Problem

Doubts = Iterator[tuple[str, str]]

_HIGH_DISCOUNT_RATE = 0.3
_HIGH_INFLATION = 0.15
_PRICE_FACTOR = 3.0  # between the mean of the hours and a scenario's first year
_HEAT_FACTORS = (0.5, 5.0)  # greatest demand over the heat of the design point
_BOILER_FACTOR = 1.3  # boiler over stop valve; a steam line and superheaters lose 5 to 25 % of the pressure
_STEAM_MJ_KG = 2.2  # heat of a condenser per kg of live steam, roughly
_ROUGHLY = 1.15  # how far that may be off


def doubts_of(case: Case, hours: Hours) -> tuple[Problem, ...]:
    """Everything doubtful about a case and its hours, in the order of the file."""
    groups = (
        _years(case),
        _plant(case),
        _options(case),
        _year(case, hours),
        _prices(case, hours),
        _capital(case),
        _finance(case),
        _drivers(case),
    )
    return tuple(Problem(where, message) for group in groups for where, message in group)


def _years(case: Case) -> Doubts:
    study = case.study
    if study.price_year > study.first_year:
        yield (
            "study.price_year",
            f"{study.price_year} lies after the first year of operation, {study.first_year}",
        )
    if study.first_year - study.price_year > 10:
        yield (
            "study.price_year",
            f"prices of {study.price_year} are used from {study.first_year} on; more than ten years apart",
        )


def _plant(case: Case) -> Doubts:
    plant = case.plant
    steam, boiler_bar, heat = plant.live_steam, plant.boiler.pressure_bar, plant.design.heat_MW
    if boiler_bar > _BOILER_FACTOR * steam.pressure_bar:
        share = boiler_bar / steam.pressure_bar - 1.0
        yield (
            "plant.boiler.pressure_bar",
            f"{boiler_bar:g} bar, {100.0 * share:.0f} % above the stop valve's {steam.pressure_bar:g} bar; "
            "a steam line loses less",
        )
    about = heat / _STEAM_MJ_KG
    for limited, key, limit, word in (
        (about > _ROUGHLY * steam.max_kg_s, "max_kg_s", steam.max_kg_s, "above"),
        (about < steam.min_kg_s / _ROUGHLY, "min_kg_s", steam.min_kg_s, "below"),
    ):
        if limited:
            yield (
                "plant.design.heat_MW",
                f"{heat:g} MW needs about {about:.3g} kg/s of live steam, {word} the {limit:g} of "
                f"plant.live_steam.{key}",
            )
    if plant.measured is None and case.year.metered is None:
        yield (
            "plant.measured",
            "no steady test and no year.metered; the baseline was compared with no meter",
        )


def _options(case: Case) -> Doubts:
    if len(case.options) == 1:
        yield "options", "only the baseline; there is nothing to compare it with"
    if case.baseline.existing_area_factor != 1.0:
        where = f"options.{case.baseline.key}.existing_area_factor"
        yield (
            where,
            f"{case.baseline.existing_area_factor:g} in the baseline, which is the plant as it stands",
        )
    seen: dict[object, str] = {}
    for option in case.options:
        where = f"options.{option.key}"
        if option.existing_area_factor < 1.0:
            factor = f"{option.existing_area_factor:g}"
            yield f"{where}.existing_area_factor", f"{factor}; the condenser would lose surface it has"
        for key in _idle_keys(option):
            yield f"{where}.{key}", "has no effect in an option of one stage"
        what = (
            case.tail_of(option) if option.stages > 1 else None,
            case.new_condenser_of(option),
            case.shares_of(option),
            option.existing_area_factor,
            option.drain,
            option.drain_route,
            option.temperature_control,
            option.bypass,
        )
        other = seen.setdefault(what, option.key)
        if other != option.key:
            yield where, f"is defined like {other}; both will give the same"


def _idle_keys(option: Option) -> Iterator[str]:
    """Keys that say something about stages an option of one stage does not have."""
    if option.stages == 1:
        for key, plain in (("tail", None), ("drain", "saturated"), ("drain_route", "cascade")):
            if getattr(option, key) != plain:
                yield key


def _year(case: Case, hours: Hours) -> Doubts:
    year = case.year
    if year.availability == 1.0 and not year.outages:
        yield "year.availability", "1 and no outages; a plant without a single hour of standstill"
    heat = _heat(case, hours)
    greatest = float(heat.max()) if heat is not None else 0.0
    low, high = _HEAT_FACTORS
    design = case.plant.design.heat_MW
    if heat is not None and not low * design <= greatest <= high * design:
        word = "below" if greatest < design else "above"
        yield (
            "year.series, plant.design.heat_MW",
            f"the maximum of the hours, {greatest:.3g} MW, is far {word} the design point's {design:g} MW; "
            "which of the two is wrong, or in another unit?",
        )
    if heat is not None and greatest > 0.0 and float(heat.mean()) == greatest:
        yield "year.series", f"the heat is {greatest:g} MW in every hour"


def _heat(case: Case, hours: Hours) -> Array | None:
    if hours.heat_MW is not None:
        return np.asarray(hours.heat_MW * case.year.heat_multiplier)
    signature = case.year.heat_signature
    if signature is None or hours.outdoor_C is None:
        return None
    cold = np.maximum(0.0, signature.threshold_C - hours.outdoor_C)
    return np.asarray((signature.base_MW + signature.slope_MW_per_K * cold) * case.year.heat_multiplier)


def _prices(case: Case, hours: Hours) -> Doubts:
    first_year = case.study.first_year
    for name, scenario in case.scenarios.items():
        column = hours.price(scenario.price_column)
        power, fuel = _first(scenario.power, first_year), _first(scenario.fuel, first_year)
        mean = 0.0 if column is None else float(column.mean())
        if power > 0.0 and mean > 0.0 and not 1.0 / _PRICE_FACTOR <= mean / power <= _PRICE_FACTOR:
            yield (
                f"scenarios.{name}.power",
                f"{power:g} in {first_year}, but the hours have a mean of {mean:.3g} in column "
                f"{scenario.price_column}; only their shape is used. Another unit or currency?",
            )
        elif fuel > power:
            yield (
                f"scenarios.{name}.fuel",
                f"{fuel:g} in {first_year}, above the power price of {power:g}; are the two exchanged?",
            )


def _first(path: PricePath, year: int) -> float:
    if path.year is None or path.value is None:
        return path.start
    return float(np.interp(year, path.year, path.value))


def _capital(case: Case) -> Doubts:
    items = case.capex.items
    for option in case.options:
        if not option.baseline and not any(_applies(item, option) for item in items):
            yield f"options.{option.key}", "no item of capital applies to it; it would cost nothing"
    bare = [item.key for item in items if not item.source.strip() and not _noted(case, item)]
    if bare:
        yield "capex.items", f"no source given for {listed(bare)}"
    for item in items:
        year = item.year
        if year is not None and year != case.study.price_year and case.capex.index is None:
            yield (
                f"capex.items.{item.key}.year",
                f"{year} without capex.index: its cost is taken as money of {case.study.price_year}",
            )


def _applies(item: CapexItem, option: Option) -> bool:
    return item.only is None or option.key in item.only


def _noted(case: Case, item: CapexItem) -> bool:
    where = f"capex.items.{item.key}"
    return any(path == where or path.startswith(f"{where}.") for path in case.notes)


def _finance(case: Case) -> Doubts:
    finance, years = case.finance, case.study.years
    if finance.discount_rate > _HIGH_DISCOUNT_RATE:
        yield "finance.discount_rate", f"{finance.discount_rate:g} a year is unusually high"
    if finance.basis == "nominal" and finance.inflation == 0.0:
        yield (
            "finance.inflation",
            "0 on a nominal basis: prices stand still while the rate has inflation in it",
        )
    if finance.inflation > _HIGH_INFLATION:
        yield "finance.inflation", f"{finance.inflation:g} a year is unusually high"
    depreciation = finance.depreciation
    if depreciation is not None and (depreciation.years or 0) > years:
        yield (
            "finance.depreciation.years",
            f"{depreciation.years}, longer than the study's {years}; the last year writes off the rest",
        )
    if depreciation is not None and finance.tax_rate == 0.0:
        yield "finance.depreciation", "has no effect without finance.tax_rate"


def _drivers(case: Case) -> Doubts:
    for index, driver in enumerate(case.drivers):
        where = f"drivers[{index + 1}]"
        ends = _ends(case, driver)
        if ends is None:
            if isinstance(driver.low, str) and value_in_force(case, driver.path) is None:
                yield where, f"{driver.label}: the case has no value that {driver.low} could scale"
            continue
        low, base, high = ends
        if low == high:
            yield where, f"{driver.label}: low and high are the same"
        elif not min(low, high) <= base <= max(low, high):
            yield where, f"{driver.label}: the value of the study, {base:g}, lies outside {low:g} to {high:g}"


def _ends(case: Case, driver: Driver) -> tuple[float, float, float] | None:
    """Low, the study's value and high of a driver; relative to that value where they are percentages."""
    base = value_in_force(case, driver.path)
    if base is not None and isinstance(driver.low, str) and isinstance(driver.high, str):
        return _percent(driver.low), 0.0, _percent(driver.high)
    plain = isinstance(driver.low, float) and isinstance(driver.high, float)
    if not plain or not isinstance(base, int | float):
        return None
    assert isinstance(driver.low, float)
    assert isinstance(driver.high, float)
    return driver.low, float(base), driver.high


def _percent(text: str) -> float:
    return float(text.rstrip("% "))
