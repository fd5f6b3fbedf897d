"""What is large enough to matter: per cent of a scale, or amounts of one kind of quantity."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from axicfd import units
from axicfd.case.quantities import difference_of
from axicfd.errors import AxicfdError

DEFAULT_PER_CENT = 2.0  # of the scale: common practice, no source; film coefficients are rarely known better
KINDS = "temperature_difference", "heat", "pressure_difference"  # of which an amount may be cared for


@dataclass(frozen=True)
class Care:
    """From where on a change counts.

    per_cent : of the scale of each quantity; None where only amounts count
    amounts  : kind of quantity -> SI amount; with amounts alone, quantities of other kinds decide nothing
    """

    per_cent: float | None = DEFAULT_PER_CENT
    amounts: Mapping[str, float] = field(default_factory=dict)

    def of(self, kind: str, scale: float) -> float | None:
        """The amount that matters of a kind of quantity with a scale, SI; None where it decides nothing."""
        kind = difference_of(kind)
        if kind in self.amounts:
            return self.amounts[kind]
        return None if self.per_cent is None or scale <= 0.0 else self.per_cent / 100.0 * scale


def read_care(given: str | Sequence[str] | Care | None) -> Care:
    """`Care` from "2 %", "1 K", or several such as ["1 K", "0.5 W"]; None is the default.

    Raises `AxicfdError` that says what to write.
    """
    if given is None:
        return Care()
    if isinstance(given, Care):
        return given
    per_cent: float | None = None
    amounts: dict[str, float] = {}
    for text in given if isinstance(given, list | tuple) else [given]:
        kind, amount = _read(text)
        if kind in amounts or (not kind and per_cent is not None):
            raise _refuse(text, "speaks of the same kind of quantity as another one", "Give each kind once.")
        if kind:
            amounts[kind] = amount
        else:
            per_cent = amount
    return Care(per_cent, amounts) if per_cent or amounts else Care()


def _read(text: Any) -> tuple[str, float]:
    """(kind, SI amount), the kind "" for per cent."""
    if not isinstance(text, str):
        raise _refuse(text, "is not an amount that a change can be held against")
    for kind in ("", *KINDS):
        try:
            number, unit = units.split(text)
            amount = units.parse(text, kind) if kind else number
        except units.UnitError:
            continue
        if not kind and unit != "%":
            continue
        if amount <= 0.0:
            raise _refuse(text, "must be greater than 0")
        return kind, amount
    raise _refuse(text, "is not an amount that a change can be held against")


def _refuse(text: Any, what: str, instead: str = "") -> AxicfdError:
    instead = instead or 'Write an amount such as "1 K" or "0.5 W", or per cent of each scale: "2 %".'
    given = f'"{text}"' if isinstance(text, str) else text
    return AxicfdError(f"`care = {given}` {what}. {instead}")
