"""Measures: what is counted, with the intervals that go with it."""
