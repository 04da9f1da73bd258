"""Installing the extension for the user with LibreOffice's own tool, and what the command says about it."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from collections.abc import Mapping
from pathlib import Path

from stripcheck.doors.calc.extension import build, calc_name
from stripcheck.doors.functions import BY_NAME, FUNCTIONS
from stripcheck.errors import InputError

EXAMPLE = BY_NAME["DENSITY_ALT"]
TOOL = "unopkg"
USUAL_FOLDERS = {
    "win32": ("C:/Program Files/LibreOffice/program", "C:/Program Files (x86)/LibreOffice/program"),
    "darwin": ("/Applications/LibreOffice.app/Contents/MacOS",),
}
LINUX_FOLDERS = ("/usr/lib/libreoffice/program", "/usr/lib64/libreoffice/program", "/opt/libreoffice/program",
                 "/snap/libreoffice/current/lib/libreoffice/program")  # fmt: skip
BY_HAND = "or, in LibreOffice, choose Tools > Extension Manager > Add and pick {path}"
OR_LATER = "or leave out --install and add the file in LibreOffice by hand"
# what leads LibreOffice's Python to the modules of another one
STRANGE = {"PYTHONHOME", "PYTHONPATH", "VIRTUAL_ENV"}
INSTALL_SECONDS = 300


def calc_door(output: Path, install_it: bool, force: bool) -> list[str]:
    """Make the extension, install it where that is asked for, and return the lines that tell the user.

    Raises InputError with what to do where that can't be; where LibreOffice is not ready, before anything is written.
    """
    tool = ready() if install_it else None
    path = build(output, force)
    lines = [f"{path}: the extension for LibreOffice Calc, with {len(FUNCTIONS)} functions"]
    if tool is None:
        lines.append(f"To install it: add --install, {BY_HAND.format(path=path)}")
    else:
        install(path, tool)
        lines.append("Installed for you. Start LibreOffice Calc.")
    typed = ";".join(str(value) for value in EXAMPLE.example)
    return [*lines, f"Try in a cell: ={calc_name(EXAMPLE)}({typed})"]


def ready() -> Path:
    """LibreOffice's tool for extensions. Raises InputError where it is not there, or would refuse this user."""
    tool = find_tool()
    if tool is None:
        raise InputError(f"LibreOffice was not found: install it, {OR_LATER}")
    if hasattr(os, "geteuid") and os.geteuid() == 0:
        raise InputError(f"LibreOffice installs nothing as root: run this as the user who opens Calc, {OR_LATER}")
    return tool


def install(path: Path, tool: Path) -> None:
    """Install the extension for this user. Raises InputError with what to do where LibreOffice does not take it."""
    by_hand = f"{path} is written: run this again with --force, {BY_HAND.format(path=path)}"
    try:
        done = subprocess.run([str(tool), "add", "-f", str(path)], env=_environment(os.environ), stdin=subprocess.DEVNULL,
                              capture_output=True, text=True, errors="replace", timeout=INSTALL_SECONDS)  # fmt: skip
    except (OSError, subprocess.TimeoutExpired) as error:
        raise InputError(f"{tool} did not do its work ({error}); {by_hand}") from error
    if done.returncode:
        raise InputError(f"{_reason(done.stdout + done.stderr)}; {by_hand}")


def find_tool() -> Path | None:
    """LibreOffice's tool for extensions, or None."""
    office = shutil.which("soffice") or shutil.which("libreoffice")
    folders = [Path(office).resolve().parent] if office else []
    folders += map(Path, USUAL_FOLDERS.get(sys.platform, LINUX_FOLDERS))
    found = (shutil.which(TOOL, path=str(folder)) for folder in folders)
    there = next((tool for tool in found if tool), shutil.which(TOOL))
    return Path(there) if there else None


def _environment(environment: Mapping[str, str]) -> dict[str, str]:
    return {name: value for name, value in environment.items() if name not in STRANGE}


def _reason(said: str) -> str:
    """One sentence on what the tool said; it names a lock file where LibreOffice is open, or was not closed in order."""
    if "lock file" in said:
        named = next((line.strip() for line in said.splitlines() if line.strip().endswith(".lock")), "its lock file")
        return f"LibreOffice is open: close all its windows and its quick starter (if it is not, delete {named})"
    lines = [line.strip() for line in said.splitlines() if line.strip()]
    telling = next((line for line in lines if "ERROR" in line), lines[-1] if lines else "no reason given")
    return f"LibreOffice did not take the extension ({telling.removeprefix('ERROR: ')})"
