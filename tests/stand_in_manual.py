"""A stand-in for a flight manual: take-off and landing flown by an integration that shares nothing with the project.

Equations of motion in the vertical plane, by ``scipy.integrate.solve_ivp``: run on the wheels, rotation at a steady rate to a
scheduled lift-off speed, a pull-up of limited load factor and a climb in which the pilot shares the excess thrust between
height and speed so as to reach the scheduled speed at 50 ft; approach on a path, flare, touchdown, free roll, braked roll.
Propellers and engines are other models than the project's:

* fixed pitch: thrust and power coefficients as polynomials in the advance ratio, turned by an engine whose torque falls a
  little with its speed of rotation, which is solved for;
* constant speed: useful power by an efficiency that rises with the advance ratio, held by a static limit (figure of merit
  times the ideal disk);
* piston engines give the power of the air that they breathe, pressure over root of temperature, less friction, as flight-test
  practice corrects it (FAA AC 23-8 series, from memory); a turboprop holds its torque limit, and beyond it falls with
  pressure and by 0.65 % for each kelvin (common practice, no source).

Ground effect by Wieselsberger's formula (1921, from memory). Coefficients are common practice for aeroplanes of the kind, no
source. All aeroplanes are invented.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cache

import numpy as np
from scipy.integrate import solve_ivp
from scipy.interpolate import CubicSpline

G, GAS, P0, T0, RHO0 = 9.80665, 287.05287, 101325.0, 288.15, 1.225
FIFTY, FOOT, KNOT = 15.24, 0.3048, 1852.0 / 3600.0
LEAST_CLIMB = 0.76  # [m/s], 150 ft/min at the speed at 50 ft: a manual prints no take-off below it
SPEEDS = np.linspace(0.0, 80.0, 33)


@dataclass(frozen=True)
class Aeroplane:
    """The truth about an invented aeroplane, SI; lift coefficients are the greatest ones."""

    name: str
    propeller: str
    engine: str
    mass: float
    area: float
    span: float
    power: float
    diameter: float
    turning: float = 45.0  # rated speed of rotation [1/s]
    wing_height: float = 2.0
    drag: float = 0.034
    efficiency: float = 0.75
    clean_lift: float = 1.45
    takeoff_lift: float = 1.75
    landing_lift: float = 2.1
    takeoff_drag: float = 0.010  # added by flap
    landing_drag: float = 0.050
    ground_lift: float = 0.45
    rolling: float = 0.028
    braking: float = 0.33
    lift_off: float = 1.10  # speeds over the stall speed
    screen: float = 1.20
    approach: float = 1.30
    rotation: float = 1.3  # [s]
    pull: float = 0.15  # most load factor above 1 in the pull-up
    flare: float = 0.10
    path: float = 0.061
    free_seconds: float = 1.5
    thrust_polynomial: tuple[float, float, float] = (0.105, -0.035, -0.100)
    power_polynomial: tuple[float, float, float] = (0.056, 0.004, -0.050)
    friction_share: float = 0.14  # of an engine's power
    best_efficiency: float = 0.82
    best_ratio: float = 0.9  # advance ratio of the best efficiency
    merit: float = 0.68
    limit: float = 3000.0  # critical altitude or end of the flat rating [m]


WREN = Aeroplane("Wren", "fixed pitch", "normally aspirated", 1100.0, 16.4, 10.9, 132e3, 1.92)
IBIS = Aeroplane("Ibis", "constant speed", "normally aspirated", 1450.0, 17.5, 11.2, 210e3, 2.08)
KITE = Aeroplane("Kite", "constant speed", "turbo-normalised", 1700.0, 18.0, 11.6, 235e3, 2.05, drag=0.030, limit=4500.0)
ORYX = Aeroplane("Oryx", "constant speed", "flat rated", 3400.0, 29.0, 15.0, 480e3, 2.65, 33.3, 2.4, drag=0.042,
                 takeoff_lift=2.0, landing_lift=2.6, takeoff_drag=0.025, landing_drag=0.07)  # fmt: skip


def standard_temperature(height: float) -> float:
    return T0 - 0.0065 * height


def pressure_at(height: float) -> float:
    return P0 * (standard_temperature(height) / T0) ** (G / GAS / 0.0065)


def density_at(height: float, temperature: float) -> float:
    return pressure_at(height) / (GAS * temperature)


def stall(a: Aeroplane, lift: float, mass: float) -> float:
    """Stall speed [m/s EAS]."""
    return float(np.sqrt(2.0 * mass * G / (RHO0 * a.area * lift)))


def shaft_power(a: Aeroplane, height: float, temperature: float) -> float:
    """Full power [W] at the rated speed of rotation."""
    pressure, standard = pressure_at(height) / P0, standard_temperature(height)
    breath = pressure * np.sqrt(T0 / temperature)
    if a.engine == "flat rated":
        colder = 1.0 - 0.0065 * (temperature - standard_temperature(a.limit))
        return float(a.power * min(1.0, pressure_at(height) / pressure_at(a.limit) * colder))
    if a.engine == "turbo-normalised":
        held = min(1.0, pressure_at(height) / pressure_at(a.limit))
        breath = held * np.sqrt(standard / temperature)
    return float(a.power * ((1.0 + a.friction_share) * breath - a.friction_share))


def thrust_curve(a: Aeroplane, height: float, temperature: float) -> CubicSpline:
    """Thrust [N] by true airspeed [m/s]."""
    rho, power = density_at(height, temperature), shaft_power(a, height, temperature)
    return CubicSpline(SPEEDS, _fixed_pitch(a, rho, power) if a.propeller == "fixed pitch" else _constant_speed(a, rho, power))


def _constant_speed(a: Aeroplane, rho: float, power: float) -> np.ndarray:
    ratio = SPEEDS / (a.turning * a.diameter)
    # efficiency over speed, which has a limit at rest
    missing = np.maximum(1.0 - ratio / a.best_ratio, 0.0)
    with np.errstate(invalid="ignore"):
        over_speed = np.where(SPEEDS > 0.0, (1.0 - missing**2.4) / SPEEDS, 2.4 / (a.turning * a.diameter * a.best_ratio))
    running = a.best_efficiency * power * over_speed
    static = np.cbrt(2.0 * rho * 0.25 * np.pi * a.diameter**2 * (a.merit * power) ** 2) * (1.0 - 0.25 * ratio)
    return (running**-6.0 + static**-6.0) ** (-1.0 / 6.0)


def _fixed_pitch(a: Aeroplane, rho: float, power: float) -> np.ndarray:
    torque = power / (2.0 * np.pi * a.turning)
    low, high = np.full_like(SPEEDS, 0.3 * a.turning), np.full_like(SPEEDS, 2.0 * a.turning)
    for _ in range(50):
        turning = 0.5 * (low + high)
        ratio = SPEEDS / (turning * a.diameter)
        coefficient = np.maximum(np.polyval(a.power_polynomial[::-1], ratio), 0.006)
        asked = coefficient * rho * turning**2 * a.diameter**5 / (2.0 * np.pi)
        gives = asked < torque * (1.06 - 0.06 * (turning / a.turning) ** 2)
        low, high = np.where(gives, turning, low), np.where(gives, high, turning)
    ratio = SPEEDS / (turning * a.diameter)
    return np.polyval(a.thrust_polynomial[::-1], ratio) * rho * turning**2 * a.diameter**4


def drag_coefficient(a: Aeroplane, lift: float, flap: float, height: float) -> float:
    ratio = min((a.wing_height + height) / a.span, 0.72)
    near = 1.0 - max((1.0 - 1.32 * ratio) / (1.05 + 7.4 * ratio), 0.0)
    return a.drag + flap + near * lift**2 / (np.pi * a.span**2 / a.area * a.efficiency)


def _ends(event):  # type: ignore[no-untyped-def]
    event.terminal = True
    return event


def take_off(a: Aeroplane, height: float, temperature: float, mass: float) -> tuple[float, float]:
    """Roll and distance to 50 ft [m]; NaN where a manual prints none."""
    rho, thrust, weight = density_at(height, temperature), thrust_curve(a, height, temperature), mass * G
    lift_off, screen = (factor * stall(a, a.takeoff_lift, mass) / np.sqrt(rho / RHO0) for factor in (a.lift_off, a.screen))

    def pressed(v: float) -> float:
        return 0.5 * rho * v * v * a.area

    def excess(v: float, height: float) -> float:
        level = weight / pressed(v)
        return float(thrust(v)) / weight - drag_coefficient(a, level, a.takeoff_drag, height) / level

    def gain(v: float, lift: float) -> float:
        drag = pressed(v) * drag_coefficient(a, lift, a.takeoff_drag, 0.0)
        return float(thrust(v) - drag - a.rolling * max(weight - pressed(v) * lift, 0.0)) / mass

    if excess(screen, FIFTY) * screen < LEAST_CLIMB:
        return np.nan, np.nan
    level = weight / pressed(lift_off)  # rotation backwards from lift-off, where lift carries the weight
    back = solve_ivp(lambda t, y: (y[1], gain(y[1], level + (level - a.ground_lift) * t / a.rotation)), (0.0, -a.rotation),
                     (0.0, lift_off), rtol=1e-8, atol=1e-6)  # fmt: skip
    start = solve_ivp(lambda v, y: (v / gain(v, a.ground_lift),), (0.0, back.y[1, -1]), (0.0,), rtol=1e-8, atol=1e-6)
    roll = float(start.y[0, -1] - back.y[0, -1])

    def flown(t: float, y: np.ndarray) -> tuple[float, ...]:
        _, h, v, path = y
        left = max(FIFTY - h, 0.5)
        share = left / (left + max(screen**2 - v**2, 0.0) / (2.0 * G))
        pull = np.clip(2.0 * (share * excess(v, h) - path) * v / G, -a.pull, a.pull)
        lift = min((np.cos(path) + pull) * weight / pressed(v), 0.93 * a.takeoff_lift)
        drag = pressed(v) * drag_coefficient(a, lift, a.takeoff_drag, h)
        return (v * np.cos(path), v * np.sin(path), (float(thrust(v)) - drag) / mass - G * np.sin(path),
                (pressed(v) * lift / weight - np.cos(path)) * G / v)  # fmt: skip

    over = _ends(lambda t, y: y[1] - FIFTY)
    air = solve_ivp(flown, (0.0, 120.0), (roll, 0.0, lift_off, 0.0), events=over, rtol=1e-6, atol=1e-6)
    return roll, float(air.y[0, -1]) if air.status == 1 else np.nan


@cache
def land(a: Aeroplane, height: float, temperature: float, mass: float) -> tuple[float, float]:
    """Roll and distance from 50 ft [m]."""
    rho, weight = density_at(height, temperature), mass * G
    v, path = a.approach * stall(a, a.landing_lift, mass) / np.sqrt(rho / RHO0), np.arctan(a.path)
    flare = min(v**2 / (G * a.flare) * (1.0 - np.cos(path)), FIFTY)

    def flown(t: float, y: np.ndarray) -> tuple[float, ...]:
        _, h, v, path = y
        pressed = 0.5 * rho * v * v * a.area
        pull = np.clip(2.0 * (-0.004 - path) * v / G, -a.flare, a.flare)
        lift = min((np.cos(path) + pull) * weight / pressed, 0.97 * a.landing_lift)
        drag = pressed * drag_coefficient(a, lift, a.landing_drag, h)
        return (v * np.cos(path), v * np.sin(path), -drag / mass - G * np.sin(path),
                (pressed * lift / weight - np.cos(path)) * G / v)  # fmt: skip

    def slowing(t: float, y: np.ndarray) -> tuple[float, float]:
        pressed = 0.5 * rho * y[1] ** 2 * a.area
        drag = pressed * drag_coefficient(a, a.ground_lift, a.landing_drag, 0.0)
        friction = a.braking if t > a.free_seconds else a.rolling
        return y[1], -(drag + friction * (weight - pressed * a.ground_lift)) / mass

    down = _ends(lambda t, y: y[1])
    air = solve_ivp(flown, (0.0, 60.0), ((FIFTY - flare) / a.path, flare, v, -path), events=down, rtol=1e-7, atol=1e-7)
    still = _ends(lambda t, y: y[1] - 0.01)
    roll = solve_ivp(slowing, (0.0, 100.0), (0.0, air.y[2, -1]), events=still, rtol=1e-7, atol=1e-6, max_step=0.5)
    return float(roll.y[0, -1]), float(air.y[0, -1] + roll.y[0, -1])


Place = tuple[float, float, float]  # pressure altitude [ft], kelvins above standard, share of the greatest mass


def figures(a: Aeroplane, places: Iterable[Place], step: float = 5.0) -> np.ndarray:
    """Rows of altitude [ft], temperature [degC], mass [kg] and the manual's four distances [m], rounded to ``step``."""
    rows, idle = [], a  # engines have no part in a landing
    for feet, warmer, share in places:
        height, mass = feet * FOOT, share * a.mass
        temperature = standard_temperature(height) + warmer
        distances = np.array([*take_off(a, height, temperature, mass), *land(idle, height, temperature, mass)])
        rows.append((feet, temperature - 273.15, mass, *(np.round(distances / step) * step if step else distances)))
    return np.array(rows)


def card_text(a: Aeroplane, takeoff: np.ndarray, landing: np.ndarray) -> str:
    """A card as its owner would type it: what any manual prints, everything else left to typical values."""
    speeds = {name: f"{round(stall(a, lift, a.mass) / KNOT)} kt"
              for name, lift in (("up", a.clean_lift), ("some", a.takeoff_lift), ("full", a.landing_lift))}  # fmt: skip
    limit = {"normally aspirated": "", "turbo-normalised": "critical_altitude", "flat rated": "flat_rated_to"}[a.engine]
    text = f'''
[aeroplane]
name = "Stand-in {a.name}"
[mass]
empty = "{0.55 * a.mass:.0f} kg"
max_takeoff = "{a.mass:.0f} kg"
[wing]
area = "{a.area:.1f} m²"
span = "{a.span:.1f} m"
height_above_ground = "{a.wing_height:.1f} m"
[engine]
kind = "{a.engine}"
rated_power = "{a.power / 1000.0:.0f} kW"
{f'{limit} = "{a.limit / FOOT:.0f} ft"' if limit else ""}
[propeller]
kind = "{a.propeller}"
diameter = "{a.diameter:.2f} m"
[speeds]
screen = {a.screen}
approach = {a.approach}
[limits]
crosswind = "15 kt"
tailwind = "10 kt"
[usual]
takeoff_flap = "some"
landing_flap = "full"
'''
    for name, deflection in (("up", 0), ("some", 15), ("full", 35)):
        uses = '["landing"]' if name == "full" else '["take-off", "landing"]'
        text += (f'[[flap]]\nsetting = "{name}"\ndeflection = "{deflection}°"\nstall_speed = "{speeds[name]}"\n'
                 f"uses = {uses}\n")  # fmt: skip
    for side, whole, flap, columns, rows in (("takeoff", "to_50ft", "some", (3, 4), takeoff),
                                             ("landing", "from_50ft", "full", (5, 6), landing)):  # fmt: skip
        for row in rows:
            text += (f'[[book.{side}]]\npressure_altitude = "{row[0]:.0f} ft"\ntemperature = "{row[1]:.2f} °C"\n'
                     f'mass = "{row[2]:.1f} kg"\nflap = "{flap}"\nroll = "{row[columns[0]]:.9f} m"\n'
                     f'{whole} = "{row[columns[1]]:.9f} m"\n')  # fmt: skip
    return text
