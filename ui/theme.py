"""Tokens of the look: colours of the light and the dark theme, the type scale, the spacing grid and the font.

Calm paper: warm ground, near-black ink, one green-blue for data, ochre for caution, brick for stop. Colour is never
the only sign. Every text colour reaches 4.5 to 1 on every ground it stands on, in both themes; tests/ui/test_theme.py
measures it. Screens read `theme` when they are built; changing the theme builds them again.
"""

from __future__ import annotations

from dataclasses import dataclass
from importlib import resources
from typing import ClassVar

from kivy.core.text import LabelBase
from kivy.metrics import dp, sp

Colour = tuple[float, float, float, float]

FONT = "Paper"
WIDE_FROM_DP = 900  # two panes from this width on
LOW_UNTIL_DP = 480  # a phone on its side: what frames the work shares one row
MARGIN_DP = 20
TARGET_DP = 48  # smallest side of anything that can be touched
WORK_WIDTH_DP = 760  # text wider than this is hard to read


def _rgb(hexadecimal: str, alpha: float = 1.0) -> Colour:
    red, green, blue = (int(hexadecimal[i : i + 2], 16) / 255 for i in (0, 2, 4))
    return red, green, blue, alpha


@dataclass(frozen=True)
class Palette:
    """One theme's colours. `ground`, `raised` and `caution_ground` are backgrounds, the rest is drawn on them."""

    name: str
    ground: Colour
    raised: Colour  # the part that is open, a chosen row
    line: Colour
    edge: Colour  # outline of a control: 3 to 1 on the grounds
    ink: Colour
    muted: Colour
    data: Colour
    data_soft: Colour  # spread bands
    on_data: Colour  # text on a ground of data colour
    silhouette: Colour  # altitude behind the data
    caution: Colour
    caution_ground: Colour
    caution_ink: Colour
    stop: Colour
    on_stop: Colour


LIGHT = Palette(
    name="light",
    ground=_rgb("FBF8F1"),
    raised=_rgb("F3EDE0"),
    line=_rgb("E2DCCC"),
    edge=_rgb("8A8577"),
    ink=_rgb("1E1E1A"),
    muted=_rgb("5E5B50"),
    data=_rgb("1B5B57"),
    data_soft=_rgb("1B5B57", 0.26),
    on_data=_rgb("FFFFFF"),
    silhouette=_rgb("D9D3C3"),
    caution=_rgb("7F560B"),
    caution_ground=_rgb("EFDDB0"),
    caution_ink=_rgb("46310A"),
    stop=_rgb("983F1C"),
    on_stop=_rgb("FFFFFF"),
)

DARK = Palette(
    name="dark",
    ground=_rgb("161817"),
    raised=_rgb("222523"),
    line=_rgb("363935"),
    edge=_rgb("7D8078"),
    ink=_rgb("EFEBE0"),
    muted=_rgb("B3AFA2"),
    data=_rgb("86CCC2"),
    data_soft=_rgb("86CCC2", 0.28),
    on_data=_rgb("0C2422"),
    silhouette=_rgb("3B3D37"),
    caution=_rgb("E2B04C"),
    caution_ground=_rgb("3B2F13"),
    caution_ink=_rgb("F5E2AE"),
    stop=_rgb("F0936A"),
    on_stop=_rgb("2B1006"),
)

_SIZES_SP = {"numeral": 28, "title": 23, "lead": 18, "body": 16, "value": 20, "label": 14, "small": 13}


class Theme:
    """The palette in use, as attributes, with sizes beside it."""

    _palette: Palette = LIGHT
    reduced_motion: ClassVar[bool] = True  # nothing on the screens moves by itself

    def use(self, name: str) -> None:
        """Choose the "light" or the "dark" palette; screens built from now on follow it."""
        self._palette = {"light": LIGHT, "dark": DARK}[name]

    @property
    def name(self) -> str:
        """light or dark."""
        return self._palette.name

    def __getattr__(self, token: str) -> Colour:
        return getattr(self._palette, token)  # type: ignore[no-any-return]

    def colour(self, token: str) -> Colour:
        """The colour of a token given by name."""
        return getattr(self._palette, token)  # type: ignore[no-any-return]

    @staticmethod
    def size(role: str) -> float:
        """Font size in pixels of a role of the type scale."""
        return float(sp(_SIZES_SP[role]))


def space(steps: float) -> float:
    """So many steps of the 4 dp grid, in pixels."""
    return float(dp(4 * steps))


def target() -> float:
    """Smallest side of a touch target, in pixels; it grows with the text."""
    return float(max(dp(TARGET_DP), sp(TARGET_DP)))


def mixed(over: Colour, under: Colour, share: float) -> Colour:
    """A colour laid over another with this share, opaque."""
    red, green, blue = (a * share + b * (1 - share) for a, b in zip(over[:3], under[:3], strict=True))
    return red, green, blue, 1.0


def contrast(a: Colour, b: Colour) -> float:
    """Contrast of two opaque colours, 1 to 21 (WCAG 2.1, relative luminance)."""

    def luminance(colour: Colour) -> float:
        linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in colour[:3]]
        return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]

    high, low = sorted((luminance(a), luminance(b)), reverse=True)
    return (high + 0.05) / (low + 0.05)


def font_file(weight: str) -> str:
    """Path of the installed font: weight is "Regular" or "Semibold"."""
    return str(resources.files("font_source_sans_pro").joinpath("files", f"SourceSansPro-{weight}.ttf"))


LabelBase.register(FONT, fn_regular=font_file("Regular"), fn_bold=font_file("Semibold"))
theme = Theme()
