"""Make marrowby-year.csv: one invented year of the district heating of Marrowby.

    python inputs/marrowby_year.py

Marrowby does not exist, and nothing here was measured. Every number below was chosen by hand so that the
year behaves like a town of some 20 000 people in a climate between maritime and continental:

* outdoor temperature: a sine over the year, weather that comes and goes within days, a daily swing that
  is small in winter and large in summer, and one cold spell at the end of January;
* heat at the plant's outlet, after losses and storage: hot water and network losses all year, and space
  heating below 16.5 degC of a sluggish outdoor temperature (buildings store heat), less at night. The
  slope of the space heating is set so that the year sums to 190 GWh;
* supply temperature: 76 degC in mild weather, rising in a straight line to 110 degC at -8.5 degC;
* return temperature: 52 degC in summer, when little water flows and circulation keeps it warm; lowest,
  44 degC, around +3 degC outdoors; rising again to 47.5 degC in severe cold, when radiators cool the
  water less well;
* power price: follows the load that wind and sun leave over, flat in the middle and steep at both ends.
  Mild winter weather is windy and cheap, cold still weather dear, and a few windy nights and sunny
  Sundays fall below zero. The mean is set to 62 a MWh.

Only the standard library and numpy are needed. The stream of numpy's RandomState is frozen, so the seed
gives the same file in every version of numpy.
"""

from datetime import datetime, timedelta
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

SEED = 1853
HOURS = 8760
START = datetime(2025, 1, 1)  # a Wednesday; local standard time, no daylight saving

YEAR_HEAT_MWH = 190_000.0
HEATING_LIMIT_C = 16.5
# Heating is switched off from mid to end of May, and on again in September.
SUMMER_DAYS = (135.0, 149.0, 246.0, 260.0)
MEAN_PRICE = 62.0

HEAT_BY_HOUR = np.interp(
    np.arange(24), [0, 4, 7, 9, 14, 19, 22, 24], [0.90, 0.90, 1.11, 1.07, 0.98, 1.05, 0.97, 0.90]
)
WATER_BY_HOUR = np.interp(
    np.arange(24), [0, 3, 7, 9, 14, 19, 21, 24], [0.84, 0.80, 1.20, 1.12, 0.97, 1.17, 1.12, 0.84]
)
DEMAND_BY_HOUR = np.interp(
    np.arange(24), [0, 3, 8, 12, 15, 18, 20, 24], [-0.7, -1.0, 0.6, 0.4, 0.3, 1.0, 0.8, -0.7]
)


def smooth(values: Array, hours: float) -> Array:
    """Exponential running mean with the time constant `hours`; starts at the first value."""
    keep = np.exp(-1.0 / hours)
    out = np.empty_like(values)
    out[0] = values[0]
    for k in range(1, len(values)):
        out[k] = keep * out[k - 1] + (1.0 - keep) * values[k]
    return out


def unit_noise(random: np.random.RandomState, hours: float) -> Array:
    """Smooth noise that forgets itself within about `hours`; mean 0, standard deviation 1."""
    raw = smooth(smooth(random.standard_normal(HOURS + 1000), hours), 6.0)[1000:]
    return (raw - raw.mean()) / raw.std()


def winter_share(day: Array) -> Array:
    """1 on 20 January, 0 half a year later."""
    return 0.5 + 0.5 * np.cos(2.0 * np.pi * (day - 20.0) / 365.0)


def outdoor(day: Array, hour: Array, weather: Array) -> Array:
    """Outdoor temperature [degC] by hour."""
    winter = winter_share(day)
    season = 16.2 - 14.6 * winter
    swing = (4.6 - 3.2 * winter) * np.cos(2.0 * np.pi * (hour - 15.0) / 24.0)
    cold_spell = -11.5 * np.exp(-(((day - 27.0) / 2.0) ** 2))
    return season + swing + (2.4 + 0.7 * winter) * weather + cold_spell


def heat(day: Array, hour_of_day: NDArray[np.int64], felt: Array, random: np.random.RandomState) -> Array:
    """Heat demand [MW] by hour: hot water and losses, plus space heating scaled to the year's sum."""
    water = (6.3 + 1.7 * winter_share(day)) * WATER_BY_HOUR[hour_of_day]
    heating_is_on = 1.0 - np.interp(day, SUMMER_DAYS, [0.0, 1.0, 1.0, 0.0])
    degrees = heating_is_on * np.maximum(0.0, HEATING_LIMIT_C - felt) * HEAT_BY_HOUR[hour_of_day]
    degrees *= 1.0 + 0.02 * unit_noise(random, 8.0)
    slope_MW_per_K = (YEAR_HEAT_MWH - water.sum()) / degrees.sum()
    return water + slope_MW_per_K * degrees


def power_price(
    day: Array, when: list[datetime], felt: Array, weather: Array, random: np.random.RandomState
) -> Array:
    """Power price [money/MWh] by hour: a steep-ended curve over the load left by wind and sun."""
    hour_of_day = np.array([t.hour for t in when])
    weekday = np.array([t.weekday() for t in when])
    winter = winter_share(day)
    demand = DEMAND_BY_HOUR[hour_of_day] - 0.45 * (weekday == 5) - 0.75 * (weekday == 6)
    demand += 0.05 * np.maximum(0.0, 12.0 - felt)
    wind = (0.85 + 0.4 * winter) * (0.55 * winter * weather + unit_noise(random, 30.0))
    height = np.cos(2.0 * np.pi * (hour_of_day - 12.0) / 24.0) - 0.55 * winter
    clear = 0.7 + 0.3 * np.tanh(unit_noise(random, 24.0))
    sun = 1.6 * clear * np.maximum(0.0, height)
    left = demand - wind - sun
    left = (left - left.mean()) / left.std()
    price = 20.0 * left + 2.8 * left**3 + 5.0 * unit_noise(random, 3.0)
    return price - price.mean() + MEAN_PRICE


def invented_year() -> tuple[list[datetime], dict[str, Array]]:
    """The hours and the columns of the file, unrounded."""
    random = np.random.RandomState(SEED)
    when = [START + timedelta(hours=k) for k in range(HOURS)]
    hour = np.arange(HOURS, dtype=np.float64)
    day = hour / 24.0
    weather = unit_noise(random, 60.0)
    outdoor_C = outdoor(day, hour, weather)
    felt = smooth(outdoor_C, 30.0)
    hour_of_day = np.array([t.hour for t in when])
    columns = {
        "heat_MW": heat(day, hour_of_day, felt, random),
        "outdoor_C": outdoor_C,
        "supply_C": np.interp(smooth(outdoor_C, 6.0), [-8.5, 6.0], [110.0, 76.0]),
        "return_C": np.clip(
            np.interp(felt, [-12.0, 3.0, 17.0], [47.5, 44.0, 52.0]) + 0.3 * unit_noise(random, 12.0),
            44.0,
            52.0,
        ),
        "power_price": power_price(day, when, felt, weather, random),
    }
    return when, columns


def write(path: Path, when: list[datetime], columns: dict[str, Array]) -> None:
    """Write the CSV, two decimals, with the same line ends on every system."""
    rows = zip(when, *columns.values(), strict=True)
    lines = [f"{t:%Y-%m-%dT%H:%M}," + ",".join(f"{v + 0.0:.2f}" for v in values) for t, *values in rows]
    text = "\n".join([",".join(["time", *columns]), *lines]) + "\n"
    path.write_text(text, encoding="ascii", newline="\n")


def statistics(columns: dict[str, Array]) -> str:
    """A few figures of the year, one a line."""
    demand, price = columns["heat_MW"], columns["power_price"]
    plant = np.where(demand < 12.0, 0.0, np.minimum(demand, 40.0))
    captured = np.average(price, weights=plant) / price.mean()
    figures = [
        ("heat [GWh]", demand.sum() / 1000.0, 2),
        ("greatest and least heat [MW]", (demand.max(), demand.min()), 2),
        ("June to August heat, least, mean, greatest [MW]", _summer(demand), 2),
        ("hours above 40 MW", np.sum(demand > 40.0), 0),
        ("heat above 40 MW [GWh]", np.maximum(0.0, demand - 40.0).sum() / 1000.0, 2),
        ("hours below 12 MW", np.sum(demand < 12.0), 0),
        ("heat of a plant running from 12 to 40 MW [GWh]", plant.sum() / 1000.0, 2),
        ("outdoor least, mean, greatest [degC]", _spread(columns["outdoor_C"]), 2),
        ("supply least, mean, greatest [degC]", _spread(columns["supply_C"]), 2),
        ("return least, mean, greatest [degC]", _spread(columns["return_C"]), 2),
        ("supply, return weighted with that plant's heat [degC]",
         (np.average(columns["supply_C"], weights=plant), np.average(columns["return_C"], weights=plant)), 2),
        ("price least, mean, greatest", _spread(price), 2),
        ("hours with a price below 0", np.sum(price < 0.0), 0),
        ("price weighted with that plant's heat, over the mean", captured, 4),
    ]  # fmt: skip
    return "\n".join(f"{name:58s}{_shown(value, digits)}" for name, value, digits in figures)


def _summer(values: Array) -> tuple[float, float, float]:
    return _spread(values[151 * 24 : 243 * 24])


def _spread(values: Array) -> tuple[float, float, float]:
    return float(values.min()), float(values.mean()), float(values.max())


def _shown(value: object, digits: int) -> str:
    values = value if isinstance(value, tuple) else (value,)
    return "  ".join(f"{float(v):9.{digits}f}" for v in values)


def main() -> None:
    """Make the file beside this script and print its figures."""
    when, columns = invented_year()
    path = Path(__file__).with_name("marrowby-year.csv")
    write(path, when, columns)
    print(statistics({name: np.round(values, 2) for name, values in columns.items()}))
    print(f"{path.name}: {HOURS} hours, {path.stat().st_size / 1000:.0f} kB")


if __name__ == "__main__":
    main()
