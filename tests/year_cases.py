"""Invented plants and hours that together switch on every rule of an hour, for two solvers to be compared.

Every case is the demo with some keys changed; its hours are drawn evenly over the demo series sorted by heat,
with a few invented ones at the edges of a rule.
"""

import copy
import csv
import tomllib
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path
from typing import Any

from scalar.year import Row

INPUTS = Path(__file__).parents[1] / "inputs"


@dataclass(frozen=True)
class YearCase:
    """A case and the hours it is run through; ``years`` is how many calendar years they stand for."""

    name: str
    data: dict[str, Any]
    rows: tuple[Row, ...]
    years: int = 1
    scenario: str = "central"


@cache
def _demo_text() -> str:
    return (INPUTS / "marrowby.toml").read_text(encoding="utf-8")


@cache
def _demo_rows() -> tuple[Row, ...]:
    with (INPUTS / "marrowby-year.csv").open(encoding="utf-8", newline="") as lines:
        rows = [
            Row(
                month=int(cells["time"][5:7]),
                day=int(cells["time"][8:10]),
                heat_MW=float(cells["heat_MW"]),
                outdoor_C=float(cells["outdoor_C"]),
                supply_C=float(cells["supply_C"]),
                return_C=float(cells["return_C"]),
                price=float(cells["power_price"]),
            )
            for cells in csv.DictReader(lines)
        ]
    return tuple(sorted(rows, key=lambda row: (row.heat_MW, row.month, row.day)))


def drawn(number: int, least: float = 0.0, most: float = 1.0) -> tuple[Row, ...]:
    """Hours of the demo series spread evenly between two shares of the hours sorted by heat."""
    rows = _demo_rows()
    last = len(rows) - 1
    return tuple(rows[round(last * (least + (most - least) * i / max(1, number - 1)))] for i in range(number))


def hour(
    heat: float, supply: float, back: float, price: float = 60.0, date: tuple[int, int] = (2, 10)
) -> Row:
    """An invented hour; outdoors -15 °C at 60 MW, 20 °C at none."""
    return Row(*date, heat, 20.0 - 35.0 * heat / 60.0, supply, back, price)


def changed(paths: dict[str, Any], options: list[dict[str, Any]] | None = None) -> dict[str, Any]:
    """The demo with dotted paths set, and other options beside its baseline."""
    data = tomllib.loads(_demo_text())
    for path, value in paths.items():
        *tables, key = path.split(".")
        table = data
        for name in tables:
            table = table.setdefault(name, {})
        table[key] = copy.deepcopy(value)
    if options is not None:
        data["options"] = [data["options"][0], *copy.deepcopy(options)]
        for item in data["capex"]["items"]:
            item.pop("only", None)
    return data


def stages(key: str, number: int, **keys: Any) -> dict[str, Any]:
    """An option with so many stages."""
    return {"key": key, "name": key, "stages": number, **keys}


TWO, THREE = stages("two", 2), stages("three", 3, shares=[0.3, 0.3, 0.4], drain="subcooled")
LOW = {"plant.live_steam.min_kg_s": 2.0}
GAS = {"heat_per_fuel": 0.14, "at_return_C": 45.0, "slope_per_K": 0.025}
WEAK = {"load": [0.2, 0.6, 1.0], "value": [0.75, 0.93, 1.0]}
COLD = (hour(75.0, 110.0, 44.0), hour(58.0, 108.0, 44.0), hour(52.0, 104.0, 46.0), hour(48.0, 110.0, 44.0))


def _as_it_stands() -> YearCase:
    edges = tuple(
        hour(12.47 + 0.015 * i, 76.0, 50.0) for i in range(14)
    )  # least flow is at 12.51 to 12.62 MW
    out = tuple(
        hour(heat, 82.0, 47.0, date=(7, 6 + 4 * i)) for i, heat in enumerate((20.0, 25.0, 30.0, 34.0, 38.0))
    )
    next_day = (hour(25.0, 82.0, 47.0, date=(7, 27)), hour(25.0, 82.0, 47.0, date=(7, 5)))
    return YearCase("as it stands", changed({}), (*drawn(36), *COLD, *edges, *out, *next_day))


def _feed() -> YearCase:
    feed = {
        "deaerator_bar": 2.5,
        "bleed_bar": 5.0,
        "deaerator_control": "sliding",
        "deaerator_minimum_bar": 1.7,
        "heater": {"bleed_bar": 7.0, "terminal_difference_K": 3.0},
    }
    paths = LOW | {
        "plant.feed": feed,
        "plant.boiler.efficiency": {"load": [0.3, 0.6, 1.0], "value": [0.83, 0.875, 0.89]},
    }
    pumped = stages("pumped", 3, drain_route="pumped", drain="subcooled")
    return YearCase("feed water", changed(paths, [TWO, pumped]), (*drawn(26), *drawn(14, 0.35, 0.6)))


def _afloat(heater: bool) -> YearCase:
    feed = {"deaerator_bar": 1.25, "bleed_bar": 5.0}
    if heater:
        feed |= {"deaerator_bar": 1.6, "heater": {"bleed_bar": 13.0, "terminal_difference_K": 4.0}}
    paths = {"plant.feed": feed, "year.supply_offset_K": 8.0, "year.heat_multiplier": 0.95}
    own = {"terminal_difference_K": 2.0, "flow_exponent": 0.35, "pressure_drop_bar": 0.6}
    options = [stages("pumped", 2, drain_route="pumped", new_condenser=own, existing_area_factor=0.8)]
    warm = tuple(hour(26.0 + 2.0 * i, 102.0 + i, 56.0 + i) for i in range(6))
    name = "deaerator afloat with a heater" if heater else "deaerator afloat"
    return YearCase(name, changed(paths, options), (*drawn(14, 0.5), *warm))


def _held() -> YearCase:
    held = {"temperature_control": "held"}
    options = [TWO | held, THREE | held | {"tail": {"inlet_loss_share": 0.03, "part_load": WEAK}}]
    return YearCase("held by valves", changed(LOW, options), (*drawn(26, 0.1), *COLD))


def _many() -> YearCase:
    four = stages("four", 4, tail={"efficiency": 0.76, "baumann_factor": 0.8, "part_load": WEAK})
    six = stages("six", 6, drain="subcooled")
    rows = (*drawn(14, 0.3), hour(20.0, 90.0, 40.0), hour(40.0, 98.0, 46.0), COLD[1])
    return YearCase("many stages", changed({"tail.inlet_loss_share": 0.02}, [four, six]), rows)


def _tail() -> YearCase:
    tail = {
        "efficiency": 0.8,
        "part_load": WEAK,
        "inlet_loss_share": 0.04,
        "min_flow_share": 0.55,
        "availability": 0.9,
        "mechanical_efficiency": 0.97,
        "generator_efficiency": 0.96,
    }
    apart = stages("apart", 2, drain="subcooled", shares=[0.4, 0.6], tail={"min_flow_share": 0.0})
    odd = tuple(hour(4.6 + 0.4 * i, 110.0, 46.0 + 0.5 * i) for i in range(6))
    low = {"plant.live_steam.min_kg_s": 0.5, "plant.live_steam.temperature_C": 520.0}
    return YearCase("weak tail", changed(low | {"tail": tail}, [TWO, apart]), (*drawn(24, 0.1), *odd))


def _far_below() -> YearCase:
    """Little heat at a high supply temperature, where a sliding tail finds no temperature to run at."""
    options = [TWO, stages("held", 2, temperature_control="held", drain="subcooled")]
    odd = ((1.2, 95.0, 45.0), (2.0, 95.0, 45.0), (2.2, 100.0, 42.0), (2.5, 110.0, 44.0), (4.0, 110.0, 42.0))
    rows = tuple(hour(*at) for at in (*odd, (5.0, 110.0, 44.0), (9.0, 104.0, 44.0)))
    return YearCase("far below design", changed({"plant.live_steam.min_kg_s": 0.3}, options), rows)


def hard_hours() -> tuple[YearCase, ...]:
    """Hours that have a solution which is hard to find: little heat at a high supply temperature.

    The temperature between two stages lies at 97 to 98 % of the rise; six stages share a very small one.
    """
    end = tuple(hour(3.0 + 0.4 * i, 110.0, 42.0 + i) for i in range(4))
    little = (hour(13.363, 104.57, 56.6),)
    return (
        replace(_tail(), name="end of the range", rows=end),
        replace(_many(), name="six stages at little heat", rows=little),
    )


def _series() -> YearCase:
    paths = {"plant.peak_boiler.connection": "series", "plant.condenser.max_heat_MW": 37.0}
    options = [TWO, stages("pumped", 2, drain_route="pumped", drain="subcooled")]
    rows = (*drawn(24, 0.3), *COLD, *(hour(60.0 + 3.0 * i, 100.0 + i, 46.0) for i in range(5)))
    return YearCase("series", changed(paths, options), rows)


def _flue_gas() -> YearCase:
    edge = tuple(hour(14.0, 76.0, 50.0 + 0.25 * i) for i in range(8))
    paths = LOW | {"plant.flue_gas_condenser": GAS}
    return YearCase("flue gas", changed(paths, [TWO]), (*drawn(18, 0.25), *edge, *COLD[1:]))


def _flue_gas_in_series() -> YearCase:
    paths = {
        "plant.flue_gas_condenser": GAS | {"slope_per_K": 0.004},
        "plant.peak_boiler.connection": "series",
        "plant.boiler.max_fuel_MW": 54.0,
        "plant.turbine.generator_limit_MW": 11.0,
        "plant.condenser.max_heat_MW": 35.5,
    }
    mild = tuple(hour(46.0 + 4.0 * i, 84.0 + 5.0 * i, 45.0) for i in range(6))
    return YearCase("flue gas in series", changed(paths, [TWO]), (*drawn(14, 0.5), *COLD, *mild))


def _generator() -> YearCase:
    paths = {"plant.turbine.generator_limit_MW": 10.0, "plant.boiler.max_fuel_MW": 57.0}
    other = stages("other", 2, tail={"mechanical_efficiency": 0.96, "generator_efficiency": 0.94})
    return YearCase("one generator", changed(paths, [other, THREE]), (*drawn(22, 0.4), *COLD))


def _generators() -> YearCase:
    paths = {
        "plant.turbine.generator_limit_MW": 11.2,
        "tail.generator_limit_MW": 0.9,
        "tail.generator_efficiency": 0.95,
    }
    return YearCase("two generators", changed(paths, [TWO, THREE]), (*drawn(18, 0.5), *COLD[1:]))


def _tested(exhaust: bool) -> YearCase:
    measured = {"heat_MW": 31.0, "supply_C": 91.0, "return_C": 46.5, "power_MW": 9.6}
    if exhaust:
        measured["exhaust_bar"] = 0.86
    name = "test with exhaust pressure" if exhaust else "test of power alone"
    paths = {"plant.measured": measured, "plant.condenser.flow_exponent": 0.4}
    return YearCase(name, changed(paths, [TWO]), drawn(13, 0.45))


def _bypass() -> YearCase:
    paths = {
        "tail.min_flow_share": 0.2,
        "tail.availability": 0.95,
        "opex.variable_per_MWh": 4.0,
        "opex.change_per_year": 0.02,
        "year.outages": [{"from": "12-28", "to": "01-04"}],
        "scenarios.central.power": {"year": [2028, 2035, 2047], "value": [30.0, 45.0, 60.0]},
        "scenarios.central.fuel": {"start": 32.0, "change_per_year": -0.02},
        "scenarios.central.power_premium": {"value": 15.0, "years": 12, "not_below": 38.0},
        "plant.boiler.co2_kg_per_MWh": 20.0,
    }
    options = [TWO | {"bypass": True}, stages("large", 1, existing_area_factor=1.5, bypass=True)]
    wrapped = [
        replace(row, month=m, day=d) for row, (m, d) in zip(drawn(6, 0.6), _AROUND_NEW_YEAR, strict=True)
    ]
    return YearCase("bypass", changed(paths, options), (*drawn(30, 0.4), *wrapped))


_AROUND_NEW_YEAR = ((12, 28), (12, 31), (1, 1), (1, 4), (12, 27), (1, 5))


def _trends() -> YearCase:
    paths = {
        "year.change_per_year": -0.012,
        "year.supply_change_K_per_year": -0.4,
        "year.return_change_K_per_year": -0.25,
        "study.years": 12,
        "tail.availability": 0.93,
    }
    options = [TWO | {"bypass": True}]
    scenario = {
        "scenarios.central.power": 32.0,
        "scenarios.central.power_premium": {"value": 6.0, "years": 5},
    }
    return YearCase("trends", changed(paths | scenario, options), (*drawn(16, 0.35), *COLD[2:]), years=2)


def _extra_running() -> YearCase:
    paths = {
        "year.extra_running": True,
        "year.heat_signature": {"base_MW": 6.0, "slope_MW_per_K": 1.15, "threshold_C": 16.0},
        "network.heating_curve": {
            "outdoor_C": [-12.0, 0.0, 8.0],
            "supply_C": [108.0, 90.0, 77.0],
            "return_C": [44.0, 46.0, 49.0],
        },
    }
    edge = hour(0.0, 0.0, 0.0)  # least flow is at 10.23 to 10.36 C outdoors
    rows = (*drawn(20), *(replace(edge, outdoor_C=10.13 + 0.015 * i) for i in range(20)))
    rows = tuple(replace(row, heat_MW=None, supply_C=None, return_C=None) for row in rows)
    return YearCase("extra running", changed(paths, [TWO, THREE]), rows)


def cases() -> tuple[YearCase, ...]:
    """All of them, by name in the order in which they are told apart."""
    return (
        _as_it_stands(),
        _feed(),
        _afloat(heater=False),
        _afloat(heater=True),
        _held(),
        _many(),
        _tail(),
        _far_below(),
        _series(),
        _flue_gas(),
        _flue_gas_in_series(),
        _generator(),
        _generators(),
        _tested(exhaust=False),
        _tested(exhaust=True),
        _bypass(),
        _trends(),
        _extra_running(),
    )
