"""The page of all published values that the tests check, `published/checks.md`, and its summary.

`python tests/published_page.py` writes the page, and the summary into DEVELOPERS.md between its two marks.
"""

import json
from collections import Counter
from collections.abc import Iterable, Iterator, Mapping
from functools import cache
from pathlib import Path
from typing import Any

from published import FOLDER, tables

PAGE = FOLDER / "checks.md"
DEVELOPERS = Path(__file__).parents[1] / "DEVELOPERS.md"
START, END = "<!-- published values: start -->\n", "<!-- published values: end -->\n"

_HEAD = """# Published values that the tests check

Made by `python tests/published_page.py` from the JSON files beside it; not to be edited by hand. What each
status means stands in `published.py`. "Half a digit" is half a unit of the last digit
printed."""


def files() -> list[str]:
    """Names of the files of tables."""
    return sorted(path.stem for path in FOLDER.glob("*.json"))


def contents(file: str) -> list[Mapping[str, Any]]:
    """The tables of a file as they stand in it."""
    found: list[Mapping[str, Any]] = json.loads((FOLDER / f"{file}.json").read_text(encoding="utf-8"))[
        "tables"
    ]
    return found


def tolerance(table: Mapping[str, Any]) -> str:
    """What may lie between a value and the printed one, and why."""
    return f"{100 * table['relative']:g} %: {table['because']}" if "relative" in table else "half a digit"


def checked_in(file: str, table: str) -> list[str]:
    """The tests that name a file and its table, or the example whose printed and recomputed values it has."""
    example, _, _ = table.partition(",")
    names = (f'"{table}"', f'"{example}":')  # the latter is a key in a mapping of examples
    sources = _sources().items()
    return [test for test, text in sources if f'"{file}"' in text and any(name in text for name in names)]


@cache
def _sources() -> Mapping[str, str]:
    tests = sorted(Path(__file__).parent.glob("test_*.py"))
    return {path.stem: path.read_text(encoding="utf-8") for path in tests}


def by_status(file: str) -> Counter[str]:
    """How many values of a file have which status."""
    return Counter(value.status for values in tables(file).values() for value in values)


def page() -> str:
    """Every table of every file, as Markdown."""
    return "\n\n".join([_HEAD, summary().rstrip("\n"), *map(_section, files())]) + "\n"


def summary() -> str:
    """Numbers of values by file and status."""
    counts = {file: by_status(file) for file in files()}
    total = sum(counts.values(), Counter())
    statuses = sorted(total, key=lambda status: (-total[status], status))
    rows = [_counted(f"`{file}.json`", count, statuses) for file, count in counts.items()]
    return _grid(["file", "values", *statuses], [*rows, _counted("all", total, statuses)]) + "\n"


def _counted(name: str, count: Counter[str], statuses: Iterable[str]) -> list[str]:
    return [name, str(count.total()), *(str(count[status] or "") for status in statuses)]


def _section(file: str) -> str:
    headings = ("table", "source", "values", "status", "tolerance", "checked in")
    return f"## `{file}.json`\n\n{_grid(headings, _rows(file))}"


def _rows(file: str) -> Iterator[list[str]]:
    for table in contents(file):
        name = table["table"]
        number = str(len(tables(file)[name]))
        tests = ", ".join(f"`{test}`" for test in checked_in(file, name))
        yield [name, table["source"], number, table["status"], tolerance(table), tests]


def _grid(headings: Iterable[str], rows: Iterable[Iterable[str]]) -> str:
    lines = [tuple(headings), *(tuple(cell.replace("|", "\\|") for cell in row) for row in rows)]
    lines.insert(1, ("---",) * len(lines[0]))
    return "\n".join(f"| {' | '.join(line)} |" for line in lines)


def with_summary(text: str) -> str:
    """A text with the summary between its marks."""
    before, rest = text.split(START)
    _, after = rest.split(END)
    return f"{before}{START}\n{summary()}\n{END}{after}"


if __name__ == "__main__":
    PAGE.write_text(page(), encoding="utf-8")
    DEVELOPERS.write_text(with_summary(DEVELOPERS.read_text(encoding="utf-8")), encoding="utf-8")
