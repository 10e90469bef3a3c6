"""The [methods] table of an experiment file: methods, with settings or without, and routes under their names."""

from workbench.checks import CHECKS
from workbench.errors import suggestion
from workbench.methods import METHODS
from workbench.outliers import RULES
from workbench.records import Judge
from workbench.registry import shown
from workbench.routes.dropping import Dropping
from workbench.routes.route import Route
from workbench.routes.smallest import Smallest

ROUTE_KEYS = ("check", "level", "if_passed", "if_failed")

DEEPEST = 50
"""Checks one behind another in a route; more is a slip, and would exhaust the reader."""


def read_judges(reader):
    """The Judges of the [methods] table, in the order of `use`."""
    reader.table(("methods",), ("use", "settings", "routes"))
    known = read_settings(reader)
    known |= read_routes(reader, known)
    path = ("methods", "use")
    use = reader.value(*path)
    if not isinstance(reader.value("methods"), dict | None):
        return ()
    if use is None:
        reader.wrong(path, f"'use' is missing; a list of methods wanted, from {', '.join(METHODS.names())}")
        return ()
    if not isinstance(use, list) or not use:
        reader.wrong(path, f"a list of at least one method wanted; got {shown(use)}")
        return ()
    return tuple(
        judge
        for place, name in enumerate(use)
        if (judge := read_judge(reader, (*path, place), name, use[:place], known)) is not None
    )


def read_judge(reader, path, name, before, known):
    """The Judge of one name under `use`; None where there is no such method or route."""
    if name in before:
        reader.wrong(path, f"{shown(name)} is written twice")
    elif isinstance(name, str) and name in known:
        return Judge(name, known[name])
    elif isinstance(name, str) and name in METHODS:
        return Judge(name, METHODS.make(name))
    else:
        words = [*METHODS.names(), *known]
        reader.wrong(path, f"no method or route is called {shown(name)}; {suggestion(name, words)}")
    return None


def read_settings(reader):
    """Name to method of [methods.settings]; methods with a mistake are there as None."""
    path = ("methods", "settings")
    return {
        name: reader.named_part(METHODS, (*path, name), "method", found)
        for name, found in reader.table(path).items()
    }


def read_routes(reader, settings):
    """Name to Route of [methods.routes]; routes with a mistake are there as None."""
    path = ("methods", "routes")
    found = {}
    for name in reader.table(path):
        if name in METHODS or name in settings:
            reader.wrong((*path, name), f"'{name}' is the name of a method; give the route another")
        found[name] = read_route(reader, (*path, name), settings)
    return found


def read_route(reader, path, settings):
    """The Procedure in the table at the path; None where something in it is wrong."""
    found = reader.value(*path)
    if not isinstance(found, dict):
        reader.wrong(path, f"a table with {', '.join(ROUTE_KEYS)} wanted; got {shown(found)}")
        return None
    if len(path) > DEEPEST + 2:
        reader.wrong(path, f"at most {DEEPEST} checks one behind another wanted")
        return None
    if "smallest_p_of" in found:
        return read_smallest(reader, path, settings)
    if "drop_outliers" in found:
        return read_dropping(reader, path, settings)
    return read_two_stages(reader, path, settings)


def read_two_stages(reader, path, settings):
    """The Route in the table at the path; None where something in it is wrong."""
    table = reader.table(path, ROUTE_KEYS)
    for key in ROUTE_KEYS:
        if key not in table and key != "level":
            reader.wrong(path, f"'{key}' is missing")
    check = read_check(reader, (*path, "check"), table["check"]) if "check" in table else None
    level = read_level(reader, (*path, "level"), table.get("level", 0.05))
    ways = [
        read_way(reader, (*path, key), table[key], settings)
        for key in ("if_passed", "if_failed")
        if key in table
    ]
    if check is None or level is None or None in ways or len(ways) < 2:
        return None
    return Route(check, level, *ways)


def read_smallest(reader, path, settings):
    """The Smallest in the table at the path; None where something in it is wrong."""
    found = reader.table(path, ("smallest_p_of",))["smallest_p_of"]
    where = (*path, "smallest_p_of")
    if not isinstance(found, list) or len(found) < 2:
        reader.wrong(where, f"a list of at least two methods wanted; got {shown(found)}")
        return None
    ways = [read_way(reader, (*where, place), way, settings) for place, way in enumerate(found)]
    return None if None in ways else Smallest(tuple(ways))


def read_dropping(reader, path, settings):
    """The Dropping in the table at the path; None where something in it is wrong."""
    table = reader.table(path, ("drop_outliers", "then"))
    rule = table["drop_outliers"]
    if not isinstance(rule, str) or rule not in RULES:
        known = suggestion(rule, RULES)
        reader.wrong((*path, "drop_outliers"), f"no rule for outliers is called {shown(rule)}; {known}")
    if "then" not in table:
        reader.wrong(path, "'then' is missing")
        return None
    then = read_way(reader, (*path, "then"), table["then"], settings)
    return Dropping(RULES[rule], then) if isinstance(rule, str) and rule in RULES and then else None


def read_level(reader, path, found):
    """The level of a check; None where it is none."""
    if isinstance(found, bool) or not isinstance(found, int | float) or not 0 < found < 1:
        reader.wrong(path, f"a level between 0 and 1 wanted; got {shown(found)}")
        return None
    return float(found)


def read_check(reader, path, found):
    """The check at a path, by its word or as a table with settings; None where it is wrong."""
    if isinstance(found, str):
        return reader.part(CHECKS, path, found, {})
    return reader.named_part(CHECKS, path, "check", found)


def read_way(reader, path, found, settings):
    """The method or Procedure that one way of a route leads to; None where something in it is wrong."""
    if not isinstance(found, str):
        return read_route(reader, path, settings)
    return settings[found] if found in settings else reader.part(METHODS, path, found, {})
