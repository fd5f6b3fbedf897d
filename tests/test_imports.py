"""Stations import only those below them, and asking for help loads nothing heavy."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parent.parent / "axicfd"

# From the top down; a station may import those of later lines. Names on one line are strangers to each other.
ORDER = (
    ("cli",),
    ("output",),
    ("variants",),
    ("pipeline",),
    ("given_drop",),
    ("results",),
    ("solver",),
    ("mesh",),
    ("case",),
    ("theory", "materials", "kernels"),
    ("glossary",),
    ("units",),
    ("errors", "version", "cache"),
)
RANK = {name: rank for rank, names in enumerate(ORDER) for name in names}
HEAVY = ("numpy", "scipy", "numba", "matplotlib", "pyvista", "pint", "pydantic")


def imported(path: Path) -> set[str]:
    """Dotted names of all modules a file imports, also inside functions."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative imports hide where they point"
            found |= {f"{node.module}.{alias.name}" for alias in node.names}
    return found


def stations():
    for path in sorted(PACKAGE.rglob("*.py")):
        parts = path.relative_to(PACKAGE).with_suffix("").parts
        if parts[0] not in ("__init__", "__main__"):
            yield path, parts[0]


@pytest.mark.parametrize("path, station", list(stations()), ids=lambda entry: getattr(entry, "name", entry))
def test_imports_point_down(path, station):
    assert station in RANK, f"a new station must be placed in the order: {station}"
    for name in imported(path):
        parts = name.split(".")
        if parts[0] != "axicfd" or len(parts) == 1 or parts[1] in (station, "__version__"):
            continue
        assert parts[1] in RANK, f"{path.name} imports {name}, which has no place in the order"
        assert RANK[parts[1]] > RANK[station], f"{path.name} in {station} imports upwards or sideways: {name}"


def test_a_case_is_text_and_numbers():
    for path in (PACKAGE / "case").glob("*.py"):
        assert not {name.split(".")[0] for name in imported(path)} & {"numpy", "numba"}, path.name


def loaded_by(*words: str) -> set[str]:
    """Top-level modules loaded by a command line."""
    code = (
        "import sys\nfrom axicfd.cli.app import main\n"
        f"try:\n    main({list(words)!r})\nexcept SystemExit:\n    pass\n"
        "print('loaded', *sorted({name.split('.')[0] for name in sys.modules}))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    return set(done.stdout.splitlines()[-1].split()[1:])


@pytest.mark.parametrize("words", [("--help",), ("solve", "--help"), ("--version",), ("wall",), ("slove",)])
def test_help_loads_nothing_heavy(words):
    assert not loaded_by(*words) & set(HEAVY)


def test_the_package_itself_loads_nothing_heavy():
    code = "import sys, axicfd; print(*sorted({name.split('.')[0] for name in sys.modules}))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert not set(done.stdout.split()) & set(HEAVY)
