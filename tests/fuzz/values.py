"""What is put in the place of a value, and where the values of a case stand."""

from collections.abc import Iterator, MutableMapping, MutableSequence
from datetime import date, datetime, time
from random import Random
from typing import Any

Spot = tuple[Any, Any]  # a table or list, and the key or index in it


class Raw:
    """A piece of TOML as it stands in the file."""

    def __init__(self, text: str) -> None:
        self.text = text

    def __str__(self) -> str:
        return self.text


EXTREMES: tuple[Any, ...] = (
    0, 1, -1, 0.0, -0.0, 1e308, -1e308, 1e-308, -1e-308, 5e-324, 1e15, 1e-15, 1e5, 0.5, 50, 200,
    float("nan"), float("inf"), float("-inf"), 10**30, -(10**30), 1 << 63, Raw("9" * 5000), Raw("0xffffffff"),
    Raw("1_000"), "", " ", "x", "x" * 10_000, "é€\u202e\U0001f525\u0301", "\u0000", "a\nb", "=1+1", "1",
    "-20%", "07-01", date(2028, 1, 1), datetime(2028, 1, 1, 12), time(7, 30),
    Raw("2025-01-01t00:00:00z"), True, False,
    [], [1], [1.0, 2.0], [2.0, 1.0], [0.5, 0.5], [[1]], ["x", 1], {}, {"x": 1}, {"start": 1e308},
    {"load": [1.0, 0.5], "value": [0.9, 0.8]}, {"load": [0.0, 1e-300], "value": [0.9, 0.8]},
    {"year": [2030, 2028], "value": [1.0, 2.0]},
)  # fmt: skip

FACTORS = (0.0, 0.1, 0.3, 0.5, 0.8, 0.9, 0.97, 1.03, 1.1, 1.2, 1.5, 2.0, 5.0, 10.0, 1e3, 1e6, -1.0)


def spots(node: Any) -> Iterator[Spot]:
    """Every place below a table or list."""
    if isinstance(node, MutableMapping):
        items: Any = list(node.items())
    elif isinstance(node, MutableSequence):
        items = list(enumerate(node))
    else:
        return
    for key, value in items:
        yield node, key
        yield from spots(value)


def is_table(value: Any) -> bool:
    return isinstance(value, MutableMapping)


def is_number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def shown(value: Any) -> str:
    """A value for the description of a mutation, kept short."""
    text = f"{value}" if isinstance(value, Raw) else repr(value)
    return text if len(text) < 60 else f"{text[:50]}... ({len(text)} characters)"


def other_text(rng: Random, text: str) -> str:
    """A key with a slip of the pen."""
    at = rng.randrange(len(text)) if text else 0
    return rng.choice(
        (text[:at] + text[at + 1 :], text[:at] + "x" + text[at:], text.upper(), text + "_", "é" + text, "")
    )
