"""The fields as a rectilinear grid that VTK readers open: x = z, y = r, all as cell data in SI units.

Written by hand in the published XML format: the library that could do it takes a second to import.
"""

from __future__ import annotations

import struct
import zlib
from pathlib import Path
from typing import Any
from xml.sax.saxutils import quoteattr

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
    arrays = []
    for name, values in cell_arrays(fields, outlet_pressure).items():
        # readers count cells with the first axis running fastest; ours has the radius running fastest
        arrays.append((name, values.transpose(1, 0, 2) if values.ndim == 3 else values.T))
    nodes = [np.asarray(fields["z_faces"], float), np.asarray(fields["r_faces"], float), np.zeros(1)]
    blocks: list[bytes] = []
    cells = "".join(_array(name, values, values.ndim == 3, blocks) for name, values in arrays)
    places = "".join(_array(name, values, False, blocks) for name, values in zip("xyz", nodes, strict=True))
    extent = f"0 {len(nodes[0]) - 1} 0 {len(nodes[1]) - 1} 0 0"
    head = (
        '<?xml version="1.0"?>\n'
        '<VTKFile type="RectilinearGrid" version="1.0" byte_order="LittleEndian" header_type="UInt64" '
        'compressor="vtkZLibDataCompressor">\n'
        f'<RectilinearGrid WholeExtent="{extent}">\n<Piece Extent="{extent}">\n'
        f"<CellData>\n{cells}</CellData>\n<Coordinates>\n{places}</Coordinates>\n"
        '</Piece>\n</RectilinearGrid>\n<AppendedData encoding="raw">\n_'
    )
    path.write_bytes(head.encode() + b"".join(blocks) + b"\n</AppendedData>\n</VTKFile>\n")


def _array(name: str, values: np.ndarray, is_vector: bool, blocks: list[bytes]) -> str:
    """The element of one array; its numbers are appended to `blocks`, as one compressed block behind its sizes."""
    whole = values.dtype.kind in "iu"
    data = np.ascontiguousarray(values, "<i8" if whole else "<f8").tobytes()
    packed = zlib.compress(data, 1)
    offset = sum(len(block) for block in blocks)
    blocks.append(struct.pack("<4Q", 1, len(data), 0, len(packed)) + packed)
    return (
        f'<DataArray type="{"Int64" if whole else "Float64"}" Name={quoteattr(name)} '
        f'NumberOfComponents="{3 if is_vector else 1}" format="appended" offset="{offset}"/>\n'
    )
