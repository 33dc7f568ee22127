"""The whole workbook after a reader's change: what LibreOffice then computes is what a fresh study has.

Compared are all named cells and rows of the live sheets; each kind of change has to move at least twenty of
them by more than one per cent, or it would prove nothing.
"""

from collections.abc import Mapping
from functools import cache
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from libreoffice import needs_libreoffice, recalculate
from openpyxl.utils import range_boundaries
from study_fixture import marrowby, marrowby_study

from appraise import study
from appraise.case.load import LoadedCase, case_from
from appraise.case.paths import edited, value_at
from appraise.workbook.book import sheets_of
from appraise.workbook.cells import Sheet
from appraise.workbook.faults import defined_names
from appraise.workbook.write import book_bytes

LIVE = ("Prices", "Cash flow", "Scenarios", "Capex")
KINDS: dict[str, dict[str, Any]] = {
    "scenario shown": {"study.reference_scenario": "high_carbon"},
    "discount rate": {"finance.discount_rate": 0.075},
    "tax and running cost": {
        "finance.tax_rate": 0.3,
        "opex.fixed_share_of_capex": 0.03,
        "opex.variable_per_MWh": 4.0,
    },
    "years": {"study.years": 14},
    "capital": {"capex.multiplier": 1.25},
    "prices, premium and fee": {
        "scenarios.central.power.value": [60.0, 70.0, 95.0],
        "scenarios.central.power_premium.value": 25.0,
        "scenarios.central.network_fee": 4.0,
    },
}


@cache
def sheets() -> tuple[Sheet, ...]:
    return tuple(sheets_of(marrowby_study()))


def written(changes: Mapping[str, Any], path: Path) -> None:
    """The demo's workbook with values typed into the named input cells."""
    path.write_bytes(book_bytes(sheets(), title="t", author="a", subject="s", footer="f"))
    book = openpyxl.load_workbook(path)
    places = dict(defined_names(sheets()))
    for target, value in changes.items():
        name = "chosen_scenario" if target == "study.reference_scenario" else "in_" + target.replace(".", "_")
        title, _, cells = places[name].replace("$", "").rpartition("!")
        page = book[title.strip("'")]
        first_col, first_row, _, last_row = range_boundaries(cells)
        typed = value if isinstance(value, list) else [value]
        for row, one in zip(range(first_row, last_row + 1), typed, strict=True):
            page.cell(row, first_col).value = one
    book.save(path)


def named_values(
    of: tuple[Sheet, ...], found: Mapping[str, Mapping[str, object]] | None
) -> dict[str, list[object]]:
    """Numbers of every name on the live sheets: of the cells as built, or as recalculated."""
    values: dict[str, list[object]] = {}
    by_title = {sheet.title: sheet for sheet in of}
    for name, target in defined_names(of):
        title, _, cells = target.replace("$", "").rpartition("!")
        title = title.strip("'")
        if title not in LIVE:
            continue
        first_col, first_row, last_col, last_row = range_boundaries(cells)
        places = [(r, c) for r in range(first_row, last_row + 1) for c in range(first_col, last_col + 1)]
        if found is None:
            sheet = by_title[title]
            values[name] = [sheet.cells[place].value for place in places if place in sheet.cells]
        else:
            letters = openpyxl.utils.get_column_letter
            values[name] = [found[title].get(f"{letters(c)}{r}") for r, c in places]
    return values


def fresh(changes: Mapping[str, Any], patch: pytest.MonkeyPatch) -> dict[str, list[object]]:
    """The same names of a study run anew with the changed case, without what no live sheet shows."""
    patch.setattr(study, "gain_moves", lambda *_: ())
    patch.setattr(study, "chosen_design", lambda *_: None)
    demo, data = marrowby(), dict(marrowby().data)
    for path, value in changes.items():
        assert value_at(data, path) is not None
        data = edited(data, path, value)
    data = {**data, "drivers": [], "draws": {}, "options": data["options"]}
    loaded = LoadedCase(
        **{name: getattr(demo, name) for name in LoadedCase.__slots__}
        | {"case": case_from(data), "data": data}
    )
    return named_values(tuple(sheets_of(study.run_study(loaded, draws=0))), None)


@needs_libreoffice
@pytest.mark.parametrize("kind", KINDS)
def test_the_workbook_follows_as_a_fresh_run(
    kind: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    changes = KINDS[kind]
    path = tmp_path / "book.xlsx"
    written(changes, path)
    found, wanted = named_values(sheets(), recalculate(path, tmp_path)), fresh(changes, monkeypatch)
    before = named_values(sheets(), None)
    moved = 0
    for name in sorted(found.keys() & wanted.keys()):
        for number, (mine, theirs) in enumerate(zip(found[name], wanted[name], strict=False)):
            if isinstance(theirs, int | float) and not isinstance(theirs, bool):
                assert mine == pytest.approx(theirs, rel=1e-9, abs=1e-6), (name, number)
                start = before[name][number]
                moved += isinstance(start, int | float) and abs(theirs - start) > 0.01 * max(abs(start), 1e-9)
    assert moved >= 20, moved
