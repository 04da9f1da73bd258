"""Whether a file is what its name says, and small enough: asked before any reader of texts or workbooks sees it.

A list may come from anywhere. A reader that trusts a file can be made to use up all memory by a few bytes: a cell far off,
a value repeated two thousand million times, a part that unpacks to a thousand times its size. So a workbook is gone through
once, piece by piece, and its cells are counted; what passes is bounded in memory and time, and what does not is refused
with one sentence. Nothing is executed, resolved or fetched: macros, links to other files and addresses are never followed.
"""

from __future__ import annotations

import re
from pathlib import Path

from stripcheck.errors import InputError
from stripcheck.register.safe_limits import MAX_TEXT_FILE, SAVE_AS, check_size

_OLE, _ZIP = bytes.fromhex("D0CF11E0A1B11AE1"), b"PK\x03\x04"
_OTHERS = (
    (b"%PDF", "a PDF document"), (b"\x89PNG", "a picture"), (b"\xff\xd8\xff", "a picture"), (b"GIF8", "a picture"),
    (b"{\\rtf", "a text document"), (b"Rar!", "an archive"), (b"7z\xbc\xaf", "an archive"), (b"\x1f\x8b", "an archive"),
)  # fmt: skip
_WEB_PAGE = re.compile(rb"\s*<(?:!doctype\s+html|html|head|body|table|meta)\b", re.IGNORECASE)


def check_text(path: Path) -> None:
    """Raise InputError where a text file, such as a .csv, is too large or is something else by its content."""
    check_size(path.name, path.stat().st_size, MAX_TEXT_FILE)
    start = _start(path)
    if start.startswith((_ZIP, _OLE)):
        raise InputError(f"{path.name}: this is a workbook and no text file; give it its own ending, such as .xlsx")
    _refuse_others(path, start)


def check_workbook(path: Path) -> bytes | None:
    """Raise InputError unless a workbook is of the kind that its name says, whole, and within ``safe_limits``.

    ``path``: a file that is there, .xlsx, .xlsm, .ods or .xls. The result is None where a reader may be given the file
    itself; of an .xls it is a file with nothing but the cells, which is to be read instead. A workbook of this program for
    44,000 runways takes half a minute, one for 1,000 less than a second.
    """
    start = _start(path)
    if start.startswith(_OLE):
        from stripcheck.register.safe_xls import clean_workbook

        return clean_workbook(path)
    if start.startswith(b"PK"):
        from stripcheck.register.safe_package import check_package

        check_package(path)
        return None
    _refuse_others(path, start)
    if b"\0" in start:
        raise InputError(f"{path.name}: this is no workbook, or a damaged one; {SAVE_AS}")
    raise InputError(f"{path.name}: this is a text and no workbook; name it .csv if it is a list")


def _start(path: Path) -> bytes:
    with path.open("rb") as file:
        return file.read(4096)


def _refuse_others(path: Path, start: bytes) -> None:
    for mark, what in _OTHERS:
        if start.startswith(mark):
            raise InputError(f"{path.name}: this is {what} and holds no list that can be read; {SAVE_AS}")
    plain = start.removeprefix(b"\xef\xbb\xbf").lstrip()
    if _WEB_PAGE.match(plain):
        raise InputError(f"{path.name}: this is a web page with another ending; {SAVE_AS}")
    if plain.startswith(b"<?xml"):
        raise InputError(f"{path.name}: this is an XML file and no list or workbook that can be read; {SAVE_AS}")
