"""Colours by role and the series of setups, light and dark: plain data and the arithmetic of contrast (no Qt)."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Roles:
    """What each colour is for; every text role reaches 4.5:1 on `paper` and on `card`."""

    paper: str  # the ground of the window
    card: str  # the ground of what is read
    hairline: str  # edges of cards, grid
    axis: str  # the zero line, axes: 3:1
    ink: str  # text
    quiet: str  # text that steps back
    accent: str  # what can be pressed, and where you are
    on_accent: str  # text on accent
    hover: str  # ground under the pointer
    chosen: str  # ground of what is chosen
    field: str  # ground of a field
    good: str
    caution: str
    bad: str
    caution_ground: str
    bad_ground: str
    power: str  # trace of power in the day strip: 3:1
    speed: str  # trace of speed in the day strip: 3:1


LIGHT = Roles(
    paper="#fbfaf7",
    card="#ffffff",
    hairline="#dfe3e8",
    axis="#8b94a0",
    ink="#1d2733",
    quiet="#5c6773",
    accent="#0b5a6f",
    on_accent="#ffffff",
    hover="#f1f3f3",
    chosen="#e4eef0",
    field="#ffffff",
    good="#1e7a4c",
    caution="#8a5a00",
    bad="#b3261e",
    caution_ground="#fbf3e0",
    bad_ground="#fbebe9",
    power="#5f6873",
    speed="#8c5fa0",
)
DARK = Roles(
    paper="#14181d",
    card="#1c2127",
    hairline="#323941",
    axis="#78828e",
    ink="#e7eaee",
    quiet="#a3adb8",
    accent="#6cc4d8",
    on_accent="#0d1a1f",
    hover="#262c33",
    chosen="#23383f",
    field="#171c21",
    good="#6ecf9b",
    caution="#e6b65c",
    bad="#ff9b8f",
    caution_ground="#332a17",
    bad_ground="#3a211f",
    power="#9aa4b0",
    speed="#c09bd0",
)


@dataclass(frozen=True, slots=True)
class Chip:
    """How one setup is told from the others: a filled chip with its letter, and marks of the same colour."""

    fill: str
    text: str
    hatched: bool  # the second six repeat the hues with a hatch on fills and a diamond for dots


# Six hues, told apart in normal sight and with each kind of colour blindness (tests/app/test_colours.py measures
# it), then the same six at another lightness, hatched.
_LIGHT_FILLS = (
    "#5b6372",
    "#3d71c0",
    "#a7600c",
    "#045637",
    "#620458",
    "#383100",
    "#2e3541",
    "#12427f",
    "#7a3f05",
    "#22775a",
    "#a3488c",
    "#6d6410",
)
_DARK_FILLS = (
    "#bdc4d5",
    "#62a1ed",
    "#f9b465",
    "#a9efc4",
    "#db6da4",
    "#a0943c",
    "#8f98aa",
    "#9cc6f7",
    "#d08a3a",
    "#58bf91",
    "#f0a8cb",
    "#d3c873",
)
LIGHT_CHIPS = tuple(Chip(fill, "#ffffff", i >= 6) for i, fill in enumerate(_LIGHT_FILLS))
DARK_CHIPS = tuple(Chip(fill, "#10151a", i >= 6) for i, fill in enumerate(_DARK_FILLS))


def channels(colour: str) -> tuple[float, float, float]:
    """Return linear red, green and blue, 0 to 1, of ``#rrggbb`` (sRGB, IEC 61966-2-1)."""
    coded = (int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5))
    red, green, blue = (c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in coded)
    return red, green, blue


def contrast(one: str, other: str) -> float:
    """Return the contrast ratio of two colours, 1 to 21 (WCAG 2.2, success criterion 1.4.3)."""
    luminances = sorted(
        0.2126 * red + 0.7152 * green + 0.0722 * blue for red, green, blue in map(channels, (one, other))
    )
    return (luminances[1] + 0.05) / (luminances[0] + 0.05)


def mixed(one: str, other: str, share: float) -> str:
    """Return `one` with `share` (0 to 1) of `other` in it, as ``#rrggbb``."""
    parts = (
        round(int(one[i : i + 2], 16) * (1 - share) + int(other[i : i + 2], 16) * share) for i in (1, 3, 5)
    )
    return "#" + "".join(f"{part:02x}" for part in parts)
