"""What is recorded runs to the same numbers as NumPy gives for the same expression on arrays."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from stripcheck.ground_run import disk_run_between, speed_run
from stripcheck.program import Program
from stripcheck.recording import Node, Recorder, Rows

X = np.array([-3.0, -0.5, -0.0, 0.0, 0.7, 2.0, 40.0, np.nan, np.inf, -np.inf])
Y = np.array([1.0, np.nan, 2.0, -4.0, 0.0, np.inf, 3.0, 5.0, -1.0, 0.25])
TRUE = np.array([1, 0, 1, 1, 0, 0, 1, 0, 1, 0], bool)
PLACES = np.array([0, 3, 2, 1, 1, 0, 2, 3, 0, 1])
TABLE = np.array([5.0, np.nan, 7.0, 8.0])
NODES, WEIGHTS = np.array([0.1, 0.5, 0.8]), np.array([0.3, 0.5, 0.2])


def ran(expression: Callable[..., Any], **columns: np.ndarray) -> Any:
    """The expression recorded with nodes in place of the columns, and run."""
    recorder = Recorder()
    nodes = [recorder.column(key, column.dtype) for key, column in columns.items()]
    result = expression(*nodes)
    if not isinstance(result, Node):
        return result
    return Program({"result": result}).run(columns, len(next(iter(columns.values()))))["result"]


def sum_of(x: Any, y: Any) -> Any:
    return np.tensordot(WEIGHTS, 1.0 / (x + np.square(y) * np.multiply.outer(NODES, x)), 1)


def two_sums(x: Any, y: Any) -> Any:
    """The second sum reads the first, and shares its rows."""
    outer = y + np.multiply.outer(NODES, x)
    first = np.tensordot(WEIGHTS, outer / (1.0 + np.square(outer)), 1)
    return first - np.tensordot(WEIGHTS, outer / (2.0 + first * np.square(outer)), 1)


EXPRESSIONS: list[Callable[[Any, Any], Any]] = [
    lambda x, y: x + y - 2.0 * x / y,
    lambda x, y: (x + 0.0) * 1.0 - 0.0,
    lambda x, y: 0.0 - x + y * 0.0,
    lambda x, y: x / 3.0 + 3.0 / x,
    lambda x, y: x / 0.0 + x / 1e300,
    lambda x, y: np.power(x, 2) + np.power(x, 3) + np.power(np.abs(x), 0.19) + np.power(2.0, x),
    lambda x, y: np.sqrt(x) + np.cbrt(y) + np.exp(-x) + np.log(y),
    lambda x, y: np.minimum(x, y) + np.maximum(x, 0.5) * np.minimum(2.0, y),
    lambda x, y: np.maximum(-x, np.nan),
    lambda x, y: np.where(x > 0.5, x, y),
    lambda x, y: np.where(x > 0.5, 1.0, y),
    lambda x, y: np.where(x > 0.5, 1.0, -2.0),
    lambda x, y: np.where(np.isfinite(x), y, np.nan),
    lambda x, y: np.where(np.isfinite(x), 3.0, np.nan),
    lambda x, y: np.where(x < y, np.where(x < y, x, np.nan) + y, np.nan),
    lambda x, y: np.where(np.isnan(x), np.where(x < y, x, np.nan), y),
    lambda x, y: (x < y) & (x >= -1.0) | ~(y != 0.0),
    lambda x, y: np.where(x <= y, x > 1.0, False),
    lambda x, y: np.where(x <= y, x > 1.0, y == 0.0),
    lambda x, y: np.where(x == y, True, y <= 0.0) & True,
    lambda x, y: np.where(True, x, y) + np.where(False, x, 1.0),
    lambda x, y: np.select([x > 30.0, False, x > y, np.isnan(y)], [1, 2, 3, 4], 5),
    lambda x, y: np.select([x > 30.0, True, x > y], [1, 2, 3], 4),
    lambda x, y: np.interp(np.where(np.isfinite(x), x, 0.0), [-1.0, 0.0, 2.0], [4.0, 5.0, 9.0]),
    sum_of,
    two_sums,
    lambda x, y: speed_run(1.0 + y * y, -1e-4, 2.0, 25.0),
    lambda x, y: disk_run_between(4.0 + y * y, 0.5, 5e-4, 24.0, 0.0, 1.0, 1.6),
]


@pytest.mark.parametrize("expression", EXPRESSIONS)
@pytest.mark.filterwarnings("ignore::RuntimeWarning")
def test_runs_as_on_arrays(expression: Callable[[Any, Any], Any]) -> None:
    expected = expression(X, Y)
    found = ran(expression, x=X, y=Y)
    np.testing.assert_allclose(np.broadcast_to(found, X.shape), expected, rtol=4e-16 * 8, atol=0.0)
    assert np.asarray(found).dtype.kind in (expected.dtype.kind, "u" if expected.dtype.kind == "i" else "")


def test_sine_and_cosine() -> None:
    """By half the angle: right to the rounding of numbers near 1, all around and at the quarters."""
    angles = np.append(np.linspace(-7.0, 7.0, 1401), np.pi * np.arange(-4, 5) / 2.0)
    for function in (np.sin, np.cos):
        np.testing.assert_allclose(ran(function, x=angles), function(angles), rtol=0.0, atol=1e-15)


def test_whole_numbers_and_truths() -> None:
    found = ran(lambda p: np.where(p >= 2, p * 3 + 1, 99), p=PLACES.astype(np.int8))
    np.testing.assert_array_equal(found, np.where(PLACES >= 2, PLACES * 3 + 1, 99))
    np.testing.assert_array_equal(ran(lambda p: np.choose(p, TABLE), p=PLACES), TABLE[PLACES])
    np.testing.assert_array_equal(ran(lambda t, p: np.where(t, p, 7) + 1, t=TRUE, p=PLACES), np.where(TRUE, PLACES, 7) + 1)
    np.testing.assert_array_equal(ran(lambda t, x: x * t, t=TRUE, x=PLACES + 0.5), (PLACES + 0.5) * TRUE)


def test_other_types_are_widened() -> None:
    assert ran(lambda x: x / 3.0, x=np.array([1.0, 2.0], np.float32)).dtype == float
    np.testing.assert_array_equal(ran(lambda x: x + 1, x=np.array([1, 2], np.int16)), [2, 3])


def test_an_operation_is_recorded_once() -> None:
    recorder = Recorder()
    x = recorder.column("x", np.dtype(float))
    assert np.sqrt(x + 1.0) is np.sqrt(x + 1.0)
    assert np.sqrt(x + 1.0) is not np.sqrt(x + 1.5)


def test_a_guard_that_changes_nothing_is_left_out() -> None:
    recorder = Recorder()
    x, y = (recorder.column(key, np.dtype(float)) for key in "xy")
    condition = y > 0.0
    guarded = np.where(condition, x, np.nan)
    product = guarded * 2.0
    assert np.where(condition, product, np.nan) is product
    assert np.where(y > 1.0, product, np.nan) is not product


@pytest.mark.parametrize("test", [bool, float, int, len, iter, lambda node: node[0]])
def test_a_test_in_python_is_refused(test: Callable[[Any], Any]) -> None:
    with pytest.raises(TypeError, match=r"np\.where"):
        test(Recorder().column("x", np.dtype(float)))


def test_what_is_not_provided_for_is_refused() -> None:
    x = Recorder().column("x", np.dtype(float))
    with pytest.raises(TypeError, match=r"np\.median can't be recorded"):
        np.median(x)
    with pytest.raises(TypeError, match=r"np\.multiply with outer"):
        np.multiply.outer(x, NODES)
    with pytest.raises(TypeError, match=r"np\.add with reduce"):
        np.add.reduce(x)
    with pytest.raises(TypeError, match="only over one axis"):
        np.tensordot(WEIGHTS, Rows((x, x, x)), 2)
    with pytest.raises(TypeError, match="choices that rise"):
        np.select([x > 0.0, x > 1.0], [2, 1], 3)
