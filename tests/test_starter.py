"""The demo case: the copy in the package, the script behind its hours, and a year that looks like a year."""

import csv
import importlib.util
import tomllib
from datetime import datetime, timedelta
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest

from appraise.starting import starter_files

INPUTS = Path(__file__).parents[1] / "inputs"
COLUMNS = ("heat_MW", "outdoor_C", "supply_C", "return_C", "power_price")


@pytest.fixture(scope="module")
def script() -> ModuleType:
    spec = importlib.util.spec_from_file_location("marrowby_year", INPUTS / "marrowby_year.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def rows() -> list[dict[str, str]]:
    with (INPUTS / "marrowby-year.csv").open(encoding="ascii", newline="") as file:
        return list(csv.DictReader(file))


@pytest.fixture(scope="module")
def year(rows: list[dict[str, str]]) -> dict[str, np.ndarray]:
    return {name: np.array([float(row[name]) for row in rows]) for name in COLUMNS}


@pytest.fixture(scope="module")
def case() -> dict:
    return tomllib.loads((INPUTS / "marrowby.toml").read_text(encoding="utf-8"))


def test_the_starter_is_the_demo_case_byte_for_byte():
    starter = starter_files()
    assert list(starter) == ["marrowby.toml", "marrowby-year.csv"]
    for name, content in starter.items():
        assert content == (INPUTS / name).read_bytes(), f"{name} differs from inputs/{name}"


def test_the_script_makes_the_file_again(script: ModuleType, tmp_path: Path):
    again = tmp_path / "again.csv"
    script.write(again, *script.invented_year())
    assert again.read_bytes() == (INPUTS / "marrowby-year.csv").read_bytes()


def test_every_hour_of_one_year_in_order(rows: list[dict[str, str]]):
    assert list(rows[0]) == ["time", *COLUMNS]
    start = datetime(2025, 1, 1)
    assert [row["time"] for row in rows] == [
        f"{start + timedelta(hours=k):%Y-%m-%dT%H:%M}" for k in range(8760)
    ]


def test_heat_of_the_year(year: dict[str, np.ndarray]):
    heat = year["heat_MW"]
    assert heat.sum() == pytest.approx(190_000.0, abs=8760 * 0.005)  # two decimals in the file
    assert heat.min() > 4.0
    assert 50.0 < heat.max() < 65.0
    assert 0.10 < heat[heat < 12.0].sum() / heat.sum() < 0.15  # summer, when the plant stands


def test_network_temperatures(year: dict[str, np.ndarray]):
    supply, back = year["supply_C"], year["return_C"]
    assert supply.min() == 76.0
    assert 100.0 < supply.max() <= 110.0
    assert back.min() == 44.0
    assert back.max() == 52.0
    assert np.all(supply - back > 20.0)
    assert -15.0 < year["outdoor_C"].min() < -5.0
    assert 7.0 < year["outdoor_C"].mean() < 11.0


def test_heat_and_supply_follow_the_cold(year: dict[str, np.ndarray]):
    assert np.corrcoef(year["heat_MW"], year["outdoor_C"])[0, 1] < -0.85
    cold = year["outdoor_C"] < -5.0
    assert year["supply_C"][cold].mean() > year["supply_C"][~cold].mean() + 10.0


def test_power_price(year: dict[str, np.ndarray]):
    price = year["power_price"]
    assert price.mean() == pytest.approx(62.0, abs=0.005)  # two decimals in the file
    assert 50 < np.sum(price < 0.0) < 500
    capture = np.average(price, weights=year["heat_MW"]) / price.mean()
    assert 1.0 < capture < 1.2  # winter power is worth more


def test_options_scenarios_and_drivers(case: dict):
    assert [option["key"] for option in case["options"]] == [
        "single",
        "single-large",
        "two-stage",
        "two-stage-subcooled",
    ]
    assert [option["key"] for option in case["options"] if option.get("baseline")] == ["single"]
    assert list(case["scenarios"]) == ["central", "dear_fuel", "cheap_power", "high_carbon"]
    assert len({driver["path"] for driver in case["drivers"]}) == len(case["drivers"]) >= 18


@pytest.mark.parametrize("kind", ["notes", "drivers"])
def test_notes_and_drivers_point_at_values_of_the_file(case: dict, kind: str):
    paths = list(case["notes"]) if kind == "notes" else [driver["path"] for driver in case["drivers"]]
    reference = f"scenarios.{case['study']['reference_scenario']}."
    for path in paths:
        full = reference + path.removeprefix("scenario.") if path.startswith("scenario.") else path
        value = case
        for key in full.split("."):
            assert key in value, path
            value = value[key]


def test_every_cost_item_has_a_source_and_an_option(case: dict):
    options = {option["key"] for option in case["options"] if not option.get("baseline")}
    for item in case["capex"]["items"]:
        assert item["source"]
        assert set(item.get("only", options)) <= options, item["key"]
    paid = [item.get("only", options) for item in case["capex"]["items"] if "share" not in item]
    assert set().union(*paid) == options  # nothing is built for the contingency alone


def test_part_load_curve_is_the_published_one(case: dict):
    # Patnode, MSc thesis, University of Wisconsin, 2006, after Bartlett, 1958; three digits here.
    curve = case["plant"]["turbine"]["part_load"]
    load = np.array(curve["load"])
    published = 1.0 - (0.191 - 0.409 * load + 0.218 * load**2)
    np.testing.assert_allclose(curve["value"], published, atol=0.0005)
