"""Hydrodynamic entry length of a tube with a flat inlet against a Navier-Stokes table and Durst et al."""

from functools import lru_cache
from pathlib import Path

import matplotlib.pyplot as plt
import numpy as np

from axicfd.case.read import load
from axicfd.pipeline import solve
from validation.common import Row, table

HERE = Path(__file__).parent
DIAMETER = 0.010  # m, as in tube.toml
RE, LENGTH = "Re=um D/nu [-]", "L_e/D (axis velocity 99 percent of 2 um) [-]"
NAVIER_STOKES = "hydro_entrance_navier_stokes.csv: independent computation, not published; its own uncertainty 0.3 %"
DURST = "Durst et al. 2005, J. Fluids Eng. 127, 1154 (from memory)"
MARGIN = 5e-3


def reference() -> list[tuple[float, float]]:
    """(Re, L_e/D) of the table."""
    return [(float(row[RE]), float(row[LENGTH])) for row in table("hydro_entrance_navier_stokes.csv")]


def durst(reynolds):
    """L_e/D, a fit of computed entry lengths from creeping flow upward."""
    return (0.619**1.6 + (0.0567 * reynolds) ** 1.6) ** (1 / 1.6)


@lru_cache
def entry_length(reynolds: float) -> float:
    """L_e/D in a tube at least twice as long as the entry."""
    length = max(4.0, 2.0 * durst(reynolds)) * DIAMETER
    case = load(HERE / "tube.toml").replace({"stream.oil.reynolds": reynolds, "section.tube.length": length})
    return solve(case).summary["stream"]["oil"]["hydrodynamic_entry_length_m"] / DIAMETER


def check() -> list[Row]:
    rows = []
    for reynolds, expected in reference():
        rows.append(Row(f"L_e/D at Re {reynolds:g}", entry_length(reynolds), expected, MARGIN, NAVIER_STOKES))
    for reynolds, exact in reference():
        off = durst(reynolds) / exact - 1
        rows.append(
            Row(f"L_e/D at Re {reynolds:g}", entry_length(reynolds), durst(reynolds), None, DURST,
                note=f"a fit, itself {off:+.1%} off the table")
        )  # fmt: skip
    return rows


def picture(folder: Path) -> None:
    re, le = np.array(reference()).T
    own = np.array([entry_length(x) for x in re])
    figure, (top, bottom) = plt.subplots(2, 1, figsize=(7, 7), sharex=True, layout="constrained", height_ratios=[3, 2])
    many = np.geomspace(re[0], re[-1], 200)
    top.loglog(many, durst(many), color="0.6", lw=4, label="Durst et al. 2005")
    top.loglog(re, le, "s", ms=11, mfc="none", color="black", label="Navier-Stokes table")
    top.loglog(re, own, "o", ms=5, color="tab:red", label="computed here")
    top.set(ylabel="entry length L_e / D", title="Flat inlet: axis velocity within 1 % of developed")
    top.legend()
    bottom.semilogx(re, 100 * (own / le - 1), "o-", color="tab:red", label="against the table")
    bottom.semilogx(re, 100 * (own / durst(re) - 1), "--", color="0.5", label="against Durst et al.")
    bottom.axhspan(-100 * MARGIN, 100 * MARGIN, color="0.9", label="allowed against the table")
    bottom.axhline(0, color="0.6", lw=1)
    bottom.set(xlabel="Reynolds number", ylabel="deviation [%]")
    bottom.legend()
    figure.savefig(folder / "entry-length.png", dpi=120)
    plt.close(figure)
