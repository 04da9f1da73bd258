"""Name, elevation and type of airfields from an airports file, joined to a runway list by the identifier."""

from __future__ import annotations

import math
from pathlib import Path
from typing import NamedTuple

from stripcheck.errors import InputError
from stripcheck.register.limits import within_limits
from stripcheck.register.read_table import check_file, find_delimiter, find_encoding, text_rows
from stripcheck.register.safe_read import check_text
from stripcheck.units import to_si


class Airport(NamedTuple):
    """An airfield: name, elevation [m], type as the file spells it, latitude and longitude [rad].

    NaN = not given or not usable.
    """

    name: str
    elevation: float
    type: str
    latitude: float = math.nan
    longitude: float = math.nan


def read_airports(path: str | Path, wanted: set[str]) -> dict[str, Airport]:
    """Airfields of an airports file in the layout of the open data: columns ident, name, elevation_ft, type.

    ``wanted``: identifiers to keep; the rest of the file is passed over. Raises InputError when the file
    can't be read or one of the columns is missing; latitude_deg and longitude_deg may be missing. A number that is none,
    or one outside of the limits of ``limits.LIMITS``, counts as not given.

    >>> read_airports("no such airports.csv", set())
    Traceback (most recent call last):
    ...
    stripcheck.errors.InputError: no such airports.csv: there is no such file
    """
    path = Path(path)
    check_file(path, "airports file")
    check_text(path)
    encoding = find_encoding(path)
    rows = text_rows(path, encoding, find_delimiter(path, encoding))
    header = [cell.strip().lower() for cell in next(rows, [])]
    missing = [name for name in ("ident", "name", "elevation_ft", "type") if name not in header]
    if missing:
        raise InputError(
            f'{path.name}: there is no column "{missing[0]}"; ident, name, elevation_ft and type are needed'
        )
    places = [header.index(name) for name in ("ident", "name", "elevation_ft", "type")]
    ident_at = places[0]
    where = [header.index(name) if name in header else len(header) for name in ("latitude_deg", "longitude_deg")]
    found = {}
    for row in rows:
        if len(row) > max(places) and row[ident_at].strip() in wanted:
            ident, name, elevation, kind = (row[place].strip() for place in places)
            latitude, longitude = (row[place] if place < len(row) else "" for place in where)
            found[ident] = Airport(name, _number(elevation, "ft", "elevation"), kind, _number(latitude, "°", "latitude"),
                                   _number(longitude, "°", "longitude"))  # fmt: skip
    return found


def _number(text: str, unit: str, key: str) -> float:
    try:
        number = to_si(float(text), unit)
    except ValueError:
        return math.nan
    return number if within_limits(key, number) else math.nan
