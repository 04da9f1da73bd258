"""The air against published tables as other libraries compute them, and against a handbook's sample problem."""

from __future__ import annotations

import numpy as np
import pytest
from ambiance import Atmosphere
from CoolProp.HumidAirProp import HAPropsSI
from fluids.atmosphere import ATMOSPHERE_1976

from stripcheck import assess, atmosphere

FOOT, INCH_OF_MERCURY = 0.3048, 3386.389  # m, Pa: by definition, and as the U.S. Standard Atmosphere, 1976, has it
EARTH_RADIUS = 6356766.0  # m, of both standards, for geometric height: ours, as an altimeter's, is geopotential
HEIGHTS = np.linspace(-1000.0, 11000.0, 241)


def geometric(heights: np.ndarray) -> np.ndarray:
    return EARTH_RADIUS * heights / (EARTH_RADIUS - heights)


def test_iso_2533_by_ambiance() -> None:
    """ISO 2533 / ICAO standard atmosphere by the library ambiance, -1,000 m to 11,000 m: 1e-6 relative."""
    standard = Atmosphere(geometric(HEIGHTS))
    pressure, temperature = atmosphere.isa_pressure(HEIGHTS), atmosphere.isa_temperature(HEIGHTS)
    np.testing.assert_allclose(temperature, standard.temperature, rtol=1e-6)
    np.testing.assert_allclose(pressure, standard.pressure, rtol=1e-6)
    np.testing.assert_allclose(atmosphere.density(pressure, temperature), standard.density, rtol=1e-6)


def test_us_standard_atmosphere_1976_by_fluids() -> None:
    """U.S. Standard Atmosphere, 1976, by the library fluids, over the same heights: 1e-6 relative.

    The gas constant is 287.05287 J/(kg K) in ISO 2533 and 8314.32 / 28.9644 = 287.05307 in this one, 7e-7 apart.
    Raised to the power of its exponent, that alone is 1.1e-6 of the pressure at 11,000 m, and is allowed for there.
    """
    for height in HEIGHTS:
        standard = ATMOSPHERE_1976(float(geometric(height)))
        pressure = atmosphere.isa_pressure(height)
        tolerance = 1e-6 if height <= 9500.0 else 1.1e-6
        assert atmosphere.isa_temperature(height) == pytest.approx(standard.T, rel=1e-6)
        assert pressure == pytest.approx(standard.P, rel=tolerance)
        assert atmosphere.density(pressure, standard.T) == pytest.approx(standard.rho, rel=1e-6)


@pytest.mark.parametrize("height", [-1000.0, 0.0, 700.0, 2500.0, 11000.0])
def test_the_way_back_from_pressure_and_density(height: float) -> None:
    """Pressure altitude and density altitude of the two standards' own figures give the height back, to 1 cm."""
    standard = ATMOSPHERE_1976(float(geometric(np.asarray(height))))
    assert atmosphere.pressure_altitude(standard.P) == pytest.approx(height, abs=0.01)
    assert atmosphere.density_altitude(standard.rho) == pytest.approx(height, abs=0.01)


def test_speed_of_sound_by_fluids() -> None:
    """The airspeed indicator's relation rests on the sea-level speed of sound, 340.294 m/s: 1e-5 relative."""
    from stripcheck.speeds import A0

    assert pytest.approx(ATMOSPHERE_1976(0.0).v_sonic, rel=1e-5) == A0


@pytest.mark.parametrize("feet", [0.0, 5000.0, 10000.0])
def test_station_pressure_of_a_qnh(feet: float) -> None:
    """Under the standard QNH of 1013.25 hPa the station pressure is the standard pressure at the elevation."""
    standard = ATMOSPHERE_1976(float(geometric(np.asarray(feet * FOOT))))
    assert atmosphere.station_pressure(101325.0, feet * FOOT) == pytest.approx(standard.P, rel=1e-6)


def test_handbook_sample_problem() -> None:
    """FAA-H-8083-25, Pilot's Handbook of Aeronautical Knowledge, aircraft performance, first sample problem (read).

    Field elevation 5,883 ft, altimeter 30.10 inHg: correction -165 ft, pressure altitude 5,718 ft; at 70 degF the
    chart reads a density altitude of about 7,700 ft, a graph reading: 100 ft. The handbook's correction is rounded
    from a table in steps of 0.1 inHg: 5 ft.
    """
    result = assess({"elevation_field": 5883.0, "surface": "paved", "tora": 900.0}, "ridge-runner",
                    {"qnh": "30.10 inHg", "temperature": "70 degF"})  # fmt: skip
    assert result["pressure_altitude"][0] == pytest.approx(5718.0, abs=5.0)
    assert result["density_altitude"][0] == pytest.approx(7700.0, abs=100.0)


CELSIUS = (-10.0, 0.0, 15.0, 25.0, 35.0, 45.0)


@pytest.mark.parametrize("celsius", CELSIUS)
@pytest.mark.parametrize("relative", [0.0, 0.3, 0.6, 1.0])
@pytest.mark.parametrize("pressure", [60000.0, 80000.0, 101325.0])
def test_humid_air_by_coolprop(celsius: float, relative: float, pressure: float) -> None:
    """Density of humid air by CoolProp's HAPropsSI (ASHRAE RP-1485, real gas): 0.1 %."""
    kelvin = celsius + 273.15
    truth = 1.0 / HAPropsSI("Vha", "T", kelvin, "P", pressure, "R", relative)
    vapour = atmosphere.vapour_pressure(kelvin, relative)
    model = atmosphere.density(pressure, atmosphere.virtual_temperature(kelvin, pressure, vapour))
    assert model == pytest.approx(truth, rel=1e-3)


@pytest.mark.parametrize("celsius", [0.01, 10.0, 20.0, 30.0, 45.0])
def test_saturation_over_water_by_coolprop(celsius: float) -> None:
    """Saturated vapour pressure of water by CoolProp (IAPWS-95): the Magnus form keeps within 0.4 %."""
    from CoolProp.CoolProp import PropsSI

    truth = PropsSI("P", "T", celsius + 273.15, "Q", 0, "Water")
    assert atmosphere.saturation_vapour_pressure(celsius + 273.15) == pytest.approx(truth, rel=4e-3)


def test_a_dew_point_and_a_humidity_say_the_same() -> None:
    """A dew point of 16 degC at 30 degC is a relative humidity by CoolProp; both days have one density: 1e-4."""
    relative = HAPropsSI("R", "T", 303.15, "P", 95000.0, "D", 289.15)
    strip = {"elevation_field": 1800.0, "surface": "grass", "tora": 900.0}
    damp = assess(strip, "ridge-runner", {"temperature": 30, "dew_point": 16})
    humid = assess(strip, "ridge-runner", {"temperature": 30, "humidity": f"{relative * 100.0} %"})
    assert damp["density"][0] == pytest.approx(humid["density"][0], rel=1e-4)
    dry = assess(strip, "ridge-runner", {"temperature": 30})
    assert damp["density"][0] < dry["density"][0] * 0.995
