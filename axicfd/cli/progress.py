"""Progress of a solve on standard error: one line per mesh, rewritten in place on a terminal.

Elsewhere plain lines, one per finished mesh and one every few seconds, so that a log shows progress.
"""

from __future__ import annotations

import sys
import time
from typing import Any, Self, TextIO

from axicfd.output.headline import amount_with_bar, number

PLAIN_EVERY = 5.0  # seconds between plain lines within one mesh
REWRITE_EVERY = 0.05  # seconds between two writes of the same line


class _Line:
    """One line that is rewritten on a terminal, or plain lines elsewhere; for use in a `with`, or until `close`."""

    def __init__(self, stream: TextIO | None = None) -> None:
        self._out = sys.stderr if stream is None else stream
        self._in_place = self._out.isatty()
        self._written = -PLAIN_EVERY
        self._open = False

    def _is_older_than(self, seconds: float) -> bool:
        return time.monotonic() - self._written > seconds

    def _write(self, text: str) -> None:
        self._out.write(f"\r\x1b[K{text}" if self._in_place else f"{text}\n")
        self._out.flush()
        self._open, self._written = self._in_place, time.monotonic()

    def close(self) -> None:
        """End the line that stands open on a terminal."""
        if self._open:
            self._out.write("\n")
            self._out.flush()
            self._open = False

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: Any) -> None:
        self.close()


class Progress(_Line):
    """Called with each event of a solve."""

    def __init__(self, shown: Any, stream: TextIO | None = None) -> None:
        super().__init__(stream)
        self._shown = shown
        self._level: int | None = None

    def __call__(self, event: Any) -> None:
        if self._in_place:
            if self._level is not None and event.level != self._level:
                self.close()
            if event.done or event.level != self._level or self._is_older_than(REWRITE_EVERY):
                self._write(self.line(event))
        elif event.done or self._is_older_than(PLAIN_EVERY):
            self._write(self.line(event))
        self._level = event.level

    def line(self, event: Any) -> str:
        """`mesh 4 of 5   40 960 cells   outlet 41.30 ±0.05 degC   drop 0.1820 ±0.0013 bar   1.1 s`."""
        parts = [f"mesh {event.level} of {event.levels}", f"{grouped(event.cells)} cells"]
        if event.refinements:
            parts.insert(0, f"refinement {event.refinements}")
        if event.outlet_temperature is not None:
            outlet = event.outlet_temperature, event.outlet_half_width
            parts.append(f"outlet {amount_with_bar(self._shown, 'temperature', *outlet)}")
        if event.pressure_drop is not None:
            drop = event.pressure_drop, event.drop_half_width
            parts.append(f"drop {amount_with_bar(self._shown, 'pressure', *drop)}")
        parts.append(f"{event.seconds:.1f} s")
        return "   ".join(parts)


class VariantProgress(Progress):
    """Of several solves one after the other, all on one line that names the variant."""

    def __call__(self, name: str, event: Any) -> None:  # type: ignore[override]
        ended = event.done and (self._in_place or event.level == event.levels)
        if ended or (self._in_place and self._is_older_than(REWRITE_EVERY)):
            self._write(f"{name}   {self.line(event)}")


class SearchProgress(_Line):
    """Of a search for an input."""

    def __call__(self, step: Any, inputs: Any, targets: Any) -> None:
        if self._in_place or not step.is_look or self._is_older_than(PLAIN_EVERY):
            self._write(self.line(step, inputs, targets))

    def line(self, step: Any, inputs: Any, targets: Any) -> str:
        """`look 7   section.heater.length 0.23 m   stream.oil.outlet_temperature 41.2 degC`."""
        parts = [f"{'look' if step.is_look else 'solve'} {step.number}"]
        parts += [f"{i.path} {number(i.shown(v))} {i.unit}".rstrip() for i, v in zip(inputs, step.inputs, strict=True)]
        if step.quantities is None:
            parts.append("no answer there")
        else:
            reached = zip(targets, step.quantities, strict=True)
            parts += [f"{t.quantity.path} {number(t.shown(v), 6)} {t.unit}".rstrip() for t, v in reached]
        return "   ".join(parts)


def say_if_cold() -> None:
    """Say that kernels are about to be compiled, which looks like a standstill."""
    from axicfd.solver.warm_up import is_cold

    if is_cold():
        print("compiling the numerical kernels, once on this machine: half a minute or so", file=sys.stderr, flush=True)


def grouped(count: int) -> str:
    """40960 -> "40 960"."""
    return f"{count:,}".replace(",", " ")


class Rows(_Line):
    """The same for many cases: one line for all of them, called after each."""

    def __init__(self, stream: TextIO | None = None, of: str = "rows") -> None:
        super().__init__(stream)
        self._of = of

    def __call__(self, event: Any) -> None:
        if self._in_place or event.done == event.rows or self._is_older_than(PLAIN_EVERY):
            self._write(self.line(event))

    def line(self, event: Any) -> str:
        """`12 of 45 rows   1 not solved   2.5 min left`."""
        parts = [f"{grouped(event.done)} of {grouped(event.rows)} {self._of}"]
        if event.failed:
            parts.append(f"{grouped(event.failed)} not solved")
        if event.left is not None and event.done < event.rows:
            parts.append(f"{duration(event.left)} left")
        return "   ".join(parts)


def duration(seconds: float) -> str:
    """42 -> "42 s", 150 -> "2.5 min", 9000 -> "2.5 h"."""
    if seconds < 90:
        return f"{seconds:.0f} s"
    return f"{seconds / 60:.1f} min" if seconds < 5400 else f"{seconds / 3600:.1f} h"
