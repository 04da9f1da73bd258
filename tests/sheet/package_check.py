"""Is an .xlsx package sound? For use by any test that has written one.

The rules are those of the Open Packaging Conventions, ECMA-376 part 2 (from memory): every part is
well-formed XML and has a content type, every relationship has a target, every name is there once. The project
adds its own: nothing outside the file is linked, and no formula shows an error.
"""

from __future__ import annotations

import posixpath
import zipfile
from collections import Counter
from pathlib import Path
from urllib.parse import unquote
from xml.etree import ElementTree

TYPES = "[Content_Types].xml"
_R_ID = "{http://schemas.openxmlformats.org/officeDocument/2006/relationships}id"
_ERRORS = ("#NULL!", "#DIV/0!", "#VALUE!", "#REF!", "#NAME?", "#NUM!", "#N/A", "#SPILL!", "#CALC!")


def package_faults(path: Path) -> list[str]:
    """What is wrong with the package, one sentence each; an empty list when it is sound."""
    with zipfile.ZipFile(path) as package:
        broken = package.testzip()
        if broken:
            return [f"{broken}: damaged in the zip"]
        faults = [f"{name}: twice in the zip" for name, n in Counter(package.namelist()).items() if n > 1]
        roots = {}
        for name in package.namelist():
            if name.endswith((".xml", ".rels", ".vml")):
                try:
                    roots[name], found = _read(package, name)
                    faults += found
                except ElementTree.ParseError as error:
                    faults.append(f"{name}: not well-formed XML ({error})")
        names = set(package.namelist())
    faults += _content_type_faults(roots, names)
    for name, root in roots.items():
        if name.endswith(".rels"):
            faults += _relationship_faults(name, root, names)
        else:
            faults += _reference_faults(name, root, roots)
    return faults


def _read(package: zipfile.ZipFile, name: str) -> tuple[ElementTree.Element, list[str]]:
    """The root of a part without the rows of a sheet, which may be many, and the faults of its formulas."""
    faults: list[str] = []
    root: ElementTree.Element | None = None
    with package.open(name) as file:
        for event, element in ElementTree.iterparse(file, events=("start", "end")):
            root = element if root is None else root
            if event == "end" and name.startswith("xl/worksheets/") and _local(element) == "c":
                faults += _cell_faults(name, element)
            if event == "end" and _local(element) == "row":
                element.clear()
    assert root is not None  # iterparse raises ParseError for a part without an element
    return root, faults


def _cell_faults(name: str, cell: ElementTree.Element) -> list[str]:
    parts = {_local(child): child.text or "" for child in cell}
    if "f" in parts and (cell.get("t") == "e" or parts.get("v", "").startswith(_ERRORS)):
        return [f"{name}: formula cell {cell.get('r')} shows {parts.get('v')}"]
    return []


def _content_type_faults(roots: dict[str, ElementTree.Element], names: set[str]) -> list[str]:
    if TYPES not in roots:
        return [f"{TYPES}: missing"]
    extensions = {el.get("Extension", "").lower() for el in roots[TYPES] if _local(el) == "Default"}
    overrides = [el.get("PartName", "").lstrip("/") for el in roots[TYPES] if _local(el) == "Override"]
    typed = set(overrides)
    faults = [
        f"{name}: no content type"
        for name in sorted(names - {TYPES})
        if name not in typed and name.rpartition(".")[2].lower() not in extensions
    ]
    return faults + [f"{name}: has a content type but is missing" for name in sorted(typed - names)]


def _relationship_faults(name: str, root: ElementTree.Element, names: set[str]) -> list[str]:
    folder = posixpath.dirname(posixpath.dirname(name))
    faults = [f"{name}: Id {i} twice" for i, n in Counter(el.get("Id") for el in root).items() if n > 1]
    for relationship in root:
        target = unquote(relationship.get("Target", ""))
        if relationship.get("TargetMode") == "External" or "/externalLink" in relationship.get("Type", ""):
            faults.append(f"{name}: external link to {target}")
        elif posixpath.normpath(posixpath.join("/" + folder, target)).lstrip("/") not in names:
            faults.append(f"{name}: target {target} is missing")
    return faults


def _reference_faults(
    name: str, root: ElementTree.Element, roots: dict[str, ElementTree.Element]
) -> list[str]:
    """A part names its relationships by r:id; each must be in its .rels part."""
    used = {element.get(_R_ID) for element in root.iter()} - {None}
    folder, file = posixpath.split(name)
    relationships = roots.get(posixpath.join(folder, "_rels", file + ".rels"))
    known = set() if relationships is None else {element.get("Id") for element in relationships}
    return [f"{name}: relationship {i} is not defined" for i in sorted(map(str, used - known))]


def _local(element: ElementTree.Element) -> str:
    return element.tag.rsplit("}", 1)[-1]
