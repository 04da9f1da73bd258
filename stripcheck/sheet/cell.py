"""Cell expressions: values that answer NumPy's protocols by writing spreadsheet formula text.

An equation called with a `Cell` instead of a float returns a `Cell` whose text is the same equation as a native
formula (NEP 13 ``__array_ufunc__`` and NEP 18 ``__array_function__``). Nothing newer than Excel 2010 is written, and
what a spreadsheet can't say the same way is refused with a sentence.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any, NoReturn

import numpy as np

from stripcheck.units import UNITS

MAX_LENGTH = 8192  # characters in a formula, an Excel limit
MAX_DEPTH = 64  # nested functions, an Excel limit

BLANK = '""'  # stands for "no number" in the sheets; what reads it tests for it first

# binding strength: a spreadsheet binds unary minus tighter than ^, so a negative is always bracketed
COMPARE, ADD, MULTIPLY, POWER, ATOM = 1, 2, 3, 4, 9

_BINARY: dict[Any, tuple[str, int, int]] = {
    np.add: ("+", ADD, ADD),
    np.subtract: ("-", ADD, ADD + 1),
    np.multiply: ("*", MULTIPLY, MULTIPLY),
    np.divide: ("/", MULTIPLY, MULTIPLY + 1),
    np.power: ("^", POWER + 1, POWER + 1),
    np.less: ("<", ADD, ADD),
    np.less_equal: ("<=", ADD, ADD),
    np.greater: (">", ADD, ADD),
    np.greater_equal: (">=", ADD, ADD),
    np.equal: ("=", ADD, ADD),
    np.not_equal: ("<>", ADD, ADD),
}
_RESULT_RANK = {"+": ADD, "-": ADD, "*": MULTIPLY, "/": MULTIPLY, "^": POWER}
_FUNCTIONS = {
    np.sqrt: "SQRT", np.exp: "EXP", np.log: "LN", np.sin: "SIN", np.cos: "COS", np.tan: "TAN",
    np.arcsin: "ASIN", np.arccos: "ACOS", np.arctan: "ATAN", np.absolute: "ABS",
}  # fmt: skip
_SWALLOWING = {
    np.minimum: "MIN", np.maximum: "MAX", np.logical_and: "AND", np.logical_or: "OR",
    np.bitwise_and: "AND", np.bitwise_or: "OR",
}  # fmt: skip


class Cell(np.lib.mixins.NDArrayOperatorsMixin):
    """A spreadsheet expression.

    ``text`` is the formula without its equals sign, ``rank`` how tightly its outermost operator binds, ``depth`` how
    many functions are nested in it, ``many`` whether it stands for an array (only inside a sum), ``raw`` the bare
    reference that ISNUMBER has to look at when the text also converts a unit, ``branches`` the test and the two values
    of an IF.

    >>> str(2.0 * Cell("A1") + np.sqrt(Cell("B1")))
    '2*A1+SQRT(B1)'
    """

    __slots__ = ("branches", "depth", "many", "rank", "raw", "text")

    def __init__(self, text: str, rank: int = ATOM, depth: int = 0, many: bool = False, raw: str = "") -> None:
        self.text, self.rank, self.depth, self.many, self.raw = text, rank, depth, many, raw or text
        self.branches: tuple[Cell, Cell, Cell] | None = None

    def __str__(self) -> str:
        return self.text

    def __repr__(self) -> str:
        return f"Cell({self.text!r})"

    def within(self, rank: int) -> str:
        """The text, bracketed if its operator binds less tightly than ``rank``."""
        return self.text if self.rank >= rank else f"({self.text})"

    def _no_value(self, *_: object) -> NoReturn:
        raise TypeError(
            f"a cell expression has no value while a formula is written: {self.text[:60]}; "
            "an equation must use np.where, np.minimum or np.select instead of a test in Python"
        )

    __bool__ = __float__ = __int__ = __index__ = __len__ = __iter__ = __getitem__ = _no_value

    def __array_ufunc__(self, ufunc: np.ufunc, method: str, *inputs: Any, **kwargs: Any) -> Cell:
        if kwargs or method not in ("__call__", "outer"):
            raise TypeError(f"np.{ufunc.__name__} with {method} {sorted(kwargs)} can't be written as a cell formula")
        cells = [as_cell(item) for item in inputs]
        if ufunc in _BINARY:
            return _binary(ufunc, *cells)
        if ufunc in _FUNCTIONS:
            return call(_FUNCTIONS[ufunc], *cells)
        if ufunc in _SWALLOWING:
            return _swallowing(_SWALLOWING[ufunc], *cells)
        if ufunc in _UNARY:
            return _UNARY[ufunc](*cells)
        if ufunc in _OF_TWO:
            return _OF_TWO[ufunc](*cells)
        raise TypeError(f"np.{ufunc.__name__} can't be written as a cell formula")

    def __array_function__(self, func: Any, types: Any, args: Any, kwargs: Any) -> Any:
        if func not in _ARRAY_FUNCTIONS:
            raise TypeError(f"np.{func.__name__} can't be written as a cell formula")
        return _ARRAY_FUNCTIONS[func](*args, **kwargs)


def as_cell(item: Any) -> Cell:
    """A `Cell` for anything that may stand in an equation: a cell, a number, a truth, a text, a row of numbers."""
    if isinstance(item, Cell):
        return item
    if isinstance(item, str):
        return Cell('"' + item.replace('"', '""') + '"')
    array = np.asarray(item)
    if array.ndim == 1:
        return Cell("{" + ",".join(_digits(value) for value in array) + "}", many=True)
    if array.ndim:
        raise TypeError(f"an array of {array.ndim} dimensions can't be written as a cell formula")
    if array.dtype == bool:
        return Cell("TRUE" if array else "FALSE")
    value = float(array)
    if math.isnan(value):
        return Cell(BLANK)
    return Cell(_digits(value)) if value >= 0.0 else Cell(f"({_digits(value)})")


def _digits(value: float) -> str:
    """A number as a formula keeps it: 15 digits are all that spreadsheet programs store in one."""
    return f"{float(value):.15g}"


def call(name: str, *cells: Cell) -> Cell:
    """The spreadsheet function ``name`` of some cells, element by element where they stand for arrays."""
    text = f"{name}({','.join(cell.text for cell in cells)})"
    return Cell(text, ATOM, 1 + max(cell.depth for cell in cells), any(cell.many for cell in cells))


def reference(text: str, unit: str = "") -> Cell:
    """The cell at a reference such as ``$E7``, which shows its value in ``unit``, as an SI expression.

    >>> str(reference("$E7", "ft")), str(reference("$F7", "°C"))
    ('$E7*0.3048', '$F7+273.15')
    """
    entry = UNITS[unit]
    if entry.offset:
        return Cell(f"{text}+{_digits(entry.offset)}", ADD, raw=text)
    return Cell(text) if entry.factor == 1.0 else Cell(f"{text}*{_digits(entry.factor)}", MULTIPLY, raw=text)


def shown(cell: Cell, unit: str) -> Cell:
    """An SI expression as the expression of the number that is shown in ``unit``; a blank stays a blank.

    >>> str(shown(Cell("A1+B1", ADD), "kt"))
    '(A1+B1)/0.514444444444444'
    """
    entry = UNITS[unit]
    if cell.text == BLANK or not (entry.offset or entry.factor != 1.0) or (cell.text == "0" and not entry.offset):
        return cell
    if cell.raw != cell.text and cell.text == reference(cell.raw, unit).text:
        return Cell(cell.raw)  # the cell read shows that very unit
    if cell.branches:
        condition, then, otherwise = cell.branches
        return where(condition, shown(then, unit), shown(otherwise, unit))
    if entry.offset:
        return _binary(np.subtract, cell, as_cell(entry.offset))
    return _binary(np.divide, cell, as_cell(entry.factor))


def formula(cell: Cell) -> str:
    """The finished formula text, without equals sign. Raises ValueError beyond a spreadsheet's limits."""
    if len(cell.text) + 1 > MAX_LENGTH:
        raise ValueError(f"a formula of {len(cell.text)} characters is longer than {MAX_LENGTH}: {cell.text[:60]}...")
    if cell.depth > MAX_DEPTH:
        raise ValueError(f"a formula nests {cell.depth} functions, more than {MAX_DEPTH}: {cell.text[:60]}...")
    if cell.many:
        raise ValueError(f"a formula gives an array where one number belongs: {cell.text[:60]}...")
    return cell.text


def _binary(ufunc: np.ufunc, left: Cell, right: Cell) -> Cell:
    if ufunc in (np.add, np.subtract) and right.text == "0":
        return left
    if ufunc is np.equal and {left.text, right.text} <= {"TRUE", "FALSE"}:
        return Cell("TRUE" if left.text == right.text else "FALSE")
    sign, left_rank, right_rank = _BINARY[ufunc]
    text = left.within(left_rank) + sign + right.within(right_rank)
    many = left.many or right.many
    return Cell(text, _RESULT_RANK.get(sign, COMPARE), max(left.depth, right.depth), many)


def _swallowing(name: str, left: Cell, right: Cell) -> Cell:
    """MIN, MAX, AND and OR, which would swallow a whole array into one value inside a sum."""
    if left.many or right.many:
        raise TypeError(f"{name} of an array inside a sum can't be written as a cell formula: write it as algebra")
    if name in _DECIDED:
        neutral, decisive = _DECIDED[name]
        if decisive in (left.text, right.text):
            return Cell(decisive)
        if neutral in (left.text, right.text):
            return right if left.text == neutral else left
    flat = [cell.text[len(name) + 1 : -1] if _is_call(cell, name) else cell.text for cell in (left, right)]
    depth = 1 + max(cell.depth - _is_call(cell, name) for cell in (left, right))
    return Cell(f"{name}({','.join(flat)})", ATOM, depth)


# the truth that changes nothing in AND and OR, and the one that decides
_DECIDED = {"AND": ("TRUE", "FALSE"), "OR": ("FALSE", "TRUE")}


def _is_call(cell: Cell, name: str) -> bool:
    """Whether the whole text is one call of ``name``, so that AND(AND(a,b),c) can be AND(a,b,c)."""
    if not (cell.rank == ATOM and cell.text.startswith(name + "(") and cell.text.endswith(")")):
        return False
    level = 0
    for position, letter in enumerate(cell.text):
        level += (letter == "(") - (letter == ")")
        if level == 0 and letter == ")":
            return position == len(cell.text) - 1
    return False


def _negative(cell: Cell) -> Cell:
    return Cell(f"(-{cell.within(ATOM)})", ATOM, cell.depth, cell.many)


def _cube_root(cell: Cell) -> Cell:
    return _binary(np.power, cell, Cell("(1/3)"))


def _is_number(cell: Cell) -> Cell:
    if cell.text == BLANK:
        return Cell("FALSE")
    return Cell(f"ISNUMBER({cell.raw})", ATOM, cell.depth + 1)


def _not(cell: Cell) -> Cell:
    return Cell({"TRUE": "FALSE", "FALSE": "TRUE"}[cell.text]) if cell.text in ("TRUE", "FALSE") else call("NOT", cell)


# written as a function of two cells, in the order that a spreadsheet wants them
_OF_TWO: dict[Any, Callable[[Cell, Cell], Cell]] = {
    np.remainder: lambda one, other: call("MOD", one, other),
    np.arctan2: lambda y, x: call("ATAN2", x, y),
}
_UNARY: dict[Any, Callable[..., Cell]] = {
    np.negative: _negative,
    np.square: lambda cell: _binary(np.power, cell, as_cell(2.0)),
    np.cbrt: _cube_root,
    np.floor: lambda cell: call("INT", cell),
    np.isfinite: _is_number,
    np.isnan: lambda cell: _not(_is_number(cell)),
    np.logical_not: _not,
    np.invert: _not,
}


def where(condition: Any, then: Any, otherwise: Any) -> Cell:
    """np.where as IF; a condition that is already decided leaves only the value that it decides for."""
    cells = [as_cell(item) for item in (condition, then, otherwise)]
    if any(cell.many for cell in cells):
        raise TypeError("np.where of an array inside a sum can't be written as a cell formula: write it as algebra")
    if cells[0].text in ("TRUE", "FALSE"):
        return cells[1] if cells[0].text == "TRUE" else cells[2]
    written = call("IF", *cells)
    written.branches = (cells[0], cells[1], cells[2])
    return written


def _select(conditions: list[Any], choices: list[Any], default: Any = 0) -> Cell:
    result = as_cell(default)
    for condition, choice in zip(reversed(conditions), reversed(choices), strict=True):
        result = where(condition, choice, result)
    return result


def _clip(cell: Any, low: Any, high: Any) -> Cell:
    return _swallowing("MAX", as_cell(low), _swallowing("MIN", as_cell(cell), as_cell(high)))


def _sum_of_products(one: Any, other: Any, axes: int = 2) -> Cell:
    left, right = as_cell(one), as_cell(other)
    if axes != 1 or not (left.many and right.many):
        raise TypeError("np.tensordot can be written as a cell formula only over one axis of two arrays")
    return Cell(f"SUMPRODUCT({(left * right).text})", ATOM, 1 + max(left.depth, right.depth))


def _interpolate(at: Any, nodes: Any, values: Any) -> Cell:
    """np.interp over two ranges of cells: held at the ends, straight between the nodes."""
    x, xs, ys = as_cell(at), as_cell(nodes), as_cell(values)
    held = f"MIN(MAX({x.text},MIN({xs.text})),MAX({xs.text}))"
    if xs.text == ys.text:
        return Cell(held, ATOM, x.depth + 2)
    left = f"MIN(MATCH({held},{xs.text},1),COUNT({xs.text})-1)"
    x0, x1 = f"INDEX({xs.text},{left})", f"INDEX({xs.text},{left}+1)"
    y0, y1 = f"INDEX({ys.text},{left})", f"INDEX({ys.text},{left}+1)"
    return Cell(f"{y0}+({held}-{x0})/({x1}-{x0})*({y1}-{y0})", ADD, x.depth + 6)


_ARRAY_FUNCTIONS: dict[Any, Callable[..., Any]] = {
    np.where: where,
    np.select: _select,
    np.clip: _clip,
    np.tensordot: _sum_of_products,
    np.broadcast_arrays: lambda *cells: cells,
    np.interp: _interpolate,
}
