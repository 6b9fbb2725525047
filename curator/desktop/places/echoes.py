"""The place Echoes."""

from __future__ import annotations

from curator.desktop.page import Page


class EchoesPage(Page):
    """Photos that show the same shot."""

    name = "Echoes"
    icon = "echoes"
    purpose = "Photos that show the same shot."
