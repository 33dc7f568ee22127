"""Water and steam against the release's own verification tables, and the manners of the module."""

import subprocess
import sys

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from published import Published, published

from appraise import steam
from appraise.errors import SolveError
from appraise.steam_fits import NetworkWater

STEADY = settings(derandomize=True, deadline=None)

KELVIN = 273.15
CRITICAL_MPa = 22.064


# --- forward equations ------------------------------------------------------------------------------------


def single_phase(name: str, p_bar: float, t_C: float) -> float:
    if name == "u":  # h = u + p v, 1 bar m3 = 100 kJ
        return float(steam.enthalpy_pt(p_bar, t_C) - p_bar * 100.0 * steam.volume_pt(p_bar, t_C))
    function = {"h": steam.enthalpy_pt, "s": steam.entropy_pt, "v": steam.volume_pt}[name]
    return float(function(p_bar, t_C))


@pytest.mark.parametrize("row", published("steam", "Table 5") + published("steam", "Table 15"), ids=str)
def test_forward_equations_of_regions_1_and_2(row: Published) -> None:
    row.check(single_phase(row.name, row.given["p"] * 10.0, row.given["T"] - KELVIN))


@pytest.mark.parametrize("row", published("steam", "Table 35"), ids=str)
def test_saturation_pressure(row: Published) -> None:
    row.check(float(steam.saturation_pressure_t(row.given["T"] - KELVIN)) / 10.0)


@pytest.mark.parametrize("row", published("steam", "Table 36"), ids=str)
def test_saturation_temperature(row: Published) -> None:
    row.check(float(steam.saturation_temperature_p(row.given["p"] * 10.0)) + KELVIN)


def saturated(name: str, p_bar: float) -> float:
    if name == "r":
        return saturated("hg", p_bar) - saturated("hf", p_bar)
    function = {
        "T": steam.saturation_temperature_p,
        "hf": steam.liquid_enthalpy_p,
        "hg": steam.vapour_enthalpy_p,
        "sf": steam.liquid_entropy_p,
        "sg": steam.vapour_entropy_p,
        "vg": steam.vapour_volume_p,
    }[name]
    return float(function(p_bar))


SATURATION_ROWS = published("steam", "Saturation") + published("steam", "Saturation, printed")


@pytest.mark.parametrize("row", SATURATION_ROWS, ids=str)
def test_both_ends_of_the_dome(row: Published) -> None:
    row.check(saturated(row.name, row.given["p"]))


@pytest.mark.parametrize("row", published("steam", "IAPWS-95 less IF97"), ids=str)
def test_distance_to_the_scientific_formulation(row: Published) -> None:
    """What stands between this package and tables made with IAPWS-95: up to 0.23 kJ/kg."""
    from CoolProp.CoolProp import PropsSI

    name, quality = row.name[1:], float(row.name.endswith("g"))
    scientific = PropsSI(name[0].upper(), "P", row.given["p"] * 1e5, "Q", quality, "HEOS::Water") / 1e3
    row.check(scientific - saturated(name, row.given["p"]))


@pytest.mark.parametrize("row", published("steam", "Deaerators"), ids=str)
def test_water_boils_at_the_gauge_pressure_of_a_deaerator(row: Published) -> None:
    """Standard atmosphere: 101.325 kPa."""
    row.check(saturated("T", (101.325 + row.given["kPa_gauge"]) / 100.0))


@pytest.mark.parametrize("p_bar", [0.01, 0.3, 1.0, 5.0, 60.0, 160.0])
def test_liquid_at_the_dome_is_the_limit_of_compressed_liquid(p_bar: float) -> None:
    """The only property of the dome without a published row: vf, against region 1 a hair below boiling."""
    t = steam.saturation_temperature_p(p_bar) - 1e-7
    assert steam.liquid_volume_p(p_bar) == pytest.approx(float(steam.volume_pt(p_bar, t)), rel=2e-8)
    assert steam.liquid_enthalpy_p(p_bar) == pytest.approx(float(steam.enthalpy_pt(p_bar, t)), rel=2e-8)


@pytest.mark.parametrize("p_bar", np.geomspace(0.02, 160.0, 9))
def test_evaporation_is_reversible(p_bar: float) -> None:
    """hg - hf = T (sg - sf): both phases have one Gibbs energy, as far as IF97's regions 1 and 2 agree.

    They are separate equations, so they meet only within their accuracy: 0.0116 kJ/kg measured, 0.02-160 bar.
    """
    heat = saturated("hg", p_bar) - saturated("hf", p_bar)
    spread = saturated("sg", p_bar) - saturated("sf", p_bar)
    assert heat == pytest.approx((saturated("T", p_bar) + KELVIN) * spread, abs=0.012)


@STEADY
@given(st.floats(0.00612, 160.0))
def test_saturation_pressure_and_temperature_are_inverse(p_bar: float) -> None:
    t = steam.saturation_temperature_p(p_bar)
    assert float(steam.saturation_pressure_t(t)) == pytest.approx(p_bar, rel=1e-11)


# --- inverses ---------------------------------------------------------------------------------------------

INVERSES = {"h": (steam.superheated_temperature_ph, steam.enthalpy_pt, "H")} | {
    "s": (steam.superheated_temperature_ps, steam.entropy_pt, "S")
}
BACKWARD_ROWS = published("steam", "Table 24") + published("steam", "Table 29")
BELOW_CRITICAL = [row for row in BACKWARD_ROWS if row.given["p"] < CRITICAL_MPa]
ABOVE_CRITICAL = [row for row in BACKWARD_ROWS if row.given["p"] > CRITICAL_MPa]


@pytest.mark.parametrize(
    "row", BACKWARD_ROWS + published("steam", "Table 7") + published("steam", "Table 9"), ids=str
)
def test_library_inverses_are_the_published_backward_equations(row: Published) -> None:
    """Where Newton starts from; to the printed digit."""
    from CoolProp.CoolProp import PropsSI

    of = "h" if "h" in row.given else "s"
    calculated = PropsSI("T", "P", row.given["p"] * 1e6, of.upper(), row.given[of] * 1e3, "IF97::Water")
    row.check(calculated)


@pytest.mark.parametrize("row", BELOW_CRITICAL, ids=str)
def test_superheated_temperature_agrees_with_the_backward_equation_and_inverts_the_forward_one(
    row: Published,
) -> None:
    """Newton leaves the backward equation by no more than its permitted 25 mK, and gives the target back."""
    of = "h" if "h" in row.given else "s"
    inverse, forward, _ = INVERSES[of]
    p_bar, target = row.given["p"] * 10.0, row.given[of]
    t = inverse(p_bar, target)
    assert float(t) + KELVIN == pytest.approx(row.value, abs=0.025)
    assert float(forward(p_bar, t)) == pytest.approx(target, rel=1e-13)


@pytest.mark.parametrize("row", ABOVE_CRITICAL, ids=str)
def test_superheat_above_the_critical_pressure_is_refused(row: Published) -> None:
    of = "h" if "h" in row.given else "s"
    with pytest.raises(SolveError, match=r"no temperature at .* bar, saturation"):
        INVERSES[of][0](row.given["p"] * 10.0, row.given[of])


@pytest.mark.parametrize("row", [r for r in published("steam", "Table 7") if r.given["p"] == 3.0], ids=str)
def test_network_water_temperature_agrees_with_the_backward_equation(row: Published) -> None:
    water = NetworkWater.at(row.given["p"] * 10.0)
    t = water.temperature(np.array([row.given["h"]]))
    assert float(t[0]) + KELVIN == pytest.approx(row.value, abs=0.025)
    assert float(steam.enthalpy_pt(30.0, t)[0]) == pytest.approx(row.given["h"], rel=1e-11)


@STEADY
@given(st.floats(0.02, 160.0), st.floats(0.1, 300.0), st.sampled_from("hs"))
def test_inverses_of_superheated_steam_give_the_temperature_back(p: float, above: float, of: str) -> None:
    inverse, forward, _ = INVERSES[of]
    t = float(steam.saturation_temperature_p(p)) + above
    assert float(inverse(p, forward(p, t))) == pytest.approx(t, abs=1e-9)


# --- manners: loud, any shape, quiet on standard output ---------------------------------------------------

OF_PRESSURE = [
    steam.saturation_temperature_p,
    steam.liquid_enthalpy_p,
    steam.vapour_enthalpy_p,
    steam.liquid_entropy_p,
    steam.vapour_entropy_p,
    steam.liquid_volume_p,
    steam.vapour_volume_p,
]
OF_ONE = [*OF_PRESSURE, steam.saturation_pressure_t]
OF_TWO = [
    (steam.enthalpy_pt, 120.0),
    (steam.entropy_pt, 120.0),
    (steam.volume_pt, 120.0),
    (steam.superheated_temperature_ph, 2800.0),
    (steam.superheated_temperature_ps, 7.8),
]
NOT_FINITE = [np.nan, np.inf, -np.inf]


def name_of(value: object) -> str:
    return getattr(value, "__name__", str(value))


@pytest.mark.parametrize("bad", NOT_FINITE)
@pytest.mark.parametrize("function", OF_ONE, ids=name_of)
def test_a_value_that_is_not_finite_raises(function, bad: float) -> None:
    with pytest.raises(SolveError):
        function(bad)
    with pytest.raises(SolveError, match="element 1 of 3"):
        function(np.array([1.0, bad, 2.0]))


@pytest.mark.parametrize("bad", NOT_FINITE)
@pytest.mark.parametrize(("function", "second"), OF_TWO, ids=name_of)
def test_a_pair_that_is_not_finite_raises(function, second: float, bad: float) -> None:
    for pair in ((bad, second), (1.0, bad)):
        with pytest.raises(SolveError):
            function(*pair)
        with pytest.raises(SolveError, match="element 2 of 3"):
            function(*(np.array([good, good, x]) for good, x in zip((1.0, second), pair, strict=True)))


@pytest.mark.parametrize("p_bar", [0.0, -1.0, 300.0])
@pytest.mark.parametrize("function", OF_PRESSURE, ids=name_of)
def test_a_pressure_off_the_saturation_line_raises(function, p_bar: float) -> None:
    with pytest.raises(SolveError, match="IAPWS-IF97"):
        function(p_bar)
    with pytest.raises(SolveError, match="element 0 of 2"):
        function([p_bar, 1.0])


@pytest.mark.parametrize("function", OF_ONE, ids=name_of)
@pytest.mark.parametrize("shape", [(), (0,), (3,), (2, 3), (2, 0, 3), (2, 1, 3)])
def test_shape_of_one_argument_is_kept(function, shape: tuple[int, ...]) -> None:
    given_values = np.linspace(1.0, 9.0, int(np.prod(shape))).reshape(shape)
    result = function(given_values)
    assert result.shape == shape
    one_by_one = [float(function(v)) for v in given_values.ravel()]
    assert result.ravel().tolist() == one_by_one


@pytest.mark.parametrize(("function", "second"), OF_TWO, ids=name_of)
def test_two_arguments_broadcast(function, second: float) -> None:
    p, other = np.array([[0.5], [1.0]]), second * np.array([1.0, 1.01, 1.05])
    result = function(p, other)
    assert result.shape == (2, 3)
    for (i, j), value in np.ndenumerate(result):
        assert value == float(function(p[i, 0], other[j]))
    assert function(np.empty((2, 0)), np.empty((2, 0))).shape == (2, 0)


def standard_output_of(code: str) -> str:
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, timeout=60)
    return run.stdout


GREETING_VARIABLE = "COOLPROP_DISABLE_SUPERANCILLARIES_ENTIRELY"


def test_what_the_library_prints_while_it_loads_does_not_reach_standard_output() -> None:
    """The library's C++ part greets on file descriptor 1; only the user's own line may be there."""
    plain = f"import os; os.environ['{GREETING_VARIABLE}'] = '1'; import CoolProp.CoolProp"
    if standard_output_of(plain) == "":
        pytest.skip("this version of the library prints nothing while it loads")
    ours = "from appraise.steam import enthalpy_pt; print(round(float(enthalpy_pt(30.0, 26.85)), 6))"
    assert standard_output_of(ours) == "115.331273\n"
