"""The whole chain on the demo case: figures that must hold, and options that are but lines in the case."""

import copy
import math
from collections.abc import Iterator, Mapping
from dataclasses import astuple
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from cases import toml_text

from appraise.case.load import LoadedCase, case_from, load_case
from appraise.case.paths import changed
from appraise.chain import solve_physics
from appraise.output import plain
from appraise.study import Comparison, Study, balances, point_balances, run_study

PUMPED = {
    "key": "two-stage-pumped",
    "name": "Two stages, drains pumped",
    "stages": 2,
    "drain_route": "pumped",
}
THREE = {
    "key": "three-stage",
    "name": "Three stages, drain coolers",
    "stages": 3,
    "drain": "subcooled",
    "shares": [0.3, 0.3, 0.4],
}


def wider(loaded: LoadedCase) -> dict[str, Any]:
    """The demo case with two more options, bought like the others, and without drivers."""
    data = copy.deepcopy(dict(loaded.data))
    data["options"] += [PUMPED, THREE]
    for item in data["capex"]["items"]:
        if "two-stage" in item.get("only", ()):
            item["only"] += [PUMPED["key"], THREE["key"]]
    data["drivers"], data["draws"] = [], {}
    return data


def studied(folder: Path, loaded: LoadedCase, data: Mapping[str, Any]) -> Study:
    """The study of a case written to a folder, beside the hours of the demo."""
    (folder / loaded.hours_path.name).write_bytes(loaded.hours_path.read_bytes())
    path = folder / "case.toml"
    path.write_text(toml_text(data), encoding="utf-8")
    return run_study(load_case(path))


@pytest.fixture(scope="module")
def wide(marrowby: LoadedCase, tmp_path_factory: pytest.TempPathFactory) -> Study:
    return studied(tmp_path_factory.mktemp("wide"), marrowby, wider(marrowby))


def index_of(study: Study) -> dict[str, int]:
    return {option.key: index for index, option in enumerate(study.case.options)}


def test_arithmetic_faults_raise_in_every_test() -> None:
    for fault in (lambda x: x / 0.0, lambda x: np.exp(1e4 * x), lambda x: np.sqrt(-x)):
        with pytest.raises(FloatingPointError):
            fault(np.ones(1))


# --- the design point -------------------------------------------------------------------------------------


def test_baseline_meets_a_second_program(marrowby: LoadedCase) -> None:
    """Figures of a second program, written independently of this one, to their last digit."""
    base = next(one for one in balances(marrowby.case) if one.key == "single")
    assert f"{base.live_steam_kg_s:.4f}" == "19.0567"
    assert f"{base.power_net_MW:.4f}" == "12.8475"
    assert f"{base.fuel_MW:.3f}" == "60.949"


@pytest.mark.parametrize(
    ("key", "gain"),
    [("two-stage", "0.02987"), ("two-stage-subcooled", "0.03127"), (PUMPED["key"], "0.03401")],
)
def test_extra_power_per_heat_meets_a_second_program(marrowby: LoadedCase, key: str, gain: str) -> None:
    """Net, per heat at the design point; same source."""
    solved = balances(case_from(wider(marrowby)))
    assert f"{next(one for one in solved if one.key == key).extra_power_per_heat:.5f}" == gain


def test_design_point_and_another_point_at_the_same_place_agree(marrowby: LoadedCase) -> None:
    for at_design, elsewhere in zip(
        balances(marrowby.case), point_balances(marrowby.case, 40.0, 98.0, 46.0), strict=True
    ):
        assert elsewhere.power_net_MW == pytest.approx(at_design.power_net_MW, rel=1e-9)
        assert elsewhere.fuel_MW == pytest.approx(at_design.fuel_MW, rel=1e-9)
        assert elsewhere.ideal_gain_share is None


def test_closure_at_the_design_point_and_over_all_hours(marrowby_study: Study) -> None:
    assert max(balance.closure for balance in marrowby_study.balances) < 1e-9
    found = {check.name: check for check in marrowby_study.checks}
    over_year = found["closure over all hours"]
    assert over_year.passed
    assert over_year.value is not None
    assert 0.0 <= over_year.value < 1e-9
    assert over_year.value == max(
        float(option.greatest.closure.value[0])
        for solved in marrowby_study.physics.years.solved
        for option in solved
    )


# --- against the baseline ---------------------------------------------------------------------------------


def test_the_baseline_gains_nothing_and_costs_nothing(marrowby_study: Study) -> None:
    base = index_of(marrowby_study)[marrowby_study.case.baseline.key]
    at_design = marrowby_study.balances[base]
    assert (at_design.extra_power_per_heat, at_design.ideal_gain_share) == (0.0, 0.0)
    assert at_design.incremental_efficiency is None
    assert marrowby_study.capital[base].total == 0.0
    for run, figures in zip(marrowby_study.runs, marrowby_study.year_figures, strict=True):
        extra = run.traded[base].increment
        for energy in (extra.power_MWh, extra.weighted_power_MWh, extra.fuel_MWh, extra.peak_fuel_MWh):
            np.testing.assert_array_equal(energy, 0.0)
        assert extra.tie_in == 0.0
        np.testing.assert_array_equal(run.flows[base].net, 0.0)
        told = figures[base]
        assert (told.extra_power_MWh, told.extra_fuel_MWh, told.first_year_gain) == (0.0, 0.0, 0.0)
        assert told.incremental_efficiency is None


def test_the_year_gains_less_than_the_design_point(wide: Study) -> None:
    """Milder hours, the deaerator's live steam and the limit of the boiler all take from it."""
    for balance, told in zip(wide.balances, wide.year_figures[wide.reference], strict=True):
        if balance.key != wide.case.baseline.key:
            assert told.extra_power_per_heat is not None
            assert 0.0 < told.extra_power_per_heat < balance.extra_power_per_heat


def test_extra_power_is_bought_at_the_identitys_price_in_every_hour(marrowby_study: Study) -> None:
    """At equal heat, gross: boiler × mechanical × generator efficiency, whatever the option.

    Pumps and blowdown, which the product leaves out, are 0.1 % of it here.
    """
    years, plant = marrowby_study.physics.years, marrowby_study.case.plant
    turbine = plant.turbine
    price = plant.boiler.efficiency.value[0] * turbine.mechanical_efficiency * turbine.generator_efficiency
    base = years.solved[0][years.baseline]
    for index, option in enumerate(years.solved[0]):
        if index == years.baseline:
            continue
        equal = base.on & (np.abs(option.heat_MW - base.heat_MW) < 1e-9)
        assert equal.sum() > 5000
        power = (option.power_gross_MW - base.power_gross_MW)[equal]
        fuel = (option.fuel_MW - base.fuel_MW)[equal]
        np.testing.assert_allclose(power / fuel, price, rtol=2e-3)


def test_the_years_incremental_efficiency_is_near_the_identity(wide: Study) -> None:
    """Gross, over the fuel of plant and peak boilers: the identity, and a little more where heat is lost.

    Heat that an option loses at the limit of live steam is turned into power by the turbine's losses alone,
    and made again at the peak boilers' efficiency; so their better one is the upper bound. Net of pumps and
    vacuum units it is less.
    """
    plant, figures = wide.case.plant, wide.year_figures[wide.reference]
    electric = plant.turbine.mechanical_efficiency * plant.turbine.generator_efficiency
    boiler, peak = plant.boiler.efficiency.value[0], plant.peak_boiler.efficiency
    base = figures[index_of(wide)[wide.case.baseline.key]]
    for told in figures:
        if told is base:
            continue
        bought = told.extra_fuel_MWh + told.extra_peak_fuel_MWh
        gross = (told.power_gross_MWh - base.power_gross_MWh) / bought
        assert 0.998 * electric * boiler < gross < 1.002 * electric * peak
        assert told.incremental_efficiency == pytest.approx(told.extra_power_MWh / bought, rel=1e-12)
        assert 0.9 * gross < told.incremental_efficiency < gross


# --- options are data -------------------------------------------------------------------------------------


def test_options_are_added_by_the_case_alone(marrowby_study: Study, wide: Study) -> None:
    """The new ones run through year and money, and the others do not notice."""
    at = index_of(wide)
    assert list(at) == [*index_of(marrowby_study), PUMPED["key"], THREE["key"]]
    assert len(wide.balances[at[THREE["key"]]].stages) == 3
    for key, index in index_of(marrowby_study).items():
        assert wide.runs[0].npv[at[key]] == pytest.approx(
            marrowby_study.runs[0].npv[index], rel=1e-12, abs=1e-6
        )
    for key in (PUMPED["key"], THREE["key"]):
        assert wide.year_figures[0][at[key]].extra_power_MWh > 1000.0
        assert math.isfinite(wide.runs[0].npv[at[key]])
        assert wide.capital[at[key]].total > 1e6


def test_more_stages_and_better_drains_come_nearer_to_the_ideal(wide: Study) -> None:
    share = {balance.key: balance.ideal_gain_share for balance in wide.balances}
    assert 0.0 < share["single-large"] < share["two-stage-subcooled"] < share["three-stage"] < 1.0
    extra = {balance.key: balance.extra_power_per_heat for balance in wide.balances}
    assert extra["two-stage"] < extra["two-stage-subcooled"] < extra["two-stage-pumped"]


def test_the_order_of_options_changes_nothing(marrowby: LoadedCase, wide: Study, tmp_path: Path) -> None:
    data = wider(marrowby)
    data["options"].reverse()
    turned = studied(tmp_path, marrowby, data)
    here, there = index_of(wide), index_of(turned)
    assert list(there) == list(reversed(here))
    for key, index in here.items():
        compare_results(turned.balances[there[key]], wide.balances[index])
        compare_results(turned.capital[there[key]], wide.capital[index])
        for scenario in range(len(wide.runs)):
            compare_results(turned.year_figures[scenario][there[key]], wide.year_figures[scenario][index])
            compare_results(turned.measures[scenario][there[key]], wide.measures[scenario][index])


def compare_results(one: object, other: object) -> None:
    """Equal words and numbers, these up to the order in which a library may add them up."""
    for mine, theirs in zip(leaves(plain(one)), leaves(plain(other)), strict=True):
        number = isinstance(theirs, float)
        assert mine == (pytest.approx(theirs, rel=1e-11, abs=1e-9) if number else theirs)


def leaves(value: Any) -> Iterator[Any]:
    """Every word and number of a result that is made of lists and mappings."""
    if isinstance(value, dict | list):
        for inner in value.values() if isinstance(value, dict) else value:
            yield from leaves(inner)
    else:
        yield value


# --- options against each other ---------------------------------------------------------------------------


def test_the_baseline_competes_and_of_equals_the_first_is_best() -> None:
    compared = Comparison.of(np.array([[0.0, 3.0, 3.0], [0.0, -1.0, -4.0]]))
    assert compared.best == (1, 0)
    np.testing.assert_array_equal(compared.regret, [[3.0, 0.0, 0.0], [0.0, 1.0, 4.0]])
    np.testing.assert_array_equal(compared.worst, [0.0, -1.0, -4.0])
    np.testing.assert_array_equal(compared.largest_regret, [3.0, 1.0, 4.0])


def test_progress_rises_to_what_is_left(marrowby: LoadedCase, tmp_path: Path) -> None:
    heard: list[tuple[float, str]] = []
    data = copy.deepcopy(dict(marrowby.data))
    data["options"], data["drivers"], data["draws"] = data["options"][:2], [], {}
    for item in data["capex"]["items"]:
        item["only"] = ["single-large"]
    (tmp_path / marrowby.hours_path.name).write_bytes(marrowby.hours_path.read_bytes())
    path = tmp_path / "case.toml"
    path.write_text(toml_text(data), encoding="utf-8")
    run_study(load_case(path), progress=lambda fraction, label: heard.append((fraction, label)))
    fractions = [fraction for fraction, _ in heard]
    assert fractions == sorted(fractions)
    assert 0.0 == fractions[0] < fractions[-1] < 1.0
    assert all(label for _, label in heard)


def test_what_depends_on_nothing_changed_is_not_solved_again(marrowby: LoadedCase) -> None:
    """A tail leaves single stages alone, availability all hours; results are those of a fresh solve."""
    case, data, hours = marrowby.case, marrowby.data, marrowby.hours
    known = solve_physics(case, hours)
    for path, value, kept in (
        ("tail.efficiency", 0.77, (True, True, False, False)),
        ("year.availability", 0.9, (True, True, True, True)),
        ("plant.turbine.efficiency", 0.83, (False, False, False, False)),
    ):
        edited = case_from(changed(case, data, path, value))
        again, fresh = solve_physics(edited, hours, known), solve_physics(edited, hours)
        pairs = zip(again.years.solved[0], known.years.solved[0], strict=True)
        assert tuple(mine is before for mine, before in pairs) == kept
        for mine, theirs in zip(again.years.solved[0], fresh.years.solved[0], strict=True):
            np.testing.assert_allclose(mine.power_net_MW, theirs.power_net_MW, rtol=1e-10)
        for found, expected in zip(again.sizes, fresh.sizes, strict=True):
            for stage, same in zip(found.stages, expected.stages, strict=True):
                assert astuple(stage) == pytest.approx(astuple(same), rel=1e-9, abs=1e-9)
