"""The fast fits against the direct functions over the whole of their ranges, and what happens outside."""

import numpy as np
import pytest
from plants import case_of, solved
from scalar.marrowby import unlimited

from appraise import steam
from appraise import steam_fits as fits
from appraise.cycle.design import design
from appraise.errors import SolveError

# What the fits were measured to do, with a factor of about two for another machine's rounding.
ENTROPY_RELATIVE = 2e-12
VOLUME_RELATIVE = 5e-11
ENTHALPY_kJ_kg = 6e-9
LIQUID_ENTHALPY_kJ_kg = 2e-9
LIQUID_VOLUME_RELATIVE = 5e-12

LOWEST_BAR, HIGHEST_BAR = 0.00612, 19.0
# In the later ranges, of bleeds and their feed water, what the module states.
STATED = 1e-9
BLEED_BAR, BOILER_BAR, HOTTEST_C = 165.2, 200.0, 620.0


def grid(x: np.ndarray, y: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    one, other = np.meshgrid(x, y, indexing="ij")
    return one.ravel(), other.ravel()


# --- the dome ---------------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def pressures() -> np.ndarray:
    return np.clip(np.geomspace(LOWEST_BAR, HIGHEST_BAR, 3001), LOWEST_BAR, HIGHEST_BAR)


@pytest.mark.parametrize(
    ("field", "direct", "limit"),
    [
        ("temperature_C", steam.saturation_temperature_p, 6e-12),
        ("hf", steam.liquid_enthalpy_p, 1e-10),
        ("hg", steam.vapour_enthalpy_p, 1e-9),
        ("sf", steam.liquid_entropy_p, 6e-13),
        ("sg", steam.vapour_entropy_p, 3e-12),
        ("vf", steam.liquid_volume_p, 1e-15),
        ("vg", steam.vapour_volume_p, 1e-10),
    ],
)
def test_saturation_state(pressures, field: str, direct, limit: float) -> None:
    """Absolute limits in °C, kJ/kg, kJ/(kg K), m3/kg; relative 1e-11 from 0.01 bar, where hf is 29."""
    fast, exact = getattr(fits.saturation(pressures), field), direct(pressures)
    assert np.abs(fast - exact).max() < limit
    assert np.abs(fast / exact - 1.0)[pressures >= 0.01].max() < 1e-11


def test_saturation_pressure() -> None:
    t = np.linspace(0.1, 209.8, 3001)
    assert np.abs(fits.saturation_pressure(t) / steam.saturation_pressure_t(t) - 1.0).max() < 1e-12


@pytest.mark.parametrize("field", ["temperature_C", "hf", "hg", "sf", "sg", "vf", "vg"])
def test_saturation_state_at_bleeds(field: str) -> None:
    p = np.geomspace(HIGHEST_BAR, BLEED_BAR, 2001)[1:-1]
    names = {"temperature_C": "saturation_temperature_p"} | {
        f"{what}{phase}": f"{word}_{kind}_p"
        for phase, word in (("f", "liquid"), ("g", "vapour"))
        for what, kind in (("h", "enthalpy"), ("s", "entropy"), ("v", "volume"))
    }
    exact = getattr(steam, names[field])(p)
    assert np.abs(getattr(fits.saturation(p), field) / exact - 1.0).max() < STATED
    t = steam.saturation_temperature_p(p)
    assert np.abs(fits.saturation_pressure(t) / p - 1.0).max() < STATED


@pytest.mark.parametrize("p_bar", [0.006115, 165.25, 170.0, 200.0])
def test_outside_the_fits_the_library_answers(p_bar: float) -> None:
    p = np.array([p_bar])
    state = fits.saturation(p)
    assert state.temperature_C == steam.saturation_temperature_p(p)
    assert state.hg == steam.vapour_enthalpy_p(p)
    assert state.sf == steam.liquid_entropy_p(p)
    assert fits.saturation_pressure(state.temperature_C) == pytest.approx(p, rel=1e-11)


def test_a_set_that_leaves_the_fits_gives_every_element_right() -> None:
    """Of both ranges, of the edge between them, and above both, in one call."""
    p = np.array([0.5, 25.0, HIGHEST_BAR, np.nextafter(HIGHEST_BAR, 20.0), 180.0, 2.0])
    state = fits.saturation(p)
    assert state.temperature_C == pytest.approx(steam.saturation_temperature_p(p), rel=1e-11)
    assert state.hg == pytest.approx(steam.vapour_enthalpy_p(p), rel=1e-11)
    assert state.vf == pytest.approx(steam.liquid_volume_p(p), rel=1e-11)
    assert fits.saturation_pressure(state.temperature_C) == pytest.approx(p, rel=1e-10)


# --- superheated and wet steam ----------------------------------------------------------------------------


@pytest.fixture(scope="module")
def superheated() -> tuple[fits.Saturation, np.ndarray]:
    """Pressure and enthalpy excess over the fitted rectangle, dense near the dome."""
    p, share = grid(np.geomspace(0.01, 9.0, 81), np.linspace(0.0, 1.0, 81) ** 2)
    return fits.saturation(p), share


def test_entropy_of_superheated_steam(superheated) -> None:
    at, share = superheated
    h = at.hg + 1e-7 + share * 699.9
    exact = steam.entropy_pt(at.pressure_bar, steam.superheated_temperature_ph(at.pressure_bar, h))
    assert np.abs(fits.entropy_ph(at, h) / exact - 1.0).max() < ENTROPY_RELATIVE


def test_volume_of_superheated_steam(superheated) -> None:
    at, share = superheated
    h = at.hg + 1e-7 + share * 699.9
    exact = steam.volume_pt(at.pressure_bar, steam.superheated_temperature_ph(at.pressure_bar, h))
    assert np.abs(fits.volume_ph(at, h) / exact - 1.0).max() < VOLUME_RELATIVE


def test_enthalpy_of_superheated_steam(superheated) -> None:
    at, share = superheated
    s = at.sg + 1e-10 + share * 1.3999
    exact = steam.enthalpy_pt(at.pressure_bar, steam.superheated_temperature_ps(at.pressure_bar, s))
    assert np.abs(fits.enthalpy_ps(at, s) - exact).max() < ENTHALPY_kJ_kg


def test_superheat_outside_the_fits_is_the_librarys() -> None:
    """Hotter than the fit, of other ranges, above and below their pressures, inside: all in one call."""
    at = fits.saturation(np.array([0.5, 12.0, 2.0, 80.0, 170.0, 0.008]))
    t = np.array([600.0, 300.0, 200.0, 350.0, 400.0, 50.0])
    h, s, v = (f(at.pressure_bar, t) for f in (steam.enthalpy_pt, steam.entropy_pt, steam.volume_pt))
    assert (h - at.hg)[0] > 700.0
    assert fits.entropy_ph(at, h) == pytest.approx(s, rel=1e-11)
    assert fits.volume_ph(at, h) == pytest.approx(v, rel=1e-10)
    assert fits.enthalpy_ps(at, s) == pytest.approx(h, rel=1e-11)


@pytest.fixture(scope="module")
def bleeds() -> tuple[fits.Saturation, np.ndarray]:
    """Pressure and temperature of bleeds above the first range, dense near the dome, up to the hottest."""
    p, share = grid(np.geomspace(9.0, BLEED_BAR, 101)[1:-1], np.linspace(0.0, 1.0, 61) ** 2)
    at = fits.saturation(p)
    return at, at.temperature_C + 1e-6 + share * (HOTTEST_C - at.temperature_C - 1e-6)


def test_superheated_bleeds(bleeds, monkeypatch: pytest.MonkeyPatch) -> None:
    at, t = bleeds
    h, s, v = (f(at.pressure_bar, t) for f in (steam.enthalpy_pt, steam.entropy_pt, steam.volume_pt))
    monkeypatch.setattr(fits, "superheated_temperature", None)  # every point by a fit, none by the library
    assert np.abs(fits.enthalpy_ps(at, s) / h - 1.0).max() < STATED
    assert np.abs(fits.entropy_ph(at, h) / s - 1.0).max() < STATED
    assert np.abs(fits.volume_ph(at, h) / v - 1.0).max() < STATED


@pytest.mark.parametrize("quality", [0.0, 0.1, 0.5, 0.9, 1.0])
def test_wet_steam_follows_the_lever_rule(pressures, quality: float) -> None:
    at = fits.saturation(pressures)
    h, s, v = (low + quality * (high - low) for low, high in ((at.hf, at.hg), (at.sf, at.sg), (at.vf, at.vg)))
    assert fits.enthalpy_ps(at, s) == pytest.approx(h, abs=ENTHALPY_kJ_kg)
    assert fits.entropy_ph(at, h) == pytest.approx(s, abs=1e-11)
    assert fits.volume_ph(at, h) == pytest.approx(v, rel=1e-10)


@pytest.mark.parametrize("function", [fits.enthalpy_ps, fits.entropy_ph, fits.volume_ph])
def test_no_step_where_the_last_drop_evaporates(pressures, function) -> None:
    bleeds = np.geomspace(9.0, BLEED_BAR, 500)[1:-1]
    for p, limit in ((pressures[pressures < 9.0], 1e-10), (bleeds, STATED)):
        at = fits.saturation(p)
        edge = at.sg if function is fits.enthalpy_ps else at.hg
        wet, dry = function(at, edge * (1.0 - 1e-12)), function(at, edge * (1.0 + 1e-12))
        assert dry == pytest.approx(wet, rel=limit)


# --- liquid -----------------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def liquid() -> tuple[np.ndarray, np.ndarray]:
    t, excess = grid(np.linspace(2.0, 208.0, 151), np.linspace(0.0, 30.0, 41))
    return steam.saturation_pressure_t(t) * (1 + 1e-9) + excess, t


def test_liquid(liquid) -> None:
    h, v = steam.enthalpy_pt(*liquid), steam.volume_pt(*liquid)
    assert np.abs(fits.liquid_enthalpy(*liquid) - h).max() < LIQUID_ENTHALPY_kJ_kg
    assert np.abs(fits.liquid_volume(*liquid) / v - 1.0).max() < LIQUID_VOLUME_RELATIVE


def test_liquid_of_the_boiler() -> None:
    """Feed water at boiler pressure, cold or from a heater on any bleed."""
    p, t = grid(np.linspace(31.0, BOILER_BAR, 61), np.linspace(2.0, 349.0, 151))
    liquid = p > steam.saturation_pressure_t(t)
    p, t = p[liquid], t[liquid]
    assert np.abs(fits.liquid_enthalpy(p, t) / steam.enthalpy_pt(p, t) - 1.0).max() < STATED
    assert np.abs(fits.liquid_volume(p, t) / steam.volume_pt(p, t) - 1.0).max() < STATED


def test_liquid_outside_the_fits_is_the_librarys() -> None:
    p, t = np.array([75.0, 1.0, 40.0, 230.0, 190.0]), np.array([130.0, 1.0, 230.0, 60.0, 349.8])
    assert fits.liquid_enthalpy(p, t) == pytest.approx(steam.enthalpy_pt(p, t), rel=1e-12)
    assert fits.liquid_volume(p, t) == pytest.approx(steam.volume_pt(p, t), rel=1e-12)


def test_saturated_liquid_is_the_edge_of_compressed_liquid(pressures) -> None:
    """A drain at its own saturation temperature: the liquid fit and the dome meet."""
    at = fits.saturation(pressures[(pressures > 0.008) & (pressures < 18.0)])
    h = fits.liquid_enthalpy(at.pressure_bar, at.temperature_C)
    assert h == pytest.approx(at.hf, abs=1e-6)
    assert fits.liquid_volume(at.pressure_bar, at.temperature_C) == pytest.approx(at.vf, rel=1e-8)


@pytest.mark.parametrize("p_bar", [18.5, 25.0, 60.0])
def test_saturated_liquid_beyond_the_fit_is_no_vapour(p_bar: float) -> None:
    """Rounding may put the saturation temperature on either side of the library's own line."""
    at = fits.saturation(np.array([p_bar, p_bar * 1.0001, p_bar * 1.0002, p_bar * 1.0003]))
    assert fits.liquid_enthalpy(at.pressure_bar, at.temperature_C) == pytest.approx(at.hf, rel=1e-6)


@pytest.mark.parametrize("p_bar", [2.0, 6.0, 10.0, 16.0, 25.0])
def test_network_water(p_bar: float) -> None:
    water = fits.NetworkWater.at(p_bar)
    t = np.linspace(0.0, float(steam.saturation_temperature_p(p_bar)) - 0.1, 1001)
    h = water.enthalpy(t)
    assert np.abs(h - steam.enthalpy_pt(p_bar, t)).max() < 2e-10
    assert np.abs(water.volume(t) / steam.volume_pt(p_bar, t) - 1.0).max() < 1e-12
    assert np.abs(water.temperature(h) - t).max() < 1e-9


# --- manners ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("temperature_C", [-10.0, -0.5, 180.0, 250.0, np.nan])
def test_network_water_does_not_extrapolate(temperature_C: float) -> None:
    """Boiling at 10 bar is 179.9 °C: hotter water, ice and a missing value are no network water."""
    water = fits.NetworkWater.at(10.0)
    with pytest.raises(SolveError):
        water.enthalpy(np.array([60.0, temperature_C]))


@pytest.mark.parametrize("function", [fits.enthalpy_ps, fits.entropy_ph, fits.volume_ph])
def test_a_missing_enthalpy_or_entropy_is_not_passed_on(function) -> None:
    with pytest.raises(SolveError):
        function(fits.saturation(np.array([1.0, 1.0])), np.array([7.0, np.nan]))


@pytest.mark.parametrize("bad", [np.nan, np.inf])
def test_a_missing_pressure_or_temperature_raises(bad: float) -> None:
    for call in (fits.saturation, fits.saturation_pressure):
        with pytest.raises(SolveError):
            call(np.array([1.0, bad]))
    with pytest.raises(SolveError):
        fits.liquid_enthalpy(np.array([5.0, 5.0]), np.array([50.0, bad]))


@pytest.mark.parametrize("shape", [(), (1,), (4,), (2, 3), (2, 1, 3), (0,), (2, 0)])
def test_any_shape(shape: tuple[int, ...]) -> None:
    """Empty ones too: a year in which an option has no hour to solve."""
    p = np.full(shape, 0.8)
    at = fits.saturation(p)
    assert {f.shape for f in (at.temperature_C, at.hf, at.hg, at.sf, at.sg, at.vf, at.vg)} == {shape}
    assert fits.enthalpy_ps(at, np.full(shape, 7.9)).shape == shape
    assert fits.volume_ph(at, np.full(shape, 2500.0)).shape == shape
    assert fits.liquid_enthalpy(np.full(shape, 5.0), np.full(shape, 60.0)).shape == shape
    assert fits.NetworkWater.at(10.0).enthalpy(np.full(shape, 60.0)).shape == shape


def test_a_year_with_bleeds_at_high_pressure_asks_the_library_for_nothing(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """A call of the library costs ten times as much as a fit."""
    data = unlimited({"plant.feed.heater": {"bleed_bar": 30.0, "terminal_difference_K": 4.0}})
    data["plant"]["feed"] |= {"deaerator_bar": 10.0, "bleed_bar": 14.0}
    made = design(case_of(data))
    hours = [(heat, 76.0 + 0.6 * heat, 46.0) for heat in np.linspace(8.0, 44.0, 60)]
    solved(made, made.options[1], hours)  # the fits are made by the first that needs them
    asked: list[str] = []
    monkeypatch.setattr(steam, "PropsSI", lambda *inputs: asked.append(inputs[0]))
    at = solved(made, made.options[1], hours)
    assert (at.feed.heater_bar > 9.0).any()
    assert (at.feed.heater_bar > 19.0).any()
    assert (at.feed.bleed_bar > 9.0).any()
    assert asked == []
