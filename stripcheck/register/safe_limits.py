"""How large a list may be, and what is said of a file that can't be read: shared by all that looks at files from anywhere.

The largest workbook that this program writes is the measure: 44,000 runways in full detail make 370 MB, which are 3,000 MB
unpacked, and 4,700,000 cells. Lists of 50,000 rows and 30 columns are far below all of these.
"""

from __future__ import annotations

from stripcheck.errors import InputError

MAX_TEXT_FILE = 200_000_000  # [bytes] of a .csv: twenty times the airports file of the open data
MAX_CELL_TEXT = 131_072  # [characters] of one cell of a list: a sheet's cell holds 32,767, to which the workbook cuts it
MAX_LINE = 1_000_000  # [characters] of a row of a .csv: a sheet with texts in all its 16,384 columns
MAX_BOOK_FILE = 1_000_000_000  # [bytes]
MAX_XLS_FILE = 100_000_000  # [bytes]: such a sheet has 65,536 rows at most
MAX_INFLATED = 4_000_000_000  # [bytes] of all parts of a package together
MAX_PART = 256_000_000  # [bytes] of a part that is no sheet: styles, shared texts, a picture
MAX_RATIO, RATIO_FROM = 300, 50_000_000  # inflated by packed, for parts from that many bytes on: sheets are mostly below
# 50, and a bomb is near 1,000
MAX_PARTS = 5_000  # files in a package: a workbook of 1,000 sheets with comments has fewer
MAX_PART_NAME = 255  # [characters]: no file system takes more
MAX_CELLS = 10_000_000  # of the areas that the cells of all sheets reach over: about 700 MB while it is read
MAX_SHARED_TEXT = 500_000_000  # [bytes] of texts that several cells show and a file keeps once
MAX_TAGS = 150_000_000  # in all parts of a package: two minutes
MAX_DEPTH = 256  # of elements within elements: workbooks have some twenty
MAX_PIECE = 16_000_000  # [bytes] of one text or tag: a cell holds 32,767 characters, a query in a workbook some megabytes
MAX_ROWS, MAX_COLUMNS = 1_048_576, 16_384  # of a sheet
MAX_LIST_COLUMNS = 1_000  # of a list, with something in them: each is carried into the workbook

SAVE_AS = "open it in a spreadsheet program and save it as .xlsx"
SAVE_AGAIN = "open it in a spreadsheet program and save it again"


def damaged(name: str, why: str) -> InputError:
    """What is said of a workbook, ``name``, that is not as such a file must be."""
    return InputError(f"{name}: the workbook is damaged ({why}); {SAVE_AGAIN}")


def protected(name: str) -> InputError:
    """What is said of a workbook that is encrypted."""
    return InputError(f"{name}: the workbook is protected by a password; save a copy without it")


def check_size(name: str, size: int, most: int) -> None:
    """Raise InputError where a file has more bytes than are read."""
    if size > most:
        raise InputError(
            f"{name}: the file has {size / 1e6:,.0f} MB, and at most {most / 1e6:,.0f} MB are read; is it the right file?"
        )


def check_area(where: str, rows: int, columns: int) -> None:
    """Raise InputError where cells reach over more rows and columns, from A1 on, than are read."""
    if rows * columns > MAX_CELLS:
        raise InputError(
            f"{where}: the cells reach to column {column_letters(columns)} and row {rows:,}, over more than {MAX_CELLS:,} "
            "cells; delete what stands far off the list"
        )


def column_letters(column: int) -> str:
    """Name of a column [1 = first].

    >>> column_letters(16_384)
    'XFD'
    """
    letters = ""
    while column > 0:
        column, letter = divmod(column - 1, 26)
        letters = chr(ord("A") + letter) + letters
    return letters


def whole_number(text: str, most: int) -> int:
    """A whole number as files write it, or -1 for what is none and for one beyond ``most``.

    >>> whole_number("0042", 100), whole_number("101", 100), whole_number("1e1", 100)
    (42, -1, -1)
    """
    if not (0 < len(text) < 20 and text.isascii() and text.isdigit()):
        return -1
    number = int(text)
    return number if number <= most else -1
