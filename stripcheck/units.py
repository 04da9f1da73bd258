"""Units at the edges: what a user types becomes SI, and SI becomes what a user reads.

Inside stripcheck every number is SI (m, m/s, kg, K, Pa, rad, fractions). A bare number is read in the default
unit of its kind; a text such as ``"2300 ft"`` is read with pint, which is imported only when such a text comes.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import cache

from stripcheck.errors import InputError
from stripcheck.numeric import Number


@dataclass(frozen=True)
class Unit:
    """A unit as the sheets show it: ``SI = shown * factor + offset``."""

    shown: str
    factor: float = 1.0
    offset: float = 0.0


UNITS = {
    unit.shown: unit
    for unit in (
        Unit("m"),
        Unit("ft", 0.3048),
        Unit("km", 1000.0),
        Unit("nm", 1852.0),
        Unit("m/s"),
        Unit("kt", 1852.0 / 3600.0),
        Unit("km/h", 1.0 / 3.6),
        Unit("kg"),
        Unit("lb", 0.45359237),
        Unit("K"),
        Unit("°C", 1.0, 273.15),
        Unit("Pa"),
        Unit("hPa", 100.0),
        Unit("inHg", 3386.388640341),
        Unit("%", 0.01),
        Unit("ft/min", 0.3048 / 60.0),
        Unit("%/kt", 0.01 * 3600.0 / 1852.0),
        Unit("°", math.pi / 180.0),
        Unit("kW", 1000.0),
        Unit("m²"),
        Unit("s"),
        Unit("N"),
        Unit("m/s²"),
        Unit("W"),
        Unit("kg/m³"),
        Unit(""),
    )
}

# kind of quantity -> (default unit of a bare number, the pint unit that SI means for that kind)
KINDS = {
    "length": ("m", "meter"),
    "altitude": ("ft", "meter"),
    "speed": ("kt", "meter/second"),
    "mass": ("kg", "kilogram"),
    "temperature": ("°C", "kelvin"),
    "temperature difference": ("K", "delta_degC"),
    "pressure": ("hPa", "pascal"),
    "slope": ("%", "dimensionless"),
    "humidity": ("%", "dimensionless"),
    "angle": ("°", "radian"),
    "power": ("kW", "watt"),
    "area": ("m²", "meter**2"),
    "time": ("s", "second"),
    "climb": ("ft/min", "meter/second"),
    "number": ("", "dimensionless"),
}

# units that measure the same, so that one can be typed where another is the default
_ALIKE = (("m", "ft", "km", "nm"), ("m/s", "kt", "km/h"), ("kg", "lb"), ("Pa", "hPa", "inHg"))

# spellings that pint does not know, or knows as something else ("nm" is a nanometre to it)
_SPELLINGS = {
    "°c": "degC", "deg c": "degC", "degc": "degC", "c": "degC", "celsius": "degC",
    "°f": "degF", "deg f": "degF", "degf": "degF", "f": "degF", "fahrenheit": "degF", "k": "kelvin",
    "ft": "foot", "feet": "foot", "'": "foot", "m": "meter", "metres": "meter", "metre": "meter",
    "nm": "nautical_mile", "nmi": "nautical_mile", "kt": "knot", "kts": "knot", "kn": "knot", "knots": "knot",
    "km/h": "kilometer/hour", "kmh": "kilometer/hour", "kph": "kilometer/hour", "mph": "mile/hour",
    "lbs": "pound", "lb": "pound", "kg": "kilogram", "kgs": "kilogram", "hp": "horsepower", "shp": "horsepower",
    "inhg": "inch_Hg_32F", "in hg": "inch_Hg_32F", "hpa": "hectopascal", "mb": "millibar", "mbar": "millibar",
    "%": "percent", "pct": "percent", "percent": "percent", "per cent": "percent",
    "°": "degree", "deg": "degree", "degt": "degree", "°t": "degree", "degrees": "degree",
    "m²": "meter**2", "m2": "meter**2", "sq m": "meter**2", "ft²": "foot**2", "ft2": "foot**2", "sq ft": "foot**2",
}  # fmt: skip

# What may be handed to pint: words, apart by blanks or strokes, and not many. It would work out "9**9**9**9" before it says
# no, and takes minutes over a word of a hundred thousand letters.
_UNIT_WORDS = re.compile(r"(?=.{1,60}\Z)[^\W\d_]+(?:[ /][^\W\d_]+)*")
_QUANTITY = re.compile(r"\s*([-+]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][-+]?\d+)?)\s*(.*?)\s*$")

WITHOUT_PINT = "without it a text may carry m, ft, km, nm, kt, km/h, kg, lb, °C, hPa, inHg, % or °"
MOST = 10**300  # a whole number beyond this does not fit a float
PRESSURE_HPA = (800.0, 1100.0)
PRESSURE_INHG = (24.0, 32.5)


def to_si(value: Number, unit: str) -> Number:
    """Value in SI of ``value`` [unit].

    >>> to_si(1000, "ft")
    304.8
    >>> to_si(15, "°C")
    288.15
    """
    entry = UNITS[unit]
    return value * entry.factor + entry.offset


def from_si(value: Number, unit: str) -> Number:
    """Value in ``unit`` of ``value`` [SI].

    >>> from_si(288.15, "°C")
    15.0
    """
    entry = UNITS[unit]
    return (value - entry.offset) / entry.factor


def tidy(value: float) -> float:
    """A number to twelve digits, as it is shown for typing over: without the noise of a conversion.

    >>> tidy(2300 * 0.3048 / 0.3048)
    2300.0
    """
    return float(f"{value:.12g}")


@cache
def unit_scale(spelling: str, kind: str) -> tuple[float, float]:
    """Factor and offset that take a number in the unit ``spelling`` to SI: ``SI = number * factor + offset``.

    Raises InputError when the unit is unknown or does not measure that kind of quantity.

    >>> unit_scale("ft", "length")
    (0.3048, 0.0)
    """
    default, si = KINDS[kind]
    shown = spelling.strip() or default
    if shown in UNITS and (shown == default or any(shown in row and default in row for row in _ALIKE)):
        return UNITS[shown].factor, UNITS[shown].offset
    registry = _registry()
    name = _SPELLINGS.get(shown.lower(), shown)
    if name == shown and not _UNIT_WORDS.fullmatch(shown):
        raise InputError(f'"{spelling}" is not a unit of {kind}; write for example "{_example(kind)}"')
    if kind == "temperature difference":
        name = {"degC": "delta_degC", "degF": "delta_degF", "kelvin": "delta_degC"}.get(name, name)
    try:
        zero = registry.Quantity(0.0, name).to(si).magnitude
        one = registry.Quantity(1.0, name).to(si).magnitude
    except Exception as error:  # pint raises many kinds of error for a unit that it cannot use
        raise InputError(f'"{spelling}" is not a unit of {kind}; write for example "{_example(kind)}"') from error
    return _clean(one - zero), _clean(zero)


@dataclass(frozen=True)
class BaseUnit:
    """A unit against the SI unit of its kind: ``SI = number * factor + offset``; ``kind`` tells which quantities match."""

    kind: str
    factor: float
    offset: float


@cache
def base_unit(spelling: str) -> BaseUnit:
    """Any unit that pint or this project knows. Raises InputError for one that neither does.

    >>> base_unit("ft").factor
    0.3048
    """
    name = _SPELLINGS.get(spelling.strip().lower(), spelling.strip())
    if not isinstance(spelling, str) or (name == spelling.strip() and not _UNIT_WORDS.fullmatch(name)):
        raise InputError(f'"{spelling}" is not a unit; write for example "ft" or "kg"')
    registry = _registry()
    try:
        zero = registry.Quantity(0.0, name).to_base_units()
        one = registry.Quantity(1.0, name).to_base_units()
    except Exception as error:  # pint raises many kinds of error for a unit that it cannot use
        raise InputError(f'"{spelling}" is not a unit; write for example "ft" or "kg"') from error
    return BaseUnit(str(one.dimensionality), _clean(one.magnitude - zero.magnitude), _clean(zero.magnitude))


def read_quantity(value: object, kind: str, unit: str = "") -> float:
    """Read a number or a text such as ``"2300 ft"`` as a quantity of ``kind`` in SI.

    A bare number is taken in ``unit``, or in the default unit of its kind when ``unit`` is empty. A bare pressure of
    800 to 1,100 is hPa and one of 24 to 32.5 is inHg; anything else is refused. A blank gives NaN.
    Raises InputError with what is wrong and what would be right.

    >>> read_quantity("1000 ft", "length")
    304.8
    >>> round(read_quantity(29.92, "pressure"), 3)
    101320.748
    """
    if value is None or (isinstance(value, str) and not value.strip()):
        return math.nan
    if isinstance(value, bool):
        raise InputError(f'"{value}" is not a number; write for example "{_example(kind)}"')
    if isinstance(value, int) and abs(value) > MOST:
        raise InputError(f'a whole number that long is no {kind}; write for example "{_example(kind)}"')
    number, spelling = (float(value), "") if isinstance(value, int | float) else _split(str(value), kind)
    if not math.isfinite(number):
        if isinstance(value, float) and math.isnan(number):
            return math.nan
        raise InputError(f'"{value}" is not a number; write for example "{_example(kind)}"')
    spelling = spelling or unit
    if kind == "pressure" and not spelling:
        return float(to_si(number, _pressure_unit(number)))
    factor, offset = unit_scale(spelling, kind)
    return float(number * factor + offset)


def _split(text: str, kind: str) -> tuple[float, str]:
    """Number and unit of a text; a comma is a thousands mark in "2,300" and a decimal one in "2,3" and "0,300"."""
    plain = text.strip().replace("\u00a0", " ").replace("\u2212", "-")
    plain = re.sub(r"(?<=\d)(?<!\b0)[, ](?=\d{3}(?!\d))", "", plain) if not re.search(r"\d\.\d*,", plain) else plain
    plain = re.sub(r"(?<=\d),(?=\d)", ".", plain)
    match = _QUANTITY.match(plain)
    if match is None:
        raise InputError(f'"{text}" is not a number; write for example "{_example(kind)}"')
    return float(match[1]), match[2]


def _pressure_unit(number: float) -> str:
    if PRESSURE_HPA[0] <= number <= PRESSURE_HPA[1]:
        return "hPa"
    if PRESSURE_INHG[0] <= number <= PRESSURE_INHG[1]:
        return "inHg"
    raise InputError(f"{number:g} is neither a pressure in hPa (800 to 1100) nor in inHg (24 to 32.5)")


def _example(kind: str) -> str:
    examples = {"length": "620 m", "altitude": "2300 ft", "speed": "12 kt", "mass": "1150 kg", "pressure": "1013 hPa"}
    return examples.get(kind, f"12 {KINDS[kind][0]}".strip())


def _clean(number: float) -> float:
    """Take the rounding noise of a conversion chain away, so that 1 ft is 0.3048 m exactly."""
    return float(f"{number:.13g}")


@cache
def _registry():  # type: ignore[no-untyped-def]  # pint is imported only when a unit text is met
    try:
        import pint
    except ImportError:
        raise InputError(f"this needs the Python package pint, which is not installed; {WITHOUT_PINT}") from None
    return pint.UnitRegistry()
