"""Parameters updated by tests: latent normals after the tests, and where the uncertainty left stems from.

Where the variability from point to point is itself unknown, it takes values on a grid, each with the chance
that the tests leave it; what is drawn is then a mixture of Gaussians.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import product

import numpy as np
from scipy.special import gammaincc

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError
from probsoil.parameters.conditioning import Conditioned, conditioned
from probsoil.parameters.observations import Observation, PointLaw, Row, row_of
from probsoil.parameters.point_variability import PointVariability
from probsoil.parameters.updated import Split, Updated

GRID_SIZES = {0: 1, 1: 41, 2: 21, 3: 11}
"""Grid points of each unknown variability, by how many are unknown, [-]."""

GRID_REACH = 3.2  # standard deviations of the logarithm of the variability
_NEGLIGIBLE = 1e-12  # weight of a grid point that is dropped
_LEAST_NOISE = 1e-6  # of a score; keeps exact tests of the same thing apart


@dataclass(frozen=True, slots=True, kw_only=True)
class UnknownVariability:
    """Variability from point to point that is itself uncertain.

    Attributes
    ----------
    parameter : int, [-]
        Place of the parameter, whose law is lognormal.
    reference : float, [-]
        Standard deviation of the logarithm at a point that the parameter's law was made with.
    median, log_sd : float, [-]
        Lognormal law of that standard deviation.
    spread : float, [-]
        Standard deviation of the logarithm of the representative value as its law has it.
    ratio : float, [-]
        Variance function of the layer.
    in_series : bool
        Whether the average is harmonic.
    """

    parameter: int
    reference: float
    median: float
    log_sd: float
    spread: float
    ratio: float
    in_series: bool

    def shifts(self, size: FloatArray) -> tuple[FloatArray, FloatArray]:
        """How the representative value and that at a point move with the variability, as scores.

        Parameters
        ----------
        size : ndarray, shape (n,), [-]
            Standard deviation of the logarithm at a point.

        Returns
        -------
        average, point : ndarray, shape (n,), [-]
            The arithmetic mean of the field is kept.
        """
        more = size**2 - self.reference**2
        harmonic = (1.0 - self.ratio) * more if self.in_series else np.zeros_like(more)
        return (-0.5 * self.ratio * more - harmonic) / self.spread, -0.5 * more / self.spread


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Model:
    """Everything that is the same for every variability on the grid."""

    variability: PointVariability
    prior: FloatArray
    data: FloatArray
    latent: FloatArray
    shared: FloatArray
    errors: FloatArray
    noise: FloatArray
    residual: FloatArray
    weights: FloatArray

    def factors(self, group_scale: FloatArray) -> FloatArray:
        """Factor on each local part."""
        return np.array([group_scale[one.group] for one in self.variability.fields])


def update(
    variability: PointVariability,
    laws: Sequence[PointLaw],
    unknown: Sequence[UnknownVariability],
    observations: Sequence[Observation],
    names: Sequence[str],
) -> Updated:
    """Parameters after tests.

    Parameters
    ----------
    variability : PointVariability
        Shared and local parts, and where the tests were made.
    laws : sequence of PointLaw
        Of every uncertain parameter.
    unknown : sequence of UnknownVariability
        Those whose variability from point to point is uncertain, in the order of their groups.
    observations : sequence of Observation
        The tests.
    names : sequence of str
        Addresses of the parameters.

    Returns
    -------
    updated : Updated
        Latent normals at all stations; with one station those of the parameters alone.

    Raises
    ------
    ParameterError
        If more variabilities are unknown than can be told apart, or an observation makes no sense.
    """
    if len(unknown) not in GRID_SIZES:
        raise ParameterError(
            f"the variability from point to point of {len(unknown)} parameters is given as a range; at most "
            f"{max(GRID_SIZES)} may be"
        )
    rows = tuple(_rows(variability, laws, observations, names))
    model = _model(variability, rows, observations)
    sizes, prior_weight = _grid(unknown)
    averages, points = _shifts(unknown, sizes, len(laws))
    scales = np.ones((len(sizes), len(unknown) + 1))
    for place, one in enumerate(unknown):
        scales[:, place + 1] = sizes[:, place] / one.reference
    moved = points @ _within_layer(model, unknown).T if len(rows) else np.zeros((len(sizes), 0))
    found = [
        conditioned(model.prior, _cross(model, scale), _data(model, scale), model.residual - shift)
        for scale, shift in zip(scales, moved, strict=True)
    ]
    likelihood = np.array([one.log_likelihood for one in found])
    weight = prior_weight * np.exp(likelihood - likelihood.max())
    weight /= weight.sum()
    return _assembled(model, (found, scales, averages), (weight, prior_weight), (tuple(observations), rows))


def _rows(
    variability: PointVariability,
    laws: Sequence[PointLaw],
    observations: Sequence[Observation],
    names: Sequence[str],
) -> list[Row]:
    """Return the row of each observation; parameters of other layers are their representative values."""
    places = {name: place for place, name in enumerate(names)}
    found = []
    for number, one in enumerate(observations):
        here = [
            law if name.startswith(f"{one.layer}.") else PointLaw(marginal=law.marginal)
            for law, name in zip(laws, names, strict=True)
        ]
        index = [places[address] for address in one.addresses]
        covariance = _at_test(variability, number, index)
        found.append(row_of(one, here, covariance, places, beside=observations))
    return found


def _at_test(variability: PointVariability, number: int, index: Sequence[int]) -> FloatArray:
    """Covariance of the scores of some parameters at the point of a test."""
    split = variability.split
    whole = np.outer(split.shared_weight, split.shared_weight) * split.shared_correlation
    local = split.local_weight
    for j, k in zip(*np.nonzero(split.local_correlation), strict=True):
        between = split.local_correlation[j, k] * variability.at_one_test(j, k, number)
        whole = whole + between * np.outer(local[:, j], local[:, k])
    return np.asarray(whole[np.ix_(index, index)], dtype=np.float64)


def _model(variability: PointVariability, rows: Sequence[Row], observations: Sequence[Observation]) -> _Model:
    count = len(variability.split.shared_weight)
    weights = np.array([row.weights for row in rows]).reshape(len(rows), count)
    noise = np.array([max(row.noise_sd, _LEAST_NOISE) ** 2 for row in rows])
    bias = np.array([row.bias_sd for row in rows])
    kinds = [_transformation(one) for one in observations]
    same = np.array([[float(a == b) for b in kinds] for a in kinds]).reshape(len(rows), len(rows))
    split = variability.split
    shared = weights * split.shared_weight
    return _Model(
        variability=variability,
        prior=split.correlation if split.parts else split.shared_correlation,
        data=variability.data_blocks(weights),
        latent=variability.latent_blocks(weights),
        shared=shared @ split.shared_correlation @ shared.T,
        errors=same * np.outer(bias, bias),
        noise=noise,
        residual=np.array([row.residual for row in rows]),
        weights=weights,
    )


def _transformation(observation: Observation) -> tuple[str, str]:
    """Return what shares one bias: strengths of cones carry the same factor as the resistance does."""
    same = observation.kind == "cone" and observation.parameter == "q_net"
    return observation.kind, "su" if same else observation.parameter


def _grid(unknown: Sequence[UnknownVariability]) -> tuple[FloatArray, FloatArray]:
    """Return the variabilities of every grid point and its chance before the tests."""
    nodes = np.linspace(-GRID_REACH, GRID_REACH, GRID_SIZES[len(unknown)])
    axes = [one.median * np.exp(one.log_sd * nodes) for one in unknown]
    points = list(product(nodes, repeat=len(unknown)))
    sizes = np.array(list(product(*axes))).reshape(len(points), len(unknown))
    weight = np.array([np.exp(-0.5 * sum(z**2 for z in point)) for point in points])
    return sizes, weight / weight.sum()


def _shifts(
    unknown: Sequence[UnknownVariability], sizes: FloatArray, count: int
) -> tuple[FloatArray, FloatArray]:
    averages, points = np.zeros((len(sizes), count)), np.zeros((len(sizes), count))
    for place, one in enumerate(unknown):
        averages[:, one.parameter], points[:, one.parameter] = one.shifts(sizes[:, place])
    return averages, points


def _within_layer(model: _Model, unknown: Sequence[UnknownVariability]) -> FloatArray:
    """Weights of observations on parameters of unknown variability in the layer of the test."""
    own = np.zeros_like(model.weights)
    for j, part in enumerate(model.variability.split.parts):
        if any(part.parameter == one.parameter for one in unknown):
            own[:, part.parameter] = model.variability.own(j) * model.weights[:, part.parameter]
    return own


def _data(model: _Model, scale: FloatArray) -> FloatArray:
    local = np.einsum("g,h,ghij->ij", scale, scale, model.data)
    return np.asarray(local + model.shared + model.errors + np.diag(model.noise), dtype=np.float64)


def _cross(model: _Model, scale: FloatArray) -> FloatArray:
    return np.asarray(np.einsum("g,gdi->di", scale, model.latent), dtype=np.float64)


def _assembled(
    model: _Model,
    grid: tuple[list[Conditioned], FloatArray, FloatArray],
    weights: tuple[FloatArray, FloatArray],
    tests: tuple[tuple[Observation, ...], tuple[Row, ...]],
) -> Updated:
    """Put the components together: those of negligible weight dropped, one station told by its scores."""
    found, scales, averages = grid
    weight, prior_weight = weights
    variability, single = model.variability, len(model.variability.positions) == 1
    kept = np.flatnonzero(weight > _NEGLIGIBLE)
    at_first = [variability.station_matrix(0, model.factors(scale)) for scale in scales]
    prior_sd = np.sqrt([np.einsum("pi,ij,pj->p", one, model.prior, one) for one in at_first])
    score_mean = np.array([at_first[g] @ found[g].mean + averages[g] for g in kept])
    whole = [at_first[g] @ found[g].covariance @ at_first[g].T for g in kept]
    mean = score_mean if single else np.array([found[g].mean for g in kept])
    covariance = np.array(whole if single else [found[g].covariance for g in kept])
    share = weight[kept] / weight[kept].sum()
    correlation, factor = _common_factor(covariance, share)
    likeliest = int(np.argmax(weight))
    return Updated(
        weight=share,
        mean=mean,
        factor=factor,
        correlation=correlation,
        offset=np.zeros_like(averages[kept]) if single else averages[kept],
        part_scale=np.array([model.factors(scales[g]) for g in kept]),
        score_mean=score_mean,
        score_sd=np.sqrt(np.array([np.diag(one) for one in whole]).reshape(score_mean.shape)),
        prior_weight=prior_weight,
        prior_mean=averages,
        prior_sd=prior_sd,
        observations=tests[0],
        rows=tests[1],
        expected_sd=np.sqrt(np.diag(_data(model, scales[likeliest]))),
        chance=_chance(found, prior_weight),
        split=_split(model, found, (scales, at_first, averages), (weight, prior_weight)),
    )


def _common_factor(covariance: FloatArray, weight: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the correlation of the average covariance and what makes each component of it."""
    average = np.einsum("g,gij->ij", weight, covariance)
    sd = np.sqrt(np.diag(average))
    correlation = average / np.outer(sd, sd)
    np.fill_diagonal(correlation, 1.0)
    if len(weight) == 1:
        return correlation, np.diag(sd)[np.newaxis]
    common = np.linalg.cholesky(correlation)
    own = np.linalg.cholesky(covariance)
    # own = factor common, so factor' solves common' factor' = own'
    factor = np.linalg.solve(common.T[np.newaxis], own.transpose(0, 2, 1))
    return correlation, np.tril(factor.transpose(0, 2, 1))


def _chance(found: Sequence[Conditioned], prior_weight: FloatArray) -> float:
    count = found[0].gain.shape[1]
    if count == 0:
        return 1.0
    return float(
        sum(
            w * gammaincc(0.5 * count, 0.5 * one.distance) for w, one in zip(prior_weight, found, strict=True)
        )
    )


def _split(
    model: _Model,
    found: Sequence[Conditioned],
    grid: tuple[FloatArray, list[FloatArray], FloatArray],
    weights: tuple[FloatArray, FloatArray],
) -> Split:
    """Variance of the scores at the first station by source, averaged over the grid.

    What is left after the tests is the error of an estimate linear in independent sources, so their
    shares add up exactly. What the components differ by belongs to the variability.
    """
    scales, at_first, averages = grid
    count = len(model.variability.split.shared_weight)
    before, after = np.zeros((count, 4)), np.zeros((count, 4))
    for g, one in enumerate(found):
        matrix = at_first[g]
        before += weights[1][g] * _prior_sources(model, matrix)
        if weights[0][g] > _NEGLIGIBLE:
            after += weights[0][g] * _sources(model, one, scales[g], matrix)
    before[:, 1] += _between(averages, weights[1])
    centres = np.array([at_first[g] @ one.mean + averages[g] for g, one in enumerate(found)])
    after[:, 1] += _between(centres, weights[0])
    return Split(before=before, after=after)


def _between(centre: FloatArray, weight: FloatArray) -> FloatArray:
    middle = weight @ centre
    return np.asarray(weight @ (centre - middle) ** 2, dtype=np.float64)


def _prior_sources(model: _Model, matrix: FloatArray) -> FloatArray:
    count = len(model.variability.split.shared_weight)
    known = _quadratic(matrix[:, :count], model.prior[:count, :count])
    local = _quadratic(matrix[:, count:], model.prior[count:, count:])
    return np.column_stack([known, local, np.zeros(count), np.zeros(count)])


def _sources(model: _Model, one: Conditioned, scale: FloatArray, matrix: FloatArray) -> FloatArray:
    """Return the parts of the variance that is left, shape (n_parameter, 4)."""
    split = model.variability.split
    count = len(split.shared_weight)
    gain = matrix @ one.gain
    shared = matrix[:, :count] - gain @ (model.weights * split.shared_weight)
    known = _quadratic(shared, split.shared_correlation)
    local, latent = np.einsum("g,h,ghij->ij", scale, scale, model.data), _cross(model, scale)[count:]
    inherent = _quadratic(matrix[:, count:], model.prior[count:, count:]) + _quadratic(gain, local)
    inherent -= 2.0 * np.einsum("pi,ij,pj->p", matrix[:, count:], latent, gain)
    noise, bias = _quadratic(gain, np.diag(model.noise)), _quadratic(gain, model.errors)
    return np.column_stack([known, inherent, noise, bias])


def _quadratic(left: FloatArray, middle: FloatArray) -> FloatArray:
    return np.asarray(np.einsum("pi,ij,pj->p", left, middle, left), dtype=np.float64)
