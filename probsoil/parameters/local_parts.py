"""The part of a layer average that differs from station to station."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.errors import DependenceError, ParameterError
from probsoil.parameters.dependence import correlation_blocks
from probsoil.scenario.correlation import LEAST_EIGENVALUE, parts_correlation

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
        """Shift of each latent normal that moves the part up by one at every station, (n_station,), [-]."""
        return np.asarray(np.linalg.solve(self.mixing, np.ones(len(self.mixing))), dtype=np.float64)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LocalParts:
    r"""How parameters are made up of what all stations share and what differs between them.

    Attributes
    ----------
    parts : tuple of LocalPart
        What differs, one for every parameter with variability of its own from point to point.
    shared_weight : ndarray, shape (n_parameter,), [-]
        Weight a of each parameter's shared part.
    local_weight : ndarray, shape (n_parameter, n_part), [-]
        Weights W of the local parts: the normal score of parameter p at a station is
        :math:`a_p K_p + \sum_j W_{pj} E_j`, of variance one.
    shared_correlation : ndarray, shape (n_parameter, n_parameter), [-]
        Correlation of the shared parts K.
    local_correlation : ndarray, shape (n_part, n_part), [-]
        Correlation of the local parts E at any one station.
    """

    parts: tuple[LocalPart, ...]
    shared_weight: FloatArray
    local_weight: FloatArray
    shared_correlation: FloatArray
    local_correlation: FloatArray

    def scores(self, z: FloatArray, station: int, *, scale: FloatArray | None = None) -> FloatArray:
        """Return the normal scores of the parameters at one station.

        Parameters
        ----------
        z : ndarray, shape (n, d), [-]
            Correlated latent normals: shared parts first, then those of the local parts.
        station : int, [-]
            Place of the station in the order given.
        scale : ndarray or None, shape (n, n_part), [-]
            Factor on each local part; None for one.

        Returns
        -------
        scores : ndarray, shape (n, n_parameter), [-]
            Standard normal, with the correlation asked for at every station.
        """
        count = len(self.shared_weight)
        scores = np.array(z[:, :count], order="F")
        scores *= self.shared_weight
        for number, part in enumerate(self.parts):
            local = part.at(z, station) if scale is None else scale[:, number] * part.at(z, station)
            for place in np.flatnonzero(self.local_weight[:, number]):
                scores[:, place] += self.local_weight[place, number] * local
        return scores

    @property
    def correlation(self) -> FloatArray:
        """Correlation of all latent normals, shape (d, d), [-]: local parts keep step station by station."""
        count, size = len(self.shared_weight), len(self.parts[0].latent)
        whole = np.zeros((count + size * len(self.parts),) * 2)
        whole[:count, :count] = self.shared_correlation
        whole[count:, count:] = np.kron(self.local_correlation, np.eye(size))
        return whole


def local_parts(
    correlation: FloatArray, parts: Sequence[LocalPart], rigid: Sequence[int], names: Sequence[str]
) -> LocalParts:
    r"""Split parameters into what all stations share and what differs between them.

    Parameters
    ----------
    correlation : ndarray, shape (n_parameter, n_parameter), [-]
        Correlation R of the parameters' normal scores, to hold at every station.
    parts : sequence of LocalPart
        What differs from place to place, at least one.
    rigid : sequence of int, [-]
        Parameters that are the same at all stations, such as the weight of the fill.
    names : sequence of str
        Addresses of the parameters.

    Returns
    -------
    split : LocalParts
        Weights and correlations.

    Raises
    ------
    DependenceError
        If the correlations cannot hold at every station, or correlated parts vary over different
        distances.

    Notes
    -----
    Parameters J with variability of their own, and rigid ones, have shared and local parts that both
    correlate by `parts_correlation`. The others follow by regression: with z the scores of J and rigid
    ones at a station and B the regression coefficients from R, theirs are :math:`B z + r`, the rest r being
    shared. So a parameter without variability of its own varies between stations as far as its correlation
    with one that has makes it; R holds at every station, and the covariance is positive definite
    by construction.
    """
    share = np.zeros(len(correlation))
    varying = [part.parameter for part in parts]
    share[varying] = [part.share for part in parts]
    core = sorted({*varying, *rigid})
    kept = parts_correlation(correlation[np.ix_(core, core)], share[core])
    _check_core(kept, [names[index] for index in core])
    _check_scales(parts, correlation, names)
    rows = [core.index(index) for index in varying]
    local = kept[np.ix_(rows, rows)]
    weight = np.zeros((len(correlation), len(parts)))
    weight[varying, np.arange(len(parts))] = np.sqrt(share[varying])
    others = [index for index in range(len(correlation)) if index not in core]
    follows = np.linalg.solve(correlation[np.ix_(core, core)], correlation[np.ix_(core, others)]).T
    weight[others] = follows[:, rows] * np.sqrt(share[varying])
    covariance = correlation - np.einsum("pi,ij,qj->pq", weight, local, weight)
    shared = np.sqrt(np.diag(covariance))
    between = covariance / np.outer(shared, shared)
    np.fill_diagonal(between, 1.0)
    return LocalParts(
        parts=tuple(parts),
        shared_weight=shared,
        local_weight=weight,
        shared_correlation=between,
        local_correlation=local,
    )


def _check_core(kept: FloatArray, names: Sequence[str]) -> None:
    for block in correlation_blocks(kept):
        if float(np.linalg.eigvalsh(kept[np.ix_(block, block)])[0]) < LEAST_EIGENVALUE:
            tied = ", ".join(names[index] for index in block)
            raise DependenceError(
                f"the rank correlations of {tied} cannot hold at every station, since what varies from place "
                "to place is not the same share of each; give them inherent_cov alike, or less correlation"
            )


def _check_scales(parts: Sequence[LocalPart], correlation: FloatArray, names: Sequence[str]) -> None:
    """Refuse correlated parts that vary over different distances: they could not keep step."""
    for number, one in enumerate(parts):
        for other in parts[:number]:
            tied = correlation[one.parameter, other.parameter] != 0.0
            if tied and not np.array_equal(one.mixing, other.mixing):
                raise DependenceError(
                    f"{names[other.parameter]} and {names[one.parameter]} are correlated and both vary from "
                    "station to station: they need the same horizontal_scale"
                )


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
