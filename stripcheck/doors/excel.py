"""The Excel door: the registry's functions as Excel on Windows calls them, through xlwings. Only this module imports it.

xlwings reads what is registered here (``UDF MODULES`` = ``stripcheck.doors.excel``), writes a VBA function for each, and
hands every argument over as Excel gives it ("raw": its other ways of reading cost several times as much and lose some error
values). On Linux and macOS its decorators do nothing, and this module can be imported all the same.
"""

from __future__ import annotations

import inspect
from collections.abc import Callable
from pathlib import Path
from typing import Any

import xlwings as xw

from stripcheck.doors.call import Cells, call
from stripcheck.doors.functions import FUNCTIONS, Function
from stripcheck.errors import InputError

# Error values of cells come as whole numbers, which no other cell does: 0x800A0000 and the number that CVErr takes, as a
# signed one. The newer numbers are from memory; whatever else lies between the limits is an error too.
ERRORS = {2000: "#NULL!", 2007: "#DIV/0!", 2015: "#VALUE!", 2023: "#REF!", 2029: "#NAME?", 2036: "#NUM!", 2042: "#N/A",
          2045: "#SPILL!", 2050: "#CALC!"}  # fmt: skip
FIRST_ERROR, LAST_ERROR, ERROR_BASE = 2000, 2099, 0x800A0000 - 2**32
LEFT_OUT = object()  # stands for an argument that is not given; an empty cell is None
MACRO_WORKBOOK = 52  # Excel's number of the .xlsm format
NO_IMPORT = 'Excel did not take the functions; is "Trust access to the VBA project object model" ticked?'


def _registered(function: Function) -> Callable[..., list[list[Any]]]:
    """A function of the registry with the name, the arguments and the texts that xlwings reads."""
    # a lambda, because xlwings would take annotations for converters
    wrapper = lambda *given: _rows(call(function, *map(_cells, given)))  # noqa: E731
    wrapper.__name__ = wrapper.__qualname__ = function.full_name
    wrapper.__doc__ = function.described
    kind = inspect.Parameter.POSITIONAL_OR_KEYWORD
    given = [
        inspect.Parameter(argument.key, kind, default=inspect.Parameter.empty if argument.required else LEFT_OUT)
        for argument in function.all_arguments
    ]
    vars(wrapper)["__signature__"] = inspect.Signature(given)
    registered: Callable[..., list[list[Any]]] = xw.ret("raw")(wrapper)
    for argument in function.all_arguments:
        registered = xw.arg(argument.key, "raw", doc=argument.help)(registered)
    return xw.func(category=f"stripcheck: {function.category}")(registered)


def _cells(given: Any) -> Cells:
    """An argument as ``call`` takes it: None where it is left out, "" for an empty cell, words for error values."""
    if given is LEFT_OUT:
        return None
    if isinstance(given, tuple | list):
        return [[_cell(cell) for cell in row] if isinstance(row, tuple | list) else [_cell(row)] for row in given]
    return "" if given is None else _cell(given)


def _cell(cell: Any) -> Any:
    if type(cell) is int and FIRST_ERROR <= cell - ERROR_BASE <= LAST_ERROR:
        return ERRORS.get(cell - ERROR_BASE, "#ERROR")
    return cell


def _rows(cells: Cells) -> list[list[Any]]:
    """A result as rows, which is what xlwings takes apart again."""
    return cells if isinstance(cells, list) else [[cells]]


for _function in FUNCTIONS:
    globals()[_function.full_name] = _registered(_function)


def import_functions(workbook: Path) -> Path:
    """Put the functions into a workbook by Excel itself, and save it with macros beside; gives the path of that.

    Needs Windows, Excel and xlwings' add-in, and that the user trusts it. Raises InputError where Excel does not take them.
    """
    saved = workbook.with_suffix(".xlsm")
    register: Any = xw.import_udfs  # which on other systems takes nothing and only raises
    try:
        with xw.App(visible=False, add_book=False) as app:
            book = app.books.open(str(workbook))
            references = book.api.VBProject.References
            if "xlwings" not in {reference.Name for reference in references}:
                references.AddFromFile(str(Path(xw.__file__).parent / "addin" / "xlwings.xlam"))
            register(__name__, book.api)
            book.api.SaveAs(str(saved), FileFormat=MACRO_WORKBOOK)
            book.close()
    except Exception as error:  # Excel's errors are of many kinds
        raise InputError(f"{NO_IMPORT} ({error})") from error
    return saved
