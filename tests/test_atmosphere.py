"""The air: shapes, limits and inverses. Published figures are compared in tests/outside/test_air.py."""

from __future__ import annotations

import numpy as np
import pytest

from stripcheck import atmosphere


def test_constants() -> None:
    """ISO 2533: 1.225 kg/m3 at sea level, exponents 5.2559 and 4.2559."""
    assert pytest.approx(1.225, abs=5e-6) == atmosphere.RHO0
    assert pytest.approx(5.25588, abs=5e-6) == 1.0 / atmosphere.BARO
    assert pytest.approx(4.25588, abs=5e-6) == atmosphere.DENSITY_EXPONENT


@pytest.mark.parametrize("altitude", [-1000.0, 0.0, 1500.0, 11000.0])
def test_inverses(altitude: float) -> None:
    pressure = atmosphere.isa_pressure(altitude)
    assert atmosphere.pressure_altitude(pressure) == pytest.approx(altitude, abs=1e-8)
    standard = atmosphere.density(pressure, atmosphere.isa_temperature(altitude))
    assert atmosphere.density_altitude(standard) == pytest.approx(altitude, abs=1e-8)


@pytest.mark.parametrize("qnh", [96000.0, 101325.0, 104500.0])
def test_station_pressure(qnh: float) -> None:
    """At sea level it is the QNH; at the QNH's own height over 1013.25 hPa it is 1013.25 hPa."""
    assert atmosphere.station_pressure(qnh, 0.0) == pytest.approx(qnh, rel=1e-14)
    height = -atmosphere.pressure_altitude(qnh)
    assert atmosphere.station_pressure(qnh, height) == pytest.approx(101325.0, rel=1e-12)


def test_pressure_altitude_is_elevation_and_the_altitude_of_the_qnh() -> None:
    """An altimeter's scale is shifted as a whole: exact, at any height."""
    for elevation in (0.0, 800.0, 2900.0):
        pressure = atmosphere.station_pressure(99500.0, elevation)
        shift = atmosphere.pressure_altitude(99500.0)
        assert atmosphere.pressure_altitude(pressure) == pytest.approx(elevation + shift, abs=1e-8)


def test_shapes_broadcast() -> None:
    pressures = atmosphere.station_pressure(np.array([100000.0, 101325.0]), np.array([[0.0], [500.0], [1000.0]]))
    assert pressures.shape == (3, 2)
    assert (np.diff(pressures, axis=0) < 0.0).all() and (np.diff(pressures, axis=1) > 0.0).all()


def test_missing_stays_missing() -> None:
    assert np.isnan(atmosphere.density(np.nan, 288.15))
    assert np.isnan(atmosphere.station_pressure(101325.0, np.nan))


def test_vapour_thins_the_air() -> None:
    """Dry air is its own virtual temperature; vapour always raises it."""
    assert atmosphere.virtual_temperature(300.0, 95000.0, 0.0) == 300.0
    warmer = atmosphere.virtual_temperature(300.0, 95000.0, np.array([500.0, 1500.0, 3000.0]))
    assert (np.diff(warmer) > 0.0).all() and warmer[0] > 300.0


def test_relative_humidity_is_a_share_of_saturation() -> None:
    saturated = atmosphere.saturation_vapour_pressure(298.15)
    assert atmosphere.vapour_pressure(298.15, 0.4) == pytest.approx(0.4 * saturated, rel=1e-14)
