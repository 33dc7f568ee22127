"""A value of the case on its way to the sheet of inputs, and the unit that its key gives it."""

from __future__ import annotations

from dataclasses import dataclass

from appraise.case.kinds import CalendarDay, Kind, Like, OneOf, TrueOrFalse
from appraise.item_money import unit_of

InputValue = str | bool | int | float | None


@dataclass(frozen=True, slots=True)
class Leaf:
    """A value on its way to a row: `owner` is the class of its table, `key` the key there.

    money : currency of its amounts; size : what a correlation's sizes are a size of, "" elsewhere
    """

    path: str
    list_path: str
    words: str
    value: InputValue
    kind: Kind | None
    owner: str
    key: str
    money: str
    size: str = ""


_UNIT_OF_SUFFIX = (
    ("_kg_per_MWh", "kg/MWh"),
    ("_MW_per_K", "MW/K"),
    ("_K_per_year", "K/a"),
    ("_W_m2K", "W/(m²·K)"),
    ("_bar_gauge", "bar gauge"),
    ("_per_K", "1/K"),
    ("_kg_s", "kg/s"),
    ("_bar", "bar"),
    ("_MWh", "MWh"),
    ("_MW", "MW"),
    ("_kW", "kW"),
    ("_K", "K"),
    ("_C", "°C"),
)
_SIZE_UNITS = {"m2": "m²", "MW": "MW", "kW": "kW", "kg_s": "kg/s", "m3_s": "m³/s"}
_YEARS = frozenset({"Study.years", "Premium.years", "Overhaul.every_years", "Depreciation.years"})
_CALENDAR = frozenset(
    {"Study.price_year", "Study.first_year", "CapexItem.year", "PriceIndex.year", "PricePath.year"}
)
_PERCENT_KEYS = frozenset(
    {
        "discount_rate",
        "inflation",
        "tax_rate",
        "reinvestment_rate",
        "rate",
        "residual_share",
        "fixed_share_of_capex",
        "share",
        "shares",
        "spend",
        "blowdown_share",
        "exhaust_loss_share",
        "inlet_loss_share",
        "min_flow_share",
        "CapexItem.low",
        "CapexItem.high",
    }
)
_MONEY = {
    "Scenario.power": "/MWh",
    "Scenario.fuel": "/MWh",
    "Scenario.peak_fuel": "/MWh",
    "Scenario.carbon": "/t",
    "Scenario.network_fee": "/MWh",
    "Premium.value": "/MWh",
    "Premium.not_below": "/MWh",
    "CapexItem.amount": "",
    "Correlation.reference_cost": "",
    "Correlation.fixed": "",
    "Overhaul.amount": "",
    "Opex.fixed_per_year": "/a",
    "Opex.variable_per_MWh": "/MWh",
    "Finance.grant": "",
}


def unit_of_leaf(leaf: Leaf) -> str:
    """Unit of a value, from its key."""
    full = f"{leaf.owner}.{leaf.key}"
    if full in _MONEY:
        return leaf.money + _MONEY[full]
    if full in _CALENDAR:
        return "year"
    if full in _YEARS:
        return "a"
    if full == "Capex.exchange":
        return f"{leaf.money}/{leaf.path.rpartition('.')[2]}"
    if leaf.key in _PERCENT_KEYS or full in _PERCENT_KEYS:
        return "%"
    if leaf.size and leaf.key in ("reference_size", "minimum", "maximum"):
        return size_unit(leaf.size)
    if leaf.key == "change_per_year":
        return "%/a"
    for suffix, unit in _UNIT_OF_SUFFIX:
        if leaf.key.endswith(suffix):
            return unit
    kinds = OneOf | TrueOrFalse | Like | CalendarDay
    words = isinstance(leaf.value, str | bool) or isinstance(leaf.kind, kinds)
    return "" if words else "–"


def size_unit(size: str) -> str:
    """The unit of a size of `case.money.SIZE_NAMES` as it is printed."""
    return _SIZE_UNITS[unit_of(size)]
