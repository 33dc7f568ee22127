"""The tables of a case about the plant and its options. Keys as in the file."""

from collections.abc import Iterator
from typing import Annotated

from appraise.case.fields import (
    EfficiencyCurve,
    MultiplierCurve,
    Table,
)
from appraise.case.kinds import (
    AnyText,
    CalendarYear,
    CurrencyCode,
    DifferenceK,
    Efficiency,
    Exponent,
    Flag,
    Key,
    ListOf,
    LossShare,
    MaybeDate,
    MaybeEfficiency,
    MaybePositive,
    MaybeShare,
    NotNegative,
    OneOf,
    Positive,
    PressureBar,
    Share,
    Text,
    WaterC,
    Whole,
    Within,
    Years,
)
from appraise.case.network import return_above_supply

FLAT_ONE = MultiplierCurve(load=(1.0,), value=(1.0,))


class Study(Table):
    """What is studied, in which money and years."""

    title: Text
    author: AnyText = ""
    revision: AnyText = ""
    date: MaybeDate = None
    currency: CurrencyCode
    price_year: CalendarYear
    first_year: CalendarYear  # of operation
    years: Years
    reference_scenario: Text


class LiveSteam(Table):
    """Steam at the turbine stop valve."""

    pressure_bar: Annotated[float, Within(2, 165)]
    temperature_C: Annotated[float, Within(100, 620)]
    max_kg_s: Positive
    min_kg_s: NotNegative

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """Minimum flow at most the maximum."""
        if self.min_kg_s > self.max_kg_s:
            yield "min_kg_s", f"{self.min_kg_s:g} given; allowed: at most max_kg_s, {self.max_kg_s:g}"


class Boiler(Table):
    """The steam boiler."""

    efficiency: EfficiencyCurve  # absolute, over load
    max_fuel_MW: MaybePositive = None
    pressure_bar: Annotated[float, Within(2, 200)]
    blowdown_share: LossShare = 0.0
    makeup_C: Annotated[float, Within(0, 100)] = 15.0
    fuel: AnyText = ""
    co2_kg_per_MWh: NotNegative = 0.0


class Turbine(Table):
    """The existing main section, gear and generator."""

    efficiency: Efficiency
    part_load: MultiplierCurve = FLAT_ONE
    mechanical_efficiency: Efficiency = 0.985
    generator_efficiency: Efficiency = 0.975
    generator_limit_MW: MaybePositive = None
    exhaust_loss_share: LossShare = 0.02


class Heater(Table):
    """High-pressure feed heater."""

    bleed_bar: Positive
    terminal_difference_K: Annotated[float, Within(-10, 50)]


class Feed(Table):
    """Deaerator, bleeds and pumps."""

    deaerator_bar: PressureBar
    bleed_bar: PressureBar
    deaerator_control: Annotated[str, OneOf(("fixed", "sliding"))] = "fixed"
    deaerator_minimum_bar: PressureBar = 1.2
    pump_efficiency: Efficiency = 0.75
    heater: Heater | None = None

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """Bleed above deaerator, heater bleed above that."""
        if self.bleed_bar <= self.deaerator_bar:
            yield (
                "bleed_bar",
                f"{self.bleed_bar:g} bar given; allowed: above the deaerator's {self.deaerator_bar:g} bar",
            )
        if self.heater is not None and self.heater.bleed_bar <= self.bleed_bar:
            yield (
                "heater.bleed_bar",
                f"{self.heater.bleed_bar:g} bar given; allowed: above the deaerator's bleed of "
                f"{self.bleed_bar:g} bar",
            )
        if self.deaerator_control == "sliding" and self.deaerator_minimum_bar > self.deaerator_bar:
            yield (
                "deaerator_minimum_bar",
                f"{self.deaerator_minimum_bar:g} bar given; allowed: at most the deaerator's "
                f"{self.deaerator_bar:g} bar",
            )


class Condenser(Table):
    """The existing district-heating condenser."""

    terminal_difference_K: DifferenceK
    flow_exponent: Exponent = 0.5
    max_heat_MW: MaybePositive = None


class DesignPoint(Table):
    """The point at which everything is sized: turbine condensers alone."""

    heat_MW: Annotated[float, Within(0.01)]
    supply_C: WaterC
    return_C: WaterC

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """Supply above return."""
        yield from return_above_supply(self.supply_C, self.return_C)


class FlueGasCondenser(Table):
    """Heat from the flue gas, per fuel, falling with the return temperature."""

    heat_per_fuel: Share
    at_return_C: WaterC
    slope_per_K: NotNegative = 0.0


class PeakBoiler(Table):
    """Heat-only boilers beside the plant."""

    efficiency: Efficiency
    co2_kg_per_MWh: NotNegative = 0.0
    connection: Annotated[str, OneOf(("parallel", "series"))] = "parallel"


class Measured(Table):
    """One steady test of the plant as it stands."""

    heat_MW: Positive
    supply_C: WaterC
    return_C: WaterC
    power_MW: Positive
    exhaust_bar: Annotated[float | None, Within(0.01)] = None
    live_steam_kg_s: MaybePositive = None

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """Supply above return."""
        yield from return_above_supply(self.supply_C, self.return_C)


class Plant(Table):
    """The plant as it stands."""

    live_steam: LiveSteam
    boiler: Boiler
    turbine: Turbine
    feed: Feed
    condenser: Condenser
    design: DesignPoint
    flue_gas_condenser: FlueGasCondenser | None = None
    peak_boiler: PeakBoiler
    auxiliary_MW: NotNegative = 0.0
    measured: Measured | None = None


class Tail(Table):
    """The new tail sections. In a `Tail` that a case hands out the two None are filled with the plant's."""

    efficiency: Efficiency  # dry, isentropic
    baumann_factor: Annotated[float, Within(0, 2)] = 1.0
    mechanical_efficiency: MaybeEfficiency = None
    generator_efficiency: MaybeEfficiency = None
    generator_limit_MW: MaybePositive = None
    part_load: MultiplierCurve = FLAT_ONE
    inlet_loss_share: LossShare = 0.0
    min_flow_share: Share = 0.0
    availability: Efficiency = 1.0


class OwnTail(Table):
    """What one option says otherwise about its tail sections; None: as everywhere."""

    efficiency: MaybeEfficiency = None
    baumann_factor: Annotated[float | None, Within(0, 2)] = None
    mechanical_efficiency: MaybeEfficiency = None
    generator_efficiency: MaybeEfficiency = None
    generator_limit_MW: MaybePositive = None
    part_load: MultiplierCurve | None = None
    inlet_loss_share: Annotated[float | None, Within(0, 0.5, below=True)] = None
    min_flow_share: MaybeShare = None
    availability: MaybeEfficiency = None


class NewCondenser(Table):
    """Each new condenser stage."""

    terminal_difference_K: DifferenceK
    drain_approach_K: DifferenceK
    flow_exponent: Exponent = 0.5
    u_condensing_W_m2K: Positive = 3000.0
    u_drain_W_m2K: Positive = 1500.0
    pressure_drop_bar: NotNegative = 0.4
    vacuum_auxiliary_kW: NotNegative = 0.0


class OwnNewCondenser(Table):
    """What one option says otherwise about its new condensers; None: as everywhere."""

    terminal_difference_K: Annotated[float | None, Within(0, 50, above=True)] = None
    drain_approach_K: Annotated[float | None, Within(0, 50, above=True)] = None
    flow_exponent: Annotated[float | None, Within(0, 2)] = None
    u_condensing_W_m2K: MaybePositive = None
    u_drain_W_m2K: MaybePositive = None
    pressure_drop_bar: Annotated[float | None, Within(0)] = None
    vacuum_auxiliary_kW: Annotated[float | None, Within(0)] = None


_STAGE_SHARES = ListOf(Within(0, 1, above=True), "shares above 0", whole=True)


class Option(Table):
    """One way to arrange the condensers."""

    key: Key
    name: Text
    stages: Annotated[int, Whole(1, 6)]
    existing_area_factor: Annotated[float, Within(0.1, 10)] = 1.0
    tail: OwnTail | None = None
    new_condenser: OwnNewCondenser | None = None
    drain: Annotated[str, OneOf(("saturated", "subcooled"))] = "saturated"
    drain_route: Annotated[str, OneOf(("cascade", "pumped"))] = "cascade"
    shares: Annotated[tuple[float, ...] | None, _STAGE_SHARES] = None
    temperature_control: Annotated[str, OneOf(("sliding", "held"))] = "sliding"
    bypass: Flag = False
    terminal_difference_K: Annotated[float | None, Within(0, 50, above=True)] = None
    baseline: Flag = False

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """One share per stage; a plain baseline; one terminal difference."""
        if self.shares is not None and len(self.shares) != self.stages:
            yield "shares", f"{len(self.shares)} shares given; allowed: {self.stages}, one per stage"
        if self.baseline and self.stages != 1:
            yield "stages", f"{self.stages} given; allowed: 1 in the baseline"
        if self.baseline and self.bypass:
            yield "bypass", "true given; allowed: false in the baseline"
        twice = self.new_condenser is not None and self.new_condenser.terminal_difference_K is not None
        if twice and self.terminal_difference_K is not None:
            yield (
                "terminal_difference_K",
                "given here and in new_condenser.terminal_difference_K; allowed: one of the two",
            )
