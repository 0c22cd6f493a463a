"""Colours stand out from their ground and from each other, for every kind of colour sight.

Contrast: WCAG 2.1. Colour blindness: G. M. Machado, M. M. Oliveira, L. A. F. Fernandes, "A
physiologically-based model for simulation of color vision deficiency", IEEE Transactions on
Visualization and Computer Graphics 15 (2009), matrices for severity 1.0. Distance: Oklab by
B. Ottosson (2020), where 0.02 is about a just noticeable difference.
"""

from __future__ import annotations

from itertools import combinations, pairwise

import numpy as np
import pytest

from explorer import theme

SIGHT = {
    "full": np.eye(3),
    "protanopia": np.array(
        [
            [0.152286, 1.052583, -0.204868],
            [0.114503, 0.786281, 0.099216],
            [-0.003882, -0.048116, 1.051998],
        ]
    ),
    "deuteranopia": np.array(
        [
            [0.367322, 0.860646, -0.227968],
            [0.280085, 0.672501, 0.047413],
            [-0.011820, 0.042940, 0.968881],
        ]
    ),
    "tritanopia": np.array(
        [
            [1.255528, -0.076749, -0.178779],
            [-0.078411, 0.930809, 0.147602],
            [0.004733, 0.691367, 0.303900],
        ]
    ),
}
LOOKS = pytest.mark.parametrize("look", [theme.LIGHT, theme.DARK], ids=["light", "dark"])


def oklab(colour: str, sight: str) -> np.ndarray:
    """Lightness and two hue axes of a colour as it is seen."""
    coded = np.array([int(colour[i : i + 2], 16) for i in (1, 3, 5)]) / 255
    linear = np.where(coded <= 0.04045, coded / 12.92, ((coded + 0.055) / 1.055) ** 2.4)
    seen = np.clip(SIGHT[sight] @ linear, 0, 1)
    cones = np.array(
        [
            [0.4122214708, 0.5363325363, 0.0514459929],
            [0.2119034982, 0.6806995451, 0.1073969566],
            [0.0883024619, 0.2817188376, 0.6299787005],
        ]
    )
    lightness_and_hue = np.array(
        [
            [0.2104542553, 0.7936177850, -0.0040720468],
            [1.9779984951, -2.4285922050, 0.4505937099],
            [0.0259040371, 0.7827717662, -0.8086757660],
        ]
    )
    return lightness_and_hue @ np.cbrt(cones @ seen)


@LOOKS
@pytest.mark.parametrize("ground", ["background", "surface"])
def test_text_and_marks_stand_out_from_every_ground(look, ground):
    under = getattr(look, ground)
    for text in (look.ink, look.muted, look.warning):
        assert theme.contrast(text, under) >= 4.5
    for mark in (look.accent, look.tube, look.quiet, *look.palette):
        assert theme.contrast(mark, under) >= 3.0, mark


@LOOKS
@pytest.mark.parametrize("sight", SIGHT)
def test_palette_colours_stay_apart_for_every_sight(look, sight):
    for first, second in combinations(look.palette, 2):
        apart = np.linalg.norm(oklab(first, sight) - oklab(second, sight))
        assert apart >= 0.08, (first, second)


@LOOKS
@pytest.mark.parametrize("sight", SIGHT)
def test_ramps_change_lightness_in_one_direction_in_clear_steps(look, sight):
    lightness = [oklab(colour, sight)[0] for colour in look.ramp]
    steps = [after - before for before, after in pairwise(lightness)]
    towards = np.sign(oklab(look.ink, "full")[0] - oklab(look.background, "full")[0])
    assert min(towards * step for step in steps) >= 0.02


def test_contrast_is_that_of_the_standard():
    assert theme.contrast("#000000", "#FFFFFF") == pytest.approx(21)
    assert theme.contrast("#777777", "#FFFFFF") == pytest.approx(4.48, abs=0.005)


def test_a_ramp_passes_through_its_colours():
    assert theme.along(theme.LIGHT.ramp, 0) == theme.LIGHT.ramp[0]
    assert theme.along(theme.LIGHT.ramp, 0.2) == theme.LIGHT.ramp[1]
    assert theme.along(theme.LIGHT.ramp, 7) == theme.LIGHT.ramp[-1]
    assert theme.mixed("#000000", "#FFFFFF", 0.5) == "#808080"
