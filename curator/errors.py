"""Errors that are told to a person in one sentence. Everything else is a bug and shows a traceback.

PairwrightError
├── BadInput           wrong usage or bad input: the caller can mend it        (exit 2)
└── EnvironmentFailed  disk full, no permission, a damaged or busy ledger      (exit 3)
Stopped                a person asked a long step to stop                      (exit 130)

Only the faces (`cli/`, `desktop/`) translate these into exit codes or messages on a screen.
"""

from __future__ import annotations


class PairwrightError(Exception):
    """A failure explained by its message alone: one clear sentence that names what offends."""


class BadInput(PairwrightError):
    """The input or the usage is wrong, and nothing was changed."""


class EnvironmentFailed(PairwrightError):
    """The machine, the disk or the ledger did not do its part; what was there before is still there."""


class Stopped(Exception):
    """A long step was stopped by a person. What was finished before is kept; the next run goes on from there."""
