"""The sheets of money as a book of their own, and the same money computed afresh after a change of inputs."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache, reduce
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

import numpy as np
from cases import minimal_case, write_case
from libreoffice import Recalculated, same
from sheet_trial import recalculated, value_of

from appraise.capex import capital
from appraise.case.load import Case, case_from, load_case
from appraise.case.paths import edited
from appraise.chain import ScenarioRun, run_scenario
from appraise.measures import Measures, measures
from appraise.sensitivity import Tornado, tornado
from appraise.study import Comparison, Study, run_study
from appraise.workbook.addresses import cells_in, ref
from appraise.workbook.capex import capex_sheet
from appraise.workbook.cash_flow import cash_flow_sheet
from appraise.workbook.cells import Page, Sheet
from appraise.workbook.faults import defined_names
from appraise.workbook.inputs import inputs_sheet
from appraise.workbook.naming import CHOSEN_SCENARIO, input_name, name_of
from appraise.workbook.prices import prices_sheet
from appraise.workbook.scenarios import scenarios_sheet
from appraise.workbook.tornado import tornado_sheet
from appraise.workbook.year import year_sheet

MEASURE_NAMES = {
    "npv": "npv",
    "irr": "irr",
    "mirr": "mirr",
    "simple_payback_years": "payback",
    "discounted_payback_years": "discounted_payback",
    "profitability_index": "profitability",
    "levelised_cost": "levelised",
    "break_even_power_price": "even_power",
    "break_even_fuel_price": "even_fuel",
    "break_even_carbon_price": "even_carbon",
    "largest_capex": "largest_capital",
}


def money_sheets(study: Study) -> list[Sheet]:
    """Chooser, inputs, year and capital, and the four sheets under test."""
    chooser = Page("Decision", "input")
    chooser.put(1, 1, study.case.study.reference_scenario, "text input", name=CHOSEN_SCENARIO)
    return [
        chooser.finish(),
        inputs_sheet(study),
        year_sheet(study),
        capex_sheet(study),
        prices_sheet(study),
        cash_flow_sheet(study),
        scenarios_sheet(study),
        tornado_sheet(study),
    ]


@dataclass(frozen=True)
class Fresh:
    """Money computed from an edited case on the physics of the study."""

    case: Case
    runs: tuple[ScenarioRun, ...]
    comparison: Comparison
    tornado: tuple[Tornado, ...]

    @property
    def reference(self) -> int:
        """Index of the reference scenario, which stands for the chosen one."""
        return list(self.case.scenarios).index(self.case.study.reference_scenario)

    def measures(self, option: int) -> Measures:
        """Measures of one option in the chosen scenario."""
        return measures(self.runs[self.reference].flows[option])


def fresh(study: Study, edits: Mapping[str, Any]) -> Fresh:
    """The study's money after edits of the case; drivers that would change the plant are left out."""
    data: Any = reduce(lambda data, item: edited(data, *item), edits.items(), study.loaded.data)
    money = ("scenario.", "finance.", "capex.", "opex.")
    data = {**data, "drivers": [d for d in data.get("drivers", ()) if d["path"].startswith(money)]}
    case = case_from(data)
    bought = capital(case, study.physics.sizes)
    runs = tuple(run_scenario(case, study.hours, study.physics, bought, name) for name in case.scenarios)
    comparison = Comparison.of(np.stack([run.npv for run in runs]))
    base = comparison.npv[list(case.scenarios).index(case.study.reference_scenario)]
    bars = tornado(case, data, study.hours, study.physics, base, lambda fraction, label: None)
    return Fresh(case, runs, comparison, bars)


def small_data(**tables: Any) -> dict[str, Any]:
    """A small case with everything that money can have; whole tables may be put in place."""
    premium = {"value": 25.0, "years": 3, "not_below": 0.0}
    data = minimal_case()
    data["study"] |= {"years": 7, "price_year": 2025}
    data["plant"]["boiler"]["co2_kg_per_MWh"] = 60.0
    data["plant"]["peak_boiler"]["co2_kg_per_MWh"] = 202.0
    data["scenarios"] = {
        "central": {
            "title": "Central",
            "power": {"year": [2020, 2029, 2032], "value": [80.0, 92.0, 110.0]},
            "fuel": {"start": 20.0, "change_per_year": 0.01},
            "peak_fuel": 40.0,
            "carbon": {"year": [2030], "value": [80.0]},
            "power_premium": premium,
            "network_fee": -2.0,
        },
        "low": {
            "power": {"year": [2028, 2030], "value": [70.0, 50.0]},
            "fuel": 25.0,
            "peak_fuel": {"start": 42.0, "change_per_year": 0.02},
        },
    }
    data["capex"] = {
        "items": [{"key": "tail", "name": "Tail turbine", "amount": 8.0e5}],
        "spend": [0.4, 0.6],
        "multiplier": 1.1,
        "tie_in": {"from": "09-01", "to": "09-14", "multiplier": 0.8},
    }
    data["opex"] = {
        "fixed_share_of_capex": 0.015,
        "fixed_per_year": 4000.0,
        "variable_per_MWh": 1.2,
        "change_per_year": 0.01,
        "overhauls": [{"every_years": 3, "amount": 2.0e4}, {"every_years": 2, "amount": 5.0e3}],
    }
    data["finance"] = {
        "discount_rate": 0.07,
        "basis": "nominal",
        "inflation": 0.025,
        "tax_rate": 0.25,
        "depreciation": {"method": "declining_balance", "rate": 0.3, "years": 5},
        "grant": 9.0e4,
        "residual_share": 0.05,
        "reinvestment_rate": 0.05,
    }
    data["drivers"] = [
        {"label": "Power", "path": "scenario.power", "low": "-20%", "high": "+20%"},
        {"label": "Fuel, flat", "path": "scenario.fuel", "low": 15.0, "high": 30.0},
        {"label": "Peak fuel, flat", "path": "scenario.peak_fuel", "low": 30.0, "high": 50.0},
        {"label": "Carbon", "path": "scenario.carbon", "low": "-40%", "high": "+60%"},
        {"label": "Carbon, flat", "path": "scenario.carbon", "low": 30.0, "high": 120.0},
        {"label": "Premium", "path": "scenario.power_premium.value", "low": 10.0, "high": "+30%"},
        {"label": "Fee", "path": "scenario.network_fee", "low": -4.0, "high": 1.0},
        {"label": "Capital", "path": "capex.multiplier", "low": 0.9, "high": "+30%"},
        {"label": "Tie-in", "path": "capex.tie_in.multiplier", "low": 0.5, "high": 2.0},
        {"label": "Running cost", "path": "opex.fixed_share_of_capex", "low": 0.01, "high": 0.03},
        {"label": "Yearly cost", "path": "opex.fixed_per_year", "low": 0.0, "high": 8000.0},
        {"label": "Variable cost", "path": "opex.variable_per_MWh", "low": 0.5, "high": 3.0},
        {"label": "Rate", "path": "finance.discount_rate", "low": "-20%", "high": 0.1},
        {"label": "Tax", "path": "finance.tax_rate", "low": 0.2, "high": 0.3},
        {"label": "Residual", "path": "finance.residual_share", "low": 0.0, "high": 0.1},
        {"label": "Grant", "path": "finance.grant", "low": 0.0, "high": 2.0e5},
        {"label": "Impossible tax", "path": "finance.tax_rate", "low": 0.2, "high": 1.5},
        {"label": "Nothing", "path": "tail.baumann_factor", "low": 1.0, "high": 1.0},
    ]
    return data | tables


def small_study(folder: Path, **tables: Any) -> Study:
    """The study of the small case."""
    return run_study(load_case(write_case(folder, small_data(**tables))))


@dataclass(frozen=True)
class Followed:
    """A book whose inputs were changed, as LibreOffice has it, and the same money computed afresh."""

    study: Study
    sheets: list[Sheet]
    found: Recalculated
    fresh: Fresh

    def value(self, *name: str) -> object:
        """Value of a named cell."""
        return value_of(self.sheets, self.found, name_of(*name))

    def row(self, *name: str) -> list[Any]:
        """Values of a named row."""
        title, _, address = dict(defined_names(self.sheets))[name_of(*name)].rpartition("!")
        return [self.found[title.strip("'")][ref(*place)] for place in cells_in(address)]


def followed(
    study: Study, folder: Path, edits: Mapping[str, Any], typed: Mapping[str, object] | None = None
) -> Followed:
    """Type inputs and recalculate. edits : by path of the case; typed : by name, for elements of lists."""
    sheets = money_sheets(study)
    numbers = {input_name(path): value for path, value in edits.items() if not isinstance(value, list)}
    if "study.reference_scenario" in edits:
        numbers[CHOSEN_SCENARIO] = edits["study.reference_scenario"]
    found = recalculated(sheets, folder, {**numbers, **(typed or {})})
    return Followed(study, sheets, found, fresh(study, edits))


@cache
def small_followed(scenario: str) -> Followed:
    """The small case with prices, finance and capital changed, in one of its scenarios; computed once."""
    edits = {
        "study.reference_scenario": scenario,
        "study.first_year": 2030,
        "scenarios.central.power.value": [80.0, 71.0, 130.0],
        "scenarios.central.fuel.change_per_year": 0.03,
        "scenarios.central.power_premium.value": 31.0,
        "scenarios.low.fuel": 15.0,
        "finance.discount_rate": 0.05,
        "finance.tax_rate": 0.31,
        "capex.multiplier": 0.8,
    }
    typed = {"in_scenarios_central_power_value_1": 71.0, "in_scenarios_central_power_value_2": 130.0}
    with TemporaryDirectory() as folder:
        return followed(cached_small_study(), Path(folder), edits, typed)


@cache
def cached_small_study() -> Study:
    """The study of the small case, solved once."""
    with TemporaryDirectory() as folder:
        return small_study(Path(folder))


def wrong_measures(seen: Followed) -> list[str]:
    """Every measure of every option that the recalculated book has otherwise than Python."""
    wrong = []
    for index, option in enumerate(seen.fresh.case.options):
        told = seen.fresh.measures(index)
        for field, name in MEASURE_NAMES.items() if not option.baseline else ():
            value, cell = getattr(told, field), seen.value(name, option.key)
            if not (isinstance(cell, str) if value is None else same(cell, value)):
                wrong.append(f"{field} of {option.key} is {cell!r}, expected {value!r}")
    return wrong
