"""The package against the independent scalar solver: the same plants, the same hours, one part in 10^10.

They differ by intent in one place: where condensate or a heater's drain bring more heat than the deaerator
needs, so that no bleed is wanted, the scalar solver lets the vessel's pressure rise with its temperature and
the package keeps it. Such points are left out by condition; Marrowby has none.
"""

import numpy as np
import pytest
from hypothesis import Phase, assume, given, settings
from hypothesis import strategies as st
from plants import case_of, loads, plants
from scalar import design as scalar_design
from scalar import point as scalar_point
from scalar.marrowby import OFF_DESIGN, OPTIONS, edited, three_stages, unlimited
from scalar.shells import NoSolution

from appraise.cycle.balance import Balance, design_balances, point_balances
from appraise.cycle.design import Design, OptionDesign, design
from appraise.cycle.solve import solve
from appraise.cycle.task import Conditions, Solution, Task
from appraise.errors import CaseError

# No shrinking: an example costs a second, and the failing draw is printed as it stands.
STEADY = settings(derandomize=True, deadline=None, max_examples=6, phases=[Phase.generate])
CLOSE = 1e-10


def agree(mine: Balance, theirs) -> None:
    """Compare a package balance with a scalar point or balance, flows and stages included."""
    water = getattr(theirs, "feed", None) or theirs.balance.feed
    shells = getattr(theirs, "train", None) or theirs.balance.train
    assert mine.power_gross_MW == pytest.approx(theirs.power_gross_MW, rel=CLOSE)
    assert mine.power_net_MW == pytest.approx(theirs.power_net_MW, rel=CLOSE)
    assert mine.fuel_MW == pytest.approx(theirs.fuel_MW, rel=CLOSE)
    assert mine.live_steam_kg_s == pytest.approx(water.live_kg_s, rel=CLOSE)
    assert mine.bleed_kg_s == pytest.approx(water.bleed_kg_s, rel=1e-8)
    assert mine.bleed_bar == pytest.approx(water.bleed_bar, rel=CLOSE)
    assert mine.network_kg_s == pytest.approx(theirs.network_kg_s, rel=CLOSE)
    assert len(mine.stages) == len(shells.shells)
    for one, other in zip(mine.stages, shells.shells, strict=True):
        assert one.shell_bar == pytest.approx(other.pressure_bar, rel=CLOSE)
        assert one.water_out_C == pytest.approx(other.water_out_C, rel=CLOSE)
        assert one.steam_kg_s == pytest.approx(other.steam_kg_s, rel=1e-8)
        assert one.steam_kJ_kg == pytest.approx(other.steam.enthalpy, rel=CLOSE)
        assert one.moisture == pytest.approx(other.steam.moisture, abs=1e-9)
        assert one.drain_kJ_kg == pytest.approx(other.drain.enthalpy, rel=CLOSE)
        assert one.drain_zone_C == pytest.approx(other.after_drain_cooler_C, rel=CLOSE)
        assert one.heat_MW == pytest.approx(other.heat_kW / 1e3, rel=1e-8)


def compare_design(data: dict) -> tuple[object, Design]:
    case, theirs = case_of(data), scalar_design(data)
    made = design(case)
    for mine in design_balances(case, made):
        if not theirs.options[mine.key].balance.feed.floating:
            agree(mine, theirs.options[mine.key].balance)
    for option in made.options:
        sized = theirs.options[option.train.key]
        assert option.sizes.conductance_kW_K == pytest.approx(sized.UA0, rel=1e-8)
        assert option.sizes.section_constant == pytest.approx(sized.phi, rel=1e-8)
    return case, made


def compare_hour(data: dict, hour: tuple[float, float, float]) -> set[str]:
    """Compare one hour of every option; returns the options that ran as themselves in both."""
    case, theirs = case_of(data), scalar_design(data)
    ran = set()
    for mine in point_balances(case, design(case), *hour):
        other = scalar_point(data, theirs, mine.key, *hour)
        assert mine.runs_as_baseline == other.as_baseline
        if not other.balance.feed.floating:
            assert mine.deaerator_on_live_steam == other.deaerator_on_live_steam
            agree(mine, other)
        if not other.as_baseline:
            ran.add(mine.key)
    return ran


# --- Marrowby ---------------------------------------------------------------------------------------------


def test_design_point_of_every_option() -> None:
    compare_design(unlimited())


@pytest.mark.parametrize("hour", OFF_DESIGN, ids=str)
def test_hours_of_every_option(hour) -> None:
    assert compare_hour(unlimited(), hour) == set(OPTIONS)


def test_three_stages_in_every_hour() -> None:
    for hour in OFF_DESIGN[1::2]:
        assert "three" in compare_hour(three_stages(), hour)


def test_six_stages() -> None:
    data = unlimited()
    data["options"].append({"key": "six", "name": "Six stage", "stages": 6})
    compare_design(data)
    assert "six" in compare_hour(data, (30.0, 92.0, 46.0))


def test_hour_without_a_temperature_between_stages() -> None:
    """2 MW at 110/44 °C: no split of the rise lets the tail pass its steam, so all run as the baseline."""
    assert "two" not in compare_hour(unlimited(), (2.0, 110.0, 44.0))


@pytest.mark.parametrize(
    "changes",
    [
        {"plant.live_steam.temperature_C": 560.0, "plant.turbine.efficiency": 0.72},
        {"plant.feed.deaerator_control": "sliding"},
        {"plant.boiler.efficiency": {"load": [0.3, 0.6, 1.0], "value": [0.84, 0.88, 0.89]}},
        {"plant.boiler.blowdown_share": 0.0, "plant.turbine.exhaust_loss_share": 0.0},
        {"tail.baumann_factor": 0.0, "tail.mechanical_efficiency": 0.97, "tail.generator_efficiency": 0.96},
        {"new_condenser.drain_approach_K": 2.0, "new_condenser.flow_exponent": 0.3},
        {"plant.condenser.flow_exponent": 0.0, "network.pressure_bar": 16.0},
    ],
    ids=lambda changes: next(iter(changes)),
)
def test_marrowby_edited(changes: dict) -> None:
    """Dry exhausts, a sliding deaerator, a boiler curve, no losses, a tail of its own: one at a time."""
    data = unlimited(changes)
    compare_design(data)
    for hour in OFF_DESIGN[2::2]:
        compare_hour(data, hour)


# Part of the contract, so they must change the balance wherever they are given.
REFINEMENTS = {
    "heater": ({"plant.feed.heater": {"bleed_bar": 14.0, "terminal_difference_K": 4.0}}, {}),
    "inlet loss": ({"tail.inlet_loss_share": 0.05}, {}),
    "tail part load": ({"tail.part_load": {"load": [0.2, 1.0], "value": [0.8, 1.0]}}, {}),
    "held": ({}, {"temperature_control": "held"}),
    "minimum flow": ({"tail.min_flow_share": 0.9}, {}),
}


@pytest.mark.parametrize("name", REFINEMENTS)
def test_refinements_of_the_plant(name: str) -> None:
    """High-pressure heater, tail inlet loss, tail part load, held temperatures, the tail's minimum flow."""
    changes, options = REFINEMENTS[name]
    data = unlimited(changes, options)
    compare_design(data)
    for hour in ((25.0, 98.0, 46.0), (20.0, 85.0, 46.0)):
        compare_hour(data, hour)


# --- limits, peak boilers in series, flue-gas condenser ---------------------------------------------------

FLUE_GAS = {"heat_per_fuel": 0.15, "at_return_C": 46.0, "slope_per_K": 0.005}
SERIES = {"plant.peak_boiler.connection": "series"}
ROADS = {
    "live steam": (edited(), (45.0, 110.0, 44.0)),
    "heat": (unlimited({"plant.condenser.max_heat_MW": 30.0}), (36.0, 95.0, 46.0)),
    "fuel": (unlimited({"plant.boiler.max_fuel_MW": 50.0}), (40.0, 98.0, 46.0)),
    "series": (edited(SERIES), (55.0, 105.0, 46.0)),
    "flue gas": (unlimited({"plant.flue_gas_condenser": FLUE_GAS}), (36.0, 98.0, 50.0)),
    "flue gas and live steam": (edited({"plant.flue_gas_condenser": FLUE_GAS}), (52.0, 104.0, 46.0)),
    "flue gas in series": (edited({"plant.flue_gas_condenser": FLUE_GAS} | SERIES), (60.0, 104.0, 46.0)),
    "generator": (unlimited({"plant.turbine.generator_limit_MW": 11.0}), (40.0, 98.0, 46.0)),
    "two generators": (
        unlimited({"plant.turbine.generator_limit_MW": 11.0, "tail.generator_limit_MW": 0.9}),
        (40.0, 98.0, 46.0),
    ),
}


def solved_hour(data: dict, made: Design, option: OptionDesign, hour, limited: bool) -> Solution:
    """One hour of one option as the year would ask for it, on the side of the limit that the scalar took."""
    heat, supply, back = (np.array([value]) for value in hour)
    ends = made.plant.network.enthalpy(np.array([back[0], supply[0]]))
    water = heat * 1e3 / (ends[1] - ends[0]) if made.plant.series else None
    at = Conditions(heat, back, supply, water, flue_gas=True)
    off = np.zeros(1, dtype=bool)
    return solve(Task(made.plant, option.train, option.sizes, made.reference, at, off, limited=limited))


@pytest.mark.parametrize("road", ROADS)
def test_limits_and_other_heat(road: str) -> None:
    data, hour = ROADS[road]
    made, theirs = design(case_of(data)), scalar_design(data)
    for option in (o for o in made.options if o.train.key in ("single", "two", "two-pumped")):
        other = scalar_point(data, theirs, option.train.key, *hour)
        mine = solved_hour(data, made, option, hour, other.at_limit)
        assert other.on
        assert mine.conditions.heat_MW[0] == pytest.approx(other.heat_MW, rel=CLOSE)
        assert mine.energy.power_net_MW[0] == pytest.approx(other.power_net_MW, rel=CLOSE)
        assert mine.energy.fuel_MW[0] == pytest.approx(other.fuel_MW, rel=CLOSE)
        assert mine.flue_gas_MW[0] == pytest.approx(other.flue_gas_MW, rel=1e-9, abs=1e-12)
        assert mine.network_kg_s[0] == pytest.approx(other.network_kg_s, rel=CLOSE)
        assert mine.shells.water_C[-1, 0] == pytest.approx(other.stages[-1].water_out_C, rel=CLOSE)
        assert mine.energy.closure[0] < 1e-9


# --- any plant --------------------------------------------------------------------------------------------


@STEADY
@given(st.data())
def test_random_plants(data) -> None:
    plant = data.draw(plants())
    try:
        scalar_design(plant)
    except NoSolution:
        with pytest.raises(CaseError, match="cannot be built"):
            design(case_of(plant))
        assume(False)
    compare_design(plant)
    hour = data.draw(loads(plant))
    try:
        compare_hour(plant, hour)
    except NoSolution:
        assume(False)


@STEADY
@given(st.data())
def test_random_plants_with_every_refinement(data) -> None:
    """Heater, sliding deaerator, lossy tail with a part-load curve, three stages, held or sliding."""
    plant = data.draw(plants())
    feed, live = plant["plant"]["feed"], plant["plant"]["live_steam"]
    feed["deaerator_control"] = data.draw(st.sampled_from(["fixed", "sliding"]))
    feed["heater"] = {
        "bleed_bar": feed["bleed_bar"]
        + data.draw(st.floats(0.05, 0.3)) * (live["pressure_bar"] - feed["bleed_bar"]),
        "terminal_difference_K": data.draw(st.floats(-1.0, 6.0)),
    }
    plant["tail"] |= {
        "inlet_loss_share": data.draw(st.floats(0.0, 0.05)),
        "part_load": {"load": [0.2, 1.0], "value": [data.draw(st.floats(0.7, 1.0)), 1.0]},
    }
    control = data.draw(st.sampled_from(["sliding", "held"]))
    drain = data.draw(st.sampled_from(["saturated", "subcooled"]))
    plant["options"] = plant["options"][:1]
    stages = data.draw(st.sampled_from([2, 2, 3]))
    own = {"key": "new", "name": "New", "stages": stages, "drain": drain, "temperature_control": control}
    plant["options"].append(own)
    try:
        base = scalar_design(plant).baseline.balance
    except NoSolution:
        assume(False)
    # The heater's drain may heat the deaerator alone; where it does at the design point, the reference
    # of both solvers differs.
    assume(not base.feed.floating)
    compare_design(plant)
    hour = data.draw(loads(plant))
    try:
        compare_hour(plant, hour)
    except NoSolution:
        assume(False)
