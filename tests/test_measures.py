"""Measures: published examples, defined results where there is none, and what a break-even must do."""

import numpy as np
import numpy_financial as npf
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from money_case import flow_of, increment, money_case, plain_flow
from published import published

from appraise.capex import OptionCapital
from appraise.cash_flow import cash_flow
from appraise.measures import (
    internal_rate,
    measures,
    modified_rate,
    net_present_value,
    payback,
    sign_changes,
)
from appraise.prices import scenario_prices

LAW = settings(derandomize=True, deadline=None, max_examples=60)


def flows(row) -> list[float]:
    return [value for name, value in row.given.items() if name[0] == "f" and name[1:].isdigit()]


# --- published examples ------------------------------------------------------------------------------------


@pytest.mark.parametrize("row", published("finance", "IRR") + published("finance", "IRR of a sheet"), ids=str)
def test_internal_rate(row) -> None:
    rate = internal_rate(flows(row))
    assert rate.reason is None
    assert rate.value is not None
    assert rate.value == pytest.approx(row.value, abs=max(row.tolerance, 1e-14))


@pytest.mark.parametrize("row", published("finance", "MIRR"), ids=str)
def test_modified_rate(row) -> None:
    rate = modified_rate(flows(row), row.given["finance"], row.given["reinvestment"])
    assert rate == pytest.approx(row.value, abs=1e-14)


@pytest.mark.parametrize("row", published("finance", "NPV of a sheet"), ids=str)
def test_net_present_value(row) -> None:
    row.check(float(net_present_value(row.given["rate"], flows(row))))


@pytest.mark.parametrize("row", published("finance", "Present worth of a series"), ids=str)
def test_present_worth_of_a_series(row) -> None:
    years = int(row.given["years"])
    row.check(float(net_present_value(row.given["rate"], [0.0] + [1.0] * years)))


@pytest.mark.parametrize("row", published("finance", "Capital recovery"), ids=str)
def test_capital_recovery(row) -> None:
    years = int(row.given["years"])
    row.check(1.0 / float(net_present_value(row.given["rate"], [0.0] + [1.0] * years)))


@pytest.mark.parametrize("row", published("finance", "Present worth of one sum"), ids=str)
def test_present_worth_of_one_sum(row) -> None:
    years = int(row.given["years"])
    row.check(float(net_present_value(row.given["rate"], [0.0] * years + [1.0])))


@pytest.mark.parametrize("row", published("finance", "Projects S and L"), ids=str)
def test_projects_through_the_whole_cash_flow(row) -> None:
    found = measures(plain_flow(flows(row)))
    calculated = {
        "npv": found.npv,
        "irr": found.irr,
        "mirr": found.mirr,
        "simple": found.simple_payback_years,
        "discounted": found.discounted_payback_years,
    }
    row.check(calculated[row.name])


# --- net present value and rates ---------------------------------------------------------------------------

spent = st.floats(1.0, 1e6)
gains = st.lists(st.floats(0.0, 1e6), min_size=2, max_size=30).filter(lambda g: sum(g) > 1.0)


@LAW
@given(spent, gains)
def test_npv_is_zero_at_the_internal_rate(cost, gained) -> None:
    series = [-cost, *gained]
    rate = internal_rate(series)
    assert rate.value is not None
    assert rate.value > -1.0
    # Of the flows themselves, at the rate: the terms cancel to rounding.
    terms = np.array(series) / (1.0 + rate.value) ** np.arange(len(series))
    assert abs(terms.sum()) <= 1e-9 * np.abs(terms).max()


@LAW
@given(spent, st.lists(st.floats(1.0, 1e6), min_size=3, max_size=20))
def test_rates_agree_with_an_independent_library(cost, gained) -> None:
    series = [-cost, *gained]
    assert internal_rate(series).value == pytest.approx(npf.irr(series), rel=1e-6, abs=1e-9)
    assert modified_rate(series, 0.05, 0.07) == pytest.approx(npf.mirr(series, 0.05, 0.07), rel=1e-12)


@LAW
@given(spent, gains, st.floats(0.0, 0.3))
def test_equal_rates_rank_alike(cost, gained, rate) -> None:
    """MIRR is above the discount rate exactly where the NPV is above zero."""
    series = [-cost, *gained]
    npv, mirr = float(net_present_value(rate, series)), modified_rate(series, rate, rate)
    assert mirr is not None
    if abs(npv) > 1e-6 * cost:
        assert (npv > 0.0) == (mirr > rate)


def test_npv_takes_many_rates_and_many_flows() -> None:
    many = net_present_value(np.array([0.0, 0.1]), np.array([[-10.0, 11.0], [-10.0, 11.0]]))
    assert many == pytest.approx([1.0, 0.0], abs=1e-14)


def test_several_rates_are_no_rate() -> None:
    """-100, 230, -132 is zero at 10 % and at 20 %."""
    series = [-100.0, 230.0, -132.0]
    assert net_present_value(np.array([0.1, 0.2]), series) == pytest.approx([0.0, 0.0], abs=1e-12)
    assert sign_changes(series) == 2
    rate = internal_rate(series)
    assert rate.value is None
    assert rate.reason == "several sign changes: 2, so the rate may not be unique"


@pytest.mark.parametrize(
    ("series", "reason"),
    [
        ([0.0, 0.0, 0.0], "no sign change: no flows at all"),
        ([0.0, 5.0, 1.0], "no sign change: every flow is a gain"),
        ([-5.0, 0.0, -1.0], "no sign change: every flow is a loss"),
    ],
)
def test_no_sign_change_no_rate(series, reason) -> None:
    rate = internal_rate(series)
    assert rate.value is None
    assert rate.reason == reason
    assert modified_rate(series, 0.1, 0.1) is None


def test_zeros_and_residues_of_rounding_are_no_sign_changes() -> None:
    assert sign_changes([0.0, -100.0, 0.0, 60.0, 1e-13, -1e-13, 60.0, 0.0]) == 1
    assert internal_rate([0.0, -100.0, 121.0]).value == pytest.approx(0.21, abs=1e-14)


def test_a_loss_has_a_negative_rate() -> None:
    assert internal_rate([-100.0, 1.0]).value == pytest.approx(-0.99, abs=1e-14)
    assert internal_rate([-1.0, 1e6]).value == pytest.approx(1e6 - 1.0, rel=1e-12)


def test_borrowing_has_a_rate_as_well() -> None:
    assert internal_rate([100.0, -110.0]).value == pytest.approx(0.1, abs=1e-14)


# --- payback -----------------------------------------------------------------------------------------------


def test_payback_counts_years_of_operation() -> None:
    assert payback([-100.0, 50.0, 50.0, 50.0], 1).years == 2.0
    assert payback([-40.0, -60.0, 50.0, 50.0, 50.0], 2).years == 2.0
    assert payback([-100.0, 80.0, 80.0], 1).years == 1.25
    assert payback([-100.0, 400.0], 1).years == 0.25


def test_payback_that_never_comes_or_does_not_last() -> None:
    assert payback([-100.0, 30.0, 30.0], 1).years is None
    assert payback([-100.0, 30.0, 30.0], 1).note == "never paid back"
    falls = payback([-100.0, 120.0, -60.0, 50.0], 1)
    assert falls.years == pytest.approx(100.0 / 120.0)
    assert falls.note == "falls below zero again in year 2 of operation"
    assert payback([-100.0, 120.0, -20.0], 1).note is None


def test_paid_back_while_it_is_built() -> None:
    early = payback([-100.0, 120.0, 10.0], 2)
    assert (early.years, early.note) == (0.0, "paid back before operation begins")
    assert payback([-100.0, 120.0, -30.0], 2).note == "never paid back"


def test_nothing_spent_nothing_to_pay_back() -> None:
    found = payback([0.0, 10.0, 10.0], 1)
    assert found.years is None
    assert found.note == "nothing to pay back: the running sum is never negative"


def test_exact_payback_in_the_last_year_survives_rounding() -> None:
    assert payback([-0.3, 0.1, 0.1, 0.1], 1).years == pytest.approx(3.0, rel=1e-12)


def test_notes_name_the_payback_they_belong_to() -> None:
    found = measures(plain_flow([-100.0, 52.0, 52.0], rate=0.10))
    assert found.simple_payback_years == pytest.approx(1.0 + 48.0 / 52.0)
    assert found.discounted_payback_years is None
    assert found.payback_note == "discounted: never paid back"


# --- break-evens: put the answer in, and the NPV is zero ---------------------------------------------------

SCENARIO = {
    "power": {"start": 50.0, "change_per_year": 0.01},
    "fuel": {"start": 20.0, "change_per_year": 0.02},
    "peak_fuel": 40.0,
    "carbon": {"year": [2027, 2036], "value": [20.0, 60.0]},
    "network_fee": 2.0,
    "power_premium": {"value": 5.0, "years": 4},
}
TABLES = {
    "capex": {"spend": [0.3, 0.7], "tie_in": {"from": "07-01", "to": "07-09"}},
    "opex": {
        "fixed_share_of_capex": 0.03,
        "fixed_per_year": 50.0,
        "variable_per_MWh": 1.0,
        "change_per_year": 0.01,
    },
    "finance": {
        "discount_rate": 0.07,
        "inflation": 0.02,
        "tax_rate": 0.25,
        "depreciation": {"method": "declining_balance", "rate": 0.2, "years": 8},
        "grant": 500.0,
        "residual_share": 0.1,
    },
}
EXTRA = increment(power=900.0, weighted=1000.0, premium=850.0, fuel=1100.0, peak=-30.0, tie_in=300.0)


def example(basis: str = "real", capital: float = 60_000.0, extra=EXTRA, **scenario):
    finance = TABLES["finance"] | {"basis": basis}
    case = money_case(**TABLES | {"finance": finance}, scenario=SCENARIO | scenario)
    return flow_of(case, extra, capital)


def scaled(path, factor: float):
    if isinstance(path, dict) and "start" in path:
        return path | {"start": path["start"] * factor}
    return path | {"value": [value * factor for value in path["value"]]}


@pytest.mark.parametrize("basis", ["real", "nominal"])
@pytest.mark.parametrize(
    ("name", "first"), [("power", 50.0), ("fuel", 20.0), ("carbon", 20.0)], ids=["power", "fuel", "carbon"]
)
def test_break_even_price_scales_the_whole_path_to_nothing(basis, name, first) -> None:
    flow = example(basis)
    price = getattr(measures(flow), f"break_even_{name}_price")
    assert abs(float(flow.npv)) > 100.0
    again = example(basis, **{name: scaled(SCENARIO[name], price / first)})
    assert float(again.npv) == pytest.approx(0.0, abs=1e-8 * abs(float(flow.npv)))


@pytest.mark.parametrize("basis", ["real", "nominal"])
def test_levelised_cost_replaces_power_and_premium(basis) -> None:
    """A constant price on the net energy, without premium; with the same energy weighted or not."""
    price = measures(example(basis)).levelised_cost
    assert price is not None
    same = increment(power=900.0, weighted=900.0, premium=0.0, fuel=1100.0, peak=-30.0, tie_in=300.0)
    assert float(example(basis, extra=same, power=price).npv) == pytest.approx(0.0, abs=1e-6)


@pytest.mark.parametrize("basis", ["real", "nominal"])
def test_largest_capital_takes_its_running_cost_along(basis) -> None:
    found = measures(example(basis)).largest_capex
    assert found is not None
    assert float(example(basis, capital=found).npv) == pytest.approx(0.0, abs=1e-6)


def test_largest_capital_counts_what_the_baseline_would_have_spent() -> None:
    flow = example()
    paid = OptionCapital("two-stage", (), 1.0, 70_000.0, 60_000.0, 90_000.0, avoided=10_000.0)
    with_avoided = cash_flow(flow.case, flow.prices, EXTRA, paid)
    assert measures(with_avoided).npv == pytest.approx(measures(flow).npv, rel=1e-14)
    found, plain = measures(with_avoided).largest_capex, measures(flow).largest_capex
    assert found is not None
    assert plain is not None
    assert found == pytest.approx(plain + 10_000.0, rel=1e-14)


def test_profitability_index_by_hand() -> None:
    """1000 spent, NPV 78.81975 at 10 %: 1.07882."""
    assert measures(plain_flow([-1000.0, 500.0, 400.0, 300.0, 100.0])).profitability_index == pytest.approx(
        1.07881975, abs=5e-9
    )


def test_profitability_index_is_on_capital_less_grant() -> None:
    flow = example()
    net = [(60_000.0 - 500.0) * share / 1.07**t for t, share in enumerate((0.3, 0.7))]
    assert measures(flow).profitability_index == pytest.approx(1.0 + float(flow.npv) / sum(net), rel=1e-12)


# --- defined results where a measure does not exist --------------------------------------------------------


def test_the_baseline_is_worth_nothing_and_has_no_measures() -> None:
    case = money_case(**TABLES, scenario=SCENARIO)
    found = measures(flow_of(case, increment(option="single"), 0.0))
    assert found.npv == 0.0
    assert found.irr_reason == "no sign change: no flows at all"
    rest = {name: getattr(found, name) for name in found.__slots__ if name not in ("npv", "irr_reason")}
    assert rest.pop("payback_note") == "nothing to pay back: the running sum is never negative"
    assert set(rest.values()) == {None}


def test_gain_without_capital() -> None:
    case = money_case(scenario={"power": 50.0})
    found = measures(flow_of(case, increment(power=10.0, weighted=10.0), 0.0))
    assert found.npv == pytest.approx(500.0 * (1 - 1.06**-10) / 0.06, rel=1e-12)
    assert found.irr is None
    assert found.irr_reason == "no sign change: every flow is a gain"
    assert found.mirr is None
    assert found.profitability_index is None
    assert found.simple_payback_years is None
    assert found.break_even_power_price == pytest.approx(0.0, abs=1e-12)
    assert found.break_even_fuel_price is None
    assert found.break_even_carbon_price is None
    assert found.largest_capex is not None
    assert found.largest_capex > 0.0


def test_pure_loss() -> None:
    found = measures(flow_of(money_case(), increment(fuel=10.0), 1000.0))
    assert found.npv < -1000.0
    assert found.irr is None
    assert found.irr_reason == "no sign change: every flow is a loss"
    assert found.payback_note == "never paid back"
    assert found.levelised_cost is None
    assert found.break_even_power_price is None
    assert found.largest_capex is not None
    assert found.largest_capex < 0.0


def test_investment_that_never_pays_but_returns_something() -> None:
    found = measures(plain_flow([-1000.0, 100.0, 100.0, 100.0]))
    assert found.irr is not None
    assert found.irr < 0.0
    assert found.simple_payback_years is None
    assert found.mirr == pytest.approx((331.0 / 1000.0) ** (1.0 / 3.0) - 1.0, rel=1e-12)


def test_reinvestment_at_a_rate_of_its_own() -> None:
    found = measures(plain_flow([-1000.0, 100.0, 100.0, 100.0], reinvestment_rate=0.0))
    assert found.mirr == pytest.approx(0.3 ** (1.0 / 3.0) - 1.0, rel=1e-12)


def test_discount_rate_of_zero() -> None:
    found = measures(plain_flow([-100.0, 60.0, 60.0], rate=0.0))
    assert found.npv == 20.0
    assert found.discounted_payback_years == found.simple_payback_years


def test_capital_that_costs_nothing_to_add_has_no_largest_amount() -> None:
    """A residual that gives back more than was spent: no capital is too much."""
    case = money_case(
        study={"years": 1},
        opex={"fixed_share_of_capex": 0.0},
        finance={"discount_rate": 0.0, "residual_share": 1.0},
    )
    assert measures(flow_of(case, increment(1, weighted=1.0), 100.0)).largest_capex is None


def test_scenario_prices_are_what_break_even_starts_from() -> None:
    flow = example()
    assert flow.prices.power.tolist() == scenario_prices(flow.case, "central").power.tolist()
    assert (flow.option, flow.scenario) == ("two-stage", "central")
