"""Drive one headless LibreOffice, asked in JSON lines on stdin and answering in JSON lines on stdout.

Run by `tests/office.py` under the Python that has LibreOffice's `uno` module:
`python office_worker.py SOFFICE_BIN PROFILE_FOLDER [EXTENSIONS_FOLDER]`. Each question is `{"do": name, ...}`; each answer is
`{"ok": result}` or `{"error": sentence}`. The end of stdin ends the office and this process.
"""

from __future__ import annotations

import contextlib
import ctypes
import json
import os
import secrets
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import uno
from com.sun.star.beans import PropertyValue
from com.sun.star.connection import NoConnectException

PR_SET_PDEATHSIG = 1  # linux/prctl.h
MOST_ERROR_CODES = 500  # to ask for the code of one cell takes some 3 ms
NEVER = 0  # of MacroExecMode and of UpdateDocMode: run no macro, refresh no link
PROFILE_WAS_NEW = 81  # exit code of a start that only prepared a brand-new profile
START_SECONDS = 120
STOP_SECONDS = 15
HIDDEN = ["--headless", "--invisible", "--norestore", "--nologo", "--nodefault"]
FILTERS = {
    ".xlsx": "Calc MS Excel 2007 XML",
    ".ods": "calc8",
    ".pdf": "calc_pdf_Export",
}


class WorkerError(Exception):
    """A question that can't be answered, said in one sentence."""


def die_with_parent() -> None:
    """Ask the kernel to end this process when its parent ends, however that happens (Linux only)."""
    if sys.platform == "linux":
        ctypes.CDLL(None).prctl(PR_SET_PDEATHSIG, signal.SIGKILL)


def properties(**values: object) -> tuple[Any, ...]:
    return tuple(PropertyValue(Name=name, Value=value) for name, value in values.items())


def url(path: str) -> str:
    return uno.systemPathToFileUrl(os.path.abspath(path))


def start(soffice: str, profile: str, extensions: str = "", options: list[str] = HIDDEN) -> tuple[subprocess.Popen[bytes], Any]:
    """Start the office on a private profile and a private pipe; return the process and its context."""
    for _ in range(3):
        pipe = "stripcheck" + secrets.token_hex(8)
        process = subprocess.Popen(
            [
                soffice, *options, f"--accept=pipe,name={pipe};urp;", f"-env:UserInstallation={url(profile)}",
                *([f"-env:BUNDLED_EXTENSIONS={url(extensions)}"] if extensions else []),
            ],
            stdin=subprocess.DEVNULL,
            stdout=subprocess.DEVNULL,
            preexec_fn=die_with_parent,
        )
        context = connect(process, pipe)
        if context is not None:
            return process, context
        if process.returncode != PROFILE_WAS_NEW:
            break
    raise WorkerError(f"LibreOffice ended at once with exit code {process.returncode}")


def connect(process: subprocess.Popen[bytes], pipe: str) -> Any:
    """Return the context as soon as the office answers, or None when its process has ended."""
    local = uno.getComponentContext()
    resolver = local.ServiceManager.createInstanceWithContext("com.sun.star.bridge.UnoUrlResolver", local)
    deadline = time.monotonic() + START_SECONDS
    while process.poll() is None:
        try:
            context = resolver.resolve(f"uno:pipe,name={pipe};urp;StarOffice.ComponentContext")
        except NoConnectException:
            if time.monotonic() > deadline:
                raise WorkerError(f"LibreOffice did not answer within {START_SECONDS} s") from None
            time.sleep(0.05)
        else:
            return context
    return None


def service(context: Any, name: str) -> Any:
    return context.ServiceManager.createInstanceWithContext(name, context)


def stop(process: subprocess.Popen[bytes], context: Any) -> None:
    """Ask the office to end; kill the process that was started when it does not."""
    with contextlib.suppress(Exception):  # the bridge falls together with the office, as was asked for
        service(context, "com.sun.star.frame.Desktop").terminate()
    try:
        process.wait(STOP_SECONDS)
    except subprocess.TimeoutExpired:
        process.kill()
        process.wait()


class Books:
    """The open books by number; each public method answers one kind of question."""

    def __init__(self, context: Any) -> None:
        self._context = context
        self._desktop = service(context, "com.sun.star.frame.Desktop")
        self._open: dict[int, Any] = {}
        self._last = 0

    def open(self, path: str) -> int:
        if not Path(path).is_file():
            raise WorkerError(f"{path}: there is no such file")
        options = properties(Hidden=True, MacroExecutionMode=NEVER, UpdateDocMode=NEVER)
        document = self._desktop.loadComponentFromURL(url(path), "_blank", 0, options)
        if document is None:
            raise WorkerError(f"{path}: LibreOffice can't open this file")
        if not document.supportsService("com.sun.star.sheet.SpreadsheetDocument"):
            document.close(True)
            raise WorkerError(f"{path}: this file is not a spreadsheet")
        self._last += 1
        self._open[self._last] = document
        return self._last

    def close(self, book: int) -> None:
        self._open.pop(book).close(True)

    def sheets(self, book: int) -> list[str]:
        return list(self._open[book].Sheets.ElementNames)

    def recalculate(self, book: int) -> None:
        self._open[book].calculateAll()

    def values(self, book: int, sheet: str, area: str) -> list[list[object]]:
        cells = self._area(self._sheet(book, sheet), area)
        rows = [list(row) for row in cells.getDataArray()]
        self._name_errors(cells, rows)
        corner = cells.getRangeAddress()
        for blank in cells.queryEmptyCells().getRangeAddresses():
            columns = range(blank.StartColumn - corner.StartColumn, blank.EndColumn - corner.StartColumn + 1)
            for row in rows[blank.StartRow - corner.StartRow : blank.EndRow - corner.StartRow + 1]:
                for column in columns:
                    row[column] = None
        return rows

    def set(self, book: int, sheet: str, cells: dict[str, float | str | None]) -> None:
        document, place = self._open[book], self._sheet(book, sheet)
        document.enableAutomaticCalculation(False)  # once at the end, not after each cell
        try:
            for name, value in cells.items():
                # An empty text clears a cell; None would write the error "not available" into it.
                self._area(place, name).setDataArray((("" if value is None else value,),))
        finally:
            document.enableAutomaticCalculation(True)

    def insert(self, book: int, sheet: str, what: str, before: int, count: int) -> None:
        """Insert blank "Rows" or "Columns" before the one with this number (1 is the first), as a user does."""
        getattr(self._sheet(book, sheet), what).insertByIndex(before - 1, count)

    def remove(self, book: int, sheet: str, what: str, first: int, count: int) -> None:
        getattr(self._sheet(book, sheet), what).removeByIndex(first - 1, count)

    def sort(self, book: int, sheet: str, area: str, column: int, ascending: bool) -> None:
        """Sort the rows of an area by one of its columns (1 is the first)."""
        field = uno.createUnoStruct("com.sun.star.table.TableSortField")
        field.Field, field.IsAscending = column - 1, ascending
        fields = uno.Any("[]com.sun.star.table.TableSortField", (field,))
        settings = PropertyValue(Name="SortFields", Value=fields), PropertyValue(Name="ContainsHeader", Value=False)
        self._area(self._sheet(book, sheet), area).sort(settings)

    def export(self, book: int, path: str) -> None:
        kind = FILTERS.get(Path(path).suffix)
        if kind is None:
            raise WorkerError(f"{path}: the file name must end in {', '.join(FILTERS)}")
        self._open[book].storeToURL(url(path), properties(FilterName=kind, Overwrite=True))
        if not Path(path).is_file():
            raise WorkerError(f"{path}: LibreOffice wrote no file")

    def wizard(self, prefix: str) -> dict[str, dict[str, Any]]:
        """Description and arguments of each function whose name starts so, as the function wizard shows them."""
        known = service(self._context, "com.sun.star.sheet.FunctionDescriptions")
        found = {}
        for number in range(known.Count):
            told = {item.Name: item.Value for item in known.getByIndex(number)}
            if told["Name"].startswith(prefix):
                arguments = [[item.Name, item.Description, item.IsOptional] for item in told["Arguments"]]
                found[told["Name"]] = {"description": told["Description"], "arguments": arguments}
        return found

    def _name_errors(self, cells: Any, rows: list[list[object]]) -> None:
        """Replace each None, which is how an error comes out of an area, by the error's code."""
        count = 0
        for row, line in enumerate(rows):
            for column, value in enumerate(line):
                if value is None:
                    count += 1
                    known = count <= MOST_ERROR_CODES
                    code = cells.getCellByPosition(column, row).getError() if known else "?"
                    line[column] = f"#ERR:{code}"

    def _sheet(self, book: int, name: str) -> Any:
        sheets = self._open[book].Sheets
        if not sheets.hasByName(name):
            raise WorkerError(f"there is no sheet {name!r}; the sheets are {list(sheets.ElementNames)}")
        return sheets.getByName(name)

    def _area(self, sheet: Any, area: str) -> Any:
        try:
            return sheet.getCellRangeByName(area)
        except Exception:
            raise WorkerError(f"{area!r} is not a cell or range of sheet {sheet.Name!r}") from None


def answer(books: Books, question: dict[str, Any]) -> dict[str, object]:
    """Answer one question; whatever goes wrong becomes one sentence."""
    try:
        return {"ok": getattr(books, question.pop("do"))(**question)}
    except WorkerError as error:
        return {"error": str(error)}
    except Exception as error:  # UNO has many kinds; the caller needs the words of each
        return {"error": f"LibreOffice: {type(error).__name__} {error}".strip()}


def main() -> None:
    die_with_parent()
    try:
        process, context = start(*sys.argv[1:])
    except WorkerError as error:
        print(json.dumps({"error": str(error)}), flush=True)
        return
    try:
        print(json.dumps({"ok": "ready"}), flush=True)
        books = Books(context)
        for line in sys.stdin:
            print(json.dumps(answer(books, json.loads(line))), flush=True)
    finally:
        stop(process, context)


if __name__ == "__main__":
    main()
