"""One sitting at the annotator's desk: what is asked, what was said, where one is. No Qt here."""

from __future__ import annotations

import time
from collections.abc import Sequence
from dataclasses import dataclass, field

from curator.domain import Act
from curator.review.questions import Question
from curator.verdicts import pair_key

_PACE_SECONDS = 300.0
_FEWEST = 3


@dataclass
class Given:
    """One thing said in this sitting."""

    act: int
    question: Question
    word: str
    at: float = field(default_factory=time.monotonic)
    standing: bool = True


class Sitting:
    """The questions in their order, and the verdicts on them."""

    def __init__(self) -> None:
        self._questions: list[Question] = []
        self._place = 0
        self._reopened: Question | None = None
        self.given: list[Given] = []

    def ask(self, questions: Sequence[Question]) -> None:
        """New questions: those of the order chosen. What was said stays listed."""
        self._questions = list(questions)
        self._place = 0
        self._reopened = None

    @property
    def present(self) -> Question | None:
        if self._reopened is not None:
            return self._reopened
        return self._questions[self._place] if self._place < len(self._questions) else None

    @property
    def n_open(self) -> int:
        said = {_key(entry.question) for entry in self.given if entry.standing}
        return sum(_key(question) not in said for question in self._questions)

    def said_of(self, question: Question) -> str:
        """The word that stands for this pair in this sitting; empty for none."""
        words = [e.word for e in self.given if e.standing and _key(e.question) == _key(question)]
        return words[-1] if words else ""

    def note(self, act: Act, question: Question, word: str) -> None:
        self.given.append(Given(act.number, question, word))

    def go_on(self) -> None:
        """To the next question that nothing was said of; after a pair that was opened again, to where one was."""
        if self._reopened is not None:
            self._reopened = None
        while self.present is not None and self.said_of(self.present):
            self._place += 1

    def step(self, by: int) -> None:
        """Pass or go back by one; said or not."""
        self._reopened = None
        self._place = min(max(0, self._place + by), len(self._questions))

    def reopen(self, number: int) -> None:
        """Show what was said as `number` in this sitting again."""
        self._reopened = self.given[number].question

    def follow(self, act: Act, *, taken_back: bool) -> bool:
        """Mark what was taken back or restored, and show its pair where it was taken back. False if not of here."""
        entry = next((e for e in self.given if e.act == act.number), None)
        if entry is None or entry.standing is not taken_back:
            return False
        entry.standing = not taken_back
        if taken_back:
            self._reopened = entry.question
        else:
            self.go_on()
        return True

    def ahead(self, n: int) -> list[Question]:
        """The next questions, the nearest last: pictures wished for last come first."""
        return self._questions[self._place + 1 : self._place + 1 + n][::-1]

    def pace(self) -> float:
        """Verdicts a minute over the last minutes; 0 while there are too few to tell."""
        now = time.monotonic()
        recent = [entry.at for entry in self.given if entry.standing and now - entry.at < _PACE_SECONDS]
        if len(recent) < _FEWEST:
            return 0.0
        return 60.0 * len(recent) / max(1.0, now - recent[0])


def _key(question: Question) -> tuple[str, str]:
    return pair_key(question.photo_a, question.photo_b)
