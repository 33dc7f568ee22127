"""Laws that every plant obeys, whatever its figures: energy, price of extra power, limits, monotony."""

from dataclasses import replace
from functools import cache
from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from plants import (
    balanced,
    case_of,
    designed,
    gross_MW,
    loads,
    plants,
    sized,
    solved,
    stated,
    two_stage,
    with_options,
)
from scalar.marrowby import OFF_DESIGN, marrowby, three_stages, unlimited

from appraise.cycle.balance import point_balances
from appraise.cycle.design import Design, OptionDesign, design, ideal_power_gross_MW
from appraise.cycle.stages import ideal_train
from appraise.errors import CaseError

STEADY = settings(derandomize=True, deadline=None, max_examples=12)


def design_or_skip(data: dict[str, Any]) -> Design:
    """The design point of a drawn plant; one that cannot be built is not an example."""
    try:
        return design(case_of(data))
    except CaseError as error:
        assume("cannot be built" not in str(error))
        raise


@cache
def plain() -> Design:
    return design(case_of(unlimited()))


def one(values: np.ndarray) -> float:
    return float(values[0])


# --- energy -----------------------------------------------------------------------------------------------


def closures(made: Design, option: OptionDesign) -> list[float]:
    """Relative residuals of plant, deaerator (mass and energy), shells and network at the design point."""
    at, plant = option.solution, made.plant
    feed, shells, b = at.feed, at.shells, made.plant.blowdown_share
    m1, M = one(feed.live_steam_kg_s), one(at.condensate_kg_s)
    into = (
        one(feed.bleed_kg_s * feed.bleed_kJ_kg)
        + M * one(at.condensate_kJ_kg)
        + b * m1 * one(feed.makeup_kJ_kg)
    )
    deaerator = into / ((1.0 + b) * m1 * one(feed.deaerator_kJ_kg)) - 1.0
    mass = (one(feed.bleed_kg_s) + M) / m1 - 1.0
    steam, h, drain = shells.steam_kg_s[:, 0], shells.steam_kJ_kg[:, 0], shells.drain_kJ_kg[:, 0]
    leaving = float((steam * drain).sum()) if option.train.pumped else M * float(drain[0])
    heat_kW = one(at.network_kg_s) * float(shells.water_kJ_kg[-1, 0] - shells.water_kJ_kg[0, 0])
    condensers = (float((steam * h).sum()) - leaving) / heat_kW - 1.0
    asked = heat_kW / 1e3 / one(made.conditions.heat_MW) - 1.0
    boiler = one(at.energy.fuel_MW) * one(
        plant.boiler_efficiency.at(np.array([m1 / made.reference.live_steam_kg_s]))
    )
    supplied = boiler + one(at.energy.pump_MW) + b * m1 * one(feed.makeup_kJ_kg) / 1e3
    shaft = one(at.energy.shaft_main_MW + at.energy.shaft_tail_MW)
    whole = (supplied - shaft - heat_kW / 1e3 - b * m1 * plant.boiler_hf / 1e3) / boiler
    return [deaerator, mass, condensers, asked, whole, one(at.energy.closure)]


@STEADY
@given(plants())
def test_every_part_closes_at_the_design_point(data) -> None:
    """With four stages too, where a drain passes more than one shell."""
    for route in ("cascade", "pumped"):
        own = {"key": f"four-{route}", "name": "Four stages", "stages": 4, "drain_route": route}
        data["options"].append({**own, "drain": "subcooled"})
    made = design_or_skip(data)
    for option in made.options:
        assert np.abs(closures(made, option)).max() < 1e-9


@STEADY
@given(st.data())
def test_energy_closes_off_design(draw) -> None:
    data = draw.draw(plants())
    made = design_or_skip(data)
    points = [draw.draw(loads(data)) for _ in range(4)]
    for option in made.options:
        found = solved(made, option, points)
        assert found.energy.closure[found.valid].max(initial=0.0) < 1e-9
        delivered = found.network_kg_s * (found.shells.water_kJ_kg[-1] - found.shells.water_kJ_kg[0]) / 1e3
        assert delivered == pytest.approx(np.array(points)[:, 0], rel=1e-9)


# --- the price of extra power -----------------------------------------------------------------------------


@STEADY
@given(st.data())
def test_extra_power_is_bought_at_the_same_price_in_every_option(draw) -> None:
    """dP_gross over {d[F eta_b] + dW_pump - b dm1 (hf(p_b) - h_mu)} is eta_mech eta_gen, at equal heat."""
    data = draw.draw(plants())
    made = design_or_skip(data)
    points = [
        tuple(data["plant"]["design"][k] for k in ("heat_MW", "supply_C", "return_C")),
        draw.draw(loads(data)),
    ]
    turbine, boiler = data["plant"]["turbine"], data["plant"]["boiler"]
    price = turbine["mechanical_efficiency"] * turbine["generator_efficiency"]

    def bought(option: OptionDesign) -> tuple[np.ndarray, np.ndarray]:
        at = solved(made, option, points)
        blown = (
            boiler["blowdown_share"] * at.feed.live_steam_kg_s * (made.plant.boiler_hf - at.feed.makeup_kJ_kg)
        )
        spent = at.energy.fuel_MW * boiler["efficiency"] + at.energy.pump_MW - blown / 1e3
        return np.where(at.valid, at.energy.power_gross_MW, np.nan), spent

    base_power, base_spent = bought(made.baseline)
    for option in made.options:
        power, spent = bought(option)
        ran = np.isfinite(power)
        # both sides are small differences: compare them on the scale of the plant
        difference = (power - base_power - price * (spent - base_spent))[ran] / base_power[ran]
        assert np.abs(difference).max(initial=0.0) < 1e-9


@pytest.mark.parametrize("hour", OFF_DESIGN, ids=str)
def test_price_of_marrowbys_extra_power(hour) -> None:
    """The identity as a quotient, where the differences are large enough to divide."""
    made = plain()
    heat = [solved(made, o, [hour]) for o in (made.baseline, *made.options[2:])]
    rows = []
    for at in heat:
        blown = 0.01 * one(at.feed.live_steam_kg_s) * (made.plant.boiler_hf - one(at.feed.makeup_kJ_kg)) / 1e3
        rows.append(
            (one(at.energy.power_gross_MW), one(at.energy.fuel_MW) * 0.89 + one(at.energy.pump_MW) - blown)
        )
    for power, spent in rows[1:]:
        assert (power - rows[0][0]) / (spent - rows[0][1]) == pytest.approx(0.985 * 0.975, rel=1e-9)


@STEADY
@given(plants())
def test_balance_sheet_figures_follow_from_each_other(data) -> None:
    design_or_skip(data)
    found = balanced(data)
    base = found["single"]
    assert (base.extra_power_per_heat, base.incremental_efficiency, base.ideal_gain_share) == (0.0, None, 0.0)
    for mine in found.values():
        assert mine.heat_MW == pytest.approx(base.heat_MW, rel=1e-12)
        assert mine.power_to_heat == pytest.approx(mine.power_gross_MW / mine.heat_MW, rel=1e-12)
        assert sum(s.heat_MW for s in mine.stages) == pytest.approx(mine.heat_MW, rel=1e-10)
        assert mine.total_efficiency < 1.0
        if mine is not base:
            extra = mine.power_net_MW - base.power_net_MW
            assert mine.extra_power_per_heat == pytest.approx(extra / base.heat_MW, rel=1e-12)
            assert mine.incremental_efficiency == pytest.approx(
                extra / (mine.fuel_MW - base.fuel_MW), rel=1e-9
            )


# --- limits: where the second stage earns nothing ---------------------------------------------------------


def split(option: OptionDesign, cold_share: float, difference_K: float):
    """A row of two stages with another split and one terminal difference in both."""
    train = stated(option.train, difference_K)
    shares = (cold_share, 1.0 - cold_share)
    return replace(
        train, stages=tuple(replace(s, share=x) for s, x in zip(train.stages, shares, strict=True))
    )


def two_stage_gain_MW(made: Design, option: OptionDesign, cold_share: float, difference_K: float) -> float:
    """Extra gross power over one stage of the same terminal difference."""
    single = sized(made, stated(made.baseline.train, difference_K))
    return gross_MW(sized(made, split(option, cold_share, difference_K))) - gross_MW(single)


def goes_to_zero(small: list[float], reference: float) -> bool:
    """Whether gains at 1/10, 1/100 and 1/1000 fall in proportion, from no more than half the reference."""
    ratios = [a / b for a, b in pairwise(small)]
    return 0.0 < small[0] < 0.5 * reference and all(7.0 < ratio < 13.0 for ratio in ratios)


@pytest.mark.parametrize("key", ["two", "two-subcooled", "two-pumped"])
def test_gain_vanishes_when_the_cold_stage_takes_all(key: str) -> None:
    option = next(o for o in plain().options if o.train.key == key)
    gains = [two_stage_gain_MW(plain(), option, 1.0 - x, 3.0) for x in (0.1, 0.01, 0.001)]
    assert goes_to_zero(gains, two_stage_gain_MW(plain(), option, 0.5, 3.0))


def test_gain_vanishes_when_the_cold_stage_takes_nothing() -> None:
    """With drains pumped; in cascade the hot drain then heats the cold stage alone, and that is refused."""
    pumped = next(o for o in plain().options if o.train.key == "two-pumped")
    gains = [two_stage_gain_MW(plain(), pumped, x, 3.0) for x in (0.1, 0.01, 0.001)]
    assert goes_to_zero(gains, two_stage_gain_MW(plain(), pumped, 0.5, 3.0))
    with pytest.raises(CaseError) as raised:
        designed(with_options(two_stage(shares=[0.01, 0.99])))
    assert str(raised.value) == (
        "options.two: cannot be built: stage 1 would need no steam, the drains from above heat it alone"
    )


def test_existing_surface_too_gains_nothing_from_a_stage_without_work() -> None:
    """The same limit with the existing condenser rated by its surface: it becomes the baseline."""
    base = gross_MW(designed(with_options())["single"])
    gains = []
    for x in (0.1, 0.01, 0.001):
        option = two_stage(shares=[x, 1.0 - x], drain_route="pumped")
        gains.append(gross_MW(designed(with_options(option))["two"]) - base)
    assert goes_to_zero(
        gains, gross_MW(designed(with_options(two_stage(drain_route="pumped")))["two"]) - base
    )


@pytest.mark.parametrize("key", ["two", "two-pumped"])
def test_gain_vanishes_as_supply_approaches_return(key: str) -> None:
    """With the same terminal difference everywhere the gain is proportional to the rise."""

    def gain(rise_K: float) -> float:
        data = marrowby()
        data["plant"]["design"] = {"heat_MW": 40.0, "supply_C": 46.0 + rise_K, "return_C": 46.0}
        data["options"] = [o for o in data["options"] if o["key"] in ("single",)]
        made = design(case_of(data))
        option = next(o for o in plain().options if o.train.key == key)
        return two_stage_gain_MW(made, option, 0.5, 3.0)

    assert goes_to_zero([gain(4.0), gain(0.4), gain(0.04)], gain(52.0))


# --- monotony ---------------------------------------------------------------------------------------------


@STEADY
@given(plants(), st.sampled_from(["two", "two-subcooled", "two-pumped"]))
def test_more_equal_stages_never_make_less_power(data, key: str) -> None:
    """1 to 6 equal stages of one terminal difference, drain and route; and 16, the yardstick of the gain."""
    case = case_of(data)
    made = design_or_skip(data)
    option = next(o for o in case.options if o.key == key)
    gross = [gross_MW(sized(made, ideal_train(case, option, n))) for n in range(1, 7)]
    gross.append(ideal_power_gross_MW(case, option, made))
    assert np.diff(gross).min() > 0.0
    steps = np.diff(gross[:6])
    assert (np.diff(steps) < 0.0).all()  # each further stage adds less


@STEADY
@given(plants())
def test_subcooling_in_a_cascade_never_hurts(data) -> None:
    made = design_or_skip(data)
    gross = {o.train.key: gross_MW(o) for o in made.options}
    assert gross["two-subcooled"] >= gross["two"] * (1.0 - 1e-12)


@STEADY
@given(plants(), st.sampled_from([{}, {"drain": "subcooled"}, {"drain_route": "pumped"}]))
def test_a_worse_new_condenser_earns_less(data, keys) -> None:
    differences = (1.0, 2.0, 4.0, 7.0)
    data["options"] = [data["options"][0]]
    data["options"] += [two_stage(f"two-{d:g}", terminal_difference_K=d, **keys) for d in differences]
    design_or_skip(data)
    found = balanced(data)
    extra = [found[f"two-{d:g}"].extra_power_per_heat for d in differences]
    assert np.diff(extra).max() < 0.0


@STEADY
@given(plants())
def test_more_surface_on_the_existing_condenser_earns_more(data) -> None:
    data["options"] = [data["options"][0]] + [
        {"key": f"area-{i}", "name": "More surface", "stages": 1, "existing_area_factor": factor}
        for i, factor in enumerate((1.0, 1.3, 1.8, 3.0))
    ]
    found = balanced(data)
    extra = [found[f"area-{i}"].extra_power_per_heat for i in range(4)]
    assert extra[0] == pytest.approx(0.0, abs=1e-12)
    assert np.diff(extra).min() > 0.0


@STEADY
@given(plants())
def test_a_better_machine_makes_more_power(data) -> None:
    better = {**data, "tail": {**data["tail"], "efficiency": data["tail"]["efficiency"] + 0.05}}
    made, improved = design_or_skip(data), design_or_skip(better)
    for one_option, other in zip(made.options, improved.options, strict=True):
        if one_option.train.number == 1:
            assert gross_MW(other) == gross_MW(one_option)
        else:
            assert gross_MW(other) > gross_MW(one_option)


# --- surfaces ---------------------------------------------------------------------------------------------


@STEADY
@given(plants())
def test_surface_by_mean_difference_is_the_conductance_of_the_rating(data) -> None:
    """U A of a new condenser from duty and LMTD equals its UA from NTU over the condensing zone."""
    for option in design_or_skip(data).options:
        for stage, ua, area in zip(
            option.train.stages, option.sizes.conductance_kW_K, option.surface, strict=True
        ):
            if not stage.existing:
                assert area.condensing_m2 * stage.u_condensing_W_m2K / 1e3 == pytest.approx(ua, rel=1e-9)
                assert area.drain_m2 == 0.0  # stage 1 is always saturated, and two stages have one new


# --- one solve for all points -----------------------------------------------------------------------------


@pytest.mark.parametrize("key", ["single", "enlarged", "two", "two-subcooled", "two-pumped", "three"])
def test_a_batch_of_points_is_the_points_one_by_one(key: str) -> None:
    made = design(case_of(three_stages()))
    option = next(o for o in made.options if o.train.key == key)
    points = [*OFF_DESIGN, (8.0, 76.0, 50.0), (38.0, 101.0, 45.0)]
    together = solved(made, option, points)
    for i, point in enumerate(points):
        alone = solved(made, option, [point])
        assert together.on_live_steam[i] == alone.on_live_steam[0]
        assert together.valid[i] == alone.valid[0]
        for name in ("power_gross_MW", "power_net_MW", "fuel_MW", "shaft_tail_MW"):
            mine, other = getattr(together.energy, name)[i], getattr(alone.energy, name)[0]
            assert mine == pytest.approx(other, rel=1e-11 if name == "shaft_tail_MW" else 1e-12)
        for name in ("shell_bar", "steam_kg_s", "steam_kJ_kg", "drain_kJ_kg"):
            mine, other = getattr(together.shells, name)[:, i], getattr(alone.shells, name)[:, 0]
            assert mine == pytest.approx(other, rel=1e-10)


def test_the_order_of_points_changes_nothing() -> None:
    made = plain()
    option = made.options[3]
    forward, backward = solved(made, option, OFF_DESIGN), solved(made, option, OFF_DESIGN[::-1])
    assert backward.energy.fuel_MW[::-1] == pytest.approx(forward.energy.fuel_MW, rel=1e-13)


def test_the_order_of_options_changes_nothing() -> None:
    data = three_stages()
    turned = {**data, "options": data["options"][::-1]}
    assert balanced(turned) == balanced(data)
    case, other = case_of(data), case_of(turned)
    hour = (25.0, 88.0, 47.0)
    forward, backward = (point_balances(c, design(c), *hour) for c in (case, other))
    assert {b.key: b for b in backward} == {b.key: b for b in forward}


@pytest.mark.parametrize("key", ["single", "enlarged", "two", "two-subcooled", "two-pumped", "three"])
def test_hour_at_design_conditions_is_the_design_balance(key: str) -> None:
    """Sizes fixed at the design point give the design point back."""
    made = design(case_of(three_stages()))
    option = next(o for o in made.options if o.train.key == key)
    hour = solved(made, option, [(40.0, 98.0, 46.0)])
    assert hour.valid.all()
    assert one(hour.energy.power_net_MW) == pytest.approx(one(option.solution.energy.power_net_MW), rel=1e-10)
    assert hour.shells.water_C[:, 0] == pytest.approx(option.solution.shells.water_C[:, 0], rel=1e-9)
    assert hour.feed.bleed_bar == pytest.approx(option.solution.feed.bleed_bar, rel=1e-10)


@pytest.mark.parametrize("key", ["two", "two-subcooled", "two-pumped", "three"])
def test_every_section_passes_what_the_colder_stages_need(key: str) -> None:
    made = design(case_of(three_stages()))
    option = next(o for o in made.options if o.train.key == key)
    at = solved(made, option, OFF_DESIGN)
    passed = np.array(option.sizes.section_constant)[:, None] * at.shells.passing
    assert passed == pytest.approx(np.cumsum(at.shells.steam_kg_s, axis=0)[:-1], rel=1e-9)
