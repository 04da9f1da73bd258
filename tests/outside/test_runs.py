"""Ground runs against an integration of the equation of motion, written apart from the project's own equations.

The reference is a balance of forces in newtons (thrust, drag, friction on what weight the wheels carry, the part of
the weight along the slope), as in any text on flight mechanics, integrated by ``scipy.integrate.solve_ivp`` with a
relative tolerance of 1e-11. Momentum theory is solved for the induced speed by a numeric root. 2,000 random cases:
slopes of -15 to +20 %, winds of -15 to +40 kt.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from stripcheck import ground_run, links, thrust

G = 9.80665  # standard gravity, ISO 80000-3
KNOT = 1852.0 / 3600.0
CASES = 1000  # for each kind of propeller
SLOW = 100  # of them
Speeds = np.ndarray


@dataclass(frozen=True)
class Runs:
    """Random aeroplanes, air, ground and wind; SI, one entry for each case."""

    mass: np.ndarray
    rho: np.ndarray
    sigma: np.ndarray
    area: np.ndarray
    drag: np.ndarray
    lift: np.ndarray
    friction: np.ndarray
    slope: np.ndarray
    wind: np.ndarray
    speed: np.ndarray  # lift-off or touchdown, TAS

    def chosen(self, which: np.ndarray) -> Runs:
        return Runs(**{key: value[which] for key, value in vars(self).items()})


def random_runs(rng: np.random.Generator, friction: tuple[float, float], count: int) -> Runs:
    """Aeroplanes of 500 to 3,000 kg; the speed at the fast end follows from a greatest lift coefficient."""
    mass, sigma = rng.uniform(500.0, 3000.0, count), rng.uniform(0.6, 1.1, count)
    area = mass / rng.uniform(45.0, 110.0, count)
    rho = 1.225 * sigma
    stall = np.sqrt(2.0 * mass * G / (rho * area * rng.uniform(1.4, 2.4, count)))
    return Runs(
        mass, rho, sigma, area, rng.uniform(0.03, 0.14, count), rng.uniform(0.1, 0.8, count),
        rng.uniform(*friction, count), rng.uniform(-0.15, 0.20, count), rng.uniform(-15.0, 40.0, count) * KNOT,
        rng.uniform(1.05, 1.20, count) * stall,
    )  # fmt: skip


def net_force(runs: Runs, airspeed: Speeds, pull: Speeds) -> Speeds:
    """Force along the ground [N], positive forward."""
    pressure = 0.5 * runs.rho * airspeed**2
    angle = np.arctan(runs.slope)
    on_wheels = runs.mass * G - pressure * runs.area * runs.lift
    return (
        pull
        - pressure * runs.area * runs.drag
        - runs.friction * on_wheels
        - runs.mass * G * np.sin(angle)
    )


def integrated(runs: Runs, force: Callable[[Speeds], Speeds]) -> np.ndarray:
    """Length of each run [m]: ground distance over airspeed, dx/dV = m (V - Vw) / F, all cases side by side."""
    gained = runs.speed - runs.wind

    def along(share: float, _: np.ndarray) -> np.ndarray:
        airspeed = runs.wind + share * gained
        return runs.mass * (airspeed - runs.wind) * gained / force(airspeed)

    solution = solve_ivp(along, (0.0, 1.0), np.zeros(len(runs.mass)), method="DOP853", rtol=1e-11, atol=1e-9)
    assert solution.success
    return solution.y[:, -1]


def accelerations(runs: Runs, force: Callable[[Speeds], Speeds], points: int) -> np.ndarray:
    """Acceleration [m/s2] at points evenly spread over the airspeeds of each run, the fast end last."""
    shares = np.linspace(0.0, 1.0, points)[:, None]
    return np.array([force(runs.wind + share * (runs.speed - runs.wind)) / runs.mass for share in shares])


def is_brisk(along: np.ndarray) -> np.ndarray:
    """Whether the acceleration at lift-off is at least a quarter of the mean one over the run's airspeeds."""
    return along[-1] >= 0.25 * along.mean(axis=0)


def drawn(seed: int, make: Callable[[np.random.Generator, Runs], tuple[np.ndarray, ...]],
          force: Callable[..., Speeds]) -> tuple[Runs, tuple[np.ndarray, ...]]:  # fmt: skip
    """Random cases that count as lifting off, 2 % of g all along; one in ten is a slow one, which chance seldom meets."""
    rng = np.random.default_rng(seed)
    runs = random_runs(rng, (0.02, 0.30), 40 * CASES)
    engine = make(rng, runs)
    along = accelerations(runs, lambda speed: force(runs, *engine, speed), 61)
    lifts = (along.min(axis=0) >= 0.02 * G) & (runs.wind < runs.speed - 1.0)
    brisk = np.flatnonzero(lifts & is_brisk(along))[: CASES - SLOW]
    slow = np.flatnonzero(lifts & ~is_brisk(along))[:SLOW]
    fit = np.concatenate([brisk, slow])
    assert len(slow) == SLOW and len(fit) == CASES
    return runs.chosen(fit), tuple(part[fit] for part in engine)


def polar_force(runs: Runs, static: np.ndarray, slope: np.ndarray, airspeed: Speeds) -> Speeds:
    """Lowry's linearised propeller polar: thrust falls with the square of speed; torque drops off by 12 %."""
    torque = (runs.sigma - 0.12) / 0.88
    return net_force(runs, airspeed, static * torque + slope * runs.rho * airspeed**2)


def polar_engine(rng: np.random.Generator, runs: Runs) -> tuple[np.ndarray, ...]:
    static = runs.mass * G * rng.uniform(0.15, 0.6, len(runs.mass))
    return static, -rng.uniform(0.5e-4, 6e-4, len(runs.mass)) * static


def momentum_thrust(power: np.ndarray, disk: np.ndarray, rho: np.ndarray, airspeed: Speeds) -> Speeds:
    """Thrust [N] of an actuator disk: induced speed v from P = 2 rho A v (V + v)^2, by halving an interval.

    Rankine and Froude; T = 2 rho A v (V + v), and P = T (V + v).
    """
    low = np.maximum(-airspeed, 0.0)
    high = low + 200.0
    for _ in range(60):
        middle = 0.5 * (low + high)
        too_much = 2.0 * rho * disk * middle * (airspeed + middle) ** 2 > power
        low, high = np.where(too_much, low, middle), np.where(too_much, middle, high)
    return 2.0 * rho * disk * middle * (airspeed + middle)


def disk_force(runs: Runs, power: np.ndarray, disk: np.ndarray, airspeed: Speeds) -> Speeds:
    return net_force(runs, airspeed, momentum_thrust(power, disk, runs.rho, airspeed))


def disk_engine(rng: np.random.Generator, runs: Runs) -> tuple[np.ndarray, ...]:
    diameter = rng.uniform(1.7, 2.9, len(runs.mass))
    return runs.mass * rng.uniform(60.0, 170.0, len(runs.mass)), 0.25 * np.pi * diameter**2


def check(model: np.ndarray, runs: Runs, force: Callable[[Speeds], Speeds]) -> None:
    error = np.abs(model / integrated(runs, force) - 1.0)
    brisk = is_brisk(accelerations(runs, force, 61))
    assert error[brisk].max() <= 1e-6, f"worst of {brisk.sum()} brisk runs: {error[brisk].max():.1e}"
    assert error[~brisk].max() <= 1e-3, f"worst of {(~brisk).sum()} slow runs: {error[~brisk].max():.1e}"


def test_fixed_pitch_runs() -> None:
    runs, (static, slope) = drawn(1, polar_engine, polar_force)
    start = links.fixed_pitch_start(static, runs.sigma, runs.mass, runs.friction, runs.slope)
    square = links.fixed_pitch_square(slope, runs.rho, runs.area, runs.mass, runs.drag, runs.lift, runs.friction)
    model = ground_run.speed_run(start, square, runs.wind, runs.speed)
    check(model, runs, lambda airspeed: polar_force(runs, static, slope, airspeed))


def test_constant_speed_runs() -> None:
    runs, (power, disk) = drawn(2, disk_engine, disk_force)
    static = thrust.static_disk_thrust(power, runs.rho, disk) / runs.mass
    lost = ground_run.resistance(runs.friction, runs.slope)
    square = ground_run.air_acceleration(runs.rho, runs.area, runs.mass, runs.drag, runs.lift, runs.friction)
    induced = thrust.disk_speed(power, runs.rho, disk)
    model = ground_run.disk_run(static, lost, square, induced, runs.wind, runs.speed)
    check(model, runs, lambda airspeed: disk_force(runs, power, disk, airspeed))


def test_least_acceleration_is_never_above_the_true_one() -> None:
    """What decides "lifts off" may be a lower bound, and is exact for a fixed-pitch propeller (1e-9)."""
    shares = np.linspace(0.0, 1.0, 2001)[:, None]
    runs, (static, slope) = drawn(3, polar_engine, polar_force)
    start = links.fixed_pitch_start(static, runs.sigma, runs.mass, runs.friction, runs.slope)
    square = links.fixed_pitch_square(slope, runs.rho, runs.area, runs.mass, runs.drag, runs.lift, runs.friction)
    least = ground_run.least_speed_run_acceleration(start, square, runs.wind, runs.speed)
    speeds = np.concatenate([runs.wind + shares * (runs.speed - runs.wind), np.maximum(runs.wind, 0.0)[None]])
    truth = np.min([polar_force(runs, static, slope, speed) / runs.mass for speed in speeds], axis=0)
    np.testing.assert_allclose(least, truth, rtol=1e-9)

    runs, (power, disk) = drawn(4, disk_engine, disk_force)
    induced = thrust.disk_speed(power, runs.rho, disk)
    least = ground_run.least_disk_acceleration(
        thrust.static_disk_thrust(power, runs.rho, disk) / runs.mass,
        ground_run.resistance(runs.friction, runs.slope),
        ground_run.air_acceleration(runs.rho, runs.area, runs.mass, runs.drag, runs.lift, runs.friction),
        induced, thrust.disk_root(runs.wind / induced), thrust.disk_root(runs.speed / induced),
    )  # fmt: skip
    speeds = runs.wind + shares[::20] * (runs.speed - runs.wind)
    truth = np.min([disk_force(runs, power, disk, speed) / runs.mass for speed in speeds], axis=0)
    assert (least <= truth + 1e-9).all()
    assert np.median(truth - least) < 0.02 * G, "a bound this loose would refuse good take-offs"


def test_braked_rolls() -> None:
    """The landing roll: no thrust, braked wheels, from touchdown to a stand; deceleration is the force with its sign."""
    rng = np.random.default_rng(5)
    runs = random_runs(rng, (0.04, 0.5), 12 * CASES)
    force = net_force(runs, np.maximum(runs.wind, 0.0), np.zeros(len(runs.mass)))
    at_speed = net_force(runs, runs.speed, np.zeros(len(runs.mass)))
    slows = np.maximum(force, at_speed) <= -0.02 * G * runs.mass
    runs = runs.chosen(np.flatnonzero(slows & (runs.wind < runs.speed - 1.0))[:CASES])
    assert len(runs.mass) == CASES
    model = ground_run.speed_run(
        links.braked_start(runs.friction, 1.0, runs.slope),
        links.braked_square(runs.rho, runs.area, runs.mass, runs.drag, runs.lift, runs.friction, 1.0),
        runs.wind, runs.speed,
    )  # fmt: skip
    truth = integrated(runs, lambda airspeed: -net_force(runs, airspeed, np.zeros(len(runs.mass))))
    error = np.abs(model / truth - 1.0)
    # a braked roll is smoothest at its slow end, where it spends its length: no class of its own is needed
    assert error.max() <= 1e-6, f"{error.max():.1e}"


@pytest.mark.parametrize("airspeed", [-8.0, 0.0, 1e-6, 12.0, 30.0, 60.0])
def test_momentum_theory_by_brentq(airspeed: float) -> None:
    """The closed form of the disk's root against ``brentq`` on the power balance, to 1e-12."""
    for power, rho, disk in ((30e3, 0.8, 2.3), (100e3, 1.225, 3.0), (350e3, 1.0, 5.3)):
        induced = brentq(lambda v, c=2.0 * rho * disk, p=power: c * v * (airspeed + v) ** 2 - p,
                         max(-airspeed, 0.0), 500.0, xtol=1e-14, rtol=1e-15)  # fmt: skip
        truth = 2.0 * rho * disk * induced * (airspeed + induced)
        root = thrust.disk_root(airspeed / thrust.disk_speed(power, rho, disk))
        assert thrust.static_disk_thrust(power, rho, disk) / root == pytest.approx(truth, rel=1e-12)


def test_a_headwind_of_the_lift_off_speed_leaves_no_run() -> None:
    assert ground_run.speed_run(2.0, -0.0005, 30.0, 30.0) == 0.0
    assert ground_run.disk_run(4.0, 0.5, 0.0005, 24.0, 30.0, 30.0) == 0.0


@pytest.mark.parametrize("wind", [-8.0, 0.0, 5.0, 12.0])
def test_constant_acceleration(wind: float) -> None:
    """V^2 / (2 a), and the wind's (1 - Vw / V)^2: arithmetic, to rounding."""
    calm = ground_run.speed_run(2.0, 0.0, 0.0, 30.0)
    assert calm == pytest.approx(30.0**2 / (2.0 * 2.0), rel=1e-14)
    assert ground_run.speed_run(2.0, 0.0, wind, 30.0) / calm == pytest.approx((1.0 - wind / 30.0) ** 2, rel=1e-14)


def test_wind_exponent_of_practice() -> None:
    """Flight-test practice corrects a take-off run by (1 - Vw/V)^1.85 (FAA AC 23-8 series, from memory).

    A usual light aeroplane, whose acceleration falls by a third on the run, in a headwind of 20 % of lift-off speed:
    the model's exponent lies within 0.1 of it.
    """
    ratio = ground_run.speed_run(2.0, -0.0007, 6.0, 30.0) / ground_run.speed_run(2.0, -0.0007, 0.0, 30.0)
    exponent = np.log(ratio) / np.log(1.0 - 6.0 / 30.0)
    assert exponent == pytest.approx(1.85, abs=0.1)
