"""Condensers with one side at constant temperature: textbook examples, part flow, heat balance of a shell."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from published import Published, published, values
from scipy.optimize import brentq

from appraise.cycle.condensers import (
    condensed_steam,
    log_mean_difference,
    part_flow_conductance,
    saturation_from_rating,
    transfer_units,
)

STEADY = settings(derandomize=True, deadline=None, max_examples=100)


def lmtd(hot_end_K: float, cold_end_K: float) -> float:
    return float(log_mean_difference(np.array(hot_end_K), np.array(cold_end_K)))


def ntu(steam_C: float, in_C: float, out_C: float) -> float:
    return float(transfer_units(np.array(steam_C), np.array(in_C), np.array(out_C)))


def checked(file_table: str, calculated: dict[str, float]) -> None:
    rows = values("exchanger", file_table)
    assert rows.keys() <= calculated.keys()
    for name, row in rows.items():
        row.check(calculated[name])


# --- textbook examples ------------------------------------------------------------------------------------


def test_oil_cooler_in_counterflow() -> None:
    heat_W = 0.1 * 2131.0 * 40.0
    out_C = 30.0 + heat_W / (0.2 * 4178.0)
    mean = lmtd(100.0 - out_C, 60.0 - 30.0)
    found = {"heat_W": heat_W, "water_out_C": out_C, "lmtd_K": mean}
    for table in ("Incropera 11.1", "Incropera 11.1, book", "Incropera 11.1, heat"):
        checked(table, found)
    for table in ("Incropera 11.1, length", "Incropera 11.1, printed length"):
        for row in published("exchanger", table):
            row.check(heat_W / (row.given["u_W_m2K"] * np.pi * 0.025 * mean))


def test_condenser_of_a_power_station() -> None:
    capacity_kW_K = 3e4 * 4.179
    out_C = 20.0 + 2e6 / capacity_kW_K
    units = ntu(50.0, 20.0, out_C)
    found = {
        "water_out_C": out_C,
        "effectiveness": -np.expm1(-units),
        "ntu": units,
        "ua_W_K": units * capacity_kW_K * 1e3,
        "lmtd_K": lmtd(50.0 - 20.0, 50.0 - out_C),
    }
    found["u_W_m2K"] = 1.0 / (1.0 / 7552.0 + 1.0 / 11_000.0)
    found["length_m"] = found["ua_W_K"] / (found["u_W_m2K"] * np.pi * 0.025 * 30_000.0 * 2.0)
    checked("Incropera condenser", found)
    checked("Incropera condenser, book", found)
    checked("Incropera condenser, tubes", found)
    checked("Incropera condenser, printed length", found)
    rated = saturation_from_rating(
        np.array(20.0), np.array(out_C), np.array(found["ua_W_K"] / 1e3), np.array(3e4), np.array(4.179)
    )
    assert float(rated) == pytest.approx(50.0, rel=1e-14)


def test_condenser_from_surface_and_mean_difference() -> None:
    mean = lmtd(30.0 - 14.0, 30.0 - 22.0)
    found = {"lmtd_K": mean, "heat_kW": 2.1 * 45.0 * mean}
    found["water_kg_s"] = found["heat_kW"] / (4.184 * 8.0)
    heat, none = np.array(found["heat_kW"]), np.array(0.0)
    found["steam_kg_s"] = float(condensed_steam(heat, none, none, np.array(2431.0), none))
    checked("Cengel condenser", found)
    checked("Cengel condenser, book", found)
    checked("Cengel condenser, flows", found)
    checked("Cengel condenser, printed flows", found)


def test_effectiveness_by_chart_and_by_formula() -> None:
    units = ntu(125.4, 60.0, 110.0)  # a ratio of differences, so degrees Fahrenheit do
    checked("Kreith 8.4", {"ntu": units, "effectiveness": -np.expm1(-units)})
    checked("Kreith 8.4, by chart", {"ntu": units})


def test_mean_difference_of_parallel_and_counter_flow() -> None:
    found = {"parallel_K": lmtd(90.0 - 20.0, 75.0 - 40.0), "counter_K": lmtd(90.0 - 40.0, 75.0 - 20.0)}
    checked("FOSSEE 9.5", found)
    heat_W = 0.2 * 1004.0 * 15.0
    surfaces = {f"{name}_m2": heat_W / (140.0 * found[f"{name}_K"]) for name in ("parallel", "counter")}
    checked("FOSSEE 9.5, surface", surfaces)


# --- rating -----------------------------------------------------------------------------------------------


FULL_FLOW, C = 200.0, 4.2  # kg/s, kJ/(kg K)
DESIGN_kW_K = ntu(83.0, 50.0, 80.0) * FULL_FLOW * C


def part_flow_difference_K(conductance_kW_K: float, share: float) -> float:
    """Terminal difference at a share of the flow, the same rise from 50 to 80 °C at every flow."""
    arrays = (np.array(x) for x in (50.0, 80.0, conductance_kW_K, share * FULL_FLOW, C))
    return float(saturation_from_rating(*arrays)) - 80.0


@pytest.mark.parametrize("row", published("exchanger", "Part flow"), ids=str)
def test_terminal_difference_at_part_flow(row: Published) -> None:
    """The square-root law: UA0 from 3 K at full flow."""
    share = row.given["flow"]
    row.check(part_flow_difference_K(float(part_flow_conductance(DESIGN_kW_K, np.array(share), 0.5)), share))


@pytest.mark.parametrize("row", published("exchanger", "Part flow, two resistances"), ids=str)
def test_terminal_difference_at_part_flow_by_film_coefficients(row: Published) -> None:
    """1/UA = R_rest + R_tube (m0/m)^0.8: another law through the same rating, close to the square root."""
    share = row.given["flow"]
    row.check(part_flow_difference_K(DESIGN_kW_K / (0.4 + 0.6 * share**-0.8), share))


def test_terminal_difference_is_proportional_to_the_rise_at_constant_flow() -> None:
    rise = np.array([30.0, 15.0, 6.0])
    units = ntu(83.0, 50.0, 80.0)
    t_sat = saturation_from_rating(
        np.full(3, 50.0), 50.0 + rise, np.full(3, units * 840.0), np.full(3, 200.0), 4.2
    )
    assert t_sat - 50.0 - rise == pytest.approx([3.0, 1.5, 0.6], rel=1e-12)


inlets_C = st.floats(5.0, 80.0)
rises_K = st.floats(1.0, 60.0)
differences_K = st.floats(0.2, 40.0)


@STEADY
@given(inlets_C, rises_K, differences_K)
def test_mean_difference_and_transfer_units_are_the_same_exchanger(inlet, rise, difference) -> None:
    """UA = m c NTU and UA = Q/LMTD: to machine precision, apart from the subtraction of temperatures."""
    outlet, t_sat = inlet + rise, inlet + rise + difference
    by_units = ntu(t_sat, inlet, outlet)
    by_mean = (outlet - inlet) / lmtd(t_sat - inlet, t_sat - outlet)
    assert by_mean == pytest.approx(by_units, rel=1e-13)


@STEADY
@given(inlets_C, rises_K, differences_K, st.floats(1.0, 500.0))
def test_rating_gives_back_the_terminal_difference_it_was_sized_with(inlet, rise, difference, flow) -> None:
    outlet = inlet + rise
    ua = ntu(outlet + difference, inlet, outlet) * flow * 4.19
    t_sat = saturation_from_rating(
        np.array(inlet), np.array(outlet), np.array(ua), np.array(flow), np.array(4.19)
    )
    assert float(t_sat) - outlet == pytest.approx(difference, rel=1e-9)


@STEADY
@given(st.floats(0.01, 200.0), st.floats(-1e-4, 1e-4))
def test_mean_difference_of_nearly_equal_ends_does_not_lose_digits(cold: float, relative: float) -> None:
    """The series: mean of the ends less a twelfth of the squared spread over it; symmetric in the ends."""
    hot = cold * (1.0 + relative)
    middle = 0.5 * (hot + cold)
    series = middle - (hot - cold) ** 2 / (12.0 * middle)
    assert lmtd(hot, cold) == pytest.approx(series, rel=1e-9)
    assert lmtd(hot, cold) == pytest.approx(lmtd(cold, hot), rel=1e-9)


@STEADY
@given(st.floats(0.01, 200.0), st.floats(0.01, 200.0))
def test_mean_difference_lies_between_geometric_and_arithmetic_mean(hot: float, cold: float) -> None:
    mean = lmtd(hot, cold)
    assert np.sqrt(hot * cold) * (1.0 - 1e-9) <= mean <= 0.5 * (hot + cold) * (1.0 + 1e-9)


@pytest.mark.parametrize("ends", [(0.0, 5.0), (5.0, 0.0), (-3.0, 5.0), ([5.0, 5.0], [3.0, -1.0])])
def test_a_temperature_cross_is_refused(ends) -> None:
    with pytest.raises(ValueError, match="end temperature differences must be above 0 K"):
        log_mean_difference(*(np.array(e) for e in ends))


def test_mean_difference_agrees_with_the_integral_it_is() -> None:
    """1/LMTD is the mean of 1/(T_sat - T) over the rise: by Gauss-Legendre."""
    nodes, weights = np.polynomial.legendre.leggauss(60)
    differences = 5.0 + 0.5 * (nodes + 1.0) * (40.0 - 5.0)
    assert 1.0 / lmtd(40.0, 5.0) == pytest.approx(float(0.5 * (weights / differences).sum()), rel=1e-12)


# --- heat balance of a shell ------------------------------------------------------------------------------


@STEADY
@given(
    st.floats(1e3, 5e4),
    st.floats(0.0, 15.0),
    st.floats(0.0, 200.0),
    st.floats(2400.0, 2900.0),
    st.floats(100.0, 450.0),
)
def test_heat_of_a_shell_balances(heat_kW, inflow, gain, steam_h, drain_h) -> None:
    """Q = m (h - h_d) + D (h_d,above - h_d), read backwards from the steam found."""
    found = condensed_steam(
        np.array(heat_kW), np.array(inflow), np.array(gain), np.array(steam_h), np.array(drain_h)
    )
    assert float(found) * (steam_h - drain_h) + inflow * gain == pytest.approx(heat_kW, rel=1e-12)


def test_economic_terminal_difference() -> None:
    """The optimum t (t + dT) = c_A crf Q/(U K), by a root on the cost of LMTD surface itself."""
    heat_kW, rise, u = 20e3, 20.0, 3.0
    per_kelvin = 2.1e-3 * heat_kW * 5000.0 * 0.05

    def yearly(difference: float) -> float:
        area = heat_kW / (u * lmtd(rise + difference, difference))
        return 400.0 * 0.1 * area + per_kelvin * difference

    def slope(difference: float) -> float:
        return yearly(difference + 1e-4) - yearly(difference - 1e-4)

    checked("Best terminal difference", {"difference_K": brentq(slope, 0.2, 8.0, xtol=1e-9)})
