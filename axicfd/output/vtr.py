"""The fields as a rectilinear grid that VTK readers open: x = z, y = r, all as cell data in SI units."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np

# Fields of this prefix are cell arrays of material properties and go into the file under their bare name.
PROPERTY = "property."


def cell_arrays(fields: dict[str, Any], outlet_pressure: dict[str, float]) -> dict[str, np.ndarray]:
    """Cell values of everything worth looking at.

    fields          : the arrays of fields.npz
    outlet_pressure : stream name -> [Pa], added to the pressure in motion
    Returns temperature_K, pressure_Pa, material (nz, nr), velocity_m_s (nz, nr, 3) as (axial, radial, 0), and
    the properties that the fields carry. Outside streams pressure is nan and velocity zero; where there
    is no material the temperature is nan. Face velocities are averaged onto the cells they bound.
    """
    material = np.asarray(fields["material"])
    temperature = np.where(material >= 0, fields["T"] + float(fields["inlet_temperature"]), np.nan)
    pressure = np.full(material.shape, np.nan)
    velocity = np.zeros((*material.shape, 3))
    for name, outlet in outlet_pressure.items():
        u, v, p = fields[f"u.{name}"], fields[f"v.{name}"], fields[f"p.{name}"]
        first = int(fields[f"j0.{name}"])
        across = slice(first, first + u.shape[1])
        pressure[:, across] = p + outlet
        velocity[:, across, 0] = (u[1:] + u[:-1]) / 2
        velocity[:, across, 1] = (v[:, 1:] + v[:, :-1]) / 2
    arrays = {
        "temperature_K": temperature,
        "pressure_Pa": pressure,
        "velocity_m_s": velocity,
        "material": material,
    }
    for key, values in fields.items():
        if key.startswith(PROPERTY):
            arrays[key.removeprefix(PROPERTY)] = np.asarray(values)
    return arrays


def write_fields(path: Path, fields: dict[str, Any], outlet_pressure: dict[str, float]) -> None:
    """Write `cell_arrays` of the fields to a .vtr file."""
    # the writer alone, without the rest of its library, which takes a second longer to import
    from vtkmodules.util.numpy_support import numpy_to_vtk
    from vtkmodules.vtkCommonDataModel import vtkRectilinearGrid
    from vtkmodules.vtkIOXML import vtkXMLRectilinearGridWriter

    nodes = np.asarray(fields["z_faces"], float), np.asarray(fields["r_faces"], float), np.zeros(1)
    grid = vtkRectilinearGrid()
    grid.SetDimensions(*(len(along) for along in nodes))
    for put, along in zip((grid.SetXCoordinates, grid.SetYCoordinates, grid.SetZCoordinates), nodes, strict=True):
        put(numpy_to_vtk(along, deep=True))
    for name, values in cell_arrays(fields, outlet_pressure).items():
        # VTK counts cells with the first axis running fastest; ours has the radius running fastest.
        flat = values.transpose(1, 0, 2).reshape(-1, 3) if values.ndim == 3 else values.T.reshape(-1)
        array = numpy_to_vtk(np.ascontiguousarray(flat), deep=True)
        array.SetName(name)
        grid.GetCellData().AddArray(array)
    writer = vtkXMLRectilinearGridWriter()
    writer.SetFileName(str(path))
    writer.SetInputData(grid)
    if not writer.Write():
        raise OSError(f"{path} could not be written")
