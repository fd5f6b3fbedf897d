"""What `spread` says and writes, from a real answer on a small mesh."""

import csv
import json
from dataclasses import replace

import numpy as np
import pytest

from axicfd.errors import ResultsFolderError
from axicfd.output import spread as words
from axicfd.output.csv import read_columns
from axicfd.output.sweep import column_of
from tests.variants.test_spread import DROP, bore, heat_balance


@pytest.mark.parametrize(
    "path, label",
    [
        ("stream.oil.mass_flow", "mass flow (oil)"),
        ("section.band.outside.film_coefficient", "film coefficient (band)"),
        ("section.band.layer.tube.thickness", "thickness (band, tube)"),
        ("section.band.generated.tube", "heat generated in tube (band)"),
        ("solid.liner.conductivity.r", "conductivity along r (liner)"),
        ("ends.first.temperature", "temperature (first end)"),
        ("ends.first.tube.temperature", "temperature (first end, tube)"),
        ("sensor.far.z", "z (far)"),
    ],
)
def test_inputs_in_words(path, label):
    assert words.input_label(path) == label


def test_rows_name_value_spread_mesh_and_blame():
    (inlet, flow, *_) = words.input_rows(heat_balance())
    assert inlet == ["inlet temperature (oil)", "20 degC", "±1 K", "limits, uniform"]
    assert flow[2] == "±0.06 g/s"
    outlet, drop = words.output_rows(heat_balance())[:2]
    assert outlet[:3] == ["outlet temperature (bulk)", "40.0 degC", "±1.6"]  # 1.549, rounded up
    assert outlet[4].startswith("inlet temperature (oil) 51 %, heat (heater) 24 %")
    assert drop[3].startswith("±") and drop[4] == "mass flow (oil) 100 %"


def test_a_full_answer_has_a_range_of_its_own_and_says_where_the_quick_one_fails():
    drop = next(row for row in words.output_rows(bore()) if row[0] == "pressure drop")
    below, above = drop[2].split()
    assert float(above) > -float(below) > 0.0
    (note,) = words.notes(bore())
    assert note.startswith("Pressure drop: the quick answer does not hold here: mean")


def test_files_hold_the_answer(tmp_path):
    words.write(bore(), tmp_path / "answer")
    assert {p.name for p in (tmp_path / "answer").iterdir()} == {
        "spread.json", "spread.csv", "samples.csv", "spread.png", "case.toml",
    }  # fmt: skip
    tree = json.loads((tmp_path / "answer" / words.NAME).read_text(encoding="utf-8"))
    found = bore()[DROP]
    drop = tree["outputs"][DROP + "_Pa"]
    assert drop["u_input"] == found.u_input and drop["quick"]["is_bent"] and drop["differences"]
    assert tree["inputs"]["layer.oil.diameter"]["plus_minus"] == pytest.approx(8e-4)
    samples = read_columns(tmp_path / "answer" / "samples.csv")
    assert np.std(samples[DROP + "_Pa"], ddof=1) == pytest.approx(found.sampled.std)
    assert samples["layer.oil.diameter_m"] == pytest.approx(bore().samples[:, 0])
    rows = list(csv.DictReader((tmp_path / "answer" / "spread.csv").open(encoding="utf-8")))
    shares = [float(row["share"]) for row in rows if row["output"] == DROP + "_Pa"]
    assert sum(shares) == pytest.approx(1.0)
    with pytest.raises(ResultsFolderError, match="--replace"):
        words.write(bore(), tmp_path / "answer")
    words.write(heat_balance(), tmp_path / "answer", replace=True)
    assert not (tmp_path / "answer" / "samples.csv").exists()


def test_another_folder_is_not_replaced(tmp_path):
    (tmp_path / "mine").mkdir()
    (tmp_path / "mine" / "letter.txt").write_text("dear", encoding="utf-8")
    with pytest.raises(ResultsFolderError, match="spread.json"):
        words.write(heat_balance(), tmp_path / "mine", replace=True)
    assert (tmp_path / "mine" / "letter.txt").exists()


def test_columns_of_inputs_carry_units_as_those_of_a_sweep_do():
    assert list(words.sample_columns(bore()))[:2] == ["sample", column_of(bore().case, "layer.oil.diameter")]


def with_drop(**changes):
    """The answer on the bore, with other samples of the pressure drop."""
    found = bore()
    drop = found[DROP]
    sampled = replace(drop.sampled, **changes) if changes else None
    return replace(found, outputs=(replace(drop, sampled=sampled),))


def test_a_range_on_one_side_of_the_value_is_shown_there():
    value = bore()[DROP].value
    ((_, _, shown, _, _),) = words.output_rows(with_drop(low=1.1 * value, high=1.3 * value))
    low, high = (float(word) for word in shown.split())
    assert 0.0 < low < high and high / low == pytest.approx(3.0, rel=0.1)


def test_quick_and_full_agree_only_where_there_is_a_full_answer():
    (note,) = words.notes(with_drop())
    assert note == "Pressure drop: too few samples have a value; the quick answer alone is given."


def test_it_shows_itself_in_notebooks():
    fragment = words.html(heat_balance())
    assert "inlet temperature (oil) 51 %" in fragment and "<script" not in fragment
