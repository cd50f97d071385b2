"""The errors and warnings of probsoil, in one tree.

Everything the package raises on purpose descends from `ProbsoilError`, so a caller can
catch the lot; argument errors are also `ValueError`, as Python users expect.
"""

from collections.abc import Sequence
from dataclasses import dataclass


class ProbsoilError(Exception):
    """Base of every error that probsoil raises on purpose."""


class ParameterError(ProbsoilError, ValueError):
    """An argument is outside its range."""


class ShapeError(ProbsoilError, ValueError):
    """An array has the wrong shape."""


class DependenceError(ParameterError):
    """Correlations that cannot hold together."""


class ConvergenceError(ProbsoilError):
    """An iteration stopped short; `best` holds what was reached.

    Attributes
    ----------
    best : float, [any]
        Best value reached, in the unit of the quantity sought.
    error : float, [any]
        Error estimate that goes with `best`, same unit.
    """

    def __init__(self, message: str, *, best: float, error: float) -> None:
        super().__init__(message)
        self.best = best
        self.error = error


class ResultsError(ProbsoilError):
    """A results folder cannot be read, written or continued."""


class UnfitFolderError(ResultsError):
    """A results folder holds what does not go with what is asked for, such as the chunks of another run."""


class StoppedEarly(ProbsoilError):  # noqa: N818 - a partial success, not a fault
    """The user interrupted a campaign; what was finished is kept.

    Attributes
    ----------
    kept : bool
        Whether there is anything to keep: finished chunks, or results.
    """

    def __init__(self, message: str, *, kept: bool = True) -> None:
        super().__init__(message)
        self.kept = kept


@dataclass(frozen=True, slots=True, kw_only=True)
class Fault:
    """One mistake in a file a user wrote.

    Attributes
    ----------
    file : str
        File as the user named it.
    line, column : int or None, [-]
        Place in the file counted from 1; None where there is no single place.
    key : str
        Path of the key, list items counted from 1, e.g. ``layers[2].lambda.mean``.
    message : str
        What is wrong.
    given : str or None
        What was written.
    allowed : str or None
        The rule: what may be written.
    hint : str or None
        Remedy, such as the nearest right key.
    excerpt : str or None
        The line of the file.
    span : tuple of int or None, [-]
        First column, counted from 1, and length of the value in `excerpt`, for underlining.
    """

    file: str
    line: int | None = None
    column: int | None = None
    key: str = ""
    message: str
    given: str | None = None
    allowed: str | None = None
    hint: str | None = None
    excerpt: str | None = None
    span: tuple[int, int] | None = None

    def __str__(self) -> str:
        """Return the fault as a compiler would print it."""
        place = ":".join(str(part) for part in (self.file, self.line, self.column) if part is not None)
        head = f"{place}: {self.key}: {self.message}" if self.key else f"{place}: {self.message}"
        lines = [head]
        if self.excerpt is not None:
            gutter = f"{self.line or 0:6d} | "
            lines.append(gutter + self.excerpt)
            if self.span is not None:
                first, length = self.span
                lines.append(" " * (len(gutter) + first - 1) + "^" * max(length, 1))
        for label, text in (("given", self.given), ("allowed", self.allowed), ("hint", self.hint)):
            if text is not None:
                lines.append(f"      {label + ':':<9}" + text.replace("\n", "\n" + " " * 15))
        return "\n".join(lines)


class FaultyInputError(ProbsoilError):
    """What a user wrote has one or more mistakes; all of them are in `faults`.

    Attributes
    ----------
    faults : tuple of Fault
        Every mistake found, in the order of the file.
    """

    _where = "the input"

    def __init__(self, faults: Sequence[Fault]) -> None:
        self.faults = tuple(faults)
        count = len(self.faults)
        heading = f"{count} mistake{'' if count == 1 else 's'} in {self._where}"
        super().__init__("\n\n".join([heading, *(str(fault) for fault in self.faults)]))


class ScenarioError(FaultyInputError):
    """A scenario has one or more mistakes; all of them are in `faults`."""

    _where = "the scenario"


class SheetError(FaultyInputError):
    """Test sheets have one or more mistakes; all of them are in `faults`."""

    _where = "the test sheets"


class MissingExtraError(ProbsoilError, ImportError):
    """What was asked for needs a library that only an extra of probsoil installs.

    Attributes
    ----------
    extra : str
        Name of the extra.
    """

    def __init__(self, what: str, *, extra: str) -> None:
        super().__init__(f"{what} needs the extra \"{extra}\": pip install 'probsoil[{extra}]'")
        self.extra = extra
