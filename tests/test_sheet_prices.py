"""The Prices sheet: every path by year, as Python has it, also after a change of inputs."""

import pytest
from libreoffice import needs_libreoffice
from sheet_money import cached_small_study, small_followed
from study_fixture import marrowby_study

from appraise.prices import scenario_prices
from appraise.workbook.cells import YEAR_ZERO
from appraise.workbook.naming import Timeline
from appraise.workbook.price_rows import KINDS, Place
from appraise.workbook.prices import prices_sheet

pytestmark = pytest.mark.filterwarnings("ignore:Unable to read chart:UserWarning")


@needs_libreoffice
@pytest.mark.parametrize("scenario", ["central", "low"])
def test_paths_and_the_chosen_rows_follow_the_inputs(scenario: str) -> None:
    seen = small_followed(scenario)
    case = seen.fresh.case
    before = [0.0] * len(case.capex.spend)
    for name in case.scenarios:
        prices = scenario_prices(case, name)
        for kind in KINDS:
            expected = pytest.approx([*before, *getattr(prices, kind.name)], rel=1e-12)
            assert seen.row("price", kind.name, name) == expected, (name, kind.name)
            if name == scenario:
                assert seen.row("chosen", kind.name) == expected, kind.name
    assert seen.value("chosen_index") == 1 + list(case.scenarios).index(scenario)


def test_every_scenario_is_charted_from_the_first_year_of_operation() -> None:
    study = marrowby_study()
    sheet, time = prices_sheet(study), Timeline.of(study.case)
    titles = [scenario.title for scenario in study.case.scenarios.values()]
    assert len(sheet.charts) == 4
    for chart in sheet.charts:
        assert [series.label for series in chart.series] == titles
        assert all(title in chart.alt for title in titles)
        assert chart.categories is not None
        first = chart.categories[1].partition(":")[0]
        assert first == f"{chr(ord('A') + YEAR_ZERO - 1 + time.spend)}4"


def test_a_price_that_is_one_number_has_one_input_and_a_list_has_its_places() -> None:
    sheet = prices_sheet(cached_small_study())
    formulas = {cell.formula for cell in sheet.cells.values()}
    assert any("*in_scenarios_low_fuel" in text for text in formulas)
    assert any("INDEX(in_scenarios_central_power_value" in text for text in formulas)
    assert not any("in_scenarios_low_power_premium" in text for text in formulas)


def test_a_list_of_one_point_needs_no_place() -> None:
    place = Place(9, "scenarios.a.carbon", 1)
    assert place.price("D") == "INDEX(in_scenarios_a_carbon_value,1)"
