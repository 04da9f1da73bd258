"""Recording a chain: values that answer NumPy's protocols by noting down what is done with them.

A step that is called with a `Node` instead of an array records its operations (NEP 13 ``__array_ufunc__`` and NEP 18
``__array_function__``, the protocols that also write cell formulas). What comes of plain numbers alone is computed on
the spot and becomes a constant, an operation that was recorded before is not recorded again, and slow ones are
replaced by faster ones with the same result. stripcheck/program.py runs what was recorded.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from itertools import pairwise
from typing import Any, NoReturn

import numpy as np

# how results of one and of eight bytes are taken as bare bits
BITS: dict[int, np.dtype[Any]] = {1: np.dtype(np.int8), 8: np.dtype(np.int64)}

_BYTE = np.dtype(np.uint8)
_AND, _OR = (np.logical_and, np.bitwise_and), (np.logical_or, np.bitwise_or)
_COMPARISONS = (np.less, np.less_equal, np.greater, np.greater_equal, np.equal)  # false where an input is NaN
_SPREADING = {  # NaN where an input is
    np.add, np.subtract, np.multiply, np.divide, np.minimum, np.maximum, np.absolute, np.negative, np.square, np.sqrt,
    np.cbrt, np.exp, np.log, np.tan,
}  # fmt: skip
_NONE: frozenset[int] = frozenset()


class _Recorded(np.lib.mixins.NDArrayOperatorsMixin):
    """What stands for arrays while a chain is recorded."""

    __slots__ = ()

    def __array_ufunc__(self, ufunc: np.ufunc, method: str, *inputs: Any, **kwargs: Any) -> Any:
        if kwargs or method not in ("__call__", "outer") or (method == "outer" and isinstance(inputs[0], _Recorded)):
            raise TypeError(f"np.{ufunc.__name__} with {method} {sorted(kwargs)} can't be recorded")
        return _by_row(ufunc, inputs)

    def __array_function__(self, function: Callable[..., Any], types: Any, args: Any, kwargs: Any) -> Any:
        if function not in _RECORDS:
            raise TypeError(f"np.{function.__name__} can't be recorded")
        return _RECORDS[function](*args, **kwargs)


class Node(_Recorded):
    """An operation that was recorded; stands for its result, an array of one dimension.

    ``function`` takes the arrays of the ``inputs`` and an ``out``, with ``bits`` as bare bits; a column of the data
    has no function, and its key as the input. ``needs`` are the numbers of the conditions without which the result
    is NaN or false. Nodes run in the order of ``stage``, ``row`` and ``number``.
    """

    __slots__ = ("bits", "dtype", "function", "inputs", "needs", "number", "recorder", "row", "stage")

    def __init__(self, recorder: Recorder, number: int, function: Any, inputs: tuple[Any, ...],
                 dtype: np.dtype[Any]) -> None:  # fmt: skip
        self.recorder, self.number, self.function, self.inputs, self.dtype = recorder, number, function, inputs, dtype
        self.bits, self.stage, self.row, self.needs = False, 0, -1, _NONE

    def _no_value(self, *_: object) -> NoReturn:
        raise TypeError("a recorded value is not known yet: an equation must use np.where instead of a test in Python")

    __bool__ = __float__ = __int__ = __index__ = __len__ = __iter__ = __getitem__ = _no_value


class Rows(_Recorded):
    """Nodes or numbers: stands for an array of two dimensions until it is summed over the first."""

    __slots__ = ("rows",)

    def __init__(self, rows: tuple[Any, ...]) -> None:
        self.rows = rows


class Recorder:
    """Keeps the nodes, each operation once.

    >>> x = Recorder().column("x", np.dtype(float))
    >>> y = 2.0 * np.sqrt(x)
    >>> y.function.__name__, y.number, np.multiply(np.sqrt(x), 2.0).number
    ('multiply', 2, 3)
    """

    def __init__(self) -> None:
        self._nodes: dict[Any, Node] = {}
        self._dtypes: dict[Any, np.dtype[Any]] = {}

    def column(self, key: str, dtype: np.dtype[Any]) -> Node:
        """Node of a column of the data: floats, whole numbers or truths, taken as types of eight or one bytes."""
        usual = dtype.kind in "biuf" and dtype.itemsize in BITS
        kept = dtype if usual else np.dtype(float if dtype.kind == "f" else np.int64)
        node = self._nodes[key] = Node(self, len(self._nodes), None, (key,), kept)
        node.needs = _needs_of(node, _NONE)
        return node

    def record(self, function: Any, inputs: Sequence[Any], dtype: np.dtype[Any], bits: bool = False, row: int = -1,
               needs: frozenset[int] = _NONE) -> Node:  # fmt: skip
        """Node of a function whose result has that type.

        Operations on one of the ``row``s of a sum come before those on the next row, which keeps the number of
        values that wait for each other small. Stages with rows are odd, those without are even.
        """
        sign = (function, bits, row, *[item.number if isinstance(item, Node) else _sign(item) for item in inputs])
        node = self._nodes.get(sign)
        if node is None:
            node = self._nodes[sign] = Node(self, len(self._nodes), function, tuple(inputs), dtype)
            stages = [item.stage for item in inputs if isinstance(item, Node)]
            node.stage = max([stage + (stage % 2 if row < 0 else 1 - stage % 2) for stage in stages])
            node.bits, node.row = bits, row
            node.needs = _needs_of(node, needs)
        return node

    def type_of(self, ufunc: np.ufunc, inputs: Sequence[Any]) -> np.dtype[Any]:
        """Type of a ufunc's result, tried on no rows at all."""
        sign = (ufunc, *[item.dtype if isinstance(item, Node) else type(item) for item in inputs])
        if sign not in self._dtypes:
            samples = (np.empty(0, item.dtype) if isinstance(item, Node) else item for item in inputs)
            self._dtypes[sign] = ufunc(*samples).dtype
        return self._dtypes[sign]


def _sign(item: Any) -> Any:
    """What tells one constant from another."""
    return (item.dtype, item.shape, item.tobytes()) if isinstance(item, np.ndarray) else (type(item), repr(item))


def _needs_of(node: Node, needs: frozenset[int]) -> frozenset[int]:
    return needs | {node.number} if node.dtype == bool else needs


def _needs(ufunc: np.ufunc, inputs: Sequence[Any]) -> frozenset[int]:
    """Conditions without which a ufunc's result is NaN or false, from those of its inputs."""
    spreads = ufunc in _SPREADING or ufunc in _COMPARISONS or ufunc in _AND or ufunc is np.isfinite
    if spreads or (ufunc is np.power and not isinstance(inputs[1], Node) and inputs[1] != 0.0):
        return _NONE.union(*[item.needs for item in inputs if isinstance(item, Node)])
    return _NONE


def _by_row(ufunc: np.ufunc, inputs: Sequence[Any]) -> Any:
    """Result of a ufunc, row by row where there are rows: an array of numbers is one number for each row."""
    inputs = [Rows(tuple(item)) if isinstance(item, np.ndarray) and item.ndim else item for item in inputs]
    count = next((len(item.rows) for item in inputs if isinstance(item, Rows)), 0)
    if not count:
        return _operation(ufunc, inputs)
    each = [[item.rows[i] if isinstance(item, Rows) else item for item in inputs] for i in range(count)]
    return Rows(tuple(_operation(ufunc, items, i) for i, items in enumerate(each)))


def _operation(ufunc: np.ufunc, inputs: Sequence[Any], row: int = -1) -> Any:
    """Result of a ufunc: a number if all inputs are, one of the inputs where it changes nothing, else a node."""
    nodes = [item for item in inputs if isinstance(item, Node)]
    if not nodes:
        return ufunc(*inputs)
    if len(nodes) < len(inputs):
        node_first = nodes[0] is inputs[0]
        constant = inputs[1] if node_first else inputs[0]
        if ufunc in _SPREADING and np.isnan(constant):
            return np.float64(np.nan)
        if ufunc in _WITH_NUMBER:
            result = _WITH_NUMBER[ufunc](nodes[0], constant, node_first, row)
            if result is not None:
                return result
    if ufunc in _ALONE:
        return _ALONE[ufunc](nodes[0], row)
    recorder = nodes[0].recorder
    kept = [np.asarray(item) if isinstance(item, float) else item for item in inputs]
    return recorder.record(ufunc, kept, recorder.type_of(ufunc, inputs), row=row, needs=_needs(ufunc, inputs))


def _power(node: Node, constant: Any, node_first: bool, row: int) -> Any:
    """Small whole powers as products: a general power is slow, and very slow for negative numbers."""
    if not node_first or constant not in (2.0, 3.0):
        return None
    squared = _operation(np.square, (node,), row)
    return squared if constant == 2.0 else _operation(np.multiply, (node, squared), row)


def _quotient(node: Node, constant: Any, node_first: bool, row: int) -> Any:
    """Division by a number as a product, which takes half the time."""
    usual = node_first and node.dtype == float and 1e-100 < abs(constant) < 1e100
    return _operation(np.multiply, (node, 1.0 / constant), row) if usual else None


_WITH_NUMBER: dict[Any, Callable[[Node, Any, bool, int], Any]] = {
    np.power: _power,
    np.divide: _quotient,
    np.multiply: lambda node, constant, node_first, row: node if constant == 1.0 else None,
    np.add: lambda node, constant, node_first, row: node if constant == 0.0 else None,
    np.subtract: lambda node, constant, node_first, row: node if node_first and constant == 0.0 else None,
    **dict.fromkeys(_AND, lambda node, constant, node_first, row: node if constant else np.False_),
    **dict.fromkeys(_OR, lambda node, constant, node_first, row: np.True_ if constant else node),
}


def _cosine(node: Node, row: int) -> Any:
    """By the tangent of half the angle: NumPy's tangent takes a tenth of the time of its cosine and sine."""
    squared = _operation(np.square, (_half_tangent(node, row),), row)
    return _operation(np.divide, (1.0 - squared, 1.0 + squared), row)


def _sine(node: Node, row: int) -> Any:
    tangent = _half_tangent(node, row)
    return _operation(np.divide, (2.0 * tangent, 1.0 + _operation(np.square, (tangent,), row)), row)


def _half_tangent(node: Node, row: int) -> Any:
    return _operation(np.tan, (_operation(np.multiply, (0.5, node), row),), row)


_ALONE: dict[Any, Callable[[Node, int], Any]] = {np.cos: _cosine, np.sin: _sine}


def _where(condition: Any, then: Any, otherwise: Any) -> Any:
    if not isinstance(condition, Node):
        return then if condition else otherwise
    if not isinstance(otherwise, Node) and (otherwise is False or np.isnan(otherwise)):
        if isinstance(then, Node) and condition.number in then.needs:
            return then  # it has no value, or does not hold, without the condition anyway
        if otherwise is False:
            return _operation(np.logical_and, (condition, then))
    samples = [np.empty(0, item.dtype) if isinstance(item, Node) else item for item in (then, otherwise)]
    return _chosen(condition, then, otherwise, np.where(np.empty(0, bool), *samples).dtype)


def _chosen(condition: Node, then: Any, otherwise: Any, dtype: np.dtype[Any]) -> Node:
    """The choice as arithmetic on bits, which takes the same short time whatever the condition holds."""
    record, bits = condition.recorder.record, BITS[dtype.itemsize]
    # all bits set where the condition does not hold, else none
    mask = _converted(record(np.subtract, (condition, np.array(1, np.int8)), BITS[1], bits=True), bits)
    one, other = (_converted(item, dtype) for item in (then, otherwise))
    needs = [item.needs if isinstance(item, Node) else _NONE for item in (one, other)]
    if not isinstance(other, Node) and np.isnan(other):  # a number with all bits set is a NaN
        return record(np.bitwise_or, (one, mask), dtype, bits=True, needs=condition.needs | needs[0])
    if isinstance(one, Node) or isinstance(other, Node):
        both: Any = record(np.bitwise_xor, (one, other), bits, bits=True)
    else:
        both = one.view(bits) ^ other.view(bits)
    masked = record(np.bitwise_and, (both, mask), bits, bits=True)
    return record(np.bitwise_xor, (masked, one), dtype, bits=True, needs=needs[0] & needs[1])


def _converted(item: Any, dtype: np.dtype[Any]) -> Any:
    if not isinstance(item, Node):
        return np.asarray(item).astype(dtype)
    return item if item.dtype == dtype else item.recorder.record(_copy, (item,), dtype)


def _copy(values: np.ndarray, out: np.ndarray) -> None:
    np.copyto(out, values, casting="unsafe")


def _select(conditions: Sequence[Any], choices: Sequence[int], default: int) -> Any:
    """The choice of the first condition that holds: as the choices rise, it is the least of those that hold."""
    rising = [-1, *choices, default]
    if not all(low < high < 256 for low, high in pairwise(rising)):
        raise TypeError("np.select can be recorded only with choices that rise from 0 to a default of 255 at most")
    most: Any = np.uint8(0)
    for condition, choice in zip(conditions, choices, strict=True):
        below = np.array(default - choice, np.uint8)
        if isinstance(condition, Node):
            counted: Any = condition.recorder.record(np.multiply, (condition, below), _BYTE, bits=True)
        else:
            counted = below if condition else np.uint8(0)
        most = _operation(np.maximum, (most, counted))
    return _operation(np.subtract, (np.uint8(default), most))


def _sum_of_products(weights: np.ndarray, values: Rows, axes: int) -> Any:
    """Weighted sum of the rows, one after the other; the last sum belongs to no row."""
    if axes != 1 or not isinstance(values, Rows):
        raise TypeError("np.tensordot can be recorded only over one axis, of numbers and rows")
    total: Any = 0.0
    for i, (weight, value) in enumerate(zip(weights, values.rows, strict=True)):
        total = _operation(np.add, (total, _weighted(weight, value, i)), i if i < len(weights) - 1 else -1)
    return total


def _weighted(weight: float, value: Any, row: int) -> Any:
    """Weight times value; in a fraction it goes to the numerator, which several sums may share."""
    if isinstance(value, Node) and value.function is np.divide:
        upper, lower = value.inputs
        return _operation(np.divide, (_weighted(weight, upper, row), lower), row)
    return _operation(np.multiply, (weight, value), row)


def _choose(places: Node, column: np.ndarray) -> Node:
    return places.recorder.record(_looked_up, (places, column), column.dtype)


def _looked_up(places: np.ndarray, column: np.ndarray, out: np.ndarray) -> None:
    np.take(column, places, out=out, mode="clip")  # any other mode writes into an array of its own first


def _interpolate(at: Node, nodes: np.ndarray, values: np.ndarray) -> Node:
    return at.recorder.record(_interpolated, (at, nodes, values), np.dtype(float))


def _interpolated(at: np.ndarray, nodes: np.ndarray, values: np.ndarray, out: np.ndarray) -> None:
    out[:] = np.interp(at, nodes, values)


_RECORDS: dict[Any, Callable[..., Any]] = {
    np.where: _where,
    np.select: _select,
    np.tensordot: _sum_of_products,
    np.broadcast_arrays: lambda *values: values,
    np.choose: _choose,
    np.interp: _interpolate,
}
