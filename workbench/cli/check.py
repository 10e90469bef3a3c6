"""workbench check: what an experiment file means, before anything runs."""

import click
from rich.text import Text

from workbench import estimate, wording
from workbench.cli import options, terminal
from workbench.cores import default_workers
from workbench.grid import (
    answering,
    conditions,
    equal_as_recorded,
    holds_as_recorded,
    recorded_quantities,
)
from workbench.numbers import duration, storage
from workbench.plan import plan_of
from workbench.study import read, with_overrides

MOST_SHOWN = 200
"""Conditions listed on a terminal; --json lists all."""


@click.command("check")
@options.experiment
@click.option(
    "--workers", type=click.IntRange(1, 1024), metavar="N", help="Processes to estimate the time for."
)
@options.replications
@options.seed
@options.as_json
def command(file, workers, replications, seed, as_json):
    """Read FILE and show its conditions, true quantities and methods, and what a run will cost; writes nothing.

    Every mistake in the file is listed at once, with its place. Example: workbench check experiments/lap_shear.toml
    """
    study = with_overrides(read(file), seed, replications)
    found = conditions(study)
    plan = plan_of(study, found)
    cost = estimate.seconds(plan, workers or default_workers()), estimate.storage(plan)
    if as_json:
        return options.print_json(as_data(found, study.question.compare, cost))
    print_study(study, found, cost)


def as_data(found, compare, cost):
    """The conditions and the cost as plain data."""
    told = [
        {"condition": condition.number}
        | condition.levels
        | {
            "truth": condition.truth,
            "holds": holds_as_recorded(condition),
            "equal_as_recorded": equal_as_recorded(condition, compare),
            "groups": recorded_quantities(condition),
        }
        for condition in found
    ]
    return {"conditions": told, "seconds": cost[0], "bytes": cost[1]}


def print_study(study, found, cost):
    """Print what the study asks, its conditions, its methods and its cost."""
    console = terminal.console()
    question = study.question
    unit = f" in {question.unit}" if question.unit else ""
    console.print(Text(study.title, style="bold"))
    console.print(
        Text(
            f"Are {question.compare} of {question.outcome or 'the outcome'}{unit} equal in "
            f"{len(study.group_names)} groups ({several(study.group_names, ', ')})? Scale {question.scale}, "
            f"centre {question.centre:g}, level {', '.join(f'{level:g}' for level in study.levels)}.\n"
        )
    )
    console.print(conditions_table(study, found[:MOST_SHOWN]))
    if len(found) > MOST_SHOWN:
        console.print(Text(f"… and {len(found) - MOST_SHOWN:,} more; --json lists all of them."))
    unequal = [str(one.number) for one in found[:MOST_SHOWN] if not equal_as_recorded(one, question.compare)]
    if unequal:
        console.print(
            Text(
                f"\nNot equal as recorded: the null holds, but not after the disturbances, in {', '.join(unequal)}."
            )
        )
    console.print()
    console.print(methods_table(study, found))
    console.print()
    for criterion in study.criteria.fixed:
        low, high = criterion.band(study.levels[0])
        at = f" at {criterion.at}" if criterion.name == "power" else ""
        console.print(Text(f"{criterion.name}{at}: {criterion.reading} rate from {low:g} to {high:g}"))
    console.print(
        Text(
            f"{wording.conditions(len(found))}, {study.simulation.replications:,} replications each: about "
            f"{duration(cost[0])} and {storage(cost[1])} of disk. Plan {study.key}. Nothing was run."
        )
    )


def conditions_table(study, found):
    """A line for each condition: level names, truth, what holds as recorded, the true quantities of the groups."""
    varied = [factor for factor, levels in study.factors.levels.items() if len(levels) > 1]
    headings = [("", "right"), *((factor, "left") for factor in varied), ("truth", "left")]
    headings += [
        (f"{heading}…", "left") for heading in ("mean", "median", "sd", "skewness", "equal as recorded")
    ]
    made = terminal.table(headings)
    for condition in found:
        groups = recorded_quantities(condition)
        names = [condition.levels[factor] for factor in varied]
        told = [row(groups, quantity) for quantity in ("mean", "median", "sd", "skewness")]
        terminal.add(made, [condition.number, *names, condition.truth, *told, holding_shown(condition)])
    return made


def holding_shown(condition):
    """What is equal as recorded, in few words."""
    holds = holds_as_recorded(condition)
    return "everything" if "distributions" in holds else ", ".join(holds) or "nothing"


def row(groups, quantity):
    """One quantity of all groups; once where it is the same in all."""
    shown = ["none" if group[quantity] is None else tidy(group[quantity]) for group in groups]
    return shown[0] if len(set(shown)) == 1 else several(shown, " ")


def several(words, between):
    """Words side by side; of more than a dozen the first and the last ones."""
    words = list(words)
    return between.join(words if len(words) <= 12 else [*words[:5], "…", *words[-5:]])


def tidy(value):
    """A true quantity with four significant digits; what is zero up to rounding as 0."""
    return "0" if abs(value) < 1e-9 else f"{value:.4g}".replace("-", "−")


def methods_table(study, found):
    """A line for each method: what it tests, and whether that answers the question asked."""
    made = terminal.table([("method", "left"), ("tests", "left"), ("answers the question", "left")])
    answers = answering(study, found)
    for judge in study.judges:
        admitted = "no, but admitted" if judge.name in study.criteria.admit else "no"
        terminal.add(
            made,
            [judge.name, wording.plural(judge.method.hypothesis), "yes" if answers[judge.name] else admitted],
        )
    return made
