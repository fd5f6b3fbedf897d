"""Carrying fields between meshes."""

import numpy as np
import pytest

from axicfd.mesh.nest import carry


def test_a_bilinear_field_is_carried_exactly():
    z, r = np.array([0.0, 1.0, 3.0]), np.array([0.5, 2.0])
    z_to, r_to = np.linspace(0.1, 2.9, 7), np.linspace(0.6, 1.9, 5)

    def field(z, r):
        return 1.0 + 2.0 * z[:, None] - r + 0.5 * z[:, None] * r

    assert carry(field(z, r), z, r, z_to, r_to) == pytest.approx(field(z_to, r_to), rel=1e-14)


def test_values_hold_beyond_the_ends():
    found = carry(np.array([[1.0], [2.0]]), np.array([0.0, 1.0]), np.array([1.0]), np.array([-1.0, 5.0]), np.zeros(3))
    assert found == pytest.approx(np.array([[1.0] * 3, [2.0] * 3]))
    assert found.flags.c_contiguous
