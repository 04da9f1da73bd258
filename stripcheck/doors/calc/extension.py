"""The extension for Calc (.oxt), made from the registry: types, wizard texts, component, and the package behind them.

Calc reads the types as source (``types.idl``), so that nothing has to be compiled. Method and service are named so that
the name in the file and the name on the screen are one: STRIP.DENSITY_ALT, in .ods and in .xlsx alike. Every argument is of
type ``any``, which takes a cell as well as a range, and may be left out. Names in the types are in capitals: there an
underscore is allowed in no other name, and none is a keyword. The result is always rows of cells, which
Calc takes for a single cell as well.
"""

from __future__ import annotations

import ast
import zipfile
from collections.abc import Iterable
from functools import cache
from pathlib import Path
from xml.sax.saxutils import quoteattr

from stripcheck import __version__
from stripcheck.caution import CAUTION
from stripcheck.doors.functions import FUNCTIONS, LIMITS, PREFIX, VERDICTS, Function
from stripcheck.errors import InputError
from stripcheck.safe_file import whole_or_not_at_all

IDENTIFIER = "stripcheck.calc"
PACKAGE = Path(__file__).parents[2]
ROOTS = ("stripcheck.doors.call", "stripcheck.doors.functions")
DATA = ("cards/*.toml", "cards/*.csv", "rules/*.toml")
DAY_ONE = (1980, 1, 1, 0, 0, 0)  # a date for every part, so that the same package makes the same file
MEDIA = "application/vnd.sun.star."


def build(path: Path | str, force: bool = False) -> Path:
    """Write the extension, whole or not at all, and return its path.

    Raises InputError where the name doesn't end in .oxt, or the file exists and ``force`` is not given.
    """
    path = Path(path)
    if path.suffix != ".oxt":
        raise InputError(f"{path}: the name of an extension must end in .oxt")
    if path.exists() and not force:
        raise InputError(f"{path}: this file exists; choose another name, or add --force to replace it")
    if not path.resolve().parent.is_dir():
        raise InputError(f"{path}: the folder does not exist")
    with whole_or_not_at_all(path) as file, zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED, compresslevel=9) as archive:
        for name, content in sorted(parts().items()):
            entry = zipfile.ZipInfo(name, DAY_ONE)
            entry.create_system = 3  # Unix, wherever it was made
            entry.external_attr = 0o100644 << 16
            entry.compress_type = zipfile.ZIP_DEFLATED
            archive.writestr(entry, content)
    return path


def parts() -> dict[str, bytes]:
    """Every file of the extension by its name in it."""
    texts = {
        "META-INF/manifest.xml": _manifest(),
        "description.xml": _description(),
        "description/en.txt": f"Take-off and landing checks for short, sloping, unpaved strips, in formulas. {CAUTION}\n",
        "types.idl": types_idl(),
        "CalcAddIns.xcu": wizard_texts(),
    }
    found = {name: text.encode() for name, text in texts.items()}
    found["addin.py"] = _read(Path(__file__).with_name("addin.py"))
    for file in package_files():
        found[f"pythonpath/stripcheck/{file.relative_to(PACKAGE).as_posix()}"] = _read(file)
    return found


def _read(path: Path) -> bytes:
    return path.read_bytes().replace(b"\r\n", b"\n")


def types_idl(functions: Iterable[Function] = FUNCTIONS) -> str:
    """The interface with one method for each function, as source that Calc reads as it is.

    >>> print(types_idl(FUNCTIONS[:1]), end="")
    module striptypes {
      interface XFunctions {
        sequence< sequence<any> > PRESSURE_ALT([in] any ELEVATION, [in] any QNH, [in] any UNIT);
      };
    };
    """
    methods = []
    for function in functions:
        arguments = ", ".join(f"[in] any {argument.key.upper()}" for argument in function.all_arguments)
        methods.append(f"    {_rows(function)} {function.name}({arguments});")
    return "\n".join(["module striptypes {", "  interface XFunctions {", *methods, "  };", "};", ""])


def _rows(function: Function) -> str:
    """Type of a result. Texts must be typed as such: Calc takes any two texts in rows of ``any`` for equal."""
    return "sequence< sequence<string> >" if function.unit is None else "sequence< sequence<any> >"


def wizard_texts(functions: Iterable[Function] = FUNCTIONS) -> str:
    """What Calc's function wizard shows: each function's name and help, each argument's name and help."""
    lines = [
        '<?xml version="1.0" encoding="UTF-8"?>',
        '<oor:component-data xmlns:oor="http://openoffice.org/2001/registry" xmlns:xs="http://www.w3.org/2001/XMLSchema"'
        ' oor:name="CalcAddIns" oor:package="org.openoffice.Office">',
        f'<node oor:name="AddInInfo"><node oor:name="{PREFIX}" oor:op="replace"><node oor:name="AddInFunctions">',
    ]
    for function in functions:
        lines += [
            f'<node oor:name="{function.name}" oor:op="replace">',
            _text("DisplayName", calc_name(function)),
            _text("Description", description(function)),
            '<prop oor:name="Category"><value>Add-In</value></prop>',
            _text("CompatibilityName", calc_name(function)),
            '<node oor:name="Parameters">',
        ]
        for argument in function.all_arguments:
            lines += [
                f'<node oor:name="{argument.key.upper()}" oor:op="replace">',
                _text("DisplayName", argument.name),
                _text("Description", argument.help),
                "</node>",
            ]
        lines.append("</node></node>")
    return "\n".join([*lines, "</node></node></node>", "</oor:component-data>", ""])


def calc_name(function: Function) -> str:
    """Name of a function in Calc.

    >>> calc_name(FUNCTIONS[0])
    'STRIP.PRESSURE_ALT'
    """
    return f"{PREFIX}.{function.name}"


def description(function: Function) -> str:
    """Help of a function, with the caution where it tells whether a strip will do."""
    return function.described + (f" {CAUTION}" if function.category in (VERDICTS, LIMITS) else "")


def _text(name: str, text: str) -> str:
    return f'<prop oor:name="{name}"><value xml:lang="en">{_plain(text)}</value></prop>'


def _plain(text: str) -> str:
    return text.replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;")


def _manifest() -> str:
    kinds = {
        "types.idl": MEDIA + "uno-typelibrary;type=RDB",
        "addin.py": MEDIA + "uno-component;type=Python",
        "CalcAddIns.xcu": MEDIA + "configuration-data",
    }
    entries = [
        f"<manifest:file-entry manifest:full-path={quoteattr(name)} manifest:media-type={quoteattr(kind)}/>"
        for name, kind in kinds.items()
    ]
    head = '<?xml version="1.0" encoding="UTF-8"?>\n<manifest:manifest xmlns:manifest="http://openoffice.org/2001/manifest">'
    return "\n".join([head, *entries, "</manifest:manifest>", ""])


def _description() -> str:
    return f"""<?xml version="1.0" encoding="UTF-8"?>
<description xmlns="http://openoffice.org/extensions/description/2006" xmlns:xlink="http://www.w3.org/1999/xlink">
<identifier value="{IDENTIFIER}"/>
<version value="{__version__}"/>
<display-name><name lang="en">stripcheck</name></display-name>
<extension-description><src xlink:href="description/en.txt" lang="en"/></extension-description>
</description>
"""


@cache
def package_files() -> tuple[Path, ...]:
    """The files of the package that the functions need: the modules that they import, shipped cards and rule sets."""
    waiting, modules = list(ROOTS), set[Path]()
    while waiting:
        path = _module_file(waiting.pop())
        if path is not None and path not in modules:
            modules.add(path)
            waiting += _imported(path)
    data = {file for pattern in DATA for file in PACKAGE.glob(pattern)}
    return tuple(sorted(modules | data))


def _module_file(name: str) -> Path | None:
    """File of a module of this package, or None for any other name."""
    top, *rest = name.split(".")
    place = PACKAGE.joinpath(*rest)
    files = (place.with_suffix(".py"), place / "__init__.py")
    return next((file for file in files if file.is_file()), None) if top == PACKAGE.name else None


def _imported(path: Path) -> list[str]:
    """Names that a module imports, wherever in it, with the packages that they lie in."""
    names: list[str] = []
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.ImportFrom) and node.module:
            names += [node.module, *(f"{node.module}.{alias.name}" for alias in node.names)]
        elif isinstance(node, ast.Import):
            names += [alias.name for alias in node.names]
    inside = list(path.relative_to(PACKAGE.parent).parent.parts)
    return names + [".".join(inside[:depth]) for depth in range(1, len(inside) + 1)]
