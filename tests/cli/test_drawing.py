from axicfd.case.layout import layout
from axicfd.case.read import load
from axicfd.cli import drawing
from axicfd.output.shown import shown_units
from tests.output.made_up import TEXT


def drawn(text=TEXT):
    case = load(text)
    return list(drawing.to_scale(case, layout(case), shown_units(case)))


def test_first_line_gives_the_bore_first():
    case = load(TEXT)
    assert drawing.first_line(layout(case), shown_units(case)) == "bore 12 mm, outside 14 mm, 1.4 m long"


def test_the_drawing_is_to_scale_and_mirrored():
    lines = drawn()
    wall = "  " + "#" * drawing.COLUMNS
    assert lines[1] == wall  # below the names
    assert lines.count(wall) == 2
    ruler = next(line for line in lines if line.startswith("  |"))
    assert ruler.index("|", 3) - 2 == round(0.2 / 1.4 * drawing.COLUMNS)
    assert "syrup >" in "\n".join(lines)


def test_a_backwards_stream_points_back():
    assert "< syrup" in "\n".join(drawn(TEXT.replace('"developed"', '"developed"\ndirection = "-z"')))


def test_sections_in_words_use_the_users_units():
    case = load(TEXT)
    rows = list(drawing.sections(case, layout(case), shown_units(case)))
    assert rows[0][1:3] == ["0 m", "0.2 m"]
    assert rows[0][4] == "insulated"
    assert rows[1][4] == "film 900 W/m²/K to 85 degC"
    assert "stainless steel 316" in rows[1][3]


def test_tables_are_shown_by_their_ends():
    along = '{ z = ["0 m", "1.2 m"], value = ["60 degC", "85 degC"] }'
    table = f'{{ temperature = {along}, contact_resistance = "1e-4 m^2 K/W" }}'
    case = load(TEXT.replace('{ film_coefficient = "900 W/m^2/K", ambient = "85 degC" }', table))
    words = drawing.outside_words(case, case.section[1])
    assert words.startswith("held at 60 to 85 degC through ")


def test_a_name_longer_than_its_section_stands_one_line_higher():
    lines = drawn(TEXT.replace("lead-in", "a long lead-in").replace('"0.2 m"', '"0.02 m"'))
    assert lines[0].strip() == "a long lead-in"
    assert lines[1].strip() == "jacket"
