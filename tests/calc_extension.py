"""The extension for Calc, unpacked as LibreOffice takes it when it comes with the program, and books that use it."""

from __future__ import annotations

import zipfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import openpyxl
from openpyxl.worksheet.formula import ArrayFormula

from stripcheck.doors.calc.extension import build, calc_name
from stripcheck.doors.functions import Function


def unpacked(folder: Path, first_lines: str = "") -> Path:
    """A folder to start an Office with; ``first_lines`` of Python run before the component's own."""
    place = folder / "extensions" / "stripcheck"
    place.mkdir(parents=True)
    with zipfile.ZipFile(build(folder / "stripcheck.oxt")) as archive:
        archive.extractall(place)
    component = place / "addin.py"
    component.write_text(first_lines + component.read_text(encoding="utf-8"), encoding="utf-8")
    return place.parent


def formula(function: Function, *arguments: str) -> str:
    """A formula as a file holds it."""
    return f"={calc_name(function)}({','.join(arguments)})"


def typed(value: Any) -> str:
    """A value as it is typed into a formula; None leaves the argument out."""
    if value is None:
        return ""
    return '"' + value.replace('"', '""') + '"' if isinstance(value, str) else repr(value)


def write_book(path: Path, cells: Mapping[str, Any], matrices: Mapping[str, str] | None = None) -> Path:
    """A book with one sheet "S"; ``matrices`` are formulas by the area that they fill. openpyxl writes no cached values."""
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = "S"
    for cell, value in cells.items():
        sheet[cell] = value
    for area, text in (matrices or {}).items():
        sheet[area.split(":")[0]] = ArrayFormula(area, text)
    book.save(path)
    return path
