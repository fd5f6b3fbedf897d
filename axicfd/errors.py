"""What can go wrong in the hands of a user, as exceptions that carry the facts apart from the sentence."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


class AxicfdError(Exception):
    """Base of every error that is meant for a user: its text says what to do next."""


@dataclass(frozen=True)
class Mistake:
    """One mistake in a case.

    file    : name of the case file, or None for a case made in Python
    line    : line in the file, counted from 1, or None where there is none
    key     : dotted path of the key, such as "layer.tube.thickness"; empty for the file as a whole
    value   : the value as read (a string, number, list or table); None where no value stands
    allowed : what must hold, as the end of a sentence: "must be greater than 0 m"
    instead : what to write, a full sentence; may be empty
    """

    file: str | None
    line: int | None
    key: str
    value: object
    allowed: str
    instead: str = ""

    @property
    def text(self) -> str:
        """The whole sentence, place first."""
        place = self.file or ""
        if self.line is not None:
            place += f", line {self.line}" if place else f"line {self.line}"
        subject = ""
        if self.key:
            subject = f"`{self.key}`" if self.value is None else f"`{self.key} = {shown(self.value)}`"
        sentence = " ".join(part for part in (subject, self.allowed) if part)
        if sentence and sentence[-1] not in ".!?":
            sentence += "."
        parts = [f"{place}:" if place else "", sentence, self.instead]
        return " ".join(part for part in parts if part)


def shown(value: object, longest: int = 60) -> str:
    """A value as a case file would show it, cut where it is long."""
    if isinstance(value, bool):
        text = "true" if value else "false"
    elif isinstance(value, str):
        text = f'"{value}"'
    elif isinstance(value, dict):
        text = "{ " + ", ".join(f"{name} = {shown(entry)}" for name, entry in value.items()) + " }" if value else "{}"
    elif isinstance(value, list | tuple):
        text = "[" + ", ".join(shown(entry) for entry in value) + "]"
    else:
        text = str(value)
    return text if len(text) <= longest else text[: longest - 4] + " ..."


class InputError(AxicfdError):
    """A case, plan or command that cannot be used. Holds all mistakes found, in the order of their lines."""

    def __init__(self, mistakes: Iterable[Mistake]) -> None:
        self.mistakes = tuple(sorted(mistakes, key=lambda mistake: mistake.line or 0))
        super().__init__("\n".join(mistake.text for mistake in self.mistakes))

    def __reduce__(self) -> tuple:
        """Travels between processes with its mistakes, not with its text."""
        return type(self), (self.mistakes,)


class UnknownQuantity(InputError, KeyError):
    """A path that names no quantity of a case; a KeyError too, for those who look values up in a result."""

    def __str__(self) -> str:  # a KeyError would show the text in quotes
        return "\n".join(mistake.text for mistake in self.mistakes)


def bad_input(key: str, value: object, allowed: str, instead: str = "") -> InputError:
    """An `InputError` of one mistake that has no place in a file."""
    return InputError([Mistake(None, None, key, value, allowed, instead)])


class RefusedModel(AxicfdError):
    """A readable case whose physics the model does not cover."""


class ResultsFolderError(AxicfdError):
    """A results folder that cannot be written or read."""
