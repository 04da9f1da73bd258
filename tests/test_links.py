"""Links of the chain whose edge cases decide a verdict."""

from __future__ import annotations

import math

import numpy as np

from stripcheck import links
from stripcheck.sheet.cell import Cell


def test_a_reach_that_is_not_known_counts_as_beyond() -> None:
    over = links.over_reach(np.array([1000.0, 1000.0, 1000.0]), np.array([900.0, 1100.0, math.nan]))
    assert over[:2].tolist() == [100.0, -100.0] and math.isnan(over[2])
    assert links.beyond_reach_of(over).tolist() == [True, False, True]
    assert not links.beyond_reach_of(0.05)  # m: rounding


def test_the_same_as_formulas_where_a_blank_is_no_number() -> None:
    assert str(links.over_reach(Cell("A1"), Cell("B1"))) == 'IF(ISNUMBER(B1),A1-B1,"")'
    assert str(links.beyond_reach_of(Cell("C1"))) == "NOT(C1<=0.1)"  # a text is never below a number
