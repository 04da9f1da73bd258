"""Interpolation in a manual's tables: linear in mass, in pressure altitude and in temperature, exact at the nodes.

A table is a stack of *pages*, one for each mass and flap setting that the manual prints; a page is a grid of figures by
pressure altitude (down) and temperature (across). Positions in a grid count nodes from 0, with the share of the way to
the next one behind the point. All functions take and give SI, floats or arrays that broadcast together, are free of
branches, and raise nothing. Nothing here reaches beyond a table: positions are held at its edges, and ``outside`` tells
by how much.

References
----------
[1] Linear interpolation between the lines and columns of a table, as flight manuals ask for; taken in turn over each
    direction it is multilinear interpolation.
"""

from __future__ import annotations

import numpy as np

from stripcheck.numeric import Number

SAME_FLAP = 0.001  # rad: two deflections as near as that are one setting
HAIR = 1e-6  # share of a node's distance that is rounding, not distance
FAR = 1e9  # stands for "no edge" where the least of several edges is looked for


def position(at: Number, nodes: Number) -> Number:
    """Position [nodes from 0] of a value among rising nodes of the same unit, held at the first and the last. Source: [1].

    >>> float(position(1500.0, np.array([0.0, 1000.0, 3000.0])))
    1.25
    """
    return np.interp(at, nodes, np.arange(len(nodes), dtype=float))


def near(place: Number, node: Number) -> Number:
    """Weight [-] of a node, by its number, at a position [nodes]: 1 there, falling to 0 at its neighbours. Source: [1].

    >>> [float(near(1.25, node)) for node in (1, 2, 3)]
    [0.75, 0.25, 0.0]
    """
    return np.maximum(1.0 - np.abs(place - node), 0.0)


def page_weight(mass: Number, flap: Number, page_mass: Number, page_flap: Number, below: Number, above: Number) -> Number:
    """Weight [-] of a page: 1 at its mass [kg], falling to 0 at the masses of the pages below and above; 0 for another flap.

    ``mass`` [kg] lies within the pages; ``flap`` [rad] is one that has pages. Source: [1].

    >>> float(page_weight(950.0, 0.2, 1000.0, 0.2, 800.0, 1100.0))
    0.75
    """
    of_mass = np.maximum(np.minimum((mass - below) / (page_mass - below), (above - mass) / (above - page_mass)), 0.0)
    return np.where(np.abs(flap - page_flap) < SAME_FLAP, np.minimum(of_mass, 1.0), 0.0)


def in_grid(grid: Number, row: Number, column: Number) -> Number:
    """Figure of a grid [any unit; rows x columns] at a position down and across [nodes]. Source: [1].

    >>> float(in_grid(np.array([[200.0, 220.0], [240.0, 280.0]]), 0.5, 0.25))
    227.5
    """
    total: Number = 0.0
    for i, line in enumerate(grid):
        across: Number = 0.0
        for j, figure in enumerate(line):
            across = across + figure * near(column, j)
        total = total + across * near(row, i)
    return total


def in_pages(grid: Number, row: Number, column: Number, mass: Number, flap: Number, page_mass: Number, page_flap: Number,
             page_below: Number, page_above: Number) -> Number:  # fmt: skip
    """Figure of a table [any unit; pages x rows x columns] at a position [nodes], mass [kg] and flap [rad].

    ``page_mass`` [kg], ``page_flap`` [rad], ``page_below`` and ``page_above`` [kg] hold one value for each page: see
    ``page_weight``. Source: [1].

    >>> table = np.array([[[200.0, 220.0], [240.0, 280.0]], [[260.0, 280.0], [300.0, 340.0]]])
    >>> pages = [np.array(values) for values in ([900.0, 1100.0], [0.2, 0.2], [899.0, 900.0], [1100.0, 1101.0])]
    >>> float(in_pages(table, 0.5, 0.25, 1000.0, 0.2, *pages))
    257.5
    """
    total: Number = 0.0
    weights: Number = 0.0
    for page, *where in zip(grid, page_mass, page_flap, page_below, page_above, strict=True):
        weight = page_weight(mass, flap, *where)
        total, weights = total + weight * in_grid(page, row, column), weights + weight
    return np.where(weights > 0.0, total, np.nan)  # no page is for this flap


def hot_edge(hottest: Number, row: Number, mass: Number, flap: Number, page_mass: Number, page_flap: Number,
             page_below: Number, page_above: Number) -> Number:  # fmt: skip
    """Hottest temperature [K] for which the manual prints all figures that count at a position down the table [nodes].

    ``hottest`` [K; pages x rows] is the last temperature of each line that has a figure. Source: [1].

    >>> pages = [np.array([value]) for value in (1000.0, 0.2, 999.0, 1001.0)]
    >>> [float(hot_edge(np.array([[313.0, 303.0]]), row, 1000.0, 0.2, *pages)) for row in (0.0, 0.5, 1.0)]
    [313.0, 303.0, 303.0]
    """
    edge: Number = FAR
    for lines, *where in zip(hottest, page_mass, page_flap, page_below, page_above, strict=True):
        counts = page_weight(mass, flap, *where) > HAIR
        for i, last in enumerate(lines):
            edge = np.minimum(edge, np.where(counts & (near(row, i) > HAIR), last, FAR))
    return edge


def cold_edge(coldest: Number, row: Number, mass: Number, flap: Number, page_mass: Number, page_flap: Number,
              page_below: Number, page_above: Number) -> Number:  # fmt: skip
    """Coldest temperature [K] for which the manual prints all figures that count. Arguments as for ``hot_edge``.

    >>> pages = [np.array([value]) for value in (1000.0, 0.2, 999.0, 1001.0)]
    >>> [float(cold_edge(np.array([[263.0, 273.0]]), row, 1000.0, 0.2, *pages)) for row in (0.0, 0.5, 1.0)]
    [263.0, 273.0, 273.0]
    """
    return -hot_edge(-coldest, row, mass, flap, page_mass, page_flap, page_below, page_above)


def top_edge(highest: Number, mass: Number, flap: Number, page_mass: Number, page_flap: Number, page_below: Number,
             page_above: Number) -> Number:  # fmt: skip
    """Greatest pressure altitude [m] for which the manual prints all figures that count; ``highest`` [m] of each page.

    >>> pages = [np.array(values) for values in ([900.0, 1100.0], [0.2, 0.2], [899.0, 900.0], [1100.0, 1101.0])]
    >>> [float(top_edge(np.array([3000.0, 2000.0]), mass, 0.2, *pages)) for mass in (900.0, 1000.0)]
    [3000.0, 2000.0]
    """
    edge: Number = FAR
    for top, *where in zip(highest, page_mass, page_flap, page_below, page_above, strict=True):
        edge = np.minimum(edge, np.where(page_weight(mass, flap, *where) > HAIR, top, FAR))
    return edge


def outside(value: Number, least: Number, most: Number) -> Number:
    """How far a value lies above the most (positive) or below the least (negative) [unit of all three]; 0 between.

    Above the most goes before below the least, where holes leave the least above the most.

    >>> [float(outside(value, 0.0, 30.0)) for value in (35.0, -5.0, 12.0)]
    [5.0, -5.0, 0.0]
    """
    return np.maximum(value - most, 0.0) + np.minimum(value - np.minimum(least, most), 0.0)
