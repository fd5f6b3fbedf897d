"""Errors say where, what, what is allowed and what to write."""

import pickle

from axicfd.errors import AxicfdError, InputError, Mistake, bad_input, shown


def test_a_mistake_reads_as_a_sentence():
    mistake = Mistake(
        "heater.toml", 14, "layer.tube.thickness", "-2 mm", "must be greater than 0 m",
        "Give the thickness of this layer alone, or its `outer_diameter`.",
    )  # fmt: skip
    assert mistake.text == (
        'heater.toml, line 14: `layer.tube.thickness = "-2 mm"` must be greater than 0 m. '
        "Give the thickness of this layer alone, or its `outer_diameter`."
    )


def test_a_mistake_without_a_place_has_no_stray_signs():
    assert Mistake(None, None, "section", None, "is missing").text == "`section` is missing."
    assert Mistake("a.toml", None, "", None, "does not exist").text == "a.toml: does not exist."
    assert Mistake(None, 3, "mesh.radial", 1, "is few.").text == "line 3: `mesh.radial = 1` is few."


def test_values_are_shown_as_a_case_file_shows_them():
    assert shown(True) == "true"
    assert shown("2 mm") == '"2 mm"'
    assert shown({"z": ["0 m", 1], "on": False}) == '{ z = ["0 m", 1], on = false }'
    assert shown({}) == "{}"
    assert shown("x" * 200).endswith(" ...") and len(shown("x" * 200)) <= 60


def test_mistakes_come_in_the_order_of_lines():
    error = InputError([Mistake("a", 9, "b", None, "is late"), Mistake("a", 2, "c", None, "is early")])
    assert [mistake.line for mistake in error.mistakes] == [2, 9]
    assert str(error).splitlines()[0].startswith("a, line 2")
    assert isinstance(error, AxicfdError)


def test_errors_travel_between_processes():
    error = bad_input("mesh.radial", 1, "must be at least 2", "Write 12.")
    again = pickle.loads(pickle.dumps(error))
    assert again.mistakes == error.mistakes and str(again) == str(error)
