"""Price paths by year and the hourly shape."""

from types import SimpleNamespace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from money_case import money_case

from appraise.errors import CaseError
from appraise.prices import compounded, price_shape, scenario_prices, shape_of

LAW = settings(derandomize=True, deadline=None, max_examples=60)


def prices(**scenario):
    case = money_case(study={"first_year": 2028, "years": 4}, scenario=scenario)
    return scenario_prices(case, "central")


def test_number_is_the_same_every_year() -> None:
    assert prices(power=50.0).power.tolist() == [50.0] * 4


def test_start_holds_in_the_first_year_and_compounds() -> None:
    path = prices(fuel={"start": 24.0, "change_per_year": 0.01}).fuel
    assert path == pytest.approx([24.0, 24.24, 24.4824, 24.727224], rel=1e-14)


def test_path_is_linear_between_years_and_held_outside() -> None:
    path = prices(power={"year": [2029, 2031], "value": [24.0, 30.0]}).power
    assert path.tolist() == [24.0, 24.0, 27.0, 30.0]
    assert prices(power={"year": [2020, 2029], "value": [15.0, 24.0]}).power.tolist() == [
        23.0,
        24.0,
        24.0,
        24.0,
    ]


def test_premium_ends_after_its_years() -> None:
    assert prices(power_premium={"value": 12.0, "years": 3}).premium.tolist() == [12.0, 12.0, 12.0, 0.0]
    assert prices(power_premium={"value": 12.0, "years": 9}).premium.tolist() == [12.0] * 4
    assert not prices().premium.any()


def test_fee_and_fuel_may_be_negative() -> None:
    found = prices(network_fee=-8.0, fuel=-15.0)
    assert found.fee.tolist() == [-8.0] * 4
    assert found.fuel.tolist() == [-15.0] * 4
    assert found.carbon.tolist() == [0.0] * 4


def test_unknown_scenario() -> None:
    with pytest.raises(CaseError) as caught:
        scenario_prices(money_case(), "boom")
    assert str(caught.value) == "scenarios.boom: no such scenario; known scenarios: central"


def test_drawn_starts_and_changes_broadcast() -> None:
    start, change = np.array([10.0, 20.0]), np.array([0.0, 0.5])
    assert compounded(start, change, 3).tolist() == [[10.0, 10.0, 10.0], [20.0, 30.0, 45.0]]


@LAW
@given(st.lists(st.integers(-5000, 30_000), min_size=2, max_size=40).filter(lambda c: np.mean(c) > 1.0))
def test_shape_has_mean_one_and_keeps_the_sign_of_every_hour(cents) -> None:
    column = np.array(cents) / 100.0
    shape = shape_of(column, "power_price")
    assert float(shape.mean()) == pytest.approx(1.0, rel=1e-9)
    assert (np.sign(shape) == np.sign(column)).all()


@pytest.mark.parametrize("column", [[0.0, 0.0], [10.0, -30.0]])
def test_a_column_without_a_positive_mean_is_refused(column) -> None:
    with pytest.raises(CaseError) as caught:
        shape_of(np.array(column), "power_price")
    given = f"{np.mean(column):g}"
    assert str(caught.value) == f"year.series, column power_price: mean of {given} given; allowed: above 0"


def hours(**columns):
    return SimpleNamespace(time=np.arange(3), price=columns.get)


def test_shape_of_the_scenarios_own_column() -> None:
    case = money_case(scenario={"price_column": "north"})
    found = price_shape(case, hours(north=np.array([1.0, 2.0, 3.0])), "central")
    assert found.tolist() == [0.5, 1.0, 1.5]
    with pytest.raises(CaseError, match=r'scenarios.central.price_column: "north" given'):
        price_shape(case, hours(power_price=np.ones(3)), "central")


def test_price_without_a_column_is_flat() -> None:
    assert price_shape(money_case(), hours(), "central").tolist() == [1.0, 1.0, 1.0]
