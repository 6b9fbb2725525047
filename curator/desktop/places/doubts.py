"""The place Doubts."""

from __future__ import annotations

from curator.desktop.page import Page


class DoubtsPage(Page):
    """Suspected faults, most probable first."""

    name = "Doubts"
    icon = "doubts"
    purpose = "Suspected faults, most probable first."
