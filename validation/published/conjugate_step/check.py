"""A thick-walled tube with a step of its outer temperature: how far the wall carries heat upstream."""

from functools import lru_cache
from pathlib import Path

import numpy as np

from axicfd.case.read import load
from axicfd.pipeline import solve
from validation import plots
from validation.common import Row, table

HERE = Path(__file__).parent
RADIUS, DIFFUSIVITY, CONDUCTIVITY, INLET, HOT = 1e-3, 1e-6, 1.0, 293.15, 303.15  # SI, as in tube.toml
JUDGED_FROM = 0.5  # |x|/r_i; the place of the step is shown
DIGITS = 5e-5  # the table has four decimals
GOOD = 2e-3  # a tabulated value is judged if digits and mesh change leave it good to this share
TABLE = "conjugate_two_region_T_step.csv"
SOURCE = f"{TABLE} (finite elements)"
GROUPS = "Pe=um D/alpha_f [-]", "k_w/k_f [-]", "wall thickness/r_i [-]"
VALUES = {
    "T_b": "T_b [-]",
    "T_wi": "T_wi [-]",
    "q_i": "q_i [k_f (To-Tin)/r_i]",
    "Nu": "Nu=2 q_i/(T_wi-T_b) [-]",
}
CHANGE = "max abs change of T_b,T_wi,q_i between meshes"
LINES = table(TABLE)
CASES = sorted({tuple(float(r[key]) for key in GROUPS) for r in LINES})
HEATED = 40.0  # r_i
# The heat conducted upstream in these tubes decays over 7 to 29 r_i, and the table holds T = 0 in a
# plane at a finite distance (README): they are judged with the end of the wall held at the inlet temperature there.
HELD_AT = {(5.0, 100.0, 0.1): 42.5, (5.0, 100.0, 0.3): 48.0, (20.0, 100.0, 0.3): 48.0}


def expected(groups: tuple[float, ...]) -> list[dict[str, float]]:
    names = {"x": "x/r_i [-]", "change": CHANGE} | VALUES
    here = [r for r in LINES if tuple(float(r[key]) for key in GROUPS) == groups]
    return [{name: float(r[key]) for name, key in names.items()} for r in here]


@lru_cache
def curves(groups: tuple[float, ...], held_at: float | None = None) -> dict[str, np.ndarray]:
    """x/r_i and the table's quantities; the wall's first end insulated far away, or held at the inlet temperature."""
    peclet, ratio, thickness = groups
    # what decays slowest upstream: conduction along wall and fluid against the stream's heat capacity flow
    decay = 2 * (1 + ratio * ((1 + thickness) ** 2 - 1)) / peclet
    before = held_at or 20 + 12 * decay
    changes = {
        "stream.liquid.mean_velocity": peclet * DIFFUSIVITY / (2 * RADIUS),
        "solid.wall.conductivity": ratio * CONDUCTIVITY,
        "layer.wall.thickness": thickness * RADIUS,
        "section.before.length": before * RADIUS,
        "section.heated.length": HEATED * RADIUS,
    }
    if held_at:
        changes["ends.first"] = {"temperature": INLET}
    columns = solve(load(HERE / "tube.toml").replace(changes)).axial["liquid"]
    span = HOT - INLET
    return {
        "x": columns["z_m"] / RADIUS - before,
        "T_b": (columns["bulk_temperature_K"] - INLET) / span,
        "T_wi": (columns["wetted_wall_temperature_K"] - INLET) / span,
        "q_i": columns["wall_heat_flux_W_m2"] * RADIUS / (CONDUCTIVITY * span),
        "Nu": columns["nusselt"],
    }


def title(groups: tuple[float, ...]) -> str:
    return "Pe {:g}, k_w/k_f {:g}, wall {:g} r_i".format(*groups)


def compared(groups: tuple[float, ...], got: dict[str, np.ndarray], judge: bool, where: str) -> list[Row]:
    """Per quantity the judged place that deviates most, and the step itself."""
    rows = []
    for name in VALUES:
        judged, shown = [], []
        for line in expected(groups):
            value = float(np.interp(line["x"], got["x"], got[name]))
            if abs(line["x"]) < JUDGED_FROM:
                shown.append((line["x"], value, line[name]))
            elif doubt(line, name) <= GOOD:
                judged.append((line["x"], value, line[name]))
        worst = max(judged, key=lambda point: abs(point[1] / point[2] - 1))
        for points, margin, most in (
            ([worst], 1e-2 if judge else None, f", the worst of {len(judged)}"),
            (shown, None, ""),
        ):
            for x, value, want in points:
                rows.append(Row(f"{name} at x/r_i {x:g}{most}; {title(groups)}{where}", value, want, margin, SOURCE))
    return rows


def doubt(line: dict[str, float], name: str) -> float:
    """Share to which a tabulated value is known, from its digits and its change between the table's meshes."""
    if not np.isfinite(line[name]) or line[name] == 0.0:
        return np.inf
    if name != "Nu":
        return (line["change"] + DIGITS) / abs(line[name])
    # a quotient: as good as its flux and its difference of temperatures
    return line["change"] / max(line["q_i"], 1e-9) + line["change"] / max(line["T_wi"] - line["T_b"], 1e-9)


def check() -> list[Row]:
    rows = []
    for groups in CASES:
        far = groups not in HELD_AT or groups[0] > 5.0
        rows += compared(groups, curves(groups), far, "" if far else ", infinite tube")
        if groups in HELD_AT:
            distance = HELD_AT[groups]
            rows += compared(groups, curves(groups, distance), True, f", wall held at T_in {distance:g} r_i upstream")
    return rows


def picture(folder: Path) -> None:
    with plots.picture(folder / "conjugate-step.png", 2, 5.2) as (left, right):
        for k, groups in enumerate(((20, 1, 0.3), (20, 10, 0.3), (20, 100, 0.1), (5, 10, 0.1))):
            lines, got = expected(groups), curves(groups)
            for axes, name in ((left, "T_wi"), (right, "q_i")):
                axes.plot(got["x"], got[name], color=plots.COLOURS[k], label=title(groups))
                axes.plot([r["x"] for r in lines], [r[name] for r in lines], "o", color=plots.COLOURS[k], mfc="none")
        left.set(ylabel="bore temperature (T_wi - T_in) / (T_o - T_in)", ylim=(0, 1.05))
        right.set(ylabel="flux into the stream q r_i / (k_f (T_o - T_in))", ylim=(0, 2.2))
        right.legend(title="rings: table", fontsize=9)
        for axes in (left, right):
            axes.set(xlabel="x / r_i", xlim=(-5, 10))
