import numpy as np

from axicfd.output import vtr
from tests.output.made_up import made_up


def test_cells_land_at_their_place_in_the_file(tmp_path):
    import pyvista

    result = made_up()
    path = tmp_path / "fields.vtr"
    fields = {**result.fields, "property.viscosity_Pa_s": np.full_like(result.fields["T"], 0.5)}
    vtr.write_fields(path, fields, {"syrup": 101325.0})
    grid = pyvista.read(path)
    assert grid.n_cells == result.fields["T"].size
    centres = grid.cell_centers().points
    nz, nr = result.fields["T"].shape
    i, j = 41, 13
    cell = i + j * nz  # z runs fastest in the file
    z, r = result.fields["z_faces"], result.fields["r_faces"]
    assert np.allclose(centres[cell], [(z[i] + z[i + 1]) / 2, (r[j] + r[j + 1]) / 2, 0])
    assert grid.cell_data["temperature_K"][cell] == result.fields["T"][i, j] + 293.15
    assert grid.cell_data["material"][cell] == 1
    assert np.isnan(grid.cell_data["pressure_Pa"][cell])
    assert grid.cell_data["viscosity_Pa_s"][cell] == 0.5


def test_face_velocities_are_averaged_onto_cells():
    fields = dict(made_up().fields)
    nz = fields["T"].shape[0]
    fields["u.syrup"] = np.repeat(np.arange(nz + 1.0)[:, None], 12, axis=1)
    fields["v.syrup"] = np.tile(np.arange(13.0), (nz, 1))
    velocity = vtr.cell_arrays(fields, {"syrup": 0.0})["velocity_m_s"]
    assert np.array_equal(velocity[:, 0, 0], np.arange(nz) + 0.5)
    assert np.array_equal(velocity[0, :12, 1], np.arange(12) + 0.5)
    assert not velocity[:, 12:].any()


def test_nothing_has_no_temperature():
    fields = dict(made_up().fields)
    fields["material"] = fields["material"].copy()
    fields["material"][:, 12:] = -1
    assert np.isnan(vtr.cell_arrays(fields, {"syrup": 0.0})["temperature_K"][:, 12:]).all()
