"""Speeds: stall by mass, flap and bank, and the speeds that follow from it.

All functions take and give SI, floats or arrays that broadcast together, and raise nothing. Speeds are equivalent
airspeeds (EAS) unless said otherwise; at the speeds of a short strip EAS and CAS differ by less than 0.1 kt.

References
----------
[1] J. D. Anderson, Aircraft Performance and Design, chapters 5 and 6: lift equation, stall speed, level turn.
[2] ISO 2533 gas relations; the compressible pitot-static relation of the airspeed indicator (subsonic).
"""

from __future__ import annotations

import numpy as np

from stripcheck.atmosphere import G0, P0, RHO0
from stripcheck.numeric import Number

A0 = (1.4 * P0 / RHO0) ** 0.5  # speed of sound at sea level in the standard atmosphere [m/s], 340.294


def load_factor(bank: Number) -> Number:
    """Load factor [-] in a level turn at a bank angle [rad]. Source: [1].

    >>> round(load_factor(np.radians(60.0)), 9)
    2.0
    """
    return 1.0 / np.cos(bank)


def stall_speed(reference_speed: Number, mass: Number, reference_mass: Number, load: Number = 1.0) -> Number:
    """Stall speed [m/s] at a mass [kg] and load factor [-] from the one known at a reference mass.

    ``reference_speed`` [m/s] at ``reference_mass`` [kg] and load factor 1. Source: [1].

    >>> round(stall_speed(25.0, 900.0, 1000.0), 4)
    23.7171
    """
    return reference_speed * np.sqrt(load * mass / reference_mass)


def greatest_lift_coefficient(stall: Number, mass: Number, wing_area: Number) -> Number:
    """Greatest lift coefficient [-] from a stall speed [m/s EAS] at a mass [kg] on a wing area [m2]. Source: [1].

    >>> round(greatest_lift_coefficient(25.0, 1000.0, 16.0), 4)
    1.6011
    """
    return 2.0 * mass * G0 / (RHO0 * wing_area * np.square(stall))


def stall_speed_of_lift(lift_coefficient: Number, mass: Number, wing_area: Number) -> Number:
    """Stall speed [m/s EAS] of a greatest lift coefficient [-] at a mass [kg] on a wing area [m2]. Source: [1].

    >>> round(stall_speed_of_lift(1.6011, 1000.0, 16.0), 3)
    25.0
    """
    return np.sqrt(2.0 * mass * G0 / (RHO0 * wing_area * lift_coefficient))


def true_airspeed(eas: Number, sigma: Number) -> Number:
    """True airspeed [m/s] from equivalent airspeed [m/s] and density ratio [-]. Source: [1].

    >>> true_airspeed(30.0, 0.81)
    33.333333333333336
    """
    return eas / np.sqrt(sigma)


def equivalent_airspeed(tas: Number, sigma: Number) -> Number:
    """Equivalent airspeed [m/s] from true airspeed [m/s] and density ratio [-]. Source: [1].

    >>> round(equivalent_airspeed(33.333333333333336, 0.81), 9)
    30.0
    """
    return tas * np.sqrt(sigma)


def equivalent_from_calibrated(cas: Number, pressure: Number) -> Number:
    """Equivalent airspeed [m/s] from calibrated airspeed [m/s] at an air pressure [Pa]. Source: [2].

    >>> round(equivalent_from_calibrated(100.0, 70000.0), 3)
    99.535
    """
    impact = P0 * ((1.0 + 0.2 * np.square(cas / A0)) ** 3.5 - 1.0)
    return A0 * np.sqrt(5.0 * pressure / P0 * ((impact / pressure + 1.0) ** (2.0 / 7.0) - 1.0))


def calibrated_from_equivalent(eas: Number, pressure: Number) -> Number:
    """Calibrated airspeed [m/s] from equivalent airspeed [m/s] at an air pressure [Pa]. Source: [2].

    >>> round(calibrated_from_equivalent(equivalent_from_calibrated(100.0, 70000.0), 70000.0), 9)
    100.0
    """
    impact = pressure * ((1.0 + np.square(eas / A0) * P0 / (5.0 * pressure)) ** 3.5 - 1.0)
    return A0 * np.sqrt(5.0 * ((impact / P0 + 1.0) ** (2.0 / 7.0) - 1.0))


def headwind(wind_speed: Number, wind_from: Number, heading: Number) -> Number:
    """Headwind component [m/s] on a heading [rad] of a wind [m/s] from a direction [rad]; a tailwind is negative.

    Source: trigonometry.

    >>> round(headwind(10.0, np.radians(330.0), np.radians(30.0)), 9)
    5.0
    """
    return wind_speed * np.cos(wind_from - heading)


def crosswind(wind_speed: Number, wind_from: Number, heading: Number) -> Number:
    """Crosswind component [m/s], without its side, on a heading [rad] of a wind [m/s] from a direction [rad].

    Source: trigonometry.

    >>> round(crosswind(10.0, np.radians(330.0), np.radians(0.0)), 9)
    5.0
    """
    return wind_speed * np.abs(np.sin(wind_from - heading))


def credited_headwind(head: Number, headwind_credit: Number, tailwind_count: Number) -> Number:
    """Headwind [m/s] that a rule lets count: a share of a headwind, a multiple of a tailwind (negative ``head``).

    ``head`` [m/s], ``headwind_credit`` and ``tailwind_count`` [-]. Source: EU Part-CAT CAT.POL.A.305 and 330
    (at most 50 % of a headwind, at least 150 % of a tailwind), as a usual rule; the shares come from the rule set.

    >>> credited_headwind(10.0, 0.5, 1.5), credited_headwind(-10.0, 0.5, 1.5)
    (5.0, -15.0)
    """
    return headwind_credit * np.maximum(head, 0.0) + tailwind_count * np.minimum(head, 0.0)
