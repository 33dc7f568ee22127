"""Why a mean of the draws lies below the value as stated: ranges with a middle worse than what is stated."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from appraise.case.paths import value_in_force
from appraise.levers import Levers
from appraise.numerics import Array
from appraise.workbook.draws_words import shown_number

if TYPE_CHECKING:
    from appraise.case.load import Case
    from appraise.case.money import Driver
    from appraise.draws import OptionRisk, Risk

SURE = 2.0  # standard errors by which a mean must differ to be more than chance
MOST_NAMED = 3


@dataclass(frozen=True, slots=True)
class Leaning:
    """A driver whose median is worse than what is stated. loss : what that costs, money."""

    label: str
    median: float
    stated: float
    loss: float


def below_stated(risk: OptionRisk, stated: float) -> bool:
    """Whether the mean lies below the value as stated by more than chance explains."""
    return risk.mean < stated - SURE * risk.standard_error


def leaning_badly(
    case: Case, risk: Risk, drivers: Sequence[Driver], option: OptionRisk
) -> tuple[Leaning, ...]:
    """Drivers that lean to the bad side of an option, the dearest first."""
    found, levers = [], Levers(risk.scenario)
    for driver, drawn, slope in zip(drivers, risk.values.T, slopes(risk.values, option.npv), strict=True):
        stated = value_in_force(case, driver.path, risk.scenario)
        if levers.is_price_path(driver.path):
            stated = 1.0
        if isinstance(stated, bool) or not isinstance(stated, int | float):
            continue
        median = float(np.median(drawn))
        loss = float(slope) * (stated - median)
        if loss > 0.0:
            found.append(Leaning(driver.label, median, float(stated), loss))
    return tuple(sorted(found, key=lambda one: -one.loss))


def slopes(values: Array, npv: Array) -> Array:
    """Change of a value [draw] per unit of each driver [draw, driver], the others held: least squares.

    A correlation would not do: drivers drawn together lend each other their effect.
    """
    spread = values.std(axis=0)
    scale = np.where(spread > 0.0, spread, 1.0)
    found, *_ = np.linalg.lstsq((values - values.mean(axis=0)) / scale, npv - npv.mean(), rcond=None)
    return np.asarray(found / scale)


def lower_words(names: Sequence[str], leaning: Sequence[Leaning]) -> str:
    """Why the mean of these options is below their value as stated, "" where no range leans that way."""
    if not leaning:
        return ""
    *others, last = (f"“{name}”" for name in names)
    whose = f"{', '.join(others)} and {last}" if others else last
    told = ", ".join(
        f"{one.label} at {shown_number(float(f'{one.median:.3g}'))} (stated {shown_number(one.stated)})"
        for one in leaning[:MOST_NAMED]
    )
    return (
        f"The mean of {whose} is below the value as stated, because the ranges lean to the bad side of it; "
        f"medians: {told}."
    )
