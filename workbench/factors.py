"""The [vary] tables of an experiment file: factors, their levels, and combinations left out."""

from dataclasses import dataclass

import numpy as np

from workbench.disturbances import DISTURBANCES
from workbench.errors import suggestion
from workbench.registry import shown
from workbench.shapes import SHAPES

FACTORS = ("sizes", "shape", "spread", "difference", "disturbance")

DEFAULTS = {"shape": "normal", "spread": "equal", "difference": "none", "disturbance": "none"}
"""The name of the one level of a factor that a file leaves out."""

MOST_GROUPS, MOST_VALUES, MOST_CONDITIONS = 1_000, 1_000_000, 100_000


@dataclass(frozen=True)
class Factors:
    """What varies: for each factor its levels by name, and the combinations that are not wanted."""

    levels: dict
    """Factor to {level name: value}, factors in the order of the file; None for a value that is wrong."""
    left_out: tuple
    """Tables of factor to level name; a combination that matches one in every factor it names is left out."""
    groups: int | None
    """k, the number of groups; None where the sizes are wrong."""

    def content(self):
        """Plain content for the plan's hash."""
        levels = {
            factor: {name: plain_level(value) for name, value in levels.items()}
            for factor, levels in self.levels.items()
        }
        return {"levels": levels, "order": list(levels), "left_out": list(self.left_out)}

    def combinations(self):
        """Every wanted combination as {factor: level name}; the file's first factor changes slowest."""
        combined = [{}]
        for factor, levels in self.levels.items():
            combined = [one | {factor: name} for one in combined for name in levels]
        return [one for one in combined if not self.is_left_out(one)]

    def is_left_out(self, combination):
        """Whether some [[leave_out]] table matches the combination."""
        return any(all(combination[factor] == name for factor, name in out.items()) for out in self.left_out)


def plain_level(value):
    """A level's value as plain content; names of levels are no part of it, settings of parts are."""
    if hasattr(value, "content"):
        return value.content()
    return [plain_level(item) if hasattr(item, "content") else item for item in value]


def read_factors(reader, question):
    """The Factors of the [vary] tables; mistakes are noted on the reader."""
    reader.table(("vary",), FACTORS)
    sizes = read_sizes(reader)
    groups = next((len(level) for level in sizes.values() if level is not None), None)
    multiplicative = question is not None and question.scale == "multiplicative"
    read = {
        "sizes": lambda: sizes,
        "shape": lambda: read_levels(reader, "shape", read_shape),
        "spread": lambda: read_levels(
            reader, "spread", lambda r, path, found: read_row(r, path, groups, True)
        ),
        "difference": lambda: read_levels(
            reader, "difference", lambda r, path, found: read_row(r, path, groups, multiplicative)
        ),
        "disturbance": lambda: read_levels(reader, "disturbance", read_disturbances),
    }
    defaults = {
        "shape": SHAPES.make("normal"),
        "spread": (1.0,) * (groups or 0),
        "difference": (1.0 if multiplicative else 0.0,) * (groups or 0),
        "disturbance": (),
    }
    written = [factor for factor in reader.table(("vary",)) if factor in FACTORS]
    levels = {factor: read[factor]() for factor in written}
    for factor, name in DEFAULTS.items():
        levels.setdefault(factor, {name: defaults[factor]})
    levels.setdefault("sizes", sizes)
    factors = Factors(levels, read_left_out(reader, levels), groups)
    check_quantity(reader, factors, question)
    check_number(reader, factors)
    return factors


def read_levels(reader, factor, read_level):
    """Level name to value of one factor, each value read by read_level(reader, path, found)."""
    table = reader.table(("vary", factor))
    if not table and isinstance(reader.value("vary", factor), dict):
        reader.wrong(("vary", factor), "at least one level wanted; the table is empty")
    return {name: read_level(reader, ("vary", factor, name), found) for name, found in table.items()}


def read_sizes(reader):
    """Level name to the sizes of the groups."""
    if reader.value("vary", "sizes") is None:
        reader.wrong(("vary",), "the table [vary.sizes] is missing; it says how many values each group has")
        return {}
    levels = read_levels(reader, "sizes", read_one_sizes)
    groups = next((len(level) for level in levels.values() if level is not None), None)
    for name, level in levels.items():
        if level is not None and len(level) != groups:
            reader.wrong(
                ("vary", "sizes", name), f"{groups} numbers wanted, as in the first level; got {len(level)}"
            )
    return levels


def read_one_sizes(reader, path, found):
    """The sizes at a path as a tuple of whole numbers; None where they are wrong."""
    if not isinstance(found, list):
        reader.wrong(path, f"a list of whole numbers wanted, one per group; got {shown(found)}")
        return None
    before = len(reader.mistakes)
    for place, size in enumerate(found):
        if isinstance(size, bool) or not isinstance(size, int):
            reader.wrong((*path, place), f"a whole number wanted; got {shown(size)}")
        elif size < 2:
            reader.wrong((*path, place), f"at least 2 values in every group wanted; got {size}")
    if len(found) < 2:
        reader.wrong(path, f"at least 2 groups wanted; got {len(found)}")
    elif len(found) > MOST_GROUPS:
        reader.wrong(path, f"at most {MOST_GROUPS:,} groups wanted; got {len(found):,}")
    if len(reader.mistakes) == before and sum(found) > MOST_VALUES:
        reader.wrong(path, f"at most {MOST_VALUES:,} values in a dataset wanted; got {sum(found):,}")
    return tuple(found) if len(reader.mistakes) == before else None


def read_row(reader, path, groups, above_zero):
    """One number per group; None where they are wrong."""
    numbers = reader.numbers(path, groups)
    for place, number in enumerate(numbers or ()):
        if above_zero and number <= 0:
            reason = "" if path[1] == "spread" else " on the multiplicative scale"
            reader.wrong(
                (*path, place), f"a number above 0 wanted{reason}; got {shown(reader.value(*path)[place])}"
            )
            numbers = None
    return numbers


def read_shape(reader, path, found):
    """The Shape at a path; None where it is wrong."""
    if isinstance(found, str):
        return reader.part(SHAPES, path, found, {})
    return reader.named_part(SHAPES, path, "family", found)


def read_disturbances(reader, path, found):
    """The Disturbances at a path, in their order; None where one is wrong."""
    if not isinstance(found, list):
        reader.wrong(
            path,
            f'a list of disturbances wanted, such as [{{ kind = "round", to = 0.5 }}]; got {shown(found)}',
        )
        return None
    parts = []
    for place, one in enumerate(found):
        where = (*path, place)
        if isinstance(one, str):
            parts.append(reader.part(DISTURBANCES, where, one, {}))
        else:
            parts.append(reader.named_part(DISTURBANCES, where, "kind", one))
    return None if None in parts else tuple(parts)


def read_left_out(reader, levels):
    """The [[leave_out]] tables."""
    found = reader.value("leave_out")
    if found is None:
        return ()
    if not isinstance(found, list) or not all(isinstance(one, dict) for one in found):
        reader.wrong(
            ("leave_out",), "tables [[leave_out]] wanted, each naming a level of one or more factors"
        )
        return ()
    for place, one in enumerate(found):
        if not one:
            reader.wrong(
                ("leave_out", place), "at least one factor wanted; an empty table would leave out everything"
            )
        for factor, name in one.items():
            path = ("leave_out", place, factor)
            if factor not in FACTORS:
                reader.unknown(path, FACTORS)
            elif name not in levels[factor]:
                reader.wrong(
                    path, f"no level of {factor} is called {shown(name)}; {suggestion(name, levels[factor])}"
                )
    return tuple(dict(one) for one in found)


def check_quantity(reader, factors, question):
    """Note a mistake where the quantity to be compared does not exist in some population."""
    if question is None:
        return
    for name, shape in factors.levels["shape"].items():
        for spreads in (level for level in factors.levels["spread"].values() if level is not None):
            if shape is not None and not all(
                np.isfinite(compared(question, shape, spread)) for spread in spreads
            ):
                reader.wrong(
                    ("vary", "shape", name),
                    f"exp(spread * {shape.name}) has no {question.estimand.quantity.replace('_', ' ')} at a spread of "
                    f"{max(spreads):g}; compare something else, or narrow the spread",
                )
                break


def compared(question, shape, spread):
    """The compared quantity of a shape in its own units; NaN or infinite where it does not exist."""
    if question.scale == "additive":
        return 0.0 if question.compare == "geometric means" else question.estimand.additive(shape)
    return question.estimand.multiplicative(shape, spread)


def check_number(reader, factors):
    """Note a mistake where there are too many conditions, or none."""
    number = int(np.prod([len(levels) for levels in factors.levels.values()], dtype=float))
    if number > MOST_CONDITIONS:
        reader.wrong(
            ("vary",), f"at most {MOST_CONDITIONS:,} conditions wanted; these levels give {number:,}"
        )
    elif number and not reader.mistakes and not factors.combinations():
        reader.wrong(("leave_out",), "every condition is left out")
