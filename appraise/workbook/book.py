"""The workbook of a study: which sheets, in which order."""

from __future__ import annotations

import gc
from collections.abc import Callable, Iterator
from contextlib import contextmanager

from appraise import __version__
from appraise.study import Study
from appraise.workbook.break_even import break_even_sheet
from appraise.workbook.capex import capex_sheet
from appraise.workbook.cash_flow import cash_flow_sheet
from appraise.workbook.cautions import cautions_sheet
from appraise.workbook.cells import Sheet
from appraise.workbook.checks import checks_sheet
from appraise.workbook.decision import decision_sheet
from appraise.workbook.design_choice import design_choice_sheet
from appraise.workbook.diagrams import diagrams_sheet
from appraise.workbook.draws import draws_sheet
from appraise.workbook.heat_balance import heat_balance_sheet
from appraise.workbook.hours import hours_sheet
from appraise.workbook.inputs import inputs_sheet
from appraise.workbook.prices import prices_sheet
from appraise.workbook.scenarios import scenarios_sheet
from appraise.workbook.tornado import tornado_sheet
from appraise.workbook.write import book_bytes
from appraise.workbook.year import year_sheet

SHEETS: tuple[Callable[[Study], Sheet | None], ...] = (
    decision_sheet,
    inputs_sheet,
    heat_balance_sheet,
    diagrams_sheet,
    year_sheet,
    capex_sheet,
    prices_sheet,
    cash_flow_sheet,
    scenarios_sheet,
    tornado_sheet,
    break_even_sheet,
    draws_sheet,
    design_choice_sheet,
    checks_sheet,
    cautions_sheet,
    hours_sheet,
)


def sheets_of(study: Study) -> list[Sheet]:
    """Every sheet of the workbook, in order; those of what the study does not have are left out."""
    made = (sheet(study) for sheet in SHEETS)
    return [sheet for sheet in made if sheet is not None]


def workbook_bytes(study: Study) -> bytes:
    """The whole workbook of a study. The footer tells its date, and which version made it of what."""
    about, loaded = study.case.study, study.loaded
    parts = (
        f"Study of {study.dated}",
        f"revision {about.revision}" if about.revision else "",
        f"appraise {__version__}",
        f"case {loaded.case_sha256[:8]}, hours {loaded.hours_sha256[:8]}",
    )
    with _without_collector():
        return book_bytes(
            sheets_of(study),
            title=about.title,
            author=about.author or "",
            subject="Retrofit of a district-heating condenser: investment case",
            footer=" · ".join(part for part in parts if part),
        )


@contextmanager
def _without_collector() -> Iterator[None]:
    """No search for garbage: all cells live until the file is made, and the search takes a fifth of it."""
    was_on = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was_on:
            gc.enable()
