"""The commands as a user meets them: exit status, everything they print, and the files they leave."""

import io
import json
import re
import sys
from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from types import ModuleType
from typing import Any

import openpyxl
import pytest
from calls import Answer, Call, contents
from cases import csv_text, minimal_case, synthetic_hours, write_case

from appraise import cli, files, output, results, study
from appraise.case.load import load_case
from appraise.case.paths import edited
from appraise.errors import SolveError
from appraise.results import run_summary, study_json
from appraise.starting import starter_files
from appraise.tables import WIDTH, Column, table
from appraise.workbook import book
from appraise.workbook.book import workbook_bytes

Read = pytest.CaptureFixture[str]
UNMEASURED = "  plant.measured: no steady test and no year.metered; the baseline was compared with no meter\n"


def usage(command: str, error: str) -> str:
    """What a wrong call says on standard error."""
    called = f"appraise {command}".strip()
    form = "[OPTIONS] CASE" if command else "[OPTIONS] COMMAND [ARGS]..."
    return f"Usage: {called} {form}\nTry '{called} --help' for help.\n\nError: {error}\n"


def fails_with(error: Exception) -> Callable[..., Any]:
    def failing(*arguments: Any, **named: Any) -> Any:
        raise error

    return failing


# --- new ---------------------------------------------------------------------------------------------------


def test_new_writes_the_starter_and_says_what_comes_next(call: Call, tmp_path: Path) -> None:
    answer = call("new", "my plant")
    assert (answer.status, answer.err) == (0, "")
    assert answer.out == (
        "wrote my plant/marrowby.toml\n"
        "wrote my plant/marrowby-year.csv\n"
        "next: appraise check 'my plant/marrowby.toml'\n"
    )
    assert contents(tmp_path / "my plant") == starter_files()
    assert call("check", "my plant/marrowby.toml").status == 0


def test_new_overwrites_nothing(call: Call, tmp_path: Path) -> None:
    (tmp_path / "town").mkdir()
    (tmp_path / "town" / "marrowby-year.csv").write_text("mine")
    answer = call("new", "town")
    assert answer == Answer(2, "", "Error: already there: town/marrowby-year.csv; nothing was written\n")
    assert contents(tmp_path) == {"town/marrowby-year.csv": b"mine"}


def test_new_into_a_file_is_refused(call: Call, tmp_path: Path) -> None:
    (tmp_path / "town").write_text("a file")
    answer = call("new", "town")
    where = tmp_path / "town"
    assert answer == Answer(2, "", f"Error: town/marrowby.toml: cannot be written, {where} is not a folder\n")


# --- check -------------------------------------------------------------------------------------------------


def test_check_tells_what_was_read(call: Call, case: Path, tmp_path: Path) -> None:
    before = contents(tmp_path)
    assert call("check", "case.toml") == Answer(
        0,
        """\
case.toml: A small plant
========================

options    single (baseline), two-stage
scenarios  central (reference)
hours      8760 from hours.csv, 2025-01-01T00 to 2025-12-31T23
capital    tail
drivers    1

1 doubt:
  plant.measured: no steady test and no year.metered; the baseline was compared with no meter
""",
        "",
    )
    assert contents(tmp_path) == before


def test_check_of_a_measured_plant_has_nothing_to_doubt(call: Call, tmp_path: Path) -> None:
    metered = {"heat_MWh": 1.9e5, "power_net_MWh": 5e4, "fuel_MWh": 2.7e5}
    write_case(tmp_path, edited(minimal_case(), "year.metered", metered))
    answer = call("check", "case.toml")
    assert (answer.status, answer.err) == (0, "")
    assert answer.out.endswith("\n\nNothing in it is doubtful.\n")


def test_check_tells_what_is_doubtful(call: Call, tmp_path: Path) -> None:
    data = edited(minimal_case(), "finance.discount_rate", 0.4)
    write_case(tmp_path, edited(data, "finance.inflation", 0.3))
    answer = call("check", "case.toml")
    assert (answer.status, answer.err) == (0, "")
    assert answer.out.endswith(
        "\n\n3 doubts:\n"
        f"{UNMEASURED}"
        "  finance.discount_rate: 0.4 a year is unusually high\n"
        "  finance.inflation: 0.3 a year is unusually high\n"
    )


def test_check_folds_long_lists(call: Call, tmp_path: Path) -> None:
    data = minimal_case()
    item = data["capex"]["items"][0]
    data["capex"]["items"] = [item | {"key": f"an-item-with-number-{number}"} for number in range(9)]
    write_case(tmp_path, data)
    answer = call("check", "case.toml")
    assert answer.status == 0
    assert max(map(len, answer.out.splitlines())) <= WIDTH
    listed = answer.out[answer.out.index("capital") : answer.out.index("drivers")]
    assert listed.split() == [
        "capital",
        *(f"an-item-with-number-{n}," for n in range(8)),
        "an-item-with-number-8",
    ]


# --- balance -----------------------------------------------------------------------------------------------


def rows_of(text: str) -> dict[str, list[str]]:
    """Rows of all tables by their first cell; cells stand two spaces apart."""
    cells = [re.split(r"\s{2,}", line) for line in text.splitlines() if "  " in line]
    return {first: rest for first, *rest in cells if first}


def test_balance_prints_the_table_and_nothing_else(call: Call, case: Path) -> None:
    answer = call("balance", "case.toml")
    loaded = load_case(case)
    title = "A small plant, design point: 40 MW, 98/46 °C"
    assert (answer.status, answer.err) == (0, "")
    assert answer.out == output.balance_table(study.balances(loaded.case), title, states=False) + "\n"


def test_the_table_has_the_numbers_of_the_json(call: Call, case: Path, tmp_path: Path) -> None:
    answer = call("balance", "case.toml", "--json", "new/balance.json", "--option", "two-stage")
    assert (answer.status, answer.err) == (0, "")
    assert answer.out.endswith("\nwrote new/balance.json\n")
    (told,) = json.loads((tmp_path / "new" / "balance.json").read_bytes())["options"]
    rows = rows_of(answer.out)
    assert rows["two-stage"] == [
        f"{told['heat_MW']:.2f}",
        f"{told['power_gross_MW']:.3f}",
        f"{told['power_net_MW']:.3f}",
        f"{told['fuel_MW']:.2f}",
        f"{told['live_steam_kg_s']:.3f}",
        f"{told['bleed_kg_s']:.3f}",
        f"{1e3 * told['extra_power_per_heat']:.2f}",
        f"{100 * told['ideal_gain_share']:.1f}",
        "< 1e-12",
    ]
    for label, stage in zip(("1 (cold)", "2 (hot)"), told["stages"], strict=True):
        area = stage["area_m2"]
        assert rows[label] == [
            f"{stage['shell_bar']:.4f}",
            f"{stage['saturation_C']:.2f}",
            f"{stage['water_in_C']:.2f}",
            f"{stage['water_out_C']:.2f}",
            f"{stage['terminal_difference_K']:.2f}",
            f"{stage['steam_kg_s']:.3f}",
            f"{100 * stage['moisture']:.2f}",
            f"{stage['exhaust_m3_s']:.2f}",
            f"{stage['heat_MW']:.3f}",
            "-" if area is None else f"{area:.0f}",
        ]
    for state in told["states"]:
        quality = state["quality"]
        assert rows[state["label"]] == [
            f"{state['pressure_bar']:.4f}",
            f"{state['temperature_C']:.2f}",
            f"{state['enthalpy_kJ_kg']:,.2f}",
            f"{state['entropy_kJ_kgK']:.4f}",
            "-" if quality is None else f"{quality:.4f}",
            f"{state['flow_kg_s']:.3f}",
        ]
    assert "single" not in rows


def test_balance_elsewhere_and_to_standard_output(call: Call, case: Path, tmp_path: Path) -> None:
    before = contents(tmp_path)
    answer = call("balance", "case.toml", "--at", "25,85,48", "--json", "-")
    assert (answer.status, answer.err) == (0, "")
    told = {one["key"]: one for one in json.loads(answer.out)["options"]}
    assert list(told) == ["single", "two-stage"]
    for one in told.values():
        assert one["heat_MW"] == pytest.approx(25.0, rel=1e-9)
        assert one["stages"][-1]["water_out_C"] == pytest.approx(85.0)
        assert one["stages"][0]["water_in_C"] == pytest.approx(48.0)
        assert one["ideal_gain_share"] is None
    at_design = {one.key: one for one in study.balances(load_case(case).case)}
    area = told["two-stage"]["stages"][0]["area_m2"]
    assert area == at_design["two-stage"].stages[0].area_m2  # sizes stay those of the design point
    assert contents(tmp_path) == before


def test_balance_elsewhere_says_where_and_what_is_unusual(call: Call, case: Path) -> None:
    answer = call("balance", "case.toml", "--at", "12,77,51")
    assert answer.status == 0
    assert answer.out.startswith("A small plant, off design: 12 MW, 77/51 °C\n")
    assert (
        "single: the bleed is below the deaerator, which takes throttled live steam.\n"
        "two-stage: the bleed is below the deaerator, which takes throttled live steam.\n"
    ) in answer.out


def test_an_option_that_cannot_run_is_said_to_run_as_the_baseline(case: Path) -> None:
    single, two = study.balances(load_case(case).case)
    text = output.balance_table([single, replace(two, runs_as_baseline=True)], "t", states=False)
    assert "two-stage: no steady operation of its own at this point; it runs as the baseline.\n" in text


def limited_case(folder: Path, **limits: float) -> Path:
    """The small case with limits of the plant, by their last key."""
    places = {
        "max_heat_MW": "plant.condenser",
        "max_fuel_MW": "plant.boiler",
        "generator_limit_MW": "plant.turbine",
        "min_kg_s": "plant.live_steam",
    }
    data = minimal_case()
    for key, limit in limits.items():
        data = edited(data, f"{places[key]}.{key}", limit)
    return write_case(folder, data)


def remarks_at(call: Call, *more: str) -> dict[str, list[str]]:
    """The remarks of every option in the JSON, after a look that each is printed as a line."""
    told = json.loads(call("balance", "case.toml", "--json", "-", *more).out)["options"]
    printed = " ".join(call("balance", "case.toml", *more).out.split())
    for one in told:
        for remark in one["remarks"]:
            assert f"{one['key']}: {remark}." in printed
    return {one["key"]: one["remarks"] for one in told}


def test_within_all_limits_there_is_nothing_to_remark(call: Call, tmp_path: Path) -> None:
    limited_case(tmp_path, max_heat_MW=40.0, max_fuel_MW=70.0, generator_limit_MW=16.0)
    assert remarks_at(call) == {"single": [], "two-stage": []}


def test_more_live_steam_than_there_is_is_remarked(call: Call, case: Path) -> None:
    assert remarks_at(call, "--at", "80,85,48") == {
        "single": ["38.5 kg/s of live steam, above max_kg_s 20: the plant cannot do this"],
        "two-stage": ["38.8 kg/s of live steam, above max_kg_s 20: the plant cannot do this"],
    }


def test_limits_are_remarked_at_the_design_point_too(call: Call, tmp_path: Path) -> None:
    limited_case(tmp_path, max_heat_MW=39.99, max_fuel_MW=62.0, generator_limit_MW=14.5)
    single, two = remarks_at(call).values()
    heat = "40.0 MW of heat, above max_heat_MW 39.99: the plant cannot do this"
    told = json.loads(call("balance", "case.toml", "--json", "-").out)["options"][1]
    free = json.loads(call("balance", str(write_free(tmp_path)), "--json", "-").out)["options"][1]
    lost = free["power_gross_MW"] - told["power_gross_MW"]
    assert single == [heat]
    assert two[0] == heat
    assert two[-1] == f"{lost:.3f} MW of power above generator_limit_MW 14.5 is lost"
    assert lost > 0.1


def write_free(folder: Path) -> Path:
    """The small case without a generator's limit, in a folder of its own."""
    (folder / "free").mkdir()
    return write_case(folder / "free", minimal_case())


def test_below_its_minimum_flow_the_plant_would_stand_still(call: Call, case: Path, tmp_path: Path) -> None:
    still = "0.5 kg/s of live steam, below min_kg_s 6: the plant would stand still"
    assert remarks_at(call, "--at", "1,85,48") == {"single": [still], "two-stage": [still]}
    told = {one["key"]: one for one in json.loads(call("balance", "case.toml", "--json", "-").out)["options"]}
    flows = [told[key]["live_steam_kg_s"] for key in ("single", "two-stage")]
    between = sum(flows) / 2.0
    assert flows[0] < between < flows[1]
    limited_case(tmp_path, min_kg_s=between)
    single, two = remarks_at(call).values()
    assert single[0].endswith(f" kg/s of live steam, below min_kg_s {between:g}: the plant would stand still")
    assert two == [f"the baseline would stand still here, below min_kg_s {between:g}, and the option with it"]


def test_an_option_that_runs_as_the_baseline_shows_the_old_condenser_alone(call: Call, case: Path) -> None:
    told = json.loads(call("balance", "case.toml", "--at", "1,85,48", "--json", "-").out)["options"]
    assert [one["runs_as_baseline"] for one in told] == [False, True]
    assert [[stage["area_m2"] for stage in one["stages"]] for one in told] == [[None], [None]]


def test_a_tail_with_a_generator_of_its_own_loses_power_at_its_own_limit(call: Call, tmp_path: Path) -> None:
    data = edited(minimal_case(), "tail", {"efficiency": 0.8, "generator_limit_MW": 0.5})
    write_case(tmp_path, data)
    single, two = remarks_at(call).values()
    assert single == []
    assert len(two) == 1
    assert re.fullmatch(r"\d\.\d{3} MW of power above the tail's generator_limit_MW 0\.5 is lost", two[0])


def test_no_line_is_wider_than_a_page(call: Call, tmp_path: Path) -> None:
    data = edited(minimal_case(), "options.two-stage.key", "two-stage-with-a-very-long-name-" * 3)
    data["study"]["title"] = "A plant with a title that goes on and on " * 5
    write_case(tmp_path, data)
    answer = call("balance", "case.toml", "--option", data["options"][1]["key"])
    assert answer.status == 0
    assert max(map(len, answer.out.splitlines())) <= WIDTH == 100
    assert "…" in answer.out


def test_a_table_lines_up() -> None:
    columns = [Column("thing"), Column("two\nlines", "MW", 1), Column("word")]
    assert table(columns, [["a", 1234.56, "x"], ["long name", None, "y"]]) == "\n".join(
        [
            "               two",
            "thing        lines  word",
            "                MW",
            "---------  -------  ----",
            "a          1,234.6  x",
            "long name        -  y",
        ]
    )


# --- run ---------------------------------------------------------------------------------------------------


def short_case(folder: Path) -> Path:
    """The small case without drivers, which runs in a few seconds."""
    return write_case(folder, edited(edited(minimal_case(), "drivers", []), "study.date", "2026-12-01"))


@pytest.fixture(scope="module")
def solved(tmp_path_factory: pytest.TempPathFactory) -> study.Study:
    """The study of the short case, for what is done with it afterwards."""
    return study.run_study(load_case(short_case(tmp_path_factory.mktemp("solved"))))


@pytest.fixture
def at_once(solved: study.Study, monkeypatch: pytest.MonkeyPatch) -> study.Study:
    """Has the study solved already when a command asks for it."""
    monkeypatch.setattr(study, "run_study", lambda loaded, *more: solved)
    return solved


def test_run_writes_workbook_and_json_and_sums_up(call: Call, tmp_path: Path) -> None:
    short_case(tmp_path)
    before = contents(tmp_path)
    answer = call("run", "case.toml", "--json", "results/case.json")
    assert (answer.status, answer.err) == (0, f"1 doubt:\n{UNMEASURED}")
    summary, wrote = answer.out[: answer.out.index("\nwrote")], answer.out[answer.out.index("\nwrote") :]
    assert wrote == "\nwrote reports/case.xlsx\nwrote results/case.json\n"
    told = study.run_study(load_case(tmp_path / "case.toml"))
    assert summary == run_summary(told)
    assert max(map(len, summary.splitlines())) <= WIDTH
    new = {name: data for name, data in contents(tmp_path).items() if name not in before}
    assert set(new) == {"reports/case.xlsx", "results/case.json"}
    assert new["results/case.json"].decode() == output.json_text(study_json(told))
    assert new["reports/case.xlsx"] == workbook_bytes(told)  # the same case gives the same bytes
    opened = openpyxl.load_workbook(io.BytesIO(new["reports/case.xlsx"]), read_only=True)
    assert opened.sheetnames == [sheet.title for sheet in book.sheets_of(told)]


def test_run_to_standard_output_prints_the_json_alone(
    call: Call, at_once: study.Study, tmp_path: Path
) -> None:
    short_case(tmp_path)
    answer = call("run", "case.toml", "--json", "-", "--out", "mine.XLSX")
    assert (answer.status, answer.err) == (0, f"1 doubt:\n{UNMEASURED}")
    assert answer.out == output.json_text(study_json(at_once))
    assert (tmp_path / "mine.XLSX").read_bytes() == workbook_bytes(at_once)


def test_run_can_be_quiet(call: Call, at_once: study.Study, tmp_path: Path) -> None:
    data = edited(edited(minimal_case(), "drivers", []), "finance.discount_rate", 0.4)
    write_case(tmp_path, data)
    doubt = f"2 doubts:\n{UNMEASURED}  finance.discount_rate: 0.4 a year is unusually high\n"
    loud = call("run", "case.toml")
    assert (loud.status, loud.err) == (0, doubt)
    written = contents(tmp_path)
    assert call("run", "case.toml", "--quiet", "--json", "a.json") == Answer(0, "", "")
    assert contents(tmp_path) == written | {"a.json": output.json_text(study_json(at_once)).encode()}
    assert call("run", "case.toml", "--quiet", "--out", ".") == Answer(
        2, "", usage("run", "--out: '.' does not end in .xlsx")
    )


@pytest.mark.parametrize(
    ("place", "name"), [(study, "run_study"), (book, "workbook_bytes"), (results, "study_json")]
)
def test_a_run_that_fails_leaves_the_old_report_alone(
    call: Call,
    at_once: study.Study,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    place: ModuleType,
    name: str,
) -> None:
    short_case(tmp_path)
    (tmp_path / "reports").mkdir()
    (tmp_path / "reports" / "case.xlsx").write_bytes(b"the old report")
    before = contents(tmp_path)
    monkeypatch.setattr(place, name, fails_with(SolveError("hour 17 has no solution")))
    assert call("run", "case.toml", "--quiet", "--json", "case.json") == Answer(
        1, "", "Error: hour 17 has no solution\n"
    )
    assert contents(tmp_path) == before


# --- wrong calls -------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        (["bogus"], usage("", "No such command 'bogus'.")),
        (["check"], usage("check", "Missing argument 'CASE'.")),
        (["check", "no.toml"], usage("check", "Invalid value for 'CASE': File 'no.toml' does not exist.")),
        (["check", "."], usage("check", "Invalid value for 'CASE': File '.' is a directory.")),
        (
            ["balance", "case.toml", "--option", "two"],
            usage("balance", "--option: the case has no option 'two'; it has single, two-stage"),
        ),
        (
            ["balance", "case.toml", "--at", "25;85;48"],
            usage(
                "balance",
                "Invalid value for '--at': '25;85;48' is not three numbers HEAT,SUPPLY,RETURN in MW, °C, °C, "
                "as in 25,85,48",
            ),
        ),
        (
            ["balance", "case.toml", "--at", "25,85,48,1"],
            usage(
                "balance",
                "Invalid value for '--at': '25,85,48,1' is not three numbers HEAT,SUPPLY,RETURN in MW, °C, "
                "°C, as in 25,85,48",
            ),
        ),
        (
            ["balance", "case.toml", "--at", "0,85,48"],
            usage("balance", "Invalid value for '--at': heat is 0 MW; allowed is more than 0"),
        ),
        (
            ["balance", "case.toml", "--at", "nan,85,48"],
            usage("balance", "Invalid value for '--at': heat is nan MW; allowed is more than 0"),
        ),
        (
            ["balance", "case.toml", "--at", "25,48,85"],
            usage(
                "balance",
                "Invalid value for '--at': supply is 48 °C, return 85 °C; allowed is a return from 0 °C up "
                "and a supply above it",
            ),
        ),
        (["balance", "case.toml", "--json", "folder"], "Error: folder: cannot be written, it is a folder\n"),
        (
            ["balance", "case.toml", "--json", "case.toml"],
            "Error: case.toml: would overwrite the case itself; give another name\n",
        ),
        (
            ["balance", "case.toml", "--json", "folder/../hours.csv"],
            "Error: folder/../hours.csv: would overwrite the hours of the case; give another name\n",
        ),
        (["run", "case.toml", "--out", "case.pdf"], usage("run", "--out: 'case.pdf' does not end in .xlsx")),
        (
            ["run", "case.toml", "--out", "folder.xlsx"],
            "Error: folder.xlsx: cannot be written, it is a folder\n",
        ),
        (
            ["run", "case.toml", "--json", "reports/case.xlsx"],
            "Error: reports/case.xlsx: would overwrite another result; give another name\n",
        ),
        (["run", "no.toml"], usage("run", "Invalid value for 'CASE': File 'no.toml' does not exist.")),
        (
            ["run", "book.xlsx"],
            "Error: book.xlsx: is damaged or cut short; allowed: a workbook (.xlsx) that `appraise run` "
            "wrote\n",
        ),
    ],
    ids=lambda value: " ".join(value) if isinstance(value, list) else "",
)
def test_a_wrong_call_is_told_why_and_leaves_nothing(
    call: Call, case: Path, tmp_path: Path, arguments: Sequence[str], told: str
) -> None:
    (tmp_path / "folder").mkdir()
    (tmp_path / "folder.xlsx").mkdir()
    (tmp_path / "book.xlsx").write_bytes(b"PK\x03\x04 and so on")
    before = contents(tmp_path)
    assert call(*arguments) == Answer(2, "", told)
    assert contents(tmp_path) == before


def test_design_choice_prints_every_curve(call: Call, case: Path) -> None:
    answer = call("optimum", "case.toml", "--json", "choice.json")
    assert (answer.status, answer.err) == (0, "")
    assert max(map(len, answer.out.splitlines())) <= 100
    told = json.loads(Path("choice.json").read_text())["design_choice"]
    assert [curve["key"] for curve in told["curves"]] == [
        "terminal_difference_K",
        "shares",
        "stages",
        "drain_route",
        "existing_area_factor",
    ]
    for curve in told["curves"]:
        assert curve["label"] in answer.out
        built = [npv for npv in curve["npv"] if npv is not None]
        assert curve["best_npv"] == max(built)


# --- wrong cases -------------------------------------------------------------------------------------------


def without(data: dict[str, Any], *way: str) -> dict[str, Any]:
    """The data without the key at the end of a way."""
    inner: Any = data
    for key in way[:-1]:
        inner = inner[key]
    del inner[way[-1]]
    return data


def with_key(data: dict[str, Any], *way: str, value: Any) -> dict[str, Any]:
    """The data with another value, known to the case or not."""
    inner: Any = data
    for key in way[:-1]:
        inner = inner[key]
    inner[way[-1]] = value
    return data


DRIVER = [{"label": "Power", "path": "scenario.powr", "low": 1.0, "high": 2.0}]
TWO_BASELINES = [
    {"key": "single", "name": "Single stage", "stages": 1, "baseline": True},
    {"key": "larger", "name": "More surface", "stages": 1, "existing_area_factor": 1.5, "baseline": True},
]

WRONG_CASES: Mapping[str, tuple[dict[str, Any], list[str]]] = {
    "missing key": (
        without(minimal_case(), "plant", "condenser", "terminal_difference_K"),
        ["plant.condenser.terminal_difference_K: missing; required: a number above 0, at most 50"],
    ),
    "unknown key": (
        with_key(minimal_case(), "plant", "boiler", "efficency", value=0.9),
        ["plant.boiler.efficency: unknown key; nearest known key: efficiency"],
    ),
    "wrong type": (
        with_key(minimal_case(), "study", "title", value=7),
        ["study.title: 7 given; allowed: a text, not empty"],
    ),
    "out of range": (
        with_key(minimal_case(), "plant", "live_steam", "pressure_bar", value=200.0),
        ["plant.live_steam.pressure_bar: 200.0 given; allowed: a number from 2 to 165"],
    ),
    "not a number": (
        with_key(minimal_case(), "finance", "discount_rate", value=float("nan")),
        ["finance.discount_rate: nan given; allowed: a number from 0 to 1"],
    ),
    "return above supply": (
        with_key(minimal_case(), "plant", "design", "return_C", value=99.0),
        ["plant.design.return_C: 99 °C given; allowed: below the supply of 98 °C"],
    ),
    "bleed below deaerator": (
        with_key(minimal_case(), "plant", "feed", "bleed_bar", value=2.0),
        ["plant.feed.bleed_bar: 2 bar given; allowed: above the deaerator's 2.5 bar"],
    ),
    "wet live steam": (
        with_key(minimal_case(), "plant", "live_steam", "temperature_C", value=280.0),
        ["plant.live_steam.temperature_C: 280 °C; must be at least 282.7 °C, 5 K above saturation at 62 bar"],
    ),
    "shares that do not sum to 1": (
        edited(minimal_case(), "options.two-stage.shares", [0.5, 0.4]),
        ["options.two-stage.shares: 0.5, 0.4 given, sum 0.9; allowed: a sum of 1"],
    ),
    "two baselines": (
        with_key(minimal_case(), "options", value=TWO_BASELINES),
        [
            "options: 2 baselines (single, larger) given; allowed: exactly one option with baseline = true",
        ],
    ),
    "unknown scenario": (
        with_key(minimal_case(), "study", "reference_scenario", value="centre"),
        ['study.reference_scenario: "centre" given; nearest known scenario: central'],
    ),
    "driver that leads nowhere": (
        with_key(minimal_case(), "drivers", value=DRIVER),
        ['drivers[1].path: leads nowhere: "scenario.powr" given; nearest known key: power'],
    ),
    "series that is not there": (
        with_key(minimal_case(), "year", "series", value="heat.csv"),
        ['year.series: "heat.csv" given; heat.csv: no such file'],
    ),
    "several at once": (
        with_key(
            with_key(without(minimal_case(), "study", "years"), "tail", "efficiency", value=1.2),
            "finance",
            "discountrate",
            value=0.05,
        ),
        [
            "study.years: missing; required: a whole number from 1 to 50",
            "tail.efficiency: 1.2 given; allowed: a number above 0, at most 1",
            "finance.discountrate: unknown key; nearest known key: discount_rate",
        ],
    ),
}


def refused(answer: Answer, faults: Sequence[str]) -> None:
    """Status 2, nothing on standard output, one line a fault on standard error."""
    count = "1 fault" if len(faults) == 1 else f"{len(faults)} faults"
    told = "".join(f"  {fault}\n" for fault in faults)
    assert answer == Answer(2, "", f"The case has {count}:\n{told}")


@pytest.mark.parametrize("fault", sorted(WRONG_CASES))
def test_a_wrong_case_is_told_fault_by_fault_and_leaves_nothing(
    call: Call, tmp_path: Path, fault: str
) -> None:
    data, faults = WRONG_CASES[fault]
    write_case(tmp_path, data)
    before = contents(tmp_path)
    refused(call("run", "case.toml", "--quiet", "--out", "out.xlsx", "--json", "out.json"), faults)
    refused(call("balance", "case.toml", "--json", "out.json"), faults)
    assert contents(tmp_path) == before
    checked = call("check", "case.toml")
    if fault == "wet live steam":  # check solves nothing, and knows no steam tables
        assert checked.status == 0
    else:
        refused(checked, faults)


def wrong_hours() -> Mapping[str, tuple[str, list[str]]]:
    """Series with a fault each, and what is said about it."""
    rows = synthetic_hours()
    repeated = [*rows[:101], [rows[100][0], *rows[101][1:]], *rows[102:]]
    text = [list(row) for row in rows]
    text[16][1] = "n/a"
    text[17][4] = ""
    return {
        "8759 rows": (
            csv_text(rows[:-1]),
            [
                "hours.csv: 8759 rows given, to 2025-12-31T22:00; allowed: whole years, a whole year from "
                "2025-01-01T00:00 having 8760 rows to 2025-12-31T23:00"
            ],
        ),
        "a repeated hour": (
            csv_text(repeated),
            [
                "hours.csv row 102, column time: 2025-01-05T03:00 given after 2025-01-05T03:00; allowed: "
                "2025-01-05T04:00 (a repeat)",
                "hours.csv row 103, column time: 2025-01-05T05:00 given after 2025-01-05T03:00; allowed: "
                "2025-01-05T04:00 (1 missing)",
            ],
        ),
        "text in a number column": (
            csv_text(text),
            [
                'hours.csv row 17, column heat_MW: "n/a" given; allowed: a number, at least 0',
                "hours.csv row 18, column return_C: empty cell; allowed: a number from 0 to 200",
            ],
        ),
    }


@pytest.mark.parametrize("fault", ["8759 rows", "a repeated hour", "text in a number column"])
def test_wrong_hours_are_told_by_row_and_leave_nothing(call: Call, tmp_path: Path, fault: str) -> None:
    hours, faults = wrong_hours()[fault]
    write_case(tmp_path, minimal_case(), hours)
    before = contents(tmp_path)
    refused(call("run", "case.toml", "--out", "out.xlsx"), faults)
    refused(call("check", "case.toml"), faults)
    assert contents(tmp_path) == before


def test_what_is_no_toml_is_told_by_line(call: Call, tmp_path: Path) -> None:
    (tmp_path / "case.toml").write_text('[study]\ntitle = "open\n')
    answer = call("check", "case.toml")
    assert (answer.status, answer.out) == (2, "")
    assert answer.err.startswith("The case has 1 fault:\n  case.toml line 2, column ")


# --- what else can go wrong --------------------------------------------------------------------------------


def test_no_solution_is_status_1(call: Call, case: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(study, "balances", fails_with(SolveError("no root between 1 and 2")))
    assert call("balance", "case.toml") == Answer(1, "", "Error: no root between 1 and 2\n")


def test_a_fault_of_the_program_is_status_1_without_a_traceback(
    call: Call, case: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(study, "balances", fails_with(ZeroDivisionError("line one\n line two")))
    assert call("balance", "case.toml") == Answer(
        1,
        "",
        "internal error: ZeroDivisionError: line one line two; please report it with the case file; "
        "APPRAISE_DEBUG=1 shows where\n",
    )


def test_an_interruption_is_status_1(call: Call, case: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def interrupted(*arguments: Any) -> Any:
        raise KeyboardInterrupt

    monkeypatch.setattr(study, "balances", interrupted)
    answer = call("balance", "case.toml")
    assert (answer.status, answer.out) == (1, "")
    assert answer.err.strip() == "interrupted; nothing written"


def test_a_traceback_is_shown_to_who_asks_for_it(
    case: Path, capsys: Read, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("APPRAISE_DEBUG", "1")
    monkeypatch.setattr(study, "balances", fails_with(ZeroDivisionError("here")))
    assert cli.main(["balance", str(case)]) == 1
    assert "in failing" in capsys.readouterr().err


def test_a_full_disk_leaves_all_files_as_they_were(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    first, second = tmp_path / "a.xlsx", tmp_path / "b.json"
    first.write_bytes(b"old")
    writing = files._write_through

    def full(temporary: Path, target: Path, data: bytes) -> None:
        if target == second:
            raise OSError(28, "No space left on device")
        writing(temporary, target, data)

    monkeypatch.setattr(files, "_write_through", full)
    with pytest.raises(files.FileProblem, match=r"b\.json: cannot be written, No space left on device$"):
        files.write_whole({first: b"new", second: b"new"})
    assert contents(tmp_path) == {"a.xlsx": b"old"}


def test_files_are_replaced_with_their_permissions_and_through_links(tmp_path: Path) -> None:
    target, link = tmp_path / "report.xlsx", tmp_path / "latest.xlsx"
    target.write_bytes(b"old")
    target.chmod(0o640)
    link.symlink_to(target)
    files.write_whole({link: b"new", tmp_path / "new" / "folder" / "x": b"x"})
    assert link.is_symlink()
    assert contents(tmp_path) == {"report.xlsx": b"new", "latest.xlsx": b"new", "new/folder/x": b"x"}
    assert target.stat().st_mode & 0o777 == 0o640


class Terminal(io.StringIO):
    """A standard error that a person watches."""

    def isatty(self) -> bool:
        return True


def test_progress_is_for_who_watches(monkeypatch: pytest.MonkeyPatch) -> None:
    for stream, shown in ((Terminal(), True), (io.StringIO(), False)):
        monkeypatch.setattr(sys, "stderr", stream)
        with cli.progress_bar(shown=True) as advance:
            advance(0.25, "heat of the year")
            advance(1.0, "checks")
        assert ("heat of the year" in stream.getvalue()) is shown
        assert ("100%" in stream.getvalue()) is shown
    monkeypatch.setattr(sys, "stderr", Terminal())
    with cli.progress_bar(shown=False) as advance:
        advance(0.5, "anything")
    assert sys.stderr.getvalue() == ""
