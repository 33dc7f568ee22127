"""What set the sizes that are bought: the design point, or the hour of the series that asked for most."""

import re

import numpy as np
import pytest
from study_fixture import marrowby_study

from appraise.cycle.balance import point_balances
from appraise.sizing import SetBy, set_by
from appraise.workbook.capex import TITLE, capex_sheet
from appraise.workbook.capex_sizes import WORDS, said, settings
from appraise.workbook.cells import LABEL, TOTAL, YEAR_ZERO

HOURLY = ("heat_MW", "steam_kg_s", "exhaust_m3_s")
"""Sizes that a heat balance at a point has too."""


def sizes_of(option: int) -> tuple[SetBy, ...]:
    physics = marrowby_study().physics
    years = tuple(solved[option] for solved in physics.years.solved)
    return set_by(physics.design.options[option], physics.design.plant, years)


def needs_at(option: int, hour: int) -> dict[tuple[int, str], float]:
    """What the stages of an option need in an hour, from a heat balance at its heat and temperatures."""
    study = marrowby_study()
    hours, year = study.hours, study.physics.years.solved[0][option]
    assert hours.supply_C is not None
    assert hours.return_C is not None
    point = float(year.heat_MW[hour]), float(hours.supply_C[hour]), float(hours.return_C[hour])
    stages = point_balances(study.case, study.physics.design, *point)[option].stages
    return {(i, name): getattr(s, name) for i, s in enumerate(stages, 1) for name in HOURLY}


def test_every_size_that_is_not_zero_is_said_to_be_set_by_something() -> None:
    for option, size in enumerate(marrowby_study().physics.sizes):
        told = {(one.stage, one.name): one.value for one in sizes_of(option)}
        kept = {(s.stage, name): getattr(s, name) for s in size.stages for name in WORDS}
        assert told == {key: value for key, value in kept.items() if value}


@pytest.mark.parametrize("option", [2, 3])
def test_the_hour_named_is_the_one_that_asks_for_most(option: int) -> None:
    """By the heat balance of that hour, which no other hour tried exceeds, nor the design point."""
    study = marrowby_study()
    found = [size for size in sizes_of(option) if size.name in HOURLY]
    assert {size.name for size in found} == set(HOURLY)
    on = np.flatnonzero(study.physics.years.solved[0][option].on)
    others = [needs_at(option, int(hour)) for hour in on[:: on.size // 25]]
    for size in found:
        assert size.hour is not None
        key = size.stage, size.name
        assert needs_at(option, size.hour)[key] == pytest.approx(size.value, rel=1e-6)
        assert max(other[key] for other in others) <= size.value * (1.0 + 1e-6)
        design = study.balances[option].stages[size.stage - 1]
        assert getattr(design, size.name) < size.value


def test_surfaces_are_those_of_the_design_point() -> None:
    surfaces = [size for option in range(4) for size in sizes_of(option) if size.name.endswith("_m2")]
    assert surfaces
    assert all(size.hour is None and "design point" in said(marrowby_study(), size) for size in surfaces)


def test_the_sheet_shows_them_with_their_time_stamps() -> None:
    study = marrowby_study()
    sheet = capex_sheet(study)
    assert sheet.title == TITLE
    expected = [(WORDS[s.name], s.value, said(study, s)) for _, sizes in settings(study) for s in sizes]
    words = set(WORDS.values())
    shown = [
        (cell.value, sheet.cells[row, TOTAL].value, sheet.cells[row, YEAR_ZERO].value)
        for (row, col), cell in sheet.cells.items()
        if col == LABEL and cell.value in words
    ]
    assert shown == expected
    stamps = [text for *_, text in expected if re.fullmatch(r"\d{4}-\d\d-\d\d \d\d:00", text)]
    assert len(stamps) >= 12
