"""Carbon and primary energy saving."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from money_case import money_case
from published import published

from appraise.emissions import (
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
    assert is_high_efficiency(0.10)
    assert not is_high_efficiency(0.0999)


def test_carbon_by_hand() -> None:
    """1000 MWh at 200 kg less 40 MWh at 250 kg at the stack: 190 t; 900 MWh displaced at 400 kg: 360 t."""
    case = money_case(emissions={"grid_kg_per_MWh": 400.0})
    change = carbon_change(case, np.array([900.0]), np.array([1000.0]), np.array([-40.0]))
    assert change.stack.tolist() == [190.0]
    assert change.displaced.tolist() == [360.0]
    assert change.with_displaced.tolist() == [-170.0]
    assert float(stack_co2_t(case, 1000.0, 0.0)) == 200.0
