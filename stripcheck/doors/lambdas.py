"""The registry's functions as LAMBDA names: no Python, no add-in, only defined names of the workbook.

A function's equation, or the steps of the chain that lead to its result, are called with cell expressions that stand for
the parameters, as a filled workbook's formulas are made; each step is a variable of a LET. A step whose formula is long is a
name of its own, ``STRIP_X_...``, which every function that needs it calls: formulas stay within a program's limits. Such
names take SI and are not meant to be typed. What can't be written so is listed with its reason.

A function takes cells and ranges as ``stripcheck.doors.call`` does. Its work for one cell is a name ``STRIP_X_..._ONE``; the
function's own name calls that once where all values are single, else for every cell of the result, which spills.

In the file a parameter is written ``_xlpm.x``, and a function newer than the format ``_xlfn.LET``; a program shows them
without these.
"""

from __future__ import annotations

import inspect
import re
import string
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np

from stripcheck.chain import Chain, Input, Step
from stripcheck.doors.aircraft import CLIMB_SPEED, MAY_BE_BLANK, NO_BANK, NO_REACH, NO_WORDS, Aeroplane
from stripcheck.doors.call import EMPTY, WHOLE
from stripcheck.doors.functions import CONDITION, FLAP, FUNCTIONS, SPEEDS, SURFACE, Argument, Function
from stripcheck.inputs import POWER_LIMIT, REACH, manual_inputs
from stripcheck.sheet.cell import BLANK, MAX_DEPTH, MAX_LENGTH, Cell, as_cell, call, reference, shown, where
from stripcheck.sheet.labels import ENGINE, FLAP_HEADER, GROUND_HEADER, PROPELLER, TABLES
from stripcheck.steps import POWERS, build_chain
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import KINDS, PRESSURE_HPA, PRESSURE_INHG
from stripcheck.verdict import BEYOND, NOT_ASSESSED

STEP = "STRIP_X_"
LONG_STEP = 100  # characters from which a step's formula is a name of its own
MAX_PAIRS = 126  # names and values in one LET, an Excel limit
ARRAY_TYPE = 64  # what TYPE gives for an array
MAX_COMMENT = 255  # characters of a name's comment, an Excel limit
AIRCRAFT_SHEET, RULES_SHEET = "columns A to I of the whole Aircraft sheet", "columns A to F of the whole Rules sheet"
# values that hang on the air or on the loading alone, and are names of their own: a function is spared what leads to them
PARTS = ("air_known", "density", "lift_off_eas", "screen_eas", "airborne_eas", "rolling_drag", "airborne_drag", "climb_drag",
         "touchdown_eas", "approach_eas", "approach_path", "braked_drag", "slowest_touchdown")  # fmt: skip
KIND_NAMES = {"fixed pitch": "FIXED", "constant speed": "CONSTANT"}
INVERSE = "it looks for its answer by trying, which a formula without a program can't"
UNITS_BY_NAME = "it reads units by their names"
NO_CORRECTIONS = "the corrections of the manual on this Aircraft sheet are not in this function: use the filled workbook"
NO_TABLES = "the manual's tables of this Aircraft sheet are not in this function: use the filled workbook"
NO_REACH_HERE = NO_REACH.split(":")[0]  # without the advice to give a card's name, which these functions can't take
ONE_VALUE = "one value at a time: call the function that this is a step of"


@dataclass(frozen=True)
class Name:
    """A defined name: its text as the file keeps it, without equals sign, and a comment for the list of names."""

    name: str
    text: str
    comment: str


@dataclass(frozen=True)
class Library:
    """All names, and the functions that are none, each with its reason."""

    names: tuple[Name, ...]
    left_out: tuple[tuple[Function, str], ...]


class Sure(Cell):
    """A parameter that has been found to be a number. np.interp over a flap table gives the setting's own figure, which is a
    node of the table."""

    __slots__ = ()

    def __array_ufunc__(self, ufunc: np.ufunc, method: str, *inputs: Any, **kwargs: Any) -> Cell:
        if ufunc in (np.isfinite, np.isnan):
            return as_cell(ufunc is np.isfinite)
        return super().__array_ufunc__(ufunc, method, *inputs, **kwargs)

    def __array_function__(self, func: Any, types: Any, args: Any, kwargs: Any) -> Any:
        if func is np.interp:
            return args[2]
        return super().__array_function__(func, types, args, kwargs)


@cache
def library() -> Library:
    """Every function of the registry as names, the shared steps first.

    >>> next(name.text for name in library().names if name.name == "STRIP_SLOPE")[:42]
    '_xlfn.LAMBDA(_xlpm.start_elevation_,_xlpm.'
    """
    writer = _Writer()
    left_out = []
    for function in FUNCTIONS:
        why = not_a_lambda(function)
        if why:
            left_out.append((function, why))
        else:
            writer.write(function)
    return Library((*writer.steps.values(), *writer.names), tuple(left_out))


def not_a_lambda(function: Function) -> str:
    """Why a function can't be a LAMBDA; empty where it can."""
    if function.ask is not None:
        return INVERSE
    return UNITS_BY_NAME if any(argument.kind == "text" for argument in function.arguments) else ""


def nesting(text: str) -> int:
    """Greatest number of brackets around any place of a formula, which is no less than that of its functions.

    >>> nesting('IF(A1=")))",MAX(1,(2)),0)')
    3
    """
    level = most = 0
    for letter in re.sub('"[^"]*"', "", text):
        level += (letter == "(") - (letter == ")")
        most = max(most, level)
    return most


def parameter(key: str) -> str:
    """A parameter or variable as the file keeps it; unlike any name that a filled workbook gives to its cells.

    >>> parameter("qnh")
    '_xlpm.qnh_'
    """
    return f"_xlpm.{key}_"


def lambda_of(parameters: list[str], body: str) -> str:
    return f"_xlfn.LAMBDA({','.join(parameters)},{body})"


def let(pairs: list[tuple[str, str]], result: str) -> str:
    """LET with the pairs of variable and value that the result needs, directly or through others."""
    kept: list[tuple[str, str]] = []
    needed = result
    for variable, value in reversed(pairs):
        if _reads(needed, variable):
            kept.append((variable, value))
            needed += " " + value
    if not kept:
        return result
    return f"_xlfn.LET({','.join(part for pair in reversed(kept) for part in pair)},{result})"


def _reads(text: str, variable: str) -> bool:
    return re.search(rf"{re.escape(variable)}(?![\w.])", text) is not None


def _short(keys: list[str], body: str) -> tuple[list[str], str]:
    """Parameters and body with short names for all variables: a formula with hundreds of them must not get too long."""
    letters = [letter for letter in string.ascii_lowercase if letter not in "cr"]  # those are references in some programs
    names = (f"_xlpm.{name}" for name in [*letters, *(one + other for one in letters for other in letters)])
    short = dict(zip(dict.fromkeys([*map(parameter, keys), *re.findall(r"_xlpm\.\w+", body)]), names, strict=False))
    renamed = re.sub(r"_xlpm\.\w+", lambda match: short[match[0]], body)
    return [short[parameter(key)] for key in keys], renamed


def _chain_of(kind: str) -> Chain:
    return build_chain(kind, "flat rated" if kind == "constant speed" else POWERS[0])


def _text(words: str) -> str:
    return as_cell(words).text


def _word_list(words: tuple[str, ...]) -> str:
    return "{" + ",".join(_text(word) for word in words) + "}"


class _Writer:
    """Collects the names: those of functions, and those of steps that functions share."""

    def __init__(self) -> None:
        self.names: list[Name] = []
        self.steps: dict[str, Name] = {}
        for key, (parameters, body, comment) in _HELPERS.items():
            self.step(key, list(parameters), body, comment)

    def write(self, function: Function) -> None:
        body = self._assessed(function) if function.step else self._computed(function)
        keys = [argument.key for argument in function.arguments]
        one = self.step(f"{function.name}_ONE", keys, body, f"Called by {function.full_name} for each cell of its result.")
        whole = _for_ranges(function, one)
        self.names.append(_name(function.full_name, lambda_of(list(map(parameter, keys)), whole), _comment(function)))

    def step(self, key: str, parameters: list[str], body: str, comment: str) -> str:
        """A name for what several functions share, made once."""
        name = STEP + key.upper()
        made = _name(name, lambda_of([p if p.startswith("_xlpm.") else parameter(p) for p in parameters], body), comment)
        if self.steps.setdefault(name, made) != made:
            raise ValueError(f"two steps want the name {name}")
        return name

    # --- functions that are one equation

    def _computed(self, function: Function) -> str:
        if all(argument.kind in _CODES for argument in function.arguments):
            return _figure_of_ground(function)
        values: list[Any] = []
        for argument in function.arguments:
            values.append(_RuleValues() if argument.kind == "rules" else _si_of(argument))
        assert function.compute is not None  # the other functions have a step
        result = shown(as_cell(function.compute(*values)), function.unit or "")
        found = parameter("found")
        known = let([(found, result.text)], f"IF(ISNUMBER({found}),{found},{_text(NO_WORDS)})")
        return _checked(function, f"IFERROR({known},{_text(NO_WORDS)})")

    # --- functions of a chain step

    def _assessed(self, function: Function) -> str:
        """The arguments checked and taken to SI, and handed to the name that does the work, by kind of propeller."""
        side = "landing" if function.step.startswith(("landing", "approach")) else "takeoff"
        traces = {kind: _Trace(self, function, _chain_of(kind)) for kind in KIND_NAMES}
        bodies = {kind: trace.result(side) for kind, trace in traces.items()}
        keys = traces["fixed pitch"].base
        typed = {argument.key for argument in function.arguments}
        values = [_si_of(argument).text for argument in function.arguments if argument.kind in KINDS]
        given = ",".join([*(parameter(key) for key in keys if not key.endswith("_si")), *values])
        if len(set(bodies.values())) == 1:
            name = self.step(f"{function.name}_SI", *_short(keys, bodies["fixed pitch"]), f"Called by {function.full_name}.")
            whole = f"{name}({given})"
        else:
            whole = _text(f'Aircraft: the range has no row "{PROPELLER}"; give {AIRCRAFT_SHEET}')
            for kind, suffix in KIND_NAMES.items():
                comment = f"Called by {function.full_name}, {kind} propeller."
                name = self.step(f"{function.name}_{suffix}", *_short(keys, bodies[kind]), comment)
                whole = f"IF({parameter('kind')}={_text(kind)},{name}({given}),{whole})"
            kind = f'IFERROR({STEP}WORD({parameter("aircraft")},{_text(PROPELLER)}),"")'
            whole = let([(parameter("kind"), kind)], whole)
        if "slope" in typed:
            whole = f"IF({_has_row(manual_inputs(side)[0].label)},{_text(NO_CORRECTIONS)},{whole})"
        if function.category != SPEEDS:
            whole = f"IF({_has_row(TABLES)},{_text(NO_TABLES)},{whole})"
        use = "" if function.name == "STALL_SPEED" else {"landing": "landing", "takeoff": "take-off"}[side]
        whole = self._whole_ranges(typed, whole)
        row = f"{STEP}FLAP({parameter('aircraft')},{parameter('flap')},{_text(use)})"
        whole = let([(parameter("row"), row)], _told_else(parameter("row"), whole))
        if "surface" in typed:
            whole = let([(parameter("ground"), _ground_row())], _told_else(parameter("ground"), whole))
        lost = NO_BANK if "bank" in typed else NO_WORDS
        if function.unit is None:
            lost = NOT_ASSESSED if function.step.endswith("verdict") else "a value needed is missing"
        return _checked(function, f"IFERROR({whole},{_text(lost)})")

    def _whole_ranges(self, typed: set[str], then: str) -> str:
        """What follows where the ranges hold all that the chain reads: no limit or factor may be lost unnoticed."""
        complete = [_complete("fixed pitch", "card"), _complete("constant speed", "card")]
        kind = f"{STEP}WORD({parameter('aircraft')},{_text(PROPELLER)})"
        engine = f"{STEP}WORD({parameter('aircraft')},{_text(ENGINE)})"
        known = "+".join(f"({engine}={_text(power)})" for power in POWERS)
        body = f"IF({kind}={_text('fixed pitch')},ISERROR({complete[0]}),IF({known}=1,ISERROR({complete[1]}),TRUE))"
        lacks = _text(f"Aircraft: the range lacks a row or a number; give {AIRCRAFT_SHEET}")
        name = self.step("AIRCRAFT", ["aircraft"], f"IF(IFERROR({body},TRUE),{lacks},1)",
                         "Whether a range holds all that is read of an Aircraft sheet: 1, or a sentence.")  # fmt: skip
        checks = [(parameter("aircraft_whole"), f"{name}({parameter('aircraft')})")]
        if "rules" in typed:
            heading = f"MATCH({_text(GROUND_HEADER[0])},INDEX({parameter('rules')},0,1),0)"
            rows = [(1, '"paved"', '"dry"'), (parameter("ground"), parameter("surface"), parameter("condition"))]
            named = [f'EXACT(INDEX({parameter("rules")},{heading}+{row},1),{surface}&", "&{condition})'
                     for row, surface, condition in rows]  # fmt: skip
            body = f"IF(ISERROR({_complete('fixed pitch', 'rules')}),FALSE,AND({','.join(named)}))"
            lacks = _text(f"Rules: the range lacks a row or a number; give {RULES_SHEET}")
            name = self.step("RULES", ["rules", "ground", "surface", "condition"], f"IF(IFERROR({body},FALSE),1,{lacks})",
                             "Whether a range holds all that is read of a Rules sheet: 1, or a sentence.")  # fmt: skip
            given = ",".join(parameter(key) for key in ("rules", "ground", "surface", "condition"))
            checks.append((parameter("rules_whole"), f"{name}({given})"))
        for variable, check in reversed(checks):
            then = let([(variable, check)], _told_else(variable, then))
        return then

    def step_call(self, step: Step, values: list[Any], text: str) -> str:
        """A call of the name that a long step has of its own."""
        arguments = inspect.signature(step.function).parameters.values()
        own = any(argument.kind == argument.VAR_POSITIONAL for argument in arguments)  # the findings read whatever they need
        names = list(step.inputs) if own else [argument.name for argument in arguments]
        values = [*values, *(argument.default for argument in list(arguments)[len(values) :] if not own)]
        cells = [Cell(parameter(name)) for name in names]
        body = as_cell(step.function(*cells)).text
        key = step.key if own else step.function.__name__.strip("_")
        name = self.step(key, names, body, f"{step.label}. Source: {step.source}." if own else _first_line(step.function))
        return f"{name}({','.join(as_cell(value).text for value in values)})"

    def words_call(self, step: Step, finding: Cell) -> str:
        name = self.step(step.key, ["number"], f"INDEX({_word_list(step.words)},{parameter('number')})",
                          f"{step.label}: the words of a finding's number.")  # fmt: skip
        return f"{name}({finding.text})"


class _Trace:
    """The steps that lead to a value, each a variable of a LET, with what is fixed worked out."""

    def __init__(self, writer: _Writer, function: Function, chain: Chain, parts: bool = True) -> None:
        self.writer, self.function, self.chain, self.parts = writer, function, chain, parts
        self.typed = {argument.key for argument in function.arguments}
        self.given: list[tuple[str, str]] = []
        self.pairs: list[tuple[str, str]] = []
        self.known: dict[str, Any] = {}
        numbers: dict[str, Any] = {a.key: Sure(parameter(f"{a.key}_si")) for a in function.arguments if a.kind in KINDS}
        ranges = [key for key in ("aircraft", "rules") if key in self.typed]
        self.base = [*ranges, *(["ground"] if "surface" in self.typed else []), "row", *(f"{key}_si" for key in numbers)]
        numbers["flap"] = self._given("flap_si", _at(4))
        case = Aeroplane("", chain, {}, ()).case({"bank": np.zeros(()), **numbers}, None, 1)
        for key, value in case.given.items():
            of_numbers = isinstance(value, Cell) and not isinstance(value, Sure)
            self.known[key] = self._given(key, value.text) if of_numbers else value
        self._look_up_card(numbers)
        if "rules" in self.typed:
            self._look_up_rules()

    def _given(self, key: str, text: str) -> Cell:
        self.given.append((parameter(key), text))
        return Sure(parameter(key))

    def _look_up_card(self, numbers: Mapping[str, Cell]) -> None:
        for item in self.chain.inputs:
            if item.where != "card" or item.key in self.known:
                continue
            if item.kind == "range":
                self.known[item.key] = self._given(item.key, _at({"flap_drag": 8, "flap_lift": 9}.get(item.key, 4)))
            elif item.key in ("flap_least", "flap_most"):
                self.known[item.key] = numbers["flap"]  # a setting of the table lies within it
            elif item in REACH.values():
                reach = f'IFERROR({_value("aircraft", item)},"")'
                if item is REACH["takeoff"]:  # of a sheet beside climb tables: how far those reach stands elsewhere
                    reach = f'IF({_has_row(CLIMB_SPEED.label)},"",{reach})'
                self._given(item.key, reach)
                self.known[item.key] = Cell(parameter(item.key))
            else:
                self._look_up(item, "aircraft")

    def _look_up(self, item: Input, range_: str) -> None:
        """A number of a range, or a blank where one is allowed; else an error, as no limit may be lost unnoticed."""
        given = self._given(item.key, _value(range_, item))
        self.known[item.key] = Cell(given.text) if item.key in MAY_BE_BLANK else given

    def _look_up_rules(self) -> None:
        self.given.append((parameter("head"), f"MATCH({_text(GROUND_HEADER[0])},INDEX({parameter('rules')},0,1),0)"))
        for item in self.chain.inputs:
            if item.where != "rules":
                continue
            if item.kind == "range":
                self.known[item.key] = item  # read by row, in the step that looks it up
            elif item.key.startswith("reference_"):
                column = _GROUND_COLUMNS[item.key.replace("reference", "ground")]
                self.known[item.key] = Cell(self._given(item.key, _figure("1", column)).text)
            elif item.kind == "flag":
                self.known[item.key] = self._given(item.key, f"{STEP}FLAG({parameter('rules')},{_text(item.label)})")
            else:
                self._look_up(item, "rules")

    def result(self, side: str) -> str:
        """The function's result; where there is no number, the limiting reason."""
        finding = self.value(f"{side}_finding")
        if self.function.unit is None:
            result = self.words(self.function.step, finding)
        else:
            value = as_cell(self.value(self.function.step))
            words = self.words(f"{side}_reason", finding)
            result = f"IF(ISNUMBER({value.text}),{shown(value, self.function.unit).text},{words})"
        return let(self.given, let(self.pairs, result))

    def value(self, key: str) -> Any:
        """A step's value: a variable, or what it is for whatever arguments."""
        for step in self.chain.leading_to([key]):
            if step.key not in self.known:
                self.known[step.key] = self._step(step)
        return self.known[key]

    def words(self, key: str, finding: Any) -> str:
        """The words of a finding; beyond figures whose reach is not known another sentence."""
        step = self.chain.by_key[key]
        assert isinstance(step, Step)
        if not isinstance(finding, Cell):
            return _text(step.words[int(finding) - 1])
        words = self.writer.words_call(step, finding)
        side = "takeoff" if key.startswith("takeoff") else "landing"
        if BEYOND not in step.words:
            return words
        unknown = f"({finding.text}={step.words.index(BEYOND) + 1})*NOT(ISNUMBER({parameter(REACH[side].key)}))"
        return f"IF({unknown},{_text(NO_REACH_HERE)},{words})"

    def _step(self, step: Step) -> Any:
        if self.parts and step.key in PARTS and "temperature" in self.typed:
            self.pairs.append((parameter(step.key), self._part(step)))
            return Cell(parameter(step.key))
        if step.lookup == "name" and "surface" in self.typed:
            return Sure(parameter("ground"))
        values = [self.known[key] for key in step.inputs]
        found: Any
        if step.lookup.startswith("ground_") and isinstance(self.known["ground"], Cell):
            found = self._figure_of(step, values[0])
        elif step.key == "power":
            found = self._power()
        else:
            with np.errstate(all="ignore"):
                found = step.function(*values)
            if isinstance(found, Cell) and len(found.text) >= LONG_STEP:
                found = Cell(self.writer.step_call(step, values, found.text))
        if step.guard:
            guard = self.known[step.guard]
            of_truth = getattr(self.chain.by_key[step.guard], "truth", False)
            holds = guard if of_truth else np.isfinite(guard)
            found = np.where(holds, found, False if step.truth else np.nan)
        if not isinstance(found, Cell):
            return np.asarray(found)
        if found.text in _CONSTANT:
            return np.asarray(_CONSTANT[found.text])
        if re.fullmatch(r"_xlpm\.\w+", found.text):
            return found
        variable = parameter(f"{step.key}_" if step.key in self.typed else step.key)
        self.pairs.append((variable, found.text))
        return Cell(variable)

    def _part(self, step: Step) -> str:
        """A call of the name that a step has with all that leads to it."""
        trace = _Trace(self.writer, self.function, self.chain, parts=False)
        body = let(trace.given, let(trace.pairs, as_cell(trace.value(step.key)).text))
        keys = [key for key in self.base if _reads(body, parameter(key))]
        name = self.writer.step(step.key, keys, body, f"{step.label}. Source: {step.source}.")
        return f"{name}({','.join(map(parameter, keys))})"

    def _figure_of(self, step: Step, column: Any) -> Cell | Any:
        """A figure of the ground table: of the range of the rules, or fixed where the function has no rules."""
        if isinstance(column, Input):
            return Cell(_figure(parameter("ground"), _GROUND_COLUMNS[column.key]))
        figures = np.asarray(column)[:-1]  # the last is that of a ground not known
        if (figures == figures[0]).all():
            return figures[0]
        name = self.writer.step(step.key, ["ground"], f"INDEX({_figures(figures)},{parameter('ground')})",
                                 f"{step.label} of a row of the ground table.")  # fmt: skip
        return Cell(f"{name}({parameter('ground')})")

    def _power(self) -> Cell:
        """Shaft power by the kind of engine that the range names."""
        self.given.append((parameter("engine"), f"{STEP}WORD({parameter('aircraft')},{_text(ENGINE)})"))
        chosen = Cell("NA()", depth=1)
        for power in reversed(POWERS):
            chain = build_chain("constant speed", power)
            step = chain.by_key["power"]
            assert isinstance(step, Step)
            values = [self._felt(key, chain) for key in step.inputs]
            chosen = where(Cell(parameter("engine")) == power, step.function(*values), chosen)
        return chosen

    def _felt(self, key: str, chain: Chain) -> Any:
        """A value that an engine of one kind reads, which need not be in the chain of another."""
        if key not in self.known:
            step = chain.by_key[key]
            assert isinstance(step, Step)
            found = step.function(*(self._felt(name, chain) for name in step.inputs))
            self.pairs.append((parameter(key), where(np.isfinite(self.known[step.guard]), found, np.nan).text))
            self.known[key] = Cell(parameter(key))
        return self.known[key]


_CONSTANT = {"TRUE": True, "FALSE": False, BLANK: np.nan}
_GROUND_COLUMNS = {"ground_rolling": 2, "ground_braking": 3, "ground_takeoff_factor": 4, "ground_landing_factor": 6}
_CODES = {"surface": SURFACES, "condition": CONDITIONS}


class _RuleValues(Mapping[str, Cell]):
    """The values of a rule set's range, by key."""

    def __getitem__(self, key: str) -> Cell:
        item = build_chain("fixed pitch").by_key[key]
        assert isinstance(item, Input)
        return Cell(_value("rules", item), depth=1)

    def __iter__(self) -> Any:
        raise TypeError("values of a range are asked for by key")

    __len__ = __iter__


def _complete(kind: str, where_: str) -> str:
    """All that the chain reads of a range put together, which is an error where a row or number lacks."""
    range_ = {"card": "aircraft", "rules": "rules"}[where_]
    parts = []
    for item in _chain_of(kind).inputs:
        if item.where != where_ or item.kind == "range" or item.key in _NOT_LOOKED_UP or item in REACH.values():
            continue
        if item.kind == "flag":
            parts.append(f"{STEP}FLAG({parameter(range_)},{_text(item.label)})")
        elif item is POWER_LIMIT:  # not on the sheet of a normally aspirated engine
            engine = f"{STEP}WORD({parameter(range_)},{_text(ENGINE)})"
            parts.append(f'IF({engine}={_text(POWERS[0])},"",{_value(range_, item)})')
        else:
            parts.append(_value(range_, item))
    return "&".join(parts)


# what a function takes as arguments, or finds in the flap table and the ground table
_NOT_LOOKED_UP = {"mass_takeoff", "mass_landing", "takeoff_flap", "landing_flap", "flap_least", "flap_most",
                  "reference_rolling", "reference_braking"}  # fmt: skip


def _at(column: int) -> str:
    return f"INDEX({parameter('aircraft')},{parameter('row')},{column})"


def _value(range_: str, item: Input) -> str:
    helper = "OPTIONAL" if item.key in MAY_BE_BLANK else "VALUE"
    return f"{STEP}{helper}({parameter(range_)},{_text(item.label)})"


def _has_row(label: str) -> str:
    return f"ISNUMBER(MATCH({_text(label)},INDEX({parameter('aircraft')},0,1),0))"


def _figure(row: str, column: int) -> str:
    return f"INDEX({parameter('rules')},{parameter('head')}+{row},{column})"


def _figures(values: np.ndarray) -> str:
    return "{" + ",".join(as_cell(value).text for value in values) + "}"


def _ground_row() -> str:
    return f"{STEP}GROUND({parameter('surface')},{parameter('condition')})"


def _figure_of_ground(function: Function) -> str:
    """A table over surface and condition, as a row of figures."""
    assert function.compute is not None
    surface, condition = np.divmod(np.arange(float(len(SURFACES) * len(CONDITIONS))), len(CONDITIONS))
    figures = np.asarray(function.compute(surface, condition))
    found = f"INDEX({_figures(figures)},{parameter('ground')})"
    known = f"IF(ISNUMBER({found}),{found},{_text(NO_WORDS)})"
    return let([(parameter("ground"), _ground_row())], _told_else(parameter("ground"), known))


def _told_else(variable: str, then: str) -> str:
    """What follows where a variable is a number; else the variable itself, which is a sentence."""
    return f"IF(ISNUMBER({variable}),{then},{variable})"


def _si_of(argument: Argument) -> Cell:
    """A number argument in SI."""
    text = parameter(argument.key)
    if argument.kind == "pressure":
        inches = f"({text}>={PRESSURE_INHG[0]:.15g})*({text}<={PRESSURE_INHG[1]:.15g})"
        return call("IF", Cell(inches), reference(text, "inHg"), reference(text, "hPa"))
    return reference(text, KINDS[argument.kind][0])


def _for_ranges(function: Function, one: str) -> str:
    """A call for one value, or one for every cell of the shape that the ranges have together.

    Single values count for all cells, a column for all columns, a row for all rows; an aircraft and rules are whole ranges.
    """
    rows, columns, row, column = map(parameter, ("rows", "columns", "row", "column"))
    keys = [parameter(argument.key) for argument in function.arguments]
    spread = [parameter(argument.key) for argument in function.arguments if argument.kind not in WHOLE]

    def at(row: str, column: str) -> str:
        return f"{one}({','.join(f'{STEP}AT({key},{row},{column})' if key in spread else key for key in keys)})"

    each = f"_xlfn.MAKEARRAY({rows},{columns},{lambda_of([row, column], at(row, column))})"
    shapes = '""'
    for key in spread:
        shapes = f"{STEP}SHAPES({shapes},{key})"
    fits = ",".join(f"{STEP}FITS({key},{rows},{columns})" for key in spread)
    differ = f'"the ranges have different shapes: "&MID({shapes},6,999)&" cells; give ranges of one shape"'
    sides = [(side, f"MAX({','.join(f'{STEP}{name}({key})' for key in spread)})")
             for side, name in ((rows, "ROWS"), (columns, "COLUMNS"))]  # fmt: skip
    return let(sides, f"IF({rows}*{columns}=1,{at('1', '1')},IF(AND({fits}),{each},{differ}))")


def _checked(function: Function, then: str) -> str:
    """What follows where every number argument is one number; else a sentence on the first that is none."""
    numbers = [argument for argument in function.arguments if argument.kind in KINDS]
    if not numbers:
        return then
    sentence = _text(ONE_VALUE)
    for argument in reversed(numbers):
        unit = KINDS[argument.kind][0]
        wrong = _wrong(argument, _text(f"a number{f' [{unit}]' if unit else ''} is needed"))
        sentence = f"IF(ISNUMBER({parameter(argument.key)}),{sentence},{wrong})"
    tests = [f"ISNUMBER({parameter(argument.key)})" for argument in numbers]
    tests.append(f"COUNT({','.join(parameter(argument.key) for argument in numbers)})={len(numbers)}")
    checked = f"IF(AND({','.join(tests)}),{{}},{sentence})"
    for argument in numbers:
        if argument.kind == "pressure":
            then = _pressure_checked(argument, then)
    return checked.replace("{}", then, 1)


def _pressure_checked(argument: Argument, then: str) -> str:
    typed = parameter(argument.key)
    ranges = [f"({typed}>={low:.15g})*({typed}<={high:.15g})" for low, high in (PRESSURE_INHG, PRESSURE_HPA)]
    words = [f"{low:g} to {high:g}" for low, high in (PRESSURE_HPA, PRESSURE_INHG)]
    sentence = f'"{argument.name}: "&{typed}&" is neither a pressure in hPa ({words[0]}) nor in inHg ({words[1]})"'
    return f"IF({'+'.join(ranges)},{then},{sentence})"


def _name(name: str, text: str, comment: str) -> Name:
    """A name within Excel's limits. Raises ValueError beyond them."""
    if len(text) + 1 > MAX_LENGTH or nesting(text) > MAX_DEPTH:
        raise ValueError(f"{name}: {len(text)} characters and {nesting(text)} levels are more than a formula may have")
    return Name(name, text, comment if len(comment) <= MAX_COMMENT else comment[: MAX_COMMENT - 3] + "...")


def _comment(function: Function) -> str:
    return f"{function.help} Result [{function.unit}]." if function.unit else function.help


def _first_line(function: Callable[..., Any]) -> str:
    return (inspect.getdoc(function) or function.__name__.replace("_", " ")).split("\n")[0]


def _wrong(argument: Argument, what: str) -> str:
    """The sentence on an argument's cell: that it is empty or holds an error, or else the words of a formula."""
    return f"{STEP}WRONG({parameter(argument.key)},{_text(argument.name)},{what})"


def _exactly_one_of(variable: str, words: tuple[str, ...]) -> str:
    return f"IFERROR(SUMPRODUCT(--EXACT({variable},{_word_list(words)}))=1,FALSE)"


def _none_of(argument: Argument, words: tuple[str, ...]) -> str:
    return _wrong(argument, f'""""&{parameter(argument.key)}&""" is none of: {", ".join(words)}"')


def _helpers() -> dict[str, tuple[tuple[str, ...], str, str]]:
    """Names that every function leans on: key -> parameters, body, comment."""
    p = parameter
    line = f"MATCH({p('label')},INDEX({p('range')},0,1),0)"
    at_line = f"INDEX({p('range')},{p('line')},{{}})"
    number = at_line.format(4)
    value = let([(p("line"), line)], f"IF(ISNUMBER({number}),{number},NA())")
    blank = f'IF({number}="","",NA())'
    optional = let([(p("line"), line)], f"IF(ISNUMBER({number}),{number},{blank})")
    word = f"INDEX({p('range')},{line},2)"
    flag = let([(p("word"), word)], f'IF({p("word")}="yes",TRUE,IF({p("word")}="no",FALSE,NA()))')
    row = (f"(MATCH({p('surface')},{_word_list(SURFACES)},0)-1)*{len(CONDITIONS)}"
           f"+MATCH({p('condition')},{_word_list(CONDITIONS)},0)")  # fmt: skip
    by_condition = (f"IF({_exactly_one_of(p('condition'), CONDITIONS)},{row},"
                    f"{_none_of(CONDITION, CONDITIONS)})")  # fmt: skip
    ground = (f"IF({_exactly_one_of(p('surface'), SURFACES)},{by_condition},"
              f"{_none_of(SURFACE, SURFACES)})")  # fmt: skip
    at = [f"INDEX({p('aircraft')},{p('row')},{column})" for column in (1, 4, 8, 9, 5)]
    name = f'{p("flap")}&""'
    is_setting = (f"IFERROR(AND(COUNT({p('row')})=1,{p('row')}>{p('head')},EXACT({at[0]}&\"\",{name}),ISNUMBER({at[1]}),"
                  f"ISNUMBER({at[2]}),ISNUMBER({at[3]})),FALSE)")  # fmt: skip
    allowed = f"OR({p('use')}=\"\",ISNUMBER(SEARCH({p('use')},{at[4]})))"
    refused = f'"Flap: """&{p("flap")}&""" is not allowed for "&{p("use")}&" by the card"'
    unknown = _wrong(FLAP, f'"the flap table has no setting """&{p("flap")}&""""')
    no_table = _text(f"Aircraft: the range has no flap table; give {AIRCRAFT_SHEET}")
    labels = f"INDEX({p('aircraft')},0,1)"
    told = f"IF({is_setting},IF({allowed},{p('row')},{refused}),{unknown})"
    flap = let([(p("head"), f"MATCH({_text(FLAP_HEADER[0])},{labels},0)"), (p("row"), f"MATCH({name},{labels},0)")],
               f"IF(ISNUMBER({p('head')}),{told},{no_table})")  # fmt: skip
    return {
        "value": (("range", "label"), value, "Value in SI of a row of an Aircraft or Rules sheet, by its label."),
        "optional": (("range", "label"), optional, "The same of a row that may be blank."),
        "flag": (("range", "label"), flag, "Whether a row of a Rules sheet says yes."),
        "word": (("range", "label"), word, "Word in a row of an Aircraft or Rules sheet."),
        "ground": (("surface", "condition"), ground, "Row in the ground table of a surface and a condition."),
        "flap": (("aircraft", "flap", "use"), flap, "Row in the range of an Aircraft sheet of a flap setting."),
    }


def _range_helpers() -> dict[str, tuple[tuple[str, ...], str, str]]:
    """Names by which a function takes ranges, and tells what is wrong with a cell: key -> parameters, body, comment."""
    p = parameter
    cells = p("cells")
    single = f"{STEP}ROWS({cells})*{STEP}COLUMNS({cells})=1"
    place = ",".join(f"IF({STEP}{side}({cells})=1,1,{p(key)})" for side, key in (("ROWS", "row"), ("COLUMNS", "column")))
    one, of_many = f"INDEX({cells},1,1)", f"INDEX({cells},{place})"
    # a blank cell as a text, since it must not count as 0 on its way; an array of one value is no single value yet
    at = (f'IF({single},IF(TYPE({cells})={ARRAY_TYPE},{one},IF(ISBLANK({cells}),"",{cells})),'
          f'IF(ISBLANK({of_many}),"",{of_many}))')  # fmt: skip
    fits = ",".join(f"OR({STEP}{side}({cells})=1,{STEP}{side}({cells})={p(side.lower())})" for side in ("ROWS", "COLUMNS"))
    told, shape = p("told"), p("shape")
    known = f'ISNUMBER(SEARCH({shape}&" and ",{told}&" and "))'
    shapes = let([(shape, f'" and "&{STEP}ROWS({cells})&" x "&{STEP}COLUMNS({cells})')],
                 f"IF({single},{told},IF({known},{told},{told}&{shape}))")  # fmt: skip
    wrong = (f'{p("name")}&": "&IF(ISERROR({p("cell")}),"the cell holds an error",'
             f'IF({p("cell")}="",{_text(EMPTY)},{p("what")}))')  # fmt: skip
    return {
        # what is not there counts as a single value, and is told as wrong by what reads it
        "rows": (("cells",), f"IFERROR(ROWS({cells}),1)", "Rows of a range; 1 of a single value."),
        "columns": (("cells",), f"IFERROR(COLUMNS({cells}),1)", "Columns of a range; 1 of a single value."),
        "at": (("cells", "row", "column"), at,
               "What counts of an argument in a cell of the result: its one value, row or column counts for all."),
        "fits": (("cells", "rows", "columns"), f"AND({fits})", "Whether an argument goes with a result of that shape."),
        "shapes": (("told", "cells"), shapes, "The shapes told so far, and that of one more range."),
        "wrong": (("cell", "name", "what"), wrong, "What is wrong with a cell, in words."),
    }


_HELPERS = _range_helpers() | _helpers()
