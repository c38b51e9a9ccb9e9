"""Colours: every text readable on every ground, in both palettes; states told apart without colour."""

from __future__ import annotations

import dataclasses
import re

import pytest

from reconciler.window import tokens


@pytest.mark.parametrize(
    ("one", "other", "ratio"),
    [
        # WCAG 2.2, "contrast ratio": black on white is 21 to 1; #767676 on white is the lightest grey that reaches 4.5 (4.54)
        ("#000000", "#FFFFFF", 21.0),
        ("#767676", "#FFFFFF", 4.54),
        ("#FFFFFF", "#FFFFFF", 1.0),
    ],
)
def test_contrast_is_that_of_the_guideline(one: str, other: str, ratio: float) -> None:
    assert tokens.contrast(one, other) == pytest.approx(ratio, abs=0.005)
    assert tokens.contrast(other, one) == tokens.contrast(one, other)


@pytest.mark.parametrize("palette", tokens.PALETTES.values(), ids=lambda p: p.name)
@pytest.mark.parametrize(("text", "ground"), tokens.TEXT_PAIRS)
def test_text_is_readable(palette: tokens.Palette, text: str, ground: str) -> None:
    ratio = tokens.contrast(getattr(palette, text), getattr(palette, ground))
    assert ratio >= 4.5, f"{text} on {ground} in {palette.name}: {ratio:.2f}"


def test_both_palettes_name_the_same_colours() -> None:
    for palette in tokens.PALETTES.values():
        for field in dataclasses.fields(palette):
            if field.name != "name":
                assert re.fullmatch(r"#[0-9A-F]{6}", getattr(palette, field.name)), field.name


def test_every_marked_tone_is_readable_on_its_own_ground_and_has_words() -> None:
    for tone, (ink, wash, words) in tokens.TONES.items():
        assert hasattr(tokens.LIGHT, ink)
        if wash:
            assert (ink, wash) in tokens.TEXT_PAIRS
            assert words, f"the tone {tone} would be told by colour alone"


def _simulated(colour: str, kind: str) -> tuple[float, float, float]:
    """A colour as dichromats see it; matrices of Viénot, Brettel and Mollon (1999) in linear light, from memory, rounded."""
    linear = [(c / 255 / 12.92 if c / 255 <= 0.04045 else ((c / 255 + 0.055) / 1.055) ** 2.4)
              for c in (int(colour[i : i + 2], 16) for i in (1, 3, 5))]  # fmt: skip
    matrix = {
        "protan": ((0.11238, 0.88762, 0.0), (0.11238, 0.88762, 0.0), (0.00401, -0.00401, 1.0)),
        "deutan": ((0.29275, 0.70725, 0.0), (0.29275, 0.70725, 0.0), (-0.02234, 0.02234, 1.0)),
    }[kind]
    return tuple(sum(m * c for m, c in zip(line, linear, strict=True)) for line in matrix)  # type: ignore[return-value]


@pytest.mark.parametrize("palette", tokens.PALETTES.values(), ids=lambda p: p.name)
@pytest.mark.parametrize("kind", ["protan", "deutan"])
def test_marked_text_stays_readable_to_dichromats(palette: tokens.Palette, kind: str) -> None:
    for tone in ("differ", "silent", "day"):
        ink, wash, _ = tokens.TONES[tone]
        seen = []
        for name in (ink, wash):
            red, green, blue = _simulated(getattr(palette, name), kind)
            seen.append(0.2126 * red + 0.7152 * green + 0.0722 * blue)
        high, low = max(seen), min(seen)
        assert (high + 0.05) / (low + 0.05) >= 3.0
