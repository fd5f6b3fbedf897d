"""Exit statuses, in one place."""

SOLVED = 0
NOT_CONVERGED = 1  # the fields are kept and marked
UNUSABLE = 2  # unusable input, a refused model, a usage error, an existing folder
LIMIT_FAILED = 3  # solved, but a limit failed or, with --strict, a caution stands
INTERRUPTED = 130
