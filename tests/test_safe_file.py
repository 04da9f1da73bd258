"""Files are whole, whatever stops their writing, and previous versions are kept as they should be."""

from __future__ import annotations

import errno
import os
import re
import resource
import shutil
import subprocess
import sys
import textwrap
import time
import zipfile
from collections.abc import Callable, Iterator
from contextlib import AbstractContextManager
from datetime import datetime
from pathlib import Path
from typing import BinaryIO

import openpyxl
import pytest

from stripcheck import safe_file
from stripcheck.cli import main
from stripcheck.doors.excel_setup import BOOK
from stripcheck.errors import InputError
from stripcheck.safe_file import dated_copies, keeping_the_old, refuse_if_open, whole_or_not_at_all
from tests.kill_at_random import kill_at_random
from tests.office import find_soffice, require_office

Writer = Callable[[Path], AbstractContextManager[BinaryIO]]
BOTH = pytest.mark.parametrize("writer", [whole_or_not_at_all, keeping_the_old])
OLD, NEW = b"the old file", b"the new file"


def write(path: Path, content: bytes, writer: Writer = whole_or_not_at_all) -> None:
    with writer(path) as file:
        file.write(content)


def content_of(folder: Path) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in folder.iterdir()}


# --- written whole or not at all


@pytest.mark.parametrize(("writer", "failing"), [
    *((writer, failing) for writer in (whole_or_not_at_all, keeping_the_old) for failing in ("write", "fsync", "replace")),
    (keeping_the_old, "link"),
])  # fmt: skip
def test_a_failure_at_any_step_leaves_the_old_file_and_no_other(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, writer: Writer, failing: str
) -> None:
    path = tmp_path / "strips.xlsx"
    path.write_bytes(OLD)

    def full(*_names: object, **_more: object) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    if failing != "write":
        monkeypatch.setattr(safe_file.os, failing, full)
    if failing == "link":
        monkeypatch.setattr(safe_file.shutil, "copy2", full)
    sentence = r"strips\.xlsx: can't be written \(No space left on device\); close it in other programs, and check"
    with pytest.raises(InputError, match=sentence), writer(path) as file:
        file.write(NEW)
        if failing == "write":
            full()
    assert content_of(tmp_path) == {"strips.xlsx": OLD}


@BOTH
@pytest.mark.parametrize("stop", [RuntimeError("stopped"), KeyboardInterrupt(), SystemExit(1)])
def test_whoever_stops_the_writing_hears_it_and_the_old_file_stays(
    tmp_path: Path, writer: Writer, stop: BaseException
) -> None:
    path = tmp_path / "strips.xlsx"
    path.write_bytes(OLD)
    with pytest.raises(type(stop)), writer(path) as file:
        file.write(NEW)
        raise stop
    assert content_of(tmp_path) == {"strips.xlsx": OLD}


@BOTH
def test_all_is_on_the_disk_before_the_old_file_goes(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, writer: Writer
) -> None:
    # a power cut can't be made here; what can be seen is the order that guards against it: the content is flushed, then
    # the name is given to it, then the folder, which holds the names, is flushed
    path, steps = tmp_path / "strips.xlsx", []
    path.write_bytes(OLD)
    fsync, replace, link = os.fsync, os.replace, os.link

    def seen_fsync(handle: int) -> None:
        target = os.readlink(f"/proc/self/fd/{handle}")
        size = "" if os.path.isdir(target) else f" of {os.path.getsize(target)} bytes"
        steps.append(f"flush {'folder' if os.path.isdir(target) else 'file'}{size}")
        fsync(handle)

    def seen_replace(source: Path, target: Path) -> None:
        steps.append(f"replace {Path(target).name}")
        replace(source, target)

    def seen_link(source: Path, target: Path) -> None:
        steps.append("keep")
        link(source, target)

    if not os.path.isdir("/proc/self/fd"):
        pytest.skip("which file a handle stands for can be asked only where there is /proc")
    for name, seen in (("fsync", seen_fsync), ("replace", seen_replace), ("link", seen_link)):
        monkeypatch.setattr(safe_file.os, name, seen)
    write(path, NEW, writer)
    kept = ["keep"] if writer is keeping_the_old else []
    assert steps == ["flush file of 12 bytes", *kept, "replace strips.xlsx", "flush folder"]


@BOTH
def test_a_link_stays_a_link_and_the_new_file_has_the_rights_of_the_old_one(tmp_path: Path, writer: Writer) -> None:
    (tmp_path / "other").mkdir()
    real, link = tmp_path / "other" / "real.xlsx", tmp_path / "link.xlsx"
    real.write_bytes(OLD)
    real.chmod(0o640)
    link.symlink_to(real)
    write(link, NEW, writer)
    assert link.is_symlink() and real.read_bytes() == NEW and real.stat().st_mode & 0o777 == 0o640
    assert len(dated_copies(link)) == (writer is keeping_the_old)
    assert list(tmp_path.glob("*.xlsx")) == [link]


def test_a_link_to_nowhere_is_filled(tmp_path: Path) -> None:
    (tmp_path / "link.xlsx").symlink_to(tmp_path / "real.xlsx")
    write(tmp_path / "link.xlsx", NEW)
    assert (tmp_path / "link.xlsx").is_symlink() and (tmp_path / "real.xlsx").read_bytes() == NEW


@BOTH
def test_a_place_that_cannot_be_written_is_said_in_one_sentence(tmp_path: Path, writer: Writer) -> None:
    os.mkfifo(tmp_path / "pipe.csv")
    for path, says in (
        (tmp_path, "this is a folder"),
        (tmp_path / "pipe.csv", "this is a device or a pipe"),
        (tmp_path / "nowhere" / "strips.xlsx", r"can't be written \(No such file or directory\)"),
        (tmp_path / f"{'x' * 300}.xlsx", r"can't be written \(File name too long\)"),
    ):
        with pytest.raises(InputError, match=says):
            write(path, NEW, writer)


@BOTH
def test_a_folder_without_the_right_to_write_leaves_the_old_file(writer: Writer) -> None:
    # in a process of a user who has no rights there: the superuser may write everywhere
    code = f"""
        import os, sys
        from pathlib import Path
        from stripcheck.errors import InputError
        from stripcheck.safe_file import {writer.__name__} as writer
        print("ready", flush=True)
        if os.getuid() == 0:
            os.setgid(65534)
            os.setuid(65534)
        try:
            with writer(Path(sys.argv[1])) as file:
                file.write(b"new")
        except InputError as error:
            print(error)
    """
    folder = Path(subprocess.run(["mktemp", "-d"], capture_output=True, text=True, check=True).stdout.strip())
    try:
        (folder / "strips.xlsx").write_bytes(OLD)
        folder.chmod(0o555)
        done = python(code, folder / "strips.xlsx")
        assert "strips.xlsx: can't be written (Permission denied)" in done.stdout
        assert content_of(folder) == {"strips.xlsx": OLD}
    finally:
        folder.chmod(0o755)
        shutil.rmtree(folder)


def python(code: str, *arguments: object, **more: object) -> subprocess.CompletedProcess[str]:
    done = subprocess.run([sys.executable, "-c", textwrap.dedent(code), *map(str, arguments)], capture_output=True,
                          text=True, **more)  # type: ignore[call-overload]  # fmt: skip
    assert done.returncode == 0, done.stderr
    return done


# --- a disk that is full


@pytest.fixture
def small_disk(tmp_path: Path) -> Iterator[Path]:
    """A file system of 256 kB."""
    place = tmp_path / "disk"
    place.mkdir()
    command = ["mount", "-t", "tmpfs", "-o", "size=256k", "tmpfs", str(place)]
    try:
        made = subprocess.run(command, capture_output=True, text=True)
    except FileNotFoundError:
        pytest.skip("a small file system can't be made here: there is no mount command")
    if made.returncode != 0:
        pytest.skip(f"a small file system can't be made here, without the superuser's rights: {made.stderr.strip()}")
    try:
        yield place
    finally:
        subprocess.run(["umount", str(place)], check=True)


@BOTH
def test_a_full_disk_leaves_the_old_file(small_disk: Path, writer: Writer) -> None:
    path = small_disk / "strips.xlsx"
    path.write_bytes(OLD)
    for size in (300_000, 1_000_000):  # it is noticed at the end, or while writing
        with pytest.raises(InputError, match=r"can't be written \(No space left on device\); close it"):
            write(path, b"x" * size, writer)
        assert content_of(small_disk) == {"strips.xlsx": OLD}
    write(path, b"x" * 100_000, writer)  # what fits is written
    assert path.stat().st_size == 100_000


def test_a_full_disk_says_so_at_the_command_line_and_the_old_workbook_stays(small_disk: Path) -> None:
    path = small_disk / "demo.xlsx"
    path.write_bytes(OLD)
    command = [sys.executable, "-m", "stripcheck", "demo", "--force", "-o", str(path)]
    done = subprocess.run(command, capture_output=True, text=True)
    assert done.returncode == 2
    assert done.stdout == "" and done.stderr.count("\n") == 1
    assert "demo.xlsx: can't be written (No space left on device); close it" in done.stderr
    assert content_of(small_disk) == {"demo.xlsx": OLD}


@BOTH
def test_a_file_that_may_not_grow_leaves_the_old_one(tmp_path: Path, writer: Writer) -> None:
    # as a full disk, without a small file system: the system refuses to let a file of this process grow
    (tmp_path / "strips.xlsx").write_bytes(OLD)
    code = f"""
        import sys
        from pathlib import Path
        from stripcheck.errors import InputError
        from stripcheck.safe_file import {writer.__name__} as writer
        try:
            with writer(Path(sys.argv[1])) as file:
                file.write(b"x" * 100_000)
        except InputError as error:
            print(error)
    """
    limit = resource.RLIMIT_FSIZE, (50_000, 50_000)
    done = python(code, tmp_path / "strips.xlsx", preexec_fn=lambda: resource.setrlimit(*limit))
    assert "strips.xlsx: can't be written (File too large)" in done.stdout
    assert content_of(tmp_path) == {"strips.xlsx": OLD}


# --- killed


REPLACING = """
    import io, sys, zipfile
    from pathlib import Path
    from stripcheck.safe_file import keeping_the_old, whole_or_not_at_all
    path, copies = Path(sys.argv[1]), int(sys.argv[2])
    print("ready", flush=True)
    for number in range(25):
        with (
            (keeping_the_old(path, copies) if copies else whole_or_not_at_all(path)) as file,
            zipfile.ZipFile(file, "w") as book,
        ):
            for part in range(20):
                book.writestr(f"part{part}.xml", f"{number:08}" * 2_000)
"""


@pytest.mark.parametrize("copies", [0, 3])
def test_killed_at_random_moments_the_file_is_whole(tmp_path: Path, copies: int) -> None:
    path = tmp_path / "strips.xlsx"
    with zipfile.ZipFile(path, "w") as book:
        book.writestr("part0.xml", "99999999")

    def check() -> None:
        for place in (path, *dated_copies(path)):
            with zipfile.ZipFile(place) as book:
                assert book.testzip() is None
                texts = {book.read(name)[:8] for name in book.namelist()}
                assert len(texts) == 1 and len(book.namelist()) in (1, 20)  # one version, and all of it
        assert len(dated_copies(path)) <= copies + 1  # one more while the new file is just in its place

    kills = kill_at_random([sys.executable, "-c", textwrap.dedent(REPLACING), str(path), str(copies)], check, 30, ready=True)
    print(f"killed {len(kills.moments)} of 30 within {kills.duration:.2f} s")
    assert len(kills.moments) >= 15  # else nothing was tried


def test_what_a_killed_process_left_is_cleared_away_a_day_later(tmp_path: Path) -> None:
    names = (".stripcheck-0123456789abcdef.tmp", ".stripcheck-00000000000000ff.tmp", ".stripcheck-mine.tmp", "a.tmp")
    for name in names:
        (tmp_path / name).write_bytes(b"half")
        os.utime(tmp_path / name, (time.time() - 90_000,) * 2)
    os.utime(tmp_path / names[1], None)  # of a process that may still be writing
    write(tmp_path / "strips.xlsx", NEW)
    assert sorted(content_of(tmp_path)) == sorted((*names[1:], "strips.xlsx"))


# --- previous versions


def test_the_first_writing_keeps_nothing(tmp_path: Path) -> None:
    write(tmp_path / "strips.xlsx", NEW, keeping_the_old)
    assert content_of(tmp_path) == {"strips.xlsx": NEW}


@pytest.mark.parametrize("links", [True, False])
def test_the_oldest_copies_go_and_none_is_written_over(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, links: bool
) -> None:
    def none(*_names: object) -> None:
        raise OSError(errno.EPERM, "Operation not permitted")

    if not links:  # as on a memory stick
        monkeypatch.setattr(safe_file.os, "link", none)
    path = tmp_path / "strips.xlsx"
    for number in range(40):  # several within the same second, and more than the alphabet is long
        write(path, f"{number}".encode(), lambda path: keeping_the_old(path, 30))
    assert path.read_bytes() == b"39"
    assert [copy.read_bytes() for copy in dated_copies(path)] == [f"{number}".encode() for number in range(9, 39)]
    assert len(list(tmp_path.iterdir())) == 31
    for _ in range(2):
        write(path, b"last", keeping_the_old)
    kept = [b"%d" % number for number in range(31, 40)] + [b"last"]  # the usual number of them
    assert [copy.read_bytes() for copy in dated_copies(path)] == kept
    assert len(kept) == safe_file.COPIES


def test_a_copy_says_when_it_was_replaced(tmp_path: Path) -> None:
    path = tmp_path / "Strips of [2026].v2.xlsx"
    path.write_bytes(OLD)
    before = datetime.now().replace(microsecond=0)
    write(path, NEW, keeping_the_old)
    (copy,) = dated_copies(path)
    told = re.fullmatch(r"Strips of \[2026\]\.v2 (\d{4}-\d\d-\d\d \d{6})\.xlsx", copy.name)
    assert told is not None
    assert before <= datetime.strptime(told[1], "%Y-%m-%d %H%M%S") <= datetime.now()
    assert copy.read_bytes() == OLD


def test_only_copies_of_this_very_file_go(tmp_path: Path) -> None:
    others = (
        "strips 2020-01-01 101010.csv",  # of another file
        "strips old 2020-01-01 101010.xlsx",
        "strips 2020-01-01.xlsx",  # named by the user
        "strips 2020-01-01 1010.xlsx",
        "strips 2020-01-01 101010 b.xlsx",
        "strips 2020-01-01 101010 2021-01-01 101010.xlsx",  # of a copy that was worked on
        "STRIPS 2020-01-01 101010.xlsx",
        "strips2020-01-01 101010.xlsx",
    )
    for name in others:
        (tmp_path / name).write_bytes(b"mine")
    (tmp_path / "strips 2019-01-01 101010.xlsx").mkdir()
    (tmp_path / "strips 2018-01-01 101010.xlsx").symlink_to(tmp_path / others[0])
    path = tmp_path / "strips.xlsx"
    for number in range(5):
        write(path, b"%d" % number, lambda path: keeping_the_old(path, 1))
    assert [copy.read_bytes() for copy in dated_copies(path)] == [b"3"]
    assert all((tmp_path / name).read_bytes() == b"mine" for name in others)
    assert len(list(tmp_path.iterdir())) == len(others) + 4


def test_no_copy_at_all_is_no_number_of_copies(tmp_path: Path) -> None:
    with pytest.raises(ValueError, match="1 or more"):
        write(tmp_path / "strips.xlsx", NEW, lambda path: keeping_the_old(path, 0))
    assert content_of(tmp_path) == {}


# --- open in a spreadsheet program


LOCKS = pytest.mark.parametrize("lock", ["~$strips.xlsx", ".~lock.strips.xlsx#"])


@LOCKS
@BOTH
def test_a_file_that_a_spreadsheet_program_has_open_is_left_alone(tmp_path: Path, writer: Writer, lock: str) -> None:
    path = tmp_path / "strips.xlsx"
    path.write_bytes(OLD)
    (tmp_path / lock).write_bytes(b"")
    says = "is open in a spreadsheet program; close it there, or delete " + re.escape(lock)
    with pytest.raises(InputError, match=says):
        write(path, NEW, writer)
    (tmp_path / lock).unlink()
    with pytest.raises(InputError, match=says), writer(path) as file:
        file.write(NEW)
        (tmp_path / lock).write_bytes(b"")  # opened while the new one is being written
    assert content_of(tmp_path) == {"strips.xlsx": OLD, lock: b""}


@LOCKS
def test_a_lock_beside_the_link_or_beside_the_file_counts(tmp_path: Path, lock: str) -> None:
    (tmp_path / "other").mkdir()
    (tmp_path / "other" / "strips.xlsx").write_bytes(OLD)
    (tmp_path / "strips.xlsx").symlink_to(tmp_path / "other" / "strips.xlsx")
    for folder in (tmp_path, tmp_path / "other"):
        (folder / lock).write_bytes(b"")
        with pytest.raises(InputError, match="is open in a spreadsheet program"):
            refuse_if_open(tmp_path / "strips.xlsx")
        (folder / lock).unlink()
    refuse_if_open(tmp_path / "strips.xlsx")


def test_a_lock_without_its_file_was_left_behind(tmp_path: Path) -> None:
    (tmp_path / "~$strips.xlsx").write_bytes(b"")
    write(tmp_path / "strips.xlsx", NEW)
    assert (tmp_path / "strips.xlsx").read_bytes() == NEW


def test_a_workbook_that_libreoffice_has_open_is_left_alone(tmp_path: Path) -> None:
    require_office()
    path = tmp_path / "strips.xlsx"
    openpyxl.Workbook().save(path)
    old = path.read_bytes()
    profile = f"-env:UserInstallation={(tmp_path / 'profile').as_uri()}"
    command = [str(find_soffice()), profile, "--headless", "--norestore", str(path)]
    for _ in range(3):  # with a new profile it ends once and wants to be started again
        with subprocess.Popen(command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL) as office:
            try:
                give_up = time.monotonic() + 120  # it takes seconds; this only keeps a broken one from hanging the tests
                while office.poll() is None and time.monotonic() < give_up:
                    if (tmp_path / ".~lock.strips.xlsx#").exists():
                        with pytest.raises(InputError, match="strips.xlsx: is open in a spreadsheet program"):
                            write(path, NEW)
                        assert path.read_bytes() == old
                        return
                    time.sleep(0.1)
            finally:
                office.kill()
    pytest.fail("LibreOffice did not open the workbook")


def test_the_command_line_refuses_to_replace_an_open_workbook(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    for command, name in (("demo", "a.xlsx"), ("demo", "a.csv"), ("door lambda", "l.xlsx"), ("door calc", "c.oxt")):
        path, lock = tmp_path / name, tmp_path / f".~lock.{name}#"
        path.write_bytes(OLD)
        lock.touch()
        assert main([*command.split(), "--force", "-o", str(path)]) == 2
        said = capsys.readouterr()
        assert said.out == "" and f"{name}: is open in a spreadsheet program" in said.err and said.err.count("\n") == 1
        assert path.read_bytes() == OLD
    folder = tmp_path / "excel"
    folder.mkdir()
    for name in (BOOK, "~$" + BOOK):
        (folder / name).write_bytes(OLD)
    assert main(["door", "excel", str(folder), "--force"]) == 2
    assert f"{BOOK}: is open in a spreadsheet program" in capsys.readouterr().err
    assert content_of(folder) == {BOOK: OLD, "~$" + BOOK: OLD}


def test_whole_files_are_written_where_links_are_copied(tmp_path: Path) -> None:
    # a copy is another name of the same file, so that it costs no space: writing anew must never write into it
    path = tmp_path / "strips.xlsx"
    path.write_bytes(OLD)
    write(path, NEW, keeping_the_old)
    write(path, b"newer")
    assert [copy.read_bytes() for copy in dated_copies(path)] == [OLD]
