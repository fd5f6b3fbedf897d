"""The cases that come with the project, solved once in a run of the tests, on a coarse mesh or on their own."""

from functools import lru_cache
from pathlib import Path

import axicfd
from axicfd.case.model import Case
from axicfd.results.result import Result

FOLDER = Path(__file__).parent.parent / "cases"
PLANS = sorted(FOLDER.glob("*-sweep.toml"))
NAMES = sorted(path.stem for path in FOLDER.glob("*.toml") if path not in PLANS)
COARSE = {"mesh.radial": 16, "mesh.axial": 96}


@lru_cache
def case(name: str) -> Case:
    return axicfd.load(FOLDER / f"{name}.toml")


@lru_cache
def solved(name: str, coarse: bool) -> Result:
    return axicfd.solve(case(name).replace(COARSE) if coarse else case(name))
