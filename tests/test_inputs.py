"""What a user may give to ``assess``: keys, single values and columns, texts with units, and what is refused."""

from __future__ import annotations

import re
from typing import Any

import numpy as np
import pytest

import stripcheck
from stripcheck import assess, load_card, load_rules, read_day
from stripcheck.assessment import Result
from stripcheck.errors import InputError
from stripcheck.inputs import CARD, CONSTANT_SPEED, DAY, FIXED_PITCH, RULES, STRIP
from stripcheck.units import UNITS
from stripcheck.verdict import NOT_ASSESSED

STRIPS: dict[str, Any] = {"tora": 900.0, "lda": 850.0, "elevation_field": 2300, "slope_given": 1.5, "surface": "grass"}
DAY_VALUES = {"temperature": 22}
RUNNER = load_card("ridge-runner")
KEYS = ("takeoff_distance", "takeoff_margin", "landing_distance", "landing_margin", "density_altitude")


def distances(result: Result) -> list[list[float]]:
    return [list(result.si(key)) for key in KEYS]


def test_keys_and_labels_are_unique() -> None:
    for group in (STRIP, DAY, (*CARD, *FIXED_PITCH, *CONSTANT_SPEED), RULES):
        assert len({item.key for item in group}) == len(group)
        assert len({item.label for item in group}) == len(group)
        assert all(item.unit in UNITS for item in group)


def test_single_values_and_columns_are_the_same() -> None:
    single = assess(STRIPS, RUNNER, DAY_VALUES, "uk-leaflet")
    columns = assess({key: [value] * 3 for key, value in STRIPS.items()}, RUNNER, DAY_VALUES, "uk-leaflet")
    arrays = assess({**STRIPS, "tora": np.full(3, 900.0), "lda": np.full(3, 850)}, RUNNER, DAY_VALUES,
                    "uk-leaflet")  # fmt: skip
    for three in (columns, arrays):
        for one, several in zip(distances(single), distances(three), strict=True):
            assert several == pytest.approx(one * 3, rel=1e-14)
        assert three["takeoff_reason"] == single["takeoff_reason"] * 3


def test_texts_with_units_are_numbers() -> None:
    texts = {**STRIPS, "tora": "2952.755905511811 ft", "lda": "0.85 km", "elevation_field": "701.04 m",
             "slope_given": "1,5 %", "heading": "90 deg", "own_wind_speed": "5.144444444444445 m/s",
             "own_wind_from": "120", "own_qnh": "29.92 inHg", "own_temperature": "71.6 °F",
             "obstacle_height": "30.48 m", "obstacle_distance": "1 nm"}  # fmt: skip
    numbers = {**STRIPS, "heading": 90, "own_wind_speed": 10, "own_wind_from": 120, "own_qnh": 1013.20748,
               "own_temperature": 22, "obstacle_height": 100, "obstacle_distance": 1852}  # fmt: skip
    one, other = (assess(strips, RUNNER, {}, "uk-leaflet") for strips in (texts, numbers))
    for left, right in zip(distances(one), distances(other), strict=True):
        assert left == pytest.approx(right, rel=1e-7)
    assert one["over_obstacle"][0] == pytest.approx(other["over_obstacle"][0], rel=1e-6)


def test_a_column_may_mix_texts_numbers_and_blanks() -> None:
    mixed = {**STRIPS, "tora": [900.0, "900 m", "2952.755905511811 ft", None, ""]}
    result = assess(mixed, RUNNER, DAY_VALUES)
    margins = result["takeoff_margin"]
    assert margins[:3] == pytest.approx([margins[0]] * 3, rel=1e-9)
    assert np.isnan(margins[3:]).all()
    assert result["takeoff_reason"][3:] == ["length usable for take-off not known"] * 2


def test_a_bare_own_qnh_may_be_in_inches() -> None:
    """As on the Day sheet: 24 to 32.5 is inHg and 800 to 1,100 is hPa; the ranges can't be confused."""
    inches = assess({**STRIPS, "own_qnh": [29.92]}, RUNNER, DAY_VALUES)
    hectopascals = assess({**STRIPS, "own_qnh": [1013.20748]}, RUNNER, DAY_VALUES)
    assert inches["takeoff_verdict"] == hectopascals["takeoff_verdict"]
    assert inches["pressure"] == pytest.approx(hectopascals["pressure"], rel=1e-7)


def test_masses() -> None:
    """Single, as text with a unit, or a column, of numbers or of texts."""
    usual = assess(STRIPS, RUNNER, DAY_VALUES)["takeoff_distance"][0]
    lighter = assess(STRIPS, RUNNER, DAY_VALUES, takeoff_mass=950.0)["takeoff_distance"][0]
    assert lighter < usual
    for mass in ("950 kg", "2094.391491 lb", np.array([950.0])):
        result = assess(STRIPS, RUNNER, DAY_VALUES, takeoff_mass=mass)
        assert result["takeoff_distance"][0] == pytest.approx(lighter, rel=1e-6)
    column = assess({**STRIPS, "tora": [900.0, 900.0]}, RUNNER, DAY_VALUES, takeoff_mass=["950 kg", 1050.0])
    assert column["takeoff_distance"] == pytest.approx([lighter, usual], rel=1e-6)


def test_a_column_of_masses_over_one_strip() -> None:
    """One strip at three masses is three rows."""
    result = assess(STRIPS, RUNNER, DAY_VALUES, takeoff_mass=[900.0, 1000.0, 1100.0])
    assert len(result["takeoff_verdict"]) == 3 and (np.diff(result["takeoff_distance"]) > 0.0).all()


def test_yes_and_no() -> None:
    flags = {**STRIPS, "take_off_here": ["yes", "no", True, False, None, ""]}
    reasons = assess(flags, RUNNER, DAY_VALUES)["takeoff_reason"]
    forbidden = [reason.startswith("one-way strip") for reason in reasons]
    assert forbidden == [False, True, False, True, False, False]


@pytest.mark.parametrize("surface", [None, "", "mud", "Grass?", 7])
def test_a_surface_that_is_not_in_the_table_is_not_assessed(surface: object) -> None:
    result = assess({**STRIPS, "surface": [surface]}, RUNNER, DAY_VALUES)
    for side in ("takeoff", "landing"):
        assert result[f"{side}_verdict"] == [NOT_ASSESSED]
        assert result[f"{side}_reason"] == ["surface or its condition not known"]


def test_a_blank_condition_takes_the_days() -> None:
    wet_day, wet_strip = (
        assess({**STRIPS, "condition": [condition]}, RUNNER, {**DAY_VALUES, "day_condition": of_day})
        for condition, of_day in ((None, "wet"), ("wet", "dry"))
    )
    assert distances(wet_day) == distances(wet_strip)


@pytest.mark.parametrize("condition", ["muddy", "Wet?", 3])
def test_a_condition_that_is_not_in_the_table_is_never_taken_for_the_days(condition: object) -> None:
    """A misread word must not pass for a blank: dry, from the day, would be a guess on the dangerous side."""
    try:
        result = assess({**STRIPS, "condition": [condition]}, RUNNER, DAY_VALUES)
    except InputError as error:
        assert str(condition) in str(error)
    else:
        assert result["takeoff_verdict"] == result["landing_verdict"] == [NOT_ASSESSED]


@pytest.mark.parametrize(
    ("strips", "sentence"),
    [
        ({"lenght": 600.0}, 'strips: "lenght" is not a column; the columns are: fault, land_here, '),
        ({"tora": [900.0, 800.0], "lda": [900.0]}, "strips: the columns are not equally long: [1, 2] rows"),
        ({"tora": ["long"]}, 'strips: tora: "long" is not a number; write for example "620 m"'),
        ({"tora": "900 kg"}, 'strips: tora: "kg" is not a unit of length; write for example "620 m"'),
        ({"heading": "north"}, 'strips: heading: "north" is not a number; write for example "12 °"'),
        ({"take_off_here": "perhaps"}, 'strips: take_off_here, row 1: "perhaps" is neither yes nor no'),
    ],
)
def test_strips_that_can_not_be_right(strips: dict[str, Any], sentence: str) -> None:
    with pytest.raises(InputError, match=f"^{re.escape(sentence)}"):
        assess({**{key: value for key, value in STRIPS.items() if key not in ("tora", "lda")}, **strips},
               RUNNER, DAY_VALUES)  # fmt: skip


@pytest.mark.parametrize(
    ("loading", "sentence"),
    [
        ({"takeoff_mass": "heavy"}, '"heavy" is not a number; write for example "1150 kg"'),
        ({"takeoff_mass": -5}, "-5 is not a mass; write for example 1050 kg"),
        ({"landing_mass": "1000 m"}, '"m" is not a unit of mass; write for example "1150 kg"'),
        ({"landing_mass": [1000.0, "heavy"]}, '"heavy" is not a number; write for example "1150 kg"'),
        ({"takeoff_mass": [1000.0, 1000.0, 1000.0]}, "rows"),
        ({"takeoff_flap": "30"}, 'flap "30" is not allowed for take-off by the card'),
        ({"landing_flap": "45"}, 'there is no flap setting "45"; the card has: up, 10, 20, 30'),
    ],
)
def test_loadings_that_can_not_be_right(loading: dict[str, Any], sentence: str) -> None:
    """Two strips; three masses do not go with them."""
    with pytest.raises(InputError, match=re.escape(sentence)):
        assess({**STRIPS, "tora": [900.0, 800.0]}, RUNNER, DAY_VALUES, **loading)


def test_names_that_are_not_there() -> None:
    with pytest.raises(InputError, match='^"heron" is neither a file nor one of the shipped cards'):
        assess(STRIPS, "heron", DAY_VALUES)
    with pytest.raises(InputError, match='^"house" is neither a file nor one of the shipped rules'):
        assess(STRIPS, RUNNER, DAY_VALUES, "house")
    with pytest.raises(InputError, match='^day: "wind" is not a value of the day'):
        assess(STRIPS, RUNNER, {"wind": 5})
    result = assess(STRIPS, RUNNER, DAY_VALUES)
    with pytest.raises(KeyError, match="takeoff is not a result; results are: "):
        result["takeoff"]


def test_loaded_things_are_taken_as_they_are() -> None:
    loaded = assess(STRIPS, load_card("ridge-runner"), read_day(DAY_VALUES), load_rules("uk-leaflet"))
    named = assess(STRIPS, "ridge-runner", DAY_VALUES, "uk-leaflet")
    assert distances(loaded) == distances(named)


def test_the_package_offers_its_door() -> None:
    assert stripcheck.assess is assess
    with pytest.raises(AttributeError, match="has no attribute 'fly'"):
        stripcheck.fly  # noqa: B018


def test_slope_from_the_ends() -> None:
    """60 ft up over 609.6 m: 3 %; the higher end is the strip's elevation."""
    strip = {**STRIPS, "slope_given": None, "length": "2000 ft", "elevation_start": 2240, "elevation_end": 2300,
             "elevation_field": None}  # fmt: skip
    result = assess(strip, RUNNER, DAY_VALUES)
    assert result["slope"][0] == pytest.approx(3.0, rel=1e-9)
    assert result["elevation"][0] == pytest.approx(2300.0, rel=1e-9)
    given = assess({**strip, "slope_given": 1.0}, RUNNER, DAY_VALUES)
    assert given["slope"][0] == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("day", "celsius"),
    [
        ({"temperature": 22}, 22.0),  # the same temperature at every strip
        ({"temperature": 22, "temperature_elevation": 300}, 22.0 - 0.0065 * 2000.0 * 0.3048),  # ISO 2533 lapse rate
        ({"isa_deviation": 10}, 15.0 - 0.0065 * 2300.0 * 0.3048 + 10.0),
    ],
)
def test_air_temperature_at_the_strip(day: dict[str, Any], celsius: float) -> None:
    assert assess(STRIPS, RUNNER, day)["air_temperature"][0] == pytest.approx(celsius, abs=1e-6)
    own = assess({**STRIPS, "own_temperature": 31.0}, RUNNER, day)
    assert own["air_temperature"][0] == pytest.approx(31.0)
