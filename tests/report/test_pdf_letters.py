"""Letters and lines of the paper: widths, what the font lacks, joined letters, right-to-left order, broken lines."""

from __future__ import annotations

import unicodedata
from pathlib import Path

import matplotlib
import pytest
from fontTools.ttLib import TTFont

from irsurvey.report.pdf.letters import MISSING, REPLACED, is_right_to_left, shown, visual, width
from irsurvey.report.pdf.runs import POINT, Box, Face, Run, broken, cut, spans

FONTS = Path(matplotlib.get_data_path()) / "fonts" / "ttf"


@pytest.mark.parametrize(("style", "file"), [("", "DejaVuSans.ttf"), ("B", "DejaVuSans-Bold.ttf")])
def test_widths_are_those_of_the_font_file(style: str, file: str) -> None:
    font = TTFont(FONTS / file)
    advances, names = font["hmtx"], font.getBestCmap()
    text = "Wärmebrücke ± 0.12 m²·K/W ≥ □"
    expected = sum(advances[names[ord(char)]][0] for char in text) / font["head"].unitsPerEm
    assert width(text, style) == pytest.approx(expected, rel=1e-3)  # widths in a PDF are whole thousandths of the size


def test_plain_text_stays_as_it_is() -> None:
    assert shown("A wall, 3 m² <b>& “more”</b>") == "A wall, 3 m² <b>& “more”</b>"


def test_white_space_is_one_space_but_no_break_spaces_stay() -> None:
    assert shown("a \t\r\n b\u00a0c\u2028d") == "a b\u00a0c d"


def test_control_characters_are_replaced_and_marks_that_steer_are_left_out() -> None:
    assert shown("a\x00b\x1bc\x85d\ud800") == f"a{REPLACED}b{REPLACED}c d{REPLACED}"
    assert shown("\u202eabc\u202c\u200b\ufeff\u00ad") == "abc"


def test_what_the_font_lacks_is_a_box() -> None:
    assert shown("壁") == MISSING
    assert shown("a\u0301") == "á"  # composed first: the font has the letter with its accent
    assert shown("🧱\ufe0f") == MISSING


def test_arabic_letters_are_joined_in_the_forms_of_the_unicode_charts() -> None:
    """Forms of "marhaban" as Unicode names them; reh joins nothing that follows it."""
    assert [unicodedata.name(char) for char in shown("مرحبا")] == [
        "ARABIC LETTER MEEM INITIAL FORM",
        "ARABIC LETTER REH FINAL FORM",
        "ARABIC LETTER HAH INITIAL FORM",
        "ARABIC LETTER BEH MEDIAL FORM",
        "ARABIC LETTER ALEF FINAL FORM",
    ]


def test_lam_and_alef_are_one_letter() -> None:
    """The Unicode Standard, 9.2: the ligature is mandatory."""
    assert unicodedata.name(shown("لا")) == "ARABIC LIGATURE LAM WITH ALEF ISOLATED FORM"


def test_a_mark_over_a_letter_does_not_part_its_neighbours() -> None:
    names = [unicodedata.name(char) for char in shown("ب\u064eب")]
    assert names[0].endswith("INITIAL FORM")
    assert names[-1].endswith("FINAL FORM")


HEBREW = str.maketrans({chr(ord("A") + k): chr(0x5D0 + k) for k in range(26)})


@pytest.mark.parametrize(
    ("stored", "seen"),
    [
        ("car means CAR.", "car means RAC."),  # Unicode Standard Annex 9, 3.4, example 1
        ("ABC (DEF) 12", "12 (FED) CBA"),  # L4: brackets are mirrored; W: figures stay as they are
    ],
)
def test_right_to_left_text_is_drawn_in_the_order_of_annex_9(stored: str, seen: str) -> None:
    text = stored.translate(HEBREW)
    assert visual(text, right_to_left=is_right_to_left(text)) == seen.translate(HEBREW)


def test_the_first_letter_tells_the_direction() -> None:
    assert is_right_to_left("12 שלום")
    assert not is_right_to_left("wall שלום")
    assert not is_right_to_left("")


def text_of(lines: list[object]) -> list[str]:
    return ["".join(segment.text for segment in line.segments) for line in lines]  # type: ignore[attr-defined]


def test_no_line_is_wider_than_its_column() -> None:
    runs = (Run("many words of different lengths " * 9), Run("bold ones " * 5, Face(style="B")), Run("w" * 300))
    lines = broken(runs, 40.0)
    assert max(line.width for line in lines) <= 40.0 + 1e-6
    assert "".join(text_of(lines)).replace(" ", "") == "".join(run.text for run in runs).replace(" ", "")


def test_lines_are_broken_between_words_where_there_are_any() -> None:
    assert text_of(broken((Run("one two three"),), Face().width("one two") + 0.1)) == ["one two", "three"]


def test_a_word_may_go_on_from_run_to_run() -> None:
    wide = Face().width("F01-12345") + 0.1
    assert text_of(broken((Run("see F01"), Run("-12345 b")), wide)) == ["see", "F01-12345", "b"]


def test_a_chip_stays_in_one_line_and_has_room_around_it() -> None:
    chip = Run("repair as time permits", Face(6.8), box=Box())
    (line,) = broken((chip, Run(" x")), 80.0)
    assert line.segments[0].width > chip.face.width(chip.text) + 2.0
    assert line.segments[1].x > line.segments[0].x + line.segments[0].width


def test_spans_are_the_longest_word_and_the_whole_line() -> None:
    face = Face()
    assert spans((Run("a longest b"),)) == pytest.approx((face.width("longest"), face.width("a longest b")))


def test_a_cut_text_fits_and_says_that_it_was_cut() -> None:
    face = Face(7)
    text = cut("word " * 5000, face, 60.0)
    assert face.width(text) <= 60.0
    assert text.endswith("…")
    assert cut("short", face, 60.0) == "short"


def test_a_line_is_as_high_as_its_largest_letters() -> None:
    (line,) = broken((Run("a", Face(6)), Run("b", Face(20))), 100.0)
    assert line.height >= 20 * POINT
