"""Plan: every chunk of a study, less what a ledger holds."""

from dataclasses import dataclass

from workbench.chunk import REPLICATIONS
from workbench.records import Task, Want, difference_key


@dataclass(frozen=True)
class Plan:
    """The work of a study: for each setting the differences in which every method is tried."""

    seed: int
    replications: int
    levels: tuple
    methods: tuple
    differences: dict
    """Setting to its differences."""

    @property
    def chunks(self):
        """Chunks of a setting."""
        return -(-self.replications // REPLICATIONS)

    @property
    def tallies(self):
        """How many tallies the whole work makes."""
        return self.chunks * len(self.methods) * sum(len(found) for found in self.differences.values())

    def tasks(self, ledger=None):
        """Every Task that is still to be done: the chunks of a setting that lack the same things."""
        return [task for setting in self.differences for task in self.tasks_of(setting, ledger)]

    def tasks_of(self, setting, ledger):
        """The Tasks of one setting."""
        lacking = {chunk: {} for chunk in range(self.chunks)}
        for difference in self.differences[setting]:
            for method in self.methods:
                for chunk in set(lacking) - self.done(ledger, setting, difference, method):
                    lacking[chunk].setdefault(difference, []).append(method)
        alike = {}
        for chunk, wants in lacking.items():
            if wants:
                signature = tuple(Want(difference, tuple(methods)) for difference, methods in wants.items())
                alike.setdefault(signature, []).append(chunk)
        return [
            Task(self.seed, setting, self.levels, tuple(chunks), wants) for wants, chunks in alike.items()
        ]

    def done(self, ledger, setting, difference, method):
        """The chunks whose tally of a method is in the ledger at every level."""
        if ledger is None:
            return set()
        place = (setting.key, difference_key(difference), method.key())
        return set.intersection(*(ledger.chunks(*place, level) for level in self.levels))


def plan_of(study, conditions):
    """The Plan of a study with the given conditions."""
    differences = {}
    for condition in conditions:
        found = differences.setdefault(condition.setting, [])
        if condition.difference not in found:
            found.append(condition.difference)
    return Plan(
        seed=study.simulation.seed,
        replications=study.simulation.replications,
        levels=study.levels,
        methods=tuple(dict.fromkeys(judge.method for judge in study.judges)),
        differences={setting: tuple(found) for setting, found in differences.items()},
    )


def tally_count(task):
    """How many tallies a task makes."""
    return len(task.chunks) * sum(len(want.methods) for want in task.wants)
