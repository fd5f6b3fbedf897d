import numpy as np
import pytest

from axicfd.output import csv


def test_round_trip_keeps_every_digit_and_the_gaps(tmp_path):
    path = tmp_path / "table.csv"
    numbers = np.array([1 / 3, np.nan, -1e-300])
    csv.write_columns(path, {"z_m": numbers, "layer": ["a", "b", "c"], "reverse": np.array([0, 1, 0])})
    assert path.read_text().splitlines()[:3] == ["z_m,layer,reverse", "0.3333333333333333,a,0", ",b,1"]
    back = csv.read_columns(path)
    assert np.array_equal(back["z_m"], numbers, equal_nan=True)
    assert back["layer"] == ["a", "b", "c"]


def test_columns_of_unequal_length_are_refused(tmp_path):
    with pytest.raises(ValueError):
        csv.write_columns(tmp_path / "table.csv", {"a": [1, 2], "b": [1]})


def test_no_value_is_an_empty_cell(tmp_path):
    path = tmp_path / "table.csv"
    csv.write_columns(path, {"a": [None, 1.5], "b": [float("nan"), float("nan")]})
    assert path.read_text() == "a,b\n,\n1.5,\n"
    assert np.isnan(csv.read_columns(path)["b"]).all()
