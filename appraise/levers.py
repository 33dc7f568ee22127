"""How the money of a case takes drawn values: prices, finance and running costs become arrays [draw]."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from appraise.case.load import Case
from appraise.case.paths import full_path
from appraise.numerics import Array
from appraise.prices import ScenarioPrices, compounded

_PATHS = ("power", "fuel", "peak_fuel", "carbon")
_NUMBERS = (
    *(f"finance.{key}" for key in ("discount_rate", "inflation", "tax_rate", "grant", "residual_share")),
    *(
        f"opex.{key}"
        for key in ("fixed_share_of_capex", "fixed_per_year", "variable_per_MWh", "change_per_year")
    ),
    "capex.tie_in.multiplier",
    "plant.boiler.co2_kg_per_MWh",
    "plant.peak_boiler.co2_kg_per_MWh",
)
MULTIPLIER = "capex.multiplier"
YEARS = "study.years"


@dataclass(frozen=True, slots=True)
class Levers:
    """Which drivers the money can take as arrays, in one scenario."""

    scenario: str

    def takes(self, path: str) -> bool:
        """Whether a driver's path is one of them."""
        full = full_path(path, self.scenario)
        return full in _NUMBERS or full in (MULTIPLIER, YEARS) or self._price_key(full) is not None

    def is_price_path(self, path: str) -> bool:
        """Whether the path is a whole price path, which drawn numbers multiply."""
        return self._price_key(full_path(path, self.scenario)) in _PATHS

    def _price_key(self, full: str) -> str | None:
        before = f"scenarios.{self.scenario}."
        key = full.removeprefix(before) if full.startswith(before) else ""
        deeper = [f"{path}.{part}" for path in _PATHS for part in ("start", "change_per_year")]
        return key if key in (*_PATHS, *deeper, "network_fee", "power_premium.value") else None

    def prices(self, case: Case, prices: ScenarioPrices, drawn: Mapping[str, Array]) -> ScenarioPrices:
        """Prices by draw [draw, operating year]. drawn : values by path [draw]."""
        moved = prices
        for path, values in drawn.items():
            key, column = self._price_key(full_path(path, self.scenario)), values[:, None]
            if key in _PATHS:
                moved = replace(moved, **{key: getattr(moved, key) * column})
            elif key == "network_fee":
                moved = replace(moved, fee=np.ones_like(prices.fee) * column)
            elif key == "power_premium.value":
                moved = replace(moved, premium=(prices.premium != 0.0) * column)
        for name in _PATHS:
            moved = self._reshaped(case, moved, name, drawn)
        return moved

    def _reshaped(
        self, case: Case, prices: ScenarioPrices, name: str, drawn: Mapping[str, Array]
    ) -> ScenarioPrices:
        """A path whose start or yearly change is drawn."""
        path = getattr(case.scenarios[self.scenario], name)
        given = {
            part: values
            for place, values in drawn.items()
            for part in ("start", "change_per_year")
            if self._price_key(full_path(place, self.scenario)) == f"{name}.{part}"
        }
        if not given or path.year is not None:
            return prices
        size = next(iter(given.values())).size
        start = given.get("start", np.full(size, path.start))
        change = given.get("change_per_year", np.full(size, path.change_per_year))
        plain = compounded(path.start, path.change_per_year, case.study.years)
        ratio = getattr(prices, name) / np.where(plain == 0.0, 1.0, plain)
        return replace(prices, **{name: compounded(start, change, case.study.years) * ratio})


def with_numbers(case: Case, drawn: Mapping[str, Array], scenario: str) -> Case:
    """The case with arrays [draw] in place of some of its numbers, for the money alone."""
    for path, values in drawn.items():
        full = full_path(path, scenario)
        if full in _NUMBERS:
            case = _copied(case, full.split("."), values)
    return case


def _copied(table: Any, way: list[str], value: Any) -> Any:
    inner = value if len(way) == 1 else _copied(getattr(table, way[0]), way[1:], value)
    return table.model_copy(update={way[0]: inner})
