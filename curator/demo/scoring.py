"""How doubts and echoes did against the answer sheet. Pure."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from curator.demo.answers import AnswerSheet, PlantedDoubt
from curator.domain import Change, Doubt, DoubtKind, EchoGroup

RAISED = 0.5
"""A doubt counts as raised from this probability on."""

OF_ONE_PHOTO = frozenset({DoubtKind.NO_FACE, DoubtKind.SEVERAL_FACES, DoubtKind.POOR_PHOTO, DoubtKind.UNREADABLE_FILE})
_ALSO_COUNTS = {DoubtKind.POOR_PHOTO: {DoubtKind.POOR_PHOTO, DoubtKind.NO_FACE}}
"""In a photo blurred, dark or small beyond use no face is to be found: either name of the fault is right."""


@dataclass(frozen=True)
class Row:
    """One line of the demo's table. `kind` is a doubt kind, or `echo: ` and a change."""

    kind: str
    planted: int
    found: int
    missed: int
    wrongly_raised: int


def score(sheet: AnswerSheet, doubts: Iterable[Doubt], echo_groups: Iterable[EchoGroup]) -> list[Row]:
    """One row per doubt kind, then one per change.

    A planted misfiled or spoilt photo is found by a raised doubt on that photo, a folder fault by one on its
    identities. A raised doubt is wrong only where nothing planted explains it: see `explained`. An echo is found
    where original and copy lie in one group; a link is wrong where its two photos do not come from one original.
    """
    raised = [d for d in doubts if d.probability >= RAISED]
    rows = []
    for kind in DoubtKind:
        planted = [p for p in sheet.doubts if p.kind is kind]
        found = sum(any(_finds(d, p) for d in raised) for p in planted)
        wrong = sum(d.kind is kind and not explained(sheet, d) for d in raised)
        rows.append(Row(kind.value, len(planted), found, len(planted) - found, wrong))
    return rows + _echo_rows(sheet, list(echo_groups))


def _finds(doubt: Doubt, planted: PlantedDoubt) -> bool:
    if doubt.kind not in _ALSO_COUNTS.get(planted.kind, {planted.kind}):
        return False
    if planted.kind is DoubtKind.ONE_PERSON_TWO_FOLDERS:
        return set(planted.identities) <= set(doubt.identities)
    if planted.kind is DoubtKind.TWO_PEOPLE_ONE_FOLDER:
        return planted.identities[0] in doubt.identities
    return planted.photos[0] in doubt.photos


def explained(sheet: AnswerSheet, doubt: Doubt) -> bool:
    """True where something planted accounts for the doubt, though perhaps under another name.

    - a doubt about one photo: any fault of the photo itself was planted there;
    - a misfiled photo: it shows somebody else than most of its folder does, or nobody, or two; or its folder is
      planted as mixed up (half of a person's photos lie elsewhere, or two people share it);
    - two people in one folder: the folder does hold two people or more;
    - one person in two folders: some person is to be seen in both.
    """
    spoilt = {p for d in sheet.doubts if d.kind in OF_ONE_PHOTO for p in d.photos}
    if doubt.kind in OF_ONE_PHOTO:
        return bool(spoilt & set(doubt.photos))
    shown = _shown(sheet)
    if doubt.kind is DoubtKind.MISFILED_PHOTO:
        mixed = {i for d in sheet.doubts if d.kind in _FOLDER_FAULTS for i in d.identities}
        return any(p in spoilt or _folder(p) in mixed or _stands_out(sheet, shown, p) for p in doubt.photos)
    if doubt.kind is DoubtKind.TWO_PEOPLE_ONE_FOLDER:
        return any(len(set(shown[i])) > 1 for i in doubt.identities)
    people = [set(shown[i]) for i in doubt.identities]
    return len(people) > 1 and bool(set.intersection(*people))


_FOLDER_FAULTS = frozenset({DoubtKind.ONE_PERSON_TWO_FOLDERS, DoubtKind.TWO_PEOPLE_ONE_FOLDER})


def _folder(photo: str) -> str:
    return photo.rpartition("/")[0]


def _shown(sheet: AnswerSheet) -> defaultdict[str, list[str]]:
    """The true people of each folder, one entry per photo."""
    shown: defaultdict[str, list[str]] = defaultdict(list)
    for photo, person in sheet.true_person.items():
        shown[_folder(photo)].append(person)
    return shown


def _stands_out(sheet: AnswerSheet, shown: defaultdict[str, list[str]], photo: str) -> bool:
    person, others = sheet.true_person.get(photo), shown[_folder(photo)]
    return person is not None and 2 * others.count(person) <= len(others)


def _echo_rows(sheet: AnswerSheet, groups: Sequence[EchoGroup]) -> list[Row]:
    root = {e.copy: e.original for e in sheet.echoes}

    def shot(photo: str) -> str:
        while photo in root:
            photo = root[photo]
        return photo

    together = [set(g.photos) for g in groups]
    links = [link for g in groups for link in g.links]
    rows = []
    for change in Change:
        planted = [e for e in sheet.echoes if e.change is change]
        found = sum(any({e.original, e.copy} <= photos for photos in together) for e in planted)
        wrong = sum(k.change is change and shot(k.a) != shot(k.b) for k in links)
        rows.append(Row(f"echo: {change.value}", len(planted), found, len(planted) - found, wrong))
    return rows
