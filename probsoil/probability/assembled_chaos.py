"""Smooth parts expanded, the kink assembled exactly.

A response such as a sum of terms max(., .) is not smooth, and no polynomial follows its edge. Its parts
often are: each is expanded, and a function of the user puts them together as the model itself does.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ShapeError
from probsoil.probability.polynomial_chaos import (
    Candidate,
    PolynomialChaos,
    polynomial_chaos,
    relative_squared_error,
)

Assembly = Callable[[FloatArray], FloatArray]
_EVERY = 5


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class AssembledChaos:
    """Response assembled from the expansions of its parts.

    Attributes
    ----------
    parts : PolynomialChaos
        Expansions of the parts, one output each.
    assemble : callable
        Response (n,) from the parts (n, n_part).
    hold_out_error : float, [-]
        Mean squared error of the response at points held out of the fit, over its variance there.
    """

    parts: PolynomialChaos
    assemble: Assembly
    hold_out_error: float

    def predict(self, points: ArrayLike) -> FloatArray:
        """Response at points.

        Parameters
        ----------
        points : array_like, shape (n, d), [-]
            Independent standard normals.

        Returns
        -------
        response : ndarray, shape (n,), [any]
            Response, in its own unit.

        Raises
        ------
        ShapeError
            If the points have another number of variables.
        """
        return np.asarray(self.assemble(self.parts.predict(points)), dtype=np.float64)

    def expanded(
        self, points: ArrayLike, *, candidates: Sequence[Candidate] | None = None
    ) -> PolynomialChaos:
        """Chaos of the assembled response itself, for closed moments and shares.

        Parameters
        ----------
        points : array_like, shape (n, d), [-]
            Independent standard normals; the response there costs no run of the model, so they may be many.
        candidates : sequence of tuple, optional
            Sets of terms, as for `polynomial_chaos`.

        Returns
        -------
        chaos : PolynomialChaos
            Chaos whose hold-out error is against the assembled response, kink included.

        Raises
        ------
        ShapeError
            If the points have another number of variables.
        """
        return polynomial_chaos(points, self.predict(points), candidates=candidates)


def assembled_chaos(
    points: ArrayLike,
    parts: ArrayLike,
    values: ArrayLike,
    assemble: Assembly,
    *,
    candidates: Sequence[Candidate] | None = None,
) -> AssembledChaos:
    """Expansion of the smooth parts of a response, with the function that assembles them.

    Parameters
    ----------
    points : array_like, shape (n, d), [-]
        Independent standard normals.
    parts : array_like, shape (n, n_part), [any]
        Smooth parts at the points, each in its unit; logarithms where a part must stay above zero.
    values : array_like, shape (n,), [any]
        Response of the model at the points.
    assemble : callable
        Response (n,) from the parts (n, n_part); may have kinks.
    candidates : sequence of tuple, optional
        Sets of terms, as for `polynomial_chaos`.

    Returns
    -------
    chaos : AssembledChaos
        Parts, assembly and hold-out error.

    Raises
    ------
    ShapeError
        If the shapes do not match.
    ParameterError
        If fewer than ten points have finite parts.

    Notes
    -----
    Every fifth point is held out of the expansions that are kept. The error is that of the assembled response
    against the model and so holds also what the assembly leaves out.
    """
    x, part = np.asarray(points, dtype=np.float64), np.asarray(parts, dtype=np.float64)
    response = np.asarray(values, dtype=np.float64)
    if x.ndim != 2 or part.ndim != 2 or response.shape != (len(x),) or len(part) != len(x):
        raise ShapeError(f"points {x.shape}, parts {part.shape} and values {response.shape} do not match")
    check = np.arange(len(x)) % _EVERY == _EVERY - 1
    expansions = polynomial_chaos(
        x[~check], part[~check], candidates=candidates, held_out=(x[check], part[check])
    )
    usable = check & np.isfinite(response)
    assembled = np.asarray(assemble(expansions.predict(x[usable])), dtype=np.float64)
    if assembled.shape != (int(usable.sum()),):
        raise ShapeError(f"assemble must return one value a row; got shape {assembled.shape}")
    error = relative_squared_error(assembled[:, np.newaxis], response[usable, np.newaxis])
    return AssembledChaos(parts=expansions, assemble=assemble, hold_out_error=float(error[0]))
