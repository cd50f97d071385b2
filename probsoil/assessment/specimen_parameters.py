"""What is known of the parameters of one specimen before it is tested."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import DependenceError, ParameterError, ShapeError

PARAMETERS = ("lambda", "kappa", "M", "preconsolidation_stress")
"""The parameters, in the order of every array here; kappa is the slope of one-dimensional swelling."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SpecimenParameters:
    """Joint lognormal law of lambda, kappa, M and the preconsolidation stress of one specimen.

    Attributes
    ----------
    log_mean : ndarray, shape (4,), [ln of the unit]
        Mean of the logarithm of each of `PARAMETERS`; the stress in kPa.
    log_sd : ndarray, shape (4,), [-]
        Standard deviation of the same: what is not known of the layer and what differs from specimen to
        specimen, together.
    correlation : ndarray, shape (4, 4), [-]
        Between the logarithms.
    source : str
        Where the numbers come from, in words.

    Raises
    ------
    ShapeError
        If the shapes do not fit.
    DependenceError
        If the correlations cannot hold together.
    """

    log_mean: FloatArray
    log_sd: FloatArray
    correlation: FloatArray
    source: str

    def __post_init__(self) -> None:
        for name, shape in (("log_mean", (4,)), ("log_sd", (4,)), ("correlation", (4, 4))):
            own = np.array(getattr(self, name), dtype=np.float64)
            if own.shape != shape:
                raise ShapeError(f"{name} must have shape {shape}; got {own.shape}")
            own.setflags(write=False)
            object.__setattr__(self, name, own)
        if not np.isfinite(self.log_mean).all() or not (self.log_sd >= 0.0).all():
            raise ParameterError("log_mean must be finite and log_sd at least 0")
        sound = np.allclose(self.correlation, self.correlation.T) and np.allclose(
            np.diag(self.correlation), 1.0
        )
        if not sound or np.linalg.eigvalsh(self.correlation)[0] < -1e-9:
            raise DependenceError(
                "correlation must be symmetric, 1 on its diagonal and without a negative eigenvalue"
            )

    @property
    def median(self) -> FloatArray:
        """Median of each parameter [its unit], shape (4,)."""
        return np.exp(self.log_mean)

    def values(self, normals: FloatArray) -> FloatArray:
        """Parameters that belong to independent standard normals.

        Parameters
        ----------
        normals : ndarray, shape (n, 4), [-]
            Independent standard normals.

        Returns
        -------
        values : ndarray, shape (n, 4), [unit of each]
            Parameters, bit for bit the same for a row alone as in any batch.
        """
        vectors = _root_of(self.correlation)
        score = np.zeros(normals.shape)
        for row in range(len(PARAMETERS)):
            for column in range(len(PARAMETERS)):
                score[:, row] += vectors[row, column] * normals[:, column]
        return np.asarray(np.exp(self.log_mean + self.log_sd * score))


def specimen_parameters(
    mean: ArrayLike, sd: ArrayLike, correlation: ArrayLike | None = None, *, source: str = "as stated"
) -> SpecimenParameters:
    """Return the law of a specimen from means and standard deviations.

    Parameters
    ----------
    mean, sd : array_like, shape (4,), [unit of each]
        Of lambda [-], kappa [-], M [-] and the preconsolidation stress [kPa], among specimens.
    correlation : array_like, shape (4, 4), or None, [-]
        Between the logarithms; None for none.
    source : str
        Where the numbers come from, in words.

    Returns
    -------
    parameters : SpecimenParameters
        Lognormal law with these moments.

    Raises
    ------
    ParameterError
        If a mean is not above zero or a standard deviation is negative.
    """
    centre, spread = np.asarray(mean, dtype=np.float64), np.asarray(sd, dtype=np.float64)
    if not ((centre > 0.0).all() and (spread >= 0.0).all()):
        raise ParameterError("mean must be above 0 and sd at least 0")
    square = np.log1p((spread / centre) ** 2)
    return SpecimenParameters(
        log_mean=np.log(centre) - 0.5 * square,
        log_sd=np.sqrt(square),
        correlation=np.eye(len(PARAMETERS))
        if correlation is None
        else np.asarray(correlation, dtype=np.float64),
        source=source,
    )


def _root_of(correlation: FloatArray) -> FloatArray:
    """Symmetric square root: it also exists where parameters are wholly dependent."""
    values, vectors = np.linalg.eigh(correlation)
    return np.asarray(np.einsum("ik,k,jk->ij", vectors, np.sqrt(np.maximum(values, 0.0)), vectors))
