"""Power and thrust: limits, continuity and inverses. Numeric roots and published figures are in tests/outside."""

from __future__ import annotations

import numpy as np
import pytest

from stripcheck import links, thrust


def test_fixed_pitch_thrust() -> None:
    """a Phi + b rho V^2: static at rest, parabola with speed."""
    assert thrust.fixed_pitch_thrust(2400.0, -0.5, 1.0, 1.225, 0.0) == 2400.0
    assert thrust.fixed_pitch_thrust(2400.0, -0.5, 1.0, 1.225, 20.0) == pytest.approx(2400.0 - 0.5 * 1.225 * 400.0)


def test_turbo_normalised_power() -> None:
    """Rated up to the critical altitude, then in proportion to a normally aspirated engine; no step between."""
    sigma = np.array([1.0, 0.8, 0.6001, 0.6, 0.5999, 0.4])
    power = thrust.turbo_normalised_power(1000.0, sigma, 0.6, 1.0)
    assert (power[:4] == 1000.0).all()
    assert power[4] == pytest.approx(1000.0, rel=1e-3)
    assert power[5] == pytest.approx(1000.0 * thrust.aspirated_power(1.0, 0.4) / thrust.aspirated_power(1.0, 0.6))


def test_a_piston_engine_loses_less_to_heat_than_to_height() -> None:
    """FAA AC 23-8 series, from memory: at one pressure the power goes with the root of the temperature; 30 K take some 5 %."""
    hot = thrust.heat_factor(318.15, 288.15)
    sigma = 288.15 / 318.15  # at the pressure of the sea-level standard
    felt = thrust.engine_sigma(sigma, hot)
    assert thrust.drop_off_factor(felt) == pytest.approx(hot, rel=1e-12)
    assert thrust.drop_off_factor(felt) > thrust.drop_off_factor(sigma)
    assert links.heat_of(sigma, 318.15) == pytest.approx(hot, rel=1e-9)
    assert thrust.turbo_normalised_power(1000.0, 1.0, 0.6, hot) == pytest.approx(1000.0 * hot)


def test_flat_rated_power() -> None:
    power = thrust.flat_rated_power(1000.0, np.array([1.1, 0.8, 0.4]), 0.8)
    np.testing.assert_allclose(power, [1000.0, 1000.0, 500.0])


def test_a_flat_rating_ends_sooner_in_hot_air_than_in_high_air() -> None:
    """At one and the same density the turbine is hotter low down in hot air: half of a per cent to one for each kelvin."""
    limit = links.rating_limit(3048.0, 0.0, turbine=True)
    sigma = 0.78
    powers = [thrust.flat_rated_power(1.0, links.hot_sigma_of(sigma, kelvin), limit) for kelvin in (275.0, 318.15, 319.15)]
    assert powers[0] == 1.0 > powers[1] > powers[2]
    pressure = sigma * 1.225 * 287.05287 * 318.15  # the same pressure, a kelvin warmer
    warmer = pressure / (287.05287 * 319.15) / 1.225
    lost = 1.0 - links.hot_sigma_of(warmer, 319.15) / links.hot_sigma_of(sigma, 318.15)
    assert 0.005 < lost < 0.010


def test_static_thrust_and_induced_speed_are_one_disk() -> None:
    """P = T0 w0 and T0 = 2 rho A w0^2: momentum theory at rest."""
    for power, rho, area in ((50e3, 0.9, 2.5), (300e3, 1.2, 5.0)):
        pull, induced = thrust.static_disk_thrust(power, rho, area), thrust.disk_speed(power, rho, area)
        assert pull * induced == pytest.approx(power, rel=1e-13)
        assert pull == pytest.approx(2.0 * rho * area * induced**2, rel=1e-13)


def test_disk_root_solves_its_cubic() -> None:
    """y^3 - x y^2 - 1 = 0, from a tailwind to a fast airspeed; and back, x = y - 1/y^2."""
    ratio = np.linspace(-1.75, 12.0, 200)
    root = thrust.disk_root(ratio)
    np.testing.assert_allclose(root**3 - ratio * root**2 - 1.0, 0.0, atol=1e-11 * np.max(root) ** 3)
    np.testing.assert_allclose(thrust.disk_speed_ratio(root), ratio, rtol=1e-11, atol=1e-11)
    assert (np.diff(root) > 0.0).all()


def test_fast_disk_gives_its_power() -> None:
    """Far above the induced speed all power is thrust times airspeed: y goes to x."""
    assert thrust.disk_root(50.0) == pytest.approx(50.0, rel=1e-3)
