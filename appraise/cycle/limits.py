"""What the steam tables say about a case before anything is solved."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from appraise.case.hours import FIRST_ROW, Hours
from appraise.case.load import Case
from appraise.errors import Problem
from appraise.steam import saturation_temperature_p

_SUPERHEAT_K = 5.0  # least superheat of the live steam
_BOILING_MARGIN_K = 5.0  # between the hottest supply and boiling at network pressure


def steam_problems(case: Case, hours: Hours | None) -> tuple[Problem, ...]:
    """Faults that only the steam tables show: wet live steam, boiling water, an exhaust above live steam."""
    return (
        *_wet_live_steam(case),
        *_boiling_feed(case),
        *_boiling_water(case, hours),
        *_hot_exhaust(case, hours),
    )


def _wet_live_steam(case: Case) -> Iterator[Problem]:
    steam = case.plant.live_steam
    least = float(saturation_temperature_p(steam.pressure_bar)) + _SUPERHEAT_K
    if steam.temperature_C < least:
        yield Problem(
            "plant.live_steam.temperature_C",
            f"{steam.temperature_C:g} °C; must be at least {least:.1f} °C, {_SUPERHEAT_K:g} K above "
            f"saturation at {steam.pressure_bar:g} bar",
        )


def _boiling_feed(case: Case) -> Iterator[Problem]:
    """A feed heater so much better than its bleed's saturation that the water would boil in it."""
    heater, boiler_bar = case.plant.feed.heater, case.plant.boiler.pressure_bar
    if heater is None:
        return
    least = float(saturation_temperature_p(heater.bleed_bar) - saturation_temperature_p(boiler_bar))
    if heater.terminal_difference_K < least:
        yield Problem(
            "plant.feed.heater.terminal_difference_K",
            f"{heater.terminal_difference_K:g} K; must be at least {least:.2f} K, or the feed water boils at "
            f"the boiler's {boiler_bar:g} bar",
        )


def _boiling_water(case: Case, hours: Hours | None) -> Iterator[Problem]:
    yield from boiling_problems(case, "plant.design.supply_C", case.plant.design.supply_C)
    if case.plant.measured is not None:
        yield from boiling_problems(case, "plant.measured.supply_C", case.plant.measured.supply_C)
    if hours is not None:
        yield from boiling_problems(case, *_hottest_hour(case, hours))


def _hottest_hour(case: Case, hours: Hours) -> tuple[str, float]:
    """Where the hottest supply of all operating years stands, and how hot it is, °C."""
    year, curve, added = case.year, case.network.heating_curve, _added_K(case)
    if hours.supply_C is not None:
        row = int(np.argmax(hours.supply_C))
        return f"{year.series} row {row + FIRST_ROW}, column supply_C", float(hours.supply_C[row]) + added
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


def _hot_exhaust(case: Case, hours: Hours | None) -> Iterator[Problem]:
    """A supply temperature at which the exhaust would stand at live-steam pressure or above it.

    That much is certain before the terminal difference is known. In the hours only where there is heat to
    make, and not with peak boilers in series, behind which the condensers need not reach the supply.
    """
    steam, loss = case.plant.live_steam, case.plant.turbine.exhaust_loss_share
    greatest = float(saturation_temperature_p(steam.pressure_bar * (1.0 - loss)))

    def at(where: str, supply_C: float) -> Iterator[Problem]:
        if supply_C >= greatest:
            yield Problem(
                where,
                f"{supply_C:g} °C; must stay below {greatest:.1f} °C, where the exhaust would stand at the "
                f"live steam's {steam.pressure_bar:g} bar",
            )

    if case.plant.measured is not None:
        yield from at("plant.measured.supply_C", case.plant.measured.supply_C)
    if hours is not None and case.plant.peak_boiler.connection == "parallel":
        row, supply_C = _hottest_heated_hour(case, hours)
        yield from at(f"{case.year.series} row {row + FIRST_ROW}, supply temperature", supply_C)


def _hottest_heated_hour(case: Case, hours: Hours) -> tuple[int, float]:
    """Row of the hottest supply among the hours with heat to make, in the hottest operating year, °C."""
    supply, curve = hours.supply_C, case.network.heating_curve
    if supply is None:
        assert curve is not None
        assert hours.outdoor_C is not None
        supply = np.interp(hours.outdoor_C, curve.outdoor_C, curve.supply_C)
    heated = supply if hours.heat_MW is None else np.where(hours.heat_MW > 0.0, supply, -np.inf)
    row = int(np.argmax(heated))
    return row, float(heated[row]) + _added_K(case)


def _added_K(case: Case) -> float:
    """What offset and change over the years add to the supply temperature of the series at most, K."""
    year = case.year
    return year.supply_offset_K + max(0.0, year.supply_change_K_per_year * (case.study.years - 1))
