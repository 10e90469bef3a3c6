"""What titles and the first page claim: each rule with rates set by hand, and cases where it must say otherwise."""

import ast
from dataclasses import replace
from pathlib import Path
from types import SimpleNamespace

import pytest
from jinja2 import nodes

from workbench import report, run, words
from workbench.criteria import CRITERIA
from workbench.decide import Status
from workbench.grid import conditions
from workbench.report import calibration, decision, evidence, pairs, populations, power, rates, regret
from workbench.report.book import Book
from workbench.sensitivity import alternatives
from workbench.study import parse
from workbench.texts import bare

KEEPS, BREAKS, OPEN = {"none": 0.05}, {"none": (0.05, 0.09, 0.05)}, {"none": (0.05, 0.073, 0.05)}
"""Rates of a method that keeps its error rate at every spread, breaks it at one, and may break it at one."""

TOO_HIGH, TOO_LOW = {"none": 0.2}, {"none": 0.01}

METHODS = ("welch_f", "brown_forsythe_f", "classical_f", "kruskal_wallis", "sop")


def finds(*full, errs=KEEPS):
    """A method that finds the full difference so often, or so often at each spread; it keeps its error rate."""
    return errs | {"full": full if len(full) > 1 else full[0]}


def test_every_finding_is_claimed_by_a_rule_and_every_claim_is_there():
    text = (Path(words.__file__).parent / "en" / "findings.jinja").read_text(encoding="utf-8")
    parsed = words.environment().parse(text)
    macros = {macro.name for macro in parsed.find_all(nodes.Macro)}
    nouns = macros & {call.node.name for call in parsed.find_all(nodes.Call) if hasattr(call.node, "name")}
    assert nouns == {"conditions", "the", "least_of"}
    assert claimed() == macros - nouns


def claimed():
    """Names that the code of reports takes from the findings, as in findings.gives_up or book.findings.gives_up."""
    texts = [file.read_text(encoding="utf-8") for file in Path(report.__file__).parent.glob("*.py")]
    found = [node for text in texts for node in ast.walk(ast.parse(text)) if isinstance(node, ast.Attribute)]
    return {node.attr for node in found if ast.unparse(node.value).split(".")[-1] == "findings"}


@pytest.mark.parametrize(
    ("letters", "title"),
    [
        ("k", "The one method stays …."),
        ("kk", "Both methods stay …."),
        ("kkk", "All 3 methods stay …."),
        ("kfffl", "Only the Welch F stays …."),
        ("kfffo", "The Welch F stays …; of 1 other it is not settled."),
        ("kfofo", "The Welch F stays …; of 2 others it is not settled."),
        ("kfffk", "The Welch F and the rule sop stay …."),
        ("kfkok", "The Welch F, the classical F and the rule sop stay …; of 1 other it is not settled."),
        ("kkfkk", "4 of 5 methods stay …."),
        ("flf", "No method stays …."),
        ("offff", "No method is shown to stay …; of the Welch F it is not settled."),
        ("offfo", "No method is shown to stay …; of the Welch F and the rule sop it is not settled."),
        ("ofooo", "No method is shown to stay …; of 4 of them it is not settled."),
    ],
)
def test_the_map_tells_which_methods_stay_within_the_limits_everywhere(told, letters, title):
    """A letter for each method of the file: keeps its error rate, fails, errs too little (l), is open."""
    kinds = {"k": KEEPS, "f": BREAKS, "l": TOO_LOW, "o": OPEN}
    book = told(**{name: kinds[letter] for name, letter in zip(METHODS, letters, strict=False)})
    assert bare(rates.map_title(book)).replace("within 0.025 to 0.075 everywhere", "…") == title


def test_without_equal_groups_nothing_is_said_of_error_rates(told):
    book = told(welch_f={}, differences=("half", "full", "double"))
    assert rates.error_map(book) is None
    assert calibration.calibration(book) is None


def other_levels(book):
    """The title over the calibration curves."""
    return bare(calibration.title(book, calibration.Curves(book)))


def test_a_method_within_the_limits_at_other_levels_would_hold_there(told):
    assert other_levels(told(welch_f=KEEPS)) == "The Welch F would hold at a level of 0.01 and 0.1 too."


@pytest.mark.parametrize(
    ("ratios", "level", "ratio", "rest"),
    [
        ({0.01: (1, 2.1, 1)}, "0.01", "2.1", "rising"),
        ({0.01: (1, 2.1, 3.2)}, "0.01", "3.2", "falling; it is outside the limits in 2 conditions in all"),
        ({0.01: 1.5, 0.1: (0.2, 1, 1)}, "0.1", "0.2", "even"),
    ],
)
def test_the_first_level_that_breaks_a_method_is_told_with_its_worst_place(told, ratios, level, ratio, rest):
    start = f"At a level of {level} the Welch F would not hold: it errs {ratio} times as often as the level says in"
    assert other_levels(told(welch_f=KEEPS, ratios=ratios)) == f"{start} {rest}."


def test_a_rate_at_a_limit_leaves_another_level_open(told):
    start, end = "Whether the Welch F would hold at a level of", "is not settled."
    assert other_levels(told(welch_f=KEEPS, ratios={0.1: (1, 1.5, 1)})) == f"{start} 0.1 {end}"
    assert other_levels(told(welch_f=KEEPS, ratios={0.01: 0.5, 0.1: 1.5})) == f"{start} 0.01 and 0.1 {end}"


def test_limits_given_as_numbers_go_with_the_level(told):
    """A limit of 0.075 for a level of 0.05 is one of 0.015 for 0.01, and none from below stays none."""
    size = CRITERIA.make("size", {"lower": 0.0, "upper": 0.075})
    found = other_levels(told(welch_f=KEEPS, ratios={0.01: (0.1, 2.1, 1)}, criteria={"size": size}))
    assert found.startswith("At a level of 0.01 the Welch F would not hold: it errs 2.1 times")
    assert found.endswith("in rising.")


def test_nothing_is_claimed_of_other_levels_for_a_method_that_fails_or_is_often_undefined(told):
    plain = "Error rates at other levels."
    assert other_levels(told(welch_f=BREAKS)) == plain
    assert other_levels(told(welch_f=KEEPS, undefined=11)) == plain
    assert other_levels(told(welch_f=KEEPS, undefined=10)) != plain


@pytest.mark.parametrize(
    ("full", "rest"),
    [
        ((0.9, 0.85, 0.82), "0.82 at least; 0.8 was asked for"),
        ((0.9, 0.7, 0.75), "0.70 at least, and in 2 of 3 conditions less often than the 0.8 asked for"),
        ((0.7, 0.6, 0.75), "0.60 at least, and everywhere less often than the 0.8 asked for"),
        ((0.9, 0.802, 0.9), "0.80 at least; whether the 0.8 asked for is reached everywhere is not settled"),
    ],
)
def test_the_least_detection_is_held_against_what_was_asked_for(told, full, rest):
    title = rates.detection_title(told(welch_f=finds(*full), sop=BREAKS))
    assert title == f"The Welch F finds the difference in {rest}."


def test_one_condition_has_no_least_detection_but_the_one(told):
    title = rates.detection_title(told(welch_f=finds(0.6), spreads=("even",)))
    assert title == "The Welch F finds the difference in 0.60, less often than the 0.8 asked for."


def test_without_a_criterion_the_least_detection_of_any_difference_is_told_with_its_place(told):
    book = told(welch_f=KEEPS | {"half": (0.3, 0.2, 0.3)}, criteria={"power": None})
    title = bare(rates.detection_title(book))
    assert title == "The Welch F finds a difference in 0.20 at least, in rising, half."


def series(outcome, *differences, scale="additive"):
    """[(name, size)] of the series that is found among the differences none, d1, d2 …; None where there is none."""
    lines = [f"d{number} = {list(row)}" for number, row in enumerate(differences, 1)]
    lines.append("none = [0, 0, 0]" if scale == "additive" else "none = [1, 1, 1]")
    text = outcome.study.text.replace('unit = "mm"', f'scale = "{scale}"').replace('at = "full"', 'at = "d1"')
    head, rest = text.split("[vary.difference]\n")
    text = "\n".join([head, "[vary.difference]", *lines, "[methods]" + rest.split("[methods]")[1]])
    found = power.series_of(SimpleNamespace(study=parse(text, "x.toml")))
    return found and [(name, round(size, 9)) for name, size in found.items()]


def test_differences_in_one_direction_are_a_series_by_their_size(small_outcome):
    found = series(small_outcome, [0, 2, 4], [0, 0.5, 1], [0, 1, 2])
    assert found == [("none", 0), ("d2", 1), ("d3", 2), ("d1", 4)]


def test_what_all_groups_share_is_no_part_of_a_direction(small_outcome):
    assert series(small_outcome, [5, 6, 7], [-2, 0, 2]) == [("none", 0), ("d1", 2), ("d2", 4)]


def test_effects_that_multiply_are_a_series_by_their_ratios(small_outcome):
    found = series(small_outcome, [1, 2, 4], [1, 4, 16], scale="multiplicative")
    assert found == [("none", 1), ("d1", 4), ("d2", 16)]
    assert series(small_outcome, [1, 2, 4], [1, 4, 16]) is None
    assert series(small_outcome, [1, 2, 3], [1, 3, 5], scale="multiplicative") is None


def test_too_few_or_other_or_opposite_directions_are_no_series(small_outcome):
    assert series(small_outcome, [0, 1, 2]) is None
    assert series(small_outcome, [0, 0, 1], [0, 1, 0]) is None
    assert series(small_outcome, [0, 1, 2], [0, -1, -2]) is None
    assert series(small_outcome, [0, 1, 2], [0, 2, 4.1]) is None


def test_the_longest_of_several_directions_is_the_series(small_outcome):
    found = series(small_outcome, [0, 0, 1], [0, 0, 2], [0, 1, 2], [0, 2, 4], [0, 3, 6])
    assert found == [("none", 0), ("d3", 2), ("d4", 4), ("d5", 6)]


@pytest.mark.parametrize("differences", [("half", "full", "double"), ("none", "full")])
def test_without_a_series_there_are_no_power_curves(told, differences):
    assert power.power(told(welch_f=KEEPS, differences=differences)) is None


@pytest.mark.parametrize(
    ("half", "full", "size"), [(0.81, 0.85, 1), ((0.9, 0.8, 0.9), 0.85, 2), (0.3, (0.9, 0.7, 0.9), 4)]
)
def test_the_smallest_difference_that_is_shown_to_be_found_everywhere_is_told(told, half, full, size):
    title = power.power(told(welch_f=KEEPS | {"half": half, "full": full})).title
    assert title.startswith(f"From a difference of {size}\u00a0mm on the Welch F finds it at least 0.8 of")


def test_a_difference_that_is_missed_at_one_spread_is_not_found_everywhere(told):
    title = power.power(told(welch_f=KEEPS | {"full": 0.7, "double": (0.9, 0.9, 0.7)})).title
    assert title == "No difference examined is found by the Welch F at least 0.8 of the time everywhere."


def test_without_a_criterion_power_curves_claim_nothing(told):
    book = told(welch_f=KEEPS, criteria={"power": None})
    assert power.power(book).title == "Detection by the size of the difference."


@pytest.mark.parametrize(
    ("lead", "rival", "rest"),
    [
        ((0.9, 0.82, 0.85), (0.8, 0.84, 0.81), "more often in 2 of 3 conditions, less often in 1"),
        (
            (0.9, 0.82, 0.85),
            (0.8, 0.84, 0.85),
            "more often in 1 of 3 conditions, less often in 1, and in 1 the two are not told apart",
        ),
    ],
)
def test_a_rival_that_is_better_here_and_worse_there_is_told_with_counts(told, lead, rival, rest):
    title = bare(pairs.pairs(told(welch_f=finds(*lead), sop=finds(*rival))).title)
    assert title == f"Against the rule sop the Welch F finds the difference {rest}."


def test_a_rival_that_is_better_or_worse_or_not_told_apart_everywhere_is_told_without(told):
    worse, same = finds(0.8, 0.7, 0.6), finds(0.853, 0.847, 0.85)
    better = finds(0.9, errs=OPEN)
    found = [bare(pairs.pairs(told(welch_f=KEEPS, sop=rival)).title) for rival in (worse, better, same)]
    assert found == [
        "The Welch F finds the difference more often than the rule sop in every condition.",
        "The Welch F finds the difference less often than the rule sop in every condition.",
        "Nowhere are the Welch F and the rule sop told apart.",
    ]


def test_the_rival_told_of_keeps_its_error_rate_and_has_the_largest_least_detection(told):
    others = {"classical_f": finds(0.99, errs=BREAKS), "sop": finds(0.95, 0.6, 0.95)}
    title = pairs.pairs(told(welch_f=finds(0.9), brown_forsythe_f=finds(0.8, 0.7, 0.7), **others)).title
    assert title.startswith("The Welch F finds the difference more often than the Brown–Forsythe F*")


def test_without_a_rival_that_keeps_its_error_rate_nothing_is_an_argument(told):
    start = "No other method is eligible; what the Welch F gains"
    assert pairs.pairs(told(welch_f=KEEPS, sop=finds(0.99, errs=BREAKS))).title.startswith(start)
    assert pairs.pairs(told(welch_f=BREAKS, sop=TOO_HIGH)).title == "Detections compared on the same data."


def test_without_a_rival_or_a_difference_nothing_is_compared(told):
    alone = told(welch_f=KEEPS)
    equal = told(welch_f=KEEPS, sop=KEEPS, differences=("none",), criteria={"power": None})
    assert [part(book) for part in (pairs.pairs, regret.regret) for book in (alone, equal)] == [None] * 4


FIELD = {
    "welch_f": finds(0.9, 0.7, 0.8),
    "brown_forsythe_f": finds(0.85, 0.8, 0.82),
    "classical_f": finds(0.99, 0.99, 0.75, errs=BREAKS),
    "sop": finds(0.95, 0.6, 0.88, errs=OPEN),
}
"""Two that keep their error rate, one that fails and finds most at two spreads, one that may fail."""


@pytest.mark.parametrize(
    ("method", "values", "rivals", "trusted"),
    [
        ("welch_f", [0.05, 0.1, 0.08], ["sop", "brown_forsythe_f", "sop"], [True, True, True]),
        ("brown_forsythe_f", [0.1, 0, 0.06], ["sop", "", "sop"], [True, True, True]),
        ("classical_f", [0, 0, 0.13], ["", "", "sop"], [True, False, True]),
        ("sop", [0, 0.2, 0], ["", "brown_forsythe_f", ""], [True, False, True]),
    ],
)
def test_what_is_given_up_is_held_against_the_best_not_shown_to_fail(told, method, values, rivals, trusted):
    book = told(**FIELD)
    found = regret.given_up(book, book.standings[method])
    assert [one.value for one in found] == pytest.approx(values)
    assert [(one.rival, one.trusted) for one in found] == list(zip(rivals, trusted, strict=True))


def test_the_most_that_is_given_up_is_told_with_its_place(told):
    title = bare(regret.regret(told(**FIELD)).title)
    assert title == "The Brown–Forsythe F* gives up 10.0 percentage points of detection at most, in even."


def test_a_method_that_is_best_everywhere_gives_up_nothing(told):
    title = regret.regret(told(welch_f=finds(0.9), sop=finds(0.9, 0.8, 0.8))).title
    assert title == "Nowhere does another eligible method find more than the Welch F."


def test_a_method_that_fails_is_no_rival_to_give_something_up_against(told):
    assert regret.regret(told(welch_f=finds(0.6), sop=finds(0.99, errs=BREAKS))) is None


@pytest.mark.parametrize(
    ("lead", "rival", "start"),
    [
        (
            finds(0.9, 0.85, 0.85),
            finds(0.95, 0.97, 0.8),
            "The Welch F gives up 12.0 percentage points of detection at most, in rising, against the rule sop.",
        ),
        (KEEPS, finds(0.8), "Nothing in detection: no other eligible method finds"),
        (KEEPS, BREAKS, "There is no rival to lose detection to: only the Welch F is eligible"),
        (BREAKS, BREAKS, "No method is eligible, so there is no choice that could"),
        (OPEN, BREAKS, "Which method may be chosen is not settled yet, and so neither is what the"),
    ],
)
def test_what_the_choice_costs_is_said_in_detection(told, lead, rival, start):
    (found,) = decision.costs(told(welch_f=lead, sop=rival))
    assert bare(found).startswith(start)


def test_a_method_that_answers_another_question_is_no_rival(told):
    book = told(welch_f=KEEPS, kruskal_wallis=finds(0.99), sop=BREAKS)
    assert decision.costs(book)[0].endswith("only the Welch F is eligible.")
    assert regret.regret(book) is None


def test_where_the_choice_is_shown_to_find_too_little_its_misses_are_told(told):
    _, found = decision.costs(told(welch_f=finds(0.9, 0.6, 0.7), sop=BREAKS))
    assert bare(found) == "At worst, in rising, no more than 60.0\u00a0% of studies find the difference full."
    assert len(decision.costs(told(welch_f=finds(0.9, 0.802, 0.9), sop=BREAKS))) == 1


def changes(book):
    """The sentences on what would change a decision."""
    return [bare(sentence) for sentence in decision.changes(book)]


@pytest.mark.parametrize(
    ("second", "third", "start", "rate"),
    [
        (0.6, (0.95, 0.6, 0.7), "Were spread known to be even, the rule sop would be the choice", "95.0"),
        (0.6, (0.9, 0.6, 0.9), "Could spread rising be ruled out, the rule sop would be the choice", "90.0"),
        (
            (0.9, 0.6, 0.6),
            (0.9, 0.6, 0.6),
            "Were spread known to be even, the classical F and the rule sop would tie",
            "90.0",
        ),
    ],
)
def test_another_choice_is_told_with_the_level_that_makes_it_find_more(told, second, third, start, rate):
    book = told(welch_f=finds(0.8), classical_f=KEEPS | {"full": second}, sop=finds(*third))
    rest = f"least detection {rate}\u00a0% there, against 80.0\u00a0% with the Welch F."
    assert changes(book) == [f"{start}: {rest}"]


def test_where_nothing_is_chosen_a_part_that_leads_to_a_choice_is_told(told):
    start = "Could spread rising be ruled out, the Welch F"
    assert changes(told(welch_f=BREAKS)) == [f"{start} would be the choice."]
    assert changes(told(welch_f=BREAKS, sop=BREAKS)) == [f"{start} and the rule sop would tie."]


def test_where_no_part_leads_elsewhere_that_is_told(told):
    start = "No factor, taken at one of its levels alone or without one of them, would lead to"
    assert changes(told(welch_f=finds(0.9), sop=KEEPS)) == [f"{start} another choice that finds more."]
    assert changes(told(welch_f=TOO_HIGH, sop=TOO_LOW)) == [f"{start} a choice."]


def test_of_several_changes_the_two_of_the_largest_gain_are_told(told):
    others = {"classical_f": finds(0.6, 0.95, 0.6), "sop": finds(0.6, 0.6, 0.85)}
    found = changes(told(welch_f=finds(0.8), brown_forsythe_f=finds(0.9, 0.6, 0.6), **others))
    assert [sentence.split(",")[0].split()[-1] for sentence in found] == ["rising", "even"]


def test_with_one_set_of_conditions_nothing_can_be_taken_out(told):
    (found,) = changes(told(welch_f=finds(0.8), sop=finds(0.9), spreads=("even",)))
    assert found.startswith("Only one set of conditions was examined; how far it may move")


def test_alternatives_are_every_other_choice_with_its_gain_the_largest_first(told):
    """At even alone .95 against .8, at rising alone or without falling .86; without rising, or at falling, no other."""
    outcome = told(welch_f=finds(0.8), sop=finds(0.95, 0.86, 0.7)).outcome
    found = alternatives(outcome.study, outcome.conditions, outcome.tables, outcome.decision)
    parts = [("even", False), ("rising", False), ("falling", True)]
    assert [(one.level, one.without) for one in found] == parts
    assert [one.gain for one in found] == pytest.approx([0.15, 0.06, 0.06])
    assert {one.chosen[0].name for one in found} == {"sop"}


def kinds_title(book):
    """The title over the kinds of data."""
    return populations.title(book, populations.kinds(book))


def test_kinds_of_data_are_counted(told):
    unequal = ("half", "full")
    assert kinds_title(told(welch_f=KEEPS)) == "Equal means, 3 kinds of data."
    assert kinds_title(told(welch_f=KEEPS, spreads=("rising",))) == "Equal means, one kind of data."
    assert kinds_title(told(welch_f=KEEPS, differences=unequal)) == "6 kinds of data."
    assert kinds_title(told(welch_f=KEEPS, differences=("full",), spreads=("even",))) == "One kind of data."


@pytest.mark.parametrize(
    ("left_out", "rest"),
    [
        ("", "; in 2 of 3 kinds of data not quite equal as recorded."),
        ("even = [1, 1, 1]\n", ", but in none of the 2 kinds of data afterwards."),
    ],
)
def test_means_that_recording_makes_unequal_are_told(small_outcome, left_out, rest):
    """Skewed data, recorded in units as wide as the data; groups of equal spread stay equal."""
    skewed = '[vary.shape]\nskewed = { family = "lognormal", sigma = 1.0 }\n'
    coarse = '[vary.disturbance]\nrounded = [{ kind = "round", to = 4 }]\n'
    text = small_outcome.study.text.replace(left_out, "")
    study = parse(text.replace("[methods]", f"{skewed}{coarse}[methods]"), "x.toml")
    book = Book(replace(small_outcome, study=study, conditions=conditions(study)))
    assert kinds_title(book) == f"Equal means before recording{rest}"


@pytest.mark.parametrize(
    ("number", "ends"), [(12, []), (13, ["."]), (25, [", part 1 of 2.", ", part 2 of 2."])]
)
def test_more_than_twelve_kinds_of_data_have_further_figures(tmp_path, number, ends):
    spreads = "\n".join(f"s{place} = [1, {place}]" for place in range(1, number + 1))
    text = f'format = 1\n[study]\ncompare = "means"\n[vary.sizes]\nfew = [5, 5]\n[vary.spread]\n{spreads}\n'
    study = parse(f'{text}[methods]\nuse = ["welch_f"]\n[simulation]\nreplications = 400\n', "x.toml")
    found = populations.Populations(Book(run.run(study, tmp_path, 1))).further()
    assert [sheet.title for sheet in found] == [f"Further settings{end}" for end in ends]


@pytest.mark.parametrize(
    ("errors", "most", "shown"),
    [
        ((0.068, 0.05, 0.06), 3, ["even", "rising", "falling"]),
        ((0.068, 0.05, 0.06), 2, ["falling", "even"]),
        ((0.05, 0.05, 0.068), 2, ["falling", "rising"]),
    ],
)
def test_conditions_are_in_order_where_they_fit_and_else_the_most_telling_first(told, errors, most, shown):
    """The Welch F leads and comes nearest to a limit at falling, then at rising; the two methods take turns."""
    book = told(welch_f=finds(0.9, errs={"none": (0.05, 0.06, 0.032)}), sop={"none": errors})
    assert [one.levels["spread"] for one in book.deciding(book.nulls, most)] == shown


@pytest.mark.parametrize(
    ("methods", "status", "lead"),
    [
        ({"welch_f": finds(0.8), "sop": finds(0.9), "kruskal_wallis": finds(0.99)}, Status.CHOSEN, "sop"),
        ({"welch_f": finds(0.85), "sop": finds(0.853), "classical_f": finds(0.7)}, Status.TIE, "sop"),
        ({"welch_f": finds(0.95, errs=OPEN), "sop": finds(0.8)}, Status.UNDECIDED, "sop"),
        ({"welch_f": OPEN, "sop": finds(0.95, errs=OPEN)}, Status.UNDECIDED, "sop"),
        ({"welch_f": TOO_HIGH, "sop": BREAKS, "kruskal_wallis": KEEPS}, Status.NONE_ELIGIBLE, "sop"),
        ({"kruskal_wallis": BREAKS}, Status.NONE_ELIGIBLE, "kruskal_wallis"),
    ],
)
def test_the_report_follows_the_chosen_the_eligible_the_possible_or_the_nearest(told, methods, status, lead):
    book = told(**methods)
    assert (book.decision.status, book.lead.name) == (status, lead)


@pytest.mark.parametrize(
    ("passed", "tripped", "rest"),
    [
        ((0.05, 0.06, 0.04), (0.05, 0.12, 0.05), "the Welch F, it errs in as much as 0.12"),
        ((0.05, 0.06, 0.2), (0.05, 0.12, 0.05), "the classical F, it errs in as much as 0.20"),
        ((0.05, 0.06, 0.04), (0.05, 0.075, 0.05), ""),
        ((0.05, 0.06, 0.04), None, ""),
    ],
)
def test_an_end_of_a_route_that_errs_too_often_is_told(told, passed, tripped, rest):
    """Rates within each end at the three spreads; None for an end that no dataset came to."""
    outcome = told(sop=KEEPS).outcome
    table = outcome.tables.branches.assign(mcse_within=0.005)
    for end, within in (("levene_median passed", passed), ("levene_median tripped", tripped)):
        here = (table["end"] == end) & (table["reading"] == "error")
        table.loc[here, "taken"] = 5000 if within else 0
        table.loc[here, "rate_within"] = within or float("nan")
        table.loc[here, "rejections"] = [round(5000 * rate) for rate in within or (0, 0, 0)]
    book = Book(replace(outcome, tables=replace(outcome.tables, branches=table)))
    errs = f"where the checks lead to {rest}; the limit is 0.075."
    keeps = "within none of its ends is the error rate shown to pass 0.075."
    assert bare(evidence.branches(book)[0]["title"]) == f"rule sop: {errs if rest else keeps}"


@pytest.mark.parametrize(
    ("numbers", "text"),
    [([1, 2, 3, 4, 7], "1–4, 7"), ([3], "3"), ([1, 3, 5], "1, 3, 5"), ([2, 3, 9, 10], "2–3, 9–10"), ([], "")],
)
def test_numbers_that_follow_each_other_are_told_as_a_range(numbers, text):
    assert evidence.ranges(numbers) == text


def test_a_level_is_shared_where_all_of_some_conditions_and_not_all_others_have_it(told):
    book = told(welch_f=KEEPS)
    even, rising, falling = book.nulls
    assert evidence.shared_levels(book, [rising]) == [("spread", "rising")]
    assert evidence.shared_levels(book, [even, falling]) == []
    assert evidence.shared_levels(book, book.nulls) == []
