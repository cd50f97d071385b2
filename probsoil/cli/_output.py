"""Tables and text on standard output."""

import sys
from collections.abc import Iterable, Mapping, Sequence
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from rich.console import Console

PLAIN_WIDTH = 120  # where the answer goes to a file or a pipe


def answer_console() -> "Console":
    """Return the console of the answer: standard output, no markup read from names of the user's.

    Returns
    -------
    Console
        Honours NO_COLOR and the width of the terminal.
    """
    from rich.console import Console

    width = None if sys.stdout.isatty() else PLAIN_WIDTH
    return Console(file=sys.stdout, width=width, markup=False, highlight=False, emoji=False)


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
