"""Dotted paths: what they lead to, and how a driver moves it."""

import copy
from typing import Any

import pytest
from cases import minimal_case
from hypothesis import given, settings
from hypothesis import strategies as st

from appraise.case.load import case_from
from appraise.case.paths import NoSuchPath, changed, edited, scaled, target_of, value_at, value_in_force
from appraise.errors import CaseError


def moved(path: str, change: float | str, data: dict[str, Any] | None = None) -> dict[str, Any]:
    """The minimal case with one driver moved."""
    data = data or minimal_case()
    return changed(case_from(data), data, path, change)


@pytest.mark.parametrize(
    ("path", "value"),
    [
        ("plant.boiler.efficiency", 0.89),
        ("options.two-stage.stages", 2),
        ("capex.items.tail.amount", 1.2e6),
        ("scenarios.central.power", 62.0),
        ("scenario.power", 62.0),
        ("year.heat_multiplier", 1.0),
        ("network.pressure_bar", 10.0),
        ("opex.overhauls", []),
        ("scenarios.central.carbon", {"start": 0.0}),
        ("plant.condenser.max_heat_MW", None),
    ],
)
def test_a_path_gives_what_the_file_has_or_else_the_default(path: str, value: Any):
    assert value_at(minimal_case(), path, "central") == value


@pytest.mark.parametrize(
    ("path", "why"),
    [
        ("plant.boilr.efficiency", "nearest known key: boiler"),
        ("options.two.stages", "known keys: single, two-stage"),
        ("options.two-stag.stages", "nearest known key: two-stage"),
        ("scenarios.centrl.power", "nearest known name: central"),
        ("study.years.more", 'nothing lies below this value, so no "more"'),
        ("", "known keys: study, plant, tail, new_condenser, options, network, year, scenarios, capex, opex, "
         "finance, drivers, draws, emissions, notes"),
    ],
)  # fmt: skip
def test_a_path_that_leads_nowhere_names_the_nearest(path: str, why: str):
    for follow in (target_of, value_at):
        with pytest.raises(NoSuchPath) as caught:
            follow(minimal_case(), path)
        assert str(caught.value) == why


def test_the_original_is_never_touched():
    data, before = minimal_case(), minimal_case()
    for path in ("plant.boiler.efficiency", "options.two-stage.tail.efficiency", "capex.items.tail.amount"):
        assert edited(data, path, 0.5) != before
        assert data == before
    assert moved("scenario.power", "-20%", data) != before
    assert data == before


def test_an_edit_makes_the_tables_on_its_way():
    data = edited(minimal_case(), "options.two-stage.tail.efficiency", 0.7)
    assert data["options"][1]["tail"] == {"efficiency": 0.7}
    assert edited(minimal_case(), "opex.fixed_per_year", 5.0)["opex"] == {"fixed_per_year": 5.0}


def test_a_price_path_scales_whole_and_a_number_makes_it_flat():
    data = minimal_case()
    for given_path, low in (
        (50.0, 40.0),
        ({"start": 50.0, "change_per_year": 0.02}, {"start": 40.0, "change_per_year": 0.02}),
        ({"year": [2028, 2040], "value": [50.0, -10.0]}, {"year": [2028, 2040], "value": [40.0, -8.0]}),
    ):
        data["scenarios"]["central"]["power"] = given_path
        assert moved("scenario.power", "-20%", data)["scenarios"]["central"]["power"] == low
        assert moved("scenario.power", 33.0, data)["scenarios"]["central"]["power"] == 33.0


def test_scenario_means_the_one_under_study():
    data = minimal_case()
    data["scenarios"]["dear"] = {"power": 10.0, "fuel": 30.0, "peak_fuel": 40.0}
    result = changed(case_from(data), data, "scenario.fuel", "+10%", scenario="dear")
    assert result["scenarios"]["dear"]["fuel"] == pytest.approx(33.0, rel=1e-15)
    assert result["scenarios"]["central"] == data["scenarios"]["central"]


def test_the_start_of_a_price_given_as_a_number_can_be_moved():
    result = moved("scenario.fuel.change_per_year", 0.03)
    assert result["scenarios"]["central"]["fuel"] == {"start": 22.0, "change_per_year": 0.03}
    assert case_from(result).scenarios["central"].fuel.change_per_year == 0.03


def test_a_curve_and_a_list_scale_whole():
    data = minimal_case()
    data["plant"]["boiler"]["efficiency"] = {"load": [0.5, 1.0], "value": [0.8, 0.9]}
    assert moved("plant.boiler.efficiency", "-50%", data)["plant"]["boiler"]["efficiency"] == {
        "load": [0.5, 1.0],
        "value": [0.4, 0.45],
    }
    data["options"][1]["shares"] = [0.4, 0.6]
    assert moved("options.two-stage.shares", "+100%", data)["options"][1]["shares"] == [0.8, 1.2]


@pytest.mark.parametrize(
    ("path", "change", "value"),
    [
        ("study.years", "-12%", 18),
        ("study.years", 15.0, 15),
        ("options.two-stage.stages", "+60%", 3),
    ],
)
def test_a_whole_number_stays_one(path: str, change: float | str, value: int):
    found = value_at(moved(path, change), path)
    assert found == value
    assert isinstance(found, int)


@pytest.mark.parametrize(
    ("path", "base"),
    [
        ("year.heat_multiplier", 1.0),
        ("tail.generator_efficiency", 0.975),
        ("options.two-stage.tail.efficiency", 0.8),
        ("options.two-stage.tail.mechanical_efficiency", 0.985),
        ("options.two-stage.new_condenser.pressure_drop_bar", 0.4),
        ("options.two-stage.terminal_difference_K", 3.0),
        ("opex.fixed_share_of_capex", 0.02),
        ("finance.reinvestment_rate", 0.06),
    ],
)
def test_a_percentage_of_what_the_file_leaves_out_starts_from_the_value_in_force(path: str, base: float):
    assert value_in_force(case_from(minimal_case()), path) == base
    assert value_at(moved(path, "-50%"), path) == pytest.approx(0.5 * base, rel=1e-15)
    assert case_from(moved(path, "-5%")) != case_from(minimal_case())


def test_what_has_no_value_cannot_be_scaled():
    with pytest.raises(CaseError) as caught:
        moved("plant.condenser.max_heat_MW", "-20%")
    assert str(caught.value) == (
        "plant.condenser.max_heat_MW: no value that -20% could scale; allowed: a path with a value"
    )
    with pytest.raises(CaseError) as caught:
        moved("plant.condensr.max_heat_MW", "-20%")
    assert str(caught.value) == "plant.condensr.max_heat_MW: leads nowhere: nearest known key: condenser"


@settings(derandomize=True, max_examples=50)
@given(
    value=st.recursive(
        st.floats(-1e6, 1e6, allow_subnormal=False).filter(lambda x: x == 0.0 or abs(x) > 1e-9),
        lambda inner: st.lists(inner) | st.fixed_dictionaries({"value": inner, "load": inner}),
    ),
    factor=st.sampled_from([0.5, 2.0, 4.0]),
)
def test_scaling_there_and_back_is_no_change_and_leaves_the_original(value: Any, factor: float):
    before = copy.deepcopy(value)
    assert scaled(scaled(value, factor), 1.0 / factor) == before
    assert value == before
