"""The air: ISO 2533 standard atmosphere below the tropopause, altimeter settings, density and humidity.

All functions take and give SI, floats or arrays of any shape that broadcast together, raise nothing, and hold from
-1,000 m to 11,000 m. Heights are geopotential, which is what an altimeter measures.

References
----------
[1] ISO 2533:1975, Standard Atmosphere; the same figures as the U.S. Standard Atmosphere, 1976, below 11 km.
[2] WMO-No. 8, Guide to Instruments and Methods of Observation, annex on humidity formulae (Magnus form over water).
"""

from __future__ import annotations

import numpy as np

from stripcheck.numeric import Number

G0 = 9.80665  # standard gravity [m/s2], [1]
R_AIR = 287.05287  # specific gas constant of dry air [J/(kg K)], [1]
T0 = 288.15  # sea-level temperature [K], [1]
P0 = 101325.0  # sea-level pressure [Pa], [1]
RHO0 = P0 / (R_AIR * T0)  # sea-level density [kg/m3], 1.225
LAPSE = 0.0065  # temperature lapse rate [K/m], [1]
BARO = LAPSE * R_AIR / G0  # 0.190263: exponent that takes pressure ratio to temperature ratio
DENSITY_EXPONENT = 1.0 / BARO - 1.0  # 4.25588: density ratio = temperature ratio to this power
VAPOUR_RATIO = 0.62198  # molar mass of water over that of dry air, [2]


def isa_temperature(altitude: Number) -> Number:
    """Standard temperature [K] at a pressure altitude [m]. Source: [1].

    >>> isa_temperature(1000.0)
    281.65
    """
    return T0 - LAPSE * altitude


def isa_pressure(altitude: Number) -> Number:
    """Standard pressure [Pa] at a pressure altitude [m]. Source: [1].

    >>> round(isa_pressure(1000.0), 2)
    89874.56
    """
    return P0 * (1.0 - LAPSE / T0 * altitude) ** (1.0 / BARO)


def station_pressure(qnh: Number, elevation: Number) -> Number:
    """Air pressure [Pa] at an elevation [m] under an altimeter setting QNH [Pa].

    The altimeter set to QNH reads the elevation, so the pressure altitude of QNH is taken off on the standard
    temperature scale; no "30 ft for each hectopascal". Source: [1], hydrostatic relation.

    >>> round(station_pressure(100000.0, 500.0), 1)
    94198.4
    """
    return P0 * ((qnh / P0) ** BARO - LAPSE / T0 * elevation) ** (1.0 / BARO)


def pressure_altitude(pressure: Number) -> Number:
    """Pressure altitude [m] of an air pressure [Pa]. Source: [1].

    >>> round(pressure_altitude(89874.57), 2)
    1000.0
    """
    return T0 / LAPSE * (1.0 - (pressure / P0) ** BARO)


def density(pressure: Number, temperature: Number) -> Number:
    """Density [kg/m3] of dry air at a pressure [Pa] and temperature [K], or of moist air at its virtual temperature.

    Source: [1], perfect gas.

    >>> round(density(101325.0, 288.15), 6)
    1.225
    """
    return pressure / (R_AIR * temperature)


def density_ratio(air_density: Number) -> Number:
    """Density [kg/m3] as a ratio to the standard sea-level one [-]. Source: [1].

    >>> round(density_ratio(1.1), 6)
    0.897959
    """
    return air_density / RHO0


def density_altitude(air_density: Number) -> Number:
    """Altitude [m] in the standard atmosphere that has this air density [kg/m3]. Source: [1].

    >>> round(density_altitude(1.1116418), 1)
    1000.0
    """
    return T0 / LAPSE * (1.0 - (air_density / RHO0) ** (1.0 / DENSITY_EXPONENT))


def saturation_vapour_pressure(temperature: Number) -> Number:
    """Vapour pressure [Pa] of saturated air over water at a temperature [K]. Source: [2].

    >>> round(saturation_vapour_pressure(293.15), 0)
    2333.0
    """
    celsius = temperature - 273.15
    return 611.2 * np.exp(17.62 * celsius / (243.12 + celsius))


def vapour_pressure(temperature: Number, relative_humidity: Number) -> Number:
    """Vapour pressure [Pa] of air at a temperature [K] and relative humidity [fraction]. Source: [2].

    With a dew point, its own saturation vapour pressure is the vapour pressure.

    >>> round(vapour_pressure(303.15, 0.5), 1)
    2116.9
    """
    return relative_humidity * saturation_vapour_pressure(temperature)


def virtual_temperature(temperature: Number, pressure: Number, vapour: Number) -> Number:
    """Temperature [K] at which dry air has the density of the moist air.

    ``temperature`` [K], total ``pressure`` [Pa], ``vapour`` pressure [Pa]. Source: [2].

    >>> round(virtual_temperature(303.15, 101325.0, 2116.9), 2)
    305.56
    """
    return temperature / (1.0 - (1.0 - VAPOUR_RATIO) * vapour / pressure)
