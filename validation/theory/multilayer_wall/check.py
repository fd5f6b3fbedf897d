"""Walls of several layers: exact for constant conductivity, second order for one linear in temperature."""

from functools import lru_cache
from math import log, pi
from pathlib import Path

import numpy as np

from axicfd.case.layout import layout
from axicfd.case.read import load
from axicfd.mesh.build import family
from axicfd.pipeline import solve
from axicfd.solver.solve import solve_on
from axicfd.theory.conduction import Shell, Side, solve_shells
from validation import plots
from validation.common import Row

HERE = Path(__file__).parent
T0, SLOPE, K0 = 293.15, 0.01, 0.5  # kirchhoff.toml: k = K0 (1 + SLOPE (T - T0))
OUTER = 303.15  # K, its outside
LEVELS = (3, 2, 1, 0)  # the tool's own mesh is 0; each next one halves all cells
SHELLS = "closed form (shells in series; theory/conduction.py)"


def temperatures(solution, j: int) -> tuple[np.ndarray, np.ndarray]:
    """Node and both face temperatures of the ring of cells j, at mid length [K]: (3,) radii and values."""
    grid, heat, i = solution.grid, solution.heat, solution.grid.nz // 2
    radii = np.array([grid.r[j], grid.rc[j], grid.r[j + 1]])
    return radii, np.array([heat.plus[i, j], heat.t[i, j], heat.minus[i, j + 1]]) + T0


@lru_cache
def wall():
    return solve(load(HERE / "wall.toml"))


def exact_wall():
    """The shells of wall.toml and their exact temperature."""
    result = wall()
    layers = [p for p in result.layout.sections[0].layers if p.kind == "solid"]
    shells = [
        Shell(
            p.r_inner,
            p.r_outer,
            float(result.case.solid_of(p.material).conductivity_r(T0)),
            p.contact_resistance,
            p.heat_per_volume,
        )
        for p in layers
    ]
    outside = result.layout.sections[0].outside
    return layers, solve_shells(shells, Side(), Side(outside.ambient, 1.0 / outside.film_coefficient))


def wall_rows() -> list[Row]:
    solution = wall().solution
    layers, exact = exact_wall()
    grid = solution.grid
    span = exact.temperature(0, layers[0].r_inner) - 298.15
    rows = []
    for k, layer in enumerate(layers):
        j0, j1 = np.searchsorted(grid.rc, [layer.r_inner, layer.r_outer])
        worst, found, want = -1.0, np.nan, np.nan
        for j in range(j0, j1):
            radii, values = temperatures(solution, j)
            expected = exact.temperature(k, radii)
            m = int(np.argmax(np.abs(values - expected)))
            if abs(values[m] - expected[m]) > worst:
                worst, found, want = abs(values[m] - expected[m]), values[m], float(expected[m])
        name = f"temperature [K] in layer {layer.name!r}, the worst of its cells and faces"
        rows.append(Row(name, found, want, 1e-10, SHELLS, scale=span))
    length = wall().layout.length
    out = -wall().summary["section"]["all"]["heat_in_W"] / length
    rows.append(
        Row("heat to the outside [W/m]", out, exact.heat_outer(len(layers) - 1), 1e-10, "sum of the generation")
    )
    return rows


def potential(T: float) -> float:
    return K0 * ((T - T0) + 0.5 * SLOPE * (T - T0) ** 2)


def exact_kirchhoff(r: np.ndarray, heat: float, source: float, r_inner: float, r_outer: float) -> np.ndarray:
    """T at radii r of a wall that takes `heat` [W/m] at its inner face and generates `source` [W/m3].

    The potential, integral of k dT, obeys the equation of a wall of conductivity 1.
    """
    inside = heat - source * pi * r_inner**2
    rise = inside * np.log(r_outer / r) / (2 * pi) + source * (r_outer**2 - r**2) / 4
    theta = (potential(OUTER) + rise) / K0
    return T0 + (np.sqrt(1 + 2 * SLOPE * theta) - 1) / SLOPE


@lru_cache
def kirchhoff(generates: bool, level: int):
    """(radii, found, expected) of the wall on one mesh."""
    case = load(HERE / "kirchhoff.toml")
    if not generates:
        case = case.replace({"layer.wall.heat_per_volume": 0.0})
    place = layout(case)
    solution = solve_on(case, family(case, place).grid(level), None, 1e-12)
    foil, layer = [p for p in place.sections[0].layers if p.kind == "solid"]
    heat = foil.heat_per_volume * pi * (foil.r_outer**2 - foil.r_inner**2)
    j0, j1 = np.searchsorted(solution.grid.rc, [layer.r_inner, layer.r_outer])
    columns = [temperatures(solution, j) for j in range(j0, j1)]
    # all nodes and both surfaces; faces between two nodes of one material are interpolated for output only
    radii = np.array([columns[0][0][0], *(c[0][1] for c in columns), columns[-1][0][2]])
    found = np.array([columns[0][1][0], *(c[1][1] for c in columns), columns[-1][1][2]])
    expected = exact_kirchhoff(radii, heat, layer.heat_per_volume, layer.r_inner, layer.r_outer)
    return radii, found, expected


def largest_error(level: int) -> float:
    _, found, expected = kirchhoff(True, level)
    return float(np.abs(found - expected).max() / (expected.max() - OUTER))


def check() -> list[Row]:
    rows = wall_rows()
    _, found, expected = kirchhoff(False, 0)
    k = int(np.argmax(np.abs(found - expected)))
    rows.append(
        Row("temperature [K], k linear in T, no source, the worst node or surface", found[k], expected[k], 1e-8,
            "closed form (Kirchhoff 1894)", scale=expected.max() - OUTER,
            note="exact too: k at the mean of two temperatures is its mean over them")
    )  # fmt: skip
    _, found, expected = kirchhoff(True, 0)
    rows.append(
        Row("bore temperature [K], k linear in T and a source, the tool's mesh", found[0], expected[0], 1e-3,
            "closed form (Kirchhoff 1894)", scale=expected.max() - OUTER)
    )  # fmt: skip
    for coarse, fine in zip(LEVELS[:-1], LEVELS[1:], strict=True):
        order = log(largest_error(coarse) / largest_error(fine)) / log(2)
        rows.append(
            Row(f"order of the largest error, k linear in T and a source, halving {coarse} to {fine}", order, 2.0, 0.1,
                "second order", note="the tool's own mesh is 0")
        )  # fmt: skip
    return rows


def picture(folder: Path) -> None:
    with plots.picture(folder / "walls.png", 2, 5.2) as (left, right):
        layers, exact = exact_wall()
        solution = wall().solution
        for k, layer in enumerate(layers):
            r = np.linspace(layer.r_inner, layer.r_outer, 60)
            left.plot(1e3 * r, exact.temperature(k, r) - 273.15, **plots.EXPECTED)
            j0, j1 = np.searchsorted(solution.grid.rc, [layer.r_inner, layer.r_outer])
            points = [temperatures(solution, j) for j in range(j0, j1)]
            left.plot(
                1e3 * np.concatenate([p[0] for p in points]), np.concatenate([p[1] for p in points]) - 273.15, ".",
                color=plots.COLOURS[0], ms=4,
            )  # fmt: skip
        left.set(
            xlabel="radius [mm]", ylabel="temperature [°C]", title="Constant conductivities, two contacts, two sources"
        )
        sizes = [8 * 2.0**-level for level in LEVELS]
        errors = [100 * largest_error(level) for level in LEVELS]
        right.loglog(sizes, errors, "o-", color=plots.COLOURS[0], label="largest error")
        right.loglog(sizes, [errors[0] * (sizes[0] / s) ** 2 for s in sizes], "--", color="0.5", label="second order")
        right.set_xticks(sizes, [f"1/{2**level}" if level else "1" for level in LEVELS])
        right.set_yticks([0.02, 0.05, 0.1, 0.2, 0.5], ["0.02", "0.05", "0.1", "0.2", "0.5"])
        right.minorticks_off()
        right.set(xlabel="cells per direction / those of the tool's mesh", ylabel="error [% of the span]",
                  title="Conductivity linear in temperature")  # fmt: skip
        right.legend()
