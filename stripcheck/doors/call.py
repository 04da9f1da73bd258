"""Calling a function of the registry with what a spreadsheet hands over: cells and ranges in, cells and ranges out.

A range is a list of rows; all ranges have the shape of the result, or one row, or one column, or are single cells. What
is wrong with a cell comes back as a plain sentence in its place. An argument that is left out is None and takes its usual
value; an empty cell never does, since that could as well be forgotten: alone it is "" or [[None]], in a range None or "".
Nothing here needs more than NumPy, except units that only pint knows.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import partial
from math import inf, isfinite
from typing import Any

import numpy as np

from stripcheck.doors.aircraft import NO_WORDS, Aeroplane, aeroplane_of, rules_of
from stripcheck.doors.functions import Argument, Function
from stripcheck.errors import InputError
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import KINDS, MOST, PRESSURE_HPA, PRESSURE_INHG, UNITS, read_quantity, to_si, unit_scale

Cells = Any  # a cell, or a list of rows of cells
WORDS = {"surface": SURFACES, "condition": CONDITIONS}
WHOLE = ("aircraft", "rules", "text")  # kinds of argument that count for all cells of the result
MISSING = (None, "")
EMPTY = "the cell is empty"


def call(function: Function, *given: Cells) -> Cells:
    """The function's result for arguments as a spreadsheet hands them over: a number or text, or a list of rows.

    Never raises for bad input: a sentence stands where the result would.

    >>> from stripcheck.doors.functions import BY_NAME
    >>> round(call(BY_NAME["DENSITY_ALT"], 2400, 1008, 31), 1)
    4930.4
    >>> call(BY_NAME["SLOPE"], [[2380.0], [2380.0]], [[2410.0], ["x"]], 620.0)[1][0]
    'Elevation at end: "x" is not a number; write for example "2300 ft"'
    """
    return _answer(function, given)[0]


def sentences(function: Function, *given: Cells) -> list[str]:
    """What is wrong with a call, in words; nothing where it has a result in every cell.

    >>> from stripcheck.doors.functions import BY_NAME
    >>> sentences(BY_NAME["SLOPE"], 2380, 2410)
    ['Length is missing: Length of the strip between its ends [m]']
    """
    return _answer(function, given)[1]


def prepared(function: Function) -> Callable[..., Cells]:
    """``call`` of one function, faster for numbers alone: what every call of it has in common is worked out once.

    NumPy's warnings of numbers without a result are for the caller to silence, once: at each call it would cost too much.

    >>> from stripcheck.doors.functions import BY_NAME
    >>> slope = prepared(BY_NAME["SLOPE"])
    >>> slope(2380.0, 2410.0, 620.0, None) == call(BY_NAME["SLOPE"], 2380, 2410, 620)
    True
    """
    compute, arguments = function.compute, function.arguments
    if compute is None or function.unit is None or not all(argument.kind in KINDS for argument in arguments):
        return partial(call, function)
    whole, shown = len(function.all_arguments), UNITS[function.unit]
    factor_shown, offset_shown = shown.factor, shown.offset
    readings = [(*_reading(argument), argument.default) for argument in arguments]

    def answer(*given: Cells) -> Cells:
        values = []
        if len(given) == whole and (not function.unit or given[-1] is None):
            for cell, (low, high, factor, offset, default) in zip(given, readings, strict=False):
                number = default if cell is None else cell
                if type(number) is not float or not low <= number <= high:
                    break
                values.append(np.float64(number * factor + offset))
            else:
                found = (float(compute(*values)) - offset_shown) / factor_shown
                if isfinite(found):
                    return found
        return call(function, *given)  # a text, a range, or something wrong

    return answer


def _reading(argument: Argument) -> tuple[float, float, float, float]:
    """Least and greatest number that can only be of one unit, and its factor and offset."""
    unit = UNITS[KINDS[argument.kind][0]]
    low, high = PRESSURE_HPA if argument.kind == "pressure" else (-inf, inf)
    return low, high, unit.factor, unit.offset


def _answer(function: Function, given: Sequence[Cells]) -> tuple[Cells, list[str]]:
    try:
        one = _Call(function, given)
        return one.result(), list(one.wrong.values())
    except InputError as error:
        return str(error), [str(error)]


class _Call:
    """One call: arguments spread over the shape of the result, sentences for the cells that can't be used."""

    def __init__(self, function: Function, given: Sequence[Cells]) -> None:
        arguments = function.all_arguments
        if len(given) > len(arguments):
            raise InputError(f"{function.full_name} takes {len(arguments)} values at the most; {len(given)} are given")
        self.function = function
        whole = (*given, *[None] * (len(arguments) - len(given)))
        self.typed = {argument.key: _or_default(argument, cells) for argument, cells in zip(arguments, whole, strict=True)}
        self.spread = [argument for argument in function.arguments if argument.kind not in WHOLE]
        self.shape = _common_shape([self.typed[argument.key] for argument in self.spread])
        self.size = int(np.prod(self.shape)) if self.shape else 1
        self.wrong: dict[int, str] = {}

    def result(self) -> Cells:
        """The result in its unit, in the shape of the arguments."""
        unit = self._unit()
        aeroplane = aeroplane_of(self.typed["aircraft"]) if "aircraft" in self.typed else None
        rules = rules_of(self.typed["rules"]) if "rules" in self.typed else None
        values = {argument.key: self._values(argument, aeroplane) for argument in self.spread}
        found, words = self._compute(values, aeroplane, rules)
        if isinstance(found, np.ndarray) and unit is not None:
            factor, offset = unit
            found = (found - offset) / factor
        cells = np.broadcast_to(np.asarray(found), self.size).tolist()
        self.wrong = {**words, **self.wrong}
        for place, text in self.wrong.items():
            cells[place] = text
        if not self.shape:
            return cells[0]
        rows, columns = self.shape
        return [cells[row * columns : (row + 1) * columns] for row in range(rows)]

    def _unit(self) -> tuple[float, float] | None:
        """Factor and offset of the unit asked for."""
        shown = self.function.unit
        if not shown:
            return None
        typed = self.typed["unit"]
        if typed in MISSING:
            return UNITS[shown].factor, UNITS[shown].offset
        if not isinstance(typed, str):
            raise InputError(f'Unit: a text such as "{shown}" is expected')
        kind = next(kind for kind, (default, _) in KINDS.items() if default == shown)
        return unit_scale(typed, kind)

    def _values(self, argument: Argument, aeroplane: Aeroplane | None) -> np.ndarray:
        """The argument's values in SI, one for each cell of the result."""
        cells = self.typed[argument.key]
        flat = _flat(cells)
        if argument.kind in WORDS:
            found = self._each(argument, flat, cells, lambda cell: _word(cell, argument))
        elif argument.kind == "flap":
            side = "landing" if "LANDING" in self.function.name or "APPROACH" in self.function.name else "take-off"
            use = None if self.function.name == "STALL_SPEED" else side
            found = self._each(argument, flat, cells, lambda cell: _aeroplane(aeroplane).deflection(cell, use))
        else:
            found = self._numbers(argument, flat, cells)
        return self._over_shape(found, cells)

    def _numbers(self, argument: Argument, flat: Sequence[Any], cells: Cells) -> np.ndarray:
        if all(type(cell) is float or (type(cell) is int and abs(cell) < MOST) for cell in flat):
            numbers = np.array(flat, dtype=float)
            if argument.kind != "pressure":
                return np.asarray(to_si(numbers, KINDS[argument.kind][0]))
            inches = (numbers >= PRESSURE_INHG[0]) & (numbers <= PRESSURE_INHG[1])
            if (inches | ((numbers >= PRESSURE_HPA[0]) & (numbers <= PRESSURE_HPA[1]))).all():
                return np.asarray(np.where(inches, to_si(numbers, "inHg"), to_si(numbers, "hPa")))
        return self._each(argument, flat, cells, lambda cell: read_quantity(_plain(cell), argument.kind))

    def _each(self, argument: Argument, flat: Sequence[Any], cells: Cells, read: Callable[[Any], float]) -> np.ndarray:
        """The cells read one by one; a cell that can't be read makes a sentence wherever it counts."""
        found = np.full(len(flat), np.nan)
        for place, cell in enumerate(flat):
            try:
                if cell is None or cell == "":
                    raise InputError(EMPTY)
                found[place] = read(cell)
            except InputError as error:
                alone = np.zeros(len(flat), bool)
                alone[place] = True
                sentence = f"{argument.name}: {error}"
                for where in np.flatnonzero(self._over_shape(alone, cells)).tolist():
                    self.wrong.setdefault(where, sentence)
        return found

    def _over_shape(self, values: np.ndarray, cells: Cells) -> np.ndarray:
        if not self.shape or not isinstance(cells, list):
            return np.broadcast_to(values, self.size)
        return np.broadcast_to(values.reshape(len(cells), -1), self.shape).ravel()

    def _compute(self, values: dict[str, np.ndarray], aeroplane: Aeroplane | None,
                 rules: dict[str, Any] | None) -> tuple[Any, dict[int, str]]:  # fmt: skip
        """The result in SI, or texts; and sentences for the places where there is none."""
        if self.function.ask is not None:
            return self.function.ask(_aeroplane(aeroplane), values, rules, self.size)
        if self.function.compute is None:
            return _aeroplane(aeroplane).ask(self.function.step, values, rules, self.size)
        more: list[Any] = [rules] if rules is not None else []
        more += [self._text(argument) for argument in self.function.arguments if argument.kind == "text"]
        with np.errstate(all="ignore"):
            found = np.asarray(self.function.compute(*values.values(), *more), dtype=float)
        lost = np.flatnonzero(~np.isfinite(np.broadcast_to(found, self.size))).tolist()
        return found, dict.fromkeys(lost, NO_WORDS)


    def _text(self, argument: Argument) -> str:
        typed = self.typed[argument.key]
        if not isinstance(typed, str):
            raise InputError(f"{argument.name}: one text is expected. {argument.help}")
        return typed


def _aeroplane(aeroplane: Aeroplane | None) -> Aeroplane:
    if aeroplane is None:  # a registry in which an argument needs an aircraft that the function does not take
        raise TypeError("this function has no aircraft argument")
    return aeroplane


def _or_default(argument: Argument, cells: Cells) -> Cells:
    cells = _as_lists(cells)
    if isinstance(cells, list) or cells not in MISSING:
        return cells
    if argument.required and (cells is None or argument.kind in WHOLE):
        raise InputError(f"{argument.name} is missing: {argument.help}")
    return argument.default if cells is None else cells


def _as_lists(cells: Cells) -> Cells:
    """Rows of tuples, as some programs hand them over, as lists; a range of one cell as that cell."""
    if isinstance(cells, np.ndarray):
        cells = cells.tolist()
    if not isinstance(cells, list | tuple):
        return cells
    rows = [list(row) if isinstance(row, list | tuple) else [row] for row in cells]
    if not rows or not all(rows) or len({len(row) for row in rows}) != 1:
        raise InputError("a range of cells in full rows is expected")
    if len(rows) > 1 or len(rows[0]) > 1:
        return rows
    return "" if rows[0][0] is None else rows[0][0]


def _common_shape(arguments: Sequence[Cells]) -> tuple[int, int] | None:
    shapes = [(len(cells), len(cells[0])) for cells in arguments if isinstance(cells, list)]
    if not shapes:
        return None
    try:
        rows, columns = (int(side) for side in np.broadcast_shapes(*shapes))
    except ValueError:
        found = " and ".join(f"{rows} x {columns}" for rows, columns in dict.fromkeys(shapes))
        raise InputError(f"the ranges have different shapes: {found} cells; give ranges of one shape") from None
    return rows, columns


def _flat(cells: Cells) -> list[Any]:
    return [cell for row in cells for cell in row] if isinstance(cells, list) else [cells]


def _plain(cell: Any) -> Any:
    return cell.item() if isinstance(cell, np.generic) else cell


def _word(cell: Any, argument: Argument) -> float:
    table = WORDS[argument.kind]
    if cell not in table:
        raise InputError(f'"{cell}" is none of: {", ".join(table)}')
    return float(table.index(cell))

