"""Numbers of a scenario as arrays over realisations."""

from collections.abc import Mapping

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.compression import lambda_from_compression_index, lambda_from_compression_ratio

Values = Mapping[str, FloatArray | float]


def sample_size(values: Values) -> int:
    """Return the number of realisations that a set of values holds.

    Parameters
    ----------
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address, each in its own unit.

    Returns
    -------
    n_sample : int, [-]
        Length of the arrays; 1 where all values are fixed.
    """
    sizes = {np.size(value) for value in values.values() if np.ndim(value) == 1}
    return max(sizes, default=1)


def column(values: Values, address: str, n_sample: int) -> FloatArray:
    """Return one quantity for every realisation.

    Parameters
    ----------
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    address : str
        Which quantity.
    n_sample : int, [-]
        Number of realisations.

    Returns
    -------
    value : ndarray, shape (n_sample,), [unit of the quantity]
        The quantity, repeated where it is fixed.
    """
    return np.array(np.broadcast_to(np.asarray(values[address], dtype=np.float64), (n_sample,)))


def slope(name: str, form: str, values: Values, void_ratio: FloatArray) -> FloatArray:
    """Return a slope of the compression line in its basic form.

    Parameters
    ----------
    name : str
        Layer.
    form : str
        Key that gives it: lambda, kappa, Cc, Cs, CR or RR.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    void_ratio : ndarray, shape (n_sample,), [-]
        Void ratio of the layer.

    Returns
    -------
    slope : ndarray, shape (n_sample,), [-]
        Fall of void ratio per unit of the natural logarithm of stress.
    """
    given = column(values, f"{name}.{form}", void_ratio.size)
    if form in ("lambda", "kappa"):
        return given
    if form in ("Cc", "Cs"):
        return lambda_from_compression_index(given)
    return lambda_from_compression_ratio(given, void_ratio)
