"""Reader: a TOML text with a list of the mistakes found in it, each at its place."""

import tomllib

from pydantic import ValidationError

from workbench.errors import Mistake, StudyError, suggestion
from workbench.places import Places, syntax_place
from workbench.registry import SettingsError, problems_of, shown


class Reader:
    """A parsed experiment file on which its readers note what is wrong; a path leads from table to setting."""

    def __init__(self, file, text):
        """Parse the text; raises StudyError where it is no TOML."""
        self.file, self.mistakes = file, []
        try:
            self.document = tomllib.loads(text)
        except tomllib.TOMLDecodeError as error:
            raise StudyError([Mistake(file, *syntax_place(error, text))]) from None
        except (ValueError, RecursionError):
            sentence = (
                "a number of thousands of digits, or hundreds of brackets within one another, cannot be read"
            )
            raise StudyError([Mistake(file, 1, 1, sentence)]) from None
        self.places = Places(text)

    def wrong(self, path, text):
        """Note a mistake in the value at the path."""
        self.mistakes.append(Mistake(self.file, *self.places.find(path), f"{label(path)}: {text}"))

    def unknown(self, path, known):
        """Note that the key at the path is none of those that are known here."""
        place = self.places.key(path)
        self.mistakes.append(
            Mistake(self.file, *place, f"{path[-1]}: unknown key; {suggestion(path[-1], known)}")
        )

    def value(self, *path):
        """What stands at the path; None where nothing does."""
        found = self.document
        for step in path:
            if not isinstance(found, dict) or step not in found:
                return None
            found = found[step]
        return found

    def table(self, path, known=None):
        """The table at the path, empty where it is missing or no table; keys not among the known are mistakes."""
        found = self.value(*path)
        if found is None:
            return {}
        if not isinstance(found, dict):
            self.wrong(path, f"a table wanted; got {shown(found)}")
            return {}
        for key in found:
            if known is not None and key not in known:
                self.unknown((*path, key), known)
        return found

    def record(self, kind, path):
        """A record of the settings in the table at the path; None where they are wrong."""
        table = self.table(path)
        try:
            return kind(**table)
        except ValidationError as error:
            self.problems(path, problems_of(error), kind.__dataclass_fields__)
            return None

    def part(self, shelf, path, word, settings):
        """A part from the shelf by its word in the file; None where word or settings are wrong."""
        if word not in shelf:
            self.wrong(path, f"no {shelf.kind} is called {shown(word)}; {suggestion(word, shelf.names())}")
            return None
        try:
            return shelf.make(word, settings)
        except SettingsError as error:
            self.problems(path, error.problems, shelf[word].__dataclass_fields__)
            return None

    def named_part(self, shelf, path, key, found):
        """A part from a table that names it under the key and holds its settings; None where it is wrong."""
        if not isinstance(found, dict):
            self.wrong(path, f"a word or a table with '{key}' wanted; got {shown(found)}")
            return None
        if key not in found:
            self.wrong(path, f"'{key}' is missing; {suggestion('', shelf.names())}")
            return None
        settings = {name: value for name, value in found.items() if name != key}
        where = (*path, key) if found[key] not in shelf else path
        return self.part(shelf, where, found[key], settings)

    def problems(self, path, problems, known):
        """Note problems that were found in the settings of the table at the path."""
        for inner, text in problems:
            where = (*path, *inner)
            if text == "unknown setting":
                if known:
                    self.unknown(where, known)
                else:
                    self.mistakes.append(
                        Mistake(
                            self.file,
                            *self.places.key(where),
                            f"{where[-1]}: unknown key; there are no settings here",
                        )
                    )
            elif text == "this setting is missing":
                self.wrong(path, f"'{inner[-1]}' is missing")
            else:
                self.wrong(where, text)

    def numbers(self, path, wanted=None, per="group"):
        """The list of finite numbers at the path as a tuple of floats; None where it is anything else."""
        found = self.value(*path)
        if not isinstance(found, list):
            self.wrong(path, f"a list of numbers wanted, one per {per}; got {shown(found)}")
            return None
        good = True
        for place, number in enumerate(found):
            if (
                isinstance(number, bool)
                or not isinstance(number, int | float)
                or abs(number) > 1e300
                or number != number
            ):
                self.wrong((*path, place), f"a finite number wanted; got {shown(number)}")
                good = False
        if wanted is not None and len(found) != wanted:
            self.wrong(path, f"{wanted} numbers wanted, one per {per}; got {len(found)}")
            good = False
        return tuple(float(number) for number in found) if good else None


def label(path):
    """The word by which a message calls a place: the factor under `vary`, else the last key."""
    words = [step for step in path if isinstance(step, str)]
    if not words:
        return "file"
    return words[1] if words[0] == "vary" and len(words) > 1 else words[-1]
