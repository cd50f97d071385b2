"""Parameters after tests: latent normals, percentiles and moments, and where what is left stems from."""

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr, ndtri

from probsoil._typing import FloatArray, IntArray
from probsoil.parameters.local_parts import LocalParts
from probsoil.parameters.marginals import Marginal
from probsoil.parameters.observations import Observation, Row

SOURCES = ("knowledge", "inherent", "measurement", "bias")
"""The four sources of uncertainty, in the order of `Split`."""

_REACH, _NODES = 10.0, 1001


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Split:
    """What share of a parameter's variance at the first station stems from each source.

    Attributes
    ----------
    before, after : ndarray, shape (n_parameter, 4), [-]
        Variance of the normal score by the sources `SOURCES`, before and after the tests; each row adds up to
        the whole variance.
    """

    before: FloatArray
    after: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Updated:
    """Latent normals after the tests.

    Attributes
    ----------
    weight : ndarray, shape (n_component,), [-]
        Chance of each variability on the grid; one component where it is known.
    mean : ndarray, shape (n_component, d), [-]
        Mean of the latent normals.
    factor : ndarray, shape (n_component, d, d), [-]
        Lower triangular; latent normals are the mean plus this times correlated standard normals.
    correlation : ndarray, shape (d, d), [-]
        Correlation of these.
    offset : ndarray, shape (n_component, n_parameter), [-]
        Shift of the scores at every station.
    part_scale : ndarray, shape (n_component, n_part), [-]
        Factor on the local parts.
    score_mean, score_sd : ndarray, shape (n_component, n_parameter), [-]
        Of the normal scores at the first station.
    prior_weight, prior_mean, prior_sd : ndarray
        The same before the tests.
    observations : tuple of Observation
        The tests.
    rows : tuple of Row
        What each says.
    expected_sd : ndarray, shape (n_test,), [-]
        Standard deviation of each residual before the tests, at the variability most likely now.
    chance : float, [-]
        Chance of data at least as far from what was expected as these.
    split : Split
        Sources.
    """

    weight: FloatArray
    mean: FloatArray
    factor: FloatArray
    correlation: FloatArray
    offset: FloatArray
    part_scale: FloatArray
    score_mean: FloatArray
    score_sd: FloatArray
    prior_weight: FloatArray
    prior_mean: FloatArray
    prior_sd: FloatArray
    observations: tuple[Observation, ...]
    rows: tuple[Row, ...]
    expected_sd: FloatArray
    chance: float
    split: Split

    @property
    def mixed(self) -> bool:
        """Whether there is more than one component, which takes a latent normal of its own."""
        return len(self.weight) > 1

    def component(self, z: FloatArray) -> IntArray:
        """Component of each realisation.

        Parameters
        ----------
        z : ndarray, shape (n, d) or (n, d + 1), [-]
            Correlated standard normals; the last one chooses where there are several.

        Returns
        -------
        component : ndarray of int, shape (n,), [-]
            Place on the grid.
        """
        if not self.mixed:
            return np.zeros(len(z), dtype=np.int64)
        edge = np.cumsum(self.weight)[:-1]
        return np.searchsorted(edge, ndtr(z[:, -1]), side="right").astype(np.int64)

    def latent(self, z: FloatArray, component: IntArray) -> FloatArray:
        """Latent normals of each realisation.

        Parameters
        ----------
        z : ndarray, shape (n, d) or (n, d + 1), [-]
            Correlated standard normals.
        component : ndarray of int, shape (n,), [-]
            Component of each.

        Returns
        -------
        latent : ndarray, shape (n, d), [-]
            Summed column by column, so that a row has the same bits in any batch.
        """
        found = np.array(self.mean[component], order="F")
        there = np.abs(self.factor).max(axis=0) > 0.0
        for i in range(found.shape[1]):
            for j in np.flatnonzero(there[i]):
                found[:, i] += self.factor[component, i, j] * z[:, j]
        return found

    def scores(self, z: FloatArray, local: LocalParts | None, station: int) -> FloatArray:
        """Return the normal scores of the parameters at one station.

        Parameters
        ----------
        z : ndarray, shape (n, d) or (n, d + 1), [-]
            Correlated standard normals.
        local : LocalParts or None
            What varies between stations.
        station : int, [-]
            Place of the station.

        Returns
        -------
        scores : ndarray, shape (n, n_parameter), [-]
            No longer standard normal: where the parameters lie within their laws after the tests.
        """
        component = self.component(z)
        latent = self.latent(z, component)
        if local is None:
            return latent
        scores = local.scores(latent, station, scale=self.part_scale[component])
        return np.asarray(scores + self.offset[component], dtype=np.float64)

    @property
    def standard_correlation(self) -> FloatArray:
        """Correlation of the standard normals that are drawn, with the one that chooses a component."""
        if not self.mixed:
            return self.correlation
        size = len(self.correlation)
        whole = np.eye(size + 1)
        whole[:size, :size] = self.correlation
        return whole

    def percentile(self, parameter: int, probability: float, *, before: bool = False) -> float:
        """Score of a parameter at the first station with a given chance below it.

        Parameters
        ----------
        parameter : int, [-]
            Its place.
        probability : float, [-]
            Between 0 and 1.
        before : bool
            Whether before the tests.

        Returns
        -------
        score : float, [-]
            By bisection; exact for one component.
        """
        weight, mean, sd = self._scores(parameter, before=before)
        if len(weight) == 1:
            return float(mean[0] + sd[0] * ndtri(probability))
        low, high = float((mean - 12.0 * sd).min()), float((mean + 12.0 * sd).max())
        for _ in range(80):
            middle = 0.5 * (low + high)
            below = float(weight @ ndtr((middle - mean) / sd)) < probability
            low, high = (middle, high) if below else (low, middle)
        return 0.5 * (low + high)

    def below(self, parameter: int, score: FloatArray, *, before: bool = False) -> FloatArray:
        """Chance that a parameter at the first station lies below normal scores.

        Parameters
        ----------
        parameter : int, [-]
            Its place.
        score : ndarray, shape (n, ...), [-]
            Scores; may be infinite.
        before : bool
            Whether before the tests.

        Returns
        -------
        chance : ndarray, shape (n, ...), [-]
            From 0 to 1.
        """
        found = np.zeros(score.shape)
        for weight, mean, sd in zip(*self._scores(parameter, before=before), strict=True):
            found += weight * ndtr((score - mean) / sd)
        return found

    def moments(self, parameter: int, law: Marginal, *, before: bool = False) -> tuple[float, float]:
        """Mean and standard deviation of a parameter at the first station.

        Parameters
        ----------
        parameter : int, [-]
            Its place.
        law : Marginal
            Its law as a function of the score.
        before : bool
            Whether before the tests.

        Returns
        -------
        mean, sd : float, [any]
            By the trapezoidal rule in the scores of each component.
        """
        weight, mean, sd = self._scores(parameter, before=before)
        z = np.linspace(-_REACH, _REACH, _NODES)
        density = np.exp(-0.5 * z**2)
        density /= density.sum()
        values = law.quantile(mean[:, np.newaxis] + np.outer(sd, z))
        first = float(weight @ (values @ density))
        return first, float(np.sqrt(weight @ ((values - first) ** 2 @ density)))

    def _scores(self, parameter: int, *, before: bool) -> tuple[FloatArray, FloatArray, FloatArray]:
        if before:
            return self.prior_weight, self.prior_mean[:, parameter], self.prior_sd[:, parameter]
        return self.weight, self.score_mean[:, parameter], self.score_sd[:, parameter]
