import pytest

from axicfd.errors import AxicfdError
from axicfd.variants.care import DEFAULT_PER_CENT, Care, read_care


def test_two_per_cent_of_each_scale_by_default():
    care = read_care(None)
    assert care.of("heat", 50.0) == pytest.approx(1.0) and care.per_cent == DEFAULT_PER_CENT
    assert care.of("temperature_difference", 0.0) is None  # nothing is warmed: no share of it decides anything


def test_amounts_speak_for_their_kind_alone():
    care = read_care("1 K")
    assert care.of("temperature_difference", 80.0) == 1.0
    assert care.of("heat", 80.0) is None
    both = read_care(["1 K", "5 %", "20 mW"])
    assert both.of("pressure", 200.0) == pytest.approx(10.0) and both.of("heat", 1.0) == pytest.approx(0.02)
    assert read_care(both) is both


@pytest.mark.parametrize("bad", ["1", "one kelvin", "-1 K", "0 %", "3 mm", "", 2.0])
def test_what_is_no_amount_is_refused_with_what_to_write(bad):
    with pytest.raises(AxicfdError, match='"1 K"|greater than 0'):
        read_care(bad)


def test_one_kind_is_given_once():
    with pytest.raises(AxicfdError, match="each kind once"):
        read_care(["1 K", "2 K"])
    assert read_care([]) == Care()
