"""Fuel and masses of a trip, leg by leg, as a chain of steps: once as arrays, once as the cells of the page.

In the units of a navigation log: nautical miles, knots, minutes, litres, kilograms. Each function tells "not known" (NaN)
where something that it needs is not known.
"""

from __future__ import annotations

import numpy as np

from stripcheck import links
from stripcheck.books.trip_plan import FIRST_HAS_NOT, GENERAL, OF_STOPS, STOPS
from stripcheck.chain import Chain, Input, Step
from stripcheck.numeric import Number
from stripcheck.register.runway_ends import EARTH_RADIUS

LEAST_SPEED = 20.0  # kt over the ground: slower, a leg has no time worth telling. Common practice, no source.
SOURCE = "Navigation log"


def great_circle(latitude: Number, longitude: Number, to_latitude: Number, to_longitude: Number) -> Number:
    """Distance [nm] between two points [rad] on a sphere: within 0.6 % of the one on the ellipsoid.

    Source: haversine formula, any text on navigation.

    >>> round(float(great_circle(0.0, 0.0, 0.0, np.radians(1.0))), 2)
    60.04
    """
    known = np.isfinite(latitude) & np.isfinite(longitude) & np.isfinite(to_latitude) & np.isfinite(to_longitude)
    north, east = np.sin(0.5 * (to_latitude - latitude)), np.sin(0.5 * (to_longitude - longitude))
    chord = np.square(north) + np.cos(latitude) * np.cos(to_latitude) * np.square(east)
    return np.where(known, 2.0 * EARTH_RADIUS / 1852.0 * np.arcsin(np.minimum(np.sqrt(chord), 1.0)), np.nan)


def minutes_of(typed: Number, distance: Number, cruise: Number, tailwind: Number) -> Number:
    """Time of a leg [min]: typed, else from distance [nm], speed in still air [kt] and the wind along [kt, tail positive].

    >>> float(minutes_of(np.nan, 35.0, 105.0, 0.0))
    20.0
    """
    known = np.isfinite(distance) & np.isfinite(cruise) & np.isfinite(tailwind)
    flown = np.where(cruise + tailwind >= LEAST_SPEED, 60.0 * distance / (cruise + tailwind), np.nan)
    return np.where(np.isfinite(typed), typed, np.where(known, flown, np.nan))


def burn_of(minutes: Number, flow: Number, leg_fuel: Number) -> Number:
    """Fuel of a leg [l]: cruise at a flow [l/h] for so many minutes, and taxi and circuit [l].

    >>> float(burn_of(20.0, 36.0, 4.0))
    16.0
    """
    known = np.isfinite(minutes) & np.isfinite(flow) & np.isfinite(leg_fuel)
    return np.where(known, flow * minutes / 60.0 + leg_fuel, np.nan)


def difference_of(one: Number, other: Number) -> Number:
    """One less the other, where both are known.

    >>> float(difference_of(50.0, 16.0))
    34.0
    """
    return np.where(np.isfinite(one) & np.isfinite(other), one - other, np.nan)


def not_negative(value: Number) -> Number:
    """The value, not known where it is negative: a tank that would be empty has no mass to reckon with.

    >>> float(not_negative(-1.0))
    nan
    """
    return np.where(np.isfinite(value), np.where(value >= 0.0, value, np.nan), np.nan)


def sum_of(one: Number, other: Number) -> Number:
    """The sum, where both are known.

    >>> float(sum_of(820.0, 150.0))
    970.0
    """
    return np.where(np.isfinite(one) & np.isfinite(other), one + other, np.nan)


def mass_of(zero_fuel: Number, fuel: Number, density: Number) -> Number:
    """Mass [kg] of a zero-fuel mass [kg] with fuel [l] of a density [kg/l].

    >>> round(float(mass_of(970.0, 100.0, 0.72)), 9)
    1042.0
    """
    known = np.isfinite(zero_fuel) & np.isfinite(fuel) & np.isfinite(density)
    return np.where(known, zero_fuel + fuel * density, np.nan)


def _both(one: Number, other: Number) -> Number:
    return one & other


def _itself(one: Number) -> Number:
    return one


def legs_chain() -> Chain:
    """The chain of a whole trip; the keys of what belongs to a stop end in its number, as in ``mass_landing_3``."""
    inputs = [Input(item.key, item.label, "", "day") for item in GENERAL]
    steps: list[Step] = []
    for stop in range(1, STOPS + 1):
        inputs += _inputs_of(stop)
        steps += _steps_of(stop)
    for stop in range(1, STOPS + 1):
        steps += _leaving(stop)
    return Chain(tuple(inputs), tuple(steps))


def _inputs_of(stop: int) -> list[Input]:
    items = [item for item in OF_STOPS if stop > 1 or item.key not in FIRST_HAS_NOT]
    made = [Input(f"{item.key}_{stop}", item.label, "", "day") for item in items]
    made += [Input(f"{key}_{stop}", key.capitalize(), "°", "strip") for key in ("latitude", "longitude")]
    return [*made, Input(f"runway_{stop}", "Runway", "", "day", kind="fault")]


def _step(key: str, label: str, function: object, inputs: tuple[str, ...], guard: str, truth: bool = False) -> Step:
    return Step(key, "", "", label, SOURCE, function, inputs, guard, truth=truth)  # type: ignore[arg-type]


def _steps_of(stop: int) -> list[Step]:
    """What happens until the aeroplane stands loaded and fuelled at a stop."""
    at, before = f"_{stop}", f"_{stop - 1}"
    used = f"used{at}"
    made = [_step(used, "Stop chosen", _itself, (f"runway{at}",), "", truth=True)]
    if stop == 1:
        return [
            *made,
            _step("payload_1", "Payload aboard", _itself, ("payload_on_1",), used),
            _step("fuel_out_1", "Fuel at take-off", _itself, ("fuel_start",), used),
            _step("zero_fuel_1", "Zero-fuel mass", sum_of, ("operating_mass", "payload_1"), used),
        ]
    ends = tuple(f"{key}{one}" for one in (before, at) for key in ("latitude", "longitude"))
    return [
        *made,
        _step(f"by_position{at}", "Distance from positions", great_circle, ends, used),
        _step(f"leg{at}", "Distance", links.first_known, (f"distance{at}", f"by_position{at}"), used),
        _step(f"time{at}", "Time", minutes_of, (f"minutes{at}", f"leg{at}", "cruise", f"tailwind{at}"), used),
        _step(f"burn{at}", "Fuel for the leg", burn_of, (f"time{at}", "fuel_flow", "leg_fuel"), used),
        _step(f"fuel_left{at}", "Fuel at landing", difference_of, (f"fuel_out{before}", f"burn{at}"), used),
        _step(f"fuel_in{at}", "Fuel at landing, if any", not_negative, (f"fuel_left{at}",), used),
        _step(f"mass_landing{at}", "Landing mass", mass_of, (f"zero_fuel{before}", f"fuel_in{at}", "fuel_density"), used),
        _step(f"kept{at}", "Payload that stays aboard", difference_of, (f"payload{before}", f"payload_off{at}"), used),
        _step(f"stays{at}", "Payload that stays aboard, if any", not_negative, (f"kept{at}",), used),
        _step(f"payload{at}", "Payload aboard", sum_of, (f"stays{at}", f"payload_on{at}"), used),
        _step(f"fuel_out{at}", "Fuel at take-off", sum_of, (f"fuel_in{at}", f"refuel{at}"), used),
        _step(f"zero_fuel{at}", "Zero-fuel mass", sum_of, ("operating_mass", f"payload{at}"), used),
    ]  # fmt: skip


def _leaving(stop: int) -> list[Step]:
    """The take-off, where another stop follows."""
    if stop == STOPS:
        return []
    at = f"_{stop}"
    return [
        _step(f"leaves{at}", "Another stop follows", _both, (f"used{at}", f"used_{stop + 1}"), "", truth=True),
        _step(f"mass_takeoff{at}", "Take-off mass", mass_of, (f"zero_fuel{at}", f"fuel_out{at}", "fuel_density"),
              f"leaves{at}"),
    ]  # fmt: skip
