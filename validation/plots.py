"""Looks shared by the pictures of validation problems: quiet axes, computed points on expected lines."""

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import matplotlib.pyplot as plt

EXPECTED = {"color": "0.65", "lw": 4, "solid_capstyle": "butt"}
COLOURS = ("#1b6ca8", "#c2571a", "#3f7d3a", "#7a4a9e", "#8a6d1d", "#b03060")


@contextmanager
def picture(path: Path, panels: int = 1, width: float = 4.6) -> Iterator[list]:
    """Axes side by side; saved as PNG when the block ends."""
    with plt.rc_context({"font.size": 11, "axes.spines.top": False, "axes.spines.right": False}):
        figure, axes = plt.subplots(1, panels, figsize=(width * panels, 4), layout="constrained", squeeze=False)
        yield list(axes[0])
        figure.savefig(path, dpi=120)
        plt.close(figure)
