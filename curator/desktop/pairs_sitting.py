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
    unusable: tuple[str, ...] = ()
    """The photos it was said of, where it was said of photos: no pair of theirs is worth asking any more."""
    at: float = field(default_factory=time.monotonic)
    standing: bool = True


class Sitting:
    """The questions in their order, and the verdicts on them."""

    def __init__(self) -> None:
        self._questions: list[Question] = []
        self._place = 0
        self._reopened: Question | None = None
        self.given: list[Given] = []

    def ask(self, questions: Sequence[Question], *, keep: bool = False) -> None:
        """New questions, each pair once. What was said stays listed; with `keep`, what is shown stays shown if asked.

        A pair that was said already in this sitting is only shown by itself where it comes first: it was wanted.
        """
        present = self.present
        once: dict[tuple[str, str], Question] = {}
        for question in questions:
            once.setdefault(_key(question), question)
        if keep and present is not None and _key(present) in once:
            first = once.pop(_key(present))
            once = {_key(first): first, **once}
        self._questions = list(once.values())
        self._place = 0
        self._reopened = None

    @property
    def present(self) -> Question | None:
        if self._reopened is not None:
            return self._reopened
        return self._questions[self._place] if self._place < len(self._questions) else None

    @property
    def n_open(self) -> int:
        """Pairs of the list that nothing was said of yet, those passed too."""
        said = {_key(entry.question) for entry in self.given if entry.standing}
        gone = self._unusable()
        return sum(_key(q) not in said and not gone & {q.photo_a, q.photo_b} for q in self._questions)

    def said_of(self, question: Question) -> str:
        """The word that stands for this pair in this sitting; empty for none."""
        words = [e.word for e in self.given if e.standing and _key(e.question) == _key(question)]
        return words[-1] if words else ""

    def note(self, act: Act, question: Question, word: str, unusable: Sequence[str] = ()) -> None:
        self.given.append(Given(act.number, question, word, tuple(unusable)))

    def go_on(self) -> None:
        """To the next question that is open; after a pair that was opened again, to where one was."""
        self._reopened = None
        gone = self._unusable()
        while (q := self.present) is not None and (gone & {q.photo_a, q.photo_b} or self.said_of(q)):
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
        start = self._place + (self._reopened is None)
        return self._questions[start : start + n][::-1]

    def pace(self) -> float:
        """Verdicts a minute over the last minutes; 0 while there are too few to tell."""
        now = time.monotonic()
        recent = [entry.at for entry in self.given if entry.standing and now - entry.at < _PACE_SECONDS]
        if len(recent) < _FEWEST:
            return 0.0
        return 60.0 * len(recent) / max(1.0, now - recent[0])

    def _unusable(self) -> set[str]:
        return {photo for entry in self.given if entry.standing for photo in entry.unusable}


def _key(question: Question) -> tuple[str, str]:
    return pair_key(question.photo_a, question.photo_b)
