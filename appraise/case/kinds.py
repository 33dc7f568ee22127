"""Value kinds of a case file: numbers in ranges, words, texts, lists.

Every kind says in plain words what it allows; a fault reads "what was given; allowed: what is allowed".
"""

import math
import re
from collections.abc import Iterable
from contextlib import suppress
from dataclasses import dataclass
from datetime import date, datetime, time
from itertools import pairwise
from typing import Annotated, Any

from pydantic import GetCoreSchemaHandler, ValidationError
from pydantic_core import InitErrorDetails, PydanticCustomError, core_schema

from appraise.case.words import said, shown

Place = tuple[int | str, ...]

SUM_TOLERANCE = 1e-9  # on shares that must sum to 1

# No plant and no money has numbers beyond these; with them products overflow and quotients are infinite. What
# may be 0 has no least size: it may be what is left of 0 in the program that wrote the file.
SMALLEST, LARGEST = 1e-9, 1e15


def fault(message: str) -> PydanticCustomError:
    """One fault of the value at hand."""
    return PydanticCustomError("appraise", "{text}", {"text": message})


def detail(place: Place, message: str, given: object = None) -> InitErrorDetails:
    """One fault at a place below the value at hand."""
    return InitErrorDetails(type=fault(message), loc=place, input=given)


def faults(name: str, details: Iterable[InitErrorDetails]) -> ValidationError:
    """Several faults at once, to be raised."""
    return ValidationError.from_exception_data(name, list(details))


def is_number(value: object) -> bool:
    """Whether a value is a real number (a truth value is not)."""
    return isinstance(value, int | float) and not isinstance(value, bool)


class Kind:
    """A value kind: `allowed` in words, and a call that returns the value or raises a fault."""

    __slots__ = ()

    @property
    def allowed(self) -> str:
        """What a value of this kind may be."""
        raise NotImplementedError

    def __call__(self, value: Any) -> Any:
        raise NotImplementedError

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> core_schema.CoreSchema:
        return core_schema.no_info_plain_validator_function(self)


@dataclass(frozen=True, slots=True)
class Within(Kind):
    """A finite number from `low` to `high`, both included unless `above` (low) or `below` (high) says not."""

    low: float | None = None
    high: float | None = None
    above: bool = False
    below: bool = False

    @property
    def allowed(self) -> str:
        """The range in words."""
        if self.low is None:
            return "a finite number"
        if self.high is None:
            return f"a number above {self.low:g}" if self.above else f"a number, at least {self.low:g}"
        start = f"above {self.low:g}" if self.above else f"from {self.low:g}"
        end = f"to below {self.high:g}" if self.below else f"to {self.high:g}"
        return f"a number {start}, at most {self.high:g}" if self.above else f"a number {start} {end}"

    def holds(self, value: float) -> bool:
        """Whether a number lies in the range."""
        over = self.low is None or (value > self.low if self.above else value >= self.low)
        under = self.high is None or (value < self.high if self.below else value <= self.high)
        return math.isfinite(value) and over and under

    def __call__(self, value: Any) -> float:
        fits = is_number(value) and (isinstance(value, float) or abs(value) < 1 << 1023)
        if not fits or not self.holds(value):
            raise fault(said(value, self.allowed))
        if abs(value) > LARGEST or (self.above and value < SMALLEST):
            size = f"from {SMALLEST:g} to {LARGEST:g}" if self.above else f"at most {LARGEST:g}"
            raise fault(said(value, f"{self.allowed}, in size {size}"))
        return float(value)


@dataclass(frozen=True, slots=True)
class Whole(Kind):
    """A whole number from `low` to `high`, both included."""

    low: int
    high: int | None = None

    @property
    def allowed(self) -> str:
        """The range in words."""
        end = f", at least {self.low}" if self.high is None else f" from {self.low} to {self.high}"
        return f"a whole number{end}"

    def __call__(self, value: Any) -> int:
        good = isinstance(value, int) and not isinstance(value, bool)
        if not good or value < self.low or (self.high is not None and value > self.high):
            raise fault(said(value, self.allowed))
        return int(value)


@dataclass(frozen=True, slots=True)
class Like(Kind):
    """A text that matches a pattern."""

    pattern: str
    words: str

    @property
    def allowed(self) -> str:
        """The pattern in words."""
        return self.words

    def __call__(self, value: Any) -> str:
        if not isinstance(value, str) or not re.fullmatch(self.pattern, value, re.DOTALL):
            raise fault(said(value, self.allowed))
        return value


@dataclass(frozen=True, slots=True)
class OneOf(Kind):
    """One of a few words."""

    words: tuple[str, ...]

    @property
    def allowed(self) -> str:
        """The words."""
        *others, last = (f'"{word}"' for word in self.words)
        return f"{', '.join(others)} or {last}"

    def __call__(self, value: Any) -> str:
        if not isinstance(value, str) or value not in self.words:
            raise fault(said(value, self.allowed))
        return value


@dataclass(frozen=True, slots=True)
class TrueOrFalse(Kind):
    """A truth value; 0, 1 and words are not."""

    @property
    def allowed(self) -> str:
        """Both."""
        return "true or false"

    def __call__(self, value: Any) -> bool:
        if not isinstance(value, bool):
            raise fault(said(value, self.allowed))
        return value


@dataclass(frozen=True, slots=True)
class ListOf(Kind):
    """A list of values of one kind, read as a tuple. A fault names the element, counted from 1.

    whole : the values are shares and sum to 1. rising : each is above the one before.
    """

    kind: Kind
    plural: str
    length: int | None = None  # None: one or more
    whole: bool = False
    rising: bool = False

    @property
    def allowed(self) -> str:
        """What is listed and how many."""
        return f"a list of {self.length or ''} {self.plural}".replace("  ", " ")

    def __call__(self, value: Any) -> tuple[Any, ...]:
        if not isinstance(value, list | tuple) or not value or len(value) != (self.length or len(value)):
            given = "an empty list" if isinstance(value, list | tuple) and not value else shown(value)
            raise fault(f"{given} given; allowed: {self.allowed}")
        found, wrong = [], []
        for index, element in enumerate(value):
            try:
                found.append(self.kind(element))
            except PydanticCustomError as error:
                wrong.append(detail((index,), error.message(), element))
        if wrong:
            raise faults("list", wrong)
        if self.whole and abs(math.fsum(found) - 1.0) > SUM_TOLERANCE:
            given = ", ".join(f"{share:g}" for share in found)
            raise fault(f"{given} given, sum {math.fsum(found):.12g}; allowed: a sum of 1")
        for before, after in pairwise(found) if self.rising else ():
            if after <= before:
                raise fault(f"{after:g} given after {before:g}; allowed: rising values")
        return tuple(found)


@dataclass(frozen=True, slots=True)
class TextOrTexts(Kind):
    """A text or a list of texts, read as a tuple."""

    @property
    def allowed(self) -> str:
        """Both forms."""
        return "a text or a list of texts, not empty"

    def __call__(self, value: Any) -> tuple[str, ...]:
        texts = [value] if isinstance(value, str) else value
        if (
            not isinstance(texts, list | tuple)
            or not texts
            or not all(isinstance(t, str) and t for t in texts)
        ):
            raise fault(said(value, self.allowed))
        return tuple(texts)


@dataclass(frozen=True, slots=True)
class DayOfYear(Kind):
    """A day as "MM-DD", February 29 included."""

    @property
    def allowed(self) -> str:
        """The form of a day."""
        return 'a day of the year as "MM-DD", such as "07-01"'

    def __call__(self, value: Any) -> str:
        if isinstance(value, str) and re.fullmatch(r"\d\d-\d\d", value, re.ASCII):
            try:
                date(2024, int(value[:2]), int(value[3:]))
            except ValueError:
                pass
            else:
                return value
        raise fault(said(value, self.allowed))


@dataclass(frozen=True, slots=True)
class CalendarDay(Kind):
    """A date as "YYYY-MM-DD", or as what a date is in a file; read as the text."""

    @property
    def allowed(self) -> str:
        """The form of a date."""
        return 'a date as "YYYY-MM-DD", such as "2026-12-01"'

    def __call__(self, value: Any) -> str:
        if isinstance(value, datetime) and value.timetz() == time():
            value = value.date()  # some programs store a day as its midnight
        text = value.isoformat() if type(value) is date else value
        if isinstance(text, str) and re.fullmatch(r"\d{4}-\d\d-\d\d", text, re.ASCII):
            with suppress(ValueError):
                return date.fromisoformat(text).isoformat()
        raise fault(said(value, self.allowed))


@dataclass(frozen=True, slots=True)
class Change(Kind):
    """A number that replaces a value, or a text like "-20%" that multiplies it (by 0.8)."""

    @property
    def allowed(self) -> str:
        """Both forms."""
        return 'a number, or a text like "-20%"'

    def __call__(self, value: Any) -> float | str:
        if is_number(value) and abs(value) <= LARGEST:
            return float(value)
        if isinstance(value, str) and re.fullmatch(r"[+-]?\d+(\.\d+)?\s*%", value.strip(), re.ASCII):
            return value.strip()
        size = f", in size at most {LARGEST:g}" if is_number(value) else ""
        raise fault(said(value, self.allowed + size))


_EFFICIENCY = Within(0, 1, above=True)
_POSITIVE = Within(0, above=True)

Number = Annotated[float, Within()]
Positive = Annotated[float, _POSITIVE]
MaybePositive = Annotated[float | None, _POSITIVE]
NotNegative = Annotated[float, Within(0)]
Efficiency = Annotated[float, _EFFICIENCY]
MaybeEfficiency = Annotated[float | None, _EFFICIENCY]
Share = Annotated[float, Within(0, 1)]
MaybeShare = Annotated[float | None, Within(0, 1)]
LossShare = Annotated[float, Within(0, 0.5, below=True)]
PressureBar = Annotated[float, Within(0.01)]  # below it the steam tables soon end
WaterC = Annotated[float, Within(0, 200)]
OffsetK = Annotated[float, Within(-100, 100)]
DifferenceK = Annotated[float, Within(0, 50, above=True)]
Exponent = Annotated[float, Within(0, 2)]
YearlyChange = Annotated[float, Within(-0.5, 1)]
Rate = Annotated[float, Within(0, 1)]
CalendarYear = Annotated[int, Whole(1900, 2200)]
CalendarYears = Annotated[tuple[int, ...], ListOf(Whole(1900, 2200), "calendar years", rising=True)]
Years = Annotated[int, Whole(1, 50)]
Flag = Annotated[bool, TrueOrFalse()]
AnyText = Annotated[str, Like(r".*", "a text")]
Text = Annotated[str, Like(r".*\S.*", "a text, not empty")]
MaybeText = Annotated[str | None, Like(r".*\S.*", "a text, not empty")]
Key = Annotated[str, Like(r"[a-z0-9-]+", "a text of the letters a to z, the digits 0 to 9 and -")]
CurrencyCode = Annotated[str, Like(r"[A-Za-z]{3}", "three letters")]
MaybeCurrencyCode = Annotated[str | None, Like(r"[A-Za-z]{3}", "three letters")]
MaybeTexts = Annotated[tuple[str, ...] | None, TextOrTexts()]
RisingNumbers = Annotated[tuple[float, ...], ListOf(Within(), "numbers", rising=True)]
Numbers = Annotated[tuple[float, ...], ListOf(Within(), "numbers")]
PositiveNumbers = Annotated[tuple[float, ...], ListOf(_POSITIVE, "numbers above 0")]
WholeShares = Annotated[tuple[float, ...], ListOf(Within(0, 1), "shares from 0 to 1", whole=True)]
Day = Annotated[str, DayOfYear()]
MaybeDate = Annotated[str | None, CalendarDay()]
MaybeChange = Annotated[float | str | None, Change()]
