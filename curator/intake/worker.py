"""What a worker process does first. Imports nothing of weight: the number libraries heed the environment on loading."""

from __future__ import annotations

import ctypes
import multiprocessing
import os
import signal
import sys
import threading

_TRIM_THRESHOLD, _MMAP_THRESHOLD = -1, -3
_KEPT_BYTES = 64 << 20


def settle_in() -> None:
    """The parent alone answers Ctrl-C; no library starts threads of its own; the worker does not outlive its parent."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
        os.environ[name] = "1"
    _keep_memory()
    threading.Thread(target=_end_with_parent, daemon=True).start()


def _end_with_parent() -> None:
    # A pool's workers hold both ends of its pipes, so a killed parent would leave them waiting for ever.
    parent = multiprocessing.parent_process()
    if parent is not None:
        parent.join()
        os._exit(1)


def _keep_memory() -> None:
    """Let glibc keep memory that was freed: pictures come and go, and a page given back is a page to clear again."""
    if sys.platform == "linux":
        mallopt = getattr(ctypes.CDLL(None), "mallopt", None)  # other C libraries have none
        if mallopt is not None:
            mallopt(_TRIM_THRESHOLD, _KEPT_BYTES)
            mallopt(_MMAP_THRESHOLD, _KEPT_BYTES)
