"""A case's plain mapping, as `tomllib` gives it, with the defaults filled in: only what one hour needs."""

from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True)
class Curve:
    """Piecewise linear, held constant outside its table."""

    load: tuple[float, ...]
    value: tuple[float, ...]

    def at(self, load: float) -> float:
        if load <= self.load[0]:
            return self.value[0]
        for i in range(1, len(self.load)):
            if load <= self.load[i]:
                part = (load - self.load[i - 1]) / (self.load[i] - self.load[i - 1])
                return self.value[i - 1] + part * (self.value[i] - self.value[i - 1])
        return self.value[-1]

    @property
    def flat(self) -> bool:
        return len(set(self.value)) == 1


def curve(given: Any) -> Curve:
    if isinstance(given, dict):
        return Curve(tuple(map(float, given["load"])), tuple(map(float, given["value"])))
    return Curve((1.0,), (float(given),))


@dataclass(frozen=True)
class Heater:
    bleed_bar: float
    terminal_difference_K: float


@dataclass(frozen=True)
class FlueGas:
    heat_per_fuel: float
    at_return_C: float
    slope_per_K: float

    def ratio(self, return_C: float) -> float:
        return max(0.0, self.heat_per_fuel - self.slope_per_K * (return_C - self.at_return_C))


@dataclass(frozen=True)
class Measured:
    """A steady test of the plant as it stands: heat of the turbine condensers, gross power."""

    heat_MW: float
    supply_C: float
    return_C: float
    power_MW: float
    exhaust_bar: float | None = None
    live_steam_kg_s: float | None = None


@dataclass(frozen=True)
class Plant:
    live_bar: float
    live_C: float
    max_kg_s: float
    min_kg_s: float
    boiler_efficiency: Curve
    max_fuel_MW: float | None
    boiler_bar: float
    blowdown: float
    makeup_C: float
    efficiency: float
    part_load: Curve
    mechanical: float
    generator: float
    generator_limit_MW: float | None
    exhaust_loss: float
    deaerator_bar: float
    bleed_bar: float
    sliding_deaerator: bool
    deaerator_minimum_bar: float
    pump_efficiency: float
    heater: Heater | None
    terminal_difference_K: float
    flow_exponent: float
    max_heat_MW: float | None
    heat_MW: float
    supply_C: float
    return_C: float
    flue_gas: FlueGas | None
    peak_efficiency: float
    series: bool
    auxiliary_MW: float
    network_bar: float
    network_pump_efficiency: float
    extra_running: bool
    measured: Measured | None


def plant(data: dict[str, Any]) -> Plant:
    p = data["plant"]
    live, boiler, turbine, feed = p["live_steam"], p["boiler"], p["turbine"], p["feed"]
    condenser, point, peak = p["condenser"], p["design"], p["peak_boiler"]
    network, fgc = data.get("network", {}), p.get("flue_gas_condenser")
    return Plant(
        live_bar=live["pressure_bar"],
        live_C=live["temperature_C"],
        max_kg_s=live["max_kg_s"],
        min_kg_s=live["min_kg_s"],
        boiler_efficiency=curve(boiler["efficiency"]),
        max_fuel_MW=boiler.get("max_fuel_MW"),
        boiler_bar=boiler["pressure_bar"],
        blowdown=boiler.get("blowdown_share", 0.0),
        makeup_C=boiler.get("makeup_C", 15.0),
        efficiency=turbine["efficiency"],
        part_load=curve(turbine.get("part_load", 1.0)),
        mechanical=turbine.get("mechanical_efficiency", 0.985),
        generator=turbine.get("generator_efficiency", 0.975),
        generator_limit_MW=turbine.get("generator_limit_MW"),
        exhaust_loss=turbine.get("exhaust_loss_share", 0.02),
        deaerator_bar=feed["deaerator_bar"],
        bleed_bar=feed["bleed_bar"],
        sliding_deaerator=feed.get("deaerator_control", "fixed") == "sliding",
        deaerator_minimum_bar=feed.get("deaerator_minimum_bar", 1.2),
        pump_efficiency=feed.get("pump_efficiency", 0.75),
        heater=Heater(**feed["heater"]) if feed.get("heater") else None,
        terminal_difference_K=condenser["terminal_difference_K"],
        flow_exponent=condenser.get("flow_exponent", 0.5),
        max_heat_MW=condenser.get("max_heat_MW"),
        heat_MW=point["heat_MW"],
        supply_C=point["supply_C"],
        return_C=point["return_C"],
        flue_gas=FlueGas(**{"slope_per_K": 0.0, **fgc}) if fgc else None,
        peak_efficiency=peak["efficiency"],
        series=peak.get("connection", "parallel") == "series",
        auxiliary_MW=p.get("auxiliary_MW", 0.0),
        network_bar=network.get("pressure_bar", 10.0),
        network_pump_efficiency=network.get("pump_efficiency", 0.75),
        extra_running=data.get("year", {}).get("extra_running", False),
        measured=Measured(**p["measured"]) if p.get("measured") else None,
    )


@dataclass(frozen=True)
class Option:
    """One option with the tail and new condensers it would buy; tuples run from the cold end."""

    key: str
    baseline: bool
    stages: int
    shares: tuple[float, ...]
    area_factor: float
    subcooled: bool
    pumped: bool
    held: bool
    terminal_difference_K: float
    drain_approach_K: float
    flow_exponent: float
    pressure_drop_bar: float
    vacuum_MW: float
    tail_efficiency: float
    baumann: float
    tail_mechanical: float
    tail_generator: float
    tail_limit_MW: float | None
    tail_part_load: Curve
    inlet_loss: float
    min_flow_share: float
    tail_availability: float
    bypass: bool


def option(data: dict[str, Any], key: str) -> Option:
    o = next(o for o in data["options"] if o["key"] == key)
    turbine = plant(data)
    tail = {**data.get("tail", {}), **o.get("tail", {})}
    new = {**data.get("new_condenser", {}), **o.get("new_condenser", {})}
    n = o["stages"]
    return Option(
        key=key,
        baseline=o.get("baseline", False),
        stages=n,
        shares=tuple(o.get("shares", [1.0 / n] * n)),
        area_factor=o.get("existing_area_factor", 1.0),
        subcooled=o.get("drain", "saturated") == "subcooled",
        pumped=o.get("drain_route", "cascade") == "pumped",
        held=o.get("temperature_control", "sliding") == "held",
        terminal_difference_K=o.get("terminal_difference_K", new.get("terminal_difference_K")),
        drain_approach_K=new.get("drain_approach_K"),
        flow_exponent=new.get("flow_exponent", 0.5),
        pressure_drop_bar=new.get("pressure_drop_bar", 0.4),
        vacuum_MW=new.get("vacuum_auxiliary_kW", 0.0) / 1e3,
        tail_efficiency=tail.get("efficiency"),
        baumann=tail.get("baumann_factor", 1.0),
        tail_mechanical=tail.get("mechanical_efficiency", turbine.mechanical),
        tail_generator=tail.get("generator_efficiency", turbine.generator),
        tail_limit_MW=tail.get("generator_limit_MW"),
        tail_part_load=curve(tail.get("part_load", 1.0)),
        inlet_loss=tail.get("inlet_loss_share", 0.0),
        min_flow_share=tail.get("min_flow_share", 0.0),
        tail_availability=tail.get("availability", 1.0),
        bypass=o.get("bypass", False),
    )


def option_keys(data: dict[str, Any]) -> tuple[str, ...]:
    return tuple(o["key"] for o in data["options"])


def baseline_key(data: dict[str, Any]) -> str:
    return next(o["key"] for o in data["options"] if o.get("baseline", False))
