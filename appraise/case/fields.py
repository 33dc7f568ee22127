"""What the tables of a case file are made of: frozen tables and maps, curves, price paths.

All compare and hash by value, so that physics can be kept by the part of the case it depends on.
"""

from collections.abc import Iterator, Mapping
from typing import Annotated, Any, Generic, Self, TypeVar, cast

import numpy as np
from numpy.typing import NDArray
from pydantic import (
    AfterValidator,
    BaseModel,
    ConfigDict,
    ValidationError,
    ValidationInfo,
    model_validator,
)
from pydantic.functional_validators import ModelWrapValidatorHandler
from pydantic_core import InitErrorDetails

from appraise.case.kinds import (
    Kind,
    ListOf,
    Number,
    Numbers,
    RisingNumbers,
    Whole,
    Within,
    YearlyChange,
    detail,
    fault,
    faults,
    is_number,
)
from appraise.case.words import nearest, said

Array = NDArray[np.float64]
V = TypeVar("V")


class FrozenMap(Mapping[str, V], Generic[V]):
    """A mapping that cannot be changed, in the order of the file, and hashes by value."""

    __slots__ = ("_items",)

    def __init__(self, items: Mapping[str, V]) -> None:
        self._items = dict(items)

    def __getitem__(self, key: str) -> V:
        return self._items[key]

    def __iter__(self) -> Iterator[str]:
        return iter(self._items)

    def __len__(self) -> int:
        return len(self._items)

    def __hash__(self) -> int:
        return hash(frozenset(self._items.items()))

    def __repr__(self) -> str:
        return f"FrozenMap({self._items})"


Frozen = AfterValidator(FrozenMap)


class Table(BaseModel):
    """A frozen table of the case file. Faults of all its keys are collected, in plain words.

    A subclass may yield from `contradictions` what its keys say against each other: (key, message), the key
    "" for the table as a whole. A validation context that is a list collects every table that is in order.
    """

    model_config = ConfigDict(frozen=True, extra="forbid", populate_by_name=False)

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """What the keys of a table say against each other."""
        yield from ()

    @classmethod
    def from_number(cls, value: float) -> Mapping[str, Any] | None:
        """The table that a plain number in its place stands for; None where a number is a fault."""
        return None

    @classmethod
    def forms(cls) -> str:
        """What may stand in the place of this table."""
        return "a table"

    @model_validator(mode="wrap")
    @classmethod
    def _in_plain_words(
        cls, data: Any, handler: ModelWrapValidatorHandler[Self], info: ValidationInfo
    ) -> Self:
        short = cls.from_number(data) if is_number(data) else None
        if short is None and not isinstance(data, Mapping | cls):
            raise fault(said(data, cls.forms()))
        try:
            table = handler(data if short is None else short)
        except ValidationError as error:
            found = [_plain(cls, cast("dict[str, Any]", e)) for e in error.errors(include_url=False)]
            raise faults(cls.__name__, found) from None
        wrong = [detail((key,) if key else (), message) for key, message in table.contradictions()]
        if wrong:
            raise faults(cls.__name__, wrong)
        if isinstance(info.context, list):
            info.context.append(table)
        return table


def keys_of(model: type[BaseModel]) -> dict[str, str]:
    """The keys a table knows in the file, each with its attribute name."""
    return {field.alias or name: name for name, field in model.model_fields.items()}


_WORDS_FOR = {
    "mapping_type": "a table",
    "dict_type": "a table",
    "tuple_type": "a list of tables",
}


def _plain(model: type[BaseModel], error: dict[str, Any]) -> InitErrorDetails:
    """Put one validation error of this table in plain words; those of inner tables already are."""
    loc, given, kind = error["loc"], error["input"], error["type"]
    if kind == "missing":
        return detail(loc, f"missing; required: {_required(model, str(loc[-1]))}", given)
    if kind == "extra_forbidden":
        return detail(loc, f"unknown key; {nearest(str(loc[-1]), keys_of(model))}", given)
    if kind in _WORDS_FOR:
        return detail(loc, said(given, _WORDS_FOR[kind]), given)
    return detail(loc, error["msg"], given)


def _required(model: type[BaseModel], key: str) -> str:
    field = model.model_fields[keys_of(model)[key]]
    kinds = [kind.allowed for kind in field.metadata if isinstance(kind, Kind)]
    if kinds:
        return kinds[0]
    if isinstance(field.annotation, type) and issubclass(field.annotation, Table):
        return field.annotation.forms()
    return "a list of tables" if "tuple" in str(field.annotation) else "a table"


def not_as_long(
    key: str, values: tuple[float, ...], by: str, others: tuple[float, ...]
) -> Iterator[tuple[str, str]]:
    """A fault where a list is not as long as the one it belongs to."""
    if len(values) != len(others):
        yield key, f"{len(values)} values given; allowed: {len(others)}, as many as in {by}"


class Curve(Table):
    """A value over load, linear between the points and held outside; a plain number is a flat curve."""

    load: RisingNumbers
    value: Numbers

    @classmethod
    def from_number(cls, value: float) -> Mapping[str, Any]:
        """Flat, after a check of the number itself."""
        field = cls.model_fields["value"].metadata[0]
        return {"load": (1.0,), "value": (field.kind(value),)}

    @classmethod
    def forms(cls) -> str:
        """A number or the lists."""
        field = cls.model_fields["value"].metadata[0]
        return f"{field.kind.allowed}, or a curve {{ load = [..], value = [..] }}"

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """Equal lengths."""
        yield from not_as_long("value", self.value, "load", self.load)

    def at(self, load: Array) -> Array:
        """The value at each load, any shape."""
        return np.asarray(np.interp(load, self.load, self.value))

    @property
    def flat_one(self) -> bool:
        """Whether it is 1 everywhere."""
        return all(value == 1.0 for value in self.value)


class EfficiencyCurve(Curve):
    """Absolute efficiencies over load."""

    value: Annotated[tuple[float, ...], ListOf(Within(0, 1, above=True), "efficiencies above 0, at most 1")]


class MultiplierCurve(Curve):
    """Multipliers over load, 1 at load 1."""

    value: Annotated[tuple[float, ...], ListOf(Within(0, 2, above=True), "numbers above 0, at most 2")]

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """Also 1 at load 1."""
        yield from super().contradictions()
        if len(self.load) == len(self.value) and abs(float(self.at(np.array(1.0))) - 1.0) > 1e-6:
            yield "value", f"{float(self.at(np.array(1.0))):g} at load 1 given; allowed: 1 at load 1"


class PricePath(Table):
    """A price by calendar year, price-year money per MWh (carbon: per tonne).

    Either `start` in the first year of operation with `change_per_year`, held before that year, or `value`
    at each `year`, linear between and held outside: then these two are not None. A plain number is a `start`
    without change.
    """

    start: Number = 0.0
    change_per_year: YearlyChange = 0.0
    year: Annotated[tuple[int, ...] | None, ListOf(Whole(1900, 2200), "calendar years", rising=True)] = None
    value: Annotated[tuple[float, ...] | None, ListOf(Within(), "numbers")] = None

    @classmethod
    def from_number(cls, value: float) -> Mapping[str, Any]:
        """Without change, after a check of the number itself."""
        return {"start": Within()(value)}

    @classmethod
    def forms(cls) -> str:
        """The three forms."""
        return "a number, { start = .., change_per_year = .. } or { year = [..], value = [..] }"

    def contradictions(self) -> Iterator[tuple[str, str]]:
        """One form, and that one complete."""
        given = [key for key in type(self).model_fields if key in self.model_fields_set]
        if given == ["year", "value"]:
            assert self.year is not None
            assert self.value is not None
            yield from not_as_long("value", self.value, "year", self.year)
        elif given not in (["start"], ["start", "change_per_year"]):
            yield "", f"{' and '.join(given) or 'an empty table'} given; allowed: {self.forms()}"
