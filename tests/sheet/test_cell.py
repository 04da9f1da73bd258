"""Cell expressions: the text that NumPy functions write, and what is refused."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from stripcheck.sheet.cell import Cell, as_cell, call, formula, reference, shown

A, B, C = Cell("A1"), Cell("B1"), Cell("C1")


@pytest.mark.parametrize(
    ("expression", "text"),
    [
        (A + B * C, "A1+B1*C1"),
        ((A + B) * C, "(A1+B1)*C1"),
        (A - (B - C), "A1-(B1-C1)"),
        (A / (B * C), "A1/(B1*C1)"),
        (np.square(A) ** 3, "(A1^2)^3"),
        (-A, "(-A1)"),
        (np.square(-A), "(-A1)^2"),
        (-np.square(A), "(-(A1^2))"),
        (A + (-2.0), "A1+(-2)"),
        (2.0 - A, "2-A1"),
        (np.cbrt(A), "A1^(1/3)"),
        (np.floor(A), "INT(A1)"),
        (np.arctan2(A, B), "ATAN2(B1,A1)"),
        ((A + B) % 360.0, "MOD(A1+B1,360)"),
        (np.sqrt(A + 1.0), "SQRT(A1+1)"),
        (np.minimum(np.minimum(A, B), C), "MIN(A1,B1,C1)"),
        (np.clip(A, 0.0, 1.0), "MAX(0,MIN(A1,1))"),
        (np.where(A > B, A, np.nan), 'IF(A1>B1,A1,"")'),
        (np.where(np.isfinite(A) & np.isnan(B), 1.0, 2.0), "IF(AND(ISNUMBER(A1),NOT(ISNUMBER(B1))),1,2)"),
        (np.select([A > 1.0, A > 0.0], [1, 2], 3), "IF(A1>1,1,IF(A1>0,2,3))"),
        (np.tensordot(np.array([0.5, 0.25]), A * np.array([1.0, 2.0]), 1), "SUMPRODUCT({0.5,0.25}*A1*{1,2})"),
        (np.where(Cell("TRUE"), A, B), "A1"),
        (np.isfinite(as_cell(math.nan)), "FALSE"),
    ],
)  # fmt: skip
def test_text_of_numpy_functions(expression, text):
    assert str(expression) == text


def test_units_are_converted_where_a_cell_is_read_and_where_it_is_shown():
    assert str(reference("$E7", "kt") * 2.0) == "$E7*0.514444444444444*2"
    assert str(np.where(np.isfinite(reference("$E7", "°C")), 1.0, 0.0)) == "IF(ISNUMBER($E7),1,0)"
    assert str(shown(A + B, "°C")) == "A1+B1-273.15"
    assert str(shown(np.where(A > 0.0, B, np.nan), "kt")) == 'IF(A1>0,B1/0.514444444444444,"")'
    assert str(shown(reference("$E7", "ft"), "ft")) == "$E7"


def test_a_truth_test_in_python_is_refused_with_a_sentence():
    with pytest.raises(TypeError, match="has no value while a formula is written"):
        bool(A > 1.0)
    with pytest.raises(TypeError, match="has no value"):
        max(A, B)
    with pytest.raises(TypeError, match="has no value"):
        float(A)


@pytest.mark.parametrize("refused", [np.fmod, np.ceil, np.hypot, np.floor_divide])
def test_functions_that_formulas_do_not_have_are_refused(refused):
    arguments = (A, B) if refused.nin == 2 else (A,)
    with pytest.raises(TypeError, match="can't be written as a cell formula"):
        refused(*arguments)


@pytest.mark.parametrize(
    "refused", [lambda: np.median(A), lambda: np.sort(A), lambda: np.sum(A), lambda: np.sqrt(A, where=[True])]
)  # fmt: skip
def test_other_array_functions_are_refused(refused):
    with pytest.raises(TypeError, match="can't be written as a cell formula"):
        refused()


def test_min_and_if_inside_a_sum_are_refused_because_a_spreadsheet_swallows_them():
    row = A * np.array([1.0, 2.0])
    with pytest.raises(TypeError, match="write it as algebra"):
        np.minimum(row, 1.0)
    with pytest.raises(TypeError, match="write it as algebra"):
        np.where(row > 1.0, 1.0, 0.0)
    with pytest.raises(ValueError, match="gives an array"):
        formula(row)


def test_limits_of_a_formula_are_kept():
    long = A
    for _ in range(3000):
        long = long + B
    with pytest.raises(ValueError, match="longer than 8192"):
        formula(long)
    deep = A
    for _ in range(65):
        deep = np.sqrt(deep)
    with pytest.raises(ValueError, match="nests 65 functions"):
        formula(deep)


def test_text_is_quoted_as_text():
    assert str(call("IF", A > 1.0, as_cell('say "no"'), as_cell("=1+1"))) == 'IF(A1>1,"say ""no""","=1+1")'


def _value(text: str, a: float, b: float) -> float:
    """Arithmetic of a spreadsheet: unary minus before power, power from the left."""
    python = text.replace("A1", f"({a!r})").replace("B1", f"({b!r})").replace("^", "**")
    return eval(python, {"SQRT": math.sqrt, "ABS": abs, "MIN": min, "MAX": max})


@given(st.floats(0.1, 10.0), st.floats(0.1, 10.0), st.lists(st.sampled_from("+-*/^mn"), min_size=1, max_size=6))
def test_text_means_what_numpy_computes(a, b, signs):
    """Any chain of operations: the text, read by the rules of arithmetic, gives NumPy's number."""
    number, cell = a, A
    for sign in signs:
        step = {
            "+": lambda x, y: x + y, "-": lambda x, y: y - x, "*": lambda x, y: x * (y + 1.0),
            "/": lambda x, y: y / (x + 20.0), "^": lambda x, y: np.square(x) / 50.0,
            "m": lambda x, y: np.minimum(x, y), "n": lambda x, y: -x + 3.0,
        }[sign]  # fmt: skip
        number, cell = step(number, b), step(cell, B)
    assert _value(str(cell), a, b) == pytest.approx(float(number), rel=1e-12, abs=1e-12)
