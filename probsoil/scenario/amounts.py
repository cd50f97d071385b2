"""Numbers of the works (heights, widths, spacings), which may be uncertain: what is said of them in short."""

from typing import Any

from probsoil.scenario.distributions import Constant, Distribution


def expected(amount: Distribution | None) -> float:
    """Return the mean of an amount.

    Parameters
    ----------
    amount : Distribution or None, [base unit]
        None for nothing.

    Returns
    -------
    mean : float, [base unit]
        The number itself where it is not uncertain.
    """
    return 0.0 if amount is None else amount.expectation


def known(amount: Any) -> float | None:
    """Return the mean of an amount of a scenario read in part.

    Parameters
    ----------
    amount : Distribution, None or UNREAD, [base unit]
        As read.

    Returns
    -------
    mean : float or None, [base unit]
        None where nothing is given or it could not be read.
    """
    return amount.expectation if isinstance(amount, Distribution) else None


def text_of(amount: Distribution, unit: str = "", *, what: str = "", signed: bool = False) -> str:
    """Return an amount in words.

    Parameters
    ----------
    amount : Distribution, [base unit]
        As given.
    unit : str
        Unit; ``-`` or nothing for none.
    what : str
        What it is of, after the unit.
    signed : bool
        Whether the number shows its sign also where it is above zero.

    Returns
    -------
    text : str
        Such as ``1.3 m``, or ``about 1.3 m (normal, mean 1.3 m, standard deviation 0.1 m)``.
    """
    shown = f"{amount.expectation:+g}" if signed else f"{amount.expectation:g}"
    shown += "".join(f" {one}" for one in (unit, what) if one not in ("", "-"))
    return shown if isinstance(amount, Constant) else f"about {shown} ({amount.describe(unit or '-')})"


def varies(*amounts: Distribution | None) -> bool:
    """Return whether any of some amounts is uncertain.

    Parameters
    ----------
    *amounts : Distribution or None, [base unit]
        None for nothing.

    Returns
    -------
    uncertain : bool
        False where all are plain numbers.
    """
    return any(one is not None and not isinstance(one, Constant) for one in amounts)
