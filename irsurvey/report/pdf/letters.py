"""The letters of the paper: an embedded font, what it cannot write, joined letters, right-to-left order, widths."""

from __future__ import annotations

import re
import unicodedata
from functools import cache, lru_cache
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from fpdf import FPDF

FAMILY = "text"
MISSING = "□"
"""What stands for a character that the font does not have."""
REPLACED = "\ufffd"
"""What stands for a control character."""

_FILES = {"": "DejaVuSans.ttf", "B": "DejaVuSans-Bold.ttf"}
"""Style → file of the font that matplotlib ships; its licence allows embedding."""
_SPACES = re.compile(r"[ \t\n\r\f\v\x1c-\x1f\x85\u2028\u2029]+")
_RIGHT_TO_LEFT = re.compile(r"[\u0590-\u08ff\ufb1d-\ufdff\ufe70-\ufefc\U00010800-\U00010fff\U0001e800-\U0001efff]")
_MIRRORED = dict(zip("()[]{}<>«»‹›≤≥", ")(][}{><»«›‹≥≤", strict=True))
_ARABIC = re.compile(r"[\u0620-\u06d3]")
_ARABIC_UNIT = re.compile("\u0644[\u0622\u0623\u0625\u0627]|.", re.DOTALL)  # lam with alef is one letter
_FORMS = ("isolated", "initial", "medial", "final")
_TATWEEL = "\u0640"  # joins on both sides and looks the same everywhere
_EM = 1000


def embed(pdf: FPDF) -> None:
    """Make the font known to a document, in each of its styles; only the letters used are embedded."""
    import matplotlib

    folder = Path(matplotlib.get_data_path()) / "fonts" / "ttf"
    for style, name in _FILES.items():
        pdf.add_font(FAMILY, style, folder / name)


def shown(text: str) -> str:
    """A text as it can be written, in the order it is read: white space as one space, controls as U+FFFD, Arabic
    letters joined, what the font lacks as □.

    Marks that only steer direction or joining are left out: direction follows the letters."""
    text = _SPACES.sub(" ", text)
    if text.isascii() and text.isprintable():
        return text
    text = unicodedata.normalize("NFC", text)
    return "".join(map(_glyph, _joined(text) if _ARABIC.search(text) else text))


def is_right_to_left(text: str) -> bool:
    """Whether the first letter of a text is one of a script written from right to left."""
    first = next((kind for kind in map(unicodedata.bidirectional, text) if kind in ("L", "R", "AL")), "L")
    return first != "L"


def visual(text: str, *, right_to_left: bool = False) -> str:
    """One line of what `shown` returned, in the order in which it is drawn (Unicode Standard Annex 9)."""
    if not right_to_left and not _RIGHT_TO_LEFT.search(text):
        return text
    from fpdf.bidi import BidiParagraph
    from fpdf.enums import TextDirection

    base = TextDirection.RTL if right_to_left else TextDirection.LTR
    ordered = BidiParagraph(text, base_direction=base).get_reordered_characters()
    return "".join(
        _MIRRORED.get(one.character, one.character) if one.embedding_level % 2 else one.character for one in ordered
    )


@lru_cache(maxsize=200_000)
def width(text: str, style: str) -> float:
    """Width of a text at a size of 1, in the unit of the size."""
    return sum(_advance(char, style) for char in text)


@cache
def _advance(char: str, style: str) -> float:
    ruler = _ruler()
    ruler.set_font(FAMILY, style, _EM)
    return float(ruler.get_string_width(char)) / _EM


@cache
def _ruler() -> FPDF:
    """A document of no pages that only measures."""
    from fpdf import FPDF

    ruler = FPDF(unit="pt")
    embed(ruler)
    return ruler


@cache
def _known() -> frozenset[str]:
    """The characters that both styles of the font can write."""
    from fpdf.fonts import TTFFont

    fonts = [font for font in _ruler().fonts.values() if isinstance(font, TTFFont)]
    return frozenset.intersection(*(frozenset(map(chr, font.cmap)) for font in fonts))


@cache
def _glyph(char: str) -> str:
    category = unicodedata.category(char)
    if category in ("Cc", "Cs"):
        return REPLACED
    if category == "Cf" or unicodedata.name(char, "").startswith("VARIATION SELECTOR"):
        return ""
    if char in _known():
        return char
    if category == "Zs":
        return " "
    return "" if category in ("Mn", "Me") else MISSING


def _joined(text: str) -> str:
    """Arabic letters in the forms they take beside one another, where the font has them."""
    units = _ARABIC_UNIT.findall(text)
    solid = [place for place, unit in enumerate(units) if unicodedata.category(unit[0]) != "Mn"]  # marks join nothing
    joined = list(units)
    for before, place, after in zip([None, *solid], solid, [*solid[1:], None], strict=False):
        behind = before is not None and _joins(units[before], "initial") and _joins(units[place], "final")
        ahead = after is not None and _joins(units[place], "initial") and _joins(units[after], "final")
        form = _FORMS[2 if behind and ahead else 3 if behind else 1 if ahead else 0]
        letter = _forms().get(units[place], {}).get(form, "")
        joined[place] = letter if letter in _known() else units[place]
    return "".join(joined)


def _joins(unit: str, form: str) -> bool:
    return unit == _TATWEEL or form in _forms().get(unit, {})


@cache
def _forms() -> dict[str, dict[str, str]]:
    """Letter (or lam with alef) → form → presentation form, as the Unicode Character Database relates them."""
    forms: dict[str, dict[str, str]] = {}
    for code in (*range(0xFB50, 0xFDFD), *range(0xFE70, 0xFEFD)):
        kind, *parts = unicodedata.decomposition(chr(code)).split() or [""]
        letters = "".join(chr(int(part, 16)) for part in parts)
        if kind.strip("<>") in _FORMS and _ARABIC_UNIT.fullmatch(letters):
            forms.setdefault(letters, {}).setdefault(kind.strip("<>"), chr(code))
    return forms
