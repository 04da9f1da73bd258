"""The chain: every step of an assessment as data, in order, and its evaluation over arrays.

A `Step` names its inputs (values of the strip, the day, the aircraft card and the rules, or earlier steps) and the
function that makes it. The array evaluator here and the worksheet evaluator in stripcheck/sheet walk the same list.
Inside, every value is SI and NaN is "not known"; ``unit`` is what the sheets and result tables show.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

import numpy as np

from stripcheck.numeric import Number

BLOCK = 2048  # rows evaluated at a time, so that the arrays of one block stay in the processor's cache


@dataclass(frozen=True)
class Input:
    """A value that a user gives: ``where`` is strip, day, card or rules; ``kind`` number, flag, fault, choice or range."""

    key: str
    label: str
    unit: str
    where: str
    help: str = ""
    kind: str = "number"


@dataclass(frozen=True)
class Step:
    """A computed value.

    ``symbol`` is the trade's sign for it, ``guard`` the key of a truth, or of a number, without which it has no value, ``source``
    where its method comes from, ``words`` the texts that its number stands for (1 is the first), ``lookup`` the
    column of the ground table that it is read from, ``short`` whether a long list keeps it as a column of its own,
    ``implies`` further keys that have a value wherever this truth holds, ``late`` the guards that are sure to hold
    by the time the step reads the values that stand under them, because it tests the guards themselves before.
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
        items = (*self.inputs, *self.steps)
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

    def depends_on_strip(self) -> set[str]:
        """Keys of all values that differ from strip to strip; the others are computed once."""
        varying = {item.key for item in self.inputs if item.where == "strip"}
        for step in self.steps:
            if varying & {*step.inputs, step.guard}:
                varying.add(step.key)
        return varying


def evaluate(chain: Chain, values: Mapping[str, Number]) -> dict[str, np.ndarray]:
    """Every step of the chain over arrays.

    ``values`` holds one entry for each input of the chain, SI, a number or an array of one dimension; all arrays are
    equally long. Gives the steps by key: floats with NaN for "no value", truths, or whole numbers for words.
    """
    arrays = {key: np.asarray(value) for key, value in values.items()}
    tables = {item.key for item in chain.inputs if item.kind == "range"}
    size = max((len(a) for key, a in arrays.items() if a.ndim and key not in tables), default=0)
    if not size:
        return _walk(chain.steps, dict(arrays))
    varying = {key for key, a in arrays.items() if a.ndim and key not in tables}
    once, each = _split(chain, varying)
    fixed = {**arrays, **_walk(once, dict(arrays))}
    results: dict[str, np.ndarray] = {step.key: fixed[step.key] for step in once}
    for start in range(0, size, BLOCK):
        block = {key: arrays[key][start : start + BLOCK] for key in varying}
        for key, value in _walk(each, {**fixed, **block}).items():
            if key not in results:
                results[key] = np.empty(size, value.dtype)
            results[key][start : start + BLOCK] = value
    return results


def _split(chain: Chain, varying: set[str]) -> tuple[list[Step], list[Step]]:
    """The steps that are the same for all rows, and those that are not."""
    varying, once, each = set(varying), [], []
    for step in chain.steps:
        moving = bool(varying & {*step.inputs, step.guard})
        (each if moving else once).append(step)
        varying |= {step.key} if moving else set()
    return once, each


def _walk(steps: tuple[Step, ...] | list[Step], values: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
    found = {}
    with np.errstate(all="ignore"):
        for step in steps:
            value = step.function(*(values[key] for key in step.inputs))
            if step.guard:
                guard = values[step.guard]
                holds = guard if guard.dtype == bool else np.isfinite(guard)
                value = np.where(holds, value, False if step.truth else np.nan)
            values[step.key] = found[step.key] = np.asarray(value)
    return found
