"""The tables of a case and their keys, as the reader knows them: what is documented is what is checked."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from types import NoneType
from typing import Annotated, Any, Literal, get_args, get_origin

from appraise.case.fields import Table, keys_of
from appraise.case.kinds import Change, DayOfYear, Kind, Like, ListOf, TextOrTexts
from appraise.case.model import Case
from appraise.workbook.input_sections import MEANINGS
from appraise.workbook.input_units import InputValue, Leaf, unit_of_leaf
from appraise.workbook.input_words import WORDS

Form = Literal["value", "table", "list", "by name", "texts"]

_OF_THE_PATH = frozenset({"Driver", "Distribution"})  # their numbers have the unit of what is driven
_OF_THE_SIZE = frozenset({"Correlation.reference_size", "Correlation.minimum", "Correlation.maximum"})
_OF_THE_KEY = frozenset({"PricePath.start", "PricePath.value"})
_IN_A_FILE = {"%": "fraction", "%/a": "fraction/a"}  # shown as percentages on the sheet of inputs only


@dataclass(frozen=True, slots=True)
class Key:
    """One key of a table.

    form : a value, one table, a list of tables, tables or values by name, or texts by dotted path
    kind : what the value, or each value by name, may be; None where tables stand
    table : the class of the table or tables; None where values stand
    """

    name: str
    owner: str
    required: bool
    default: Any
    form: Form
    kind: Kind | None
    table: type[Table] | None

    @property
    def meaning(self) -> str:
        """What it does; as on the sheet of inputs where that says it, or as the table says of itself."""
        owner = self.owner.removeprefix("Own")
        told = MEANINGS.get(f"{owner}.{self.name}")
        if told is None and self.table is not None and not _shortened(self.table):
            sentence = first_sentence(self.table)
            told = sentence[:1].lower() + sentence[1:].rstrip(".")
        return told or WORDS.get(owner, {}).get(self.name, "")

    @property
    def unit(self) -> str:
        """Unit of a number in the file; "" for texts and tables, "–" for a pure number."""
        full, kind = f"{self.owner}.{self.name}", self.kind
        element = kind.kind if isinstance(kind, ListOf) else kind
        if full in _OF_THE_KEY:
            return "of the key"
        if full in _OF_THE_SIZE:
            return "of `size`"
        if self.form in ("list", "texts") or isinstance(element, DayOfYear | TextOrTexts | Like):
            return ""
        if self.owner in _OF_THE_PATH and (isinstance(kind, Change) or isinstance(self.default, NoneType)):
            return "" if self.table is not None or not _numeric(kind) else "of the path"
        if self.table is not None and not _shortened(self.table):
            return ""
        value: InputValue = self.default if isinstance(self.default, str | bool) else None
        path = "foreign" if self.form == "by name" else ""
        unit = unit_of_leaf(Leaf(f".{path}", "", "", value, kind, self.owner, self.name, "money"))
        return _IN_A_FILE.get(unit, unit)


def _numeric(kind: Kind | None) -> bool:
    return kind is not None and "number" in kind.allowed


def _shortened(table: type[Table]) -> bool:
    """Whether a plain number may stand for a table, as for a curve."""
    return "from_number" in {name for base in table.__mro__[:-1] if base is not Table for name in vars(base)}


def table_keys(model: type[Table]) -> tuple[Key, ...]:
    """The keys of a table, in the order of its class."""
    found = []
    for key, name in keys_of(model).items():
        field = model.model_fields[name]
        form, kind, table = _read(field.annotation, field.metadata)
        default = None if field.is_required() else field.default
        found.append(Key(key, model.__name__, field.is_required(), default, form, kind, table))
    return tuple(found)


def _read(annotation: Any, metadata: list[Any]) -> tuple[Form, Kind | None, type[Table] | None]:
    kind = next((one for one in metadata if isinstance(one, Kind)), None)
    if kind is not None:
        return "value", kind, None
    origin, arguments = get_origin(annotation), get_args(annotation)
    if origin is tuple:
        return "list", None, arguments[0]
    if origin is Mapping:
        inner = arguments[1]
        if inner is str:
            return "texts", None, None
        if get_origin(inner) is Annotated:
            return "by name", get_args(inner)[1], None
        return "by name", None, inner
    member = annotation if isinstance(annotation, type) else next(a for a in arguments if a is not NoneType)
    if not issubclass(member, Table):
        raise TypeError(f"{annotation}: neither a value kind nor a table")
    return "table", None, member


@dataclass(frozen=True, slots=True)
class Place:
    """A table of the case as it stands in a file: `way` is its dotted path, NAME where the user names it."""

    way: str
    key: Key
    model: type[Table]

    @property
    def heading(self) -> str:
        """As TOML writes it."""
        return f"[[{self.way}]]" if self.key.form == "list" else f"[{self.way}]"


def places(model: type[Table] = Case, above: str = "") -> Iterator[Place]:
    """All tables below a table, each before those within it. Curves and price paths count as values."""
    for key in table_keys(model):
        if key.table is None or _shortened(key.table):
            continue
        way = f"{above}.{key.name}".lstrip(".") + (".NAME" if key.form == "by name" else "")
        yield Place(way, key, key.table)
        yield from places(key.table, way)


def is_number_too(table: type[Table] | None) -> bool:
    """Whether a plain number may stand in the place of a table."""
    return table is not None and _shortened(table)


def first_sentence(table: type[Table]) -> str:
    """What a table says of itself, without what only its readers in the program need."""
    paragraph = " ".join((table.__doc__ or "").split("\n\n")[0].split())
    sentence = re.split(r"(?<=\.)\s", paragraph)[0]
    return re.sub(r"; [^;]*None:.*$", ".", sentence)


def rule(table: type[Table]) -> str:
    """What the keys of a table must be to each other; "" where nothing."""
    return "" if table.contradictions is Table.contradictions else table.contradictions.__doc__ or ""
