"""Numbers of the two directions of each runway: lengths, elevations, slopes, headings, obstacles, weather."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from stripcheck.register.runway_ends import bearings, designator_degrees, opposed
from stripcheck.register.runways import Runways

OPPOSED = np.radians(10.0)  # the two headings of one runway differ from 180 degrees by no more than this
SAME_NUMBER = np.radians(1.0)  # designators are whole tens of degrees; this is for rounding only
NEAR_DESIGNATOR = np.radians(45.0)  # magnetic variation and rounding; more points to a mistake

_REASONS = {
    "take-off length too long": "the usable length for take-off exceeds the runway, whose length is used",
    "landing length too long": "more is usable for landing than the threshold leaves; what it leaves is used",
    "headings not opposite": "the headings of the two ends are not opposite to each other",
    "designators not opposite": "the names of the two ends are not opposite to each other",
    "heading from designator": "the heading is from the runway's name: magnetic, to the nearest ten degrees",
    "heading far from designator": "the heading differs by more than 45 degrees from the runway's name",
    "heading not known": "the list gives no heading, no coordinates and no name of a direction",
    "length not known": "the list gives no length that can be used",
    "elevation not known": "neither the list nor an airports file gives an elevation",
}

Array = NDArray[np.float64]
Pair = tuple[Array, Array]  # of the direction that begins at end 1, and of the one that begins at end 2


class Doubt(NamedTuple):
    """Something missing or worked out: index of the runway [0 = first], short kind, and a sentence."""

    row_index: int
    what: str
    reason: str


def direction_numbers(runways: Runways, field: Array) -> tuple[dict[str, Pair], list[Doubt]]:
    """Numbers of both directions of each runway, and the doubts about them.

    ``field``: elevation of the airfields from the airports file [m], NaN = not known. Result: {key: arrays
    for the two directions}, the keys and units of ``Directions.numbers``; and the doubts.
    """
    doubts: list[Doubt] = []
    own_field = runways.number("elevation")
    field = np.where(np.isnan(own_field), field, own_field)
    same = {
        "source_row": np.array(runways.table.row_numbers, dtype=float),
        "length": runways.number("length"),
        "width": np.where(runways.number("width") == 0.0, np.nan, runways.number("width")),  # 0 stands for not known
        "elevation_field": field,
        "local_slope": runways.number("local_slope"),
        **{key: runways.number(key) for key in ("temperature", "qnh", "wind_from", "wind_speed")},
    }
    numbers: dict[str, Pair] = {key: (values, values) for key, values in same.items()}
    low, high = runways.number("elevation", 1), runways.number("elevation", 2)
    numbers["elevation_start"], numbers["elevation_end"] = (low, high), (high, low)
    numbers["slope_given"] = runways.number("slope"), -runways.number("slope")
    numbers["tora"] = _take_off_length(runways, 1, doubts), _take_off_length(runways, 2, doubts)
    numbers["lda"] = _landing_length(runways, 1, doubts), _landing_length(runways, 2, doubts)
    numbers["heading"] = _headings(runways, doubts)
    numbers |= _obstacles(runways)
    doubts += _missing(runways, numbers)
    return numbers, doubts


def _take_off_length(runways: Runways, end: int, doubts: list[Doubt]) -> Array:
    """Length for the take-off that begins at an end [m]: TORA, else the usable length, else the whole length."""
    length = runways.number("length")
    given = _first_known(runways.at_end("tora", end), runways.number("usable"))
    _doubt_if(given > length, "take-off length too long", doubts)
    usable = np.fmin(given, length)
    usable[_bad(runways, ("length", 0), ("usable", 0), ("tora", 0), ("tora", end))] = np.nan
    return usable


def _landing_length(runways: Runways, end: int, doubts: list[Doubt]) -> Array:
    """Length for the landing that begins over an end [m]: LDA, else the usable length, but no more than is
    left beyond the displaced threshold of that end.
    """
    displaced = runways.at_end("displaced", end)
    beyond = runways.number("length") - np.where(np.isnan(displaced), 0.0, displaced)
    given = _first_known(runways.at_end("lda", end), runways.number("usable"))
    own = runways.at_end("lda", end)
    _doubt_if(own > beyond, "landing length too long", doubts)
    usable = np.fmin(given, beyond)
    usable[np.isnan(beyond) & np.isnan(own) & (displaced > 0.0)] = np.nan  # no telling what the threshold leaves
    places = (("length", 0), ("usable", 0), ("lda", 0), ("lda", end), ("displaced", 0), ("displaced", end))
    usable[_bad(runways, *places)] = np.nan
    return usable


def _headings(runways: Runways, doubts: list[Doubt]) -> Pair:
    """True headings of both directions [rad]: given, else from coordinates, else from the designators."""
    given_1, given_2 = runways.at_end("heading", 1), runways.number("heading", 2)
    both = ~np.isnan(given_1) & ~np.isnan(given_2)
    _doubt_if(both & ~opposed(given_1, given_2, OPPOSED), "headings not opposite", doubts)
    start, stop = ((runways.number("latitude", end), runways.number("longitude", end)) for end in (1, 2))
    names_1, names_2 = (
        np.radians([designator_degrees(name) for name in names]) for names in (runways.first, runways.second)
    )
    named = ~np.isnan(names_1) & ~np.isnan(names_2)
    fits = opposed(names_1, names_2, SAME_NUMBER)
    _doubt_if(named & ~fits, "designators not opposite", doubts)
    first = _first_known(given_1, _turned(given_2), bearings(*start, *stop, runways.number("length")))
    from_names = np.isnan(first) & fits
    _doubt_if(from_names, "heading from designator", doubts)
    off = np.abs((first - names_1 + np.pi) % (2.0 * np.pi) - np.pi)
    _doubt_if(off > NEAR_DESIGNATOR, "heading far from designator", doubts)
    first = np.where(from_names, names_1, first)
    second = _first_known(given_2, _turned(first))
    _doubt_if(np.isnan(first), "heading not known", doubts)
    return first % (2.0 * np.pi), second % (2.0 * np.pi)


def _obstacles(runways: Runways) -> dict[str, Pair]:
    """Obstacles of both directions [m]: beyond the far end for take-off, before the near end for landing."""
    numbers: dict[str, Pair] = {}
    for key in ("obstacle_height", "obstacle_distance"):
        near, far = runways.at_end(key, 1), runways.at_end(key, 2)
        if key == "obstacle_height":
            near, far = (np.where(height == 0.0, np.nan, height) for height in (near, far))
        numbers[key] = far, near
        numbers[f"approach_{key}"] = near, far
    for prefix in (
        "",
        "approach_",
    ):  # a height of 0 says that there is no obstacle, and then there is no distance
        heights, distances = numbers[f"{prefix}obstacle_height"], numbers[f"{prefix}obstacle_distance"]
        first, second = (np.where(np.isnan(h), np.nan, d) for h, d in zip(heights, distances, strict=True))
        numbers[f"{prefix}obstacle_distance"] = first, second
    return numbers


def _missing(runways: Runways, numbers: dict[str, Pair]) -> list[Doubt]:
    """Doubts about lengths and elevations that the list doesn't give."""
    doubts: list[Doubt] = []
    no_length = np.isnan(numbers["tora"][0]) & np.isnan(numbers["lda"][0])
    no_length &= np.isnan(numbers["tora"][1]) & np.isnan(numbers["lda"][1])
    _doubt_if(no_length, "length not known", doubts)
    low, high = numbers["elevation_start"]
    nowhere = np.isnan(numbers["elevation_field"][0]) & np.isnan(low) & np.isnan(high)
    _doubt_if(nowhere, "elevation not known", doubts)
    return doubts


def _doubt_if(which: NDArray[np.bool_], what: str, doubts: list[Doubt]) -> None:
    doubts += [Doubt(int(index), what, _REASONS[what]) for index in np.flatnonzero(which)]


def _first_known(*choices: Array) -> Array:
    """The first of several arrays that is not NaN, element by element."""
    known = choices[0]
    for choice in choices[1:]:
        known = np.where(np.isnan(known), choice, known)
    return known


def _turned(heading: Array) -> Array:
    return (heading + np.pi) % (2.0 * np.pi)


def _bad(runways: Runways, *columns: tuple[str, int]) -> list[int]:
    """Indexes of the runways of which a cell in one of the columns can't be used: no length may follow from
    the rest.
    """
    return [index for column in columns for index in runways.unreadable.get(column, [])]
