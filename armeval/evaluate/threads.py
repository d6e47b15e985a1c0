"""Work spread over the processor's cores: compiled kernels and numpy let go of Python's lock."""

from __future__ import annotations

import os
from collections.abc import Callable, Sequence
from concurrent.futures import ThreadPoolExecutor, as_completed
from typing import TypeVar

from armeval.progress import Progress, silent

Part = TypeVar("Part")
Result = TypeVar("Result")


def spread(
    function: Callable[[Part], Result],
    parts: Sequence[Part],
    *,
    what: str = "",
    progress: Progress = silent,
    threads: int | None = None,
) -> list[Result]:
    """Call a function on every part, several at a time, and give the results in the order of the parts.

    ``threads`` is how many at a time; None: one a core.
    The first exception raised by a part is raised here, after the parts under way have ended.
    """
    workers = min(len(parts), (os.cpu_count() or 1) if threads is None else threads)
    if workers <= 1:
        results = []
        for done, part in enumerate(parts):
            results.append(function(part))
            progress(what, done + 1, len(parts))
        return results
    with ThreadPoolExecutor(workers) as pool:
        futures = [pool.submit(function, part) for part in parts]
        try:
            for done, future in enumerate(as_completed(futures)):
                future.result()
                progress(what, done + 1, len(parts))
        except BaseException:
            pool.shutdown(wait=True, cancel_futures=True)
            raise
        return [future.result() for future in futures]


def chunks(count: int, size: int = 1 << 16) -> list[slice]:
    """Cut so many samples into slices that fit into the processor's cache."""
    return [slice(first, min(first + size, count)) for first in range(0, count, size)]
