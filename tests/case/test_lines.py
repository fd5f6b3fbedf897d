"""The line of everything in a TOML text."""

import tomllib

from hypothesis import given, settings
from hypothesis import strategies as st

from axicfd.case import starter
from axicfd.case.lines import lines_of
from tests.case.samples import BASE


def test_odd_but_right_toml():
    text = "\n".join(
        [
            '# a comment with [brackets] and "quotes',
            'a.b."c.d" = 1',
            'text = """',
            "[not.a.table]",
            'x = 1 \\""" still',
            '"""',
            "'literal' = 'C:\\new\\'",
            "list = [ # ]",
            '  "one, ]",',
            "  { x = 1, y = { z = [1,",
            "     2] } },",
            "]",
            '[t."u v".w]',
            "k = '''",
            "[inside]'''",
            "[[s]]",
            "n = 1",
            "[[s.layer]]",
            "m = 1",
            "[[s.layer]]",
            "m = 2",
            "[[s]]",
            "[s.sub]",
            "q = -1.5e3",
            "[[s.layer]]",
            "m = 3",
        ]
    )
    tomllib.loads(text)
    lines = lines_of(text)
    expected = {
        ("a", "b", "c.d"): 2, ("text",): 3, ("literal",): 7, ("list",): 8, ("list", 0): 9, ("list", 1): 10,
        ("list", 1, "y", "z"): 10, ("list", 1, "y", "z", 1): 11, ("t", "u v", "w"): 13,
        ("t", "u v", "w", "k"): 14,
        ("s", 0): 16, ("s", 0, "n"): 17, ("s", 0, "layer", 0): 18, ("s", 0, "layer", 0, "m"): 19,
        ("s", 0, "layer", 1, "m"): 21, ("s", 1): 22, ("s", 1, "sub", "q"): 24, ("s", 1, "layer", 0): 25,
        ("s", 1, "layer", 0, "m"): 26,
    }  # fmt: skip
    assert {way: lines.get(way) for way in expected} == expected
    assert ("inside",) not in lines and ("not", "a", "table") not in lines


def test_a_line_that_goes_on_after_a_backslash_counts():
    assert lines_of('a = """one \\\n  two"""\nb = 1\n') == {("a",): 1, ("b",): 3}


def ways(tree, way=()):
    """Every way to a key, table or list entry in a tree."""
    entries = tree.items() if isinstance(tree, dict) else enumerate(tree) if isinstance(tree, list) else ()
    for name, entry in entries:
        yield (*way, name)
        yield from ways(entry, (*way, name))


def test_everything_in_a_case_has_a_line():
    for text in (BASE, starter.TEXT):
        lines = lines_of(text)
        for way in ways(tomllib.loads(text)):
            assert way in lines, way
            if isinstance(way[-1], str):
                assert way[-1] in text.splitlines()[lines[way] - 1]


@settings(deadline=None, max_examples=200)
@given(st.text(alphabet="ab=.[]{}\"'#,\n 1\\", max_size=60))
def test_no_text_hangs_or_breaks_it(text):
    lines = lines_of(text)
    try:
        tree = tomllib.loads(text)
    except tomllib.TOMLDecodeError:
        return
    assert set(ways(tree)) <= set(lines) or "\\" in text
