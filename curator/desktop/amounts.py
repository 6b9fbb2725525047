"""Numbers, sizes and spans of time as one reads them aloud. No Qt here."""

from __future__ import annotations

from collections.abc import Sequence

_MOST = 8


def counted(count: int, one: str, many: str = "") -> str:
    """A number with its noun: 1 leak, 2 leaks, 3 identities."""
    return f"{count:,} {one if count == 1 else many or (one[:-1] + 'ies' if one.endswith('y') else one + 's')}"


def named(names: Sequence[str], most: int = _MOST) -> str:
    """The first few names, and how many more there are."""
    more = len(names) - most
    return ", ".join(names[:most]) + (f" and {more:,} more" if more > 0 else "")


def size(n_bytes: int) -> str:
    """Bytes: 12 kB, 2.3 MB."""
    return f"{n_bytes / 1e6:.1f} MB" if n_bytes >= 1e6 else f"{n_bytes / 1e3:.0f} kB"


def span(seconds: float) -> str:
    """A length of time: 40 s, 3 min, 2 h 5 min."""
    if seconds < 60:
        return f"{max(1, round(seconds))} s"
    minutes = round(seconds / 60)
    return f"{minutes} min" if minutes < 60 else f"{minutes // 60} h {minutes % 60} min"
