"""The colours of the window, light and dark, and what makes them readable. No Qt here."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Palette:
    """Colours as #rrggbb. Text is `ink`, `muted`, `accent`, `same`, `different` or `warn`, on `paper` or `leaf`."""

    dark: bool
    paper: str
    """The ground everything lies on."""
    leaf: str
    """A sheet on the ground: lists, fields, cards."""
    shade: str
    """Under the pointer, and empty frames."""
    line: str
    """The few hairlines there are."""
    ink: str
    muted: str
    accent: str
    on_accent: str
    """Text on `accent`."""
    same: str
    different: str
    warn: str


LIGHT = Palette(
    dark=False,
    paper="#f4f0e7",
    leaf="#fcfaf5",
    shade="#e9e3d5",
    line="#d8d0bf",
    ink="#26221b",
    muted="#655d4f",
    accent="#1b6a63",
    on_accent="#fcfaf5",
    same="#1f5fa6",
    different="#a34a08",
    warn="#9a2b2b",
)
DARK = Palette(
    dark=True,
    paper="#1d1b18",
    leaf="#282521",
    shade="#35312b",
    line="#433e36",
    ink="#efe9dd",
    muted="#b5ac9c",
    accent="#72c4bb",
    on_accent="#15211f",
    same="#8fbcf2",
    different="#f0a869",
    warn="#f09a92",
)
TEXTS = ("ink", "muted", "accent", "same", "different", "warn")
GROUNDS = ("paper", "leaf")


def contrast(one: str, other: str) -> float:
    """The contrast ratio of two colours, 1 to 21 (WCAG 2.2, "contrast ratio" and "relative luminance")."""
    light, dark = sorted((_luminance(one), _luminance(other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def _luminance(colour: str) -> float:
    channels = (int(colour[at : at + 2], 16) / 255 for at in (1, 3, 5))
    red, green, blue = (c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue
