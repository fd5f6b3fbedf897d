"""What manufactured solutions share: derivatives and integrals of exact fields, errors and orders.

A field is chosen, put into the equations, and what they lack is given to the solver as a source; the solver then has to
find the field. Sources are integrals over control volumes: the exact fluxes through their faces by Gauss quadrature,
so only first derivatives are needed, and these come from complex steps.
"""

from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from validation.common import Row
from validation.plots import COLOURS, picture

Array = np.ndarray
Field = Callable[[Array, Array], Array]  # of z, r [m]

STEP = 1e-30
POINTS, WEIGHTS = np.polynomial.legendre.leggauss(5)


def by_z(f: Field) -> Field:
    """df/dz to round-off: Im f(z + i h) / h (Squire & Trapp 1998, SIAM Rev. 40, 110)."""
    return lambda z, r: np.imag(f(z + 1j * STEP, r + 0j)) / STEP


def by_r(f: Field) -> Field:
    return lambda z, r: np.imag(f(z + 0j, r + 1j * STEP)) / STEP


def _nodes(faces: Array) -> tuple[Array, Array]:
    """Gauss points and weights of the stretches between faces; both (n, points)."""
    half, middle = 0.5 * np.diff(faces)[:, None], 0.5 * (faces[1:] + faces[:-1])[:, None]
    return middle + half * POINTS, half * WEIGHTS


def through_axial(f: Field, z: Array, r: Array) -> Array:
    """(len(z), len(r) - 1) integrals of f over the rings between r, in the planes z."""
    at, w = _nodes(r)
    values = np.real(f(z[:, None, None], at[None]))
    return (values * (w * 2.0 * np.pi * at)).sum(axis=2)


def through_radial(f: Field, z: Array, r: Array) -> Array:
    """(len(z) - 1, len(r)) integrals of f over the cylinders r between the planes z."""
    at, w = _nodes(z)
    values = np.real(f(at[:, None, :], np.broadcast_to(r[None, :, None], (len(at), len(r), len(POINTS)))))
    return (values * w[:, None, :]).sum(axis=2) * 2.0 * np.pi * r


def inside(f: Field, z: Array, r: Array) -> Array:
    """(len(z) - 1, len(r) - 1) integrals of f over the rings between z and r."""
    az, wz = _nodes(z)
    ar, wr = _nodes(r)
    values = np.real(f(az[:, None, :, None], ar[None, :, None, :]))
    return np.einsum("ijab,ia,jb->ij", values, wz, wr * 2.0 * np.pi * ar)


def net_outflow(axial: Array, radial: Array) -> Array:
    """Of each control volume, from what passes its axial and radial faces towards rising z and r."""
    return np.diff(axial, axis=0) + np.diff(radial, axis=1)


@dataclass(frozen=True)
class Errors:
    """Errors of one quantity on nested meshes, coarsest first.

    cells        : (n,) cells along r
    mean, largest: (n,) root mean square over the volume (or length), and largest size; both over the quantity's scale
    why          : why an order is only shown, by norm
    """

    name: str
    cells: Array
    mean: Array
    largest: Array
    why: dict[str, str] = field(default_factory=dict)

    def orders(self, norm: str) -> Array:
        e = getattr(self, norm)
        return np.log2(e[:-1] / e[1:])


def errors(
    name: str,
    cells: list[int],
    found: list[Array],
    exact: list[Array],
    weight: list[Array],
    why: dict[str, str] | None = None,
) -> Errors:
    """Over the largest size of the exact values on the finest mesh."""
    scale = np.abs(exact[-1]).max()
    mean, largest = [], []
    for a, b, w in zip(found, exact, weight, strict=True):
        w = np.broadcast_to(w, np.shape(a))
        mean.append(np.sqrt((w * (a - b) ** 2).sum() / w.sum()) / scale)
        largest.append(np.abs(a - b).max() / scale)
    return Errors(name, np.array(cells), np.array(mean), np.array(largest), why or {})


SOURCE = "second order: errors fall with the square of the cell size (Taylor's expansion)"


def rows(case: str, quantities: list[Errors]) -> list[Row]:
    """Orders of the finest pair of meshes: 1.9 to 2.3 in the mean, 1.8 to 2.4 of the largest error."""
    table = []
    for e in quantities:
        for norm, margin in (("mean", 0.2), ("largest", 0.3)):
            if norm == "mean" and len(set(e.mean / e.largest)) == 1:
                continue  # a single value has one error
            why = e.why.get(norm, "")
            what = f"{case}: order of {e.name}, {norm}"
            table.append(Row(what, e.orders(norm)[-1], 2.1, None if why else margin, SOURCE, 1.0, why))
    return table


def plot(path: Path, cases: dict[str, list[Errors]], names: tuple[str, ...] = (), norm: str = "largest") -> None:
    """Errors over cells, one panel per case; `names` chooses the quantities, in the order of the legend."""
    names = names or tuple(e.name for e in next(iter(cases.values())))
    looks = {name: (COLOURS[k % len(COLOURS)], "os^vDP<>"[k]) for k, name in enumerate(names)}
    with picture(path, len(cases), 4.2) as axes:
        lines = {}
        for panel, (case, quantities) in zip(axes, cases.items(), strict=True):
            shown = [e for e in quantities if e.name in looks]
            for e in shown:
                colour, mark = looks[e.name]
                (lines[e.name],) = panel.loglog(e.cells, 100.0 * getattr(e, norm), mark + "-", color=colour, ms=5)
            n = quantities[0].cells
            top = max(getattr(e, norm)[0] for e in shown) * 200.0
            ends = n[[0, -1]]
            (lines["second order"],) = panel.loglog(ends, top * (n[0] / ends) ** 2.0, "--", color="0.6")
            panel.set_xticks(n, [str(k) for k in n])
            panel.minorticks_off()
            panel.set(title=case, xlabel="cells across the stream")
            panel.title.set_fontsize(11)
        axes[0].set_ylabel("largest error [% of scale]")
        order = [name for name in (*names, "second order") if name in lines]
        axes[0].figure.legend([lines[k] for k in order], order, loc="outside lower center", ncols=4, fontsize=10)
