"""Doubts in words, and what an answer to one says. No Qt here."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from curator.domain import Doubt, DoubtKind, PhotoAnswer

OF_PEOPLE = frozenset({DoubtKind.ONE_PERSON_TWO_FOLDERS, DoubtKind.TWO_PEOPLE_ONE_FOLDER})
"""Doubts that are settled by a pair of photos; the others by one."""
_MEASURES = {
    "sharpness": "it is blurred",
    "brightness": "it is too dark or too bright",
    "contrast": "it has hardly any contrast",
    "clipped": "much of it is pure black or white",
    "eye_distance": "its eyes are too close together, in pixels",
    "side": "it is very small",
}


def ordered(doubts: Iterable[Doubt], sizes: Mapping[str, int]) -> list[Doubt]:
    """By probability in steps of a tenth, and within a step by how many pairs hang on the doubt."""
    return sorted(doubts, key=lambda d: (-round(d.probability, 1), -hanging(d, sizes), d.kind.value, d.photos))


def hanging(doubt: Doubt, sizes: Mapping[str, int]) -> int:
    """How many mated pairs would be wrong, or are missing, if the doubt is right; `sizes`: photos by identity."""
    counts = [sizes.get(name, 1) for name in doubt.identities]
    if doubt.kind == DoubtKind.TWO_PEOPLE_ONE_FOLDER:
        one, two = (len(part) for part in doubt.evidence["parts"])
        return one * two
    if doubt.kind == DoubtKind.ONE_PERSON_TWO_FOLDERS:
        return counts[0] * counts[1]
    return max(0, counts[0] - 1) + sum(counts[1:])


def sentence(doubt: Doubt) -> str:
    """What is suspected."""
    first = doubt.identities[0]
    second = doubt.identities[1] if len(doubt.identities) > 1 else ""
    photo = doubt.photos[0]
    match doubt.kind:
        case DoubtKind.MISFILED_PHOTO:
            return f"{photo} may not show {first}." + (f" It looks more like {second}." if second else "")
        case DoubtKind.ONE_PERSON_TWO_FOLDERS:
            return f"{first} and {second} may be one person."
        case DoubtKind.TWO_PEOPLE_ONE_FOLDER:
            return f"{first} may hold two people."
        case DoubtKind.NO_FACE:
            return f"No face was found in {photo}."
        case DoubtKind.SEVERAL_FACES:
            return f"{doubt.evidence.get('faces', 'Several')} faces are in {photo}."
        case DoubtKind.POOR_PHOTO:
            faults = [words for name, words in _MEASURES.items() if name in doubt.evidence]
            return f"{photo} may be too poor: {', '.join(faults) or 'its measures are low'}."
        case DoubtKind.UNREADABLE_FILE:
            return f"{photo} cannot be read: {doubt.evidence.get('why', 'the file is damaged')}."


def row_words(doubt: Doubt, settled: bool) -> str:
    """A doubt as two lines of the list."""
    where = " and ".join(doubt.identities[:2])
    mark = "settled · " if settled else ""
    return f"{where}\n{mark}{doubt.kind.value.replace('-', ' ')} · {doubt.probability:.0%}"


def answer_if_right(kind: DoubtKind) -> PhotoAnswer:
    """What a person says of the photo who finds the doubt right."""
    return PhotoAnswer.DOES_NOT_BELONG if kind == DoubtKind.MISFILED_PHOTO else PhotoAnswer.UNUSABLE
