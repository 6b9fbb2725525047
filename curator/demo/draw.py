"""Write a drawn set to disk: the only file of the drawing that touches it."""

from __future__ import annotations

from collections.abc import Callable, Generator, Iterable
from contextlib import closing
from pathlib import Path

from curator.demo.answers import AnswerSheet, sheet_text
from curator.demo.faults import Faults
from curator.demo.job import Job, draw_photo
from curator.demo.plan import PEOPLE, PHOTOS_EACH, SEED, SIBLINGS, Plan, plan_demo
from curator.errors import BadInput, EnvironmentFailed
from curator.intake.pool import Processes

PHOTOS, SHEET, ATTRIBUTES = "photos", "answer_sheet.json", "attributes.csv"


def draw_demo(
    target: Path,
    seed: int = SEED,
    people: int = PEOPLE,
    *,
    photos_each: float = PHOTOS_EACH,
    faults: Faults | None = None,
    siblings: int = SIBLINGS,
    workers: int = 1,
    planned: Callable[[int], None] | None = None,
    drawn: Callable[[int], None] | None = None,
) -> AnswerSheet:
    """Draw a set into `target` (new or empty): photos/, photos/attributes.csv and answer_sheet.json.

    `planned` is called once with the number of photos ahead, `drawn` with the number finished since its last call;
    what `drawn` raises stops the drawing.
    Raises BadInput where `target` holds anything, EnvironmentFailed where it cannot be written.
    """
    if people < 2 or not 0 <= siblings <= people // 2 or photos_each < 2 or workers < 1:
        raise BadInput("a drawn set needs 2 people or more, 2 photos each, and no more siblings than half of them")
    if target.exists() and (not target.is_dir() or any(target.iterdir())):
        raise BadInput(f"{target} is not an empty folder: the demo set is drawn into a new one")
    plan = plan_demo(seed, people=people, photos_each=photos_each, faults=faults, siblings=siblings)
    if planned is not None:
        planned(len(plan.jobs))
    try:
        _write(target, plan, workers, drawn)
    except OSError as error:
        raise EnvironmentFailed(f"cannot write the demo set to {target}: {error.strerror}") from error
    return plan.sheet


def _write(target: Path, plan: Plan, workers: int, drawn: Callable[[int], None] | None) -> None:
    photos = target / PHOTOS
    photos.mkdir(parents=True, mode=0o700, exist_ok=True)
    for folder in sorted({path.rpartition("/")[0] for path in plan.jobs}):
        (photos / folder).mkdir(mode=0o700)
    # Closed, so that after a stop nobody draws on.
    with closing(_files(plan.jobs.values(), workers)) as files:
        for path, data in zip(plan.jobs, files, strict=True):
            _private(photos / path, data)
            if drawn is not None:
                drawn(1)
    _private(photos / ATTRIBUTES, plan.attributes.encode())
    _private(target / SHEET, sheet_text(plan.sheet).encode())


def _files(jobs: Iterable[Job], workers: int) -> Generator[bytes, None, None]:
    """The photos' bytes, in order."""
    if workers == 1:
        yield from map(draw_photo, jobs)
        return
    with Processes(workers) as pool:
        yield from pool.map(draw_photo, jobs, chunksize=2)


def _private(path: Path, data: bytes) -> None:
    path.touch(mode=0o600)
    path.write_bytes(data)
