"""What a user can get wrong, in full sentences with its place."""

from dataclasses import dataclass
from difflib import get_close_matches


class WorkbenchError(Exception):
    """Something a user can put right; its text is a sentence and the command ends with `status`."""

    status = 2


class WorkError(WorkbenchError):
    """The work itself failed, or a check of the results did not hold."""

    status = 1


@dataclass(frozen=True)
class Mistake:
    """One thing wrong in a file: where, and what is wanted instead."""

    file: str
    line: int
    column: int
    text: str

    def __str__(self):
        return f"{self.file}:{self.line}:{self.column}: {self.text}"


class StudyError(WorkbenchError):
    """An experiment file that cannot be used; `mistakes` holds every one of them in the order of the file."""

    def __init__(self, mistakes):
        self.mistakes = sorted(dict.fromkeys(mistakes), key=lambda mistake: (mistake.line, mistake.column))
        super().__init__("\n".join(str(mistake) for mistake in self.mistakes))


def suggestion(word, known):
    """A closing remark that names the nearest known word, or else lists what is known."""
    near = get_close_matches(str(word), list(known), n=1, cutoff=0.6)
    if near:
        return f"did you mean '{near[0]}'?"
    return "known: " + ", ".join(known)
