"""Rows that belong together."""

from collections.abc import Iterator

import numpy as np

from probsoil._typing import IntArray
from probsoil.laboratory.tables import Table


def groups(codes: IntArray, rows: IntArray) -> Iterator[IntArray]:
    """Give the rows of each code.

    Parameters
    ----------
    codes : ndarray, shape (n_row,), [-]
        Of all rows of a table.
    rows : ndarray, shape (n,), [-]
        Rows to be grouped, rising.

    Yields
    ------
    group : ndarray, shape (n_group,), [-]
        In the order of the table; groups by their first row.
    """
    if not rows.size:
        return
    ordered = rows[np.argsort(codes[rows], kind="stable")]
    ends = np.flatnonzero(np.diff(codes[ordered])) + 1
    yield from sorted(np.split(ordered, ends), key=lambda group: int(group[0]))


def elsewhere(table: Table, row: int, other: int) -> str:
    """Return where another row stands, as seen from a row.

    Parameters
    ----------
    table : Table
        Table of both.
    row, other : int, [-]
        Counted from 0 in the table.

    Returns
    -------
    text : str
        With the file where it is another.
    """
    same = table.file(row) == table.file(other)
    return f"row {table.line(other)}" + ("" if same else f" of {table.file(other)}")
