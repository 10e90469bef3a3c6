"""Random streams, each started at an address; the only file that touches numpy.random."""

from enum import IntEnum

from numpy.random import SFC64, Generator, SeedSequence


class Lane(IntEnum):
    """What a stream is drawn for."""

    DATA = 0
    DISTURBANCE = 1
    METHOD = 2


def stream(seed, lane, chunk, *keys):
    """A generator that depends on its address alone: root seed, lane, chunk number, content keys (hex).

    SFC64 seeded by SeedSequence (O'Neill 2014 mixing as documented by NumPy). The bit generator is named
    because NumPy's default may change.
    """
    words = [int(key[at : at + 8], 16) for key in keys for at in (0, 8)]
    return Generator(SFC64(SeedSequence(entropy=seed, spawn_key=(int(lane), chunk, *words))))
