"""Names of runway ends and headings. Designators are tens of degrees magnetic (ICAO Annex 14, from memory)."""

from __future__ import annotations

import datetime
import math

import numpy as np
import pytest

from stripcheck.errors import InputError
from stripcheck.register.runway_ends import (
    bearings,
    designator_degrees,
    is_helipad,
    name_both,
    names_from_heading,
    opposed,
    opposite,
    split_runway,
    which_end,
)


@pytest.mark.parametrize(
    ("cell", "ends"),
    [
        ("09/27", ("09", "27")),
        ("9-27", ("09", "27")),
        ("9 / 27", ("09", "27")),
        ("09L/27R", ("09L", "27R")),
        ("RWY 4", ("04", "22")),
        (18.0, ("18", "36")),
        ("NE/SW", ("NE", "SW")),
        ("n", ("N", "S")),
        ("09 27", ("09", "27")),
        ("/27", ("09", "27")),
        ("", ("", "")),
        ("H1", ("H1", "")),
    ],
)
def test_runway_cells(cell: object, ends: tuple[str, str]) -> None:
    assert split_runway(cell) == ends


@pytest.mark.parametrize("cell", [datetime.date(2024, 9, 27), datetime.datetime(2024, 9, 27), "27-Sep", "Sep 27"])
def test_a_runway_that_a_spreadsheet_made_a_date(cell: object) -> None:
    with pytest.raises(InputError, match="the spreadsheet has changed the runway"):
        split_runway(cell)


def test_more_than_two_ends() -> None:
    with pytest.raises(InputError, match="names more than two ends"):
        split_runway("09/27/18")


def test_the_other_end_of_every_designator_is_180_degrees_off_and_back_again() -> None:
    for name in [*(f"{number:02d}{side}" for number in range(1, 37) for side in ("", "L", "C", "R")), "N", "NE", "WSW"]:
        other = opposite(name)
        assert (designator_degrees(name) - designator_degrees(other)) % 360.0 == 180.0
        assert opposite(other) == name


@pytest.mark.parametrize("name", ["", "00", "37", "H1", "A", "ALL", "180"])
def test_names_that_say_no_direction(name: str) -> None:
    assert math.isnan(designator_degrees(name)) and opposite(name) == ""


def test_names_that_are_missing() -> None:
    assert name_both("", "33") == ("15", "33")
    assert names_from_heading(math.radians(359)) == ("36", "18")
    assert names_from_heading(math.radians(4)) == ("36", "18")
    assert names_from_heading(math.radians(5.1)) == ("01", "19")
    assert names_from_heading(math.nan) == ("A", "B")


def test_helicopter_pads() -> None:
    assert all(is_helipad(name, "") for name in ("H1", "H12", "HA", "H", "PAD"))
    assert not any(is_helipad(name, "") for name in ("09", "N", "A", "HIGH", ""))


@pytest.mark.parametrize(
    ("cell", "allowed"),
    [
        ("09", (True, False)),
        (9.0, (True, False)),
        ("27 only", (False, True)),
        ("-", (True, True)),
        ("09/27", (True, True)),
        ("09 and 27", (True, True)),
        ("both", (True, True)),
    ],
)
def test_one_way(cell: object, allowed: tuple[bool, bool]) -> None:
    assert which_end(cell, "09", "27") == allowed


@pytest.mark.parametrize("cell", ["18", "uphill", "not 09", "09L", "yes"])
def test_one_way_to_nowhere(cell: str) -> None:
    with pytest.raises(InputError, match="is neither end of runway 09/27"):
        which_end(cell, "09", "27")


def test_bearings_between_ends() -> None:
    # Small distances on a sphere: east = cos(latitude) x difference in longitude (arithmetic).
    latitude, length = math.radians(60.0), 1000.0
    north, east = 500.0 / 6_371_009.0, 500.0 * math.sqrt(3.0) / 6_371_009.0 / math.cos(latitude)
    start, zero = np.array([latitude]), np.zeros(1)
    bearing = bearings(start, zero, start + north, zero + east, np.array([length]))
    assert math.degrees(bearing[0]) == pytest.approx(60.0, abs=0.02)  # 0.02: the meridians converge along the runway
    back = bearings(start + north, zero + east, start, zero, np.array([length]))
    assert math.degrees(back[0]) == pytest.approx(240.0, abs=0.02)


@pytest.mark.parametrize("length", [400.0, 2500.0, math.nan])
def test_no_bearing_where_coordinates_and_length_do_not_agree(length: float) -> None:
    ends = np.array([0.0]), np.array([0.0]), np.array([1000.0 / 6_371_009.0]), np.array([0.0])
    assert np.isnan(bearings(*ends, np.array([length]))[0])
    assert bearings(*ends, np.array([1000.0]))[0] == 0.0


def test_opposed_headings_across_north() -> None:
    first, second = np.radians([355.0, 5.0, 90.0, math.nan]), np.radians([170.0, 190.0, 100.0, 0.0])
    assert opposed(first, second, math.radians(10.0)).tolist() == [True, True, False, False]
