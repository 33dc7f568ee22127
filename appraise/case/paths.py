"""Dotted paths into a case: "plant.boiler.efficiency", "options.two-stage.shares", "scenarios.central.power".

Options and capital items are named by their keys, scenarios by their names; `scenario.` at the start means
the scenario under study. The data is the mapping as read from the file; nothing here changes it in place.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import NoneType, UnionType
from typing import Annotated, Any, Union, cast, get_args, get_origin

from appraise.case.fields import Curve, PricePath, Table, keys_of
from appraise.case.kinds import (
    is_number,
)
from appraise.case.model import Case
from appraise.case.plant import Option
from appraise.case.words import nearest
from appraise.errors import CaseError, Problem

Data = Mapping[str, Any]


class NoSuchPath(LookupError):
    """A path leads nowhere; the text says why."""


@dataclass(frozen=True, slots=True)
class Target:
    """What a path leads to: the declared type of the value, and its default (None where it has none)."""

    annotation: Any
    default: Any = None

    @property
    def is_table(self) -> bool:
        """Whether it is a table for which no number can stand."""
        table = _table_of(self.annotation)
        return table is not None and not issubclass(table, Curve | PricePath)

    @property
    def is_whole(self) -> bool:
        """Whether it is a whole number."""
        return int in _members(self.annotation)

    @property
    def is_numeric(self) -> bool:
        """Whether it is a number, a list of numbers, a curve or a price path."""
        if _table_of(self.annotation) is not None:
            return not self.is_table
        return any(_holds_numbers(member) for member in _members(self.annotation))


def _members(annotation: Any) -> tuple[Any, ...]:
    """The types of a union without None, or the one type, without what validates them."""
    if get_origin(annotation) is Annotated:
        return _members(get_args(annotation)[0])
    if get_origin(annotation) in (Union, UnionType):
        return tuple(member for member in get_args(annotation) if member is not NoneType)
    return (annotation,)


def _holds_numbers(annotation: Any) -> bool:
    if get_origin(annotation) is tuple:
        return get_args(annotation)[0] in (int, float)
    return annotation in (int, float)


def _table_of(annotation: Any) -> type[Table] | None:
    """The table class of `T` or `T | None`."""
    for member in _members(annotation):
        if isinstance(member, type) and issubclass(member, Table):
            return member
    return None


def _listed(annotation: Any) -> type[Table] | None:
    """The table class of `tuple[T, ...]` whose tables have a key."""
    for member in _members(annotation):
        inner = _table_of(get_args(member)[0]) if get_origin(member) is tuple else None
        if inner is not None and "key" in inner.model_fields:
            return inner
    return None


def positions(tables: object) -> dict[str, int]:
    """Positions of the tables in a list, as read, by their keys; the first of equal ones."""
    found: dict[str, int] = {}
    for index, table in enumerate(tables if isinstance(tables, list | tuple) else ()):
        if isinstance(table, Mapping) and isinstance(table.get("key"), str):
            found.setdefault(table["key"], index)
    return found


def full_path(path: str, scenario: str | None) -> str:
    """The path with `scenario.` at its start replaced by the scenario under study."""
    if scenario is not None and path.startswith("scenario."):
        return f"scenarios.{scenario}.{path.removeprefix('scenario.')}"
    return path


def target_of(data: Data, path: str, scenario: str | None = None) -> Target:
    """What a path leads to. Raises NoSuchPath where it leads nowhere."""
    return _walk(data, full_path(path, scenario))[0]


def _walk(data: Data, path: str) -> tuple[Target, Any]:
    """Follow a path through the tables of a case and through its data."""
    target, node = Target(Case), data
    for key in path.split("."):
        target, node = _step(target, node, key)
    return target, node


def _step(target: Target, node: Any, key: str) -> tuple[Target, Any]:
    """One key down: what is there by the model, and by the data (None where the data has nothing)."""
    table = _table_of(target.annotation)
    if table is not None:
        known = keys_of(table)
        if key not in known:
            raise NoSuchPath(nearest(key, known))
        field = table.model_fields[known[key]]
        default = None if field.is_required() else field.default
        return Target(field.annotation, default), node.get(key) if isinstance(node, Mapping) else None
    listed = _listed(target.annotation)
    if listed is not None:
        at = positions(node)
        if key not in at:
            raise NoSuchPath(nearest(key, at))
        return Target(listed), node[at[key]]
    if get_origin(target.annotation) is Mapping:
        names = node if isinstance(node, Mapping) else {}
        if key not in names:
            raise NoSuchPath(nearest(key, names, "name"))
        return Target(get_args(target.annotation)[1]), names[key]
    raise NoSuchPath(f'nothing lies below this value, so no "{key}"')


def value_at(data: Data, path: str, scenario: str | None = None) -> Any:
    """The value as the data has it, or else the model's default; None where there is neither.

    Raises NoSuchPath for a path that leads nowhere.
    """
    target, node = _walk(data, full_path(path, scenario))
    return _as_read(target.default) if node is None else node


def _as_read(value: Any) -> Any:
    """A value of the model in the form the file would have it."""
    if isinstance(value, Table):
        return {
            key: _as_read(getattr(value, name))
            for key, name in keys_of(type(value)).items()
            if name in value.model_fields_set
        }
    if isinstance(value, Mapping):
        return {key: _as_read(inner) for key, inner in value.items()}
    return [_as_read(inner) for inner in value] if isinstance(value, tuple) else value


def edited(data: Data, path: str, value: Any) -> dict[str, Any]:
    """The data with another value at a path; what lies on the way is copied, tables not there are made.

    Raises NoSuchPath.
    """
    _walk(data, path)
    result: dict[str, Any] = dict(data)
    target, node = Target(Case), cast("Any", result)
    *way, last = path.split(".")
    for key in way:
        target, inner = _step(target, node, key)
        place = positions(node)[key] if isinstance(node, list) else key
        node[place] = _copied(target, inner)
        node = node[place]
    node[positions(node)[last] if isinstance(node, list) else last] = value
    return result


def _copied(target: Target, node: Any) -> Any:
    """A shallow copy that may be changed; a plain number becomes the table it stands for."""
    table = _table_of(target.annotation)
    if table is not None and is_number(node):
        node = table.from_number(node)
    return list(node) if isinstance(node, list | tuple) else dict(node or {})


def changed(
    case: Case, data: Data, path: str, change: float | str, scenario: str | None = None
) -> dict[str, Any]:
    """The data with one driver moved: a number replaces the value, a text like "-20%" multiplies it.

    A curve, list or price path scales whole; a number in its place makes it flat. A whole number stays one.
    `scenario` is the one under study, by default the reference. Raises CaseError where the path leads nowhere
    or there is no value to scale.
    """
    full = full_path(path, scenario or case.study.reference_scenario)
    try:
        target = target_of(data, full)
    except NoSuchPath as error:
        raise CaseError([Problem(path, f"leads nowhere: {error}")]) from None
    if not isinstance(change, str):
        whole = target.is_whole and float(change).is_integer()
        return edited(data, full, int(change) if whole else change)
    base = _in_force(case, data, full)
    if base is None:
        raise CaseError([Problem(path, f"no value that {change} could scale; allowed: a path with a value")])
    factor = 1.0 + float(change.rstrip("% ")) / 100.0
    return edited(data, full, scaled(base, factor, target.is_whole))


def scaled(value: Any, factor: float, whole: bool = False) -> Any:
    """A value as read, times a factor: number, list, curve or price path (their values, not load or year)."""
    if is_number(value):
        return round(value * factor) if whole else value * factor
    if isinstance(value, list | tuple):
        return [scaled(element, factor) for element in value]
    if isinstance(value, Mapping):
        return {k: scaled(v, factor) if k in ("start", "value") else v for k, v in value.items()}
    return value


def value_in_force(case: Case, path: str, scenario: str | None = None) -> Any:
    """The value a case works with, as the model has it: a flat curve or price path is its one number.

    The path must lead somewhere, as those of a case's drivers do.
    """
    value = _taken(case, full_path(path, scenario or case.study.reference_scenario).split("."))
    if isinstance(value, Curve) and len(set(value.value)) == 1:
        return value.value[0]
    if isinstance(value, PricePath) and value.year is None and value.change_per_year == 0.0:
        return value.start
    return value


def _in_force(case: Case, data: Data, path: str) -> Any:
    """The value the study works with: the file's, or else what the case takes in its place."""
    _, node = _walk(data, path)
    return _as_read(_taken(case, path.split("."))) if node is None else node


def _taken(case: Case, way: list[str]) -> Any:
    """The value of a path that the file does not have, with the defaults that lie elsewhere in the case."""
    match way:
        case ["options", key, *rest]:
            option = next(option for option in case.options if option.key == key)
            return _of_option(case, option, rest)
        case ["tail", *rest]:
            return _below(case.tail_of(case.baseline), rest)
        case ["finance", "reinvestment_rate"]:
            return case.finance.discount_rate
        case ["capex", "items", key, *rest]:
            return _below(next(item for item in case.capex.items if item.key == key), rest)
    return _below(case, way)


def _of_option(case: Case, option: Option, way: list[str]) -> Any:
    match way:
        case ["tail", *rest]:
            return _below(case.tail_of(option), rest)
        case ["new_condenser", *rest]:
            return _below(case.new_condenser_of(option), rest)
        case ["terminal_difference_K"]:
            return case.new_condenser_of(option).terminal_difference_K
        case ["shares"]:
            return case.shares_of(option)
    return _below(option, way)


def _below(value: Any, way: list[str]) -> Any:
    for key in way:
        if isinstance(value, Table):
            value = getattr(value, keys_of(type(value))[key])
        elif isinstance(value, Mapping):
            value = value.get(key)
    return value
