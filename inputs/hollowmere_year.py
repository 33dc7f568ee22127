"""Make hollowmere-year.csv: one invented year of the district heating of Hollowmere.

    python inputs/hollowmere_year.py

Hollowmere does not exist, and nothing here was measured. The year begins on 1 October, as the heating year
of many utilities does. Chosen by hand:

* outdoor temperature: a sine over the year, a daily swing, and weather that is remembered for two days;
* heat at the plant's outlet: a large network, whose hot water and losses alone nearly fill the waste plant in
  summer, and whose winter is carried by peak boilers;
* supply temperature: 80 °C in mild weather, rising in a straight line to 112 °C at -10 °C;
* return temperature: 54 °C in summer, 50 °C in mild weather, 53 °C in severe cold;
* power price: dear in the evening and in still cold weather, cheap at noon in summer, at times below zero.
  Its mean is set to 70 a MWh.

Only numpy is needed. The stream of its RandomState is frozen, so the seed gives the same file in every
version.
"""

from datetime import datetime, timedelta
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

SEED = 4127
HOURS = 8760
START = datetime(2024, 10, 1)  # local standard time, no daylight saving
MEAN_PRICE = 70.0

WATER_BY_HOUR = np.interp(np.arange(24), [0, 4, 7, 13, 19, 24], [0.88, 0.84, 1.18, 0.98, 1.14, 0.88])
PRICE_BY_HOUR = np.interp(np.arange(24), [0, 4, 8, 13, 19, 24], [-10.0, -14.0, 12.0, -6.0, 26.0, -10.0])


def noise(random: np.random.RandomState, hours: float) -> Array:
    """Noise that forgets itself within about `hours`; mean 0, standard deviation 1."""
    raw = random.standard_normal(HOURS)
    keep = np.exp(-1.0 / hours)
    for k in range(1, HOURS):
        raw[k] = keep * raw[k - 1] + (1.0 - keep) * raw[k]
    return np.asarray((raw - raw.mean()) / raw.std())


def columns() -> dict[str, Array]:
    """The columns of the file, unrounded."""
    random = np.random.RandomState(SEED)
    hour = np.arange(HOURS)
    of_day = hour % 24
    winter = 0.5 + 0.5 * np.cos(2.0 * np.pi * (hour / 24.0 - 111.0) / 365.0)  # 1 on 20 January
    weather = noise(random, 48.0)
    swing = (4.5 - 3.0 * winter) * np.cos(2.0 * np.pi * (of_day - 15) / 24.0)
    outdoor = 17.0 - 16.0 * winter + swing + 3.2 * weather
    felt = np.convolve(np.pad(outdoor, (24, 0), mode="edge"), np.full(25, 0.04), mode="valid")
    heat = (24.0 + 4.0 * winter) * WATER_BY_HOUR[of_day] + 2.2 * np.maximum(0.0, 16.0 - felt)
    heat += 0.6 * noise(random, 6.0)
    noon = np.maximum(0.0, np.cos(2.0 * np.pi * (of_day - 12) / 24.0))
    price = PRICE_BY_HOUR[of_day] - 55.0 * (1.0 - winter) * noon**2 - 9.0 * weather * winter
    price = price + 17.0 * noise(random, 20.0)
    return {
        "heat_MW": heat,
        "outdoor_C": outdoor,
        "supply_C": np.interp(felt, [-10.0, 8.0], [112.0, 80.0]),
        "return_C": np.interp(felt, [-10.0, 5.0, 17.0], [53.0, 50.0, 54.0]),
        "power_price": price - price.mean() + MEAN_PRICE,
    }


def text() -> str:
    """The whole file, two decimals."""
    made = columns()
    rows = [
        f"{START + timedelta(hours=k):%Y-%m-%dT%H:%M}," + ",".join(f"{v + 0.0:.2f}" for v in values)
        for k, values in enumerate(zip(*made.values(), strict=True))
    ]
    return "\n".join([",".join(["time", *made]), *rows]) + "\n"


if __name__ == "__main__":
    Path(__file__).with_name("hollowmere-year.csv").write_text(text(), encoding="ascii", newline="\n")
