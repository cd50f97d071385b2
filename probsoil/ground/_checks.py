"""Checks of arguments that the public functions of this room share."""

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError


def checked(
    name: str, values: ArrayLike, *, above: float | None = None, at_least: float | None = None
) -> FloatArray:
    """Return values as an array once they are known to be finite and in range.

    Parameters
    ----------
    name : str
        Name of the argument, for the message.
    values : array_like, shape (...,), [any]
        Values.
    above, at_least : float or None, [any]
        Lower bound, left out or included.

    Returns
    -------
    array : ndarray, shape (...,), [any]
        The values.

    Raises
    ------
    ParameterError
        If a value is not finite or out of range.
    """
    array = np.asarray(values, dtype=np.float64)
    good = np.isfinite(array)
    rule = "finite"
    if above is not None:
        good, rule = good & (array > above), f"finite and above {above:g}"
    if at_least is not None:
        good, rule = good & (array >= at_least), f"finite and at least {at_least:g}"
    if not good.all():
        bad = array[~good]
        raise ParameterError(
            f"{name} must be {rule}; got {bad.flat[0]:g} ({bad.size} of {array.size} values)"
        )
    return array
