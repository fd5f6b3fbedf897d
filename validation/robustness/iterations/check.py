"""Printed values after many more iterations: what the residual at which a solve stops leaves undone."""

from collections.abc import Iterator
from functools import lru_cache
from pathlib import Path

import matplotlib.pyplot as plt
import numpy as np

from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.pipeline import solve
from axicfd.results.result import Result
from axicfd.results.uncertainty import PLACE
from validation.bars.study import leaves
from validation.common import Row
from validation.robustness.cases import coupled_cases, flow_cases

SHIPPED = Path(__file__).parents[3] / "cases"
ALLOWED = 1e-6
LOOSER, FEWER, TIGHT = (1e-3, 1e-5, 1e-7, 1e-8), 10_000, 1e-10  # residuals and cells of the rows about the half-widths
# residual of the second solve: 1e-12 doubles the iterations, where round-off allows it; good conductors allow 1e-10
FURTHER = {
    "flow, Re 1000, L/D 20": 1e-12,
    "flow, Re 1, L/D 1000": 1e-12,
    "cooled through a film, Re 100 at the inlet": 1e-12,
    "heated through a film, Re 10 at the inlet": 1e-12,
    "steel wall with a heater band, Pr 100, Re 50": 1e-12,
    "copper wall with a film on the band, Re 50": 1e-10,
    "heater-band.toml": 1e-10,
    "syrup-jacket.toml": 1e-12,
    "copper-hot-source.toml": 1e-10,
    "flow-sensor.toml": 1e-10,
}
# not values of the model: provenance, residuals, and balances and half-widths, which are themselves errors
NOT_VALUES = "iterations", "residual", "seconds", "cells", "balance", "cautions", "numerical_uncertainty"


def case(name: str) -> Case:
    if name.endswith(".toml"):
        return load(SHIPPED / name)
    return (flow_cases() | coupled_cases())[name]


def values(tree: dict, path: str = "") -> Iterator[tuple[str, float]]:
    """(dotted path, number) of every printed value."""
    for key, value in tree.items():
        if key in NOT_VALUES or isinstance(value, bool):
            continue
        if isinstance(value, dict):
            yield from values(value, f"{path}{key}.")
        elif isinstance(value, int | float):
            yield f"{path}{key}", float(value)


def scale(path: str, value: float, result: Result) -> float:
    """What a change is a share of: temperatures the span, heat the largest term of the ledger, others themselves."""
    names = path.split(".")
    if any(name.endswith("_K") for name in names):
        return max(float(np.abs(result.fields["T"]).max()), 1e-300)
    if "mass" in names:
        return max(s["mass_flow_kg_s"] for s in result.summary["stream"].values())
    if names[0] == "ledger" or any(name.endswith("_W") and not name.endswith("_K_W") for name in names):
        terms = (abs(term) for other, term in values(result.summary["ledger"]) if "mass" not in other.split("."))
        return max(*terms, 1e-300)
    return abs(value) or 1e-300


@lru_cache
def changes(name: str) -> tuple[list[tuple[str, float]], Result, Result]:
    """Every printed value's change as a share of its scale, and both results."""
    first = solve(case(name))
    second = solve(case(name).replace({"solve.stop_below": FURTHER[name]}))
    before, after = dict(values(first.summary)), dict(values(second.summary))
    if before.keys() != after.keys():
        raise ValueError(f"{name}: not the same values are printed")
    found = [(path, abs(after[path] - v) / scale(path, after[path], second)) for path, v in before.items()]
    return sorted(found, key=lambda pair: -pair[1]), first, second


@lru_cache
def over_floor(name: str) -> tuple[float, str]:
    """(largest, quantity) change from stopping at the residuals LOOSER, over the half-width that covers it."""
    coarser = case(name).replace({"mesh.at_most": FEWER})
    tight = solve(coarser.replace({"solve.stop_below": TIGHT}))
    found = []
    for residual in LOOSER:
        loose = solve(coarser.replace({"solve.stop_below": residual}))
        after = dict(leaves(loose.summary))
        for path, value in leaves(tight.summary):
            floor = loose.floor.of(tuple(path.split(".")), value)
            if not path.endswith(PLACE) and floor > 0.0:
                found.append((abs(after[path] - value) / floor, f"{path}, residual {residual:.0e}"))
    return max(found)


def check() -> list[Row]:
    rows = []
    for name, stop_below in FURTHER.items():
        found, first, second = changes(name)
        path, change = found[0]
        ended = f"{first.summary['stop_reason']} and {second.summary['stop_reason']}"
        iterations = f"{first.summary['iterations']} and {second.summary['iterations']} iterations"
        rows.append(
            Row(
                f"largest change of {len(found)} printed values, residual 1e-8 to {stop_below:.0e}; {name}",
                change,
                0.0,
                ALLOWED,
                "none",
                scale=1.0,
                note=f"it is {path}; {iterations}, {ended}",
            )
        )
    for name in FURTHER:
        largest, path = over_floor(name)
        what = f"largest change over the least half-width, {FEWER} cells, residuals from 1e-3 to 1e-8; {name}"
        rows.append(Row(what, largest, 0.0, 1.0, "none", scale=1.0, note=f"it is {path}"))
    return rows


def picture(folder: Path) -> None:
    figure, axes = plt.subplots(figsize=(8, 5), layout="constrained")
    for row, name in enumerate(FURTHER):
        found = np.maximum([change for _, change in changes(name)[0]], 1e-16)
        axes.semilogx(found, np.full(len(found), row), "|", ms=12, color="tab:blue", alpha=0.6)
    axes.axvline(ALLOWED, color="tab:red", lw=1, label="allowed")
    axes.set_yticks(range(len(FURTHER)), list(FURTHER))
    axes.invert_yaxis()
    axes.set(xlabel="change of a printed value with more iterations, share of its scale", xlim=(1e-16, 1e-4))
    axes.legend()
    figure.savefig(folder / "changes.png", dpi=120)
    plt.close(figure)
