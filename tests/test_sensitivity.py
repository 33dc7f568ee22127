"""The tornado: every bar is what the whole study of the changed case would say."""

from pathlib import Path
from typing import Any

import numpy as np
import pytest
from cases import minimal_case, toml_text, write_case

from appraise.case.load import LoadedCase, load_case
from appraise.case.paths import changed
from appraise.chain import case_npv, physics_key, run_scenario, solve_physics
from appraise.sensitivity import Bar, Tornado, tornado
from appraise.study import Study, run_study

TECHNICAL = ("plant.turbine.efficiency", "year.supply_offset_K", "new_condenser.terminal_difference_K")


def drivers(*ends: tuple[str, Any, Any]) -> list[dict[str, Any]]:
    """Drivers with their path as label."""
    return [{"label": path, "path": path, "low": low, "high": high} for path, low, high in ends]


def small(folder: Path, *ends: tuple[str, Any, Any]) -> LoadedCase:
    """The small case with other drivers, on the disk and read again."""
    return load_case(write_case(folder, minimal_case() | {"drivers": drivers(*ends)}))


def bars_of(loaded: LoadedCase) -> dict[str, Bar]:
    """The bars of the only option beside the baseline, by path."""
    (only,) = run_study(loaded).tornado
    return {bar.path: bar for bar in only.bars}


# --- the demo's bars against studies of changed files ------------------------------------------------------


@pytest.mark.parametrize("path", TECHNICAL)
@pytest.mark.parametrize("end", ["low", "high"])
def test_a_technical_bar_is_the_whole_study_of_the_changed_case(
    marrowby_study: Study, tmp_path: Path, path: str, end: str
) -> None:
    loaded = marrowby_study.loaded
    (driver,) = (driver for driver in loaded.case.drivers if driver.path == path)
    data = changed(loaded.case, loaded.data, path, getattr(driver, end))
    (tmp_path / loaded.hours_path.name).write_bytes(loaded.hours_path.read_bytes())
    file = tmp_path / "changed.toml"
    file.write_text(toml_text(data), encoding="utf-8")
    again = load_case(file)
    assert again.case_sha256 != loaded.case_sha256
    npv = case_npv(again.case, again.hours, again.case.study.reference_scenario)
    for index, option in enumerate(again.case.options):
        if option.baseline:
            assert npv[index] == 0.0
            continue
        (bar,) = (b for b in of_option(marrowby_study, option.key).bars if b.path == path)
        assert bar.resolved
        assert getattr(bar, f"npv_{end}") == pytest.approx(npv[index], rel=1e-9)


def of_option(study: Study, key: str) -> Tornado:
    """The tornado of one option."""
    return next(one for one in study.tornado if one.option == key)


def test_bars_are_sorted_and_as_wide_as_their_ends(marrowby_study: Study) -> None:
    for one in marrowby_study.tornado:
        assert [bar.swing for bar in one.bars] == sorted((bar.swing for bar in one.bars), reverse=True)
        assert {bar.path for bar in one.bars} == {driver.path for driver in marrowby_study.case.drivers}
        for bar in one.bars:
            assert bar.npv_low is not None
            assert bar.npv_high is not None
            ends = (one.base_npv, bar.npv_low, bar.npv_high)
            assert bar.swing == max(ends) - min(ends)
    assert all(bar.swing > 0.0 for bar in of_option(marrowby_study, "two-stage").bars)
    unmoved = {bar.path for bar in of_option(marrowby_study, "single-large").bars if bar.swing == 0.0}
    assert unmoved == {  # it has none of what these move
        "tail.efficiency",
        "new_condenser.terminal_difference_K",
        "new_condenser.pressure_drop_bar",
    }


def test_every_option_but_the_baseline_has_a_tornado_around_its_value(marrowby_study: Study) -> None:
    case, npv = marrowby_study.case, marrowby_study.comparison.npv[marrowby_study.reference]
    expected = {o.key: npv[i] for i, o in enumerate(case.options) if not o.baseline}
    assert {one.option: one.base_npv for one in marrowby_study.tornado} == expected


def test_the_plant_is_solved_again_exactly_for_what_belongs_to_it(marrowby_study: Study) -> None:
    money = ("scenario.", "capex.", "opex.", "finance.", "study.")
    for one in marrowby_study.tornado:
        for bar in one.bars:
            assert bar.resolved == (not bar.path.startswith(money)), bar.path


def test_money_moves_the_way_it_must(marrowby_study: Study) -> None:
    bars = {bar.path: bar for bar in of_option(marrowby_study, "two-stage").bars}
    rising = ("scenario.power", "scenario.power_premium.value", "study.years", "tail.efficiency")
    falling = ("scenario.fuel", "scenario.carbon", "capex.multiplier", "finance.discount_rate")
    for path in rising:
        assert bars[path].npv_low < bars[path].npv_high, path
    for path in falling:
        assert bars[path].npv_low > bars[path].npv_high, path


# --- a small case ------------------------------------------------------------------------------------------


def test_swapped_ends_swap_the_bar(tmp_path: Path) -> None:
    ends = [("scenario.power", "-20%", "+20%"), ("tail.efficiency", 0.75, 0.82)]
    one = bars_of(small(tmp_path, *ends))
    other = bars_of(small(tmp_path, *((path, high, low) for path, low, high in ends)))
    for path, bar in one.items():
        assert (bar.npv_low, bar.npv_high) == (other[path].npv_high, other[path].npv_low)
        assert bar.npv_low != bar.npv_high
        assert (bar.low, bar.high) == (other[path].high, other[path].low)
        assert bar.swing == other[path].swing


def test_a_percentage_is_the_value_it_stands_for(tmp_path: Path) -> None:
    ends = [("scenario.power", "-10%", "+10%"), ("plant.boiler.efficiency", "-5%", "+5%")]
    scaled = bars_of(small(tmp_path, *ends))
    power, boiler = 62.0, 0.89
    numbers = [
        ("scenario.power", power * 0.9, power * 1.1),
        ("plant.boiler.efficiency", boiler * 0.95, boiler * 1.05),
    ]
    plain = bars_of(small(tmp_path, *numbers))
    for path, bar in scaled.items():
        assert bar.npv_low == pytest.approx(plain[path].npv_low, rel=1e-12)
        assert bar.npv_high == pytest.approx(plain[path].npv_high, rel=1e-12)


def test_an_end_that_the_case_refuses_says_why_and_the_rest_stands(tmp_path: Path) -> None:
    found = bars_of(
        small(
            tmp_path,
            ("plant.feed.bleed_bar", 2.0, 5.5),
            ("plant.live_steam.temperature_C", 280.0, 490.0),
            ("scenario.power", "-20%", "+20%"),
        )
    )
    bleed, steam, power = (
        found[p] for p in ("plant.feed.bleed_bar", "plant.live_steam.temperature_C", "scenario.power")
    )
    assert bleed.npv_low is None
    assert bleed.reason_low == "plant.feed.bleed_bar: 2 bar given; allowed: above the deaerator's 2.5 bar"
    assert steam.npv_low is None
    assert steam.reason_low is not None
    assert steam.reason_low.startswith("plant.live_steam.temperature_C: 280 °C; must be at least 28")
    for bar in (bleed, steam):
        assert bar.npv_high is not None
        assert bar.reason_high is None
        assert bar.resolved
    assert (power.reason_low, power.reason_high, power.resolved) == (None, None, False)


def test_where_both_ends_fail_the_bar_has_no_width_and_stands_last(tmp_path: Path) -> None:
    loaded = small(
        tmp_path,
        ("plant.feed.bleed_bar", 1.0, 2.0),
        ("scenario.power", "-1%", "+1%"),
        ("tail.efficiency", 0.79, 0.81),
    )
    (only,) = run_study(loaded).tornado
    last = only.bars[-1]
    assert last.path == "plant.feed.bleed_bar"
    assert (last.npv_low, last.npv_high, last.swing) == (None, None, 0.0)


def test_a_driver_at_the_studys_own_value_is_a_bar_without_width(tmp_path: Path) -> None:
    loaded = small(tmp_path, ("tail.efficiency", 0.80, 0.80), ("scenario.power", "+0%", "-0%"))
    assert {path: bar.swing for path, bar in bars_of(loaded).items()} == {
        "tail.efficiency": 0.0,
        "scenario.power": 0.0,
    }


def test_known_physics_is_used_for_money_and_refused_for_another_plant(tmp_path: Path) -> None:
    """What the tornado saves: nothing is solved twice, and nothing stands in for another plant."""
    loaded = small(tmp_path, ("scenario.power", "-20%", "+20%"))
    case, hours, data = loaded.case, loaded.hours, loaded.data
    known = solve_physics(case, hours)
    other_money = load_changed(loaded, "scenario.power", 80.0)
    assert solve_physics(other_money, hours, known) is known
    other_plant = load_changed(loaded, "plant.turbine.efficiency", 0.8)
    assert physics_key(other_plant) != known.key
    assert solve_physics(other_plant, hours, known) is not known
    fresh, reused = (case_npv(other_money, hours, "central", physics) for physics in (None, known))
    np.testing.assert_allclose(reused, fresh, rtol=1e-12)
    assert data == loaded.data


def load_changed(loaded: LoadedCase, path: str, value: float) -> Any:
    from appraise.case.load import case_from

    return case_from(changed(loaded.case, loaded.data, path, value))


def test_no_drivers_no_bars(tmp_path: Path) -> None:
    loaded = small(tmp_path)
    physics = solve_physics(loaded.case, loaded.hours)
    from appraise.capex import capital

    run = run_scenario(loaded.case, loaded.hours, physics, capital(loaded.case, physics.sizes), "central")
    (only,) = tornado(loaded.case, loaded.data, loaded.hours, physics, run.npv, lambda fraction, label: None)
    assert only.bars == ()
    assert only.base_npv == run.npv[1]
