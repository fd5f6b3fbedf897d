"""The case that `axicfd new` writes, and the shipped cases, as texts."""

import math
from pathlib import Path

import pytest

from axicfd.case import starter
from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.case.read import declared, load, part_at
from axicfd.case.write import to_toml

CASES = sorted((Path(__file__).parents[2] / "cases").glob("*.toml"))
CASES = [path for path in CASES if not path.stem.endswith("-sweep")]


def test_the_starter_reads():
    case = load(starter.TEXT)
    assert layout(case).bore_diameter == 0.004 and len(case.section) == 3


def test_the_starter_explains_every_open_key():
    for table in (
        "stream",
        "fluid",
        "solid",
        "layer",
        "section",
        "sensor",
        "quantity",
        "mesh",
        "physics",
        "solve",
        "results",
    ):
        way = (table, "x") if table in ("stream", "fluid", "solid", "sensor", "quantity") else (table, 0)
        part = part_at(way) or part_at((table,))
        for name in part.model_fields:
            if name not in ("density", "name", "cells_across", "void", "layer", "specific_heat"):
                assert name in starter.TEXT, f"{table}.{name}"
    for name in Case.model_fields:
        if declared(Case, name):
            assert name in starter.TEXT


@pytest.mark.parametrize(
    "what", ["# joint_length = ", "# generated = ", "# contact_resistance = ", "# heat_per_volume    = "]
)
def test_what_the_starter_offers_in_comments_stands_there(what):
    assert what in starter.TEXT


def reynolds(case: Case) -> float:
    """Of the bore at inlet state."""
    ((name, stream),) = case.stream.items()
    fluid = case.fluid_of(name)
    bore, T = layout(case).bore_diameter, stream.inlet_temperature
    density, viscosity = float(fluid.density(T)), float(fluid.viscosity(T))
    area = math.pi * bore**2 / 4
    if stream.reynolds is not None:
        return stream.reynolds
    flow = stream.mass_flow if stream.mass_flow is not None else stream.volume_flow * density
    return flow / area * bore / viscosity


def test_reynolds_of_the_starter_is_about_500():
    assert 400 < reynolds(load(starter.TEXT)) < 600


@pytest.mark.parametrize("path", CASES, ids=lambda path: path.stem)
def test_shipped_cases_ask_a_question_read_and_reproduce_themselves(path):
    text = path.read_text(encoding="utf-8")
    assert text.startswith("# Question: ") and "?" in text.split("\n#\n")[0]
    case = load(path)
    assert load(to_toml(case)) == case
    assert 0 < reynolds(case) < 2000


def test_the_syrup_thins_more_than_tenfold():
    case = load(next(path for path in CASES if path.stem == "syrup-jacket"))
    viscosity = case.fluid_of("syrup").viscosity
    assert viscosity(293.15) / viscosity(358.15) > 10
