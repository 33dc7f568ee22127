"""What the commands print: JSON with the full precision of every number, and tables a person can read."""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import fields, is_dataclass
from textwrap import fill
from typing import TYPE_CHECKING, Any

from appraise.tables import WIDTH, Column, heading, table_of

if TYPE_CHECKING:
    from appraise.case.load import LoadedCase
    from appraise.cycle.balance import Balance
    from appraise.errors import Problem


def plain(value: object, where: str = "") -> Any:
    """A result as what JSON knows: records become mappings by field name, arrays lists, None stays null.

    Raises ValueError for a number that is not finite, and TypeError for what JSON has no form for, naming
    the place ("options[0].stages[1].moisture"): a missing value must have been None from the start.
    """
    if value is None or isinstance(value, bool | int | str):
        return value
    if isinstance(value, float):
        if not math.isfinite(value):
            raise ValueError(f"{where or 'value'} is {float(value)}")
        return float(value)
    if is_dataclass(value):
        return {f.name: plain(getattr(value, f.name), _below(where, f.name)) for f in fields(value)}
    if isinstance(value, Mapping):
        return {str(key): plain(item, _below(where, str(key))) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [plain(item, f"{where}[{index}]") for index, item in enumerate(value)]
    if hasattr(value, "tolist"):  # numpy's arrays and scalars, without importing numpy
        return plain(value.tolist(), where)
    raise TypeError(f"{where or 'value'}: {type(value).__name__} has no JSON form")


def _below(where: str, name: str) -> str:
    return f"{where}.{name}" if where else name


def json_text(content: Mapping[str, object]) -> str:
    """One JSON document, ASCII only so that every pipe and encoding carries it, ending in a line break."""
    return json.dumps(plain(content), indent=2, allow_nan=False) + "\n"


def balance_json(balances: Sequence[Balance]) -> dict[str, Any]:
    """Heat balances, one entry per option, under the names of their fields."""
    return {"options": plain(balances, "options")}


def problem_list(problems: Sequence[Problem], noun: str) -> str:
    """ "2 faults:" and one indented line for each."""
    plural = "" if len(problems) == 1 else "s"
    return "\n".join([f"{len(problems)} {noun}{plural}:", *(f"  {problem}" for problem in problems)])


def balance_table(balances: Sequence[Balance], title: str, states: bool) -> str:
    """Comparison of the options, then the stages of each; with `states` also its steam and water states."""
    remarks = "\n".join(
        fill(remark, WIDTH, subsequent_indent="  ", break_on_hyphens=False) for remark in _remarks(balances)
    )
    parts = [heading(title), _comparison(balances), *([remarks] if remarks else [])]
    for balance in balances:
        parts += [heading(f"{balance.key}: {balance.name}"), _stages(balance)]
        parts += [_states(balance)] if states else []
    return "\n\n".join(parts)


def _comparison(balances: Iterable[Balance]) -> str:
    return table_of(
        [
            (Column("option"), lambda b: b.key),
            (Column("heat", "MW", 2), lambda b: b.heat_MW),
            (Column("gross\npower", "MW", 3), lambda b: b.power_gross_MW),
            (Column("net\npower", "MW", 3), lambda b: b.power_net_MW),
            (Column("fuel", "MW", 2), lambda b: b.fuel_MW),
            (Column("live\nsteam", "kg/s", 3), lambda b: b.live_steam_kg_s),
            (Column("bleed", "kg/s", 3), lambda b: b.bleed_kg_s),
            (Column("extra power\nper heat", "kW/MW", 2), lambda b: 1e3 * b.extra_power_per_heat),
            (Column("share of\nideal gain", "%", 1), lambda b: percent(b.ideal_gain_share)),
            (Column("closure", "", 1), lambda b: _closure(b.closure)),
        ],
        balances,
    )


def _closure(value: float) -> str:
    """Relative; below 1e-12 it is noise of the machine."""
    return "< 1e-12" if value < 1e-12 else f"{value:.0e}"


def _remarks(balances: Iterable[Balance]) -> Iterator[str]:
    """What a reader of the numbers must know about a point."""
    balances = tuple(balances)
    yield from (f"{balance.key}: {remark}." for balance in balances for remark in balance.remarks)
    for balance in balances:
        if balance.runs_as_baseline:
            yield f"{balance.key}: no steady operation of its own at this point; it runs as the baseline."
        if balance.deaerator_on_live_steam:
            yield f"{balance.key}: the bleed is below the deaerator, which takes throttled live steam."


def _stages(balance: Balance) -> str:
    last = len(balance.stages) - 1
    names = (f"{i + 1}{' (hot)' if i == last else ' (cold)' if i == 0 else ''}" for i in range(last + 1))
    return table_of(
        [
            (Column("stage"), lambda row: row[0]),
            (Column("shell", "bar", 4), lambda row: row[1].shell_bar),
            (Column("saturation", "°C", 2), lambda row: row[1].saturation_C),
            (Column("water in", "°C", 2), lambda row: row[1].water_in_C),
            (Column("water out", "°C", 2), lambda row: row[1].water_out_C),
            (Column("TTD", "K", 2), lambda row: row[1].terminal_difference_K),
            (Column("steam", "kg/s", 3), lambda row: row[1].steam_kg_s),
            (Column("moisture", "%", 2), lambda row: percent(row[1].moisture)),
            (Column("exhaust", "m³/s", 2), lambda row: row[1].exhaust_m3_s),
            (Column("heat", "MW", 3), lambda row: row[1].heat_MW),
            (Column("area", "m²", 0), lambda row: row[1].area_m2),
        ],
        list(zip(names, balance.stages, strict=True)),
    )


def _states(balance: Balance) -> str:
    return table_of(
        [
            (Column("state"), lambda state: state.label),
            (Column("pressure", "bar", 4), lambda state: state.pressure_bar),
            (Column("temperature", "°C", 2), lambda state: state.temperature_C),
            (Column("enthalpy", "kJ/kg", 2), lambda state: state.enthalpy_kJ_kg),
            (Column("entropy", "kJ/(kg K)", 4), lambda state: state.entropy_kJ_kgK),
            (Column("quality", "", 4), lambda state: state.quality),
            (Column("flow", "kg/s", 3), lambda state: state.flow_kg_s),
        ],
        balance.states,
    )


def percent(share: float | None) -> float | None:
    """A share as a percentage; none stays none."""
    return None if share is None else 100.0 * share


def check_report(loaded: LoadedCase) -> str:
    """What was read, and what about it is doubtful."""
    case, hours = loaded.case, loaded.hours
    reference = case.study.reference_scenario
    facts = [
        ("options", [f"{o.key} (baseline)" if o.baseline else o.key for o in case.options]),
        ("scenarios", [f"{name} (reference)" if name == reference else name for name in case.scenarios]),
        (
            "hours",
            [f"{len(hours.time)} from {loaded.hours_path.name}", f"{hours.time[0]} to {hours.time[-1]}"],
        ),
        ("capital", [item.key for item in case.capex.items]),
        ("drivers", [str(len(case.drivers))]),
    ]
    lines = [
        fill(
            f"{name:<11}{', '.join(values) or 'none'}",
            WIDTH,
            subsequent_indent=" " * 11,
            break_on_hyphens=False,
        )
        for name, values in facts
    ]
    doubts = problem_list(loaded.doubts, "doubt") if loaded.doubts else "Nothing in it is doubtful."
    return "\n".join([heading(f"{loaded.path.name}: {case.study.title}"), "", *lines, "", doubts])
