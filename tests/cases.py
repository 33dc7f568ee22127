"""A small complete case in memory, and how a test writes one to a folder."""

from collections.abc import Mapping, Sequence
from datetime import datetime, timedelta
from math import cos, pi
from pathlib import Path
from typing import Any

SERIES = "hours.csv"


def minimal_case() -> dict[str, Any]:
    """Two options, one scenario, one item of capital, one driver; a fresh mapping each time."""
    return {
        "study": {
            "title": "A small plant",
            "currency": "EUR",
            "price_year": 2026,
            "first_year": 2028,
            "years": 20,
            "reference_scenario": "central",
        },
        "plant": {
            "live_steam": {"pressure_bar": 62.0, "temperature_C": 485.0, "max_kg_s": 20.0, "min_kg_s": 6.0},
            "boiler": {"efficiency": 0.89, "pressure_bar": 75.0},
            "turbine": {"efficiency": 0.84},
            "feed": {"deaerator_bar": 2.5, "bleed_bar": 5.0},
            "condenser": {"terminal_difference_K": 3.0},
            "design": {"heat_MW": 40.0, "supply_C": 98.0, "return_C": 46.0},
            "peak_boiler": {"efficiency": 0.92},
        },
        "tail": {"efficiency": 0.80},
        "new_condenser": {"terminal_difference_K": 3.0, "drain_approach_K": 7.0},
        "options": [
            {"key": "single", "name": "Single stage", "stages": 1, "baseline": True},
            {"key": "two-stage", "name": "Two stages", "stages": 2},
        ],
        "year": {"series": SERIES, "availability": 0.97},
        "scenarios": {"central": {"power": 62.0, "fuel": 22.0, "peak_fuel": 40.0}},
        "capex": {
            "items": [{"key": "tail", "name": "Tail turbine", "amount": 1.2e6, "source": "a quotation"}]
        },
        "finance": {"discount_rate": 0.06},
        "drivers": [{"label": "Power price", "path": "scenario.power", "low": "-20%", "high": "+20%"}],
    }


def synthetic_hours(start: datetime = datetime(2025, 1, 1), hours: int = 8760) -> list[list[str]]:
    """Rows of cells, the header first: a cosine over the year with a daily swing in the price."""
    rows = [["time", "heat_MW", "outdoor_C", "supply_C", "return_C", "power_price"]]
    for hour in range(hours):
        cold = 0.5 + 0.5 * cos(2.0 * pi * hour / 8766.0)  # 1 in mid-winter, 0 in mid-summer
        numbers = (6.0 + 38.0 * cold, 20.0 - 26.0 * cold, 76.0 + 24.0 * cold, 50.0 - 5.0 * cold)
        price = 60.0 + 25.0 * cos(2.0 * pi * (hour % 24 - 18) / 24.0)
        time = (start + timedelta(hours=hour)).isoformat(timespec="minutes")
        rows.append([time, *(f"{number:.3f}" for number in (*numbers, price))])
    return rows


def csv_text(rows: Sequence[Sequence[str]]) -> str:
    """Rows of cells as comma-separated text."""
    return "\n".join(",".join(row) for row in rows) + "\n"


def write_case(
    folder: Path, data: Mapping[str, Any], hours: str | Sequence[Sequence[str]] | None = None
) -> Path:
    """Write a case and its series (text or rows of cells, else a synthetic year); returns the case's path."""
    series = hours if isinstance(hours, str) else csv_text(hours or synthetic_hours())
    (folder / SERIES).write_text(series, encoding="utf-8")
    path = folder / "case.toml"
    path.write_text(toml_text(data), encoding="utf-8")
    return path


def toml_text(data: Mapping[str, Any]) -> str:
    """A mapping as TOML, every table of the top level inline."""
    return "".join(f"{_key(key)} = {_value(value)}\n" for key, value in data.items())


def _value(value: Any) -> str:
    if isinstance(value, Mapping):
        return "{ " + ", ".join(f"{_key(key)} = {_value(inner)}" for key, inner in value.items()) + " }"
    if isinstance(value, list | tuple):
        return "[" + ", ".join(map(_value, value)) + "]"
    return _text(value) if isinstance(value, str) else str(value).lower()


def _key(key: str) -> str:
    return key if key.replace("_", "").replace("-", "").isalnum() and key.isascii() else _text(key)


def _text(text: str) -> str:
    escaped = text.replace("\\", "\\\\").replace('"', '\\"').replace("\n", "\\n")
    return f'"{escaped}"'
