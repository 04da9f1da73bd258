"""Runway surface as people spell it, read as one word of the surface table.

The rule, in the order it is applied:

1. The spelling is taken in small letters without accents. A closing quality mark (-G, -F, -P, -E: good, fair, poor,
   excellent) and a pavement strength code such as ``71/F/C/X/T`` are dropped; the rest is cut into words.
2. Every word must be known: a surface, a condition (soft, wet...), or a word that does not change the surface
   (colours, graded, runway...). One word that is not known makes the whole surface unknown: it might be the worst part.
3. Several surfaces in one spelling: the one that drags most on the wheels counts. ``RANK`` gives the order. Two
   exceptions: what is *grassed*, or grass *over* or *on* something, is grass; ice mixed with another surface is
   unknown, because ice drags least and brakes worst.
4. Surfaces for which the surface table has no figures (metal, mats, wood...) are unknown, alone and in a mixture.

Single letters are unknown, all of them: "G" can be grass or gravel, "S" sealed, sand or soil, "C" clay or concrete.
So are "unpaved", "hard" and "mixed", which name no surface.
"""

from __future__ import annotations

import re
import unicodedata
from functools import cache
from typing import NamedTuple


class Surface(NamedTuple):
    """A surface read from its spelling: the table word ("" = unknown), the condition ("" = not told), and why."""

    word: str
    condition: str
    why: str


# From the least to the most drag on rolling wheels. Order from the rolling coefficients usually printed for
# hard surfaces, turf, long grass and soft ground (from memory: Raymer; Mason's take-off notes); snow and sand
# differ widely in themselves, and their order is common practice, no source.
RANK = ("paved", "gravel", "dirt", "grass", "long grass", "snow", "sand")

NO_FIGURES = "no figures"
TREATED = "treated"

# The three-letter abbreviations are those in common use in aeronautical data (from memory): ASP asphalt, BIT
# bitumen, BRI brick, CLA clay, CON concrete, COR coral, GRE graded or rolled earth or grass on graded earth,
# GRS grass, GVL gravel, LAT laterite, MAC macadam, PEM part concrete and part asphalt, PER permanent surface,
# SAN sand, SNO snow, TER terra (earth), MEM membrane, PSP pierced steel planking. COM and COP (composite) do
# not name their other part.
_WORDS = {
    "paved": (
        "paved asp asph asphalt asfalt asfalto asphalte bit bitum bitumen bituminous bitume bri brick con "
        "conc concr concrete concreto beton hormigon cement macadam mac pem per tar tarmac blacktop "
        "sealed paving pavement chipseal pfc tarseal"
    ),
    "gravel": (
        "gravel gvl grvl grv grav gravier kies schotter grava ripio cascalho saibro sai picarra pic "
        "oilgravel oligravel hardcore coral cor coronas coronus shells cinders slag limestone rock "
        "zahorra"
    ),
    "dirt": (
        "dirt earth soil clay cla ter terra terre tierra erde lehm laterite lat murram caliche loam silt "
        "shale arcilla argila argile arg maicillo"
    ),
    "grass": ("grass grassed grassy turf sod grs gre gras herbe herba erba hierba cesped pasto grama rasen wiese"),
    "sand": "sand san sable arena areia",
    "snow": "snow sno schnee neige nieve neve",
    "ice": "ice eis glace hielo gelo",
    "water": "water wat wasser eau agua",
    "helipad": "helipad helipads heliport rooftop roof deck helideck",
    NO_FIGURES: (
        "met metal mtal mats mat psp alum aluminum aluminium steel wood wooden planking pierced mem "
        "membrane membranes neoprene plastic"
    ),
    TREATED: "trtd treated oiled",
}

# Typing errors met in open data. "Torf" is not among them: it may be turf, and it is the German word for
# peat.
_TYPOS = {
    "graas": "grass", "grasss": "grass", "tuef": "turf", "apsh": "asph", "ashpalt": "asphalt",
    "coccrete": "concrete", "c0n": "con", "auminum": "aluminum", "blackclay": "clay", "gravle": "gravel",
    "concreate": "concrete",
}  # fmt: skip

# A word here tells the condition and leaves the surface as it is. Tidal sand is counted as wet, loose ground
# as soft.
_CONDITIONS = {
    "soft": "soft", "loose": "soft", "muddy": "soft", "boggy": "soft", "waterlogged": "soft",
    "weich": "soft", "wet": "wet", "damp": "wet", "tidal": "wet", "nass": "wet", "mouille": "wet",
    "dry": "dry", "trocken": "dry",
}  # fmt: skip

_CONDITION_ORDER = ("", "dry", "wet", "soft")

_PLAIN_WORDS_TEXT = """
brown red black grey gray white yellow blue green dark light old good fair poor excellent smooth
rough short cut mown graded rolled compacted compactada compact packed natural grooved grvd
crushed river sandy silty shaly rocky hard lime granite blocks ceramic moss stone landing
octagonal penetration mix mixed top runway rwy strip surface surfaced and with of the y et und
over on
"""
_PLAIN_WORDS = frozenset(_PLAIN_WORDS_TEXT.split())

_LONG = frozenset(("long", "tall", "high", "hohes", "haute", "alta"))

_NOT_TOLD = frozenset(("unk", "unknown", "none", "nil", "na", "tbd", "tba"))

# Whole spellings whose words mean something else together than one by one.
_WHOLE = {
    "grass or earth not graded or rolled": ("grass", ""),
    "hard mud": ("dirt", ""),
    "ice frozen lake": ("ice", ""),
    "frozen lake": ("ice", ""),
}

_MEANING = {word: table_word for table_word, words in _WORDS.items() for word in words.split()}
_QUALITY = re.compile(r"-[gfpe]\s*$")
_STRENGTH_CODE = re.compile(r"\b\d+\s*/[fr]/[a-d]/[w-z]/[tu]\b")


@cache
def read_surface(text: str) -> Surface:
    """Table word and condition of a runway surface as somebody spelt it.

    ``text``: any spelling. Result: a ``Surface`` with the word "paved", "gravel", "dirt", "grass" (short or
    not told), "long grass", "sand", "snow", "ice", the markers "water" and "helipad", or "" when it can't be
    told; the condition "", "dry", "wet" or "soft"; and a sentence saying why. Method: the rule at the head of
    this module.

    >>> read_surface("TURF-GRVL-F").word
    'grass'
    >>> read_surface("Soft sand")
    Surface(word='sand', condition='soft', why='"Soft sand" is read as sand')
    >>> read_surface("G").why
    'surface "G": the word "g" is not one that stripcheck knows'
    """
    words = _words_of(text)
    if not words or (len(words) == 1 and words[0] in _NOT_TOLD) or words == ["n", "a"]:
        return Surface("", "", "no surface is given")
    whole = _WHOLE.get(" ".join(words))
    if whole:
        return Surface(*whole, f'"{text}" is read as {whole[0]}')
    condition = max((_CONDITIONS.get(word, "") for word in words), key=_CONDITION_ORDER.index)
    word, doubt = _table_word(words)
    if doubt:
        return Surface("", condition, f'surface "{text}": {doubt}')
    return Surface(word, condition, f'"{text}" is read as {word}')


def known_condition(text: str) -> str:
    """Condition word ("dry", "wet", "soft") for a condition as somebody spelt it; other texts are kept as
    they are.

    >>> known_condition(" Boggy "), known_condition("frosty")
    ('soft', 'frosty')
    """
    return _CONDITIONS.get(text.strip().lower(), text.strip())


def worse_condition(given: str, from_surface: str) -> str:
    """The worse of two conditions; one that is not dry, wet or soft is kept, so that it is seen and not
    assessed.

    >>> worse_condition("dry", "soft"), worse_condition("", "wet"), worse_condition("frosty", "")
    ('soft', 'wet', 'frosty')
    """
    if given not in _CONDITION_ORDER:
        return given
    return max(given, from_surface, key=_CONDITION_ORDER.index)


def _words_of(text: str) -> list[str]:
    """Words of a spelling: small letters, no accents, quality mark and strength code gone, typing errors put right."""
    plain = unicodedata.normalize("NFKD", text.replace("&amp;", "&"))
    plain = "".join(c for c in plain if not unicodedata.combining(c)).lower()
    plain = _STRENGTH_CODE.sub(" ", _QUALITY.sub(" ", plain))
    return [_TYPOS.get(word, word) for word in re.findall(r"[^\W_]+", plain)]


def _table_word(words: list[str]) -> tuple[str, str]:
    """Table word and doubt, one of them empty, of the words of a spelling."""
    for word in words:
        if not (word in _MEANING or word in _CONDITIONS or word in _PLAIN_WORDS or word in _LONG):
            return "", f'the word "{word}" is not one that stripcheck knows'
    found = {_MEANING[word] for word in words if word in _MEANING}
    if not found:
        return "", "it names no surface"
    if "helipad" in found and found <= {"helipad", NO_FIGURES}:
        return "helipad", ""
    if NO_FIGURES in found:
        return "", "there are no friction figures for it"
    return _worst(_top_layer(words, found), bool(_LONG.intersection(words)))


def _top_layer(words: list[str], found: set[str]) -> set[str]:
    """Only grass, where grass is said to cover something; else all that was found."""
    covered = words[0] == "grassed" or (
        len(words) > 1 and _MEANING.get(words[0]) == "grass" and words[1] in ("over", "on")
    )
    return {"grass"} if covered and found <= set(RANK) else found


def _worst(found: set[str], is_long: bool) -> tuple[str, str]:
    """The surface of a mixture that drags most, or the doubt that stands against choosing one."""
    if TREATED in found:  # oiled or stabilised soil (from memory: the meaning in United States airport records)
        found = found - {TREATED} if found & {"gravel", "sand"} else found - {TREATED} | {"dirt"}
    if is_long and "grass" not in found:
        return "", "it is said to be long, but it is no grass"
    if len(found) == 1:
        word = next(iter(found))
    elif found <= set(RANK):
        word = max(found, key=RANK.index)
    else:
        return "", "it is a mixture of which no part is surely the worst"
    return ("long grass" if is_long and word == "grass" else word), ""
