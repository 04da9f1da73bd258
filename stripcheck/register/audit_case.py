"""What the checks of an audit share: the list as read, what follows from it, and how a check tells what it found."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from stripcheck.register.audit_kinds import Kind
from stripcheck.register.columns import COLUMNS
from stripcheck.register.positions import cartesian, distance
from stripcheck.register.reader import Reading
from stripcheck.units import KINDS, tidy, unit_scale

Array = NDArray[np.float64]

HEADER = -1  # index of the header row, which belongs to no runway
NOISE = 1e-5  # [degrees] coordinates that went through 32-bit floats are off by this much
FINEST = 4  # decimals of a degree (11 m) beyond which rounding does not matter here
DEGREE = 111_320.0  # [m] one degree of a great circle, for the rounding of coordinates

_QUANTITIES = {column.key: column.kind for column in COLUMNS if column.kind in KINDS}
_DIGITS = {"slope": 1, "speed": 0, "pressure": 0, "temperature": 0}


class Hit(NamedTuple):
    """Something found: index of the runway (``HEADER`` = header row), key and end of its column, and what is wrong.

    ``key``: "" for the whole row. ``fix``: suggested correction, "" where none can be given.
    """

    at: int
    key: str
    end: int
    kind: Kind
    what: str
    fix: str = ""


Hits = Iterator[Hit]


@dataclass(frozen=True)
class Case:
    """A list under audit, with what several checks need; arrays have one entry for each runway, SI, NaN = not known."""

    reading: Reading

    def number(self, key: str, end: int = 0) -> Array:
        """Numbers of a column as read."""
        return self.reading.runways.number(key, end)

    def cell(self, index: int, key: str, end: int = 0) -> object:
        """The cell of a runway as it stands in the list, None when the list doesn't have the column."""
        cells = self.reading.runways.cells(key, end)
        return None if cells is None else cells[index]

    def has(self, key: str) -> bool:
        """Whether the list has a column with that key, for the runway or an end of it."""
        return any(name == key for name, _ in self.reading.runways.found)

    @cached_property
    def kept(self) -> list[int]:
        """Indexes of the runways that are not left out."""
        return [index for index, reason in enumerate(self.reading.reasons) if reason is None]

    @cached_property
    def length(self) -> Array:
        """Length between the ends [m]."""
        return self.number("length")

    @cached_property
    def slope(self) -> Array:
        """Mean slope from end 1 to end 2 [-]: given, else from the elevations of the ends, as the assessment takes it."""
        given = self.reading.numbers["slope_given"][0]
        return np.where(np.isnan(given), self.slope_of_ends, given)

    @cached_property
    def slope_of_ends(self) -> Array:
        """Slope from end 1 to end 2 [-] by their elevations."""
        rise = self.number("elevation", 2) - self.number("elevation", 1)
        return np.divide(rise, self.length, out=np.full_like(rise, np.nan), where=self.length > 0.0)

    @cached_property
    def ends(self) -> tuple[Array, Array]:
        """Both ends in cartesian coordinates [m], shape (n, 3)."""
        one, other = (cartesian(self.number("latitude", end), self.number("longitude", end)) for end in (1, 2))
        return one, other

    @cached_property
    def apart(self) -> Array:
        """Distance between the ends by their coordinates [m]."""
        return distance(*self.ends)

    @cached_property
    def rounding(self) -> Array:
        """How far the distance between the ends may be off because their coordinates are rounded [m]."""
        degrees = np.degrees([self.number(key, end) for key in ("latitude", "longitude") for end in (1, 2)])
        decimals = np.zeros(len(self.length))
        for count in range(FINEST):
            decimals += (np.abs(degrees - np.round(degrees, count)) > NOISE).any(axis=0)
        return np.asarray(np.sqrt(2.0) * DEGREE * 10.0**-decimals)

    @cached_property
    def airfields(self) -> Array:
        """Positions of the airfields by the airports file, cartesian [m], shape (n, 3)."""
        places = [(field.latitude, field.longitude) if field else (np.nan, np.nan) for field in self.reading.known]
        latitude, longitude = np.array(places, dtype=float).reshape(-1, 2).T
        return cartesian(latitude, longitude)

    @cached_property
    def places(self) -> Array:
        """Where each strip lies, cartesian [m]: the middle of its coordinates, else its airfield."""
        one, other = self.ends
        known_one, known_other = np.isfinite(one), np.isfinite(other)
        middle = np.where(known_one & known_other, 0.5 * (one + other), np.where(known_one, one, other))
        return np.where(np.isnan(middle), self.airfields, middle)

    def shown(self, key: str, value: float, end: int = 0) -> str:
        """A value [SI] as the list would write it: in the unit of its column, "2,300 ft"."""
        found = self.reading.runways.found
        item = found.get((key, end)) or found.get((key, 0)) or next((found[at] for at in found if at[0] == key), None)
        kind = _QUANTITIES[key]
        unit = (item.unit if item else "") or KINDS[kind][0]
        factor, offset = unit_scale(unit, kind)
        number = tidy((float(value) - offset) / factor)
        if kind == "angle":
            return f"{round(number) % 360:03d}°"
        digits = 2 if unit.lower() in ("inhg", "in hg") else _DIGITS.get(kind, 0)
        return f"{number:,.{digits}f} {unit}"
