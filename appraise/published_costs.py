"""Published cost correlations by author, year of the base date and equipment, as data.

Mark "seen" was read at a place that carries it, "from memory" recalled and not read again. All are a screen
(estimate class 5), and authors differ by a factor of two and more: a quotation always wins.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from functools import partial
from types import MappingProxyType

from appraise.correlations import (
    Published,
    Source,
    constant,
    constants,
    corripio_pressure,
    exp_parabola,
    log_line,
    log_parabola,
    offset_power,
    power_law,
    turton_pressure,
)

HORSEPOWER_KW = 0.745699872  # mechanical horsepower

_TURTON = Source(
    "Turton, Bailie, Whiting, Shaeiwitz, Analysis, Synthesis and Design of Chemical Processes, App. A, "
    "Tables A.1, A.2, A.4 (mid-2001, CEPCI 397)",
    2001,
    397.0,
    394.3,
)
_TOWLER = Source(
    "Towler, Sinnott, Chemical Engineering Design, 2nd ed. 2013, Table 7.2 (January 2010, CEPCI 532.9, "
    "index from memory)",
    2010,
    532.9,
    550.8,
)
_CORRIPIO = Source(
    "Corripio, Chrien, Evans, Estimate Costs of Heat Exchangers, Chem. Eng. 25 January 1982 (CEPCI 315)",
    1982,
    315.0,
    314.0,
)
_SEIDER = Source(
    "Seider, Seader, Lewin, Widagdo, Product and Process Design Principles, 4th ed. "
    "(CEPCI 567; range from memory)",
    2013,
    567.0,
    567.3,
)
_RYANS_ROPER = Source(
    "Ryans, Roper, Process Vacuum System Design and Operation, 1986, ch. 8 (mid-1980s, taken as 1986)",
    1986,
    318.4,
    318.4,
)

_PER_HP = 1.0 / HORSEPOWER_KW
_CS_STAINLESS = "range and materials as read; other readers of the figure give 1.7-1.9 for stainless tubes"
_DRIVE = "a mechanical drive without generator, gear or condenser; the curve turns over at 11 MW"


def _turton_exchanger(name: str, k1: float, k2: float, k3: float, minimum: float = 10.0) -> Published:
    return Published(
        f"shell-and-tube exchanger, {name}",
        "area_m2",
        "m²",
        minimum,
        1000.0,
        partial(log_parabola, k1=k1, k2=k2, k3=k3),
        _TURTON,
        materials=constants(carbon_steel=1.0, carbon_steel_copper=1.35, carbon_steel_stainless=1.81),
        # Tube side only: the network water is in the tubes, the shell stays near atmosphere.
        pressure=partial(turton_pressure, above=5.0, c1=-0.00164, c2=-0.00627, c3=0.0123),
        maximum_bar_gauge=140.0,
        caution=_CS_STAINLESS,
    )


def _corripio_exchanger(name: str, a: float, b: float) -> Published:
    return Published(
        f"shell-and-tube exchanger, {name}",
        "area_m2",
        "m²",
        14.0,
        1100.0,
        lambda area: exp_parabola(area, 8.202, 0.01506, 0.06811) * exp_parabola(area, a, b, 0.0),
        _CORRIPIO,
        materials=MappingProxyType(
            {
                "carbon-steel": constant(1.0),
                "stainless-316": partial(log_line, a=1.4144, b=0.23296),
                "stainless-304": partial(log_line, a=1.1991, b=0.15984),
                "titanium": partial(log_line, a=2.5617, b=0.42913),
            }
        ),
        pressure=corripio_pressure,
        maximum_bar_gauge=62.0,
    )


_TOWLER_MATERIALS = constants(
    carbon_steel=1.0, cast_steel=1.1, stainless_304=1.3, stainless_316=1.3, stainless_321=1.5
)


def _towler(
    equipment: str, size: str, unit: str, limits: tuple[float, float], abn: tuple[float, float, float],
    per_size_unit: float = 1.0, caution: str = "",
) -> Published:  # fmt: skip
    a, b, n = abn
    return Published(
        equipment,
        size,
        unit,
        *limits,
        partial(offset_power, a=a, b=b, n=n),
        _TOWLER,
        per_size_unit=per_size_unit,
        materials=_TOWLER_MATERIALS if unit == "m²" else {},
        caution=caution,
    )


def _seider_turbine(kind: str, cost: float, exponent: float) -> Published:
    return Published(
        f"steam turbine drive, {kind}",
        "tail_shaft_MW",
        "hp",
        250.0,
        10_000.0,
        partial(power_law, reference_cost=cost, reference_size=1.0, exponent=exponent),
        _SEIDER,
        per_size_unit=1000.0 * _PER_HP,
        caution="a mechanical drive without generator",
    )


_TURTON_U_TUBE = _turton_exchanger("U-tube", 4.1884, -0.2503, 0.1974)
_TURTON_PUMP = Published(
    "centrifugal pump, cast iron, without motor",
    "condensate_pump_kW",
    "kW",
    1.0,
    300.0,
    partial(log_parabola, k1=3.3892, k2=0.0536, k3=0.1538),
    _TURTON,
    mark="seen; material factors from memory",
    materials=constants(cast_iron=1.0, carbon_steel=1.6, stainless=2.3),
    pressure=partial(turton_pressure, above=10.0, c1=-0.3935, c2=0.3957, c3=-0.00226),
    maximum_bar_gauge=100.0,
)
_TURTON_DRIVE = Published(
    "steam turbine drive",
    "tail_shaft_MW",
    "kW",
    70.0,
    7500.0,
    partial(log_parabola, k1=2.6259, k2=1.4398, k3=-0.1776),
    _TURTON,
    per_size_unit=1000.0,
    caution=_DRIVE,
)
_TURTON_EXPANDER = Published(
    "axial gas turbine or expander",
    "tail_shaft_MW",
    "kW",
    100.0,
    4000.0,
    partial(log_parabola, k1=2.7051, k2=1.4398, k3=-0.1776),
    _TURTON,
    per_size_unit=1000.0,
    caution="made for gas, without generator; 1.2 times the steam turbine drive of the same source",
)

PUBLISHED: Mapping[str, Published] = MappingProxyType(
    {
        "turton-2001-shell-and-tube-u-tube": _TURTON_U_TUBE,
        "turton-2001-shell-and-tube-u-tube-installed": replace(
            _TURTON_U_TUBE, bare_module=(1.63, 1.66), installed=True
        ),
        "turton-2001-shell-and-tube-fixed-tube": _turton_exchanger("fixed tube", 4.3247, -0.3030, 0.1634),
        # The source's range begins at 10 m², but its curve falls with size below 21.6 m².
        "turton-2001-shell-and-tube-floating-head": _turton_exchanger(
            "floating head", 4.8306, -0.8509, 0.3187, minimum=22.0
        ),
        "turton-2001-centrifugal-pump": _TURTON_PUMP,
        "turton-2001-centrifugal-pump-installed": replace(
            _TURTON_PUMP, bare_module=(1.89, 1.35), installed=True
        ),
        "turton-2001-steam-turbine-drive": _TURTON_DRIVE,
        "turton-2001-steam-turbine-drive-installed": replace(
            _TURTON_DRIVE, bare_module=(3.54, 0.0), installed=True
        ),
        "turton-2001-axial-expander": _TURTON_EXPANDER,
        "turton-2001-axial-expander-installed": replace(
            _TURTON_EXPANDER, bare_module=(3.5, 0.0), installed=True
        ),
        "towler-2010-shell-and-tube-u-tube": _towler(
            "shell-and-tube exchanger, U-tube", "area_m2", "m²", (10.0, 1000.0), (28_000.0, 54.0, 1.2)
        ),
        "towler-2010-shell-and-tube-floating-head": _towler(
            "shell-and-tube exchanger, floating head", "area_m2", "m²", (10.0, 1000.0), (32_000.0, 70.0, 1.2)
        ),
        # Without materials: what the plates of the source are made of was not read.
        "towler-2010-plate-and-frame": replace(
            _towler("plate-and-frame exchanger", "drain_area_m2", "m²", (1.0, 500.0), (1_600.0, 210.0, 0.95)),
            materials={},
        ),
        "towler-2010-condensing-steam-turbine": _towler(
            "condensing steam turbine",
            "tail_shaft_MW",
            "kW",
            (100.0, 20_000.0),
            (-14_000.0, 1_900.0, 0.75),
            1000.0,
            "no statement of generator or gear in the source",
        ),
        "towler-2010-pump-motor": _towler(
            "explosion-proof motor", "condensate_pump_kW", "kW", (1.0, 2500.0), (-1_100.0, 2_100.0, 0.6)
        ),
        "corripio-1982-shell-and-tube-floating-head": _corripio_exchanger("floating head", 0.0, 0.0),
        "corripio-1982-shell-and-tube-u-tube": _corripio_exchanger("U-tube", -0.7844, 0.0830),
        "corripio-1982-shell-and-tube-fixed-tube": _corripio_exchanger("fixed tube", -0.9003, 0.0906),
        "seider-2013-non-condensing-steam-turbine": _seider_turbine("non-condensing", 10_660.0, 0.41),
        "seider-2013-condensing-steam-turbine": _seider_turbine("condensing", 28_350.0, 0.405),
        "ryans-roper-1986-liquid-ring": Published(
            "liquid-ring vacuum pump",
            "vacuum_auxiliary_kW",
            "hp",
            1.0,
            200.0,
            partial(power_law, reference_cost=33_000.0, reference_size=10.0, exponent=0.5),
            _RYANS_ROPER,
            mark="seen; the range is a judgement, the source read gives none",
            per_size_unit=_PER_HP,
            installed=True,
        ),
    }
)
"""All published correlations by author, year of the base date and equipment."""
