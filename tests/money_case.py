"""A small plant to hang money on: every table that the money needs, changed table by table."""

from collections.abc import Mapping
from typing import Any

import numpy as np

from appraise.case.load import Case, case_from
from appraise.cash_flow import CashFlow, Increment, cash_flow
from appraise.prices import scenario_prices

PLANT: dict[str, Any] = {
    "live_steam": {"pressure_bar": 60.0, "temperature_C": 480.0, "max_kg_s": 20.0, "min_kg_s": 5.0},
    "boiler": {"efficiency": 0.9, "pressure_bar": 70.0, "co2_kg_per_MWh": 200.0},
    "turbine": {"efficiency": 0.85},
    "feed": {"deaerator_bar": 2.0, "bleed_bar": 5.0},
    "condenser": {"terminal_difference_K": 3.0},
    "design": {"heat_MW": 30.0, "supply_C": 95.0, "return_C": 45.0},
    "peak_boiler": {"efficiency": 0.9, "co2_kg_per_MWh": 250.0},
}


def money_case(**tables: Mapping[str, Any]) -> Case:
    """The small case with whole tables put in place: study, scenario, capex, opex, finance, emissions."""
    study = {"title": "t", "currency": "EUR", "price_year": 2026, "first_year": 2027, "years": 10}
    scenario = {"power": 50.0, "fuel": 20.0, "peak_fuel": 40.0}
    data = {
        "study": study | {"reference_scenario": "central"} | dict(tables.get("study", {})),
        "plant": PLANT,
        "tail": {"efficiency": 0.8},
        "new_condenser": {"terminal_difference_K": 3.0, "drain_approach_K": 6.0},
        "options": [
            {"key": "single", "name": "As it is", "stages": 1, "baseline": True},
            {"key": "two-stage", "name": "Two stages", "stages": 2},
        ],
        "year": {"series": "hours.csv"},
        "scenarios": {"central": scenario | dict(tables.get("scenario", {}))},
        "capex": dict(tables.get("capex", {})),
        "opex": dict(tables.get("opex", {})),
        "finance": {"discount_rate": 0.06} | dict(tables.get("finance", {})),
        "emissions": dict(tables.get("emissions", {})),
    }
    return case_from(data)


def increment(
    years: int = 10,
    *,
    power: Any = 0.0,
    weighted: Any = 0.0,
    premium: Any = 0.0,
    fuel: Any = 0.0,
    peak: Any = 0.0,
    tie_in: Any = 0.0,
    option: str = "two-stage",
) -> Increment:
    """Energies a year, the same in every operating year where a number is given."""
    power, weighted, premium, fuel, peak = (
        np.asarray(value) * np.ones(years) for value in (power, weighted, premium, fuel, peak)
    )
    return Increment(option, "central", power, weighted, premium, fuel, peak, tie_in)


def flow_of(case: Case, extra: Increment, capital: Any) -> CashFlow:
    """The cash flow in the only scenario."""
    return cash_flow(case, scenario_prices(case, "central"), extra, capital)


def plain_flow(flows: list[float], rate: float = 0.1, **finance: Any) -> CashFlow:
    """A cash flow whose net is exactly `flows`: one spend, then yearly power at a price of 1."""
    case = money_case(
        study={"years": len(flows) - 1},
        scenario={"power": 1.0},
        opex={"fixed_share_of_capex": 0.0},
        finance={"discount_rate": rate} | finance,
    )
    sold = np.array(flows[1:])
    return flow_of(case, increment(len(sold), power=sold, weighted=sold), -flows[0])
