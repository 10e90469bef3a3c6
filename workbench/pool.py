"""Pool: tasks in parallel, what they yield in whatever order it is finished."""

import os
import signal
import threading
import time
import warnings
from collections import deque
from dataclasses import replace
from itertools import count

from joblib import Parallel, delayed, parallel_config
from joblib.externals.loky.process_executor import TerminatedWorkerError

from workbench.chunk import judged
from workbench.errors import WorkError
from workbench.ledger import packed

BUNDLE_SECONDS = 0.25
"""How long a bundle of chunks should keep a worker busy; a matter of speed that leaves no trace in results."""

NUMBERS = count()
"""Serial numbers of bundles, to tell apart those in the air."""

ATTEMPTS = 3
"""How often in a row a pool may break without any bundle finished before the run gives up."""


def rows_of(tasks, workers):
    """Yield (bundle, its ledger Rows) for all tasks, cut into bundles of chunks, over so many processes."""
    bundles = Bundles(tasks)
    if workers == 1:
        while bundle := bundles.next():
            yield bundle, bundles.timed(bundle, *work(bundle))
    else:
        yield from in_parallel(bundles, workers)


def work(bundle):
    """(Rows of a bundle, seconds it took)."""
    start = time.perf_counter()
    rows = [packed(tally) for tally in judged(bundle)]
    return rows, time.perf_counter() - start


class Bundles:
    """Tasks cut into bundles of chunks that take about equally long; learns how long they take."""

    def __init__(self, tasks):
        self._tasks = deque(tasks)
        self._seconds_per_value = 3e-8

    def next(self):
        """The next bundle; None where nothing is left."""
        if not self._tasks:
            return None
        task = self._tasks.popleft()
        number = max(1, int(BUNDLE_SECONDS / (self._seconds_per_value * values_handled(task))))
        if number < len(task.chunks):
            self._tasks.appendleft(replace(task, chunks=task.chunks[number:]))
        return replace(task, chunks=task.chunks[:number])

    def back(self, bundles):
        """Take bundles back that were not finished."""
        self._tasks.extendleft(bundles)

    def timed(self, bundle, rows, seconds):
        """The rows; the time their bundle took is remembered."""
        found = seconds / (values_handled(bundle) * len(bundle.chunks))
        self._seconds_per_value += 0.3 * (found - self._seconds_per_value)
        return rows


def values_handled(task):
    """A rough measure of the work in a chunk: values drawn and looked at."""
    looks = sum(len(want.methods) for want in task.wants)
    return 2000 * (task.setting.total + 10) * (1 + looks)


def in_parallel(bundles, workers):
    """Like rows_of with worker processes; a pool that breaks is made anew and takes up what was in the air."""
    failures = 0
    in_air = {}
    while True:
        finished = handed_out(bundles, workers, in_air)
        try:
            for number, rows, seconds in finished:
                failures = 0
                bundle = in_air.pop(number)
                yield bundle, bundles.timed(bundle, rows, seconds)
            return
        except TerminatedWorkerError as error:
            failures += 1
            if failures >= ATTEMPTS:
                raise WorkError(
                    f"the worker processes broke down {failures} times in a row ({str(error).split('.')[0]}); what "
                    "was finished is kept, and the same command goes on from there; fewer --workers need less memory"
                ) from None
            bundles.back(in_air.values())
            in_air.clear()
        finally:
            with warnings.catch_warnings():
                # joblib warns of work that is given up, as it is here on purpose.
                warnings.simplefilter("ignore", UserWarning)
                finished.close()


def handed_out(bundles, workers, in_air):
    """Generator of (bundle number, Rows, seconds) in the order of arrival; in_air holds what is being done."""

    def numbered():
        while bundle := bundles.next():
            number = next(NUMBERS)
            in_air[number] = bundle
            yield delayed(numbered_work)(number, bundle)

    with parallel_config("loky", inner_max_num_threads=1, initializer=settle_worker, initargs=(os.getpid(),)):
        parallel = Parallel(
            workers, return_as="generator_unordered", batch_size=1, pre_dispatch=2 * workers, max_nbytes=None
        )
        return parallel(numbered())


def numbered_work(number, bundle):
    """(number of a bundle, its Rows, seconds it took)."""
    return number, *work(bundle)


def settle_worker(parent):
    """Set a worker up: leave Ctrl-C to the parent, and end when the parent is gone, however it went."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    threading.Thread(target=follow, args=(parent,), daemon=True).start()


def follow(parent):
    """End this process as soon as its parent is no longer the given one."""
    while os.getppid() == parent:
        time.sleep(0.2)
    os._exit(1)
