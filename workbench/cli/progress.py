"""Progress of a run on standard error: a line that is written over, or now and then one where that cannot be."""

import sys
import time

from workbench.numbers import duration

TERMINAL_EVERY, PLAIN_EVERY = 0.2, 30.0
"""Seconds between two reports on a terminal, and elsewhere."""


class Reporter:
    """Tells how much is done, how fast it goes and how long it will take."""

    def __init__(self, replications_per_tally, out=sys.stderr):
        self._out, self._terminal = out, out.isatty()
        self._replications = replications_per_tally
        self._start = self._first = self._last = None

    def __call__(self, state):
        """Take note of a Progress, and report it if it is time."""
        now = time.monotonic()
        if self._start is None:
            self._start, self._first, self._last = now, state.done, now
            if state.done and not state.finished:
                self.line(f"{state.done:,} of {state.total:,} tallies are there already.")
        every = TERMINAL_EVERY if self._terminal else PLAIN_EVERY
        if state.finished or now - self._last >= every:
            self._last = now
            self.report(state, now - self._start)

    def report(self, state, seconds):
        """Write one report."""
        done = state.done - self._first
        rate = done * self._replications / seconds if seconds > 0 else 0
        text = f"{100 * state.done / state.total:3.0f} %  {rate:,.0f} tests a second"
        if state.finished:
            text = f"{text}, {duration(seconds)} in all" if done else f"{100:3.0f} %  nothing was left to do"
        elif done:
            text += f", about {duration((state.total - state.done) * seconds / done)} left"
        if self._terminal:
            self._out.write(f"\r\x1b[K{text}" + ("\n" if state.finished else ""))
            self._out.flush()
        else:
            self.line(text)

    def line(self, text):
        """Write a line of its own."""
        self._out.write(text + "\n")
        self._out.flush()


def silent(state):
    """Report nothing."""
