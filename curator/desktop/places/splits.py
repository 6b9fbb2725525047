"""The place Splits."""

from __future__ import annotations

from curator.desktop.page import Page


class SplitsPage(Page):
    """Put identities to train, validation and test."""

    name = "Splits"
    icon = "splits"
    purpose = "Put identities to train, validation and test."
