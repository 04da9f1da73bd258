"""The Python door: what goes in, what comes out, and that a long list gives what a short one does."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from stripcheck import assess, load_card, load_rules
from stripcheck.assessment import AT_ONCE, strip_columns
from stripcheck.chain import FEW
from stripcheck.errors import InputError
from stripcheck.surface import CONDITIONS, SURFACES

CARD, RULES = load_card("ridge-runner"), load_rules("uk-leaflet")
DAY = {"temperature": 22, "wind_from": 250, "wind_speed": 8}
LONG = 2 * FEW


def long_list() -> dict[str, Any]:
    """An invented list long enough to be recorded, every column an array."""
    random = np.random.default_rng(3)
    length = random.uniform(300.0, 1200.0, LONG)
    return {
        "tora": length, "lda": length * 0.95, "elevation_field": random.uniform(0.0, 7000.0, LONG),
        "slope_given": random.uniform(-4.0, 6.0, LONG), "heading": random.uniform(0.0, 360.0, LONG),
        "surface": random.integers(-1, len(SURFACES), LONG), "condition": random.integers(-1, len(CONDITIONS), LONG),
        "take_off_here": random.random(LONG) < 0.9, "width": random.uniform(8.0, 30.0, LONG),
    }  # fmt: skip


def part(strips: dict[str, Any], rows: slice) -> dict[str, Any]:
    return {key: column[rows] for key, column in strips.items()}


def test_a_long_list_gives_what_its_parts_give() -> None:
    strips = long_list()
    whole = assess(strips, CARD, DAY, RULES)
    for rows in (slice(0, 50), slice(LONG - 50, LONG)):
        few = assess(part(strips, rows), CARD, DAY, RULES)
        for key in whole:
            values, expected = whole[key][rows], few[key]
            if isinstance(expected, list):
                assert values == expected
            else:
                np.testing.assert_allclose(values, expected, rtol=1e-12, atol=1e-9, err_msg=key)


def test_a_long_list_gets_the_other_steps_when_they_are_asked_for() -> None:
    result = assess(long_list(), CARD, DAY, RULES)
    assert set(result.found) == set(AT_ONCE)
    first = result.si("density")
    assert "density" in result.found and first is not None
    np.testing.assert_array_equal(result.si("density"), first)


def test_later_steps_do_not_see_what_the_caller_did_to_the_columns() -> None:
    strips = long_list()
    result = assess(strips, CARD, DAY, RULES)
    before = assess(strips, CARD, DAY, RULES)["takeoff_margin_share"]
    strips["tora"][:] = 1.0
    np.testing.assert_array_equal(result["takeoff_margin_share"], before)


def test_a_result_is_a_mapping_of_all_steps() -> None:
    result = assess({"tora": [700.0, 350.0]}, CARD, DAY, RULES)
    assert list(result) == [step.key for step in CARD.chain.steps] and len(result) == len(CARD.chain.steps)
    assert result.unit("density_altitude") == "ft" and "sigma" in result
    with pytest.raises(KeyError, match="takeoff_rol is not a result; results are"):
        result["takeoff_rol"]
    with pytest.raises(KeyError, match="tora is not a result"):
        result.si("tora")


@pytest.mark.parametrize("rows", [2, LONG])
def test_units_of_results(rows: int) -> None:
    """Shown in kt and °C, plain in m/s and K; 1 kt is 1852 m in an hour (ISO 80000-3)."""
    strip = {"tora": np.full(rows, 700.0), "elevation_field": np.linspace(0.0, 3000.0, rows), "surface": "grass"}
    result = assess(strip, CARD, DAY, RULES)
    np.testing.assert_allclose(result["lift_off_tas"] * 1852.0 / 3600.0, result.si("lift_off_tas"), rtol=1e-14)
    np.testing.assert_allclose(result["air_temperature"] + 273.15, result.si("air_temperature"), rtol=1e-14)
    assert len(result["stall_takeoff"]) == rows and len(result["takeoff_reason"]) == rows


@pytest.mark.parametrize("rows", [3, LONG])
def test_the_fault_of_a_row_is_its_reason(rows: int) -> None:
    faults = ["", "length is a word"] + [""] * (rows - 2)
    result = assess({"fault": faults, "tora": np.linspace(500.0, 900.0, rows)}, CARD, DAY, RULES)
    assert result["takeoff_reason"][1] == result["landing_reason"][1] == "length is a word"
    assert result["takeoff_verdict"][1] == "not assessed"
    assert result["takeoff_reason"][0] == "elevation not known"


def test_words_codes_and_truths_mean_the_same() -> None:
    words = {"surface": ["grass", "gravel", "", "marsh"], "condition": ["wet", "", None, "dry"],
             "land_here": ["yes", "no", "", None], "take_off_here": "no"}  # fmt: skip
    grass, gravel = SURFACES.index("grass"), SURFACES.index("gravel")
    codes = {"surface": np.array([grass, gravel, -1, -1]), "condition": np.array([1, -1, -1, 0], np.int16),
             "land_here": np.array([True, False, True, True]), "take_off_here": np.zeros(4, int)}  # fmt: skip
    for given in (words, {key: np.array(column) for key, column in words.items()}, codes):
        columns, _, size = strip_columns(given)
        assert size == 4
        assert columns["surface"].tolist() == [grass, gravel, -1, -1]
        assert columns["condition"].tolist() == [1, -1, -1, 0]
        assert columns["land_here"].tolist() == [True, False, True, True]
        assert columns["take_off_here"].tolist() == [False] * 4


def test_numbers_and_texts_mean_the_same() -> None:
    """2300 ft is 701.04 m and 12 kt 6.1733 m/s (ISO 80000-3)."""
    for elevation, wind in (
        ([2300.0, 0.0], [12, 0]),
        (["2300 ft", "0 m"], ["12 kt", "0 m/s"]),
        (np.array([2300, 0]), [12.0, 0.0]),
    ):
        columns, _, _ = strip_columns({"elevation_field": elevation, "own_wind_speed": wind})
        np.testing.assert_allclose(columns["elevation_field"], [701.04, 0.0], rtol=1e-14)
        np.testing.assert_allclose(columns["own_wind_speed"], [12.0 * 1852.0 / 3600.0, 0.0], rtol=1e-14)
    temperatures = strip_columns({"own_temperature": np.array([15.0, np.nan])})[0]["own_temperature"]
    np.testing.assert_allclose(temperatures, [288.15, np.nan], rtol=1e-15)


def test_what_is_missing_is_not_known() -> None:
    columns, faults, size = strip_columns({"tora": [500.0, 600.0]})
    assert size == 2 and list(faults) == ["", ""] and not columns["fault"].any()
    assert np.isnan(columns["heading"]).tolist() == [True, True] and columns["surface"].tolist() == [-1, -1]
    assert columns["land_here"].tolist() == [True, True]
    assert strip_columns({})[2] == 1 and strip_columns({"tora": []})[2] == 0


@pytest.mark.parametrize(
    ("strips", "sentence"),
    [
        ({"lenght": 500}, r'"lenght" is not a column; the columns are: fault, '),
        ({"tora": [1.0, 2.0], "lda": [1.0]}, r"not equally long: \[1, 2\] rows"),
        ({"land_here": ["yes", "perhaps"]}, r'land_here, row 2: "perhaps" is neither yes nor no'),
        ({"land_here": "perhaps"}, r'land_here, row 1: "perhaps" is neither yes nor no'),
        ({"land_here": np.array([1, 0, 2])}, r'land_here, row 3: "2" is neither yes nor no'),
        ({"surface": np.array([0, 8])}, r"surface, row 2: 8 is not the place of a word; write one of: paved, "),
        ({"condition": np.array([-3, 0])}, r"condition, row 1: -3 is not the place of a word"),
        ({"tora": ["500 m", "long"]}, r'tora: "long" is not a number; write for example "620 m"'),
    ],
)
def test_bad_columns_are_refused(strips: dict[str, Any], sentence: str) -> None:
    with pytest.raises(InputError, match=sentence):
        assess(strips, CARD, DAY, RULES)


def test_loading() -> None:
    """Masses as columns, numbers or texts; 2,205 lb is 1,000.2 kg (1 lb = 0.45359237 kg)."""
    strip = {"tora": 700.0, "elevation_field": 500.0, "surface": "grass", "slope_given": 0.0, "heading": 250.0}
    columns = assess({**strip, "tora": [700.0] * 2}, CARD, DAY, RULES, takeoff_mass=[900.0, 1000.0])
    single = assess(strip, CARD, DAY, RULES, takeoff_mass="1000 kg")
    assert columns["takeoff_required"][1] == pytest.approx(single["takeoff_required"][0], rel=1e-12)
    assert columns["takeoff_required"][0] < columns["takeoff_required"][1]
    pounds = assess(strip, CARD, DAY, RULES, takeoff_mass="2205 lb")
    assert pounds.given["mass_takeoff"] == pytest.approx(2205 * 0.45359237, rel=1e-12)
    with pytest.raises(InputError, match=r"mass_takeoff: -1\.0 is not a mass"):
        assess(strip, CARD, DAY, RULES, takeoff_mass=-1.0)
    with pytest.raises(InputError, match='no flap setting "99"'):
        assess(strip, CARD, DAY, RULES, takeoff_flap="99")
