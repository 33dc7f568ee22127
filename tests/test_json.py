"""The results as JSON: every promised name with its type, no number that is none, and sums that agree."""

import json
import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np
import pytest

from appraise.cash_flow import LINE_NAMES
from appraise.output import balance_json, json_text, plain
from appraise.results import study_json
from appraise.study import Study, balances

Kind = str | type | tuple[type, ...]

NUMBER = (int, float)
MAYBE = (int, float, type(None))
NUMBERS = "numbers"  # a list of them
TABLES = "tables"  # a list of mappings

BALANCE: dict[str, Kind] = {
    "key": str,
    "name": str,
    "heat_MW": NUMBER,
    "power_gross_MW": NUMBER,
    "power_net_MW": NUMBER,
    "fuel_MW": NUMBER,
    "live_steam_kg_s": NUMBER,
    "bleed_kg_s": NUMBER,
    "heater_bleed_kg_s": NUMBER,
    "bleed_bar": NUMBER,
    "network_kg_s": NUMBER,
    "power_to_heat": NUMBER,
    "extra_power_per_heat": NUMBER,
    "incremental_efficiency": MAYBE,
    "ideal_gain_share": MAYBE,
    "closure": NUMBER,
    "stages": TABLES,
    "states": TABLES,
}
STAGE: dict[str, Kind] = {
    "shell_bar": NUMBER,
    "saturation_C": NUMBER,
    "water_in_C": NUMBER,
    "water_out_C": NUMBER,
    "terminal_difference_K": NUMBER,
    "steam_kg_s": NUMBER,
    "steam_kJ_kg": NUMBER,
    "moisture": NUMBER,
    "exhaust_m3_s": NUMBER,
    "drain_kJ_kg": NUMBER,
    "heat_MW": NUMBER,
    "area_m2": MAYBE,
}
STATE: dict[str, Kind] = {
    "label": str,
    "pressure_bar": NUMBER,
    "temperature_C": NUMBER,
    "enthalpy_kJ_kg": NUMBER,
    "entropy_kJ_kgK": NUMBER,
    "quality": MAYBE,
    "flow_kg_s": NUMBER,
}
YEAR: dict[str, Kind] = {
    "scenario": str,
    "option": str,
    "heat_MWh": NUMBER,
    "peak_heat_MWh": NUMBER,
    "power_net_MWh": NUMBER,
    "fuel_MWh": NUMBER,
    "peak_fuel_MWh": NUMBER,
    "power_value": NUMBER,
    "extra_power_MWh": NUMBER,
    "extra_fuel_MWh": NUMBER,
    "extra_power_per_heat": MAYBE,
    "incremental_efficiency": MAYBE,
    "hours_on": NUMBER,
    "hours_at_limit": NUMBER,
    "hours_bypassed": NUMBER,
    "hours_at_generator_limit": NUMBER,
    "power_lost_MWh": NUMBER,
    "hours_deaerator_on_live_steam": NUMBER,
    "hours_could_gain": NUMBER,
    "capture_price": MAYBE,
    "capture_ratio": MAYBE,
    "first_year_gain": NUMBER,
    "co2_t": NUMBER,
}
CAPEX: dict[str, Kind] = {"option": str, "total": NUMBER, "low": NUMBER, "high": NUMBER, "items": TABLES}
CASH_FLOW: dict[str, Kind] = {
    "scenario": str,
    "option": str,
    "lines": dict,
    "net": NUMBERS,
    "npv": NUMBER,
    "irr": MAYBE,
    "irr_reason": (str, type(None)),
    "mirr": MAYBE,
    "simple_payback_years": MAYBE,
    "discounted_payback_years": MAYBE,
    "profitability_index": MAYBE,
    "levelised_cost": MAYBE,
    "break_even_power_price": MAYBE,
    "break_even_fuel_price": MAYBE,
    "break_even_carbon_price": MAYBE,
    "largest_capex": MAYBE,
}
SCENARIOS: dict[str, Kind] = {"best": dict, "worst_npv": dict, "largest_regret": dict, "regret": dict}
TORNADO: dict[str, Kind] = {"option": str, "base_npv": NUMBER, "bars": TABLES}
BAR: dict[str, Kind] = {
    "label": str,
    "path": str,
    "low": (int, float, str),
    "high": (int, float, str),
    "npv_low": MAYBE,
    "npv_high": MAYBE,
    "swing": NUMBER,
}
CHECK: dict[str, Kind] = {"name": str, "passed": bool, "value": MAYBE, "limit": MAYBE, "message": str}
LINES = [
    "capital",
    "grant",
    "tie_in",
    "power",
    "premium",
    "fuel",
    "carbon",
    "peak_fuel",
    "peak_carbon",
    "fixed_om",
    "variable_om",
    "network_fee",
    "residual",
    "tax",
]


@pytest.fixture(scope="module")
def told(marrowby_study: Study) -> Any:
    """What a script reads: the text, parsed again, any NaN in it refused."""

    def refuse(constant: str) -> None:
        raise AssertionError(f"{constant} in the JSON")

    return json.loads(json_text(study_json(marrowby_study)), parse_constant=refuse)


def test_the_parts_of_the_document(told: Any) -> None:
    assert set(told) >= {"design_point", "year", "capex", "cash_flow", "scenarios", "tornado", "checks"}


def fits(value: Any, kind: Kind) -> bool:
    """Whether a value is of a kind; a truth value is no number."""
    if kind == NUMBERS:
        return isinstance(value, list) and all(fits(one, NUMBER) for one in value)
    if kind == TABLES:
        return isinstance(value, list) and all(isinstance(one, dict) for one in value)
    assert not isinstance(kind, str)
    return isinstance(value, kind) and (kind is bool or not isinstance(value, bool))


def tables(told: Any) -> Iterator[tuple[str, dict[str, Any], dict[str, Kind]]]:
    """Every table of the document with the names it must have."""
    for balance in told["design_point"]:
        yield balance["key"], balance, BALANCE
        yield from ((f"stage of {balance['key']}", stage, STAGE) for stage in balance["stages"])
        yield from ((f"state of {balance['key']}", state, STATE) for state in balance["states"])
    for part, names in (("year", YEAR), ("capex", CAPEX), ("cash_flow", CASH_FLOW), ("checks", CHECK)):
        yield from ((part, one, names) for one in told[part])
    yield "scenarios", told["scenarios"], SCENARIOS
    for one in told["tornado"]:
        yield "tornado", one, TORNADO
        yield from (("bar", bar, BAR) for bar in one["bars"])


def test_every_promised_name_is_there_with_its_type(told: Any) -> None:
    seen = 0
    for where, table, names in tables(told):
        for name, kind in names.items():
            assert name in table, f"{where} has no {name}"
            assert fits(table[name], kind), f"{where}: {name} is {table[name]!r}"
        seen += 1
    assert seen > 150


def test_balance_alone_has_the_same_names(marrowby_study: Study, told: Any) -> None:
    alone = json.loads(json_text(balance_json(balances(marrowby_study.case))))
    assert list(alone) == ["options"]
    assert alone["options"] == told["design_point"]


def test_states_run_from_live_steam_to_the_boiler(told: Any) -> None:
    assert [state["label"] for state in told["design_point"][2]["states"]] == [
        "live steam",
        "deaerator bleed",
        "exhaust 2",
        "exhaust 1",
        "condensate after pump",
        "feed water after deaerator",
        "feed water to boiler",
    ]


def test_one_entry_for_every_scenario_and_option(marrowby_study: Study, told: Any) -> None:
    case = marrowby_study.case
    keys = [option.key for option in case.options]
    pairs = [(name, key) for name in case.scenarios for key in keys]
    for part in ("year", "cash_flow"):
        assert [(one["scenario"], one["option"]) for one in told[part]] == pairs
    assert [one["key"] for one in told["design_point"]] == [one["option"] for one in told["capex"]] == keys
    assert [one["option"] for one in told["tornado"]] == [o.key for o in case.options if not o.baseline]
    assert set(told["scenarios"]["best"]) == set(told["scenarios"]["regret"]) == set(case.scenarios)


def test_lines_have_their_names_and_sum_to_the_net_flow(told: Any) -> None:
    assert list(LINE_NAMES) == LINES
    for flow in told["cash_flow"]:
        assert list(flow["lines"]) == LINES
        scale = max(map(abs, flow["net"]))
        for t, net in enumerate(flow["net"]):
            assert math.fsum(flow["lines"][name][t] for name in LINES) == pytest.approx(
                net, abs=1e-12 * scale
            )


def test_net_present_value_is_that_of_the_net_flow(marrowby_study: Study, told: Any) -> None:
    rate = marrowby_study.case.finance.discount_rate
    for flow in told["cash_flow"]:
        npv = math.fsum(net / (1.0 + rate) ** t for t, net in enumerate(flow["net"]))
        assert flow["npv"] == pytest.approx(npv, rel=1e-12, abs=1e-6)


def test_items_sum_to_the_capital(told: Any) -> None:
    for one in told["capex"]:
        for total, amount in (("total", "amount"), ("low", "low"), ("high", "high")):
            paid = one["multiplier"] * math.fsum(item[amount] for item in one["items"])
            assert one[total] == pytest.approx(paid, rel=1e-12)
        assert one["low"] <= one["total"] <= one["high"]


def test_energies_are_differences_against_the_baseline(marrowby_study: Study, told: Any) -> None:
    baseline = marrowby_study.case.baseline.key
    bases = {one["scenario"]: one for one in told["year"] if one["option"] == baseline}
    demand = math.fsum(marrowby_study.hours.heat_MW)
    for one in told["year"]:
        base = bases[one["scenario"]]
        assert one["heat_MWh"] + one["peak_heat_MWh"] == pytest.approx(demand, rel=1e-12)
        for name in ("power_net_MWh", "fuel_MWh"):
            extra = one[f"extra_{name.replace('_net', '')}"]
            assert one[name] - base[name] == pytest.approx(extra, rel=1e-9, abs=1e-6)


def test_first_year_gain_is_the_sum_of_the_operating_lines(told: Any) -> None:
    gains = {(one["scenario"], one["option"]): one["first_year_gain"] for one in told["year"]}
    operating = [name for name in LINES if name not in ("capital", "grant", "tie_in", "residual", "tax")]
    for flow in told["cash_flow"]:
        first = flow["calendar_year"].index(told["study"]["first_year"])
        gain = math.fsum(flow["lines"][name][first] for name in operating)
        assert gains[flow["scenario"], flow["option"]] == pytest.approx(gain, rel=1e-12, abs=1e-9)


def test_regret_is_the_distance_to_the_best(told: Any) -> None:
    npv: dict[str, dict[str, float]] = {}
    for flow in told["cash_flow"]:
        npv.setdefault(flow["scenario"], {})[flow["option"]] = flow["npv"]
    compared = told["scenarios"]
    for name, values in npv.items():
        best = max(values, key=lambda key: values[key])
        assert compared["best"][name] == best
        for key, value in values.items():
            assert compared["regret"][name][key] == values[best] - value
    for key in compared["worst_npv"]:
        assert compared["worst_npv"][key] == min(values[key] for values in npv.values())
        assert compared["largest_regret"][key] == max(compared["regret"][name][key] for name in npv)


def test_the_document_is_ascii_and_ends_in_a_line_break(marrowby_study: Study) -> None:
    text = json_text(study_json(marrowby_study))
    assert text.isascii()
    assert text.endswith("}\n")


@dataclass(frozen=True)
class Reading:
    """A result with what JSON has no form for."""

    shares: tuple[float, ...]
    values: Any


def test_a_number_that_is_none_is_named_and_refused() -> None:
    with pytest.raises(ValueError, match=r"^options\[0\]\.shares\[1\] is nan$"):
        plain([Reading((0.5, math.nan), None)], "options")
    with pytest.raises(ValueError, match=r"^values\[1\]\[0\] is inf$"):
        plain(Reading((), np.array([[0.0], [np.inf]])))
    with pytest.raises(TypeError, match=r"^values: complex has no JSON form$"):
        plain(Reading((), 1j))


def test_arrays_and_their_scalars_become_lists_and_numbers() -> None:
    assert plain(np.arange(3)) == [0, 1, 2]
    assert plain(np.float64(0.1)) == 0.1
    assert plain(np.bool_(True)) is True
    assert plain({"a": (None, "x")}) == {"a": [None, "x"]}
