"""The tables of an experiment file that hold single settings: study, criteria, simulation."""

from dataclasses import dataclass
from typing import Annotated, Any

from annotated_types import Ge, Gt, Le, Lt

from workbench.criteria import CRITERIA
from workbench.criteria.size import BANDS
from workbench.errors import suggestion
from workbench.estimands import ESTIMANDS
from workbench.registry import SettingsError, record, shown

SCALES = ("additive", "multiplicative")


@record
class StudyTable:
    """The [study] table as it may be written."""

    title: str = ""
    outcome: str = ""
    unit: str = ""
    note: str = ""
    compare: Any = None
    scale: Any = "additive"
    centre: float | None = None
    alpha: Any = 0.05


@record
class CriteriaTable:
    """The [criteria] table as it may be written."""

    size: Any = "liberal"
    power: Any = None
    admit: Any = ()
    tie: Annotated[float, Ge(0), Lt(1)] = 0.01
    confidence: Annotated[float, Gt(0), Lt(1)] = 0.95


@record
class Simulation:
    """How much work is done, and from which seed."""

    seed: Annotated[int, Ge(0), Lt(2**63)] = 1
    replications: Annotated[int, Ge(1), Le(10**9)] = 100_000


@dataclass(frozen=True)
class Question:
    """What the study asks, and in which terms."""

    title: str
    outcome: str
    unit: str
    note: str
    compare: str
    estimand: object
    scale: str
    centre: float
    alphas: tuple


@dataclass(frozen=True)
class Criteria:
    """What was fixed before the results."""

    size: object
    power: object
    admit: tuple
    tie: float
    confidence: float

    @property
    def fixed(self):
        """The criteria that judge rows of the table."""
        return [self.size] if self.power is None else [self.size, self.power]

    def content(self):
        """Plain content for the plan's hash."""
        return {
            "fixed": [criterion.content() for criterion in self.fixed],
            "admit": list(self.admit),
            "tie": self.tie,
            "confidence": self.confidence,
        }


def read_question(reader):
    """The Question of the [study] table; None where something in it is wrong."""
    path = ("study",)
    before = len(reader.mistakes)
    if reader.value("study") is None:
        reader.wrong((), "the table [study] is missing; it says at least what to compare")
        return None
    table = reader.record(StudyTable, path)
    compare, scale = reader.value("study", "compare"), reader.table(path).get("scale", "additive")
    if compare is None:
        reader.wrong(path, f"'compare' is missing; one of {', '.join(ESTIMANDS.names())} wanted")
    elif compare not in ESTIMANDS.names():
        reader.wrong(
            (*path, "compare"),
            f"{shown(compare)} cannot be compared; {suggestion(compare, ESTIMANDS.names())}",
        )
    if scale not in SCALES:
        reader.wrong((*path, "scale"), f"no scale is called {shown(scale)}; {suggestion(scale, SCALES)}")
    elif compare == "geometric means" and scale == "additive":
        reader.wrong(
            (*path, "compare"), 'geometric means need the multiplicative scale; set scale = "multiplicative"'
        )
    alphas = read_alphas(reader)
    if table is None or len(reader.mistakes) > before:
        return None
    centre = table.centre if table.centre is not None else (0.0 if scale == "additive" else 1.0)
    if scale == "multiplicative" and centre <= 0:
        reader.wrong(
            (*path, "centre"), f"a number above 0 wanted on the multiplicative scale; got {shown(centre)}"
        )
    texts = (table.title, table.outcome, table.unit, table.note)
    return Question(*texts, compare, ESTIMANDS.make(compare), scale, centre, alphas)


def read_alphas(reader):
    """The levels under study.alpha as a tuple, one or several."""
    path = ("study", "alpha")
    found = reader.value(*path)
    if found is None:
        return (0.05,)
    several = isinstance(found, list)
    if several and not found:
        reader.wrong(path, "at least one level wanted; got an empty list")
    alphas = []
    for place, level in enumerate(found if several else [found]):
        where = (*path, place) if several else path
        if isinstance(level, bool) or not isinstance(level, int | float) or not 0 < level < 1:
            reader.wrong(where, f"a level between 0 and 1 wanted; got {shown(level)}")
        elif level in alphas:
            reader.wrong(where, f"the level {level} is written twice")
        else:
            alphas.append(float(level))
    return tuple(alphas)


def read_simulation(reader):
    """The Simulation of the [simulation] table; None where something in it is wrong."""
    return reader.record(Simulation, ("simulation",))


def read_criteria(reader, factors, judges, question):
    """The Criteria of the [criteria] table; None where something in it is wrong."""
    table = reader.record(CriteriaTable, ("criteria",))
    size = read_size(reader)
    power = read_power(reader, factors, question)
    admit = read_admit(reader, [judge.name for judge in judges])
    if table is None or size is None:
        return None
    return Criteria(size, power, admit, table.tie, table.confidence)


def read_size(reader):
    """The size criterion, by word or by limits."""
    path = ("criteria", "size")
    found = reader.value(*path)
    if found is None:
        return CRITERIA.make("size", {"word": "liberal"})
    if isinstance(found, str):
        if found not in BANDS:
            reader.wrong(path, f"no limits are called {shown(found)}; {suggestion(found, BANDS)}")
            return None
        return CRITERIA.make("size", {"word": found})
    if not isinstance(found, dict):
        reader.wrong(path, f'"liberal", "stringent" or {{ lower = …, upper = … }} wanted; got {shown(found)}')
        return None
    settings = {"lower": 0.0, "upper": 1.0} | reader.table(path, ("lower", "upper"))
    settings = {name: settings[name] for name in ("lower", "upper")}
    try:
        size = CRITERIA.make("size", settings)
    except SettingsError as error:
        reader.problems(path, error.problems, ("lower", "upper"))
        return None
    if not size.lower < size.upper:
        reader.wrong(path, f"a lower limit below the upper one wanted; got {size.lower} and {size.upper}")
    return size


def read_power(reader, factors, question):
    """The power criterion; None where the file has none or it is wrong."""
    path = ("criteria", "power")
    if reader.value(*path) is None:
        return None
    if not isinstance(reader.value(*path), dict):
        reader.wrong(path, f'{{ at = "…", least = 0.80 }} wanted; got {shown(reader.value(*path))}')
        return None
    power = reader.part(CRITERIA, path, "power", reader.table(path))
    if question is not None and isinstance(at := reader.value(*path, "at"), str):
        check_target(reader, (*path, "at"), at, factors.levels["difference"], question.compare)
    return power


def check_target(reader, path, at, differences, compare):
    """Note a mistake where the difference that must not be missed is unknown, or is none."""
    if at not in differences:
        reader.wrong(path, f"no difference is called {shown(at)}; {suggestion(at, differences)}")
    elif differences[at] is not None and len(set(differences[at])) == 1 and compare != "distributions":
        reader.wrong(path, f"nothing differs at '{at}', so there is nothing to detect")


def read_admit(reader, names):
    """The methods that are let in although they answer another question."""
    path = ("criteria", "admit")
    found = reader.value(*path)
    if found is None:
        return ()
    if not isinstance(found, list):
        reader.wrong(path, f"a list of method names wanted; got {shown(found)}")
        return ()
    for place, name in enumerate(found):
        if name not in names:
            reader.wrong((*path, place), f"{shown(name)} is not under methods.use; {suggestion(name, names)}")
    return tuple(found)
