"""Carbon and primary energy saving."""

import tomllib
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from money_case import money_case
from published import published, values

from appraise.case.money import Emissions
from appraise.emissions import (
    HIGH_EFFICIENCY_SAVING,
    carbon_change,
    is_high_efficiency,
    plant_saving,
    primary_energy_saving,
    stack_co2_t,
)

LAW = settings(derandomize=True, deadline=None, max_examples=60)


@pytest.mark.parametrize("row", published("finance", "Primary energy saving"), ids=str)
def test_primary_energy_saving(row) -> None:
    g = row.given
    saving = primary_energy_saving(g["heat"], g["power"], g["heat_reference"], g["power_reference"])
    row.check(100.0 * float(saving))


@LAW
@given(st.floats(0.1, 0.9), st.floats(0.5, 0.95), st.floats(0.2, 0.55))
def test_a_plant_as_good_as_both_references_saves_nothing(share, heat_reference, power_reference) -> None:
    saving = primary_energy_saving(
        share * heat_reference, (1.0 - share) * power_reference, heat_reference, power_reference
    )
    assert float(saving) == pytest.approx(0.0, abs=1e-12)


def test_saving_of_the_plant_is_that_of_its_yearly_efficiencies() -> None:
    case = money_case(emissions={"heat_reference": 0.86, "power_reference": 0.37})
    saving = plant_saving(case, heat_MWh=65_000.0, power_gross_MWh=25_000.0, fuel_MWh=100_000.0)
    assert saving == pytest.approx(0.301427, abs=5e-7)
    assert plant_saving(case, 0.0, 0.0, 100.0) is None
    assert plant_saving(case, 0.0, 0.0, 0.0) is None


def test_ten_percent_is_high_efficiency() -> None:
    values("emissions", "High efficiency")["percent"].check(100.0 * HIGH_EFFICIENCY_SAVING)
    assert is_high_efficiency(0.10)
    assert not is_high_efficiency(0.0999)


KG_PER_TJ = values("emissions", "CO2 of fuels")
INPUTS = Path(__file__).parents[1] / "inputs"


def inputs(name: str) -> dict[str, Any]:
    return tomllib.loads((INPUTS / f"{name}.toml").read_text(encoding="utf-8"))


def kg_per_MWh(fuel: str) -> float:
    """1 MWh is 0.0036 TJ."""
    return KG_PER_TJ[fuel].value * 0.0036


@pytest.mark.parametrize("name", ["marrowby", "hollowmere", "smallest"])
def test_peak_boilers_of_the_cases_burn_natural_gas(name: str) -> None:
    case = inputs(name)
    assert case["plant"]["peak_boiler"]["co2_kg_per_MWh"] == round(kg_per_MWh("natural_gas"))
    assert "56 100 kg/TJ" in case["notes"]["plant.peak_boiler.co2_kg_per_MWh"]


def test_half_of_the_waste_is_fossil() -> None:
    case = inputs("hollowmere")
    assert case["plant"]["boiler"]["co2_kg_per_MWh"] == round(0.5 * kg_per_MWh("municipal_waste"))
    assert "91 700 kg/TJ" in case["notes"]["plant.boiler.co2_kg_per_MWh"]


def test_stack_of_a_wood_fired_plant() -> None:
    """Marrowby's file says 112 000 kg/TJ and about 400 kg/MWh."""
    assert "112 000 kg/TJ" in inputs("marrowby")["notes"]["plant.boiler.co2_kg_per_MWh"]
    assert KG_PER_TJ["wood"].value == 112_000.0
    assert kg_per_MWh("wood") == pytest.approx(400.0, rel=0.01)


def stack_kg_per_MWh(kg_per_GJ: float, total_efficiency: float) -> float:
    """Stack CO2 per MWh of heat and power together."""
    case = money_case()
    boiler = case.plant.boiler.model_copy(update={"co2_kg_per_MWh": 3.6 * kg_per_GJ})
    case = case.model_copy(update={"plant": case.plant.model_copy(update={"boiler": boiler})})
    return 1000.0 * float(stack_co2_t(case, 1.0 / total_efficiency, 0.0))


def test_stack_per_heat_and_power() -> None:
    rows = values("emissions", "CO2 per heat and power")
    rows["of_fuel"].check(stack_kg_per_MWh(56.1, 1.0))
    rows["at_90"].check(stack_kg_per_MWh(56.1, 0.90))
    rows["at_75"].check(stack_kg_per_MWh(56.1, 0.75))
    rows["least_percent"].check(100.0 * stack_kg_per_MWh(56.1, 1.0) / 270.0)


@pytest.mark.parametrize("row", published("emissions", "Least total efficiency"), ids=str)
def test_fuels_that_never_reach_the_limit(row) -> None:
    row.check(100.0 * stack_kg_per_MWh(row.given["kg_per_GJ"], 1.0) / 270.0)


@pytest.mark.parametrize(("name", "fuel"), [("marrowby", "wood"), ("hollowmere", "waste")])
def test_reference_efficiencies_of_the_cases(name: str, fuel: str) -> None:
    rows, given = values("emissions", "Reference efficiencies, 2006"), inputs(name)["emissions"]
    rows[f"{fuel}_power"].check(100.0 * given["power_reference"])
    rows[f"{fuel}_heat"].check(100.0 * given["heat_reference"])


def test_reference_efficiencies_where_nothing_is_given() -> None:
    rows, default = values("emissions", "Reference efficiencies, 2016"), Emissions()
    rows["wood_power"].check(100.0 * default.power_reference)
    rows["wood_heat"].check(100.0 * default.heat_reference)


def test_carbon_by_hand() -> None:
    """1000 MWh at 200 kg less 40 MWh at 250 kg at the stack: 190 t; 900 MWh displaced at 400 kg: 360 t."""
    case = money_case(emissions={"grid_kg_per_MWh": 400.0})
    change = carbon_change(case, np.array([900.0]), np.array([1000.0]), np.array([-40.0]))
    assert change.stack.tolist() == [190.0]
    assert change.displaced.tolist() == [360.0]
    assert change.with_displaced.tolist() == [-170.0]
    assert float(stack_co2_t(case, 1000.0, 0.0)) == 200.0
