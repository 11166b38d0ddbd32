"""How wide text is, and how many lines it takes, against the metrics of a font."""

import pytest

from rooftruss.output.workbook.letters import column_pixels, lines_of, room, text_width, width_for

# Widths in pixels of 9 point letters, 96 to an inch: advance widths of Liberation Sans 2 (the same as those of Arial),
# summed up from the font file
MEASURED = {
    "wind from the right, pressure/pressure, c_pi +0.2": (257.79, 277.75),
    "short-term to instantaneous": (146.07, 159.35),
    "EN 1991-1-3, eq. (5.1) and Fig. 5.3": (186.11, 189.40),
    "ABCDEFGHIJKLMNOPQRSTUVWXYZ": (211.35, 214.67),
    "abcdefghijklmnopqrstuvwxyz": (152.74, 168.03),
}


@pytest.mark.parametrize(("text", "widths"), MEASURED.items())
def test_width_of_a_line(text, widths):
    plain, bold = widths
    assert text_width(text) == pytest.approx(plain, rel=2e-4)
    assert text_width(text, bold=True) == pytest.approx(bold, rel=0.07)
    assert text_width(text, 18) == pytest.approx(2 * plain, rel=2e-4)


def test_a_letter_that_is_not_known_counts_as_a_wide_one():
    assert text_width("\u6728") > text_width("W")


@pytest.mark.parametrize("inset", [False, True])
def test_a_column_made_for_a_text_has_room_for_it_and_no_more(inset):
    for text in MEASURED:
        assert room(width_for(text, inset=inset), inset=inset) == pytest.approx(text_width(text))
        assert lines_of(text, room(width_for(text, inset=inset), inset=inset) + 0.01) == 1
        assert lines_of(text, room(width_for(text, inset=inset), inset=inset) - 0.5) == 2


def test_lines_are_broken_at_blanks():
    word = text_width("pressure")
    assert lines_of("pressure pressure pressure", word + 1) == 3
    assert lines_of("pressure pressure pressure", 2 * word + text_width(" ") + 1) == 2
    assert lines_of("p" * 30, text_width("p" * 10) + 1) == 3
    assert lines_of("", 50.0) == 1


def test_a_column_of_ten_characters():
    # ECMA-376, 18.3.1.13: width = (characters x widest digit + 5 pixels) / widest digit, 7 pixels wide
    assert column_pixels(10) == 75
