"""No steam flows from a lower pressure to a higher: exhaust and bleeds against live steam, at every point."""

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from cases import minimal_case, write_case
from scalar import design as scalar_design
from scalar import points as scalar_points

from appraise.case.load import LoadedCase, case_from, load_case
from appraise.chain import solve_physics
from appraise.cycle.balance import Balance, design_balances, point_balances
from appraise.cycle.design import design
from appraise.cycle.limits import steam_problems
from appraise.errors import CaseError, SolveError
from appraise.year import OptionYear

# Live steam of 2 bar: saturated at 120.2 °C, and at 119.6 °C in a shell behind 2 % of exhaust loss.
SMALLER = {"key": "smaller", "name": "Less surface", "stages": 1, "existing_area_factor": 0.8}


def low_plant(**feed: Any) -> dict[str, Any]:
    data = minimal_case()
    data["drivers"] = []
    data["plant"]["live_steam"] |= {"pressure_bar": 2.0, "temperature_C": 200.0}
    data["plant"]["boiler"]["pressure_bar"] = 3.0
    data["plant"]["feed"] = {"deaerator_bar": 1.15, "bleed_bar": 1.3, **feed}
    return data


def plant_with_heater() -> dict[str, Any]:
    data = minimal_case()
    data["plant"]["feed"]["heater"] = {"bleed_bar": 58.0, "terminal_difference_K": 4.0}
    return data


def problems(data: dict[str, Any]) -> list[str]:
    with pytest.raises(CaseError) as caught:
        design(case_from(data))
    return [str(problem) for problem in caught.value.problems]


# --- the design point -------------------------------------------------------------------------------------


@pytest.mark.parametrize(("supply_C", "exhaust_bar"), [(118.0, "2.092"), (120.0, "2.227"), (170.0, "8.685")])
def test_a_design_exhaust_above_live_steam_is_one_fault(supply_C: float, exhaust_bar: str) -> None:
    data = low_plant()
    data["plant"]["design"]["supply_C"] = supply_C
    assert problems(data) == [
        f"plant.live_steam.pressure_bar: 2 bar; must lie above the baseline's exhaust, {exhaust_bar} bar at "
        "the design point"
    ]


def test_a_design_exhaust_just_below_live_steam_is_allowed() -> None:
    data = low_plant(bleed_bar=1.99)
    data["plant"]["design"]["supply_C"] = 116.0
    made = design(case_from(data))
    assert made.baseline.solution.shells.flange_bar[-1, 0] == pytest.approx(1.96, abs=0.01)
    assert made.baseline.energy.power_gross_MW[0] > 0.0


def test_an_option_with_its_exhaust_above_live_steam_cannot_be_built() -> None:
    data = low_plant()
    data["options"].append(SMALLER | {"existing_area_factor": 0.3})
    told = problems(data)
    assert len(told) == 1
    assert told[0].startswith("options.smaller: cannot be built: its hottest exhaust would stand at 3.")
    assert told[0].endswith("not below the live steam")


def test_a_yardstick_against_the_pressure_is_no_yardstick() -> None:
    """The ideal has the new stages' terminal difference in its hottest stage too."""
    data = low_plant(bleed_bar=1.9)
    data["plant"]["design"]["supply_C"] = 112.0
    case = case_from(data)
    assert all(0.0 <= b.ideal_gain_share < 1.0 for b in design_balances(case, design(case)))
    data["new_condenser"]["terminal_difference_K"] = 9.0
    case = case_from(data)
    found = design_balances(case, design(case))
    assert [b.ideal_gain_share for b in found] == [0.0, None]
    assert found[1].extra_power_per_heat > 0.0


# --- off design -------------------------------------------------------------------------------------------


def balances(data: dict[str, Any], *point: float) -> dict[str, Balance]:
    case = case_from(data)
    return {balance.key: balance for balance in point_balances(case, design(case), *point)}


@pytest.mark.parametrize(
    ("data", "point", "where"),
    [
        (low_plant(), (40.0, 119.0, 46.0), "its hottest exhaust"),
        (low_plant(bleed_bar=1.95), (45.0, 98.0, 46.0), "the bleed to the deaerator"),
        (plant_with_heater(), (44.0, 98.0, 46.0), "the bleed to the feed heater"),
    ],
    ids=["exhaust", "bleed", "heater"],
)
def test_a_point_against_the_pressure_is_refused_with_its_reason(data, point, where: str) -> None:
    with pytest.raises(
        SolveError, match=f"^the baseline has no operation at this point: {where} would stand at "
    ):
        balances(data, *point)
    milder = 0.9 * point[0], point[1] - 20.0, point[2]
    assert all(balance.power_gross_MW > 0.0 for balance in balances(data, *milder).values())


def test_an_option_against_the_pressure_runs_as_the_baseline() -> None:
    data = low_plant()
    data["options"].append(SMALLER)
    found = balances(data, 40.0, 114.0, 46.0)
    assert found["smaller"].runs_as_baseline
    assert found["smaller"].power_net_MW == found["single"].power_net_MW
    assert not found["two-stage"].runs_as_baseline


def test_a_surface_far_too_small_for_the_rise_is_no_operation() -> None:
    """Sized for 5 K at 15 K of difference and asked for 150: no steam is that hot where it condenses."""
    data = minimal_case()
    data["plant"]["design"] |= {"supply_C": 98.0, "return_C": 93.0}
    data["plant"]["condenser"]["terminal_difference_K"] = 15.0
    with pytest.raises(SolveError, match="its hottest exhaust would stand at "):
        balances(data, 400.0, 170.0, 20.0)


# --- bleeds at high pressure ------------------------------------------------------------------------------


def plant_near_critical() -> dict[str, Any]:
    """Live steam of 165 bar and a heater at 150: half as much flow again would ask for 225 bar there."""
    data = minimal_case()
    data["drivers"] = []
    data["plant"]["live_steam"] |= {"pressure_bar": 165.0, "temperature_C": 560.0, "max_kg_s": 31.0}
    data["plant"]["boiler"]["pressure_bar"] = 190.0
    data["plant"]["feed"]["heater"] = {"bleed_bar": 150.0, "terminal_difference_K": 4.0}
    return data


@pytest.mark.parametrize(("heat_MW", "bleed_bar"), [(50.0, "187"), (64.0, "239"), (120.0, "449")])
def test_a_bleed_beyond_the_steam_tables_is_refused_by_its_pressure(heat_MW: float, bleed_bar: str) -> None:
    with pytest.raises(SolveError, match=f"the bleed to the feed heater would stand at {bleed_bar}"):
        balances(plant_near_critical(), heat_MW, 98.0, 46.0)


def test_a_demand_beyond_the_steam_tables_is_met_up_to_the_limit(tmp_path: Path) -> None:
    """On the way there the bleed of the unlimited plant would be far above the critical pressure."""
    data = plant_near_critical()
    loaded = loaded_with(tmp_path, data, heat_MW=filled(10, 20, 90.0))
    years = years_of(loaded)
    for year in years.values():
        assert year.at_steam_limit[10:20].all()
        assert year.live_steam_kg_s[10:20] == pytest.approx(31.0, rel=1e-8)
    agree(data, loaded, years, [15])


def boiler_at_live_steam(terminal_difference_K: float) -> dict[str, Any]:
    data = plant_with_heater()
    data["plant"]["boiler"]["pressure_bar"] = 62.0
    data["plant"]["live_steam"]["max_kg_s"] = 60.0
    data["plant"]["feed"] |= {"deaerator_bar": 12.0, "bleed_bar": 15.0}
    data["plant"]["feed"]["heater"]["terminal_difference_K"] = terminal_difference_K
    return data


def test_a_heater_that_would_boil_the_feed_water_is_refused() -> None:
    """From 58 to 62 bar the boiling point rises by 4.35 K."""
    told = [str(problem) for problem in steam_problems(case_from(boiler_at_live_steam(-4.5)), None)]
    assert told == [
        "plant.feed.heater.terminal_difference_K: -4.5 K; must be at least -4.35 K, or the feed water "
        "boils at the boiler's 62 bar"
    ]
    assert not steam_problems(case_from(boiler_at_live_steam(-4.3)), None)


def test_feed_water_leaves_a_heater_at_its_boiling_point_at_most() -> None:
    """At higher load the bleed rises, and would heat the water 3 K past it."""
    data = boiler_at_live_steam(-4.3)
    theirs = scalar_design(data)
    for heat_MW, boils in ((38.0, False), (42.0, True)):
        mine, other = balances(data, heat_MW, 98.0, 46.0), scalar_points(theirs, heat_MW, 98.0, 46.0)
        for key, found in mine.items():
            water = found.states[-1]
            assert (water.temperature_C == pytest.approx(277.73, abs=0.01)) == boils
            assert water.enthalpy_kJ_kg == pytest.approx(
                other[key].balance.feed.boiler_inlet_enthalpy, rel=1e-9
            )
            assert found.power_net_MW == pytest.approx(other[key].power_net_MW, rel=1e-9)
            assert found.fuel_MW == pytest.approx(other[key].fuel_MW, rel=1e-9)


# --- the hours --------------------------------------------------------------------------------------------


def loaded_with(folder: Path, data: dict[str, Any], **columns: Callable[[np.ndarray], None]) -> LoadedCase:
    """A case with columns of its hours changed in place."""
    loaded = load_case(write_case(folder, data))
    changed = {name: np.array(getattr(loaded.hours, name)) for name in columns}
    for name, change in columns.items():
        change(changed[name])
    return replace(loaded, hours=replace(loaded.hours, **changed))


def filled(first: int, last: int, value: float) -> Callable[[np.ndarray], None]:
    def change(column: np.ndarray) -> None:
        column[first:last] = value

    return change


def years_of(loaded: LoadedCase) -> dict[str, OptionYear]:
    return {year.key: year for year in solve_physics(loaded.case, loaded.hours).years.solved[0]}


def agree(data: dict[str, Any], loaded: LoadedCase, years: dict[str, OptionYear], hours: list[int]) -> None:
    """With the scalar solver, hour by hour."""
    theirs, at = scalar_design(data), loaded.hours
    assert at.heat_MW is not None
    assert at.supply_C is not None
    assert at.return_C is not None
    for hour in hours:
        found = scalar_points(theirs, at.heat_MW[hour], at.supply_C[hour], at.return_C[hour])
        for key, year in years.items():
            assert year.on[hour] == found[key].on
            assert year.as_baseline[hour] == found[key].as_baseline
            assert year.could_gain[hour] == found[key].could_gain
            for name in ("power_net_MW", "fuel_MW", "heat_MW", "peak_heat_MW"):
                assert getattr(year, name)[hour] == pytest.approx(getattr(found[key], name), rel=1e-8)


def test_hours_against_the_pressure_are_hours_off(tmp_path: Path) -> None:
    """From 10 to 20 the supply is too hot for any surface, from 30 to 40 for the smaller one."""
    data = low_plant()
    data["options"].append(SMALLER)

    def change(supply: np.ndarray) -> None:
        supply[10:20], supply[30:40] = 119.0, 114.0

    loaded = loaded_with(tmp_path, data, supply_C=change, heat_MW=filled(0, 50, 40.0))
    years, heat = years_of(loaded), loaded.hours.heat_MW
    assert heat is not None
    for year in years.values():
        assert not year.on[10:20].any()
        assert (year.peak_heat_MW[10:20] == heat[10:20]).all()
        assert not year.fuel_MW[10:20].any()
        assert year.on[:10].all()
        assert year.on[20:50].all()
        assert year.power_gross_MW.min() >= 0.0
    assert np.flatnonzero(years["smaller"].as_baseline).tolist() == list(range(30, 40))
    agree(data, loaded, years, [5, 12, 25, 33])


def test_hours_with_a_bleed_above_live_steam_are_hours_off(tmp_path: Path) -> None:
    """Unless a limit on live steam keeps the flow, and with it the bleed, down."""
    data = low_plant(bleed_bar=1.95)
    data["plant"]["live_steam"]["max_kg_s"] = 30.0
    columns = {"heat_MW": 30.0, "supply_C": 98.0, "return_C": 46.0}
    loaded = loaded_with(tmp_path, data, **{name: filled(0, 40, value) for name, value in columns.items()})
    heat = np.array(loaded.hours.heat_MW)
    heat[10:20] = 45.0
    loaded = replace(loaded, hours=replace(loaded.hours, heat_MW=heat))
    years = years_of(loaded)
    for year in years.values():
        assert np.flatnonzero(~year.on[:40]).tolist() == list(range(10, 20))
    assert np.flatnonzero(years["single"].no_operation[:40]).tolist() == list(range(10, 20))
    assert not years["two-stage"].no_operation.any()
    agree(data, loaded, years, [5, 15])
    data["plant"]["live_steam"]["max_kg_s"] = 17.0
    limited = replace(loaded, case=case_from(data))
    years = years_of(limited)
    for year in years.values():
        assert year.on[:40].all()
        assert year.at_steam_limit[10:20].all()
        assert not year.no_operation.any()
    agree(data, limited, years, [15])


def refusal(loaded: LoadedCase) -> list[str]:
    with pytest.raises(CaseError) as caught:
        solve_physics(loaded.case, loaded.hours)
    return [str(problem) for problem in caught.value.problems]


def test_a_supply_that_live_steam_cannot_reach_is_refused_by_its_row(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path, low_plant(), supply_C=filled(16, 17, 121.0))
    assert refusal(loaded) == [
        "hours.csv row 18, supply temperature: 121 °C; must stay below 119.6 °C, where the exhaust would "
        "stand at the live steam's 2 bar"
    ]


def test_a_later_year_that_live_steam_cannot_reach_is_refused_too(tmp_path: Path) -> None:
    data = low_plant()
    data["year"]["supply_change_K_per_year"] = 1.5
    loaded = loaded_with(tmp_path, data)
    assert "supply temperature: 128.5 °C; must stay below 119.6 °C" in refusal(loaded)[0]


def test_a_supply_without_heat_is_none_of_the_turbines_business(tmp_path: Path) -> None:
    hot, idle = filled(16, 17, 121.0), filled(16, 17, 0.0)
    loaded = loaded_with(tmp_path, low_plant(), supply_C=hot, heat_MW=idle)
    assert not any(year.on[16] for year in years_of(loaded).values())


def test_a_heating_curve_is_taken_at_the_outdoor_temperatures_of_the_series(tmp_path: Path) -> None:
    data = low_plant()
    curve = {
        "outdoor_C": [-40.0, -5.0, 20.0],
        "supply_C": [150.0, 100.0, 76.0],
        "return_C": [50.0, 46.0, 50.0],
    }
    data["network"] = {"heating_curve": curve}
    loaded = load_case(write_case(tmp_path, data))
    bare = replace(loaded, hours=replace(loaded.hours, supply_C=None, return_C=None))
    assert all(year.on.any() for year in years_of(bare).values())
    outdoor = np.array(bare.hours.outdoor_C)
    outdoor[5] = -30.0
    assert refusal(replace(bare, hours=replace(bare.hours, outdoor_C=outdoor))) == [
        "hours.csv row 7, supply temperature: 135.714 °C; must stay below 119.6 °C, where the exhaust would "
        "stand at the live steam's 2 bar"
    ]


def test_behind_condensers_in_series_the_supply_may_be_hotter(tmp_path: Path) -> None:
    """Limited to 8 kg/s the condensers stay far below the supply, which peak boilers reach."""
    data = low_plant()
    data["plant"]["peak_boiler"]["connection"] = "series"
    data["plant"]["live_steam"]["max_kg_s"] = 8.0
    loaded = loaded_with(tmp_path, data, supply_C=filled(10, 20, 125.0))
    years = years_of(loaded)
    assert all(year.on[10:20].all() and year.at_steam_limit[10:20].all() for year in years.values())
    agree(data, loaded, years, [15])
