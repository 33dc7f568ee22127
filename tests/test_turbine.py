"""Expansion with moisture, the cone law, swallowing and the part-load curve."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from published import Published, published, values
from scalar.marrowby import marrowby
from scipy.optimize import brentq

from appraise import steam
from appraise.cycle.turbine import (
    bleed_pressure,
    exhaust_state,
    flange_pressure,
    live_steam,
    main_line_enthalpy,
    moisture,
    swallowing,
    tail_enthalpy,
)
from appraise.errors import SolveError
from appraise.steam_fits import enthalpy_ps, entropy_ph, saturation

STEADY = settings(derandomize=True, deadline=None, max_examples=60)


def at(*pressure_bar: float):
    return saturation(np.array(pressure_bar))


# --- expansion --------------------------------------------------------------------------------------------

inlet_bars = st.floats(0.3, 3.0)
pressure_ratios = st.floats(0.15, 0.98)
excesses_kJ_kg = st.floats(-250.0, 250.0)  # inlet enthalpy above that of the saturated vapour
efficiencies = st.floats(0.3, 1.0)
baumann_factors = st.floats(0.0, 2.0)


def tail_by_root(p_in: float, h_in: float, p_out: float, efficiency: float, baumann: float) -> float:
    """Baumann's rule as it stands, solved for the outlet by bracketing, on the library's direct functions."""
    hf_in, hg_in = float(steam.liquid_enthalpy_p(p_in)), float(steam.vapour_enthalpy_p(p_in))
    hf, hg = float(steam.liquid_enthalpy_p(p_out)), float(steam.vapour_enthalpy_p(p_out))
    sf, sg = float(steam.liquid_entropy_p(p_out)), float(steam.vapour_entropy_p(p_out))
    if h_in > hg_in:
        s_in = float(steam.entropy_pt(p_in, steam.superheated_temperature_ph(p_in, h_in)))
    else:
        x_in = (h_in - hf_in) / (hg_in - hf_in)
        low, high = float(steam.liquid_entropy_p(p_in)), float(steam.vapour_entropy_p(p_in))
        s_in = low + x_in * (high - low)
    if s_in > sg:
        h_s = float(steam.enthalpy_pt(p_out, steam.superheated_temperature_ps(p_out, s_in)))
    else:
        h_s = hf + (s_in - sf) / (sg - sf) * (hg - hf)
    y_in = max(0.0, (hg_in - h_in) / (hg_in - hf_in))

    def miss(h: float) -> float:
        y_out = max(0.0, (hg - h) / (hg - hf))
        return h_in - efficiency * (1.0 - baumann * (y_in + y_out) / 2.0) * (h_in - h_s) - h

    return brentq(miss, h_s - 50.0, h_in + 50.0, xtol=1e-11, rtol=1e-15)


@STEADY
@given(inlet_bars, pressure_ratios, excesses_kJ_kg, efficiencies, baumann_factors)
def test_tail_in_closed_form_is_baumanns_root(p_in, ratio, excess, efficiency, baumann) -> None:
    inlet, outlet = at(p_in), at(p_in * ratio)
    h_in = inlet.hg + excess
    closed = float(tail_enthalpy(inlet, h_in, outlet, efficiency, baumann)[0])
    rooted = tail_by_root(p_in, float(h_in[0]), p_in * ratio, efficiency, baumann)
    assert closed == pytest.approx(rooted, abs=1e-8)


@STEADY
@given(inlet_bars, pressure_ratios, excesses_kJ_kg, efficiencies, baumann_factors)
def test_tail_never_beats_its_dry_efficiency_and_gains_entropy(
    p_in, ratio, excess, efficiency, baumann
) -> None:
    inlet, outlet = at(p_in), at(p_in * ratio)
    h_in = inlet.hg + excess
    h = tail_enthalpy(inlet, h_in, outlet, efficiency, baumann)
    dry = tail_enthalpy(inlet, h_in, outlet, efficiency, 0.0)
    assert h >= dry - 1e-9
    assert h <= h_in + 1e-9
    assert entropy_ph(outlet, h) >= entropy_ph(inlet, h_in) - 1e-10


def test_baumanns_rule_in_numbers() -> None:
    """Dry inlet, 8 % moisture at the outlet: mean 4 %, so 0.85 becomes 0.816."""
    row = values("turbine", "Baumann")["efficiency"]
    inlet, outlet = at(3.0), at(0.25)
    hg, hf = float(outlet.hg[0]), float(outlet.hf[0])

    def outlet_moisture(excess: float) -> float:
        h = tail_enthalpy(inlet, inlet.hg + excess, outlet, 0.85, 1.0)
        return float(moisture(outlet, h)[0]) - 0.08

    h_in = inlet.hg + brentq(outlet_moisture, 0.0, 200.0, xtol=1e-12)
    h_s = enthalpy_ps(outlet, entropy_ph(inlet, h_in))
    row.check(float(((h_in - (hg - 0.08 * (hg - hf))) / (h_in - h_s))[0]))


def test_no_step_where_the_outlet_turns_wet() -> None:
    excess = np.linspace(0.0, 300.0, 3001)
    inlet, outlet = (saturation(np.full(excess.shape, p)) for p in (1.0, 0.4))
    h = tail_enthalpy(inlet, inlet.hg + excess, outlet, 0.8, 1.0)
    wet = h < outlet.hg
    assert wet.any()
    assert not wet.all()
    assert (
        np.abs(np.diff(h, 2)).max() < 0.01
    )  # steps of 0.1 kJ/kg at the inlet: slope changes, value does not


@STEADY
@given(st.floats(0.02, 8.0), efficiencies, st.floats(40.0, 140.0), st.floats(430.0, 600.0))
def test_main_line_by_the_direct_functions(
    p: float, efficiency: float, live_bar: float, live_C: float
) -> None:
    h1, s1 = live_steam(live_bar, live_C)
    sf, sg = float(steam.liquid_entropy_p(p)), float(steam.vapour_entropy_p(p))
    hf, hg = float(steam.liquid_enthalpy_p(p)), float(steam.vapour_enthalpy_p(p))
    if s1 > sg:
        ideal = float(steam.enthalpy_pt(p, steam.superheated_temperature_ps(p, s1)))
    else:
        ideal = hf + (s1 - sf) / (sg - sf) * (hg - hf)
    found = float(main_line_enthalpy(h1, s1, np.array([efficiency]), at(p))[0])
    assert found == pytest.approx(h1 - efficiency * (h1 - ideal), abs=1e-8)


def test_moisture_is_the_liquid_share_and_never_negative() -> None:
    state = at(0.4)
    half = state.hf + 0.5 * (state.hg - state.hf)
    assert moisture(state, half) == pytest.approx([0.5], rel=1e-14)
    assert moisture(state, state.hg + 100.0) == 0.0


def test_flange_lies_above_the_shell() -> None:
    assert flange_pressure(np.array([0.98]), 0.02) == pytest.approx([1.0], rel=1e-15)
    assert exhaust_state(np.array([0.49]), 0.02).pressure_bar == pytest.approx([0.5], rel=1e-15)


# --- cone law and swallowing ------------------------------------------------------------------------------


@pytest.mark.parametrize("row", published("turbine", "Cone law, 1.0 to 0.35 bar"), ids=str)
def test_cone_law_at_part_flow(row: Published) -> None:
    """The last row is the choked limit: no exhaust pressure against a design one that does not count."""
    exhaust = row.given["exhaust_bar"]
    design_exhaust = 0.35 if exhaust > 0.0 else 0.0
    row.check(float(bleed_pressure(np.array(exhaust), np.array(0.6), 1.0, design_exhaust)))


@pytest.mark.parametrize("row", published("turbine", "Cone law, 10 to 1 bar"), ids=str)
def test_cone_law_gives_back_the_pressure_of_a_flow(row: Published) -> None:
    exhaust, inlet = row.given["exhaust_bar"], row.given["inlet_bar"]
    flow = brentq(
        lambda m: float(bleed_pressure(np.array(exhaust), np.array(m), 10.0, 1.0)) - inlet,
        0.0,
        2.0,
        xtol=1e-14,
    )
    row.check(flow)


def test_cone_law_inlet_at_60_percent() -> None:
    row = values("turbine", "Cone law, 60 % flow")["inlet_bar"]
    row.check(float(bleed_pressure(np.array(1.0), np.array(0.6), 10.0, 1.0)))


@STEADY
@given(st.floats(0.4, 6.0), st.floats(0.05, 0.95), st.floats(0.2, 1.2))
def test_swallowing_and_cone_law_are_one_law(p_in: float, ratio: float, share: float) -> None:
    """m = phi sqrt(p/v (1 - r²)) is the cone law for a vapour whose p v does not change.

    So for steam of one enthalpy, with the small change of p v taken out, both must give the same flow.
    """
    p_out = p_in * ratio
    part = float(bleed_pressure(np.array(p_out), np.array(share), p_in, p_out))
    full, partial = at(p_in), at(part)
    h = full.hg + 400.0
    expected = share * float(swallowing(full, h, np.array([p_out]))[0])
    found = float(swallowing(partial, h, np.array([p_out]))[0])
    volumes = [float(steam.volume_pt(p, steam.superheated_temperature_ph(p, h)[0])) for p in (p_in, part)]
    assert found * np.sqrt(volumes[1] * part) == pytest.approx(
        expected * np.sqrt(volumes[0] * p_in), rel=1e-9
    )


@STEADY
@given(st.floats(0.2, 3.0), st.floats(0.05, 0.9), st.floats(-200.0, 200.0))
def test_swallowing_falls_with_back_pressure_and_stops_at_the_inlet(
    p: float, ratio: float, excess: float
) -> None:
    inlet = at(p)
    flows = swallowing(inlet, inlet.hg + excess, p * np.array([0.5 * ratio, ratio, 1.0, 1.5]))
    assert flows[0] > flows[1] > 0.0
    assert flows[2:].tolist() == [0.0, 0.0]


# --- part load --------------------------------------------------------------------------------------------


def part_load_share(load: float) -> float:
    """Patnode 2006 after Bartlett 1958."""
    return 1.0 - (0.191 - 0.409 * load + 0.218 * load**2)


@pytest.mark.parametrize("row", published("turbine", "Part load"), ids=str)
def test_part_load_formula_in_numbers(row: Published) -> None:
    row.check(part_load_share(row.given["load"]))


def test_marrowby_follows_the_published_part_load_curve() -> None:
    curve = marrowby()["plant"]["turbine"]["part_load"]
    assert curve["value"] == [round(part_load_share(load), 3) for load in curve["load"]]


def test_live_steam_must_exist() -> None:
    with pytest.raises(SolveError):
        live_steam(60.0, float("nan"))
