"""The six invented clubs of the Tarn Valley Regatta and its three seasons."""

from __future__ import annotations

from dataclasses import dataclass

Colour = tuple[int, int, int]


@dataclass(frozen=True)
class Club:
    """A rowing club: its kit's colours (sRGB) and pattern."""

    name: str
    first: Colour
    second: Colour
    trim: Colour
    pattern: str


CLUBS = (
    Club("Alderbeck", (24, 60, 112), (232, 232, 226), (214, 178, 60), "hoops"),
    Club("Brackenholme", (36, 92, 58), (226, 206, 120), (236, 236, 230), "sash"),
    Club("Cold Ferry", (140, 34, 44), (232, 228, 220), (40, 38, 42), "halves"),
    Club("Dunmere", (60, 44, 88), (146, 190, 214), (224, 224, 230), "band"),
    Club("Eskwater", (226, 120, 40), (38, 44, 58), (240, 236, 226), "stripes"),
    Club("Fellgate", (38, 112, 122), (22, 26, 32), (236, 128, 118), "sleeves"),
)

SEASONS = ("2021", "2022", "2023")
