"""``stripcheck door excel``: the settings, the VBA text, a workbook to start from, and the steps, in one folder."""

from __future__ import annotations

import platform
import sys
from collections.abc import Sequence
from importlib.resources import files
from io import BytesIO
from pathlib import Path

from stripcheck.caution import CAUTION
from stripcheck.doors.call import call
from stripcheck.doors.functions import FUNCTIONS, Function
from stripcheck.errors import InputError

MODULE = "stripcheck.doors.excel"
BOOK, MODULE_TEXT, SETTINGS, STEPS = "stripcheck-functions.xlsx", "stripcheck-functions.bas", "xlwings.conf", "steps.txt"
SHEETS = ("Start", "Functions", SETTINGS)
SAME = 1e-9  # relative, between Excel's answer and the one written beside it
UNTRIED = "Excel itself was not there to try this with: what was tried and what was not is told in docs/excel.md."

STEP_TEXTS = (
    "On a computer with Windows, Excel and Python 3.11 or later: pip install the folder of stripcheck; xlwings comes with it.",
    "Close Excel, and type: xlwings addin install",
    'In Excel: File > Options > Trust Center > Trust Center Settings > Macro Settings: tick "Trust access to the VBA '
    'project object model". The tick is yours to set, and can be taken out again after the import.',
    f"Type: stripcheck door excel   With Excel there, it imports the functions into {Path(BOOK).stem}.xlsm. If it says that "
    "it did not, go on with the next three steps; otherwise open that workbook.",
    f"Open {BOOK} and save it as a macro-enabled workbook (.xlsm) in the same folder.",
    "Press Alt+F11, choose Tools > References, tick xlwings, and close that window.",
    "On the ribbon xlwings press Import Functions.",
    "On the sheet Functions press Ctrl+Alt+F9. Each function is called there once, beside the answer that it must give.",
    "Type a first formula of your own: =STRIP_DENSITY_ALT(2400,1008,31)",
    f"Without the tick of step 3: do the steps up to Tools > References, then in the window of Alt+F11 choose File > Import "
    f"File and take {MODULE_TEXT}. The formulas are the same; only the help texts in the function wizard are missing.",
)  # fmt: skip


def install(folder: Path, force: bool) -> list[str]:
    """Write the files into a folder and, on Windows, import the functions; gives lines to show.

    Raises InputError where a file is there already and ``force`` is not given.
    """
    present = [name for name in (BOOK, MODULE_TEXT, SETTINGS, STEPS) if (folder / name).exists()]
    if present and not force:
        raise InputError(f"{folder / present[0]} is there already; --force replaces it")
    settings = settings_here()
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise InputError(f"{folder}: can't be made ({error.strerror or error})") from error
    _write(folder / BOOK, _workbook(settings))
    _write(folder / MODULE_TEXT, vba_text().replace("\n", "\r\n").encode("ascii"))
    _write(folder / SETTINGS, "".join(f'"{key}","{value}"\r\n' for key, value in settings).encode())
    _write(folder / STEPS, "\r\n".join((*_numbered(STEP_TEXTS), "", UNTRIED, CAUTION, "")).encode())
    return [f"{folder}: {BOOK}, {MODULE_TEXT}, {SETTINGS} and {STEPS} written.", *_import(folder)]


def vba_text() -> str:
    """The VBA functions as xlwings writes them, kept in the project."""
    return (files("stripcheck") / "doors" / "excel.bas").read_text(encoding="ascii")


def settings_here() -> tuple[tuple[str, str], ...]:
    """xlwings' settings for a workbook with the functions; with this Python where it is the one that Excel will start."""
    here = (("INTERPRETER_WIN", sys.executable),) if platform.system() == "Windows" else ()
    return (*here, ("UDF MODULES", MODULE))


def _import(folder: Path) -> list[str]:
    steps = f"Follow {folder / STEPS}."
    if platform.system() != "Windows":
        return [f"The functions work in Excel on Windows only, and this is not Windows: nothing was imported. {steps}"]
    from stripcheck.doors.excel import import_functions

    try:
        return [f"{import_functions(folder / BOOK)}: the functions are in it. {UNTRIED}"]
    except InputError as error:
        return [f"{error} {steps}"]


def _write(path: Path, content: bytes) -> None:
    from stripcheck.safe_file import whole_or_not_at_all

    with whole_or_not_at_all(path) as file:
        file.write(content)


def _numbered(texts: Sequence[str]) -> list[str]:
    return [f"{number}. {text}" for number, text in enumerate(texts, 1)]


def formula_of(function: Function) -> str:
    """The example of a function as a formula.

    >>> from stripcheck.doors.functions import BY_NAME
    >>> formula_of(BY_NAME["ROLLING"])
    '=STRIP_ROLLING("grass","wet")'
    """
    cells = [f'"{cell}"' if isinstance(cell, str) else f"{cell:g}" for cell in function.example]
    return f"={function.full_name}({','.join(cells)})"


def _workbook(settings: Sequence[tuple[str, str]]) -> bytes:
    """A workbook without macros: the steps, every function called once beside its answer, and xlwings' settings."""
    from openpyxl import Workbook

    from stripcheck.sheet import styles

    book = Workbook()
    start, functions, conf = (book.create_sheet(name) for name in SHEETS)
    book.remove(book.worksheets[0])
    start["A1"], start["A1"].font = "stripcheck in Excel", styles.TITLE
    styles.write_caution(start, "A2", CAUTION)
    for row, text in enumerate((*_numbered(STEP_TEXTS), UNTRIED), 4):
        start.cell(row, 1, text).alignment = styles.WRAP
        start.cell(row, 1).font = styles.BODY
    start.column_dimensions["A"].width = 120
    styles.write_caution(functions, "A1", CAUTION)
    for column, title in enumerate(("Function", "Called as", "Here", "Must be", "Unit", "Same"), 1):
        cell = functions.cell(3, column, title)
        cell.font, cell.fill = styles.HEADER, styles.HEADER_FILL
    for row, function in enumerate(FUNCTIONS, 4):
        text = formula_of(function)
        must = call(function, *function.example)
        same = f'=IF(C{row}=D{row},"yes","no")'
        if function.unit is not None:
            same = f'=IF(ISNUMBER(C{row}),IF(ABS(C{row}-D{row})<={SAME:.0e}*ABS(D{row}),"yes","no"),"no")'
        for column, value in enumerate((function.full_name, text, text, must, function.unit or "", same), 1):
            cell = functions.cell(row, column, value)
            cell.font = styles.BODY
            if column == 2:
                cell.data_type, cell.number_format = "s", "@"
    for letter, width in zip("ABCDEF", (26, 80, 24, 24, 8, 8), strict=True):
        functions.column_dimensions[letter].width = width
    functions.freeze_panes = "A4"
    for row, pair in enumerate(settings, 1):
        conf.cell(row, 1, pair[0])
        conf.cell(row, 2, pair[1])
    stream = BytesIO()
    book.save(stream)
    return stream.getvalue()
