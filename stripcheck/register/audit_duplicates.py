"""Runways and strips that may stand in a list twice: word for word, by place, or by a name that is nearly the same."""

from __future__ import annotations

import re
import unicodedata
from collections import defaultdict
from collections.abc import Iterable, Iterator
from difflib import SequenceMatcher
from itertools import combinations, pairwise

import numpy as np

from stripcheck.register import audit_kinds as kinds
from stripcheck.register.audit_case import Case, Hit, Hits
from stripcheck.register.positions import CROWD, close_pairs, distance

SAME_END = 60.0  # [m] ends of one runway in two lists: rounding, and threshold or end of the pavement
SAME_PARALLEL = 15.0  # [m] the same for runways that are named as parallel ones, which lie side by side
NEAR = 3_000.0  # [m] strips that may be one: reference points of one field differ by a runway's length
APART = 15_000.0  # [m] runways of one identifier lie closer than this
ALIKE = 0.85  # likeness of two names, 1 = the same
UNLIKE = 0.6  # likeness below which two names hardly mean one strip; unrelated names come to 0.2 to 0.5
SAME_LENGTH = 0.03  # of the length, within which two lengths are the same but rounded
BLOCK = 4  # letters that two names without a place must have in common at their beginning

# words that tell two strips of one name apart
_WHICH_TEXT = "north south east west old new upper lower inner outer nord sud ost este oeste norte sul"
_WHICH = frozenset(_WHICH_TEXT.split())
# words that say what a strip is, not which
_COMMON_TEXT = """
airport airfield airstrip aerodrome strip field airpark heliport private international regional municipal county landing
ground the of de do da del la le flugplatz aeroport aeropuerto aeroporto aerodromo fazenda ranch farm base air station
"""
_COMMON = frozenset(_COMMON_TEXT.split())


def duplicate_hits(case: Case) -> Hits:
    """All findings about runways that stand in the list twice, or strips that share an identifier or a name."""
    by_strip = _by_strip(case)
    yield from _twice(case, by_strip)
    yield from _two_strips(case, by_strip)
    yield from _same_place(case)
    yield from _nearly_twice(case, by_strip)


def plain_name(name: str) -> str:
    """A name without accents, signs, capitals and the words that say what a strip is.

    >>> plain_name("Égret-Bend Airstrip")
    'egret bend'
    """
    letters = "".join(c for c in unicodedata.normalize("NFKD", name) if not unicodedata.combining(c)).lower()
    return " ".join(word for word in re.findall(r"[^\W_]+", letters) if word not in _COMMON)


def likeness(one: str, other: str) -> float:
    """How alike two plain names are, 0 to 1; 0 where numbers or words such as "north" differ: "pad 12" is not "pad 13".

    Method: Ratcliff and Obershelp's longest common parts, as in Python's difflib.

    >>> likeness("otter bend", "otterbend") > 0.9, likeness("pad 12", "pad 13")
    (True, 0.0)
    """
    if re.findall(r"\d+", one) != re.findall(r"\d+", other) or _WHICH & {*one.split()} != _WHICH & {*other.split()}:
        return 0.0
    matcher = SequenceMatcher(None, one, other, autojunk=False)
    return matcher.ratio() if matcher.quick_ratio() >= UNLIKE else matcher.quick_ratio()


def _by_strip(case: Case) -> dict[str, list[int]]:
    """Indexes of the runways that are kept, by identifier, else by name."""
    strips = case.reading.texts["strip"][0]
    found: dict[str, list[int]] = defaultdict(list)
    for index in case.kept:
        found[strips[index].strip().lower()].append(index)
    return found


def _ends(case: Case, index: int) -> frozenset[str]:
    runways = case.reading.runways
    return frozenset((runways.first[index], runways.second[index]))


def _row(case: Case, index: int) -> int:
    return case.reading.runways.table.row_numbers[index]


def _twice(case: Case, by_strip: dict[str, list[int]]) -> Hits:
    """The same identifier and runway again."""
    for indexes in by_strip.values():
        first: dict[frozenset[str], int] = {}
        for index in indexes:
            earlier = first.setdefault(_ends(case, index), index)
            same = _same_length(case, earlier, index)
            if earlier != index and (same or case.reading.runways.named[index]):
                lengths = "the same length" if same else f"{_length(case, earlier)} there and {_length(case, index)} here"
                what = f"row {_row(case, earlier)} is the same strip and runway, with {lengths}"
                yield Hit(index, "strip", 0, kinds.TWICE, what, "keep the row that is right")


def _length(case: Case, index: int) -> str:
    length = float(case.length[index])
    return "no length" if np.isnan(length) else case.shown("length", length)


def _same_length(case: Case, one: int, other: int) -> bool:
    lengths = case.length[[one, other]]
    return bool(np.isnan(lengths).all() or abs(lengths[0] - lengths[1]) <= SAME_LENGTH * lengths.max())


def _two_strips(case: Case, by_strip: dict[str, list[int]]) -> Hits:
    """Rows of one identifier that have names or places of different strips."""
    names = [plain_name(name) for name in case.reading.runways.texts("name")]
    for indexes in by_strip.values():
        for earlier, index in pairwise(indexes):
            if names[earlier] and names[index] and likeness(names[earlier], names[index]) < UNLIKE:
                what = f'row {_row(case, earlier)} has the same identifier and the name "{_name(case, earlier)}"'
                yield Hit(index, "strip", 0, kinds.TWO_STRIPS, what, "check identifier and name of both")
            elif (away := float(distance(case.places[earlier], case.places[index]))) > APART:
                what = f"row {_row(case, earlier)} has the same identifier and lies {away / 1000.0:,.0f} km away"
                yield Hit(index, "strip", 0, kinds.TWO_STRIPS, what, "check identifier and coordinates of both")


def _name(case: Case, index: int) -> str:
    return case.reading.texts["name"][0][index]


def _same_place(case: Case) -> Hits:
    """Runways whose ends lie on each other, under two names or two identifiers."""
    strips = case.reading.texts["strip"][0]
    kept = np.array(case.kept, dtype=np.intp)
    one, other = (ends[kept] for ends in case.ends)
    middles = np.where((case.apart[kept] > SAME_END)[:, None], 0.5 * (one + other), np.nan)
    for first, second in close_pairs(middles, SAME_END):
        along = max(distance(one[first], one[second]), distance(other[first], other[second]))
        against = max(distance(one[first], other[second]), distance(other[first], one[second]))
        earlier, index = int(kept[first]), int(kept[second])
        if min(along, against) > (SAME_PARALLEL if _parallel(case, earlier, index) else SAME_END):
            continue
        same_strip = strips[earlier].lower() == strips[index].lower()
        if same_strip and _ends(case, earlier) == _ends(case, index):
            continue  # listed twice, which is told already
        what = f"row {_row(case, earlier)}, {_called(case, earlier)}, has its ends in the same places"
        kind = kinds.TWO_NAMES if same_strip else kinds.TWO_IDENTIFIERS
        yield Hit(index, "strip", 0, kind, what, "keep one of the two, unless the coordinates are wrong")


def _parallel(case: Case, one: int, other: int) -> bool:
    """Whether two runways have the names of parallel ones, such as 09L and 09R."""
    names, others = _ends(case, one), _ends(case, other)
    return names != others and {name.rstrip("LCR") for name in names} == {name.rstrip("LCR") for name in others}


def _called(case: Case, index: int) -> str:
    texts = case.reading.texts
    return f"{texts['strip'][0][index]} {texts['runway'][0][index]}"


def _nearly_twice(case: Case, by_strip: dict[str, list[int]]) -> Hits:
    """Two identifiers with nearly the same name: close by where places are known, else with the same runway."""
    heads = [indexes[0] for indexes in by_strip.values()]
    names = {index: plain_name(_name(case, index)) for index in heads}
    heads = [index for index in heads if names[index]]
    for earlier, index in _candidates(case, heads, names):
        alike = likeness(names[earlier], names[index])
        if alike < ALIKE:
            continue
        away = float(distance(case.places[earlier], case.places[index]))
        if np.isnan(away) and not (_ends(case, earlier) == _ends(case, index) and _same_length(case, earlier, index)):
            continue
        where = "with the same runway" if np.isnan(away) else f"{away / 1000.0:.1f} km away"
        other = f'row {_row(case, earlier)}, {_called(case, earlier)} "{_name(case, earlier)}"'
        what = f"{other}, has nearly the same name, {where}"
        yield Hit(index, "name", 0, kinds.NEARLY_TWICE, what, "keep one, if both are the same strip")


def _candidates(case: Case, heads: list[int], names: dict[int, str]) -> Iterator[tuple[int, int]]:
    """Pairs of strips worth comparing: close to each other, or without a place and with names that begin alike."""
    places = case.places[heads]
    for first, second in close_pairs(places, NEAR):
        yield heads[first], heads[second]
    blocks: dict[str, list[int]] = defaultdict(list)
    for index, placed in zip(heads, np.isfinite(places[:, 0]), strict=True):
        if not placed:
            blocks[names[index].replace(" ", "")[:BLOCK]].append(index)
    for block in blocks.values():
        yield from _pairs(block)


def _pairs(indexes: list[int]) -> Iterable[tuple[int, int]]:
    return pairwise(indexes) if len(indexes) > CROWD else combinations(indexes, 2)
