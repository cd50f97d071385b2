"""Drivers of any function or of any sample: pandas in, pandas out."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Protocol

import numpy as np
from scipy.special import ndtr, ndtri

from probsoil._typing import BoolArray, FloatArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.probability.counts import Sense, exceeds
from probsoil.probability.polynomial_chaos import polynomial_chaos
from probsoil.sensitivity.accumulate import driver_sums
from probsoil.sensitivity.cases import case_sums, exceeding_profile, group_elasticities
from probsoil.sensitivity.changes import Others, Trials, drawn_latents
from probsoil.sensitivity.chaos_shapley import shapley_shares
from probsoil.sensitivity.drivers import drivers
from probsoil.sensitivity.shares import shares
from probsoil.sensitivity.what_if import halved_knowledge, probability_at_values, what_if_frame

if TYPE_CHECKING:
    import pandas as pd

MOST_FOR_CHAOS = 2_000  # realisations a chaos is fitted to


class Law(Protocol):
    """Distribution of one parameter, such as a frozen distribution of scipy.stats."""

    def ppf(self, q: FloatArray) -> Any:
        """Return the quantiles.

        Parameters
        ----------
        q : ndarray, shape (n,), [-]
            Levels between 0 and 1.

        Returns
        -------
        values : ndarray, shape (n,), [any]
            Values of the parameter.
        """


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitOn:
    """Limit on a quantity, with the groups that parameters are told by.

    Attributes
    ----------
    threshold : float, [any]
        Threshold, in the unit of the quantity.
    sense : {"not more than", "not less than"}
        What the limit demands.
    groups : mapping of str to sequence of str
        Parameters of each group; each parameter belongs to exactly one where there is any group.
    confidence : float, [-]
        Confidence of all limits.
    """

    threshold: float
    sense: Sense = "not more than"
    groups: Mapping[str, Sequence[str]] | None = None
    confidence: float = 0.95


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SampleDrivers:
    """What a sample says of the drivers of a limit.

    Attributes
    ----------
    probability : float, [-]
        Share of the sample that exceeds.
    drivers : pandas.DataFrame
        One row per parameter: rank, elasticities, shares of the linear part, each with its limits.
    profile : pandas.DataFrame
        Level of each parameter in the exceeding cases, correlation included.
    groups : pandas.DataFrame or None
        Spread elasticity and share of each group.
    correlation : pandas.DataFrame
        Correlation of the latent normals, as used.
    notes : tuple of str
        What to beware of.
    """

    probability: float
    drivers: "pd.DataFrame"
    profile: "pd.DataFrame"
    groups: "pd.DataFrame | None"
    correlation: "pd.DataFrame"
    notes: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FunctionDrivers:
    """What a function says of the drivers of a limit.

    Attributes
    ----------
    sample : SampleDrivers
        From the realisations drawn.
    shapley : pandas.DataFrame
        Shapley shares of the quantity from a polynomial chaos; not a number where refused, see the notes.
    halved : pandas.DataFrame
        Probability with half of what is unknown about each leading parameter.
    at_values : pandas.DataFrame
        Probability with each leading parameter at its 10 % and 90 % values.
    notes : tuple of str
        What to beware of.
    """

    sample: SampleDrivers
    shapley: "pd.DataFrame"
    halved: "pd.DataFrame"
    at_values: "pd.DataFrame"
    notes: tuple[str, ...]


def sample_drivers(
    parameters: "pd.DataFrame",
    quantity: "pd.Series[float]",
    limit: LimitOn,
    *,
    correlation: "pd.DataFrame | None" = None,
    laws: Mapping[str, Callable[[FloatArray], FloatArray]] | None = None,
) -> SampleDrivers:
    """Drivers of a limit from a sample of parameters and of the quantity.

    Parameters
    ----------
    parameters : pandas.DataFrame
        One column per parameter, one row per independent realisation.
    quantity : pandas.Series
        Quantity of the limit, with the same index.
    limit : LimitOn
        Limit and groups.
    correlation : pandas.DataFrame, optional
        Correlation of the latent normals; estimated from the sample by default, with pairs that are within
        noise taken as independent.
    laws : mapping of str to callable, optional
        Distribution function of a parameter, values (n,) to levels; ranks within the sample by default.

    Returns
    -------
    found : SampleDrivers
        Tables.

    Raises
    ------
    ShapeError
        If index or columns do not match.
    ParameterError
        If a parameter does not vary or is not finite, a group names an unknown parameter, or the correlation
        is not positive definite.

    Notes
    -----
    The dependence is taken as a Gaussian copula. Latent normals from ranks lose a little of the tail of small
    samples; give the laws where they are known.

    Examples
    --------
    >>> import numpy as np, pandas as pd
    >>> u = np.random.default_rng(1).standard_normal((4000, 2))
    >>> soil = pd.DataFrame({"stiffness": np.exp(0.3 * u[:, 0]), "thickness": 5.0 + 0.5 * u[:, 1]})
    >>> settlement = soil["thickness"] / soil["stiffness"]
    >>> found = sample_drivers(soil, settlement, LimitOn(threshold=8.0))
    >>> found.drivers["parameter"].tolist()
    ['stiffness', 'thickness']
    """
    names = [str(name) for name in parameters.columns]
    if not parameters.index.equals(quantity.index):
        raise ShapeError("parameters and quantity must have the same index")
    z = _latent(parameters, {} if laws is None else laws)
    matrix = _estimated(z) if correlation is None else _given(correlation, names)
    return _described(z, matrix, names, np.asarray(quantity, dtype=np.float64), limit)


def function_drivers(
    function: "Callable[[pd.DataFrame], Any]",
    laws: Mapping[str, Law],
    limit: LimitOn,
    *,
    correlation: "pd.DataFrame | None" = None,
    draws: tuple[int, int] = (20_000, 0),
    others: Others = "keep",
) -> FunctionDrivers:
    """Drivers of a limit on any function of uncertain parameters.

    Parameters
    ----------
    function : callable
        Quantity (n,) from a table of parameters with one row per realisation.
    laws : mapping of str to Law
        Distribution of each parameter.
    limit : LimitOn
        Limit and groups.
    correlation : pandas.DataFrame, optional
        Correlation of the latent normals; independent by default.
    draws : tuple of int, [-]
        Number of realisations and seed. The three leading parameters take three runs of all of them each.
    others : {"keep", "follow"}
        What the others do when one parameter is changed; see `probsoil.sensitivity.changes.Trials`.

    Returns
    -------
    found : FunctionDrivers
        Tables.

    Raises
    ------
    ShapeError
        If the function returns another number of values or the correlation does not match.
    ParameterError
        If there is no parameter, a group names an unknown one, or the correlation is not positive definite.

    Examples
    --------
    >>> from scipy import stats
    >>> laws = {"load": stats.norm(100.0, 10.0), "modulus": stats.lognorm(0.3, scale=2000.0)}
    >>> found = function_drivers(
    ...     lambda soil: soil["load"] / soil["modulus"], laws, LimitOn(threshold=0.08), draws=(5000, 1)
    ... )
    >>> found.halved["name"].tolist()
    ['modulus', 'load']
    """
    import pandas as pd  # deferred: a scenario check never needs it

    names = list(laws)
    if not names:
        raise ParameterError("laws must name at least one parameter")
    matrix = np.eye(len(names)) if correlation is None else _given(correlation, names)

    def quantity(z: FloatArray) -> FloatArray:
        columns = {name: np.asarray(laws[name].ppf(ndtr(z[:, i]))) for i, name in enumerate(names)}
        return np.asarray(function(pd.DataFrame(columns)), dtype=np.float64)

    def exceeded(z: FloatArray) -> BoolArray:
        return exceeds(quantity(z), limit.threshold, limit.sense)

    z = drawn_latents(matrix, *draws)
    values = quantity(z)
    run = Trials(
        exceeded=exceeded,
        correlation=matrix,
        parameters={name: [i] for i, name in enumerate(names)},
        z=z,
        before=exceeds(values, limit.threshold, limit.sense),
        others=others,
        confidence=limit.confidence,
    )
    sample = _described(run.z, matrix, names, values, limit)
    leading = sample.drivers["parameter"].tolist()[:3]
    u = np.linalg.solve(np.linalg.cholesky(matrix), run.z[:MOST_FOR_CHAOS].T).T
    some = values[:MOST_FOR_CHAOS]
    chaos = polynomial_chaos(u, some)
    parts = shapley_shares(chaos, matrix, run.parameters, runs=(u, some), confidence=limit.confidence)
    return FunctionDrivers(
        sample=sample,
        shapley=parts.to_frame(),
        halved=what_if_frame(halved_knowledge(run, leading)),
        at_values=what_if_frame(probability_at_values(run, leading)),
        notes=sample.notes + (() if parts.note is None else (parts.note,)),
    )


def _described(
    z: FloatArray, matrix: FloatArray, names: list[str], quantity: FloatArray, limit: LimitOn
) -> SampleDrivers:
    import pandas as pd  # deferred: a scenario check never needs it

    flag = exceeds(quantity, limit.threshold, limit.sense)
    inverse = np.asarray(np.linalg.inv(matrix), dtype=np.float64)
    groups = _columns(limit.groups, names)
    sums = driver_sums(z, inverse, quantity, flag)
    cases = case_sums(z, inverse, flag, groups)
    found = drivers(sums, matrix, names, confidence=limit.confidence)
    profile = exceeding_profile(cases, names, confidence=limit.confidence)
    grouped = None
    if groups:
        elasticity = group_elasticities(cases)
        low, high = elasticity.interval(limit.confidence)
        part = shares(sums, matrix, limit.confidence, players=groups)
        columns = {"group": list(groups), "spread_elasticity": elasticity.value}
        columns |= {"spread_elasticity_low": low, "spread_elasticity_high": high}
        grouped = pd.DataFrame(
            columns | {"share": part.share, "share_low": part.low, "share_high": part.high}
        )
    return SampleDrivers(
        probability=float(flag.mean()),
        drivers=found.to_frame(),
        profile=profile.to_frame(),
        groups=grouped,
        correlation=pd.DataFrame(matrix, index=names, columns=names),
        notes=tuple(note for note in (found.note, profile.note) if note is not None),
    )


def _columns(groups: Mapping[str, Sequence[str]] | None, names: list[str]) -> dict[str, list[int]]:
    if groups is None:
        return {}
    unknown = sorted({member for members in groups.values() for member in members} - set(names))
    if unknown:
        raise ParameterError(f"groups name parameters that do not exist: {', '.join(unknown)}")
    return {name: [names.index(member) for member in members] for name, members in groups.items()}


def _latent(parameters: "pd.DataFrame", laws: Mapping[str, Callable[[FloatArray], FloatArray]]) -> FloatArray:
    z = np.empty(parameters.shape)
    for i, name in enumerate(parameters.columns):
        values = parameters[name].to_numpy(dtype=np.float64)
        if not np.isfinite(values).all() or len(values) < 2 or np.ptp(values) == 0.0:
            raise ParameterError(f"parameter {name!r} must be finite and must vary")
        known = laws.get(name)
        # ranks of equal values are averaged, so that the order of the rows does not matter
        level = (parameters[name].rank().to_numpy() - 0.5) / len(values) if known is None else known(values)
        z[:, i] = ndtri(level)
        if not np.isfinite(z[:, i]).all():
            raise ParameterError(f"the law of {name!r} puts values of the sample at level 0 or 1")
    return z


def _estimated(z: FloatArray) -> FloatArray:
    """Correlation of the sample; pairs within noise, all of them judged together, as independent."""
    n, d = z.shape
    full = np.atleast_2d(np.corrcoef(z, rowvar=False))
    pairs = max(d * (d - 1) // 2, 1)
    noise = -float(ndtri(0.025 / pairs)) / np.sqrt(n)
    matrix = np.where(np.abs(full) > noise, full, 0.0)
    np.fill_diagonal(matrix, 1.0)
    if np.linalg.eigvalsh(matrix)[0] <= 1e-9:  # leaving pairs out may break what held together
        matrix = full
    return _positive(np.asarray(matrix))


def _given(correlation: "pd.DataFrame", names: list[str]) -> FloatArray:
    if set(correlation.index) != set(names) or set(correlation.columns) != set(names):
        raise ShapeError("index and columns of the correlation must be the parameters")
    matrix = correlation.loc[names, names].to_numpy(dtype=np.float64)
    if not np.allclose(matrix, matrix.T) or not np.allclose(np.diag(matrix), 1.0):
        raise ParameterError("the correlation must be symmetric with ones on its diagonal")
    return _positive(matrix)


def _positive(matrix: FloatArray) -> FloatArray:
    if np.linalg.eigvalsh(matrix)[0] <= 1e-9:
        raise ParameterError(
            "the correlation is not positive definite: parameters depend on each other fully"
        )
    return matrix
