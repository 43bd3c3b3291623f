"""The one type family of the papers, embedded; and user text made printable, with what could not be printed said."""

from __future__ import annotations

import unicodedata
from functools import lru_cache
from importlib import resources

from reportlab import rl_config  # type: ignore[import-untyped]
from reportlab.pdfbase import pdfmetrics  # type: ignore[import-untyped]
from reportlab.pdfbase.ttfonts import TTFont  # type: ignore[import-untyped]

REGULAR = "Paper"
BOLD = "Paper-Semibold"
MISSING = "[?]"
_FILES = {REGULAR: "SourceSansPro-Regular.ttf", BOLD: "SourceSansPro-Semibold.ttf"}


@lru_cache(maxsize=1)
def register() -> None:
    """Make both weights known to reportlab; only the glyphs that are used go into a document."""
    rl_config.useA85 = 0  # streams as bytes: smaller and quicker than as ASCII
    folder = resources.files("font_source_sans_pro").joinpath("files")
    for name, file in _FILES.items():
        with resources.as_file(folder.joinpath(file)) as path:
            pdfmetrics.registerFont(TTFont(name, str(path)))


@lru_cache(maxsize=20000)
def width(text: str, size: float, bold: bool = False) -> float:
    """Width of a text in points."""
    register()
    return float(pdfmetrics.stringWidth(text, BOLD if bold else REGULAR, size))


def measure(text: str, size: float) -> float:
    """Width in regular weight: what chart layouts ask for."""
    return width(text, size)


@lru_cache(maxsize=4000)
def printable(text: str) -> str:
    """The text with every letter the font lacks shown as [?], and no control or direction marks.

    Composed first, so that a letter with a separate accent finds its own glyph. A run of missing letters gives one
    mark. Right-to-left scripts are missing from the font and so are marked, not printed in the wrong order.
    """
    glyphs = _glyphs()
    pieces: list[str] = []
    for letter in unicodedata.normalize("NFC", text):
        category = unicodedata.category(letter)
        if letter in "\n\t" or category in {"Zs", "Zl", "Zp"}:
            pieces.append("\n" if letter in "\n\u2028\u2029" else letter if letter in " \u00a0\u202f" else " ")
        elif category in {"Cc", "Cf"}:
            continue
        elif ord(letter) in glyphs:
            pieces.append(letter)
        elif not pieces or pieces[-1] != MISSING:
            pieces.append(MISSING)
    return "".join(pieces)


def has_missing(text: str) -> bool:
    """Whether some letters of the text cannot be printed."""
    return printable(text).count(MISSING) > text.count(MISSING)


@lru_cache(maxsize=1)
def _glyphs() -> frozenset[int]:
    register()
    sets = [set(pdfmetrics.getFont(name).face.charToGlyph) for name in _FILES]
    return frozenset(set.intersection(*sets))
