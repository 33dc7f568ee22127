"""A year of somebody else's weather and demand: a German test reference year and its standard load profile.

Temperatures: test reference year of the German Weather Service (Deutscher Wetterdienst), 2010, region 4,
station Potsdam, mean year of 1988 to 2007. Demand: standard load profile of multi-family houses (BDEW, VKU,
GEODE: Leitfaden Abwicklung von Standardlastprofilen Gas). Both come with the library `demandlib` (MIT).
"""

import tomllib
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import date, timedelta
from pathlib import Path

import numpy as np
import pytest

from appraise.capex import capital
from appraise.case.hours import Hours
from appraise.case.load import Case, case_from
from appraise.chain import Physics, run_scenario, solve_physics
from appraise.trade import YearFigures, year_figures

demandlib = pytest.importorskip("demandlib", reason="demandlib, which carries the weather, is not installed")

DEMO = Path(__file__).parents[1] / "inputs" / "marrowby.toml"
HEAT_MWH = 190_000.0
CURVE = {"outdoor_C": [-12.0, 0.0, 10.0], "supply_C": [108.0, 92.0, 76.0], "return_C": [44.0, 46.0, 50.0]}


@contextmanager
def _old_fashioned() -> Iterator[None]:
    """The library calls pandas in ways that newer versions warn of; that is not what is tested here."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", DeprecationWarning)
        warnings.simplefilter("ignore", FutureWarning)
        yield


def outdoor_C() -> np.ndarray:
    """Hourly air temperature of the test reference year."""
    from demandlib.vdi.dwd_try import read_dwd_weather_file

    folder = Path(demandlib.__file__).parent / "vdi" / "resources_weather"
    with _old_fashioned():
        table = read_dwd_weather_file(str(folder / "TRY2010_04_Jahr.dat"))
    return table["TAMB"].to_numpy(dtype=float)


def heat_MW(outdoor: np.ndarray) -> np.ndarray:
    """Standard load profile at these temperatures, hourly, scaled to the plant's year."""
    import pandas
    from demandlib import bdew

    index = pandas.date_range("2010-01-01", periods=outdoor.size, freq="h")
    with _old_fashioned():
        houses = bdew.HeatBuilding(
            index,
            temperature=pandas.Series(outdoor, index=index),
            shlp_type="MFH",
            building_class=5,
            wind_class=0,
            annual_heat_demand=HEAT_MWH,
        )
        profile = houses.get_bdew_profile().to_numpy(dtype=float)
    return profile * HEAT_MWH / profile.sum()  # its hourly factors add up to 1.00006 of the year


@pytest.fixture(scope="module")
def year() -> tuple[Case, Hours, Physics]:
    data = tomllib.loads(DEMO.read_text(encoding="utf-8"))
    data["network"]["heating_curve"] = CURVE
    case, outdoor = case_from(data), outdoor_C()
    hours = Hours(
        time=np.arange("2010-01-01T00", "2011-01-01T00", dtype="datetime64[h]"),
        heat_MW=heat_MW(outdoor),
        outdoor_C=outdoor,
        supply_C=None,
        return_C=None,
        power_price=None,
        number_of_years=1,
    )
    return case, hours, solve_physics(case, hours)


@pytest.fixture(scope="module")
def figures(year) -> dict[str, YearFigures]:
    """The first operating year of every option by its key."""
    case, hours, physics = year
    run = run_scenario(case, hours, physics, capital(case, physics.sizes), "central")
    return {
        option.key: year_figures(case, physics.years, i, run.traded[i], run.prices, run.shape, 0.0)
        for i, option in enumerate(case.options)
    }


def test_weather_and_profile_are_what_they_should_be(year):
    """Germany's north-east: some 9 degrees in the mean, frost in winter; all of the year's heat is there."""
    _, hours, _ = year
    assert hours.time.size == 8760
    assert 8.0 < hours.outdoor_C.mean() < 11.0
    assert hours.outdoor_C.min() < -8.0
    assert hours.heat_MW.sum() == pytest.approx(HEAT_MWH, rel=1e-9)
    assert np.corrcoef(hours.outdoor_C, hours.heat_MW)[0, 1] < -0.8


def test_every_hour_closes(year):
    _, _, physics = year
    for option in physics.years.solved[0]:
        assert option.greatest.closure.hour[0] >= 0
        assert option.greatest.closure.value[0] < 1e-9


def test_plant_and_peak_boilers_carry_the_demand(year, figures):
    _, hours, physics = year
    for option in physics.years.solved[0]:
        assert option.heat_MW + option.peak_heat_MW == pytest.approx(hours.heat_MW, rel=1e-12)
        assert option.peak_heat_MW.min() >= -1e-9
    for found in figures.values():
        assert found.heat_MWh + found.peak_heat_MWh == pytest.approx(HEAT_MWH, rel=1e-9)
        assert 0.6 * HEAT_MWH < found.heat_MWh < HEAT_MWH


def test_hours_are_plausible(year, figures):
    """Off in the three weeks of the outage and in warm hours, at the limit in some cold ones."""
    case, hours, _ = year
    outage = date(2010, 7, 26) - date(2010, 7, 6) + timedelta(days=1)
    for found in figures.values():
        assert 4000 < found.hours_on < 8760 - 24 * outage.days
        assert found.hours_on <= np.count_nonzero(hours.heat_MW > 8.0)
        assert 0 < found.hours_at_limit < 2000
        assert 0 < found.hours_deaerator_on_live_steam < found.hours_on
        assert found.hours_as_baseline == 0
    base = figures[case.baseline.key]
    assert {found.hours_on for found in figures.values()} == {base.hours_on}


def test_second_stage_gains(figures):
    """Extra power in the year, more with surface and a tail than with surface alone, paid in fuel."""
    assert figures["single"].extra_power_MWh == 0.0
    assert 0.0 < figures["single-large"].extra_power_MWh < figures["two-stage"].extra_power_MWh
    assert figures["two-stage"].extra_power_MWh < figures["two-stage-subcooled"].extra_power_MWh
    for key in ("two-stage", "two-stage-subcooled"):
        assert 0.01 < figures[key].extra_power_per_heat < 0.04
        assert 0.6 < figures[key].incremental_efficiency < 0.95
