"""Every shipped case: it reads, solves, keeps its balances by its files alone, stays within bounds and gives
the numbers it gave before."""

import tomllib
from pathlib import Path

import numpy as np
import pytest

from axicfd.output import folder
from axicfd.results.result import Result
from axicfd.variants.plan import read_plan
from tests import shipped
from validation import ledger

EXPECTED = tomllib.loads((Path(__file__).parent / "expected.toml").read_text(encoding="utf-8"))
FULL = pytest.param(False, marks=pytest.mark.slow, id="own mesh")


@pytest.fixture(params=[pytest.param(True, id="coarse"), FULL])
def coarse(request) -> bool:
    return request.param


@pytest.mark.parametrize("name", shipped.NAMES)
def test_opens_with_its_question_and_has_expected_numbers(name):
    text = (shipped.FOLDER / f"{name}.toml").read_text(encoding="utf-8")
    assert text.startswith("# Question: ")
    assert "The scene" in text and "made up" in text
    assert EXPECTED[name]


def test_expected_numbers_belong_to_cases():
    assert sorted(EXPECTED) == shipped.NAMES


@pytest.mark.parametrize("name", shipped.NAMES)
def test_balances_by_the_files_alone(name, coarse, tmp_path):
    result = shipped.solved(name, coarse)
    assert result.converged
    folder.write(result, tmp_path / "results")
    found = ledger.recompute(tmp_path / "results")
    assert found["mass"] < 1e-10
    assert found["energy"] < 1e-8
    for curves in "stream", "outside":
        assert found[curves] < (2e-2 if coarse else 1e-3), curves
    # the tool's own figure is the same sum
    assert result.summary["balance"]["energy"] < 1e-8
    assert result.summary["balance"]["mass"] < 1e-10


def temperatures(result: Result) -> np.ndarray:
    """All temperatures of cells and surfaces [K]."""
    heat, kind = result.solution.heat, result.solution.grid.kind
    t_in = result.fields["inlet_temperature"]
    surface = heat.minus[np.arange(len(kind)), result.solution.grid.outer]
    return np.concatenate([heat.t[kind != 0], surface]) + t_in


@pytest.mark.parametrize("name", shipped.NAMES)
def test_no_temperature_beyond_what_causes_it(name, coarse):
    """Nothing is colder than the coldest of inlet and surroundings (nothing here takes heat away otherwise),
    and, where no heat is brought in, nothing hotter than the hottest; 1e-4 of the span is left to the
    scheme."""
    case, result = shipped.case(name), shipped.solved(name, coarse)
    outsides = [s.outside for s in case.section]
    around = [next(iter(case.stream.values())).inlet_temperature]
    around += [value for o in outsides for value in (o.ambient, o.temperature) if value is not None]
    around += [end.temperature for end in (*case.ends.first.values(), *case.ends.last.values()) if end.temperature]
    t = temperatures(result)
    span = float(np.ptp(t))
    assert t.min() > min(around) - 1e-4 * span
    if not any(getattr(o, key) for o in outsides for key in o.HEATS):
        assert t.max() < max(around) + 1e-4 * span


@pytest.mark.parametrize("name", shipped.NAMES)
@pytest.mark.parametrize("what", ["bulk_temperature_K", "wetted_wall_temperature_K"])
def test_curves_have_no_wiggle(name, what, coarse):
    """The bulk temperature of these cases rises all along (heated, then kept), the wall's has few turning
    points."""
    curves = next(iter(shipped.solved(name, coarse).axial.values()))[what]
    steps = np.diff(curves)
    span = np.ptp(curves)
    turns = np.count_nonzero(np.diff(np.sign(steps[np.abs(steps) > 1e-6 * span])))
    assert turns <= 3


@pytest.mark.slow
@pytest.mark.parametrize("name", shipped.NAMES)
def test_numbers_of_the_shipped_cases(name):
    """Regression only: the numbers were computed here, on the meshes the tool chose."""
    result = shipped.solved(name, False)
    for quantity, (value, tolerance) in EXPECTED[name].items():
        assert result[quantity] == pytest.approx(value, abs=tolerance), quantity


@pytest.mark.parametrize("name", shipped.NAMES)
def test_a_coarse_mesh_comes_close(name):
    """To a few per cent of the largest rise: the sixteenth of the cells tells the same story."""
    result = shipped.solved(name, True)
    for quantity, (value, tolerance) in EXPECTED[name].items():
        scale = value - result.fields["inlet_temperature"] if quantity.endswith("_K") else value
        assert result[quantity] == pytest.approx(value, abs=0.04 * abs(scale) + tolerance), quantity


@pytest.mark.parametrize("path", shipped.PLANS, ids=lambda path: path.stem)
def test_every_shipped_plan_makes_cases(path):
    plan = read_plan(path)
    assert len(plan.rows) > 1
