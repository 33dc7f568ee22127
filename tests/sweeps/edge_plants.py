"""Random plants up to the edges of what a case may say: case, option and one hour, each by its number."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from appraise.case.load import Case, case_from
from appraise.steam import saturation_pressure_t, saturation_temperature_p

LIFT_K = (5.0, 80.0)
SUPPLY_C = (60.0, 140.0)
LIVE_STEAM_BAR = (2.0, 165.0)
DIFFERENCE_K = (0.5, 15.0)
LOAD = (0.05, 1.0)
MOST_STAGES = 6
_LEAST_RETURN_C = 15.0
_BASELINE = {"key": "single", "name": "Single stage", "stages": 1, "baseline": True}


@dataclass(frozen=True, slots=True, eq=False)
class EdgePlant:
    """One drawn plant. `data` is a case with the baseline and one option; the rest is one hour of it."""

    number: int
    data: dict[str, Any]
    load: float  # heat over that of the design point
    hour_supply_C: float
    hour_return_C: float

    @property
    def lift_K(self) -> float:
        """Rise of the network water at the design point."""
        at = self.data["plant"]["design"]
        return float(at["supply_C"] - at["return_C"])

    @property
    def heat_MW(self) -> float:
        """Heat in the hour."""
        return float(self.load * self.data["plant"]["design"]["heat_MW"])

    @property
    def stages(self) -> int:
        """Stages of the option."""
        return int(self.data["options"][1]["stages"])

    def case(self) -> Case:
        """The case as validated. Raises CaseError."""
        return case_from(self.data)

    def shrunk(self, scale: float) -> EdgePlant:
        """The same supply, with the lift and every terminal difference and drain approach times `scale`."""
        data = {
            **self.data,
            "plant": dict(self.data["plant"]),
            "new_condenser": dict(self.data["new_condenser"]),
        }
        point = dict(data["plant"]["design"])
        point["return_C"] = point["supply_C"] - scale * self.lift_K
        condenser = dict(data["plant"]["condenser"])
        condenser["terminal_difference_K"] *= scale
        data["plant"] |= {"design": point, "condenser": condenser}
        for name in ("terminal_difference_K", "drain_approach_K"):
            data["new_condenser"][name] *= scale
        return replace(self, data=data)


class _Draw:
    """Numbers of one plant."""

    def __init__(self, seed: int, number: int) -> None:
        self._random = np.random.default_rng([seed, number])

    def between(self, low: float, high: float) -> float:
        return float(self._random.uniform(low, high))

    def spread(self, low: float, high: float) -> float:
        """Even over the logarithm."""
        return float(np.exp(self._random.uniform(np.log(low), np.log(high))))

    def whole(self, low: int, high: int) -> int:
        return int(self._random.integers(low, high + 1))

    def chance(self, share: float) -> bool:
        return bool(self._random.random() < share)


def edge_plant(seed: int, number: int) -> EdgePlant:
    """Plant `number` of a seed, the same however many others are drawn."""
    draw = _Draw(seed, number)
    lift = draw.between(*LIFT_K)
    supply = draw.between(max(SUPPLY_C[0], lift + _LEAST_RETURN_C), SUPPLY_C[1])
    difference, exhaust_loss = draw.spread(*DIFFERENCE_K), draw.between(0.0, 0.06)
    exhaust_bar = float(saturation_pressure_t(supply + difference)) / (1.0 - exhaust_loss)
    # Some are drawn with no room for a bleed, and are refused.
    live_bar = max(LIVE_STEAM_BAR[0], draw.spread(*LIVE_STEAM_BAR), draw.between(0.98, 1.5) * exhaust_bar)
    stages = draw.whole(1, MOST_STAGES)
    data = {
        "study": {
            "title": f"plant {number}", "currency": "EUR", "price_year": 2026, "first_year": 2028,
            "years": 20, "reference_scenario": "central",
        },
        "plant": _plant(draw, live_bar, exhaust_bar, exhaust_loss)
        | {
            "condenser": {"terminal_difference_K": difference, "flow_exponent": draw.between(0.0, 0.8)},
            "design": {"heat_MW": draw.spread(1.0, 200.0), "supply_C": supply, "return_C": supply - lift},
        },
        "tail": {
            "efficiency": draw.between(0.5, 0.92),
            "baumann_factor": draw.between(0.0, 1.5),
            "inlet_loss_share": draw.between(0.0, 0.03) if draw.chance(0.2) else 0.0,
        },
        "new_condenser": {
            "terminal_difference_K": draw.spread(*DIFFERENCE_K),
            "drain_approach_K": draw.spread(1.0, 15.0),
            "flow_exponent": draw.between(0.0, 0.8),
        },
        "options": [_BASELINE, _option(draw, stages)],
        "year": {"series": "hours.csv"},
        "scenarios": {"central": {"power": 60.0, "fuel": 24.0, "peak_fuel": 30.0}},
        "finance": {"discount_rate": 0.05},
    }  # fmt: skip
    back = max(5.0, supply - lift + draw.between(-3.0, 5.0))
    rise = draw.between(0.6, 1.02) * lift
    return EdgePlant(number, data, draw.between(*LOAD), back + rise, back)


def _option(draw: _Draw, stages: int) -> dict[str, Any]:
    option: dict[str, Any] = {
        "key": "option",
        "name": "The option",
        "stages": stages,
        "drain": "subcooled" if draw.chance(0.5) else "saturated",
        "drain_route": "pumped" if draw.chance(0.4) else "cascade",
        "temperature_control": "held" if draw.chance(0.2) else "sliding",
    }
    if stages == 1 or draw.chance(0.2):
        option["existing_area_factor"] = draw.spread(0.7, 4.0)
    if draw.chance(0.4):
        parts = [draw.between(0.4, 1.6) for _ in range(stages)]
        option["shares"] = [part / sum(parts) for part in parts]
    return option


def _plant(draw: _Draw, live_bar: float, exhaust_bar: float, exhaust_loss: float) -> dict[str, Any]:
    """The plant but for its condenser and design point."""
    boiling_C = float(saturation_temperature_p(live_bar))
    room = max(1.0001, live_bar / exhaust_bar)
    bleed_bar = min(live_bar, exhaust_bar * room ** draw.between(0.02, 0.9))
    feed: dict[str, Any] = {
        "bleed_bar": bleed_bar,
        "deaerator_bar": bleed_bar * draw.between(0.3, 0.98),
        "pump_efficiency": draw.between(0.5, 0.85),
    }
    if draw.chance(0.25):
        bar = bleed_bar * (live_bar / bleed_bar) ** draw.between(0.1, 0.9)
        feed["heater"] = {"bleed_bar": bar, "terminal_difference_K": draw.between(-2.0, 8.0)}
    if draw.chance(0.25):
        feed |= {"deaerator_control": "sliding", "deaerator_minimum_bar": 0.5 * feed["deaerator_bar"]}
    efficiency = draw.between(0.75, 0.95)
    curve = {"load": [0.3, 0.6, 1.0], "value": [efficiency - 0.04, efficiency + 0.005, efficiency]}
    part_load = {"load": [0.3, 0.5, 0.8, 1.0], "value": [0.912, 0.959, 0.997, 1.0]}
    turbine = {
        "efficiency": draw.between(0.55, 0.92),
        "mechanical_efficiency": draw.between(0.94, 1.0),
        "generator_efficiency": draw.between(0.9, 1.0),
        "exhaust_loss_share": exhaust_loss,
    }
    if draw.chance(0.5):
        turbine["part_load"] = part_load
    return {
        "live_steam": {
            "pressure_bar": live_bar,
            "temperature_C": boiling_C + draw.spread(4.8, max(6.0, 619.0 - boiling_C)),
            "max_kg_s": 1e4,
            "min_kg_s": 0.0,
        },
        "boiler": {
            "efficiency": curve if draw.chance(0.5) else efficiency,
            "pressure_bar": min(200.0, live_bar * draw.between(1.0, 1.3)),
            "blowdown_share": draw.between(0.0, 0.05) if draw.chance(0.5) else 0.0,
        },
        "turbine": turbine,
        "feed": feed,
        "peak_boiler": {"efficiency": 0.92},
    }
