"""The chain: every step of an assessment as data, in order, and its evaluation over arrays.

A `Step` names its inputs (values of the strip, the day, the aircraft card and the rules, or earlier steps) and the
function that makes it. The array evaluator here and the worksheet evaluator in stripcheck/sheet walk the same list.
Inside, every value is SI and NaN is "not known"; ``unit`` is what the sheets and result tables show.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterable, Mapping
from dataclasses import dataclass, field
from functools import lru_cache
from typing import Any

import numpy as np

from stripcheck.numeric import Number
from stripcheck.program import Program
from stripcheck.recording import Node, Recorder

FEW = 4000  # rows below which recording the steps costs more time than it saves


@dataclass(frozen=True)
class Input:
    """A value that a user gives.

    ``where`` is strip, day, card or rules; ``kind`` is number, flag, fault, choice or range.
    """

    key: str
    label: str
    unit: str
    where: str
    help: str = ""
    kind: str = "number"


@dataclass(frozen=True)
class Step:
    """A computed value.

    ``symbol`` is the trade's sign for it, ``guard`` the key of a truth, or of a number, without which it has no
    value, ``source`` where its method comes from, ``words`` the texts that its number stands for (1 is the first),
    ``lookup`` the column of the ground table that it is read from, ``short`` whether a long list keeps it as a
    column of its own, ``implies`` further keys that have a value wherever this truth holds, ``late`` the guards that
    are sure to hold by the time the step reads the values that stand under them, because it tests the guards
    themselves before.
    """

    key: str
    symbol: str
    unit: str
    label: str
    source: str
    function: Callable[..., Number]
    inputs: tuple[str, ...]
    guard: str = ""
    words: tuple[str, ...] = ()
    truth: bool = False
    short: bool = False
    lookup: str = ""
    implies: tuple[str, ...] = ()
    late: tuple[str, ...] = ()


@dataclass(frozen=True)
class Chain:
    """The ordered steps for one kind of engine and propeller, and the inputs that they read."""

    inputs: tuple[Input, ...]
    steps: tuple[Step, ...]
    by_key: Mapping[str, Input | Step] = field(init=False)

    def __post_init__(self) -> None:
        items: tuple[Input | Step, ...] = (*self.inputs, *self.steps)
        object.__setattr__(self, "by_key", {item.key: item for item in items})
        if len(self.by_key) != len(items):
            raise ValueError("two items of the chain have the same key")
        seen = {item.key for item in self.inputs}
        for step in self.steps:
            missing = [key for key in (*step.inputs, step.guard) if key and key not in seen]
            if missing:
                raise ValueError(f"step {step.key} reads {missing}, which no input or earlier step gives")
            seen.add(step.key)

    def held_with(self, key: str) -> frozenset[str]:
        """Keys that are sure to have a value, or to be true, where the step ``key`` has or is."""
        item = self.by_key[key]
        if isinstance(item, Input):
            return frozenset({key})
        further = [self.held_with(other) for other in (item.guard, *item.implies) if other]
        return frozenset({key}).union(*further)

    def leading_to(self, keys: Iterable[str], known: Collection[str] = ()) -> tuple[Step, ...]:
        """The steps with these keys and all that they read, in order, but not what only the steps ``known`` read.

        Raises KeyError for a key of no step.
        """
        needed = set(keys)
        unknown = needed - {step.key for step in self.steps}
        if unknown:
            raise KeyError(f"no step has the key {min(unknown)}")
        leading = []
        for step in reversed(self.steps):
            if step.key in needed:
                leading.append(step)
                needed |= {key for key in (*step.inputs, step.guard) if key and step.key not in known}
        return tuple(leading[::-1])

    def depends_on_strip(self) -> set[str]:
        """Keys of all values that differ from strip to strip; the others are computed once."""
        return self.depends_on(item.key for item in self.inputs if item.where == "strip")

    def depends_on(self, keys: Iterable[str]) -> set[str]:
        """These keys, and those of all steps that read one of them, straight or through other steps."""
        varying = set(keys)
        for step in self.steps:
            if varying & {*step.inputs, step.guard}:
                varying.add(step.key)
        return varying


def evaluate(chain: Chain, values: Mapping[str, Number], keys: Collection[str] | None = None) -> dict[str, np.ndarray]:
    """Steps of the chain over arrays: those with the ``keys``, or all.

    ``values`` holds one entry for each input of the chain, SI, a number or an array of one dimension; all arrays are
    equally long, and so are the results (of no dimension where there is no array). Gives the steps by key: floats
    with NaN for "no value", truths, or whole numbers for words. Raises KeyError for a key that is not a step's.
    """
    wanted = tuple(step.key for step in chain.steps) if keys is None else tuple(keys)
    steps = chain.leading_to(wanted)
    arrays = {key: np.asarray(value) for key, value in values.items()}
    tables = {item.key for item in chain.inputs if item.kind == "range"}
    columns = {key: array for key, array in arrays.items() if array.ndim and key not in tables}
    size = max((len(column) for column in columns.values()), default=0)
    with np.errstate(all="ignore"):
        found = walk(steps, arrays) if size < FEW else _run(steps, arrays, columns, size, wanted)
    shape = (size,) if columns else ()
    return {key: np.broadcast_to(found[key], shape) for key in wanted}


def walk(steps: Iterable[Step], values: Mapping[str, Number]) -> dict[str, Number]:
    """The values and those of the steps, by key; the values may be anything that answers NumPy's protocols."""
    found = dict(values)
    for step in steps:
        value = step.function(*(found[key] for key in step.inputs))
        if step.guard:
            guard = found[step.guard]
            holds = guard if guard.dtype == bool else np.isfinite(guard)
            value = np.where(holds, value, False if step.truth else np.nan)
        found[step.key] = value if hasattr(value, "dtype") else np.asarray(value)
    return found


def _run(steps: tuple[Step, ...], arrays: Mapping[str, np.ndarray], columns: Mapping[str, np.ndarray], size: int,
         wanted: tuple[str, ...]) -> dict[str, np.ndarray]:  # fmt: skip
    """As ``walk``, for many rows: the steps are recorded as one program, which then runs."""
    varying = {key: column for key, column in columns.items() if not _is_uniform(column)}
    fixed = {**arrays, **{key: column[:1].reshape(()) for key, column in columns.items()}}
    numbers = tuple((key, a.dtype, a.shape, a.tobytes()) for key, a in fixed.items() if key not in varying)
    program, found = _record(steps, wanted, numbers, tuple((key, column.dtype) for key, column in varying.items()))
    return {**found, **program.run(varying, size)}


@lru_cache(maxsize=8)
def _record(steps: tuple[Step, ...], wanted: tuple[str, ...], numbers: tuple[tuple[str, Any, Any, bytes], ...],
            columns: tuple[tuple[str, Any], ...]) -> tuple[Program, dict[str, np.ndarray]]:  # fmt: skip
    """The program for what differs from row to row, and the results that don't; kept for the next call like this."""
    recorder = Recorder()
    fixed = {key: np.frombuffer(data, dtype).reshape(shape) for key, dtype, shape, data in numbers}
    nodes = {key: recorder.column(key, dtype) for key, dtype in columns}
    found = walk(steps, {**fixed, **nodes})
    program = Program({key: found[key] for key in wanted if isinstance(found[key], Node)})
    return program, {key: found[key] for key in wanted if not isinstance(found[key], Node)}


def _is_uniform(column: np.ndarray) -> bool:
    """Whether a column holds the same value, or none, in all rows; most columns show soon that it does not."""
    for part in (column[:9], column):
        same = part == column[0] if column[0] == column[0] else part != part
        if not same.all():
            return False
    return True
