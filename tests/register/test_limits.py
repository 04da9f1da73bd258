"""Limits of what a list can say."""

from __future__ import annotations

import math

import numpy as np
import pytest

from stripcheck.register.columns import COLUMNS
from stripcheck.register.limits import LIMITS, outside, within_limits
from stripcheck.units import KINDS


def test_every_column_of_numbers_has_limits() -> None:
    assert {column.key for column in COLUMNS if column.kind in KINDS} == set(LIMITS)


@pytest.mark.parametrize("key", sorted(LIMITS))
def test_the_limits_themselves_are_inside(key: str) -> None:
    least, greatest, _ = LIMITS[key]
    beyond = 1e-6 * (greatest - least)
    values = np.array([least, greatest, math.nan, least - beyond, greatest + beyond, -math.inf, math.inf])
    assert outside(key, values).tolist() == [False, False, False, True, True, True, True]
    assert [within_limits(key, value) for value in (greatest, math.nan, math.inf)] == [True, False, False]
