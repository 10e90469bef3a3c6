"""Wording: the sentences of a decision, made from its rows."""

from workbench.numbers import NO_BREAK, decimals, limits, listed, percent


def exclusion(study, standing):
    """Why a method is not eligible, as one sentence."""
    if not standing.counted_in:
        return (
            f"tests {plural(standing.hypothesis)}, which do not hold wherever {study.question.compare} are equal: it "
            "answers another question than the one asked, and criteria.admit does not let it in"
        )
    if standing.size is None:
        return "no condition has the null hypothesis true, so its error rate was not judged"
    row = farthest(study, standing.errors)
    low, high = study.criteria.size.band(study.levels[0])
    side = "more often than" if row["rate"] > high else "less often than"
    limit = high if row["rate"] > high else low
    return f"errs in {rate_with_limits(row)} at {place(study, row)}, {side} the limit of {limit:g} allows"


def plural(hypothesis):
    """A hypothesis as a noun in a sentence."""
    return "different things at its ends" if hypothesis == "mixed" else f"equal {hypothesis}"


def decision(study, status, chosen, standings, open_rows, rivalry):
    """The sentences of a decision: what, why, what would change it."""
    if status == "undecided":
        return undecided_sentences(study, standings, open_rows, rivalry)
    told = {"chosen": chosen_sentences, "tie": tie_sentences, "none eligible": none_sentences}
    return told[status](study, chosen, standings)


def chosen_sentences(study, chosen, standings):
    """Sentences for one chosen method."""
    one = chosen[0]
    return [
        f"Use the {one.label}.",
        *reasons(study, one),
        *rivals(study, one, standings),
        *power_shortfall(study, chosen),
    ]


def tie_sentences(study, chosen, standings):
    """Sentences for methods that cannot be told apart by the criteria."""
    sentences = [f"The {listed([one.label for one in chosen])} tie."]
    if study.criteria.power is None:
        sentences.append(
            "The file names no difference that must be found, so the eligible methods are not ranked."
        )
    elif not chosen[0].detections.empty:
        sentences.append(
            f"Their least detection differs by no more than the margin of {study.criteria.tie:g} fixed beforehand."
        )
    for one in chosen:
        sentences += reasons(study, one)
    return [*sentences, *power_shortfall(study, chosen)]


def none_sentences(study, chosen, standings):
    """Sentences where every method is shown to break its error rate, or answers another question."""
    sentences = ["No method is eligible."]
    judged = [one for one in standings if one.counted_in and not one.errors.empty]
    if judged:
        nearest = min(judged, key=lambda one: excess(study, farthest(study, one.errors)))
        row = farthest(study, nearest.errors)
        sentences.append(
            f"The nearest is the {nearest.label}: it errs in {rate_with_limits(row)} at {place(study, row)}."
        )
        sentences.append(
            "Larger or more even sizes, or further candidates, may help; the limits were fixed beforehand."
        )
    else:
        sentences.append("Every method answers another question than the one asked; see criteria.admit.")
    return sentences


def undecided_sentences(study, standings, open_rows, rivalry):
    """Sentences where the intervals leave the choice open, with what would settle it."""
    sentences = ["Undecided."]
    if any(one.counted_in and one.size is None for one in standings):
        sentences.append(
            "No condition has the null hypothesis true, so no error rate was judged; add a difference of none."
        )
        return sentences
    if open_rows:
        row, limit, hardest = open_rows[0]
        name = next(one.label for one in standings if one.name == row["method"])
        sentences.append(
            f"{len(open_rows)} {'rows are' if len(open_rows) > 1 else 'row is'} open; the hardest is the {name} at "
            f"{place(study, row)}: {rate_with_limits(row)} against the limit of {limit:g}."
        )
        sentences.append(settling(hardest, row["replications"]))
    if rivalry:
        sentences += contest(study, rivalry[0])
    return sentences


def contest(study, hardest):
    """Sentences on two methods that are neither apart nor tied."""
    ends = f"{100 * hardest.low:.1f} to {100 * hardest.high:.1f}".replace("-", "−")
    sentences = [
        f"The {hardest.lead} and the {hardest.rival} are neither apart nor tied: the difference of their least "
        f"detections lies between {ends} percentage points, against a margin of {study.criteria.tie:g}."
    ]
    if hardest.total is None:
        return [
            *sentences,
            "More replications will hardly settle it; a wider criteria.tie fixed beforehand would.",
        ]
    return [*sentences, f"About {thousands(hardest.total)} replications in all would probably settle it."]


def thousands(number):
    """A number rounded up to thousands, as people read it."""
    return f"{-(-number // 1000) * 1000:,}"


def settling(advice, done):
    """What would settle an open row."""
    if advice.more is None:
        return (
            f"The rate lies within {advice.within:.4f} of the limit; more replications will hardly settle it. "
            "Change the sizes or the candidates instead."
        )
    return (
        f"About {thousands(done + advice.more)} replications in all would probably settle it (chance 0.8). They "
        "extend the work that is there, but looking again after an open result makes the stated confidence too high."
    )


def reasons(study, one):
    """Why a method is eligible and what it detects."""
    row = farthest(study, one.errors)
    low, high = study.criteria.size.band(study.levels[0])
    found = [
        f"Over {conditions(len(one.errors))} with equal {study.question.compare}, the {one.label} erred in between "
        f"{percent(one.errors['rate'].min(), row['mcse'])} and {percent(one.errors['rate'].max(), row['mcse'])} of "
        f"studies, within the limits {low:g} to {high:g}; farthest at {place(study, row)}."
    ]
    if not one.answers:
        found.append(
            f"It tests {plural(one.hypothesis)}, not {study.question.compare}: the file admits it although it answers "
            "another question than the one asked."
        )
    if one.least is not None and study.criteria.power is not None:
        found.append(
            f"It finds the difference {study.criteria.power.at} in at least {rate_with_limits(one.least)}, "
            f"least at {place(study, one.least)}."
        )
    return found


def rivals(study, one, standings):
    """How a chosen method compares with the other eligible ones."""
    if one.least is None or study.criteria.power is None:
        return []
    others = [
        f"{other.label} {percent(other.least['rate'], other.least['mcse'])}"
        for other in standings
        if other is not one and other.eligible
    ]
    return [f"Least detection of the other eligible methods: {listed(others)}."] if others else []


def power_shortfall(study, chosen):
    """A sentence where the power asked for is not reached: sizes must change, not the test."""
    power = study.criteria.power
    if power is None or chosen[0].power is None or any(one.power.value == "meets" for one in chosen):
        return []
    least = f"the {power.least:g} asked for"
    if all(one.power.value == "fails" for one in chosen):
        return [f"No choice of test reaches {least} everywhere: larger sizes are needed, not another test."]
    return [f"Whether {least} is reached everywhere is not shown yet."]


def rate_with_limits(row):
    """A rate as a percentage of studies with its interval."""
    digits = max(0, decimals(row["mcse"]) - 1)
    ends = limits(100 * row["lower"], 100 * row["upper"], digits)
    return f"{percent(row['rate'], row['mcse'])} of studies ({ends}{NO_BREAK}%)"


def conditions(number):
    """A number of conditions in words."""
    return "1 condition" if number == 1 else f"{number:,} conditions"


def place(study, row):
    """Where a row stands, by the names of the levels of the factors that vary."""
    varied = [factor for factor, levels in study.factors.levels.items() if len(levels) > 1]
    names = [row[factor] for factor in varied if factor != "difference"]
    return ", ".join(names) if names else f"condition {row['condition']}"


def excess(study, row):
    """How far a rate is from the level, as a share of the way to the limit on its side; above 1 is outside."""
    low, high = study.criteria.size.band(study.levels[0])
    level = min(max(row["alpha"], low), high)
    above = (row["rate"] - level) / max(high - level, 1e-12)
    below = (level - row["rate"]) / max(level - low, 1e-12) if low > 0 else 0.0
    return max(above, below)


def farthest(study, errors):
    """The row of errors that is farthest from the level, seen against the limits."""
    return max((row for _, row in errors.iterrows()), key=lambda row: excess(study, row))
