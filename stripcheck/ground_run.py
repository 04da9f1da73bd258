"""Ground runs: lift-off and braked roll as fixed sums, with slope, surface, wind and ground effect.

The acceleration at an airspeed V is  a = (T - D - mu (W - L)) / m - g sin(slope).  A roll is the integral of ground
speed over acceleration. Each integral is one Gauss-Legendre sum of fixed length, so that the same function runs on
arrays and can be written as one SUMPRODUCT: smooth in every argument, with no case split for zero wind or slope.

All functions take and give SI, floats or arrays that broadcast together, and raise nothing. Slopes are fractions,
positive uphill in the direction of movement. Wind is positive from ahead. A run whose acceleration is not positive
all along has no meaning here: ``least_*_acceleration`` tells, and the caller must not show the sum.

References
----------
[1] J. D. Anderson, Aircraft Performance and Design, section 6.7: the ground run, ground-effect factor.
[2] Actuator-disk momentum theory, see stripcheck/thrust.py.
[3] Gauss-Legendre quadrature, as in any text on numerical methods.
"""

from __future__ import annotations

import numpy as np

from stripcheck.atmosphere import G0
from stripcheck.numeric import Number
from stripcheck.thrust import disk_root, disk_speed_ratio

LEAST_ACCELERATION = 0.02 * G0  # below this [m/s2] the scatter of rolling friction decides: counts as no lift-off

# Take-off runs that count as lifting off come within 2e-7 of the exact integral where the last acceleration is a
# quarter of the mean one or more, and all of them within 2e-4: tried on random runs with winds of -15 to +40 kt.
POINTS = 11
CROWDING = 0.6  # 0: nodes as in the plain rule; 1: most towards the end, where a slow run spends its length


def _rule_towards_the_end(points: int, crowding: float) -> tuple[np.ndarray, np.ndarray]:
    """Nodes and weights on 0..1: the Gauss-Legendre rule [3] under x = t (1 + c - c t)."""
    nodes, weights = np.polynomial.legendre.leggauss(points)
    t = 0.5 * (nodes + 1.0)
    return t * (1.0 + crowding - crowding * t), 0.5 * weights * (1.0 + crowding - 2.0 * crowding * t)


NODES, WEIGHTS = _rule_towards_the_end(POINTS, CROWDING)
# the sum below needs ground speed, itself proportional to the node: the node goes into the weight
SPEED_WEIGHTS = WEIGHTS * NODES


def ground_effect_factor(wing_height: Number, span: Number) -> Number:
    """Share of the induced drag that is left near the ground [-]; wing height above ground [m], span [m].

    Source: [1], equation for phi = (16 h/b)^2 / (1 + (16 h/b)^2).

    >>> round(ground_effect_factor(5.6, 75.0), 3)
    0.588
    """
    ratio = np.square(16.0 * wing_height / span)
    return ratio / (1.0 + ratio)


def drag_coefficient(parasite: Number, lift_coefficient: Number, aspect_ratio: Number, efficiency: Number,
                     ground_effect: Number = 1.0) -> Number:  # fmt: skip
    """Drag coefficient [-]: parasite drag [-] plus induced drag of a lift coefficient [-]. Source: [1].

    ``aspect_ratio`` [-], span ``efficiency`` [-], ``ground_effect`` [-] share of the induced drag that is left.

    >>> round(drag_coefficient(0.03, 0.8, 7.0, 0.8), 5)
    0.06638
    """
    return parasite + ground_effect * np.square(lift_coefficient) / (np.pi * aspect_ratio * efficiency)


def slope_sine(slope: Number) -> Number:
    """Sine [-] of a slope given as a fraction [-] (rise over run). Source: trigonometry.

    >>> round(slope_sine(0.1), 7)
    0.0995037
    """
    return slope / np.sqrt(1.0 + np.square(slope))


def resistance(friction: Number, slope: Number) -> Number:
    """Acceleration [m/s2] lost at rest to a friction coefficient [-] and a slope [-] (negative: gained). Source: [1].

    >>> round(resistance(0.05, 0.02), 5)
    0.68643
    """
    return G0 * (friction + slope_sine(slope))


def air_acceleration(rho: Number, wing_area: Number, mass: Number, drag: Number, lift: Number,
                     friction: Number) -> Number:  # fmt: skip
    """Acceleration lost per square of airspeed [1/m] to drag, less what lift takes off the wheels. Source: [1].

    ``rho`` [kg/m3], ``wing_area`` [m2], ``mass`` [kg], ``drag`` and ``lift`` coefficients [-] in the ground run,
    ``friction`` [-]. It is negative where lift relieves the wheels more than drag holds back.

    >>> round(air_acceleration(1.225, 16.0, 1000.0, 0.06, 0.5, 0.05), 8)
    0.000343
    """
    return 0.5 * rho * wing_area / mass * (drag - friction * lift)


def speed_run(start: Number, square: Number, wind: Number, speed: Number) -> Number:
    """Length [m] of a run between rest and an airspeed, either way, where acceleration is ``start + square V^2``.

    ``start`` [m/s2] at zero airspeed, ``square`` [1/m], ``wind`` [m/s] from ahead, ``speed`` [m/s TAS] at the fast
    end. For a braked roll both describe the deceleration. Source: [1], integrated by [3]; the acceleration must be
    positive all along. A run against a wind of that speed or more is 0 long.

    >>> round(speed_run(2.0, -0.0005, 0.0, 30.0), 3)
    254.892
    """
    start, square, wind, speed = np.broadcast_arrays(start, square, wind, speed)
    gained = np.maximum(speed - wind, 0.0)
    airspeed = wind + np.multiply.outer(NODES, gained)
    return np.tensordot(SPEED_WEIGHTS, 1.0 / (start + square * np.square(airspeed)), 1) * np.square(gained)


def run_time(start: Number, square: Number, slow: Number, fast: Number) -> Number:
    """Time [s] that such a run takes between two airspeeds [m/s], either way. Arguments as for ``speed_run``.

    Source: [1], integrated by [3].

    >>> round(run_time(2.0, 0.0, 10.0, 30.0), 9)
    10.0
    """
    start, square, slow, fast = np.broadcast_arrays(start, square, slow, fast)
    gained = fast - slow
    airspeed = slow + np.multiply.outer(NODES, gained)
    return np.tensordot(WEIGHTS, 1.0 / (start + square * np.square(airspeed)), 1) * gained


def speed_run_between(start: Number, square: Number, wind: Number, slow: Number, fast: Number) -> Number:
    """As ``speed_run``, between two airspeeds [m/s], neither slower over the ground than rest.

    It is the run of one that began at the slow airspeed, and the way that the speed it already has makes meanwhile.

    >>> round(speed_run_between(2.0, 0.0, 5.0, 15.0, 35.0), 9)
    200.0
    """
    return speed_run(start, square, slow, fast) + (slow - wind) * run_time(start, square, slow, fast)


def acceleration_at(start: Number, square: Number, speed: Number) -> Number:
    """Acceleration [m/s2] of such a run at an airspeed [m/s]. Arguments as for ``speed_run``.

    >>> acceleration_at(2.0, -0.0005, 30.0)
    1.55
    """
    return start + square * np.square(speed)


def least_speed_run_acceleration(start: Number, square: Number, wind: Number, speed: Number) -> Number:
    """Least acceleration [m/s2] along such a run: it is at one of the ends, or at zero airspeed in a tailwind.

    Arguments as for ``speed_run``.

    >>> least_speed_run_acceleration(2.0, -0.0005, 0.0, 30.0)
    1.55
    """
    slow = np.square(np.maximum(wind, 0.0))
    fast = np.square(np.maximum(speed, np.abs(wind)))
    return start + np.minimum(square * slow, square * fast)


def disk_run(thrust: Number, lost: Number, square: Number, disk_speed: Number, wind: Number,
             speed: Number) -> Number:  # fmt: skip
    """Length [m] of a take-off run on the thrust of an actuator disk (constant-speed propeller).

    ``thrust`` [m/s2]: static thrust over mass; ``lost`` [m/s2] at rest to friction and slope; ``square`` [1/m] lost
    per square of airspeed; ``disk_speed`` [m/s] static induced speed; ``wind`` [m/s] from ahead; ``speed`` [m/s TAS]
    at lift-off. Source: [1] and [2], integrated by [3] over the root y of the disk, in which airspeed and thrust
    are both rational: V = w (y - 1/y^2), T = T0 / y. The acceleration must be positive all along.

    >>> round(disk_run(4.0, 0.5, 0.0005, 24.0, 0.0, 30.0), 3)
    213.02
    """
    slow = disk_root(wind / disk_speed)
    fast = disk_root(np.maximum(speed, wind) / disk_speed)
    return disk_run_between(thrust, lost, square, disk_speed, wind, slow, fast)


def disk_run_between(thrust: Number, lost: Number, square: Number, disk_speed: Number, wind: Number, slow: Number,
                     fast: Number) -> Number:  # fmt: skip
    """As ``disk_run``, given the roots [-] of the disk at the slow and the fast end of the run.

    >>> round(disk_run_between(4.0, 0.5, 0.0005, 24.0, 0.0, disk_root(0.0), disk_root(1.25)), 3)
    213.02
    """
    thrust, lost, square, disk_speed, wind, slow, fast = np.broadcast_arrays(
        thrust, lost, square, disk_speed, wind, slow, fast
    )
    root = slow + np.multiply.outer(NODES, fast - slow)
    share = 1.0 / root
    speed_ratio = root - np.square(share)
    acceleration = thrust * share - lost - square * np.square(disk_speed) * np.square(speed_ratio)
    pace = (speed_ratio - wind / disk_speed) * (0.5 + np.power(share, 3)) / acceleration
    return np.tensordot(WEIGHTS, pace, 1) * 2.0 * np.square(disk_speed) * (fast - slow)


def disk_acceleration(thrust: Number, lost: Number, square: Number, disk_speed: Number, root: Number) -> Number:
    """Acceleration [m/s2] where the disk has the root [-]. Arguments as for ``disk_run``.

    >>> round(disk_acceleration(4.0, 0.5, 0.0005, 24.0, disk_root(1.25)), 6)
    1.50772
    """
    share = 1.0 / root
    return thrust * share - lost - square * np.square(disk_speed * (root - np.square(share)))


def least_disk_acceleration(thrust: Number, lost: Number, square: Number, disk_speed: Number, slow: Number,
                            fast: Number) -> Number:  # fmt: skip
    """Acceleration [m/s2] that such a run has at least. Arguments as for ``disk_run_between``.

    Thrust is least at the fast end, and so is the rest where drag holds back more than lift relieves the wheels: then
    this is the least acceleration itself. Otherwise the rest is least at the slow end or at zero airspeed, and the
    sum of the two is on the safe side.

    >>> round(least_disk_acceleration(4.0, 0.5, 0.0005, 24.0, disk_root(0.0), disk_root(1.25)), 6)
    1.50772
    """
    slow_speed, fast_speed = disk_speed_ratio(slow), disk_speed_ratio(fast)
    least = np.square(disk_speed * np.maximum(slow_speed, 0.0))
    most = np.square(disk_speed * np.maximum(fast_speed, np.abs(slow_speed)))
    return thrust / fast - lost - np.maximum(square * least, square * most)
