"""The year behind its sheet: hours as they count in the sums, by month and sorted by demand."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from appraise.demand import demand
from appraise.numerics import Array
from appraise.study import Study

POINTS = 365  # of the duration curve: a day each, sorted


def counted_MW(study: Study, option: int, name: str) -> Array:
    """One quantity of an option in every hour of the first operating year, as its yearly sum counts it.

    With availability, and in bypassed hours of the reference scenario the baseline's value.
    name : "heat_MW", "power_net_MW", ...; the mean over all hours times 8760 is the yearly sum.
    """
    years = study.physics.years
    mine, theirs = (getattr(years.solved[0][i], name) for i in (option, years.baseline))
    bypassed = study.runs[study.reference].traded[option].bypassed
    own = mine if bypassed is None else np.where(bypassed, theirs, mine)
    share = years.shares[option]
    return np.asarray(share * own + (study.case.year.availability - share) * theirs)


def demanded_MW(study: Study) -> Array:
    """Heat that the network asks for in every hour of the first operating year."""
    return demand(study.case, study.hours).heat_MW


def by_month(study: Study, hourly_MW: Array) -> list[float]:
    """Energies of the twelve months, MWh; of several years the mean."""
    month = study.hours.time.astype("datetime64[M]").astype(int) % 12
    sums = np.bincount(month, weights=hourly_MW, minlength=12) / study.hours.number_of_years
    return [float(v) for v in sums]


@dataclass(frozen=True, slots=True, eq=False)
class Duration:
    """Hours sorted by the network's demand, in blocks of a day [block]; means of each block, MW.

    Means keep the energies true where an outage lies among the hours of a block. `start` is the first hour
    of a block, `hours` its length.
    """

    start: Array
    hours: Array
    plant_MW: Array
    peak_MW: Array


def load_duration(study: Study, option: int) -> Duration:
    """Sorted demand, split into what the plant and the peak boilers deliver."""
    asked, plant = demanded_MW(study), counted_MW(study, option, "heat_MW")
    blocks = np.array_split(np.argsort(-asked, kind="stable"), POINTS)
    size = np.array([block.size for block in blocks], dtype=float) / study.hours.number_of_years
    means = np.array([(plant[block].mean(), asked[block].mean()) for block in blocks])
    return Duration(
        start=np.cumsum(size) - size,
        hours=size,
        plant_MW=means[:, 0],
        peak_MW=means[:, 1] - means[:, 0],
    )
