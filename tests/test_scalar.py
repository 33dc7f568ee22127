"""The scalar one-point solver against outside figures, conservation laws and its own slower alternatives."""

import math

import pytest
from scalar import Design, Point, design, ideal_gain_share, point, steam
from scalar.marrowby import OFF_DESIGN, OPTIONS, edited, marrowby, three_stages, unlimited


@pytest.fixture(scope="module")
def plain() -> tuple[dict, Design]:
    data = marrowby()
    return data, design(data)


def solve(data: dict, key: str, heat: float, supply: float, back: float) -> Point:
    return point(data, design(data), key, heat, supply, back)


# --- the design point -------------------------------------------------------------------------------------


def test_baseline_meets_an_independent_solvers_figures(plain):
    """Figures of an independent program for this plant, to their printed digits."""
    found = plain[1].baseline.balance
    assert round(plain[1].m1_0, 4) == 19.0567
    assert round(found.power_net_MW, 4) == 12.8475
    assert round(found.fuel_MW, 3) == 60.949


@pytest.mark.parametrize(
    ("key", "gain"), [("two", 0.02987), ("two-subcooled", 0.03127), ("two-pumped", 0.03401)]
)
def test_extra_power_per_heat_meets_an_independent_solvers_figures(plain, key, gain):
    """Net extra power per heat at the design point, same source."""
    base, mine = plain[1].baseline.balance, plain[1].options[key].balance
    assert round((mine.power_net_MW - base.power_net_MW) / 40.0, 5) == gain


def test_baseline_reproduces_its_own_zero_values(plain):
    found = plain[1].baseline.balance
    assert found.feed.bleed_bar == pytest.approx(5.0, rel=1e-13)
    assert found.load == pytest.approx(1.0, rel=1e-13)
    assert found.train.shells[0].saturation_C == pytest.approx(101.0, rel=1e-13)


@pytest.mark.parametrize("key", OPTIONS)
def test_hour_at_design_conditions_is_the_design_balance(plain, key):
    """Sliding temperatures fall back on the design shares, because every section was sized for them."""
    data, found = plain
    mine, hour = found.options[key].balance, point(data, found, key, 40.0, 98.0, 46.0)
    assert hour.power_net_MW == pytest.approx(mine.power_net_MW, rel=1e-12)
    assert hour.fuel_MW == pytest.approx(mine.fuel_MW, rel=1e-12)


def test_ideal_share_rises_with_stages():
    data = three_stages()
    assert 0.0 < ideal_gain_share(data, "enlarged") < ideal_gain_share(data, "two-subcooled")
    assert ideal_gain_share(data, "two-subcooled") < ideal_gain_share(data, "three") < 1.0


# --- laws that hold in every hour -------------------------------------------------------------------------


@pytest.mark.parametrize("key", OPTIONS)
@pytest.mark.parametrize("hour", OFF_DESIGN)
def test_energy_closes(key, hour):
    data = edited({"plant.live_steam.min_kg_s": 1.0})
    found = solve(data, key, *hour)
    assert found.on
    assert not found.as_baseline
    assert abs(found.closure) < 1e-9
    assert abs(_closure_by_streams(data, found, hour)) < 1e-9
    assert found.heat_MW + found.peak_heat_MW == pytest.approx(hour[0], rel=1e-12)


def _closure_by_streams(data: dict, found: Point, hour) -> float:
    """Fuel heat, pumps and make-up in; power, blowdown and the network's own gain out."""
    water, boiler = found.balance.feed, data["plant"]["boiler"]
    b, m1 = boiler["blowdown_share"], found.live_steam_kg_s
    shaft = found.power_gross_MW / (0.985 * 0.975)
    gained = steam.at(10.0, hour[1]).enthalpy - steam.at(10.0, hour[2]).enthalpy
    heat = found.network_kg_s * gained / 1e3
    into = found.fuel_MW * 0.89 + found.balance.pump_MW + b * m1 * water.makeup_enthalpy / 1e3
    out = shaft + heat + b * m1 * steam.saturated(75.0, 0.0).enthalpy / 1e3
    return (into - out) / (found.fuel_MW * 0.89)


@pytest.mark.parametrize("key", OPTIONS[1:])
@pytest.mark.parametrize("hour", OFF_DESIGN)
def test_extra_power_is_bought_at_the_same_price_in_every_option(key, hour):
    """dP_gross over {d[F (eta_b + r)] + dW_pump - b dm1 (hf(p_b) - h_mu)} is eta_mech eta_gen, exactly."""
    fgc = {"heat_per_fuel": 0.12, "at_return_C": 45.0, "slope_per_K": 0.004}
    data = unlimited({"plant.flue_gas_condenser": fgc})
    found = design(data)
    base, mine = (point(data, found, k, *hour) for k in ("single", key))
    boiling = steam.saturated(75.0, 0.0).enthalpy - base.balance.feed.makeup_enthalpy
    bought = [
        p.fuel_MW * 0.89 + p.flue_gas_MW + p.balance.pump_MW - 0.01 * p.live_steam_kg_s * boiling / 1e3
        for p in (base, mine)
    ]
    ratio = (mine.power_gross_MW - base.power_gross_MW) / (bought[1] - bought[0])
    assert ratio == pytest.approx(0.985 * 0.975, rel=1e-9)


@pytest.mark.parametrize("key", OPTIONS[2:])
@pytest.mark.parametrize("hour", OFF_DESIGN)
def test_every_section_passes_exactly_what_it_needs(key, hour):
    data = unlimited()
    found = design(data)
    hour_found = point(data, found, key, *hour).balance.train
    section, phi = hour_found.sections[0], found.options[key].phi[0]
    ratio = section.out_bar / section.inlet.pressure_bar
    passed = phi * math.sqrt(section.inlet.pressure_bar / section.inlet.volume * (1.0 - ratio**2))
    assert passed == pytest.approx(hour_found.shells[0].steam_kg_s, rel=1e-11)
