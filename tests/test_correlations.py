"""Published cost correlations against examples worked from their constants."""

import math

import pytest
from published import published, values

from appraise.case.money import SIZE_NAMES
from appraise.correlations import bare_module_factor, exp_parabola, log_line, power_law
from appraise.published_costs import HORSEPOWER_KW, PUBLISHED

EQUIPMENT = {
    "floating_head": "turton-2001-shell-and-tube-floating-head",
    "u_tube": "turton-2001-shell-and-tube-u-tube",
    "drive": "turton-2001-steam-turbine-drive",
    "pump": "turton-2001-centrifugal-pump",
}
TOWLER = {
    "u_tube": "towler-2010-shell-and-tube-u-tube",
    "turbine": "towler-2010-condensing-steam-turbine",
    "motor": "towler-2010-pump-motor",
}


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


def test_no_pressure_factor_below_the_pressure_where_it_starts() -> None:
    exchanger, pump = (
        PUBLISHED[EQUIPMENT["u_tube"]],
        PUBLISHED[EQUIPMENT["pump"]],
    )
    assert exchanger.cost(300.0, None, 5.0) == exchanger.cost(300.0)
    assert pump.cost(75.0, None, 10.0) == pump.cost(75.0)
    assert pump.cost(75.0, None, 20.0) > pump.cost(75.0)


@pytest.mark.parametrize("row", published("cost", "Towler"), ids=str)
def test_towler(row) -> None:
    row.check(PUBLISHED[TOWLER[row.name]].cost(row.given["size"]))


def test_corripio() -> None:
    rows, area = values("cost", "Corripio"), 300.0
    rows["base"].check(exp_parabola(area, 8.202, 0.01506, 0.06811))
    rows["type_factor"].check(exp_parabola(area, -0.7844, 0.0830, 0.0))
    rows["pressure_factor"].check(log_line(area, 0.8955, 0.04981))
    cost = PUBLISHED["corripio-1982-shell-and-tube-u-tube"].cost(area, None, 16.0)
    rows["cost"].check(cost)
    rows["cost_2023"].check(cost * 797.9 / 315.0)


def test_corripio_pressure_steps_upwards() -> None:
    exchanger = PUBLISHED["corripio-1982-shell-and-tube-u-tube"]
    costs = [exchanger.cost(300.0, None, bar) for bar in (0.0, 7.0, 7.1, 21.0, 21.1, 42.0, 42.1, 62.0)]
    assert costs[0] == costs[1] < costs[2] == costs[3] < costs[4] == costs[5] < costs[6] == costs[7]


def test_seider_in_horsepower() -> None:
    rows, power_hp = values("cost", "Seider"), 2000.0 / HORSEPOWER_KW
    for name, row in rows.items():
        row.check(PUBLISHED[f"seider-2013-{name.replace('_', '-')}-steam-turbine"].cost(power_hp))


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
    rows["corripio"].check(in_2023("corripio-1982-shell-and-tube-u-tube", 300.0, 16.0) / 1e3)
    rows["turton_drive"].check(in_2023(EQUIPMENT["drive"], 2000.0) / 1e6)
    rows["towler_turbine"].check(in_2023(TOWLER["turbine"], 2000.0) / 1e6)
    rows["seider_non_condensing"].check(in_2023("seider-2013-non-condensing-steam-turbine", hp) / 1e6)
    rows["seider_condensing"].check(in_2023("seider-2013-condensing-steam-turbine", hp) / 1e6)


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


def test_factor_of_base_conditions_is_that_of_the_table() -> None:
    """F_BM of a carbon steel exchanger at low pressure: 3.29 (Turton and others, Table A.4, B1 + B2)."""
    assert bare_module_factor(1.63, 1.66, 1.0, 1.0) == pytest.approx(3.29, abs=1e-12)


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
    """The parabola's greatest value lies at 10^(K2/-2K3), 11.3 MW: never to be extrapolated."""
    assert PUBLISHED[EQUIPMENT["drive"]].maximum < 10.0 ** (1.4398 / (2.0 * 0.1776))
    assert math.isclose(10.0 ** (1.4398 / (2.0 * 0.1776)), 11_300.0, rel_tol=0.01)
