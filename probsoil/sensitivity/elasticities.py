"""How the chance of exceedance answers to the spread and to the mean of each parameter."""

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtri

from probsoil._typing import FloatArray, IntArray
from probsoil.sensitivity.accumulate import DriverSums


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Elasticity:
    """Elasticity of an exceedance probability with its standard error.

    Attributes
    ----------
    value : ndarray, shape (d,), [-]
        Elasticity for each parameter.
    error : ndarray, shape (d,), [-]
        Standard error; not a number with fewer than two realisations on either side of the limit.
    """

    value: FloatArray
    error: FloatArray

    def interval(self, confidence: float, *, together: int = 1) -> tuple[FloatArray, FloatArray]:
        """Limits of the elasticities.

        Parameters
        ----------
        confidence : float, [-]
            Confidence of the limits.
        together : int, [-]
            Number of intervals that shall hold at once (Bonferroni); 1 for each by itself.

        Returns
        -------
        low, high : ndarray, shape (d,), [-]
            Normal limits.
        """
        reach = -float(ndtri(0.5 * (1.0 - confidence) / max(together, 1))) * self.error
        return self.value - reach, self.value + reach


def elasticities(sums: DriverSums) -> tuple[Elasticity, Elasticity]:
    r"""Elasticities of the exceedance probability to spread and to mean.

    Parameters
    ----------
    sums : DriverSums
        Sums over all realisations.

    Returns
    -------
    spread : Elasticity
        :math:`\partial \ln P / \partial \ln \sigma_i`: per cent that P rises when the latent standard
        deviation of parameter i rises by one per cent.
    mean : Elasticity
        :math:`\partial \ln P / \partial \mu_i`: relative rise of P per latent standard deviation that
        parameter i is shifted up. All values rise with z, so its sign is that of the value.

    Notes
    -----
    With the latent normals z of correlation R and :math:`w = R^{-1} z`, the derivatives of the log
    density are :math:`s_i = z_i w_i - 1` to :math:`\ln \sigma_i` and :math:`s_i = w_i` to
    :math:`\mu_i`, all else (the other parameters and R) held; each elasticity is the mean of its score
    over the exceeding realisations. Since the expectation over all realisations is zero, the sample mean
    over all is subtracted, which leaves

    .. math:: (1 - P) (\bar s_1 - \bar s_0), \qquad
       \mathrm{var} = (1 - P)^2 \left( \frac{v_1}{k} + \frac{v_0}{n - k} \right)
       + \frac{P (1 - P)}{n} (\bar s_1 - \bar s_0)^2,

    with subscripts 1 and 0 for the k realisations that exceed and the n - k that do not, and v the sample
    variances. For a rare event this is the plain mean with :math:`v_1 / k`; for a frequent one the error is
    several times smaller. Realisations are taken as independent. Latin hypercube and Sobol' points are
    not; they spread more evenly, so the interval is then as a rule on the wide side, which is measured in the
    tests and not proved. These are derivatives at the present inputs, not what follows from a large
    change.

    References
    ----------
    .. [1] R. Y. Rubinstein, "The score function approach for sensitivity analysis of computer simulation
       models", Mathematics and Computers in Simulation, 28, 1986 (recalled; not opened).
    """
    spread = score_mean(sums.count, sums.spread_score, sums.spread_square)
    mean = score_mean(sums.count, sums.mean_score, sums.mean_square)
    return spread, mean


def score_mean(count: IntArray, score: FloatArray, square: FloatArray) -> Elasticity:
    """Mean over the exceeding realisations of what has mean zero over all, by the formula of `elasticities`.

    Parameters
    ----------
    count : ndarray of int, shape (2,), [-]
        Realisations that meet the limit and that exceed it.
    score, square : ndarray, shape (2, m), [-]
        Sums and sums of squares over each.

    Returns
    -------
    mean : Elasticity
        Mean and its standard error.
    """
    met, exceeded = (int(number) for number in count)
    unknown = np.full(score.shape[1], np.nan)
    if met == 0 or exceeded == 0:
        return Elasticity(value=unknown, error=unknown)
    n = met + exceeded
    probability = exceeded / n
    average = score / count[:, np.newaxis]
    gap = average[1] - average[0]
    value = (1.0 - probability) * gap
    if min(met, exceeded) < 2:
        return Elasticity(value=value, error=unknown)
    variance = (square - count[:, np.newaxis] * average**2) / (count[:, np.newaxis] - 1)
    within = (np.maximum(variance, 0.0) / count[:, np.newaxis]).sum(axis=0)
    total = (1.0 - probability) ** 2 * within + probability * (1.0 - probability) / n * gap**2
    return Elasticity(value=value, error=np.sqrt(total))
