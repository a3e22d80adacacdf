"""The map's colours can be told apart by colour-blind readers, and stand out from the ground.

Published sources, values from memory: simulation of colour vision deficiency, Machado, Oliveira and
Fernandes (2009), severity 1.0; distances in OKLab, Ottosson (2020); contrast, WCAG 2.2.
"""

import tomllib
from itertools import combinations
from pathlib import Path

import numpy as np
import pytest

import app
from app.parts.map_colours import DARK, LIGHT, colours, rgba

SIGHT = {
    "usual": np.eye(3),
    "protanopia": [
        [0.152286, 1.052583, -0.204868],
        [0.114503, 0.786281, 0.099216],
        [-0.003882, -0.048116, 1.051998],
    ],
    "deuteranopia": [
        [0.367322, 0.860646, -0.227968],
        [0.280085, 0.672501, 0.047413],
        [-0.011820, 0.042940, 0.968881],
    ],
    "tritanopia": [
        [1.255528, -0.076749, -0.178779],
        [-0.078411, 0.930809, 0.147602],
        [0.004733, 0.691367, 0.303900],
    ],
}
CONES = [[0.4122214708, 0.5363325363, 0.0514459929], [0.2119034982, 0.6806995451, 0.1073969566],
         [0.0883024619, 0.2817188376, 0.6299787005]]  # fmt: skip
OKLAB = [[0.2104542553, 0.7936177850, -0.0040720468], [1.9779984951, -2.4285922050, 0.4505937099],
         [0.0259040371, 0.7827717662, -0.8086757660]]  # fmt: skip


def linear(colour):
    part = np.array(rgba(colour)[:3]) / 255
    return np.where(part <= 0.04045, part / 12.92, ((part + 0.055) / 1.055) ** 2.4)


def seen(colour, sight):
    return np.array(OKLAB) @ np.cbrt(np.array(CONES) @ np.clip(np.array(SIGHT[sight]) @ linear(colour), 0, 1))


def contrast(first, second):
    darker, lighter = sorted(float(linear(c) @ [0.2126, 0.7152, 0.0722]) for c in (first, second))
    return (lighter + 0.05) / (darker + 0.05)


def test_the_measures_themselves():
    assert contrast("#000000", "#FFFFFF") == pytest.approx(21)  # WCAG: the largest there is
    assert seen("#FFFFFF", "usual") == pytest.approx([1, 0, 0], abs=1e-4)  # Ottosson: white is L = 1
    red_green = [np.linalg.norm(seen("#C00000", s) - seen("#508000", s)) for s in ("usual", "deuteranopia")]
    assert red_green[1] < red_green[0] / 2


@pytest.mark.parametrize("scheme", [LIGHT, DARK], ids=["light", "dark"])
@pytest.mark.parametrize("sight", SIGHT)
def test_tones_and_shortage_stay_apart(scheme, sight):
    for first, second in combinations([*scheme.tones, scheme.short], 2):
        assert np.linalg.norm(seen(first, sight) - seen(second, sight)) > 0.07, (first, second)


@pytest.mark.parametrize("scheme", [LIGHT, DARK], ids=["light", "dark"])
def test_marks_and_words_stand_out_from_the_ground(scheme):
    for ground in (scheme.sea, scheme.land):
        assert min(contrast(colour, ground) for colour in (*scheme.tones, scheme.short, scheme.customer)) >= 3
        assert contrast(scheme.ink, ground) >= 7
        assert contrast(scheme.faint_ink, ground) >= 3
    assert contrast(scheme.short, scheme.halo) >= 4.5


def test_map_and_theme_agree():
    config = Path(app.__file__).with_name(".streamlit") / "config.toml"
    theme = tomllib.loads(config.read_text(encoding="utf-8"))["theme"]
    for name, scheme in (("light", LIGHT), ("dark", DARK)):
        assert theme[name]["primaryColor"] == scheme.tones[0]
        assert tuple(theme[name]["chartCategoricalColors"][:4]) == scheme.tones
        assert theme[name]["redColor"] == scheme.short
        assert contrast(theme[name]["textColor"], theme[name]["backgroundColor"]) >= 7
        assert contrast(theme[name]["primaryColor"], theme[name]["backgroundColor"]) >= 4.5


def test_scheme_by_theme():
    assert colours("dark") is DARK
    assert colours("light") is LIGHT
    assert colours(None) is LIGHT
