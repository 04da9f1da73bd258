"""What a number in a runway list can be: outside of these limits it is a mistake, and the row is not assessed."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray


class Limits(NamedTuple):
    """Least and greatest value [SI] of a quantity, and the sentence that tells them to the user."""

    least: float
    greatest: float
    sentence: str


# The limits are wide on purpose. No source but common practice, except: the shore of the Dead Sea lies near
# -430 m and the highest airfields near 4,400 m (from memory); 60 degC either way spans the air temperatures
# met at airfields.
LIMITS = {
    "length": Limits(90.0, 6000.0, "a runway is between 90 m and 6,000 m long"),
    "usable": Limits(30.0, 6000.0, "a usable length lies between 30 m and 6,000 m"),
    "tora": Limits(30.0, 6000.0, "a usable length for take-off lies between 30 m and 6,000 m"),
    "lda": Limits(30.0, 6000.0, "a usable length for landing lies between 30 m and 6,000 m"),
    "width": Limits(0.0, 500.0, "a runway is at most 500 m wide"),
    "elevation": Limits(
        -430.0,
        5500.0,
        "an elevation lies between -430 m (-1,411 ft, the Dead Sea) and 5,500 m (18,045 ft, above any strip)",
    ),
    "slope": Limits(-0.30, 0.30, "a slope lies between -30 % and 30 %"),
    "local_slope": Limits(0.0, 0.30, "a greatest local slope lies between 0 % and 30 %"),
    "heading": Limits(0.0, 2.0 * math.pi, "a heading lies between 0 and 360 degrees"),
    "displaced": Limits(0.0, 6000.0, "a displaced threshold lies between 0 m and 6,000 m from the end"),
    "latitude": Limits(-0.5 * math.pi, 0.5 * math.pi, "a latitude lies between -90 and 90 degrees"),
    "longitude": Limits(-math.pi, math.pi, "a longitude lies between -180 and 180 degrees"),
    "obstacle_height": Limits(0.0, 1000.0, "an obstacle is between 0 m and 1,000 m high"),
    "obstacle_distance": Limits(0.0, 20_000.0, "an obstacle lies between 0 m and 20,000 m from the end"),
    "temperature": Limits(213.15, 333.15, "a temperature lies between -60 °C and 60 °C"),
    "qnh": Limits(80_000.0, 110_000.0, "a QNH lies between 800 hPa and 1,100 hPa"),
    "wind_from": Limits(0.0, 2.0 * math.pi, "a wind direction lies between 0 and 360 degrees"),
    "wind_speed": Limits(0.0, 50.0, "a wind speed lies between 0 and 97 kt (50 m/s)"),
}


def outside(key: str, numbers: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Which numbers [SI] of a column lie outside of its limits; missing ones (NaN) do not.

    >>> outside("length", np.array([24.0, 620.0, np.nan]))
    array([ True, False, False])
    """
    limits = LIMITS[key]
    rounding = 1e-9 * max(abs(limits.least), abs(limits.greatest))  # 360 degrees is inside, whatever pi rounds to
    return (numbers < limits.least - rounding) | (numbers > limits.greatest + rounding)


def within_limits(key: str, number: float) -> bool:
    """Whether one number [SI] is given (not NaN) and inside the limits of its column.

    >>> within_limits("elevation", 1200.0), within_limits("elevation", math.nan)
    (True, False)
    """
    return LIMITS[key].least <= number <= LIMITS[key].greatest
