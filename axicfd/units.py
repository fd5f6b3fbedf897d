"""Quantities as text and back: "12 mm" <-> 0.012. Units are met here and nowhere deeper.

The number and the unit are split here and only the unit reaches the unit library: given the whole string it
reads "50 W/m^2/degC" as an offset temperature, hangs on "10**10**10 m" and evaluates more than a unit.
Whether a temperature is absolute or a difference is decided by the kind asked for, never guessed.
"""

from __future__ import annotations

import difflib
import math
import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from typing import Any


@dataclass(frozen=True)
class Kind:
    """A kind of quantity: its name in a sentence, its SI unit, an example, and spellings to offer."""

    words: str
    si: str
    example: str
    others: tuple[str, ...] = ()


KINDS = {
    "length": Kind("a length", "m", "12 mm", ("m", "mm", "cm", "um", "in", "ft")),
    "temperature": Kind("a temperature", "K", "20 degC", ("degC", "K", "degF")),
    "temperature_difference": Kind("a temperature difference", "K", "0.1 K", ("K",)),
    "mass_flow": Kind("a mass flow", "kg/s", "4 g/s", ("kg/s", "g/s", "g/min", "kg/h", "lb/h")),
    "volume_flow": Kind("a volume flow", "m^3/s", "100 mL/min", ("mL/min", "L/min", "L/h", "m^3/h", "uL/min")),
    "velocity": Kind("a velocity", "m/s", "0.1 m/s", ("m/s", "mm/s", "ft/s")),
    "pressure": Kind("an absolute pressure", "Pa", "1 atm", ("Pa", "kPa", "bar", "atm", "psi")),
    "pressure_difference": Kind("a pressure difference", "Pa", "50 Pa", ("Pa", "mbar", "kPa", "bar", "psi")),
    "density": Kind("a density", "kg/m^3", "998 kg/m^3", ("kg/m^3", "g/cm^3", "kg/L")),
    "specific_heat": Kind("a specific heat", "J/kg/K", "4180 J/kg/K", ("J/kg/K", "kJ/kg/K")),
    "conductivity": Kind("a thermal conductivity", "W/m/K", "0.6 W/m/K", ("W/m/K", "W/cm/K")),
    "viscosity": Kind("a dynamic viscosity", "Pa s", "1 mPa s", ("Pa s", "mPa s", "cP")),
    "heat_flux": Kind("a heat flux", "W/m^2", "1.2 kW/m^2", ("W/m^2", "kW/m^2", "W/cm^2")),
    "heat": Kind("a heat rate", "W", "40 W", ("W", "mW", "kW")),
    "heat_per_length": Kind("a heat rate per length", "W/m", "20 W/m", ("W/m", "W/cm", "W/ft")),
    "film_coefficient": Kind("a film coefficient", "W/m^2/K", "900 W/m^2/K", ("W/m^2/K", "kW/m^2/K")),
    "contact_resistance": Kind("a contact resistance", "m^2 K/W", "1e-4 m^2 K/W", ("m^2 K/W", "cm^2 K/W")),
    "heat_per_volume": Kind("a heat rate per volume", "W/m^3", "2 MW/m^3", ("W/m^3", "kW/m^3", "MW/m^3", "W/cm^3")),
    "thermal_resistance": Kind("a thermal resistance", "K/W", "0.5 K/W", ("K/W", "mK/W")),
    "time": Kind("a time", "s", "2 s", ("s", "ms", "min", "h")),
    "per_kelvin": Kind("an exponent per kelvin", "1/K", "0.05 1/K", ("1/K",)),
}


class UnitError(ValueError):
    """Text that is not the quantity asked for; `allowed` ends the sentence, `instead` says what to write."""

    def __init__(self, allowed: str, instead: str = "", looks_like: tuple[str, ...] = ()) -> None:
        self.allowed = allowed
        self.instead = instead
        self.looks_like = looks_like  # kinds whose unit this is, so that a caller can name the right key
        super().__init__(f"{allowed}. {instead}".strip())


_NUMBER = re.compile(r"\s*([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)(?![\d.])\s*")
_NAME = r"(?:[A-Za-zµμΩ°][A-Za-z_µμ°Ω]*|%)"
_TOKEN = re.compile(rf"\s*(?:({_NAME})(?:\s*(?:\^|\*\*)\s*(-?\d)(?!\d))?|(1)(?=\s*/)|([*/·()]))")
_SUPERSCRIPTS = str.maketrans({"²": "^2", "³": "^3", "μ": "µ"})


def split(text: str) -> tuple[float, str]:
    """The number and the unit of "12 mm". Raises `UnitError` where no finite number begins the text."""
    found = _NUMBER.match(text)
    if not found:
        if re.match(r"\s*[+-]?(nan|inf)", text, re.IGNORECASE):
            raise UnitError("must be a finite number with a unit")
        raise UnitError("must be a number with a unit")
    rest = text[found.end() :].strip()
    if re.match(r"[,']\d", rest):
        raise UnitError("has no plain number", f'Write "{re.sub(r"[,]", ".", text, count=1)}": a point, no comma.')
    number = float(found.group(1))
    if not math.isfinite(number):
        raise UnitError("must be a finite number with a unit")
    return number, rest


def parse(text: str, kind: str) -> float:
    """The SI value of a quantity: parse("12 mm", "length") -> 0.012; "20 degC" as "temperature" -> 293.15.

    kind : a key of `KINDS`
    Raises `UnitError` for text without a number, without a unit, or with a unit of another kind.
    """
    number, unit = split(text)
    if not unit:
        raise UnitError(
            f"has no unit; it must be {_with_example(kind)}",
            f'Write "{text.strip()} {_first_unit(kind)}" if that is meant.',
        )
    factor, offset = _to_si(unit, kind, number)
    value = (number + offset) * factor
    if not math.isfinite(value):
        raise UnitError("must be a finite number with a unit")
    return value


def from_si(value: float, unit: str, kind: str) -> float:
    """The number that stands before `unit`: from_si(293.15, "degC", "temperature") -> 20.0."""
    factor, offset = _to_si(unit, kind, value)
    number = value / factor - offset
    # 293.15 K less 273.15 K leaves 20.000000000000057: fewer digits are as true if they lead back
    return _shortest(number, lambda shorter: (shorter + offset) * factor == value)


def written(value: float, kind: str, unit: str | None = None) -> str:
    """The text of an SI value such that `parse` returns exactly `value`; in `unit` where that is possible."""
    if unit is not None:
        text = f"{_plain(from_si(value, unit, kind))} {unit}"
        if parse(text, kind) == value:
            return text
    return f"{_plain(value)} {KINDS[kind].si}"


def convert(values: Any, unit: str, kind: str) -> Any:
    """SI numbers (float or array) in another unit, for tables and axes."""
    factor, offset = _to_si(unit, kind, 0.0)
    return values / factor - offset


def in_name(kind: str) -> str:
    """The SI unit of a kind as the end of a column's name: "W/m^2/K" -> "W_m2K"."""
    above, *below = KINDS[kind].si.replace("^", "").split("/")
    return "_".join(part.replace(" ", "_") for part in (above, "".join(below)) if part)


def _plain(number: float) -> str:
    text = repr(float(number))
    return text[:-2] if text.endswith(".0") else text


def _shortest(number: float, same) -> float:
    for digits in range(6, 17):
        shorter = float(f"{number:.{digits}g}")
        if same(shorter):
            return shorter
    return number


def _first_unit(kind: str) -> str:
    return split(KINDS[kind].example)[1]


def _with_example(kind: str) -> str:
    return f'{KINDS[kind].words} such as "{KINDS[kind].example}"'


@lru_cache(maxsize=1)
def _registry() -> Any:
    import pint

    from axicfd import cache

    try:
        # reading the table of units takes longer than all else that is done with it
        return pint.UnitRegistry(cache_folder=cache.folder(f"units-{pint.__version__}"))
    except Exception:  # a damaged cache raises whatever it happens to raise
        return pint.UnitRegistry()


def _checked(unit: str) -> str | None:
    """The unit in the one spelling handed on, or None where it is no plain product of powers of names."""
    text = unit.translate(_SUPERSCRIPTS)
    if len(text) > 40:
        return None
    parts: list[str] = []
    place, depth, wants_name = 0, 0, True
    while place < len(text):
        found = _TOKEN.match(text, place)
        if not found:
            if text[place:].strip():
                return None
            break
        name, power, one, sign = found.groups()
        spaced = text[place].isspace()
        if name or one:
            if not wants_name:
                if not spaced:
                    return None  # two names run together, as in "m^2K"
                parts.append("*")
            parts.append(one or (f"{name}**{power}" if power else name))
            wants_name = False
        elif sign == "(":
            if not wants_name:
                parts.append("*")
            parts.append(sign)
            depth, wants_name = depth + 1, True
        elif sign == ")":
            depth -= 1
            if wants_name or depth < 0:
                return None
            parts.append(sign)
        else:
            if wants_name:
                return None
            parts.append("/" if sign == "/" else "*")
            wants_name = True
        place = found.end()
    return None if wants_name or depth else "".join(parts)


@lru_cache(maxsize=1024)
def _scale(unit: str, kind: str) -> tuple[float, float] | None:
    """(factor, offset) with SI value = (number + offset) * factor, or None for a unit of another kind."""
    spelling = _checked(unit)
    if spelling is None:
        return None
    if kind == "temperature":
        known = {
            "K": (1.0, 0.0),
            "kelvin": (1.0, 0.0),
            "degR": (5 / 9, 0.0),
            "degF": (5 / 9, 459.67),
            "°F": (5 / 9, 459.67),
        }
        known |= dict.fromkeys(("degC", "°C", "celsius", "degree_Celsius"), (1.0, 273.15)) | {"mK": (1e-3, 0.0)}
        return known.get(spelling)
    if kind == "temperature_difference":  # the unit library would add the zero point of a bare degC
        absolute = _scale(unit, "temperature")
        return (absolute[0], 0.0) if absolute else None
    if re.search(r"(?<![A-Za-z])(g_0|delta_|dB)", spelling):
        return None
    try:
        units = _registry()
        quantity = units.Quantity(1.0, units.parse_units(spelling, as_delta=True)).to(
            units.parse_units(KINDS[kind].si.replace(" ", "*"))
        )
    except Exception:  # the library raises a dozen kinds of error, some of them bare assertions
        return None
    factor = float(quantity.magnitude)
    return (factor, 0.0) if math.isfinite(factor) and factor > 0 else None


def _to_si(unit: str, kind: str, number: float) -> tuple[float, float]:
    scale = _scale(unit, kind)
    if scale is not None:
        return scale
    raise _mended(unit, kind, number)


# What a hurried hand writes, and what it means. Left out on purpose: anything with two meanings.
_GAUGE = {
    "barg": "bar",
    "bar g": "bar",
    "bar(g)": "bar",
    "bar (g)": "bar",
    "bar gauge": "bar",
    "psig": "psi",
    "psi g": "psi",
    "kPag": "kPa",
    "kPa g": "kPa",
    "kPa(g)": "kPa",
    "mbarg": "mbar",
}
_SPELLINGS = {
    "gpm": "gal/min",
    "lpm": "L/min",
    "LPM": "L/min",
    "cc/min": "mL/min",
    "ccm": "mL/min",
    "bara": "bar",
    "bar a": "bar",
    "bar(a)": "bar",
    "psia": "psi",
    "C": "degC",
    "F": "degF",
    "deg C": "degC",
    "deg F": "degF",
    "Celsius": "degC",
    "° C": "degC",
    "Pas": "Pa s",
    "Pa.s": "Pa s",
    "mPas": "mPa s",
    "mPa.s": "mPa s",
    "Pa-s": "Pa s",
    "inch": "in",
    '"': "in",
    "mm.": "mm",
    "Kelvin": "K",
    "kelvins": "K",
    "deg": "degC",
    "degrees": "degC",
    "centigrade": "degC",
    "Watt": "W",
    "microns": "um",
}
_STANDARD_FLOWS = ("sccm", "slpm", "slm", "scfm", "nl/min", "nlpm", "nml/min", "sl/min")


def _candidates(unit: str) -> Iterator[str]:
    """Other spellings of a unit, the most likely first."""
    if unit in _SPELLINGS:
        yield _SPELLINGS[unit]
    powers = re.sub(r"(?<=[A-Za-z])([23])(?!\d)", r"^\1", unit)  # m2 -> m^2
    for text in (powers, unit):
        yield text
        head, slash, tail = text.partition("/")
        if slash:
            tail = re.sub(r"[()]", "", tail)
            apart = re.sub(
                r"(\^\d|(?<=m)|(?<=kg)|(?<=g))\s*[.·* -]?\s*(?=(?:K|degC|C|°C)\b)", r"\1/", tail
            )  # m^2K, mK, kg K
            apart = re.sub(r"/{2,}", "/", apart)
            yield f"{head}/{apart}"
            yield f"{head}/" + re.sub(r"\s+", "/", tail.strip())
            yield re.sub(r"\b°?C\b", "degC", f"{head}/{apart}")
        yield re.sub(r"(?<![A-Za-z])C(?![A-Za-z])", "degC", text)
        yield re.sub(r"(?<![A-Za-z])F(?![A-Za-z])", "degF", text)
        yield text.replace(".", " ")
        yield text.replace("-", " ")
        yield text.lower()


def _mended(unit: str, kind: str, number: float) -> UnitError:
    """The error for a unit that does not fit, with the sentence that mends it."""
    words = _with_example(kind)
    shown = _plain(number)
    if kind == "pressure" and unit in _GAUGE:
        absolute = number + {"bar": 1.01325, "psi": 14.696, "kPa": 101.325, "mbar": 1013.25}[_GAUGE[unit]]
        return UnitError(
            "must be an absolute pressure; this is a gauge pressure",
            f'Write "{absolute:.4g} {_GAUGE[unit]}".',
        )
    if unit.lower() in _STANDARD_FLOWS:
        return UnitError(
            f"must be {words}", "A flow at a standard state is not available yet: convert it to a mass flow."
        )
    for other in _candidates(unit):
        if other != unit and _scale(other, kind) is not None:
            return UnitError(
                f'has the unit "{unit}", which does not read as {KINDS[kind].words}',
                f'Write "{shown} {other}".',
            )
    if kind == "viscosity" and _factor_in(unit, "m^2/s"):
        return UnitError(f"must be {words}; this is a kinematic viscosity", "Multiply it by the density.")
    alike = tuple(name for name in KINDS if name != kind and _scale(unit, name) is not None)
    if alike:
        return UnitError(
            f'must be {words}; "{unit}" is a unit of {KINDS[alike[0]].words.split(" ", 1)[1]}',
            f"Write it in {_listed(kind)}.",
            alike,
        )
    near = difflib.get_close_matches(unit, KINDS[kind].others, 1, 0.6)
    return UnitError(
        f'has the unknown or unfit unit "{unit}"; it must be {words}',
        f'Write "{shown} {near[0]}".' if near else f"Write it in {_listed(kind)}.",
    )


def _listed(kind: str) -> str:
    names = KINDS[kind].others
    return names[0] if len(names) == 1 else ", ".join(names[:-1]) + " or " + names[-1]


def _factor_in(unit: str, si: str) -> bool:
    spelling = _checked(unit)
    if spelling is None:
        return False
    try:
        units = _registry()
        units.Quantity(1.0, units.parse_units(spelling)).to(si)
    except Exception:
        return False
    return True
