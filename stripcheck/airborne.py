"""The airborne parts: lift-off to the 50 ft screen, climb, and from 50 ft to touchdown.

All functions take and give SI, floats or arrays that broadcast together, and raise nothing. Slopes are fractions,
positive uphill in the direction of movement; wind is positive from ahead.

References
----------
[1] J. D. Anderson, Aircraft Performance and Design, sections 6.7 and 6.8: airborne part of take-off, approach and
    flare of the landing.
[2] Energy method: height and speed gained over a distance are paid by the excess of thrust over drag.
"""

from __future__ import annotations

import numpy as np

from stripcheck.atmosphere import G0
from stripcheck.numeric import Number

SCREEN = 15.24  # 50 ft screen [m]
LEAST_PATH = 0.005  # gradient over the ground [-] below which no distance is given
PULL_UP_LOAD = 0.19  # load factor above 1 in the pull-up after lift-off [-], [1]
FLARE_LOAD = 0.2  # load factor above 1 in the flare [-], [1]


def mean_square_speed(one: Number, other: Number) -> Number:
    """Root of the mean square of two speeds [m/s], at which mean dynamic pressure is met. Source: arithmetic.

    >>> mean_square_speed(30.0, 40.0)
    35.35533905932738
    """
    return np.sqrt(0.5 * (np.square(one) + np.square(other)))


def lift_coefficient(mass: Number, rho: Number, wing_area: Number, tas: Number) -> Number:
    """Lift coefficient [-] in level flight of a mass [kg] at a density [kg/m3], wing area [m2], TAS [m/s]. Source: [1].

    >>> round(lift_coefficient(1000.0, 1.225, 16.0, 30.0), 4)
    1.1119
    """
    return 2.0 * mass * G0 / (rho * wing_area * np.square(tas))


def excess_gradient(thrust: Number, mass: Number, drag: Number, lift: Number) -> Number:
    """Gradient of climb [-] at a thrust [N]: thrust over weight less drag over lift coefficient. Source: [1].

    ``mass`` [kg], ``drag`` and ``lift`` coefficients [-].

    >>> round(excess_gradient(2000.0, 1000.0, 0.08, 1.0), 4)
    0.1239
    """
    return thrust / (mass * G0) - drag / lift


def drift_factor(speed: Number, wind: Number) -> Number:
    """Distance over the ground for each metre flown through the air [-], at a speed [m/s TAS] in a wind [m/s].

    Source: geometry of small angles.

    >>> drift_factor(40.0, 10.0), drift_factor(40.0, -10.0)
    (0.75, 1.25)
    """
    return np.maximum(1.0 - wind / speed, 0.0)


def rise_under(slope: Number, drift: Number) -> Number:
    """Rise of the ground [-] under each metre flown through the air; ``slope`` [-], ``drift`` factor [-].

    Ground that falls away counts as level, and a headwind's relief is not taken. Source: geometry, on the safe side.

    >>> rise_under(0.05, 1.2), rise_under(0.05, 0.8), rise_under(-0.05, 1.2)
    (0.06, 0.05, 0.0)
    """
    return np.maximum(slope, 0.0) * np.maximum(drift, 1.0)


def kinetic_head(lift_off: Number, screen: Number) -> Number:
    """Height [m] that the speed gained from lift-off to 50 ft is worth, of equivalent airspeeds [m/s]. Source: [2].

    >>> round(kinetic_head(28.0, 32.0), 3)
    12.237
    """
    return (np.square(screen) - np.square(lift_off)) / (2.0 * G0)


def pull_up_radius(speed: Number) -> Number:
    """Radius [m] of the pull-up after lift-off at an equivalent airspeed [m/s], at a load factor of 1.19. Source: [1].

    >>> round(pull_up_radius(30.0), 1)
    483.0
    """
    return np.square(speed) / (PULL_UP_LOAD * G0)


def screen_distance(kinetic: Number, radius: Number, sigma: Number, speed: Number, excess: Number, slope: Number,
                    wind: Number, technique: Number) -> Number:  # fmt: skip
    """Distance over the ground [m] from lift-off to 50 ft above the strip: a round pull-up, then a straight climb.

    ``kinetic`` head and pull-up ``radius`` [m] at sea level, which grow as the density ratio ``sigma`` [-] falls; mean
    ``speed`` [m/s TAS]; ``excess`` gradient [-], positive; ``slope`` [-]: ground that rises under the climb takes from the
    gradient, ground that falls away gives nothing; ``wind`` [m/s]; ``technique`` [-] calibrated factor on the distance. The
    steeper the climb, the longer the pull-up into it; a climb steeper than the arc reaches at 50 ft is flown no further.
    Source: [2], and [1] for the pull-up.

    >>> round(screen_distance(12.237, 483.0, 1.0, 30.07, 0.12, 0.0, 0.0, 1.0), 2)
    257.96
    """
    energy = kinetic / sigma + SCREEN
    arc = radius / sigma
    drift = drift_factor(speed, wind)
    gradient = np.minimum(excess, np.sqrt(2.0 * energy / arc))
    path = np.maximum(gradient - rise_under(slope, drift), LEAST_PATH)
    return technique * (energy + 0.5 * arc * np.square(gradient)) / path * drift


def ground_gradient(climb_gradient: Number, tas: Number, wind: Number) -> Number:
    """Gradient of climb over the ground [-] of a gradient in the air [-], TAS [m/s] and wind [m/s].

    Source: geometry of small angles.

    >>> ground_gradient(0.1, 40.0, -10.0)
    0.08
    """
    return climb_gradient * tas / np.maximum(tas - wind, 0.25 * tas)


def height_over_obstacle(available: Number, needed: Number, distance: Number, gradient: Number,
                         height: Number) -> Number:  # fmt: skip
    """Height [m] above an obstacle's top when 50 ft is reached after ``needed`` [m] of the ``available`` strip [m].

    ``distance`` [m] of the obstacle beyond the end of the strip, ``gradient`` over the ground [-], ``height`` [m] of
    the obstacle above the end of the strip. Source: geometry.

    >>> round(height_over_obstacle(600.0, 500.0, 400.0, 0.08, 30.0), 6)
    25.24
    """
    return SCREEN + gradient * (available + distance - needed) - height


def approach_gradient(drag: Number, lift: Number, shallowest: Number, steepest: Number) -> Number:
    """Gradient of descent [-] at idle thrust, drag over lift coefficient, kept within what a pilot would fly.

    ``drag`` and ``lift`` coefficients [-]; ``shallowest`` and ``steepest`` [-]. Source: [1]; idle thrust taken as
    nil; the two bounds come from the aircraft card.

    >>> approach_gradient(0.12, 1.5, 0.0524, 0.07)
    0.07
    """
    return np.minimum(np.maximum(drag / lift, shallowest), steepest)


def threshold_shift(height: Number, distance: Number, gradient: Number) -> Number:
    """Length of strip [m] lost to an obstacle on the approach: the 50 ft point moves until the path clears its top
    by the same 50 ft.

    ``height`` [m] above and ``distance`` [m] before the threshold, approach ``gradient`` [-]. Source: geometry.

    >>> round(threshold_shift(20.0, 200.0, 0.06), 6)
    133.333333
    """
    return np.maximum(height / gradient - distance, 0.0)


def flare_radius(speed: Number) -> Number:
    """Radius [m] of the flare at a speed [m/s], at a load factor of 1.2. Source: [1].

    >>> round(flare_radius(61.66), 1)
    1938.5
    """
    return np.square(speed) / (FLARE_LOAD * G0)


def flare_height(radius: Number, gradient: Number) -> Number:
    """Height [m] at which a flare of a radius [m] begins from a path of a gradient [-] (tangent). Source: [1].

    >>> round(flare_height(1938.5, np.tan(np.radians(3.0))), 3)
    2.657
    """
    return radius * (1.0 - 1.0 / np.sqrt(1.0 + np.square(gradient)))


def descent_path(gradient: Number, slope: Number, wind: Number, slowest: Number) -> Number:
    """Gradient of descent [-] towards ground of a slope [-], for each metre flown through the air.

    ``gradient`` of descent through the air [-]; ``slope`` [-]: ground that falls away takes from the gradient, and the
    more of it a tailwind carries past; ground that rises and a headwind give nothing. ``wind`` [m/s]; ``slowest``
    [m/s]: the slowest touchdown, against which a tailwind is weighed so that flying faster never helps.
    Source: geometry, on the safe side.

    >>> round(descent_path(0.08, -0.03, -5.0, 20.0), 6)
    0.0425
    """
    return gradient - rise_under(-slope, drift_factor(slowest, wind))


def landing_air_distance(approach: Number, touchdown: Number, path: Number, wind: Number,
                         technique: Number) -> Number:  # fmt: skip
    """Distance over the ground [m] from 50 ft above the threshold to touchdown: straight path, then a round flare.

    ``approach`` and ``touchdown`` speeds [m/s TAS]; ``path`` [-]: ``descent_path``, positive; ``wind`` [m/s];
    ``technique`` [-] calibrated factor on the distance. Source: [1]. The straight part ends where the flare begins, and
    is nil when the flare would begin above 50 ft.

    >>> round(landing_air_distance(35.0, 31.0, 0.0524, 0.0, 1.0), 2)
    305.38
    """
    speed = 0.5 * (approach + touchdown)
    drift = drift_factor(speed, wind)
    radius = flare_radius(speed)
    straight = np.maximum(SCREEN - flare_height(radius, path), 0.0) / path
    flare = radius * path / np.sqrt(1.0 + np.square(path))
    return technique * (straight + flare) * drift


def free_roll(touchdown: Number, wind: Number, seconds: Number) -> Number:
    """Distance [m] rolled before the brakes bite: touchdown speed [m/s TAS] less wind [m/s], times seconds [s].

    Source: [1].

    >>> free_roll(30.0, 5.0, 2.0)
    50.0
    """
    return np.maximum(touchdown - wind, 0.0) * seconds
