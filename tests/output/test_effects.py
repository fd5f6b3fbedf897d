"""Sentences and rows about effects, from made-up differences."""

import numpy as np
import pytest

from axicfd.case.quantities import ResultQuantity
from axicfd.output import effects, variants
from axicfd.output.shown import DEFAULTS, Shown
from axicfd.variants.contrast import Change, Difference, Effect
from axicfd.variants.wall import wall_effect
from tests.variants.tubes import effect as solved
from tests.variants.tubes import tube

SHOWN = Shown(dict(DEFAULTS))


def difference(
    name: str, value: float, half: float | None, care: float | None = 1.0, scale: float = 38.0
) -> Difference:
    of = ResultQuantity(f"stream.oil.{name}", ("stream", "oil", f"{name}_K"))
    return Difference(of, 330.0 + value, 330.0, Change(value, half), scale, care)


def test_what_matters_is_kept_and_what_is_left_alone_is_said():
    found = Effect(
        "axial conduction in the wall",
        (difference("hottest_wetted_wall", -6.1, 0.2), difference("outlet_temperature", 0.01, 0.05)),
    )
    assert effects.sentence(found, SHOWN) == (
        "Axial conduction in the wall lowers the hottest wetted wall from 56.85 degC to 50.75 degC, by 6.1 ±0.2 K: "
        "keep it. "
        "The outlet temperature is not affected: +0.01 ±0.05 K."
    )


def test_a_change_is_written_to_four_digits_at_most_and_its_half_width_rounded_up_to_the_last_of_them():
    large = difference("hottest_wetted_wall", -15.807, 0.0003, scale=12.3)
    assert effects.change_text(large, SHOWN) == "-15.81 ±0.01 K"
    assert effects.change_text(difference("hottest_wetted_wall", 0.01234, 0.00002, scale=20.0), SHOWN) == (
        "+0.012 ±0.001 K"
    )


def test_round_off_is_written_as_0():
    of = ResultQuantity("stream.oil.heat_gain", ("stream", "oil", "heat_gain_W"))
    found = Effect("axial conduction in the wall", (Difference(of, 0.39, -8.8e-23, Change(0.39, 0.001), 0.4, 0.01),))
    assert "from 0 W to 0.39 W, by" in effects.sentence(found, SHOWN)


def test_what_does_not_matter_may_be_left_out():
    found = Effect("axial conduction in the wall", (difference("hottest_wetted_wall", 0.5, 0.02),))
    assert effects.sentence(found, SHOWN) == (
        "Axial conduction in the wall may be left out: by most, it raises the hottest wetted wall by 0.50 ±0.02 K, "
        "and 1 K is where that begins to matter."
    )


@pytest.mark.parametrize(
    "half, words", [(0.4, "Mesh errors 4 times smaller"), (None, "fewer than three nested meshes")]
)
def test_what_is_not_settled_says_what_would_settle_it(half, words):
    text = effects.sentence(Effect("viscous heating", (difference("hottest_wetted_wall", 0.9, half),)), SHOWN)
    assert text.startswith("Cannot tell whether viscous heating matters") and words in text


def test_a_difference_equal_to_care_is_settled_by_no_mesh():
    text = effects.sentence(Effect("viscous heating", (difference("hottest_wetted_wall", 1.0, 0.1),)), SHOWN)
    assert "no mesh decides it" in text


def test_nothing_to_judge_by_or_not_converged_is_no_verdict():
    nothing = Effect("viscous heating", (difference("hottest_wetted_wall", 3.0, 0.1, care=None),))
    assert "cannot tell" in effects.sentence(nothing, SHOWN)
    broken = Effect("viscous heating", (difference("hottest_wetted_wall", 3.0, 0.1),), (), "the solve stopped")
    assert effects.sentence(broken, SHOWN) == "Viscous heating: cannot tell, since the solve stopped."


def test_a_difference_of_temperatures_has_no_zero_point():
    assert effects.change_text(difference("hottest_wetted_wall", 1.0, 0.1), SHOWN) == "+1.0 ±0.1 K"
    other = Shown({**DEFAULTS, "temperature": "degF"})
    assert effects.change_text(difference("hottest_wetted_wall", 1.0, None), other) == "+1.8 degF"


def test_the_table_shows_every_case_beside_the_effects():
    header, rows = effects.wall_rows(solved())
    assert header == ["quantity", "no wall", "radial only", "in full", "by radial resistance", "by axial conduction"]
    wall = next(row for row in rows if row[0] == "hottest wetted wall")
    assert wall[1] == wall[2] != wall[3] and wall[5].endswith("*")
    assert any("M = " in text for text in effects.wall_sentences(solved()))
    assert "<script" not in effects.wall_html(solved()) and "hottest wetted wall" in effects.wall_html(solved())


def test_a_number_with_poles_has_no_largest_difference():
    curves = {row[1] for row in effects.along_rows(solved().effects, SHOWN)}
    assert {"wetted wall", "wall heat flux"} <= curves and "Nusselt number" not in curves


def test_the_folder_holds_verdicts_curves_cases_and_a_picture(tmp_path):
    import json

    from axicfd.case.read import load
    from axicfd.output import csv

    variants.write_wall(solved(), tmp_path / "wall")
    names = {path.name for path in (tmp_path / "wall").iterdir()}
    assert names == {"wall.json", "wall.csv", "wall.png", "in-full.toml", "radial-resistance-only.toml", "no-wall.toml"}
    tree = json.loads((tmp_path / "wall" / "wall.json").read_text(encoding="utf-8"))
    assert tree["axial_conduction"]["verdict"] == "matters" and tree["text"] == effects.wall_sentences(solved())
    columns = csv.read_columns(tmp_path / "wall" / "wall.csv")
    name = "wetted_wall_temperature_K"
    by = columns[f"in_full_{name}"] - columns[f"radial_resistance_only_{name}"]
    assert np.allclose(columns[f"by_axial_conduction_in_the_wall_{name}"], by, atol=1e-9)
    assert load(tmp_path / "wall" / "in-full.toml") == tube()


def test_one_layer_alone_has_neither_the_bare_case_nor_its_column():
    header, _ = effects.wall_rows(wall_effect(tube(), layer="tube"))
    assert header == ["quantity", "radial only", "in full", "by axial conduction"]


def test_the_python_calls_give_answers_that_show_themselves():
    import axicfd

    assert axicfd.wall_effect is wall_effect and callable(axicfd.what_matters)
    assert "hottest wetted wall" in solved()._repr_html_()
