"""Claims that a report must not make: each a case in which a rule once said too much."""

import pandas as pd
import pytest

from workbench.report import calibration, decision, evidence, pairs, power, rates, regret, shown
from workbench.texts import bare

KEEPS = {"none": 0.05}
OPEN = {"none": (0.05, 0.073, 0.05)}
BREAKS = {"none": (0.05, 0.09, 0.05)}


def finds(*full, errs=KEEPS):
    """A method's rates: those of errors, and its detections of the full difference at one or three spreads."""
    return errs | {"full": full[0] if len(full) == 1 else full}


def test_a_tie_that_a_part_of_the_conditions_would_break_is_told(told):
    book = told(welch_f=finds(0.9, 0.8, 0.9), sop=finds(0.95, 0.803, 0.9))
    assert book.decision.status.value == "tie"
    found = [bare(sentence) for sentence in decision.changes(book)]
    assert found[0].startswith(
        "Were spread known to be even, the rule sop would be the choice: least detection 95.0"
    )
    assert "against 90.0\u00a0% with the Welch F" in found[0]


def test_a_tie_that_no_part_breaks_is_no_missing_choice(told):
    (found,) = decision.changes(told(welch_f=finds(0.9), sop=finds(0.9)))
    assert found.endswith("would lead to another choice that finds more.")


def test_without_differences_the_cost_of_a_choice_is_not_known(told):
    book = told(welch_f=KEEPS, sop=KEEPS, differences=("none",), criteria={"power": None})
    assert len(book.decision.eligible) == 2
    assert decision.costs(book) == [book.findings.cost_unknown()]


def test_a_rival_that_is_not_settled_is_not_said_to_keep_its_error_rate(told):
    book = told(welch_f=finds(0.9, 0.85, 0.85), sop=finds(0.95, 0.97, 0.5, errs=OPEN))
    assert "of which it is not settled whether it keeps its error rate" in decision.costs(book)[0]
    settled = told(welch_f=finds(0.9, 0.85, 0.85), sop=finds(0.95, 0.97, 0.5))
    assert "not settled" not in decision.costs(settled)[0]


def test_methods_that_answer_another_question_contradict_no_sentence(told):
    """The map may say that a Kruskal–Wallis test keeps its error rate; other sentences speak of what is eligible."""
    both = told(welch_f=finds(0.85), kruskal_wallis=finds(0.99))
    assert rates.map_title(both).startswith("Both methods stay")
    third = told(welch_f=finds(0.85), kruskal_wallis=finds(0.99), sop=finds(0.8))
    none = told(welch_f=BREAKS, kruskal_wallis=KEEPS)
    sentences = [
        pairs.pairs(both).title,
        decision.costs(third)[0],
        regret.regret(third).title,
        decision.costs(none)[0],
    ]
    assert all("eligible" in sentence for sentence in sentences)


def test_an_admitted_method_alone_is_not_said_to_answer_the_question(told):
    book = told(welch_f=BREAKS, kruskal_wallis=KEEPS, criteria={"admit": ("kruskal_wallis",)})
    assert bare(decision.costs(book)[0]) == (
        "There is no rival to lose detection to: only the Kruskal–Wallis test is eligible."
    )


def test_from_a_difference_on_means_all_larger_ones_too(told):
    dip = told(welch_f=KEEPS | {"half": 0.9, "full": 0.7, "double": 0.9}, sop=BREAKS)
    assert "From a difference of 4\u00a0mm on" in power.power(dip).title
    rising = told(welch_f=KEEPS | {"half": 0.5, "full": 0.9, "double": 0.95}, sop=BREAKS)
    assert "From a difference of 2\u00a0mm on" in power.power(rising).title
    last = told(welch_f=KEEPS | {"half": 0.9, "full": 0.9, "double": 0.7}, sop=BREAKS)
    assert power.power(last).title.startswith("No difference examined")


def test_what_is_open_at_its_own_level_is_not_said_to_hold_at_another(told):
    assert calibration.calibration(told(welch_f=OPEN)).title == "Error rates at other levels."


def ends(*rows):
    """Rows of branches.csv: (taken, rejections)."""
    table = pd.DataFrame(rows, columns=["taken", "rejections"]).assign(condition=range(len(rows)))
    return table.assign(rate_within=table["rejections"] / table["taken"])


def test_a_single_dataset_is_no_error_rate_of_an_end():
    worst = evidence.worst_within(ends((1, 1), (1000, 100), (0, 0)))
    assert worst["condition"] == 1 and worst["lower"] < 0.1
    assert evidence.worst_within(ends((0, 0))) is None
    assert evidence.worst_within(ends((1, 1)))["lower"] < 0.075


def test_one_kind_of_data_is_not_counted_like_many(told):
    findings = told(welch_f=KEEPS).findings
    assert findings.equal_kinds("means", 1, 1) == "Equal means before recording, not quite equal as recorded."
    assert findings.equal_kinds("means", 2, 2).endswith("but in none of the 2 kinds of data afterwards.")


def test_a_cost_too_small_for_its_digits_is_below_the_last_of_them():
    assert shown.points(0.0003, 0.03).text == "<\u00a01" and shown.points(0.0003, 0.0005).text == "<\u00a00.1"
    assert shown.points(0.0123, 0.0005).text == "1.2"


@pytest.mark.parametrize("spreads", [("even",), ("even", "rising")])
def test_at_least_is_said_of_several_conditions_only(told, spreads):
    book = told(welch_f=finds(0.85), sop={"none": 0.09}, spreads=spreads)
    assert ("at least" in rates.detection_title(book)) == (len(spreads) > 1)
    unsettled = told(welch_f=finds(0.802), sop={"none": 0.09}, spreads=spreads)
    assert ("everywhere" in rates.detection_title(unsettled)) == (len(spreads) > 1)


def test_counts_of_none_and_all_are_counts_of_studies(told):
    assert "in 0 of 10,000 studies at least" in rates.detection_title(told(welch_f=finds(0.0), sop=BREAKS))
    assert "10,000 of 10,000 studies at least" in rates.detection_title(told(welch_f=finds(1.0), sop=BREAKS))
