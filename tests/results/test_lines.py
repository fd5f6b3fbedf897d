"""Values between cells."""

import numpy as np
import pytest

from axicfd.results import lines

RNG = np.random.default_rng(3)
Z = np.concatenate([[0.0], np.cumsum(1.0 + RNG.random(12))])
ZC = 0.5 * (Z[1:] + Z[:-1])


def cubic(z):
    return 2.0 - z + 0.3 * z**2 - 0.01 * z**3


def test_a_cubic_comes_back_exactly_on_uneven_faces():
    before, after = lines.to_faces(cubic(ZC), ZC, Z, ())
    np.testing.assert_allclose(before, cubic(Z), rtol=1e-10)
    np.testing.assert_array_equal(before, after)


def test_a_break_keeps_both_sides_apart():
    """Two cubics with a jump between them; neither sees the other."""
    values = np.where(np.arange(12) < 5, cubic(ZC), 100.0 + ZC)
    before, after = lines.to_faces(values, ZC, Z, (5,))
    np.testing.assert_allclose(before[:6], cubic(Z[:6]), rtol=1e-9)
    np.testing.assert_allclose(after[5:], 100.0 + Z[5:], rtol=1e-10)
    assert before[5] == pytest.approx(cubic(Z[5])) and after[5] == pytest.approx(100.0 + Z[5])


def test_breaks_at_the_ends_change_nothing():
    plain, marked = lines.to_faces(cubic(ZC), ZC, Z, ()), lines.to_faces(cubic(ZC), ZC, Z, (0, 12))
    np.testing.assert_array_equal(plain, marked)


@pytest.mark.parametrize("cells", [1, 2, 3])
def test_short_stretches_use_what_they_have(cells):
    power = cells - 1
    before, after = lines.to_faces(ZC[:cells] ** power, ZC[:cells], Z[: cells + 1], ())
    np.testing.assert_allclose(before, Z[: cells + 1] ** power, atol=1e-12)


def test_to_the_axis_a_parabola_is_exact():
    rc = np.array([0.1, 0.35, 0.7])
    values = np.vstack([3.0 - 2.0 * rc**2, 1.0 + 5.0 * rc**2])
    np.testing.assert_allclose(lines.to_axis(values, rc), [3.0, 1.0], rtol=1e-12)
    assert lines.to_axis(np.array([[7.0]]), np.array([0.5]))[0] == 7.0


def test_to_the_first_plane_a_parabola_along_z_is_exact():
    values = np.column_stack([1.0 + ZC - 0.2 * ZC**2, 4.0 - ZC])
    np.testing.assert_allclose(lines.to_first_plane(values, ZC, 0.0), [1.0, 4.0], rtol=1e-10)


class TestLastCrossing:
    z = np.linspace(0.0, 10.0, 11)

    def test_between_stations_by_a_straight_line(self):
        assert lines.last_crossing(self.z, 10.0 - self.z, 2.5) == pytest.approx(7.5)

    def test_the_last_one_counts(self):
        """A velocity that overshoots is developed only after it came back."""
        deviation = np.array([9, 0, 0, 0, 4, 6, 2, 0, 0, 0, 0], dtype=float)
        assert lines.last_crossing(self.z, deviation, 1.0) == pytest.approx(6.5)

    def test_no_value_counts_as_far_away(self):
        deviation = np.array([np.nan, np.nan, 0.5, 0, 0, 0, 0, 0, 0, 0, 0])
        assert lines.last_crossing(self.z, deviation, 1.0) == 2.0

    def test_never_exceeded(self):
        assert lines.last_crossing(self.z + 3.0, np.zeros(11), 1.0) == 3.0

    def test_too_short(self):
        assert lines.last_crossing(self.z, self.z, 1.0) is None
        assert lines.last_crossing(self.z, np.append(np.zeros(10), np.nan), 1.0) is None


class TestExtreme:
    def test_a_parabola_between_stations(self):
        z = np.array([0.0, 1.0, 3.0, 4.0, 7.0])
        value, place = lines.extreme(z, 5.0 - 2.0 * (z - 2.6) ** 2, 1.0)
        assert (value, place) == (pytest.approx(5.0), pytest.approx(2.6))
        value, place = lines.extreme(z, 1.0 + (z - 2.6) ** 2, -1.0)
        assert (value, place) == (pytest.approx(1.0), pytest.approx(2.6))

    def test_at_an_end_the_value_itself(self):
        z = np.linspace(0.0, 1.0, 5)
        assert lines.extreme(z, z, 1.0) == (1.0, 1.0)
        assert lines.extreme(z, z, -1.0) == (0.0, 0.0)

    def test_at_a_joint_no_parabola_across_it(self):
        z = np.array([0.0, 1.0, 2.0, 2.0, 3.0])
        values = np.array([0.0, 2.0, 4.0, 1.0, 0.5])
        assert lines.extreme(z, values, 1.0) == (4.0, 2.0)

    def test_a_flat_top(self):
        assert lines.extreme(np.arange(4.0), np.array([0.0, 2.0, 2.0, 0.0]), 1.0)[0] >= 2.0


def test_at_a_place_by_the_cubic_of_its_own_side():
    values = np.where(np.arange(12) < 5, cubic(ZC), 100.0 + ZC)
    just_before, just_behind = Z[5] - 1e-9, Z[5] + 1e-9
    assert lines.at_place(values, ZC, Z, (5,), just_before) == pytest.approx(cubic(Z[5]), rel=1e-6)
    assert lines.at_place(values, ZC, Z, (5,), just_behind) == pytest.approx(100.0 + Z[5], rel=1e-6)
    assert lines.at_place(values, ZC, Z, (5,), 0.3) == pytest.approx(cubic(0.3), rel=1e-9)
    with_gap = np.where(np.arange(12) < 5, np.nan, ZC)
    assert np.isnan(lines.at_place(with_gap, ZC, Z, (5,), 0.3))


def test_at_a_break_the_stretch_before_it_counts():
    """A sensor where its layer ends used to read the section behind, which has no such layer."""
    z = np.linspace(0.0, 0.3, 7)
    zc = 0.5 * (z[1:] + z[:-1])
    values = np.where(zc < 0.15, 1.0 + zc, np.nan)
    for place in (z[3], 0.15, 0.15 * (1 + 1e-15)):
        assert lines.at_place(values, zc, z, (3,), place) == pytest.approx(1.15)
    assert np.isnan(lines.at_place(values, zc, z, (3,), 0.151))


def test_no_overshoot_at_the_ends_of_a_ramp():
    zc = np.linspace(0.0, 1.0, 41)
    z = np.concatenate([[-0.0125], 0.5 * (zc[1:] + zc[:-1]), [1.0125]])
    ramp = np.clip((zc - 0.41) / 0.2, 0.0, 1.0)
    before, after = lines.to_faces(ramp, zc, z, ())
    assert before.min() > -1e-12 and before.max() < 1.0 + 1e-12
    assert (before == after).all()


def test_a_smooth_extreme_between_two_stations_is_kept():
    zc = np.linspace(-1.0, 1.0, 40)  # no station at 0
    z = np.concatenate([[-1.1], 0.5 * (zc[1:] + zc[:-1]), [1.1]])
    before, _ = lines.to_faces(1.0 - zc**2, zc, z, ())
    assert before[20] == pytest.approx(1.0, abs=1e-12)
