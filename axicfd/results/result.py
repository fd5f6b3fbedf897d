"""Result: the case, its fields, curves and headline quantities; read-only."""

import math
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from axicfd.case.layout import Layout
from axicfd.case.model import Case
from axicfd.case.quantities import quantities, quantity, terms_of
from axicfd.errors import UnknownQuantity
from axicfd.mesh.build import Family
from axicfd.mesh.grid import NOTHING, frozen
from axicfd.results import accuracy, axial, cautions, limits, summary, uncertainty
from axicfd.solver.state import Solution

BARS_APART = 3.0  # half-widths by which wall and bulk temperature must differ for a Nusselt number to mean anything
WITH_BARS = "stream", "layer", "section", "sensor", "quantity"  # parts of the tree whose quantities get a mesh error


@dataclass(frozen=True, eq=False)
class Nested:
    """What was found on one of the nested meshes, never extrapolated.

    tree   : headline quantities, the parts `WITH_BARS` of summary.json
    curves : stream name -> columns of axial-STREAM.csv on the faces of this mesh
    """

    tree: dict[str, Any]
    curves: dict[str, dict[str, np.ndarray]]


@dataclass(frozen=True, eq=False)
class Result:
    """A solved case.

    summary : the tree of summary.json: `result.summary["stream"]["oil"]["outlet_temperature_K"]`
    axial   : stream name -> columns of axial-STREAM.csv; outside, radial: columns of those files
    fields  : arrays of fields.npz
    axial_half_width : half-widths of the mesh errors of the curves, same shape as `axial`; empty without nested meshes
    history : (mesh level, cells, iterations, residual) of every mesh climbed, coarsest first
    solution: everything the solver left on the finest mesh
    nested  : headline quantities and curves on each mesh that mesh errors come from, coarsest first; differences of
              two results are formed on each mesh before they are extrapolated
    floor   : least half-widths of what depends on the mesh
    meshes  : the family of these meshes; variants of the case are solved on the same counts and maps
    """

    case: Case
    layout: Layout
    version: str
    summary: dict[str, Any]
    axial: dict[str, dict[str, np.ndarray]]
    axial_half_width: dict[str, dict[str, np.ndarray]]
    outside: dict[str, np.ndarray]
    radial: dict[str, list]
    fields: dict[str, Any]
    history: list[tuple[int, int, int, float]]
    solution: Solution
    nested: tuple[Nested, ...]
    floor: uncertainty.Floor
    meshes: Family

    @property
    def converged(self) -> bool:
        return bool(self.summary["converged"])

    def __getitem__(self, path: str) -> Any:
        """A quantity [SI] by its dotted path, with or without unit suffix: result["stream.oil.outlet_temperature"].

        Other parts of the summary too, as their keys spell them: result["balance.energy"]. None where a quantity has
        no value; raises `UnknownQuantity`, a KeyError, for a path that names nothing.
        """
        try:
            return quantity(self.case, path).of(self.summary)
        except UnknownQuantity:
            node: Any = self.summary
            for step in path.split("."):
                if not isinstance(node, dict) or step not in node:
                    raise
                node = node[step]
            return node

    def __repr__(self) -> str:
        state = "" if self.converged else " not converged,"
        return f"<Result of {self.case.title!r}:{state} {self.summary['cells']} cells>"


def tree_with_bars(case: Case, layout: Layout, solution: Solution) -> dict[str, Any]:
    """The parts of the summary that get mesh errors, of one solution."""
    tree = summary.summary(case, layout, solution, axial.stream_views(case, solution))
    return {key: tree[key] for key in WITH_BARS}


def make_result(
    case: Case,
    meshes: Family,
    solutions: list[Solution],
    history: list[tuple[int, int, int, float]],
    seconds: float,
    version: str,
    halves: tuple[Solution, Solution] | None = None,
) -> Result:
    """Interpret the solutions of nested meshes, each half as fine as the next; the finest, last, gives the fields.

    With three or more converged meshes every headline quantity is extrapolated where its sequence allows it, and
    gets the half-width of its mesh error.

    halves : solutions on the mesh before the finest, coarsened once more along r only and along z only; they tell
             the errors of the two directions apart
    """
    solution, layout = solutions[-1], meshes.layout
    views = [axial.stream_views(case, s) for s in solutions]
    trees = [summary.summary(case, layout, s, v) for s, v in zip(solutions, views, strict=True)]
    curves = [{name: view.curves for name, view in v.items()} for v in views]
    head: dict[str, Any] = {
        "title": case.title,
        "converged": solution.converged,
        "stop_reason": solution.stop_reason,
        "iterations": solution.iterations,
        "residual": solution.residual,
        "seconds": seconds,
        "cells": solution.grid.cells,
        "cells_across": solution.grid.nr,
        "cells_along": solution.grid.nz,
        "version": version,
    }
    tree, half_widths = trees[-1], {}
    extrapolated: dict[str, Any] = {}
    parts = [{key: t[key] for key in WITH_BARS} for t in trees]
    nested = tuple(Nested(part, curve) for part, curve in zip(parts, curves, strict=True))
    if len(solutions) >= 3 and all(s.converged for s in solutions):
        least = least_widths(case, trees[-1], solution, views[-1])
        values, widths, hows = uncertainty.estimate_tree(parts, least)
        along = _told_apart(case, layout, trees[-2], halves, widths, hows) if halves is not None else {}
        _from_terms(case, values, widths, hows)
        extrapolated = {
            "finest_mesh": parts[-1],
            "numerical_uncertainty": {
                **widths,
                "observed_order": _leaves(hows, "observed_order"),
                "rule": _leaves(hows, "rule"),
                **along,
            },
        }
        tree = {**tree, **values}
        half_widths = {name: _curve_half_widths(name, curves, least.floor) for name in curves[-1]}
        for name, columns in curves[-1].items():
            _blank_where_unknown(columns, half_widths[name])
    found = cautions.after(case, layout, {**head, **tree}, curves[-1], solution)
    refused = cautions.refusal(case, layout, solution)
    full = head | ({"refused": refused} if refused else {}) | {"cautions": found, "limits": {}} | tree | extrapolated
    full["limits"] = limits.judge(case, full)
    outside = axial.outside_curves(case, solution)
    for columns in (outside, *curves[-1].values(), *half_widths.values()):
        for column in columns.values():
            frozen(column)
    fields = _fields(case, solution)
    radial = axial.radial_profiles(case, solution)
    return Result(
        case,
        layout,
        version,
        full,
        curves[-1],
        half_widths,
        outside,
        radial,
        fields,
        history,
        solution,
        nested,
        floor_of(case, trees[-1], solution),
        meshes,
    )


def with_accuracy(result: Result, found: dict[str, Any], seconds: float) -> Result:
    """The result with what came of the accuracy asked for, the caution about it, and the seconds of all solves."""
    full = {**result.summary, "accuracy": found, "seconds": seconds}
    full["cautions"] = cautions.after(result.case, result.layout, full, result.axial, result.solution)
    return replace(result, summary=full)


def floor_of(case: Case, tree: dict[str, Any], solution: Solution) -> uncertainty.Floor:
    """The least half-widths, from the finest mesh and its tree."""
    scales = accuracy.scales(tree, solution)
    of = {"K": scales["temperature_K"], "W": scales["heat_W"], "Pa": max(scales["pressure_Pa"].values(), default=0.0)}
    return uncertainty.Floor(of, case.solve.stop_below)


def least_widths(
    case: Case, tree: dict[str, Any], solution: Solution, views: dict[str, axial.StreamView]
) -> uncertainty.LeastWidths:
    """What mesh errors need of the finest mesh besides its tree."""
    curves = summary.curves_of_places(solution, views)
    return uncertainty.LeastWidths(solution.grid.z, curves, floor_of(case, tree, solution))


def _told_apart(
    case: Case,
    layout: Layout,
    medium: dict[str, Any],
    halves: tuple[Solution, Solution],
    widths: dict[str, Any],
    hows: dict[str, Any],
) -> dict[str, Any]:
    """Errors of the quantities from the cells along r and along z; widens half-widths where they cancel."""
    coarse_r, coarse_z = (summary.summary(case, layout, s, axial.stream_views(case, s)) for s in halves)
    along: dict[str, Any] = {"from_r": {}, "from_z": {}}
    for q in accuracy.with_mesh_error(case, medium):
        if q.key.endswith("_z_m"):
            continue
        found = uncertainty.split(*(q.of(tree) for tree in (medium, coarse_r, coarse_z)))
        half = q.of(widths)
        if found is None or half is None:
            continue
        for word, value in ("from_r", found.r), ("from_z", found.z):
            _put(along[word], q.keys, value)
        how = _branch(hows, q.keys)
        if found.opposed > half and how["rule"] != uncertainty.EXACT:
            _put(widths, q.keys, found.opposed)
            how["rule"] = f"{how['rule']}, {uncertainty.OPPOSED}"
    return along


def _from_terms(case: Case, values: dict[str, Any], widths: dict[str, Any], hows: dict[str, Any]) -> None:
    """Give combinations the sums of the values and half-widths of their terms, where that says more.

    The differences of a sequence that hardly changes may look like those of no order, and its terms still be known.
    """
    for of in quantities(case, headline_only=True):
        if of.combined is None:
            continue
        terms, own = terms_of(case, of), of.of(widths)
        found = [(times, term.of(values), term.of(widths)) for term, times in terms.items() if times]
        known = [(times, value, half) for times, value, half in found if value is not None and half is not None]
        half = math.fsum(abs(times) * half for times, _, half in known)
        if own is None or len(known) < len(found) or half >= own:
            continue
        _put(values, of.keys, math.fsum(times * value for times, value, _ in known))
        _put(widths, of.keys, half)
        _branch(hows, of.keys)["rule"] = uncertainty.TERMS


def _branch(tree: dict[str, Any], path: tuple[str, ...]) -> dict[str, Any]:
    for key in path:
        tree = tree.setdefault(key, {})
    return tree


def _put(tree: dict[str, Any], path: tuple[str, ...], value: float) -> None:
    _branch(tree, path[:-1])[path[-1]] = value


def _leaves(tree: dict[str, Any], word: str) -> dict[str, Any]:
    """The tree of one word of each leaf of an estimate."""
    # a user may call something "rule": only below it comes the leaf
    is_leaf = {key: not isinstance(leaf.get(word, {}), dict) for key, leaf in tree.items()}
    return {key: leaf[word] if is_leaf[key] else _leaves(leaf, word) for key, leaf in tree.items()}


def _blank_where_unknown(columns: dict[str, np.ndarray], half_widths: dict[str, np.ndarray]) -> None:
    """Empty the heat transfer coefficient and Nusselt number where wall and bulk differ by less than three bars."""
    wall, bulk = "wetted_wall_temperature_K", "bulk_temperature_K"
    unknown = np.abs(columns[wall] - columns[bulk]) < BARS_APART * (half_widths[wall] + half_widths[bulk])
    for name in ("heat_transfer_coefficient_W_m2K", "nusselt"):
        for table in (columns, half_widths):
            table[name] = np.where(unknown, np.nan, table[name])


def _curve_half_widths(
    name: str, curves: list[dict[str, dict[str, np.ndarray]]], floor: uncertainty.Floor
) -> dict[str, np.ndarray]:
    z = [c[name]["z_m"] for c in curves]
    widths = {}
    for column, values in curves[-1][name].items():
        if column == "z_m":
            widths[column] = values.copy()
        elif column == "reverse":
            widths[column] = np.full(len(values), np.nan)  # a flag has no mesh error
        else:
            least = floor.of_curve(column, values)
            widths[column] = uncertainty.curve_half_widths(z, [c[name][column] for c in curves], least)
    return widths


def _fields(case: Case, solution: Solution) -> dict[str, Any]:
    """What fields.npz holds: enough to recompute every residual."""
    grid, heat = solution.grid, solution.heat
    t_in = next(iter(case.stream.values())).inlet_temperature
    names: list[str] = []
    material = np.full(grid.shape, -1, dtype=np.int64)
    for piece in grid.pieces:
        if piece.layer.kind == "void":
            continue
        stream = piece.layer.kind == "stream"
        name = f"stream:{piece.layer.material}" if stream else piece.layer.name
        if name not in names:
            names.append(name)
        material[piece.cells] = names.index(name)
    fields: dict[str, Any] = {
        "z_faces": grid.z,
        "r_faces": grid.r,
        "T": heat.t,
        "T_z_faces": heat.tz,
        "T_inner_side": heat.minus,
        "T_outer_side": heat.plus,
        "inlet_temperature": t_in,
        "material": material,
        "material_names": names,
        "layer_names": list(dict.fromkeys(p.layer.name for p in grid.pieces)),
        "volume_heat": heat.generated + heat.viscous + heat.pressure_work,
    }
    for name, s in solution.streams.items():
        j0, _ = grid.streams[name]
        fields |= {f"u.{name}": s.u, f"v.{name}": s.v, f"p.{name}": s.p, f"j0.{name}": j0}
    for label, values in _properties(case, solution).items():
        fields[f"property.{label}"] = values
    for value in fields.values():
        if isinstance(value, np.ndarray):
            frozen(value)
    return fields


def _properties(case: Case, solution: Solution) -> dict[str, np.ndarray]:
    """(nz, nr) conductivity across and viscosity at the cells' temperatures; nan where there is none."""
    grid = solution.grid
    conductivity, viscosity = np.full(grid.shape, np.nan), np.full(grid.shape, np.nan)
    t_in = next(iter(case.stream.values())).inlet_temperature
    for piece in grid.pieces:
        t = solution.heat.t[piece.cells] + t_in
        if piece.layer.kind == "stream":
            fluid = case.fluid_of(piece.layer.material)
            conductivity[piece.cells], viscosity[piece.cells] = fluid.conductivity(t), fluid.viscosity(t)
        elif piece.layer.kind == "solid":
            conductivity[piece.cells] = case.solid_of(piece.layer.material).conductivity_r(t)
    conductivity[grid.kind == NOTHING] = np.nan
    return {"conductivity_W_mK": conductivity, "viscosity_Pa_s": viscosity}
