"""Capital cost: quotations, correlations and shares become money of the price year, with band and source.

Order: index in the item's own currency to the price year, exchange rate, location factor; shares of other
items after that; `capex.multiplier` on the total. Low and high totals are straight sums of the items' bands.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from appraise.errors import CaseError
from appraise.item_money import Faults, Law, Money, item_path, law_of, money_of

if TYPE_CHECKING:
    from appraise.case.load import Case
    from appraise.case.money import CapexItem
    from appraise.case.plant import Option
    from appraise.sizing import OptionSize, StageSize

OLD_YEARS = 10
"""Age above which an escalated cost is an order of magnitude only: Loh et al., DOE/NETL-2002/1169, p. 46."""

QUOTED_SHARE = 0.5
"""Least share of equipment on quotations in class 4, as of turbine and condenser together; judgement."""

EstimateClass = tuple[int, str]


@dataclass(frozen=True, slots=True)
class ItemCost:
    """One item of one option, or of one of its new stages; money of the price year in the study's currency.

    basis : "quotation", "correlation" or "share". size : (name, value) that a correlation was asked for, all
    `units` together. units : equal parallel units, 0 where nothing is bought. index_factor, exchange,
    location_factor : what the money of `year` in `currency` was multiplied by. stage : counted from the cold
    end, None for the whole option. note : how it came about. warnings : what makes the number doubtful.
    """

    key: str
    name: str
    basis: str
    amount: float
    low: float
    high: float
    size: tuple[str, float] | None
    units: int
    year: int
    currency: str
    index_factor: float
    exchange: float
    location_factor: float
    stage: int | None
    source: str
    note: str
    warnings: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class OptionCapital:
    """What one option costs, money of the price year.

    total, low, high : sums over the items × `multiplier`. avoided : the baseline's total, which it saves.
    """

    option: str
    items: tuple[ItemCost, ...]
    multiplier: float
    total: float
    low: float
    high: float
    avoided: float

    @property
    def extra(self) -> float:
        """Capital against the baseline: what enters the cash flow."""
        return self.total - self.avoided


def capital(case: Case, sizes: Sequence[OptionSize]) -> tuple[OptionCapital, ...]:
    """Capital of every option, in the case's order.

    sizes : one per option, found by its key. Raises CaseError with all items that cannot be priced.
    """
    size_of, faults = {size.option: size for size in sizes}, Faults()
    bought = {option.key: _items(case, option, size_of[option.key], faults) for option in case.options}
    if faults:
        raise CaseError(faults)
    factor = case.capex.multiplier
    avoided = factor * sum(item.amount for item in bought[case.baseline.key])
    return tuple(
        OptionCapital(
            option=key,
            items=items,
            multiplier=factor,
            total=factor * sum(item.amount for item in items),
            low=factor * sum(item.low for item in items),
            high=factor * sum(item.high for item in items),
            avoided=avoided,
        )
        for key, items in bought.items()
    )


def applies(item: CapexItem, option: Option) -> bool:
    """Whether an item is bought for an option: every one but the baseline, unless `only` names some."""
    return not option.baseline if item.only is None else option.key in item.only


def estimate_class(capital: OptionCapital) -> EstimateClass:
    """Class of the estimate by what its equipment rests on, and that in words.

    A factored estimate is class 5, and class 4 with quotations for the main equipment: AACE International,
    Recommended Practice 18R-97, rev. 7 August 2020 (the narrow ends of class 4 from memory). The class
    comes from how far the design is worked out, never from the arithmetic; shares of other items rest on
    those items.
    """
    equipment = [item for item in capital.items if item.basis != "share"]
    total = sum(item.amount for item in equipment)
    quoted = sum(item.amount for item in equipment if item.basis == "quotation")
    if total > 0.0 and quoted >= QUOTED_SHARE * total:
        number, use, band = 4, "study", "-15 to -30 % and +20 to +50 %"
    else:
        number, use, band = 5, "screening", "-20 to -50 % and +30 to +100 %"
    share = "no equipment"
    if total > 0.0:
        share = f"{100.0 * quoted / total:.0f} % of the equipment rests on amounts given, taken as quotations"
    text = f"class {number} ({use}): {share}; usual accuracy {band} (AACE International 18R-97, 2020)"
    return number, text


def _items(case: Case, option: Option, size: OptionSize, faults: Faults) -> tuple[ItemCost, ...]:
    """Costs of one option, in the order of the case's items."""
    chosen = {item.key: item for item in case.capex.items if applies(item, option)}
    equipment = tuple(key for key, item in chosen.items() if item.share_of is None)
    costs = {key: tuple(_bought(case, chosen[key], size, faults)) for key in equipment}

    def costs_of(key: str) -> tuple[ItemCost, ...]:
        # A share may be one of another share; the case has no circles.
        if key not in costs and key in chosen:
            item = chosen[key]
            named = equipment if item.share_of == ("all",) else item.share_of or ()
            costs[key] = (_share(case, item, [cost for other in named for cost in costs_of(other)]),)
        return costs.get(key, ())

    return tuple(cost for key in chosen for cost in costs_of(key))


def _share(case: Case, item: CapexItem, of: Sequence[ItemCost]) -> ItemCost:
    """A share of other items, which are money of the price year already."""
    money = Money(case.study.price_year, case.study.currency, 1.0, 1.0, 1.0)
    assert item.share is not None
    amount = item.share * sum(cost.amount for cost in of)
    return _cost(item, "share", amount, money, note=f"{item.share:.4g} of {', '.join(item.share_of or ())}")


def _cost(
    item: CapexItem,
    basis: str,
    amount: float,
    money: Money,
    *,
    size: tuple[str, float] | None = None,
    units: int = 1,
    stage: int | None = None,
    source: str = "",
    note: str = "",
    warnings: tuple[str, ...] = (),
) -> ItemCost:
    return ItemCost(
        key=item.key,
        name=item.name,
        basis=basis,
        amount=amount,
        low=amount * (1.0 + item.low),
        high=amount * (1.0 + item.high),
        size=size,
        units=units,
        year=money.year,
        currency=money.currency,
        index_factor=money.index_factor,
        exchange=money.exchange,
        location_factor=money.location_factor,
        stage=stage,
        source="; ".join(text for text in (item.source, source) if text),
        note=note,
        warnings=warnings,
    )


def _bought(case: Case, item: CapexItem, size: OptionSize, faults: Faults) -> Iterator[ItemCost]:
    """A quotation or a correlation: one cost for the option, or one for each new stage."""
    stages: list[StageSize | None] = [None]
    if item.per == "new_stage":
        stages = [stage for stage in size.stages if stage.new]
    if item.correlation is not None:
        law = law_of(case, item, item.correlation, faults)
        if law is None:
            return
        if not stages:
            yield _cost(item, "correlation", 0.0, law.money, units=0, source=law.source, note="no new stage")
        for stage in stages:
            value = size.total(law.size) if stage is None else size.of_stage(stage, law.size)
            yield _correlated(case, item, law, value, size.option, stage, faults)
        return
    money = money_of(case, item, faults)
    if not stages:
        yield _cost(item, "quotation", 0.0, money, units=0, note="no new stage")
    for stage in stages:
        number = None if stage is None else stage.stage
        amount = (item.amount or 0.0) * money.factor
        yield _cost(item, "quotation", amount, money, stage=number, warnings=_age(case, money.year))


def _correlated(
    case: Case,
    item: CapexItem,
    law: Law,
    value: float,
    option: str,
    stage: StageSize | None,
    faults: Faults,
) -> ItemCost:
    """Ask a correlation for one size; equal parallel units above its range, a fault below it."""
    number = None if stage is None else stage.stage
    size, wanted = (law.size, value), value * law.per_size_unit
    if wanted == 0.0:
        note = f"{law.size} is 0: nothing is bought"
        return _cost(
            item,
            "correlation",
            0.0,
            law.money,
            size=size,
            units=0,
            stage=number,
            source=law.source,
            note=note,
        )
    units = max(1, math.ceil(wanted / law.maximum * (1.0 - 1e-12)))
    each = wanted / units
    warnings = _age(case, law.money.year)
    if each < law.minimum:
        place = f'option "{option}"' + ("" if number is None else f", stage {number}")
        parted = f" in each of {units} parallel units" if units > 1 else ""
        allowed = f"allowed: {law.minimum:g} to {law.maximum:g} {law.unit}, the range of the correlation"
        faults.add(
            item_path(item, "correlation"), f"{each:.4g} {law.unit}{parted} needed by {place}; {allowed}"
        )
        return _cost(item, "correlation", 0.0, law.money, size=size, stage=number, source=law.source)
    if units > 1:
        over = f"{wanted:.4g} {law.unit} is above the range up to {law.maximum:g} {law.unit}"
        warnings = (f"{over}: {units} equal parallel units", *warnings)
    amount = units * law.cost(each) * law.money.factor
    return _cost(
        item,
        "correlation",
        amount,
        law.money,
        size=size,
        units=units,
        stage=number,
        source=law.source,
        note=law.note,
        warnings=warnings,
    )


def _age(case: Case, year: int) -> tuple[str, ...]:
    age = case.study.price_year - year
    if age <= OLD_YEARS:
        return ()
    return (f"money of {year}, {age} years before the price year: an order of magnitude only",)
