"""The tokens: text can be read on every ground it stands on, in both themes, also by colour-blind eyes."""

import itertools

import pytest

from ui.theme import DARK, LIGHT, contrast, mixed

PALETTES = pytest.mark.parametrize("palette", [LIGHT, DARK], ids=lambda p: p.name)

# Linear-light matrices for complete red, green and blue blindness: Machado, Oliveira and Fernandes,
# IEEE Transactions on Visualization and Computer Graphics 2009, severity 1.0.
BLINDNESS = {
    "red": ((0.152286, 1.052583, -0.204868), (0.114503, 0.786281, 0.099216), (-0.003882, -0.048116, 1.051998)),
    "green": ((0.367322, 0.860646, -0.227968), (0.280085, 0.672501, 0.047413), (-0.011820, 0.042940, 0.968881)),
    "blue": ((1.255528, -0.076749, -0.178779), (-0.078411, 0.930809, 0.147602), (0.004733, 0.691367, 0.303900)),
}


def seen(colour, matrix):
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in colour[:3]]
    out = [min(max(sum(m * c for m, c in zip(row, linear, strict=True)), 0.0), 1.0) for row in matrix]
    return tuple(c * 12.92 if c <= 0.0031308 else 1.055 * c ** (1 / 2.4) - 0.055 for c in out)


def test_contrast_of_black_on_white_is_21():
    assert contrast((0, 0, 0, 1), (1, 1, 1, 1)) == pytest.approx(21.0)


@PALETTES
@pytest.mark.parametrize("tone", ["ink", "muted", "data", "caution", "stop"])
@pytest.mark.parametrize("ground", ["ground", "raised"])
def test_every_text_colour_reaches_4_5_on_paper(palette, tone, ground):
    assert contrast(getattr(palette, tone), getattr(palette, ground)) >= 4.5


@PALETTES
def test_text_on_coloured_grounds_reaches_4_5(palette):
    assert contrast(palette.on_data, palette.data) >= 4.5
    assert contrast(palette.on_stop, palette.stop) >= 4.5
    assert contrast(palette.caution_ink, palette.caution_ground) >= 4.5


@PALETTES
def test_data_line_is_seen_on_the_silhouette_and_on_its_own_band(palette):
    assert contrast(palette.data, palette.silhouette) >= 3.0
    band = mixed(palette.data, palette.silhouette, palette.data_soft[3])
    assert contrast(palette.data, band) >= 2.5


@PALETTES
@pytest.mark.parametrize("kind", BLINDNESS)
def test_colour_blind_eyes_still_read_every_text_colour(palette, kind):
    ground = seen(palette.ground, BLINDNESS[kind])
    for tone in ("ink", "muted", "data", "caution", "stop"):
        assert contrast(seen(getattr(palette, tone), BLINDNESS[kind]), ground) >= 4.5, tone


@PALETTES
@pytest.mark.parametrize("kind", BLINDNESS)
def test_data_caution_and_stop_stay_apart_for_colour_blind_eyes(palette, kind):
    colours = [seen(getattr(palette, tone), BLINDNESS[kind]) for tone in ("data", "stop")]
    for a, b in itertools.combinations(colours, 2):
        assert sum((x - y) ** 2 for x, y in zip(a, b, strict=True)) ** 0.5 > 0.12
