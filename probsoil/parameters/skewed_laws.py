"""Laws with one longer tail besides the lognormal: gamma and Gumbel."""

from dataclasses import dataclass, field

import numpy as np
from scipy.special import gammainc, gammaincc, gammainccinv, gammaincinv, gammaln, log_ndtr, ndtr, ndtri_exp

from probsoil._typing import FloatArray
from probsoil.parameters.laws import nearer_tail_score, read_table, table_nodes

_REACH = 37.0  # beyond this |z| a probability underflows


@dataclass(frozen=True, slots=True, eq=False)
class GammaLaw:
    """Gamma law, read from a table in z.

    Attributes
    ----------
    shape : float, [-]
        Shape parameter, above zero.
    scale : float, [any]
        Mean over shape, above zero, in the parameter's unit.

    Notes
    -----
    The table holds the logarithm of the quantile over `scale`, x, with its exact slope
    phi(z)/(x f(x)), f being the density. The inverse itself would take twenty times as long.
    """

    shape: float
    scale: float
    _log: FloatArray = field(init=False, repr=False)
    _slope: FloatArray = field(init=False, repr=False)

    def __post_init__(self) -> None:
        z = table_nodes()
        tail = ndtr(-np.abs(z))
        x = np.where(z < 0.0, gammaincinv(self.shape, tail), gammainccinv(self.shape, tail))
        log_x = np.log(x)
        log_normal = -0.5 * z**2 - 0.5 * np.log(2.0 * np.pi)
        object.__setattr__(self, "_log", log_x)
        object.__setattr__(
            self, "_slope", np.exp(log_normal - (self.shape * log_x - x - gammaln(self.shape)))
        )

    @property
    def mean(self) -> float:
        """Mean of the law, in the parameter's unit, [any]."""
        return self.shape * self.scale

    @property
    def sd(self) -> float:
        """Standard deviation of the law, in the parameter's unit, [any]."""
        return float(np.sqrt(self.shape)) * self.scale

    def quantile(self, z: FloatArray) -> FloatArray:
        """Values at latent standard normals.

        Parameters
        ----------
        z : ndarray, shape (...,), [-]
            Latent standard normals.

        Returns
        -------
        values : ndarray, shape (...,), [any]
            Values, in the parameter's unit.
        """
        return np.asarray(self.scale * np.exp(read_table(self._log, self._slope, z)))

    def score(self, value: float) -> float:
        """Latent standard normal at which a value lies.

        Parameters
        ----------
        value : float, [any]
            Value, in the parameter's unit.

        Returns
        -------
        z : float, [-]
            Standard normal score; infinite at and beyond an end of the law's range.
        """
        x = max(value / self.scale, 0.0)
        return nearer_tail_score(float(gammainc(self.shape, x)), float(gammaincc(self.shape, x)))


@dataclass(frozen=True, slots=True)
class GumbelLaw:
    r"""Gumbel law of largest values, :math:`F(x) = \exp[-\exp(-(x - m)/s)]`.

    Attributes
    ----------
    mode, scale : float, [any]
        Most likely value m and scale s, in the parameter's unit.
    """

    mode: float
    scale: float

    @property
    def mean(self) -> float:
        """Mean of the law, in the parameter's unit, [any]."""
        return self.mode + float(np.euler_gamma) * self.scale

    @property
    def sd(self) -> float:
        """Standard deviation of the law, in the parameter's unit, [any]."""
        return float(np.pi / np.sqrt(6.0)) * self.scale

    def quantile(self, z: FloatArray) -> FloatArray:
        """Values at latent standard normals.

        Parameters
        ----------
        z : ndarray, shape (...,), [-]
            Latent standard normals.

        Returns
        -------
        values : ndarray, shape (...,), [any]
            Values, in the parameter's unit.
        """
        # the logarithm of a probability keeps its digits on both sides
        return np.asarray(self.mode - self.scale * np.log(-log_ndtr(np.clip(z, -_REACH, _REACH))))

    def score(self, value: float) -> float:
        """Latent standard normal at which a value lies.

        Parameters
        ----------
        value : float, [any]
            Value, in the parameter's unit.

        Returns
        -------
        z : float, [-]
            Standard normal score; infinite at and beyond an end of the law's range.
        """
        return float(ndtri_exp(-np.exp(min(700.0, (self.mode - value) / self.scale))))
