"""Developed Nusselt number behind an outside resistance."""

from functools import lru_cache
from math import log
from pathlib import Path

import numpy as np

from axicfd.case.read import load
from axicfd.pipeline import solve
from validation import plots
from validation.common import Row, table

HERE = Path(__file__).parent
DIAMETER, PECLET, CONDUCTIVITY = 2e-3, 5000.0, 1.0  # m, -, W/m/K, as in the case files
WALL, THICKNESS = 40.0, 1e-4  # W/m/K, m
READ_AT = 0.25  # x*
EXPECTED = {float(r["Bi=U D/k_f [-]"]): float(r["Nu_T3=h D/k [-]"]) for r in table("nu_third_kind_vs_biot.csv")}
BARE = (0.1, 0.5, 1.0, 2.0, 4.0, 10.0, 40.0, 100.0, 1000.0)
BEHIND_WALL = (1.0, 4.0, 20.0)


@lru_cache
def nusselt(biot: float, wall: bool) -> float:
    """Nu at READ_AT, the film chosen so that film and wall together have the Biot number U D / k."""
    per_bore = DIAMETER / (biot * CONDUCTIVITY)  # m2 K/W on the bore's area
    bore, outer = DIAMETER / 2, DIAMETER / 2
    if wall:
        outer += THICKNESS
        per_bore -= bore * log(outer / bore) / WALL
    film = bore / outer / per_bore
    case = load(HERE / ("wall.toml" if wall else "bare.toml"))
    columns = solve(case.replace({"section.cooled.outside.film_coefficient": film})).axial["liquid"]
    return float(np.interp(READ_AT, columns["z_m"] / (DIAMETER * PECLET), columns["nusselt"]))


def check() -> list[Row]:
    rows = []
    for wall, biots in ((False, BARE), (True, BEHIND_WALL)):
        for biot in biots:
            source = "exact" if biot == 4.0 else "nu_third_kind_vs_biot.csv (Kummer function)"
            place = "film behind a wall" if wall else "film on the bore"
            rows.append(Row(f"Nu at Bi = {biot:g}, {place}", nusselt(biot, wall), EXPECTED[biot], 1e-3, source))
    return rows


def picture(folder: Path) -> None:
    with plots.picture(folder / "biot.png", 1, 6.5) as (axes,):
        axes.plot(list(EXPECTED), list(EXPECTED.values()), label="eigenvalue", **plots.EXPECTED)
        for k, (wall, biots) in enumerate(((False, BARE), (True, BEHIND_WALL))):
            points = [nusselt(biot, wall) for biot in biots]
            label = "film behind a wall" if wall else "film on the bore"
            axes.plot(biots, points, "sx"[not wall], color=plots.COLOURS[k], ms=7, label=label, mfc="none")
        axes.set(xscale="log", xlabel="Biot number U D / k", ylabel="developed Nusselt number", xlim=(0.05, 2000))
        axes.legend()
