"""Published values as data: what was printed, where, and how far a calculation may lie from it.

A file holds tables; a table has rows of given quantities and results. Results are written as text, so that
the tolerance is half a unit of the last digit printed, unless the table states a `relative` one, `because`.
Status: "seen" read at a place that carries it, "recomputed" calculated again with an independent program,
"memory" recalled and not read again, "own" an own calculation without publication behind it.
"""

import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from decimal import Decimal
from functools import cache
from pathlib import Path
from typing import Any

FOLDER = Path(__file__).with_name("published")
STATUS_WORDS = {"seen", "recomputed", "memory", "own"}


@dataclass(frozen=True, slots=True, eq=False)
class Published:
    """One printed number. `tolerance` is absolute, in `unit`."""

    name: str
    value: float
    unit: str
    tolerance: float
    given: Mapping[str, float]
    source: str
    table: str
    status: str

    def __str__(self) -> str:
        at = ", ".join(f"{name} {value:g}" for name, value in self.given.items())
        return f"{self.table}: {self.name}" + (f" at {at}" if at else "")

    def check(self, calculated: float) -> None:
        """Fail, naming the source, where a calculated value does not round to the printed one."""
        off = abs(float(calculated) - self.value)
        assert off <= self.tolerance, (
            f"{self}: {calculated!r} {self.unit}, printed {self.value!r} +- {self.tolerance:.3g}, "
            f"{self.status} ({self.source})"
        )


def check_within(file: str, table: str, calculated: float) -> None:
    """Fail, naming the source, where a value lies outside a published range, a table of `low` and `high`."""
    low, high = (values(file, table)[end] for end in ("low", "high"))
    assert low.value - low.tolerance <= float(calculated) <= high.value + high.tolerance, (
        f"{table}: {calculated!r} {low.unit}, published {low.value:g} to {high.value:g}, "
        f"{low.status} ({low.source})"
    )


def half_last_digit(printed: str) -> float:
    """Half a unit of the last digit printed, with a hair for the binary rounding of the half itself."""
    exponent = Decimal(printed).as_tuple().exponent
    assert isinstance(exponent, int), f"{printed} is not a number"
    return 0.5 * 10.0**exponent * (1.0 + 1e-6)


def _rows(table: Mapping[str, Any]) -> Iterator[Published]:
    for status in table["status"].split(", "):
        assert status in STATUS_WORDS, f"{table['table']}: unknown status {status}"
    assert ("relative" in table) == ("because" in table), (
        f"{table['table']}: a wider tolerance needs a reason"
    )
    units = table["units"]
    for row in table["rows"]:
        given = {name: float(value) for name, value in row.items() if not isinstance(value, str)}
        for name, printed in row.items():
            if not isinstance(printed, str):
                continue
            value = float(printed)
            wide = table.get("relative")
            tolerance = half_last_digit(printed) if wide is None else wide * abs(value)
            yield Published(
                name, value, units[name], tolerance, given, table["source"], table["table"], table["status"]
            )


@cache
def tables(file: str) -> Mapping[str, tuple[Published, ...]]:
    """All tables of `published/FILE.json` by name."""
    content = json.loads((FOLDER / f"{file}.json").read_text(encoding="utf-8"))["tables"]
    found = {table["table"]: tuple(_rows(table)) for table in content}
    assert len(found) == len(content), f"{file}: a table name appears twice"
    return found


def published(file: str, table: str) -> tuple[Published, ...]:
    """Every value of one table, in the order of the file."""
    return tables(file)[table]


def values(file: str, table: str) -> dict[str, Published]:
    """A table of one row, by name of the quantity."""
    rows = published(file, table)
    found = {row.name: row for row in rows}
    assert len(found) == len(rows), f"{table}: more than one row"
    return found
