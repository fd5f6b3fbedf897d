"""A tube with a conducting wall under uniform flux: how much of the heat moves along the wall."""

from functools import lru_cache
from pathlib import Path

import numpy as np

from axicfd.case.read import load
from axicfd.pipeline import solve
from validation import plots
from validation.common import Row, table

HERE = Path(__file__).parent
DIAMETER, DIFFUSIVITY, CONDUCTIVITY, FLUX, INLET = 2e-3, 1e-6, 1.0, 1000.0, 293.15  # SI, as in tube.toml
JUDGED = 0.1, 0.9  # x/L; nearer to the ends the deviations are shown
TABLE = "conjugate_finite_tube_uniform_flux.csv"
SOURCE = f"{TABLE}, variant b (finite elements)"
GROUPS = "Pe=um D/alpha_f [-]", "k_w/k_f [-]", "r_o/r_i [-]", "L/D [-]"
VALUES = {
    "T_b": "T_b-T_in [q_ref R/k_f]",
    "T_wi": "T_wi-T_in [q_ref R/k_f]",
    "q_i/q_ref": "q_i/q_ref [-]",
    "Nu": "Nu=q_i D/(k_f (T_wi-T_b)) [-]",
}
LINES = [r for r in table(TABLE) if r["variant"] == "b"]
CASES = sorted({tuple(float(r[key]) for key in GROUPS) for r in LINES})


def expected(groups: tuple[float, ...]) -> dict[str, np.ndarray]:
    here = [r for r in LINES if tuple(float(r[key]) for key in GROUPS) == groups]
    return {name: np.array([float(r[key]) for r in here]) for name, key in ({"x/L": "x/L [-]"} | VALUES).items()}


@lru_cache
def curves(groups: tuple[float, ...]) -> dict[str, np.ndarray]:
    """x/L along the wall and the table's quantities there."""
    peclet, ratio, outer, slenderness = groups
    before, length = (3 + 30 / peclet) * DIAMETER, slenderness * DIAMETER
    changes = {
        "stream.liquid.mean_velocity": peclet * DIFFUSIVITY / DIAMETER,
        "solid.wall.conductivity": ratio * CONDUCTIVITY,
        "layer.wall.thickness": (outer - 1) * DIAMETER / 2,
        "section.before.length": before,
        "section.heated.length": length,
    }
    columns = solve(load(HERE / "tube.toml").replace(changes)).axial["liquid"]
    here = columns["z_m"] > before + 1e-9
    reference = FLUX * outer
    unit = reference * DIAMETER / 2 / CONDUCTIVITY
    return {
        "x/L": (columns["z_m"][here] - before) / length,
        "T_b": (columns["bulk_temperature_K"][here] - INLET) / unit,
        "T_wi": (columns["wetted_wall_temperature_K"][here] - INLET) / unit,
        "q_i/q_ref": columns["wall_heat_flux_W_m2"][here] / reference,
        "Nu": columns["nusselt"][here],
    }


def title(groups: tuple[float, ...]) -> str:
    peclet, ratio, outer, slenderness = groups
    return f"Pe {peclet:g}, k_w/k_f {ratio:g}, r_o/r_i {outer:g}, L/D {slenderness:g}"


def check() -> list[Row]:
    """Per case and quantity the place that deviates most between the judged limits, and both places outside them."""
    rows = []
    for groups in CASES:
        want, got = expected(groups), curves(groups)
        places = want["x/L"]
        inside = np.flatnonzero((places >= JUDGED[0]) & (places <= JUDGED[1]))
        for name in VALUES:
            found = np.interp(places, got["x/L"], got[name])
            worst = inside[np.argmax(np.abs(found / want[name] - 1)[inside])]
            for k in (worst, *np.setdiff1d(np.arange(len(places)), inside)):
                margin, most = (1e-2, f", the worst of {len(inside)}") if k in inside else (None, "")
                place = f"x/L {places[k]:g}{most}"
                rows.append(Row(f"{name} at {place}; {title(groups)}", found[k], want[name][k], margin, SOURCE))
    return rows


def picture(folder: Path) -> None:
    with plots.picture(folder / "conjugate-flux.png", 2, 5.2) as (left, right):
        for k, groups in enumerate(((50, 10, 1.2, 20), (50, 100, 1.2, 20), (50, 100, 2, 20), (200, 650, 2, 20))):
            want, got = expected(groups), curves(groups)
            label = f"Pe {groups[0]:g}, k_w/k_f {groups[1]:g}, r_o/r_i {groups[2]:g}"
            for axes, name in ((left, "q_i/q_ref"), (right, "T_wi")):
                axes.plot(got["x/L"], got[name], color=plots.COLOURS[k], label=label)
                axes.plot(want["x/L"], want[name], "o", color=plots.COLOURS[k], mfc="none")
        left.set(xlim=(0, 1), ylim=(0, 4), ylabel="flux into the stream / mean flux")
        right.set(xlim=(0, 1), ylim=(0, 4), ylabel="bore temperature (T_wi - T_in) k_f / (q_ref R)")
        left.legend(title="rings: table", fontsize=9)
        for axes in (left, right):
            axes.set_xlabel("x / L")
