"""The registry of spreadsheet functions keeps to what every program asks for, and has all that is promised."""

from __future__ import annotations

from dataclasses import replace

import pytest

from stripcheck.doors.call import call
from stripcheck.doors.functions import BY_NAME, FUNCTIONS, MASS, UNIT, Argument, Function
from stripcheck.doors.lint import MOST_ARGUMENTS, RESERVED, looks_like_a_cell, problems
from stripcheck.verdict import VERDICTS

PROMISED = {
    "pressure altitude": "PRESSURE_ALT", "density altitude": "DENSITY_ALT", "density ratio": "DENSITY_RATIO",
    "slope": "SLOPE", "headwind": "HEADWIND", "crosswind": "CROSSWIND", "stall speed": "STALL_SPEED",
    "lift-off speed": "LIFT_OFF_SPEED", "approach speed": "APPROACH_SPEED", "take-off roll": "TAKEOFF_ROLL",
    "take-off distance": "TAKEOFF_DIST", "landing roll": "LANDING_ROLL", "landing distance": "LANDING_DIST",
    "factored take-off": "TAKEOFF_FACTORED", "factored landing": "LANDING_FACTORED", "take-off margin": "TAKEOFF_MARGIN",
    "landing margin": "LANDING_MARGIN", "take-off verdict": "TAKEOFF_VERDICT", "landing verdict": "LANDING_VERDICT",
    "take-off reason": "TAKEOFF_REASON", "landing reason": "LANDING_REASON", "most mass out": "MOST_TAKEOFF_MASS",
    "most mass in": "MOST_LANDING_MASS", "hottest out": "HOTTEST_TAKEOFF", "hottest in": "HOTTEST_LANDING",
    "abort point": "ABORT_POINT", "best flap out": "BEST_TAKEOFF_FLAP", "best flap in": "BEST_LANDING_FLAP",
    "climb gradient": "CLIMB_GRADIENT", "obstacle clearance": "OVER_OBSTACLE", "rolling coefficient": "ROLLING",
    "required take-off": "TAKEOFF_REQUIRED", "required landing": "LANDING_REQUIRED",
    "braking coefficient": "BRAKING", "unit conversion": "CONVERT",
}  # fmt: skip
SLOPE = BY_NAME["SLOPE"]


def with_argument(**changes: object) -> Function:
    return replace(SLOPE, arguments=(replace(SLOPE.arguments[0], **changes), *SLOPE.arguments[1:]))


def test_the_registry_keeps_to_the_limits_of_all_programs() -> None:
    assert problems(FUNCTIONS) == []


def test_everything_promised_is_there() -> None:
    assert set(PROMISED.values()) <= set(BY_NAME)
    assert len(BY_NAME) == len(FUNCTIONS)


@pytest.mark.parametrize("function", FUNCTIONS, ids=lambda function: function.name)
def test_every_example_gives_a_number_or_a_word(function: Function) -> None:
    answer = call(function, *function.example)
    assert isinstance(answer, str if function.unit is None else float)
    if function.name.endswith("VERDICT"):
        assert answer in VERDICTS


@pytest.mark.parametrize(
    ("function", "said"),
    [
        (replace(SLOPE, name="VS1"), "looks like a cell"),
        (replace(SLOPE, name="R1C1"), "looks like a cell"),
        (replace(SLOPE, name="RC"), "looks like a cell"),
        (replace(SLOPE, name="XFD1048576"), "looks like a cell"),
        (replace(SLOPE, name="STEP"), "a word of VBA"),
        (replace(SLOPE, name="Sequence"), "a word of UNO"),
        (replace(SLOPE, name="YIELD"), "a word of Python"),
        (replace(SLOPE, name="DENSITY.ALT"), "single underscores"),
        (replace(SLOPE, name="DENSITY__ALT"), "single underscores"),
        (replace(SLOPE, name="A" * 256), "the name has more than 255 letters"),
        (replace(SLOPE, name="A" * 252), "with the prefix"),
        (replace(SLOPE, help="x" * 240), "the help has more than 255 letters"),  # with the unit of the result
        (replace(SLOPE, help=""), "a help text and a category are needed"),
        (replace(SLOPE, unit="furlong"), "no unit of the results"),
        (replace(SLOPE, unit="km"), "the usual unit of no kind"),
        (replace(SLOPE, compute=None), "one of compute, step and ask"),
        (replace(SLOPE, step="slope"), "one of compute, step and ask"),
        (replace(SLOPE, example=(2380, 2410)), "the example does not work: Length is missing"),
        (replace(SLOPE, example=(2380, 2410, "x")), "the example does not work: Length: "),
        (replace(SLOPE, arguments=(*SLOPE.arguments, *(replace(MASS, key=f"m{'x' * n}", name=f"m{n}")
                                                       for n in range(1, MOST_ARGUMENTS)))), "more than 30 arguments"),
        (replace(SLOPE, arguments=(*SLOPE.arguments, SLOPE.arguments[2])), "two arguments of one key"),
        (replace(SLOPE, arguments=(replace(MASS, default=1.0), *SLOPE.arguments)), "stands after one that may be left out"),
        (with_argument(key="end"), "a word of VBA"),
        (with_argument(key="to"), "a word of VBA"),
        (with_argument(key="in"), "a word of Python"),
        (with_argument(key="readonly"), "a word of UNO"),
        (with_argument(key="A1"), "looks like a cell"),
        (with_argument(kind="weight"), '"weight" is no kind of argument'),
        (with_argument(help="x" * 256), "the help has more than 255 letters"),
        (with_argument(name=" "), "a trade name and a help text"),
        (with_argument(name="Length"), "two arguments of one name"),
    ],
)  # fmt: skip
def test_what_a_program_would_not_take_is_told(function: Function, said: str) -> None:
    assert any(said in problem for problem in problems([function])), problems([function])


def test_a_name_that_comes_twice_is_told() -> None:
    twice = [SLOPE, replace(SLOPE, name="slope")]
    assert problems(twice) == ["slope: there are two functions of this name"]


@pytest.mark.parametrize("name", ["A1", "zz99", "XFD1", "R", "C", "r12", "R1C1", "R[-1]C[2]", "RC7", "A01"])
def test_names_of_cells(name: str) -> None:
    assert looks_like_a_cell(name)


@pytest.mark.parametrize("name", ["XFE1", "A1048577", "A0", "ROLL", "CLIMB", "A", "1A", "", "STRIP_A1", "AAAA1"])
def test_names_that_are_none(name: str) -> None:
    assert not looks_like_a_cell(name)


def test_the_lists_of_words_are_not_empty() -> None:
    assert {"sub", "end", "dim"} <= RESERVED["VBA"]
    assert {"interface", "sequence"} <= RESERVED["UNO"]
    assert {"lambda", "none"} <= RESERVED["Python"]


def test_the_unit_stands_last_where_the_result_has_one() -> None:
    for function in FUNCTIONS:
        assert (function.all_arguments[-1] is UNIT) == bool(function.unit)
        assert all(isinstance(argument, Argument) for argument in function.all_arguments)
