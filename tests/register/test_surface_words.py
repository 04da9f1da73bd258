"""Surface spellings. The expected words follow from the rule at the head of the module (common practice, no
source), the abbreviations from those in common use in aeronautical data (from memory).
"""

from __future__ import annotations

from itertools import permutations

import pytest

from stripcheck.register.surface_words import RANK, known_condition, read_surface, worse_condition


@pytest.mark.parametrize(
    ("text", "word"),
    [
        ("ASP", "paved"),
        ("conc-g", "paved"),
        ("ASPH/ CONC", "paved"),
        ("PEM", "paved"),
        ("Asfalto", "paved"),
        ("ASPH 71/F/C/X/T", "paved"),
        ("C0N", "paved"),
        ("GVL", "gravel"),
        ("Piçarra", "gravel"),
        ("COR", "gravel"),
        ("ASPH-GRVL-F", "gravel"),
        ("TREATED GRAVEL", "gravel"),
        ("LAT", "dirt"),
        ("Red clay", "dirt"),
        ("ASPH-TRTD", "dirt"),
        ("Gravel/clay", "dirt"),
        ("GRE", "grass"),
        ("GRS", "grass"),
        ("graas", "grass"),
        ("Grassed red clay", "grass"),
        ("Grassed black sand", "grass"),
        ("Grass over sand", "grass"),
        ("GRASS&amp;GRAVEL", "grass"),
        ("Grass/Sand", "sand"),
        ("SAN", "sand"),
        ("TURF/SNOW", "snow"),
        ("ICE", "ice"),
        ("long grass", "long grass"),
        ("Long turf / gravel", "long grass"),
        ("WATER-E", "water"),
        ("ROOF-TOP", "helipad"),
        ("Rooftop, Octagonal Aluminum", "helipad"),
        ("ALUM-DECK", "helipad"),
        ("Ice - frozen lake", "ice"),
    ],
)
def test_spellings_that_can_be_told(text: str, word: str) -> None:
    assert read_surface(text).word == word


@pytest.mark.parametrize(
    "text",
    [
        "",
        " ",
        "UNK",
        "X",
        "N",
        "G",
        "S",
        "C",
        "B",
        "A",
        "G?",
        "mixed",
        "MATS",
        "PSP",
        "CON/MET",
        "Unpaved",
        "Not paved",
        "hard",
        "Torf",
        "GR",
        "GRA",
        "COM",
        "COP",
        "Snow/Ice",
        "TURF/WATER",
        "Grass/Helipads Concrete",
        "long gravel",
        "Grass - caution moles",
        "Gravel/grass, First 410m of RWY 23 paved",
        "asphalt on south half gravel on north",
        "TURF/GRAVEL/SN",
        "PAD",
        "broken asphalt",
    ],
)
def test_in_doubt_unknown_with_a_reason(text: str) -> None:
    surface = read_surface(text)
    assert surface.word == ""
    assert len(surface.why) > 10


@pytest.mark.parametrize(
    ("text", "word", "condition"),
    [
        ("Soft sand", "sand", "soft"),
        ("Loose gravel", "gravel", "soft"),
        ("Wet grass", "grass", "wet"),
        ("SAND, TIDAL", "sand", "wet"),
        ("Soft", "", "soft"),
        ("dry grass", "grass", "dry"),
        ("TURF", "grass", ""),
        ("wet soft grass", "grass", "soft"),
    ],
)
def test_conditions(text: str, word: str, condition: str) -> None:
    assert read_surface(text)[:2] == (word, condition)


def test_a_mixture_is_the_one_that_drags_most() -> None:
    names = {"long grass": None, "snow": "snow", "paved": "asphalt"}
    words = [word for word in RANK if word != "long grass"]
    for first, second in permutations(words, 2):
        text = f"{names.get(first, first)}/{names.get(second, second)}"
        assert read_surface(text).word == max(first, second, key=RANK.index), text


def test_conditions_of_a_column() -> None:
    assert [known_condition(text) for text in ("WET", "boggy", "", "frozen")] == ["wet", "soft", "", "frozen"]
    assert worse_condition("wet", "soft") == "soft"
    assert worse_condition("soft", "wet") == "soft"
    assert worse_condition("frozen", "wet") == "frozen"
