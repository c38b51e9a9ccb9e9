"""A calm window needs few colours, and every one of them readable: this file is the only place where they are chosen.

Two palettes, light and dark, with the same names; the spacing scale; the type scale. Text keeps a contrast of at least 4.5 to 1
on every ground it is drawn on (WCAG 2.2, success criterion 1.4.3; the formula is the one given there under "relative
luminance" and "contrast ratio"). A state is never told by colour alone: each tone has a glyph and a word beside it.
Not done: colours per party or per currency; colour is kept for what differs.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Palette:
    """Colours by what they are for, as #RRGGBB."""

    name: str
    ground: str  # behind everything
    rail: str  # the navigation at the left
    surface: str  # lists, cards, fields
    raised: str  # heads of lists, the row under the pointer
    hairline: str  # lines between rows
    outline: str  # borders of controls
    ink: str
    soft: str  # second lines, captions
    faint: str  # what agrees
    accent: str
    accent_strong: str  # pressed
    on_accent: str
    wash: str  # the selected row
    differ: str
    differ_wash: str
    silent: str
    silent_wash: str
    day: str
    day_wash: str
    proved: str
    proved_wash: str


LIGHT = Palette(
    name="light", ground="#F8F7F4", rail="#EEECE6", surface="#FFFFFF", raised="#F9F8F5", hairline="#E7E4DD",
    outline="#CFCBC1", ink="#1B1F24", soft="#565C65", faint="#656B74", accent="#1F5687", accent_strong="#174469",
    on_accent="#FFFFFF", wash="#E6EEF6", differ="#A5331A", differ_wash="#FBECE6", silent="#653C9B",
    silent_wash="#F0EAF8", day="#745300", day_wash="#F8F0DA", proved="#27643F", proved_wash="#E5F2E9",
)  # fmt: skip

DARK = Palette(
    name="dark", ground="#15181C", rail="#111417", surface="#1B1F24", raised="#20252B", hairline="#2A3037",
    outline="#3E4650", ink="#ECEEF0", soft="#A8B0BA", faint="#98A1AC", accent="#8CBCEB", accent_strong="#AED0F3",
    on_accent="#10161C", wash="#21344A", differ="#FF9E7D", differ_wash="#3A241D", silent="#C9ABF3",
    silent_wash="#2D2540", day="#E6C36C", day_wash="#352C16", proved="#8AD1A5", proved_wash="#1C3226",
)  # fmt: skip

PALETTES = {"light": LIGHT, "dark": DARK}

TEXT_PAIRS: tuple[tuple[str, str], ...] = (
    # every pair of text and ground that the window draws; the contrast test walks this list
    ("ink", "ground"), ("ink", "rail"), ("ink", "surface"), ("ink", "raised"), ("ink", "wash"),
    ("soft", "ground"), ("soft", "rail"), ("soft", "surface"), ("soft", "raised"), ("soft", "wash"),
    ("faint", "ground"), ("faint", "rail"), ("faint", "surface"), ("faint", "raised"), ("faint", "wash"),
    ("accent", "ground"), ("accent", "surface"), ("accent", "wash"), ("accent", "raised"), ("accent", "rail"),
    ("on_accent", "accent"), ("on_accent", "accent_strong"),
    ("differ", "surface"), ("differ", "differ_wash"), ("differ", "ground"), ("differ", "wash"), ("differ", "raised"),
    ("ink", "differ_wash"), ("soft", "differ_wash"),
    ("silent", "silent_wash"), ("silent", "surface"), ("silent", "raised"), ("silent", "wash"),
    ("day", "day_wash"), ("day", "surface"), ("day", "raised"), ("day", "wash"), ("ink", "day_wash"), ("soft", "day_wash"), ("ink", "silent_wash"), ("ink", "proved_wash"),
    ("proved", "surface"), ("proved", "wash"), ("proved", "proved_wash"), ("proved", "raised"), ("proved", "ground"),
)  # fmt: skip

TONES: dict[str, tuple[str, str, str]] = {
    # tone: colour of the text, colour behind it, what the tone says in words
    "differ": ("differ", "differ_wash", "differs"),
    "silent": ("silent", "silent_wash", "did not speak"),
    "day": ("day", "day_wash", "another day"),
    "proved": ("proved", "", "proved"),
    "quiet": ("faint", "", "agrees"),
    "soft": ("soft", "", ""),
    "": ("ink", "", ""),
}

SPACE = {"hair": 2, "tight": 4, "small": 8, "medium": 12, "large": 16, "wide": 24}
"""Distances in logical pixels."""

TYPE = {"small": 12, "body": 13, "heading": 16, "title": 24}
"""Text heights in logical pixels."""

ROW_ONE, ROW_TWO, HEAD = 29, 46, 32
"""Heights of one-line rows, two-line rows and heads of lists."""

RADIUS = 6

FONT_FAMILIES = (
    # the first one present is used; all have figures of one width, by themselves or through the OpenType feature `tnum`
    "Inter", "Segoe UI Variable Text", "Segoe UI", ".AppleSystemUIFont", "SF Pro Text", "Helvetica Neue", "Adwaita Sans",
    "Ubuntu Sans", "Ubuntu", "Cantarell", "Noto Sans", "Roboto", "Open Sans", "Liberation Sans", "DejaVu Sans",
)  # fmt: skip


def luminance(colour: str) -> float:
    """Relative luminance of #RRGGBB, 0 for black to 1 for white (WCAG 2.2)."""
    parts = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    linear = [p / 12.92 if p <= 0.04045 else ((p + 0.055) / 1.055) ** 2.4 for p in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(one: str, other: str) -> float:
    """Contrast ratio of two colours, 1 to 21 (WCAG 2.2)."""
    high, low = sorted((luminance(one), luminance(other)), reverse=True)
    return (high + 0.05) / (low + 0.05)
