"""The case reader: what it takes, what it fills in, and every word it says to a wrong case."""

import copy
import tomllib
from collections.abc import Callable, Mapping
from dataclasses import fields
from pathlib import Path
from typing import Any

import pytest
from cases import SERIES, csv_text, minimal_case, synthetic_hours, write_case
from hypothesis import given, settings
from hypothesis import strategies as st

from appraise import sizing
from appraise.case import money
from appraise.case.load import case_from, doubts_of, load_case
from appraise.case.model import Case
from appraise.case.paths import edited
from appraise.errors import CaseError, FileProblem

STARTER = Path(__file__).parents[1] / "appraise" / "starter" / "marrowby.toml"
STARTER_DATA = tomllib.loads(STARTER.read_text(encoding="utf-8"))


def with_values(changes: Mapping[str, Any]) -> dict[str, Any]:
    """The minimal case with values at dotted paths."""
    data = minimal_case()
    for path, value in changes.items():
        data = edited(data, path, value)
    return data


def faults_of(data: Mapping[str, Any]) -> list[str]:
    """Every fault of a case in memory, as text."""
    with pytest.raises(CaseError) as caught:
        case_from(data)
    return [str(problem) for problem in caught.value.problems]


def test_a_small_case_gets_the_defaults_of_every_table():
    case = case_from(minimal_case())
    assert case.plant.turbine.mechanical_efficiency == 0.985
    assert case.plant.boiler.efficiency.value == (0.89,)
    assert case.plant.turbine.part_load.flat_one
    assert (case.network.pressure_bar, case.opex.fixed_share_of_capex) == (10.0, 0.02)
    assert case.scenarios["central"].carbon.start == 0.0
    assert case.capex.spend == (1.0,)
    assert (case.capex.items[0].low, case.capex.items[0].high) == (-0.2, 0.3)
    assert case.baseline.key == "single"


def test_equal_cases_are_equal_and_hash_alike_in_every_table():
    one, other = case_from(minimal_case()), case_from(minimal_case())
    moved = case_from(with_values({"year.availability": 0.9}))
    for name in Case.model_fields:
        assert hash(getattr(one, name)) == hash(getattr(other, name))
        assert getattr(one, name) == getattr(other, name)
        assert (getattr(one, name) == getattr(moved, name)) == (name != "year")
    with pytest.raises(ValueError, match="frozen"):
        one.study.years = 3


def test_a_number_and_the_table_it_stands_for_are_the_same_case():
    table = {"power": {"start": 62.0, "change_per_year": 0.0}, "fuel": 22.0, "peak_fuel": 40.0}
    long = with_values({"scenarios.central": table})
    assert case_from(long).scenarios == case_from(minimal_case()).scenarios


def test_an_option_has_its_own_tail_over_the_case_and_the_plant():
    own = {"efficiency": 0.7, "generator_efficiency": 0.96}
    case = case_from(
        with_values(
            {"options.two-stage.tail": own, "tail.baumann_factor": 0.8, "tail.mechanical_efficiency": 0.97}
        )
    )
    single, two = map(case.tail_of, case.options)
    assert (two.efficiency, two.baumann_factor) == (0.7, 0.8)
    assert (two.mechanical_efficiency, two.generator_efficiency) == (0.97, 0.96)
    assert (single.efficiency, single.generator_efficiency) == (0.8, case.plant.turbine.generator_efficiency)


def test_an_option_has_its_own_condensers_and_the_short_way_to_their_difference():
    case = case_from(
        with_values(
            {
                "options.two-stage.new_condenser.pressure_drop_bar": 0.2,
                "options.two-stage.terminal_difference_K": 5.0,
            }
        )
    )
    new = case.new_condenser_of(case.options[1])
    assert (new.terminal_difference_K, new.pressure_drop_bar, new.drain_approach_K) == (5.0, 0.2, 7.0)


def test_shares_are_equal_unless_stated():
    case = case_from(with_values({"options.two-stage.stages": 3}))
    assert case.shares_of(case.options[1]) == pytest.approx((1 / 3, 1 / 3, 1 / 3), rel=1e-15)
    case = case_from(with_values({"options.two-stage.shares": [0.4, 0.6]}))
    assert case.shares_of(case.options[1]) == (0.4, 0.6)


def test_notes_may_be_quoted_paths_or_nested_tables():
    quoted = case_from(minimal_case() | {"notes": {"plant.boiler.efficiency": "a test"}})
    nested = case_from(minimal_case() | {"notes": {"plant": {"boiler": {"efficiency": "a test"}}}})
    assert dict(quoted.notes) == dict(nested.notes) == {"plant.boiler.efficiency": "a test"}


def test_the_names_of_sizes_are_those_of_what_is_bought():
    assert set(money.SIZE_NAMES) == {f.name for f in fields(sizing.StageSize)} - {"stage", "new"}


def remove(path: str) -> Callable[[dict[str, Any]], None]:
    """Take a key out of a case."""

    def change(data: dict[str, Any]) -> None:
        *way, last = path.split(".")
        for key in way:
            data = data[key]
        del data[last]

    return change


@pytest.mark.parametrize(
    ("path", "fault"),
    [
        (
            "plant.boiler.efficiency",
            "missing; required: a number above 0, at most 1, or a curve { load = [..], value = [..] }",
        ),
        ("study.years", "missing; required: a whole number from 1 to 50"),
        ("plant.feed", "missing; required: a table"),
        ("options", "missing; required: a list of tables"),
        ("year.series", "missing; required: a text, not empty"),
        (
            "scenarios.central.power",
            "missing; required: a number, { start = .., change_per_year = .. } or "
            "{ year = [..], value = [..] }",
        ),
    ],
)
def test_a_missing_key_says_what_is_required(path: str, fault: str):
    data = minimal_case()
    remove(path)(data)
    assert faults_of(data) == [f"{path}: {fault}"]


@pytest.mark.parametrize(
    ("path", "value", "where", "fault"),
    [
        ("study.title", 3, None, "3 given; allowed: a text, not empty"),
        ("study.currency", "Euro", None, '"Euro" given; allowed: three letters'),
        ("study.years", 20.0, None, "20.0 given; allowed: a whole number from 1 to 50"),
        ("study.years", 51, None, "51 given; allowed: a whole number from 1 to 50"),
        ("plant.live_steam.pressure_bar", 170.0, None, "170.0 given; allowed: a number from 2 to 165"),
        ("plant.live_steam.min_kg_s", 21.0, None, "21 given; allowed: at most max_kg_s, 20"),
        ("plant.boiler.efficiency", float("nan"), None, "nan given; allowed: a number above 0, at most 1"),
        ("plant.boiler.efficiency", 1.1, None, "1.1 given; allowed: a number above 0, at most 1"),
        (
            "plant.boiler.efficiency",
            "0.89",
            None,
            '"0.89" given; allowed: a number above 0, at most 1, or a curve { load = [..], value = [..] }',
        ),
        (
            "plant.boiler.efficiency",
            {"load": [0.5, 0.4], "value": [0.8, 0.8]},
            "plant.boiler.efficiency.load",
            "0.4 given after 0.5; allowed: rising values",
        ),
        (
            "plant.boiler.efficiency",
            {"load": [0.5, 1.0], "value": [0.8]},
            "plant.boiler.efficiency.value",
            "1 values given; allowed: 2, as many as in load",
        ),
        ("plant.boiler.blowdown_share", 0.5, None, "0.5 given; allowed: a number from 0 to below 0.5"),
        ("plant.boiler.pressure_bar", 60.0, None, "60 bar given; allowed: at least the live steam's 62 bar"),
        (
            "plant.turbine.part_load",
            0.9,
            "plant.turbine.part_load.value",
            "0.9 at load 1 given; allowed: 1 at load 1",
        ),
        ("plant.feed.bleed_bar", 2.0, None, "2 bar given; allowed: above the deaerator's 2.5 bar"),
        ("plant.design.return_C", 98.0, None, "98 °C given; allowed: below the supply of 98 °C"),
        ("plant.peak_boiler.connection", "serial", None, '"serial" given; allowed: "parallel" or "series"'),
        ("tail", 0.8, None, "0.8 given; allowed: a table"),
        ("options.two-stage.shares", [0.5, 0.6], None, "0.5, 0.6 given, sum 1.1; allowed: a sum of 1"),
        ("options.two-stage.shares", [1.0], None, "1 shares given; allowed: 2, one per stage"),
        (
            "options.two-stage.shares",
            [0.0, 1.0],
            "options.two-stage.shares[1]",
            "0.0 given; allowed: a number above 0, at most 1",
        ),
        (
            "options.two-stage.key",
            "Two",
            "options[2].key",
            '"Two" given; allowed: a text of the letters a to z, the digits 0 to 9 and -',
        ),
        (
            "options.two-stage.key",
            "single",
            "options[2].key",
            '"single" given again; allowed: a key of its own',
        ),
        ("options.single.stages", 2, None, "2 given; allowed: 1 in the baseline"),
        (
            "options.single.baseline",
            False,
            "options",
            "no baseline given; allowed: exactly one option with baseline = true",
        ),
        ("options.two-stage.baseline", 1, None, "1 given; allowed: true or false"),
        (
            "year.outages",
            [{"from": "02-30", "to": "03-01"}],
            "year.outages[1].from",
            '"02-30" given; allowed: a day of the year as "MM-DD", such as "07-01"',
        ),
        (
            "study.date",
            "2026-02-29",
            None,
            '"2026-02-29" given; allowed: a date as "YYYY-MM-DD", such as "2026-12-01"',
        ),
        (
            "study.date",
            20261201,
            None,
            '20261201 given; allowed: a date as "YYYY-MM-DD", such as "2026-12-01"',
        ),
        ("study.reference_scenario", "centrall", None, '"centrall" given; nearest known scenario: central'),
        ("scenarios.central.fuel", float("inf"), None, "inf given; allowed: a finite number"),
        (
            "scenarios.central.fuel",
            {"start": 1.0, "value": [2.0]},
            None,
            "start and value given; "
            "allowed: a number, { start = .., change_per_year = .. } or { year = [..], value = [..] }",
        ),
        (
            "scenarios.central.fuel",
            {"year": [2030, 2028], "value": [2.0, 3.0]},
            "scenarios.central.fuel.year",
            "2028 given after 2030; allowed: rising values",
        ),
        ("scenarios.central.price_column", "heat_MW", None, '"heat_MW" given; allowed: a column of prices'),
        ("capex.spend", [0.5, 0.4], None, "0.5, 0.4 given, sum 0.9; allowed: a sum of 1"),
        (
            "capex.items.tail",
            {"key": "tail", "name": "Tail"},
            None,
            "no cost given; allowed: one of amount, correlation, share_of",
        ),
        ("capex.items.tail.only", ["two"], None, '"two" given; known options: single, two-stage'),
        (
            "capex.items.tail.currency",
            "USD",
            None,
            '"USD" given; allowed: EUR, or a currency of capex.exchange (none)',
        ),
        ("capex.items.tail.high", -0.1, None, "-0.1 given; allowed: a number from 0 to 10"),
        (
            "capex.index",
            {"year": [2023, 2025], "value": [1.0, 1.1]},
            "study.price_year",
            "2026 given; allowed: a year of capex.index, 2023 to 2025",
        ),
        ("finance.discount_rate", True, None, "true given; allowed: a number from 0 to 1"),
        (
            "finance.depreciation",
            {"method": "table"},
            "finance.depreciation.shares",
            'missing; required with method "table"',
        ),
        (
            "drivers",
            [{"label": "x", "path": "study.years"}],
            "drivers[1]",
            "nothing to vary it by given; required: low and high, or distribution",
        ),
        (
            "drivers",
            [{"label": "x", "path": "study.years", "low": 10}],
            "drivers[1].high",
            "missing; required beside low",
        ),
        (
            "drivers",
            [{"label": "x", "path": "study.years", "low": "ten", "high": 30}],
            "drivers[1].low",
            '"ten" given; allowed: a number, or a text like "-20%"',
        ),
        (
            "drivers",
            [{"label": "x", "path": "scenario.powr", "low": 10, "high": 30}],
            "drivers[1].path",
            'leads nowhere: "scenario.powr" given; nearest known key: power',
        ),
        (
            "drivers",
            [{"label": "x", "path": "plant.boiler", "low": 10, "high": 30}],
            "drivers[1].path",
            '"plant.boiler" given; allowed: the path of a number, list, curve or price path',
        ),
        (
            "draws",
            {"correlations": [{"between": ["Power price", "Heat"], "rank": 0.5}]},
            "draws.correlations[1].between",
            '"Heat" given; known labels: Power price',
        ),
        ("notes", {"plant.boilr": "x"}, "notes.plant.boilr", "leads nowhere; nearest known key: boiler"),
        ("notes", {"plant.boiler.fuel": 3}, "notes.plant.boiler.fuel", "3 given; allowed: a text"),
    ],
)
def test_a_wrong_value_says_what_was_given_and_what_is_allowed(
    path: str, value: Any, where: str | None, fault: str
):
    assert faults_of(with_values({path: value})) == [f"{where or path}: {fault}"]


@pytest.mark.parametrize(
    ("way", "key", "fault"),
    [
        ((), "finanse", "finanse: unknown key; nearest known key: finance"),
        (
            ("plant", "boiler"),
            "efficency",
            "plant.boiler.efficency: unknown key; nearest known key: efficiency",
        ),
        (("options", 1), "Drain", "options.two-stage.Drain: unknown key; nearest known key: drain"),
        (
            ("drivers", 0),
            "xyz",
            "drivers[1].xyz: unknown key; known keys: label, path, low, high, distribution",
        ),
    ],
)
def test_an_unknown_key_names_the_nearest(way: tuple[str | int, ...], key: str, fault: str):
    data: Any = minimal_case()
    table = data
    for step in way:
        table = table[step]
    table[key] = 1
    assert faults_of(data) == [fault]


def test_two_baselines_are_named():
    data = with_values({"options.two-stage.baseline": True, "options.two-stage.stages": 1})
    assert faults_of(data) == [
        "options: 2 baselines (single, two-stage) given; allowed: exactly one option with baseline = true"
    ]


def test_shares_of_each_other_are_a_circle():
    items = [
        {"key": "a", "name": "A", "share_of": "b", "share": 0.1},
        {"key": "b", "name": "B", "share_of": ["a"], "share": 0.1},
        {"key": "c", "name": "C", "share_of": ["a", "d"], "share": 0.1},
    ]
    assert faults_of(with_values({"capex.items": items})) == [
        'capex.items.c.share_of: "d" given; known items: a, b, c',
        "capex.items.a.share_of: refers back to itself; allowed: shares without a circle",
        "capex.items.b.share_of: refers back to itself; allowed: shares without a circle",
    ]


def test_all_faults_are_told_at_once():
    data = with_values(
        {
            "study.title": "",
            "plant.feed.bleed_bar": 2.0,
            "plant.design.return_C": 99.0,
            "plant.boiler.pressure_bar": 50.0,
            "options.two-stage.shares": [0.5, 0.6],
            "options.two-stage.stages": "2",
            "study.reference_scenario": "centra",
            "finance.discount_rate": 6.0,
        }
    )
    assert faults_of(data) == [
        'study.title: "" given; allowed: a text, not empty',
        "plant.feed.bleed_bar: 2 bar given; allowed: above the deaerator's 2.5 bar",
        "plant.design.return_C: 99 °C given; allowed: below the supply of 98 °C",
        'options.two-stage.stages: "2" given; allowed: a whole number from 1 to 6',
        "options.two-stage.shares: 0.5, 0.6 given, sum 1.1; allowed: a sum of 1",
        "finance.discount_rate: 6.0 given; allowed: a number from 0 to 1",
        "plant.boiler.pressure_bar: 50 bar given; allowed: at least the live steam's 62 bar",
    ]


UNMEASURED = "plant.measured: no steady test and no year.metered; the baseline was compared with no meter"


def test_the_only_doubt_of_the_starter_case_is_that_nobody_measured_it():
    loaded = load_case(STARTER)
    assert [str(problem) for problem in loaded.doubts] == [UNMEASURED]
    assert loaded.hours_path == STARTER.parent / "marrowby-year.csv"
    assert len(loaded.case_sha256) == len(loaded.hours_sha256) == 64
    assert loaded.data["study"]["years"] == loaded.case.study.years


def test_faults_of_case_and_hours_come_together(tmp_path: Path):
    rows = synthetic_hours()
    rows[5][1] = "warm"
    path = write_case(tmp_path, with_values({"study.years": 0}), rows)
    with pytest.raises(CaseError) as caught:
        load_case(path)
    assert str(caught.value).splitlines() == [
        "study.years: 0 given; allowed: a whole number from 1 to 50",
        'hours.csv row 6, column heat_MW: "warm" given; allowed: a number, at least 0',
    ]


def test_a_missing_series_names_the_file(tmp_path: Path):
    path = write_case(tmp_path, minimal_case())
    (tmp_path / SERIES).unlink()
    with pytest.raises(CaseError) as caught:
        load_case(path)
    assert str(caught.value) == f'year.series: "hours.csv" given; {tmp_path / SERIES}: no such file'


def test_offsets_that_cross_supply_and_return_are_refused(tmp_path: Path):
    path = write_case(tmp_path, with_values({"year.supply_offset_K": -30.0}))
    with pytest.raises(CaseError) as caught:
        load_case(path)
    text = str(caught.value)
    assert text.startswith("year.series: ")
    assert text.endswith("; allowed: supply above return")


@pytest.mark.parametrize(
    ("content", "fault"),
    [
        (b"[study]\nyears = = 3\n", "case.toml line 2, column 9: not TOML: invalid value"),
        (b"[study\n", "case.toml line 1, column 7: not TOML: expected ']' at the end of a table declaration"),
        (b'a = 1\ntitle = "M\xfcnster"\n', "case.toml line 2: not UTF-8; allowed: text in UTF-8"),
        (b"x = " + b"[" * 5000, "case.toml: not TOML that can be read: a number or a nesting without end"),
        (b"x = " + b"9" * 5000, "case.toml: not TOML that can be read: a number or a nesting without end"),
    ],
)
def test_what_is_no_toml_is_told_by_its_place(tmp_path: Path, content: bytes, fault: str):
    path = tmp_path / "case.toml"
    path.write_bytes(content)
    with pytest.raises(CaseError) as caught:
        load_case(path)
    assert str(caught.value) == fault


def test_what_is_no_file_of_a_sensible_size_is_refused(tmp_path: Path):
    for name, say in (("none.toml", "no such file"), ("", "is a folder; allowed: a file")):
        with pytest.raises(FileProblem) as caught:
            load_case(tmp_path / name)
        assert str(caught.value) == f"{tmp_path / name}: {say}"
    big = tmp_path / "big.toml"
    big.write_bytes(b"# \n" * 2_000_000)
    with pytest.raises(FileProblem) as caught:
        load_case(big)
    assert str(caught.value) == f"{big}: 6.0 MB; allowed: at most 5 MB"


def test_a_byte_order_mark_and_windows_line_ends_are_no_fault(tmp_path: Path):
    path = write_case(tmp_path, minimal_case())
    for file in (path, tmp_path / SERIES):
        file.write_bytes(b"\xef\xbb\xbf" + file.read_bytes().replace(b"\n", b"\r\n"))
    assert load_case(path).case == case_from(minimal_case())


@pytest.mark.parametrize(
    ("changes", "doubt"),
    [
        ({"finance.discount_rate": 0.5}, "finance.discount_rate: 0.5 a year is unusually high"),
        (
            {"finance.basis": "nominal"},
            "finance.inflation: 0 on a nominal basis: prices stand still while the rate has inflation in it",
        ),
        (
            {"year.availability": 1.0},
            "year.availability: 1 and no outages; a plant without a single hour of standstill",
        ),
        ({"capex.items": []}, "options.two-stage: no item of capital applies to it; it would cost nothing"),
        ({"capex.items.tail.source": ""}, "capex.items: no source given for tail"),
        (
            {"capex.items.tail.year": 2020},
            "capex.items.tail.year: 2020 without capex.index: its cost is taken as money of 2026",
        ),
        (
            {"scenarios.central.power": 0.06},
            "scenarios.central.power: 0.06 in 2028, but the hours have "
            "a mean of 60 in column power_price; only their shape is used. Another unit or currency?",
        ),
        (
            {"year.heat_multiplier": 0.3},
            "year.series, plant.design.heat_MW: the maximum of the hours, 13.2 MW, is far below the design "
            "point's 40 MW; which of the two is wrong, or in another unit?",
        ),
        (
            {"year.heat_multiplier": 10.0},
            "year.series, plant.design.heat_MW: the maximum of the hours, 440 MW, is far above the design "
            "point's 40 MW; which of the two is wrong, or in another unit?",
        ),
        (
            {"plant.boiler.pressure_bar": 93.0},
            "plant.boiler.pressure_bar: 93 bar, 50 % above the stop valve's 62 bar; a steam line loses less",
        ),
        (
            {"plant.live_steam.max_kg_s": 15.0},
            "plant.design.heat_MW: 40 MW needs about 18.2 kg/s of live steam, above the 15 of "
            "plant.live_steam.max_kg_s",
        ),
        (
            {"plant.design.heat_MW": 10.0, "year.heat_multiplier": 0.5},
            "plant.design.heat_MW: 10 MW needs about 4.55 kg/s of live steam, below the 6 of "
            "plant.live_steam.min_kg_s",
        ),
        (
            {"scenarios.central.fuel": 70.0},
            "scenarios.central.fuel: 70 in 2028, above the power price of 62; are the two exchanged?",
        ),
        (
            {"options.two-stage.stages": 1},
            "options.two-stage: is defined like single; both will give the same",
        ),
        (
            {"drivers": [{"label": "Rate", "path": "finance.discount_rate", "low": 0.07, "high": 0.1}]},
            "drivers[1]: Rate: the value of the study, 0.06, lies outside 0.07 to 0.1",
        ),
    ],
)
def test_what_is_doubtful_is_said(tmp_path: Path, changes: dict[str, Any], doubt: str):
    loaded = load_case(write_case(tmp_path, with_values(changes)))
    assert sorted(str(problem) for problem in loaded.doubts) == sorted([UNMEASURED, doubt])
    assert doubts_of(loaded.case, loaded.hours) == loaded.doubts


def test_a_heat_in_kW_is_doubted_by_both_its_places(tmp_path: Path):
    loaded = load_case(write_case(tmp_path, with_values({"plant.design.heat_MW": 40000.0})))
    assert [problem.where for problem in loaded.doubts] == [
        "plant.design.heat_MW",
        "plant.measured",
        "year.series, plant.design.heat_MW",
    ]


@pytest.mark.parametrize(
    "changes",
    [
        {
            "plant.measured": {"heat_MW": 30.0, "supply_C": 90.0, "return_C": 46.0, "power_MW": 10.0},
        },
        {"year.metered": {"heat_MWh": 1.9e5, "power_net_MWh": 5e4, "fuel_MWh": 2.7e5}},
    ],
    ids=["steady test", "metered year"],
)
def test_a_plant_that_was_measured_is_not_doubted(tmp_path: Path, changes: dict[str, Any]):
    assert load_case(write_case(tmp_path, with_values(changes))).doubts == ()


@pytest.mark.parametrize(
    "changes",
    [
        {"plant.boiler.pressure_bar": 80.0},
        {"plant.live_steam.max_kg_s": 17.0},
        {"plant.live_steam.min_kg_s": 17.0},
        {"scenarios.central.fuel": 62.0},
    ],
    ids=str,
)
def test_what_is_near_a_rough_limit_is_not_doubted(tmp_path: Path, changes: dict[str, Any]):
    loaded = load_case(write_case(tmp_path, with_values(changes)))
    assert [str(problem) for problem in loaded.doubts] == [UNMEASURED]


JUNK = st.one_of(
    st.none(),
    st.booleans(),
    st.integers(),
    st.floats(),
    st.text(max_size=5),
    st.lists(st.one_of(st.floats(), st.text(max_size=3)), max_size=3),
    st.dictionaries(st.text(max_size=5), st.integers(), max_size=2),
)


def places(node: Any, place: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
    """Every place of a case, tables and values alike."""
    below = node.items() if isinstance(node, dict) else enumerate(node) if isinstance(node, list) else ()
    return [place] * bool(place) + [p for key, inner in below for p in places(inner, (*place, key))]


@settings(derandomize=True, max_examples=400, deadline=None)
@given(place=st.sampled_from(places(STARTER_DATA)), junk=JUNK)
def test_whatever_stands_anywhere_it_is_read_or_refused_in_plain_words(place: tuple[Any, ...], junk: Any):
    data = copy.deepcopy(STARTER_DATA)
    node: Any = data
    for key in place[:-1]:
        node = node[key]
    node[place[-1]] = junk
    try:
        case_from(data)
    except CaseError as error:
        for problem in error.problems:
            assert problem.where
            assert "\n" not in problem.message
            for word in ("nput should", "pydantic", "validation", "Traceback"):
                assert word not in problem.message


def test_hours_may_be_of_several_years(tmp_path: Path):
    path = write_case(tmp_path, minimal_case(), csv_text(synthetic_hours(hours=2 * 8760)))
    assert load_case(path).hours.number_of_years == 2
