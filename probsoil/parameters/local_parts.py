"""The part of a layer average that differs from station to station."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.errors import ParameterError

Position = tuple[float, float]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LocalPart:
    r"""What of one parameter varies between stations, as a mixture of latent normals.

    Attributes
    ----------
    parameter : int, [-]
        Place of the parameter among the uncertain ones.
    share : float, [-]
        Share :math:`\beta^2` of the parameter's variance that is local.
    latent : ndarray of int, shape (n_station,), [-]
        Columns of its latent normals w.
    mixing : ndarray, shape (n_station, n_station), [-]
        Factor M of the correlation between stations: the local part at station s is the sum over t of
        :math:`M_{st} w_t`. Rows are stations in the order given, columns those of `station_order`.
    """

    parameter: int
    share: float
    latent: IntArray
    mixing: FloatArray

    def at(self, z: FloatArray, station: int) -> FloatArray:
        """Return the local part at one station.

        Parameters
        ----------
        z : ndarray, shape (n, d), [-]
            Latent normals.
        station : int, [-]
            Place of the station in the order given.

        Returns
        -------
        part : ndarray, shape (n,), [-]
            Standard normal; summed column by column, so that a row has the same bits in any batch.
        """
        part = np.zeros(len(z))
        for column, weight in zip(self.latent, self.mixing[station], strict=True):
            if weight != 0.0:
                part += weight * z[:, column]
        return part

    @property
    def common_shift(self) -> FloatArray:
        """Shift of each latent normal that moves the part up by one at every station, shape (n_station,), [-]."""
        return np.asarray(np.linalg.solve(self.mixing, np.ones(len(self.mixing))), dtype=np.float64)


def horizontal_correlation(positions: Sequence[Position], scale: float) -> FloatArray:
    r"""Correlation of layer averages between plan positions.

    Parameters
    ----------
    positions : sequence of (float, float), [m]
        Plan positions.
    scale : float, [m]
        Horizontal scale of fluctuation, above zero.

    Returns
    -------
    correlation : ndarray, shape (n, n), [-]
        Positive definite for positions that differ.

    Raises
    ------
    ParameterError
        If the scale is not above zero.

    Notes
    -----
    The exponential (Markov) correlation :math:`\rho(d) = \exp(-2 d / \delta_h)` of the distance in plan,
    the same in all directions, as with depth. The correlation in space is taken as the product of the two,
    so that the averages over one layer at two places correlate by :math:`\rho(d)`, whatever their
    variance function.

    References
    ----------
    .. [1] E. Vanmarcke, "Probabilistic modeling of soil profiles", Journal of the Geotechnical
       Engineering Division, ASCE, 103(GT11), 1977 (recalled; not opened).
    """
    if not scale > 0.0:
        raise ParameterError(f"the horizontal scale of fluctuation must be above zero; got {scale:g} m")
    place = np.asarray(positions, dtype=np.float64).reshape(-1, 2)
    apart = place[:, np.newaxis, :] - place[np.newaxis, :, :]
    return np.asarray(np.exp(-2.0 * np.hypot(apart[..., 0], apart[..., 1]) / scale), dtype=np.float64)


def station_order(positions: Sequence[Position]) -> list[int]:
    """Order of stations that does not depend on how they are listed.

    Parameters
    ----------
    positions : sequence of (float, float), [m]
        Plan positions x and y, all different.

    Returns
    -------
    order : list of int, [-]
        By y, then by x. Latent normals belong to the stations in this order, so that a realisation is the
        same however they are listed.
    """
    return sorted(range(len(positions)), key=lambda index: (positions[index][1], positions[index][0]))


def mixing_matrix(positions: Sequence[Position], scale: float) -> FloatArray:
    """Factor of the correlation between stations.

    Parameters
    ----------
    positions : sequence of (float, float), [m]
        Plan positions in the order given, all different.
    scale : float, [m]
        Horizontal scale of fluctuation.

    Returns
    -------
    mixing : ndarray, shape (n, n), [-]
        M with M M' the correlation: the Cholesky factor of the stations in `station_order`, its rows put
        back into the order given.
    """
    order = station_order(positions)
    factor = np.linalg.cholesky(horizontal_correlation([positions[index] for index in order], scale))
    mixing = np.empty_like(factor)
    mixing[order] = factor
    mixing.setflags(write=False)
    return np.asarray(mixing, dtype=np.float64)
