"""The table of deliberate faults stays true to the package: every fault still has its place, every test still
exists."""

from pathlib import Path

import pytest

from tests.laws.faults import FAULTS

ROOT = Path(__file__).parents[2]


def test_at_least_a_dozen_and_each_once():
    assert len(FAULTS) >= 12
    assert len({fault.what for fault in FAULTS}) == len(FAULTS)


@pytest.mark.parametrize("fault", FAULTS, ids=lambda fault: fault.what)
def test_fault_has_a_place_and_a_test(fault):
    source = (ROOT / "axicfd" / fault.file).read_text(encoding="utf-8")
    assert source.count(fault.old) == 1
    assert fault.old != fault.new
    file, _, name = fault.test.partition("::")
    assert f"def {name}(" in (ROOT / file).read_text(encoding="utf-8")
