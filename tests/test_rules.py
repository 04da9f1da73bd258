"""Rule sets: the shipped ones are whole, a user's own is read, and what can't be right is refused.

Published figures are compared in tests/outside/test_textbook.py.
"""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest

from stripcheck.chain import Input
from stripcheck.errors import InputError
from stripcheck.inputs import RULES
from stripcheck.rules import STATUS, load_rules, shipped_rules
from stripcheck.surface import CONDITIONS, GROUND_NAMES, GROUNDS

HEAD = 'title = "House rules"\nissue = "1"\ncitation = "Invented"\nstatus = "own"\n'


@pytest.fixture
def own(tmp_path: Path) -> Path:
    return tmp_path / "house.toml"


def load(own: Path, text: str) -> dict[str, object]:
    own.write_text(HEAD + text, encoding="utf-8")
    return dict(load_rules(str(own)).values)


@pytest.mark.parametrize("name", shipped_rules())
def test_shipped_sets(name: str) -> None:
    """Each has its citation and status, a value for every rule of the chain, and says that other text governs."""
    rules = load_rules(name)
    assert rules.name == name and rules.status in STATUS
    assert rules.title and rules.issue and rules.citation
    assert set(rules.values) == {item.key for item in RULES if isinstance(item, Input)}
    assert rules.status == "own" or "current" in rules.note
    for key in ("ground_rolling", "ground_braking", "ground_takeoff_factor", "ground_landing_factor"):
        column = rules.values[key]
        assert isinstance(column, np.ndarray) and column.shape == (len(GROUNDS) + 1,) and np.isnan(column[-1])
    for side in ("takeoff", "landing"):
        factors = np.asarray(rules.values[f"ground_{side}_factor"])[:-1]
        assert (factors >= 1.0).all()
        # worse ground of the same surface never has a smaller factor
        assert (np.diff(factors.reshape(-1, len(CONDITIONS)), axis=1) >= 0.0).all()


def test_usual_values_where_a_set_is_silent(own: Path) -> None:
    """Half a headwind, one and a half times a tailwind, no factor, no criterion, 50 ft over an obstacle."""
    values = load(own, "")
    assert values["headwind_credit"] == 0.5 and values["tailwind_count"] == 1.5
    assert values["takeoff_factor"] == values["landing_factor_long"] == 1.0
    assert values["physics_counts"] is True and values["corrections_count"] is True
    assert values["obstacle_margin"] == pytest.approx(15.24)
    for key in ("slope_limit", "least_width", "greatest_slope", "free_gradient", "light_mass"):
        assert np.isnan(values[key])  # type: ignore[call-overload]


def test_own_set(own: Path) -> None:
    values = load(own, """
corrections_count = false
[wind]
headwind_credit = "30 %"
[landing]
safety_factor = 1.4
[slope]
takeoff_each_percent_up = "7 %"
[site]
least_width = "50 ft"
[takeoff_surface.every]
soft = 1.3
[takeoff_surface.grass]
wet = 1.4
""")  # fmt: skip
    assert values["corrections_count"] is False
    assert values["headwind_credit"] == pytest.approx(0.3)
    assert values["landing_factor"] == values["landing_factor_long"] == 1.4
    assert values["upslope_takeoff"] == pytest.approx(0.07)
    assert values["least_width"] == pytest.approx(15.24)
    factor = dict(zip(GROUND_NAMES, np.asarray(values["ground_takeoff_factor"]), strict=False))
    assert (factor["grass, dry"], factor["grass, wet"], factor["grass, soft"]) == (1.0, 1.4, 1.3)
    assert factor["dirt, soft"] == 1.3


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ('[wind]\nheadwind_credit = "120 %"', 'house.toml [wind]: headwind_credit = 120 % can\'t be right for a slope'),
        ('[wind]\ntailwind_count = "50 %"', "house.toml [wind]: tailwind_count = 50 % can't be right for a slope"),
        ("[takeoff]\nsafety_factor = 0.9", "house.toml [takeoff]: safety_factor = 0.9 can't be right for a number"),
        ("[landing]\nshort_to = 900\nlong_from = 800",
         "house.toml [landing]: long_from must be above short_to, and the long factor not below the other"),
        ("[landing]\nsafety_factor = 1.4\nlong_safety_factor = 1.2",
         "house.toml [landing]: long_from must be above short_to, and the long factor not below the other"),
        ('physics_counts = "yes"', "house.toml: physics_counts must be true or false"),
        ("[site]\nleast_widht = 15", 'house.toml [site]: "least_widht" is not an entry here; the entries are: '),
        ("[takeoff_surface.mud]\ndry = 1.3",
         'house.toml [takeoff_surface]: "mud" is not an entry here; the entries are: '),
        ("[takeoff_surface.grass]\ndamp = 1.3",
         'house.toml [takeoff_surface] [grass]: "damp" is not an entry here; the entries are: '),
        ("[takeoff_surface.grass]\ndry = 0.8",
         "house.toml [takeoff_surface] [grass]: dry = 0.8 can't be right for a number"),
        ("[site]\ngreatest_slope = \"steep\"", 'house.toml [site]: greatest_slope: "steep" is not a number; '),
    ],
)  # fmt: skip
def test_what_can_not_be_right(own: Path, text: str, sentence: str) -> None:
    with pytest.raises(InputError, match=f"^{re.escape(sentence)}"):
        load(own, text)


@pytest.mark.parametrize("entry", ["title", "issue", "citation", "status"])
def test_a_set_says_where_it_comes_from(own: Path, entry: str) -> None:
    own.write_text("".join(line for line in HEAD.splitlines(True) if not line.startswith(entry)), encoding="utf-8")
    with pytest.raises(InputError, match=rf"^house\.toml: {entry} is missing; it takes "):
        load_rules(str(own))


def test_status_is_one_of_three(own: Path) -> None:
    own.write_text(HEAD.replace('"own"', '"official"'), encoding="utf-8")
    with pytest.raises(InputError, match=r'^house\.toml: status = "official" is none of: read, memory, own$'):
        load_rules(str(own))


def test_neither_file_nor_shipped() -> None:
    with pytest.raises(InputError, match='^"house" is neither a file nor one of the shipped rules: au-small, '):
        load_rules("house")
