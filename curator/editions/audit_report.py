"""What an audit found and how much it looked at."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

_MOST_ROWS = 20
"""Rows listed with a fault; all are counted."""


@dataclass(frozen=True)
class Fault:
    kind: str
    detail: str
    rows: tuple[str, ...] = ()


@dataclass
class AuditReport:
    faults: list[Fault] = field(default_factory=list)
    checked: dict[str, int] = field(default_factory=dict)

    @property
    def sound(self) -> bool:
        return not self.faults

    def found(self, kind: str, what: str, rows: Sequence[str]) -> None:
        """Note a fault, if there are any rows of it."""
        if rows:
            self.faults.append(Fault(kind, f"{len(rows)} {what}", tuple(rows[:_MOST_ROWS])))
