"""Axis velocity along the entry: how it approaches the boundary-layer limit as Re grows."""

from functools import lru_cache
from pathlib import Path

import matplotlib.pyplot as plt
import numpy as np
from scipy.interpolate import CubicSpline

from axicfd.case.read import load
from axicfd.pipeline import solve
from validation.common import Row, table

HERE = Path(__file__).parent
DIAMETER = 0.010  # m, as in tube.toml
REYNOLDS = (250, 500, 1000, 2000)
STATIONS = (0.005, 0.01, 0.02, 0.05)
BAND_FROM, BAND = 0.02, 0.01
LIMIT_BAND = 5e-3
SOURCE = "hydro_entrance_boundary_layer.csv: independent computation, not published; limit of infinite Re"


def limit() -> tuple[np.ndarray, np.ndarray]:
    """(x+, u_axis/u_mean) of the table."""
    rows = table("hydro_entrance_boundary_layer.csv")
    return np.array([[float(row["x+=x/(D Re) [-]"]), float(row["u_centre/u_mean [-]"])] for row in rows]).T


@lru_cache
def curve(reynolds: float) -> tuple[np.ndarray, np.ndarray]:
    """(x+, u_axis/u_mean) computed, in a tube up to x+ = 0.12."""
    changes = {"stream.oil.reynolds": reynolds, "section.tube.length": 0.12 * reynolds * DIAMETER}
    result = solve(load(HERE / "tube.toml").replace(changes))
    columns, stream = result.axial["oil"], result.summary["stream"]["oil"]
    return columns["z_m"] / (DIAMETER * reynolds), columns["axis_velocity_m_s"] / stream["mean_velocity_m_s"]


def at(reynolds: float, x: float) -> float:
    return float(CubicSpline(*curve(reynolds))(x))


def check() -> list[Row]:
    known = dict(zip(*limit(), strict=True))
    rows = []
    for x in STATIONS:
        values = {re: at(re, x) for re in REYNOLDS}
        for re, value in values.items():
            judged = re == REYNOLDS[-1] and x >= BAND_FROM
            note = "" if judged else "finite Re: shows the approach"
            rows.append(
                Row(f"u_axis/u_m at x+ = {x}, Re {re}", value, known[x], BAND if judged else None, SOURCE, note=note)
            )
        gaps = [abs(value - known[x]) for value in values.values()]
        falling = sum(b < a for a, b in zip(gaps[:-1], gaps[1:], strict=True))
        rows.append(Row(f"doublings of Re that lessen the gap at x+ = {x}", falling, len(REYNOLDS) - 1, 0.0, SOURCE))
        # the gap falls as Re^-1/2: a fourfold Re halves it
        extrapolated = 2 * values[2000] - values[500]
        note = "extrapolated in Re^-1/2 from Re 500 and 2000"
        rows.append(
            Row(f"u_axis/u_m at x+ = {x}, Re to infinity", extrapolated, known[x], LIMIT_BAND, SOURCE, note=note)
        )
    return rows


def picture(folder: Path) -> None:
    x, u = limit()
    use = (x >= 0.0005) & (x <= 0.1)
    figure, (top, bottom) = plt.subplots(2, 1, figsize=(7, 7), sharex=True, layout="constrained", height_ratios=[3, 2])
    top.semilogx(x[use], u[use], "ks", mfc="none", ms=7, label="boundary-layer limit (table)")
    shades = plt.get_cmap("viridis")(np.linspace(0.85, 0.1, len(REYNOLDS)))
    inside = x[(x >= 0.002) & (x <= 0.1)]
    known = u[(x >= 0.002) & (x <= 0.1)]
    for re, shade in zip(REYNOLDS, shades, strict=True):
        own_x, own_u = curve(re)
        shown = own_x >= 0.0005
        top.semilogx(own_x[shown], own_u[shown], color=shade, label=f"Re {re}")
        bottom.loglog(
            inside,
            [abs(at(re, a) - b) for a, b in zip(inside, known, strict=True)],
            "o-",
            ms=4,
            color=shade,
            label=f"Re {re}",
        )
    top.set(ylabel="axis velocity / mean velocity", title="Axis velocity behind a flat inlet")
    top.legend()
    bottom.set(xlabel="x+ = x / (D Re)", ylabel="limit minus computed")
    bottom.legend()
    figure.savefig(folder / "axis-velocity.png", dpi=120)
    plt.close(figure)
