"""Runs along slope profiles against an integration of the equation of motion over time, part by part.

The reference is the balance of forces of tests/outside/test_runs.py, integrated in time by ``scipy.integrate.solve_ivp``
with a relative tolerance of 1e-12; the end of a part of the profile and the speed aimed at are events. Profiles are
random: one to six parts of -12 to +12 %, winds of -15 to +40 kt. The whole assessment is compared with the scalar second
writing of tests/outside/test_whole_flight.py.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from itertools import pairwise
from math import inf, nan

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from stripcheck import ground_run, links, thrust
from stripcheck.assessment import prepare
from stripcheck.chain import evaluate
from stripcheck.profile import Profile
from stripcheck.profile_run import DiskLaw, Law, SquareLaw, profile_slopes, roll_along, tracks_of
from tests.outside.test_runs import Runs, disk_engine, disk_force, net_force, polar_engine, polar_force, random_runs
from tests.outside.test_whole_flight import Flight, loaded

G = 9.80665  # standard gravity, ISO 80000-3
CASES = 50  # for each kind of run
Acceleration = Callable[[float, float], float]  # forward [m/s2], of airspeed and slope


def random_profiles(rng: np.random.Generator, count: int) -> list[Profile]:
    profiles = []
    for _ in range(count):
        parts = rng.integers(1, 7)
        distances = np.concatenate([[0.0], np.cumsum(rng.uniform(20.0, 250.0, parts))])
        heights = np.concatenate([[0.0], np.cumsum(rng.uniform(-0.12, 0.12, parts) * np.diff(distances))])
        profiles.append(Profile(tuple(distances.tolist()), tuple(heights.tolist())))
    return profiles


def integrated(profile: Profile, acceleration: Acceleration, begin: float, wind: float, first: float,
               last: float) -> tuple[float, np.ndarray]:  # fmt: skip
    """Length [m] of a run between two airspeeds, NaN where it never gets there, and what it gains [m/s2] on the way."""
    place, speed, goal = begin, first - wind, last - wind
    gains: list[float] = []
    step = 0.1 if last < first else inf  # a long one would miss who rolls past a point and, unlike an aeroplane, back again
    nodes = [*profile.distances[:-1], inf]  # the last part goes on
    for (_, end), slope in zip(pairwise(nodes), profile.slopes, strict=True):
        if place >= end:
            continue
        events = [lambda _, y, end=end: min(y[0] - end, 1e9), lambda _, y: y[1] - goal]
        for event in events:
            event.terminal = True  # type: ignore[attr-defined]
        path = solve_ivp(lambda _, y, slope=slope: (y[1], acceleration(y[1] + wind, slope)), (0.0, 600.0), (place, speed),
                         method="DOP853", rtol=1e-12, atol=1e-11, events=events, max_step=step)  # fmt: skip
        gains += [acceleration(v + wind, slope) * np.sign(last - first) for v in path.y[1]]
        if min(gains) < 0.0 or path.status != 1:
            return nan, np.array(gains)
        place, speed = path.y[:, -1]
        assert place <= end + 1e-6
        if path.t_events[1].size:
            return place - begin, np.array(gains)
    return nan, np.array(gains)


def check(law: Law, runs: Runs, rng: np.random.Generator, force: Callable[[Runs, int, float], float], backwards: bool) -> None:
    """1e-6: worst seen 1e-10, for short parts suit the sum; one sum over a whole slow run may be off by 2e-4.

    Where the model has no run the integration falls below the least acceleration too, and never the other way round.
    """
    profiles, begin = random_profiles(rng, len(runs.mass)), rng.uniform(0.0, 60.0, len(runs.mass))
    first, last = (runs.speed, runs.wind) if backwards else (runs.wind, runs.speed)
    model = roll_along(law, tracks_of(profiles), begin, first, last)
    errors, refused = [], 0
    for i in np.flatnonzero(runs.wind < runs.speed - 1.0)[:CASES]:
        one = Runs(**{key: value[i] for key, value in vars(runs).items()})
        on = {slope: replace(one, slope=np.float64(slope)) for slope in profiles[i].slopes}

        def acceleration(speed: float, slope: float, on: dict[float, Runs] = on, i: int = i) -> float:
            return float(force(on[slope], i, speed) / on[slope].mass)

        truth, gains = integrated(profiles[i], acceleration, begin[i], runs.wind[i], first[i], last[i])
        if np.isnan(model[i]):
            refused += 1
            # what decides about a disk is a lower bound, and so a run may be refused a little early
            assert gains.min() < (0.04 if isinstance(law, DiskLaw) else 0.0201) * G
        else:
            errors.append(abs(model[i] / truth - 1.0))
            assert gains.min() > 0.0199 * G
    assert len(errors) > CASES // 3 and max(errors) <= 1e-6, f"worst of {len(errors)} runs: {max(errors):.1e}"
    assert backwards or refused > CASES // 20


def test_fixed_pitch_runs() -> None:
    rng = np.random.default_rng(21)
    runs = random_runs(rng, (0.02, 0.20), 2 * CASES)
    static, slope = polar_engine(rng, runs)
    law = SquareLaw(
        links.fixed_pitch_start(static, runs.sigma, runs.mass, runs.friction, 0.0),
        links.fixed_pitch_square(slope, runs.rho, runs.area, runs.mass, runs.drag, runs.lift, runs.friction),
        runs.wind, 1.0,
    )  # fmt: skip
    check(law, runs, rng, lambda one, i, speed: polar_force(one, static[i], slope[i], speed), False)


def test_constant_speed_runs() -> None:
    rng = np.random.default_rng(22)
    runs = random_runs(rng, (0.02, 0.20), 2 * CASES)
    power, disk = disk_engine(rng, runs)
    law = DiskLaw(
        thrust.static_disk_thrust(power, runs.rho, disk) / runs.mass,
        ground_run.resistance(runs.friction, 0.0),
        ground_run.air_acceleration(runs.rho, runs.area, runs.mass, runs.drag, runs.lift, runs.friction),
        thrust.disk_speed(power, runs.rho, disk), runs.wind,
    )  # fmt: skip
    check(law, runs, rng, lambda one, i, speed: disk_force(one, power[i], disk[i], speed), False)


def test_braked_rolls() -> None:
    rng = np.random.default_rng(23)
    runs = random_runs(rng, (0.12, 0.5), 2 * CASES)
    law = SquareLaw(
        links.braked_start(runs.friction, 1.0, 0.0),
        links.braked_square(runs.rho, runs.area, runs.mass, runs.drag, runs.lift, runs.friction, 1.0),
        runs.wind, -1.0,
    )  # fmt: skip
    check(law, runs, rng, lambda one, _, speed: net_force(one, speed, np.float64(0.0)), True)


@pytest.mark.parametrize("wind", [-4.0, 0.0, 9.0])
@pytest.mark.parametrize("name", ["ridge-runner", "high-mule"])
def test_whole_assessments(name: str, wind: float) -> None:
    """The chain's own rolls on the equivalent slopes: 1e-5, as there. The landing is braked from where it comes down.

    The ground does not fall before touchdown, so that the air distance is that of level ground.
    """
    feet, celsius = 2300.0, 22.0
    profile = Profile((0.0, 120.0, 260.0, 700.0, 900.0), (0.0, 6.0, 7.4, 12.0, 3.0))
    strip = {"surface": "grass", "elevation_field": feet, "slope_given": 0.3, "tora": 900.0, "lda": 900.0,
             "heading": 90.0, "own_wind_from": 90.0 if wind >= 0.0 else 270.0, "own_wind_speed": abs(wind)}  # fmt: skip
    given = prepare(strip, loaded(name), {"temperature": celsius}, "manual-only")
    found = profile_slopes(given.chain, given.given, [profile])
    rolls = evaluate(given.chain, {**given.given, **found}, ("takeoff_roll", "braked_roll"))
    level = evaluate(given.chain, {**given.given, "slope_given": 0.0}, ("landing_air", "free_roll"))

    flight = Flight(name, ("grass", 0.05, 0.30, feet, celsius, 0.0, wind))
    speeds = flight.card["speeds"]

    def along(speed: float, slope: float, pull: Callable[[float], float], friction: float) -> float:
        flight.slope = slope
        return flight.along_ground(speed, pull(speed), friction)

    flight.side("takeoff")
    roll, _ = integrated(profile, lambda speed, slope: along(speed, slope, flight.thrust, 0.05), 0.0, flight.wind,
                         flight.wind, speeds["lift_off"] * flight.stall)  # fmt: skip
    assert rolls["takeoff_roll"][0] == pytest.approx(roll, rel=1e-5)
    flight.side("landing")
    brakes = 0.30 * flight.fitted["braking_quality"]
    roll, _ = integrated(profile, lambda speed, slope: along(speed, slope, lambda _: 0.0, brakes),
                         level["landing_air"][0] + level["free_roll"][0], flight.wind, speeds["touchdown"] * flight.stall,
                         flight.wind)  # fmt: skip
    assert rolls["braked_roll"][0] == pytest.approx(roll, rel=1e-5)
