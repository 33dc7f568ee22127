"""Every case that comes along is read without faults, runs, and closes in energy and money.

The studies here leave out what solves the year tens of times over: tornado, draws, moves of the gain and
design choice. The smallest case is run in full.
"""

import copy
import importlib.util
import json
from dataclasses import replace
from functools import cache
from pathlib import Path
from types import ModuleType
from typing import Any

import numpy as np
import openpyxl
import pytest

import appraise.study
from appraise import cli
from appraise.case.load import LoadedCase, case_from, load_case
from appraise.output import json_text
from appraise.results import study_json
from appraise.study import Study, run_study

INPUTS = Path(__file__).parents[1] / "inputs"
CASES = sorted(path.name for path in INPUTS.glob("*.toml"))
MUST_PASS = {
    "closure at the design point",
    "closure over all hours",
    "lines sum to the net flow",
    "net present value, computed a second time",
    "value left at the internal rate of return",
}
ONE_PAGE = 90  # lines


def without_risk(loaded: LoadedCase) -> LoadedCase:
    """The case without drivers and draws, which take most of the time."""
    data = copy.deepcopy(dict(loaded.data))
    for name in ("drivers", "draws"):
        data.pop(name, None)
    return replace(loaded, case=case_from(data), data=data)


@cache
def studied(name: str) -> Study:
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(appraise.study, "gain_moves", lambda *_: ())
        patch.setattr(appraise.study, "chosen_design", lambda *_: None)
        return run_study(without_risk(load_case(INPUTS / name)), draws=0)


def script(name: str) -> ModuleType:
    """A script beside the cases, without running it."""
    spec = importlib.util.spec_from_file_location(name, INPUTS / f"{name}.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def refuse(word: str) -> None:
    raise AssertionError(f"{word} in the JSON")


def test_the_cases_are_here() -> None:
    assert {"hollowmere.toml", "marrowby.toml", "smallest.toml"} <= set(CASES)


@pytest.mark.parametrize("name", CASES)
def test_read_without_faults_and_one_doubt_that_invented_plants_deserve(name: str) -> None:
    assert [problem.where for problem in load_case(INPUTS / name).doubts] == ["plant.measured"]


@pytest.mark.parametrize("name", CASES)
def test_runs_and_closes_in_energy_and_money(name: str) -> None:
    study = studied(name)
    found = {check.name: check for check in study.checks if check.name in MUST_PASS}
    assert set(found) == MUST_PASS
    for check in found.values():
        assert check.passed, check
        assert check.value is not None
    assert np.isfinite(study.comparison.npv).all()
    assert np.abs(study.comparison.npv).max() > 0.0


@pytest.mark.parametrize("name", CASES)
def test_json_has_no_number_that_is_none(name: str) -> None:
    told = json.loads(json_text(study_json(studied(name))), parse_constant=refuse)
    case = studied(name).case
    assert len(told["year"]) == len(case.options) * len(case.scenarios)


@pytest.mark.parametrize(
    ("name", "series"), [("hollowmere_year", "hollowmere-year"), ("smallest_year", "smallest")]
)
def test_the_script_makes_the_hours_again(name: str, series: str) -> None:
    assert script(name).text().encode("ascii") == (INPUTS / f"{series}.csv").read_bytes()


# --- Hollowmere -------------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def hollowmere() -> Study:
    return studied("hollowmere.toml")


def figures(study: Study) -> dict[str, Any]:
    """Figures of the first year in the reference scenario, by option."""
    return {told.option: told for told in study.year_figures[study.reference]}


def test_hollowmere_uses_what_it_shows(hollowmere: Study) -> None:
    """Every part that the case is there for is at work in its year."""
    told = figures(hollowmere)
    years = hollowmere.physics.years.solved[0]
    assert all(balance.heater_bleed_kg_s > 0.0 for balance in hollowmere.balances)
    assert all(float(option.flue_gas_MW.max()) > 0.0 for option in years)
    assert told["single"].hours_at_generator_limit > 0
    assert told["single"].power_lost_MWh > 0.0
    assert told["single"].peak_heat_MWh > 0.0
    assert told["two-stage"].hours_bypassed > 0
    assert told["two-stage-pumped"].hours_bypassed == 0
    assert len(hollowmere.balances[3].stages) == 3


def test_extra_fuel_at_a_negative_price_is_income(hollowmere: Study) -> None:
    """Each line of the cash flow of fuel has the sign of the fuel saved times its price."""
    for run in hollowmere.runs:
        for traded, flow in zip(run.traded[1:], run.flows[1:], strict=True):
            operating = flow.lines.fuel[len(hollowmere.case.capex.spend) :]
            assert (traded.increment.fuel_MWh > 0.0).all()
            assert (operating > 0.0).all()


def test_a_tail_with_its_own_generator_escapes_the_plants_limit(hollowmere: Study) -> None:
    """Together the two generators make more than the plant's alone could."""
    limit = hollowmere.case.plant.turbine.generator_limit_MW
    assert limit is not None
    base, *others = hollowmere.physics.years.solved[0]
    assert float(base.power_gross_MW.max()) == pytest.approx(limit, rel=1e-12)
    for option in others:
        assert float(option.power_gross_MW.max()) > limit


# --- the smallest -----------------------------------------------------------------------------------------


def test_the_smallest_fits_on_a_page() -> None:
    assert len((INPUTS / "smallest.toml").read_text(encoding="utf-8").splitlines()) <= ONE_PAGE
    head, first = (INPUTS / "smallest.csv").read_text(encoding="ascii").splitlines()[:2]
    assert head == "time,outdoor_C"
    assert first.count(",") == 1


def test_the_smallests_heat_and_temperatures_follow_the_outdoors() -> None:
    """By hand: signature and heating curve at two hours of the file."""
    study = studied("smallest.toml")
    outdoor = study.hours.outdoor_C
    assert outdoor is not None
    assert study.hours.heat_MW is None
    assert study.hours.supply_C is None
    base = study.physics.years.solved[0][study.physics.years.baseline]
    cold = int(np.argmin(outdoor))
    asked = 2.6 + 0.85 * (16.0 - outdoor[cold])
    assert float(base.heat_MW[cold] + base.peak_heat_MW[cold]) == pytest.approx(asked, rel=1e-9)


def test_the_smallest_as_a_workbook(tmp_path: Path) -> None:
    out, results = tmp_path / "smallest.xlsx", tmp_path / "smallest.json"
    call = ["run", str(INPUTS / "smallest.toml"), "--out", str(out), "--json", str(results), "--quiet"]
    assert cli.main(call) == 0
    book = openpyxl.load_workbook(out, read_only=True)
    assert book.sheetnames[0] == "Decision"
    book.close()
    told = json.loads(results.read_text(encoding="utf-8"), parse_constant=refuse)
    option = next(one for one in told["cash_flow"] if one["option"] == "two-stage")
    assert option["npv"] == pytest.approx(float(studied("smallest.toml").comparison.npv[0, 1]), rel=1e-12)
