"""The place Roll."""

from __future__ import annotations

from curator.desktop.page import Page


class RollPage(Page):
    """Who is on the roll, and the photos of each."""

    name = "Roll"
    icon = "roll"
    purpose = "Who is on the roll, and the photos of each."
