"""Files written so that none is ever half there: beside the old one, flushed, and then put in its place.

Whatever stops the writing (a full disk, a folder without rights, the process killed, the power gone), the old file stays
whole. A file that a spreadsheet program has open is left alone: the program would write its own state over it, or the user
would go on in one that is no longer there.
"""

from __future__ import annotations

import os
import re
import secrets
import shutil
import time
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from datetime import datetime, timedelta
from itertools import count
from pathlib import Path
from typing import BinaryIO

from stripcheck.errors import InputError

COPIES = 10
"""Previous versions of a file that are kept, unless another number is asked for."""

_SPARE = ".stripcheck-{}.tmp"  # hidden, and named so that one that a power cut left behind is known as ours
_A_SPARE = re.compile(r"\.stripcheck-[0-9a-f]{16}\.tmp")
_STALE_AFTER = 86_400.0  # [s] by which the process that was writing a spare file has surely ended
_LOCKS = ("~$", ""), (".~lock.", "#")  # what Excel and LibreOffice put round the name of a file that they have open
_DATE, _DATE_LENGTH = "%Y-%m-%d %H%M%S", 17
_WITHIN_A_SECOND = ("", *"bcdefghijklmnopqrstuvwxyz")  # after the time in a copy's name, so that names sort by age


@contextmanager
def whole_or_not_at_all(path: Path) -> Iterator[BinaryIO]:
    """A file beside ``path`` that takes its place at the end; after any failure ``path`` is as it was.

    A link stays a link, and a file that is replaced hands its rights on. Raises InputError where ``path`` can't be
    written, is a folder or no plain file, or is open in a spreadsheet program.

    >>> import tempfile
    >>> with tempfile.TemporaryDirectory() as folder:
    ...     path = Path(folder) / "strips.csv"
    ...     with whole_or_not_at_all(path) as file:
    ...         _ = file.write(b"Strip,Length")
    ...     path.read_text()
    'Strip,Length'
    """
    with _in_place_of(path, 0) as file:
        yield file


@contextmanager
def keeping_the_old(path: Path, copies: int = COPIES) -> Iterator[BinaryIO]:
    """As `whole_or_not_at_all`, and the version that is replaced stays as a dated copy in the same folder.

    The copy of "strips.xlsx" is "strips 2026-12-01 142305.xlsx", with the local time at which it was replaced, so that
    names sort by age. No copy is written over. ``copies`` (1 or more) is how many stay: the oldest beyond that are deleted,
    of this very file and named in this way only. The new file is in its place before one is deleted.

    >>> import tempfile
    >>> with tempfile.TemporaryDirectory() as folder:
    ...     path = Path(folder) / "strips.csv"
    ...     for text in (b"first", b"second", b"third"):
    ...         with keeping_the_old(path) as file:
    ...             _ = file.write(text)
    ...     [copy.read_text() for copy in dated_copies(path)], path.read_text()
    (['first', 'second'], 'third')
    """
    if copies < 1:
        raise ValueError(f"copies must be 1 or more, not {copies}")
    with _in_place_of(path, copies) as file:
        yield file


def refuse_if_open(path: Path) -> None:
    """Raise InputError where a spreadsheet program has the file open, which its lock file beside it tells.

    >>> import tempfile
    >>> with tempfile.TemporaryDirectory() as folder:
    ...     path = Path(folder) / "strips.xlsx"
    ...     path.touch()
    ...     path.with_name(".~lock.strips.xlsx#").touch()
    ...     refuse_if_open(path)
    Traceback (most recent call last):
    ...
    stripcheck.errors.InputError: ...strips.xlsx: is open in a spreadsheet program; close it there, or delete
    .~lock.strips.xlsx# in the same folder if no program has it open any more
    """
    if not os.path.exists(path):  # a lock without its file was left behind
        return
    for named in dict.fromkeys((Path(os.path.abspath(path)), Path(os.path.realpath(path)))):
        for before, after in _LOCKS:
            lock = named.with_name(f"{before}{named.name}{after}")
            if os.path.lexists(lock):
                raise InputError(
                    f"{path}: is open in a spreadsheet program; close it there, or delete {lock.name} in the same "
                    "folder if no program has it open any more"
                )


def dated_copies(path: Path) -> list[Path]:
    """The dated copies of a file that `keeping_the_old` made, oldest first."""
    place = Path(os.path.realpath(path))
    return [place.with_name(name) for _, name in _dated(place)]


def _dated(place: Path) -> list[tuple[str, str]]:
    """Date and name of each dated copy, oldest first; the date as in the name, with its letter."""
    ours = re.compile(re.escape(place.stem) + r" (\d{4}-\d\d-\d\d \d{6}[b-z]?)" + re.escape(place.suffix))
    with os.scandir(place.parent) as entries:
        names = [entry.name for entry in entries if entry.is_file(follow_symlinks=False)]
    return sorted((match[1], match[0]) for name in names if (match := ours.fullmatch(name)) and _time(match[1]))


def _time(date: str) -> datetime | None:
    with suppress(ValueError):
        return datetime.strptime(date[:_DATE_LENGTH], _DATE)
    return None


@contextmanager
def _in_place_of(path: Path, copies: int) -> Iterator[BinaryIO]:
    place = Path(os.path.realpath(path))  # a link stays a link
    if os.path.isdir(place):
        raise InputError(f"{path}: this is a folder; give the name of a file in it")
    if os.path.exists(place) and not os.path.isfile(place):
        raise InputError(f"{path}: this is a device or a pipe; give the name of a plain file")
    refuse_if_open(path)
    spare = place.with_name(_SPARE.format(secrets.token_hex(8)))
    try:
        try:
            with open(spare, "xb") as file:
                yield file
                file.flush()
                os.fsync(file.fileno())
            refuse_if_open(path)  # it may have been opened in the meantime
            if place.exists():
                shutil.copymode(place, spare)
            _put_in_place(spare, place, copies)
        except BaseException:
            spare.unlink(missing_ok=True)
            raise
    except OSError as error:
        why = error.strerror or str(error)
        hint = "close it in other programs, and check the folder and the space on the disk"
        raise InputError(f"{path}: can't be written ({why}); {hint}") from error
    _drop_stale_spares(place.parent)
    if copies:
        for copy in dated_copies(place)[:-copies]:
            with suppress(OSError):  # the new file is written; a copy too many does no harm
                copy.unlink()


def _put_in_place(spare: Path, place: Path, copies: int) -> None:
    kept = _keep(place) if copies and place.exists() else None
    try:
        os.replace(spare, place)
    except BaseException:
        if kept is not None:
            kept.unlink(missing_ok=True)
        raise
    _flush_folder(place.parent)


def _keep(place: Path) -> Path:
    """A copy of the file under a dated name that is free: another name of the same file where the system has such."""
    for date in _dates(place):
        copy = place.with_name(f"{place.stem} {date}{place.suffix}")
        try:
            os.link(place, copy)
            return copy
        except FileExistsError:
            continue
        except (OSError, NotImplementedError):  # a memory stick or a share may have no second names
            if not os.path.lexists(copy):
                return _copied(place, copy)
    raise AssertionError("there is always another second")


def _dates(place: Path) -> Iterator[str]:
    """Dates for a copy, from now on, each later than that of the last copy even where the clock was set back."""
    last = max((date for date, _ in _dated(place)), default="")
    start = max(datetime.now(), _time(last) or datetime.min)
    for second in count():
        for letter in _WITHIN_A_SECOND:
            date = f"{start + timedelta(seconds=second):{_DATE}}{letter}"
            if date > last:
                yield date


def _copied(place: Path, copy: Path) -> Path:
    spare = place.with_name(_SPARE.format(secrets.token_hex(8)))
    try:
        shutil.copy2(place, spare)
        with open(spare, "r+b") as file:
            os.fsync(file.fileno())
        os.rename(spare, copy)
    except BaseException:
        spare.unlink(missing_ok=True)
        raise
    return copy


def _flush_folder(folder: Path) -> None:
    """Bring the names in a folder to the disk, where the system knows how."""
    with suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def _drop_stale_spares(folder: Path) -> None:
    """Delete the spare files that were left behind where a process was killed or the power went."""
    with suppress(OSError), os.scandir(folder) as entries:
        for entry in entries:
            if _A_SPARE.fullmatch(entry.name) and time.time() - entry.stat(follow_symlinks=False).st_mtime > _STALE_AFTER:
                with suppress(OSError):
                    os.unlink(entry.path)
