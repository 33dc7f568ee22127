"""Published cost estimates beside the chosen one: how far authors are apart for the same size.

An item names what it wants to be compared with (`compare`, names of published correlations). They are priced
as if they stood in the item's place: same size, options, index, exchange and location. They enter no total.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from appraise.capex import OptionCapital, applies, capital
from appraise.case.load import Case
from appraise.case.money import CapexItem, Correlation
from appraise.errors import CaseError
from appraise.sizing import OptionSize


@dataclass(frozen=True, slots=True)
class Estimate:
    """One item of one option by one published correlation, money of the price year.

    amount, ratio (over the item's own amount) : None where it cannot be told, with the `reason`.
    doubts : parallel units, old money.
    """

    item: str
    option: str
    name: str
    chosen: float
    amount: float | None
    ratio: float | None
    source: str
    reason: str | None
    doubts: tuple[str, ...]


def estimates(case: Case, sizes: Sequence[OptionSize]) -> tuple[Estimate, ...]:
    """Every comparison that the case asks for, by item, option and name."""
    own = capital(case, sizes)
    return tuple(
        _one(case, sizes, item, name, one.option, _amount(one, item.key))
        for item in case.capex.items
        for one, option in zip(own, case.options, strict=True)
        if applies(item, option)
        for name in item.compare or ()
    )


def _amount(paid: OptionCapital, key: str) -> float:
    return sum(cost.amount for cost in paid.items if cost.key == key)


def _one(
    case: Case, sizes: Sequence[OptionSize], item: CapexItem, name: str, option: str, chosen: float
) -> Estimate:
    asked = Correlation(name=name)
    stand_in = item.model_copy(
        update={
            "amount": None,
            "correlation": asked,
            "currency": None,
            "year": None,
            "only": (option,),
            "source": "",
        }
    )
    capex = case.capex.model_copy(update={"items": (stand_in,), "multiplier": 1.0})
    try:
        found = capital(case.model_copy(update={"capex": capex}), sizes)
    except CaseError as error:
        reason = "; ".join(problem.message for problem in error.problems)
        return Estimate(item.key, option, name, chosen, None, None, "", reason, ())
    costs = next(one for one in found if one.option == option).items
    amount = sum(cost.amount for cost in costs)
    doubts = tuple(dict.fromkeys(warning for cost in costs for warning in cost.warnings))
    ratio = amount / chosen if chosen else None
    return Estimate(item.key, option, name, chosen, amount, ratio, costs[0].source, None, doubts)
