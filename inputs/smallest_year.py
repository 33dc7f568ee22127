"""Make smallest.csv: an invented year of outdoor temperatures, and nothing else.

    python inputs/smallest_year.py

A sine over the year with its coldest day on 20 January, a daily swing that is warmest at three in the
afternoon, and weather that comes and goes in waves of 5 and 13 days. No chance is in it: a formula gives the
same file everywhere.
"""

from datetime import datetime, timedelta
from math import cos, pi, sin
from pathlib import Path

HOURS = 8760
START = datetime(2025, 1, 1)  # local standard time, no daylight saving


def outdoor_C(hour: int) -> float:
    """Outdoor temperature, °C, in an hour of the year."""
    day = hour / 24.0
    season = 8.0 - 9.5 * cos(2.0 * pi * (day - 20.0) / 365.0)
    daily = 3.0 * cos(2.0 * pi * (hour - 15) / 24.0)
    weather = 2.5 * sin(2.0 * pi * day / 5.0) + 3.0 * sin(2.0 * pi * day / 13.0)
    return season + daily + weather


def text() -> str:
    """The whole file."""
    rows = [
        f"{START + timedelta(hours=hour):%Y-%m-%dT%H:%M},{outdoor_C(hour) + 0.0:.1f}" for hour in range(HOURS)
    ]
    return "\n".join(["time,outdoor_C", *rows]) + "\n"


if __name__ == "__main__":
    Path(__file__).with_name("smallest.csv").write_text(text(), encoding="ascii", newline="\n")
