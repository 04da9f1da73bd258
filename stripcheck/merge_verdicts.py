"""Which verdicts change with the changes that a merge would make: each change by itself, and all of a runway together."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from stripcheck.card import load_card
from stripcheck.day import read_day
from stripcheck.filling import Loading, check_air, loading
from stripcheck.register.merge import CHANGED, Merge
from stripcheck.register.merge_row import Write
from stripcheck.register.read_table import Table
from stripcheck.register.reader import directions_of, read_runways
from stripcheck.rules import load_rules
from stripcheck.sheet.book import fill
from stripcheck.sheet.summary import RANKS, SIDES

FAR_BELOW = 10_000_000  # rows of runways that stand in no list, after all that a list can have


@dataclass(frozen=True)
class Verdicts:
    """Verdicts in words, in and out: ``flips`` what changes, by key of the change, "" where nothing does; ``together`` the
    same with all changes of a runway, by its index, where there are several; ``about`` for what they hold."""

    flips: Mapping[str, str]
    together: Mapping[int, str]
    about: str


def compare_verdicts(merge: Merge, path: Path, card_name: str, rules_name: str, given_day: Mapping[str, object],
                     request: Loading) -> Verdicts:  # fmt: skip
    """Compare the verdicts of each runway before and after. ``path``: the register, for an airports file beside it.

    Raises InputError for a card, rules, a day or a loading that can't be used.
    """
    card, rules, day = load_card(card_name), load_rules(rules_name), read_day(given_day)
    chosen, flaps = loading(card, request)
    rows = sorted({change.row for change in merge.changes if change.row is not None})
    table = merge.register.runways.table
    alone = [change for change in merge.changes if change.writes and not change.hindered]
    groups = {row: [change for change in alone if change.row == row and change.kind == CHANGED] for row in rows}
    groups = {row: changes for row, changes in groups.items() if len(changes) > 1}
    variants: list[tuple[int | None, Sequence[Write]]] = [(change.row, change.writes) for change in alone]
    variants += [(row, [write for change in changes for write in change.writes]) for row, changes in groups.items()]
    directions = directions_of(read_runways(_with_rows(table, variants), path))
    said: dict[int, tuple[str, ...]] = {left.row: (f"left out ({left.what})",) for left in directions.left_out}
    if directions.n:
        check_air(day, directions)
        best = fill(directions, card, day, rules, chosen, flaps, short=True).best
        for at, row in enumerate(directions.numbers["source_row"][::2].astype(int).tolist()):
            said[row] = tuple(RANKS[int(best[f"{side}_rank"][at]) - 1] for side, _, _ in SIDES)
    before = {row: said[table.row_numbers[row]] for row in rows}
    after = [said[FAR_BELOW + number] for number in range(len(variants))]
    flips = {change.key: _flip(before[change.row] if change.row is not None else None, verdicts)
             for change, verdicts in zip(alone, after, strict=False)}  # fmt: skip
    together = {row: _flip(before[row], verdicts) for row, verdicts in zip(groups, after[len(alone) :], strict=True)}
    about = f"{card.name}, {rules.title}, on the day given"
    return Verdicts(flips, together, about)


def _with_rows(table: Table, variants: Iterable[tuple[int | None, Sequence[Write]]]) -> Table:
    """The list with a row more for each variant of a row of its own, or of a blank one."""
    cells = [list(column) for column in table.cells]
    numbers = list(table.row_numbers)
    for number, (row, writes) in enumerate(variants):
        for column in cells:
            column.append("" if row is None else column[row])
        for write in writes:
            cells[write.position][-1] = write.text if table.delimiter else write.value
        numbers.append(FAR_BELOW + number)
    return Table(table.where, table.source, table.sheet, table.headers, table.header_row, cells, numbers, table.too_wide,
                 table.delimiter, table.places)  # fmt: skip


def _flip(before: tuple[str, ...] | None, after: tuple[str, ...]) -> str:
    """What changes, in words; "" where nothing does.

    >>> _flip(("suitable", "marginal"), ("suitable", "unsuitable")), _flip(("suitable",) * 2, ("suitable",) * 2)
    ('out: marginal -> unsuitable', '')
    """
    if before is None:
        return _said(after)
    if before == after:
        return ""
    if len(before) == len(after) == len(SIDES):
        sides = zip((side for side, _, _ in SIDES), before, after, strict=True)
        return ", ".join(f"{side}: {old} -> {new}" for side, old, new in sides if old != new)
    return f"{_said(before)} -> {_said(after)}"


def _said(verdicts: tuple[str, ...]) -> str:
    if len(verdicts) == 1:
        return verdicts[0]
    return ", ".join(f"{side}: {verdict}" for (side, _, _), verdict in zip(SIDES, verdicts, strict=True))


