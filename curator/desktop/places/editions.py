"""The place Editions."""

from __future__ import annotations

from curator.desktop.page import Page


class EditionsPage(Page):
    """Write lists, and audit them."""

    name = "Editions"
    icon = "editions"
    purpose = "Write lists, and audit them."
