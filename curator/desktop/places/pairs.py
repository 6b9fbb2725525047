"""The place Pairs."""

from __future__ import annotations

from curator.desktop.page import Page


class PairsPage(Page):
    """Give verdicts on pairs."""

    name = "Pairs"
    icon = "pairs"
    purpose = "Give verdicts on pairs."
