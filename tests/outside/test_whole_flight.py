"""Whole assessments against a second, scalar writing of the method, put together from the card files' own figures.

Nothing of the project computes the reference but the calibrated coefficients, which are a card's own: air by the
library fluids, stall by the lift equation, runs by quadrature of a force balance, momentum theory by a numeric root.
Only calm or steady wind along the strip, level or sloping ground, no published corrections (set "manual-only").
Sources: as in the tests beside this one.
"""

from __future__ import annotations

import math
import tomllib
from collections.abc import Callable
from functools import cache
from pathlib import Path
from typing import Any

import pytest
from fluids.atmosphere import ATMOSPHERE_1976
from scipy.integrate import quad
from scipy.optimize import brentq

import stripcheck
from stripcheck import assess, load_card
from stripcheck.card import Card
from stripcheck.units import read_quantity

G, SCREEN, RADIUS = 9.80665, 15.24, 6356766.0
FOLDER = Path(stripcheck.__file__).parent / "cards"

# surface, rolling, braking (the shipped ground table), elevation [ft], temperature [degC], slope [%], headwind [kt]
CASES = [
    ("paved", 0.03, 0.35, 0.0, 15.0, 0.0, 0.0),
    ("grass", 0.05, 0.30, 2300.0, 28.0, 1.5, 0.0),
    ("grass", 0.05, 0.30, 2300.0, 28.0, -2.0, 8.0),
    ("gravel", 0.04, 0.30, 5200.0, 12.0, 3.0, 12.0),
    ("long grass", 0.10, 0.25, 800.0, 20.0, 2.0, -5.0),
    ("dirt", 0.04, 0.30, 4100.0, 5.0, -5.0, 0.0),
]


@cache
def loaded(name: str) -> Card:
    return load_card(name)


def card_file(name: str) -> dict[str, Any]:
    return tomllib.loads((FOLDER / f"{name}.toml").read_text(encoding="utf-8"))


def air(feet: float, celsius: float) -> tuple[float, float]:
    """Density and density ratio at an elevation under the standard QNH; dry."""
    height = feet * 0.3048
    pressure = ATMOSPHERE_1976(RADIUS * height / (RADIUS - height)).P
    rho = pressure / (287.05287 * (celsius + 273.15))
    return rho, rho / 1.225


class Flight:
    """One aeroplane on one strip on one day; SI, drag and thrust as in the card's file."""

    def __init__(self, name: str, case: tuple[Any, ...]) -> None:
        self.card, self.fitted = card_file(name), loaded(name).fit.values
        _, self.rolling, self.braking, feet, celsius, slope, wind = case
        self.rho, self.sigma = air(feet, celsius)
        self.kelvin = celsius + 273.15
        self.slope, self.wind = slope / 100.0, wind * 1852.0 / 3600.0
        wing, drag = self.card["wing"], self.card["drag"]
        self.area = read_quantity(wing["area"], "area")
        span = read_quantity(wing["span"], "length")
        height = read_quantity(wing["height_above_ground"], "length")
        self.induced = self.area / (math.pi * span**2 * drag["span_efficiency"])
        self.near_ground = (16.0 * height / span) ** 2 / (1.0 + (16.0 * height / span) ** 2)
        self.run_lift = drag["lift_in_the_run"]

    def side(self, side: str) -> None:
        """Mass, stall speed and parasite drag of take-off or landing as usual for the card."""
        usual, mass = self.card["usual"], self.card["mass"]
        self.mass = read_quantity(usual[f"{side}_mass"], "mass")
        flap = next(f for f in self.card["flap"] if f["setting"] == usual[f"{side}_flap"])
        at = read_quantity(mass["stall_speeds_at"], "mass")
        stall = read_quantity(flap["stall_speed"], "speed")
        self.stall = stall * math.sqrt(self.mass / at) / math.sqrt(self.sigma)  # TAS
        self.parasite = self.fitted.get("parasite_drag", self.card["drag"]["parasite"]) + flap["drag"]

    def drag(self, speed: float, lift: float, near_ground: float = 1.0) -> float:
        coefficient = self.parasite + near_ground * self.induced * lift**2
        return 0.5 * self.rho * speed**2 * self.area * coefficient

    def level_lift(self, speed: float) -> float:
        return 2.0 * self.mass * G / (self.rho * speed**2 * self.area)

    def along_ground(self, speed: float, pull: float, friction: float) -> float:
        """Acceleration on the ground [m/s2]."""
        lift = 0.5 * self.rho * speed**2 * self.area * self.run_lift
        angle = math.atan(self.slope)
        force = pull - self.drag(speed, self.run_lift, self.near_ground) - friction * (self.mass * G - lift)
        return force / self.mass - G * math.sin(angle)

    def run(self, speed: float, acceleration: Callable[[float], float]) -> float:
        return quad(lambda v: (v - self.wind) / acceleration(v), self.wind, speed, epsabs=0.0, epsrel=1e-11)[0]

    def thrust(self, speed: float) -> float:
        if "static_thrust" in self.fitted:
            height = (288.15 - 288.15 * (self.sigma * self.kelvin / 288.15) ** 0.190263) / 0.0065
            heat = math.sqrt((288.15 - 0.0065 * height) / self.kelvin)  # a piston engine: pressure, and root of temperature
            felt = 0.12 * (1.0 - heat) + self.sigma / heat
            torque = (felt - 0.12) / 0.88
            return self.fitted["static_thrust"] * torque + self.fitted["thrust_slope"] * self.rho * speed**2
        engine = self.card["engine"]
        height = read_quantity(engine["flat_rated_to"], "altitude")
        standard = 288.15 - 0.0065 * height
        rating_ends = air(height / 0.3048, standard - 273.15)[1] * 288.15 / standard
        hot = self.sigma * 288.15 / self.kelvin
        power = read_quantity(engine["rated_power"], "power") * min(1.0, hot / rating_ends)
        power *= self.fitted["propulsive_quality"]
        disk = math.pi / 4.0 * read_quantity(self.card["propeller"]["diameter"], "length") ** 2
        induced = brentq(lambda v: 2.0 * self.rho * disk * v * (speed + v) ** 2 - power, max(-speed, 0.0), 300.0,
                         xtol=1e-13)  # fmt: skip
        return 2.0 * self.rho * disk * induced * (speed + induced)

    def takeoff(self) -> tuple[float, float]:
        """Roll and distance to 50 ft [m]."""
        self.side("takeoff")
        speeds = self.card["speeds"]
        lift_off, screen = speeds["lift_off"] * self.stall, speeds["screen"] * self.stall
        roll = self.run(lift_off, lambda v: self.along_ground(v, self.thrust(v), self.rolling))
        mean = math.sqrt(0.5 * (lift_off**2 + screen**2))
        excess = (self.thrust(mean) - self.drag(mean, self.level_lift(mean))) / (self.mass * G)
        energy = (screen**2 - lift_off**2) / (2.0 * G) + SCREEN
        carried = 1.0 - self.wind / mean
        rise = max(self.slope, 0.0) * max(carried, 1.0)  # under each metre flown through the air; careful in a headwind
        radius = mean**2 / (0.19 * G)  # of the pull-up
        climb = min(excess, math.sqrt(2.0 * energy / radius))
        return roll, roll + self.fitted["takeoff_technique"] * carried * (energy + 0.5 * radius * climb**2) / (climb - rise)

    def landing(self) -> tuple[float, float]:
        """Roll, with the time before braking, and distance from 50 ft [m]."""
        self.side("landing")
        speeds, landing = self.card["speeds"], self.card["landing"]
        approach, touchdown = speeds["approach"] * self.stall, speeds["touchdown"] * self.stall
        friction = self.braking * self.fitted["braking_quality"]
        free = (touchdown - self.wind) * read_quantity(landing["time_before_braking"], "time")
        roll = free + self.run(touchdown, lambda v: -self.along_ground(v, 0.0, friction))
        idle = self.drag(approach, self.level_lift(approach)) / (self.mass * G)
        bounds = [read_quantity(landing[f"{word}_approach"], "slope") for word in ("shallowest", "steepest")]
        path = min(max(idle, bounds[0]), bounds[1])
        speed = 0.5 * (approach + touchdown)
        carried = 1.0 - self.wind / speed
        path += min(self.slope, 0.0)  # no case here has falling ground and a tailwind: see test_air_paths.py
        radius = speed**2 / (0.2 * G)
        angle = math.atan(path)
        air_part = max(SCREEN - radius * (1.0 - math.cos(angle)), 0.0) / path + radius * math.sin(angle)
        return roll, roll + self.fitted["landing_technique"] * air_part * carried


@pytest.mark.parametrize("name", ["ridge-runner", "high-mule"])
@pytest.mark.parametrize("case", CASES, ids=[f"{c[0]} {c[3]:.0f} ft {c[5]:+.1f} % {c[6]:+.0f} kt" for c in CASES])
def test_distances(name: str, case: tuple[Any, ...]) -> None:
    """Roll and whole distance of take-off and landing by physics, from which the manual's tables are carried: 1e-5 relative,
    for the runs' 1e-6 and the rounded 1.225."""
    surface, _, _, feet, celsius, slope, wind = case
    strip = {"surface": surface, "elevation_field": feet, "slope_given": slope, "tora": 3000.0, "lda": 3000.0,
             "heading": 90.0, "own_wind_from": 90.0 if wind >= 0.0 else 270.0, "own_wind_speed": abs(wind)}  # fmt: skip
    result = assess(strip, loaded(name), {"temperature": celsius}, "manual-only")
    flight = Flight(name, case)
    for side, roll, whole in (("takeoff", *flight.takeoff()), ("landing", *flight.landing())):
        assert result[f"{side}_roll"][0] == pytest.approx(roll, rel=1e-5), side
        assert result[f"physics_{side}"][0] == pytest.approx(whole, rel=1e-5), side
