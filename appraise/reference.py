"""The page of all keys of a case, and the JSON schema, made from the tables that the reader checks.

`python -m appraise.reference FOLDER` writes both there; without FOLDER into `inputs`, where they are kept.
"""

from __future__ import annotations

import json
import re
import sys
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import Any

from appraise.case.fields import Curve, FrozenMap, PricePath, Table
from appraise.case.hours import RANGES
from appraise.case.kinds import ListOf
from appraise.case.money import SIZE_NAMES
from appraise.files import write_whole
from appraise.published_costs import PUBLISHED
from appraise.reference_keys import Key, Place, first_sentence, is_number_too, places, rule, table_keys
from appraise.reference_schema import json_schema
from appraise.workbook.input_sections import BLANKS

__all__ = ["json_schema", "key_reference", "reference_files"]

PAGE, SCHEMA = "keys.md", "case.schema.json"

_HEAD = """# Keys of a case file

Made by `python -m appraise.reference` from the tables that the program checks; not to be edited by hand.

A case is one TOML file, with the hours as a CSV file beside it. Units are in the names: pressures are
absolute, in bar, efficiencies on lower heating value; `money` stands for the currency of the study, or the
item's own. A `fraction` is written as 0.05, not as 5. What is not required may be left out and has the
default. Faults are reported by dotted path (`plant.boiler.efficiency`, `options.two-stage.shares`), and the
same paths serve for `[[drivers]]` and `[notes]`.

The same as a JSON schema for editors that complete and check TOML: `case.schema.json` beside this page."""

_OF_LISTS = {
    "Option.tail": "as in `[tail]`",
    "Option.new_condenser": "as in `[new_condenser]`",
    "Option.shares": "equal shares",
    "CapexItem.only": "every option but the baseline",
    "Capex.items": "none, at no cost",
}
"""What leaving out a table or a list means, where it is not "none"."""

_NOTES = """## `[notes]`

Any dotted path = text: where that value comes from. The workbook prints it beside the value.

```toml
[notes]
"plant.turbine.efficiency" = "heat test of the plant, and its date"
```"""

_HOURS = """## The hours (CSV)

A header and one row an hour: `time` (start of the hour, local standard time, such as 2025-01-01T00:00; one
or several whole years, any starting date, no gap, repeat or blank), and any of these columns. A scenario's
own `price_column` may be one more."""

_PUBLISHED = """## Published correlations

Names for `correlation = { name = ".." }` and for `compare`. They are a screen (estimate class 5); authors
differ by a factor of two and more, and a quotation always wins. The range is in the source's unit. "From
memory" was not read again."""


def key_reference() -> str:
    """The page, as Markdown."""
    found = tuple(places())
    parts = [_HEAD, _index(found), *(_section(place, found) for place in found), _NOTES]
    parts += [
        _several("Curves", (Curve,)),
        _several("Price paths", (PricePath,)),
        _sizes(),
        _published(),
        _hours(),
    ]
    return "\n\n".join(parts) + "\n"


def reference_files() -> dict[str, str]:
    """Names and texts of both files."""
    schema = json.dumps(json_schema(), indent=2, ensure_ascii=False)
    return {PAGE: key_reference(), SCHEMA: f"{schema}\n"}


def _grid(headings: Iterable[str], rows: Iterable[Iterable[str]]) -> str:
    lines = [tuple(headings), *(tuple(cell.replace("|", "\\|") for cell in row) for row in rows)]
    lines.insert(1, ("---",) * len(lines[0]))
    return "\n".join(f"| {' | '.join(line)} |" for line in lines)


def anchor(heading: str) -> str:
    """What a link to a heading ends in: small letters, digits, - and _ of it."""
    return re.sub(r"[^\w -]", "", heading.lower()).replace(" ", "-")


def _link(place: Place) -> str:
    return f"[`{place.heading}`](#{anchor(place.heading)})"


def _index(found: tuple[Place, ...]) -> str:
    rows = [(_link(place), _there(place), first_sentence(place.model)) for place in found]
    rows.append(("[`[notes]`](#notes)", "optional", "Where values come from."))
    return _grid(("table", "", "what it holds"), rows)


def _there(place: Place) -> str:
    needed = "required" if place.key.required else "optional"
    return (
        f"{needed}, one or more" if place.key.form in ("list", "by name") and place.key.required else needed
    )


def _section(place: Place, found: tuple[Place, ...]) -> str:
    inner = {other.way: other for other in found}
    rows = [_row(key, place.way, inner) for key in table_keys(place.model)]
    told = [f"{first_sentence(place.model)} {_there(place).capitalize()}."]
    told += [f"Its keys against each other: {rule(place.model)}"] if rule(place.model) else []
    return "\n\n".join((f"## `{place.heading}`", " ".join(told), _keys(rows)))


def _keys(rows: Iterable[Iterable[str]]) -> str:
    return _grid(("key", "default", "unit", "allowed", "meaning"), rows)


def _row(key: Key, way: str, inner: dict[str, Place]) -> tuple[str, ...]:
    within = inner.get(f"{way}.{key.name}")
    allowed = _allowed(key) if within is None else f"see {_link(within)}"
    return f"`{key.name}`", _default(key, way), key.unit, allowed, key.meaning


def _allowed(key: Key) -> str:
    if key.table is not None:
        return key.table.forms()
    kind = key.kind
    assert kind is not None
    if isinstance(kind, ListOf):
        return kind.allowed + ", rising" * kind.rising + ", sum 1" * kind.whole
    return f"by name, each {kind.allowed}" if key.form == "by name" else kind.allowed


def _default(key: Key, way: str) -> str:
    """The default as the file would have it, or what leaving the key out means."""
    if key.required:
        return "**required**"
    if key.default is None and key.owner.startswith("Own"):
        return f"as in `[{way.rpartition('.')[2]}]`"
    if key.default is None or key.default == () or isinstance(key.default, FrozenMap):
        full = f"{key.owner}.{key.name}"
        return BLANKS.get(full) or _OF_LISTS.get(full, "none")
    return _shown(key.default)


def _shown(value: Any) -> str:
    match value:
        case bool():
            return f"`{str(value).lower()}`"
        case str():
            return f'`"{value}"`'
        case tuple():
            return f"`[{', '.join(f'{one:g}' for one in value)}]`"
        case Curve():
            return _shown(value.value[0])
        case PricePath():
            return _shown(value.start)
        case int() | float():
            return f"`{value:g}`"
    raise TypeError(f"{type(value).__name__}: a default that the page cannot show")


def _several(title: str, tables: Iterable[type[Table]]) -> str:
    """A kind of value that is a table of its own, wherever it stands."""
    parts = [f"## {title}"]
    for table in tables:
        assert is_number_too(table)
        parts.append(f"{first_sentence(table)} Allowed: {table.forms()}. {rule(table)}")
        parts.append(_keys(_row(key, "", {}) for key in table_keys(table)))
    return "\n\n".join(parts)


def _sizes() -> str:
    names = ", ".join(f"`{name}`" for name in SIZE_NAMES)
    return f"## Sizes\n\nWhat the cost of an item may be a function of: {names}."


def _published() -> str:
    headings = ("name", "size", "range", "materials", "bar gauge, at most", "covers", "source", "read")
    return f"{_PUBLISHED}\n\n{_grid(headings, _published_rows())}"


def _published_rows() -> Iterator[tuple[str, ...]]:
    for name, one in PUBLISHED.items():
        materials = ", ".join(f"`{material}`" for material in one.materials) or "–"
        bar = f"{one.maximum_bar_gauge:g}" if one.pressure else "–"
        source = f"{one.source.text}; {one.caution}" if one.caution else one.source.text
        span = f"{one.minimum:g} to {one.maximum:g} {one.unit}"
        yield f"`{name}`", f"`{one.size}`", span, materials, bar, one.covers, source, one.mark


def _hours() -> str:
    rows = [(f"`{column}`", kind.allowed) for column, kind in RANGES.items()]
    return f"{_HOURS}\n\n{_grid(('column', 'allowed'), rows)}"


def main(folder: Path) -> None:
    """Write both files into a folder and say so. Raises FileProblem."""
    contents = {folder / name: text.encode() for name, text in reference_files().items()}
    write_whole(contents)
    for path in contents:
        print(f"wrote {path}")


if __name__ == "__main__":
    main(Path(*(sys.argv[1:2] or ["inputs"])))
