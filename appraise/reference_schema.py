"""The case as a JSON schema, draft 2020-12, so that an editor can complete and check a case file.

It refuses nothing that the reader accepts. What keys say against each other is beyond it, and stays with
`appraise check`; such rules stand in the descriptions.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import Any

from appraise.case.fields import Curve, PricePath, Table
from appraise.case.kinds import (
    CalendarDay,
    Change,
    DayOfYear,
    Kind,
    Like,
    ListOf,
    OneOf,
    TextOrTexts,
    TrueOrFalse,
    Whole,
    Within,
)
from appraise.case.model import Case
from appraise.reference_keys import Key, first_sentence, is_number_too, rule, table_keys

Schema = dict[str, Any]

DIALECT = "https://json-schema.org/draft/2020-12/schema"
_DAY = "^((0[13578]|1[02])-(0[1-9]|[12][0-9]|3[01])|(0[469]|11)-(0[1-9]|[12][0-9]|30)|02-(0[1-9]|[12][0-9]))$"
_TEXT: Schema = {"type": "string", "minLength": 1}


def json_schema() -> Schema:
    """The schema of a case file, every table under `$defs` by its class."""
    defs: dict[str, Schema] = {}
    whole = _table(Case, defs)
    ordered = {name: defs[name] for name in sorted(defs)}
    return {"$schema": DIALECT, "title": "Case file of appraise", **whole, "$defs": ordered}


def _table(model: type[Table], defs: dict[str, Schema]) -> Schema:
    """The schema of a table; those of the tables in it are added to `defs`."""
    keys = table_keys(model)
    found: Schema = {
        "description": " ".join(filter(None, (first_sentence(model), rule(model)))),
        "type": "object",
        "properties": {key.name: _described(key, defs) for key in keys},
        "additionalProperties": False,
    }
    required = [key.name for key in keys if key.required]
    return {**found, "required": required} if required else found


def _described(key: Key, defs: dict[str, Schema]) -> Schema:
    """The schema of a key with its meaning, unit and default."""
    unit = key.unit.replace("`", "")
    told: Schema = {}
    if key.meaning:
        told["description"] = key.meaning if unit in ("", "–") else f"{key.meaning} [{unit}]"
    if isinstance(key.default, str | bool | int | float) and key.default != "":
        told["default"] = key.default
    return {**told, **_of_key(key, defs)}


def _of_key(key: Key, defs: dict[str, Schema]) -> Schema:
    if key.form == "texts":
        return _notes(defs)
    one = schema_of_kind(key.kind) if key.kind is not None else _reference(key.table, defs)
    if key.form == "list":
        return {"type": "array", "items": one}
    if key.form == "by name":
        return {"type": "object", "additionalProperties": one}
    return one


def _notes(defs: dict[str, Schema]) -> Schema:
    """Texts by dotted path: an unquoted path makes tables within tables."""
    again = {"$ref": "#/$defs/Notes"}
    defs["Notes"] = {
        "description": "Any dotted path = text: where that value comes from.",
        "type": "object",
        "additionalProperties": {"anyOf": [{"type": "string"}, again]},
    }
    return dict(again)


def _reference(table: type[Table] | None, defs: dict[str, Schema]) -> Schema:
    assert table is not None
    name = table.__name__
    if name not in defs:
        defs[name] = {}  # its place, before the tables within it ask again
        defs[name] = _with_number(table, defs) if is_number_too(table) else _table(table, defs)
    return {"$ref": f"#/$defs/{name}"}


def _with_number(table: type[Table], defs: dict[str, Schema]) -> Schema:
    """A curve or a price path, for which a plain number may stand."""
    whole = _table(table, defs)
    if issubclass(table, Curve):
        (values,) = (key.kind for key in table_keys(table) if key.name == "value")
        assert isinstance(values, ListOf)
        return {"anyOf": [schema_of_kind(values.kind), whole]}
    assert issubclass(table, PricePath)
    forms = [_only(whole, ("start", "change_per_year"), ("start",)), _only(whole, ("year", "value"))]
    return {"description": whole["description"], "anyOf": [schema_of_kind(Within()), *forms]}


def _only(whole: Schema, names: tuple[str, ...], required: tuple[str, ...] = ()) -> Schema:
    """One form of a table that has several."""
    properties: Mapping[str, Schema] = whole["properties"]
    return {
        "type": "object",
        "properties": {name: properties[name] for name in names},
        "additionalProperties": False,
        "required": list(required or names),
    }


def schema_of_kind(kind: Kind) -> Schema:
    """The schema of a value kind."""
    match kind:
        case Within():
            low = "exclusiveMinimum" if kind.above else "minimum"
            high = "exclusiveMaximum" if kind.below else "maximum"
            return {"type": "number", **_given({low: kind.low, high: kind.high})}
        case Whole():
            return {"type": "integer", **_given({"minimum": kind.low, "maximum": kind.high})}
        case OneOf():
            return {"type": "string", "enum": list(kind.words)}
        case TrueOrFalse():
            return {"type": "boolean"}
        case Like():
            return {"type": "string", **_given({"pattern": _searched(kind.pattern)})}
        case DayOfYear():
            return {"type": "string", "pattern": _DAY}
        case CalendarDay():
            return {"type": "string", "pattern": f"^[0-9]{{4}}-{_DAY[1:]}"}
        case Change():
            return {"anyOf": [schema_of_kind(Within()), {"type": "string", "pattern": _PERCENT}]}
        case TextOrTexts():
            return {"anyOf": [_TEXT, {"type": "array", "items": _TEXT, "minItems": 1}]}
        case ListOf():
            fixed = {"minItems": kind.length or 1, "maxItems": kind.length}
            return {"type": "array", "items": schema_of_kind(kind.kind), **_given(fixed)}
    raise TypeError(f"{type(kind).__name__}: a value kind without a schema")


_PERCENT = r"^\s*[+-]?[0-9]+(\.[0-9]+)?\s*%\s*$"


def _given(limits: Mapping[str, float | str | None]) -> Schema:
    return {name: limit for name, limit in limits.items() if limit is not None}


def _searched(pattern: str) -> str | None:
    """A pattern of the whole text as one that is searched for, in which a point matches no end of line."""
    start, core, end = re.fullmatch(r"(\.\*)?(.*?)(\.\*)?", pattern, re.DOTALL).groups()  # type: ignore[union-attr]
    return f"{'' if start else '^'}{core}{'' if end else '$'}" if core else None
