"""Solve the cases on meshes with two more halvings and keep their hottest walls in fine.csv.

    python -m validation.order.hottest_wall.fine

Takes minutes and a few gigabytes, so the check reads the file instead.
"""

import csv
from pathlib import Path

from axicfd.case.read import load
from axicfd.pipeline import solve
from axicfd.results.result import Result

HERE = Path(__file__).parent
SHIPPED = HERE.parents[2] / "cases"
CASES = "heater-band", "copper-hot-source", "flow-sensor", "syrup-jacket"
HALVINGS = 2


def hottest(result: Result) -> dict[str, float]:
    """Hottest place of the bore and of every wall [K, m], and the scales they are judged by."""
    found = {"span_K": 0.0, "length_m": result.layout.length, "cells": result.summary["cells"]}
    for name, stream in result.summary["stream"].items():
        found["bore_K"], found["bore_z_m"] = stream["hottest_wetted_wall_K"], stream["hottest_wetted_wall_z_m"]
        inlet = result.case.stream[name].inlet_temperature
    for layer in result.summary["layer"].values():
        found["wall_K"], found["wall_z_m"] = layer["hottest_K"], layer["hottest_z_m"]
    found["span_K"] = found["wall_K"] - inlet
    return found


if __name__ == "__main__":
    rows = []
    for name in CASES:
        result = solve(load(SHIPPED / f"{name}.toml"), halvings=HALVINGS)
        assert result.converged, name
        rows.append({"case": name} | hottest(result))
        print(rows[-1], f"{result.summary['seconds']:.0f} s", flush=True)
    with open(HERE / "fine.csv", "w", newline="", encoding="utf-8") as file:
        writer = csv.DictWriter(file, list(rows[0]), lineterminator="\n")
        writer.writeheader()
        writer.writerows(rows)
