"""Estimate: how long a study will take and how much disk it needs, before it runs."""

import time

import numpy as np

from workbench.chunk import REPLICATIONS, Streams, blocks, judged_block

BYTES_A_TALLY = 430
"""Stored bytes of a tally with one level, measured; each further level adds LEVEL_BYTES."""

LEVEL_BYTES = 220

TALLY_SECONDS = 1e-4
"""Seconds that counting, packing and storing one tally take, about."""

PATIENCE = 0.2
"""Seconds after which one look is enough."""

TRIED = 3
"""Settings of which some datasets are tried out, spread over all of them."""


def seconds(plan, workers):
    """Seconds the whole work will take with so many workers, from a few datasets that are judged and thrown away."""
    tasks = plan.tasks()
    tried = tasks[:: max(1, len(tasks) // TRIED)][:TRIED]
    rate = sum(chunk_seconds(task) / looks(task) for task in tried) / len(tried)
    return plan.tallies * TALLY_SECONDS / workers + sum(
        rate * looks(task) * len(task.chunks) / workers for task in tasks
    )


def chunk_seconds(task):
    """Seconds that judging a chunk of a task takes, from its first block; the second look finds warm caches."""
    size, took = blocks(task.setting.total)[0], []
    for chunk in (0, 1):
        streams = Streams(task, chunk)
        start = time.perf_counter()
        with np.errstate(all="ignore"):
            judged_block(task, streams, size)
        took.append(time.perf_counter() - start)
        if took[0] > PATIENCE:
            break
    return took[-1] * REPLICATIONS / size


def looks(task):
    """A rough measure of the work in a chunk of a task."""
    return (task.setting.total + 20) * (1 + sum(len(want.methods) for want in task.wants)) * REPLICATIONS


def storage(plan):
    """Bytes of the finished ledger."""
    return plan.tallies * (BYTES_A_TALLY + LEVEL_BYTES * (len(plan.levels) - 1)) + 40_000
