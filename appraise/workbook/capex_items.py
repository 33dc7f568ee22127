"""The detail behind the capital: how an item becomes money of the price year, and every option's items.

One table says for each item by which factors its money is multiplied; below it, one block for each option
multiplies what is bought. An amount given and a share are live; what a correlation came to is of the run, and
only its index, exchange and location are live.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from appraise.capex import ItemCost, OptionCapital
from appraise.case.load import Case
from appraise.case.money import CapexItem
from appraise.published_costs import PUBLISHED
from appraise.workbook.cells import Page, area, ref
from appraise.workbook.input_units import size_unit
from appraise.workbook.naming import input_name

ITEM, BASIS = 1, 2
# Columns of the factors, and of the options' blocks.
YEAR, CURRENCY, PLACE, WEIGHT, INDEX, INDEX_FACTOR, EXCHANGE, LOCATION, FACTOR, BAND_LOW, BAND_HIGH = range(
    3, 14
)
COST, MONEY, MULTIPLIED, NUMBER, AMOUNT, LOW, HIGH, HOW = range(3, 11)
LAST = 13

FACTOR_HEADINGS = (
    "item",
    "basis",
    "money of year",
    "currency",
    "row in the index table",
    "weight of the next row",
    "price index",
    "index factor",
    "exchange rate",
    "location factor",
    "all factors",
    "low end",
    "high end",
)
BLOCK_HEADINGS = (
    "item",
    "basis",
    "cost of one, or share",
    "in money of",
    "all factors",
    "number",
    "cost",
    "low end",
    "high end",
    "how it came about",
)


BASIS_WORDS = {"quotation": "amount given"}
"""What an item rests on, where the program's own word would say more than is known."""


def item_name(key: str, part: str) -> str:
    """Name of the input cell of one key of an item."""
    return input_name(f"capex.items.{key}.{part}")


@dataclass(frozen=True, slots=True)
class Rows:
    """Where the detail stands.

    price_year : row of the price year's index, with the items' factors below it.
    items : those bought by any option.
    blocks : first row of each option's block, in the case's order; end : first free row.
    """

    price_year: int
    items: tuple[CapexItem, ...]
    blocks: tuple[int, ...]
    end: int

    @classmethod
    def of(cls, case: Case, capital: Sequence[OptionCapital], top: int) -> Rows:
        """Rows of a study whose detail begins in row `top` (the factors' section)."""
        bought = {cost.key for one in capital for cost in one.items}
        items = tuple(item for item in case.capex.items if item.key in bought)
        row, blocks = top + 3 + len(items) + 2, []
        for one in capital:
            blocks.append(row)
            row += len(one.items) + (5 if one.items else 3)
        return cls(top + 2, items, tuple(blocks), row)

    def factors(self, key: str) -> int:
        """Row of the factors of an item."""
        return self.price_year + 1 + [item.key for item in self.items].index(key)

    def costs(self, capital: Sequence[OptionCapital], option: int) -> dict[str, tuple[int, int]]:
        """First and last row of every item in an option's block; the stages of an item are neighbours."""
        found: dict[str, tuple[int, int]] = {}
        for row, cost in enumerate(capital[option].items, self.blocks[option] + 2):
            found[cost.key] = (found.get(cost.key, (row, row))[0], row)
        return found

    def sums(self, capital: Sequence[OptionCapital], option: int) -> int:
        """Row of the sum of an option's block, before the multiplier."""
        return self.blocks[option] + 2 + len(capital[option].items)


# -- factors


def put_factors(page: Page, case: Case, capital: Sequence[OptionCapital], rows: Rows) -> None:
    """Index, exchange, location and band of every item."""
    section(page, rows.price_year - 2, "What each item is multiplied by")
    page.headings(rows.price_year - 1, FACTOR_HEADINGS)
    page.height(rows.price_year - 1, 30)
    page.put(rows.price_year, ITEM, "price year", "label")
    page.formula(rows.price_year, YEAR, "=in_study_price_year", case.study.price_year, "year")
    _put_index(page, case, rows.price_year, case.study.price_year)
    costs = {cost.key: cost for one in capital for cost in one.items}
    for item in rows.items:
        row, cost = rows.factors(item.key), costs[item.key]
        page.put(row, ITEM, item.name, "label")
        page.put(row, BASIS, BASIS_WORDS.get(cost.basis, cost.basis), "unit")
        if cost.basis != "share":
            _put_money(page, case, item, cost, rows)
        for col, part, value in ((BAND_LOW, "low", item.low), (BAND_HIGH, "high", item.high)):
            page.formula(row, col, f"={item_name(item.key, part)}", value, "percent0")


def _put_money(page: Page, case: Case, item: CapexItem, cost: ItemCost, rows: Rows) -> None:
    """From the money of an item's year and currency to that of the study."""
    row = rows.factors(item.key)
    if _published(item) and item.year is None:
        page.put(row, YEAR, cost.year, "year as run")
    else:
        year = item_name(item.key, "year")
        page.formula(row, YEAR, f'=IF({year}="",in_study_price_year,{year})', cost.year, "year")
    page.put(row, CURRENCY, cost.currency, "text_centre as run")
    _put_index(page, case, row, cost.year)
    year, now = ref(row, YEAR), rows.price_year
    escalated = "NA()"
    if case.capex.index is not None:
        places = f"OR({ref(now, PLACE, True)}=0,{ref(row, PLACE)}=0)"
        escalated = f"IF({places},NA(),{ref(now, INDEX, True)}/{ref(row, INDEX)})"
    index_factor = cost.index_factor / own_date(item)
    page.formula(row, INDEX_FACTOR, f"=IF({year}=in_study_price_year,1,{escalated})", index_factor, "factor")
    if cost.currency == case.study.currency:
        page.put(row, EXCHANGE, 1, "factor")
    else:
        rate = input_name(f"capex.exchange.{cost.currency}")
        page.formula(row, EXCHANGE, f"={rate}", cost.exchange, "factor")
    page.formula(row, LOCATION, "=in_capex_location_factor", cost.location_factor, "factor")
    together = "*".join(ref(row, col) for col in (INDEX_FACTOR, EXCHANGE, LOCATION))
    expect = index_factor * cost.exchange * cost.location_factor
    page.formula(row, FACTOR, f"={together}", expect, "factor bold")


def _put_index(page: Page, case: Case, row: int, year: int) -> None:
    """The cost index of the year in a row, linear between the years of the table; place 0 outside it."""
    table = case.capex.index
    if table is None:
        return
    here, place, weight = ref(row, YEAR), ref(row, PLACE), ref(row, WEIGHT)
    years, values = "in_capex_index_year", "in_capex_index_value"
    outside = f"OR({here}<MIN({years}),{here}>MAX({years}))"
    inside = table.year[0] <= year <= table.year[-1]
    at = 0
    if inside:
        at = max(1, min(int(np.searchsorted(table.year, year, side="right")), len(table.year) - 1))
    page.formula(
        row,
        PLACE,
        f"=IF({outside},0,MAX(1,MIN(MATCH({here},{years},1),ROWS({years})-1)))",
        at,
        "integer",
    )
    if len(table.year) == 1:
        page.formula(
            row, INDEX, f"=IF({place}=0,0,INDEX({values},1))", table.value[0] if inside else 0, "number2"
        )
        return
    before, after = (f"INDEX({years},{place}{step})" for step in ("", "+1"))
    share = (year - table.year[at - 1]) / (table.year[at] - table.year[at - 1]) if inside else 0.0
    page.formula(row, WEIGHT, f"=IF({place}=0,0,({here}-{before})/({after}-{before}))", share, "number3")
    low, high = (f"INDEX({values},{place}{step})" for step in ("", "+1"))
    value = float(np.interp(year, table.year, table.value)) if inside else 0.0
    page.formula(row, INDEX, f"=IF({place}=0,0,{low}+{weight}*({high}-{low}))", value, "number2")


def _published(item: CapexItem) -> bool:
    return item.correlation is not None and item.correlation.name is not None


def own_date(item: CapexItem) -> float:
    """What moves a published cost from the index at its own date to that year's average; 1 for any other."""
    if item.correlation is None or item.correlation.name is None:
        return 1.0
    source = PUBLISHED[item.correlation.name].source
    return source.annual_index / source.index


# -- the options' items


def put_blocks(page: Page, case: Case, capital: Sequence[OptionCapital], rows: Rows) -> None:
    """Every option's items, one by one, with their sum and the multiplier."""
    by_key = {item.key: item for item in rows.items}
    for number, (option, one) in enumerate(zip(case.options, capital, strict=True)):
        top = rows.blocks[number]
        section(page, top, f"Items: {option.name}")
        if not one.items:
            page.put(top + 1, ITEM, "Nothing is bought for this option.", "note")
            continue
        page.headings(top + 1, BLOCK_HEADINGS)
        page.height(top + 1, 30)
        page.merge(top + 1, HOW, top + 1, LAST)
        places = rows.costs(capital, number)
        for row, cost in enumerate(one.items, top + 2):
            _put_item(page, by_key[cost.key], cost, row, rows, one, places)
        _put_sums(page, case, one, rows.sums(capital, number), top + 2)


def _put_item(
    page: Page,
    item: CapexItem,
    cost: ItemCost,
    row: int,
    rows: Rows,
    one: OptionCapital,
    places: dict[str, tuple[int, int]],
) -> None:
    """One item: cost of one in its own money × factors × number, or a share of other items."""
    stage = "" if cost.stage is None else f", stage {cost.stage}"
    page.put(row, ITEM, item.name + stage, "label")
    page.put(row, BASIS, BASIS_WORDS.get(cost.basis, cost.basis), "unit")
    factors = rows.factors(item.key)
    if cost.basis == "share":
        page.formula(row, COST, f"={item_name(item.key, 'share')}", item.share, "percent1")
        shared = _shared(item, one)
        cells = ",".join(area(first, AMOUNT, last, AMOUNT) for first, last in _of(places, shared))
        page.formula(row, AMOUNT, f"={ref(row, COST)}*SUM({cells})" if cells else "=0", cost.amount, "money")
    else:
        _put_cost_of_one(page, item, cost, row)
        page.formula(
            row,
            MONEY,
            f'={ref(factors, CURRENCY, True)}&" "&{ref(factors, YEAR, True)}',
            f"{cost.currency} {cost.year}",
            "text_centre",
        )
        together = cost.index_factor / own_date(item) * cost.exchange * cost.location_factor
        page.formula(row, MULTIPLIED, f"={ref(factors, FACTOR, True)}", together, "factor")
        page.put(row, NUMBER, cost.units, "integer as run")
        product = "*".join(ref(row, col) for col in (COST, MULTIPLIED, NUMBER))
        page.formula(row, AMOUNT, f"={product}", cost.amount, "money")
    for col, band, value in ((LOW, BAND_LOW, cost.low), (HIGH, BAND_HIGH, cost.high)):
        text = f"={ref(row, AMOUNT)}*(1+{ref(factors, band, True)})"
        page.formula(row, col, text, value, "money")
    page.paragraph(row, HOW, LAST, _how(item, cost, rows), "note_wrap_indent")


def _put_cost_of_one(page: Page, item: CapexItem, cost: ItemCost, row: int) -> None:
    if cost.basis == "quotation":
        page.formula(row, COST, f"={item_name(item.key, 'amount')}", item.amount or 0.0, "money")
        return
    factors = cost.index_factor / own_date(item) * cost.exchange * cost.location_factor
    each = cost.amount / (cost.units * factors) if cost.units else 0.0
    page.put(row, COST, each, "money as run")


def _shared(item: CapexItem, one: OptionCapital) -> list[str]:
    """Keys of the items of an option that an item is a share of."""
    if item.share_of == ("all",):
        return list(dict.fromkeys(cost.key for cost in one.items if cost.basis != "share"))
    return list(item.share_of or ())


def _of(places: dict[str, tuple[int, int]], keys: Sequence[str]) -> list[tuple[int, int]]:
    """Rows of these items, neighbours taken together."""
    joined: list[tuple[int, int]] = []
    for first, last in sorted(places[key] for key in keys if key in places):
        if joined and joined[-1][1] == first - 1:
            joined[-1] = (joined[-1][0], last)
        else:
            joined.append((first, last))
    return joined


def _how(item: CapexItem, cost: ItemCost, rows: Rows) -> str:
    """What was bought, in words."""
    if cost.basis == "share":
        names = {one.key: one.name for one in rows.items}
        everything = item.share_of == ("all",)
        listed = ", ".join(names.get(key, key) for key in item.share_of or ())
        return f"share of {'all that are no shares' if everything else listed}"
    parts = [cost.note] if cost.units == 0 and cost.note else []
    if cost.size is not None and cost.units:
        name, value = cost.size
        unit = size_unit(name)
        plain = name.removesuffix("_" + name.rpartition("_")[2]).replace("_", " ")
        plain = plain.removesuffix(" kg").removesuffix(" m3")
        parts.append(f"as run: {plain} {value:,.4g} {unit}")
    if cost.warnings:
        parts.append("doubtful, see below")
    return "; ".join(parts)


def _put_sums(page: Page, case: Case, one: OptionCapital, row: int, first: int) -> None:
    """Sum, multiplier, total; the low and high totals are straight sums."""
    for at, label in ((row, "sum of the items"), (row + 1, "total, with the multiplier on all capital")):
        page.put(at, ITEM, label, "label_total")
        page.put(at, BASIS, case.study.currency, "unit_total")
        for col in (COST, MONEY, NUMBER):
            page.put(at, col, None, "money total")
    page.put(row, MULTIPLIED, None, "money total")
    page.formula(row + 1, MULTIPLIED, "=in_capex_multiplier", case.capex.multiplier, "factor total")
    multiplier = ref(row + 1, MULTIPLIED, "column")
    for col, part, total in ((AMOUNT, "amount", one.total), (LOW, "low", one.low), (HIGH, "high", one.high)):
        of_items = sum(getattr(cost, part) for cost in one.items)
        page.formula(row, col, f"=SUM({area(first, col, row - 1, col)})", of_items, "money total")
        page.formula(row + 1, col, f"={ref(row, col)}*{multiplier}", total, "money total")


def section(page: Page, row: int, text: str) -> None:
    """A heading with its rule over the whole width."""
    page.put(row, ITEM, text, "section")
    for col in range(BASIS, LAST + 1):
        page.put(row, col, None, "section")
