"""When to stop: converged, stalled on round-off, out of iterations, or diverged."""

from dataclasses import dataclass, field

PATIENCE = 40  # checks without a new smallest residual before a solve counts as stalled
LIMIT = 6000  # flow iterations on one mesh


@dataclass
class Watch:
    """Follows the residuals of one solve and says when it is over."""

    stop_below: float
    limit: int = LIMIT
    history: list[tuple[int, float, float]] = field(default_factory=list)
    _best: float = float("inf")
    _since: int = 0

    def verdict(self, iteration: int, flow: float, energy: float) -> str | None:
        """The stop reason, or None to go on. Residuals are normalised; the larger one counts."""
        self.history.append((iteration, flow, energy))
        worst = max(flow, energy)
        if not (flow < float("inf") and energy < float("inf")):  # max() may pass over what is not a number
            return "diverged"
        if worst < self.stop_below:
            return "converged"
        if worst < 0.98 * self._best:
            self._best, self._since = worst, 0
        else:
            self._since += 1
        if self._since > PATIENCE:
            return "no further progress"
        return "iteration limit" if iteration >= self.limit else None

    @property
    def residual(self) -> float:
        return max(self.history[-1][1:]) if self.history else float("inf")
