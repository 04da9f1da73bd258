"""Rounds of false position, one cell after another: how a workbook closes in on a value without a macro.

The Illinois form: a secant between two ends of which one still holds and the other no more; where one end stays twice
running, its value counts half, so that both ends close in. Written with NumPy, so that the same rounds run on arrays and
as cells. Source: M. Dowell and P. Jarratt, A modified regula falsi method, BIT 11, 1971 (from memory).
"""

from __future__ import annotations

import numpy as np

from stripcheck.numeric import Number

NEITHER, LOW, HIGH = 0.0, 1.0, -1.0  # which end was moved last


def between(low: Number, of_low: Number, high: Number, of_high: Number) -> Number:
    """Where a straight line between two ends is 0, from the values there, never negative at the low end, negative at the high
    one; the middle where they are not, or not known [unit of the ends].

    >>> float(between(2.0, 3.0, 6.0, -1.0)), float(between(2.0, np.nan, 6.0, -1.0))
    (5.0, 4.0)
    """
    both = np.isfinite(of_low) & np.isfinite(of_high)
    crosses = np.where(both, (of_low >= 0.0) & (of_high < 0.0), False)
    apart = np.where(crosses, of_low - of_high, 2.0)
    return low + (high - low) * np.where(crosses, of_low, 1.0) / apart


def end_after(moves: Number, tried: Number, end: Number) -> Number:
    """An end after a round: the value tried where that moved this end.

    >>> float(end_after(True, 4.0, 2.0)), float(end_after(False, 4.0, 2.0))
    (4.0, 2.0)
    """
    return np.where(moves, tried, end)


def value_after(moves: Number, found: Number, other_moves: Number, other_moved: Number, value: Number) -> Number:
    """The value at an end after a round: the one found, where that moved this end; half, where the other end moved again.

    >>> [float(value_after(*case, 8.0)) for case in ((True, 3.0, False, False), (False, 3.0, True, True))]
    [3.0, 4.0]
    """
    kept = np.where(np.isfinite(value), np.where(other_moves & other_moved, 0.5 * value, value), np.nan)
    return np.where(moves, found, kept)


def last_after(low_moves: Number, high_moves: Number, last: Number) -> Number:
    """Which end was moved last, LOW, HIGH or NEITHER, after a round.

    >>> float(last_after(False, True, LOW))
    -1.0
    """
    return np.where(low_moves, LOW, np.where(high_moves, HIGH, last))
