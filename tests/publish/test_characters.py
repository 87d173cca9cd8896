"""What the page cannot show is told as a code point."""

from __future__ import annotations

import unicodedata

import typst
from hypothesis import example, given, settings
from hypothesis import strategies as st

from reportgen.publish import characters
from reportgen.publish.typst_writer import string


def test_what_the_fonts_lack_is_told_as_code_points() -> None:
    assert list(characters.for_paper("a中b")) == [(False, "a"), (True, "U+4E2D"), (False, "b")]
    assert list(characters.for_paper("🙂")) == [(True, "U+1F642")]


def test_a_screen_shows_scripts_but_not_controls() -> None:
    assert list(characters.for_screen("中\x07\u202e")) == [
        (False, "中"),
        (True, "U+0007"),
        (True, "U+202E"),
    ]


def test_line_ends_and_tabs_are_spaces() -> None:
    assert characters.plain("a\r\n\tb\u2028c") == "a b c"


def test_engineering_signs_need_no_telling() -> None:
    for sign in "µΩωζ°²³×·±≤≥≈−–…éßŁØ√∞→½‰€":
        assert characters.printable(sign), sign


def test_long_words_may_break_and_short_ones_not() -> None:
    text = f"stiffness of the shaft {'x' * 60} TPW-2101-03/drawing-of-the-rotor"
    found = list(characters.long_runs(text))
    assert "".join(run for _, run in found) == text
    assert [run for long, run in found if long] == ["x" * 60]


@settings(deadline=None, max_examples=25)
@given(st.text(max_size=60))
@example('"; #panic(); "')
@example("\\")
@example('\\"\\u{41}')
@example("\n\r\t\x00\x1f\x7f\x85")
def test_a_literal_stands_for_exactly_its_text(text: str) -> None:
    source = f"#metadata({string(text)})<x>"
    found = typst.query(source.encode(), "<x>", field="value", one=True)
    import json

    assert json.loads(found) == text


@settings(deadline=None, max_examples=40)
@given(st.text(max_size=60))
def test_no_character_is_lost_between_the_text_and_paper(text: str) -> None:
    kept = "".join(piece for _, piece in characters.for_paper(text))
    for character in unicodedata.normalize("NFC", text):
        if not character.isspace() and unicodedata.category(character)[0] != "Z":
            assert character in kept or f"U+{ord(character):04X}" in kept
