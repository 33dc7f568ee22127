"""Cases for the tests of the heat balance: the scalar solver's plain plant, with what a case must have."""

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import numpy as np
from hypothesis import strategies as st
from scalar.marrowby import marrowby

from appraise.case.load import Case, case_from
from appraise.case.plant import Heater
from appraise.cycle.balance import Balance, design_balances
from appraise.cycle.design import Design, OptionDesign, design, size_option
from appraise.cycle.feedwater import Bleeds, FeedWater, feed_water
from appraise.cycle.plant import PlantData, plant_data
from appraise.cycle.solve import solve
from appraise.cycle.stages import Train
from appraise.cycle.task import Conditions, Solution, Task
from appraise.steam_fits import saturation_pressure

_REST = {
    "study": {
        "title": "Marrowby",
        "currency": "EUR",
        "price_year": 2026,
        "first_year": 2028,
        "years": 20,
        "reference_scenario": "central",
    },
    "year": {"series": "marrowby-year.csv"},
    "scenarios": {"central": {"title": "Central", "power": 60.0, "fuel": 24.0, "peak_fuel": 30.0}},
    "finance": {"discount_rate": 0.05},
}


def case_of(data: Mapping[str, Any]) -> Case:
    """A case from the mapping that the scalar solver reads too."""
    return case_from({**_REST, **data})


def designed(data: Mapping[str, Any]) -> dict[str, OptionDesign]:
    """Every option at the design point, by key."""
    return {option.train.key: option for option in design(case_of(data)).options}


def balanced(data: Mapping[str, Any]) -> dict[str, Balance]:
    """Heat balance of every option at the design point, by key."""
    case = case_of(data)
    return {balance.key: balance for balance in design_balances(case, design(case))}


def sized(made: Design, train: Train) -> OptionDesign:
    """Any row of stages at the design point of a plant, sized there."""
    return size_option(made.plant, train, made.reference, made.conditions, made.existing_conductance_kW_K)


def stated(train: Train, difference_K: float) -> Train:
    """The same stages with a stated terminal difference in every one, the hottest included."""
    rows = (replace(s, existing=False, terminal_difference_K=difference_K) for s in train.stages)
    return replace(train, stages=tuple(rows))


def gross_MW(option: OptionDesign) -> float:
    """Gross power at the design point."""
    return float(option.solution.energy.power_gross_MW[0])


def solved(made: Design, option: OptionDesign, points) -> Solution:
    """One option at (heat MW, supply °C, return °C) points, sizes as at the design point."""
    heat, supply, back = np.array(points, dtype=float).T
    at = Conditions(heat, back, supply)
    return solve(
        Task(made.plant, option.train, option.sizes, made.reference, at, np.zeros(heat.size, dtype=bool))
    )


def ideal_feed(
    h1: float, s1: float, boiler_bar: float, deaerator_bar: float, heater: Heater | None = None
) -> PlantData:
    """The plant around an open feed heater, with ideal pumps and maybe a closed heater behind them."""
    return replace(
        plant_data(case_of(marrowby())),
        h1=h1,
        s1=s1,
        boiler_bar=boiler_bar,
        blowdown_share=0.0,
        deaerator_bar=deaerator_bar,
        pump_efficiency=1.0,
        heater=heater,
    )


def fed(plant: PlantData, condensate_kJ_kg: float, eff: float = 1.0) -> FeedWater:
    """The open feed heater of such a plant on a bleed of its own pressure, 1 kg/s of condensate."""
    one = np.ones(1)
    heater_bar = None if plant.heater is None else plant.heater.bleed_bar * one
    return feed_water(
        plant,
        condensate_kg_s=one,
        condensate_kJ_kg=condensate_kJ_kg * one,
        bleeds=Bleeds(plant.deaerator_bar * one, heater_bar),
        deaerator_bar=plant.deaerator_bar * one,
        efficiency=eff * one,
        on_live_steam=np.zeros(1, dtype=bool),
    )


def two_stage(key: str = "two", **keys: Any) -> dict[str, Any]:
    """An option of two stages with other keys of its own."""
    return {"key": key, "name": key, "stages": 2, **keys}


BASELINE = {"key": "single", "name": "Single stage", "stages": 1, "baseline": True}


def with_options(*options: Mapping[str, Any], **tables: Mapping[str, Any]) -> dict[str, Any]:
    """Marrowby with other options beside its baseline, and keys of whole tables changed."""
    data = marrowby()
    data["options"] = [BASELINE, *options]
    for name, keys in tables.items():
        data[name] = {**data[name], **keys}
    return data


@st.composite
def plants(draw) -> dict[str, Any]:
    """A back-pressure plant that could stand somewhere, with Marrowby's options.

    The deaerator is drawn above the hottest condensate, so that it never floats.
    """
    back = draw(st.floats(35.0, 55.0))
    supply = draw(st.floats(back + 25.0, min(back + 60.0, 108.0)))
    difference = draw(st.floats(1.0, 6.0))
    exhaust_loss = draw(st.floats(0.0, 0.05))
    hottest_bar = float(saturation_pressure(np.array(supply + difference + 12.0)))
    deaerator_bar = max(draw(st.floats(1.5, 4.0)), hottest_bar)
    bleed_bar = deaerator_bar * draw(st.floats(1.3, 2.5)) / (1.0 - exhaust_loss)
    live_bar = draw(st.floats(40.0, 120.0))
    data = marrowby()
    data["plant"] = {
        "auxiliary_MW": draw(st.floats(0.0, 1.0)),
        "live_steam": {
            "pressure_bar": live_bar,
            "temperature_C": draw(st.floats(450.0, 550.0)),
            "max_kg_s": 500.0,
            "min_kg_s": 0.01,
        },
        "boiler": {
            "efficiency": draw(st.floats(0.8, 0.95)),
            "pressure_bar": live_bar * draw(st.floats(1.0, 1.3)),
            "blowdown_share": draw(st.floats(0.0, 0.03)),
            "makeup_C": draw(st.floats(5.0, 30.0)),
        },
        "turbine": {
            "efficiency": draw(st.floats(0.7, 0.9)),
            "part_load": marrowby()["plant"]["turbine"]["part_load"],
            "mechanical_efficiency": draw(st.floats(0.95, 1.0)),
            "generator_efficiency": draw(st.floats(0.95, 1.0)),
            "exhaust_loss_share": exhaust_loss,
        },
        "feed": {
            "deaerator_bar": deaerator_bar,
            "bleed_bar": bleed_bar,
            "pump_efficiency": draw(st.floats(0.6, 0.85)),
        },
        "condenser": {"terminal_difference_K": difference, "flow_exponent": draw(st.floats(0.0, 0.8))},
        "design": {"heat_MW": draw(st.floats(5.0, 80.0)), "supply_C": supply, "return_C": back},
        "peak_boiler": {"efficiency": 0.92},
    }
    data["tail"] = {"efficiency": draw(st.floats(0.6, 0.9)), "baumann_factor": draw(st.floats(0.0, 1.5))}
    data["new_condenser"] = {
        "terminal_difference_K": draw(st.floats(1.0, 6.0)),
        "drain_approach_K": draw(st.floats(3.0, 12.0)),
        "flow_exponent": draw(st.floats(0.0, 0.8)),
        "pressure_drop_bar": draw(st.floats(0.0, 0.8)),
        "vacuum_auxiliary_kW": draw(st.floats(0.0, 30.0)),
    }
    return data


@st.composite
def loads(draw, data: Mapping[str, Any]) -> tuple[float, float, float]:
    """An hour of a drawn plant: heat MW, supply and return °C, mostly milder than its design point."""
    point = data["plant"]["design"]
    heat = point["heat_MW"] * draw(st.floats(0.35, 1.05))
    back = point["return_C"] + draw(st.floats(-3.0, 6.0))
    rise = (point["supply_C"] - point["return_C"]) * draw(st.floats(0.55, 1.02))
    return heat, back + rise, back
