"""The day as typed: values, defaults that stand in, and one sentence for each contradiction."""

from __future__ import annotations

import math
import re

import pytest

from stripcheck.day import LIMITS, read_day
from stripcheck.errors import InputError
from stripcheck.inputs import DAY

KNOT = 1852.0 / 3600.0


def test_values_as_typed() -> None:
    day = read_day({"temperature": "86 °F", "qnh": "29.92 inHg", "wind_from": 270, "wind_speed": "10 kt",
                    "humidity": 60, "day_condition": "wet", "temperature_elevation": "2300 ft",
                    "assumed_slope": 3})  # fmt: skip
    assert day.values["temperature"] == pytest.approx(303.15, abs=1e-8)
    assert day.values["qnh"] == pytest.approx(101320.748, abs=0.01)
    assert day.values["wind_from"] == pytest.approx(1.5 * math.pi)
    assert day.values["wind_speed"] == pytest.approx(10.0 * KNOT)
    assert day.values["humidity"] == pytest.approx(0.6)
    assert day.values["temperature_elevation"] == pytest.approx(701.04)
    assert day.values["assumed_slope"] == pytest.approx(0.03)
    assert (day.values["day_condition"], day.condition) == (1, "wet")
    assert math.isnan(day.values["dew_point"]) and math.isnan(day.values["isa_deviation"])
    assert day.defaults == []


def test_every_value_of_the_day_has_its_entry() -> None:
    assert set(read_day({}).values) == {item.key for item in DAY}


def test_defaults_are_told() -> None:
    day = read_day({"temperature": 15, "qnh": "", "wind_speed": None})
    assert day.values["qnh"] == 101325.0 and day.values["wind_speed"] == 0.0 and day.condition == "dry"
    assert day.defaults == ["QNH: 1013.25 used, none was given", "Wind: 0.0 used, none was given",
                            "Ground condition: dry used, none was given"]  # fmt: skip
    assert math.isnan(day.values["temperature"]) is False


def test_no_temperature_is_no_temperature() -> None:
    assert math.isnan(read_day({}).values["temperature"])


@pytest.mark.parametrize(
    ("given", "sentence"),
    [
        ({"temprature": 15}, 'day: "temprature" is not a value of the day; they are: qnh, temperature, '),
        ({"temperature": "warm"}, 'day: Temperature: "warm" is not a number; write for example "12 °C"'),
        ({"qnh": 500}, "day: QNH: 500 is neither a pressure in hPa (800 to 1100) nor in inHg (24 to 32.5)"),
        ({"qnh": 810}, "day: QNH of 810 is not credible"),
        ({"temperature": 86}, "day: Temperature of 86 is not credible"),
        ({"temperature": -75}, "day: Temperature of -75 is not credible"),
        ({"isa_deviation": 70}, "day: ISA deviation of 70 is not credible"),
        ({"humidity": 130}, "day: Relative humidity of 130 is not credible"),
        ({"dew_point": 40, "temperature": 45}, "day: Dew point of 40 is not credible"),
        ({"wind_speed": -5, "wind_from": 90}, "day: Wind of -5 is not credible"),
        ({"wind_speed": 120, "wind_from": 90}, "day: Wind of 120 is not credible"),
        ({"wind_speed": 5, "wind_from": 370}, "day: Wind from of 370 is not credible"),
        ({"temperature": 15, "temperature_elevation": 30000}, "day: Temperature taken at of 30000 is not credible"),
        ({"assumed_slope": -2}, "day: Slope assumed of -2 is not credible"),
        ({"day_condition": "damp"}, 'day: ground condition "damp" is none of: dry, wet, soft'),
        ({"temperature": 15, "isa_deviation": 10},
         "day: give either a temperature or an ISA deviation, not both"),
        ({"temperature_elevation": 1000},
         "day: an elevation where the temperature was taken goes with a temperature; none is given"),
        ({"humidity": 50, "dew_point": 5}, "day: give either a relative humidity or a dew point, not both"),
        ({"wind_speed": 8}, "day: a wind needs the direction that it comes from, such as 270"),
        ({"dew_point": 16, "temperature": 15}, "day: the dew point can't be above the temperature"),
    ],
)  # fmt: skip
def test_what_can_not_be_right(given: dict[str, object], sentence: str) -> None:
    with pytest.raises(InputError, match=f"^{re.escape(sentence)}"):
        read_day(given)


@pytest.mark.parametrize(("key", "typed"), [("wind_from", 360), ("wind_from", 0), ("humidity", 100), ("humidity", 0),
                                            ("temperature", 60), ("temperature", -60), ("assumed_slope", 30),
                                            ("wind_speed", 100), ("qnh", 850), ("qnh", 1085)])  # fmt: skip
def test_limits_themselves_are_credible(key: str, typed: float) -> None:
    given = {key: typed} | ({"wind_from": 90} if key == "wind_speed" else {})
    low, high = LIMITS[key]
    assert low <= read_day(given).values[key] <= high


def test_calm_needs_no_direction() -> None:
    assert read_day({"wind_speed": 0}).values["wind_speed"] == 0.0
