"""Running what was recorded of a chain, over blocks of rows in a few reused buffers.

Only the operations that lead to a wanted result run. There are just so many buffers that no operation writes over
what a later one still needs, and they stay in the processor's cache.
"""

from __future__ import annotations

import operator
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import numpy as np

from stripcheck.recording import BITS, Node

BLOCK = 12288  # rows at a time: long enough to make little of each call's overhead, short enough for the cache
ALIGNMENT = 64  # bytes: a line of the processor's cache


class Program:
    """The operations that lead to some results, ready to run over any number of rows.

    ``results`` are the nodes wanted, by key.

    >>> from stripcheck.recording import Recorder
    >>> x = Recorder().column("x", np.dtype(float))
    >>> Program({"y": 2.0 * np.sqrt(x)}).run({"x": np.array([4.0, 9.0])}, 2)
    {'y': array([4., 6.])}
    """

    def __init__(self, results: Mapping[str, Node]) -> None:
        self.results = dict(results)
        self.order = _needed(self.results.values())
        self.buffers, self.counts = _share_buffers(self.order, {node.number for node in self.results.values()})

    def run(self, columns: Mapping[str, np.ndarray], size: int) -> dict[str, np.ndarray]:
        """The results over ``size`` rows, from all columns that were recorded."""
        nodes = {node.number: node for node in self.results.values()}
        found = {number: np.empty(size, node.dtype) for number, node in nodes.items()}
        rows = min(BLOCK, size)
        arrays = self._arrays(rows)
        loads = [(arrays[node.number], columns[node.inputs[0]]) for node in self.order if not node.function]
        code = [_bound(node, arrays) for node in self.order if node.function]
        for start in range(0, size, BLOCK):
            first = min(start, size - rows)  # the last block is as long as the others and does some rows again
            for array, column in loads:
                np.copyto(array, column[first : first + rows], casting="unsafe")
            for function, inputs, out in code:
                function(*inputs, out=out)
            for number, result in found.items():
                result[first : first + rows] = arrays[number]
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
    return sorted(needed.values(), key=operator.attrgetter("stage", "row", "number"))


def _share_buffers(order: Sequence[Node], kept: set[int]) -> tuple[dict[int, int], dict[int, int]]:
    """Number of the buffer of each node, and the count of buffers of each width [bytes]: as few as will do."""
    last = {item.number: node for node in order for item in node.inputs if isinstance(item, Node)}
    free: dict[int, list[int]] = {width: [] for width in BITS}
    counts = dict.fromkeys(BITS, 0)
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
        *inputs, out = [item.view(BITS[item.dtype.itemsize]) for item in (*inputs, out)]
    return node.function, tuple(inputs), out


def _filled(number: Any, rows: int, arrays: dict[Any, np.ndarray]) -> np.ndarray:
    """An array full of a number, one for all operations that read it."""
    sign = (np.asarray(number).dtype, float(number))
    if sign not in arrays:
        arrays[sign] = np.full(rows, number)
    return arrays[sign]
