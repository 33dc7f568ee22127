"""Names of cells and rows that sheets use of one another, and which column is which year."""

from __future__ import annotations

import re
from dataclasses import dataclass

from appraise.case.load import Case
from appraise.workbook.cells import area, column, year_column

CHOSEN_SCENARIO = "chosen_scenario"


def name_of(*parts: str) -> str:
    """Defined name from words and keys: ("npv", "two-stage") is "npv__two_stage"."""
    return "__".join(plain(part) for part in parts)


def plain(part: str) -> str:
    """A word or key as it may stand in a name: no two underscores in a row, none at the ends."""
    return re.sub(r"[^A-Za-z0-9]+", "_", part).strip("_")


def input_name(path: str) -> str:
    """Name of the cell of an input: "finance.tax_rate" is "in_finance_tax_rate"."""
    return f"in_{plain(path)}"


@dataclass(frozen=True, slots=True)
class Timeline:
    """Which t has what: `spend` years of spending from t = 0, then `years` of operation."""

    spend: int
    years: int
    first_year: int

    @classmethod
    def of(cls, case: Case) -> Timeline:
        """The timeline of a case."""
        return cls(len(case.capex.spend), case.study.years, case.study.first_year)

    @property
    def number(self) -> int:
        """How many t there are."""
        return self.spend + self.years

    @property
    def calendar(self) -> list[int]:
        """Calendar year of every t."""
        return [self.first_year - self.spend + t for t in range(self.number)]

    @property
    def last_column(self) -> str:
        """Letters of the column of the last t."""
        return column(year_column(self.number - 1))

    def row(self, row: int, absolute: bool = False) -> str:
        """Cells of one row over all t: "D5:Y5"."""
        return area(row, year_column(0), row, year_column(self.number - 1), absolute)

    def operating(self, values: list[float]) -> list[float]:
        """Values by operating year, with zeros for the years of spending before them."""
        return [0.0] * self.spend + values
