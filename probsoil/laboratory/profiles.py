"""Names of profiles: the user's where given, else that of the hole with the kind of test."""

import numpy as np

from probsoil._typing import IntArray
from probsoil.laboratory.tables import EMPTY, Names, Table


def profile_codes(table: Table, names: Names) -> IntArray:
    """Return which profile each row belongs to.

    Parameters
    ----------
    table : Table
        ``vane`` or ``cone``.
    names : Names
        All names.

    Returns
    -------
    codes : ndarray, shape (n_row,), [-]
        Number of the name of the profile.
    """
    given, hole = table.codes("test"), table.codes("hole")
    codes = given.copy()
    unnamed = given == EMPTY
    for code in np.unique(hole[unnamed]).tolist():
        codes[unnamed & (hole == code)] = names.number(f"{names.text(code)} {table.layout.name}")
    return codes
