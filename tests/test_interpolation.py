"""Interpolation in tables: exact at the nodes, between them as SciPy's own multilinear interpolation, never beyond an edge."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.interpolate import RegularGridInterpolator

from stripcheck import interpolation
from stripcheck.interpolation import FAR, HAIR
from stripcheck.program import Program
from stripcheck.recording import Recorder

UP, DOWN = 0.0, 0.2  # rad: two flap settings


def pages(masses: list[float], flap: float = DOWN) -> tuple[np.ndarray, ...]:
    """Mass, flap, mass below and mass above of each page."""
    below = [masses[0] - 1.0, *masses[:-1]]
    above = [*masses[1:], masses[-1] + 1.0]
    return np.array(masses), np.full(len(masses), flap), np.array(below), np.array(above)


def both_flaps() -> tuple[np.ndarray, ...]:
    """Pages of two settings with masses of their own, as a stack holds them."""
    return tuple(np.concatenate(parts) for parts in zip(pages([800.0, 1000.0], UP), pages([900.0, 950.0, 1100.0]), strict=True))


@st.composite
def stacks(draw: st.DrawFn) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Masses, altitudes, temperatures, all rising and unevenly spaced, and figures for each of them."""
    rng = np.random.default_rng(draw(st.integers(0, 10**6)))
    shape = tuple(draw(st.integers(low, 5)) for low in (1, 2, 2))
    axes = [start + np.cumsum(rng.uniform(0.05, 1.0, count)) * step
            for start, step, count in zip((700.0, -300.0, 240.0), (200.0, 2000.0, 20.0), shape, strict=True)]  # fmt: skip
    return (*axes, rng.uniform(50.0, 2000.0, shape))


def read(stack: tuple[np.ndarray, ...], mass: Any, altitude: Any, temperature: Any) -> Any:
    masses, altitudes, temperatures, grid = stack
    row, column = interpolation.position(altitude, altitudes), interpolation.position(temperature, temperatures)
    return interpolation.in_pages(grid, row, column, mass, DOWN, *pages(list(masses)))


@given(stacks())
def test_every_node_gives_its_figure(stack: tuple[np.ndarray, ...]) -> None:
    """To the last bit: a share of nothing is added."""
    nodes = [axis.ravel() for axis in np.meshgrid(*stack[:3], indexing="ij")]
    np.testing.assert_array_equal(read(stack, *nodes), stack[3].ravel())


@given(stacks(), st.integers(0, 10**6))
def test_between_the_nodes_it_is_multilinear(stack: tuple[np.ndarray, ...], seed: int) -> None:
    """Source: scipy.interpolate.RegularGridInterpolator, method linear; within the grid, to 1e-12 of the figure."""
    rng = np.random.default_rng(seed)
    places = [rng.uniform(axis[0], axis[-1], 200) for axis in stack[:3]]
    axes, grid = list(stack[:3]), stack[3]
    if len(axes[0]) == 1:  # SciPy wants two nodes or more
        axes[0], grid = np.array([axes[0][0], axes[0][0] + 1.0]), np.concatenate([grid, grid])
    expected = RegularGridInterpolator(axes, grid)(np.stack(places, axis=1))
    np.testing.assert_allclose(read(stack, *places), expected, rtol=1e-12)


@given(stacks(), st.floats(0.1, 50.0))
def test_beyond_the_edges_it_is_held(stack: tuple[np.ndarray, ...], over: float) -> None:
    masses, altitudes, temperatures, grid = stack
    for i, (altitude, temperature) in {0: (altitudes[0] - over, temperatures[0] - over),
                                       -1: (altitudes[-1] + over, temperatures[-1] + over)}.items():  # fmt: skip
        assert read(stack, masses[0], altitude, temperature) == grid[0, i, i]


def test_positions_count_nodes() -> None:
    nodes = np.array([0.0, 1000.0, 3000.0])
    at = np.array([-50.0, 0.0, 250.0, 1000.0, 1500.0, 3000.0, 9000.0])
    np.testing.assert_array_equal(interpolation.position(at, nodes), [0.0, 0.0, 0.25, 1.0, 1.25, 2.0, 2.0])


@given(st.floats(900.0, 1100.0))
def test_the_weights_of_the_pages_that_count_add_up_to_one(mass: float) -> None:
    """Those of another flap are nothing, and at most two count."""
    weights = interpolation.page_weight(mass, DOWN, *both_flaps())
    assert weights.sum() == pytest.approx(1.0, abs=1e-15)
    assert (weights[:2] == 0.0).all() and (weights > 0.0).sum() <= 2 and (weights >= 0.0).all()


def test_a_flap_that_is_the_same_but_for_rounding_counts() -> None:
    masses = pages([900.0, 1000.0])
    for flap, whole in ((DOWN + 0.0009, 1.0), (DOWN - 0.0009, 1.0), (DOWN + 0.0011, 0.0)):
        assert interpolation.page_weight(950.0, flap, *masses).sum() == whole


def test_a_flap_without_pages_has_no_figure() -> None:
    """Never nought, which would be the shortest of all distances."""
    grid = np.full((2, 2, 2), 300.0)
    for flap in (UP, 0.1, np.array([0.1, 0.3])):
        assert np.isnan(interpolation.in_pages(grid, 0.5, 0.5, 950.0, flap, *pages([900.0, 1000.0]))).all()


@st.composite
def edges(draw: st.DrawFn) -> tuple[np.ndarray, float, float, float]:
    """Hottest temperature by page and line of both flaps; place between the lines, mass and flap."""
    rng = np.random.default_rng(draw(st.integers(0, 10**6)))
    hottest = 273.0 + 10.0 * rng.integers(0, 5, (5, 4)).astype(float)
    row = draw(st.sampled_from([0.0, 1.0, 2.0, 3.0, 2.0 - 1e-9, 1.0 + 1e-9]) | st.floats(0.0, 3.0))
    flap = draw(st.sampled_from([UP, DOWN]))
    masses = {UP: [800.0, 1000.0], DOWN: [900.0, 950.0, 1100.0]}[flap]
    return hottest, row, draw(st.sampled_from(masses) | st.floats(masses[0], masses[-1])), flap


@given(edges())
def test_an_edge_is_that_of_the_lines_and_pages_that_are_read(case: tuple[np.ndarray, float, float, float]) -> None:
    """By plain search: what counts by more than rounding in the figure counts for its edge, and nothing else."""
    hottest, row, mass, flap = case
    stack = both_flaps()
    counting = [hottest[p, i] for p in range(5) for i in range(4)
                if interpolation.page_weight(mass, flap, *(part[p] for part in stack)) > HAIR and 1.0 - abs(row - i) > HAIR]
    assert interpolation.hot_edge(hottest, row, mass, flap, *stack) == min(counting)
    assert interpolation.cold_edge(hottest, row, mass, flap, *stack) == max(counting)
    tops = hottest[:, 0]
    counting = [tops[p] for p in range(5) if interpolation.page_weight(mass, flap, *(part[p] for part in stack)) > HAIR]
    assert interpolation.top_edge(tops, mass, flap, *stack) == min(counting)


def test_no_page_no_edge() -> None:
    assert interpolation.hot_edge(np.full((1, 2), 300.0), 0.0, 900.0, UP, *pages([900.0])) == FAR


@given(st.floats(-50.0, 80.0), st.floats(-30.0, 10.0), st.floats(10.0, 50.0))
def test_outside_is_the_signed_distance_to_the_edge(value: float, least: float, most: float) -> None:
    far = interpolation.outside(value, least, most)
    assert far == (value - most if value > most else value - least if value < least else 0.0)


@given(st.floats(-50.0, 80.0), st.floats(-30.0, 50.0), st.floats(-30.0, 50.0))
def test_above_the_most_is_outside_whatever_the_least(value: float, least: float, most: float) -> None:
    """Two pages of which one has only hot and the other only cold figures have no temperature in common."""
    assert (interpolation.outside(value, least, most) > 0.0) == (value > most)


@given(stacks(), st.integers(0, 10**6))
def test_recorded_it_gives_the_same(stack: tuple[np.ndarray, ...], seed: int) -> None:
    """The recorded program over columns against the plain arrays."""
    rng = np.random.default_rng(seed)
    columns = {key: rng.uniform(axis[0] - 1.0, axis[-1] + 1.0, 50)
               for key, axis in zip(("mass", "altitude", "temperature"), stack[:3], strict=True)}  # fmt: skip
    columns["mass"] = np.clip(columns["mass"], stack[0][0], stack[0][-1])
    recorder = Recorder()
    nodes = {key: recorder.column(key, np.dtype(float)) for key in columns}
    program = Program({"figure": read(stack, **nodes)})
    np.testing.assert_allclose(program.run(columns, 50)["figure"], read(stack, **columns), rtol=1e-13)
