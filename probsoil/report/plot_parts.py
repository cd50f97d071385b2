"""What the plots share."""

from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import FloatArray

if TYPE_CHECKING:
    from matplotlib.axes import Axes


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


def logarithmic_across(axis: "Axes") -> None:
    """Make the horizontal axis logarithmic, its labels plain numbers at 1, 2 and 5 of each decade.

    Parameters
    ----------
    axis : Axes
        With something drawn on it.
    """
    from matplotlib.ticker import FuncFormatter, LogLocator, NullLocator

    axis.set_xscale("log")
    low, high = axis.get_xlim()
    axis.xaxis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0) if high < 1e3 * low else (1.0,)))
    axis.xaxis.set_minor_locator(NullLocator())
    axis.xaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))
