"""What the steam tables say about a case before anything is solved."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from appraise.case.hours import Hours
from appraise.case.load import Case
from appraise.errors import Problem
from appraise.steam import saturation_temperature_p

_SUPERHEAT_K = 5.0  # least superheat of the live steam
_BOILING_MARGIN_K = 5.0  # between the hottest supply and boiling at network pressure


def steam_problems(case: Case, hours: Hours | None) -> tuple[Problem, ...]:
    """Faults that only the steam tables show: wet live steam, boiling network water."""
    return (*_wet_live_steam(case), *_boiling_water(case, hours))


def _wet_live_steam(case: Case) -> Iterator[Problem]:
    steam = case.plant.live_steam
    least = float(saturation_temperature_p(steam.pressure_bar)) + _SUPERHEAT_K
    if steam.temperature_C < least:
        yield Problem(
            "plant.live_steam.temperature_C",
            f"{steam.temperature_C:g} °C; must be at least {least:.1f} °C, {_SUPERHEAT_K:g} K above "
            f"saturation at {steam.pressure_bar:g} bar",
        )


def _boiling_water(case: Case, hours: Hours | None) -> Iterator[Problem]:
    yield from boiling_problems(case, "plant.design.supply_C", case.plant.design.supply_C)
    if case.plant.measured is not None:
        yield from boiling_problems(case, "plant.measured.supply_C", case.plant.measured.supply_C)
    if hours is not None:
        yield from boiling_problems(case, *_hottest_hour(case, hours))


def _hottest_hour(case: Case, hours: Hours) -> tuple[str, float]:
    """Where the hottest supply of all operating years stands, and how hot it is, °C."""
    year, curve = case.year, case.network.heating_curve
    added = year.supply_offset_K + max(0.0, year.supply_change_K_per_year * (case.study.years - 1))
    if hours.supply_C is not None:
        row = int(np.argmax(hours.supply_C))
        return f"{year.series} row {row + 2}, column supply_C", float(hours.supply_C[row]) + added
    assert curve is not None
    return "network.heating_curve.supply_C", max(curve.supply_C) + added


def boiling_problems(case: Case, where: str, supply_C: float) -> Iterator[Problem]:
    """A supply temperature that comes too near to boiling at network pressure."""
    pressure = case.network.pressure_bar
    greatest = float(saturation_temperature_p(pressure)) - _BOILING_MARGIN_K
    if supply_C > greatest:
        yield Problem(
            where,
            f"{supply_C:g} °C; must stay at or below {greatest:.1f} °C, {_BOILING_MARGIN_K:g} K under "
            f"boiling at the network's {pressure:g} bar",
        )
