"""The tables of a case about the network and the year. Keys as in the file."""

from collections.abc import Iterator
from typing import Annotated

from pydantic import Field

from appraise.case.fields import Table, not_as_long
from appraise.case.kinds import (
    Day,
    Efficiency,
    Flag,
    ListOf,
    NotNegative,
    Number,
    OffsetK,
    Positive,
    RisingNumbers,
    Text,
    Within,
    YearlyChange,
)


def return_above_supply(supply_C: float, return_C: float) -> Iterator[tuple[str, str]]:
    if return_C >= supply_C:
        yield "return_C", f"{return_C:g} °C given; allowed: below the supply of {supply_C:g} °C"


class HeatingCurve(Table):
    """Network temperatures over outdoor temperature, held outside; used where the hours give none."""

    outdoor_C: RisingNumbers
    supply_C: Annotated[tuple[float, ...], ListOf(Within(0, 200), "temperatures from 0 to 200")]
    return_C: Annotated[tuple[float, ...], ListOf(Within(0, 200), "temperatures from 0 to 200")]

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """Equal lengths, supply above return at every point."""
        yield from not_as_long("supply_C", self.supply_C, "outdoor_C", self.outdoor_C)
        yield from not_as_long("return_C", self.return_C, "outdoor_C", self.outdoor_C)
        for outdoor, supply, back in zip(self.outdoor_C, self.supply_C, self.return_C, strict=False):
            for key, message in return_above_supply(supply, back):
                yield key, f"at {outdoor:g} °C outdoors {message}"


class Network(Table):
    """The district-heating network at the plant."""

    pressure_bar: Annotated[float, Within(1, 100)] = 10.0
    pump_efficiency: Efficiency = 0.75
    heating_curve: HeatingCurve | None = None


class HeatSignature(Table):
    """Heat over outdoor temperature: base + slope x max(0, threshold - outdoor)."""

    base_MW: NotNegative
    slope_MW_per_K: NotNegative
    threshold_C: Annotated[float, Within(-60, 60)]


class Outage(Table):
    """Days on which the plant stands still, both included; may wrap the new year."""

    from_: Day = Field(alias="from")
    to: Day


class Metered(Table):
    """A metered year of the plant as it stands."""

    heat_MWh: Positive
    power_net_MWh: Number
    fuel_MWh: Positive


class Year(Table):
    """The hours of the year and what changes from year to year."""

    series: Text
    heat_signature: HeatSignature | None = None
    availability: Efficiency = 1.0
    heat_multiplier: Positive = 1.0
    supply_offset_K: OffsetK = 0.0
    return_offset_K: OffsetK = 0.0
    outages: tuple[Outage, ...] = ()
    change_per_year: YearlyChange = 0.0
    supply_change_K_per_year: OffsetK = 0.0
    return_change_K_per_year: OffsetK = 0.0
    extra_running: Flag = False
    metered: Metered | None = None
