"""Worker processes: chunks out, results back in the order in which they are ready; a dying worker costs one chunk."""

from __future__ import annotations

import hashlib
import multiprocessing
import os
import signal
import sys
from collections import deque
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import FIRST_COMPLETED, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool
from contextlib import contextmanager
from dataclasses import replace
from pathlib import Path
from typing import Any

from curator.domain import PhotoFile, Reading
from curator.intake.chunks import Result, Task
from curator.intake.worker import settle_in

DIED = "reading it ended the reading process"
_AHEAD = 2
"""Chunks waiting per worker: enough that none is idle, few enough that a stop is quick."""
_POLL_SECONDS = 0.2

ReadChunk = Callable[[Task], Result]


class Processes(ProcessPoolExecutor):
    """Worker processes that Ctrl-C does not reach, not even while they start: the parent alone answers it."""

    def __init__(self, workers: int) -> None:
        # Spawned, not forked: sessions and threads of the parent do not survive a fork, its signal handlers would.
        super().__init__(workers, mp_context=multiprocessing.get_context("spawn"), initializer=settle_in)

    def submit(self, /, *arguments: Any, **named: Any) -> Future[Any]:
        with _interrupts_held():
            return super().submit(*arguments, **named)


@contextmanager
def _interrupts_held() -> Iterator[None]:
    """Ctrl-C reaches this process after the block, and never the processes that start inside: they inherit the mask."""
    if sys.platform == "win32":
        yield
        return
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


def run(
    tasks: Iterable[Task], read: ReadChunk, *, workers: int, stop_wanted: Callable[[], bool]
) -> Iterator[tuple[Result, tuple[str, ...]]]:
    """Results of all tasks, each with the names of the photos that ended a process. Ends early on `stop_wanted`.

    Photos are always read in processes of their own: a file that crashes a decoder must not take the program along.
    """
    waiting = deque(tasks)
    while waiting and not stop_wanted():
        broken: list[Task] = []
        yield from _until_broken(waiting, read, workers, stop_wanted, broken)
        for task in broken:
            if stop_wanted():
                return
            yield _one_by_one(task, read)


def _until_broken(
    waiting: deque[Task], read: ReadChunk, workers: int, stop_wanted: Callable[[], bool], broken: list[Task]
) -> Iterator[tuple[Result, tuple[str, ...]]]:
    pool = Processes(workers)
    flying: dict[Future[Result], Task] = {}
    try:
        while (waiting or flying) and not broken:
            while waiting and len(flying) < workers * _AHEAD and not stop_wanted():
                task = waiting.popleft()
                flying[pool.submit(read, task)] = task
            done, _ = wait(flying, timeout=_POLL_SECONDS, return_when=FIRST_COMPLETED)
            for future in done:
                task = flying.pop(future)
                try:
                    yield future.result(), ()
                except BrokenProcessPool:
                    broken.append(task)
            if stop_wanted() and not flying:
                return
        broken.extend(flying.values())
    except BrokenProcessPool:  # from submit: the pool broke between two looks
        broken.extend([*flying.values(), task])
    finally:
        pool.shutdown(wait=False, cancel_futures=True)


def _one_by_one(task: Task, read: ReadChunk) -> tuple[Result, tuple[str, ...]]:
    """A chunk during which a process died, photo by photo, each in reach of its own death alone."""
    files: list[PhotoFile] = []
    readings: dict[str, Reading] = {}
    died: list[str] = []
    pool = Processes(1)
    for file in task.files:
        try:
            result = pool.submit(read, replace(task, files=(file,))).result()
        except BrokenProcessPool:
            pool.shutdown(wait=False)
            pool = Processes(1)
            died.append(file.name)
            result = _given_up(task, file)
        files.extend(result.files)
        for reading in result.readings:
            if reading.why != DIED or reading.digest not in readings:
                readings[reading.digest] = reading
    pool.shutdown()
    return Result(tuple(files), tuple(readings.values())), tuple(died)


def _given_up(task: Task, file: PhotoFile) -> Result:
    """A photo that ended its process, known by its bytes: it is not tried again until they change."""
    try:
        with Path(os.fsdecode(task.root + b"/" + file.raw)).open("rb") as opened:
            status = os.fstat(opened.fileno())
            digest = hashlib.file_digest(opened, "sha256").hexdigest()
    except OSError:
        return Result((replace(file, digest=None, why=DIED),), ())
    read = replace(file, size=status.st_size, mtime_ns=status.st_mtime_ns, digest=digest, why=None)
    return Result((read,), (Reading(digest=digest, why=DIED),))
