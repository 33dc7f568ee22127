"""Regimes of one hour in the scalar solver: limits, fall-backs, several sections, valves, extra plant."""

import math

import pytest
from scalar import Design, Point, design, point, sliding, steam
from scalar.marrowby import OFF_DESIGN, OPTIONS, edited, marrowby, three_stages, unlimited
from scalar.shells import NoSolution


@pytest.fixture(scope="module")
def plain() -> tuple[dict, Design]:
    data = marrowby()
    return data, design(data)


def solve(data: dict, key: str, heat: float, supply: float, back: float) -> Point:
    return point(data, design(data), key, heat, supply, back)


# --- regimes ----------------------------------------------------------------------------------------------


def test_summer_hour_runs_on_live_steam_with_dry_exhaust():
    data = unlimited()
    found = solve(data, "single", 8.0, 76.0, 50.0)
    assert found.deaerator_on_live_steam
    assert found.bleed_bar < 2.5
    assert found.states["deaerator bleed"].enthalpy == found.states["live steam"].enthalpy
    assert found.stages[0].shell_bar < 0.45
    hot = unlimited({"plant.live_steam.temperature_C": 560.0, "plant.turbine.efficiency": 0.72})
    dry = solve(hot, "two", 12.0, 80.0, 50.0)
    assert dry.stages[1].moisture == 0.0
    assert dry.states["exhaust 2"].quality is None
    assert abs(dry.closure) < 1e-9


def test_below_minimum_flow_the_plant_is_off(plain):
    found = point(*plain, "two", 12.0, 77.0, 51.0)
    assert not found.on
    assert found.fuel_MW == 0.0
    assert found.peak_heat_MW == 12.0
    assert found.peak_fuel_MW == pytest.approx(12.0 / 0.92)


@pytest.mark.parametrize("key", OPTIONS)
def test_live_steam_limit_is_met_by_a_root_on_heat(plain, key):
    found = point(*plain, key, 45.0, 110.0, 44.0)
    assert found.at_limit
    assert found.live_steam_kg_s == pytest.approx(20.0, rel=1e-9)
    assert found.peak_heat_MW == pytest.approx(45.0 - found.heat_MW)


def test_heat_limit_holds_all_condensers_together():
    found = solve(edited({"plant.condenser.max_heat_MW": 30.0}), "two", 36.0, 95.0, 46.0)
    assert found.at_limit
    assert found.heat_MW == 30.0
    assert sum(s.heat_MW for s in found.stages) == pytest.approx(30.0, rel=1e-12)


def test_option_waits_for_the_baseline_unless_told_otherwise():
    """Just under the baseline's minimum flow the option alone could run, as it needs more steam."""
    low = solve(unlimited(), "single", 15.0, 80.0, 46.0).live_steam_kg_s
    data = edited({"plant.live_steam.min_kg_s": low * 1.0001})
    found = solve(data, "two", 15.0, 80.0, 46.0)
    assert not found.on
    assert found.could_gain
    free = edited({"plant.live_steam.min_kg_s": low * 1.0001, "year.extra_running": True})
    assert solve(free, "two", 15.0, 80.0, 46.0).on


def test_hour_without_a_temperature_between_stages_runs_as_baseline():
    data = unlimited()
    mine, base = (solve(data, k, 2.0, 110.0, 44.0) for k in ("two", "single"))
    assert mine.as_baseline
    assert not base.as_baseline
    assert mine.power_net_MW == base.power_net_MW
    assert len(mine.stages) == 1


def test_sliding_deaerator_follows_the_bleed():
    data = unlimited({"plant.feed.deaerator_control": "sliding"})
    found = solve(data, "two", 15.0, 80.0, 50.0)
    assert not found.deaerator_on_live_steam
    assert found.balance.feed.deaerator_bar == pytest.approx(0.95 * found.bleed_bar, rel=1e-14)
    assert abs(found.closure) < 1e-9


def test_deaerator_floats_where_the_water_comes_in_too_hot():
    """Hot supply, low vessel: no bleed is wanted, and the outlet is as hot as what comes in."""
    changes = {"plant.feed.deaerator_bar": 1.2, "plant.boiler.blowdown_share": 0.0}
    found = solve(unlimited(changes), "single", 40.0, 108.0, 60.0)
    water = found.balance.feed
    assert water.floating
    assert found.bleed_kg_s == 0.0
    assert water.deaerator_bar == 1.2
    assert water.deaerator_enthalpy > steam.saturated(1.2, 0.0).enthalpy
    assert water.deaerator_enthalpy == pytest.approx(water.condensate_enthalpy, rel=1e-12)
    assert found.live_steam_kg_s == pytest.approx(found.balance.train.exhaust_kg_s, rel=1e-13)
    assert abs(found.closure) < 1e-9


def test_deaerator_floats_on_the_drain_of_the_heater():
    """With a heater its drain comes in too, and less of its steam is wanted the hotter the vessel."""
    heater = {"bleed_bar": 14.0, "terminal_difference_K": 4.0}
    changes = {"plant.feed.deaerator_bar": 1.6, "plant.feed.heater": heater}
    found = solve(unlimited(changes), "single", 40.0, 98.0, 46.0)
    water, m1 = found.balance.feed, found.live_steam_kg_s
    assert water.floating
    into = found.balance.train.exhaust_kg_s * water.condensate_enthalpy + 0.01 * m1 * water.makeup_enthalpy
    into += water.heater_kg_s * steam.saturated(water.heater_bar, 0.0).enthalpy
    assert into == pytest.approx(1.01 * m1 * water.deaerator_enthalpy, rel=1e-12)
    assert water.heater_kg_s > 0.0
    assert abs(found.closure) < 1e-9


# --- a measured point -------------------------------------------------------------------------------------


def test_calibration_meets_power_and_exhaust_pressure_of_the_test():
    """What a plant with a known efficiency and fouling would have measured gives both back."""
    true = unlimited({"plant.turbine.efficiency": 0.81, "plant.condenser.terminal_difference_K": 4.5})
    seen = solve(true, "single", 30.0, 92.0, 47.0)
    exhaust_bar = seen.balance.train.shells[0].steam.pressure_bar
    measured = {"heat_MW": 30.0, "supply_C": 92.0, "return_C": 47.0, "power_MW": seen.power_gross_MW}
    both = design(unlimited({"plant.measured": measured | {"exhaust_bar": exhaust_bar}})).plant
    assert both.efficiency == pytest.approx(0.81, rel=1e-9)
    assert both.terminal_difference_K == pytest.approx(4.5, rel=1e-9)
    alone = design(unlimited({"plant.measured": measured})).plant
    assert alone.terminal_difference_K == 3.0
    assert alone.efficiency < 0.81  # the cleaner condenser has to be made up for


# --- several sections -------------------------------------------------------------------------------------


@pytest.mark.parametrize("hour", [(40.0, 98.0, 46.0), (25.0, 88.0, 47.0), (14.0, 78.0, 50.0)])
def test_three_stages_by_nested_brackets(hour, monkeypatch):
    """The joint root of two temperatures equals one bracket nested in another."""
    data = three_stages()
    joint = solve(data, "three", *hour)

    def nested(miss, start, before=None):
        def cold(upper: float) -> float:
            return steam.root(lambda f: miss((f, upper))[0], 0.01, upper - 1e-3)

        upper = steam.root(lambda f: miss((cold(f), f))[1], 0.2, 0.95)
        return cold(upper), upper

    monkeypatch.setattr(sliding, "_slide", nested)
    apart = solve(data, "three", *hour)
    assert not joint.as_baseline
    assert abs(joint.closure) < 1e-9
    for one, other in zip(joint.stages, apart.stages, strict=True):
        assert one.water_out_C == pytest.approx(other.water_out_C, rel=1e-10)
    assert joint.power_net_MW == pytest.approx(apart.power_net_MW, rel=1e-11)


def test_six_stages_slide_off_design():
    data = unlimited()
    data["options"].append({"key": "six", "name": "Six stage", "stages": 6})
    found = solve(data, "six", 30.0, 92.0, 46.0)
    assert not found.as_baseline
    assert abs(found.closure) < 1e-9
    rises = [s.water_out_C - s.water_in_C for s in found.stages]
    assert sum(rises) == pytest.approx(46.0, rel=1e-12)
    assert min(rises) > 0.0


# --- valves, heater, flue gas, series, generators, tail ---------------------------------------------------


@pytest.mark.parametrize("key", ["two", "two-subcooled", "two-pumped"])
def test_held_valve_throttles_to_the_flow_and_opens_when_short(key):
    data = unlimited(options={"temperature_control": "held"})
    found = design(data)
    light, heavy = (point(data, found, key, *q) for q in ((25.0, 98.0, 46.0), (45.0, 90.0, 46.0)))
    assert light.stages[0].water_out_C == pytest.approx(72.0, rel=1e-13)
    section, above = light.balance.train.sections[0], light.balance.train.shells[1].steam
    assert section.inlet.pressure_bar < above.pressure_bar
    assert section.inlet.enthalpy == pytest.approx(above.enthalpy, rel=1e-12)
    r = section.out_bar / section.inlet.pressure_bar
    square = section.inlet.pressure_bar / section.inlet.volume * (1.0 - r * r)
    passed = found.options[key].phi[0] * math.sqrt(square)
    assert passed == pytest.approx(light.stages[0].steam_kg_s, rel=1e-10)
    free = solve(unlimited(), key, 45.0, 90.0, 46.0)
    assert heavy.power_net_MW == pytest.approx(free.power_net_MW, rel=1e-13)
    assert abs(light.closure) < 1e-9


def test_heater_meets_its_outlet_temperature():
    heater = {"bleed_bar": 14.0, "terminal_difference_K": 4.0}
    data = unlimited({"plant.feed.heater": heater})
    for hour in OFF_DESIGN:
        found = solve(data, "two", *hour)
        water = found.balance.feed
        outlet = steam.saturation_temperature(water.heater_bar) - 4.0
        assert found.states["feed water to boiler"].temperature_C == pytest.approx(outlet, rel=1e-10)
        mass = water.heater_kg_s + water.bleed_kg_s + found.balance.train.exhaust_kg_s
        assert mass == pytest.approx(found.live_steam_kg_s, rel=1e-13)
        assert abs(found.closure) < 1e-9


def test_flue_gas_condenser_counts_as_delivered_heat():
    fgc = {"heat_per_fuel": 0.15, "at_return_C": 46.0, "slope_per_K": 0.005}
    data = edited({"plant.flue_gas_condenser": fgc})
    found = solve(data, "two", 36.0, 98.0, 50.0)
    assert found.flue_gas_MW == pytest.approx(found.fuel_MW * (0.15 - 0.005 * 4.0), rel=1e-11)
    assert found.balance.heat_MW + found.flue_gas_MW == pytest.approx(36.0, rel=1e-11)
    assert found.stages[0].water_in_C > 50.0


def test_series_plant_warms_all_the_water_part_of_the_way():
    data = edited({"plant.peak_boiler.connection": "series"})
    found = solve(data, "two", 55.0, 105.0, 46.0)
    rise = steam.at(10.0, 105.0).enthalpy - steam.at(10.0, 46.0).enthalpy
    assert found.network_kg_s == pytest.approx(55e3 / rise, rel=1e-13)
    assert found.at_limit
    assert found.stages[-1].water_out_C < 105.0
    warmed = steam.at(10.0, found.stages[-1].water_out_C).enthalpy - steam.at(10.0, 46.0).enthalpy
    assert warmed == pytest.approx(found.heat_MW * 1e3 / found.network_kg_s, rel=1e-11)
    parallel = solve(edited(), "two", 55.0, 105.0, 46.0)
    assert found.power_net_MW > parallel.power_net_MW


@pytest.mark.parametrize("own_generator", [False, True])
def test_generator_limits_cost_fuel_and_power_but_no_heat(own_generator):
    changes = {"plant.turbine.generator_limit_MW": 11.0}
    if own_generator:
        changes["tail.generator_limit_MW"] = 0.9
    free, held = (solve(unlimited(c), "two", 40.0, 98.0, 46.0) for c in ({}, changes))
    assert held.power_gross_MW == pytest.approx(11.9 if own_generator else 11.0, rel=1e-13)
    assert held.live_steam_kg_s == free.live_steam_kg_s
    assert free.fuel_MW - held.fuel_MW == pytest.approx(held.power_lost_MW / 0.89, rel=1e-11)
    assert held.power_lost_MW > 0.0
    assert abs(held.closure) < 1e-9


def test_tail_losses_lower_the_gain_and_its_minimum_flow_ends_it():
    hour = (20.0, 85.0, 46.0)
    plain_gain = solve(unlimited(), "two", *hour).power_net_MW
    curve = {"load": [0.2, 1.0], "value": [0.8, 1.0]}
    worse = solve(unlimited({"tail.part_load": curve}), "two", *hour)
    lossy = solve(unlimited({"tail.inlet_loss_share": 0.05}), "two", *hour)
    assert worse.power_net_MW < plain_gain
    assert lossy.power_net_MW < plain_gain
    assert abs(worse.closure) < 1e-9
    assert abs(lossy.closure) < 1e-9
    assert solve(unlimited({"tail.min_flow_share": 0.9}), "two", *hour).as_baseline


def test_fuel_permit_limits_the_heat():
    found = solve(unlimited({"plant.boiler.max_fuel_MW": 50.0}), "two", 40.0, 98.0, 46.0)
    assert found.at_limit
    assert found.fuel_MW == pytest.approx(50.0, rel=1e-9)


def test_option_whose_shells_are_out_of_order_is_refused():
    """A new condenser far worse than the rise of its stage lies above the next hotter shell."""
    with pytest.raises(NoSolution, match="two"):
        design(edited({"new_condenser.terminal_difference_K": 40.0}))


def test_no_demand_means_off(plain):
    assert not point(*plain, "two", 0.0, 90.0, 46.0).on
