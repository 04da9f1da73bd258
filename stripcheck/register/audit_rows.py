"""What the reader of lists already finds, as findings of an audit; what is missing; and what dates and notes tell."""

from __future__ import annotations

import datetime
import re

import numpy as np

from stripcheck.register import audit_kinds as kinds
from stripcheck.register.audit_case import HEADER, Case, Hit, Hits
from stripcheck.register.columns import near_misses
from stripcheck.register.direction_numbers import NEAR_DESIGNATOR
from stripcheck.register.reader import doubts_about_headers
from stripcheck.register.runway_ends import designator_degrees, opposed
from stripcheck.register.values import is_blank
from stripcheck.surface import CONDITIONS

DOWNHILL = 0.02  # slope from which the way of a one-way strip is settled by it; common practice, no source
OLDEST = datetime.date(1900, 1, 1)  # before this there were no strips
YEAR = 365.25  # days

# faults about more than one cell, by the key of their column
_FAULTS = {
    "displaced": kinds.DISPLACED_BEYOND, "elevation": kinds.ENDS_TOO_STEEP, "obstacle_height": kinds.HALF_OBSTACLE,
    "obstacle_distance": kinds.HALF_OBSTACLE, "profile": kinds.PROFILE_DISAGREES, "one_way": kinds.ONE_WAY_UNTOLD,
    "land_towards": kinds.WAY_UNKNOWN, "take_off_towards": kinds.WAY_UNKNOWN,
}  # fmt: skip
# doubts by their short kind: kind of finding, keys of the column that it is shown at, suggested correction
_DOUBTS = {
    "take-off length too long": (kinds.TORA_TOO_LONG, ("tora", "usable"), "check both, and their units"),
    "landing length too long": (kinds.LDA_TOO_LONG, ("lda",), "check it, the length and the displaced threshold"),
    "headings not opposite": (kinds.HEADINGS_NOT_OPPOSITE, ("heading",), "they differ by 180°; check both"),
    "designators not opposite": (kinds.NAMES_NOT_OPPOSITE, ("designator", "runway"), "their numbers differ by 18; check both"),
    "heading from designator": (kinds.HEADING_FROM_NAME, ("heading", "runway", "designator"), "add the true heading"),
    "heading far from designator": (kinds.HEADING_AGAINST_NAME, ("heading", "latitude", "runway"), "check both"),
    "heading not known": (kinds.NO_HEADING, ("heading", "runway"), "add the true heading"),
    "length not known": (kinds.NO_LENGTH, ("length", "usable", "tora"), "add the length"),
    "elevation not known": (kinds.NO_ELEVATION, ("elevation",), "add the elevation"),
    "strip not named": (kinds.NAMELESS, ("strip", "name"), "add an identifier"),
}  # fmt: skip

_ONE_WAY = re.compile(r"\bone[- ]?way\b", re.IGNORECASE)
_CLOSED = re.compile(r"\b(?:closed|disused|abandoned|out of use|unserviceable)\b", re.IGNORECASE)
_DAY_FIRST = re.compile(r"(\d{1,2})[./-](\d{1,2})[./-](\d{4})")
_MONTH_ONLY = re.compile(r"(?:(\d{4})-(\d{1,2})|(\d{1,2})[./](\d{4}))")
_YEAR_ONLY = re.compile(r"\d{4}")


def row_hits(case: Case, survey_age: float, today: datetime.date) -> Hits:
    """All findings of this module. ``survey_age`` [years]: limit for the age of a survey at the date ``today``."""
    yield from _headers(case)
    yield from _faults(case)
    yield from _doubts(case)
    yield from _surfaces(case)
    yield from _conditions(case)
    yield from _slopes(case)
    yield from _not_in_airports(case)
    yield from _one_way(case)
    yield from _notes(case)
    yield from _surveys(case, survey_age, today)


def _headers(case: Case) -> Hits:
    """Columns that are not understood, and units that are not named, in the header row."""
    runways = case.reading.runways
    unknown = near_misses(runways.table.headers)
    for doubt in doubts_about_headers(runways):
        named = doubt.what == "unit not named"
        fix = "write the unit into the header, such as [m] or [ft]" if named else "rename it, or leave it as it is"
        header = next((text for text in [*unknown, *runways.table.headers] if f'"{text}"' in doubt.reason), "")
        yield Hit(HEADER, header, 0, kinds.UNIT_NOT_NAMED if named else kinds.NOT_UNDERSTOOD, doubt.reason, fix)


def _faults(case: Case) -> Hits:
    runways = case.reading.runways
    place_of = {item.header: place for place, item in runways.found.items()}
    for number, fault in enumerate(runways.faults):
        key, end = place_of.get(fault.header, ("", 0))
        kind = kinds.BAD_VALUE if fault.header else kinds.TOO_WIDE
        if number >= case.reading.cell_faults:
            kind = _FAULTS.get(key, kinds.BAD_VALUE)
        what, _, fix = fault.message.rpartition("; ")
        yield Hit(fault.row_index, key, end, kind, what or fault.message, fix if what else "correct or clear the cell")


def _doubts(case: Case) -> Hits:
    for doubt in case.reading.doubts:
        if doubt.what in _DOUBTS:
            kind, keys, fix = _DOUBTS[doubt.what]
            places = [(key, end) for key in keys for end in (0, 1, 2) if (key, end) in case.reading.runways.found]
            given = [place for place in places if not is_blank(case.cell(doubt.row_index, *place))]
            if kind in (kinds.TORA_TOO_LONG, kinds.LDA_TOO_LONG):
                given.sort(key=lambda place: -np.nan_to_num(case.number(*place)[doubt.row_index]))
            key, end = next(iter(given or places), ("", 0))
            if kind is kinds.HEADING_AGAINST_NAME and _turned_round(case, doubt.row_index):
                fix = "the ends are exchanged, or named by where they lie: a name tells the direction flown"
            yield Hit(doubt.row_index, key, end, kind, _with_numbers(case, doubt.row_index, kind, doubt.reason), fix)


def _turned_round(case: Case, index: int) -> bool:
    """Whether a heading is about opposite to the runway's name."""
    named = np.radians(designator_degrees(case.reading.runways.first[index]))
    return bool(opposed(case.reading.numbers["heading"][0][[index]], np.array([named]), NEAR_DESIGNATOR)[0])


def _with_numbers(case: Case, index: int, kind: kinds.Kind, reason: str) -> str:
    """The sentence of a doubt, with the names and headings that it speaks of."""
    runways, numbers = case.reading.runways, case.reading.numbers
    if kind is kinds.HEADINGS_NOT_OPPOSITE:
        pair = (runways.at_end("heading", 1)[index], case.number("heading", 2)[index])
        return f"{reason}: {case.shown('heading', pair[0])} and {case.shown('heading', pair[1])}"
    if kind is kinds.NAMES_NOT_OPPOSITE:
        return f"{reason}: {runways.first[index]} and {runways.second[index]}"
    if kind is kinds.HEADING_AGAINST_NAME:
        return f"{reason}: {case.shown('heading', numbers['heading'][0][index])} for {runways.first[index]}"
    return reason


def _surfaces(case: Case) -> Hits:
    for index, surface in enumerate(case.reading.surfaces):
        if not surface.word:
            blank = surface.why == "no surface is given"
            kind = kinds.NO_SURFACE if blank else kinds.STRANGE_SURFACE
            fix = "add the surface" if blank else "write a word that stripcheck knows, such as grass or gravel"
            yield Hit(index, "surface", 0, kind, surface.why, fix)


def _conditions(case: Case) -> Hits:
    for index, condition in enumerate(case.reading.texts["condition"][0]):
        if condition not in ("", *CONDITIONS):
            what = f'"{condition}" is not a condition that stripcheck knows'
            yield Hit(index, "condition", 0, kinds.STRANGE_CONDITION, what, f"write {', '.join(CONDITIONS)} or nothing")


def _slopes(case: Case) -> Hits:
    profiles = case.reading.runways.profiles
    key, fix = ("slope", "add the slope") if case.has("slope") else ("elevation", "add the elevations of both ends")
    for index in np.flatnonzero(np.isnan(case.slope)).tolist():
        if profiles[index] is None:
            what = "no slope is known: neither given, nor the elevations of both ends and a length"
            yield Hit(index, key, 0, kinds.NO_SLOPE, what, fix)


def _not_in_airports(case: Case) -> Hits:
    if any(case.reading.known):
        for index, (field, strip) in enumerate(zip(case.reading.known, case.reading.runways.texts("strip"), strict=True)):
            if field is None and strip:
                what = f'the airports file has no "{strip}"'
                yield Hit(index, "strip", 0, kinds.NOT_IN_AIRPORTS, what, "check the identifier")


def _one_way(case: Case) -> Hits:
    """The ways of a one-way strip against its slope, and against each other."""
    texts = case.reading.texts
    landing, leaving = (list(zip(*texts[key], strict=True)) for key in ("land_here", "take_off_here"))
    for index, (land, leave) in enumerate(zip(landing, leaving, strict=True)):
        slope = float(case.slope[index])
        for ways, sign, key, words in ((land, 1.0, "land_towards", "one lands downhill"),
                                       (leave, -1.0, "take_off_towards", "one leaves uphill")):  # fmt: skip
            if ways == ("yes", "no") or ways == ("no", "yes"):
                along = slope if ways[0] == "yes" else -slope
                if sign * along < -DOWNHILL:
                    what = f"{words}, on a slope of {100.0 * abs(slope):.1f} %"
                    yield Hit(index, key, 0, kinds.DOWNHILL_LANDING, what, "check the way and the sign of the slope")
        if land == leave and land.count("yes") == 1:
            yield Hit(index, "take_off_towards", 0, kinds.SAME_WAY, "one lands and leaves the same way", "check both")


def _notes(case: Case) -> Hits:
    """What the notes say and the columns don't."""
    runways, texts = case.reading.runways, case.reading.texts
    both = [set(values) for values in zip(*texts["land_here"], *texts["take_off_here"], strict=True)]
    for index, note in enumerate(runways.texts("notes")):
        if both[index] == {"yes"} and _ONE_WAY.search(note) and not re.search(r"\bnot? one", note, re.IGNORECASE):
            fix = "tell which way one lands, and which way one leaves"
            yield Hit(index, "notes", 0, kinds.ONE_WAY_IN_NOTES, f"the notes say one-way: {_short(note)}", fix)
        if _CLOSED.search(note):
            fix = 'fill the column "Closed" if it is'
            yield Hit(index, "notes", 0, kinds.CLOSED_IN_NOTES, f"the notes speak of a closure: {_short(note)}", fix)


def _short(text: str) -> str:
    return f'"{text[:77]}..."' if len(text) > 80 else f'"{text}"'


def _surveys(case: Case, limit: float, today: datetime.date) -> Hits:
    if not case.has("survey_date"):
        return
    for index, text in enumerate(case.reading.runways.texts("survey_date")):
        if not text:
            yield Hit(index, "survey_date", 0, kinds.NO_SURVEY, "there is no date of a survey", "add it")
            continue
        dates = survey_dates(text)
        if not dates or min(dates) < OLDEST:
            what = f'"{text[:40]}" can\'t be read as a date'
            yield Hit(index, "survey_date", 0, kinds.STRANGE_SURVEY, what, "write it as 2025-04-30")
        elif min(dates) > today:
            what = f"the survey is dated {text}, which has not come yet"
            yield Hit(index, "survey_date", 0, kinds.FUTURE_SURVEY, what, "check the date")
        elif (age := (today - max(dates)).days / YEAR) > limit:
            what = f"the survey of {text} is {age:.1f} years old; the limit is {limit:g}"
            yield Hit(index, "survey_date", 0, kinds.OLD_SURVEY, what, "have the strip surveyed, or its figures confirmed")


def survey_dates(text: str) -> list[datetime.date]:
    """Every date that a text may mean; of a month or a year alone its last day; none when it can't be read.

    >>> survey_dates("2024-10-20"), survey_dates("2024")
    ([datetime.date(2024, 10, 20)], [datetime.date(2024, 12, 31)])
    >>> survey_dates("03/04/2024")
    [datetime.date(2024, 4, 3), datetime.date(2024, 3, 4)]
    """
    text = text.strip()
    try:
        return [datetime.datetime.fromisoformat(text).date()]
    except ValueError:
        pass
    if match := _DAY_FIRST.fullmatch(text):
        one, other, year = map(int, match.groups())
        dates = [_date(year, other, one), _date(year, one, other)]
        return [date for date in dates if date]
    if match := _MONTH_ONLY.fullmatch(text):
        year, month = int(match[1] or match[4]), int(match[2] or match[3])
        first = _date(year + month // 12, month % 12 + 1, 1) if 1 <= month <= 12 else None
        return [first - datetime.timedelta(days=1)] if first else []
    if _YEAR_ONLY.fullmatch(text) and (last := _date(int(text), 12, 31)):
        return [last]
    return []


def _date(year: int, month: int, day: int) -> datetime.date | None:
    try:
        return datetime.date(year, month, day)
    except ValueError:
        return None
