"""What the mesh errors do to the curves."""

import numpy as np

from axicfd.results.result import _blank_where_unknown


def test_no_nusselt_number_where_wall_and_bulk_are_within_three_bars():
    columns = {
        "wetted_wall_temperature_K": np.array([300.0, 300.0, 300.0]),
        "bulk_temperature_K": np.array([299.0, 299.9, 299.99]),
        "nusselt": np.array([4.0, 5.0, 60.0]),
        "heat_transfer_coefficient_W_m2K": np.array([40.0, 50.0, 600.0]),
    }
    bars = {name: np.full(3, 0.01) for name in columns}
    _blank_where_unknown(columns, bars)
    for table in (columns, bars):
        for name in ("nusselt", "heat_transfer_coefficient_W_m2K"):
            assert np.isnan(table[name]).tolist() == [False, False, True]
    assert not np.isnan(columns["bulk_temperature_K"]).any()
