"""Numbers of a runway that don't fit each other, or what is usual: found row by row, told with a suggestion.

Tolerances are wide enough that what is found is worth a person's time. Each is a named constant with its reason; none has
another source than common practice.
"""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np
from numpy.typing import NDArray

from stripcheck.atmosphere import isa_temperature, station_pressure
from stripcheck.register import audit_kinds as kinds
from stripcheck.register.audit_case import Array, Case, Hit, Hits
from stripcheck.register.checks import GREATEST_END_TO_END, SAME_SLOPE
from stripcheck.register.limits import LIMITS
from stripcheck.register.positions import cartesian, distance
from stripcheck.register.runway_ends import bearings, designator_degrees

LENGTH_SHARE = 0.05  # of the length: what paced or rounded lengths leave, and well within the least safety factor
LENGTH_LEAST = 20.0  # [m] the same for short strips
ONE_PLACE = 5.0  # [m] nearer than any two ends
FEET = 0.3048  # [m]
SAME_SIZE = 0.03  # of a value, within which another unit explains it
BEARING = np.radians(5.0)  # an error that changes a wind component by less than a tenth of the wind
MAGNETIC = np.radians(0.6)  # a heading this near to the runway's name times ten was copied from the name
ABOVE = 5.0  # [m] an end above the field elevation: more than rounding, and what another survey gives
BELOW_LEAST = 30.0  # [m] an end below the field elevation: runways of one field lie within this
BELOW_SHARE = 0.03  # of the length, on top of that
NEAR_SEA = 15.0  # [m] a field elevation up to which an end may lie at 0
FIELDS_APART = 15.0  # [m] two field elevations of one strip
FAR_AWAY = 10_000.0  # [m] an end from its airfield's reference point
HALF = 0.5  # of the length
STEEP = 0.15  # mean slope; the steepest strips in airline use have less than 0.20
PART_BELOW_MEAN = 0.002  # slope: rounding
NARROW = 5.0  # [m]
HOTTER, COLDER = 35.0, 50.0  # [K] off the standard temperature at the elevation
QNH_LEAST, QNH_MOST = 95_000.0, 105_500.0  # [Pa] seldom passed in a year anywhere
STATION = 1_500.0  # [Pa] a QNH this near to the standard pressure at the strip is likely that
HIGH_ENOUGH = 400.0  # [m] below this QNH and the pressure at the strip can't be told apart


def number_hits(case: Case) -> Hits:
    """All findings about numbers, one check after the other."""
    for check in (_lengths, _coordinates, _headings, _slopes, _elevations, _zero_elevations, _field_elevations, _far_ends,
                  _usable, _widths, _weather, _wind):  # fmt: skip
        yield from check(case)


def _lengths(case: Case) -> Hits:
    """The length against the distance between the coordinates of the ends, which may be those of displaced thresholds."""
    slack = np.maximum(LENGTH_LEAST, LENGTH_SHARE * case.length) + case.rounding
    displaced = sum(np.nan_to_num(case.reading.runways.at_end("displaced", end)) for end in (1, 2))
    possible = (case.apart > ONE_PLACE) & (case.apart <= LIMITS["length"].greatest)
    for kind, which in ((kinds.LENGTH_LONGER, case.length > case.apart + displaced + slack),
                        (kinds.LENGTH_SHORTER, case.length < case.apart - slack)):  # fmt: skip
        for index in _where(possible & which):
            length, apart = float(case.length[index]), float(case.apart[index])
            what = (f"the length is {case.shown('length', length)}, but by their coordinates the ends lie "
                    f"{case.shown('length', apart)} apart")  # fmt: skip
            fix = f"{case.shown('length', apart)}, if the coordinates are right{_other_unit(length, apart)}"
            yield Hit(index, "length", 0, kind, what, fix)


def _other_unit(one: float, other: float) -> str:
    """Remark when one of two numbers may be in metres and the other in feet."""
    for less, more in ((one, other), (other, one)):
        if abs(less / FEET - more) <= SAME_SIZE * abs(more):
            return "; one is 3.28 times the other: metres and feet may be mixed up"
    return ""


def _coordinates(case: Case) -> Hits:
    places = [(key, end) for end in (1, 2) for key in ("latitude", "longitude")]
    given = np.array([np.isfinite(case.number(*place)) for place in places])
    number = given.sum(axis=0)
    for index in _where((number > 0) & (number < len(places))):
        missing = [place for place, known in zip(places, given[:, index], strict=True) if not known]
        names = ", ".join(f"{key} of end {end}" for key, end in missing)
        yield Hit(index, *missing[0], kinds.HALF_COORDINATES, f"missing: {names}", "add it")
    for index in _where(case.apart <= ONE_PLACE):
        what = "the coordinates of both ends are the same, as when they are those of the airfield"
        yield Hit(index, "latitude", 1, kinds.ENDS_IN_ONE_PLACE, what, "take the coordinates of each end")
    for index in _where(case.apart > LIMITS["length"].greatest):
        what = f"by their coordinates the ends lie {case.apart[index] / 1000.0:,.1f} km apart"
        yield Hit(index, "latitude", 1, kinds.IMPOSSIBLE_ENDS, what, "check the coordinates of both ends")


def _headings(case: Case) -> Hits:
    """Headings that the list gives against the bearing between the coordinates."""
    start, stop = ((case.number("latitude", end), case.number("longitude", end)) for end in (1, 2))
    bearing = bearings(*start, *stop, case.length)
    apart = np.where(case.apart > ONE_PLACE, case.apart, np.nan)
    slack = BEARING + np.arctan2(case.rounding, apart)
    runways = case.reading.runways
    for index in _where(np.isfinite(bearing) & np.isfinite(slack)):
        for end, along in ((1, bearing[index]), (2, bearing[index] + np.pi)):
            heading = float(runways.at_end("heading", 1)[index] if end == 1 else case.number("heading", 2)[index])
            off = float(_turn(heading - along))
            if abs(off) > slack[index]:
                yield _heading_hit(case, index, end, heading, float(along), off)
                break


def _heading_hit(case: Case, index: int, end: int, heading: float, along: float, off: float) -> Hit:
    runways = case.reading.runways
    named = np.radians(designator_degrees((runways.first if end == 1 else runways.second)[index]))
    shown = case.shown("heading", along, end)
    what = f"the heading is {case.shown('heading', heading, end)}, but the bearing between the coordinates is {shown}"
    fix = f"{shown}, if the coordinates are right"
    if abs(abs(off) - np.pi) < BEARING:
        by_name = "exchange the coordinates of the ends" if abs(_turn(heading - named)) < np.pi / 2 else f"{shown} at this end"
        fix = f"one of them is told from the other end; by the runway's name: {by_name}"
    elif abs(_turn(heading - named)) < MAGNETIC:
        fix += "; the heading given looks like the runway's name times ten, which is magnetic"
    return Hit(index, "heading", end, kinds.HEADING_AGAINST_ENDS, what, fix)


def _slopes(case: Case) -> Hits:
    """The slope given against the elevations of the ends; the steepest part against the mean; and what is very steep."""
    given, of_ends, part = case.number("slope"), case.slope_of_ends, case.number("local_slope")
    for index in _where(np.abs(given - of_ends) > SAME_SLOPE):
        right = case.shown("slope", of_ends[index])
        what = f"the slope is {case.shown('slope', given[index])}, but the elevations of the ends make it {right}"
        fix = f"{right}, if the elevations are right"
        if abs(given[index] + of_ends[index]) <= SAME_SLOPE:
            fix += "; it looks as if the slope were told from the other end: positive rises from the end named first"
        yield Hit(index, "slope", 0, kinds.SLOPE_AGAINST_ENDS, what, fix)
    for index in _where(part < np.abs(case.slope) - PART_BELOW_MEAN):
        what = (f"the steepest part has {case.shown('local_slope', part[index])}, but the mean slope is "
                f"{case.shown('slope', abs(case.slope[index]))}")  # fmt: skip
        yield Hit(index, "local_slope", 0, kinds.LOCAL_BELOW_MEAN, what, "check both, and their units")
    for index in _where((np.abs(case.slope) > STEEP) & (np.abs(case.slope) <= GREATEST_END_TO_END)):
        key = "slope" if np.isfinite(given[index]) else "elevation"
        what = f"the mean slope is {100.0 * case.slope[index]:.1f} %"
        yield Hit(index, key, 0 if key == "slope" else 1, kinds.STEEP, what, "check the slope, the elevations and the length")


def _elevations(case: Case) -> Hits:
    """Elevations of the ends against that of the field, which is the highest point of its runways."""
    field = case.reading.numbers["elevation_field"][0]
    room = BELOW_LEAST + BELOW_SHARE * np.nan_to_num(case.length)
    for end in (1, 2):
        elevation = case.number("elevation", end)
        blank = _zeros(elevation, field)
        for kind, which in ((kinds.ABOVE_FIELD, elevation > field + ABOVE), (kinds.BELOW_FIELD, elevation < field - room)):
            for index in _where(which & ~blank):
                what = (f"end {end} is at {case.shown('elevation', elevation[index], end)}, the field at "
                        f"{case.shown('elevation', field[index])}")  # fmt: skip
                fix = f"check both{_other_unit(float(elevation[index]), float(field[index]))}"
                yield Hit(index, "elevation", end, kind, what, fix)


def _zeros(elevation: Array, field: Array) -> NDArray[np.bool_]:
    return np.asarray((elevation == 0.0) & (np.abs(field) > NEAR_SEA))


def _zero_elevations(case: Case) -> Hits:
    field = case.reading.numbers["elevation_field"][0]
    for end in (1, 2):
        for index in _where(_zeros(case.number("elevation", end), field)):
            what = f"end {end} is at 0, the field at {case.shown('elevation', field[index])}"
            yield Hit(index, "elevation", end, kinds.ZERO_ELEVATION, what, "leave the cell empty if it is not known")


def _field_elevations(case: Case) -> Hits:
    own = case.number("elevation")
    other = np.array([field.elevation if field else np.nan for field in case.reading.known], dtype=float)
    for index in _where(np.abs(own - other) > FIELDS_APART):
        right = case.shown("elevation", other[index])
        what = f"the list has {case.shown('elevation', own[index])}, the airports file {right}"
        fix = f"{right}, if the airports file is right{_other_unit(float(own[index]), float(other[index]))}"
        yield Hit(index, "elevation", 0, kinds.FIELD_AGAINST_AIRPORTS, what, fix)


def _far_ends(case: Case) -> Hits:
    """Ends far from the reference point of their airfield, with the slip that would explain it."""
    if not any(case.reading.known):
        return
    away = np.array([distance(ends, case.airfields) for ends in case.ends])
    far = away > FAR_AWAY
    for index in _where(np.asarray(far.any(axis=0))):
        end = int(np.nanargmax(away[:, index])) + 1
        which = "both ends lie" if far[:, index].all() else f"end {end} lies"
        what = f"{which} {away[end - 1, index] / 1000.0:,.0f} km from the airfield's place in the airports file"
        yield Hit(index, "latitude", end, kinds.FAR_FROM_FIELD, what, _slip(case, index, end))


def _slip(case: Case, index: int, end: int) -> str:
    """The slip of a pen that would bring an end back to its airfield."""
    latitude, longitude = float(case.number("latitude", end)[index]), float(case.number("longitude", end)[index])
    slips = (("the sign of the latitude changed", -latitude, longitude), ("the sign of the longitude changed", latitude,
             -longitude), ("latitude and longitude exchanged", longitude, latitude))  # fmt: skip
    for words, new_latitude, new_longitude in slips:
        place = cartesian(np.array(new_latitude), np.array(new_longitude))
        if distance(place, case.airfields[index]) < FAR_AWAY:
            return f"with {words} it would lie at the airfield"
    return "check the coordinates and the identifier"


def _usable(case: Case) -> Hits:
    for key, ends in (("usable", (0,)), ("tora", (0, 1, 2)), ("lda", (0, 1, 2))):
        for end in ends:
            usable = case.number(key, end)
            for index in _where(usable < HALF * case.length):
                what = (f"{case.shown(key, usable[index], end)} of {case.shown('length', case.length[index])} are usable")
                yield Hit(index, key, end, kinds.USABLE_SHORT, what, "check both, and their units")
    for end in (0, 1, 2):
        displaced = case.number("displaced", end)
        for index in _where((displaced > HALF * case.length) & (displaced < case.length)):
            what = (f"the threshold lies {case.shown('displaced', displaced[index], end)} in, on a strip of "
                    f"{case.shown('length', case.length[index])}")  # fmt: skip
            yield Hit(index, "displaced", end, kinds.FAR_DISPLACED, what, "check both, and their units")


def _widths(case: Case) -> Hits:
    width = case.number("width")
    if not case.has("width"):
        return
    for index in _where(np.isnan(case.reading.numbers["width"][0])):
        yield Hit(index, "width", 0, kinds.NO_WIDTH, "the width is not known", "add it")
    for index in _where(((width > 0.0) & (width < NARROW)) | (width > HALF * case.length)):
        what = f"the strip is {case.shown('width', width[index])} wide and {case.shown('length', case.length[index])} long"
        fix = "length and width may be exchanged" if width[index] > case.length[index] else "check both, and their units"
        yield Hit(index, "width", 0, kinds.ODD_WIDTH, what, fix)


def _weather(case: Case) -> Hits:
    """Temperature and QNH of the strip's own against what is usual at its elevation."""
    elevation = np.nan_to_num(case.reading.numbers["elevation_field"][0])
    temperature, qnh = case.number("temperature"), case.number("qnh")
    deviation = temperature - isa_temperature(elevation)
    for index in _where((deviation > HOTTER) | (deviation < -COLDER)):
        what = f"{case.shown('temperature', temperature[index])} is {abs(deviation[index]):.0f} K off the standard temperature"
        celsius = temperature[index] - 273.15
        as_fahrenheit = (celsius - 32.0) / 1.8
        usual = abs(as_fahrenheit + 273.15 - isa_temperature(elevation[index])) < HOTTER
        fix = f"{as_fahrenheit:.0f} °C, if the number is in °F" if usual else "check it, and its unit"
        yield Hit(index, "temperature", 0, kinds.ODD_TEMPERATURE, what, fix)
    for index in _where((qnh < QNH_LEAST) | (qnh > QNH_MOST)):
        standard = float(station_pressure(101_325.0, elevation[index]))
        is_station = elevation[index] > HIGH_ENOUGH and abs(qnh[index] - standard) < STATION
        fix = "this looks like the pressure at the strip (QFE); give the QNH" if is_station else "check it, and its unit"
        yield Hit(index, "qnh", 0, kinds.ODD_QNH, f"a QNH of {case.shown('qnh', qnh[index])} is hardly ever met", fix)


def _wind(case: Case) -> Hits:
    direction, speed = case.number("wind_from"), case.number("wind_speed")
    for index in _where(np.isfinite(direction) & np.isnan(speed)):
        what = "a wind direction without a speed takes the day's speed"
        yield Hit(index, "wind_from", 0, kinds.HALF_WIND, what, "add the speed")
    for index in _where(np.isnan(direction) & (speed > 0.0)):
        what = "a wind speed without a direction takes the day's direction"
        yield Hit(index, "wind_speed", 0, kinds.HALF_WIND, what, "add the direction")


def _turn(angle: float | Array) -> Array:
    """An angle [rad] between -pi and pi."""
    return np.asarray((np.asarray(angle) + np.pi) % (2.0 * np.pi) - np.pi)


def _where(truth: NDArray[np.bool_]) -> Iterable[int]:
    return [int(index) for index in np.flatnonzero(truth)]
