"""The counting behind validation/bars: limits, scales, what can be judged, and draws that repeat themselves."""

import math

import pytest

from validation.bars import study
from validation.bars.random_cases import drawn
from validation.bars.study import Triple


def triple(values, limit, known_to=0.0, quantity="stream.liquid.pressure_drop_Pa", spacing=math.nan):
    return Triple("smooth", "one", 10_000, 9_984, quantity, tuple(values), spacing, 2.0, limit, known_to)


def test_limit_of_second_order_is_exact():
    value, known_to = study.limit([1.0 + 4.0**-k for k in range(4)])
    assert value == pytest.approx(1.0, abs=1e-14)
    assert known_to == pytest.approx(0.1 * 4.0**-3)


def test_limit_of_first_order_is_exact():
    value, _ = study.limit([1.0 + 2.0**-k for k in range(4)])
    assert value == pytest.approx(1.0, abs=1e-14)


def test_limit_of_what_alternates_is_the_finest_value_known_to_its_changes():
    assert study.limit([1.0, 1.2, 1.1, 1.15]) == pytest.approx((1.15, 0.05))


def test_a_blunt_limit_tells_only_against_a_bar():
    values = [1.16, 1.04, 1.01]  # printed: 1.000 with a bar of 0.00125
    assert study.judged([triple(values, 1.0005, known_to=0.001)]) == []
    (one,) = study.judged([triple(values, 1.01, known_to=0.001)])
    assert not one.inside
    (one,) = study.judged([triple(values, 1.0005, known_to=0.0001)])
    assert one.inside


def test_a_place_is_known_to_its_cell():
    (one,) = study.judged([triple([0.5, 0.5, 0.5], 0.53, quantity="layer.wall0.hottest_z_m", spacing=0.04)])
    assert one.inside and one.bar == 0.04


def test_counts():
    of = study.judged([triple([1.16, 1.04, 1.01], 1.001), triple([1.16, 1.04, 1.01], 1.002)])
    found = study.count(of)
    assert (found.triples, found.inside) == (2, 0.5)
    assert found.over_error == pytest.approx(0.5 * (1.25 + 0.625))
    assert found.half == pytest.approx(0.00125 / 2.0)


def test_rows_come_back_from_their_file(tmp_path):
    rows = [triple([1.16, 1.04, 1.01], 1.0 / 3.0, 1e-5), triple([1.0, 2.0, 3.0, 4.0], 5.0)]
    study.write(tmp_path / "rows.csv", rows)
    assert str(study.read(tmp_path / "rows.csv")) == str(rows)  # nan is not equal to itself


def test_draws_repeat_themselves():
    assert drawn(3) == drawn(3)
    assert drawn(3) != drawn(4)
