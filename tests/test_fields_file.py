"""The residual of a solved case, recomputed from its results folder alone by the slow plain twins.

Only the laws of the materials are taken from the package; equations, geometry and boundary values are the twins' own.
"""

import numpy as np
import pytest

from axicfd.case.read import load
from axicfd.output import folder
from axicfd.pipeline import solve
from tests.reference.plain_energy import PlainEnergy
from tests.reference.plain_flow import PlainFlow

CASE = "cases/heater-band.toml"


@pytest.fixture(scope="module")
def stored(tmp_path_factory):
    case = load(CASE).replace({"mesh.radial": 16, "mesh.axial": 96})
    target = tmp_path_factory.mktemp("folder") / "band"
    result = solve(case)
    assert result.converged
    folder.write(result, target, replace=False)
    with np.load(target / "fields.npz", allow_pickle=False) as file:
        return load(target / "case.toml"), {name: file[name] for name in file.files}, result.summary["residual"]


def test_momentum_and_mass(stored):
    case, f, residual = stored
    fluid, t_in = case.fluid_of("sample"), float(f["inlet_temperature"])
    z, r, t = f["z_faces"], f["r_faces"], f["T"]
    nz, nr = f["p.sample"].shape
    zc, rc = (z[1:] + z[:-1]) / 2, (r[1 : nr + 1] + r[:nr]) / 2
    # temperatures where stresses live: straight lines between nodes, the wall's own temperature at the wall
    radial = np.empty((nz, nr + 1))
    radial[:, 0], radial[:, nr] = t[:, 0], f["T_inner_side"][:, nr]
    for j in range(1, nr):
        share = (r[j] - rc[j - 1]) / (rc[j] - rc[j - 1])
        radial[:, j] = (1 - share) * t[:, j - 1] + share * t[:, j]
    corner = np.array([np.interp(z, zc, radial[:, j]) for j in range(nr + 1)]).T
    rho = float(fluid.density(t_in))
    mu_corner = fluid.viscosity(corner + t_in)
    plain = PlainFlow(
        z, r[: nr + 1], np.ones((nz, nr)), rho, f["u.sample"], f["v.sample"], f["p.sample"],
        fluid.viscosity(t[:, :nr] + t_in), mu_corner, fluid.viscosity(radial + t_in),
    )  # fmt: skip
    ru, rv, rc_ = plain.residuals()
    u, ring = f["u.sample"], np.pi * (r[1 : nr + 1] ** 2 - r[:nr] ** 2)
    lengths = np.diff(np.concatenate([z[:1], zc, z[-1:]]))
    friction = mu_corner[:, nr] * u[:, -1] / (r[nr] - rc[-1]) * 2 * np.pi * r[nr] * lengths
    scale = (rho * u[0] ** 2 * ring).sum() + np.abs(friction).sum()
    flow = (rho * u[0] * ring).sum()
    assert np.abs(ru).sum() / scale < 1e-8
    assert np.abs(rv).sum() / scale < 1e-8
    assert np.abs(rc_).sum() / flow < 1e-10
    # and it is the number that the summary states, not one far below it
    assert max(np.abs(ru).sum(), np.abs(rv).sum()) / scale > 0.2 * residual


def test_energy(stored):
    case, f, _ = stored
    fluid, steel = case.fluid_of("sample"), case.solid_of("stainless steel 316")
    t_in, t = float(f["inlet_temperature"]), f["T"]
    z, r, (nz, nrs) = f["z_faces"], f["r_faces"], f["p.sample"].shape
    nr = t.shape[1]
    minus, plus = f["T_inner_side"], f["T_outer_side"]
    is_stream = f["material"] == list(f["material_names"]).index("stream:sample")

    def conductivity(cell, other):
        i, j = cell
        law = fluid.conductivity if is_stream[i, j] else steel.conductivity_r
        if other is None:  # towards the outer surface
            return float(law((t[i, j] + minus[i, nr]) / 2 + t_in))
        if is_stream[other] == is_stream[cell]:
            return float(law((t[cell] + t[other]) / 2 + t_in))
        face = minus[i, j + 1] if other[1] > j else plus[i, j]
        return float(law((t[cell] + face) / 2 + t_in))

    dz = np.diff(z)
    rho = float(fluid.density(t_in))
    mz, mr = np.zeros((nz + 1, nr)), np.zeros((nz, nr + 1))
    mz[:, :nrs] = rho * f["u.sample"] * np.pi * (r[1 : nrs + 1] ** 2 - r[:nrs] ** 2)
    mr[:, : nrs + 1] = rho * f["v.sample"] * 2 * np.pi * r[: nrs + 1] * dz[:, None]
    joints = [int(np.argmin(np.abs(z - place))) for place in (0.0, 0.08, 0.14)]
    band = case.section[1]
    inside = (0.5 * (z[1:] + z[:-1]) > 0.08) & (0.5 * (z[1:] + z[:-1]) < 0.14)
    plain = PlainEnergy(
        z, r, np.where(is_stream, 1, 2), t, conductivity, conductivity,
        contact=np.zeros((nz, nr + 1)), source=np.zeros((nz, nr)), extra=f["volume_heat"], mz=mz, mr=mr,
        h=lambda x: float(fluid.specific_heat.integral(t_in, t_in + x)),
        inflow_first=np.zeros(nr), inflow_last=np.zeros(nr),
        upwind={i + k for i in joints for k in (-2, -1, 0, 1, 2)},
        flux=np.where(inside, band.outside.heat / (np.pi * 2 * r[-1] * 0.06), 0.0),
        surroundings=np.full(nz, band.outside.ambient - t_in),
        film=[1 / band.outside.film_coefficient if i else None for i in inside],
        outer=np.full(nz, nr),
        capacity=float(fluid.specific_heat(t_in)),
    )  # fmt: skip
    left = np.abs(plain.residual()).sum()
    assert left / band.outside.heat < 1e-8
