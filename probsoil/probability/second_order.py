"""Second-order reliability: the curvature of the limit at its design points."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.special import ndtr

from probsoil._typing import BoolArray, FloatArray
from probsoil.errors import ParameterError
from probsoil.probability.design_point_search import Margin, differences
from probsoil.probability.first_order import FirstOrder
from probsoil.probability.limit_state import CountedMargin, LimitState

if TYPE_CHECKING:
    import pandas as pd

ASSUMPTION = (
    "the limit is a paraboloid at each design point, twice differentiable there, and no part of the "
    "exceeding region is as near to the origin as the points the search found; no interval goes with it"
)
_ALIKE = 0.1  # change of ln P from step to step that a smooth limit may show
_OTHER_STEPS = (0.5, 4.0)  # over the step: an edge beside the point shows at one of them


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SecondOrder:
    """Curvatures of a limit and probabilities to second order.

    Attributes
    ----------
    beta : ndarray, shape (n_point,), [-]
        Reliability index of each design point.
    curvature : ndarray, shape (n_point, d - 1), [-]
        Principal curvatures, above zero where the limit bends away from the origin.
    breitung, hohenbichler_rackwitz : ndarray, shape (n_point,), [-]
        Probability of the paraboloid at each point by the two formulas; not a number where the limit bends
        towards the origin as sharply as a sphere, for which they do not hold.
    smooth : ndarray of bool, shape (n_point,), [-]
        Whether curvatures at half and at four times the step, along each tangent, change the probability by
        less than a tenth; at or beside an edge they change it more, and the numbers mean nothing.
    probability : float, [-]
        Sum over the points by Hohenbichler and Rackwitz: an upper bound where there are several.
    model_runs : int, [-]
        Runs spent, those of the first order not among them.
    assumption : str
        What must hold for the number to be right.
    """

    beta: FloatArray
    curvature: FloatArray
    breitung: FloatArray
    hohenbichler_rackwitz: FloatArray
    smooth: BoolArray
    probability: float
    model_runs: int
    assumption: str = ASSUMPTION

    def to_frame(self) -> "pd.DataFrame":
        """Return the points as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per design point; its curvatures in columns `curvature_1`, ...
        """
        import pandas as pd  # deferred: a scenario check never needs it

        names = ("beta", "breitung", "hohenbichler_rackwitz", "smooth")
        columns = {name: getattr(self, name) for name in names}
        bent = {f"curvature_{i + 1}": self.curvature[:, i] for i in range(self.curvature.shape[1])}
        return pd.DataFrame(columns | bent)


def second_order(limit: LimitState, first: FirstOrder, *, step: float = 0.1) -> SecondOrder:
    r"""Probability to second order (SORM) from the curvatures at the design points.

    Parameters
    ----------
    limit : LimitState
        Performance function and limit.
    first : FirstOrder
        Design points of the same limit.
    step : float, [-]
        Step of the second differences; well above the root of the noise of the performance.

    Returns
    -------
    result : SecondOrder
        Curvatures, probabilities by Breitung and by Hohenbichler and Rackwitz, and whether the
        limit is smooth.

    Raises
    ------
    ParameterError
        If the step is out of range or the design points are of another dimension.

    Notes
    -----
    With principal curvatures :math:`\kappa_i`, Breitung [1]_:
    :math:`\Phi(-\beta) \prod_i (1 + \beta \kappa_i)^{-1/2}`; Hohenbichler and Rackwitz [2]_ put
    :math:`\varphi(\beta) / \Phi(-\beta)` for :math:`\beta` in the product. Where the origin exceeds, both are
    taken of the part that meets the limit.

    References
    ----------
    .. [1] K. Breitung, "Asymptotic approximations for multinormal integrals", Journal of Engineering
       Mechanics, ASCE, 110, 1984 (recalled; not opened).
    .. [2] M. Hohenbichler and R. Rackwitz, "Improvement of second-order reliability estimates by importance
       sampling", Journal of Engineering Mechanics, ASCE, 114, 1988 (recalled; not opened).
    """
    if not 0.0 < step < 1.0:
        raise ParameterError(f"step must lie between 0 and 1; got {step:g}")
    if first.point.shape[1] != limit.dimension:
        raise ParameterError(f"design points must have {limit.dimension} coordinates")
    counted = CountedMargin(limit)
    sign = -1.0 if first.origin_exceeds else 1.0

    def margin(u: FloatArray) -> FloatArray:
        return sign * counted(u)

    with np.errstate(invalid="ignore"):  # a failed run beside a point leaves it without a number
        found = [_curvatures(margin, point, step) for point in first.point]
    radius = np.abs(first.beta)
    plain = ndtr(-radius)
    steeper = np.exp(-0.5 * radius**2) / np.sqrt(2.0 * np.pi) / plain
    curvature = np.array([curvatures for curvatures, _ in found]).reshape(len(radius), -1)
    breitung = plain * _bending(radius, curvature)
    better = plain * _bending(steeper, curvature)
    if first.origin_exceeds:
        breitung, better = 1.0 - breitung, 1.0 - better
    return SecondOrder(
        beta=first.beta.copy(),
        curvature=curvature,
        breitung=breitung,
        hohenbichler_rackwitz=better,
        smooth=np.array([smooth for _, smooth in found]),
        probability=float(min(better[0] if first.origin_exceeds else better.sum(), 1.0)),
        model_runs=counted.runs,
    )


def _bending(radius: FloatArray, curvature: FloatArray) -> FloatArray:
    """Product of (1 + radius curvature)^-1/2; not a number where a factor is not above zero."""
    factor = 1.0 + radius[:, np.newaxis] * curvature
    with np.errstate(invalid="ignore"):
        product = np.sqrt(factor).prod(axis=1)  # not a number where a factor is below zero
    return np.asarray(1.0 / np.where(product == 0.0, np.nan, product))


def _curvatures(margin: Margin, point: FloatArray, step: float) -> tuple[FloatArray, bool]:
    """Principal curvatures at a point, and whether other steps agree on what they do."""
    slope, _ = differences(margin, point, 0.0, min(step, 1e-3))
    size = float(np.linalg.norm(slope))
    if size == 0.0:
        return np.full(len(point) - 1, np.nan), False
    frame = _tangents(slope / size)
    bent, diagonal = _second_differences(margin, point, frame, step)
    if not np.isfinite(bent).all():
        return np.full(len(point) - 1, np.nan), False
    radius = np.array([np.linalg.norm(point)])
    others = [_diagonal(margin, point, frame, factor * step) for factor in _OTHER_STEPS]
    effect = np.log([_bending(radius, one[np.newaxis] / size)[0] for one in (diagonal, *others)])
    smooth = bool(np.ptp(effect) <= _ALIKE)  # false where one of them is not a number
    return np.asarray(np.linalg.eigvalsh(bent) / size, dtype=np.float64), smooth


def _tangents(normal: FloatArray) -> FloatArray:
    """Orthonormal rows at right angles to a unit vector."""
    full, _ = np.linalg.qr(np.column_stack([normal, np.eye(len(normal))]))
    return np.asarray(full[:, 1:].T)


def _diagonal(margin: Margin, point: FloatArray, frame: FloatArray, step: float) -> FloatArray:
    """Second derivatives along each row of the frame."""
    n = len(frame)
    values = margin(np.concatenate([point[np.newaxis], point + step * frame, point - step * frame]))
    return np.asarray((values[1 : n + 1] + values[n + 1 :] - 2.0 * values[0]) / step**2)


def _second_differences(
    margin: Margin, point: FloatArray, frame: FloatArray, step: float
) -> tuple[FloatArray, FloatArray]:
    """Second derivatives within the frame, and those of them on the diagonal."""
    n = len(frame)
    diagonal = _diagonal(margin, point, frame, step)
    one, other = np.triu_indices(n, 1)
    together = step * (frame[one] + frame[other])
    middle = 2.0 * margin(point[np.newaxis])[0]
    both = margin(np.concatenate([point + together, point - together]))
    along = (both[: len(one)] + both[len(one) :] - middle) / step**2
    bent = np.diag(diagonal)
    bent[one, other] = bent[other, one] = 0.5 * (along - diagonal[one] - diagonal[other])
    return bent, diagonal
