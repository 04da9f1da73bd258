"""The day: QNH, temperature, humidity, wind and ground, given once for all strips."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import isnan, nan
from typing import Any

from stripcheck.errors import InputError
from stripcheck.inputs import DAY
from stripcheck.surface import CONDITIONS
from stripcheck.units import KINDS as UNIT_KINDS
from stripcheck.units import from_si, read_quantity, tidy

KINDS = {
    "qnh": "pressure", "temperature": "temperature", "temperature_elevation": "altitude",
    "isa_deviation": "temperature difference", "humidity": "humidity", "dew_point": "temperature",
    "wind_from": "angle", "wind_speed": "speed", "assumed_slope": "slope",
}  # fmt: skip
LIMITS = {
    "qnh": (85000.0, 108500.0), "temperature": (213.15, 333.15), "temperature_elevation": (-450.0, 5500.0),
    "isa_deviation": (-60.0, 60.0), "humidity": (0.0, 1.0), "dew_point": (193.15, 308.15),
    "wind_from": (0.0, 6.2831854), "wind_speed": (0.0, 51.5), "assumed_slope": (0.0, 0.3),
}  # fmt: skip
KINDS_SHOWN = {kind: unit for kind, (unit, _) in UNIT_KINDS.items()}
# what stands in for a value that nobody gave; each is listed in the workbook
DEFAULTS = {"qnh": 1013.25, "wind_speed": 0.0, "day_condition": "dry"}


@dataclass(frozen=True)
class Day:
    """The day's values by chain key, in SI, and the defaults that stand in for what was not given, in words."""

    values: dict[str, Any]
    condition: str
    defaults: list[str]


def read_day(given: Mapping[str, Any]) -> Day:
    """The day from what a user typed: keys of ``inputs.DAY``, numbers in their usual units or texts with units.

    Raises InputError for an unknown key, a value that can't be right, or two values that exclude each other.

    >>> read_day({"temperature": "86 °F", "qnh": 29.92}).values["temperature"]
    303.15
    """
    labels = {item.key: item.label for item in DAY}
    unknown = [key for key in given if key not in labels]
    if unknown:
        raise InputError(f'day: "{unknown[0]}" is not a value of the day; they are: {", ".join(labels)}')
    used = {key: value for key, value in given.items() if value is not None and value != ""}
    defaults = [f"{labels[key]}: {value} used, none was given" for key, value in DEFAULTS.items() if key not in used]
    used = {**DEFAULTS, **used}
    condition = str(used["day_condition"])
    if condition not in CONDITIONS:
        raise InputError(f'day: ground condition "{condition}" is none of: {", ".join(CONDITIONS)}')
    values: dict[str, Any] = {key: _value(key, used.get(key), labels[key]) for key in KINDS}
    _refuse_contradictions(values)
    return Day({**values, "day_condition": CONDITIONS.index(condition)}, condition, defaults)


def _value(key: str, typed: Any, label: str) -> float:
    if typed is None:
        return nan
    try:
        value = round(read_quantity(typed, KINDS[key]), 9)
    except InputError as error:
        raise InputError(f"day: {label}: {error}") from None
    low, high = LIMITS[key]
    if not low <= value <= high:
        unit = KINDS_SHOWN[KINDS[key]]
        between = " to ".join(f"{tidy(from_si(limit, unit)):.5g}" for limit in (low, high))
        raise InputError(f"day: {label} of {typed} is not credible; {between} {unit} is expected, or a number with its unit")
    return value


def _refuse_contradictions(values: dict[str, float]) -> None:
    given = {key: not isnan(value) for key, value in values.items()}
    if given["temperature"] and given["isa_deviation"]:
        raise InputError("day: give either a temperature or an ISA deviation, not both")
    if given["temperature_elevation"] and not given["temperature"]:
        raise InputError("day: an elevation where the temperature was taken goes with a temperature; none is given")
    if given["humidity"] and given["dew_point"]:
        raise InputError("day: give either a relative humidity or a dew point, not both")
    if values["wind_speed"] > 0.0 and not given["wind_from"]:
        raise InputError("day: a wind needs the direction that it comes from, such as 270")
    if given["dew_point"] and given["temperature"] and values["dew_point"] > values["temperature"]:
        raise InputError("day: the dew point can't be above the temperature")
