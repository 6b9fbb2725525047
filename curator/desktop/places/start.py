"""The place Start."""

from __future__ import annotations

from curator.desktop.page import Page


class StartPage(Page):
    """Choose a photo folder, open a ledger, or look at the regatta."""

    name = "Start"
    icon = "open"
    purpose = "Choose a photo folder, open a ledger, or look at the regatta."
