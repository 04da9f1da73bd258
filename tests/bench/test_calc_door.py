"""What a function costs in a cell of a real Calc, against an empty add-in function of the same signature in the same run.

Calc reaches Python through its own bridge, which costs the same whatever the function does. The equation's own time is
what a second function of that signature takes longer, which works out the same equation from fixed numbers in SI.
"""

from __future__ import annotations

import time
from pathlib import Path
from statistics import median

import pytest

from stripcheck.doors.calc.extension import calc_name
from stripcheck.doors.call import call
from stripcheck.doors.functions import BY_NAME
from tests.calc_extension import formula, typed, unpacked, write_book
from tests.office import Book, Office, require_office

CALLS = 1_000
ROWS = 40_000
ROUNDS = 60
MOST_OVER_EMPTY = 1.5
LEAST_ROWS_A_SECOND = 100_000

# one function does nothing, the other works out the equation and nothing else
EMPTY_TYPES = """module emptytypes {
  interface XEmpty {
    sequence< sequence<any> > NOTHING([in] any A, [in] any B, [in] any C, [in] any D, [in] any E);
    sequence< sequence<any> > EQUATION([in] any A, [in] any B, [in] any C, [in] any D, [in] any E);
  };
};
"""
EMPTY_COMPONENT = """import numpy as np
import unohelper
from com.sun.star.lang import XServiceInfo
from emptytypes import XEmpty


class Component(unohelper.Base, XEmpty, XServiceInfo):
    def __init__(self, context):
        from stripcheck.doors.functions import BY_NAME
        from stripcheck.units import to_si

        self.compute = BY_NAME["DENSITY_ALT"].compute
        units = ((2400, "ft"), (1008, "hPa"), (31, "°C"), (0.0, "%"))
        self.values = [np.float64(to_si(value, unit)) for value, unit in units]

    def NOTHING(self, a, b, c, d, e):
        return ((1.0,),)

    def EQUATION(self, a, b, c, d, e):
        return ((float(self.compute(*self.values)),),)

    def getImplementationName(self):
        return "EMPTY"

    def supportsService(self, name):
        return name == "EMPTY"

    def getSupportedServiceNames(self):
        return ("EMPTY",)


g_ImplementationHelper = unohelper.ImplementationHelper()
g_ImplementationHelper.addImplementation(Component, "EMPTY", ("EMPTY",))
"""


@pytest.fixture(scope="module")
def extensions(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The extension, and beside it one whose only function does nothing."""
    folder = unpacked(tmp_path_factory.mktemp("calc"))
    empty = folder / "empty"
    (empty / "META-INF").mkdir(parents=True)
    ours = folder / "stripcheck"
    (empty / "META-INF" / "manifest.xml").write_text((ours / "META-INF" / "manifest.xml").read_text())
    (empty / "description.xml").write_text((ours / "description.xml").read_text().replace("stripcheck.calc", "empty.calc"))
    (empty / "types.idl").write_text(EMPTY_TYPES)
    (empty / "addin.py").write_text(EMPTY_COMPONENT)
    parameters = "".join(f'<node oor:name="{letter}" oor:op="replace"/>' for letter in "ABCDE")
    functions = "".join(
        f'<node oor:name="{name}" oor:op="replace"><prop oor:name="DisplayName"><value xml:lang="en">EMPTY.{name}</value>'
        f'</prop><node oor:name="Parameters">{parameters}</node></node>'
        for name in ("NOTHING", "EQUATION")
    )
    (empty / "CalcAddIns.xcu").write_text(
        '<?xml version="1.0" encoding="UTF-8"?><oor:component-data xmlns:oor="http://openoffice.org/2001/registry" '
        'oor:name="CalcAddIns" oor:package="org.openoffice.Office"><node oor:name="AddInInfo"><node oor:name="EMPTY" '
        f'oor:op="replace"><node oor:name="AddInFunctions">{functions}</node></node></node></oor:component-data>'
    )
    return folder


def seconds(book: Book) -> float:
    started = time.perf_counter()
    book.recalculate()
    return time.perf_counter() - started


def test_calls_and_rows_a_second(extensions: Path, tmp_path: Path) -> None:
    require_office()
    density = BY_NAME["DENSITY_ALT"]
    arguments = [typed(value) for value in density.example]
    names = {"one": calc_name(density), "nothing": "EMPTY.NOTHING", "equation": "EMPTY.EQUATION"}
    made = {
        key: write_book(tmp_path / f"{key}.xlsx", {f"A{row}": f"={name}({','.join(arguments)})" for row in range(1, CALLS + 1)})
        for key, name in names.items()
    }
    made["rows"] = write_book(tmp_path / "rows.xlsx", {f"A{row}": row / 10 for row in range(1, ROWS + 1)},
                              {f"B1:B{ROWS}": formula(density, f"A1:A{ROWS}", *arguments[1:])})  # fmt: skip
    with Office(extensions) as office:
        books = {key: office.open(path) for key, path in made.items()}
        rounds = [{key: seconds(books[key]) for key in names} for _ in range(ROUNDS)]
        speed = ROWS / min(seconds(books["rows"]) for _ in range(5))
        assert books["nothing"].value("S", f"A{CALLS}") == 1.0
        assert books["equation"].value("S", f"A{CALLS}") == pytest.approx(call(density, *density.example, None, "m"), rel=1e-9)
        assert books["one"].value("S", f"A{CALLS}") == pytest.approx(call(density, *density.example), rel=1e-9)
        assert books["rows"].value("S", f"B{ROWS}") == pytest.approx(call(density, ROWS / 10, *density.example[1:]), rel=1e-9)
    one, nothing, equation = ([taken[key] / CALLS for taken in rounds] for key in names)
    own = [both - bare for both, bare in zip(equation, nothing, strict=True)]
    # of each round by itself, whatever else the machine did meanwhile
    share = median(whole / (MOST_OVER_EMPTY * bare + work) for whole, bare, work in zip(one, nothing, own, strict=True))
    print(f"\na call in Calc {min(one) * 1e6:.1f} us, one that does nothing {min(nothing) * 1e6:.1f} us, the equation "
          f"{median(own) * 1e6:.1f} us: {share:.2f} of what is allowed; a range call {speed:,.0f} rows/s")  # fmt: skip
    assert share <= 1.0
    assert speed >= LEAST_ROWS_A_SECOND
