"""The tables of a case about money, from price scenarios to draws. Keys as in the file."""

from collections.abc import Iterator, Mapping
from typing import Annotated

from pydantic import Field

from appraise.case.fields import Frozen, FrozenMap, PricePath, Table, not_as_long
from appraise.case.kinds import (
    AnyText,
    CalendarYears,
    Day,
    Efficiency,
    Flag,
    Key,
    Like,
    ListOf,
    MaybeChange,
    MaybeCurrencyCode,
    MaybePositive,
    MaybeShare,
    MaybeText,
    MaybeTexts,
    NotNegative,
    Number,
    OneOf,
    Positive,
    PositiveNumbers,
    Rate,
    Share,
    Text,
    Whole,
    WholeShares,
    Within,
    YearlyChange,
    Years,
)
from appraise.case.words import said

SIZE_NAMES = (
    "area_m2",
    "condensing_area_m2",
    "drain_area_m2",
    "heat_MW",
    "steam_kg_s",
    "exhaust_m3_s",
    "tail_shaft_MW",
    "generator_MW",
    "condensate_pump_kW",
    "network_pump_kW",
    "vacuum_auxiliary_kW",
)
"""What the cost of an item may be a function of."""

NO_CARBON = PricePath(start=0.0)


class Premium(Table):
    """Support per MWh of extra power in the first operating years; none in hours priced under the floor."""

    value: Number
    years: Years
    not_below: Annotated[float | None, Within()] = None


class Scenario(Table):
    """One future of prices."""

    title: AnyText = ""
    power: PricePath
    fuel: PricePath
    peak_fuel: PricePath
    carbon: PricePath = NO_CARBON
    power_premium: Premium | None = None
    network_fee: Number = 0.0
    price_column: Text = "power_price"


class PriceIndex(Table):
    """A cost index by year."""

    year: CalendarYears
    value: PositiveNumbers

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """Equal lengths."""
        yield from not_as_long("value", self.value, "year", self.year)


class TieIn(Table):
    """Days on which the plant stands for the work, both included; may wrap the new year."""

    from_: Day = Field(alias="from")
    to: Day
    multiplier: NotNegative = 1.0


class Correlation(Table):
    """Cost as a function of size: a published one by `name`, or one's own power law."""

    name: MaybeText = None
    material: MaybeText = None
    pressure_bar_gauge: Annotated[float | None, Within(0)] = None
    size: Annotated[str | None, OneOf(SIZE_NAMES)] = None
    reference_cost: MaybePositive = None
    reference_size: MaybePositive = None
    exponent: Annotated[float | None, Within(0, 2)] = None
    minimum: Annotated[float | None, Within(0)] = None
    maximum: MaybePositive = None
    fixed: Annotated[float | None, Within(0)] = None

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """Either published or one's own, and that complete."""
        given = self.model_fields_set
        if self.name is None:
            for key in ("size", "reference_cost", "reference_size", "exponent", "minimum", "maximum"):
                if key not in given:
                    yield key, "missing; required in a correlation without the name of a published one"
            foreign: tuple[str, ...] = ("material", "pressure_bar_gauge")
        else:
            foreign = ("reference_cost", "reference_size", "exponent", "minimum", "maximum", "fixed")
        for key in foreign:
            if key in given:
                whose = "a published correlation" if self.name else "a correlation of one's own"
                yield key, said(getattr(self, key), f"no such key in {whose}")
        if self.minimum is not None and self.maximum is not None and self.minimum >= self.maximum:
            yield "minimum", f"{self.minimum:g} given; allowed: below maximum, {self.maximum:g}"


class CapexItem(Table):
    """One item of capital: a quotation, a correlation of a size, or a share of other items."""

    key: Key
    name: Text
    amount: Annotated[float | None, Within(0)] = None
    correlation: Correlation | None = None
    share_of: MaybeTexts = None  # keys of other items, or ("all",)
    share: MaybeShare = None
    currency: MaybeCurrencyCode = None  # None: the study's
    year: Annotated[int | None, Whole(1900, 2200)] = None  # None: the price year
    per: Annotated[str, OneOf(("option", "new_stage"))] = "option"
    only: MaybeTexts = None  # option keys; None: every option but the baseline
    low: Annotated[float, Within(-1, 0)] = -0.2
    high: Annotated[float, Within(0, 10)] = 0.3
    source: AnyText = ""
    compare: MaybeTexts = None  # published correlations to set beside it; they enter no total

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """Exactly one way to its cost."""
        ways = [key for key in ("amount", "correlation", "share_of") if getattr(self, key) is not None]
        if len(ways) != 1:
            yield (
                "",
                f"{' and '.join(ways) or 'no cost'} given; allowed: one of amount, correlation, share_of",
            )
        if self.share_of is not None and self.share is None:
            yield "share", "missing; required beside share_of: a number from 0 to 1"
        if self.share is not None and self.share_of is None:
            yield "share_of", 'missing; required beside share: a key, a list of keys or "all"'


class Capex(Table):
    """Capital of the options."""

    items: tuple[CapexItem, ...] = ()
    index: PriceIndex | None = None
    exchange: Annotated[Mapping[str, Positive], Frozen] = FrozenMap({})
    location_factor: Positive = 1.0
    multiplier: NotNegative = 1.0
    spend: WholeShares = (1.0,)
    tie_in: TieIn | None = None


class Overhaul(Table):
    """A cost every so many years of operation."""

    every_years: Years
    amount: NotNegative


class Opex(Table):
    """Running cost beside energy."""

    fixed_share_of_capex: Share = 0.02
    fixed_per_year: Number = 0.0
    overhauls: tuple[Overhaul, ...] = ()
    variable_per_MWh: Number = 0.0  # of extra power
    change_per_year: YearlyChange = 0.0


class Depreciation(Table):
    """How the book value is written off; `years` None: over the years of the study."""

    method: Annotated[str, OneOf(("straight_line", "declining_balance", "table"))]
    years: Annotated[int | None, Whole(1, 50)] = None
    rate: Annotated[float | None, Within(0, 1, above=True)] = None
    shares: Annotated[tuple[float, ...] | None, ListOf(Within(0, 1), "shares from 0 to 1")] = None

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """What each method needs."""
        needs = {"declining_balance": "rate", "table": "shares"}.get(self.method)
        if needs is not None and getattr(self, needs) is None:
            yield needs, f'missing; required with method "{self.method}"'
        if self.shares is not None and sum(self.shares) > 1.0 + 1e-9:
            yield "shares", f"sum {sum(self.shares):.12g} given; allowed: a sum of at most 1"


class Finance(Table):
    """How the cash flow is judged."""

    discount_rate: Rate
    basis: Annotated[str, OneOf(("real", "nominal"))] = "real"
    inflation: YearlyChange = 0.0
    tax_rate: Annotated[float, Within(0, 1, below=True)] = 0.0
    depreciation: Depreciation | None = None
    grant: NotNegative = 0.0
    grant_reduces_depreciation: Flag = True
    residual_share: Share = 0.0
    reinvestment_rate: Annotated[float | None, Within(0, 1)] = None  # None: the discount rate


_NEEDS = {
    "normal": ("mean", "standard_deviation"),
    "uniform": ("low", "high"),
    "triangular": ("low", "mode", "high"),
    "pert": ("low", "mode", "high"),
    "lognormal": ("p10", "p90"),
}


class Distribution(Table):
    """What a driver is drawn from."""

    kind: Annotated[str, OneOf(tuple(_NEEDS))]
    mean: Annotated[float | None, Within()] = None
    standard_deviation: MaybePositive = None
    low: Annotated[float | None, Within()] = None
    mode: Annotated[float | None, Within()] = None
    high: Annotated[float | None, Within()] = None
    p10: MaybePositive = None
    p90: MaybePositive = None

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """The keys of its kind, in rising order."""
        needed = _NEEDS[self.kind]
        for key in needed:
            if getattr(self, key) is None:
                yield key, f'missing; required with kind "{self.kind}"'
        for key in type(self).model_fields:
            if key in self.model_fields_set and key not in (*needed, "kind"):
                yield key, f'given; kind "{self.kind}" has {" and ".join(needed)}'
        if any(getattr(self, key) is None for key in needed) or self.kind == "normal":
            return
        ends = [getattr(self, key) for key in needed]
        if ends != sorted(ends) or ends[0] >= ends[-1]:
            order = " ≤ ".join(needed) if len(needed) == 3 else " < ".join(needed)
            given = ", ".join(f"{end:g}" for end in ends)
            yield needed[0], f"{given} given; allowed: {order}, the ends apart"


class Driver(Table):
    """A value that is varied: to two ends for the tornado, drawn for the risk."""

    label: Text
    path: Text
    low: MaybeChange = None
    high: MaybeChange = None
    distribution: Distribution | None = None

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """Both ends, or a distribution, or all of them."""
        for key, other in (("low", "high"), ("high", "low")):
            if getattr(self, key) is None and getattr(self, other) is not None:
                yield key, f"missing; required beside {other}"
        if self.low is None and self.high is None and self.distribution is None:
            yield "", "nothing to vary it by given; required: low and high, or distribution"


_LABEL_PAIR = ListOf(Like(r".*\S.*", "a text, not empty"), "driver labels", length=2)


class Correlated(Table):
    """Rank correlation between two drivers."""

    between: Annotated[tuple[str, str], _LABEL_PAIR]
    rank: Annotated[float, Within(-1, 1)]


class Draws(Table):
    """How the risk is sampled."""

    number: Annotated[int, Whole(0, 1_000_000)] = 0
    scenario: MaybeText = None  # None: the reference
    seed: Annotated[int, Whole(0)] = 1
    correlations: tuple[Correlated, ...] = ()


class Emissions(Table):
    """What displaced power and separate production would emit and need."""

    grid_kg_per_MWh: NotNegative = 0.0
    heat_reference: Efficiency = 0.86
    power_reference: Efficiency = 0.37
