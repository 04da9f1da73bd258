"""Reading of TOML files that people write: every entry with its unit, its limits and a clear word when it is wrong."""

from __future__ import annotations

import math
import os
import re
import tomllib
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from stripcheck.errors import InputError
from stripcheck.units import KINDS, from_si, read_quantity, tidy

REQUIRED = object()
MAX_FILE = 1_000_000  # [bytes]: a hundred times a card with tables
# twenty parts of a key, bare or quoted: reading one takes time and memory by the square of their number
_LONG_KEY = re.compile(rb"""(?<![\w\-"'])(?:(?:[\w-]++|"[^"\n]*+"|'[^'\n]*+')[ \t]*+\.[ \t]*+){20}""")
BARE_SHARE = 0.003  # 0.3 per cent, below which a bare figure was probably meant as a share


class Section:
    """One table of a TOML file. It remembers which entries were asked for, so that the others can be refused."""

    def __init__(self, where: str, entries: dict[str, Any]) -> None:
        self.where, self.entries, self.asked = where, entries, set[str]()
        self.parts: list[Section] = []

    def has(self, name: str) -> bool:
        return name in self.entries

    def number(self, name: str, kind: str, default: Any = REQUIRED, low: float = -math.inf,
               high: float = math.inf) -> float:  # fmt: skip
        """A quantity in SI, between two limits in SI."""
        self.asked.add(name)
        if name not in self.entries:
            return float(self._default(name, default, f"a {kind}"))
        try:
            entry = self.entries[name]
            value = read_share(entry) if kind == "slope" else read_quantity(entry, kind)
        except InputError as error:
            raise InputError(f"{self.where}: {name}: {error}") from None
        if not low <= value <= high:
            raise InputError(
                f"{self.where}: {name} = {self.entries[name]} can't be right for a {kind}; {_expected(low, high, kind)}"
            )
        return value

    def text(self, name: str, default: Any = REQUIRED, choices: tuple[str, ...] = ()) -> str:
        self.asked.add(name)
        if name not in self.entries:
            return str(self._default(name, default, " or ".join(choices) or "a text"))
        value = str(self.entries[name])
        if choices and value not in choices:
            raise InputError(f'{self.where}: {name} = "{value}" is none of: {", ".join(choices)}')
        return value

    def flag(self, name: str, default: Any = REQUIRED) -> bool:
        self.asked.add(name)
        value = self.entries.get(name, default)
        if not isinstance(value, bool):
            raise InputError(f"{self.where}: {name} must be true or false")
        return value

    def texts(self, name: str, choices: tuple[str, ...]) -> tuple[str, ...]:
        self.asked.add(name)
        value = self.entries.get(name, list(choices))
        if not isinstance(value, list) or not all(word in choices for word in value):
            raise InputError(f"{self.where}: {name} must be a list out of: {', '.join(choices)}")
        return tuple(value)

    def section(self, name: str, required: bool = False) -> Section:
        self.asked.add(name)
        entries = self.entries.get(name, {})
        if required and name not in self.entries:
            raise InputError(f"{self.where}: the part [{name}] is missing")
        if not isinstance(entries, dict):
            raise InputError(f"{self.where}: [{name}] must be a part of the file, not a value")
        return self._part(f"{self.where} [{name}]", entries)

    def sections(self, name: str) -> list[Section]:
        """The parts of a repeated table, [[name]]."""
        self.asked.add(name)
        rows = self.entries.get(name, [])
        if not isinstance(rows, list) or not all(isinstance(row, dict) for row in rows):
            raise InputError(f"{self.where}: [[{name}]] must be a list of parts")
        return [self._part(f"{self.where} [[{name}]] number {i}", row) for i, row in enumerate(rows, 1)]

    def refuse_unknown(self) -> None:
        """Raise InputError for an entry that nobody asked for: it would be a misspelling."""
        for section in self._all():
            for name in section.entries:
                if name not in section.asked:
                    raise InputError(
                        f'{section.where}: "{name}" is not an entry here; the entries are: {", ".join(sorted(section.asked))}'
                    )

    def _part(self, where: str, entries: dict[str, Any]) -> Section:
        for part in self.parts:  # a part that was read before goes on remembering what was asked of it
            if part.where == where:
                return part
        part = Section(where, entries)
        self.parts.append(part)
        return part

    def _all(self) -> Iterator[Section]:
        yield self
        for part in self.parts:
            yield from part._all()

    def _default(self, name: str, default: Any, wanted: str) -> Any:
        if default is REQUIRED:
            raise InputError(f"{self.where}: {name} is missing; it takes {wanted}")
        return default


def _expected(low: float, high: float, kind: str) -> str:
    unit = KINDS[kind][0]
    least, most = (f"{tidy(from_si(limit, unit)):,.6g} {unit}".strip() for limit in (low, high))
    if math.isinf(high):
        return f"{least} or more is expected"
    if math.isinf(low):
        return f"{most} or less is expected"
    return f"{least} to {most} is expected"


def read_share(entry: object) -> float:
    """A share, typed as a percentage. Raises InputError where a bare figure could be either.

    >>> read_share("10 %")
    0.1
    """
    value = read_quantity(entry, "slope")
    if isinstance(entry, int | float) and 0.0 < abs(value) < BARE_SHARE:
        raise InputError("a bare figure below 0.3 could be a share or a percentage; write it with its sign, as 5 %")
    return value


def read_toml(path: Path) -> Section:
    """The whole of a TOML file. Raises InputError if it can't be read, or is far larger or deeper than any card."""
    try:
        size = path.stat().st_size
        if not path.is_dir() and (not path.is_file() or size > MAX_FILE):
            raise InputError(f"{path}: a TOML text file of at most {MAX_FILE / 1e6:.0f} MB is expected")
        content = path.read_bytes()
        if _LONG_KEY.search(content):
            raise InputError(f"{path}: a key has twenty parts or more; a card and a rule set have at most three levels")
        return Section(path.name, tomllib.loads(content.decode()))
    except FileNotFoundError:
        raise InputError(f"{path}: there is no such file") from None
    except (OSError, UnicodeDecodeError) as error:
        raise InputError(f"{path}: can't be read ({error.__class__.__name__}); a TOML text file is expected") from None
    except RecursionError:
        raise InputError(f"{path}: lists or parts nest too deep; a card and a rule set have at most three levels") from None
    except ValueError as error:  # what is no TOML, and a number with thousands of digits
        raise InputError(f"{path}: is not a TOML file that can be read: {error}") from None


def shipped_or_own(name: str, folder: str) -> Path:
    """Path of a user's own file, or of the one shipped under that name. Raises InputError where there is neither."""
    shipped = Path(__file__).parent / folder
    own = Path(name)
    if own.suffix == ".toml" or os.path.exists(own):  # unlike Path.exists, this takes a name of any length
        return own
    candidate = shipped / f"{name}.toml"
    if os.path.isfile(candidate) and candidate.parent == shipped:
        return candidate
    names = ", ".join(sorted(path.stem for path in shipped.glob("*.toml")))
    raise InputError(f'"{name}" is neither a file nor one of the shipped {folder}: {names}')
