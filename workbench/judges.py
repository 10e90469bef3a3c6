"""The [methods] table of an experiment file: methods and routes under their names."""

from workbench.checks import CHECKS
from workbench.errors import suggestion
from workbench.methods import METHODS
from workbench.records import Judge
from workbench.registry import shown
from workbench.routes.route import Route

ROUTE_KEYS = ("check", "level", "if_passed", "if_failed")

DEEPEST = 50
"""Checks one behind another in a route; more is a slip, and would exhaust the reader."""


def read_judges(reader):
    """The Judges of the [methods] table, in the order of `use`."""
    reader.table(("methods",), ("use", "routes"))
    routes = read_routes(reader)
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
        if (judge := read_judge(reader, (*path, place), name, use[:place], routes)) is not None
    )


def read_judge(reader, path, name, before, routes):
    """The Judge of one name under `use`; None where there is no such method or route."""
    if name in before:
        reader.wrong(path, f"{shown(name)} is written twice")
    elif isinstance(name, str) and name in routes:
        return Judge(name, routes[name])
    elif isinstance(name, str) and name in METHODS:
        return Judge(name, METHODS.make(name))
    else:
        known = [*METHODS.names(), *routes]
        reader.wrong(path, f"no method or route is called {shown(name)}; {suggestion(name, known)}")
    return None


def read_routes(reader):
    """Name to Route of [methods.routes]; routes with a mistake are there as None."""
    path = ("methods", "routes")
    found = {}
    for name in reader.table(path):
        if name in METHODS:
            reader.wrong((*path, name), f"'{name}' is the name of a method; give the route another")
        found[name] = read_route(reader, (*path, name))
    return found


def read_route(reader, path):
    """The Route in the table at the path; None where something in it is wrong."""
    if not isinstance(reader.value(*path), dict):
        reader.wrong(path, f"a table with {', '.join(ROUTE_KEYS)} wanted; got {shown(reader.value(*path))}")
        return None
    if len(path) > DEEPEST + 2:
        reader.wrong(path, f"at most {DEEPEST} checks one behind another wanted")
        return None
    table = reader.table(path, ROUTE_KEYS)
    for key in ROUTE_KEYS:
        if key not in table and key != "level":
            reader.wrong(path, f"'{key}' is missing")
    check = reader.part(CHECKS, (*path, "check"), table["check"], {}) if "check" in table else None
    level = read_level(reader, (*path, "level"), table.get("level", 0.05))
    ways = [read_way(reader, (*path, key), table[key]) for key in ("if_passed", "if_failed") if key in table]
    if check is None or level is None or None in ways or len(ways) < 2:
        return None
    return Route(check, level, *ways)


def read_level(reader, path, found):
    """The level of a check; None where it is none."""
    if isinstance(found, bool) or not isinstance(found, int | float) or not 0 < found < 1:
        reader.wrong(path, f"a level between 0 and 1 wanted; got {shown(found)}")
        return None
    return float(found)


def read_way(reader, path, found):
    """The method or Route that one way of a route leads to; None where something in it is wrong."""
    if isinstance(found, str):
        return reader.part(METHODS, path, found, {})
    return read_route(reader, path)
