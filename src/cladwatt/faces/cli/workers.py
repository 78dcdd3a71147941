"""Worker processes that leave Ctrl-C to the command they work for."""

import signal
import threading
import warnings
from collections.abc import Iterator
from concurrent.futures import Executor, ProcessPoolExecutor
from contextlib import contextmanager
from multiprocessing import active_children, get_context
from multiprocessing.process import BaseProcess

__all__ = ["worker_pool"]


@contextmanager
def worker_pool(count: int, *, show_warnings: bool = False) -> Iterator[Executor | None]:
    """Give `count` processes, or None for one, where the command itself does the work.

    Parameters
    ----------
    count : int
        Processes.
    show_warnings : bool
        Whether warnings of numerical libraries, worded for programmers, reach stderr.

    Notes
    -----
    A terminal sends Ctrl-C to every process of the command. Workers are started while it is
    ignored, which they inherit where the system knows inheritance, and ignore it themselves from
    then on; else each would print its own traceback.
    """
    if count == 1:
        yield None
        return
    others = active_children()
    pool = ProcessPoolExecutor(
        count,
        mp_context=get_context("spawn"),
        initializer=_prepare_worker,
        initargs=(show_warnings,),
    )
    try:
        _start_all(pool, count)
        yield pool
    except BaseException:
        _abandon(pool, [child for child in active_children() if child not in others])
        raise
    pool.shutdown()


def _start_all(pool: ProcessPoolExecutor, count: int) -> None:
    # only the main thread may set signals, and only it is interrupted
    main_thread = threading.current_thread() is threading.main_thread()
    before = signal.signal(signal.SIGINT, signal.SIG_IGN) if main_thread else None
    try:
        # a process is started per task until there are enough
        for _ in range(count):
            pool.submit(_nothing)
    finally:
        if main_thread:
            signal.signal(signal.SIGINT, before)


def _abandon(pool: ProcessPoolExecutor, workers: list[BaseProcess]) -> None:
    """End the workers in the middle of their frames; nobody waits for those any more."""
    # the pool's own thread may stumble over its lost workers, which is no news to anybody
    before, threading.excepthook = threading.excepthook, lambda _: None
    try:
        pool.shutdown(wait=False, cancel_futures=True)
        for worker in workers:
            worker.terminate()
        pool.shutdown(wait=True)
    finally:
        threading.excepthook = before


def _prepare_worker(show_warnings: bool) -> None:
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    if not show_warnings:
        warnings.simplefilter("ignore")


def _nothing() -> None:
    """Do nothing; must be importable by the worker."""
