"""What a registry of spreadsheet functions must keep to, so that every program takes it as it is.

None of the programs says so when a rule is broken: a help text is cut, a module does not compile, a name is read as a cell.
The limits are the programs' documented ones; the lists of reserved words are from memory.
"""

from __future__ import annotations

import itertools
import keyword
import re
from collections.abc import Iterator, Sequence

from stripcheck.doors.call import sentences
from stripcheck.doors.functions import PREFIX, Argument, Function
from stripcheck.units import KINDS, UNITS

MOST_ARGUMENTS = 30  # Calc's function wizard; VBA takes 60
MOST_LETTERS = 255  # of a name and of a help text in Excel
LAST_COLUMN, LAST_ROW = "XFD", 1_048_576
FURTHER_KINDS = ("aircraft", "rules", "flap", "surface", "condition", "text")

VBA = frozenset("""
    addressof alias and any append array as attribute base binary boolean byref byte byval call case cbool cbyte ccur cdate
    cdbl cdec cint clng clnglng clngptr close compare const csng cstr currency cvar cverr database date debug decimal declare
    defbool defbyte defcur defdate defdbl defint deflng defobj defsng defstr defvar dim do doevents double each else elseif
    empty end enum eqv erase error event exit explicit false fix for friend function get global gosub goto if imp implements
    in input int integer is lbound len lenb let lib like line lock long longlong longptr loop lset me mid midb mod module
    name new next not nothing null object on open option optional or output paramarray preserve print private property pset
    public put raiseevent random read redim rem resume return rset seek select set shared single spc static step stop string
    sub tab text then time to true type typeof ubound unlock until variant wend while width with withevents write xor
""".split())  # noqa: SIM905
UNO = frozenset("""
    any array attribute bits boolean bound byte case char const constants constrained context default double ellipsis enum
    exception false fixed float get hyper in inout interface long maybeambiguous maybedefault maybevoid module needs observes
    oneway optional out property published raises readonly removable sequence service set short singleton string struct
    switch transient true type typedef union unicode unsigned void
""".split())  # noqa: SIM905
PYTHON = frozenset(word.lower() for word in (*keyword.kwlist, *keyword.softkwlist))
RESERVED = {"VBA": VBA, "UNO": UNO, "Python": PYTHON}


def problems(functions: Sequence[Function]) -> list[str]:
    """Everything about a registry that some program would not take, a sentence each.

    >>> from stripcheck.doors.functions import FUNCTIONS
    >>> problems(FUNCTIONS)
    []
    """
    found = [problem for function in functions for problem in list(_of_function(function)) or _of_example(function)]
    names = [function.name.lower() for function in functions]
    return found + [f"{function.name}: there are two functions of this name"
                    for at, function in enumerate(functions) if function.name.lower() in names[:at]]  # fmt: skip


def looks_like_a_cell(name: str) -> bool:
    """Whether a spreadsheet program would read a name as a cell, in letters and digits or as row and column.

    >>> [looks_like_a_cell(name) for name in ("VS1", "XFD1048576", "XFE1", "R1C1", "RC", "STRIP_SLOPE")]
    [True, True, False, True, True, False]
    """
    plain = re.fullmatch(r"([A-Z]{1,3})0*([1-9]\d{0,6})", name.upper())
    if plain and (len(plain[1]), plain[1]) <= (len(LAST_COLUMN), LAST_COLUMN) and int(plain[2]) <= LAST_ROW:
        return True
    return re.fullmatch(r"(?=[RC])(R(\d+|\[-?\d+\])?)?(C(\d+|\[-?\d+\])?)?", name.upper()) is not None


def _of_function(function: Function) -> Iterator[str]:
    arguments = function.all_arguments
    for problem in _of_name(function.name):
        yield f"{function.name}: {problem}"
    if looks_like_a_cell(function.full_name) or len(function.full_name) > MOST_LETTERS:
        yield f"{function.name}: with the prefix {PREFIX} it is no name either"
    if len(function.described) > MOST_LETTERS:
        yield f"{function.name}: the help has more than {MOST_LETTERS} letters"
    if not function.help.strip() or not function.category.strip():
        yield f"{function.name}: a help text and a category are needed"
    if len(arguments) > MOST_ARGUMENTS:
        yield f"{function.name}: more than {MOST_ARGUMENTS} arguments"
    for part in ("key", "name"):
        names = [getattr(argument, part).lower() for argument in arguments]
        if len(set(names)) < len(names):
            yield f"{function.name}: two arguments of one {part}"
    if any(late.required and not early.required for early, late in itertools.pairwise(arguments)):
        yield f"{function.name}: an argument that must be given stands after one that may be left out"
    for argument in arguments:
        yield from (f"{function.name}, {argument.key}: {problem}" for problem in _of_argument(argument))
    if function.unit is not None and function.unit not in UNITS:
        yield f'{function.name}: "{function.unit}" is no unit of the results'
    elif function.unit and function.unit not in {unit for unit, _ in KINDS.values()}:
        yield f'{function.name}: "{function.unit}" is the usual unit of no kind, so no other could be asked for'
    ways = [function.compute is not None, bool(function.step), function.ask is not None]
    if sum(ways) != 1:
        yield f"{function.name}: one of compute, step and ask is needed, and no more"


def _of_example(function: Function) -> list[str]:
    return [f"{function.name}: the example does not work: {sentence}" for sentence in sentences(function, *function.example)]


def _of_name(name: str) -> Iterator[str]:
    """What is wrong with a name in code: of a function, which is the whole name of a method in UNO, or of an argument."""
    if re.fullmatch(r"[A-Za-z](_?[A-Za-z0-9])*", name) is None:
        yield "a name has letters, digits and single underscores between them, and begins with a letter"
    if len(name) > MOST_LETTERS:
        yield f"the name has more than {MOST_LETTERS} letters"
    if looks_like_a_cell(name):
        yield "the name looks like a cell"
    for language, words in RESERVED.items():
        if name.lower() in words:
            yield f"the name is a word of {language}"


def _of_argument(argument: Argument) -> Iterator[str]:
    yield from _of_name(argument.key)
    if argument.kind not in KINDS and argument.kind not in FURTHER_KINDS:
        yield f'"{argument.kind}" is no kind of argument'
    if not argument.name.strip() or not argument.help.strip():
        yield "a trade name and a help text are needed"
    if len(argument.help) > MOST_LETTERS:
        yield f"the help has more than {MOST_LETTERS} letters"
