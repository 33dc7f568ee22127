"""One driver at a time to its low and high value: what moves the answer most.

Technical drivers re-solve plant and year, the others only the money.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from appraise.case.hours import Hours
from appraise.case.load import Case, case_from
from appraise.case.money import Driver
from appraise.case.paths import changed
from appraise.chain import Physics, Progress, case_npv, physics_key
from appraise.errors import AppraiseError
from appraise.numerics import Array
from appraise.workers import each

Change = float | int | str


@dataclass(frozen=True, slots=True)
class Bar:
    """NPV of one option with one driver at its ends; an end that cannot be computed says why.

    resolved : whether an end needed a new solve of plant and year.
    """

    label: str
    path: str
    low: Change
    high: Change
    npv_low: float | None
    npv_high: float | None
    swing: float
    resolved: bool
    reason_low: str | None
    reason_high: str | None


@dataclass(frozen=True, slots=True)
class Tornado:
    """All bars of one option, the widest first, around its NPV in the reference scenario."""

    option: str
    base_npv: float
    bars: tuple[Bar, ...]


@dataclass(frozen=True, slots=True, eq=False)
class _End:
    """One driver at one end: NPV by option, or the reason why there is none."""

    npv: Array | None
    reason: str | None
    resolved: bool


def tornado(
    case: Case,
    data: Mapping[str, object],
    hours: Hours,
    physics: Physics,
    base_npv: Array,
    progress: Progress,
) -> tuple[Tornado, ...]:
    """Bars of every option but the baseline, in the reference scenario.

    data : the case as read from its file, in which the drivers' paths are changed.
    base_npv : of every option of the unchanged case.
    """
    drivers = [driver for driver in case.drivers if driver.low is not None and driver.high is not None]

    def both(driver: Driver) -> tuple[_End, _End]:
        low, high = (_end(case, data, hours, physics, driver.path, c) for c in (driver.low, driver.high))
        return low, high

    ends: list[tuple[Driver, _End, _End]] = []
    for driver, (low, high) in zip(drivers, each(both, drivers), strict=True):
        ends.append((driver, low, high))
        progress(len(ends) / len(drivers), driver.label)
    return tuple(
        Tornado(
            option.key,
            float(base_npv[index]),
            tuple(
                sorted(
                    (_bar(*one, index, float(base_npv[index])) for one in ends), key=lambda bar: -bar.swing
                )
            ),
        )
        for index, option in enumerate(case.options)
        if not option.baseline
    )


def _end(
    case: Case,
    data: Mapping[str, object],
    hours: Hours,
    physics: Physics,
    path: str,
    change: Change | None,
) -> _End:
    """Solve one end; a value that the case or its equations refuse is a result, no failure of the study."""
    assert change is not None
    scenario, resolved = case.study.reference_scenario, False
    try:
        edited = case_from(changed(case, data, path, change, scenario=scenario))
        resolved = physics_key(edited) != physics.key
        return _End(case_npv(edited, hours, scenario, physics), None, resolved)
    except AppraiseError as error:
        return _End(None, str(error), resolved)


def _bar(driver: Driver, low: _End, high: _End, index: int, base: float) -> Bar:
    assert driver.low is not None
    assert driver.high is not None
    ends = [None if end.npv is None else float(end.npv[index]) for end in (low, high)]
    known = [base, *(npv for npv in ends if npv is not None)]
    return Bar(
        label=driver.label,
        path=driver.path,
        low=driver.low,
        high=driver.high,
        npv_low=ends[0],
        npv_high=ends[1],
        swing=float(np.ptp(known)),
        resolved=low.resolved or high.resolved,
        reason_low=low.reason,
        reason_high=high.reason,
    )
