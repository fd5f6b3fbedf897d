"""The tiny case that compiles the kernels."""

from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.kernels import _jit
from axicfd.mesh.build import family
from axicfd.solver import warm_up
from axicfd.solver.solve import solve_on


def test_the_tiny_case_solves():
    case = Case(**warm_up.TABLES)
    assert solve_on(case, family(case, layout(case)).grid()).converged


def test_nothing_is_solved_where_the_kernels_are_there(monkeypatch):
    monkeypatch.setattr(_jit, "is_warm", lambda: True)
    monkeypatch.setattr(warm_up, "solve_on", lambda *_: 1 / 0)
    warm_up.warm_up()
    monkeypatch.setattr(_jit, "is_warm", lambda: False)
    solved = []
    monkeypatch.setattr(warm_up, "solve_on", lambda *_: solved.append(1))
    warm_up.warm_up()
    assert solved == [1]


def test_an_empty_cache_is_cold(tmp_path, monkeypatch):
    monkeypatch.setattr(_jit, "CACHE_FOLDER", tmp_path)
    assert warm_up.is_cold()
    (tmp_path / "kernel.nbi").write_bytes(b"")
    assert not warm_up.is_cold()
    monkeypatch.setattr(_jit, "CACHE_FOLDER", None)
    assert warm_up.is_cold()
