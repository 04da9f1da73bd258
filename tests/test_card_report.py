"""The page on a card and its picture: every figure told, nothing wider than the page, and a picture that is what it says."""

from __future__ import annotations

import re
import sys
import xml.etree.ElementTree as ElementTree
from pathlib import Path

import numpy as np
import pytest
from PIL import Image

from stripcheck.card import Card, load_card, shipped_cards
from stripcheck.card_report import WIDTH, draw, report
from stripcheck.caution import CAUTION
from stripcheck.errors import InputError
from tests.aircraft import HERON, changed, load_text, trial_heron

PARTS = ("GIVEN", "FITTED, by least squares on these figures", "HELD", "WHAT THE FIGURES CAN TELL", "ASSUMED",
         "THE CARD AGAINST THE MANUAL (level dry pavement, still air)", "WARNINGS")  # fmt: skip


def parts(card: Card) -> dict[str, str]:
    """The page by part, each as one line of text."""
    lines = report(card)
    starts = [lines.index(part) for part in PARTS] + [len(lines)]
    assert starts == sorted(starts)
    return {part: " ".join(" ".join(lines[start + 1:end]).split())
            for part, start, end in zip(PARTS, starts, starts[1:], strict=False)}  # fmt: skip


@pytest.mark.parametrize("name", shipped_cards())
def test_one_page(name: str) -> None:
    """At most 100 columns and 62 lines; every fitted coefficient, the typical value list and the caution stand on it."""
    card = load_card(name)
    lines = report(card)
    assert max(map(len, lines)) <= WIDTH == 100 and len(lines) <= 62
    assert lines[0] == f"Aircraft card: {card.name} ({card.file})" and CAUTION in " ".join(lines)
    told = parts(card)
    for key, _, known in card.fit.fitted:
        part = told["HELD" if isinstance(known, str) else PARTS[1]]
        assert card.chain.by_key[key].label in part, key
    assert told["ASSUMED"].startswith("nothing")


def test_what_was_given(tmp_path: Path) -> None:
    told = parts(trial_heron())["GIVEN"]
    assert "Take-off: 2 rolls and 2 distances to 50 ft, typed one by one; 0 to 6,000 ft, 15 to 20 °C, 1,110 kg, flap 10" in told
    assert "Stall speeds by flap, calibrated: up: 53 kt, 10: 50 kt, 20: 48 kt, 30: 46 kt" in told
    card = load_card("high-mule")
    rolls, whole = len(card.takeoff.roll), int(np.isfinite(card.takeoff.distance).sum())
    told = parts(card)["GIVEN"]
    assert f"Take-off: {rolls} rolls and {whole} distances to 50 ft, in tables on 3 pages; " in told
    assert re.search(r"Climb: \d+ rates of climb, from tables", told)
    text = changed(HERON, ('to_50ft = "475 m"\n', ""), ('to_50ft = "945 m"\n', ""))
    assert "2 rolls and 0 distances to 50 ft" in parts(load_text(text, tmp_path))["GIVEN"]


def test_differences_are_the_residuals(tmp_path: Path) -> None:
    """Typical is the root of the mean square, by hand from the residuals; each of few figures has a line of its own."""
    card = load_text(changed(HERON, ('from_50ft = "480 m"', 'from_50ft = "600 m"')), tmp_path)
    told = parts(card)[PARTS[5]]
    off = [model / book - 1.0 for label, book, model in card.fit.residuals if label in ("landing 1: 50 ft", "landing 2: 50 ft")]
    worst = max(off, key=abs)
    assert f"Landing, from 50 ft 2 {100.0 * np.sqrt(np.mean(np.square(off))):.1f} % {100.0 * worst:+.1f} %" in told
    label, _, model = card.fit.residuals[-1]
    assert label == "landing 2: 50 ft"
    assert f"6,000 ft, 20 °C, 1,110 kg: 600 m in the book, {model:,.0f} m by the card ({off[1]:+.1%})" in told
    assert "farthest out is landing 2: 50 ft" in parts(card)["WARNINGS"]
    assert told.count("in the book") == len(card.fit.residuals) == 8


def test_only_the_farthest_of_many_are_told() -> None:
    card = load_card("high-mule")
    told = parts(card)[PARTS[5]]
    assert "the farthest out:" in told and told.count("in the book") == 12
    label, book, model = max((row for row in card.fit.residuals if row[0].startswith("take-off") and row[0].endswith("50 ft")),
                             key=lambda row: abs(row[2] / row[1] - 1.0))  # fmt: skip
    at = int(re.findall(r"\d+", label)[0]) - 1
    feet = card.takeoff.pressure_altitude[at] / 0.3048
    assert re.search(rf"Take-off, to 50 ft, {feet:,.0f} ft, .*?: {book:,.0f} m in the book, {model:,.0f} m by the card", told)


def test_one_point_is_said_to_check_nothing(tmp_path: Path) -> None:
    text = re.sub(r"\[\[book\.(takeoff|landing)\]\]\npressure_altitude = \"6000 ft\"\n(?:[^\[\n].*\n)*", "", HERON)
    told = parts(load_text(text, tmp_path))
    assert "Take-off: 2 figures for 2 coefficients: met exactly, so that nothing checks them" in told[PARTS[3]]
    assert "one take-off point: only the static thrust could be fitted" in told["WARNINGS"]
    assert "Thrust lost to speed" in told["HELD"] and "held at its typical value" in told["HELD"]


def test_typical_values_are_listed(tmp_path: Path) -> None:
    told = parts(load_text(changed(HERON, ("parasite = 0.036\n", "")), tmp_path))
    assert "parasite not given, 0.035 used" in told["ASSUMED"]


def test_a_picture_as_svg(tmp_path: Path) -> None:
    """Titles, units, both lines and the caution are in it; drawn again it is the same file."""
    card = load_card("high-mule")
    for name in ("one.svg", "two.svg"):
        draw(card, tmp_path / name)
    first = (tmp_path / "one.svg").read_bytes()
    assert first == (tmp_path / "two.svg").read_bytes()
    root = ElementTree.fromstring(first)
    comments = " ".join(re.findall(r"<!-- (.*?) -->", first.decode()))
    for words in (card.name, "Take-off", "Landing", "manual [m]", "card [m]", "no difference", "5 % either way", CAUTION):
        assert words in comments, words
    marks = sum(1 for element in root.iter("{http://www.w3.org/2000/svg}use"))
    assert marks >= len(card.fit.residuals)


def test_a_picture_as_png_is_grey(tmp_path: Path) -> None:
    """Legible in grey: no point of it has a colour, and a good part of it is dark."""
    draw(trial_heron(), tmp_path / "card.png")
    image = np.asarray(Image.open(tmp_path / "card.png").convert("RGB")).astype(int)
    assert image.shape[1] == 1500 and (np.ptp(image, axis=2) == 0).all()
    assert 0.005 < (image[..., 0] < 100).mean() < 0.2


def test_pictures_that_can_not_be_drawn(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    card, kept = trial_heron(), tmp_path / "kept.svg"
    kept.write_text("mine")
    for path, sentence in ((tmp_path / "card.pdf", "must end in .png or .svg"), (kept, "add --force to replace it"),
                           (tmp_path / "nowhere" / "card.svg", "the folder does not exist")):  # fmt: skip
        with pytest.raises(InputError, match=sentence):
            draw(card, path)
    assert kept.read_text() == "mine"
    draw(card, kept, force=True)
    assert kept.read_text().startswith("<?xml")
    monkeypatch.setitem(sys.modules, "matplotlib", None)
    with pytest.raises(InputError, match=r'matplotlib, which is not installed; type: pip install "stripcheck\[pictures\]"$'):
        draw(card, tmp_path / "other.png")
    assert not (tmp_path / "other.png").exists()
