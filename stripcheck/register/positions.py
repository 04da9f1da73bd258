"""Points of the Earth given by latitude and longitude: how far apart two are, and which of many lie close together.

Points are taken into cartesian coordinates on the ellipsoid of WGS 84, so that nothing is special at the poles and at the
date line. Source: constants of the World Geodetic System 1984 (from memory: NIMA TR8350.2); geodetic to cartesian
coordinates, textbook geodesy.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator
from itertools import combinations, pairwise, product

import numpy as np
from numpy.typing import NDArray

from stripcheck.register.runway_ends import EARTH_RADIUS

EQUATOR = 6_378_137.0  # [m] semi-major axis
FLATTENING = 1.0 / 298.257223563
CROWD = 60  # points in one cell from which each is compared with the next one only: a list with one place everywhere

Array = NDArray[np.float64]


def cartesian(latitude: Array, longitude: Array) -> Array:
    """Cartesian coordinates [m] of points at sea level, along a last axis of three; NaN where one is missing.

    Latitude and longitude [rad], arrays of one shape.

    >>> cartesian(np.array([0.0]), np.array([0.0])).tolist()
    [[6378137.0, 0.0, 0.0]]
    """
    oblateness = FLATTENING * (2.0 - FLATTENING)
    normal = EQUATOR / np.sqrt(1.0 - oblateness * np.sin(latitude) ** 2)
    across = normal * np.cos(latitude)
    up = normal * (1.0 - oblateness) * np.sin(latitude)
    return np.stack((across * np.cos(longitude), across * np.sin(longitude), up), axis=-1)


def distance(one: Array, other: Array) -> Array:
    """Distance [m] along the ground between points in cartesian coordinates [m], at sea level; NaN where one is missing.

    The chord is exact; the arc over it is that of a sphere, which is right to 2 mm in 55 km and rough (4 %) where the points
    are on opposite sides of the Earth.

    >>> ends = cartesian(np.radians([0.0, 0.0]), np.radians([0.0, 0.01]))
    >>> round(float(distance(ends[0], ends[1])), 2)
    1113.19
    """
    chord = np.sqrt(np.sum((one - other) ** 2, axis=-1))
    return np.asarray(2.0 * EARTH_RADIUS * np.arcsin(np.clip(0.5 * chord / EARTH_RADIUS, 0.0, 1.0)))


def close_pairs(points: Array, radius: float) -> Iterator[tuple[int, int]]:
    """Pairs of points nearer to each other than ``radius`` [m]: their indexes, the lesser first, each pair once.

    ``points``: cartesian [m], shape (n, 3); one with NaN has no neighbour. Of more than 60 points in a cube of the radius
    each is compared with the next one only. Method: cubes of the radius, each looked through with its neighbours.

    >>> list(close_pairs(np.array([[0.0, 0, 0], [900.0, 0, 0], [5.0, 0, 0]]), 10.0))
    [(0, 2)]
    """
    cells: dict[tuple[int, int, int], list[int]] = defaultdict(list)
    known = np.flatnonzero(np.isfinite(points).all(axis=-1))
    for index, cell in zip(known.tolist(), np.floor(points[known] / radius).astype(np.int64).tolist(), strict=True):
        cells[tuple(cell)].append(index)
    steps = [step for step in product((-1, 0, 1), repeat=3) if step > (0, 0, 0)]
    for cell, inside in cells.items():
        found = list(pairwise(inside) if len(inside) > CROWD else combinations(inside, 2))
        for step in steps:
            beside = cells.get((cell[0] + step[0], cell[1] + step[1], cell[2] + step[2]), [])
            found += product(inside[:CROWD], beside[:CROWD])
        if not found:
            continue
        ones, others = np.array(found).T
        for at in np.flatnonzero(np.sum((points[ones] - points[others]) ** 2, axis=-1) < radius**2):
            yield min(found[at]), max(found[at])
