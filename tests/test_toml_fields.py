"""TOML files that people write: entries with units and limits, and one sentence for what is wrong."""

from __future__ import annotations

import os
import re
from contextlib import AbstractContextManager
from pathlib import Path

import pytest

from stripcheck.errors import InputError
from stripcheck.toml_fields import Section, read_toml, shipped_or_own


def section(**entries: object) -> Section:
    return Section("strip.toml", dict(entries))


def refused(sentence: str) -> AbstractContextManager[object]:
    return pytest.raises(InputError, match=f"^{re.escape(sentence)}$")


def test_numbers_with_and_without_units() -> None:
    part = section(length="2000 ft", area=16, slope="5 %")
    assert part.number("length", "length") == pytest.approx(609.6)
    assert part.number("area", "area") == 16.0
    assert part.number("slope", "slope") == pytest.approx(0.05)
    assert part.number("time", "time", 2.0) == 2.0
    assert part.has("area") and not part.has("time")


def test_a_missing_number() -> None:
    with refused("strip.toml: length is missing; it takes a length"):
        section().number("length", "length")


def test_a_number_that_is_none() -> None:
    with refused('strip.toml: length: "long" is not a number; write for example "620 m"'):
        section(length="long").number("length", "length")


@pytest.mark.parametrize("typed", ["5 m", "5000 m", "", float("nan")])
def test_a_number_beyond_its_limits(typed: object) -> None:
    with refused(f"strip.toml: length = {typed} can't be right for a length; 10 m to 100 m is expected"):
        section(length=typed).number("length", "length", low=10.0, high=100.0)


@pytest.mark.parametrize("typed", [True, [1.0], {"m": 5}, 10**400])
def test_values_of_another_type(typed: object) -> None:
    with pytest.raises(InputError, match=r"^strip\.toml: length: .* write for example "):
        section(length=typed).number("length", "length")


def test_texts_and_choices() -> None:
    part = section(kind="fixed pitch", name="Heron")
    assert part.text("kind", choices=("fixed pitch", "constant speed")) == "fixed pitch"
    assert part.text("name") == "Heron"
    assert part.text("note", "") == ""
    with refused("strip.toml: title is missing; it takes a text"):
        part.text("title")
    with refused("strip.toml: status is missing; it takes read or memory"):
        part.text("status", choices=("read", "memory"))
    with refused('strip.toml: name = "Heron" is none of: up, down'):
        part.text("name", choices=("up", "down"))


def test_flags() -> None:
    assert section(counts=False).flag("counts") is False
    assert section().flag("counts", True) is True
    for typed in ("yes", 1):
        with refused("strip.toml: counts must be true or false"):
            section(counts=typed).flag("counts")
    with refused("strip.toml: counts must be true or false"):
        section().flag("counts")


def test_lists_of_choices() -> None:
    assert section(uses=["landing"]).texts("uses", ("take-off", "landing")) == ("landing",)
    assert section().texts("uses", ("take-off", "landing")) == ("take-off", "landing")
    for typed in ("landing", ["taxi"], [["landing"]], [{"a": 1}]):
        with refused("strip.toml: uses must be a list out of: take-off, landing"):
            section(uses=typed).texts("uses", ("take-off", "landing"))


def test_parts() -> None:
    top = section(wing={"area": 16.0}, flap=[{"setting": "up"}, {"setting": "10"}])
    assert top.section("wing").number("area", "area") == 16.0
    assert top.section("wing") is top.section("wing")
    assert [part.text("setting") for part in top.sections("flap")] == ["up", "10"]
    assert top.section("limits").number("crosswind", "speed", 5.0) == 5.0
    assert top.sections("book") == []
    with refused("strip.toml: the part [limits] is missing"):
        top.section("limits", required=True)


def test_parts_that_are_none() -> None:
    with refused("strip.toml: [wing] must be a part of the file, not a value"):
        section(wing=16.0).section("wing")
    for typed in (16.0, [1, 2], {"setting": "up"}):
        with refused("strip.toml: [[flap]] must be a list of parts"):
            section(flap=typed).sections("flap")


def test_misspelt_entries_are_refused_wherever_they_stand() -> None:
    top = section(wing={"area": 16.0, "spam": 11.0}, flap=[{"setting": "up"}, {"seting": "10"}], tail=1)
    with refused('strip.toml: "wing" is not an entry here; the entries are: '):
        top.refuse_unknown()
    wing, flaps = top.section("wing"), top.sections("flap")
    wing.number("area", "area")
    wing.number("span", "length", 11.0)
    with refused('strip.toml: "tail" is not an entry here; the entries are: flap, wing'):
        top.refuse_unknown()
    del top.entries["tail"]
    with refused('strip.toml [wing]: "spam" is not an entry here; the entries are: area, span'):
        top.refuse_unknown()
    del wing.entries["spam"]
    for flap in flaps:
        flap.text("setting", "")
    with refused('strip.toml [[flap]] number 2: "seting" is not an entry here; the entries are: setting'):
        top.refuse_unknown()


def test_files(tmp_path: Path) -> None:
    good, bad, binary = tmp_path / "good.toml", tmp_path / "bad.toml", tmp_path / "binary.toml"
    good.write_text('title = "Höhe"\n', encoding="utf-8")
    bad.write_text("title = Höhe\n", encoding="utf-8")
    binary.write_bytes(b"\xff\xfe\x00")
    assert read_toml(good).text("title") == "Höhe"
    with pytest.raises(InputError, match=r"bad\.toml: is not a TOML file that can be read: .*line 1"):
        read_toml(bad)
    with pytest.raises(InputError, match=r"binary\.toml: can't be read \(UnicodeDecodeError\); a TOML text file is"):
        read_toml(binary)
    with pytest.raises(InputError, match=r"none\.toml: there is no such file"):
        read_toml(tmp_path / "none.toml")
    with pytest.raises(InputError, match=r"can't be read \(IsADirectoryError\); a TOML text file is expected"):
        read_toml(tmp_path)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("a = " + "[" * 900_000, "lists or parts nest too deep"),
        ("a = " + "[" * 400_000 + "]" * 400_000, "lists or parts nest too deep"),
        ("a = " + "{a=" * 200_000, "lists or parts nest too deep"),
        ("a" + ".a" * 400_000 + " = 1", "a key has twenty parts or more"),  # the memory for it grew by the square
        ("[a" + ". a" * 300_000 + "]", "a key has twenty parts or more"),
        ('b = {"a"' + ".'a'" * 200_000 + " = 1}", "a key has twenty parts or more"),
        ("a = " + "9" * 900_000, "is not a TOML file that can be read"),
        ("# " + "x" * 1_000_000, "a TOML text file of at most 1 MB is expected"),
        ('a = "' + "x" * 900_000, "is not a TOML file that can be read"),
        ("a = 1\0", "is not a TOML file that can be read"),
    ],
)
def test_files_without_measure(tmp_path: Path, text: str, says: str) -> None:
    (tmp_path / "card.toml").write_text(text, encoding="utf-8")
    with pytest.raises(InputError, match=rf"card\.toml: {says}"):
        read_toml(tmp_path / "card.toml")


def test_long_texts_and_many_figures_are_no_harm(tmp_path: Path) -> None:
    path = tmp_path / "card.toml"
    prose = "No. 1. See p. 4, e.g. " * 10_000
    path.write_text(f'note = "{prose}"\nvalues = [{"1.5, " * 10_000}]\n# {"." * 10_000}\na.b.c = 1\n')
    assert len(read_toml(path).entries["values"]) == 10_000
    os.mkfifo(tmp_path / "pipe.toml")
    with pytest.raises(InputError, match=r"pipe\.toml: a TOML text file of at most 1 MB is expected"):
        read_toml(tmp_path / "pipe.toml")


def test_shipped_files_by_name_and_own_ones_by_path(tmp_path: Path) -> None:
    assert shipped_or_own("ridge-runner", "cards").name == "ridge-runner.toml"
    own = tmp_path / "mine.toml"
    own.write_text("", encoding="utf-8")
    assert shipped_or_own(str(own), "cards") == own


@pytest.mark.parametrize("name", ["heron", "../rules/us-135", "cards/ridge-runner", "x" * 5000, "a\0b"])
def test_names_that_are_neither(name: str) -> None:
    with pytest.raises(InputError, match="is neither a file nor one of the shipped cards: high-mule, ridge-runner$"):
        shipped_or_own(name, "cards")
