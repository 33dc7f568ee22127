"""The series of a case: whole years in local standard time, or a fault by row and column."""

import time as clock
from collections.abc import Callable
from datetime import datetime, timedelta
from pathlib import Path

import numpy as np
import pytest
from cases import csv_text, minimal_case, synthetic_hours, write_case
from hypothesis import given, settings
from hypothesis import strategies as st

from appraise.case.hours import Hours, Needed, parsed_hours
from appraise.case.load import load_case
from appraise.errors import CaseError

Rows = list[list[str]]


def read(text: str | bytes | Rows, needed: Needed | None = None) -> Hours:
    """The hours in a text or in rows of cells."""
    content = csv_text(text) if isinstance(text, list) else text
    content = content.encode() if isinstance(content, str) else content
    return parsed_hours(content, "town.csv", needed or Needed())


def faults_of(text: str | bytes | Rows, needed: Needed | None = None) -> list[str]:
    """Every fault of a series, as text."""
    with pytest.raises(CaseError) as caught:
        read(text, needed)
    return [str(problem) for problem in caught.value.problems]


def test_columns_become_arrays_and_absent_ones_none():
    rows = [[row[0], row[3], row[1], row[4]] for row in synthetic_hours()]  # another order, fewer columns
    hours = read(rows)
    assert hours.time.dtype == "datetime64[h]"
    assert (str(hours.time[0]), str(hours.time[-1])) == ("2025-01-01T00", "2025-12-31T23")
    assert hours.heat_MW is not None
    assert hours.supply_C is not None
    assert (hours.heat_MW[0], hours.supply_C[0]) == (44.0, 100.0)
    assert hours.outdoor_C is hours.power_price is None
    assert hours.number_of_years == 1


@pytest.mark.parametrize(
    ("start", "count", "years"),
    [
        (datetime(2024, 1, 1), 8784, 1),
        (datetime(2023, 3, 1), 8784, 1),
        (datetime(2024, 3, 1), 8760, 1),
        (datetime(2024, 2, 29), 8784, 1),
        (datetime(2023, 7, 15), 8784, 1),
        (datetime(2024, 7, 15), 8760, 1),
        (datetime(1900, 1, 1), 8760, 1),
        (datetime(2022, 1, 1), 17520, 2),
        (datetime(2020, 2, 29), 35064, 4),
    ],
)
def test_whole_years_follow_the_calendar_from_any_date(start: datetime, count: int, years: int):
    rows = synthetic_hours(start, count)
    assert read(rows).number_of_years == years
    assert len(faults_of(rows[:-1])) == len(faults_of(synthetic_hours(start, count + 1))) == 1


def test_times_may_have_a_space_or_seconds_and_cells_may_be_quoted():
    rows = synthetic_hours()
    plain = read(rows).time
    assert (read([[row[0].replace("T", " "), *row[1:]] for row in rows]).time == plain).all()
    seconds = [rows[0]] + [[f"{row[0]}:00", *row[1:]] for row in rows[1:]]
    assert (read(seconds).time == plain).all()
    assert (read([[f'"{cell}"' for cell in row] for row in rows]).time == plain).all()
    assert (read("\ufeff" + csv_text(rows).replace("\n", "\r\n") + "\r\n\r\n").time == plain).all()


def test_an_hour_less_or_more_than_a_year_says_how_many_there_should_be():
    rows = synthetic_hours(hours=8761)
    assert faults_of(rows[:-2]) == [
        "town.csv: 8759 rows given, to 2025-12-31T22:00; allowed: whole years, a whole year from "
        "2025-01-01T00:00 having 8760 rows to 2025-12-31T23:00"
    ]
    assert faults_of(rows) == [
        "town.csv: 8761 rows given, to 2026-01-01T00:00; allowed: whole years, a whole year from "
        "2025-01-01T00:00 having 8760 rows to 2025-12-31T23:00"
    ]


def test_summer_time_is_named_and_not_repaired():
    rows = synthetic_hours()
    spring = next(index for index, row in enumerate(rows) if row[0] == "2025-03-30T02:00")
    autumn = next(index for index, row in enumerate(rows) if row[0] == "2025-10-26T02:00")
    local = [*rows[:spring], *rows[spring + 1 : autumn + 1], rows[autumn], *rows[autumn + 1 :]]
    assert faults_of(local) == [
        "town.csv row 2116, column time: 2025-03-30T03:00 given after 2025-03-30T01:00; allowed: "
        "2025-03-30T02:00; this looks like the change to summer time, but the series must be in local "
        "standard time all year",
        "town.csv row 7156, column time: 2025-10-26T02:00 given after 2025-10-26T02:00; allowed: "
        "2025-10-26T03:00; this looks like the change from summer time, but the series must be in local "
        "standard time all year",
    ]


def test_gaps_repeats_and_steps_back_are_told_by_row():
    rows = synthetic_hours()
    mixed = [*rows[:4000], *rows[4010:5000], rows[4999], *rows[5000:6000], rows[5900], *rows[6000:]]
    assert faults_of(mixed) == [
        "town.csv row 4001, column time: 2025-06-17T01:00 given after 2025-06-16T14:00; allowed: "
        "2025-06-16T15:00 (10 missing)",
        "town.csv row 4991, column time: 2025-07-28T06:00 given after 2025-07-28T06:00; allowed: "
        "2025-07-28T07:00 (a repeat)",
        "town.csv row 5992, column time: 2025-09-03T19:00 given after 2025-09-07T22:00; allowed: "
        "2025-09-07T23:00",
        "town.csv row 5993, column time: 2025-09-07T23:00 given after 2025-09-03T19:00; allowed: "
        "2025-09-03T20:00 (99 missing)",
    ]


def test_times_at_the_end_of_the_hour_are_refused():
    assert faults_of(synthetic_hours(datetime(2025, 1, 1, 1))) == [
        "town.csv row 2, column time: 2025-01-01T01:00 given as the first hour; allowed: 00:00 of any day; "
        "each time must be the start of its hour, not the end"
    ]


@pytest.mark.parametrize(
    ("column", "cell", "fault"),
    [
        ("time", "01.01.2025 01:00", '"01.01.2025 01:00" given; allowed: TIME'),
        ("time", "2025-01-01T01:30", '"2025-01-01T01:30" given; allowed: TIME'),
        ("time", "2025-13-01T01:00", '"2025-13-01T01:00" given; allowed: TIME'),
        ("time", "", "empty cell; allowed: TIME"),
        ("time", "2025-01-01T01:00Z", '"2025-01-01T01:00Z" given; allowed: TIME, without an offset from UTC'),
        (
            "time",
            "2025-01-01T01:00+01:00",
            '"2025-01-01T01:00+01:00" given; allowed: TIME, without an offset from UTC',
        ),
        ("heat_MW", "warm", '"warm" given; allowed: a number, at least 0'),
        ("heat_MW", "-0.1", "-0.1 given; allowed: a number, at least 0"),
        ("heat_MW", "", "empty cell; allowed: a number, at least 0"),
        ("heat_MW", "NaN", '"NaN" given; allowed: a number, at least 0'),
        ("heat_MW", "1e999", "1e999 given; allowed: a number, at least 0"),
        ("heat_MW", "1_000", '"1_000" given; allowed: a number, at least 0'),
        ("heat_MW", '"45,4"', '"45,4" given; allowed: a number, at least 0, with a decimal point'),
        ("outdoor_C", "61", "61 given; allowed: a number from -60 to 60"),
        ("supply_C", "201", "201 given; allowed: a number from 0 to 200"),
        ("power_price", "inf", '"inf" given; allowed: a finite number'),
        ("return_C", "100.0", "100 °C given; allowed: below the supply of 100 °C"),
    ],
)
def test_a_wrong_cell_is_told_by_row_and_column(column: str, cell: str, fault: str):
    rows = synthetic_hours()
    rows[2][rows[0].index(column)] = cell
    allowed = fault.replace("TIME", "the start of an hour in local standard time, such as 2025-01-01T00:00")
    assert faults_of(rows) == [f"town.csv row 3, column {column}: {allowed}"]


def test_faults_of_one_kind_are_counted_after_three_and_all_kinds_come_together():
    rows = synthetic_hours()
    for row in rows[1:31]:
        row[1] = "-1"
    rows[40][0] = "noon"
    faults = faults_of(rows)
    assert len(faults) == 5
    assert faults[0].startswith('town.csv row 41, column time: "noon" given')
    assert faults[1] == "town.csv row 2, column heat_MW: -1 given; allowed: a number, at least 0"
    assert faults[-1] == "town.csv, column heat_MW: and 27 more such cells"


@pytest.mark.parametrize(
    ("change", "fault"),
    [
        (lambda text: "", "town.csv: empty; allowed: a header and one row an hour"),
        (lambda text: "\n\n", "town.csv: empty; allowed: a header and one row an hour"),
        (
            lambda text: text.partition("\n")[0],
            "town.csv: a header and no rows; allowed: one row an hour for whole years",
        ),
        (
            lambda text: text.replace(",", ";"),
            "town.csv row 1: semicolons between the columns; allowed: commas between columns, a point in "
            "numbers",
        ),
        (
            lambda text: text.replace("heat_MW", "heat_mw", 1),
            'town.csv row 1: "heat_mw" is no known column; nearest known column: heat_MW\n'
            "town.csv row 1: column heat_MW is missing; required: heat_MW, or year.heat_signature",
        ),
        (
            lambda text: text.replace("time", "hour", 1),
            'town.csv row 1: "hour" is no known column; known columns: time, heat_MW, outdoor_C, supply_C, '
            "return_C, power_price\n"
            "town.csv row 1: column time is missing; required: the start of an hour in local standard time, "
            "such as 2025-01-01T00:00",
        ),
        (
            lambda text: text.replace("supply_C", "return_C", 1),
            "town.csv row 1: column return_C given 2 times; allowed: once\n"
            "town.csv row 1: column supply_C is missing; required: supply_C, or network.heating_curve",
        ),
        (
            lambda text: text.replace("\n2025-01-01T02", "\n\n2025-01-01T02", 1),
            "town.csv row 4: blank row; allowed: one row an hour",
        ),
        (
            lambda text: text.replace("\n2025-01-01T02:00,44.000", "\n2025-01-01T02:00,44,000", 1),
            "town.csv row 4: 7 cells given; allowed: 6, as in the header; numbers need a decimal point, "
            "not a comma",
        ),
    ],
)
def test_what_is_no_series_is_refused_as_a_whole(change: Callable[[str], str], fault: str):
    assert "\n".join(faults_of(change(csv_text(synthetic_hours())))) == fault


def test_text_in_another_encoding_is_told_by_row():
    content = csv_text(synthetic_hours()).encode().replace(b"T03:00", b"T03:00\xb0", 1)
    assert faults_of(content) == ["town.csv row 5: not UTF-8; allowed: text in UTF-8"]


def test_outdoor_temperature_may_stand_for_heat_and_network_temperatures():
    rows = [[row[0], row[2]] for row in synthetic_hours()]
    hours = read(rows, Needed(heat=False, temperatures=False))
    assert hours.heat_MW is hours.supply_C is hours.return_C is None
    assert faults_of([[row[0]] for row in rows], Needed(heat=False, temperatures=False)) == [
        "town.csv row 1: column outdoor_C is missing; required by year.heat_signature and "
        "network.heating_curve"
    ]


def test_a_scenario_may_name_a_price_column_of_its_own():
    rows = synthetic_hours()
    rows[0][5] = "windy_price"
    hours = read(rows, Needed(price_columns=("windy_price",)))
    assert hours.power_price is None
    assert hours.price("power_price") is None
    assert np.array_equal(hours.price("windy_price"), [float(row[5]) for row in rows[1:]])
    assert faults_of(synthetic_hours(), Needed(price_columns=("windy_price",))) == [
        "town.csv row 1: column windy_price is missing, which a scenario names; price columns: power_price"
    ]


@settings(derandomize=True, max_examples=12, deadline=None)
@given(
    start=st.datetimes(datetime(1950, 1, 1), datetime(2100, 1, 1)).map(
        lambda at: at.replace(hour=0, minute=0, second=0, microsecond=0)
    ),
    off=st.integers(-3, 3),
)
def test_only_series_that_end_where_the_next_year_begins_are_whole(start: datetime, off: int):
    leap_day = (start.month, start.day) == (2, 29)
    end = datetime(start.year + 1, 3, 1) if leap_day else start.replace(year=start.year + 1)
    count = (end - start) // timedelta(hours=1)
    rows = synthetic_hours(start, count + off)
    if off == 0:
        assert read(rows).number_of_years == 1
    else:
        assert f"having {count} rows" in faults_of(rows)[0]


@settings(derandomize=True, max_examples=60, deadline=None)
@given(at=st.integers(0, 3000), junk=st.binary(min_size=1, max_size=6), cut=st.integers(0, 80))
def test_whatever_bytes_a_file_holds_they_are_read_or_refused(at: int, junk: bytes, cut: int):
    content = csv_text(synthetic_hours(hours=60)).encode()
    with pytest.raises(CaseError) as caught:
        read(content[:at] + junk + content[at + cut :])
    assert all(problem.where.startswith("town.csv") for problem in caught.value.problems)


def test_a_case_with_a_year_of_hours_is_read_at_once(tmp_path: Path):
    path = write_case(tmp_path, minimal_case())
    load_case(path)
    begun = clock.perf_counter()
    load_case(path)
    assert clock.perf_counter() - begun < 0.5  # some 0.03 s on an idle machine
