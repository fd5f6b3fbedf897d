"""What every validation problem shares: a row of the table, cases from text, and how deviations are judged.

Each problem is a folder `validation/GROUP/PROBLEM/` with README.md (source, formula, what is compared) and
check.py, which has `check() -> list[Row]` and may have `picture(folder)`. Cases carry no [mesh] and no stop_below:
the mesh that the tool chooses by itself is what is checked.
"""

import csv
from dataclasses import dataclass
from pathlib import Path

import matplotlib

matplotlib.use("Agg")

REFERENCE = Path(__file__).parent / "reference"


@dataclass(frozen=True)
class Row:
    """One compared number.

    quantity : what it is, with its conditions
    computed, expected : in the same unit
    margin   : allowed |computed - expected| / |scale|; None shows the deviation without judging it
    scale    : what the deviation is a share of; default |expected|
    source   : where the expected value comes from
    note     : why it is only shown, or anything a reader has to know
    """

    quantity: str
    computed: float
    expected: float
    margin: float | None
    source: str
    scale: float | None = None
    note: str = ""

    @property
    def deviation(self) -> float:
        """Share of the scale, signed."""
        return (self.computed - self.expected) / (self.scale or abs(self.expected))

    @property
    def passed(self) -> bool | None:
        """None for a row that is only shown. A computed value that is not a number fails."""
        if self.margin is None:
            return None
        return bool(abs(self.deviation) <= self.margin)  # numpy values too: `is False` has to hold


def table(name: str) -> list[dict[str, str]]:
    """The rows of a table in validation/reference, without its comment lines."""
    lines = (REFERENCE / name).read_text(encoding="utf-8").splitlines()
    return list(csv.DictReader(line for line in lines if not line.startswith("#")))
