"""The fast way to walk a chain over many rows: record the steps once, then run what was recorded over blocks of rows.

A step that is called with a `Node` instead of an array records its operations through the same protocols that write
cell formulas (NEP 13 ``__array_ufunc__`` and NEP 18 ``__array_function__``). What comes of plain numbers alone is
computed on the spot and becomes a constant; an operation that was recorded before is not recorded again; what no
result needs is left out. The operations that remain run over a few reused buffers that stay in the processor's cache.
"""

from __future__ import annotations

import operator
from collections.abc import Callable, Iterable, Mapping, Sequence
from typing import Any

import numpy as np

BLOCK = 8192  # rows at a time: long enough to make little of each call's overhead, short enough for the cache
ALIGNMENT = 64  # bytes: a line of the processor's cache

_BITS = {1: np.dtype(np.int8), 8: np.dtype(np.int64)}
_SPREADS_NAN = {np.add, np.subtract, np.multiply, np.divide, np.sqrt, np.square, np.minimum, np.maximum}
_AND, _OR = {np.bitwise_and, np.logical_and}, {np.bitwise_or, np.logical_or}


class _Recorded(np.lib.mixins.NDArrayOperatorsMixin):
    """What stands for arrays while a chain is recorded."""

    __slots__ = ()

    def __array_ufunc__(self, ufunc: np.ufunc, method: str, *inputs: Any, **kwargs: Any) -> Any:
        if kwargs or method not in ("__call__", "outer"):
            raise TypeError(f"np.{ufunc.__name__} with {method} {sorted(kwargs)} can't be recorded")
        if method == "outer":
            inputs = (Rows(tuple(inputs[0])), inputs[1])
        return _by_row(ufunc, inputs)

    def __array_function__(self, function: Callable[..., Any], types: Any, args: Any, kwargs: Any) -> Any:
        if function not in _RECORDS:
            raise TypeError(f"np.{function.__name__} can't be recorded")
        return _RECORDS[function](*args, **kwargs)


class Node(_Recorded):
    """An operation that was recorded, or a column; stands for its result of one dimension.

    ``function`` takes the arrays of the ``inputs`` and an ``out``; a column has the inputs that the recorder was
    given. With ``bits`` the function works on the bare bits. The nodes run in the order of ``place``.
    """

    __slots__ = ("bits", "dtype", "function", "inputs", "place", "recorder")

    def __init__(self, recorder: Recorder, function: Any, inputs: tuple[Any, ...], dtype: np.dtype[Any], bits: bool,
                 place: tuple[int, int, int]) -> None:  # fmt: skip
        self.recorder, self.function, self.inputs, self.dtype = recorder, function, inputs, dtype
        self.bits, self.place = bits, place

    @property
    def number(self) -> int:
        """Number of the node among all that were recorded."""
        return self.place[2]

    def _no_value(self, *_: object) -> Any:
        raise TypeError("a recorded operation has no value; an equation must use np.where instead of a test in Python")

    __bool__ = __float__ = __int__ = __index__ = __len__ = __iter__ = __getitem__ = _no_value


class Rows(_Recorded):
    """A row of nodes or numbers: stands for an array of two dimensions until it is summed along the first."""

    __slots__ = ("rows",)

    def __init__(self, rows: tuple[Any, ...]) -> None:
        self.rows = rows


class Recorder:
    """Keeps the operations, each one once.

    >>> recorder = Recorder()
    >>> x = recorder.column("x", np.dtype(float))
    >>> program = Program({"y": np.sqrt(x) + np.sqrt(x)})
    >>> program.run({"x": np.array([4.0, 9.0])}, 2)
    {'y': array([4., 6.])}
    """

    def __init__(self) -> None:
        self.nodes: dict[Any, Node] = {}

    def column(self, key: str, dtype: np.dtype[Any]) -> Node:
        """Node of a column that the program is given by its key when it runs."""
        return self.node(None, (key,), dtype, False, (0, -1))

    def record(self, function: Any, inputs: Sequence[Any], dtype: np.dtype[Any], bits: bool = False,
               row: int | None = None) -> Node:  # fmt: skip
        """Node of a function of nodes and numbers, whose result has that type.

        Operations on one row of a sum over many rows are ordered by row, so that all that is done with the first row
        comes before the second: this keeps the number of buffers small. Those stages are the odd ones.
        """
        stages = [item.place[0] for item in inputs if isinstance(item, Node)]
        where = (max(s + s % 2 for s in stages), -1) if row is None else (max(s | 1 for s in stages), row)
        kept = tuple(item if isinstance(item, Node | int) else np.asarray(item) for item in inputs)
        return self.node(function, kept, dtype, bits, where)

    def node(self, function: Any, inputs: tuple[Any, ...], dtype: np.dtype[Any], bits: bool,
             where: tuple[int, int]) -> Node:  # fmt: skip
        sign = (function, bits, dtype, where[1], *map(_sign, inputs))
        found = self.nodes.get(sign)
        if found is None:
            found = self.nodes[sign] = Node(self, function, inputs, dtype, bits, (*where, len(self.nodes)))
        return found


def _sign(item: Any) -> Any:
    """What tells one input of an operation from another."""
    if isinstance(item, Node):
        return item.number
    return (item.dtype, item.shape, item.tobytes()) if isinstance(item, np.ndarray) else (type(item), item)


def _by_row(ufunc: np.ufunc, inputs: Sequence[Any]) -> Any:
    count = next((len(item.rows) for item in inputs if isinstance(item, Rows)), 0)
    if not count:
        return _operation(ufunc, inputs)
    each = [[item.rows[i] if isinstance(item, Rows) else item for item in inputs] for i in range(count)]
    return Rows(tuple(_operation(ufunc, items, i) for i, items in enumerate(each)))


def _operation(ufunc: np.ufunc, inputs: Sequence[Any], row: int | None = None) -> Any:
    """Result of a ufunc: a number if all inputs are, one of the inputs where it changes nothing, else a node."""
    nodes = [item for item in inputs if isinstance(item, Node)]
    if not nodes:
        return ufunc(*inputs)
    if len(nodes) < len(inputs):
        left, right = inputs
        if ufunc in _SIMPLER:
            constant = right if left is nodes[0] else left
            short = _SIMPLER[ufunc](nodes[0], constant, left is nodes[0], row)
            if short is not None:
                return short
        if ufunc in _SPREADS_NAN and any(np.isnan(item) for item in inputs if not isinstance(item, Node)):
            return np.float64(np.nan)
    samples = (np.empty(0, item.dtype) if isinstance(item, Node) else item for item in inputs)
    return nodes[0].recorder.record(ufunc, inputs, ufunc(*samples).dtype, row=row)


def _power(node: Node, constant: Any, node_first: bool, row: int | None) -> Any:
    """Small whole powers as products: a general power is slow, and very slow for negative numbers."""
    if not node_first or constant not in (2.0, 3.0):
        return None
    squared = _operation(np.square, (node,), row)
    return squared if constant == 2.0 else _operation(np.multiply, (node, squared), row)


def _quotient(node: Node, constant: Any, node_first: bool, row: int | None) -> Any:
    """Division by a number as the much faster product, where both are ordinary numbers."""
    usual = node_first and node.dtype == float and 1e-100 < abs(constant) < 1e100
    return _operation(np.multiply, (node, 1.0 / constant), row) if usual else None


def _and(node: Node, constant: Any, node_first: bool, row: int | None) -> Any:
    return node if constant else np.bool_(False)


def _or(node: Node, constant: Any, node_first: bool, row: int | None) -> Any:
    return np.bool_(True) if constant else node


_SIMPLER: dict[Any, Callable[[Node, Any, bool, int | None], Any]] = {
    np.power: _power,
    np.add: lambda node, constant, node_first, row: node if constant == 0.0 else None,
    np.subtract: lambda node, constant, node_first, row: node if node_first and constant == 0.0 else None,
    np.multiply: lambda node, constant, node_first, row: node if constant == 1.0 else None,
    np.divide: _quotient,
    **dict.fromkeys(_AND, _and),
    **dict.fromkeys(_OR, _or),
}


def _where(condition: Any, then: Any, otherwise: Any) -> Any:
    """The choice as arithmetic on bits, which takes the same short time whatever the condition holds."""
    if not isinstance(condition, Node):
        return then if condition else otherwise
    samples = [np.empty(0, item.dtype) if isinstance(item, Node) else item for item in (then, otherwise)]
    dtype = np.where(np.empty(0, bool), *samples).dtype
    if dtype == bool and not isinstance(otherwise, Node) and not otherwise:
        return _operation(np.logical_and, (condition, then))
    return _chosen(condition, then, otherwise, dtype)


def _chosen(condition: Node, then: Any, otherwise: Any, dtype: np.dtype[Any]) -> Node:
    record, bits = condition.recorder.record, _BITS[dtype.itemsize]
    short = record(np.subtract, (condition, np.int8(1)), _BITS[1], bits=True)  # all bits set where it does not hold
    mask = _converted(short, bits)
    one, other = (_converted(item, dtype) for item in (then, otherwise))
    if not isinstance(other, Node) and np.isnan(other):
        return record(np.bitwise_or, (one, mask), dtype, bits=True)  # a number with all bits set is a NaN
    if isinstance(one, Node) or isinstance(other, Node):
        both: Any = record(np.bitwise_xor, (one, other), bits, bits=True)
    else:
        both = one.view(bits) ^ other.view(bits)
    return record(np.bitwise_xor, (record(np.bitwise_and, (both, mask), bits, bits=True), one), dtype, bits=True)


def _converted(item: Any, dtype: np.dtype[Any]) -> Any:
    if not isinstance(item, Node):
        return np.asarray(item).astype(dtype)
    return item if item.dtype == dtype else item.recorder.record(_copy, (item,), dtype)


def _copy(values: np.ndarray, out: np.ndarray) -> None:
    np.copyto(out, values, casting="unsafe")


def _select(conditions: Sequence[Any], choices: Sequence[int], default: int) -> Any:
    """The choice of the first condition that holds: rising numbers below 256, so that it is the least of them."""
    if not all(low < high for low, high in zip([-1, *choices], [*choices, default], strict=True)) or default > 255:
        raise TypeError("np.select can be recorded only with choices that rise from 0 to a default of 255 at most")
    most: Any = np.uint8(0)
    for condition, choice in zip(conditions, choices, strict=True):
        short = np.uint8(default - choice)
        if isinstance(condition, Node):
            counted: Any = condition.recorder.record(np.multiply, (condition, short), np.dtype(np.uint8), bits=True)
        else:
            counted = short if condition else np.uint8(0)
        most = _operation(np.maximum, (most, counted))
    return _operation(np.subtract, (np.uint8(default), most))


def _sum_of_products(weights: np.ndarray, values: Rows, axes: int) -> Any:
    """Weighted sum of the rows, one after the other."""
    if axes != 1 or not isinstance(values, Rows):
        raise TypeError("np.tensordot can be recorded only over one axis, of numbers and rows")
    last = len(weights) - 1
    total: Any = np.float64(0.0)
    for i, (weight, value) in enumerate(zip(weights, values.rows, strict=True)):
        total = _operation(np.add, (total, _weighted(weight, value, i)), None if i == last else i)
    return total


def _weighted(weight: float, value: Any, row: int) -> Any:
    """Weight times value; in a fraction it goes to the numerator, which several sums may share."""
    if isinstance(value, Node) and value.function is np.divide:
        upper, lower = value.inputs
        return _operation(np.divide, (_weighted(weight, upper, row), lower), row)
    return _operation(np.multiply, (value, weight), row)


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
    np.choose: _choose,
    np.interp: _interpolate,
}


class Program:
    """The operations that lead to some results, ready to run over any number of rows.

    ``results`` are the nodes wanted, by key. For an example see `Recorder`.
    """

    def __init__(self, results: Mapping[str, Node]) -> None:
        self.results = dict(results)
        self.order = _needed(self.results.values())
        self.buffers, self.counts = _share_buffers(self.order, {node.number for node in self.results.values()})

    def run(self, columns: Mapping[str, np.ndarray], size: int) -> dict[str, np.ndarray]:
        """The results over ``size`` rows, from all columns that were recorded."""
        nodes = {node.number: node for node in self.results.values()}
        found = {number: np.empty(size, node.dtype) for number, node in nodes.items()}
        rows = 0
        for start in range(0, size, BLOCK):
            stop = min(start + BLOCK, size)
            if stop - start != rows:
                rows = stop - start
                arrays = self._arrays(rows)
                loads = [(arrays[node.number], columns[node.inputs[0]]) for node in self.order if not node.function]
                code = [_bound(node, arrays) for node in self.order if node.function]
            for array, column in loads:
                np.copyto(array, column[start:stop], casting="unsafe")
            for function, inputs, out in code:
                function(*inputs, out=out)
            for number, result in found.items():
                result[start:stop] = arrays[number]
        return {key: found[node.number] for key, node in self.results.items()}

    def _arrays(self, rows: int) -> dict[Any, np.ndarray]:
        """Each node's share of the buffers, by its number."""
        memory = {width: _aligned(count, width * rows) for width, count in self.counts.items()}
        return {
            node.number: memory[node.dtype.itemsize][self.buffers[node.number]].view(node.dtype)[:rows]
            for node in self.order
        }


def _needed(results: Iterable[Node]) -> list[Node]:
    """The results and all nodes that lead to them, in the order of their places."""
    needed: dict[int, Node] = {}
    waiting = list(results)
    while waiting:
        node = waiting.pop()
        if node.number not in needed:
            needed[node.number] = node
            waiting += [item for item in node.inputs if isinstance(item, Node)]
    return sorted(needed.values(), key=operator.attrgetter("place"))


def _share_buffers(order: Sequence[Node], kept: set[int]) -> tuple[dict[int, int], dict[int, int]]:
    """Number of the buffer of each node, and the count of buffers of each width [bytes]: as few as will do."""
    last = {item.number: node for node in order for item in node.inputs if isinstance(item, Node)}
    free: dict[int, list[int]] = {width: [] for width in _BITS}
    counts = dict.fromkeys(_BITS, 0)
    buffers: dict[int, int] = {}
    for node in order:
        ending = {item.number: item for item in node.inputs if isinstance(item, Node) and last[item.number] is node}
        released = [(item.dtype.itemsize, buffers[number]) for number, item in ending.items() if number not in kept]
        in_place = isinstance(node.function, np.ufunc)  # a ufunc may write over its own input
        width = node.dtype.itemsize
        if in_place:
            _release(free, released)
        if not free[width]:
            free[width].append(counts[width])
            counts[width] += 1
        buffers[node.number] = free[width].pop()
        if not in_place:
            _release(free, released)
    return buffers, counts


def _release(free: dict[int, list[int]], buffers: Iterable[tuple[int, int]]) -> None:
    for width, buffer in buffers:
        free[width].append(buffer)


def _aligned(count: int, width: int) -> np.ndarray:
    """That many buffers of a width [bytes], each at a multiple of ALIGNMENT."""
    padded = -(-width // ALIGNMENT) * ALIGNMENT
    memory = np.zeros(count * padded + ALIGNMENT, np.uint8)
    first = -memory.ctypes.data % ALIGNMENT
    return memory[first : first + count * padded].reshape(count, padded)


def _bound(node: Node, arrays: dict[Any, np.ndarray]) -> tuple[Any, tuple[Any, ...], np.ndarray]:
    """Function, inputs and result of an operation over these arrays."""
    out = arrays[node.number]
    inputs = [arrays[item.number] if isinstance(item, Node) else item for item in node.inputs]
    bytes_only = all(item.itemsize == 1 for item in inputs if isinstance(item, np.ndarray))
    if bytes_only or node.function in (np.minimum, np.maximum):  # much faster over two arrays than with a number
        inputs = [item if np.ndim(item) else _filled(item, len(out), arrays) for item in inputs]
    if node.bits:
        *inputs, out = [item.view(_BITS[item.dtype.itemsize]) for item in (*inputs, out)]
    return node.function, tuple(inputs), out


def _filled(number: Any, rows: int, arrays: dict[Any, np.ndarray]) -> np.ndarray:
    """An array full of a number, one for all operations that read it."""
    return arrays.setdefault(_sign(number), np.full(rows, number))
