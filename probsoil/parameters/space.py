"""All uncertain parameters of a scenario in one latent standard-normal space."""

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Literal

import numpy as np

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.parameters.dependence import Dependence, correlation_matrix
from probsoil.parameters.local_parts import LocalParts, Position
from probsoil.parameters.marginals import Marginal, UncertainQuantity, marginal
from probsoil.parameters.observations import Observation
from probsoil.parameters.station_parts import parts_at_stations
from probsoil.parameters.tested import tested
from probsoil.parameters.updated import Updated
from probsoil.scenario.distributions import Constant

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True, slots=True, kw_only=True)
class ParameterSummary:
    """Summary numbers of one uncertain parameter, as drawn.

    Attributes
    ----------
    name, unit, meaning, text : str
        Address, unit, meaning in words, and the law as the user gave it.
    mean, sd : float, [`unit`]
        Mean and standard deviation of the representative value within its physical bounds.
    p05, p50, p95 : float, [`unit`]
        Percentiles.
    cut_share : float, [-]
        Probability that the law had outside the physical bounds.
    low, high : float, [`unit`]
        Physical bounds; infinite where there is none.
    """

    name: str
    unit: str
    meaning: str
    text: str
    mean: float
    sd: float
    p05: float
    p50: float
    p95: float
    cut_share: float
    low: float
    high: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ParameterSpace:
    """Uncertain parameters, their dependence, and the fixed numbers beside them.

    Attributes
    ----------
    marginals : tuple of Marginal
        Law of each uncertain parameter, in the order of the file.
    correlation : ndarray, shape (d, d), [-]
        Correlation R of the latent normals: one for each parameter; with several stations one more
        for each of them and each parameter that varies between them.
    inverse_correlation : ndarray, shape (d, d), [-]
        Inverse of `correlation`.
    triangle : ndarray, shape (d, d), [-]
        Lower Cholesky factor C of `correlation`.
    constants : dict of str to float
        Value of every number that is not uncertain, in its own unit.
    local : LocalParts or None
        What varies between stations; None where nothing does.
    at_station : ndarray, shape (n_parameter, n_parameter), [-]
        Correlation of the parameters' normal scores at any one station, before any tests.
    updated : Updated or None
        What tests have made of the latent normals, of which `correlation` then is that after the tests;
        None without tests.
    """

    marginals: tuple[Marginal, ...]
    correlation: FloatArray
    inverse_correlation: FloatArray
    triangle: FloatArray
    constants: dict[str, float]
    local: LocalParts | None = None
    at_station: FloatArray = field(default_factory=lambda: np.zeros((0, 0)))
    updated: Updated | None = None

    @property
    def names(self) -> tuple[str, ...]:
        """Addresses of the uncertain parameters, in the order of the file."""
        return tuple(law.name for law in self.marginals)

    @property
    def dimension(self) -> int:
        """Number of latent normals d [-]: that of the uncertain parameters, and more with stations."""
        return len(self.correlation)

    def correlated(self, u: FloatArray) -> FloatArray:
        """Correlated latent normals from independent ones.

        Parameters
        ----------
        u : ndarray, shape (n, d), [-]
            Independent standard normals.

        Returns
        -------
        z : ndarray, shape (n, d), [-]
            Latent normals, each row C u. Bit for bit the same for a row alone as in any batch: the
            product is summed column by column and never handed to a matrix library.

        Raises
        ------
        ShapeError
            If `u` does not have one column per latent normal.
        """
        if u.ndim != 2 or u.shape[1] != self.dimension:
            raise ShapeError(f"u must have shape (n, {self.dimension}); got {u.shape}")
        z = np.zeros(u.shape, order="F")
        for i in range(self.dimension):
            for j in np.flatnonzero(self.triangle[i]):
                z[:, i] += self.triangle[i, j] * u[:, j]
        return z

    def values(self, z: FloatArray, station: int = 0) -> dict[str, FloatArray | float]:
        """Value of every number, uncertain or fixed.

        Parameters
        ----------
        z : ndarray, shape (n, d), [-]
            Correlated latent normals.
        station : int, [-]
            Place of the station in the order given; values that do not vary between stations are the
            same at all of them.

        Returns
        -------
        values : dict of str to ndarray of shape (n,) or float
            Values by address, each in its own unit; a fixed number is a float.

        Raises
        ------
        ShapeError
            If `z` does not have one column per latent normal.
        """
        if z.ndim != 2 or z.shape[1] != self.dimension:
            raise ShapeError(f"z must have shape (n, {self.dimension}); got {z.shape}")
        if self.updated is not None:
            scores = self.updated.scores(z, self.local, station)
        else:
            scores = z if self.local is None else self.local.scores(z, station)
        drawn = {law.name: law.quantile(scores[:, i]) for i, law in enumerate(self.marginals)}
        return {**self.constants, **drawn}

    def at(self, point: Literal["mean", "median"]) -> dict[str, float]:
        """Every number at its mean or at its median.

        Parameters
        ----------
        point : {"mean", "median"}
            Which of the two.

        Returns
        -------
        values : dict of str to float
            Values by address, each in its own unit.

        Raises
        ------
        ParameterError
            If `point` is neither.
        """
        if point not in ("mean", "median"):
            raise ParameterError(f"point must be 'mean' or 'median'; got {point!r}")
        if self.updated is not None:
            centre = {row.name: row.mean if point == "mean" else row.p50 for row in self.summary()}
        elif point == "mean":
            centre = {law.name: law.mean for law in self.marginals}
        else:
            centre = {law.name: float(law.quantile(0.0)) for law in self.marginals}
        return {**self.constants, **centre}

    def summary(self) -> tuple[ParameterSummary, ...]:
        """Summary numbers of each uncertain parameter.

        Returns
        -------
        rows : tuple of ParameterSummary
            One row per uncertain parameter, in the order of the file.
        """
        if self.updated is None:
            return tuple(_summary(law) for law in self.marginals)
        return tuple(_summary_after(law, self.updated, place) for place, law in enumerate(self.marginals))

    def to_frame(self) -> "pd.DataFrame":
        """Return the summary as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per uncertain parameter, columns as in `ParameterSummary`.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        columns = ParameterSummary.__slots__
        return pd.DataFrame(
            [[getattr(row, name) for name in columns] for row in self.summary()], columns=columns
        )


def parameter_space(
    quantities: Sequence[UncertainQuantity],
    dependence: Sequence[Dependence] = (),
    *,
    positions: Sequence[Position] = (),
    observations: Sequence[Observation] = (),
) -> ParameterSpace:
    """Parameter space of a scenario.

    Parameters
    ----------
    quantities : sequence of UncertainQuantity
        Every number of the scenario that may be uncertain, fixed or not.
    dependence : sequence of (str, str, float), [-]
        Pairs of addresses with their rank correlation, which holds at every station.
    positions : sequence of (float, float), [m]
        Plan positions of the stations; with fewer than two there is nothing that varies between them.
    observations : sequence of Observation
        Tests in hand. With none, and the variability from point to point known, the space is that of the laws
        alone.

    Returns
    -------
    space : ParameterSpace
        Marginals, dependence and fixed numbers.

    Raises
    ------
    ParameterError
        If more than half of a distribution lies outside its parameter's physical bounds, or variability
        from point to point has no horizontal scale though there are several stations.
    DependenceError
        If the correlations are wrongly given or cannot hold together, at every station.
    """
    constants = {q.address: q.distribution.value for q in quantities if isinstance(q.distribution, Constant)}
    uncertain = [q for q in quantities if not isinstance(q.distribution, Constant)]
    marginals = tuple(marginal(q) for q in uncertain)
    names = [law.name for law in marginals]
    at_station = correlation_matrix(names, dependence)
    local = parts_at_stations(uncertain, at_station, positions) if len(positions) > 1 else None
    correlation = at_station
    if local is not None:
        correlation = local.correlation
    updated = tested(
        uncertain, marginals, at_station, local=local, positions=positions, observations=observations
    )
    if updated is not None:
        correlation = updated.standard_correlation
    triangle = np.asarray(np.linalg.cholesky(correlation), dtype=np.float64)
    inverse = np.linalg.inv(correlation)
    inverse = 0.5 * (inverse + inverse.T)
    for matrix in (correlation, inverse, triangle, at_station):
        matrix.setflags(write=False)
    return ParameterSpace(
        marginals=marginals,
        correlation=correlation,
        inverse_correlation=inverse,
        triangle=triangle,
        constants=constants,
        local=local,
        at_station=at_station,
        updated=updated,
    )


def _summary_after(law: Marginal, updated: Updated, place: int) -> ParameterSummary:
    """Return the summary of a parameter as the tests leave it."""
    mean, sd = updated.moments(place, law)
    p05, p50, p95 = (
        float(law.quantile(updated.percentile(place, probability))) for probability in (0.05, 0.5, 0.95)
    )
    return replace(_summary(law), mean=mean, sd=sd, p05=p05, p50=p50, p95=p95)


def _summary(law: Marginal) -> ParameterSummary:
    p05, p50, p95 = (float(value) for value in law.percentile([0.05, 0.5, 0.95]))
    return ParameterSummary(
        name=law.name,
        unit=law.unit,
        meaning=law.meaning,
        text=law.text,
        mean=law.mean,
        sd=law.sd,
        p05=p05,
        p50=p50,
        p95=p95,
        cut_share=law.cut_share,
        low=law.low,
        high=law.high,
    )
