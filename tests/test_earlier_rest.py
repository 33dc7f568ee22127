"""A solve that starts from where a similar plant came to rest gives what a solve from nothing gives."""

import dataclasses
from pathlib import Path

import numpy as np
import pytest

from appraise.case.load import LoadedCase, case_from, load_case
from appraise.case.paths import changed
from appraise.chain import Physics, solve_physics
from appraise.cycle import solve
from appraise.numerics import fixed_point

INPUTS = Path(__file__).parents[1] / "inputs"


def test_a_known_jacobian_saves_steps_and_changes_nothing() -> None:
    counted = []

    def step(x, index):
        counted.append(index.size)
        return np.cos(x) + 0.3 * np.sin(x[::-1])

    first = fixed_point(step, np.full((2, 4), 0.5))
    cold = len(counted)
    again = fixed_point(step, first.x + 1e-3, inverse=first.inverse)
    assert first.converged.all()
    assert again.converged.all()
    assert again.x == pytest.approx(first.x, abs=1e-11)
    assert len(counted) - cold < cold - 1


@pytest.fixture(scope="module", params=["marrowby", "hollowmere"])
def known(request) -> tuple[LoadedCase, Physics]:
    loaded = load_case(INPUTS / f"{request.param}.toml")
    return loaded, solve_physics(loaded.case, loaded.hours)


@pytest.mark.parametrize(
    ("path", "change"),
    [
        ("tail.efficiency", "-8%"),
        ("plant.turbine.efficiency", "+3%"),
        ("plant.condenser.terminal_difference_K", "+90%"),
        ("new_condenser.terminal_difference_K", "-50%"),
        ("plant.feed.deaerator_bar", "+20%"),
        ("year.supply_offset_K", 4.0),
        ("year.heat_multiplier", 1.15),
        ("plant.live_steam.max_kg_s", "-15%"),
    ],
)
def test_a_changed_plant_solved_from_another(known, path: str, change: str | float) -> None:
    loaded, base = known
    case = case_from(changed(loaded.case, loaded.data, path, change))
    fresh, near = solve_physics(case, loaded.hours), solve_physics(case, loaded.hours, base)
    for mine, theirs in zip(fresh.years.solved, near.years.solved, strict=True):
        for one, other in zip(mine, theirs, strict=True):
            for field in dataclasses.fields(one):
                expected, found = getattr(one, field.name), getattr(other, field.name)
                if isinstance(expected, np.ndarray) and expected.dtype == bool:
                    assert np.array_equal(found, expected), field.name
                elif isinstance(expected, np.ndarray):
                    np.testing.assert_allclose(found, expected, rtol=1e-9, atol=1e-9, err_msg=field.name)


def test_blocks_of_hours_do_not_touch_each_other(known, monkeypatch) -> None:
    loaded, base = known
    monkeypatch.setattr(solve, "_BLOCK", 1000)
    found = solve_physics(loaded.case, loaded.hours)
    for one, other in zip(base.years.solved[0], found.years.solved[0], strict=True):
        assert np.array_equal(one.on, other.on)
        np.testing.assert_allclose(other.power_net_MW, one.power_net_MW, rtol=1e-10, atol=1e-10)


def test_a_rest_that_leads_astray_is_left_for_the_plain_start() -> None:
    """Every start is moved far off: what does not come to rest from there is begun anew."""
    loaded = load_case(INPUTS / "marrowby.toml")
    base = solve_physics(loaded.case, loaded.hours)
    moved = tuple(
        tuple(
            dataclasses.replace(
                one, rests=tuple(dataclasses.replace(rest, state=rest.state + 40.0) for rest in one.rests)
            )
            for one in solved
        )
        for solved in base.years.solved
    )
    wrong = dataclasses.replace(base.years, solved=moved)
    case = case_from(changed(loaded.case, loaded.data, "plant.turbine.efficiency", "+1%"))
    astray = dataclasses.replace(base, years=wrong)
    fresh, found = solve_physics(case, loaded.hours), solve_physics(case, loaded.hours, astray)
    for one, other in zip(fresh.years.solved[0], found.years.solved[0], strict=True):
        assert np.array_equal(one.on, other.on)
        np.testing.assert_allclose(other.power_net_MW, one.power_net_MW, rtol=1e-9, atol=1e-9)
