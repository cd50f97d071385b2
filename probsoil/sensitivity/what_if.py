"""What if less were unknown about a parameter, or its value were known: probabilities on the true model."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from scipy.special import ndtri

from probsoil._typing import BoolArray
from probsoil.errors import ParameterError
from probsoil.sensitivity.changes import Others, Trials, paired_difference, probability_of

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True, slots=True, kw_only=True)
class WhatIf:
    """Probability of exceedance with something changed about one parameter or group.

    Attributes
    ----------
    name : str
        Parameter or group.
    change : str
        What is changed.
    others : {"keep", "follow"}
        What the other parameters do; see `probsoil.sensitivity.changes.Trials`.
    before, probability : float, [-]
        Probability with nothing changed, and with the change.
    interval : tuple of float, [-]
        Limits of `probability`.
    difference : float, [-]
        `probability` less `before`, from the same realisations.
    difference_interval : tuple of float, [-]
        Limits of the difference.
    realisations : float, [-]
        Number of realisations behind it; for an estimate by weights, the effective number.
    note : str or None
        What to beware of.
    """

    name: str
    change: str
    others: Others
    before: float
    probability: float
    interval: tuple[float, float]
    difference: float
    difference_interval: tuple[float, float]
    realisations: float
    note: str | None = None


def what_if_frame(rows: Sequence[WhatIf]) -> "pd.DataFrame":
    """Tabulate changes.

    Parameters
    ----------
    rows : sequence of WhatIf
        Changes.

    Returns
    -------
    frame : pandas.DataFrame
        One row per change; limits in columns of their own.
    """
    import pandas as pd  # deferred: a scenario check never needs it

    records = [
        {
            "name": row.name,
            "change": row.change,
            "others": row.others,
            "before": row.before,
            "probability": row.probability,
            "low": row.interval[0],
            "high": row.interval[1],
            "difference": row.difference,
            "difference_low": row.difference_interval[0],
            "difference_high": row.difference_interval[1],
            "realisations": row.realisations,
            "note": row.note,
        }
        for row in rows
    ]
    return pd.DataFrame(records)


def halved_knowledge(
    trials: Trials, names: Sequence[str] | None = None, *, factor: float = 0.5
) -> tuple[WhatIf, ...]:
    """Probability when what is not known about a parameter is halved.

    Parameters
    ----------
    trials : Trials
        Realisations and function.
    names : sequence of str, optional
        Parameters or groups; all by default. Each costs a run of every realisation.
    factor : float, [-]
        What the latent standard deviation is multiplied by, from 0 (known) to 1.

    Returns
    -------
    rows : tuple of WhatIf
        One per name.

    Raises
    ------
    ParameterError
        If the factor lies outside 0 to 1 or a name is unknown.

    Notes
    -----
    The median stays where it is: it is the probability if tests confirmed the median, which they need not.
    Others that keep: z_i becomes z_i times the factor, R as it is; this is what the spread elasticity is the
    derivative of. Others that follow: z becomes z - (1 - factor) r_i z_i with the column r_i of R, whose
    covariance R - (1 - factor²) r_i r_i' is that after an observation of z_i alone that leaves it this
    uncertain.
    """
    check_factor(factor)
    change = "halved" if factor == 0.5 else f"spread times {factor:g}"
    return tuple(_row(trials, name, change, (factor, 0.0)) for name in chosen_names(trials, names))


def probability_at_values(
    trials: Trials, names: Sequence[str] | None = None, *, levels: Sequence[float] = (0.1, 0.9)
) -> tuple[WhatIf, ...]:
    """Probability with a parameter known, at given levels of its distribution.

    Parameters
    ----------
    trials : Trials
        Realisations and function.
    names : sequence of str, optional
        Parameters or groups, all of whose members are put at the level; all by default.
    levels : sequence of float, [-]
        Levels of the distribution, above 0 and below 1.

    Returns
    -------
    rows : tuple of WhatIf
        One per name and level.

    Raises
    ------
    ParameterError
        If a level lies outside 0 to 1 or a name is unknown.

    Notes
    -----
    Others that follow have their distribution conditional on the value; others that keep have the one they
    had.
    """
    if not all(0.0 < level < 1.0 for level in levels):
        raise ParameterError("levels must lie between 0 and 1")
    return tuple(
        _row(trials, name, f"at its {100.0 * level:g} % value", (0.0, float(ndtri(level))))
        for name in chosen_names(trials, names)
        for level in levels
    )


def _row(trials: Trials, name: str, change: str, move: tuple[float, float]) -> WhatIf:
    after: BoolArray = trials.changed(name, *move)
    probability, interval = probability_of(after, trials.confidence)
    difference, limits = paired_difference(trials.before, after, trials.confidence)
    return WhatIf(
        name=name,
        change=change,
        others=trials.others,
        before=float(trials.before.mean()),
        probability=probability,
        interval=interval,
        difference=difference,
        difference_interval=limits,
        realisations=float(len(after)),
    )


def chosen_names(trials: Trials, names: Sequence[str] | None) -> list[str]:
    """Names that are asked for, all by default.

    Parameters
    ----------
    trials : Trials
        Realisations and function.
    names : sequence of str, optional
        Parameters or groups.

    Returns
    -------
    names : list of str
        Names.

    Raises
    ------
    ParameterError
        If a name is unknown.
    """
    chosen = list(trials.parameters) if names is None else list(names)
    unknown = [name for name in chosen if name not in trials.parameters]
    if unknown:
        raise ParameterError(f"unknown parameters: {', '.join(unknown)}")
    return chosen


def check_factor(factor: float) -> None:
    """Refuse a factor outside 0 to 1.

    Parameters
    ----------
    factor : float, [-]
        What a latent standard deviation is multiplied by.

    Raises
    ------
    ParameterError
        If it lies outside 0 to 1.
    """
    if not 0.0 <= factor <= 1.0:
        raise ParameterError(f"factor must lie between 0 and 1; got {factor:g}")
