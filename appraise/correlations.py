"""What a published cost correlation is, and the formulas they are made of."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

OfSize = Callable[[float], float]
OfSizeAndPressure = Callable[[float, float], float]


def power_law(
    size: float, reference_cost: float, reference_size: float, exponent: float, fixed: float = 0.0
) -> float:
    """cost = fixed + reference cost × (size / reference size)^exponent; 0.6 is the six-tenths rule."""
    return float(fixed + reference_cost * (size / reference_size) ** exponent)


def offset_power(size: float, a: float, b: float, n: float) -> float:
    """C = a + b·S^n: Towler and Sinnott, ch. 7."""
    return float(a + b * size**n)


def log_parabola(size: float, k1: float, k2: float, k3: float) -> float:
    """log10 C = K1 + K2·log10 A + K3·(log10 A)²: Turton and others, App. A."""
    x = math.log10(size)
    return float(10.0 ** (k1 + k2 * x + k3 * x * x))


def exp_parabola(size: float, a: float, b: float, c: float) -> float:
    """C = exp(a + b·ln A + c·(ln A)²): Corripio, Chrien and Evans."""
    x = math.log(size)
    return math.exp(a + b * x + c * x * x)


def log_line(size: float, a: float, b: float) -> float:
    """a + b·ln A: Corripio's factors for pressure and material."""
    return a + b * math.log(size)


def bare_module_factor(b1: float, b2: float, material: float, pressure: float) -> float:
    """F_BM = B1 + B2·FM·FP, installed over purchased cost at base conditions: Turton and others, App. A."""
    return b1 + b2 * material * pressure


def turton_pressure(_: float, bar_gauge: float, above: float, c1: float, c2: float, c3: float) -> float:
    """log10 FP = C1 + C2·log10 P + C3·(log10 P)², and 1 up to `above` bar gauge."""
    return 1.0 if bar_gauge <= above else log_parabola(bar_gauge, c1, c2, c3)


_CORRIPIO_PRESSURE = (
    (7.0, 1.0, 0.0),
    (21.0, 0.8955, 0.04981),
    (42.0, 1.2002, 0.07140),
    (62.0, 1.4272, 0.12088),
)  # up to bar gauge, a, b


def corripio_pressure(area_m2: float, bar_gauge: float) -> float:
    """FP in steps of the design pressure: up to 7 bar gauge 1, then 7-21, 21-42, 42-62."""
    return next(log_line(area_m2, a, b) for top, a, b in _CORRIPIO_PRESSURE if bar_gauge <= top)


def constant(value: float) -> OfSize:
    """A factor that does not depend on the size."""
    return lambda size: value


def constants(**factors: float) -> Mapping[str, OfSize]:
    """Material factors that do not depend on the size; "_" reads "-" in the material's name."""
    return MappingProxyType({name.replace("_", "-"): constant(value) for name, value in factors.items()})


@dataclass(frozen=True, slots=True)
class Source:
    """Where correlations come from: their date and its plant cost index.

    index : chemical plant cost index at the date of the source, annual_index : that year's average. Their
    ratio moves a table of yearly index values to the date of the source.
    """

    text: str
    year: int
    index: float
    annual_index: float
    currency: str = "USD"


@dataclass(frozen=True, slots=True)
class Published:
    """One published correlation.

    size : its default size, a name in `case.money.SIZE_NAMES`; times `per_size_unit` it is in the source's
    `unit`.
    minimum, maximum : range of the source, in `unit`.
    base : size -> cost at the base date, base material and no pressure.
    materials, pressure : what the source multiplies on that; `pressure` up to `maximum_bar_gauge`.
    bare_module : (B1, B2) where the result is the installed cost instead of the purchased one.
    """

    equipment: str
    size: str
    unit: str
    minimum: float
    maximum: float
    base: OfSize
    source: Source
    mark: str = "seen"
    per_size_unit: float = 1.0
    materials: Mapping[str, OfSize] = field(default_factory=dict)
    pressure: OfSizeAndPressure | None = None
    maximum_bar_gauge: float = 0.0
    bare_module: tuple[float, float] | None = None
    installed: bool = False
    caution: str = ""

    def cost(self, size: float, material: str | None = None, bar_gauge: float = 0.0) -> float:
        """Cost of one unit of `size` (in `unit`) in money of the base date; who asks has checked the range.

        Purchased cost is base × FM × FP. That product is common practice with Turton's factors, which their
        authors define on the installed cost.
        """
        base = self.base(size)
        by_material = 1.0 if material is None else self.materials[material](size)
        by_pressure = 1.0 if self.pressure is None else self.pressure(size, bar_gauge)
        if self.bare_module is not None:
            return base * bare_module_factor(*self.bare_module, by_material, by_pressure)
        return base * by_material * by_pressure

    @property
    def covers(self) -> str:
        """What the cost includes, in words."""
        return "installed" if self.installed else "purchased, without erection"

    def faults(self, material: str | None, bar_gauge: float) -> list[tuple[str, str]]:
        """Why the source cannot answer for this material or pressure, as (key, message)."""
        found = []
        if material is not None and material not in self.materials:
            known = ", ".join(f'"{name}"' for name in self.materials) or "none, the source gives no factor"
            found.append(("material", f'"{material}" given; allowed: {known}'))
        if not 0.0 <= bar_gauge <= self.maximum_bar_gauge:
            known = (
                f"0 to {self.maximum_bar_gauge:g}" if self.pressure else "none, the source gives no factor"
            )
            found.append(("pressure_bar_gauge", f"{bar_gauge:g} given; allowed: {known}"))
        return found
