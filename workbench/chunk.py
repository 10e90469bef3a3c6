"""Chunk: a pure function from one task to its tallies."""

import numpy as np

from workbench import mechanism
from workbench.histogram import counts
from workbench.records import Tally, Task, Want, difference_key
from workbench.routes.procedure import Procedure, parts_of
from workbench.streams import Lane, stream

REPLICATIONS = 2000
"""Replications of a chunk; part of the format, and a multiple of 8 so that bits fill their bytes."""

BLOCK_VALUES = 131_072
"""Values drawn and judged at a time, so that they stay near the processor; part of the format."""


def judged(task):
    """The Tallies of all chunks of a task."""
    settle_allocator()
    with np.errstate(all="ignore"):
        return [tally for chunk in task.chunks for tally in judged_chunk(task, chunk)]


def judged_chunk(task, chunk):
    """The Tallies of one chunk: its data are drawn once, for all differences and methods that are wanted."""
    streams = Streams(task, chunk)
    judged_blocks = [judged_block(task, streams, replications) for replications in blocks(task.setting.total)]
    return [
        tally(task, chunk, *place, [outcomes[place] for outcomes in judged_blocks])
        for place in judged_blocks[0]
    ]


def judged_block(task, streams, replications):
    """{(difference, method): outcome} of the next replications of a chunk."""
    base = mechanism.draw(task.setting, streams.data, replications)
    found = {}
    for want in task.wants:
        disturbing, rngs = streams.disturbances[want.difference], streams.methods[want.difference]
        batch = mechanism.recorded(task.setting, base, want.difference, disturbing)
        for method in want.methods:
            found[want.difference, method] = outcome(method, batch, rngs)
    return found


def first_dataset(seed, setting, difference):
    """(N,) values of the first dataset of a condition's stream, as recorded."""
    want = Want(difference, ())
    streams = Streams(Task(seed, setting, (), (0,), (want,)), 0)
    with np.errstate(all="ignore"):
        base = mechanism.draw(setting, streams.data, blocks(setting.total)[0])
        batch = mechanism.recorded(setting, base, difference, streams.disturbances[difference])
    return np.array(batch.columns[:, 0])


def settle_allocator():
    """Take and give back one large piece of memory.

    The C library then keeps pieces up to this size for reuse; else it would return a block's arrays to the system
    after each block, and fetching them anew costs a fifth of the time.
    """
    np.empty(2**21)


class Streams:
    """The generators of a chunk; every difference starts its disturbances and methods anew."""

    def __init__(self, task, chunk):
        key = mechanism.stream_key(task.setting.key)
        self.data = stream(task.seed, Lane.DATA, chunk, key)
        self.disturbances, self.methods = {}, {}
        for want in task.wants:
            self.disturbances[want.difference] = [
                stream(task.seed, Lane.DISTURBANCE, chunk, key, part.key()) if part.draws else None
                for part in task.setting.disturbances
            ]
            drawing = {part for method in want.methods for part in parts_of(method) if part.draws}
            self.methods[want.difference] = {
                part.key(): stream(task.seed, Lane.METHOD, chunk, key, part.key()) for part in drawing
            }


def blocks(total):
    """Sizes of the blocks in which the replications of a chunk are drawn, for datasets of so many values."""
    number = min(REPLICATIONS, -(-REPLICATIONS * total // BLOCK_VALUES))
    edges = np.linspace(0, REPLICATIONS, number + 1).astype(int)
    return np.diff(edges).tolist()


def outcome(method, batch, rngs):
    """((R,) p-values, (R,) ends taken or None where the method has but one)."""
    p = method.judge(batch, rngs)
    return p, method.ends_taken(batch, rngs) if isinstance(method, Procedure) else None


def tally(task, chunk, difference, method, outcomes):
    """The Tally of one method under one difference, from the outcomes of all blocks."""
    p = outcomes[0][0] if len(outcomes) == 1 else np.concatenate([values for values, _ in outcomes])
    ends = [taken for _, taken in outcomes if taken is not None]
    return Tally(
        setting=task.setting.key,
        chunk=chunk,
        difference=difference_key(difference),
        method=method.key(),
        rejected={level: pack(p <= level) for level in task.levels},
        undefined=pack(np.isnan(p)),
        histogram=counts(p),
        ends=np.concatenate(ends).astype(np.uint8).tobytes() if ends else b"",
    )


def pack(flags):
    """Flags as bytes, eight to a byte, the first in the highest bit."""
    return np.packbits(flags).tobytes()
