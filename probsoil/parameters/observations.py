"""What a test says of the parameters: one linear row of their normal scores at a point, and its errors."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from scipy.special import ndtri

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError
from probsoil.parameters.laws import LognormalLaw, NormalLaw
from probsoil.parameters.local_parts import Position
from probsoil.parameters.marginals import Marginal

Model = Callable[[Sequence[FloatArray]], FloatArray]

_SAMPLE = 2048  # points of a statistical linearisation
_NODES = np.linspace(-8.0, 8.0, 3201)
_LARGEST_VARIANCE = 1.0 - 1e-8  # of a score after a test; the rest of it is what the test tells
_NEGLIGIBLE_CUT = 1e-4  # share cut off a law at the bounds that leaves score and value in a straight line
_LEAST_ERROR = 1e-3  # of what was measured; sums over the score resolve no smaller one


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Observation:
    """One number that a test gave.

    Attributes
    ----------
    test, kind, parameter : str
        Name of the test, its kind, and what was measured; results of a kind and parameter share a bias.
    layer : str
        Layer it was made in.
    below_top : float, [m]
        Depth below the top of the layer.
    place : tuple of (float, float) or None, [m]
        Plan position where known.
    hole : str
        Borehole or sounding; empty where not named.
    value : float, [any]
        As measured.
    error, bias : float, [-]
        Coefficients of variation of the measurement and of the bias of its kind.
    standard_error : float, [any]
        Of the interpretation, in the unit of `value`.
    addresses : tuple of str
        Parameters that decide what is measured.
    model : callable or None
        From their values, each an array of shape (n,), to what is measured without error; None where it is
        the one parameter times `factor`.
    factor : float, [any]
        What is measured over the parameter.
    """

    test: str
    kind: str
    parameter: str
    layer: str
    below_top: float
    value: float
    error: float
    addresses: tuple[str, ...]
    place: Position | None = None
    hole: str = ""
    bias: float = 0.0
    standard_error: float = 0.0
    model: Model | None = None
    factor: float = 1.0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PointLaw:
    """Law of a parameter, and where its values at a point lie in units of its normal score.

    Attributes
    ----------
    marginal : Marginal
        Law of the representative value.
    spread : float, [-]
        Standard deviation of the score at a point.
    centre : float, [-]
        Mean of the score at a point less that of the representative value.
    scale : float, [-]
        Representative value over what the score of a point stands for; 1 but for harmonic averages of
        normal fields.
    """

    marginal: Marginal
    spread: float = 1.0
    centre: float = 0.0
    scale: float = 1.0

    @property
    def is_plain(self) -> bool:
        """Whether score and value, or its logarithm, are in a straight line."""
        law = self.marginal
        whole = law.truncation is None or law.truncation.kept > 1.0 - _NEGLIGIBLE_CUT
        return whole and isinstance(law.law, NormalLaw | LognormalLaw)

    def at_point(self, score: FloatArray) -> FloatArray:
        """Values at a point.

        Parameters
        ----------
        score : ndarray, shape (n,), [-]
            Scores at the point less their mean.

        Returns
        -------
        values : ndarray, shape (n,), [any]
            In the parameter's unit.
        """
        return self.marginal.quantile(score + self.centre) / self.scale


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Row:
    """An observation as a row: residual = weights * (scores at the point less their means) + bias + noise.

    Attributes
    ----------
    weights : ndarray, shape (n_parameter,), [-]
        Of the parameters' scores.
    residual : float, [-]
        Observed less expected, in the row's own scale.
    noise_sd, bias_sd : float, [-]
        Standard deviations of the error of this result and of the bias of its kind.
    straying : float, [-]
        Part of the noise that stands for the curvature of what is measured.
    unit : str
        ``log``, ``score`` or ``plain``: the scale of the row.
    """

    weights: FloatArray
    residual: float
    noise_sd: float
    bias_sd: float
    straying: float
    unit: str


def row_of(
    observation: Observation,
    laws: Sequence[PointLaw],
    covariance: FloatArray,
    places: dict[str, int],
    *,
    beside: Sequence[Observation],
) -> Row:
    """Row of one observation.

    Parameters
    ----------
    observation : Observation
        What was measured.
    laws : sequence of PointLaw
        Of every uncertain parameter, as at this point.
    covariance : ndarray, shape (n, n), [-]
        Covariance of the scores at this point of the parameters in `addresses`.
    places : dict of str to int
        Place of each parameter by its address.
    beside : sequence of Observation
        All observations, this one among them.

    Returns
    -------
    row : Row
        Straight where the parameter is normal or lognormal, by its normal score where it has another law,
        and by statistical linearisation where several parameters or a curved relation are behind it.

    Raises
    ------
    ParameterError
        If the result is not above zero where only its logarithm makes sense, or the relation has no value.

    References
    ----------
    .. [1] A. Der Kiureghian and P.-L. Liu, "Structural reliability under incomplete probability information",
       Journal of Engineering Mechanics 112(1), 1986 (recalled; not opened), for the normal score.
    """
    index = [places[address] for address in observation.addresses]
    one = laws[index[0]]
    if observation.model is None and one.is_plain:
        found = _plain_row(observation, one)
    elif observation.model is None and one.spread == 1.0 and one.centre == 0.0:
        alike = [
            other for other in beside if other.model is None and other.addresses == observation.addresses
        ]
        found = _score_row(observation, one, alike)
    else:
        found = _linearised(observation, [laws[place] for place in index], covariance)
    weights = np.zeros(len(laws))
    weights[index] = found.weights
    return Row(
        weights=weights,
        residual=found.residual,
        noise_sd=found.noise_sd,
        bias_sd=found.bias_sd,
        straying=found.straying,
        unit=found.unit,
    )


def _log_sd(cov: float) -> float:
    return float(np.sqrt(np.log1p(cov * cov)))


def _log_errors(observation: Observation) -> tuple[float, float]:
    """Spread of the logarithm that the errors of one result and the bias of its kind make."""
    own = np.hypot(_log_sd(observation.error), _log_sd(observation.standard_error / observation.value))
    return float(own), _log_sd(observation.bias)


def _positive(observation: Observation) -> float:
    if not observation.value > 0.0:
        raise ParameterError(
            f"{observation.parameter} of {observation.test} must be above zero; got {observation.value:g}"
        )
    return observation.value


def _plain_row(observation: Observation, point: PointLaw) -> Row:
    law = point.marginal.law
    if isinstance(law, LognormalLaw):
        value = np.log(_positive(observation) / observation.factor)
        own, bias = _log_errors(observation)
        centre, spread, unit = float(np.log(law.median)), law.log_sd, "log"
    else:
        value, spread, unit = observation.value / observation.factor, law.sd / point.scale, "plain"
        centre = law.mean / point.scale
        size = abs(centre)
        own = float(np.hypot(observation.error * size, observation.standard_error / observation.factor))
        bias = observation.bias * size
    return Row(
        weights=np.ones(1),
        residual=float((value - centre) / spread - point.centre),
        noise_sd=own / spread,
        bias_sd=bias / spread,
        straying=0.0,
        unit=unit,
    )


def _score_row(observation: Observation, point: PointLaw, beside: Sequence[Observation]) -> Row:
    """Row of a parameter with another law: the normal score and error that give its moments after the tests.

    The moments are sums over the score for all tests of the parameter together, so that alone they are
    answered rightly in mean and spread, also beyond an end of the law; each has its part of their precision.
    """
    values = point.marginal.quantile(_NODES)
    exponent = np.zeros_like(_NODES)
    precision = 0.0
    for one in beside:
        own = _plain_error(one)
        exponent -= 0.5 * ((values - one.value / one.factor) / own) ** 2
        precision += own**-2
    weight = np.exp(exponent - exponent.max() - 0.5 * _NODES**2)
    weight /= weight.sum()
    mean, variance = _score_with_moments(point.marginal, weight, values)
    own = _plain_error(observation)
    noise = float(np.sqrt(variance / (1.0 - variance) * precision)) * own
    size = abs(observation.value / observation.factor)
    return Row(
        weights=np.ones(1),
        residual=mean / (1.0 - variance),
        noise_sd=noise,
        bias_sd=noise * observation.bias * size / own,
        straying=0.0,
        unit="score",
    )


def _score_with_moments(law: Marginal, weight: FloatArray, values: FloatArray) -> tuple[float, float]:
    """Mean and variance of the normal score whose values have the mean and spread of weighted values.

    Where there is none such, those of the weighted scores themselves.
    """
    from scipy.optimize import root  # deferred: only bounded laws with tests need it

    centre, middle = float(weight @ _NODES), float(weight @ values)
    variance = min(float(weight @ (_NODES - centre) ** 2), _LARGEST_VARIANCE)
    spread = float(np.sqrt(weight @ (values - middle) ** 2))
    node = np.linspace(-8.0, 8.0, 161)
    density = np.exp(-0.5 * node**2)
    density /= density.sum()

    def miss(unknown: FloatArray) -> FloatArray:
        drawn = law.quantile(unknown[0] + np.exp(unknown[1]) * node)
        mean = float(density @ drawn)
        sd = float(np.sqrt(density @ (drawn - mean) ** 2))
        return np.array([(mean - middle) / law.sd, (sd - spread) / law.sd])

    found = root(miss, np.array([centre, 0.5 * np.log(variance)]), tol=1e-10)
    mean, sd = float(found.x[0]), float(np.exp(found.x[1]))
    if not found.success or sd**2 > _LARGEST_VARIANCE or abs(mean) > np.abs(_NODES).max():
        return centre, variance
    return mean, sd**2


def _plain_error(observation: Observation) -> float:
    """Return the standard deviation of the error of one result, in the parameter's unit."""
    size = abs(observation.value / observation.factor)
    own = np.hypot(observation.error * size, observation.standard_error / observation.factor)
    return max(float(own), _LEAST_ERROR * size)


def _linearised(observation: Observation, laws: Sequence[PointLaw], covariance: FloatArray) -> Row:
    """Row of a relation between parameters, by regression of its logarithm on their scores."""
    normal = ndtri(_spread_points(len(laws)))
    factor = np.linalg.cholesky(covariance)
    score = normal @ factor.T
    values = [law.at_point(score[:, place]) for place, law in enumerate(laws)]
    found = np.asarray(
        observation.factor * values[0] if observation.model is None else observation.model(values)
    )
    if not (np.isfinite(found) & (found > 0.0)).all():
        raise ParameterError(
            f"{observation.parameter} of {observation.test} cannot be computed from "
            f"{', '.join(observation.addresses)}: some of their values give none above zero"
        )
    log = np.log(found)
    design = np.column_stack([np.ones(len(score)), score])
    fitted, *_ = np.linalg.lstsq(design, log, rcond=None)
    straying = float(np.sqrt(np.mean((log - design @ fitted) ** 2)))
    _positive(observation)
    own, bias = _log_errors(observation)
    return Row(
        weights=fitted[1:],
        residual=float(np.log(observation.value) - fitted[0]),
        noise_sd=float(np.hypot(own, straying)),
        bias_sd=bias,
        straying=straying,
        unit="log",
    )


def _spread_points(dimension: int) -> FloatArray:
    """Points spread evenly over the unit cube, the same at every call: an additive recurrence.

    Each coordinate steps by a power of the root of x^(d+1) = x + 1.
    """
    root = 1.5
    for _ in range(60):
        root = (1.0 + root) ** (1.0 / (dimension + 1))
    step = root ** -np.arange(1.0, dimension + 1.0)
    return np.asarray((0.5 + np.outer(np.arange(1, _SAMPLE + 1), step)) % 1.0, dtype=np.float64)
