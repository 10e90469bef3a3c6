"""Verdicts, choice, ties and open questions, from tables made by hand."""

from types import SimpleNamespace

import numpy as np
import pandas as pd
import pytest

from workbench import sentences
from workbench.criteria import CRITERIA, Verdict
from workbench.decide import Standing, Status, best, choice, contests, worst_case_difference
from workbench.table import DIFFERENCE_COLUMNS, portion
from workbench.verdict import advice, chance, settling_total, together


def rows(rates, half, verdict="", reading="detection"):
    """Rows of the table, one a condition, with intervals of a given half-width."""
    rates = np.array(rates)
    return pd.DataFrame(
        {
            "condition": np.arange(1, len(rates) + 1),
            "alpha": 0.05,
            "rate": rates,
            "lower": rates - half,
            "upper": rates + half,
            "mcse": half / 4,
            "reading": reading,
            "verdict": verdict,
            "replications": 10_000,
            "rejections": (rates * 10_000).astype(int),
            "undefined": 0,
            "method": "a",
        }
    )


def standing(name, detections, half=0.005, size=Verdict.MEETS, answers=True, admitted=False):
    """A method with the given detections and verdict on its error rate."""
    errors = rows([0.05], 0.004, size.value, "error")
    return Standing(
        name, name, "means", answers, admitted, size, Verdict.MEETS, errors, rows(detections, half)
    )


def tables_of(standings, half=0.003):
    """The paired differences that the standings' rates give."""
    found = []
    for place, one in enumerate(standings):
        for other in standings[place + 1 :]:
            for condition, (p, q) in enumerate(
                zip(one.detections["rate"], other.detections["rate"], strict=True), 1
            ):
                row = dict.fromkeys(DIFFERENCE_COLUMNS, "x") | {"condition": condition, "alpha": 0.05}
                row |= {"method": one.name, "rival": other.name, "lower": p - q - half, "upper": p - q + half}
                found.append(row)
    return SimpleNamespace(differences=pd.DataFrame(found, columns=DIFFERENCE_COLUMNS))


STUDY = SimpleNamespace(criteria=SimpleNamespace(power=object(), tie=0.01))


def chosen(*standings, half=0.003):
    """(status, names) of the choice among methods."""
    status, found = choice(STUDY, list(standings), tables_of(standings, half))
    return status, [one.name for one in found]


def test_the_best_worst_case_is_chosen():
    """Powers .82 .80 .70 in one condition and .60 .66 .65 in another: the worst cases are .60 .66 .65."""
    a, b, c = standing("a", [0.82, 0.60]), standing("b", [0.80, 0.66]), standing("c", [0.70, 0.60])
    assert chosen(a, b, c) == (Status.CHOSEN, ["b"])


def test_methods_within_the_margin_tie_in_the_order_of_the_file():
    a, b, c = standing("a", [0.70]), standing("b", [0.702]), standing("c", [0.5])
    assert chosen(a, b, c) == (Status.TIE, ["a", "b"])


def test_a_rival_neither_apart_nor_tied_leaves_the_question_open():
    a, b = standing("a", [0.70]), standing("b", [0.709])
    assert chosen(a, b, half=0.0005)[0] is Status.TIE
    assert chosen(a, b, half=0.012)[0] is Status.UNDECIDED


def test_an_open_error_rate_matters_only_where_the_method_could_win():
    winner = standing("a", [0.9])
    loser = standing("b", [0.5], size=Verdict.UNDECIDED)
    assert chosen(winner, loser) == (Status.CHOSEN, ["a"])
    rival = standing("b", [0.95], size=Verdict.UNDECIDED)
    assert chosen(winner, rival)[0] is Status.UNDECIDED


def test_methods_that_fail_or_answer_another_question_are_left_out():
    fails = standing("a", [0.99], size=Verdict.FAILS)
    other = standing("b", [0.98], answers=False)
    keeps = standing("c", [0.5])
    assert chosen(fails, other, keeps) == (Status.CHOSEN, ["c"])
    assert chosen(fails, other) == (Status.NONE_ELIGIBLE, [])
    admitted = standing("b", [0.98], answers=False, admitted=True)
    assert chosen(fails, admitted, keeps) == (Status.CHOSEN, ["b"])


def test_nothing_is_decided_while_every_error_rate_is_open():
    assert chosen(standing("a", [0.9], size=Verdict.UNDECIDED)) == (Status.UNDECIDED, [])


def test_without_a_target_the_eligible_tie():
    study = SimpleNamespace(criteria=SimpleNamespace(power=None, tie=0.01))
    a, b = standing("a", [0.9]), standing("b", [0.5])
    status, found = choice(study, [a, b], tables_of([a, b]))
    assert status is Status.TIE and [one.name for one in found] == ["a", "b"]
    status, found = choice(study, [a], tables_of([a]))
    assert status is Status.CHOSEN


def test_limits_of_two_worst_cases_hold_the_true_difference():
    """Brute force: whatever rates lie within all intervals, the difference of their minima lies within the limits."""
    rng = np.random.default_rng(5)
    for _ in range(200):
        p, q = rng.random((2, 3))
        half, pair_half = rng.uniform(0.02, 0.3, 2)
        one, other = standing("a", p, half), standing("b", q, half)
        low, high = worst_case_difference(one, other, tables_of([one, other], pair_half).differences)
        for _ in range(50):
            true = p + rng.uniform(-half, half, 3)
            rival = q + rng.uniform(-half, half, 3)
            if np.all(np.abs(true - rival - (p - q)) <= pair_half):
                assert low - 1e-12 <= true.min() - rival.min() <= high + 1e-12


def test_best_is_symmetric_in_the_order_of_the_methods():
    a, b = standing("a", [0.7, 0.6]), standing("b", [0.9, 0.4])
    for order in ([a, b], [b, a]):
        status, found = best(STUDY, order, order, tables_of(order))
        assert status is Status.CHOSEN and found[0].name == "a"


@pytest.mark.parametrize(
    ("lower", "upper", "wanted"),
    [
        (0.03, 0.07, Verdict.MEETS),
        (0.025, 0.075, Verdict.MEETS),
        (0.07, 0.08, Verdict.UNDECIDED),
        (0.0, 0.03, Verdict.UNDECIDED),
        (0.0, 0.024, Verdict.FAILS),
        (0.0751, 0.09, Verdict.FAILS),
        (0.0, 1.0, Verdict.UNDECIDED),
    ],
)
def test_a_verdict_is_the_position_of_the_interval(lower, upper, wanted):
    assert CRITERIA.make("size", {"word": "liberal"}).verdict(lower, upper, 0.05) is wanted


def test_bands_are_bradleys():
    """Bradley (1978): 0.5 to 1.5 alpha, stringent 0.9 to 1.1 alpha (from memory; the paper was not read)."""
    assert np.allclose(CRITERIA.make("size", {"word": "liberal"}).band(0.05), (0.025, 0.075))
    assert np.allclose(CRITERIA.make("size", {"word": "stringent"}).band(0.01), (0.009, 0.011))


def test_one_failure_decides_over_several_rows():
    assert together(["meets", "fails", "undecided"]) is Verdict.FAILS
    assert together(["meets", "undecided"]) is Verdict.UNDECIDED
    assert together(["meets", "meets"]) is Verdict.MEETS


def test_the_error_is_shared_out_and_never_overspent():
    spent = sum(
        portion(0.05, purpose, number) * number
        for purpose, number in (("verdicts", 96), ("pairs", 60), ("others", 7))
    )
    assert spent == pytest.approx(0.05)


def test_advice_settles_an_open_row_as_often_as_it_promises():
    """After 10,000 replications the advised number settles the row in about 80 of 100 cases (here 4,000 drawn)."""
    rng = np.random.default_rng(8)
    true, limit, error, n = 0.07, 0.075, 1e-3, 10_000
    settled, tried = 0, 0
    for x in rng.binomial(n, true, 400):
        told = advice(x, n, limit, 0.065, 0.08, error)
        if told.more is None:
            continue
        for more in rng.binomial(told.more, true, 10):
            total, rate = n + told.more, (x + more) / (n + told.more)
            half = 3.29 * np.sqrt(rate * (1 - rate) / total)
            settled += abs(rate - limit) > half
            tried += 1
    assert tried > 2000 and settled / tried > 0.7


def test_a_rate_at_its_limit_is_hardly_settled():
    told = advice(750, 10_000, 0.075, 0.07, 0.08, 1e-4)
    assert told.more is None and told.within == pytest.approx(0.005)
    assert chance(0, 0.0751, 10_000, 0.075, 1e-4) == 0


def test_sentences_open_as_they_must():
    assert sentences.settling(advice(690, 10_000, 0.075, 0.065, 0.08, 1e-3), 10_000).startswith("About ")
    assert "hardly settle" in sentences.settling(advice(750, 10_000, 0.075, 0.07, 0.08, 1e-4), 10_000)


def study_of(**criteria):
    """What the sentences ask of a study: level, limits, target, factors."""
    return SimpleNamespace(
        levels=(0.05,),
        question=SimpleNamespace(compare="means"),
        criteria=SimpleNamespace(size=CRITERIA.make("size", {"word": "liberal"}), tie=0.01, **criteria),
        factors=SimpleNamespace(levels={"sizes": {"a": 1, "b": 2}, "difference": {"none": 0, "real": 1}}),
        simulation=SimpleNamespace(replications=10_000),
    )


def told(status, chosen, standings, open_rows=(), rivalry=(), **criteria):
    """The sentences of a decision, joined."""
    for one in standings:
        one.errors["sizes"] = one.detections["sizes"] = "a"
    study = study_of(**({"power": SimpleNamespace(at="real", least=0.8)} | criteria))
    return " ".join(sentences.decision(study, status, chosen, standings, list(open_rows), list(rivalry)))


def test_a_choice_is_told_with_its_reasons():
    a, b = standing("a", [0.9, 0.95]), standing("b", [0.7, 0.8])
    text = told("chosen", [a], [a, b])
    assert text.startswith("Use the a.") and "at least 90" in text and "b 70" in text
    one = standing("a", [0.9])
    assert "at least" not in told("chosen", [one], [one])
    assert "larger sizes" not in text and "another question" not in text
    admitted = standing("a", [0.9], answers=False, admitted=True)
    assert "the file admits it although it answers another question" in told("chosen", [admitted], [admitted])


def test_a_power_that_falls_short_asks_for_sizes():
    short = Standing("a", "a", "means", True, False, Verdict.MEETS, Verdict.FAILS, *standing_rows([0.6]))
    assert "larger sizes are needed rather than another choice" in told("chosen", [short], [short])
    open_power = Standing(
        "a", "a", "means", True, False, Verdict.MEETS, Verdict.UNDECIDED, *standing_rows([0.8])
    )
    assert "is not shown yet" in told("chosen", [open_power], [open_power])


def standing_rows(detections):
    """The rows of a method with the given detections."""
    return rows([0.05], 0.004, "meets", "error"), rows(detections, 0.005)


def test_the_other_openings_say_what_to_do():
    a, b = standing("a", [0.9]), standing("b", [0.9])
    assert told("tie", [a, b], [a, b]).startswith("The a and b tie.")
    fails = standing("c", [0.9], size=Verdict.FAILS)
    assert told("none eligible", [], [fails]).startswith("No method is eligible. The nearest is the c")
    other = standing("c", [0.9], answers=False)
    assert "see criteria.admit" in told("none eligible", [], [other])
    rivalry = contests(study_of(power=object()), [a, b], tables_of([a, b], 0.02))
    assert len(rivalry) == 1 and rivalry[0].total > 10_000
    assert "neither apart nor tied: the difference" in told("undecided", [], [a, b], rivalry=rivalry)
    row = a.errors.iloc[0]
    hard = (row, 0.075, advice(750, 10_000, 0.075, 0.07, 0.08, 1e-4))
    assert "hardly settle" in told("undecided", [], [a], [hard])


@pytest.mark.parametrize(
    ("limits", "wanted"),
    [((-0.01, 0.03), 40_000), ((-0.02, 0.02), 40_000), ((-0.01, 0.03001), 39_920), ((-0.2, 0.18), None)],
)
def test_how_many_replications_tell_two_methods_apart(limits, wanted):
    """Limits of half-width h about d need n (h / d)^2 replications to leave 0, or n (h / (m - d))^2 to tie."""
    found = settling_total(limits, 0.01, 10_000)
    assert found == wanted or abs(found - wanted) < 200


def test_a_method_without_p_values_is_no_silent_winner():
    a = standing("a", [0.9])
    a.errors["undefined"] = 5000
    text = told("chosen", [a], [a])
    assert "Beware: the a had no p-value for 50" in text
    a.errors["undefined"] = 5
    assert "Beware" not in told("chosen", [a], [a])


def test_many_that_tie_are_told_at_once():
    some = [standing(name, [0.9]) for name in "abc"]
    text = told("tie", some, some)
    assert text.count("erred in") == 0 and "Each kept its error rate within the limits 0.025 to 0.075" in text
    assert told("tie", some[:2], some).count("erred in") == 2


def test_none_and_all_are_counts():
    rare, sure = standing("a", [0.0]), standing("b", [1.0])
    assert "0 of 10,000 studies" in told("chosen", [rare], [rare])
    assert "10,000 of 10,000 studies" in told("chosen", [sure], [sure])
