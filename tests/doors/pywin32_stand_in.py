"""A stand-in for pywin32 and Excel, so that xlwings' own code for Windows runs anywhere.

``windows_xlwings()`` imports xlwings as on Windows, beside the Excel door. All that registers functions, writes VBA and
converts arguments and results is xlwings' own then; only what Excel and COM would be is played here. What this can't show:
that VBA compiles, that COM starts Python, and how Excel shows a result.

``python -m tests.doors.pywin32_stand_in stripcheck/doors/excel.bas`` writes the VBA text that is kept in the project.
"""

from __future__ import annotations

import asyncio  # noqa: F401  # before this says that it is Windows, so that it gets its own parts for this system
import atexit
import contextlib
import ctypes
import datetime as dt
import importlib
import subprocess  # noqa: F401
import sys
from collections.abc import Iterator
from pathlib import Path
from types import ModuleType, SimpleNamespace
from typing import Any
from unittest import mock

DOOR = "stripcheck.doors.excel"
MISSING = -2147352572  # what COM hands over for an argument that is left out
RANGE_ID = "{00020846-0000-0000-C000-000000000046}"
PLAYED = ("pythoncom", "pywintypes", "win32api", "win32com", "win32com.client", "win32com.server", "win32com.server.dispatcher",
          "win32com.server.policy", "win32com.server.util", "win32con", "win32event", "win32gui", "win32process",
          "win32timezone")  # fmt: skip


class ComError(Exception):
    """pywintypes.com_error."""


class Cells:
    """A range of Excel's: rows of values."""

    def __init__(self, *rows: tuple[Any, ...]) -> None:
        kind = SimpleNamespace(iid=RANGE_ID)
        self._oleobj_ = SimpleNamespace(GetTypeInfo=lambda: SimpleNamespace(GetTypeAttr=lambda: kind))
        self.Value = rows if len(rows) > 1 or len(rows[0]) > 1 else rows[0][0]
        self.Worksheet = SimpleNamespace(Parent=SimpleNamespace(Application=SimpleNamespace(Hwnd=1)))
        self.Row = self.Column = 1
        self.Rows, self.Columns = SimpleNamespace(Count=len(rows)), SimpleNamespace(Count=len(rows[0]))


class Workbook:
    """A workbook of Excel's: keeps the VBA text that is imported, and the function options."""

    def __init__(self, name: str = "book.xlsm") -> None:
        self.Name, self.vba, self.options, self.saved = name, "", {}, []
        self.Application = SimpleNamespace(Version="16.0", MacroOptions=self._take_options)
        self.VBProject = SimpleNamespace(VBComponents=_Components(self), References=_References())
        self.Worksheets: list[Any] = []

    def _take_options(self, macro: str, **options: Any) -> None:
        self.options[macro.rpartition("!")[2]] = options

    def SaveAs(self, path: str, FileFormat: int) -> None:
        self.saved.append((path, FileFormat))


class _Components:
    def __init__(self, book: Workbook) -> None:
        self.book = book

    def __call__(self, name: str) -> Any:
        raise ComError(name)

    def Remove(self, module: Any) -> None:
        raise AssertionError("there is no module yet")

    def Import(self, path: str) -> None:
        self.book.vba = Path(path).read_text(encoding="utf-8")


class _References(list[Any]):
    def AddFromFile(self, path: str) -> None:
        self.append(SimpleNamespace(Name=Path(path).stem))


@contextlib.contextmanager
def windows_xlwings() -> Iterator[SimpleNamespace]:
    """xlwings as on Windows, and the Excel door registered with it: ``xlwings``, ``door``, ``udfs``, ``server``."""
    before = {name: sys.modules.pop(name) for name in list(sys.modules) if name in PLAYED or _is_replaced(name)}
    sys.modules.update(_played())
    try:
        with contextlib.ExitStack() as windows:
            windows.enter_context(mock.patch.object(sys, "platform", "win32"))
            for name in ("PyDLL", "oledll", "windll"):
                windows.enter_context(mock.patch.object(ctypes, name, mock.MagicMock(), create=True))
            xlwings, udfs, server, excel, door = (
                importlib.import_module(name)
                for name in ("xlwings", "xlwings.udfs", "xlwings.com_server", "xlwings._xlwindows", DOOR)
            )
        atexit.unregister(excel.cleanup)  # which would ask Windows for its processes
        yield SimpleNamespace(xlwings=xlwings, udfs=udfs, server=server, door=door)
    finally:
        for name in [name for name in sys.modules if name in PLAYED or _is_replaced(name)]:
            del sys.modules[name]
        sys.modules.update(before)


def _is_replaced(name: str) -> bool:
    return name == DOOR or name.split(".")[0] == "xlwings"


def _played() -> dict[str, ModuleType]:
    modules = {name: ModuleType(name) for name in PLAYED}
    for name, module in modules.items():
        parent, _, child = name.rpartition(".")
        if parent:
            setattr(modules[parent], child, module)

    def unwrap(_: Any) -> Any:
        raise ComError("not one of ours")

    def add(name: str, **parts: Any) -> None:
        vars(modules[name]).update(parts)

    add("pywintypes", TimeType=type("Time", (dt.datetime,), {}), IID=lambda text: text, com_error=ComError)
    add("pythoncom", __file__="", TypeIIDs={0: type("PyIDispatch", (), {})}, IID_IDispatch=0, CoInitialize=lambda: None)
    add("win32com.server.util", unwrap=unwrap, wrap=lambda item, **_: item)
    add("win32process", GetWindowThreadProcessId=lambda _: (1, 1))
    bases = {name: type(name, (), {}) for name in ("CDispatch", "CoClassBaseClass", "DispatchBaseClass")}
    add("win32com.client", Dispatch=lambda item, **_: item, DispatchEx=None, **bases)
    return modules


def vba_text() -> str:
    """The VBA functions of the Excel door, as xlwings writes them."""
    book = Workbook()
    with windows_xlwings() as windows, contextlib.redirect_stdout(None):
        windows.xlwings.import_udfs(DOOR, book)
    return book.vba


if __name__ == "__main__":
    Path(sys.argv[1]).write_text(vba_text(), encoding="ascii")
