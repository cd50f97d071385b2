"""Importance sampling about the design points, with a plain look at everything else."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.special import ndtr, stdtrit

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError
from probsoil.probability.binomial import clopper_pearson, unseen_bound
from probsoil.probability.first_order import FirstOrder
from probsoil.probability.limit_state import CountedMargin, LimitState, generator

if TYPE_CHECKING:
    import pandas as pd

STAGE = 12
ASSUMPTION = (
    "the exceeding region lies where points drawn about the design points are denser than plain draws; the "
    "unseen bound is what may lie elsewhere. Sampling error only"
)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ImportanceSampling:
    """Probability by importance sampling about design points.

    Attributes
    ----------
    probability : float, [-]
        Estimate, the part seen far from the design points included.
    interval : tuple of float, [-]
        Limits of the part near the design points and of the part far from them if any of it was seen.
    confidence : float, [-]
        Confidence of the limits.
    near : float, [-]
        Part near the design points.
    hits : int, [-]
        Runs near the design points that exceed.
    far_point : ndarray, shape (n_far_hit, d), [-]
        Plain draws far from the design points that exceed: a way to fail that the search missed.
    unseen_bound : float, [-]
        Upper limit of the part far from the design points, one-sided at `confidence` where none was seen.
    model_runs : int, [-]
        Runs spent, those of the search not among them.
    assumption : str
        What the interval takes for granted.
    """

    probability: float
    interval: tuple[float, float]
    confidence: float
    near: float
    hits: int
    far_point: FloatArray
    unseen_bound: float
    model_runs: int
    assumption: str = ASSUMPTION

    def to_frame(self) -> "pd.DataFrame":
        """Return the result as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row; the limits in columns of their own, the far hits counted.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        names = ("probability", "confidence", "near", "hits", "unseen_bound", "model_runs", "assumption")
        row = {name: getattr(self, name) for name in names}
        row["low"], row["high"] = self.interval
        row["far_hits"] = len(self.far_point)
        return pd.DataFrame([row])


def importance_sampling(
    limit: LimitState,
    first: FirstOrder,
    *,
    runs: int = 1000,
    far_runs: int = 1000,
    seed: int = 0,
    confidence: float = 0.95,
) -> ImportanceSampling:
    r"""Probability by importance sampling about the design points.

    Parameters
    ----------
    limit : LimitState
        Performance function and limit.
    first : FirstOrder
        Design points of the same limit.
    runs : int, [-]
        Runs drawn about the design points, at least 2.
    far_runs : int, [-]
        Plain draws that look elsewhere, at least 1.
    seed : int, [-]
        Seed of the draws.
    confidence : float, [-]
        Confidence of the limits.

    Returns
    -------
    result : ImportanceSampling
        Probability, limits, and what may lie unseen.

    Raises
    ------
    ParameterError
        If the runs or the confidence are out of range, the points are of another dimension, or the median
        realisation exceeds: plain Monte Carlo is then the better way.

    Notes
    -----
    With q the mixture of unit normals about the design points, weighted by their Phi(-beta), space is cut
    where :math:`q = \varphi`. On the side of the design points the estimate is the mean of
    :math:`\varphi / q` over exceeding draws from q, a weight never above one; its limits are
    :math:`\hat p \exp(\pm t s / (\hat p \sqrt n))`. On the other side plain draws are counted, with exact
    binomial limits. The two are independent and joined by the method of variance estimates recovery. Where no
    far draw exceeds, the interval is that of the near part and the bound of the far part stands beside it.
    """
    _check(limit, first, runs, far_runs)
    counted = CountedMargin(limit)
    random = generator(seed, STAGE)
    share = ndtr(-first.beta)
    share /= share.sum()
    centre = first.point[random.choice(len(share), size=runs, p=share)]
    drawn = centre + random.standard_normal((runs, limit.dimension))
    ratio = _density_ratio(drawn, first.point, share)
    hit = (counted(drawn) < 0.0) & (ratio >= 1.0)
    near, near_limits = _near(np.where(hit, 1.0 / np.maximum(ratio, 1.0), 0.0), int(hit.sum()), confidence)
    plain = random.standard_normal((far_runs, limit.dimension))
    away = (counted(plain) < 0.0) & (_density_ratio(plain, first.point, share) < 1.0)
    far, low, high = float(away.mean()), *clopper_pearson(away.sum(), far_runs, confidence)
    interval = near_limits
    if away.any():
        lower = near + far - np.hypot(near - near_limits[0], far - low)
        upper = near + far + np.hypot(near_limits[1] - near, high - far)
        interval = (max(float(lower), 0.0), min(float(upper), 1.0))
    return ImportanceSampling(
        probability=near + far,
        interval=interval,
        confidence=confidence,
        near=near,
        hits=int(hit.sum()),
        far_point=plain[away],
        unseen_bound=float(high) if away.any() else unseen_bound(far_runs, confidence),
        model_runs=counted.runs,
    )


def _density_ratio(u: FloatArray, centre: FloatArray, share: FloatArray) -> FloatArray:
    """Density of the mixture over that of plain draws."""
    exponent = u @ centre.T - 0.5 * np.einsum("ij,ij->i", centre, centre)
    return np.asarray(np.exp(np.minimum(exponent, 700.0)) @ share)


def _near(weight: FloatArray, hits: int, confidence: float) -> tuple[float, tuple[float, float]]:
    """Mean of the weights with its limits."""
    n = len(weight)
    mean = float(weight.mean())
    if hits == 0:
        return 0.0, (0.0, unseen_bound(n, confidence))
    factor = float(stdtrit(n - 1, 0.5 * (1.0 + confidence)))
    reach = float(np.exp(factor * weight.std(ddof=1) / (mean * np.sqrt(n))))
    return mean, (mean / reach, min(mean * reach, 1.0))


def _check(limit: LimitState, first: FirstOrder, runs: int, far_runs: int) -> None:
    if runs < 2 or far_runs < 1:
        raise ParameterError(f"runs must be at least 2 and far_runs 1; got {runs} and {far_runs}")
    if first.point.shape[1] != limit.dimension:
        raise ParameterError(f"design points must have {limit.dimension} coordinates")
    if first.origin_exceeds:
        raise ParameterError("the median realisation exceeds: use plain Monte Carlo")
