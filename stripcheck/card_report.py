"""An aircraft card on one page: what it was given, what was fitted and how well it is known, how far it is from the manual."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from stripcheck.calibrate import BookPoints
from stripcheck.card import Card
from stripcheck.caution import CAUTION
from stripcheck.errors import InputError
from stripcheck.safe_file import whole_or_not_at_all
from stripcheck.units import from_si

WIDTH = 100  # characters
FEW = 12  # figures of one kind up to which each is told by itself
FARTHEST = 3  # of more of them
PICTURES = (".png", ".svg")
KINDS = ("roll", "50 ft")
WORDS = {"takeoff": ("Take-off", "to 50 ft"), "landing": ("Landing", "from 50 ft")}

Array = NDArray[Any]


def report(card: Card) -> list[str]:
    """The page on a card, in lines of 100 characters or fewer.

    >>> from stripcheck import load_card
    >>> report(load_card("ridge-runner"))[0]
    'Aircraft card: Ridge Runner 180 (ridge-runner.toml)'
    """
    return [
        *_wrapped(f"Aircraft card: {card.name} ({card.file})"),
        *_wrapped(card.note),
        *_wrapped(f"{card.power} engine, {card.propeller} propeller".capitalize()),
        *_part("GIVEN", _given(card)),
        *_part("FITTED, by least squares on these figures", _coefficients(card, held=False)),
        *_part("HELD", _coefficients(card, held=True)),
        *_part("WHAT THE FIGURES CAN TELL", _identified(card)),
        *_part("ASSUMED", card.assumed or ["nothing: the card gives every entry that has a typical value"]),
        *_part("THE CARD AGAINST THE MANUAL (level dry pavement, still air)", _differences(card)),
        *_part("WARNINGS", card.fit.remarks or ["none"]),
        "",
        *_wrapped(CAUTION),
    ]


def _wrapped(text: str, first: str = "", further: str = "") -> list[str]:
    return textwrap.wrap(text, WIDTH, initial_indent=first, subsequent_indent=further)


def _part(heading: str, lines: Iterable[str]) -> list[str]:
    """A part of the page; a line that holds columns of its own is short enough and stays as it is."""
    page = ["", heading]
    for line in lines:
        page += [f"  {line}"] if len(line) <= WIDTH - 2 else _wrapped(line, "  ", "    ")
    return page


def _sides(card: Card) -> list[tuple[str, BookPoints]]:
    return [("takeoff", card.takeoff), ("landing", card.landing)]


def _given(card: Card) -> list[str]:
    lines = []
    for side, points in _sides(card):
        word, over = WORDS[side]
        pages = len(card.tables[side].pages) if side in card.tables else 0
        whole = int(np.isfinite(points.distance).sum())
        source = f"in tables on {_count(pages, 'page')}" if pages else "typed one by one"
        lines.append(
            f"{word}: {_count(len(points.roll), 'roll')} and {_count(whole, 'distance')} {over}, "
            f"{source}; {_conditions(card, points)}"
        )
    if "climb" in card.tables:
        rates = int(np.isfinite(card.tables["climb"].printed["rate"]).sum())
        lines.append(f"Climb: {_count(rates, 'rate')} of climb, from tables")
    if card.corrections:
        lines.append("The manual's own corrections: " + ", ".join(WORDS[side][0].lower() for side in sorted(card.corrections)))
    lines.append("Stall speeds by flap, calibrated: " + ", ".join(
        f"{flap.name}: {from_si(flap.stall_speed, 'kt'):.0f} kt" for flap in card.flaps))  # fmt: skip
    return lines


def _count(number: int, noun: str) -> str:
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def _conditions(card: Card, points: BookPoints) -> str:
    names = {round(flap.deflection, 9): flap.name for flap in card.flaps}
    flaps = ", ".join(names[round(float(flap), 9)] for flap in np.unique(points.flap))
    return (f"{_range(from_si(points.pressure_altitude, 'ft'), 'ft')}, {_range(from_si(points.temperature, '°C'), '°C')}, "
            f"{_range(points.mass, 'kg')}, flap {flaps}")  # fmt: skip


def _range(values: Array, unit: str) -> str:
    low, high = f"{np.min(values) + 0.0:,.0f}", f"{np.max(values) + 0.0:,.0f}"
    return f"{low} {unit}" if low == high else f"{low} to {high} {unit}"


def _coefficients(card: Card, held: bool) -> list[str]:
    lines = []
    for key, value, known in card.fit.fitted:
        if isinstance(known, str) != held:
            continue
        item = card.chain.by_key[key]
        shown = f"{from_si(value, item.unit):,.4g} {item.unit}".strip()
        how = known.removeprefix("held: ") if isinstance(known, str) else f"known to about {max(known, 0.01):.0%}"
        lines.append(f"{item.label:<30} {shown:>12}   {how}")
    return lines or ["nothing"]


def _identified(card: Card) -> list[str]:
    """How many figures stand against how many coefficients, and what follows."""
    own = {"takeoff": ("static_thrust", "thrust_slope", "propulsive_quality", "parasite_drag", "takeoff_technique"),
           "landing": ("braking_quality", "free_roll_seconds", "landing_technique")}  # fmt: skip
    lines = []
    for side, points in _sides(card):
        figures = int(len(points.roll) + np.isfinite(points.distance).sum())
        fitted = sum(1 for key, _, known in card.fit.fitted if key in own[side] and not isinstance(known, str))
        told = f"{WORDS[side][0]}: {_count(figures, 'figure')} for {_count(fitted, 'coefficient')}"
        if figures <= fitted:
            told += (": met exactly, so that nothing checks them; the rest of the model is typical values, and a figure from "
                     "high and hot would tell more")  # fmt: skip
        else:
            told += ": what is left over is shown below"
        lines.append(told)
    if card.tables:
        lines.append("Where the manual's tables reach, its figures are used as they stand; the model carries them further.")
    return lines


def _differences(card: Card) -> list[str]:
    """Typical and greatest difference by kind of figure, then each figure, or the farthest of many."""
    rows = [f"{'':22} {'figures':>8} {'typical':>9} {'greatest':>9}"]
    details = []
    for side, points in _sides(card):
        for kind, book, model in _pairs(card, side, points):
            off = model / book - 1.0
            far = np.argsort(-np.abs(off), kind="stable")
            name = f"{WORDS[side][0]}, {'roll' if kind == 'roll' else WORDS[side][1]}"
            if len(far):
                rows.append(f"{name:22} {len(far):>8} {_per_cent(np.sqrt(np.mean(off**2))):>9} {off[far[0]] * 100.0:>+7.1f} %")
            shown = range(len(off)) if len(off) <= FEW else far[:FARTHEST]
            of_kind = points if kind == "roll" else _with_distance(points)
            details += [f"{name}, {_place(of_kind, at)}: {book[at]:,.0f} m in the book, {model[at]:,.0f} m by the card "
                        f"({off[at]:+.1%})" for at in shown]  # fmt: skip
    many = any(len(points.roll) > FEW for _, points in _sides(card))
    return [*rows, *(["the farthest out:"] if many else []), *details]


def _per_cent(share: float) -> str:
    return f"{100.0 * share:.1f} %"


def _pairs(card: Card, side: str, points: BookPoints) -> list[tuple[str, Array, Array]]:
    """Distances of the book and of the card [m], by kind of figure."""
    word = WORDS[side][0].lower()
    found = []
    for kind in KINDS:
        rows = [(book, model) for label, book, model in card.fit.residuals if label.startswith(word) and label.endswith(kind)]
        found.append((kind, *np.array(rows, float).reshape(-1, 2).T))
    return found


def _with_distance(points: BookPoints) -> BookPoints:
    given = np.isfinite(points.distance)
    return BookPoints(*(np.asarray(column)[given] for column in vars(points).values()))


def _place(points: BookPoints, at: int) -> str:
    return (f"{from_si(points.pressure_altitude[at], 'ft'):,.0f} ft, {from_si(points.temperature[at], '°C'):.0f} °C, "
            f"{points.mass[at]:,.0f} kg")  # fmt: skip


def draw(card: Card, path: str | Path, force: bool = False) -> None:
    """A picture of the card against its manual, .png or .svg by the file's name; an existing file is kept unless forced.

    Needs matplotlib. Raises InputError where it is missing, or the picture can't be written.
    """
    path = Path(path)
    if path.suffix not in PICTURES:
        raise InputError(f"{path}: the name of the picture must end in {' or '.join(PICTURES)}")
    if path.exists() and not force:
        raise InputError(f"{path}: this file exists; choose another name, or add --force to replace it")
    if not path.resolve().parent.is_dir():
        raise InputError(f"{path}: the folder does not exist")
    try:
        import matplotlib
        from matplotlib.figure import Figure
        from matplotlib.layout_engine import ConstrainedLayoutEngine
    except ImportError:
        raise InputError('pictures need matplotlib, which is not installed; type: pip install "stripcheck[pictures]"') from None
    with matplotlib.rc_context({"svg.hashsalt": "stripcheck", "font.size": 10}):
        figure = Figure(figsize=(10.0, 5.9), layout=ConstrainedLayoutEngine(w_pad=0.12, h_pad=0.08))
        figure.suptitle(f"{card.name}: distances by the card against those of the manual")
        for axes, (side, points) in zip(figure.subplots(1, 2), _sides(card), strict=True):
            _panel(axes, card, side, points)
        figure.supxlabel(CAUTION, fontsize=8)
        with whole_or_not_at_all(path) as file:
            figure.savefig(file, format=path.suffix[1:], dpi=150, metadata={"Date": None} if path.suffix == ".svg" else None)


def _panel(axes: Any, card: Card, side: str, points: BookPoints) -> None:
    """One side: distance by the card over distance of the manual, with the line of no difference and 5 % each way."""
    word, over = WORDS[side]
    pairs = _pairs(card, side, points)
    every = np.concatenate([values for _, *both in pairs for values in both])
    line = np.array([0.9 * every.min(), 1.06 * every.max()])
    axes.plot(line, line, color="black", linewidth=1.0, label="no difference")
    for share in (0.95, 1.05):
        axes.plot(line, share * line, color="black", linewidth=0.8, linestyle=(0, (5, 4)),
                  label="5 % either way" if share < 1.0 else None)  # fmt: skip
    for (kind, book, model), marker, fill in zip(pairs, "o^", ("0.25", "white"), strict=True):
        if len(book):
            axes.plot(book, model, linestyle="none", marker=marker, markersize=5.5, markerfacecolor=fill,
                      markeredgecolor="black", markeredgewidth=0.8,
                      label=f"{'roll' if kind == 'roll' else f'distance {over}'} ({len(book)})")  # fmt: skip
    axes.set(title=word, xlabel="manual [m]", ylabel="card [m]", xlim=tuple(line), ylim=tuple(line), aspect="equal")
    axes.grid(color="0.88", linewidth=0.6)
    axes.set_axisbelow(True)
    axes.legend(loc="upper left", fontsize=8)
