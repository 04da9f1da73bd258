"""Distances between points of the Earth, and which points lie close together."""

from __future__ import annotations

import math
from itertools import combinations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from stripcheck.register.positions import CROWD, cartesian, close_pairs, distance


def apart(one: tuple[float, float], other: tuple[float, float]) -> float:
    return float(distance(*(cartesian(*np.radians(np.array(point))) for point in (one, other))))


def test_a_long_line_of_a_survey() -> None:
    """Flinders Peak to Buninyong, 54,972.271 m. Source: the published worked example for Vincenty's formulae in the
    technical manual of the Geocentric Datum of Australia (from memory; its ellipsoid differs by 0.1 mm)."""
    flinders = -(37 + 57 / 60 + 3.72030 / 3600), 144 + 25 / 60 + 29.52440 / 3600
    buninyong = -(37 + 39 / 60 + 10.15610 / 3600), 143 + 55 / 60 + 35.38390 / 3600
    assert apart(flinders, buninyong) == pytest.approx(54_972.271, abs=0.002)


@pytest.mark.parametrize(
    ("one", "other", "metres"),
    [
        ((0.0, 0.0), (0.0, 1.0), 111_319.491),  # arithmetic: a degree of the equator
        ((0.0, 0.0), (1.0, 0.0), 110_574.389),  # first degree of the meridian (from memory: WGS 84 tables)
        ((89.0, 0.0), (90.0, 0.0), 111_693.865),  # last degree of the meridian (from memory: WGS 84 tables)
        ((10.0, 179.9999), (10.0, -179.9999), 0.0002 * 109_639.36),  # a degree of longitude at 10 degrees; the date line
    ],
)
def test_degrees(one: tuple[float, float], other: tuple[float, float], metres: float) -> None:
    assert apart(one, other) == pytest.approx(metres, rel=2e-7)  # the arc over a chord of 111 km is good to 1.3e-7


def test_what_is_missing_stays_missing() -> None:
    assert math.isnan(apart((math.nan, 1.0), (0.0, 0.0)))


@given(st.lists(st.tuples(*[st.floats(-3000.0, 3000.0)] * 3), max_size=CROWD), st.floats(1.0, 3000.0))
def test_close_pairs_are_all_that_there_are(points: list[tuple[float, float, float]], radius: float) -> None:
    array = np.array(points, dtype=float).reshape(-1, 3)
    expected = {(i, j) for i, j in combinations(range(len(points)), 2) if math.dist(points[i], points[j]) < radius}
    near = {(i, j) for i, j in combinations(range(len(points)), 2) if abs(math.dist(points[i], points[j]) - radius) < 1e-9}
    found = list(close_pairs(array, radius))
    assert len(found) == len(set(found))
    assert set(found) - near == expected - near


def test_a_list_with_one_place_everywhere_takes_no_longer() -> None:
    assert list(close_pairs(np.zeros((5000, 3)), 1.0)) == [(i, i + 1) for i in range(4999)]
    assert list(close_pairs(np.full((10, 3), np.nan), 1.0)) == []
