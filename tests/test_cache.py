"""Where compiled kernels and the table of units are kept."""

import os

from axicfd import cache, units


def test_without_a_writable_place_there_is_no_folder(tmp_path, monkeypatch):
    monkeypatch.setenv("NUMBA_CACHE_DIR", str(tmp_path / "file" / "below"))
    (tmp_path / "file").write_text("not a folder")
    assert cache.folder("kernels") is None


def test_folders_that_nobody_used_for_long_are_removed(tmp_path, monkeypatch):
    monkeypatch.setenv("NUMBA_CACHE_DIR", str(tmp_path))
    old, recent = tmp_path / "axicfd" / "old", tmp_path / "axicfd" / "recent"
    old.mkdir(parents=True)
    recent.mkdir()
    os.utime(old, (0, 0))
    assert cache.folder("new") == tmp_path / "axicfd" / "new"
    assert recent.exists() and not old.exists()


def test_a_damaged_table_of_units_is_read_anew(tmp_path, monkeypatch):
    monkeypatch.setenv("NUMBA_CACHE_DIR", str(tmp_path))
    units._registry.__wrapped__()
    kept = [path for path in tmp_path.rglob("*") if path.is_file()]
    assert kept
    for path in kept:
        path.write_bytes(b"damaged")
    assert units._registry.__wrapped__().Quantity(1.0, "inch").to("mm").magnitude == 25.4
