"""First estimate of what halved knowledge does, by new weights for finished realisations."""

from collections.abc import Sequence

import numpy as np
from scipy.special import ndtri

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError
from probsoil.sensitivity.changes import Trials
from probsoil.sensitivity.what_if import WhatIf, check_factor, chosen_names


def reweighted_halving(
    trials: Trials, names: Sequence[str] | None = None, *, factor: float = 0.5
) -> tuple[WhatIf, ...]:
    r"""First estimate of `halved_knowledge` without a run: the same realisations with other weights.

    Parameters
    ----------
    trials : Trials
        Realisations; the function is not called.
    names : sequence of str, optional
        Parameters or groups; all by default.
    factor : float, [-]
        What the latent standard deviation is multiplied by, above 0 and at most 1.

    Returns
    -------
    rows : tuple of WhatIf
        One per name; `realisations` is the effective number :math:`(\sum w)^2 / \sum w^2`. Not a number,
        with the reason, where the weights have no finite variance.

    Raises
    ------
    ParameterError
        If the factor is not above 0 and at most 1 or a name is unknown.

    Notes
    -----
    The weight is the density with less spread over the present one, :math:`N(0, \Sigma) / N(0, R)`; it is
    bounded where the others follow. Probability and difference are ratio estimates, their limits those of the
    linearised variance. With a factor far below one few realisations carry the weight.
    """
    check_factor(factor)
    if factor == 0.0:
        raise ParameterError("a parameter known exactly has no weights; use halved_knowledge with factor 0")
    change = "halved, by weights" if factor == 0.5 else f"spread times {factor:g}, by weights"
    return tuple(_weighted_row(trials, name, change, factor) for name in chosen_names(trials, names))


def _weighted_row(trials: Trials, name: str, change: str, factor: float) -> WhatIf:
    before = float(trials.before.mean())
    weight = _weights(trials, name, factor)
    if weight is None:
        nothing = (np.nan, np.nan)
        return WhatIf(
            name=name,
            change=change,
            others=trials.others,
            before=before,
            probability=np.nan,
            interval=nothing,
            difference=np.nan,
            difference_interval=nothing,
            realisations=0.0,
            note="correlation with others is too strong for weights: their variance is not finite",
        )
    flag = trials.before.astype(np.float64)
    after = float((weight * flag).mean())
    effective = float(weight.sum() ** 2 / (weight**2).sum())
    one = weight * (flag - after)
    reach = -float(ndtri(0.5 * (1.0 - trials.confidence))) / float(len(flag)) ** 0.5
    own, both = reach * float(one.std(ddof=1)), reach * float((one - (flag - before)).std(ddof=1))
    return WhatIf(
        name=name,
        change=change,
        others=trials.others,
        before=before,
        probability=after,
        interval=(max(after - own, 0.0), min(after + own, 1.0)),
        difference=after - before,
        difference_interval=(after - before - both, after - before + both),
        realisations=effective,
    )


def _weights(trials: Trials, name: str, factor: float) -> FloatArray | None:
    """Densities with less spread over present ones, mean one; None where they have no finite variance."""
    own = list(trials.parameters[name])
    correlation = trials.correlation
    if trials.others == "follow":
        column = correlation[:, own]
        inner = np.linalg.solve(correlation[np.ix_(own, own)], column.T)
        covariance = correlation - (1.0 - factor**2) * column @ inner
    else:
        scale = np.ones(len(correlation))
        scale[own] = factor
        covariance = correlation * np.outer(scale, scale)
    present, less = np.linalg.inv(correlation), np.linalg.inv(covariance)
    if np.linalg.eigvalsh(2.0 * less - present)[0] <= 0.0:
        return None
    gap = less - present
    logarithm = -0.5 * np.einsum("ni,ij,nj->n", trials.z, gap, trials.z, optimize=True)
    weight = np.exp(logarithm - logarithm.max())
    return np.asarray(weight / weight.mean(), dtype=np.float64)
