"""The readable summary of an outcome: a line a method, then the decision in sentences."""

from rich.text import Text

from workbench import wording
from workbench.cli import terminal
from workbench.numbers import decimals, limits, proportion


def print_outcome(outcome):
    """Print the summary of an Outcome to standard output."""
    study, console = outcome.study, terminal.console()
    replications = f"{study.simulation.replications:,} replications per condition"
    level = f"level {study.levels[0]:g}"
    console.print(Text(study.title, style="bold"))
    number = outcome.tables.rates["condition"].nunique()
    console.print(
        Text(
            f"{wording.conditions(number)}, {replications}, {level}; all intervals hold together with "
            f"confidence {study.criteria.confidence:g}.\n"
        )
    )
    console.print(methods_table(study, outcome.decision.standings))
    if len(outcome.tables.branches):
        console.print(
            Text(
                "\nHow often each rule came to its ends, and how often it then rejected (largest error first)"
            )
        )
        console.print(branches_table(outcome))
    console.print()
    for sentence in outcome.decision.sentences:
        console.print(Text(sentence, style="bold" if sentence is outcome.decision.sentences[0] else ""))
    for name, reason in outcome.decision.excluded.items():
        console.print(Text(f"Not eligible: {name} {reason}."))
    console.print(Text(f"\n{outcome.agreement.sentence}"))
    console.print(
        Text(f"Plan {study.key}, digest {outcome.tables.digest[:16]}. Tables in {outcome.directory}.")
    )
    console.print(
        Text(
            "Simulated conditions, not your data: for clinical, safety or release decisions follow local "
            "codes and ask a qualified person."
        )
    )


def methods_table(study, standings):
    """One line a method: farthest error, where, verdict, least detection, where."""
    made = terminal.table(
        [
            ("method", "left"),
            ("farthest error", "right"),
            ("at", "left"),
            ("size", "left"),
            ("least detection", "right"),
            ("at", "left"),
            ("undefined", "right"),
        ]
    )
    for one in standings:
        error = None if one.errors.empty else wording.farthest(study, one.errors)
        name = one.name if one.counted_in else f"{one.name} (other question)"
        undefined = int(one.errors["undefined"].sum() + one.detections["undefined"].sum())
        terminal.add(
            made,
            [
                name,
                *described(study, error),
                "" if one.size is None else one.size.value,
                *described(study, one.least),
                f"{undefined:,}",
            ],
        )
    return made


def described(study, row):
    """(rate with interval, place) of a row; empty where there is none."""
    if row is None:
        return "", ""
    digits = decimals(row["mcse"])
    ends = limits(row["lower"], row["upper"], digits + 1)
    return f"{proportion(row['rate'], digits)} ({ends})", wording.place(study, row)


def branches_table(outcome):
    """For each end of each route: the largest error within it over the null conditions, and the share there."""
    made = terminal.table(
        [("rule", "left"), ("end", "left"), ("taken", "right"), ("error within", "right"), ("at", "left")]
    )
    branches, study = outcome.tables.branches, outcome.study
    here = branches[
        (branches["reading"] == "error") & (branches["alpha"] == study.levels[0]) & (branches["taken"] > 0)
    ]
    for (route, end), rows in here.groupby(["route", "end"], sort=False):
        row = rows.loc[rows["rate_within"].idxmax()]
        digits = decimals(row["mcse_within"])
        within = f"{proportion(row['rate_within'], digits)} ± {row['mcse_within']:.{digits + 1}f}"
        taken = f"{100 * row['share']:.1f} %"
        terminal.add(made, [route, f"{end}: {row['method']}", taken, within, wording.place(study, row)])
    return made
