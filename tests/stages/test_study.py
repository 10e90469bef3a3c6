"""An experiment file: everything in it is read, and every mistake in it is told at once with its place."""

import pytest
from click.testing import CliRunner

from workbench import cli
from workbench.errors import StudyError, WorkbenchError
from workbench.grid import conditions
from workbench.routes.route import Route
from workbench.study import parse, read

GOOD = """\
format = 1
[study]
compare = "means"
scale = "additive"
centre = 18.0
alpha = [0.05, 0.01]
[groups]
names = ["A", "B", "C"]
[vary.sizes]
planned = [6, 8, 12]
[vary.shape]
normal = "normal"
skewed = { family = "lognormal", sigma = 0.4 }
[vary.spread]
equal = [2.0, 2.0, 2.0]
falling = [3.0, 2.0, 1]
[vary.difference]
none = [0, 0, 0]
relevant = [0.0, 0.0, 3.0]
[vary.disturbance]
rounded = [{ kind = "round", to = 0.1 }]
[methods]
use = ["classical_f", "welch_f", "sop"]
[methods.routes.sop]
check = "shapiro_residuals"
level = 0.05
if_passed = { check = "levene_median", level = 0.1, if_passed = "classical_f", if_failed = "welch_f" }
if_failed = "kruskal_wallis"
[criteria]
size = { lower = 0.0, upper = 0.075 }
power = { at = "relevant", least = 0.8 }
tie = 0.01
confidence = 0.95
[simulation]
seed = 7
replications = 4000
"""

BROKEN = [
    ("format = 1", "format = ", ["1:10"]),
    ("format = 1", "format = 2", ["1:10: format: 1 wanted", "got 2"]),
    ("format = 1\n", "", ["1:1: file: 'format' is missing"]),
    ("falling = [3.0, 2.0, 1]", "equal = [1, 2, 3]", ["16:1: 'vary.spread.equal' is written twice"]),
    ('"means"', '"meens"', ["3:11: compare: 'meens'", "did you mean 'means'?"]),
    ('"means"', '"geometric means"', ["3:11: compare: geometric means need the multiplicative scale"]),
    ('compare = "means"\n', "", ["2:2: study: 'compare' is missing"]),
    ('"additive"', '"log"', ["4:9: scale: no scale is called 'log'"]),
    (
        '"additive"',
        '"multiplicative"',
        [
            "18:9: difference: a number above 0 wanted on the multiplicative scale; got 0",
            "13:10: shape: exp(spread * lognormal)",
        ],
    ),
    ("centre = 18.0", 'centre = "x"', ["5:10: centre: a number wanted; got 'x'"]),
    ("centre = 18.0", "centre = 18.0\ntitel = 'x'", ["6:1: titel: unknown key; did you mean 'title'?"]),
    (
        "[0.05, 0.01]",
        '[0.05, 1.5, "x", 0.05]',
        ["6:16: alpha: a level", "6:21: alpha: a level", "6:26: alpha: the level"],
    ),
    ("[0.05, 0.01]", "[]", ["6:9: alpha: at least one level wanted"]),
    ('["A", "B", "C"]', '["A", "A", "C"]', ["8:15: names: the group name 'A' is written twice"]),
    ('["A", "B", "C"]', '["A", "B"]', ["8:9: names: 3 names wanted", "got 2"]),
    ("[6, 8, 12]", "[6, 1, 12]", ["10:15: sizes: at least 2 values in every group wanted; got 1"]),
    (
        "[6, 8, 12]",
        "[6, 8.5, true]",
        ["10:15: sizes: a whole number wanted; got 8.5", "10:20: sizes: a whole number wanted; got true"],
    ),
    ("[6, 8, 12]", "[6]", ["10:11: sizes: at least 2 groups wanted; got 1"]),
    (
        "[6, 8, 12]",
        "[6, 8, 1000000]",
        ["10:11: sizes: at most 1,000,000 values in a dataset wanted; got 1,000,014"],
    ),
    ("[6, 8, 12]", str([2] * 1001), ["10:11: sizes: at most 1,000 groups wanted; got 1,001"]),
    ("planned = [6, 8, 12]\n", "", ["9:7: sizes: at least one level wanted"]),
    ("[vary.sizes]\nplanned = [6, 8, 12]\n", "", ["[vary.sizes] is missing"]),
    ("[3.0, 2.0, 1]", "[3.0, 2.0]", ["16:11: spread: 3 numbers wanted, one per group; got 2"]),
    (
        "[3.0, 2.0, 1]",
        "[3.0, 0, -1]",
        ["16:17: spread: a number above 0 wanted; got 0", "16:20: spread: a number above 0 wanted; got -1"],
    ),
    (
        "[3.0, 2.0, 1]",
        '[nan, inf, "a"]',
        ["16:12: spread: a finite number wanted; got nan", "got inf", "got 'a'"],
    ),
    (
        '"lognormal"',
        '"lognormall"',
        ["13:21: shape: no shape is called 'lognormall'; did you mean 'lognormal'?"],
    ),
    ("sigma = 0.4", "sigma = -0.4", ["13:42: shape: a number above 0 wanted; got -0.4"]),
    (
        "sigma = 0.4",
        "sgma = 0.4",
        ["13:10: shape: 'sigma' is missing", "13:34: sgma: unknown key; did you mean 'sigma'?"],
    ),
    (
        '{ family = "lognormal", sigma = 0.4 }',
        '{ family = "student_t", df = 2 }',
        ["13:39: shape: a number above 2 wanted; got 2"],
    ),
    ("[vary.spread]", "[vary.spred]", ["14:7: spred: unknown key; did you mean 'spread'?"]),
    ('kind = "round"', 'kynd = "round"', ["21:12: disturbance: 'kind' is missing"]),
    ("to = 0.1", "to = 0", ["21:35: disturbance: a number above 0 wanted; got 0"]),
    (
        '"welch_f", "sop"]',
        '"welsh_f", "sop"]',
        ["23:23: use: no method or route is called 'welsh_f'; did you mean 'welch_f'?"],
    ),
    ('"welch_f", "sop"]', '"welch_f", "welch_f"]', ["23:34: use: 'welch_f' is written twice"]),
    (
        'check = "shapiro_residuals"',
        'chek = "shapiro_residuals"',
        ["24:17: sop: 'check' is missing", "25:1: chek: unknown key"],
    ),
    (
        '"levene_median", level = 0.1',
        '"levene", level = 5',
        ["27:23: check: no check is called 'levene'; did you mean", "27:41: level: a level"],
    ),
    (
        "[methods.routes.sop]",
        "[methods.routes.welch_f]",
        ["24:17: welch_f: 'welch_f' is the name of a method"],
    ),
    ("upper = 0.075", "upper = -1", ["30:31: upper: a number of 0 or more wanted; got -1"]),
    ("size = { lower = 0.0, upper = 0.075 }", 'size = "lax"', ["30:8: size: no limits are called 'lax'"]),
    (
        'at = "relevant", least = 0.8',
        'at = "relevnt", least = 80',
        ["31:16: at: no difference is called 'relevnt'", "31:35: least: a number below 1 wanted; got 80"],
    ),
    ('at = "relevant"', 'at = "none"', ["31:16: at: nothing differs at 'none'"]),
    (
        "tie = 0.01",
        'tie = 2\nadmit = ["bob"]',
        ["32:7: tie: a number below 1 wanted; got 2", "33:10: admit: 'bob' is not under methods.use"],
    ),
    ("seed = 7", "seed = -1", ["35:8: seed: a number of 0 or more wanted; got -1"]),
    (
        "replications = 4000",
        "replications = 0\nseeed = 4",
        ["36:16: replications: a number of 1 or more", "37:1: seeed: unknown key; did you mean 'seed'?"],
    ),
    (
        "[simulation]",
        '[[leave_out]]\nshape = "x"\nspred = "equal"\n[simulation]',
        ["35:9: shape: no level of shape is called 'x'", "36:1: spred: unknown key"],
    ),
    ("[simulation]", '[[leave_out]]\nsizes = "planned"\n[simulation]', ["every condition is left out"]),
    ("[simulation]", "[extra]\n[simulation]", ["34:2: extra: unknown key"]),
]


@pytest.mark.parametrize(
    ("old", "new", "wanted"), BROKEN, ids=[f"{old[:18]} → {new[:18]}" for old, new, _ in BROKEN]
)
def test_each_mistake_is_told_with_its_place(old, new, wanted):
    assert old in GOOD
    with pytest.raises(StudyError) as caught:
        parse(GOOD.replace(old, new, 1), "x.toml")
    told = str(caught.value)
    for text in wanted:
        assert text in told
    assert all(line.startswith("x.toml:") for line in told.split("\n"))


def test_more_than_a_hundred_thousand_conditions_are_refused():
    many = "".join(f"d{number} = [0, 0, {number}]\n" for number in range(25_001))
    text = GOOD.replace("relevant = [0.0, 0.0, 3.0]\n", "relevant = [0.0, 0.0, 3.0]\n" + many)
    with pytest.raises(StudyError, match="at most 100,000 conditions wanted; these levels give 100,012"):
        parse(text, "x.toml")


def test_all_mistakes_of_a_file_are_told_at_once():
    broken = GOOD
    for old, new in (
        ("sigma = 0.4", "sigma = 0"),
        ("[6, 8, 12]", "[6, 8, 1]"),
        ('"classical_f", "w', '"classic", "w'),
        ("tie = 0.01", "tie = 9"),
    ):
        broken = broken.replace(old, new, 1)
    with pytest.raises(StudyError) as caught:
        parse(broken, "x.toml")
    assert [mistake.line for mistake in caught.value.mistakes] == [10, 13, 23, 32]


@pytest.mark.parametrize("command", ["check", "run"])
def test_a_wrong_file_ends_with_2_and_writes_nothing(command, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "x.toml").write_text(GOOD.replace("sigma = 0.4", "sigma = 0"), encoding="utf-8")
    assert cli.status_of(cli.workbench, [command, "x.toml"]) == 2
    assert [path.name for path in tmp_path.iterdir()] == ["x.toml"]


@pytest.mark.parametrize("command", ["check", "run", "status", "decide"])
def test_a_file_that_is_not_there_ends_with_2(command, tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert cli.status_of(cli.workbench, [command, "nowhere"]) == 2
    assert "nowhere" in capsys.readouterr().err
    assert list(tmp_path.iterdir()) == []


def test_bytes_that_are_no_text_are_refused_with_their_place(tmp_path):
    path = tmp_path / "x.toml"
    path.write_bytes(b"format = 1\n# \xff\n")
    with pytest.raises(WorkbenchError, match=":2:3: the file is not UTF-8"):
        read(path)


@pytest.mark.parametrize("monster", ["9" * 5000, "[" * 1000 + "]" * 1000])
def test_monstrous_numbers_and_nesting_are_refused_with_a_sentence(monster):
    with pytest.raises(StudyError, match="cannot be read"):
        parse(f"a = {monster}\n", "x.toml")


def test_everything_in_a_file_is_read():
    study = parse(GOOD, "folder/x.toml")
    assert study.title == study.stem == "x"
    assert study.levels == (0.05, 0.01)
    assert study.group_names == ("A", "B", "C")
    assert [judge.name for judge in study.judges] == ["classical_f", "welch_f", "sop"]
    route = study.judge("sop").method
    assert isinstance(route.if_passed, Route) and route.if_passed.level == 0.1
    assert [method.name for _, method in route.ends()] == ["classical_f", "welch_f", "kruskal_wallis"]
    assert study.criteria.size.band(0.05) == (0.0, 0.075)
    assert study.criteria.power.at == "relevant"
    assert study.simulation.replications == 4000


def test_conditions_are_crossed_in_the_order_of_the_file():
    found = conditions(parse(GOOD, "x.toml"))
    names = [(one.levels["shape"], one.levels["spread"], one.levels["difference"]) for one in found]
    shapes, spreads, differences = ("normal", "skewed"), ("equal", "falling"), ("none", "relevant")
    assert names == [(a, b, c) for a in shapes for b in spreads for c in differences]
    assert [one.number for one in found] == list(range(1, 9))
    assert [one.truth for one in found[:2]] == ["null", "alternative"]


def test_combinations_left_out_match_every_factor_named():
    out = '[[leave_out]]\nshape = "skewed"\nspread = "falling"\n[simulation]'
    found = conditions(parse(GOOD.replace("[simulation]", out), "x.toml"))
    assert len(found) == 6
    assert not any(one.levels["shape"] == "skewed" and one.levels["spread"] == "falling" for one in found)


def test_a_factor_left_out_has_its_default_level():
    short = 'format = 1\nstudy.compare = "medians"\nvary.sizes.a = [4, 5]\nmethods.use = ["welch_f"]\n'
    study = parse(short, "x.toml")
    (one,) = conditions(study)
    assert one.levels == {
        "sizes": "a",
        "shape": "normal",
        "spread": "equal",
        "difference": "none",
        "disturbance": "none",
    }
    assert one.setting.spreads == (1.0, 1.0) and one.difference == (0.0, 0.0)
    assert study.criteria.size.word == "liberal" and study.group_names == ("1", "2")


def test_names_are_no_part_of_what_is_computed():
    """A key is taken from settings after they were cast: 1 and 1.0, and a default spelled out, are one key."""
    one = conditions(parse(GOOD, "x.toml"))[0].setting
    renamed = GOOD.replace("planned =", "other =").replace(
        'normal = "normal"', 'bell = { family = "normal" }'
    )
    renamed = renamed.replace("[2.0, 2.0, 2.0]", "[2, 2, 2]")
    assert conditions(parse(renamed, "y.toml"))[0].setting.key == one.key
    mirrored = GOOD.replace("sigma = 0.4", "sigma = 0.4, mirrored = false")
    assert (
        conditions(parse(mirrored, "y.toml"))[4].setting.key
        == conditions(parse(GOOD, "x.toml"))[4].setting.key
    )


def test_new_writes_a_file_that_checks_and_is_never_overwritten(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    runner = CliRunner()
    assert runner.invoke(cli.workbench, ["new", "mine"], catch_exceptions=False).exit_code == 0
    study = read(tmp_path / "mine.toml")
    assert len(conditions(study)) == 24
    before = (tmp_path / "mine.toml").read_bytes()
    assert cli.status_of(cli.workbench, ["new", "mine"]) == 2
    assert (tmp_path / "mine.toml").read_bytes() == before


SETTINGS = """\
[methods.settings]
mild = { method = "trimmed_welch", trim = 0.1 }
quick = { method = "permutation_f", permutations = 99 }
"""


def with_settings(text=SETTINGS, use='["mild", "quick", "trimmed_welch", "sop"]'):
    """The study with methods that have settings of their own."""
    found = GOOD.replace('use = ["classical_f", "welch_f", "sop"]\n', f"use = {use}\n{text}")
    return parse(found.replace('if_failed = "kruskal_wallis"', 'if_failed = "mild"'), "x.toml")


def test_a_method_may_stand_twice_with_different_settings():
    mild, quick, usual, route = with_settings().judges
    assert (mild.method.trim, usual.method.trim, quick.method.permutations) == (0.1, 0.2, 99)
    assert mild.method.key() != usual.method.key()
    assert mild.label == "Yuen–Welch test (trim 0.1)" and usual.label == "Yuen–Welch test"
    assert (mild.short, usual.short) == ("mild", "Yuen")
    assert route.method.if_failed == mild.method


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ('mild = { method = "trimmed_welch", trim = 0.5 }', "trim: a number below 0.5 wanted; got 0.5"),
        ('mild = { method = "trimmed_welch", trin = 0.1 }', "trin: unknown key; did you mean 'trim'?"),
        ('mild = { method = "yuen" }', "method: no method is called 'yuen'"),
        ("mild = { trim = 0.1 }", "'method' is missing"),
        ('mild = "trimmed_welch"', "a word or a table with 'method' wanted"),
    ],
)
def test_wrong_settings_of_a_method_are_told_with_their_place(text, told):
    with pytest.raises(StudyError) as caught:
        with_settings(SETTINGS.replace('mild = { method = "trimmed_welch", trim = 0.1 }', text))
    assert told in str(caught.value) and str(caught.value).startswith("x.toml:25:")


def test_a_route_may_not_take_the_name_of_a_method_with_settings():
    twice = '[methods.settings]\nsop = { method = "trimmed_welch" }\nmild = { method = "trimmed_welch" }\n'
    with pytest.raises(StudyError, match="'sop' is the name of a method"):
        with_settings(twice, '["sop"]')


def test_a_check_in_a_route_may_have_settings():
    text = GOOD.replace('check = "shapiro_residuals"', 'check = { check = "shapiro_residuals" }')
    assert parse(text, "x.toml").judges == parse(GOOD, "x.toml").judges
    with pytest.raises(StudyError, match="unknown key"):
        parse(
            text.replace('{ check = "shapiro_residuals" }', '{ check = "shapiro_residuals", n = 3 }'),
            "x.toml",
        )


@pytest.mark.parametrize(
    ("route", "told"),
    [
        ('smallest_p_of = ["classical_f", "welch_f"]', None),
        ('drop_outliers = "grubbs"\nthen = "welch_f"', None),
        ('drop_outliers = "box_rule"\nthen = { smallest_p_of = ["classical_f", "kruskal_wallis"] }', None),
        (
            'check = { check = "spread_ratio_over", limit = 2 }\nif_passed = "classical_f"\nif_failed = "welch_f"',
            None,
        ),
        ('smallest_p_of = ["classical_f"]', "a list of at least two methods wanted"),
        ('smallest_p_of = ["classical_f", "welsh_f"]', "no method is called 'welsh_f'"),
        (
            'drop_outliers = "grubs"\nthen = "welch_f"',
            "no rule for outliers is called 'grubs'; did you mean 'grubbs'?",
        ),
        ('drop_outliers = "grubbs"', "'then' is missing"),
        ('drop_outliers = "grubbs"\nthan = "welch_f"', "than: unknown key; did you mean 'then'?"),
        (
            'check = { check = "spread_ratio_over", limit = 0 }\nif_passed = "classical_f"\nif_failed = "welch_f"',
            "limit: a number of 1 or more wanted; got 0",
        ),
    ],
)
def test_further_kinds_of_rules_are_read_or_refused(route, told):
    start, end = GOOD.split("[methods.routes.sop]\n")
    text = f"{start}[methods.routes.sop]\n{route}\n[criteria]{end.split('[criteria]')[1]}"
    if told is None:
        assert len(parse(text, "x.toml").judge("sop").method.ends()) >= 2
    else:
        with pytest.raises(StudyError) as caught:
            parse(text, "x.toml")
        assert told in str(caught.value)
