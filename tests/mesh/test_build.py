"""The family of meshes of a case: closed-form volumes, nesting, one material per cell, the keys of [mesh]."""

import numpy as np
import pytest

from axicfd.case.layout import layout
from axicfd.case.read import load
from axicfd.mesh.build import family
from axicfd.mesh.grid import NOTHING, SOLID, STREAM
from tests.case.samples import BASE, changed

CASE = """\
title = "Jacketed line"
[stream.water]
fluid = "water"
inlet_temperature = "20 degC"
mass_flow = "2 g/s"
{stream}
[[layer]]
stream = "water"
diameter = "6 mm"
[[layer]]
name = "tube"
solid = "copper"
thickness = "0.5 mm"
{layer}
[[layer]]
name = "gap"
void = true
thickness = "1 mm"
[[layer]]
name = "jacket"
solid = "ptfe"
outer_diameter = "12 mm"
[[section]]
name = "bare"
length = "0.1 m"
outside = {{ insulated = true }}
[[section.layer]]
stream = "water"
diameter = "6 mm"
[[section.layer]]
name = "tube"
solid = "copper"
thickness = "0.5 mm"
[[section]]
name = "jacketed"
length = "0.3 m"
outside = {{ heat_flux = "1 kW/m^2", film_coefficient = "5 W/m^2/K", ambient = "20 degC" }}
{tail}
"""


def family_of(text):
    case = load(text)
    return family(case, layout(case))


def jacketed(stream="", layer="", tail=""):
    return family_of(CASE.format(stream=stream, layer=layer, tail=tail))


@pytest.mark.parametrize("level", [0, 1, 2, 3, -1])
@pytest.mark.parametrize("make", [jacketed, lambda: family_of(BASE)], ids=["jacketed", "oil line"])
def test_volumes_are_those_of_the_cylinders(make, level):
    f = make()
    grid = f.grid(level)
    for piece in grid.pieces:
        placed = f.layout.sections[piece.section]
        # closed form: pi (r_o^2 - r_i^2) L
        expected = np.pi * (piece.layer.r_outer**2 - piece.layer.r_inner**2) * (placed.z1 - placed.z0)
        assert grid.volume[piece.cells].sum() == pytest.approx(expected, rel=1e-12)
    assert (grid.volume > 0.0).all()
    assert grid.volume.sum() == pytest.approx(np.pi * f.layout.outer_diameter**2 / 4 * f.layout.length, rel=1e-12)


def test_areas_are_those_of_rings():
    grid = jacketed().grid(2)
    assert grid.area_z.sum() == pytest.approx(np.pi * 6e-3**2, rel=1e-12)
    assert grid.area_r[:, -1].sum() == pytest.approx(2 * np.pi * 6e-3 * 0.4, rel=1e-12)
    assert not grid.area_r[:, 0].any()


def test_coarse_faces_are_fine_faces():
    f = jacketed()
    for level in (-1, 0, 1, 2):
        fine, coarse = f.grid(level), f.grid(level + 1)
        assert set(coarse.z) <= set(fine.z)
        assert set(coarse.r) <= set(fine.r)
        assert coarse.nz == fine.nz // 2


def test_interfaces_and_joints_are_faces():
    for level in (-1, 0, 3):
        grid = jacketed().grid(level)
        for place in (0.0, 0.1, 0.4):
            assert np.abs(grid.z - place).min() < 1e-15
        for radius in (0.0, 3e-3, 3.5e-3, 4.5e-3, 6e-3):
            assert np.abs(grid.r - radius).min() < 1e-15


@pytest.mark.parametrize("level", [0, 3, -1])
def test_every_cell_has_the_material_of_its_layer(level):
    grid = jacketed().grid(level)
    expected = {"stream": STREAM, "solid": SOLID, "void": NOTHING}
    for i in range(grid.nz):
        section = grid.layout.sections[grid.section[i]]
        assert section.z0 < grid.zc[i] < section.z1
        for j in range(grid.nr):
            layer = next((p for p in section.layers if p.r_inner < grid.rc[j] < p.r_outer), None)
            if layer is None:
                assert grid.piece[i, j] == -1 and grid.kind[i, j] == NOTHING
            else:
                assert grid.pieces[grid.piece[i, j]].layer == layer
                assert grid.kind[i, j] == expected[layer.kind]
        surface = section.layers[-1].r_outer
        assert grid.r[grid.outer[i]] == pytest.approx(surface, rel=1e-12)
    j0, j1 = grid.streams["water"]
    assert grid.r[[j0, j1]] == pytest.approx([0.0, 3e-3])


def test_counts_are_the_cells_of_the_finest_mesh():
    f = jacketed()
    grid = f.grid()
    assert f.counts["axial"] == grid.nz
    assert f.counts["radial"] == grid.streams["water"][1]
    assert grid.cells == grid.nz * grid.nr


def test_the_tool_stays_below_at_most():
    for n in (2000, 10000, 40000, 160000):
        grid = jacketed(tail=f"[mesh]\nat_most = {n}").grid()
        assert 0.5 * n < grid.cells <= n


def test_radial_and_axial_are_rounded_up_to_the_family():
    f = jacketed(tail="[mesh]\nradial = 20\naxial = 50")
    assert f.counts["radial"] == 24
    assert 50 <= f.counts["axial"] <= 50 + 8 * 2
    assert f.counts["axial"] % 8 == 0


def test_cells_across_a_layer():
    grid = jacketed(layer="cells_across = 20").grid()
    tube = [p for p in grid.pieces if p.layer.name == "tube"]
    assert {p.j1 - p.j0 for p in tube} == {24}


def test_a_void_is_one_cell():
    grid = jacketed().grid()
    (gap,) = (p for p in grid.pieces if p.layer.kind == "void")
    assert gap.j1 - gap.j0 == 1


def test_stretch_keys_act():
    plain = jacketed(tail="[mesh]\nradial = 32\naxial = 64").grid()
    even = jacketed(tail="[mesh]\nradial = 32\naxial = 64\nstretch_to_walls = 1\nstretch_to_ends = 1").grid()
    assert np.diff(even.r)[:32] == pytest.approx(3e-3 / 32, rel=1e-12)
    assert np.ptp(even.dz[even.section == 1]) < 1e-12
    more = jacketed(tail="[mesh]\nradial = 32\naxial = 64\nstretch_to_walls = 9\nstretch_to_ends = 50").grid()
    assert np.diff(more.r)[31] < np.diff(plain.r)[31] < np.diff(even.r)[31]
    # 32 cells of one map whose slopes differ by 9: the cells' sizes differ a little less
    assert 7.0 < np.diff(more.r)[0] / np.diff(more.r)[31] < 9.0


def test_cells_are_graded_to_inlet_joint_and_heater_edge():
    f = jacketed()
    assert [(p.name, p.kind, p.singular) for p in f.places] == [
        ("inlet of water", "inlet", True),
        ("outlet of water", "outlet", False),
        ("joint bare | jacketed", "joint", False),
    ]
    grid = f.grid()
    assert grid.z[list(grid.joints)] == pytest.approx([0.0, 0.1])  # the scheme along z knows of no outlet
    first, last = grid.dz[grid.section == 0], grid.dz[grid.section == 1]
    assert np.argmin(first) in (0, len(first) - 1) and first[0] < 0.2 * first.max()
    assert last[0] < 0.2 * last.max() and last[-1] < 0.2 * last.max()


def test_an_insulated_outlet_is_not_graded_to():
    f = jacketed(stream='direction = "-z"')
    assert [p.kind for p in f.places] == ["inlet", "joint"]
    bare = f.grid().dz[f.grid().section == 0]
    assert np.argmax(bare) == 0 and np.argmin(bare) == len(bare) - 1


def test_an_inlet_at_the_far_end_is_graded_there():
    f = jacketed(stream='direction = "-z"\ninlet_profile = "developed"')
    assert [(p.name, p.z, p.singular) for p in f.places][0] == ("inlet of water", 0.4, False)
    grid = f.grid()
    assert grid.dz[-1] < 0.2 * grid.dz[grid.section == 1].max()


def test_a_heated_end_and_a_given_temperature_are_places():
    f = family_of(BASE)
    kinds = {p.name: p.singular for p in f.places}
    assert kinds["last end"] is False  # heat and a film
    assert kinds["joint plate | hotter"] is True
    assert kinds["joint lead-in | heater"] is False


def test_a_joint_where_nothing_changes_is_no_place():
    text = changed(
        (
            'name    = "lead-in"\nlength  = "0.2 m"\noutside = { insulated = true }\n',
            'name    = "a"\nlength  = "0.1 m"\noutside = { insulated = true }\n'
            '\n[[section]]\nname    = "b"\nlength  = "0.1 m"\noutside = { insulated = true }\n',
        )
    )
    names = [p.name for p in family_of(text).places]
    assert "joint a | b" not in names
    assert "joint b | heater" in names


def test_arrays_are_read_only():
    grid = jacketed().grid(2)
    for array in (grid.z, grid.r, grid.kind, grid.piece, grid.section, grid.volume, grid.rc):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 1


def test_one_direction_may_be_coarser_than_the_other():
    f = jacketed()
    grid = f.grid(1, 2)
    np.testing.assert_array_equal(grid.z, f.grid(1).z)
    np.testing.assert_array_equal(grid.r, f.grid(2).r)


def alike(f, radial, axial):
    """The same factor for every segment of a direction."""
    return [radial] * len(f.radial), [axial] * len(f.axial)


def test_a_refined_family_keeps_maps_and_nests():
    f = jacketed()
    finer = f.refined(*alike(f, 2.0, 1.0), 10 * f.cells)
    np.testing.assert_array_equal(finer.grid(0).z, f.grid(0).z)
    np.testing.assert_allclose(finer.grid(1).r, f.grid(0).r, rtol=1e-14)
    assert 1.9 * f.cells < finer.cells == finer.grid().cells <= 2 * f.cells  # the void keeps its one cell
    odd = f.refined(*alike(f, 1.0, 1.4), 10 * f.cells)
    assert all(s.cells % 8 == 0 and a.cells < s.cells for a, s in zip(f.axial, odd.axial, strict=True))
    assert set(odd.grid(3).z) <= set(odd.grid(0).z)


@pytest.mark.parametrize("room", [1.5, 2.5, 3.7])
def test_refining_stays_below_at_most(room):
    f = jacketed()
    finer = f.refined(*alike(f, 2.0, 2.0), int(room * f.cells))
    assert 1.2 * f.cells <= finer.cells <= room * f.cells


def test_where_there_is_no_room_nothing_is_refined():
    f = jacketed()
    assert f.refined(*alike(f, 2.0, 2.0), int(1.1 * f.cells)) is None
    assert f.refined(*alike(f, 2.0, 2.0), f.cells // 2) is None


def test_one_segment_may_be_refined_alone():
    f = jacketed()
    radial, axial = alike(f, 1.0, 1.0)
    radial[0] = 2.0
    finer = f.refined(radial, axial, 10 * f.cells)
    assert finer.radial[0].cells == 2 * f.radial[0].cells and finer.radial[1:] == f.radial[1:]
    assert finer.axial == f.axial


def test_a_refinement_too_small_to_be_worth_it_is_made_larger():
    f = jacketed()
    finer = f.refined(*alike(f, 1.0, 1.01), 10 * f.cells)
    assert 1.2 * f.cells <= finer.cells < 1.5 * f.cells
    assert f.refined(*alike(f, 1.0, 1.0), 10 * f.cells) is None


def test_one_segment_may_be_coarser():
    f = jacketed()
    coarser = f.coarsened(axial=0)
    assert 2 * coarser.axial[0].cells == f.axial[0].cells
    assert coarser.axial[1:] == f.axial[1:] and coarser.radial == f.radial
    assert set(coarser.grid(2).z) <= set(f.grid(2).z)
