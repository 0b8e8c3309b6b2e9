"""Ink that stays apart in grey print and for colour-blind readers, and text that any font can draw."""

from __future__ import annotations

import warnings
from itertools import combinations

import numpy as np
import pytest
from matplotlib import rc_context

from balance.report.figures import palette
from balance.report.figures.palette import NAVY, PINE, PLUM, RUST, SLATE, as_bytes, ink, plain, sheet
from balance.report.figures.recovery import LOOKS

# Linear RGB as seen without red and without green cones, full loss: Machado, Oliveira, Fernandes 2009 (from memory)
BLIND = {
    "protanopia": np.array([[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216],
                            [-0.003882, -0.048116, 1.051998]]),
    "deuteranopia": np.array([[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413],
                              [-0.011820, 0.042940, 0.968881]]),
}


def linear(colour: str) -> np.ndarray:
    channel = np.array([int(colour[i:i + 2], 16) for i in (1, 3, 5)]) / 255
    return np.where(channel <= 0.04045, channel / 12.92, ((channel + 0.055) / 1.055) ** 2.4)


def luminance(colour: str) -> float:
    return float(linear(colour) @ [0.2126, 0.7152, 0.0722])


def contrast(one: float, other: float) -> float:
    return (max(one, other) + 0.05) / (min(one, other) + 0.05)


@pytest.mark.parametrize("colour", [NAVY, RUST, PINE, PLUM, SLATE])
def test_every_ink_shows_on_white(colour):
    """3:1 is what graphics need (WCAG 2.1, 1.4.11, from memory)."""
    assert contrast(luminance(colour), 1.0) > 3.0


def test_the_twin_a_pale_ink_does_not():
    assert contrast(luminance("#c9ced4"), 1.0) < 3.0


def lab(light: np.ndarray) -> np.ndarray:
    """CIE 1976 L*a*b* of linear sRGB under D65."""
    xyz = np.array([[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]]) @ np.clip(light, 0.0, 1.0)
    x, y, z = np.cbrt(xyz / [0.9505, 1.0, 1.089])
    return np.array([116 * y - 16, 500 * (x - y), 200 * (y - z)])


@pytest.mark.parametrize("eyes", sorted(BLIND))
def test_inks_stay_apart_for_colour_blind_readers(eyes):
    """ΔE*ab: about 2 is just told apart side by side, 10 at a glance; the inks keep 15. A brown and an olive do not."""
    def far(a: str, b: str) -> float:
        return float(np.linalg.norm(lab(BLIND[eyes] @ linear(a)) - lab(BLIND[eyes] @ linear(b))))

    assert min(far(a, b) for a, b in combinations((NAVY, RUST, PINE, PLUM), 2)) > 15.0
    assert far("#a05a2c", "#8b6a2c") < 15.0


def test_directions_differ_in_grey_and_in_line_style():
    (out, out_line), (inward, in_line) = LOOKS["outward"], LOOKS["inward"]
    assert contrast(luminance(out), luminance(inward)) > 1.8
    assert out_line != in_line


@pytest.mark.parametrize("words", ["$\\frac{1}{", "a$b$c", "名前", "x\x00y\n", "\ud800", "<b>&amp;", "e" * 300])
def test_hostile_names_draw(words):
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        with ink():
            figure, (axes,) = sheet(2.0)
            axes.set_title(plain(words))
            axes.annotate(plain(words), (0.5, 0.5))
        drawn = as_bytes(figure, "svg")
    assert drawn.startswith(b"<svg")
    assert len(plain(words)) <= 34


def test_the_readers_own_settings_do_not_reach_the_drawing():
    with rc_context({"font.size": 30.0, "figure.facecolor": "black", "lines.linewidth": 9.0, "axes.grid": False}), ink():
        figure, (axes,) = sheet(2.0)
        axes.plot([0, 1], [0, 1])
        changed = as_bytes(figure, "svg")
    with ink():
        figure, (axes,) = sheet(2.0)
        axes.plot([0, 1], [0, 1])
    assert as_bytes(figure, "svg") == changed


def test_svg_loses_decimals_not_shape():
    svg = b'<?xml?><svg><g id="axes_1"><!-- note --><path id="keep" d="M 1.234567 -2.345678 \nL 10 20 \n"/></g></svg>'
    assert palette.shorter(svg) == b'<svg><g><path id="keep" d="M 1.23 -2.34\nL 10 20 \n"/></g></svg>'
