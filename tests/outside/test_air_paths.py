"""Airborne parts against plain geometry: a straight path through moving air over sloping ground.

Geometry, no source: in a wind the aeroplane flies its gradient through the air while the air carries it over the
ground. Height above the ground is height flown less the rise of the ground under the distance covered.
"""

from __future__ import annotations

import math

import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from stripcheck import airborne, assess
from tests.aircraft import trial_heron

G, SCREEN = 9.80665, 15.24
WINDS = [-7.0, -2.0, 0.0, 4.0, 12.0]


def by_model(excess: float, slope: float, wind: float) -> float:
    """From 28 to 32 m/s at sea level."""
    mean = math.sqrt(0.5 * (28.0**2 + 32.0**2))
    head, radius = airborne.kinetic_head(28.0, 32.0), airborne.pull_up_radius(mean)
    return float(airborne.screen_distance(head, radius, 1.0, mean, excess, slope, wind, 1.0))


@pytest.mark.parametrize("wind", WINDS)
@pytest.mark.parametrize("slope", [0.0, 0.02, 0.05])
@pytest.mark.parametrize("excess", [0.07, 0.12])
def test_screen_distance(excess: float, slope: float, wind: float) -> None:
    """Energy method: energy height is gained at excess x airspeed; 50 ft above ground that rises under the climb.

    At a steady mean airspeed, so that the moment is the root of one equation. In a headwind the model may be longer,
    never shorter: it does not credit that the aeroplane meets less of the rising ground.
    """
    slow, fast = 28.0, 32.0
    mean = math.sqrt(0.5 * (slow**2 + fast**2))
    speed_height = (fast**2 - slow**2) / (2.0 * G)
    radius = mean**2 / (0.19 * G)  # of the pull-up: the path steepens evenly until the excess is used up

    def gained(flown: float) -> float:
        bent = min(flown, excess * radius)
        return bent**2 / (2.0 * radius) + excess * (flown - bent)

    def below_screen(seconds: float) -> float:
        return gained(mean * seconds) - speed_height - slope * (mean - wind) * seconds - SCREEN

    truth = (mean - wind) * brentq(below_screen, 0.0, 1e5, xtol=1e-12)
    model = by_model(excess, slope, wind)
    if wind > 0.0 and slope > 0.0:
        assert truth <= model <= truth * 2.2
    else:
        assert model == pytest.approx(truth, rel=1e-9)


def test_ground_that_falls_away_gives_a_climb_nothing() -> None:
    level, downhill = (by_model(0.08, slope, 0.0) for slope in (0.0, -0.06))
    assert downhill == level


@pytest.mark.parametrize("tailwind", [0.0, 3.0, 6.0, 9.0])
@pytest.mark.parametrize("slope", [0.0, -1.0, -2.0, -3.0])
def test_landing_over_ground_that_falls_away(slope: float, tailwind: float) -> None:
    """From 50 ft to the ground on the approach gradient, through an assessment with all of the wind counted.

    The straight path meets the falling ground no sooner than geometry says; the flare makes the air part longer
    still. The calibrated factor, which both have, is taken out.
    """
    strip = {"surface": "paved", "elevation_field": 0.0, "slope_given": slope, "lda": 3000.0, "heading": 0.0,
             "own_wind_from": 180.0, "own_wind_speed": tailwind}  # fmt: skip
    card = trial_heron()
    result = assess(strip, card, {"temperature": 15}, "manual-only")
    speed = 0.5 * (result.si("approach_tas")[0] + result.si("touchdown_tas")[0])
    gradient, wind = result.si("approach_path")[0], -tailwind * 1852.0 / 3600.0

    def above_ground(seconds: float) -> float:
        return SCREEN - gradient * speed * seconds - slope / 100.0 * (speed - wind) * seconds

    straight = (speed - wind) * brentq(above_ground, 0.0, 1e5, xtol=1e-12)
    model = result.si("landing_air")[0] / card.fit.values["landing_technique"]
    assert straight < model < 2.0 * straight


def test_flare_by_its_equation_of_motion() -> None:
    """A flare at a load factor of 1.2 from a 3 deg path, integrated at a steady speed: radius and height, 0.2 %."""
    speed, angle = 60.0, math.radians(3.0)

    def motion(_: float, state: list[float]) -> list[float]:
        path, _, _ = state  # angle below the horizon
        turning = 0.2 * G / speed  # 1.2 g of lift less the weight, small angles
        return [-turning, speed * math.cos(path), -speed * math.sin(path)]

    level = angle / (0.2 * G / speed)
    end = solve_ivp(motion, (0.0, level), [angle, 0.0, 0.0], rtol=1e-11, atol=1e-12).y[:, -1]
    radius = airborne.flare_radius(speed)
    assert airborne.flare_height(radius, math.tan(angle)) == pytest.approx(-end[2], rel=2e-3)
    assert radius * math.sin(angle) == pytest.approx(end[1], rel=2e-3)


@pytest.mark.parametrize("wind", [-6.0, 0.0, 8.0])
def test_gradient_over_the_ground(wind: float) -> None:
    """Height over distance of one minute of climb in a wind: exact."""
    assert airborne.ground_gradient(0.08, 35.0, wind) == pytest.approx(0.08 * 35.0 * 60.0 / ((35.0 - wind) * 60.0))


def test_obstacle_ahead() -> None:
    """50 ft at 500 m, then 8 % for 500 m: 15.24 + 40 m, over a 30 m obstacle at 1,000 m."""
    assert airborne.height_over_obstacle(600.0, 500.0, 400.0, 0.08, 30.0) == pytest.approx(15.24 + 40.0 - 30.0)


def test_obstacle_behind() -> None:
    """A 6 % path that passes 50 ft above a 20 m top 200 m before the threshold is at 50 ft 133.3 m beyond it."""
    assert airborne.threshold_shift(20.0, 200.0, 0.06) == pytest.approx(20.0 / 0.06 - 200.0)
    assert airborne.threshold_shift(10.0, 200.0, 0.06) == 0.0
