"""Tables and text on standard output."""

import os
import sys
from collections.abc import Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager, suppress
from typing import TYPE_CHECKING

from probsoil.errors import ResultsError

if TYPE_CHECKING:
    from rich.console import Console

PLAIN_WIDTH = 120  # where the answer goes to a file or a pipe


@contextmanager
def answering() -> Iterator[None]:
    """Print an answer: a reader that has seen enough is no error, a full disk is one that can be told.

    Yields
    ------
    None
        While something is printed to standard output.

    Raises
    ------
    ResultsError
        If standard output takes no more, save where a pipe was closed by its reader.
    """
    try:
        yield
        sys.stdout.flush()
    except OSError as fault:
        let_go_of_output()
        if not isinstance(fault, BrokenPipeError):
            raise ResultsError(
                f"the answer cannot be written to standard output: {fault.strerror or fault}"
            ) from None


def let_go_of_output() -> None:
    """Send what standard output still holds to nowhere, so that closing it at the end cannot fail."""
    with suppress(OSError, ValueError):  # a stand-in without a descriptor needs no such care
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, sys.stdout.fileno())
        os.close(nowhere)


def answer_console() -> "Console":
    """Return the console of the answer: standard output, no markup read from names of the user's.

    Returns
    -------
    Console
        Honours NO_COLOR and the width of the terminal.
    """
    from rich.console import Console

    class AnswerConsole(Console):
        def on_broken_pipe(self) -> None:
            raise  # called while the error is handled; `answering` takes it

    width = None if sys.stdout.isatty() else PLAIN_WIDTH
    return AnswerConsole(file=sys.stdout, width=width, markup=False, highlight=False, emoji=False)


def print_table(
    console: "Console", title: str, columns: Sequence[str], rows: Iterable[Sequence[str]]
) -> None:
    """Print a table; columns whose heading ends in a unit in brackets are set to the right.

    Parameters
    ----------
    console : Console
        Where to.
    title : str
        Line above the table.
    columns : sequence of str
        Headings.
    rows : iterable of sequence of str
        Cells.
    """
    from rich import box
    from rich.table import Table

    table = Table(title=title, title_justify="left", title_style="bold", box=box.SIMPLE_HEAD, pad_edge=False)
    for heading in columns:
        table.add_column(heading, justify="right" if heading.endswith("]") else "left", overflow="fold")
    for row in rows:
        table.add_row(*row)
    console.print(table)


def print_json(value: Mapping[str, object]) -> None:
    """Print one JSON object and nothing else.

    Parameters
    ----------
    value : mapping
        What to print; not-a-number is refused, as JSON has no such value.
    """
    import json

    print(json.dumps(value, indent=2, allow_nan=False))  # noqa: T201


def number(value: object, form: str) -> str:
    """Return a number as text, a dash where there is none.

    Parameters
    ----------
    value : object
        Number, or None.
    form : str
        Format specification.

    Returns
    -------
    str
        The text.
    """
    return format(value, form) if isinstance(value, int | float) else "-"


def counted(count: float, noun: str) -> str:
    """Return a number of things in words.

    Parameters
    ----------
    count : int or float, [-]
        How many.
    noun : str
        What one of them is called.

    Returns
    -------
    str
        Such as ``20,000 realisations`` or ``1 realisation``.
    """
    shown = f"{count:,d}" if isinstance(count, int) else f"{count:g}"
    return f"{shown} {noun}{'' if count == 1 else 's'}"
