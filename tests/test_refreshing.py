"""A refresh: what is a user's stays to the byte, what is ours is right, and nothing stops it half way."""

from __future__ import annotations

import random
from collections.abc import Sequence
from pathlib import Path

import pytest
from openpyxl.utils.cell import coordinate_to_tuple

from stripcheck.cli import main
from tests.book_parts import Parts
from tests.filled_books import (
    KINDS,
    State,
    card_of,
    is_own,
    move_rows,
    options_at_random,
    type_at_random,
    verdicts_must_be,
    with_everything,
)
from tests.sheet.package_check import package_faults
from tests.sheet.recalculated import differences
from tests.user_content import foreign_parts, own_cells, set_calc_chain

ROUNDS = 50  # of two refreshes each
NATIVE = ("full", "short", "chance", "profile", "plain", "many tables")

pytestmark = pytest.mark.filterwarnings("ignore:.*extension is not supported:UserWarning")  # openpyxl, of what it would lose


def edited(kind: str, chance: random.Random, folder: Path, macros: bool = False) -> tuple[Path, State]:
    """A workbook with everything of a user's, edited at random, and what it stands for."""
    parts, state = with_everything(kind, macros), State(card_of(kind))
    if chance.random() < 0.7:
        move_rows(parts, chance)
    type_at_random(parts, state, chance)
    set_calc_chain(parts)
    path = folder / f"{kind}.{'xlsm' if macros else 'xlsx'}"
    parts.write(path)
    return path, state


def refresh_and_look(path: Path, state: State, options: Sequence[str]) -> None:
    """Refresh a workbook; all that is a user's must be as it was, and all that is ours as `assess` has it."""
    own = is_own(Parts.read(path))
    foreign, cells = foreign_parts(path), own_cells(path, own)
    assert len(foreign) > 30 and len(cells) > 80
    assert main(["refresh", str(path), *options]) == 0
    after = foreign_parts(path)
    assert [name for name in foreign if after.get(name) != foreign[name]] == [] and len(after) == len(foreign)
    assert own_cells(path, own) == cells
    assert verdicts_must_be(path, state) == []
    assert package_faults(path) == []


@pytest.mark.parametrize("number", range(ROUNDS))
def test_all_that_is_a_users_stays_and_all_that_is_ours_is_right(tmp_path: Path, number: int) -> None:
    chance, kind = random.Random(number), list(KINDS)[number % len(KINDS)]
    path, state = edited(kind, chance, tmp_path, macros=number % 5 == 0)
    refresh_and_look(path, state, options_at_random(kind, state, chance, tmp_path))
    if number % 2:
        refresh_and_look(path, state, options_at_random(kind, state, chance, tmp_path))
        return
    before = Parts.read(path)
    assert main(["refresh", str(path)]) == 0
    after = Parts.read(path)
    assert [name for name in before if after[name] != before[name] and name != before.sheet("Method")] == []


@pytest.mark.parametrize("kind", NATIVE)
def test_an_office_recalculates_what_stands_beside_the_formulas(office, tmp_path: Path, kind: str) -> None:
    chance = random.Random(kind)
    path, state = edited(kind, chance, tmp_path)
    own = is_own(Parts.read(path))
    assert main(["refresh", str(path), *options_at_random(kind, state, chance, tmp_path)]) == 0
    with office.open(path) as book:
        book.recalculate()
        count, found = differences(book, path)
    ours = [one for one in found if not _is_own(own, one)]
    assert (count > 800, ours) == (True, [])


def _is_own(own: object, difference: str) -> bool:
    title, _, cell = difference.split(":")[0].partition("!")
    return title == "My notes" or own(title, *coordinate_to_tuple(cell))  # type: ignore[operator]
