"""Draws, break-even grid and design choice on the small case."""

import copy
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from cases import minimal_case, write_case

from appraise.capex import capital
from appraise.case.load import LoadedCase, case_from, load_case
from appraise.case.paths import changed
from appraise.chain import Physics, case_npv, run_scenario, solve_physics
from appraise.draws import METHOD_LIMIT, Risk, risk
from appraise.grid import break_even_grid
from appraise.optimum import DIFFERENCES_K, design_choice

ECONOMIC = [
    {
        "label": "Power",
        "path": "scenario.power",
        "distribution": {"kind": "uniform", "low": 0.8, "high": 1.2},
    },
    {
        "label": "Capital",
        "path": "capex.multiplier",
        "distribution": {"kind": "triangular", "low": 0.8, "mode": 1.0, "high": 1.5},
    },
]
TECHNICAL = {
    "label": "Tail",
    "path": "tail.efficiency",
    "distribution": {"kind": "normal", "mean": 0.79, "standard_deviation": 0.02},
}


def loaded_with(folder: Path, drivers: list[dict[str, Any]], **draws: Any) -> LoadedCase:
    data = copy.deepcopy(minimal_case())
    data["drivers"], data["draws"] = drivers, draws
    return load_case(write_case(folder, data))


def drawn(loaded: LoadedCase, number: int, verify: int = 12) -> Risk:
    physics = solve_physics(loaded.case, loaded.hours)
    found = risk(loaded.case, loaded.data, loaded.hours, physics, number, verify, lambda *_: None)
    assert found is not None
    return found


def times(factor: float) -> str:
    """A factor as a driver's change in per cent."""
    return f"{(float(factor) - 1.0) * 100.0!r}%"


def npv_of(loaded: LoadedCase, physics: Physics, *changes: tuple[str, float | str]) -> np.ndarray:
    data = loaded.data
    for path, change in changes:
        data = changed(loaded.case, data, path, change)
    return case_npv(case_from(data), loaded.hours, loaded.case.study.reference_scenario, physics)


def test_a_linear_case_has_the_mean_and_deviation_of_its_drivers(tmp_path: Path) -> None:
    """NPV is linear in a whole power path and in capital: moments follow from those of the drivers."""
    loaded = loaded_with(tmp_path, ECONOMIC)
    physics = solve_physics(loaded.case, loaded.hours)
    base = npv_of(loaded, physics)[1]
    power = npv_of(loaded, physics, ("scenario.power", "100%"))[1] - base
    money = npv_of(loaded, physics, ("capex.multiplier", 2.0))[1] - base
    option = drawn(loaded, 5000).options[1]
    mean = (0.8 + 1.0 + 1.5) / 3.0
    variance = (0.8**2 + 1.5**2 + 1.0 - 0.8 * 1.5 - 0.8 - 1.5) / 18.0
    assert option.mean == pytest.approx(base + (mean - 1.0) * money, rel=2e-4)
    deviation = np.hypot(power * 0.4 / np.sqrt(12.0), money * np.sqrt(variance))
    assert option.standard_deviation == pytest.approx(deviation, rel=0.01)


def test_money_alone_needs_no_response_and_every_draw_is_the_edited_case(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path, ECONOMIC)
    physics = solve_physics(loaded.case, loaded.hours)
    found = drawn(loaded, 40)
    assert found.method_error is None
    for draw in (0, 17, 39):
        power, money = found.values[draw]
        exact = npv_of(
            loaded,
            physics,
            ("scenario.power", times(power)),
            ("capex.multiplier", float(money)),
        )
        assert found.options[1].npv[draw] == pytest.approx(exact[1], rel=1e-9)


def test_life_may_be_drawn_too(tmp_path: Path) -> None:
    years = {
        "label": "Life",
        "path": "study.years",
        "distribution": {"kind": "uniform", "low": 6, "high": 12},
    }
    loaded = loaded_with(tmp_path, [*ECONOMIC, years])
    physics = solve_physics(loaded.case, loaded.hours)
    found = drawn(loaded, 30)
    for draw in (3, 21):
        power, money, life = found.values[draw]
        assert life == round(life)
        exact = npv_of(
            loaded,
            physics,
            ("scenario.power", times(power)),
            ("capex.multiplier", float(money)),
            ("study.years", float(life)),
        )
        assert found.options[1].npv[draw] == pytest.approx(exact[1], rel=1e-9)


def test_the_response_is_measured_and_close(tmp_path: Path) -> None:
    found = drawn(loaded_with(tmp_path, [*ECONOMIC, TECHNICAL]), 300)
    assert found.method_error is not None
    assert found.method_error.checked == 12
    assert found.method_error.root_mean_square < 0.01


def test_a_response_that_is_not_close_enough_is_made_finer(tmp_path: Path) -> None:
    """A wide range of supply temperatures moves many hours from one regime to another."""
    supply = {
        "label": "Supply",
        "path": "year.supply_offset_K",
        "distribution": {"kind": "uniform", "low": -22.0, "high": 16.0},
    }
    loaded = loaded_with(tmp_path, [*ECONOMIC, TECHNICAL, supply])
    found = drawn(loaded, 300, verify=24).method_error
    assert found is not None
    assert found.hours == loaded.hours.time.size  # the first, plain response uses every second hour
    assert found.root_mean_square < 0.01


def test_what_no_response_can_follow_is_measured_as_such(tmp_path: Path) -> None:
    """Thousands of hours of this case reach the steam limit together: a corner in the middle of a driver."""
    heat = {
        "label": "Heat",
        "path": "year.heat_multiplier",
        "distribution": {"kind": "normal", "mean": 1.0, "standard_deviation": 0.08},
    }
    found = drawn(loaded_with(tmp_path, [*ECONOMIC, TECHNICAL, heat]), 300).method_error
    assert found is not None
    assert found.root_mean_square > METHOD_LIMIT


def test_the_same_seed_gives_the_same_draws_bit_by_bit(tmp_path: Path) -> None:
    pairs = [{"between": ["Power", "Capital"], "rank": 0.5}]
    loaded = loaded_with(tmp_path, [*ECONOMIC, TECHNICAL], seed=4, correlations=pairs)
    first, again = drawn(loaded, 200), drawn(loaded, 200)
    assert (first.values == again.values).all()
    assert (first.options[1].npv == again.options[1].npv).all()


def test_chances_and_shares_add_up(tmp_path: Path) -> None:
    found = drawn(loaded_with(tmp_path, ECONOMIC), 500)
    assert sum(option.chance_best for option in found.options) == pytest.approx(1.0)
    for option in found.options:
        assert option.p5 <= option.p50 <= option.p95
        assert option.standard_error == pytest.approx(option.standard_deviation / np.sqrt(500))


def test_without_distributions_or_draws_nothing_is_drawn(tmp_path: Path) -> None:
    plain = loaded_with(
        tmp_path, [{"label": "Power", "path": "scenario.power", "low": "-10%", "high": "+10%"}]
    )
    physics = solve_physics(plain.case, plain.hours)
    assert risk(plain.case, plain.data, plain.hours, physics, 100, 12, lambda *_: None) is None
    some = loaded_with(tmp_path, ECONOMIC)
    assert risk(some.case, some.data, some.hours, physics, 0, 12, lambda *_: None) is None


def test_every_point_of_the_grid_is_the_scaled_case(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path, [])
    physics = solve_physics(loaded.case, loaded.hours)
    bought = capital(loaded.case, physics.sizes)
    name = loaded.case.study.reference_scenario
    grid = break_even_grid(run_scenario(loaded.case, loaded.hours, physics, bought, name).flows[1])
    for fuel, power in ((0, 10), (5, 5), (9, 2)):
        changes = [
            (f"scenario.{kind}", times(grid.factors[place]))
            for kind, place in (("fuel", fuel), ("power", power))
        ]
        assert grid.npv[fuel, power] == pytest.approx(
            npv_of(loaded, physics, *changes)[1], rel=1e-9, abs=1e-3
        )


def test_the_best_terminal_difference_beats_its_neighbours_solved_in_full(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path, [])
    physics = solve_physics(loaded.case, loaded.hours)
    stated = float(npv_of(loaded, physics)[1])
    choice = design_choice(loaded.case, loaded.hours, loaded.case.options[1].key, stated)
    assert choice is not None
    curve = choice.curves[0]
    place = curve.values.index(curve.best)
    around = [DIFFERENCES_K[i] for i in (place - 1, place, place + 1) if 0 <= i < len(DIFFERENCES_K)]
    full = [npv_of(loaded, physics, ("new_condenser.terminal_difference_K", value))[1] for value in around]
    assert around[int(np.argmax(full))] == curve.best
    here = curve.values.index(loaded.case.new_condenser.terminal_difference_K)
    assert curve.npv[here] == pytest.approx(stated, rel=1e-9)


def test_points_that_cannot_be_built_are_blank_with_a_reason(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path, [])
    choice = design_choice(loaded.case, loaded.hours, loaded.case.options[1].key, 0.0)
    assert choice is not None
    stages = choice.curves[2]
    assert stages.npv[0] is None
    assert stages.reason[0] == "one stage has no tail section: that is the baseline, or more surface on it"
    assert design_choice(loaded.case, loaded.hours, loaded.case.baseline.key, 0.0) is None
