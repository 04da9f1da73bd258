"""Speeds: stall by mass, flap and bank, airspeeds, wind components. Textbook figures are in tests/outside."""

from __future__ import annotations

import math

import numpy as np
import pytest

from stripcheck import speeds

KNOT = 1852.0 / 3600.0


def test_stall_speed_goes_with_the_root_of_mass_and_load() -> None:
    assert speeds.stall_speed(25.0, 810.0, 1000.0) == pytest.approx(25.0 * 0.9, rel=1e-14)
    assert speeds.stall_speed(25.0, 1000.0, 1000.0, 1.44) == pytest.approx(25.0 * 1.2, rel=1e-14)


def test_lift_coefficient_and_stall_speed_are_inverse() -> None:
    lift = speeds.greatest_lift_coefficient(25.0, 1000.0, 16.0)
    assert speeds.stall_speed_of_lift(lift, 1000.0, 16.0) == pytest.approx(25.0, rel=1e-14)
    assert speeds.stall_speed_of_lift(lift, 1210.0, 16.0) == pytest.approx(25.0 * 1.1, rel=1e-14)


def test_true_and_equivalent_airspeed() -> None:
    assert speeds.true_airspeed(30.0, 0.64) == pytest.approx(37.5, rel=1e-14)
    assert speeds.equivalent_airspeed(37.5, 0.64) == pytest.approx(30.0, rel=1e-14)


@pytest.mark.parametrize("pressure", [60000.0, 80000.0, 101325.0])
def test_calibrated_and_equivalent_differ_little_on_a_short_strip(pressure: float) -> None:
    """What the module says: below 70 kt and 14,000 ft they differ by less than 0.1 kt; at sea level not at all."""
    equivalent = speeds.equivalent_from_calibrated(70.0 * KNOT, pressure)
    assert abs(equivalent - 70.0 * KNOT) < 0.1 * KNOT
    assert speeds.calibrated_from_equivalent(equivalent, pressure) == pytest.approx(70.0 * KNOT, rel=1e-9)
    at_sea_level = speeds.equivalent_from_calibrated(70.0 * KNOT, 101325.0)
    assert at_sea_level == pytest.approx(70.0 * KNOT, rel=1e-12)


@pytest.mark.parametrize(
    ("wind_from", "heading", "head", "cross"),
    [
        (90.0, 90.0, 10.0, 0.0),
        (270.0, 90.0, -10.0, 0.0),
        (0.0, 90.0, 0.0, 10.0),
        (180.0, 90.0, 0.0, 10.0),  # a crosswind has no side here
        (350.0, 20.0, 10.0 * math.cos(math.radians(30.0)), 5.0),  # across north
    ],
)
def test_wind_components(wind_from: float, heading: float, head: float, cross: float) -> None:
    angles = math.radians(wind_from), math.radians(heading)
    assert speeds.headwind(10.0, *angles) == pytest.approx(head, abs=1e-12)
    assert speeds.crosswind(10.0, *angles) == pytest.approx(cross, abs=1e-12)


def test_components_make_up_the_wind() -> None:
    bearings = np.radians(np.arange(0.0, 360.0, 7.0))
    head, cross = speeds.headwind(12.0, bearings, 0.4), speeds.crosswind(12.0, bearings, 0.4)
    np.testing.assert_allclose(np.hypot(head, cross), 12.0, rtol=1e-14)


def test_credited_headwind() -> None:
    """CAT.POL.A.305 and 330 (read): at most half a headwind, at least one and a half times a tailwind."""
    heads = np.array([-8.0, -0.0, 0.0, 8.0])
    np.testing.assert_allclose(speeds.credited_headwind(heads, 0.5, 1.5), [-12.0, 0.0, 0.0, 4.0])
    np.testing.assert_allclose(speeds.credited_headwind(heads, 1.0, 1.0), heads)
