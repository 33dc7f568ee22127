"""Prices of one scenario in one operating year, from the case's plain mapping, price-year money."""

from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True)
class Prices:
    """Per MWh of power or fuel; carbon already per MWh of either fuel."""

    power: float
    premium: float
    not_below: float
    fee: float
    variable: float
    fuel: float
    peak_fuel: float
    peak_efficiency: float

    def premium_at(self, hour_price: float) -> float:
        return self.premium if hour_price >= self.not_below else 0.0

    def margin(self, hour_price: float, power_MW: float, fuel_MW: float, missing_MW: float) -> float:
        """What the hour earns: power with premium less fee and variable cost, less both fuels."""
        worth = hour_price + self.premium_at(hour_price) - self.fee - self.variable
        return power_MW * worth - fuel_MW * self.fuel - missing_MW / self.peak_efficiency * self.peak_fuel


def path_at(path: Any, first_year: int, k: int) -> float:
    """A number, a start with a yearly change, or years with straight lines between; operating year k."""
    if not isinstance(path, dict):
        return float(path)
    if "start" in path:
        return path["start"] * (1.0 + path.get("change_per_year", 0.0)) ** k
    years, values, year = path["year"], path["value"], first_year + k
    if year <= years[0]:
        return values[0]
    for i in range(1, len(years)):
        if year <= years[i]:
            part = (year - years[i - 1]) / (years[i] - years[i - 1])
            return values[i - 1] + part * (values[i] - values[i - 1])
    return values[-1]


def prices(data: dict[str, Any], scenario: str, k: int) -> Prices:
    first, given, opex = data["study"]["first_year"], data["scenarios"][scenario], data.get("opex", {})
    plant, peak = data["plant"]["boiler"], data["plant"]["peak_boiler"]
    premium = given.get("power_premium") or {"value": 0.0, "years": 0}
    floor = premium.get("not_below")
    carbon = path_at(given.get("carbon", 0.0), first, k)
    return Prices(
        power=path_at(given["power"], first, k),
        premium=premium["value"] if k < premium["years"] else 0.0,
        not_below=float("-inf") if floor is None else floor,
        fee=given.get("network_fee", 0.0),
        variable=opex.get("variable_per_MWh", 0.0) * (1.0 + opex.get("change_per_year", 0.0)) ** k,
        fuel=path_at(given["fuel"], first, k) + carbon * plant.get("co2_kg_per_MWh", 0.0) / 1e3,
        peak_fuel=path_at(given["peak_fuel"], first, k) + carbon * peak.get("co2_kg_per_MWh", 0.0) / 1e3,
        peak_efficiency=peak["efficiency"],
    )
