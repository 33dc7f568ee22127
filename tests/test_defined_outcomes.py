"""Hours and options that cannot be as asked: refused by their place, or run by a rule that is counted."""

from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from cases import csv_text, minimal_case, synthetic_hours, write_case

from appraise.case.load import LoadedCase, load_case
from appraise.chain import solve_physics
from appraise.cycle.balance import design_balances
from appraise.cycle.design import design
from appraise.errors import CaseError
from appraise.prices import price_shape
from appraise.year import OptionYear


def loaded_with(folder: Path, hours: list[list[str]] | None = None, **changes: Any) -> LoadedCase:
    """The small case with dotted paths changed (`__` for a dot) and hours of its own."""
    data = minimal_case()
    data["drivers"] = []
    for path, value in changes.items():
        *tables, key = path.split("__")
        node: Any = data
        for table in tables:
            node = node.setdefault(table, {})
        node[key] = value
    return load_case(write_case(folder, data, None if hours is None else csv_text(hours)))


def years_of(loaded: LoadedCase) -> tuple[OptionYear, ...]:
    return solve_physics(loaded.case, loaded.hours).years.solved[0]


def refusal(loaded: LoadedCase) -> list[str]:
    with pytest.raises(CaseError) as caught:
        solve_physics(loaded.case, loaded.hours)
    return [str(problem) for problem in caught.value.problems]


def test_water_near_boiling_is_refused_by_its_row(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path)
    supply = np.array(loaded.hours.supply_C)
    supply[16] = 178.0
    hot = replace(loaded, hours=replace(loaded.hours, supply_C=supply))
    assert refusal(hot) == [
        f"{loaded.case.year.series} row 18, column supply_C: 178 °C; must stay at or below 174.9 °C, "
        "5 K under boiling at the network's 10 bar"
    ]


def test_a_later_year_that_boils_is_refused_too(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path, year__supply_change_K_per_year=6.0)
    assert "must stay at or below 174.9 °C" in refusal(loaded)[0]


def test_wet_live_steam_is_refused(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path, plant__live_steam__temperature_C=280.0)
    assert refusal(loaded)[0].startswith("plant.live_steam.temperature_C: 280 °C; must be at least ")


def test_hours_without_heat_are_hours_off(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path)
    heat = np.array(loaded.hours.heat_MW)
    heat[100:200] = 0.0
    years = years_of(replace(loaded, hours=replace(loaded.hours, heat_MW=heat)))
    for year in years:
        assert not year.on[100:200].any()
        assert not year.fuel_MW[100:200].any()
        assert not year.peak_heat_MW[100:200].any()


def test_a_year_that_never_runs_has_sums_of_zero(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path)
    none = replace(loaded.hours, heat_MW=np.zeros(loaded.hours.time.size))
    for year in years_of(replace(loaded, hours=none)):
        assert not year.on.any()
        assert year.power_net_MW.sum() == 0.0
        assert (year.greatest.moisture.hour == -1).all()


def test_without_prices_every_hour_counts_alike(tmp_path: Path) -> None:
    hours = [row[:-1] for row in synthetic_hours()]
    loaded = loaded_with(tmp_path, hours)
    assert loaded.hours.power_price is None
    assert (price_shape(loaded.case, loaded.hours, loaded.case.study.reference_scenario) == 1.0).all()


def test_heat_above_all_limits_goes_to_peak_boilers(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path)
    heat = np.full(loaded.hours.time.size, 400.0)
    for year in years_of(replace(loaded, hours=replace(loaded.hours, heat_MW=heat))):
        assert year.at_steam_limit.all()
        assert year.live_steam_kg_s == pytest.approx(loaded.case.plant.live_steam.max_kg_s, rel=1e-8)
        assert year.heat_MW + year.peak_heat_MW == pytest.approx(400.0)


def test_a_tail_below_its_least_flow_runs_as_the_baseline_and_is_counted(tmp_path: Path) -> None:
    base, option = years_of(loaded_with(tmp_path, tail__min_flow_share=0.9))[:2]
    few = option.below_tail_minimum
    assert few.sum() > 100
    assert (option.as_baseline[few]).all()
    assert (option.power_net_MW[few] == base.power_net_MW[few]).all()


def test_a_bleed_below_the_deaerator_gives_way_to_live_steam(tmp_path: Path) -> None:
    years = years_of(loaded_with(tmp_path, plant__feed__deaerator_bar=3.5))
    for year in years:
        assert year.on_live_steam[year.on].any()


def test_a_bleed_below_the_exhaust_is_refused(tmp_path: Path) -> None:
    loaded = loaded_with(
        tmp_path,
        plant__feed__bleed_bar=1.3,
        plant__feed__deaerator_bar=1.25,
        plant__design__supply_C=112.0,
    )
    told = refusal(loaded)
    assert len(told) == 1
    assert told[0].startswith("plant.feed.bleed_bar: 1.3 bar; must lie above the baseline's exhaust, ")


def test_an_option_that_cannot_be_built_is_named(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path, new_condenser__terminal_difference_K=49.0)
    told = refusal(loaded)
    assert len(told) == 1
    assert told[0].startswith("options.two-stage: cannot be built: the shell of stage 1 needs ")


def test_a_tail_without_a_pressure_drop_is_named(tmp_path: Path) -> None:
    """Its inlet loss takes more than the two condensers are apart."""
    told = refusal(loaded_with(tmp_path, tail__inlet_loss_share=0.49, plant__design__return_C=88.0))
    assert len(told) == 1
    assert told[0].startswith("options.two-stage: cannot be built: the tail section into stage 1 has ")


def test_a_design_point_over_the_limits_only_warns(tmp_path: Path) -> None:
    loaded = loaded_with(tmp_path, plant__live_steam__max_kg_s=15.0)
    made = design(loaded.case)
    balance = design_balances(loaded.case, made)[0]
    assert balance.live_steam_kg_s > 15.0
    assert balance.remarks == (
        f"{balance.live_steam_kg_s:.1f} kg/s of live steam, above max_kg_s 15: the plant cannot do this",
    )
