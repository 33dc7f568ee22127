"""A series of hours: what the network asks in year k, every option in every hour, bypass, sums.

Hours are plain rows; every sum is a loop over them.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

from .design import Design, design
from .hour import Point, off, points
from .plain import option
from .prices import Prices, prices


@dataclass(frozen=True)
class Row:
    """One hour of the series; heat and temperatures None where signature and heating curve give them."""

    month: int
    day: int
    heat_MW: float | None
    outdoor_C: float | None
    supply_C: float | None
    return_C: float | None
    price: float


@dataclass(frozen=True)
class Asked:
    heat_MW: float
    supply_C: float
    return_C: float
    available: bool


def _on_curve(curve: dict[str, Any], name: str, outdoor_C: float) -> float:
    x, y = curve["outdoor_C"], curve[name]
    if outdoor_C <= x[0]:
        return y[0]
    for i in range(1, len(x)):
        if outdoor_C <= x[i]:
            return y[i - 1] + (outdoor_C - x[i - 1]) / (x[i] - x[i - 1]) * (y[i] - y[i - 1])
    return y[-1]


def _inside(row: Row, first: str, last: str) -> bool:
    """Whether the day lies in "MM-DD" to "MM-DD", both included; the span may wrap the new year."""
    day = f"{row.month:02d}-{row.day:02d}"
    if first <= last:
        return first <= day <= last
    return day >= first or day <= last


def asked(data: dict[str, Any], row: Row, k: int) -> Asked:
    """What the network asks in operating year k."""
    year = data["year"]
    heat, supply, back = row.heat_MW, row.supply_C, row.return_C
    if heat is None:
        s = year["heat_signature"]
        heat = s["base_MW"] + s["slope_MW_per_K"] * max(0.0, s["threshold_C"] - row.outdoor_C)
    if supply is None:
        supply = _on_curve(data["network"]["heating_curve"], "supply_C", row.outdoor_C)
    if back is None:
        back = _on_curve(data["network"]["heating_curve"], "return_C", row.outdoor_C)
    growth = (1.0 + year.get("change_per_year", 0.0)) ** k
    return Asked(
        heat_MW=heat * year.get("heat_multiplier", 1.0) * growth,
        supply_C=supply + year.get("supply_offset_K", 0.0) + year.get("supply_change_K_per_year", 0.0) * k,
        return_C=back + year.get("return_offset_K", 0.0) + year.get("return_change_K_per_year", 0.0) * k,
        available=not any(_inside(row, o["from"], o["to"]) for o in year.get("outages", [])),
    )


def solved_years(data: dict[str, Any]) -> tuple[int, ...]:
    """Operating years in which demand or temperatures are solved: one where nothing changes."""
    year, last = data["year"], data["study"]["years"] - 1
    changing = ("change_per_year", "supply_change_K_per_year", "return_change_K_per_year")
    if not any(year.get(name, 0.0) for name in changing):
        return (0,)
    return tuple(sorted({0, last // 2, last}))


def through(years: tuple[int, ...], values: list[float], k: int) -> float:
    """The polynomial through values at the solved years, at year k (Neville's scheme)."""
    table = list(values)
    for width in range(1, len(years)):
        for i in range(len(years) - width):
            a, b = years[i], years[i + width]
            table[i] = ((k - b) * table[i] + (a - k) * table[i + 1]) / (a - b)
    return table[0]


def solve_row(data: dict[str, Any], found: Design, row: Row, k: int) -> tuple[Asked, dict[str, Point]]:
    """One hour of operating year k, all options."""
    want = asked(data, row, k)
    solve = points if want.available else off
    return want, solve(found, want.heat_MW, want.supply_C, want.return_C)


@dataclass(frozen=True)
class Flows:
    """MW in one hour, an option's or a difference to the baseline's."""

    power: float
    fuel: float
    heat: float


@dataclass(frozen=True)
class Sums:
    """MWh a year."""

    power: float
    fuel: float
    heat: float
    gross: float
    missing: float


class Year:
    """All hours of a case solved. ``years`` is how many calendar years the rows cover."""

    def __init__(
        self, data: dict[str, Any], rows: Sequence[Row], years: int = 1, scenario: str = "central"
    ) -> None:
        self.data, self.rows, self.years, self.scenario = data, rows, years, scenario
        self.design = design(data)
        self.base = self.design.baseline_key
        self.knots = solved_years(data)
        self.solved = [[solve_row(data, self.design, row, k) for row in rows] for k in self.knots]

    @cached_property
    def mean_price(self) -> float:
        return sum(row.price for row in self.rows) / len(self.rows)

    def hour_price(self, now: Prices, hour: int) -> float:
        return now.power * self.rows[hour].price / self.mean_price

    def point(self, key: str, hour: int, knot: int = 0) -> Point:
        return self.solved[knot][hour][1][key]

    def extra(self, key: str, hour: int, k: int) -> Flows:
        """Against the baseline in operating year k, before availability, unbypassed."""

        def over(name: str) -> float:
            at = range(len(self.knots))
            gains = [
                getattr(self.point(key, hour, i), name) - getattr(self.point(self.base, hour, i), name)
                for i in at
            ]
            return through(self.knots, gains, k)

        return Flows(over("power_net_MW"), over("fuel_MW"), over("heat_MW"))

    def bypassed(self, key: str, hour: int, k: int, now: Prices) -> bool:
        """Whether the hour earns less than the baseline's at that year's prices."""
        if not option(self.data, key).bypass:
            return False
        more = self.extra(key, hour, k)
        return now.margin(self.hour_price(now, hour), more.power, more.fuel, -more.heat) < 0.0

    def _own_share(self, key: str) -> float:
        o = option(self.data, key)
        own = o.tail_availability if o.stages > 1 else 1.0
        return self.data["year"].get("availability", 1.0) * own

    def increment(self, key: str, k: int) -> dict[str, float]:
        """Extra power, weighted and supported power, fuel and peak fuel of operating year k, MWh."""
        now, share = prices(self.data, self.scenario, k), self._own_share(key) / self.years
        sums = dict.fromkeys(("power", "weighted", "supported", "fuel", "peak"), 0.0)
        for hour in range(len(self.rows)):
            if self.bypassed(key, hour, k, now):
                continue
            more, price = self.extra(key, hour, k), self.hour_price(now, hour)
            sums["power"] += share * more.power
            sums["weighted"] += share * more.power * self.rows[hour].price / self.mean_price
            sums["supported"] += share * more.power * (price >= now.not_below)
            sums["fuel"] += share * more.fuel
            sums["peak"] -= share * more.heat / now.peak_efficiency
        return sums

    def sums(self, key: str) -> Sums:
        """First year, with bypass: while the plant is up, a x option + (1 - a) x baseline."""
        now, up = prices(self.data, self.scenario, 0), self.data["year"].get("availability", 1.0)
        a = self._own_share(key) / up
        power = fuel = heat = gross = demand = 0.0
        for hour in range(len(self.rows)):
            base = self.point(self.base, hour)
            mine = base if self.bypassed(key, hour, 0, now) else self.point(key, hour)
            power += up * (a * mine.power_net_MW + (1.0 - a) * base.power_net_MW)
            gross += up * (a * mine.power_gross_MW + (1.0 - a) * base.power_gross_MW)
            fuel += up * (a * mine.fuel_MW + (1.0 - a) * base.fuel_MW)
            heat += up * (a * mine.heat_MW + (1.0 - a) * base.heat_MW)
            demand += self.solved[0][hour][0].heat_MW
        n = self.years
        return Sums(power / n, fuel / n, heat / n, gross / n, (demand - heat) / n)
