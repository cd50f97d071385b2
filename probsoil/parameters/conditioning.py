"""A joint Gaussian conditioned on linear observations."""

from dataclasses import dataclass

import numpy as np
from scipy.linalg import cho_solve

from probsoil._typing import FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Conditioned:
    """What is left of a Gaussian once data are known.

    Attributes
    ----------
    mean : ndarray, shape (d,), [-]
        Shift of the mean.
    covariance : ndarray, shape (d, d), [-]
        Covariance.
    gain : ndarray, shape (d, n), [-]
        Weights of the residuals in the shift of the mean.
    log_likelihood : float, [-]
        Logarithm of the density of the data before they were known, a constant left out.
    distance : float, [-]
        Squared Mahalanobis distance of the data from what was expected.
    """

    mean: FloatArray
    covariance: FloatArray
    gain: FloatArray
    log_likelihood: float
    distance: float


def conditioned(prior: FloatArray, cross: FloatArray, data: FloatArray, residual: FloatArray) -> Conditioned:
    r"""Return a zero-mean Gaussian conditioned on observations.

    Parameters
    ----------
    prior : ndarray, shape (d, d), [-]
        Covariance :math:`\Sigma_\theta`.
    cross : ndarray, shape (d, n), [-]
        Covariance :math:`\Sigma_{\theta d}` with the observations.
    data : ndarray, shape (n, n), [-]
        Covariance :math:`\Sigma_{dd}` of the observations, errors included, positive definite.
    residual : ndarray, shape (n,), [-]
        Observed less expected.

    Returns
    -------
    conditioned : Conditioned
        Without observations the prior itself.

    Notes
    -----
    .. math:: m = \Sigma_{\theta d} \Sigma_{dd}^{-1} (d - E d), \qquad
              C = \Sigma_\theta - \Sigma_{\theta d} \Sigma_{dd}^{-1} \Sigma_{d \theta}.

    References
    ----------
    .. [1] H. Raiffa and R. Schlaifer, Applied Statistical Decision Theory, Harvard, 1961 (recalled; not
       opened; a property of the normal distribution).
    """
    if not len(residual):
        return Conditioned(
            mean=np.zeros(len(prior)),
            covariance=prior,
            gain=np.zeros(cross.shape),
            log_likelihood=0.0,
            distance=0.0,
        )
    factor = np.linalg.cholesky(data)
    gain = cho_solve((factor, True), cross.T).T
    distance = float(residual @ cho_solve((factor, True), residual))
    covariance = prior - gain @ cross.T
    return Conditioned(
        mean=gain @ residual,
        covariance=0.5 * (covariance + covariance.T),
        gain=gain,
        log_likelihood=-0.5 * distance - float(np.log(np.diag(factor)).sum()),
        distance=distance,
    )
