"""Points spread over the unit cube, for inputs that vary independently."""

from axicfd.mesh.grid import Array


def latin_hypercube(inputs: int, count: int, seed: int) -> Array:
    """(count, inputs) points in (0, 1): each input has exactly one point in each of `count` equal strips.

    The same seed gives the same points. McKay, Beckman and Conover 1979, Technometrics 21, 239-245.
    """
    from scipy.stats import qmc

    return qmc.LatinHypercube(inputs, seed=seed).random(count)
