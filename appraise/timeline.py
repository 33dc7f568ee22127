"""When money moves: calendar years, inflation, deflator and discount factors by t."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from appraise.numerics import Array

if TYPE_CHECKING:
    from appraise.case.load import Case


@dataclass(frozen=True, slots=True, eq=False)
class Calendar:
    """When what happens, and what money is worth then; all arrays end in axis t.

    Operation begins at t = `spend_years`, in calendar year `first_year`.
    """

    spend_years: int
    operating_years: int
    years: Array
    inflation_factor: Array
    deflator: Array
    discount_factor: Array

    @classmethod
    def of(cls, case: Case) -> Calendar:
        """The calendar of the case's study, spend and finance."""
        study, finance, before = case.study, case.finance, len(case.capex.spend)
        t = np.arange(before + study.years)
        years = study.first_year - before + t
        inflation = (1.0 + with_t(finance.inflation)) ** (years - study.price_year)
        deflator = 1.0 / inflation if finance.basis == "real" else np.ones_like(inflation)
        discount = (1.0 + with_t(finance.discount_rate)) ** -t.astype(float)
        return cls(before, study.years, years.astype(float), inflation, deflator, discount)

    def operating(self, values: ArrayLike) -> Array:
        """[..., operating year] in price-year money -> [..., t] in money of the day, 0 before operation."""
        array = np.asarray(values, dtype=float)
        before = np.zeros((*array.shape[:-1], self.spend_years))
        return np.asarray(np.concatenate([before, array], axis=-1) * self.inflation_factor)

    def once(self, amount: ArrayLike, t: int) -> Array:
        """An amount [...] in price-year money at one t (negative counts from the end) -> money of the day."""
        at = np.zeros(self.spend_years + self.operating_years)
        at[t] = 1.0
        return np.asarray(with_t(amount) * at * self.inflation_factor)

    def spent(self, amount: ArrayLike, shares: ArrayLike) -> Array:
        """An amount [...] in price-year money over the spend years -> [..., t] in money of the day."""
        at = np.concatenate([np.asarray(shares, dtype=float), np.zeros(self.operating_years)])
        return np.asarray(with_t(amount) * at * self.inflation_factor)


def with_t(value: ArrayLike) -> Array:
    """A number or [draw] with an axis for t."""
    return np.asarray(np.asarray(value, dtype=float)[..., None])
