"""The two ends of a runway: their names, which of them is meant, and the headings that follow from them."""

from __future__ import annotations

import datetime
import math
import re
from functools import cache

import numpy as np
from numpy.typing import NDArray

from stripcheck.errors import InputError
from stripcheck.register.values import as_text, is_blank

EARTH_RADIUS = 6_371_009.0  # [m] mean radius of the Earth (from memory: IUGG 1980)

_POINTS = ("N", "NNE", "NE", "ENE", "E", "ESE", "SE", "SSE", "S", "SSW", "SW", "WSW", "W", "WNW", "NW", "NNW")
_COMPASS = {name: 22.5 * step for step, name in enumerate(_POINTS)}
_NUMBERED = re.compile(r"(\d{1,2})([A-Z]?)")
_HELIPAD = re.compile(r"H(\d{1,2}|[A-I])?[LR]?|PAD|HELIPAD")
_MONTH = re.compile(r"\b(jan|feb|mar|apr|may|jun|jul|aug|sep|oct|nov|dec)[a-z]*\b", re.IGNORECASE)
_OTHER_SIDE = {"L": "R", "R": "L"}


@cache
def tidy_designator(text: str) -> str:
    """A runway designator in one spelling: capitals, two digits, no "RWY".

    >>> tidy_designator("9l"), tidy_designator("Rwy 27"), tidy_designator(" ne ")
    ('09L', '27', 'NE')
    """
    plain = re.sub(r"^(RUNWAY|RWY)\s*", "", text.strip().upper())
    match = _NUMBERED.fullmatch(plain)
    return match[1].zfill(2) + match[2] if match else plain


def split_runway(cell: object) -> tuple[str, str]:
    """Names of the two ends in a runway cell: "09/27", "9-27", "NE/SW", or one of them only.

    The other end is worked out where only one is given and its name says the direction. Raises InputError
    where a spreadsheet has turned the runway into a date.

    >>> split_runway("09L/27R"), split_runway(9.0), split_runway("n - s"), split_runway("")
    (('09L', '27R'), ('09', '27'), ('N', 'S'), ('', ''))
    """
    if isinstance(cell, datetime.date) or _MONTH.search(as_text(cell)):
        raise InputError(
            f'"{as_text(cell)}" is a date: the spreadsheet has changed the runway; '
            'format the cell as text and type it again, for example "09/27"'
        )
    parts = [tidy_designator(part) for part in re.split(r"[/\\\u2013-]", as_text(cell))]
    if len(parts) == 1 and len(parts[0].split()) == 2:
        parts = [tidy_designator(part) for part in parts[0].split()]
    if len(parts) > 2:
        raise InputError(f'"{as_text(cell)}" names more than two ends; write one row for each runway, such as "09/27"')
    return name_both(parts[0], parts[1] if len(parts) == 2 else "")


def name_both(first: str, second: str) -> tuple[str, str]:
    """Both names, the missing one worked out from the other where that is possible.

    >>> name_both("18", ""), name_both("", "09R"), name_both("X", "")
    (('18', '36'), ('27L', '09R'), ('X', ''))
    """
    return first or opposite(second), second or opposite(first)


@cache
def opposite(designator: str) -> str:
    """Name of the other end of the runway, "" when the name doesn't say a direction.

    >>> opposite("09L"), opposite("36"), opposite("NW"), opposite("H1")
    ('27R', '18', 'SE', '')
    """
    degrees = designator_degrees(designator)
    if math.isnan(degrees):
        return ""
    if designator in _COMPASS:
        return next(name for name, bearing in _COMPASS.items() if bearing == (degrees + 180.0) % 360.0)
    letter = designator[2:]
    return f"{(int(designator[:2]) + 17) % 36 + 1:02d}{_OTHER_SIDE.get(letter, letter)}"


@cache
def designator_degrees(designator: str) -> float:
    """Direction [degrees] that a designator stands for, NaN when it stands for none; magnetic, to the nearest
    ten.

    >>> designator_degrees("09L"), designator_degrees("NE"), designator_degrees("37")
    (90.0, 45.0, nan)
    """
    match = _NUMBERED.fullmatch(designator)
    if match and 1 <= int(match[1]) <= 36:
        return int(match[1]) * 10.0
    return _COMPASS.get(designator, math.nan)


def names_from_heading(heading: float) -> tuple[str, str]:
    """Names of the ends of a runway that has none: from its true heading [rad] of end 1, else "A" and "B".

    >>> names_from_heading(math.radians(88)), names_from_heading(math.nan)
    (('09', '27'), ('A', 'B'))
    """
    if math.isnan(heading):
        return "A", "B"
    first = f"{(round(math.degrees(heading) / 10.0) - 1) % 36 + 1:02d}"
    return first, opposite(first)


def is_helipad(first: str, second: str) -> bool:
    """Whether the names are those of a helicopter pad: H1, HA, H, PAD...

    >>> is_helipad("H1", ""), is_helipad("09", "27")
    (True, False)
    """
    return bool(_HELIPAD.fullmatch(first) or _HELIPAD.fullmatch(second))


def which_end(cell: object, first: str, second: str) -> tuple[bool, bool]:
    """Which of the two directions a one-way cell allows: the one that it names, or both when it is blank.

    Raises InputError when it names neither.

    >>> which_end("9 only", "09", "27"), which_end("", "09", "27"), which_end("both", "09", "27")
    ((True, False), (True, True), (True, True))
    """
    if is_blank(cell):
        return True, True
    words = {tidy_designator(word) for word in re.split(r"[\s,/]+", as_text(cell))}
    words -= {"ONLY", "RWY", "RUNWAY", "AND", "OR"}
    if words in ({"BOTH"}, {"EITHER"}) or (words == {first, second} and first != second):
        return True, True
    if words in ({first}, {second}) and first != second:
        return words == {first}, words == {second}
    raise InputError(f'"{as_text(cell)}" is neither end of runway {first}/{second}; write "{first}" or "{second}"')


def bearings(
    latitude_1: NDArray[np.float64],
    longitude_1: NDArray[np.float64],
    latitude_2: NDArray[np.float64],
    longitude_2: NDArray[np.float64],
    length: NDArray[np.float64],
) -> NDArray[np.float64]:
    """True bearing [rad, 0 to 2 pi] from end 1 to end 2 of runways, NaN where it can't be told.

    Coordinates [rad] and lengths [m], arrays of one shape. It can't be told where a coordinate is missing, or
    where the ends lie less than half or more than one and a half times the length apart: then the coordinates
    are too rough. Source: initial great-circle bearing and haversine distance on a sphere, textbook
    navigation.

    >>> one = np.radians([0.0])
    >>> np.degrees(bearings(one, one, one, np.radians([0.01]), np.array([1100.0])))
    array([90.])
    """
    east = longitude_2 - longitude_1
    across = np.sin(east) * np.cos(latitude_2)
    along = np.cos(latitude_1) * np.sin(latitude_2) - np.sin(latitude_1) * np.cos(latitude_2) * np.cos(east)
    chord = np.sin((latitude_2 - latitude_1) / 2) ** 2 + np.cos(latitude_1) * np.cos(latitude_2) * np.sin(east / 2) ** 2
    distance = 2.0 * EARTH_RADIUS * np.arcsin(np.sqrt(np.clip(chord, 0.0, 1.0)))
    sure = (distance > 0.5 * length) & (distance < 1.5 * length)
    return np.where(sure, np.arctan2(across, along) % (2.0 * np.pi), np.nan)


def opposed(first: NDArray[np.float64], second: NDArray[np.float64], within: float) -> NDArray[np.bool_]:
    """Whether two headings [rad] are opposite to each other within an angle [rad]; False where one is
    missing.

    >>> opposed(np.array([0.0, 1.0]), np.array([np.pi, 1.0]), 0.1)
    array([ True, False])
    """
    return np.abs((first - second) % (2.0 * np.pi) - np.pi) <= within
