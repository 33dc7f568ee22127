"""Published cost correlations against examples worked from their constants."""

import math

import pytest
from published import published, values

from appraise.case.money import SIZE_NAMES
from appraise.correlations import (
    bare_module_factor,
    exp_parabola,
    log_line,
    offset_power,
    power_law,
    turton_pressure,
)
from appraise.published_costs import HORSEPOWER_KW, PUBLISHED

EQUIPMENT = {
    "floating_head": "turton-2001-shell-and-tube-floating-head",
    "fixed_tube": "turton-2001-shell-and-tube-fixed-tube",
    "u_tube": "turton-2001-shell-and-tube-u-tube",
    "drive": "turton-2001-steam-turbine-drive",
    "expander": "turton-2001-axial-expander",
    "pump": "turton-2001-centrifugal-pump",
}
TOWLER = {
    "u_tube": "towler-2010-shell-and-tube-u-tube",
    "floating_head": "towler-2010-shell-and-tube-floating-head",
    "plate": "towler-2010-plate-and-frame",
    "turbine": "towler-2010-condensing-steam-turbine",
    "motor": "towler-2010-pump-motor",
}
CORRIPIO = {
    "floating_head": "corripio-1982-shell-and-tube-floating-head",
    "fixed_tube": "corripio-1982-shell-and-tube-fixed-tube",
    "u_tube": "corripio-1982-shell-and-tube-u-tube",
}
SEIDER = {
    "non_condensing": "seider-2013-non-condensing-steam-turbine",
    "condensing": "seider-2013-condensing-steam-turbine",
}


# --- constants, as the sources print them -----------------------------------------------------------------


def constant_of(name: str, what: str) -> float:
    """A constant of a correlation's formula, or an end of its range."""
    found = PUBLISHED[name]
    ends = {"from": found.minimum, "to": found.maximum}
    return ends[what] if what in ends else found.base.keywords[what]


@pytest.mark.parametrize("row", published("cost", "Turton, Table A.1"), ids=str)
def test_turton_constants(row) -> None:
    equipment, _, what = row.name.rpartition("_")
    row.check(constant_of(EQUIPMENT[equipment], what))


def test_floating_head_begins_where_its_curve_rises() -> None:
    """The source's range begins at 10 m², the curve's least value lies at 10^(-K2/2K3), 21.6 m²."""
    k2, k3 = (constant_of(EQUIPMENT["floating_head"], what) for what in ("k2", "k3"))
    assert 10.0 < 10.0 ** (-k2 / (2.0 * k3)) < constant_of(EQUIPMENT["floating_head"], "from") <= 22.0


@pytest.mark.parametrize("row", published("cost", "Towler, Table 7.2"), ids=str)
def test_towler_constants(row) -> None:
    equipment, _, what = row.name.rpartition("_")
    row.check(constant_of(TOWLER[equipment], what))


def test_turton_factors() -> None:
    rows = values("cost", "Turton, Tables A.2 and A.4")
    for equipment in ("u_tube", "pump"):
        b1, b2 = PUBLISHED[f"{EQUIPMENT[equipment]}-installed"].bare_module
        rows[f"{equipment}_b1"].check(b1)
        rows[f"{equipment}_b2"].check(b2)
    for equipment in ("drive", "expander"):
        bought, installed = (PUBLISHED[EQUIPMENT[equipment] + end] for end in ("", "-installed"))
        rows[f"{equipment}_factor"].check(installed.cost(1000.0) / bought.cost(1000.0))
    shell = PUBLISHED[EQUIPMENT["u_tube"]]
    for tubes in ("copper", "stainless"):
        rows[f"{tubes}_tubes"].check(shell.materials[f"carbon-steel-{tubes}"](300.0))


def test_turton_pressure_on_both_sides() -> None:
    """Not in the package, whose network water is in the tubes: 3 % dearer at 16 bar gauge."""
    row = values("cost", "Turton, pressure on both sides")["factor"]
    row.check(turton_pressure(300.0, 16.0, above=5.0, **row.given))


def test_materials_of_pumps() -> None:
    for name, row in values("cost", "Turton, pump materials").items():
        row.check(PUBLISHED[EQUIPMENT["pump"]].materials[name.replace("_", "-")](75.0))


@pytest.mark.parametrize("shell", ["u_tube", "floating_head"])
def test_towler_materials(shell: str) -> None:
    found = PUBLISHED[TOWLER[shell]]
    for name, row in values("cost", "Towler, materials").items():
        row.check(found.cost(300.0, name.replace("_", "-")) / found.cost(300.0))


def corripio_factor(name: str, area_m2: float) -> float:
    """A factor for type or material, or the natural logarithm's argument undone, a + b ln A."""
    plain = PUBLISHED[CORRIPIO["floating_head"]]
    if name.startswith("bar_"):
        assert plain.pressure is not None
        return plain.pressure(area_m2, float(name.removeprefix("bar_")))
    if name in CORRIPIO:
        return math.log(PUBLISHED[CORRIPIO[name]].cost(area_m2) / plain.cost(area_m2))
    return plain.materials[name.replace("_", "-")](area_m2)


@pytest.mark.parametrize("row", published("cost", "Corripio, factors"), ids=str)
def test_corripio_factors(row) -> None:
    """All of them are straight lines in ln A: a at 1 m², b the rise to e m²."""
    name, _, what = row.name.rpartition("_")
    at_one = corripio_factor(name, 1.0)
    row.check(at_one if what == "a" else corripio_factor(name, math.e) - at_one)


def test_corripio_in_square_feet() -> None:
    rows, area_ft2 = published("cost", "Corripio in square feet"), 300.0 / 0.3048**2
    cost, factor, pressure = rows
    cost.check(exp_parabola(area_ft2, **cost.given))
    factor.check(exp_parabola(area_ft2, factor.given["a"], factor.given["b"], 0.0))
    pressure.check(log_line(area_ft2, **pressure.given))


def test_seider_constants() -> None:
    rows, limits = values("cost", "Seider, constants"), values("cost", "Seider, range")
    older = values("cost", "Seider, 3rd ed.")
    for kind, name in SEIDER.items():
        cost = constant_of(name, "reference_cost")
        rows[f"{kind}_cost"].check(cost)
        rows[f"{kind}_exponent"].check(constant_of(name, "exponent"))
        limits["low"].check(constant_of(name, "from"))
        limits["high"].check(constant_of(name, "to"))
        older[kind].check(cost * 500.0 / PUBLISHED[name].source.index)


# --- worked from them -------------------------------------------------------------------------------------


@pytest.mark.parametrize("row", published("cost", "Turton purchased"), ids=str)
def test_turton_purchased_cost(row) -> None:
    row.check(PUBLISHED[EQUIPMENT[row.name]].cost(row.given["size"]))


def test_turton_installed_cost_has_material_and_pressure_on_part_of_it() -> None:
    """300 m2, carbon steel shell and stainless tubes, network water at 16 bar gauge in the tubes."""
    rows = values("cost", "Turton installed")
    bought = PUBLISHED["turton-2001-shell-and-tube-u-tube"]
    installed = PUBLISHED["turton-2001-shell-and-tube-u-tube-installed"]
    assert bought.pressure is not None
    rows["tube_pressure_factor"].check(bought.pressure(300.0, 16.0))
    cost = installed.cost(300.0, "carbon-steel-stainless", 16.0)
    rows["u_tube_factor"].check(cost / bought.cost(300.0))
    rows["u_tube"].check(cost)
    rows["u_tube_2023"].check(cost * 797.9 / 397.0)
    pump, set_up = (PUBLISHED[f"turton-2001-centrifugal-pump{end}"] for end in ("", "-installed"))
    rows["pump_factor"].check(set_up.cost(75.0, "carbon-steel", 20.0) / pump.cost(75.0))


def test_turton_floating_head_of_the_book() -> None:
    """The curve gives 25 328 USD where the book reads 25 000 off its figure; installed from the latter."""
    rows = values("cost", "Turton, Ex. 7.10")
    installed = PUBLISHED[f"{EQUIPMENT['u_tube']}-installed"]
    factor = bare_module_factor(*installed.bare_module, 1.0, 1.0)
    rows["factor"].check(factor)
    rows["installed"].check(rows["installed"].given["purchased"] * factor)
    rows["at_500"].check(rows["installed"].value * 500.0 / installed.source.index)


def test_turton_drive_and_expander() -> None:
    rows = values("cost", "Turton, steam turbine drive")
    drive, expander = (PUBLISHED[EQUIPMENT[name]] for name in ("drive", "expander"))
    rows["per_kW"].check(drive.cost(2000.0) / 2000.0)
    k2, k3 = (constant_of(EQUIPMENT["drive"], what) for what in ("k2", "k3"))
    rows["greatest_MW"].check(10.0 ** (-k2 / (2.0 * k3)) / 1e3)
    for power_kW in (100.0, 4000.0):
        rows["expander_over_drive"].check(expander.cost(power_kW) / drive.cost(power_kW))


def test_no_pressure_factor_below_the_pressure_where_it_starts() -> None:
    exchanger, pump = (
        PUBLISHED[EQUIPMENT["u_tube"]],
        PUBLISHED[EQUIPMENT["pump"]],
    )
    assert exchanger.cost(300.0, None, 5.0) == exchanger.cost(300.0)
    assert pump.cost(75.0, None, 10.0) == pump.cost(75.0)
    assert pump.cost(75.0, None, 20.0) > pump.cost(75.0)


def test_towler_pump() -> None:
    """Not in the package, which knows no volume flow of its condensate pumps: the formula alone."""
    row = values("cost", "Towler, pump")["pump"]
    row.check(offset_power(**row.given))


@pytest.mark.parametrize("row", published("cost", "Towler"), ids=str)
def test_towler(row) -> None:
    row.check(PUBLISHED[TOWLER[row.name]].cost(row.given["size"]))


def test_corripio() -> None:
    rows, area = values("cost", "Corripio"), 300.0
    base, u_tube = (PUBLISHED[CORRIPIO[name]] for name in ("floating_head", "u_tube"))
    rows["base"].check(base.cost(area))
    rows["type_factor"].check(u_tube.cost(area) / base.cost(area))
    rows["pressure_factor"].check(u_tube.cost(area, None, 16.0) / u_tube.cost(area))
    cost = u_tube.cost(area, None, 16.0)
    rows["cost"].check(cost)
    rows["cost_2023"].check(cost * 797.9 / 315.0)


def test_corripio_pressure_steps_upwards() -> None:
    exchanger = PUBLISHED["corripio-1982-shell-and-tube-u-tube"]
    costs = [exchanger.cost(300.0, None, bar) for bar in (0.0, 7.0, 7.1, 21.0, 21.1, 42.0, 42.1, 62.0)]
    assert costs[0] == costs[1] < costs[2] == costs[3] < costs[4] == costs[5] < costs[6] == costs[7]


def test_seider_in_horsepower() -> None:
    rows, power_hp = values("cost", "Seider"), 2000.0 / HORSEPOWER_KW
    for kind, row in rows.items():
        row.check(PUBLISHED[SEIDER[kind]].cost(power_hp))


def test_liquid_ring_pump() -> None:
    values("cost", "Ryans and Roper")["liquid_ring"].check(
        PUBLISHED["ryans-roper-1986-liquid-ring"].cost(20.0)
    )


def test_six_tenths_rule() -> None:
    ratio = power_law(2.0, 1.0, 1.0, 0.6)
    values("cost", "Six-tenths rule")["ratio"].check(ratio)


def test_authors_differ_as_they_are_known_to() -> None:
    rows = values("cost", "Spread in 2023")

    def in_2023(name: str, size: float, bar: float = 0.0) -> float:
        found = PUBLISHED[name]
        return found.cost(size, None, bar) * 797.9 / found.source.index

    hp = 2000.0 / HORSEPOWER_KW
    rows["turton"].check(in_2023(EQUIPMENT["u_tube"], 300.0, 16.0) / 1e3)
    rows["towler"].check(in_2023(TOWLER["u_tube"], 300.0) / 1e3)
    rows["corripio"].check(in_2023(CORRIPIO["u_tube"], 300.0, 16.0) / 1e3)
    rows["turton_drive"].check(in_2023(EQUIPMENT["drive"], 2000.0) / 1e6)
    rows["towler_turbine"].check(in_2023(TOWLER["turbine"], 2000.0) / 1e6)
    dearest, cheapest = (in_2023(SEIDER[kind], hp) for kind in ("condensing", "non_condensing"))
    rows["seider_condensing"].check(dearest / 1e6)
    rows["seider_non_condensing"].check(cheapest / 1e6)
    more = values("cost", "Spread in 2023, expander")
    more["turton_expander"].check(in_2023(EQUIPMENT["expander"], 2000.0) / 1e6)
    more["ratio"].check(dearest / cheapest)


def local_exponent(name: str, low: float, high: float) -> float:
    """Exponent of the power law through two points of a curve."""
    return math.log(PUBLISHED[name].cost(high) / PUBLISHED[name].cost(low)) / math.log(high / low)


@pytest.mark.parametrize("row", published("cost", "Local exponents, U-tube"), ids=str)
def test_larger_exchangers_cost_more_than_six_tenths_says(row) -> None:
    ends = (row.given["from"], row.given["to"])
    found = [local_exponent(source["u_tube"], *ends) for source in (EQUIPMENT, TOWLER, CORRIPIO)]
    row.check(min(found) if row.name == "low" else max(found))


@pytest.mark.parametrize("row", published("cost", "Local exponents, turbine"), ids=str)
def test_authors_disagree_on_how_turbines_scale(row) -> None:
    name = {"turton": EQUIPMENT["drive"], "towler": TOWLER["turbine"]}[row.name]
    row.check(local_exponent(name, row.given["from"], row.given["to"]))


@pytest.mark.parametrize("name", PUBLISHED)
def test_every_correlation_is_whole(name) -> None:
    """Named by author and year, a known size, and a cost that grows over its whole range."""
    found = PUBLISHED[name]
    assert f"-{found.source.year}-" in name
    assert found.size in SIZE_NAMES
    sizes = [found.minimum * (found.maximum / found.minimum) ** (k / 50.0) for k in range(51)]
    costs = [found.cost(size) for size in sizes]
    assert costs[0] > 0.0
    assert costs == sorted(costs)
    assert all(found.cost(300.0, material) >= found.cost(300.0) for material in found.materials)


def test_material_and_pressure_that_a_source_cannot_answer_for() -> None:
    assert PUBLISHED[EQUIPMENT["drive"]].faults("steel", 2.0) == [
        ("material", '"steel" given; allowed: none, the source gives no factor'),
        ("pressure_bar_gauge", "2 given; allowed: none, the source gives no factor"),
    ]
    assert PUBLISHED[EQUIPMENT["pump"]].faults("brass", 101.0) == [
        ("material", '"brass" given; allowed: "cast-iron", "carbon-steel", "stainless"'),
        ("pressure_bar_gauge", "101 given; allowed: 0 to 100"),
    ]
    assert PUBLISHED[EQUIPMENT["pump"]].faults("cast-iron", 100.0) == []


def test_drive_turns_over_outside_its_range_only() -> None:
    """The parabola's greatest value lies at 11.3 MW: never to be extrapolated."""
    greatest_kW = 1e3 * values("cost", "Turton, steam turbine drive")["greatest_MW"].value
    for name in ("drive", "expander"):
        assert PUBLISHED[EQUIPMENT[name]].maximum < greatest_kW
