"""Airborne parts: limits and signs. Geometry, textbook examples and motion are in tests/outside."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest

from stripcheck import airborne

G = 9.80665


def test_mean_square_speed() -> None:
    assert airborne.mean_square_speed(30.0, 30.0) == pytest.approx(30.0, rel=1e-15)
    assert airborne.mean_square_speed(3.0, 4.0) ** 2 == pytest.approx(12.5, rel=1e-14)


def test_lift_coefficient_carries_the_weight() -> None:
    lift = airborne.lift_coefficient(900.0, 1.1, 15.0, 35.0)
    assert 0.5 * 1.1 * 35.0**2 * 15.0 * lift == pytest.approx(900.0 * G, rel=1e-14)


def test_excess_gradient() -> None:
    """2,000 N on 1,000 kg less drag over lift of 0.1: by hand."""
    assert airborne.excess_gradient(2000.0, 1000.0, 0.1, 1.0) == pytest.approx(2000.0 / (1000.0 * G) - 0.1, rel=1e-14)


def test_screen_distance_is_an_arc_and_a_straight_climb() -> None:
    """Height over gradient, and half of radius times gradient for the arc; a steep climb is the arc to 50 ft alone."""
    radius = airborne.pull_up_radius(30.0)
    assert airborne.kinetic_head(30.0, 30.0) == 0.0 and radius == pytest.approx(900.0 / (0.19 * 9.80665), rel=1e-12)

    def distance(excess: float, slope: float = 0.0, wind: float = 0.0, technique: float = 1.0) -> float:
        return float(airborne.screen_distance(0.0, radius, 1.0, 30.0, excess, slope, wind, technique))

    assert distance(0.1) == pytest.approx(152.4 + 0.05 * radius, rel=1e-12)
    assert distance(0.1, technique=0.7) == pytest.approx(0.7 * distance(0.1), rel=1e-12)
    assert distance(0.1, slope=0.02) == pytest.approx((15.24 + 0.005 * radius) / 0.08, rel=1e-12)
    assert distance(0.1, wind=40.0) == 0.0
    arc = math.sqrt(2.0 * radius * 15.24)  # chord of a flat arc that rises by 50 ft
    assert distance(0.9) == pytest.approx(arc, rel=1e-12)
    steps = [distance(excess) for excess in (0.05, 0.1, 0.2, 0.25, 0.3, 0.5)]
    assert all(more >= less for more, less in itertools.pairwise(steps))


def test_gradient_over_the_ground() -> None:
    assert airborne.ground_gradient(0.1, 40.0, 0.0) == pytest.approx(0.1, rel=1e-14)
    assert airborne.ground_gradient(0.1, 40.0, 8.0) == pytest.approx(0.125, rel=1e-14)
    # however strong the wind, no more than four times the gradient
    assert airborne.ground_gradient(0.1, 40.0, 60.0) == pytest.approx(0.4, rel=1e-14)


def test_approach_gradient_is_kept_within_the_card() -> None:
    gradients = airborne.approach_gradient(np.array([0.04, 0.07, 0.2]), 1.0, 0.052, 0.08)
    np.testing.assert_allclose(gradients, [0.052, 0.07, 0.08])


def test_landing_air_distance() -> None:
    """Straight part and flare; where the flare begins above 50 ft there is no straight part."""
    whole = airborne.landing_air_distance(30.0, 30.0, 0.06, 0.0, 1.0)
    radius = airborne.flare_radius(30.0)
    straight = (15.24 - airborne.flare_height(radius, 0.06)) / 0.06
    assert whole == pytest.approx(straight + radius * np.sin(np.arctan(0.06)), rel=1e-12)
    steep = airborne.landing_air_distance(70.0, 70.0, 0.2, 0.0, 1.0)
    assert steep == pytest.approx(airborne.flare_radius(70.0) * np.sin(np.arctan(0.2)), rel=1e-12)
    assert airborne.landing_air_distance(30.0, 30.0, 0.06, 31.0, 1.0) == 0.0


def test_threshold_shift() -> None:
    shifts = airborne.threshold_shift(np.array([0.0, 12.0, 20.0]), 200.0, 0.06)
    np.testing.assert_allclose(shifts, [0.0, 0.0, 400.0 / 3.0], rtol=1e-12)


def test_free_roll() -> None:
    assert airborne.free_roll(30.0, -5.0, 2.0) == 70.0
    assert airborne.free_roll(30.0, 35.0, 2.0) == 0.0
