"""Study: an experiment file read and checked, every mistake at once."""

from dataclasses import dataclass, field
from pathlib import Path

from workbench.errors import StudyError, WorkbenchError
from workbench.factors import Factors, read_factors
from workbench.judges import read_judges
from workbench.keys import content_key
from workbench.places import replace_setting
from workbench.reader import Reader
from workbench.registry import shown
from workbench.sections import Criteria, Question, Simulation, read_criteria, read_question, read_simulation

FORMAT = 1

TABLES = ("format", "study", "groups", "vary", "leave_out", "methods", "criteria", "simulation")


@dataclass(frozen=True)
class Study:
    """What an experiment file asks: the question, the factors, the methods, the criteria, the work to be done."""

    file: str
    text: str = field(repr=False)
    question: Question
    group_names: tuple
    factors: Factors
    judges: tuple
    criteria: Criteria
    simulation: Simulation

    @property
    def title(self):
        """The study's title, or the file's name where it has none."""
        return self.question.title or Path(self.file).stem

    @property
    def stem(self):
        """The file's name without folder and ending: the name of its results."""
        return Path(self.file).stem

    @property
    def levels(self):
        """The nominal levels; criteria and decision use the first."""
        return self.question.alphas

    def judge(self, name):
        """The method or route of the given name."""
        return next(judge for judge in self.judges if judge.name == name)

    def content(self):
        """All that decides what is simulated, tabulated and decided; titles and notes are no part of it."""
        return {
            "format": FORMAT,
            "question": [self.question.compare, self.question.scale, self.question.centre, list(self.levels)],
            "factors": self.factors.content(),
            "methods": {judge.name: judge.method.key() for judge in self.judges},
            "criteria": self.criteria.content(),
            "simulation": [self.simulation.seed, self.simulation.replications],
        }

    @property
    def key(self):
        """The plan's hash: 16 hex digits that name what this study does."""
        return content_key(self.content())


def read(path):
    """The Study in an experiment file; raises StudyError with every mistake listed, or WorkbenchError."""
    return parse(read_text(path), str(path))


def read_text(path):
    """The text of an experiment file; raises WorkbenchError where it cannot be read."""
    try:
        data = Path(path).read_bytes()
    except FileNotFoundError:
        raise WorkbenchError(f"{path}: there is no such file") from None
    except OSError as error:
        raise WorkbenchError(f"{path}: cannot be read ({error.strerror or error})") from None
    try:
        return data.decode("utf-8").removeprefix("\ufeff")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        column = error.start - (data.rfind(b"\n", 0, error.start) + 1) + 1
        raise WorkbenchError(
            f"{path}:{line}:{column}: the file is not UTF-8 text; save it as UTF-8"
        ) from None


def parse(text, file):
    """The Study in the text of an experiment file; raises StudyError with every mistake listed."""
    reader = Reader(file, text)
    reader.table((), TABLES)
    check_format(reader)
    question = read_question(reader)
    factors = read_factors(reader, question)
    names = read_group_names(reader, factors.groups)
    judges = read_judges(reader)
    criteria = read_criteria(reader, factors, judges, question)
    simulation = read_simulation(reader)
    if reader.mistakes:
        raise StudyError(reader.mistakes)
    return Study(file, text, question, names, factors, judges, criteria, simulation)


def check_format(reader):
    """Note a mistake where the file's format is not the one this program reads."""
    found = reader.value("format")
    if found is None:
        reader.wrong((), "'format' is missing; write `format = 1` on the first line")
    elif isinstance(found, bool) or found != FORMAT:
        reader.wrong(("format",), f"1 wanted, the format that this program reads; got {shown(found)}")


def read_group_names(reader, groups):
    """The names of the groups, 1, 2, 3 … where the file gives none."""
    reader.table(("groups",), ("names",))
    names = reader.value("groups", "names")
    if names is None:
        return tuple(str(number) for number in range(1, (groups or 0) + 1))
    path = ("groups", "names")
    if not isinstance(names, list) or not all(isinstance(name, str) and name.strip() for name in names):
        reader.wrong(path, f"a list of texts wanted; got {shown(names)}")
        return ()
    for name in {name for name in names if names.count(name) > 1}:
        reader.wrong(
            (*path, names.index(name, names.index(name) + 1)), f"the group name '{name}' is written twice"
        )
    if groups is not None and len(names) != groups:
        reader.wrong(path, f"{groups} names wanted, one per group of [vary.sizes]; got {len(names)}")
    return tuple(names)


def with_overrides(study, seed=None, replications=None):
    """The study with another seed or number of replications, written into its text."""
    text = study.text
    for name, value in (("seed", seed), ("replications", replications)):
        if value is not None and getattr(study.simulation, name) != value:
            text = replace_setting(text, ("simulation", name), str(value))
    return study if text == study.text else parse(text, study.file)
