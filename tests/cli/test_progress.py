import io
from types import SimpleNamespace

from axicfd.case.read import load
from axicfd.cli.progress import Progress
from axicfd.output.shown import shown_units
from tests.output.made_up import TEXT


class Terminal(io.StringIO):
    def isatty(self):
        return True


def event(level, done, cells=40960, outlet=314.45, refinements=0, half_widths=(None, None)):
    return SimpleNamespace(
        level=level,
        levels=5,
        cells=cells,
        outlet_temperature=outlet,
        pressure_drop=18200.0,
        seconds=1.1,
        residual=1e-9,
        done=done,
        refinements=refinements,
        outlet_half_width=half_widths[0],
        drop_half_width=half_widths[1],
    )


def test_one_line_per_mesh_rewritten_in_place():
    out = Terminal()
    progress = Progress(shown_units(load(TEXT)), out)
    for level, done in ((1, False), (1, True), (2, False), (2, True)):
        progress(event(level, done))
    progress.close()
    assert out.getvalue().count("\n") == 2
    last = out.getvalue().rstrip("\n").split("\x1b[K")[-1]
    assert last == "mesh 2 of 5   40 960 cells   outlet 41.30 degC   drop 18200 Pa   1.1 s"


def test_plain_lines_elsewhere():
    out = io.StringIO()
    progress = Progress(shown_units(load(TEXT)), out)
    for level, done in ((1, False), (1, True), (2, False), (2, True)):
        progress(event(level, done))
    progress.close()
    assert "\x1b" not in out.getvalue() and "\r" not in out.getvalue()
    assert sum("mesh 2 of 5" in line for line in out.getvalue().splitlines()) == 1


def test_three_meshes_tell_the_mesh_error_so_far():
    line = Progress(shown_units(load(TEXT)), io.StringIO()).line(event(4, True, half_widths=(0.05, 131.0)))
    assert line == "mesh 4 of 5   40 960 cells   outlet 41.30 ±0.05 degC   drop 18200 ±140 Pa   1.1 s"


def test_a_refined_family_of_meshes_is_told_apart():
    line = Progress(shown_units(load(TEXT)), io.StringIO()).line(event(2, True, refinements=1))
    assert line.startswith("refinement 1   mesh 2 of 5   ")


def test_nothing_flowing_has_no_outlet():
    line = Progress(shown_units(load(TEXT)), io.StringIO()).line(event(1, True, outlet=None))
    assert "outlet" not in line
