"""The registry of the spreadsheet functions: names, arguments, units, help, examples, and what each one calls.

Every door is made from this list: wizard texts, the code that a spreadsheet program calls, the LAMBDA names, the page
docs/functions.md and the tests. A function's name follows the prefix STRIP in every program.

``compute`` gets the arguments in SI, as numbers or arrays of one dimension, and gives the result in SI; a choice comes as
its number in the table [0, 1, ...], an aeroplane and a rule set as they were read. Functions of a chain step instead name
the step; their arguments are inputs of the chain.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from stripcheck import atmosphere, links, speeds
from stripcheck.doors import limits
from stripcheck.errors import InputError
from stripcheck.numeric import Number
from stripcheck.surface import CONDITIONS, GROUNDS, SURFACES
from stripcheck.units import base_unit

PREFIX = "STRIP"
REQUIRED = object()
BLANK = None  # default of an argument that may be left out and has no usual value
AIR, SITE, SPEEDS, DISTANCES, VERDICTS, LIMITS, CLIMB, TABLES = (
    "Air", "Wind and slope", "Speeds", "Distances", "Verdicts", "How far it goes", "Climb", "Tables and units",
)  # fmt: skip


@dataclass(frozen=True)
class Argument:
    """One argument: key, trade name, kind, help, and the value that stands for it where it is left out.

    ``key`` is its name in code too, so it is no word of VBA, Python or UNO (``stripcheck.doors.lint``).

    ``kind`` is one of ``stripcheck.units.KINDS`` (a number in that kind's usual unit, or a text with its own), or
    aircraft, rules, flap, surface, condition, or text.
    """

    key: str
    name: str
    kind: str
    help: str
    default: Any = REQUIRED

    @property
    def required(self) -> bool:
        return self.default is REQUIRED


@dataclass(frozen=True)
class Function:
    """One function. ``unit`` is that of the result where nothing else is asked for; "" for a plain number, None for a text.

    ``step`` is the chain's step that gives the result, or ``compute`` the function; ``example`` are arguments as a user
    types them.
    """

    name: str
    category: str
    help: str
    arguments: tuple[Argument, ...]
    unit: str | None
    example: tuple[Any, ...]
    compute: Callable[..., Any] | None = None
    step: str = ""
    ask: limits.Ask | None = None

    @property
    def full_name(self) -> str:
        """Name in Excel and of the LAMBDA.

        >>> FUNCTIONS[0].full_name
        'STRIP_PRESSURE_ALT'
        """
        return f"{PREFIX}_{self.name}"

    @property
    def described(self) -> str:
        """The help as a program shows it, with the unit of the result.

        >>> FUNCTIONS[0].described
        'Pressure altitude at an elevation under an altimeter setting. Result in ft, or in the unit asked for.'
        """
        return f"{self.help} Result in {self.unit}, or in the unit asked for." if self.unit else self.help

    @property
    def all_arguments(self) -> tuple[Argument, ...]:
        """The arguments, and at the end the unit of the result where it has one."""
        return (*self.arguments, UNIT) if self.unit else self.arguments


UNIT = Argument("unit", "Unit", "text", 'Unit of the result, such as "m" or "lb"; left out: the usual one', BLANK)
ELEVATION = Argument("elevation", "Elevation", "altitude", "Elevation of the strip [ft]")
QNH = Argument("qnh", "QNH", "pressure", "Altimeter setting [hPa, or inHg]")
TEMPERATURE = Argument("temperature", "Temperature", "temperature", "Outside air temperature [°C]")
HUMIDITY = Argument("humidity", "Humidity", "humidity", "Relative humidity [%]; left out: dry air", 0.0)
WIND_FROM = Argument("wind_from", "Wind from", "angle", "True direction that the wind comes from [°]")
WIND_SPEED = Argument("wind_speed", "Wind", "speed", "Wind speed [kt]")
HEADING = Argument("heading", "Heading", "angle", "True heading of the direction of movement [°]")
AIRCRAFT = Argument("aircraft", "Aircraft", "aircraft",
                    "Name or file of an aircraft card, or a range with the rows of an Aircraft sheet")  # fmt: skip
RULES = Argument("rules", "Rules", "rules",
                 "Name or file of a rule set, or a range with the rows of a Rules sheet")  # fmt: skip
MASS = Argument("mass", "Mass", "mass", "Mass [kg]")
FLAP = Argument("flap", "Flap", "flap", "Name of a flap setting of the card")
BANK = Argument("bank", "Bank", "angle", "Angle of bank [°]; left out: wings level", 0.0)
LENGTH = Argument("length", "Length", "length", "Usable length of the strip [m]")
SLOPE = Argument("slope", "Slope", "slope", "Mean slope in the direction of movement, uphill positive [%]")
SURFACE = Argument("surface", "Surface", "surface", f"One of: {', '.join(SURFACES)}")
CONDITION = Argument("condition", "Condition", "condition", f"One of: {', '.join(CONDITIONS)}; left out: dry", "dry")
HEAD = Argument("headwind", "Headwind", "speed", "Headwind component [kt], a tailwind negative; left out: calm", 0.0)
DISTANCE = Argument("distance", "Distance", "length", "Distance over 50 ft, without factor [m]")
HEIGHT = Argument("height", "Height", "altitude", "Height of the obstacle above the far end of the strip [ft]")
BEYOND = Argument("beyond", "Beyond", "length", "Distance of the obstacle beyond the far end of the strip [m]")

_AIR = (ELEVATION, QNH, TEMPERATURE)
_LOADED = (AIRCRAFT, MASS, FLAP)
_GROUND = (SLOPE, SURFACE)
_RUN = (*_LOADED, *_AIR, *_GROUND, CONDITION, HEAD)
_REQUIRED = (*_LOADED, *_AIR, *_GROUND, RULES, CONDITION, HEAD)
_FITS = (*_LOADED, LENGTH, *_AIR, *_GROUND, RULES, CONDITION, HEAD)
_LIMIT = (AIRCRAFT, FLAP, LENGTH, *_AIR, *_GROUND, RULES, CONDITION, HEAD)

_HOTTEST = (*_LOADED, LENGTH, ELEVATION, QNH, *_GROUND, RULES, CONDITION, HEAD)
_BEST = (AIRCRAFT, MASS, LENGTH, *_AIR, *_GROUND, RULES, CONDITION, HEAD)
_RUN_ON = (*_LOADED, LENGTH, *_AIR, *_GROUND, CONDITION, HEAD)

_EXAMPLE_RUN = ("ridge-runner", 1000, "10", 2400, 1008, 31, 1.5, "grass")
_EXAMPLE_LAND = ("ridge-runner", 1000, "30", 2400, 1008, 31, 1.5, "grass")
_EXAMPLE_REQUIRED = ("ridge-runner", 1000, "10", 2400, 1008, 31, 1.5, "grass", "part-cat-b")
_EXAMPLE_REQUIRED_LAND = ("ridge-runner", 1000, "30", 2400, 1008, 31, 1.5, "grass", "part-cat-b")
_EXAMPLE_FITS = ("ridge-runner", 1000, "10", 800, 2400, 1008, 31, 1.5, "grass", "part-cat-b")
_EXAMPLE_FITS_LAND = ("ridge-runner", 1000, "30", 800, 2400, 1008, 31, 1.5, "grass", "part-cat-b")
_EXAMPLE_LIMIT = ("ridge-runner", "10", 800, 2400, 1008, 31, 1.5, "grass", "part-cat-b")
_EXAMPLE_LIMIT_LAND = ("ridge-runner", "30", 600, 2400, 1008, 31, 1.5, "grass", "part-cat-b")
_EXAMPLE_HOTTEST = ("ridge-runner", 950, "10", 750, 2400, 1008, 1.5, "grass", "part-cat-b")
_EXAMPLE_HOTTEST_LAND = ("ridge-runner", 1000, "30", 640, 2400, 1008, 1.5, "grass", "part-cat-b")
_EXAMPLE_BEST = ("ridge-runner", 950, 800, 2400, 1008, 31, 1.5, "grass", "part-cat-b")
_EXAMPLE_RUN_ON = ("ridge-runner", 1000, "10", 420, 2400, 1008, 31, 1.5, "grass")


def _where_known(value: Number, *known: Number) -> Number:
    """A value where all is credible that it hangs on; the limits are those of an assessment."""
    for one in known:
        value = np.where(one, value, np.nan)
    return value


def _pressure_altitude(elevation: Number, qnh: Number) -> Number:
    altitude = atmosphere.pressure_altitude(atmosphere.station_pressure(qnh, elevation))
    return _where_known(altitude, links.place_known_of(elevation, qnh))


def _density(elevation: Number, qnh: Number, temperature: Number, humidity: Number) -> Number:
    pressure = atmosphere.station_pressure(qnh, elevation)
    vapour = atmosphere.vapour_pressure(temperature, humidity)
    density = atmosphere.density(pressure, atmosphere.virtual_temperature(temperature, pressure, vapour))
    known = links.place_known_of(elevation, qnh), links.air_known_of(temperature), links.known(humidity, (0.0, 1.0))
    return _where_known(density, *known)


def _density_altitude(elevation: Number, qnh: Number, temperature: Number, humidity: Number) -> Number:
    return atmosphere.density_altitude(_density(elevation, qnh, temperature, humidity))


def _density_ratio(elevation: Number, qnh: Number, temperature: Number, humidity: Number) -> Number:
    return atmosphere.density_ratio(_density(elevation, qnh, temperature, humidity))


def _slope(start: Number, end: Number, length: Number) -> Number:
    slope = (end - start) / length
    return _where_known(slope, links.known(length, links.LENGTHS), links.known(slope, links.SLOPES))


def _headwind(wind_from: Number, speed: Number, heading: Number) -> Number:
    return _where_known(speeds.headwind(speed, wind_from, heading), speed >= 0.0)


def _crosswind(wind_from: Number, speed: Number, heading: Number) -> Number:
    return _where_known(speeds.crosswind(speed, wind_from, heading), speed >= 0.0)


def _factored(side: str) -> Callable[..., Number]:
    def factored(distance: Number, rules: Any) -> Number:
        parts = ("factor", "factor_to", "factor_long", "factor_from")
        required = links.factored(distance, *(rules[f"{side}_{part}"] for part in parts))
        return _where_known(required, distance >= 0.0)

    return factored


def _friction(key: str) -> Callable[..., Number]:
    figures = np.array([getattr(ground, key) for ground in GROUNDS])

    def friction(surface: Number, condition: Number) -> Number:
        row = surface * len(CONDITIONS) + condition
        return np.where(np.isfinite(row), figures[np.nan_to_num(row).astype(int)], np.nan)

    return friction


def _converted(value: Number, of: str, to: str) -> Number:
    """By pint, whatever the kind of quantity. Raises InputError for units that it does not know or that don't match."""
    one, other = base_unit(of), base_unit(to)
    if one.kind != other.kind:
        raise InputError(f'"{of}" and "{to}" do not measure the same thing')
    return (value * one.factor + one.offset - other.offset) / other.factor


FUNCTIONS = (
    Function("PRESSURE_ALT", AIR, "Pressure altitude at an elevation under an altimeter setting.", (ELEVATION, QNH), "ft",
             (2400, 1008), _pressure_altitude),
    Function("DENSITY_ALT", AIR, "Density altitude, of dry air or with a humidity.", (*_AIR, HUMIDITY), "ft",
             (2400, 1008, 31), _density_altitude),
    Function("DENSITY_RATIO", AIR, "Air density over that of the standard atmosphere at sea level.", (*_AIR, HUMIDITY), "",
             (2400, 1008, 31), _density_ratio),
    Function("SLOPE", SITE, "Mean slope from the elevations of both ends and the length, uphill positive.",
             (Argument("start_elevation", "Elevation at start", "altitude",
                       "Elevation of the end where the movement starts [ft]"),
              Argument("end_elevation", "Elevation at end", "altitude", "Elevation of the far end [ft]"),
              Argument("length", "Length", "length", "Length of the strip between its ends [m]")), "%",
             (2380, 2410, 620), _slope),
    Function("HEADWIND", SITE, "Headwind component; a tailwind is negative.", (WIND_FROM, WIND_SPEED, HEADING), "kt",
             (310, 12, 270), _headwind),
    Function("CROSSWIND", SITE, "Crosswind component, without its side.", (WIND_FROM, WIND_SPEED, HEADING), "kt",
             (310, 12, 270), _crosswind),
    Function("STALL_SPEED", SPEEDS, "Stall speed at a mass, flap setting and bank, equivalent airspeed.", (*_LOADED, BANK),
             "kt", ("ridge-runner", 1000, "10", 30), step="stall_takeoff"),
    Function("LIFT_OFF_SPEED", SPEEDS, "Lift-off speed at a mass and flap setting, equivalent airspeed.", _LOADED, "kt",
             ("ridge-runner", 1000, "10"), step="lift_off_eas"),
    Function("APPROACH_SPEED", SPEEDS, "Approach speed at 50 ft at a mass and flap setting, equivalent airspeed.", _LOADED,
             "kt", ("ridge-runner", 1000, "30"), step="approach_eas"),
    Function("TAKEOFF_ROLL", DISTANCES, "Take-off ground roll, without factor.", _RUN, "m", _EXAMPLE_RUN,
             step="takeoff_roll"),
    Function("TAKEOFF_DIST", DISTANCES, "Take-off distance to 50 ft, without factor.", _RUN, "m", _EXAMPLE_RUN,
             step="takeoff_distance"),
    Function("LANDING_ROLL", DISTANCES, "Landing ground roll, without factor.", _RUN, "m", _EXAMPLE_LAND,
             step="landing_roll"),
    Function("LANDING_DIST", DISTANCES, "Landing distance from 50 ft, without factor.", _RUN, "m", _EXAMPLE_LAND,
             step="landing_distance"),
    Function("TAKEOFF_REQUIRED", DISTANCES, "Take-off distance to 50 ft that a rule set requires, with surface, slope and "
             "safety factor.", _REQUIRED, "m", _EXAMPLE_REQUIRED, step="takeoff_required"),
    Function("LANDING_REQUIRED", DISTANCES, "Landing distance from 50 ft that a rule set requires, with surface, slope and "
             "safety factor.", _REQUIRED, "m", _EXAMPLE_REQUIRED_LAND, step="landing_required"),
    Function("TAKEOFF_FACTORED", DISTANCES, "A take-off distance with the safety factor of a rule set.", (DISTANCE, RULES),
             "m", (620, "part-cat-b"), _factored("takeoff")),
    Function("LANDING_FACTORED", DISTANCES, "A landing distance with the safety factor of a rule set.", (DISTANCE, RULES),
             "m", (420, "part-cat-b"), _factored("landing")),
    Function("TAKEOFF_MARGIN", VERDICTS, "What a rule set leaves of the length for the take-off; negative: too short.",
             _FITS, "m", _EXAMPLE_FITS, step="takeoff_margin"),
    Function("LANDING_MARGIN", VERDICTS, "What a rule set leaves of the length for the landing; negative: too short.",
             _FITS, "m", _EXAMPLE_FITS_LAND, step="landing_margin"),
    Function("TAKEOFF_VERDICT", VERDICTS, "Verdict on the take-off: suitable, marginal, unsuitable or not assessed.",
             _FITS, None, _EXAMPLE_FITS, step="takeoff_verdict"),
    Function("TAKEOFF_REASON", VERDICTS, "What limits the take-off, in words.", _FITS, None, _EXAMPLE_FITS,
             step="takeoff_reason"),
    Function("LANDING_VERDICT", VERDICTS, "Verdict on the landing: suitable, marginal, unsuitable or not assessed.",
             _FITS, None, _EXAMPLE_FITS_LAND, step="landing_verdict"),
    Function("LANDING_REASON", VERDICTS, "What limits the landing, in words.", _FITS, None, _EXAMPLE_FITS_LAND,
             step="landing_reason"),
    Function("MOST_TAKEOFF_MASS", LIMITS, "Greatest mass at which the take-off is suitable.", _LIMIT, "kg",
             _EXAMPLE_LIMIT, ask=limits.most_mass("takeoff")),
    Function("MOST_LANDING_MASS", LIMITS, "Greatest mass at which the landing is suitable.", _LIMIT, "kg",
             _EXAMPLE_LIMIT_LAND, ask=limits.most_mass("landing")),
    Function("HOTTEST_TAKEOFF", LIMITS, "Hottest air in which the take-off is suitable.", _HOTTEST, "°C", _EXAMPLE_HOTTEST,
             ask=limits.hottest("takeoff")),
    Function("HOTTEST_LANDING", LIMITS, "Hottest air in which the landing is suitable.", _HOTTEST, "°C",
             _EXAMPLE_HOTTEST_LAND, ask=limits.hottest("landing")),
    Function("ABORT_POINT", LIMITS, "Last place along the strip from which a rejected take-off still stops on it, 3 s after "
             "the decision.", _RUN_ON, "m", _EXAMPLE_RUN_ON, ask=limits.abort_distance),
    Function("ABORT_SPEED", LIMITS, "Speed at the abort point, equivalent airspeed.", _RUN_ON, "kt", _EXAMPLE_RUN_ON,
             ask=limits.abort_speed),
    Function("BEST_TAKEOFF_FLAP", LIMITS, "Flap setting that leaves the most margin for the take-off, or none.", _BEST,
             None, _EXAMPLE_BEST, ask=limits.best_flap("takeoff")),
    Function("BEST_LANDING_FLAP", LIMITS, "Flap setting that leaves the most margin for the landing, or none.", _BEST,
             None, _EXAMPLE_BEST, ask=limits.best_flap("landing")),
    Function("CLIMB_GRADIENT", CLIMB, "Climb gradient in still air after take-off, at the speed of the 50 ft point.",
             (*_LOADED, *_AIR), "%", ("ridge-runner", 1000, "10", 2400, 1008, 31), step="climb_gradient"),
    Function("OVER_OBSTACLE", CLIMB, "Height over an obstacle on the climb-out, without factor; negative: into it.",
             (*_LOADED, LENGTH, *_AIR, *_GROUND, HEIGHT, BEYOND, CONDITION, HEAD), "ft",
             ("ridge-runner", 1000, "10", 800, 2400, 1008, 31, 1.5, "grass", 60, 400), step="over_obstacle"),
    Function("ROLLING", TABLES, "Rolling friction coefficient of a surface in a condition.", (SURFACE, CONDITION), "",
             ("grass", "wet"), _friction("rolling")),
    Function("BRAKING", TABLES, "Braking friction coefficient of a surface in a condition.", (SURFACE, CONDITION), "",
             ("grass", "wet"), _friction("braking")),
    Function("CONVERT", TABLES, "A value in another unit of the same kind.",
             (Argument("value", "Value", "number", "A number"),
              Argument("from_unit", "From unit", "text", 'Unit of the value, such as "ft"'),
              Argument("to_unit", "To unit", "text", 'Unit of the result, such as "m"')), "", (2400, "ft", "m"), _converted),
)  # fmt: skip

BY_NAME = {function.name: function for function in FUNCTIONS}
