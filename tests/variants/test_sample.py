import numpy as np

from axicfd.variants.sample import latin_hypercube


def test_each_input_has_one_point_in_each_strip():
    points = latin_hypercube(3, 20, 1)
    assert points.shape == (20, 3)
    for column in (np.sort(points, axis=0) * 20).T:
        assert np.floor(column).tolist() == list(range(20))


def test_the_seed_decides():
    assert np.array_equal(latin_hypercube(2, 5, 7), latin_hypercube(2, 5, 7))
    assert not np.array_equal(latin_hypercube(2, 5, 7), latin_hypercube(2, 5, 8))
