"""Feed-water side: condensate pumps, deaerator, optional high-pressure heater, feed pump."""

from dataclasses import dataclass

from . import steam
from .expansion import MainLine
from .plain import Option, Plant
from .shells import Train
from .steam import State


@dataclass(frozen=True)
class Reference:
    """The baseline's design point: 0-values of the cone law, of load and of the network flow."""

    exhaust_kg_s: float
    exhaust_bar: float
    live_kg_s: float
    network_kg_s: float


@dataclass(frozen=True)
class Feed:
    live_kg_s: float
    bleed_kg_s: float
    heater_kg_s: float
    bleed_bar: float
    heater_bar: float | None
    bleed: State  # what heats the deaerator: bleed steam or throttled live steam
    heater_bleed: State | None
    deaerator_bar: float
    deaerator_enthalpy: float
    condensate_enthalpy: float
    boiler_inlet_enthalpy: float
    makeup_enthalpy: float
    pump_kW: float
    floating: bool


def cone_bar(reference: Reference, bleed0_bar: float, exhaust_kg_s: float, exhaust_bar: float) -> float:
    """Stodola: p_e^2 = p_N^2 + (M/M0)^2 (p_e0^2 - p_N0^2)."""
    flow = exhaust_kg_s / reference.exhaust_kg_s
    return (exhaust_bar**2 + flow**2 * (bleed0_bar**2 - reference.exhaust_bar**2)) ** 0.5


def pump_rise(volume: float, from_bar: float, to_bar: float, efficiency: float) -> float:
    """v max(0, dp) / eta, kJ/kg (1 bar m3/kg is 100 kJ/kg)."""
    return volume * max(0.0, to_bar - from_bar) * 100.0 / efficiency


def condensate(plant: Plant, option: Option, found: Train, to_bar: float) -> tuple[float, float]:
    """Mixed enthalpy behind the condensate pumps, and their work in kW."""
    cold, total = found.shells[0], found.exhaust_kg_s
    if not option.pumped:
        rise = pump_rise(cold.drain.volume, cold.pressure_bar, to_bar, plant.pump_efficiency)
        return cold.drain.enthalpy + rise, total * rise
    work, carried = 0.0, 0.0
    for s in found.shells:
        work += s.steam_kg_s * pump_rise(s.drain.volume, s.pressure_bar, to_bar, plant.pump_efficiency)
        carried += s.steam_kg_s * s.drain.enthalpy
    return (carried + work) / total, work


def feed(
    plant: Plant,
    option: Option,
    found: Train,
    line: MainLine,
    bleed_bar: float,
    heater_bar: float | None,
    on_live: bool,
) -> Feed:
    """Mass and energy of the deaerator and heater for the train's exhaust flow."""
    bleed = line.live if on_live else line.at(bleed_bar)
    deaerator_bar = plant.deaerator_bar
    if plant.sliding_deaerator:
        deaerator_bar = max(plant.deaerator_minimum_bar, min(deaerator_bar, 0.95 * bleed_bar))
    mixed, work = condensate(plant, option, found, deaerator_bar)
    water = steam.saturated(deaerator_bar, 0.0)
    rise = pump_rise(water.volume, deaerator_bar, plant.boiler_bar, plant.pump_efficiency)
    heater = _heater(plant, line, heater_bar)
    makeup = steam.at(deaerator_bar, plant.makeup_C).enthalpy
    into = _Inflow(plant.blowdown, found.exhaust_kg_s, mixed, makeup)
    outlet, share = water.enthalpy, heater.share(into.blowdown, water.enthalpy + rise)
    live = into.live_kg_s(bleed.enthalpy, outlet, share, heater.drain)
    floating = live * (1.0 - share) < into.condensate_kg_s
    if floating:  # no bleed is wanted: the pressure stays, and the outlet is as hot as its inflows make it
        outlet = _floating_outlet(
            into, heater, rise, water.enthalpy, steam.saturated(plant.boiler_bar, 0.0).enthalpy
        )
        share = heater.share(into.blowdown, outlet + rise)
        live = into.condensate_kg_s / (1.0 - share)
    return Feed(
        live_kg_s=live,
        bleed_kg_s=0.0 if floating else live * (1.0 - share) - into.condensate_kg_s,
        heater_kg_s=share * live,
        bleed_bar=bleed_bar,
        heater_bar=heater_bar,
        bleed=bleed,
        heater_bleed=heater.bleed,
        deaerator_bar=deaerator_bar,
        deaerator_enthalpy=outlet,
        condensate_enthalpy=mixed,
        boiler_inlet_enthalpy=heater.feed if share > 0.0 else outlet + rise,
        makeup_enthalpy=makeup,
        pump_kW=work + (1.0 + into.blowdown) * live * rise,
        floating=floating,
    )


@dataclass(frozen=True)
class _Inflow:
    """What reaches the deaerator beside steam and heater drain: condensate and make-up."""

    blowdown: float
    condensate_kg_s: float
    condensate_enthalpy: float
    makeup_enthalpy: float

    def live_kg_s(self, bleed_enthalpy: float, outlet: float, share: float, drain: float) -> float:
        """Live steam at which mass and energy of the deaerator both close, its outlet given."""

        def surplus(live: float) -> float:
            bleed = live * (1.0 - share) - self.condensate_kg_s
            heat = bleed * bleed_enthalpy + self.condensate_kg_s * self.condensate_enthalpy
            heat += live * (self.blowdown * self.makeup_enthalpy + share * drain)
            return heat - (1.0 + self.blowdown) * live * outlet

        # linear in the flow, so two values give it
        at_none, slope = surplus(0.0), surplus(1.0) - surplus(0.0)
        return -at_none / slope


@dataclass(frozen=True)
class _Heater:
    """The high-pressure heater as far as its own bleed fixes it."""

    bleed: State | None
    drain: float
    feed: float

    def share(self, blowdown: float, pumped: float) -> float:
        """Its steam over live steam; none where it would cool the feed."""
        if self.bleed is None or self.feed <= pumped:
            return 0.0
        return (1.0 + blowdown) * (self.feed - pumped) / (self.bleed.enthalpy - self.drain)


def _heater(plant: Plant, line: MainLine, heater_bar: float | None) -> _Heater:
    if plant.heater is None:
        return _Heater(None, 0.0, 0.0)
    outlet_C = steam.saturation_temperature(heater_bar) - plant.heater.terminal_difference_K
    boiling = steam.saturated(plant.boiler_bar, 0.0)
    heated = boiling.enthalpy  # hotter it would boil
    if outlet_C < boiling.temperature_C:
        heated = steam.at(plant.boiler_bar, outlet_C).enthalpy
    return _Heater(line.at(heater_bar), steam.saturated(heater_bar, 0.0).enthalpy, heated)


def _floating_outlet(into: _Inflow, heater: _Heater, rise: float, low: float, high: float) -> float:
    """Outlet enthalpy at which a deaerator without bleed closes its energy balance."""

    def surplus(outlet: float) -> float:
        share = heater.share(into.blowdown, outlet + rise)
        live = into.condensate_kg_s / (1.0 - share)
        heat = into.condensate_kg_s * into.condensate_enthalpy
        heat += live * (into.blowdown * into.makeup_enthalpy + share * heater.drain)
        return heat - (1.0 + into.blowdown) * live * outlet

    return steam.root(surplus, low, high)
