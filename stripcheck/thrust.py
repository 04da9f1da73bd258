"""Power and thrust, by kind of engine and propeller.

All functions take and give SI, floats or arrays that broadcast together, and raise nothing.

References
----------
[1] J. T. Lowry, Performance of Light Aircraft (the "bootstrap" method): linearised propeller polar and the power
    drop-off factor of a fixed-pitch propeller.
[2] Actuator-disk momentum theory, as in any text on propellers (Rankine and Froude).
[3] R. F. Gagg and E. V. Farrar, Altitude Performance of Aircraft Engines, SAE Transactions 29, 1934 (the two
    constants from memory).
[4] Flight-test practice: power of a piston engine at one manifold pressure goes with the root of the intake temperature
    (FAA AC 23-8 series, from memory).
"""

from __future__ import annotations

import numpy as np

from stripcheck.numeric import Number

DROP_OFF = 0.12  # share of full-throttle torque that goes in friction and pumping, independent of density [1]


def drop_off_factor(sigma: Number) -> Number:
    """Torque of a normally aspirated engine [-], relative to sea level, at a density ratio [-]. Source: [1].

    >>> drop_off_factor(1.0)
    1.0
    """
    return (sigma - DROP_OFF) / (1.0 - DROP_OFF)


def fixed_pitch_thrust(static: Number, slope: Number, sigma: Number, rho: Number, tas: Number) -> Number:
    """Thrust [N] of a fixed-pitch propeller: T = a Phi(sigma) + b rho V^2, the linearised propeller polar.

    ``static`` a [N]: static thrust at sea level; ``slope`` b [m2], negative; ``sigma`` [-]; ``rho`` [kg/m3];
    ``tas`` [m/s]. Source: [1].

    >>> round(fixed_pitch_thrust(2400.0, -0.5, 1.0, 1.225, 30.0), 2)
    1848.75
    """
    return static * drop_off_factor(sigma) + slope * rho * np.square(tas)


def aspirated_power(rated: Number, sigma: Number) -> Number:
    """Power [W] of a normally aspirated piston engine at a density ratio [-]; ``rated`` [W] at sea level. Source: [3].

    >>> round(aspirated_power(100000.0, 0.8), 1)
    77360.0
    """
    return rated * (1.132 * sigma - 0.132)


def heat_factor(temperature: Number, standard: Number) -> Number:
    """Power of a piston engine [-] relative to standard air of the same pressure; temperatures [K]. Source: [4].

    >>> round(heat_factor(318.15, 288.15), 4)
    0.9517
    """
    return np.sqrt(standard / temperature)


def engine_sigma(sigma: Number, heat: Number) -> Number:
    """Density ratio [-] of standard air in which a piston engine has the power that it has in warmer or colder air.

    ``sigma`` [-] of the air, ``heat`` [-]: ``heat_factor``. Pressure counts in full, temperature by its root [4]: at one
    and the same density an engine loses less to heat than to height. Friction and pumping stay as they are.

    >>> round(engine_sigma(0.9, 0.97), 4), engine_sigma(0.9, 1.0)
    (0.9314, 0.9)
    """
    return DROP_OFF * (1.0 - heat) + sigma / heat


def turbo_normalised_power(rated: Number, sigma: Number, critical_sigma: Number, heat: Number) -> Number:
    """Power [W] of a turbo-normalised piston engine: rated [W] up to its critical altitude, then as [3] from there.

    ``sigma`` [-]: ``engine_sigma``; ``critical_sigma`` [-] the one at the critical altitude; ``heat`` [-]: ``heat_factor``,
    which takes from the rated power in warm air [4] and adds nothing in cold air.

    >>> turbo_normalised_power(100000.0, 0.8, 0.6, 1.02)
    100000.0
    """
    lapse = (1.132 * sigma - 0.132) / (1.132 * critical_sigma - 0.132)
    return rated * np.minimum(np.minimum(1.0, heat), lapse)


def flat_rated_power(rated: Number, hot_sigma: Number, limit: Number) -> Number:
    """Power [W] of a flat-rated turboprop: rated [W] until its turbine gets too hot, then falling.

    ``hot_sigma`` [-]: density ratio over temperature ratio, to which the power at one turbine temperature is nearly
    proportional; ``limit`` [-] is the one where the flat rating ends. Common practice, no source: some 0.7 % of power for
    each kelvin.

    >>> flat_rated_power(500000.0, 0.9, 0.8), flat_rated_power(500000.0, 0.4, 0.8)
    (500000.0, 250000.0)
    """
    return rated * np.minimum(1.0, hot_sigma / limit)


def static_disk_thrust(power: Number, rho: Number, disk_area: Number) -> Number:
    """Static thrust [N] of an actuator disk [m2] given useful power [W] in air of a density [kg/m3]. Source: [2].

    >>> round(static_disk_thrust(100000.0, 1.225, 3.0), 1)
    4188.9
    """
    return np.cbrt(2.0 * rho * disk_area * np.square(power))


def disk_speed(power: Number, rho: Number, disk_area: Number) -> Number:
    """Static induced speed [m/s] of an actuator disk [m2] given useful power [W] in air of a density [kg/m3].

    Source: [2].

    >>> round(disk_speed(100000.0, 1.225, 3.0), 3)
    23.873
    """
    return np.cbrt(power / (2.0 * rho * disk_area))


def disk_root(speed_ratio: Number) -> Number:
    """Root y [-] of y^3 - x y^2 - 1 = 0 for x [-] = airspeed over static induced speed, x above -1.8.

    Thrust at that airspeed is the static thrust over y. Closed form of the one real root, without branches.
    Source: [2].

    >>> round(disk_root(0.0), 9), round(disk_root(1.5), 6)
    (1.0, 1.806444)
    """
    cubed = np.power(speed_ratio, 3) / 27.0
    root = np.cbrt(cubed + 0.5 + np.sqrt(cubed + 0.25))
    return speed_ratio / 3.0 + root + np.square(speed_ratio) / (9.0 * root)


def disk_speed_ratio(root: Number) -> Number:
    """Airspeed over static induced speed x [-] of a root y [-]: the inverse of ``disk_root``, x = y - 1/y^2.

    Source: [2].

    >>> round(disk_speed_ratio(disk_root(1.5)), 9)
    1.5
    """
    return root - 1.0 / np.square(root)
