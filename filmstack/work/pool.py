"""Blocks of compiled work on a thread pool: results do not depend on the number of threads.

The kernels release the interpreter lock, so threads are enough on one machine, nothing is forked
and Ctrl-C answers between blocks of at most a tenth of a second.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterable
from concurrent.futures import ThreadPoolExecutor
from typing import TypeVar

from filmstack.errors import ArgumentError

Task = TypeVar("Task")


def thread_count() -> int:
    """Return how many threads to use: FILMSTACK_THREADS, or the processors this process may use."""
    text = os.environ.get("FILMSTACK_THREADS", "")
    if not text:
        return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1
    if not text.isdecimal() or int(text) < 1:
        raise ArgumentError(f"FILMSTACK_THREADS: expected a whole number >= 1, got {text!r}. Correct or unset it")
    return int(text)


def run_blocks(do: Callable[[Task], None], tasks: Iterable[Task]) -> None:
    """Do every task, in any order; the first error ends the work and is raised."""
    todo = list(tasks)
    threads = min(thread_count(), len(todo))
    if threads <= 1:
        for task in todo:
            do(task)
        return
    with ThreadPoolExecutor(threads) as pool:
        waiting = [pool.submit(do, task) for task in todo]
        try:
            for result in waiting:
                result.result()
        except BaseException:
            pool.shutdown(wait=False, cancel_futures=True)
            raise
