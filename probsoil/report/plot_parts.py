"""What the plots share."""

import numpy as np

from probsoil._typing import FloatArray


def numbers_array(values: list[float | None]) -> FloatArray:
    """Turn numbers of the results into an array.

    Parameters
    ----------
    values : list of float or None, [any]
        Numbers, in any unit.

    Returns
    -------
    array : ndarray, shape (n,), [any]
        The same, not-a-number where one is missing.
    """
    return np.array([np.nan if value is None else value for value in values], dtype=np.float64)


def short(name: str, most: int) -> str:
    """Shorten a name for a drawing; the tables give it in full.

    Parameters
    ----------
    name : str
        Name.
    most : int, [-]
        Characters to keep.

    Returns
    -------
    text : str
        The name, its end replaced by an ellipsis where it is too long.
    """
    return name if len(name) <= most else name[: most - 1].rstrip() + "…"
