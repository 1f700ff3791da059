"""One wrong thing as data, and the exception that carries all of them.

Readers and checkers gather :class:`Problem` records; nothing here prints, and nothing
here imports any other room.
"""

from dataclasses import dataclass, field, replace


@dataclass(frozen=True, slots=True)
class Problem:
    """One thing that is wrong with what the user gave.

    Attributes
    ----------
    place
        Dotted name of the value, such as ``steps[2].volume``; empty for the whole file.
    message
        What is wrong and what is wanted, in bench language, without the place.
    file
        Name of the file as the user gave it, or None where there is none.
    line
        Line of the value in that file, only where it is really known.
    """

    place: str
    message: str
    file: str | None = None
    line: int | None = None

    def __str__(self) -> str:
        where = self.file or ""
        if where and self.line is not None:
            where = f"{where}:{self.line}"
        return ": ".join(part for part in (where, self.place, self.message) if part)


class InputError(Exception):
    """What the user gave is wrong; carries one :class:`Problem` or more.

    Attributes
    ----------
    problems
        All the problems found, in the order of the file.
    """

    def __init__(self, *problems: Problem) -> None:
        super().__init__("\n".join(str(problem) for problem in problems))
        self.problems = problems


@dataclass(slots=True)
class Problems:
    """A collector that a checker fills and its caller reads."""

    found: list[Problem] = field(default_factory=list)

    def add(self, place: str, message: str, *, line: int | None = None) -> None:
        """Note one problem at a place."""
        self.found.append(Problem(place, message, line=line))

    def raise_if_any(self, file: str | None = None) -> None:
        """Raise an `InputError` with everything noted, naming the file; else return."""
        if self.found:
            raise InputError(*(replace(p, file=p.file or file) for p in self.found))
