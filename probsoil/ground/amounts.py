"""Numbers of the works: the same in all realisations, or one for each."""

from collections.abc import Callable

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.quantity_values import Values, column
from probsoil.scenario.amounts import expected
from probsoil.scenario.distributions import Distribution

Amount = float | FloatArray
"""A number for all realisations, or an array of one for each, shape (n_sample,)."""

Reading = Callable[[str, Distribution | None], Amount]
"""Gives an amount from its address and what the scenario says of it."""


def mean_of(_address: str, given: Distribution | None) -> float:
    """Return the mean of an amount, for what is laid out once.

    Parameters
    ----------
    _address : str
        Which, for the sake of the others that read amounts.
    given : Distribution or None, [unit of the amount]
        As the scenario gives it; None for nothing.

    Returns
    -------
    mean : float, [unit of the amount]
        The number itself where it is not uncertain.
    """
    return expected(given)


def drawn_from(values: Values, n_sample: int) -> Reading:
    """Return how amounts are read in a set of realisations.

    Parameters
    ----------
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    n_sample : int, [-]
        Number of realisations.

    Returns
    -------
    read : callable
        Gives an array of one number for each realisation where the amount is uncertain.
    """

    def read(address: str, given: Distribution | None) -> Amount:
        return column(values, address, n_sample) if address in values else expected(given)

    return read


def single(values: Values) -> Reading:
    """Return how amounts are read in one realisation, all as plain numbers.

    Parameters
    ----------
    values : mapping of str to ndarray, shape (1,), or float
        Value of every quantity by its address.

    Returns
    -------
    read : callable
        Gives a number.
    """

    def read(address: str, given: Distribution | None) -> Amount:
        return float(np.asarray(values[address]).flat[0]) if address in values else expected(given)

    return read


def beside_depths(amount: Amount) -> Amount:
    """Return an amount in the shape that goes with arrays over depth.

    Parameters
    ----------
    amount : float or ndarray, shape (n_sample,), [any]
        Amount.

    Returns
    -------
    amount : float or ndarray, shape (n_sample, 1), [any]
        A plain number, or an array already of that shape, as it is.
    """
    return amount[:, None] if isinstance(amount, np.ndarray) and amount.ndim == 1 else amount


def one_of(amount: Amount, place: int) -> float:
    """Return an amount of one realisation.

    Parameters
    ----------
    amount : float or ndarray, shape (n_sample,), [any]
        Amount.
    place : int, [-]
        Which realisation.

    Returns
    -------
    amount : float, [any]
        Its own where they differ.
    """
    return float(amount[place]) if isinstance(amount, np.ndarray) else amount


def key_of(amount: Amount) -> float | bytes:
    """Return what tells an amount from others, to keep what was computed for it.

    Parameters
    ----------
    amount : float or ndarray, shape (n_sample,), [any]
        Amount.

    Returns
    -------
    key : float or bytes, [any]
        Hashable.
    """
    return np.asarray(amount).tobytes() if isinstance(amount, np.ndarray) else amount


def greater(one: Amount, other: Amount) -> Amount:
    """Return the greater of two amounts in every realisation.

    Parameters
    ----------
    one, other : float or ndarray, shape (n_sample,), [any]
        Amounts.

    Returns
    -------
    greater : float or ndarray, shape (n_sample,), [any]
        A plain number where both are.
    """
    if isinstance(one, float) and isinstance(other, float):
        return max(one, other)
    return np.maximum(one, other)


def lesser(one: Amount, other: Amount) -> Amount:
    """Return the lesser of two amounts in every realisation.

    Parameters
    ----------
    one, other : float or ndarray, shape (n_sample,), [any]
        Amounts.

    Returns
    -------
    lesser : float or ndarray, shape (n_sample,), [any]
        A plain number where both are.
    """
    if isinstance(one, float) and isinstance(other, float):
        return min(one, other)
    return np.minimum(one, other)
