"""What another list would change in a register: new runways, runways that are gone, and values that differ.

Nothing is changed here. Each change comes with the cells that it would write. A blank in the new list deletes nothing, and
nothing is guessed: what can't be matched, read or kept is told, and not merged.
"""

from __future__ import annotations

import hashlib
import json
from collections import Counter
from collections.abc import Collection, Iterable, Sequence
from dataclasses import dataclass, replace

from stripcheck.register.matching import Match, match_lists
from stripcheck.register.merge_row import COLUMN_NAMES, Row, Told, Write, yes_or_no
from stripcheck.register.own_words import OwnWords, clean
from stripcheck.register.reader import Reading
from stripcheck.register.values import Fault, as_written, is_blank

NEW, CHANGED, GONE = "new", "changed", "gone"
KINDS = (NEW, CHANGED, GONE)
CAN_WAIT = frozenset(("strip", "name", "notes", "survey_date", "latitude", "longitude"))  # without these no verdict is better
PERCENTS = "the register's slopes may be formatted as percent; put them right first"

Fixed = Collection[tuple[int, int]]


@dataclass(frozen=True)
class Change:
    """One thing that may be accepted.

    ``row``, ``other``: indexes of the runway in the register and in the new list (0 = first), None where it is not in one.
    ``column``, ``old``, ``new``: as they are shown. ``how``: by what the rows were matched. ``by_hand``: only a mark in a
    review accepts it. ``hindered``: why it can't be applied, "" where it can. ``key``: the same for the same change of the
    same lists.
    """

    kind: str
    row: int | None
    other: int | None
    strip: str
    runway: str
    column: str
    old: str
    new: str
    writes: tuple[Write, ...] = ()
    how: str = ""
    by_hand: bool = False
    hindered: str = ""
    key: str = ""


@dataclass(frozen=True)
class Merge:
    """All changes in the order of the register, the new runways last; ``unclear``: rows left aside, a sentence each;
    ``remarks``: what can't be compared; ``kept``: values of the register that the new list does not have, by header;
    ``lost``: values of the new list for which the register has no column, by header; ``matched``: rows by how they were
    found; ``closed_gone``: rows that are gone and marked as closed already; ``fingerprint`` of both lists."""

    register: Reading
    other: Reading
    changes: Sequence[Change]
    unclear: Sequence[str]
    remarks: Sequence[str]
    kept: Counter[str]
    lost: Counter[str]
    matched: Counter[str]
    closed_gone: int
    fingerprint: str


def compare(register: Reading, other: Reading, fixed: Fixed = ()) -> Merge:
    """Compare a new list with a register.

    ``fixed``: cells of the register that must not be written, as index of the runway and position of the column (both 0 =
    first), such as those with a formula.
    """
    words = OwnWords(register)
    told = Told({at: frozenset(indexes) for at, indexes in other.runways.unreadable.items()})
    faults = {fault.row_index: fault for fault in reversed(other.runways.faults)}  # the first of each row
    known, others = (_identified(reading) for reading in (register, other))
    found = match_lists(register, other, known, others)
    unnamed = ((register, known, "register"), (other, others, "new list"))
    told.remarks += [
        f"{count} row{'s' if count > 1 else ''} of the {what} without identifier and name: left as they are"
        for reading, rows, what in unnamed
        if (count := _filled_rows(reading) - len(rows))
    ]
    changes: list[Change] = []
    for match in found.matches:
        changes += _changes(Row(register, other, words, told, match.old, match.new, match), match, fixed)
    gone, closed = _gone(register, words, found.gone, fixed)
    changes = sorted([*changes, *gone], key=lambda change: change.row or 0)
    for index in found.added:
        changes.append(_as_new(Row(register, other, words, told, None, index), faults.get(index)))
    matched = Counter(match.how for match in found.matches)
    marks = [fingerprint(reading) for reading in (register, other)]
    return Merge(register, other, _with_keys(changes), found.unclear, told.remarks, told.kept, told.lost, matched, closed,
                 _hash(marks))  # fmt: skip


def fingerprint(reading: Reading) -> str:
    """What tells one list from another: all that is understood in it, in its order; a user's own columns don't count."""
    table, found = reading.runways.table, reading.runways.found
    columns = sorted((item.position, item.header) for item in found.values())
    return _hash([[header, *map(as_written, table.cells[position])] for position, header in columns])


def _hash(what: object) -> str:
    return hashlib.sha256(json.dumps(what, ensure_ascii=True).encode()).hexdigest()[:32]


def _with_keys(changes: Iterable[Change]) -> list[Change]:
    seen: Counter[str] = Counter()
    made = []
    for change in changes:
        key = _hash([change.kind, change.strip, change.runway, change.column, change.old, change.new])[:16]
        seen[key] += 1
        made.append(replace(change, key=f"{key}-{seen[key]}"))
    return made


def _identified(reading: Reading) -> list[int]:
    """Indexes of the rows that tell which strip they are."""
    texts = zip(reading.runways.texts("strip"), reading.texts["name"][0], strict=True)
    return [index for index, pair in enumerate(texts) if any(pair)]


def _filled_rows(reading: Reading) -> int:
    """How many rows have something in a column that is understood; spare rows of a register may hold formulas only."""
    columns = [reading.runways.table.cells[item.position] for item in reading.runways.found.values()]
    return sum(not all(map(is_blank, cells)) for cells in zip(*columns, strict=True))


def _gone(register: Reading, words: OwnWords, rows: Iterable[int], fixed: Fixed) -> tuple[list[Change], int]:
    """Rows that the new list does not have, each to be marked as closed; and how many are marked already."""
    made, closed = [], 0
    item = register.runways.found.get(("closed", 0))
    for index in rows:
        change = Change(GONE, index, None, *called(register, index), "", "", "")
        if item is None:
            made.append(replace(change, hindered="the register has no column Closed, so the row can't be marked"))
            continue
        cell = register.runways.table.cells[item.position][index]
        if yes_or_no(cell):
            closed += 1
            continue
        yes = words.yes(("closed", 0), True)
        write = Write(item.position, yes, words.text(("closed", 0), yes))
        made.append(replace(change, column=item.header, old=as_written(cell), new=yes, writes=(write,),
                            hindered=_formula(index, [write], fixed)))  # fmt: skip
    return made, closed


def called(reading: Reading, index: int) -> tuple[str, str]:
    """Strip and runway of a row."""
    return clean(reading.texts["strip"][0][index]), clean(reading.texts["runway"][0][index])


def _changes(row: Row, match: Match, fixed: Fixed) -> list[Change]:
    """The changes of a row that is in both lists."""
    where = f"row {row.two.table.row_numbers[match.new]} of the new list, {' '.join(called(row.other, match.new))}"
    if match.new in row.two.table.too_wide or match.old in row.one.table.too_wide:
        row.told.remarks.append(f"{where}: has more cells than headers in one of the lists; not compared")
        return []
    made = []
    for parts in row.groups():
        live = [part for part in parts if part.write is not None]
        writes = tuple(part.write for part in live if part.write is not None)
        if not live:
            continue
        hindered = _formula(match.old, writes, fixed)
        if not hindered and "slope" in (part.at[0] for part in live) and row.words.percent_slopes:
            hindered = PERCENTS
        made.append(Change(
            CHANGED, match.old, match.new, *called(row.register, match.old),
            ", ".join(row.one.found[part.at].header for part in live), _list([part.old for part in live]),
            _list([part.new for part in live]), writes, match.how,
            by_hand=live[0].at[0] == "notes" and bool(live[0].old), hindered=hindered,
        ))  # fmt: skip
    row.told.remarks += [f"{where}: {text}" for text in dict.fromkeys(row.bad)]
    for key in dict.fromkeys(key for key, _ in row.lost):
        headers = (item.header for at, item in row.two.found.items() if at[0] == key)
        row.told.lost[next(headers, COLUMN_NAMES.get(key, key))] += 1
    return made


def _as_new(row: Row, fault: Fault | None) -> Change:
    """The whole row as one that the register does not have."""
    parts = [part for group in row.groups() for part in group if part.write is not None]
    writes = tuple(part.write for part in parts if part.write is not None)
    shown = "; ".join(f"{row.one.found[part.at].header}: {part.new}" for part in parts)
    lost = dict.fromkeys(COLUMN_NAMES.get(key, key) for key, _ in row.lost if key not in CAN_WAIT)
    hindered = ""
    if fault is not None:
        column = f'column "{fault.header}": ' if fault.header else ""
        hindered = f"the new list has a fault there: {column}{fault.message}"
    elif row.bad:
        hindered = f"not clear: {row.bad[0]}"
    elif lost:
        hindered = f"the register has no column for: {', '.join(lost)}; add it, so that nothing is lost"
    elif not {"strip", "name"} & {part.at[0] for part in parts}:
        hindered = "the register has no column for its name"
    elif "slope" in (part.at[0] for part in parts) and row.words.percent_slopes:
        hindered = PERCENTS
    return Change(NEW, None, row.new, *called(row.other, row.new), "", "", shown, writes, hindered=hindered)


def _formula(index: int, writes: Iterable[Write], fixed: Fixed) -> str:
    hindered = any((index, write.position) in fixed for write in writes)
    return "the register's cell holds a formula, which is kept" if hindered else ""


def _list(texts: Sequence[str]) -> str:
    return ", ".join(text or "(blank)" for text in texts) if len(texts) > 1 else texts[0]
