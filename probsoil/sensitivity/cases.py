"""What the exceeding cases look like, and elasticities of groups of parameters."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.special import ndtr

from probsoil._typing import ArrayLike, FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.sensitivity.elasticities import Elasticity, score_mean

if TYPE_CHECKING:
    import pandas as pd

LEAST_PROFILE = 10  # exceeding realisations below which the profile has no limits


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class CaseSums:
    """Additive sums over realisations that meet a limit (first) and that exceed it (second).

    Attributes
    ----------
    count : ndarray of int, shape (2,), [-]
        Realisations.
    latent, latent_square : ndarray, shape (2, d), [-]
        Sums of the latent normals and of their squares.
    group_score, group_square : ndarray, shape (2, n_group), [-]
        Sums of the spread scores of each group and of their squares.
    """

    count: IntArray
    latent: FloatArray
    latent_square: FloatArray
    group_score: FloatArray
    group_square: FloatArray


def case_sums(
    z: FloatArray,
    inverse_correlation: FloatArray,
    exceeded: ArrayLike,
    groups: Mapping[str, Sequence[int]] | None = None,
) -> CaseSums:
    """Sum over the realisations of one chunk.

    Parameters
    ----------
    z : ndarray, shape (n, d), [-]
        Correlated latent normals.
    inverse_correlation : ndarray, shape (d, d), [-]
        Inverse R^-1 of their correlation.
    exceeded : array_like of bool, shape (n,), [-]
        Whether each realisation exceeds the limit.
    groups : mapping of str to sequence of int, optional
        Latent normals of each group, counted from 0; one may be in several groups or in none.

    Returns
    -------
    sums : CaseSums
        Sums of this chunk; add those of chunks by `merged_cases`.

    Raises
    ------
    ShapeError
        If the shapes do not match.
    ParameterError
        If a group names a latent normal that does not exist.
    """
    flag = np.asarray(exceeded, dtype=np.bool_)
    d = inverse_correlation.shape[0]
    if z.ndim != 2 or z.shape[1] != d or flag.shape != (len(z),):
        raise ShapeError(f"z {z.shape}, correlation of {d} and exceeded {flag.shape} do not match")
    sets = {} if groups is None else groups
    for name, members in sets.items():
        if not all(0 <= i < d for i in members):
            raise ParameterError(f"group {name!r}: latent normals must lie between 0 and {d - 1}")
    group = np.zeros((len(z), len(sets)))
    if sets:
        score = z * np.einsum("ni,ij->nj", z, inverse_correlation) - 1.0
        for column, members in enumerate(sets.values()):
            group[:, column] = score[:, list(members)].sum(axis=1)
    sides = [~flag, flag]
    return CaseSums(
        count=np.array([side.sum() for side in sides], dtype=np.int64),
        latent=np.stack([z[side].sum(axis=0) for side in sides]),
        latent_square=np.stack([(z[side] ** 2).sum(axis=0) for side in sides]),
        group_score=np.stack([group[side].sum(axis=0) for side in sides]),
        group_square=np.stack([(group[side] ** 2).sum(axis=0) for side in sides]),
    )


def merged_cases(first: CaseSums, second: CaseSums) -> CaseSums:
    """Add up the sums over two sets of realisations.

    Parameters
    ----------
    first, second : CaseSums
        Sums over each set, of the same parameters and groups; merge in the order of the chunks.

    Returns
    -------
    sums : CaseSums
        Sums over both.
    """
    return CaseSums(
        **{name: getattr(first, name) + getattr(second, name) for name in CaseSums.__dataclass_fields__}
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class ProfileRow:
    """Where one parameter stands in the exceeding cases.

    Attributes
    ----------
    parameter : str
        Address of the parameter.
    level : float, [-]
        Level of its distribution at the mean of its latent normal there: 0.5 for one that plays no part.
    interval : tuple of float, [-]
        Limits of the level.
    spread : float, [-]
        Standard deviation of its latent normal there; 1 for one that plays no part.
    """

    parameter: str
    level: float
    interval: tuple[float, float]
    spread: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Profile:
    """Profile of the exceeding cases.

    Attributes
    ----------
    rows : tuple of ProfileRow
        One per parameter, in order.
    exceeding : int, [-]
        Cases.
    confidence : float, [-]
        Confidence of the limits.
    label : str
        What the levels mean.
    note : str or None
        What to beware of.
    """

    rows: tuple[ProfileRow, ...]
    exceeding: int
    confidence: float
    label: str
    note: str | None

    def to_frame(self) -> "pd.DataFrame":
        """Return the profile as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per parameter.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        return pd.DataFrame(
            {
                "parameter": [row.parameter for row in self.rows],
                "level": [row.level for row in self.rows],
                "low": [row.interval[0] for row in self.rows],
                "high": [row.interval[1] for row in self.rows],
                "spread": [row.spread for row in self.rows],
            }
        )


LABEL = (
    "level of each parameter where the limit is exceeded, correlation included: one that plays no part "
    "itself moves with those it is correlated with"
)


def exceeding_profile(sums: CaseSums, names: Sequence[str], *, confidence: float = 0.95) -> Profile:
    """Where the parameters stand in the cases that exceed.

    Parameters
    ----------
    sums : CaseSums
        Sums over all realisations.
    names : sequence of str
        Addresses of the d parameters.
    confidence : float, [-]
        Confidence of the limits, for each parameter by itself.

    Returns
    -------
    profile : Profile
        Levels with their limits.

    Raises
    ------
    ShapeError
        If the names do not match the sums.

    Notes
    -----
    The mean of z over the exceeding realisations, as a level Phi of the distribution; normal limits of the
    mean from ten cases. It describes and does not rank: with correlation a bystander has a profile too.
    """
    if len(names) != sums.latent.shape[1]:
        raise ShapeError(f"{len(names)} names do not match sums over {sums.latent.shape[1]} latent normals")
    count = int(sums.count[1])
    mean = score_mean(sums.count, sums.latent, sums.latent_square)
    low, high = mean.interval(confidence)
    if count < LEAST_PROFILE:
        low, high = np.full_like(low, -np.inf), np.full_like(high, np.inf)
    average = sums.latent[1] / max(count, 1)
    variance = (sums.latent_square[1] - count * average**2) / max(count - 1, 1)
    spread = np.sqrt(np.maximum(variance, 0.0)) if count > 1 else np.full(len(names), np.nan)
    level, bottom, top = ndtr(mean.value), ndtr(low), ndtr(high)
    rows = tuple(
        ProfileRow(
            parameter=name,
            level=float(level[i]),
            interval=(float(bottom[i]), float(top[i])),
            spread=float(spread[i]),
        )
        for i, name in enumerate(names)
    )
    few = f"only {count} realisations exceed, too few for limits" if count < LEAST_PROFILE else None
    return Profile(rows=rows, exceeding=count, confidence=confidence, label=LABEL, note=few)


def group_elasticities(sums: CaseSums) -> Elasticity:
    """Elasticity of the exceedance probability to the spread of all parameters of a group at once.

    Parameters
    ----------
    sums : CaseSums
        Sums over all realisations, with the groups.

    Returns
    -------
    elasticity : Elasticity
        One per group: the sum of those of its members, with the standard error of the sum.
    """
    return score_mean(sums.count, sums.group_score, sums.group_square)
