"""Slope profile of a strip: heights at distances along it, from one end to the other.

A profile is written as points "distance:height", such as "0:0, 200:3.5, 450:12": distances from one end of the strip,
heights above that end, in metres unless a point says otherwise ("650 ft: 11 ft"). Between two points the ground is
taken as straight. Distances are measured along the strip as its length is.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import isfinite, isnan
from typing import Any

import numpy as np
from numpy.typing import NDArray

from stripcheck.errors import InputError
from stripcheck.units import read_quantity

Floats = Sequence[float] | NDArray[np.float64]

MOST_POINTS = 30
STEEPEST = 0.30  # fraction: beyond any strip in use
ROUNDING = 1e-9  # slopes nearer to each other than this are the same
# How far a profile's last point may lie from the far end of the strip: 2 % of its length, and 10 m in any case, which
# is what pacing and rounding leave. Common practice, no source.
LENGTH_SHARE, LENGTH_SLACK = 0.02, 10.0
EXAMPLE = '"0:0, 200:3.5, 450:12"'


@dataclass(frozen=True)
class Profile:
    """Heights [m] above the first point at distances [m] from it, along the strip.

    Raises InputError where the points can't be a profile: fewer than two or more than 30, not beginning with 0:0,
    distances that do not rise, a part steeper than 30 %.

    >>> Profile((0.0, 200.0, 450.0), (0.0, 3.5, 12.0)).reversed().heights
    (0.0, -8.5, -12.0)
    """

    distances: tuple[float, ...]
    heights: tuple[float, ...]

    def __post_init__(self) -> None:
        count = len(self.distances)
        if count != len(self.heights) or not all(map(isfinite, (*self.distances, *self.heights))):
            raise InputError(f"a profile needs a distance and a height at every point, such as {EXAMPLE}")
        if not 2 <= count <= MOST_POINTS:
            raise InputError(f"a profile has 2 to {MOST_POINTS} points, this one has {count}; write for example {EXAMPLE}")
        if self.distances[0] or self.heights[0]:
            raise InputError(
                f"a profile begins with 0:0, this one with {_point(self.distances[0], self.heights[0])}; distances count "
                "from the first end, heights from the ground there"
            )
        for (near, low), (far, high) in pairwise(zip(self.distances, self.heights, strict=True)):
            if far <= near:
                raise InputError(f"the distances of a profile must rise from point to point; {far:g} m comes after {near:g} m")
            if abs(high - low) > (STEEPEST + ROUNDING) * (far - near):
                raise InputError(
                    f"the profile has {(high - low) / (far - near):.1%} of slope between {near:g} m and {far:g} m, more than "
                    f"{STEEPEST:.0%}; check both points"
                )

    def __str__(self) -> str:
        """As `read_profile` reads it, to the micrometre."""
        return ", ".join(map(_point, self.distances, self.heights))

    @property
    def length(self) -> float:
        """Distance [m] of the last point."""
        return self.distances[-1]

    @property
    def slopes(self) -> tuple[float, ...]:
        """Slope [-] of each part, positive uphill."""
        points = zip(self.distances, self.heights, strict=True)
        return tuple((high - low) / (far - near) for (near, low), (far, high) in pairwise(points))

    @property
    def mean_slope(self) -> float:
        """Slope [-] from the first point to the last, positive uphill."""
        return self.heights[-1] / self.distances[-1]

    @property
    def steepest(self) -> float:
        """Greatest slope [-] of any part, without sign."""
        return max(map(abs, self.slopes))

    def reversed(self) -> Profile:
        """The profile as met from the other end."""
        return Profile(
            tuple(self.length - distance for distance in self.distances[::-1]),
            tuple(height - self.heights[-1] for height in self.heights[::-1]),
        )

    def without_straight_points(self) -> Profile:
        """The profile without the points at which the slope does not change, so that a straight one is one part."""
        slopes = self.slopes
        kept = [0, *(i for i, (one, other) in enumerate(pairwise(slopes), 1) if abs(other - one) > ROUNDING), len(slopes)]
        return Profile(tuple(self.distances[i] for i in kept), tuple(self.heights[i] for i in kept))


def read_profile(text: str) -> Profile:
    """The profile that a text stands for.

    Points are parted by commas, semicolons or strokes. A bare number is in metres. With semicolons or strokes a decimal
    comma is understood. Raises InputError with what is wrong and what would be right.

    >>> read_profile("0:0; 650 ft: 10 ft; 450:12").distances
    (0.0, 198.12, 450.0)
    """
    mark = next((mark for mark in ";/" if mark in text), ",")
    points = [_read_point(part) for part in text.split(mark) if part.strip()]
    return Profile(tuple(distance for distance, _ in points), tuple(height for _, height in points))


def _read_point(text: str) -> tuple[float, float]:
    parts = text.split(":")
    try:
        distance, height = (read_quantity(part, "length") for part in parts)
    except (InputError, ValueError):  # a part that is no length; more or fewer than two parts
        distance = height = np.nan
    if isnan(distance) or isnan(height):
        raise InputError(
            f'"{text.strip()}" is not a point of a profile; write distance:height with a decimal point, such as {EXAMPLE}'
        )
    return distance, height


def _point(distance: float, height: float) -> str:
    return ":".join(f"{round(number, 6) + 0.0:.12g}" for number in (distance, height))  # + 0.0 takes the sign from a zero


def check_length(profile: Profile, length: float, usable: float) -> None:
    """Raise InputError where a profile does not reach from end to end of a strip.

    ``length`` [m] of the strip; ``usable`` [m] of it at the most, which counts where the length is not known. NaN is
    "not known", and then anything fits.

    >>> check_length(Profile((0.0, 400.0), (0.0, 8.0)), 600.0, 600.0)
    Traceback (most recent call last):
    ...
    stripcheck.errors.InputError: the profile ends at 400 m but the strip at 600 m; give the heights from end to end
    """
    whole = usable if isnan(length) else length
    slack = max(LENGTH_SHARE * whole, LENGTH_SLACK)
    if whole - profile.length > slack or (profile.length - length > slack):
        raise InputError(
            f"the profile ends at {profile.length:g} m but the strip at {whole:g} m; give the heights from end to end"
        )


def profile_column(column: Any, lengths: Floats, usable: Floats) -> list[Profile | None]:
    """The profiles of a column, None where there is none; each from the end where its row's direction begins.

    ``column``: texts, profiles or blanks, one for each row, or one of them for all rows; ``lengths`` and ``usable`` [m]
    as for `check_length`, one for each row. Raises InputError with the row.

    >>> profile_column(["0:0, 450:9", ""], [450.0, 600.0], [450.0, 600.0])
    [Profile(distances=(0.0, 450.0), heights=(0.0, 9.0)), None]
    """
    alone = column is None or isinstance(column, str | Profile)
    cells = [column] * len(lengths) if alone else list(column)
    profiles = []
    for row, (cell, length, most) in enumerate(zip(cells, lengths, usable, strict=True), 1):
        try:
            profiles.append(_profile_of(cell))
            if profiles[-1] is not None:
                check_length(profiles[-1], float(length), float(most))
        except InputError as error:
            raise InputError(f"strips: profile, row {row}: {error}") from None
    return profiles


def local_slopes(own: Any, profiles: Sequence[Profile | None]) -> np.ndarray:
    """Greatest local slope [-] of each row: the one given, or the steepest part of the profile where that is more.

    >>> local_slopes(np.array([np.nan, 0.01]), [None, Profile((0.0, 450.0), (0.0, 9.0))])
    array([ nan, 0.02])
    """
    steepest = np.array([np.nan if profile is None else profile.steepest for profile in profiles])
    return np.asarray(np.fmax(own, steepest))


def _profile_of(cell: Any) -> Profile | None:
    if cell is None or isinstance(cell, Profile):
        return cell
    if isinstance(cell, float) and isnan(cell):
        return None
    if not isinstance(cell, str):
        raise InputError(f"{cell} is not a profile; write a text such as {EXAMPLE}")
    return read_profile(cell) if cell.strip() else None
