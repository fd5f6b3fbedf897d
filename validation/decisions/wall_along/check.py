"""What conduction along the wall changes from place to place, under a uniform flux."""

import math
from functools import lru_cache
from pathlib import Path

import numpy as np

from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.theory import duct_heat, groups
from axicfd.variants.wall import ACROSS_ONLY, WallEffect, wall_effect
from validation import plots
from validation.common import Row, table
from validation.published.conjugate_flux import check as conjugate

TUBE = Path(conjugate.HERE) / "tube.toml"
SOURCE = f"{conjugate.TABLE}, variant b (finite elements), minus the Graetz series"
CLOSED = "conjugate_1d_closed_form.csv"
SERIES = "Graetz series, uniform flux (theory/duct_heat)"
WALL, FLUX = "wetted_wall_temperature_K", "wall_heat_flux_W_m2"
COMPARED = {WALL: "wall temperature", FLUX: "wall flux"}
# Tubes of the closed form: (N, M) of its table; long and slender, so that the flow is developed and the wall thin
LONG = (20.0, 0.01), (20.0, 0.03), (20.0, 0.1)
LONG_PECLET, LONG_OUTER = 50.0, 1.1
LONG_PLACES = {"at 0.1": 0.1, "at 0.5": 0.5, "at 0.9": 0.9}


@lru_cache
def found(groups_: tuple[float, ...]) -> WallEffect:
    return wall_effect(case(groups_), layer="wall")


def case(groups_: tuple[float, ...]) -> Case:
    """The tube of the published problem: the stream alone, then the wall."""
    peclet, ratio, outer, slenderness = groups_
    changes = {
        "stream.liquid.mean_velocity": peclet * conjugate.DIFFUSIVITY / conjugate.DIAMETER,
        "solid.wall.conductivity": ratio * conjugate.CONDUCTIVITY,
        "layer.wall.thickness": (outer - 1) * conjugate.DIAMETER / 2,
        "section.before.length": before(peclet),
        "section.heated.length": slenderness * conjugate.DIAMETER,
    }
    return load(TUBE).replace(changes)


def before(peclet: float) -> float:
    return (3 + 30 / peclet) * conjugate.DIAMETER


def curve(groups_: tuple[float, ...], column: str, places: np.ndarray) -> np.ndarray:
    """The difference of a column at x/L, in units of the table."""
    reference = conjugate.FLUX * groups_[2]
    unit = reference * conjugate.DIAMETER / 2 / conjugate.CONDUCTIVITY if column == WALL else reference
    (c,) = [c for c in found(groups_).axial.curves if c.column == column]
    x = (c.z - before(groups_[0])) / (groups_[3] * conjugate.DIAMETER)
    here = x > 1e-9
    return np.interp(places, x[here], c.difference[here] / unit)


def expected(groups_: tuple[float, ...]) -> dict[str, np.ndarray]:
    """x/L and the table's differences from a wall that only resists across, which under a given flux is none."""
    want = conjugate.expected(groups_)
    series = 2 * duct_heat.wall_H(want["x/L"] * groups_[3] / groups_[0])
    return {"x/L": want["x/L"], WALL: want["T_wi"] - series, FLUX: want["q_i/q_ref"] - 1.0}


def check() -> list[Row]:
    return [*_against_the_table(), *_against_the_series(), *_against_the_closed_form()]


def _against_the_table() -> list[Row]:
    """Per tube and quantity the place that deviates most, as a share of the largest difference along the tube."""
    rows = []
    for groups_ in conjugate.CASES:
        want = expected(groups_)
        for column, words in COMPARED.items():
            got = curve(groups_, column, want["x/L"])
            largest = float(np.abs(want[column]).max())
            k = int(np.argmax(np.abs(got - want[column])))
            what = f"difference in {words} at x/L {want['x/L'][k]:g}, the worst; {conjugate.title(groups_)}"
            negligible = found(groups_).number < groups.AXIAL_CONDUCTION_LIMIT
            note = "the fluid's own axial conduction, which the series lacks, is as large as the wall's" * negligible
            rows.append(Row(what, got[k], want[column][k], None if negligible else 0.02, SOURCE, largest, note))
    return rows


def _against_the_series() -> list[Row]:
    """A wall that only resists across, and a stream that conducts nothing along: the series, exactly."""
    rows = []
    for peclet in (50.0, 1000.0):
        groups_ = (peclet, 100.0, 1.2, 20.0)
        off = case(groups_).replace({"physics.axial_conduction_in_streams": False})
        columns = wall_effect(off, layer="wall").results[ACROSS_ONLY].axial["liquid"]
        x = (columns["z_m"] - before(peclet)) / (20.0 * conjugate.DIAMETER)
        inside = (x > 0.02) & (x < 0.98)
        unit = conjugate.FLUX * 1.2 * conjugate.DIAMETER / conjugate.CONDUCTIVITY
        got = (columns[WALL][inside] - conjugate.INLET) / unit
        want = duct_heat.wall_H(x[inside] * 20.0 / peclet)
        k = int(np.argmax(np.abs(got / want - 1)))
        what = f"wall temperature, radial resistance only, at x/L {x[inside][k]:.2g}, the worst; Pe {peclet:g}"
        rows.append(Row(what, got[k], want[k], 2e-3, SERIES))
    return rows


def long_tube(n: float, m: float) -> tuple[float, ...]:
    """Groups of the tube with N = 4 Nu L / (D Pe), Nu = 48/11, and M = k (r_o^2 / r_i^2 - 1) / (Pe L / D)."""
    slenderness = n * LONG_PECLET / (4 * duct_heat.NU_H)
    ratio = m * LONG_PECLET * slenderness / (LONG_OUTER**2 - 1)
    return LONG_PECLET, ratio, LONG_OUTER, slenderness


def _against_the_closed_form() -> list[Row]:
    rows = []
    lines = {(float(r["N=h P_i L/(m cp) [-]"]), float(r["M=k_w A_w/(L m cp) [-]"])): r for r in table(CLOSED)}
    for n, m in LONG:
        groups_ = long_tube(n, m)
        assert math.isclose(found(groups_).number, m, rel_tol=1e-9)
        line = lines[n, m]
        largest = max(abs(float(v) - 1) for key, v in line.items() if key[0] not in "NM" or key.startswith("at"))
        for key, place in LONG_PLACES.items():
            got = float(curve(groups_, FLUX, np.array([place]))[0])
            what = f"difference in wall flux at x/L {place:g}; N {n:g}, M {m:g}, L/D {groups_[3]:.3g}"
            rows.append(Row(what, got, float(line[key]) - 1, 0.02, CLOSED, largest))
    return rows


def picture(folder: Path) -> None:
    with plots.picture(folder / "differences.png", 2, 5.2) as (left, right):
        for k, groups_ in enumerate(((50, 100, 1.2, 20), (50, 100, 2, 20), (200, 650, 2, 20))):
            want = expected(groups_)
            x = np.linspace(0.005, 0.995, 400)
            for axes, column in ((left, FLUX), (right, WALL)):
                axes.plot(x, curve(groups_, column, x), color=plots.COLOURS[k], label=conjugate.title(groups_))
                axes.plot(want["x/L"], want[column], "o", color=plots.COLOURS[k], mfc="none")
        left.set(ylabel="flux into the stream, change over mean flux", ylim=(-1, 3))
        right.set(ylabel="bore temperature, change k_f / (q_ref R)", ylim=(-0.5, 1.5))
        left.legend(title="rings: table minus Graetz series", fontsize=9)
        for axes in (left, right):
            axes.set(xlabel="x / L", xlim=(0, 1))
