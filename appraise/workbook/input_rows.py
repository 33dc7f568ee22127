"""The validated case as rows: one value each, with path, meaning, unit, limits, and how a change acts.

Lists go by element ("capex.spend[0]"), options and capital items by key, scenarios by name. A price path or
a curve of one point is one number at its own path. Tables that a case does not have give no row.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Any, Literal

from pydantic.fields import FieldInfo

from appraise.case.book_layout import BLANK_NOTE
from appraise.case.fields import Curve, PricePath, Table, keys_of
from appraise.case.kinds import Kind, ListOf, TextOrTexts, Within
from appraise.case.load import Case
from appraise.case.money import CapexItem, Correlation
from appraise.workbook.input_sections import BLANKS, SECTIONS
from appraise.workbook.input_units import InputValue, Leaf, unit_of_leaf
from appraise.workbook.input_words import WORDS

Acts = Literal["live", "run again", "text"]


@dataclass(frozen=True, slots=True)
class InputRow:
    """One value of a case.

    path : dotted path; `list_path` that of the list it belongs to, "" outside lists
    section : path of the group under whose heading it stands
    acts : "live" (the sheets of money follow at once), "run again" (only a new run follows) or "text" (no
        figure depends on it)
    unit : "" for text, "–" for a pure number, "%" for a fraction shown as a percentage
    kind : what the value may be, None where that is not known
    note : where the value comes from, or what a blank stands for
    """

    path: str
    list_path: str
    section: str
    words: str
    value: InputValue
    acts: Acts
    unit: str
    kind: Kind | None
    note: str

    @property
    def key(self) -> str:
        """Last key of the path, without the number of an element."""
        return re.sub(r"\[\d+\]$", "", self.path).rpartition(".")[2]


def input_rows(case: Case) -> tuple[InputRow, ...]:
    """All values of a case, with the defaults it left unsaid, in the order of the sheet."""
    notes = _Notes(case.notes)
    leaves = (leaf for leaf in _of_table(case, "", "", case.study.currency))
    return tuple(
        InputRow(
            path=leaf.path,
            list_path=leaf.list_path,
            section=section_of(leaf.path),
            words=leaf.words,
            value=leaf.value,
            acts=acts(leaf.path),
            unit=unit_of_leaf(leaf),
            kind=leaf.kind,
            note=notes.of(leaf.path) or _blank(leaf),
        )
        for leaf in leaves
    )


class _Notes:
    """Notes by path; that of a table or list goes to the first of its values."""

    def __init__(self, notes: Mapping[str, str]) -> None:
        self._waiting = dict(notes)

    def of(self, path: str) -> str:
        """Every note that belongs to this path and has not been given yet."""
        here = [note for note in self._waiting if path == note or re.match(rf"{re.escape(note)}[.\[]", path)]
        return "; ".join(self._waiting.pop(note) for note in here)


def _blank(leaf: Leaf) -> str:
    if leaf.value is not None:
        return ""
    return f"{BLANK_NOTE} {BLANKS.get(f'{leaf.owner}.{leaf.key}', 'none')}"


# -- walking through the tables

_LEFT_OUT = frozenset({"Case.notes", "Option.key", "CapexItem.key"})  # keys are in the path already
_ONLY_GIVEN = frozenset({"OwnTail", "OwnNewCondenser", "Correlation", "Distribution"})


def _of_table(table: Table, path: str, words: str, money: str) -> Iterator[Leaf]:
    """Values of one table: its own first, then those of tables within it."""
    if isinstance(table, CapexItem):
        money = table.currency or money
    model, inner = type(table), []
    for key, name in keys_of(model).items():
        value, field = getattr(table, name), model.model_fields[name]
        if f"{model.__name__}.{key}" in _LEFT_OUT or (value is None and not _may_be_blank(table, key)):
            continue
        here, label = f"{path}.{key}".lstrip("."), f"{words}{_words(model, key)}"
        if _is_table(value):
            inner.append((key, value, here, label))
        else:
            for leaf in _of_value(value, here, label, field, model.__name__, key, money):
                yield replace(leaf, size=table.size or "") if isinstance(table, Correlation) else leaf
    if path:  # within a table, small tables stand before lists of them
        inner.sort(key=lambda one: not isinstance(one[1], Table))
    for key, value, here, label in inner:
        yield from _of_inner(value, here, "" if here in SECTIONS else f"{label}: ", key, money)


def _is_table(value: object) -> bool:
    """Whether a value is a table, a list of tables or tables by name, and no curve or price path."""
    if isinstance(value, tuple):
        return any(isinstance(one, Table) for one in value)
    if isinstance(value, Mapping):
        return any(isinstance(one, Table) for one in value.values())
    return isinstance(value, Table) and not isinstance(value, Curve | PricePath)


def _of_inner(value: Any, path: str, words: str, key: str, money: str) -> Iterator[Leaf]:
    if isinstance(value, Table):
        yield from _of_table(value, path, words, money)
    elif isinstance(value, Mapping):
        for name, one in value.items():
            yield from _of_table(one, f"{path}.{name}", "", money)
    else:
        keyed = all(hasattr(one, "key") for one in value)
        for index, one in enumerate(value):
            here = f"{path}.{one.key}" if keyed else f"{path}[{index}]"
            yield from _of_table(
                one, here, "" if keyed else f"{words.rstrip(': ') or key.rstrip('s')} {index + 1}: ", money
            )


def _may_be_blank(table: Table, key: str) -> bool:
    """Whether a reader could fill in a value that the case leaves out: single values only."""
    model = type(table)
    if model.__name__ in _ONLY_GIVEN:
        return False
    if isinstance(table, CapexItem):
        return key in ("currency", "year") and table.share_of is None and _own_money(table)
    kind = _kind(model.model_fields[keys_of(model)[key]])
    return kind is not None and not isinstance(kind, ListOf | TextOrTexts) and model.__name__ != "Driver"


def _own_money(item: CapexItem) -> bool:
    """Whether the item may state year and currency; a published correlation brings its own."""
    return item.correlation is None or item.correlation.name is None


def _of_value(
    value: Any, path: str, words: str, field: FieldInfo, owner: str, key: str, money: str
) -> Iterator[Leaf]:
    kind = _kind(field)
    if isinstance(value, Curve | PricePath):
        yield from _of_points(value, path, words, owner, key, money)
    elif isinstance(value, Mapping):
        for name, one in value.items():
            yield Leaf(f"{path}.{name}", "", f"{words} {name}", one, Within(0, above=True), owner, key, money)
    elif isinstance(value, tuple):
        element = kind.kind if isinstance(kind, ListOf) else None
        for index, one in enumerate(value):
            yield Leaf(f"{path}[{index}]", path, f"{words} {index + 1}", one, element, owner, key, money)
    else:
        yield Leaf(path, "", words, value, kind, owner, key, money)


def _of_points(
    value: Curve | PricePath, path: str, words: str, owner: str, key: str, money: str
) -> Iterator[Leaf]:
    """A curve or price path: one number where it is flat, else its own keys."""
    model = type(value)
    number = plain_number(value)
    if number is not None:
        field = model.model_fields["value" if isinstance(value, Curve) else "start"]
        kind = _kind(field)
        yield Leaf(
            path, "", words, number, kind.kind if isinstance(kind, ListOf) else kind, owner, key, money
        )
        return
    base = "Curve" if isinstance(value, Curve) else "PricePath"
    for inner in model.model_fields:
        if inner in value.model_fields_set and getattr(value, inner) is not None:
            said = f"{words}: {WORDS[base][inner]}"
            field = model.model_fields[inner]
            # The unit of the values is that of the key which holds the path.
            its_owner, its_key = (owner, key) if inner in ("start", "value") else (base, inner)
            yield from _of_value(
                getattr(value, inner), f"{path}.{inner}", said, field, its_owner, its_key, money
            )


def plain_number(value: Curve | PricePath) -> float | None:
    """The number that stands for a flat curve or an unchanging price; None for any other."""
    if isinstance(value, Curve):
        return value.value[0] if len(value.value) == 1 else None
    return value.start if value.model_fields_set == {"start"} else None


def _kind(field: FieldInfo) -> Kind | None:
    return next((kind for kind in field.metadata if isinstance(kind, Kind)), None)


def _words(model: type[Table], key: str) -> str:
    name = model.__name__.removeprefix("Own")
    return WORDS.get(name, {}).get(key, key.replace("_", " "))


# -- group and action of a path


def section_of(path: str) -> str:
    """Path of the group under whose heading a value stands."""
    way = path.split(".")
    if way[0] in ("options", "scenarios"):
        return ".".join(way[:2])
    if path.startswith("capex.items."):
        return ".".join(way[:3])
    two = ".".join(way[:2])
    return two if two in SECTIONS else way[0].partition("[")[0]


_TEXT_ONLY = re.compile(
    r"study\.(title|author|revision|date)|options\.[^.]*\.name|capex\.items\.[^.]*\.(name|source)"
    r"|scenarios\..*\.title|plant\.boiler\.fuel"
)
_LIVE = re.compile(
    r"study\.(years|first_year|price_year)|(finance|opex|emissions)\..*"
    r"|scenarios\..*(?<!\.price_column)(?<!\.not_below)"
    r"|capex\.(multiplier|location_factor|tie_in\.multiplier|(index|exchange)\..*|spend\[\d+\])"
    r"|capex\.items\.[^.]*\.(amount|share|low|high|year)"
)


def acts(path: str) -> Acts:
    """How a changed value acts on the workbook."""
    if _TEXT_ONLY.fullmatch(path):
        return "text"
    return "live" if _LIVE.fullmatch(path) else "run again"
