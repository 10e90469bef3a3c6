"""Estimate: how long a study will take and how much disk it needs, before it runs."""

import time
from dataclasses import replace

from workbench.chunk import REPLICATIONS, judged
from workbench.ledger import packed

BYTES_A_TALLY = 430
"""Stored bytes of a tally with one level, measured; each further level adds LEVEL_BYTES."""

LEVEL_BYTES = 220

TRIED = 3
"""Settings of which one chunk is tried out, spread over all of them."""


def seconds(plan, workers):
    """Seconds the whole work will take with so many workers, from single chunks that are done and thrown away."""
    tasks = plan.tasks()
    step = max(1, len(tasks) // TRIED)
    tried = tasks[::step][:TRIED]
    per_look = [timed(replace(task, chunks=(0,))) / looks(task) for task in tried]
    mean = sum(per_look) / len(per_look)
    return sum(mean * looks(task) * len(task.chunks) for task in tasks) / workers


def timed(task):
    """Seconds that a task takes."""
    start = time.perf_counter()
    for tally in judged(task):
        packed(tally)
    return time.perf_counter() - start


def looks(task):
    """A rough measure of the work in a chunk of a task."""
    return (task.setting.total + 20) * (1 + sum(len(want.methods) for want in task.wants)) * REPLICATIONS


def storage(plan):
    """Bytes of the finished ledger."""
    return plan.tallies * (BYTES_A_TALLY + LEVEL_BYTES * (len(plan.levels) - 1)) + 40_000
