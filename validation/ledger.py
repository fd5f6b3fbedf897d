"""The balances of a results folder, computed again from its files alone.

    python -m validation.ledger heater-band-results

mass, energy : sums of the ledger in summary.json over its largest part; these should vanish to round-off
stream       : heat that entered through the bore by axial-STREAM.csv (trapezoidal rule), against the enthalpy
that the
               bulk temperatures carry out, the heat conducted through the outlet, and the heat made in the
               stream
outside      : heat through the outer surface by outside.csv against the sections' heats in the ledger
The last two compare curves on stations with sums over cells: they should vanish up to the mesh's own error.
"""

import csv
import json
import math
import sys
from pathlib import Path

import axicfd
from axicfd.case.layout import layout

ONE_MILLIKELVIN = 1e-3


def recompute(folder: Path) -> dict[str, float]:
    """Relative imbalances of a results folder by the names above."""
    summary = json.loads((folder / "summary.json").read_text(encoding="utf-8"))
    case = axicfd.load(folder / "case.toml")
    ledger = summary["ledger"]
    (name,) = summary["stream"]
    through_boundaries = [*ledger["section"].values(), *ledger["ends"].values()]
    generated = list(ledger["generated"].values())
    made = [*generated, ledger["viscous"], ledger["pressure_work"]]
    carried = [*ledger["stream"].values(), *ledger["outlet_conduction"].values()]

    fluid, stream = case.fluid_of(name), case.stream[name]
    mass = ledger["mass"][name]
    trickle = mass["inlet_kg_s"] * float(fluid.specific_heat(stream.inlet_temperature)) * ONE_MILLIKELVIN
    scale = max(
        sum(map(abs, through_boundaries)),
        sum(map(abs, generated)),
        abs(ledger["viscous"]),
        *map(abs, ledger["stream"].values()),
        trickle,
    )
    found = {"energy": abs(math.fsum([*through_boundaries, *made, *carried])) / scale}
    if mass["inlet_kg_s"]:
        found["mass"] = abs(mass["inlet_kg_s"] - mass["outlet_kg_s"]) / mass["inlet_kg_s"]

    outer = curve(folder / "outside.csv", "z_m", "heat_flux_W_m2")
    tube = layout(case)
    if len({section.layers[-1].r_outer for section in tube.sections}) == 1:
        entered = math.pi * tube.outer_diameter * integral(outer)
        found["outside"] = abs(entered - sum(ledger["section"].values())) / scale

    curves = folder / f"axial-{name.replace(' ', '-')}.csv"
    into = math.pi * tube.bore_diameter * integral(curve(curves, "z_m", "wall_heat_flux_W_m2"))
    conducted = [q for _, q in curve(curves, "z_m", "axial_conduction_W")]
    gain = 0.0
    if mass["inlet_kg_s"]:
        bulk = [t for _, t in curve(curves, "z_m", "bulk_temperature_K")]
        ends = (bulk[0], bulk[-1]) if stream.direction == "+z" else (bulk[-1], bulk[0])
        gain = mass["inlet_kg_s"] * float(fluid.specific_heat.integral(*ends))
    inside = [ledger["viscous"], ledger["pressure_work"], ledger["generated"].get(name, 0.0)]
    found["stream"] = abs(into + sum(inside) - gain - (conducted[-1] - conducted[0])) / scale
    return found


def curve(path: Path, z: str, value: str) -> list[tuple[float, float]]:
    """Two columns of a CSV file, rows without a value left out."""
    with path.open(encoding="utf-8", newline="") as file:
        return [(float(row[z]), float(row[value])) for row in csv.DictReader(file) if row[value] and row[z]]


def integral(points: list[tuple[float, float]]) -> float:
    """By the trapezoidal rule."""
    return math.fsum(0.5 * (a[1] + b[1]) * (b[0] - a[0]) for a, b in zip(points[:-1], points[1:], strict=True))


if __name__ == "__main__":
    for argument in sys.argv[1:]:
        for label, value in recompute(Path(argument)).items():
            print(f"{argument}   {label:8s} {value:.2e}")
