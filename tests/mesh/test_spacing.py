"""Smooth maps: ends, stretch, nesting and symmetry."""

from itertools import pairwise

import numpy as np
import pytest

from axicfd.mesh.spacing import LARGEST_GROWTH, LARGEST_STRETCH, graded_map, length_weight, stretch_for_end_cell

ENDS = [(True, False), (False, True), (True, True)]


@pytest.mark.parametrize("ends", [*ENDS, (False, False)])
@pytest.mark.parametrize("stretch", [1.0, 1.5, 4.0, 20.0, 1e4])
def test_a_map_rises_from_0_to_1(stretch, ends):
    x = graded_map(stretch, *ends)(np.linspace(0.0, 1.0, 401))
    assert x[0] == pytest.approx(0.0, abs=1e-12)
    assert x[-1] == pytest.approx(1.0, abs=1e-12)
    assert (np.diff(x) > 0.0).all()


@pytest.mark.parametrize("ends", ENDS)
@pytest.mark.parametrize("stretch", [1.5, 4.0, 20.0])
def test_stretch_is_the_largest_over_the_smallest_slope(stretch, ends):
    slope = np.diff(graded_map(stretch, *ends)(np.linspace(0.0, 1.0, 200001)))
    assert slope.max() / slope.min() == pytest.approx(stretch, rel=1e-3)


def test_cells_are_small_where_asked():
    x = np.linspace(0.0, 1.0, 11)
    small = {ends: np.diff(graded_map(9.0, *ends)(x)) for ends in ENDS}
    assert np.argmin(small[True, False]) == 0 and np.argmax(small[True, False]) == 9
    assert np.argmin(small[False, True]) == 9 and np.argmax(small[False, True]) == 0
    assert small[True, True] == pytest.approx(small[True, True][::-1], rel=1e-12)
    assert small[True, False] == pytest.approx(small[False, True][::-1], rel=1e-12)


@pytest.mark.parametrize("ends", [*ENDS, (False, False)])
@pytest.mark.parametrize("stretch", [1.0, 4.0])
def test_faces_of_half_as_many_cells_are_faces(stretch, ends):
    chart = graded_map(stretch, *ends)
    fine, coarse = chart(np.arange(65) / 64), chart(np.arange(33) / 32)
    assert (fine[::2] == coarse).all()


def test_neighbouring_cells_become_alike_as_cells_double():
    """The ratio of neighbours tends to 1: doubling refines one smooth map."""
    worst = []
    for n in (16, 32, 64, 128):
        size = np.diff(graded_map(20.0, True, True)(np.arange(n + 1) / n))
        worst.append(np.abs(size[1:] / size[:-1] - 1.0).max())
    for a, b in pairwise(worst):
        assert b < 0.6 * a


@pytest.mark.parametrize("ends", ENDS)
def test_end_cell_has_the_wanted_size(ends):
    stretch = stretch_for_end_cell(40, 2.0, 1e-3, *ends)
    size = 2.0 * np.diff(graded_map(stretch, *ends)(np.arange(41) / 40))
    assert size.min() == pytest.approx(1e-3, rel=1e-4)


def test_no_stretch_where_uniform_cells_are_small_enough():
    assert stretch_for_end_cell(40, 2.0, 0.05, True, True) == 1.0
    assert stretch_for_end_cell(40, 2.0, 1e-6, False, False) == 1.0


def test_stretch_has_a_limit():
    assert stretch_for_end_cell(40, 1e6, 1e-9, True, False) == pytest.approx(LARGEST_STRETCH)


@pytest.mark.parametrize("ends", ENDS)
def test_few_cells_do_not_grow_out_of_all_proportion(ends):
    size = np.diff(graded_map(stretch_for_end_cell(8, 1.0, 1e-6, *ends), *ends)(np.arange(9) / 8))
    growth = size[1:] / size[:-1]
    assert 2.0 < max(growth.max(), 1.0 / growth.min()) <= LARGEST_GROWTH


def test_longer_lines_and_graded_ends_deserve_more_cells():
    assert length_weight(1.0, 0.003, 1) > length_weight(0.1, 0.003, 1)
    assert length_weight(1.0, 0.003, 2) > length_weight(1.0, 0.003, 0) > 0.0
    # ten times as long is one decade more, not ten times as much
    assert length_weight(10.0, 0.003, 1) < 1.5 * length_weight(1.0, 0.003, 1)
