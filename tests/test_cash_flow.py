"""Cash flow: a case worked by hand line by line, depreciation tables, and the laws money must obey."""

from dataclasses import fields, replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from money_case import flow_of, increment, money_case
from published import published, values
from scipy.optimize import brentq

from appraise.capex import OptionCapital
from appraise.case.money import Depreciation
from appraise.cash_flow import (
    LINE_NAMES,
    Lines,
    cash_flow,
    declining_balance,
    depreciation_shares,
    present_value,
)
from appraise.measures import net_present_value
from appraise.prices import ScenarioPrices, scenario_prices

LAW = settings(derandomize=True, deadline=None, max_examples=60)

# --- three years by hand -----------------------------------------------------------------------------------

HAND = {
    "study": {"price_year": 2026, "first_year": 2028, "years": 3},
    "scenario": {"power": 50.0, "fuel": 20.0, "peak_fuel": 40.0, "carbon": 30.0, "network_fee": 2.0}
    | {"power_premium": {"value": 10.0, "years": 2}},
    "capex": {"spend": [0.4, 0.6], "tie_in": {"from": "07-01", "to": "07-21", "multiplier": 2.0}},
    "opex": {
        "fixed_share_of_capex": 0.02,
        "fixed_per_year": 5.0,
        "overhauls": [{"every_years": 2, "amount": 30.0}],
        "variable_per_MWh": 1.0,
        "change_per_year": 0.1,
    },
    "finance": {
        "discount_rate": 0.08,
        "basis": "nominal",
        "inflation": 0.1,
        "tax_rate": 0.25,
        "depreciation": {"method": "straight_line", "years": 2},
        "grant": 200.0,
        "residual_share": 0.1,
    },
}

# Capital 1000, spent 40:60 in 2026 and 2027; operation 2028-2030. Inflation 1, 1.1, 1.21, 1.331, 1.4641.
# A year: 20 MWh weighted power, 19 MWh power, 18 MWh with premium, 30 MWh fuel (6 t of CO2), 2 MWh less peak
# fuel (0.5 t less). Tie-in margin lost 50, doubled. All in money of the day:
BY_HAND = {
    "capital": [-400.0, -660.0, 0.0, 0.0, 0.0],
    "grant": [80.0, 132.0, 0.0, 0.0, 0.0],
    "tie_in": [0.0, -110.0, 0.0, 0.0, 0.0],  # 50 x 2 x 1.1, at the last spend
    "power": [0.0, 0.0, 1210.0, 1331.0, 1464.1],  # 50 x 20
    "premium": [0.0, 0.0, 217.8, 239.58, 0.0],  # 10 x 18 in two years
    "fuel": [0.0, 0.0, -726.0, -798.6, -878.46],  # 20 x 30
    "carbon": [0.0, 0.0, -217.8, -239.58, -263.538],  # 30 x 6 t
    "peak_fuel": [0.0, 0.0, 96.8, 106.48, 117.128],  # 40 x 2
    "peak_carbon": [0.0, 0.0, 18.15, 19.965, 21.9615],  # 30 x 0.5 t
    "fixed_om": [0.0, 0.0, -30.25, -80.5255, -44.289025],  # 25, (25 + 30) x 1.1, 25 x 1.21
    "variable_om": [0.0, 0.0, -22.99, -27.8179, -33.659659],  # 19, 20.9, 22.99
    "network_fee": [0.0, 0.0, -45.98, -50.578, -55.6358],  # 2 x 19
    "residual": [0.0, 0.0, 0.0, 0.0, 146.41],  # a tenth of 1000
    # Book 400 + 660 - 80 - 132 = 848, so 424 in 2028 and in 2029. Taxable, by year:
    #   0, -110, 499.73 - 424 = 75.73, 499.9236 - 424 = 75.9236, 327.607016 + 146.41 = 474.017016
    "tax": [0.0, 27.5, -18.9325, -18.9809, -118.504254],
}
NET_BY_HAND = [-320.0, -610.5, 480.7975, 480.9427, 355.512762]


def hand_flow(basis: str = "nominal"):
    case = money_case(**HAND | {"finance": HAND["finance"] | {"basis": basis}})
    extra = increment(3, power=19.0, weighted=20.0, premium=18.0, fuel=30.0, peak=-2.0, tie_in=50.0)
    return flow_of(case, extra, 1000.0)


@pytest.mark.parametrize("name", LINE_NAMES)
def test_line_by_hand(name) -> None:
    assert getattr(hand_flow().lines, name) == pytest.approx(BY_HAND[name], rel=1e-12, abs=1e-12)


def test_what_stands_between_the_lines_by_hand() -> None:
    flow = hand_flow()
    assert flow.years.tolist() == [2026.0, 2027.0, 2028.0, 2029.0, 2030.0]
    assert flow.inflation_factor == pytest.approx([1.0, 1.1, 1.21, 1.331, 1.4641], rel=1e-14)
    assert flow.depreciation == pytest.approx([0.0, 0.0, 424.0, 424.0, 0.0], rel=1e-14)
    assert flow.taxable == pytest.approx([0.0, -110.0, 75.73, 75.9236, 474.017016], rel=1e-12)
    assert flow.net == pytest.approx(NET_BY_HAND, rel=1e-12)
    assert flow.cumulative == pytest.approx([-320.0, -930.5, -449.7025, 31.2402, 386.752962], rel=1e-12)
    assert flow.discount_factor == pytest.approx([1.08**-t for t in range(5)], rel=1e-14)
    assert float(flow.npv) == pytest.approx(sum(x / 1.08**t for t, x in enumerate(NET_BY_HAND)), rel=1e-12)


def test_real_analysis_deflates_the_finished_lines() -> None:
    """Depreciation stays in money of the day, so the tax does not simply lose its inflation."""
    flow, factors = hand_flow("real"), [1.0, 1.1, 1.21, 1.331, 1.4641]
    for name in LINE_NAMES:
        real = [day / factor for day, factor in zip(BY_HAND[name], factors, strict=True)]
        assert getattr(flow.lines, name) == pytest.approx(real, rel=1e-12, abs=1e-12)
    assert flow.day_lines.tax == pytest.approx(BY_HAND["tax"], rel=1e-12)
    assert flow.net[1] == pytest.approx(-610.5 / 1.1, rel=1e-12)


def test_grant_may_leave_the_book_alone() -> None:
    case = money_case(**HAND | {"finance": HAND["finance"] | {"grant_reduces_depreciation": False}})
    assert flow_of(case, increment(3), 1000.0).depreciation == pytest.approx([0, 0, 530, 530, 0], rel=1e-14)


def test_baseline_carries_neither_grant_nor_yearly_cost() -> None:
    flow = flow_of(money_case(**HAND), increment(3, option="single"), 0.0)
    assert not any(getattr(flow.lines, name).any() for name in LINE_NAMES)


def test_no_grant_without_spending() -> None:
    assert not flow_of(money_case(**HAND), increment(3), 0.0).lines.grant.any()


def test_avoided_spending_is_money_in() -> None:
    """The option costs 700 and saves the baseline's 1000: less capital, less O&M, lost depreciation."""
    case = money_case(**HAND)
    saved = OptionCapital("two-stage", (), 1.0, 700.0, 600.0, 900.0, avoided=1000.0)
    flow = cash_flow(case, scenario_prices(case, "central"), increment(3), saved)
    assert flow.lines.capital == pytest.approx([120.0, 198.0, 0.0, 0.0, 0.0], rel=1e-14)
    assert flow.lines.fixed_om[2] == pytest.approx(-(0.02 * -300.0 + 5.0) * 1.21, rel=1e-14)
    assert flow.depreciation[2] == pytest.approx((-318.0 - 212.0) / 2.0, rel=1e-14)
    assert flow.avoided == 1000.0


# --- depreciation ------------------------------------------------------------------------------------------


def test_straight_line() -> None:
    row = values("finance", "Straight line")["yearly"]
    shares = depreciation_shares(Depreciation(method="straight_line", years=10), 25)
    assert shares[10:].tolist() == [0.0] * 15
    for share in shares[:10]:
        row.check(row.given["book"] * share)


def test_declining_balance() -> None:
    """Twice the straight rate; the sheet stops at the salvage value, here the rest goes in the last year."""
    charges = 2400.0 * depreciation_shares(Depreciation(method="declining_balance", rate=0.2, years=10), 20)
    rows = published("finance", "Declining balance")
    for row, charge in zip(rows[:9], charges, strict=False):
        row.check(charge)
    rows[9].check(charges[9] - 300.0)
    assert not charges[10:].any()


def test_table_that_outlives_the_plant_is_finished_in_the_last_year() -> None:
    percent = [row.value for row in published("finance", "MACRS 7 years")]
    plan = Depreciation(method="table", shares=[p / 100.0 for p in percent])
    assert depreciation_shares(plan, 20)[:8] * 100.0 == pytest.approx(percent, rel=1e-12)
    short = depreciation_shares(plan, 5) * 100.0
    assert short == pytest.approx([*percent[:4], 100.0 - sum(percent[:4])], rel=1e-12)


@pytest.mark.parametrize(
    "schedule",
    ["MACRS 3 years", "MACRS 5 years", "MACRS 7 years", "MACRS 10 years", "MACRS 15 years", "MACRS 20 years"],
)
def test_published_schedules_are_taken_as_they_are(schedule: str) -> None:
    """They add up to the whole book, so nothing is refused and nothing is left for the last year."""
    rows = published("finance", schedule)
    plan = Depreciation(method="table", shares=[row.value / 100.0 for row in rows])
    charges = 100.0 * depreciation_shares(plan, 25)
    assert not charges[len(rows) :].any()
    for row, charge in zip(rows, charges, strict=False):
        row.check(charge)


def test_table_that_does_not_add_up_leaves_the_rest_to_its_last_year() -> None:
    plan = Depreciation(method="table", shares=[0.5, 0.2])
    assert depreciation_shares(plan, 4) == pytest.approx([0.5, 0.5, 0.0, 0.0], abs=1e-15)


def test_no_method_no_depreciation() -> None:
    assert depreciation_shares(None, 3).tolist() == [0.0, 0.0, 0.0]


@LAW
@given(st.floats(0.01, 1.0), st.integers(1, 50), st.integers(1, 50))
def test_every_method_writes_off_the_whole_book(rate, years, life) -> None:
    for plan in (
        Depreciation(method="straight_line", years=years),
        Depreciation(method="declining_balance", rate=rate, years=years),
        Depreciation(method="declining_balance", rate=rate),
        Depreciation(method="table", shares=declining_balance(rate, years).tolist()),
    ):
        shares = depreciation_shares(plan, life)
        assert shares.sum() == pytest.approx(1.0, abs=1e-12)
        assert (shares >= -1e-12).all()


# --- laws --------------------------------------------------------------------------------------------------

amounts = st.floats(-1e5, 1e5)
energies = st.lists(amounts, min_size=4, max_size=4)
rates = st.floats(0.0, 0.3)


@st.composite
def increments(draw):
    power, weighted, premium, fuel, peak = (draw(energies) for _ in range(5))
    return increment(
        4, power=power, weighted=weighted, premium=premium, fuel=fuel, peak=peak, tie_in=draw(amounts)
    )


def four_years(**finance):
    return money_case(**HAND | {"study": HAND["study"] | {"years": 4}, "finance": HAND["finance"] | finance})


@LAW
@given(increments(), amounts, rates, st.floats(0.0, 0.2), st.floats(0.0, 0.9), st.integers(2020, 2035))
def test_real_and_nominal_agree_with_tax(extra, capital, real, inflation, tax, price_year) -> None:
    """Up to the price level of t = 0, where the rates obey Fisher's relation."""
    nominal = (1.0 + real) * (1.0 + inflation) - 1.0
    npv, scale = {}, 0.0
    for basis, rate in (("real", real), ("nominal", nominal)):
        study = HAND["study"] | {"years": 4, "price_year": price_year}
        finance = HAND["finance"] | {
            "basis": basis,
            "discount_rate": rate,
            "inflation": inflation,
            "tax_rate": tax,
        }
        flow = flow_of(money_case(**HAND | {"study": study, "finance": finance}), extra, capital)
        npv[basis] = float(flow.npv)
        scale = max(scale, float(sum(np.abs(getattr(flow.lines, name)).sum() for name in LINE_NAMES)))
    level = (1.0 + inflation) ** (2026 - price_year)
    assert npv["nominal"] == pytest.approx(npv["real"] * level, rel=1e-9, abs=1e-11 * scale)


def test_fisher_by_number() -> None:
    """1000 and 15 times 150 at 6 % real are the same flows with 2 % inflation at 8.12 % nominal."""
    rows = values("finance", "Real and nominal")
    nominal = 1.06 * 1.02 - 1.0
    rows["nominal"].check(nominal)
    for basis, rate in (("real", 0.06), ("nominal", nominal)):
        case = money_case(
            study={"price_year": 2026, "first_year": 2027, "years": 15},
            opex={"fixed_share_of_capex": 0.0},
            finance={"basis": basis, "discount_rate": rate, "inflation": 0.02},
        )
        rows["npv"].check(float(flow_of(case, increment(15, weighted=3.0), 1000.0).npv))


def test_real_rate_behind_a_nominal_one() -> None:
    """The real rate at which the same flows are worth the same: 10 % nominal, 4 % inflation."""

    def worth(basis: str, rate: float) -> float:
        case = money_case(
            study={"price_year": 2026, "first_year": 2027, "years": 15},
            opex={"fixed_share_of_capex": 0.0},
            finance={"basis": basis, "discount_rate": rate, "inflation": 0.04},
        )
        return float(flow_of(case, increment(15, weighted=3.0), 1000.0).npv)

    wanted = worth("nominal", 0.10)
    real = brentq(lambda rate: worth("real", rate) - wanted, 0.0, 0.1, xtol=1e-12)
    values("finance", "Real rate")["percent"].check(100.0 * real)


@LAW
@given(increments(), amounts, st.floats(0.01, 100.0))
def test_scaling_all_money_scales_the_npv(extra, capital, factor) -> None:
    def scaled(k: float) -> float:
        scenario = {
            name: HAND["scenario"][name] * k
            for name in ("power", "fuel", "peak_fuel", "carbon", "network_fee")
        }
        case = money_case(
            study=HAND["study"] | {"years": 4},
            scenario=scenario | {"power_premium": {"value": 10.0 * k, "years": 2}},
            capex=HAND["capex"],
            opex=HAND["opex"]
            | {"fixed_per_year": 5.0 * k, "variable_per_MWh": k}
            | {"overhauls": [{"every_years": 2, "amount": 30.0 * k}]},
            finance=HAND["finance"] | {"grant": 200.0 * k},
        )
        return float(flow_of(case, replace(extra, tie_in=extra.tie_in * k), capital * k).npv)

    assert scaled(factor) == pytest.approx(factor * scaled(1.0), rel=1e-9, abs=1e-4 * factor)


@LAW
@given(increments(), amounts)
def test_lines_add_up_in_every_year(extra, capital) -> None:
    flow = flow_of(four_years(basis="real"), extra, capital)
    rows = np.stack([getattr(flow.lines, name) for name in LINE_NAMES])
    assert flow.net == pytest.approx(rows.sum(axis=0), rel=1e-12, abs=1e-9 * np.abs(rows).max())
    assert flow.lines.total() == pytest.approx(flow.net, rel=1e-15)
    assert flow.cumulative[-1] == pytest.approx(flow.net.sum(), rel=1e-9, abs=1e-9 * np.abs(rows).max())
    pv = sum(float(present_value(row, flow.discount_factor)) for row in rows)
    assert pv == pytest.approx(float(flow.npv), rel=1e-9, abs=1e-9 * np.abs(rows).max())


@LAW
@given(st.floats(0.0, 0.9))
def test_nothing_more_than_the_baseline_is_no_money(tax) -> None:
    case = money_case(finance={"tax_rate": tax, "inflation": 0.03}, opex={"variable_per_MWh": 2.0})
    flow = flow_of(case, increment(), 0.0)
    assert not any(getattr(flow.lines, name).any() for name in LINE_NAMES)
    assert float(flow.npv) == 0.0


@LAW
@given(
    st.floats(1.0, 1e6), st.lists(st.floats(0.0, 1e6), min_size=3, max_size=10), rates, st.floats(0.001, 0.2)
)
def test_npv_of_a_plain_investment_falls_with_the_rate(spent, gains, rate, step) -> None:
    low, high = (float(net_present_value(r, [-spent, *gains, 1.0])) for r in (rate, rate + step))
    assert high < low


@LAW
@given(st.lists(increments(), min_size=2, max_size=4), st.lists(amounts, min_size=4, max_size=4))
def test_draws_broadcast_as_a_loop_would(draws, capitals) -> None:
    case, number = four_years(basis="real"), len(draws)
    prices = scenario_prices(case, "central")
    varied = [
        ScenarioPrices(
            prices.name,
            prices.title,
            *((1.0 + 0.1 * k) * getattr(prices, f.name) for f in fields(ScenarioPrices)[2:]),
        )
        for k in range(number)
    ]
    stacked = {
        f.name: np.stack([np.asarray(getattr(one, f.name)) for one in draws]) for f in fields(draws[0])[2:]
    }
    together = cash_flow(
        case,
        ScenarioPrices.stacked(varied),
        type(draws[0])("two-stage", "central", **stacked),
        np.array(capitals[:number]),
    )
    assert together.npv.shape == (number,)
    for k in range(number):
        alone = cash_flow(case, varied[k], draws[k], capitals[k])
        for name in LINE_NAMES:
            assert getattr(together.lines, name)[k].tolist() == getattr(alone.lines, name).tolist()
        assert together.npv[k] == pytest.approx(float(alone.npv), rel=1e-12, abs=1e-6)


def test_rates_may_be_drawn_too() -> None:
    """Discount rate, inflation and tax as arrays [draw], put into the case's finance as it is."""
    case = four_years()
    drawn = {"discount_rate": [0.03, 0.08], "inflation": [0.0, 0.1], "tax_rate": [0.3, 0.25]}
    many = case.finance.model_copy(update={name: np.array(value) for name, value in drawn.items()})
    extra = increment(4, power=19.0, weighted=20.0, fuel=10.0, tie_in=3.0)
    together = flow_of(case.model_copy(update={"finance": many}), extra, 1000.0)
    for k in range(2):
        alone = flow_of(four_years(**{name: value[k] for name, value in drawn.items()}), extra, 1000.0)
        assert together.npv[k] == pytest.approx(float(alone.npv), rel=1e-13)


def test_lines_know_what_operates() -> None:
    ones = Lines(**{name: np.ones(2) for name in LINE_NAMES})
    assert ones.total().tolist() == [14.0, 14.0]
    assert ones.operating().tolist() == [9.0, 9.0]
