"""Which runway of a list is which of another: by identifier, then by place and name. Nothing is guessed.

A match that could be another one too is not made; it is told.
"""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Hashable, Iterable, Iterator, Sequence
from dataclasses import dataclass, field

import numpy as np

from stripcheck.register.audit_case import Case
from stripcheck.register.audit_duplicates import ALIKE, APART, BLOCK, NEAR, SAME_LENGTH, likeness, plain_name
from stripcheck.register.positions import close_pairs, distance
from stripcheck.register.reader import Reading
from stripcheck.register.runway_ends import designator_degrees

# [degrees] names of one runway differ by no more than this after it was named anew: the magnetic variation creeps by a few
# degrees in a lifetime, a name is rounded to ten, and a strip is often named by eye; common practice, no source
RENAMED = 20.0
BY_IDENTIFIER, BY_STRIP, BY_PLACE, BY_NAME = "identifier", "strip", "place and name", "name, runway and length"


@dataclass(frozen=True)
class Match:
    """Row ``old`` of the one list is row ``new`` of the other (indexes, 0 = first), found by ``how``.

    ``turned``: end 1 of the one is end 2 of the other; None where that can't be told.
    """

    old: int
    new: int
    how: str
    turned: bool | None


@dataclass
class Matching:
    """All matches; the rows of each list that have none; ``unclear``: why rows were left aside, a sentence each."""

    matches: list[Match] = field(default_factory=list)
    gone: list[int] = field(default_factory=list)
    added: list[int] = field(default_factory=list)
    unclear: list[str] = field(default_factory=list)


class _Side:
    """One of the two lists, and which of its rows are still free."""

    def __init__(self, reading: Reading, what: str, rows: Iterable[int]) -> None:
        self.reading, self.what, self.case = reading, what, Case(reading)
        self.free = dict.fromkeys(rows)  # in the order of the list
        self.strips = [text.strip().casefold() for text in reading.texts["strip"][0]]
        self.names = [plain_name(text) for text in reading.texts["name"][0]]

    def ends(self, index: int) -> tuple[str, str]:
        return self.reading.runways.first[index], self.reading.runways.second[index]

    def named(self, index: int) -> bool:
        return self.reading.runways.named[index]

    def row(self, index: int) -> int:
        return self.reading.runways.table.row_numbers[index]

    def called(self, index: int) -> str:
        texts = self.reading.texts
        return f"{texts['strip'][0][index]} {texts['runway'][0][index]}"

    def told(self, indexes: Sequence[int]) -> str:
        rows = ", ".join(str(self.row(index)) for index in indexes)
        return f"row{'s' if len(indexes) > 1 else ''} {rows} of the {self.what} ({self.called(indexes[0])})"


def match_lists(old: Reading, new: Reading, old_rows: Iterable[int], new_rows: Iterable[int]) -> Matching:
    """Match runways of two lists: the rows given by their indexes (0 = first).

    First those of one identifier and one pair of designators, in either order; then what is left of one identifier where the
    runway was named anew or has no name in one of the lists; then by place and name; then, where a place is not known, by
    name, runway and length together.
    """
    one, other = _Side(old, "register", old_rows), _Side(new, "new list", new_rows)
    made = Matching()
    _same_identifier(one, other, made)
    _pair_off(one, other, BY_STRIP, _of_one_strip(one, other), made)
    _pair_off(one, other, BY_PLACE, _of_one_place(one, other), made)
    _pair_off(one, other, BY_NAME, _of_one_name(one, other), made)
    made.matches.sort(key=lambda match: match.old)
    made.gone, made.added = list(one.free), list(other.free)
    return made


def _same_identifier(one: _Side, other: _Side, made: Matching) -> None:
    """Rows of one strip and runway; those that stand in a list twice, or lie far apart, are left aside."""
    found = [_by_key(side) for side in (one, other)]
    for key in dict.fromkeys((*found[0], *found[1])):
        olds, news = (rows.get(key, []) for rows in found)
        if len(olds) <= 1 and len(news) <= 1:
            if olds and news:
                _join(one, other, olds[0], news[0], BY_IDENTIFIER, made)
            continue
        told = " and ".join(side.told(rows) for side, rows in ((one, olds), (other, news)) if rows)
        twice = " and ".join(side.what for side, rows in ((one, olds), (other, news)) if len(rows) > 1)
        made.unclear.append(f"{told}: the runway stands more than once in the {twice}; keep one row of it")
        _take(one, olds)
        _take(other, news)


def _by_key(side: _Side) -> dict[Hashable, list[int]]:
    found: dict[Hashable, list[int]] = defaultdict(list)
    for index in side.free:
        if side.named(index):
            found[side.strips[index], tuple(sorted(side.ends(index)))].append(index)
    return found


def _join(one: _Side, other: _Side, old: int, new: int, how: str, made: Matching) -> None:
    away = float(distance(one.case.places[old], other.case.places[new]))
    if how in (BY_IDENTIFIER, BY_STRIP) and away > APART:
        made.unclear.append(
            f"{one.told([old])} and {other.told([new])}: the same identifier, but {away / 1000.0:,.0f} km apart; check both"
        )
    else:
        made.matches.append(Match(old, new, how, _turned(one, other, old, new)))
    _take(one, [old])
    _take(other, [new])


def _take(side: _Side, indexes: Iterable[int]) -> None:
    for index in indexes:
        side.free.pop(index, None)


def _turned(one: _Side, other: _Side, old: int, new: int) -> bool | None:
    """Whether the runway begins at the other end in the new list: by the names, else by the headings."""
    if one.named(old) and other.named(new):
        (first, second), names = one.ends(old), other.ends(new)
        if first != second and names in ((first, second), (second, first)):
            return names != (first, second)
        straight, around = _apart(first, names[0]), _apart(first, names[1])
        if np.isfinite(straight) and np.isfinite(around):
            return bool(around < straight)
    between = one.reading.numbers["heading"][0][old] - other.reading.numbers["heading"][0][new]
    if np.isnan(between):
        return None
    off = abs((float(np.degrees(between)) + 180.0) % 360.0 - 180.0)
    return True if off > 180.0 - RENAMED else False if off < RENAMED else None


def _apart(one: str, other: str) -> float:
    """Angle [degrees] between the directions of two designators, NaN where one tells none."""
    return abs((designator_degrees(one) - designator_degrees(other) + 180.0) % 360.0 - 180.0)


def _fit(one: _Side, other: _Side, old: int, new: int) -> bool:
    """Whether two rows can be one runway by the names of its ends: the same, named anew, or not named in one list."""
    if not (one.named(old) and other.named(new)):
        return True
    names, others = one.ends(old), other.ends(new)
    return sorted(names) == sorted(others) or any(
        all(_apart(*pair) <= RENAMED and pair[0][2:] == pair[1][2:] for pair in zip(names, turned, strict=True))
        for turned in (others, others[::-1])
    )


def _of_one_strip(one: _Side, other: _Side) -> Iterator[tuple[int, int]]:
    """Pairs of free rows of one identifier."""
    by_strip: dict[str, list[int]] = defaultdict(list)
    for new in other.free:
        by_strip[other.strips[new]].append(new)
    return ((old, new) for old in one.free for new in by_strip.get(one.strips[old], ()) if _fit(one, other, old, new))


def _of_one_place(one: _Side, other: _Side) -> Iterator[tuple[int, int]]:
    """Pairs of free rows that lie near each other and are called alike."""
    olds, news = list(one.free), list(other.free)
    for first, second in close_pairs(np.vstack((one.case.places[olds], other.case.places[news])), NEAR):
        if first < len(olds) <= second:
            old, new = olds[first], news[second - len(olds)]
            if _alike(one, other, old, new) and _fit(one, other, old, new):
                yield old, new


def _of_one_name(one: _Side, other: _Side) -> Iterator[tuple[int, int]]:
    """Pairs of free rows, one without a place, that are alike in name and the same in runway and length."""
    blocks: dict[Hashable, list[int]] = defaultdict(list)
    for new in other.free:
        if other.names[new] and other.named(new):
            blocks[other.names[new].replace(" ", "")[:BLOCK], tuple(sorted(other.ends(new)))].append(new)
    for old in one.free:
        key = one.names[old].replace(" ", "")[:BLOCK], tuple(sorted(one.ends(old)))
        for new in blocks.get(key, ()) if one.names[old] and one.named(old) else ():
            placed = np.isfinite(distance(one.case.places[old], other.case.places[new]))
            lengths = one.case.length[old], other.case.length[new]
            same = abs(lengths[0] - lengths[1]) <= SAME_LENGTH * max(lengths)
            if not placed and same and _alike(one, other, old, new):
                yield old, new


def _alike(one: _Side, other: _Side, old: int, new: int) -> bool:
    return bool(one.names[old] and other.names[new]) and likeness(one.names[old], other.names[new]) >= ALIKE


def _pair_off(one: _Side, other: _Side, how: str, pairs: Iterator[tuple[int, int]], made: Matching) -> None:
    """Join pairs in which each is the only one for the other; those with a choice are left aside and told."""
    found = list(pairs)
    olds, news = Counter(old for old, _ in found), Counter(new for _, new in found)
    choices = [(old, new) for old, new in found if olds[old] > 1 or news[new] > 1]
    for old, new in found:
        if olds[old] == news[new] == 1:
            _join(one, other, old, new, how, made)
    for group in _groups(choices):
        rows = sorted({old for old, _ in group}), sorted({new for _, new in group})
        made.unclear.append(
            f"{one.told(rows[0])} and {other.told(rows[1])}: more than one may be the same runway (by {how}); give them the "
            "same identifier and runway"
        )
        _take(one, rows[0])
        _take(other, rows[1])


def _groups(pairs: Sequence[tuple[int, int]]) -> list[list[tuple[int, int]]]:
    """Pairs that hang together by a common row."""
    root: dict[Hashable, Hashable] = {}

    def find(key: Hashable) -> Hashable:
        while root.setdefault(key, key) != key:
            key = root[key]
        return key

    for old, new in pairs:
        root[find(("old", old))] = find(("new", new))
    groups: dict[Hashable, list[tuple[int, int]]] = defaultdict(list)
    for pair in pairs:
        groups[find(("old", pair[0]))].append(pair)
    return list(groups.values())


