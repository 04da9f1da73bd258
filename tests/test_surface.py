"""The ground table: whole, in order, careful. Published coefficients are compared in tests/outside/test_textbook.py."""

from __future__ import annotations

import math

import pytest

from stripcheck.surface import CONDITIONS, GROUND_NAMES, GROUNDS, REFERENCE_GROUND, SURFACES, ground


def test_every_pair_has_its_row() -> None:
    assert [(row.surface, row.condition) for row in GROUNDS] == [(s, c) for s in SURFACES for c in CONDITIONS]
    assert len(set(GROUND_NAMES)) == len(GROUNDS)
    for row in GROUNDS:
        assert ground(row.surface, row.condition) is row
        assert row.source


def test_a_row_has_both_coefficients_or_none() -> None:
    for row in GROUNDS:
        assert math.isnan(row.rolling) == math.isnan(row.braking), row.name
        if not math.isnan(row.rolling):
            assert 0.0 < row.rolling <= 0.3 and 0.0 < row.braking <= 0.5, row.name


@pytest.mark.parametrize("surface", SURFACES)
def test_worse_conditions_never_roll_or_brake_better(surface: str) -> None:
    rows = [ground(surface, condition) for condition in CONDITIONS]
    known = [row for row in rows if not math.isnan(row.rolling)]
    assert [row.rolling for row in known] == sorted(row.rolling for row in known)
    assert [row.braking for row in known] == sorted((row.braking for row in known), reverse=True)


def test_soft_ground_is_not_credited_with_stopping() -> None:
    """What the module says: braking on soft ground is that of the wet surface or less."""
    for surface in ("gravel", "dirt", "grass", "long grass", "sand"):
        assert ground(surface, "soft").braking <= ground(surface, "wet").braking


def test_the_reference_is_the_first_row() -> None:
    assert GROUNDS[0].name == REFERENCE_GROUND
    assert GROUNDS[0].rolling == min(row.rolling for row in GROUNDS if row.surface != "ice" and row.rolling > 0.0)
    assert GROUNDS[0].braking == max(row.braking for row in GROUNDS if row.braking > 0.0)


def test_no_figures_for_snow_and_for_contradictions() -> None:
    for surface, condition in [("snow", "dry"), ("snow", "wet"), ("snow", "soft"), ("paved", "soft"), ("ice", "soft")]:
        assert math.isnan(ground(surface, condition).rolling)


@pytest.mark.parametrize(("surface", "condition"), [("mud", "dry"), ("grass", "damp")])
def test_words_that_are_not_in_the_table(surface: str, condition: str) -> None:
    with pytest.raises(ValueError, match="not in"):
        ground(surface, condition)
