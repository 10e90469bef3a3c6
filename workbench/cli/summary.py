"""The readable summary of an outcome: a line a method, then the decision in sentences."""

from rich.text import Text

from workbench import wording
from workbench.cli import terminal
from workbench.numbers import decimals, limits, proportion

CAUTION = (
    "Simulated conditions, not your data: for clinical, safety or release decisions follow local codes and ask a "
    "qualified person."
)


def print_outcome(outcome):
    """Print the summary of an Outcome to standard output."""
    console = terminal.console()
    for text in parts(outcome, console.width < terminal.NARROW):
        console.print(text)


def parts(outcome, narrow):
    """What the summary consists of, from top to bottom."""
    study, decision = outcome.study, outcome.decision
    yield Text(study.title, style="bold")
    yield Text(scope(outcome) + "\n")
    yield methods_table(study, decision.standings, narrow)
    if len(outcome.tables.branches):
        yield Text(
            "\nEnds of each rule where it errs most: how often they are taken there, and how often it then errs:"
        )
        yield branches_table(outcome, narrow)
    yield Text("\n" + decision.sentences[0], style="bold")
    yield from map(Text, decision.sentences[1:])
    yield from (Text(f"Not eligible: {name} {reason}.") for name, reason in decision.excluded.items())
    yield Text(f"\n{outcome.agreement.sentence}")
    yield Text(
        f"Plan {study.key}, digest {outcome.tables.digest[:16]}. Report and tables in {outcome.directory}."
    )
    yield Text(CAUTION)


def scope(outcome):
    """The sentence that says how much was simulated and how sure the intervals are."""
    number = wording.conditions(outcome.tables.rates["condition"].nunique())
    simulation, criteria = outcome.study.simulation, outcome.study.criteria
    return (
        f"{number}, {simulation.replications:,} replications each, level {outcome.study.levels[0]:g}; all intervals "
        f"hold together with confidence {criteria.confidence:g}."
    )


def methods_table(study, standings, narrow):
    """One line a method: farthest error, where, verdict, least detection, where."""
    undefined = {
        one.name: int(one.errors["undefined"].sum() + one.detections["undefined"].sum()) for one in standings
    }
    headings = [("method", "left"), *rate_columns("farthest error", narrow), ("size", "left")]
    headings += rate_columns("least detection", narrow)
    if any(undefined.values()):
        headings.append(("undefined", "right"))
    made = terminal.table(headings)
    for one in standings:
        name = one.name if one.answers else f"{one.name}\n  other question"
        error = None if one.errors.empty else wording.farthest(study, one.errors)
        size = "" if one.size is None else one.size.value
        cells = [name, *described(study, error, narrow), size, *described(study, one.least, narrow)]
        terminal.add(made, [*cells, f"{undefined[one.name]:,}"][: len(headings)])
    return made


def rate_columns(heading, narrow):
    """The columns that a rate takes: itself, its interval and its place, or all in one where space is short."""
    return (
        [(f"{heading}…", "left")] if narrow else [(heading, "right"), ("interval", "left"), ("at…", "left")]
    )


def described(study, row, narrow):
    """The cells of a rate: itself, its interval and its place; empty where there is no row."""
    if row is None:
        return [""] if narrow else ["", "", ""]
    digits = decimals(row["mcse"])
    none = row["rejections"] == 0
    cells = [
        f"0 of {row['replications']:,}" if none else proportion(row["rate"], digits),
        limits(row["lower"], row["upper"], digits + 1),
        wording.place(study, row),
    ]
    return ["\n".join(cells)] if narrow else cells


def branches_table(outcome, narrow):
    """For each end of each route: the largest error within it over the null conditions, and the share there."""
    headings = [
        ("rule", "left"),
        ("end…", "left"),
        ("taken", "right"),
        ("error within", "right"),
        ("at…", "left"),
    ]
    made = terminal.table(headings[:-1] if narrow else headings)
    branches, study = outcome.tables.branches, outcome.study
    here = branches[(branches["reading"] == "error") & (branches["alpha"] == study.levels[0])]
    for (route, end), rows in here[here["taken"] > 0].groupby(["route", "end"], sort=False):
        row = rows.loc[rows["rate_within"].idxmax()]
        digits = decimals(row["mcse_within"])
        within = f"{proportion(row['rate_within'], digits)} ± {row['mcse_within']:.{digits + 1}f}"
        place = wording.place(study, row)
        text = f"{end}: {row['method']}" + (f"\nat {place}" if narrow else "")
        terminal.add(made, [route, text, f"{100 * row['share']:.1f} %", within, place][: 4 if narrow else 5])
    return made
