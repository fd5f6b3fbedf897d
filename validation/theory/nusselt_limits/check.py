"""The two developed Nusselt numbers of a round tube."""

from functools import lru_cache
from pathlib import Path

import numpy as np

from axicfd.case.read import load
from axicfd.pipeline import solve
from axicfd.theory import duct_heat
from validation import plots
from validation.common import Row

HERE = Path(__file__).parent
DIAMETER, PECLET = 2e-3, 5000.0  # m, as in tube.toml
READ_AT = 0.25  # x*: the next mode has fallen to exp(-2 x 20 x 0.25) = 4e-5 of Nu and less
CASES = (
    ("uniform bore temperature", {}, duct_heat.NU_T, "3.6568, Graetz 1885 (series of theory/duct_heat.py)"),
    ("uniform flux", {"section.heated.outside": {"heat_flux": 1000.0}}, duct_heat.NU_H, "48/11, closed form"),
)


@lru_cache
def curves(number: int):
    """x* and Nu along the tube."""
    case = load(HERE / "tube.toml").replace(CASES[number][1])
    columns = solve(case).axial["liquid"]
    return columns["z_m"] / (DIAMETER * PECLET), columns["nusselt"]


def check() -> list[Row]:
    rows = []
    for number, (name, _, exact, source) in enumerate(CASES):
        x, nu = curves(number)
        rows.append(Row(f"Nu at x* = {READ_AT}, {name}", float(np.interp(READ_AT, x, nu)), exact, 1e-3, source))
    return rows


def picture(folder: Path) -> None:
    with plots.picture(folder / "nusselt.png", 1, 6.5) as (axes,):
        for number, (name, _, exact, _) in enumerate(CASES):
            x, nu = curves(number)
            axes.axhline(exact, **plots.EXPECTED)
            axes.plot(x[1:], nu[1:], color=plots.COLOURS[number], label=name)
            axes.annotate(f"{exact:.4f}", (0.305, exact), va="center", annotation_clip=False)
        axes.set(xlabel="x* = x / (D Re Pr)", ylabel="Nusselt number", xlim=(0, 0.3), ylim=(3, 7))
        axes.legend(title="Pe 5000")
