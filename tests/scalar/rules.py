"""Which rules acted in an hour, read off the scalar solver's own results."""

import math
from collections.abc import Iterator
from dataclasses import replace

from .hour import Point
from .plain import Option
from .prices import prices
from .year import Asked, Year

RULES = (
    "deaerator on its bleed",
    "deaerator on live steam",
    "deaerator slides",
    "deaerator at its minimum",
    "deaerator afloat",
    "deaerator afloat on a heater's drain",
    "high-pressure heater",
    "heater would cool the feed",
    "boiler efficiency over load",
    "turbine part load",
    "drain subcooled",
    "drain pumped",
    "drain cooled to saturation only",
    "enlarged existing condenser",
    "two stages slide",
    "three stages slide",
    "four to six stages slide",
    "no temperature within 1 to 99 %",
    "held by throttling",
    "held valve fully open, slides",
    "tail inlet loss",
    "tail part load",
    "tail below its least flow",
    "dry tail exhaust",
    "live-steam limit",
    "heat limit",
    "heat limit beside flue gas",
    "fuel limit",
    "below least flow, off",
    "just above least flow, on",
    "option could gain an hour",
    "extra running",
    "series peak boilers",
    "flue-gas condenser",
    "flue gas too warm a return",
    "flue gas at a limit",
    "shared generator limit",
    "main generator's limit",
    "tail generator's limit",
    "bypassed",
    "bypass not worth it",
    "hour under the premium's floor",
    "the floor decides on the bypass",
    "outage",
    "outage over new year",
    "later year of a trend",
    "calibrated on power",
    "calibrated on power and exhaust pressure",
    "heat by signature, temperatures by curve",
    "tail availability below 1",
    "series of several years",
)


def rules_of(year: Year, hour: int, knot: int) -> set[str]:
    """Every rule that acts in one solved hour, in any option."""
    want, found = year.solved[knot][hour]
    if not want.available:
        if want.heat_MW < 20.0:  # too little to have run anyway
            return set()
        return {"outage", *_if(year.rows[hour].month != 7, "outage over new year")}
    base = found[year.base]
    acting = set(_asked(year, hour, knot))
    for key, p in found.items():
        o = year.design.options[key].option
        acting |= set(_running(year, want, o, p, base))
        if p.balance is not None and not p.as_baseline:
            acting |= {*_feed(year, p), *_train(year, o, p), *_limits(year, want, o, p)}
        if base.on and not o.baseline and knot == 0:
            acting |= set(_traded(year, key, hour))
    return acting


def _if(condition: bool, *names: str) -> tuple[str, ...]:
    return names if condition else ()


def _asked(year: Year, hour: int, knot: int) -> Iterator[str]:
    plant, row = year.design.plant, year.rows[hour]
    if year.solved[knot][hour][1][year.base].on:
        yield from _if(year.knots[knot] > 0, "later year of a trend")
        yield from _if(row.heat_MW is None, "heat by signature, temperatures by curve")
        yield from _if(year.years > 1, "series of several years")
        if plant.measured is not None:
            pressure = plant.measured.exhaust_bar is not None
            yield "calibrated on power and exhaust pressure" if pressure else "calibrated on power"


def _running(year: Year, want: Asked, o: Option, p: Point, base: Point) -> Iterator[str]:
    plant = year.design.plant
    if not p.on:
        yield from _if(
            0.5 * plant.heat_MW * plant.min_kg_s / year.design.m1_0 < want.heat_MW, "below least flow, off"
        )
        yield from _if(p.could_gain, "option could gain an hour")
        return
    yield from _if(p.live_steam_kg_s < 1.01 * plant.min_kg_s, "just above least flow, on")
    yield from _if(not base.on, "extra running")
    yield from _if(p.as_baseline and "1 ... 99" in p.why, "no temperature within 1 to 99 %")
    yield from _if(p.as_baseline and "minimum flow" in p.why, "tail below its least flow")
    yield from _if(
        o.stages > 1 and o.tail_availability < 1.0 and not p.as_baseline, "tail availability below 1"
    )


def _feed(year: Year, p: Point) -> Iterator[str]:
    plant, water = year.design.plant, p.balance.feed
    if water.floating:
        yield "deaerator afloat on a heater's drain" if water.heater_kg_s > 0.0 else "deaerator afloat"
    elif p.deaerator_on_live_steam:
        yield "deaerator on live steam"
    else:
        yield "deaerator on its bleed"
    if plant.sliding_deaerator:
        at_least = water.deaerator_bar == plant.deaerator_minimum_bar
        yield from _if(at_least, "deaerator at its minimum")
        yield from _if(not at_least and water.deaerator_bar < plant.deaerator_bar, "deaerator slides")
    if plant.heater is not None:
        yield "high-pressure heater" if water.heater_kg_s > 0.0 else "heater would cool the feed"
    full = plant.boiler_efficiency.at(1.0)
    yield from _if(plant.boiler_efficiency.at(p.balance.load) != full, "boiler efficiency over load")
    yield from _if(plant.part_load.at(p.balance.load) != 1.0, "turbine part load")


def _train(year: Year, o: Option, p: Point) -> Iterator[str]:
    yield from _if(o.area_factor != 1.0, "enlarged existing condenser")
    if o.stages == 1:
        return
    found, fixed = p.balance.train, year.design.options[o.key].fixed
    cooled = [s.drain.temperature_C < s.saturation_C for s in found.shells[1:]]
    yield from _if(o.subcooled and all(cooled), "drain subcooled")
    yield from _if(o.subcooled and not all(cooled), "drain cooled to saturation only")
    yield from _if(o.pumped, "drain pumped")
    throttled = [
        section.inlet.pressure_bar < above.steam.pressure_bar * (1.0 - o.inlet_loss) * (1.0 - 1e-9)
        for section, above in zip(found.sections, found.shells[1:], strict=True)
    ]
    if o.held and any(throttled):
        yield "held by throttling"
    elif o.held:
        yield "held valve fully open, slides"
    else:
        yield {2: "two stages slide", 3: "three stages slide"}.get(o.stages, "four to six stages slide")
    yield from _if(o.inlet_loss > 0.0, "tail inlet loss")
    share = min(f / d for f, d in zip(found.flows, fixed.flow_kg_s, strict=True))
    yield from _if(o.tail_part_load.at(share) != o.tail_part_load.at(1.0), "tail part load")
    yield from _if(found.shells[0].steam.moisture == 0.0, "dry tail exhaust")


def _limits(year: Year, want: Asked, o: Option, p: Point) -> Iterator[str]:
    plant = year.design.plant
    yield from _if(p.limit == "live steam", "live-steam limit")
    yield from _if(p.limit == "heat", "heat limit")
    yield from _if(p.limit == "heat" and p.flue_gas_MW > 0.0, "heat limit beside flue gas")
    yield from _if(p.limit == "fuel", "fuel limit")
    yield from _if(plant.series and p.heat_MW < want.heat_MW, "series peak boilers")
    if plant.flue_gas is not None:
        yield "flue-gas condenser" if p.flue_gas_MW > 0.0 else "flue gas too warm a return"
        yield from _if(p.flue_gas_MW > 0.0 and p.limit != "", "flue gas at a limit")
    lost_main, lost_tail = p.balance.lost_main_MW, p.balance.lost_tail_MW
    own = o.tail_limit_MW is not None
    yield from _if(lost_main > 0.0, "main generator's limit" if own else "shared generator limit")
    yield from _if(lost_tail > 0.0, "tail generator's limit")


def _traded(year: Year, key: str, hour: int) -> Iterator[str]:
    now = prices(year.data, year.scenario, 0)
    if year.design.options[key].option.bypass:
        yield "bypassed" if year.bypassed(key, hour, 0, now) else "bypass not worth it"
    price = year.hour_price(now, hour)
    yield from _if(now.premium > 0.0 and price < now.not_below, "hour under the premium's floor")
    everywhere = replace(now, not_below=-math.inf)
    decides = year.bypassed(key, hour, 0, now) != year.bypassed(key, hour, 0, everywhere)
    yield from _if(decides, "the floor decides on the bypass")
