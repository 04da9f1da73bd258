"""A refresh: what is a user's stays to the byte, what is ours is right, and nothing stops it half way."""

from __future__ import annotations

import random
from pathlib import Path

import pytest

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
from tests.user_content import foreign_parts, own_cells, set_calc_chain

ROUNDS = 100


def edited(number: int, folder: Path) -> tuple[Path, State, list[str]]:
    """A workbook with everything of a user's, edited at random; what it stands for, and options of a refresh."""
    chance = random.Random(number)
    kind, macros = list(KINDS)[number % len(KINDS)], number % 5 == 0
    parts, state = with_everything(kind, macros), State(card_of(kind))
    if chance.random() < 0.7:
        move_rows(parts, chance)
    type_at_random(parts, state, chance)
    set_calc_chain(parts)
    path = folder / f"round {number} {kind}.{'xlsm' if macros else 'xlsx'}"
    parts.write(path)
    return path, state, options_at_random(kind, state, chance, folder)


@pytest.mark.parametrize("number", range(ROUNDS))
def test_all_that_is_a_users_stays_and_all_that_is_ours_is_right(tmp_path: Path, number: int) -> None:
    path, state, options = edited(number, tmp_path)
    own = is_own(Parts.read(path))
    foreign, cells = foreign_parts(path), own_cells(path, own)
    assert len(foreign) > 30 and len(cells) > 80
    assert main(["refresh", str(path), *options]) == 0
    assert foreign_parts(path) == foreign
    assert own_cells(path, own) == cells
    assert verdicts_must_be(path, state) == []
    assert package_faults(path) == []
    once = Parts.read(path)
    assert main(["refresh", str(path)]) == 0
    again = Parts.read(path)
    assert [name for name in once if again[name] != once[name] and name != once.sheet("Method")] == []
