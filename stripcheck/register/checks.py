"""Values of a runway that contradict each other."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from stripcheck.errors import InputError
from stripcheck.profile import Profile, check_length
from stripcheck.register.runway_ends import which_end
from stripcheck.register.runways import Runways
from stripcheck.register.values import Fault, read_yes

GREATEST_END_TO_END = 0.30  # [fraction of the length] difference in elevation between the ends
SAME_SLOPE = 0.01  # [fraction] within which a profile agrees with a slope or with elevations; common practice, no source


def check_all(runways: Runways) -> None:
    """Add a fault for each contradiction between the numbers of a runway."""
    _check_thresholds(runways)
    _check_end_elevations(runways)
    _check_obstacles(runways)
    _check_profiles(runways)


def allowed_directions(runways: Runways, key: str) -> list[tuple[bool, bool]]:
    """Whether each direction may be used, from a one-way column: "land_towards" or "take_off_towards"."""
    cells = runways.cells(key)
    if cells is None:
        return [(True, True)] * runways.count
    allowed = []
    for index, cell in enumerate(cells):
        try:
            allowed.append(which_end(cell, runways.first[index], runways.second[index]))
        except InputError as error:
            allowed.append((True, True))
            runways.faults.append(Fault(index, runways.header(key), str(error)))
    return allowed


def check_one_way(runways: Runways, landing: list[tuple[bool, bool]], leaving: list[tuple[bool, bool]]) -> None:
    """A strip that is said to be one-way says which way to land and to leave."""
    for index, one_way in enumerate(runways.read_each("one_way", read_yes, None)):
        if one_way and (all(landing[index]) or all(leaving[index])):
            message = 'one-way, but not which way; fill the columns "Land on" and "Leave by", such as 09 and 27'
            runways.faults.append(Fault(index, runways.header("one_way"), message))


def _check_thresholds(runways: Runways) -> None:
    """A displaced threshold lies within the runway."""
    length = runways.number("length")
    for end in (1, 2):
        beyond = np.flatnonzero(runways.at_end("displaced", end) >= length)
        message = "the displaced threshold lies beyond the other end of the runway; check it and the length"
        _add(runways, beyond, "displaced", message, end)
        runways.unreadable.setdefault(("displaced", end), []).extend(int(index) for index in beyond)


def _check_end_elevations(runways: Runways) -> None:
    """The ends of a runway do not differ in elevation by more than 30 % of its length."""
    rise = np.abs(runways.number("elevation", 2) - runways.number("elevation", 1))
    steep = np.flatnonzero(rise > GREATEST_END_TO_END * runways.number("length"))
    _add(
        runways,
        steep,
        "elevation",
        "the two ends differ by more than 30 % of the length; check both and the length",
    )


def _check_obstacles(runways: Runways) -> None:
    """An obstacle has a height and a distance; a height of 0 without a distance says that there is none."""
    for end in (1, 2):
        height, distance = runways.at_end("obstacle_height", end), runways.at_end("obstacle_distance", end)
        no_distance = np.flatnonzero((height > 0.0) & np.isnan(distance))
        _add(runways, no_distance, "obstacle_height", "an obstacle needs a distance from the end too; add it", end)
        no_height = np.flatnonzero(np.isnan(height) & ~np.isnan(distance))
        _add(runways, no_height, "obstacle_distance", "an obstacle needs a height too; add it", end)


def _check_profiles(runways: Runways) -> None:
    """A profile reaches from end to end, and rises as much as the slope and the elevations of the ends say.

    One that was measured from the other end is found by this. One that can't be used is dropped.
    """
    length, usable = runways.number("length"), np.full(runways.count, np.nan)
    for key, end in (("usable", 0), ("tora", 1), ("tora", 2), ("lda", 1), ("lda", 2)):
        usable = np.fmax(usable, runways.at_end(key, end) if end else runways.number(key))
    between_ends = (runways.number("elevation", 2) - runways.number("elevation", 1)) / np.where(length > 0.0, length, usable)
    for index, profile in enumerate(runways.profiles):
        if profile is not None:
            try:
                check_length(profile, float(length[index]), float(usable[index]))
                _check_rise(profile, runways.number("slope")[index], "the slope")
                _check_rise(profile, between_ends[index], "the elevations of the ends")
            except InputError as error:
                runways.profiles[index] = None
                runways.faults.append(Fault(index, runways.header("profile"), str(error)))


def _check_rise(profile: Profile, slope: float, what: str) -> None:
    if abs(slope - profile.mean_slope) > SAME_SLOPE:
        raise InputError(
            f"the profile rises by {profile.mean_slope:.1%} from end to end, but {what} by {slope:.1%}; check both, and that "
            "the profile begins at the end named first"
        )


def _add(runways: Runways, indexes: NDArray[np.intp], key: str, message: str, end: int = 0) -> None:
    runways.faults += [Fault(int(index), runways.header(key, end), message) for index in indexes]
