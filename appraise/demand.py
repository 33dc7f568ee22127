"""What the network asks of the plant, hour by hour."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from appraise.case.hours import Hours
from appraise.case.load import Case
from appraise.cycle.task import Mask
from appraise.numerics import Array


@dataclass(frozen=True, slots=True, eq=False)
class Demand:
    """What the network asks for in each hour, after multiplier and offsets."""

    heat_MW: Array
    supply_C: Array
    return_C: Array
    available: Mask  # no outage
    years: float


def changes(case: Case) -> bool:
    """Whether one operating year differs from the next."""
    y = case.year
    return any((y.change_per_year, y.supply_change_K_per_year, y.return_change_K_per_year))


def demand(case: Case, hours: Hours, k: int = 0) -> Demand:
    """The network's demand in operating year k, 0 being the first.

    Heat comes from the hours or from the heat signature, temperatures from the hours or the heating curve.
    """
    year = case.year
    return Demand(
        heat_MW=_heat(case, hours) * year.heat_multiplier * (1.0 + year.change_per_year) ** k,
        supply_C=_network_temperature(case, hours, "supply_C")
        + year.supply_offset_K
        + year.supply_change_K_per_year * k,
        return_C=_network_temperature(case, hours, "return_C")
        + year.return_offset_K
        + year.return_change_K_per_year * k,
        available=~in_dates(hours.time, tuple((o.from_, o.to) for o in year.outages)),
        years=hours.number_of_years,
    )


def _heat(case: Case, hours: Hours) -> Array:
    """Heat by the hours' own column, or base + slope (threshold - outdoor) below the threshold, MW."""
    if hours.heat_MW is not None:
        return hours.heat_MW
    signature = case.year.heat_signature
    assert signature is not None
    assert hours.outdoor_C is not None
    cold = np.maximum(0.0, signature.threshold_C - hours.outdoor_C)
    return np.asarray(signature.base_MW + signature.slope_MW_per_K * cold)


def _network_temperature(case: Case, hours: Hours, name: str) -> Array:
    """One temperature by the hours' own column, or on the heating curve, held outside, °C."""
    column: Array | None = getattr(hours, name)
    if column is not None:
        return column
    curve = case.network.heating_curve
    assert curve is not None
    assert hours.outdoor_C is not None
    return np.asarray(np.interp(hours.outdoor_C, curve.outdoor_C, getattr(curve, name)))


def in_dates(time: NDArray[np.datetime64], periods: tuple[tuple[str, str], ...]) -> Mask:
    """Which hours lie in any of the periods "MM-DD" to "MM-DD", both included; one may wrap the new year."""
    day = time.astype("datetime64[D]")
    month = day.astype("datetime64[M]")
    number = (month.astype(int) % 12 + 1) * 100 + (day - month).astype(int) + 1
    inside = np.zeros(time.shape, dtype=bool)
    for start, end in periods:
        first, last = (int(text[:2]) * 100 + int(text[3:5]) for text in (start, end))
        span = (number >= first) & (number <= last)
        inside |= span if first <= last else (number >= first) | (number <= last)
    return inside
