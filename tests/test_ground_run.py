"""Ground runs: shapes, limits and smoothness. Integrations of the equation of motion are in tests/outside."""

from __future__ import annotations

import math

import numpy as np
import pytest

from stripcheck import ground_run
from stripcheck.thrust import disk_root

G = 9.80665


def test_slope_sine() -> None:
    for slope in (-0.2, 0.0, 0.05, 0.3):
        assert ground_run.slope_sine(slope) == pytest.approx(math.sin(math.atan(slope)), rel=1e-14)


def test_resistance() -> None:
    assert ground_run.resistance(0.05, 0.0) == pytest.approx(0.05 * G, rel=1e-14)
    assert ground_run.resistance(0.0, -0.1) == pytest.approx(-G * math.sin(math.atan(0.1)), rel=1e-14)


def test_air_acceleration() -> None:
    """Drag less the friction that lift takes off the wheels, by hand: 0.5 x 1.2 x 20 / 1000 x (0.06 - 0.1 x 0.5)."""
    assert ground_run.air_acceleration(1.2, 20.0, 1000.0, 0.06, 0.5, 0.1) == pytest.approx(0.012 * 0.01, rel=1e-12)


def test_drag_polar() -> None:
    """CD0 + CL^2 / (pi A e), the induced part reduced near the ground."""
    induced = 0.8**2 / (math.pi * 7.0 * 0.8)
    assert ground_run.drag_coefficient(0.03, 0.8, 7.0, 0.8) == pytest.approx(0.03 + induced, rel=1e-14)
    assert ground_run.drag_coefficient(0.03, 0.8, 7.0, 0.8, 0.6) == pytest.approx(0.03 + 0.6 * induced, rel=1e-14)


def test_ground_effect_grows_with_height() -> None:
    factors = ground_run.ground_effect_factor(np.array([0.1, 1.0, 3.0, 30.0]), 10.0)
    assert (np.diff(factors) > 0.0).all() and factors[0] > 0.0 and factors[-1] < 1.0


def closed_form(start: float, square: float, slow: float, fast: float, wind: float) -> float:
    """Integral of (V - Vw)/(a0 + k V^2): a logarithm less an area tangent, for k < 0 (any table of integrals)."""
    rate = math.sqrt(-square / start)
    logarithm = math.log((start + square * fast**2) / (start + square * slow**2)) / (2.0 * square)
    tangent = (math.atanh(rate * fast) - math.atanh(rate * slow)) / (start * rate)
    return logarithm - wind * tangent


@pytest.mark.parametrize("wind", [-7.0, 0.0, 4.0, 15.0])
@pytest.mark.parametrize("square", [-1.2e-3, -5e-4, -1e-6])
def test_speed_run_by_the_closed_form(square: float, wind: float) -> None:
    """The textbook's logarithm; 1e-7, for the closed form itself loses digits where k is small."""
    truth = closed_form(1.8, square, wind, 30.0, wind)
    assert ground_run.speed_run(1.8, square, wind, 30.0) == pytest.approx(truth, rel=1e-7)


@pytest.mark.parametrize("wind", [-7.0, 0.0, 4.0, 15.0])
def test_parts_of_a_run_make_the_whole(wind: float) -> None:
    """Two parts of a run are as long as the whole, by the closed form; 1e-7 as above, and no part is no way."""
    parts = [(wind, 18.0), (18.0, 30.0)]
    runs = [ground_run.speed_run_between(1.8, -5e-4, wind, slow, fast) for slow, fast in parts]
    truths = [closed_form(1.8, -5e-4, slow, fast, wind) for slow, fast in parts]
    assert runs == pytest.approx(truths, rel=1e-7)
    assert sum(runs) == pytest.approx(ground_run.speed_run(1.8, -5e-4, wind, 30.0), rel=1e-7)
    assert ground_run.speed_run_between(1.8, -5e-4, wind, 20.0, 20.0) == 0.0
    assert ground_run.speed_run_between(1.8, -5e-4, wind, wind, 30.0) == ground_run.speed_run(1.8, -5e-4, wind, 30.0)


def test_time_of_a_run() -> None:
    """Speed gained over acceleration, and an area tangent where it falls with the square of speed (table of integrals)."""
    assert ground_run.run_time(2.0, 0.0, -6.0, 30.0) == pytest.approx(18.0, rel=1e-14)
    rate = math.sqrt(5e-4 / 1.8)
    truth = (math.atanh(rate * 30.0) - math.atanh(rate * 10.0)) / (1.8 * rate)
    assert ground_run.run_time(1.8, -5e-4, 10.0, 30.0) == pytest.approx(truth, rel=1e-9)


def test_least_acceleration_of_a_speed_run() -> None:
    least = ground_run.least_speed_run_acceleration
    assert least(2.0, -0.001, 0.0, 30.0) == pytest.approx(2.0 - 0.9)  # falls to the fast end
    assert least(2.0, 0.001, 10.0, 30.0) == pytest.approx(2.1)  # rises: least at the slow end
    assert least(2.0, 0.001, -5.0, 30.0) == pytest.approx(2.0)  # through zero airspeed in a tailwind
    assert ground_run.acceleration_at(2.0, -0.001, 30.0) == pytest.approx(1.1)


def test_columns_give_columns() -> None:
    winds = np.array([-5.0, 0.0, 5.0, 40.0])
    runs = ground_run.speed_run(np.full(4, 2.0), np.full(4, -5e-4), winds, np.full(4, 30.0))
    assert runs.shape == (4,) and (np.diff(runs) < 0.0).all() and runs[-1] == 0.0
    disks = ground_run.disk_run(4.0, 0.5, 5e-4, 24.0, winds, 30.0)
    assert disks.shape == (4,) and (np.diff(disks) < 0.0).all() and disks[-1] == 0.0
    single = [ground_run.disk_run(4.0, 0.5, 5e-4, 24.0, wind, 30.0) for wind in winds]
    np.testing.assert_allclose(disks, single, rtol=1e-13)


def test_disk_acceleration() -> None:
    """At rest the whole static thrust; T0 / y and drag at speed, by hand."""
    assert ground_run.disk_acceleration(4.0, 0.5, 5e-4, 24.0, 1.0) == pytest.approx(3.5, rel=1e-12)
    root = disk_root(30.0 / 24.0)
    expected = 4.0 / root - 0.5 - 5e-4 * 30.0**2
    assert ground_run.disk_acceleration(4.0, 0.5, 5e-4, 24.0, root) == pytest.approx(expected, rel=1e-12)


def test_more_thrust_shortens_a_run() -> None:
    runs = ground_run.disk_run(np.linspace(2.0, 6.0, 9), 0.5, 5e-4, 24.0, 0.0, 30.0)
    assert (np.diff(runs) < 0.0).all()
