"""A runway of a new list beside its row in a register: the cells that it would write, in the register's own words.

Cells that only make sense together, such as height and distance of an obstacle, come together. A blank of the new list writes
nothing; what can't be read, or has no column in the register, is told and not written.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import NamedTuple

import numpy as np

from stripcheck.errors import InputError
from stripcheck.profile import Profile, read_profile
from stripcheck.register.columns import COLUMNS
from stripcheck.register.matching import BY_IDENTIFIER, BY_STRIP, Match
from stripcheck.register.own_words import (
    Key,
    OwnWords,
    Quantity,
    Value,
    as_date,
    clean,
    clean_text,
    quantity,
    read_surface_pair,
    same_quantity,
    same_text,
)
from stripcheck.register.reader import Reading
from stripcheck.register.runway_ends import split_runway, tidy_designator, which_end
from stripcheck.register.runways import Runways
from stripcheck.register.surface_words import known_condition, worse_condition
from stripcheck.register.values import as_text, as_written, is_blank, read_yes
from stripcheck.units import unit_scale

SAME_POINT = 0.05  # [m] within which the points of two profiles are the same: half of the last digit that one is given with
COLUMN_NAMES = {column.key: column.words[0] for column in COLUMNS}

_WHOLE = ("length", "usable", "width", "local_slope", "temperature", "qnh")
_NOTHING = frozenset(("displaced", "obstacle_height", "width"))  # 0 says the same as a blank
_USABLE = frozenset(("usable", "tora", "lda"))  # as long as the runway says the same as a blank
_EITHER_WAY = _USABLE | {"displaced", "obstacle_height", "obstacle_distance"}  # one column may tell of both ends


class Write(NamedTuple):
    """A cell of the register to be written: position of its column [0 = first], the value, and how a text file holds it."""

    position: int
    value: Value
    text: str


class Part(NamedTuple):
    """A cell about which the new list tells something: its column, what stands there and what would, and what to write
    (None where it is the same)."""

    at: Key
    old: str
    new: str
    write: Write | None


@dataclass
class Told:
    """What is gathered while rows are compared: ``kept`` and ``lost`` count by header. ``unreadable``: the new list's cells
    that can't be used, by column."""

    unreadable: Mapping[Key, frozenset[int]]
    remarks: list[str] = field(default_factory=list)
    kept: Counter[str] = field(default_factory=Counter)
    lost: Counter[str] = field(default_factory=Counter)


def yes_or_no(cell: object) -> bool | None:
    """Yes or no, None for a blank and for what is neither."""
    try:
        return read_yes(cell)
    except InputError:
        return None


class _Unreadable(Exception):
    """A cell of the new list that can't be used; told where it is caught."""


class Row:
    """A runway of the new list beside its row in the register, or as a new one (``old`` None)."""

    def __init__(self, register: Reading, other: Reading, words: OwnWords, told: Told, old: int | None, new: int,
                 match: Match | None = None) -> None:  # fmt: skip
        self.register, self.other, self.words, self.told = register, other, words, told
        self.one, self.two, self.old, self.new, self.match = register.runways, other.runways, old, new, match
        self.turned = match.turned if match is not None else False
        self.lost: list[Key] = []  # what the register has no column for
        self.bad: list[str] = []  # what can't be compared

    # --- the cells, in groups that belong together

    def groups(self) -> Iterator[list[Part]]:
        """All columns that both lists tell about, those that only make sense together in one list."""
        yield self._identifier()
        yield self._plain("name", self._name())
        yield self._ways()
        for key in _WHOLE:
            yield self._number(key)
        yield self._both(("elevation", 0), self._field_elevation())
        yield self._number("wind_from") + self._number("wind_speed")
        yield self._ground()
        yield self._flag("closed")
        if self.turned is None:
            self.bad.append("which end is which can't be told; what concerns the ends is not compared")
        else:
            yield self._slope()
            yield self._profile()
            yield self._heading()
            for end in (1, 2):
                yield self._elevation(end)
                yield self._place(end)
            for key in ("tora", "lda", "displaced"):
                yield from ([part] for part in self._ends(key))
            yield from self._obstacles()
        yield self._date()
        yield self._plain("notes", clean(as_written(self._theirs("notes"))))

    def _cell(self, at: Key) -> object:
        cells = self.one.cells(*at)
        return "" if self.old is None or cells is None else cells[self.old]

    def _theirs(self, key: str, end: int = 0) -> object:
        cells = self.two.cells(key, end)
        return "" if cells is None else cells[self.new]

    def _part(self, at: Key, value: Value, same: bool) -> Part:
        """A cell whose value is known; ``same``: it stands there already."""
        write = None if same else Write(self.one.found[at].position, value, self.words.text(at, value))
        return Part(at, as_written(self._cell(at)), _shown(value), write)

    def _keep(self, at: Key) -> list[Part]:
        """A cell about which the new list says nothing."""
        if self.old is not None and at in self.one.found and not is_blank(self._cell(at)):
            self.told.kept[self.one.found[at].header] += 1
        return []

    def _identifier(self) -> list[Part]:
        given = clean_text(self._theirs("strip"))
        if self.match is not None and self.match.how in (BY_IDENTIFIER, BY_STRIP):
            return []
        if self.old is None and ("name", 0) not in self.one.found:
            given = given or self._name()
        return self._plain("strip", given)

    def _name(self) -> str:
        return clean(self.other.texts["name"][0][self.new])

    def _plain(self, key: str, given: str) -> list[Part]:
        """A text that is compared as a text."""
        at = (key, 0)
        if not given or at not in self.one.found:
            if given and not is_blank(self._theirs(key)):  # a name may be from the airports file
                self.lost.append(at)
            return self._keep(at)
        return [self._part(at, given, same_text(given, clean(as_written(self._cell(at)))))]

    def _date(self) -> list[Part]:
        at = ("survey_date", 0)
        given = clean_text(self._theirs("survey_date"))
        parts = self._plain("survey_date", given)
        if not parts:
            return parts
        same = parts[0].write is None or (as_date(given) is not None and as_date(given) == as_date(self._cell(at)))
        return [self._part(at, self.words.date(at, given), same)]

    # --- numbers

    def _given(self, at: Key) -> Quantity | None:
        """A number of the new list. Raises _Unreadable where its cell can't be used."""
        if self.new in self.told.unreadable.get(at, ()):
            there = at if at in self.two.found else (at[0], 0)  # an end may be found wanting by the column for both
            item, cell = self.two.found[there], as_text(self._theirs(*there))
            own = self.one.found.get(at)
            known = own is not None and own.unit == item.unit and same_text(as_text(self._cell(at)), cell)
            raise _Unreadable("" if known else f'"{cell}" in "{item.header}" can\'t be used')
        return quantity(self.two, at, self.new)

    def _unreadable(self, error: _Unreadable) -> list[Part]:
        """Tell of a cell that can't be used, unless the same stands in the register."""
        self.bad += [str(error)] if str(error) else []
        return []

    def _end(self, key: str, end: int) -> Quantity | None:
        """A number of the new list about an end of the register's runway."""
        theirs = 3 - end if self.turned else end
        own = self._given((key, theirs))
        return own if own is not None or key == "elevation" else self._given((key, 0))

    def _number(self, key: str) -> list[Part]:
        """A number about the whole runway."""
        try:
            given = self._given((key, 0))
        except _Unreadable as error:
            return self._unreadable(error)
        return self._both((key, 0), None if key == "width" and given is not None and given.si == 0.0 else given)

    def _both(self, at: Key, given: Quantity | None) -> list[Part]:
        """A number beside the register's own: of that column, or for an end of the column for both."""
        if given is None:
            return self._keep(at)
        if at not in self.one.found:
            if not self._says_nothing(at[0], given):
                self.lost.append(at)
            return []
        own = None if self.old is None else quantity(self.one, at, self.old)
        if own is None and self.old is not None and at[1] and at[0] in _EITHER_WAY:
            own = quantity(self.one, (at[0], 0), self.old)
        same = own is not None and same_quantity(own, given, at[0] in ("latitude", "longitude"))
        return [self._part(at, self.words.number(at, given, self.old), same)]

    def _says_nothing(self, key: str, given: Quantity) -> bool:
        """Whether a number says no more than a blank."""
        whole = quantity(self.two, ("length", 0), self.new)
        return (key in _NOTHING and given.si == 0.0) or (key in _USABLE and whole is not None and given.si >= whole.si)

    def _field_elevation(self) -> Quantity | None:
        try:
            given = self._given(("elevation", 0))
        except _Unreadable as error:
            self._unreadable(error)
            return None
        airport = self.other.known[self.new]
        if given is None and airport is not None and ("elevation", 0) in self.one.found and not np.isnan(airport.elevation):
            return Quantity(airport.elevation, unit_scale("ft", "altitude"), "altitude")
        return given

    def _elevation(self, end: int) -> list[Part]:
        try:
            return self._both(("elevation", end), self._end("elevation", end))
        except _Unreadable as error:
            return self._unreadable(error)

    def _slope(self) -> list[Part]:
        try:
            given = self._given(("slope", 0))
        except _Unreadable as error:
            return self._unreadable(error)
        if given is not None and self.turned:
            given = given._replace(si=0.0 - given.si)
        return self._both(("slope", 0), given)

    def _heading(self) -> list[Part]:
        """True headings; one that is told from the other end only is turned round."""
        first = ("heading", 1) if ("heading", 1) in self.one.found else ("heading", 0)
        second = ("heading", 2)
        try:
            theirs = self._given(("heading", 1)) or self._given(("heading", 0)), self._given(second)
        except _Unreadable as error:
            return self._unreadable(error)
        own, opposite = theirs[::-1] if self.turned else theirs
        if own is None and opposite is None:
            return self._keep(first) + self._keep(second)
        if first not in self.one.found and second not in self.one.found:
            self.lost.append(first)
            return []
        if own is None and opposite is not None and self._wants_opposite(first, second):
            own = _turned(opposite)
        elif opposite is None and own is not None and self._wants_opposite(second, first):
            opposite = _turned(own)
        parts = []
        for at, given in ((first, own), (second, opposite)):
            parts += self._both(at, given) if given is not None and at in self.one.found else []
        return parts

    def _wants_opposite(self, at: Key, other: Key) -> bool:
        """Whether a heading told from the other end belongs here: the register has it here, or has no column for that end."""
        return at in self.one.found and (not is_blank(self._cell(at)) or other not in self.one.found)

    def _ends(self, key: str) -> list[Part]:
        """A number about each end, into the columns of the ends, or into one for both where it is the same."""
        try:
            told = [self._end(key, end) for end in (1, 2)]
        except _Unreadable as error:
            return self._unreadable(error)
        told = [None if given is not None and key in _NOTHING and given.si == 0.0 and not self._has(key, end) else given
                for end, given in enumerate(told, 1)]  # fmt: skip
        if not any((key, end) in self.one.found for end in (1, 2)) and (key, 0) in self.one.found:
            one, other = told
            if one is not None and other is not None and same_quantity(one, other):
                return self._both((key, 0), one)
            if one is None and other is None:
                return self._keep((key, 0))
            self.lost.append((key, 0))
            self.bad.append(f"differs by end in {COLUMN_NAMES[key]}, for which the register has one column; not compared")
            return []
        return [part for end, given in enumerate(told, 1) for part in self._both((key, end), given)]

    def _has(self, key: str, end: int) -> bool:
        """Whether the register holds a number about an end, which a 0 would take away."""
        return self.old is not None and any(not is_blank(self._cell(at)) for at in ((key, end), (key, 0)))

    def _place(self, end: int) -> list[Part]:
        try:
            latitude, longitude = (self._end(key, end) for key in ("latitude", "longitude"))
        except _Unreadable as error:
            return self._unreadable(error)
        if (latitude is None) != (longitude is None):
            self.bad.append("has half of a place, which is not compared")
            return []
        return self._both(("latitude", end), latitude) + self._both(("longitude", end), longitude)

    def _obstacles(self) -> Iterator[list[Part]]:
        """Height and distance of an obstacle, which change together or not at all."""
        keys = ("obstacle_height", "obstacle_distance")
        before = len(self.lost), len(self.bad)
        parts = [part for key in keys for part in self._ends(key)]
        try:
            told = [[self._end(key, end) for key in keys] for end in (1, 2)]
        except _Unreadable:
            return  # told by what read the ends
        half = {end for end, (height, away) in enumerate(told, 1)
                if (height is None) != (away is None) and not (height is not None and height.si == 0.0)}  # fmt: skip
        self.bad += ["has half of an obstacle, which is not compared"] if half else []
        if len(self.lost) > before[0] or len(self.bad) > before[1] + bool(half):
            return
        for end in (0, 1, 2):
            if end not in half and not (end == 0 and half):
                yield [part for part in parts if part.at[1] == end]

    # --- ways, ground, closed, profile

    def _ways(self) -> list[Part]:
        """Names of the ends, and the only ways to land and to leave, which are told by those names."""
        names = self._names()
        own = self._own_names()
        target = own if names is None else names
        parts = [] if names is None else self._runway(names)
        for key in ("land_towards", "take_off_towards"):
            parts += self._way(key, own, target, renamed=names is not None and self.old is not None)
        return parts + self._flag("one_way")

    def _own_names(self) -> tuple[str, str]:
        if self.old is None:
            return self.two.first[self.new], self.two.second[self.new]
        return self.one.first[self.old], self.one.second[self.old]

    def _names(self) -> tuple[str, str] | None:
        """Names that the register's runway would get, in its order of the ends; None where they stay."""
        if not self.two.named[self.new] or self.turned is None:
            return None
        if self.turned and len(self._given_names()) < 2:  # one name alone is that of end 1
            return None
        theirs = self.two.first[self.new], self.two.second[self.new]
        theirs = theirs[::-1] if self.turned else theirs
        if self.old is None:
            return theirs
        stays = self.one.named[self.old] and sorted(theirs) == sorted(self._own_names())
        return None if stays else theirs

    def _runway(self, names: tuple[str, str]) -> list[Part]:
        given = self._given_names()
        ends = [("designator", end) for end in (1, 2) if ("designator", end) in self.one.found]
        parts = []
        if ("runway", 0) in self.one.found:
            text = "/".join(name for name in names if name in given)
            parts.append(self._part(("runway", 0), text, same_text(text, as_text(self._cell(("runway", 0))))))
        if not parts or any(not is_blank(self._cell(at)) for at in ends):  # columns of the ends go before that of both
            parts += [self._part(at, names[at[1] - 1], same_text(names[at[1] - 1], as_text(self._cell(at))))
                      for at in ends if names[at[1] - 1] in given]  # fmt: skip
        if not parts:
            self.lost.append(("runway", 0))
        return parts

    def _given_names(self) -> tuple[str, ...]:
        """Names of the new list's ends without one that was made up for an end that has none, such as the other end of H1."""
        own = tuple(tidy_designator(as_text(self._theirs("designator", end))) for end in (1, 2))
        names = own if any(own) else split_runway(self._theirs("runway"))
        both = self.two.first[self.new], self.two.second[self.new]
        return tuple(name for name in both if name in names or name not in ("A", "B"))

    def _way(self, key: str, own: tuple[str, str], target: tuple[str, str], renamed: bool) -> list[Part]:
        at = (key, 0)
        theirs = self._allowed(self.two, at, self.new, (self.two.first[self.new], self.two.second[self.new]))
        if theirs is not None and self.turned:
            theirs = theirs[::-1]
        known = None if self.old is None else self._allowed(self.one, at, self.old, own)
        if theirs is not None and self.turned is None:
            return []
        if at not in self.one.found:
            if theirs not in (None, (True, True)):
                self.lost.append(at)
            return []
        wanted = theirs or (known if renamed else None)
        if wanted is None:
            return self._keep(at)
        if wanted == (known or (True, True)) and not (renamed and wanted != (True, True)):
            stays = is_blank(self._cell(at)) or known is not None
            return [] if stays else [self._part(at, "both", False)]
        text = "both" if wanted == (True, True) else target[0 if wanted[0] else 1]
        return [self._part(at, text, same_text(text, as_text(self._cell(at))))]

    def _allowed(self, runways: Runways, at: Key, index: int, names: tuple[str, str]) -> tuple[bool, bool] | None:
        """Which directions a cell allows; None where it is blank or names neither end."""
        cells = runways.cells(*at)
        if cells is None or is_blank(cells[index]):
            return None
        try:
            return which_end(cells[index], *names)
        except InputError as error:
            if runways is self.two:
                self.bad.append(str(error))
            return None

    def _flag(self, key: str) -> list[Part]:
        """A yes or no; a blank of the register counts as no."""
        at = (key, 0)
        cell = self._theirs(key)
        given = yes_or_no(cell)
        if given is None:
            if not is_blank(cell):
                self.bad.append(f'"{as_text(cell)}" in "{self.two.header(key)}" is neither yes nor no')
            return self._keep(at)
        if at not in self.one.found:
            if given:
                self.lost.append(at)
            return []
        known = yes_or_no(self._cell(at)) if not is_blank(self._cell(at)) else False
        return [self._part(at, self.words.yes(at, given), given == known)]

    def _profile(self) -> list[Part]:
        at = ("profile", 0)
        cell = clean_text(self._theirs("profile"))
        theirs = self.two.profiles[self.new]
        if not cell:
            return self._keep(at)
        if theirs is None:
            self.bad.append(f'the profile "{cell}" can\'t be used')
            return []
        if at not in self.one.found:
            self.lost.append(at)
            return []
        own = _profile_in(as_text(self._cell(at)))
        wanted = theirs.reversed() if self.turned else theirs
        return [self._part(at, str(wanted) if self.turned else cell, own is not None and _same_profile(own, wanted))]

    def _ground(self) -> list[Part]:
        """Surface and condition; a surface may tell the condition too ("wet grass")."""
        spelt = clean_text(self._theirs("surface"))
        word, _ = read_surface_pair(spelt)
        condition = clean(self.other.texts["condition"][0][self.new])
        own_text = clean_text(self._cell(("surface", 0)))
        own_word, _ = read_surface_pair(own_text)
        own_condition = "" if self.old is None else self.register.texts["condition"][0][self.old]
        same_word = not spelt or (word == own_word if word else not own_word and same_text(spelt, own_text))
        wanted = condition or own_condition
        if same_word and wanted == own_condition:
            return [] if spelt else self._keep(("surface", 0))
        text = own_text if same_word else self.words.surface(word, spelt) if word else spelt
        return self._ground_cells(text, wanted, own_text)

    def _ground_cells(self, text: str, wanted: str, own_text: str) -> list[Part]:
        surface, condition = ("surface", 0), ("condition", 0)
        word, within = read_surface_pair(text)
        cell = known_condition(as_text(self._cell(condition)))
        if condition not in self.one.found:
            if within != wanted:
                text = f"{wanted} {word}".strip()
            if not word or read_surface_pair(text) != (word, wanted):
                self.lost.append(condition)
                return []
        elif worse_condition(wanted, within) != wanted:
            if not word:
                self.lost.append(condition)
                return []
            text = self.words.surface(word, word)
        parts = []
        if not same_text(text, own_text):
            if surface not in self.one.found:
                self.lost.append(surface)
                return []
            parts.append(self._part(surface, text, False))
        if condition in self.one.found and worse_condition(cell, read_surface_pair(text)[1]) != wanted:
            parts.append(self._part(condition, wanted, False))
        return parts


def _profile_in(text: str) -> Profile | None:
    """The profile that a cell tells, whether it fits the strip or not."""
    try:
        return read_profile(text) if text else None
    except InputError:
        return None


def _turned(heading: Quantity) -> Quantity:
    return heading._replace(si=(heading.si + np.pi) % (2.0 * np.pi))


def _same_profile(one: Profile, other: Profile) -> bool:
    pairs = ((one.distances, other.distances), (one.heights, other.heights))
    return all(len(a) == len(b) and np.allclose(a, b, rtol=0.0, atol=SAME_POINT) for a, b in pairs)


def _shown(value: Value) -> str:
    return f"{value:.12g}" if isinstance(value, float) else str(value)
