"""A real headless LibreOffice for the tests: open a book, recalculate it, read, set, save, print to PDF.

pytest's own Python has no `uno` module (it belongs to LibreOffice's Python), so a worker process,
`tests/office_worker.py`, holds the office and answers questions in JSON lines. It has a profile and a pipe of
its own, so several may run at once, and it dies with the test run, however that ends.

`python tests/office.py` makes sure that LibreOffice is there, or says what to type.
"""

from __future__ import annotations

import contextlib
import fcntl
import json
import os
import shutil
import signal
import subprocess
import sys
import tempfile
import threading
from collections.abc import Mapping
from pathlib import Path
from types import TracebackType
from typing import Any

import pytest

Value = float | str | None

WORKER = Path(__file__).with_name("office_worker.py")
ANSWER_SECONDS = 300.0
PACKAGES = (
    "libreoffice-calc", "python3-uno", "python3-numpy", "python3-pint", "poppler-utils", "fonts-dejavu", "fonts-liberation",
)  # fmt: skip
APT_UPDATE = ("apt-get", "update")
APT_INSTALL = ("apt-get", "install", "--yes", "--no-install-recommends", *PACKAGES)
USUAL_FOLDERS = ("/usr/lib/libreoffice/program", "/usr/lib64/libreoffice/program", "/opt/libreoffice/program")

# A lock file beside an opened book would litter the project's folders, and one that a killed run left behind
# would keep the next run from opening the book.
PROFILE_SETTINGS = """<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry">
<item oor:path="/org.openoffice.Office.Common/Misc">
<prop oor:name="UseLocking" oor:op="fuse"><value>false</value></prop></item>
</oor:items>
"""


class OfficeError(Exception):
    """LibreOffice could not do what was asked; the message says what."""


def find_soffice() -> Path | None:
    """Return the path of LibreOffice's own binary (not of the script that wraps it), or None."""
    command = shutil.which("soffice") or shutil.which("libreoffice")
    folders = [Path(command).resolve().parent] if command else []
    for folder in [*folders, *map(Path, USUAL_FOLDERS)]:
        if (folder / "soffice.bin").is_file():
            return folder / "soffice.bin"
    return None


def find_uno_python(imports: str = "import uno") -> Path | None:
    """Return a Python that can import LibreOffice's `uno` module, or what else it is asked for, or None."""
    soffice = find_soffice()
    bundled = [soffice.with_name("python")] if soffice else []
    for python in [Path("/usr/bin/python3"), *bundled]:
        if python.is_file() and not _run_quietly([str(python), "-c", imports]):
            return python
    return None


def missing_parts() -> list[str]:
    """Return the names of what the tests need from LibreOffice and can't find."""
    found = {
        "LibreOffice": find_soffice(),
        "a Python with LibreOffice's uno module": find_uno_python(),
        "pdftoppm": shutil.which("pdftoppm"),
        "NumPy and pint for that Python": find_uno_python("import uno, numpy, pint"),
    }
    return [part for part, place in found.items() if place is None]


def provide_office() -> str:
    """Install what is missing where that is possible; return "" or a sentence that says what to type."""
    if not missing_parts():
        return ""
    if os.geteuid() == 0 and shutil.which("apt-get"):
        _install()
    missing = missing_parts()
    if not missing:
        return ""
    return (
        f"These tests need {' and '.join(missing)}. Type: "
        f"sudo {' '.join(APT_UPDATE)} && sudo {' '.join(APT_INSTALL)} "
        "(or install LibreOffice Calc, its Python bridge and poppler's pdftoppm in your system's own way)."
    )


def require_office() -> None:
    """Make sure that LibreOffice is there, or fail the test with the command to type. Never skips."""
    sentence = provide_office()
    if sentence:
        pytest.fail(sentence, pytrace=False)


def _install() -> None:
    # Two test processes may come here at once: the second waits, and then finds everything there.
    with (Path(tempfile.gettempdir()) / "stripcheck-apt.lock").open("w") as lock:
        fcntl.flock(lock, fcntl.LOCK_EX)
        if missing_parts():
            for command in (APT_UPDATE, APT_INSTALL):
                subprocess.run(
                    command,
                    env={**os.environ, "DEBIAN_FRONTEND": "noninteractive"},
                    stdin=subprocess.DEVNULL,
                    stdout=sys.stderr,
                )


def _run_quietly(command: list[str]) -> int:
    return subprocess.run(command, env=_clean_environment(), capture_output=True).returncode


def _clean_environment() -> dict[str, str]:
    """Return the environment without what would lead LibreOffice's Python to another Python's modules."""
    strange = {"PYTHONHOME", "PYTHONPATH", "VIRTUAL_ENV"}
    kept = {name: value for name, value in os.environ.items() if name not in strange}
    return {**kept, "LC_ALL": "C.UTF-8"}  # point decimals, whatever the user's own settings


class Office:
    """One running LibreOffice. Use it as a context manager: it ends, with all it started, at the end.

    ``extensions`` is a folder with unpacked extensions, one folder for each, which it loads as if they came with it.
    """

    def __init__(self, extensions: Path | None = None) -> None:
        soffice, python = find_soffice(), find_uno_python()
        if soffice is None or python is None:
            raise OfficeError(provide_office() or "LibreOffice is not installed")
        self._folder = Path(tempfile.mkdtemp(prefix="stripcheck-office-"))
        settings = self._folder / "profile" / "user" / "registrymodifications.xcu"
        settings.parent.mkdir(parents=True)
        settings.write_text(PROFILE_SETTINGS, encoding="utf-8")
        self._log = (self._folder / "log.txt").open("wb")
        self._worker = subprocess.Popen(
            [str(python), str(WORKER), str(soffice), str(self._folder / "profile"), *map(str, filter(None, [extensions]))],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=self._log,
            env=_clean_environment(),
            start_new_session=True,  # a group of its own, so that it can be ended as a whole
        )
        try:
            self._read_answer()
        except BaseException:
            self.close()
            raise

    def __enter__(self) -> Office:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def open(self, path: Path | str) -> Book:
        """Open a spreadsheet file. Cached values are shown as they stand until `Book.recalculate`."""
        return Book(self, self.ask("open", path=str(Path(path).resolve())))

    def wizard(self, prefix: str) -> dict[str, dict[str, Any]]:
        """What the function wizard shows of each function whose name starts with `prefix`.

        Each has a `description`, and `arguments`: rows of name, help, and whether it may be left out.
        """
        return self.ask("wizard", prefix=prefix)

    def close(self) -> None:
        """End LibreOffice and everything it started. Closing twice is harmless."""
        if self._worker.stdin and not self._worker.stdin.closed:
            with contextlib.suppress(BrokenPipeError):
                self._worker.stdin.close()
            try:
                self._worker.wait(30)
            except subprocess.TimeoutExpired:
                self._kill()
            if self._worker.stdout:
                self._worker.stdout.close()
            self._log.close()
            shutil.rmtree(self._folder, ignore_errors=True)

    def ask(self, do: str, **question: object) -> Any:
        """Put one question to the worker and return its answer.

        Raises OfficeError with the worker's sentence, or when it has died or does not answer in time.
        """
        if self._worker.stdin is None or self._worker.stdin.closed:
            raise OfficeError("this LibreOffice has been closed")
        line = json.dumps({"do": do, **question}) + "\n"
        with contextlib.suppress(BrokenPipeError):  # a dead worker is told from its missing answer
            self._worker.stdin.write(line.encode())
            self._worker.stdin.flush()
        return self._read_answer()

    def _read_answer(self) -> Any:
        assert self._worker.stdout is not None
        watchdog = threading.Timer(ANSWER_SECONDS, self._kill)
        watchdog.start()
        try:
            line = self._worker.stdout.readline()
        finally:
            watchdog.cancel()
        if not line:
            log = (self._folder / "log.txt").read_text(errors="replace")[-2000:]
            raise OfficeError(f"LibreOffice died, or gave no answer within {ANSWER_SECONDS:.0f} s. {log}")
        answer = json.loads(line)
        if "error" in answer:
            raise OfficeError(answer["error"])
        return answer["ok"]

    def _kill(self) -> None:
        if self._worker.poll() is None:  # only then is the group's number certainly still ours
            os.killpg(self._worker.pid, signal.SIGKILL)
            self._worker.wait()


class Book:
    """One open spreadsheet file."""

    def __init__(self, office: Office, number: int) -> None:
        self._office = office
        self._number = number

    def __enter__(self) -> Book:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def sheets(self) -> list[str]:
        """Return the names of the sheets, in order."""
        return self._ask("sheets")

    def recalculate(self) -> None:
        """Calculate every formula afresh, whatever value the file carried."""
        self._ask("recalculate")

    def values(self, sheet: str, area: str) -> list[list[Value]]:
        """Return the rows of an area such as "A1:C20".

        A number is a float (and so are TRUE 1.0 and FALSE 0.0), text is str (a formula's "" too), a blank
        cell is None, an error is "#ERR:" and LibreOffice's code: 502 bad argument, 503 not a number,
        508 brackets, 519 no value, 524 no reference, 525 no such name, 532 division by zero, 32767 not
        available. Of very many errors only the first 500 get their code, the others "?": to ask is slow.
        """
        return self._ask("values", sheet=sheet, area=area)

    def value(self, sheet: str, cell: str) -> Value:
        """Return the value of one cell, as `values` does."""
        return self.values(sheet, cell)[0][0]

    def set(self, sheet: str, cells: Mapping[str, Value]) -> None:
        """Type numbers and texts into cells, `{"B3": 12.5, "B4": "text"}`; None clears a cell.

        Text stays text, even when it looks like a number or a formula. What depends on the cells follows.
        """
        self._ask("set", sheet=sheet, cells=dict(cells))

    def insert_rows(self, sheet: str, before: int, count: int = 1) -> None:
        """Insert blank rows before a row, as a user does; a protected sheet that does not allow it is left as it is."""
        self._ask("insert", sheet=sheet, what="Rows", before=before, count=count)

    def insert_columns(self, sheet: str, before: int, count: int = 1) -> None:
        """Insert blank columns before a column (1 is A), as `insert_rows` does."""
        self._ask("insert", sheet=sheet, what="Columns", before=before, count=count)

    def delete_rows(self, sheet: str, first: int, count: int = 1) -> None:
        """Delete rows, as a user does."""
        self._ask("remove", sheet=sheet, what="Rows", first=first, count=count)

    def sort(self, sheet: str, area: str, column: int, ascending: bool = True) -> None:
        """Sort the rows of an area such as "A8:AZ20" by one of its columns (1 is its first)."""
        self._ask("sort", sheet=sheet, area=area, column=column, ascending=ascending)

    def save_as(self, path: Path | str) -> None:
        """Write the book as .xlsx or .ods, as the ending of the name says."""
        if Path(path).suffix not in (".xlsx", ".ods"):
            raise OfficeError(f"{path}: the file name must end in .xlsx or .ods")
        self._ask("export", path=str(Path(path).resolve()))

    def pdf(self, path: Path | str) -> None:
        """Print every sheet to a .pdf file."""
        if Path(path).suffix != ".pdf":
            raise OfficeError(f"{path}: the file name must end in .pdf")
        self._ask("export", path=str(Path(path).resolve()))

    def close(self) -> None:
        """Close the book without saving it."""
        self._ask("close")

    def _ask(self, do: str, **question: object) -> Any:
        return self._office.ask(do, book=self._number, **question)


def render(path: Path | str, folder: Path | str, dpi: int = 80, office: Office | None = None) -> list[Path]:
    """Draw every printed page of a spreadsheet file as a PNG in `folder`, and return the pictures in order.

    Without an `office` one is started for the purpose.
    """
    if office is None:
        with Office() as office:
            return render(path, folder, dpi, office)
    Path(folder).mkdir(parents=True, exist_ok=True)
    with tempfile.TemporaryDirectory() as scratch:
        printed = Path(scratch) / "printed.pdf"
        with office.open(path) as book:
            book.pdf(printed)
        subprocess.run(
            ["pdftoppm", "-png", "-r", str(dpi), str(printed), str(Path(scratch) / "page")], check=True
        )
        return [
            Path(shutil.move(page, Path(folder) / f"{Path(path).stem}-{number}.png"))
            for number, page in enumerate(sorted(Path(scratch).glob("page-*.png")), 1)
        ]


if __name__ == "__main__":
    sys.exit(provide_office() or 0)
