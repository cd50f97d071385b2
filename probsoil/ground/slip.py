"""Least factor of safety against an undrained slip on a circle."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.ground._slip_kernel import Moments, least_factor, strength_on_slices
from probsoil.ground.lanes import LANES, Lanes
from probsoil.ground.slip_circles import (
    N_ZONE,
    CircleFamily,
    CircleLayout,
    candidate_circles,
    dense_weights,
    weighed,
)

_BLOCK = 2000  # circles weighed at a time while screening
_FIRM = 1e6  # kPa; below the last layer no circle is ever critical


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class GroundStrength:
    """Strength of the ground at points that follow the layers of each realisation.

    Attributes
    ----------
    boundary : ndarray, shape (n_sample, n_layer + 1), [m]
        Depths of layer boundaries, ground level first.
    point_layer : ndarray of int, shape (n_point,), [-]
        Layer of each point, rising.
    point_depth : ndarray, shape (n_sample, n_point), [m]
        Depths of the points.
    cohesive : ndarray, shape (n_sample, 3, n_point), [kPa]
        Undrained strength beyond the toe, under the slope and under the crest; zero in layers
        with friction.
    frictional : ndarray or None, shape (n_sample, 3, n_point), [kPa]
        Effective vertical stress times the tangent of the friction angle in the same zones; None
        where no layer has friction.
    """

    boundary: FloatArray
    point_layer: IntArray
    point_depth: FloatArray
    cohesive: FloatArray
    frictional: FloatArray | None


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class FillStrength:
    """Fill of each realisation.

    Attributes
    ----------
    unit_weight : ndarray, shape (n_sample,), [kN/m3]
        Bulk unit weight.
    friction_angle : ndarray, shape (n_sample,), [degrees]
        Effective friction angle.
    cohesion : ndarray, shape (n_sample,), [kPa]
        Effective cohesion.
    """

    unit_weight: FloatArray
    friction_angle: FloatArray
    cohesion: FloatArray


def slip_safety(
    ground: GroundStrength, fill: FillStrength, family: CircleFamily
) -> tuple[FloatArray, IntArray]:
    r"""Return the least factor of safety over a family of circles, and the circle.

    Parameters
    ----------
    ground : GroundStrength
        Strength of the layers, n_sample realisations.
    fill : FillStrength
        Fill of the same realisations.
    family : CircleFamily
        Circles for the section at the time looked at.

    Returns
    -------
    factor : ndarray, shape (n_sample,), [-]
        Least ratio of resisting to driving moment.
    critical : ndarray of int, shape (n_sample,), [-]
        Index of the circle in `family`.

    Notes
    -----
    Total-stress analysis: :math:`F = R \sum \tau\,\Delta l / M_d` with undrained strength in clay
    and friction on the ordinary method's normal stress in fill and granular layers. Circles stay
    above the last layer's bottom, below which the ground counts as firm. Plane strain; end
    effects, progressive failure and cracks in the fill are left out.
    """
    n_sample = fill.unit_weight.size
    lanes = Lanes(n_sample)
    tangent = np.tan(np.radians(fill.friction_angle))
    moments = Moments(
        strength=_on_slices(ground, family.slice_edge, n_sample),
        row_start=family.row_start,
        column=family.column,
        weight=family.weight,
        fill=lanes.pack(np.stack([fill.unit_weight, tangent, fill.cohesion], axis=1)),
        fill_terms=np.stack([family.driving, family.fill_friction, family.fill_cohesion]),
    )
    factor = np.empty((lanes.n_block, LANES))
    critical = np.empty(factor.shape, dtype=np.int64)
    least_factor(moments, factor, critical)
    return factor.reshape(-1)[:n_sample], critical.reshape(-1)[:n_sample]


def competing_circles(
    ground: GroundStrength, fill: FillStrength, layout: CircleLayout, *, within: float
) -> CircleFamily:
    """Return the circles that are critical or nearly so in at least one realisation.

    Parameters
    ----------
    ground : GroundStrength
        Strength of the layers, n_sample realisations.
    fill : FillStrength
        Fill of the same realisations.
    layout : CircleLayout
        Circles to choose from.
    within : float, [-]
        How far above the least factor a circle may be, as a share of it.

    Returns
    -------
    family : CircleFamily
        The circles kept, in their order.
    """
    n_sample = fill.unit_weight.size
    strength = Lanes(n_sample).unpack(_on_slices(ground, layout.slice_edge, n_sample)).T
    tangent = np.tan(np.radians(fill.friction_angle))
    circles = candidate_circles(layout)
    factor = np.empty((len(circles), n_sample))
    for first in range(0, len(circles), _BLOCK):
        part = slice(first, first + _BLOCK)
        rows, terms = dense_weights(layout, circles[part])
        by_fill = np.outer(terms[0], fill.unit_weight * tangent) + np.outer(terms[1], fill.cohesion)
        factor[part] = (rows @ strength + by_fill) / np.outer(circles.driving[part], fill.unit_weight)
    near = factor <= (1.0 + within) * factor.min(axis=0)
    return weighed(layout, circles[np.asarray(near.any(axis=1))])


def _on_slices(ground: GroundStrength, edge: FloatArray, n_sample: int) -> FloatArray:
    """Return the strength of every zone and slice, shape (n_block, n_column, LANES), [kPa]."""
    lanes = Lanes(n_sample)
    kinds = [ground.cohesive] if ground.frictional is None else [ground.cohesive, ground.frictional]
    strength = np.concatenate(kinds, axis=1)
    n_kind, n_slice = strength.shape[1], edge.size - 1
    at_points = np.stack([lanes.pack(strength[:, kind]) for kind in range(n_kind)], axis=1)
    first_point = np.searchsorted(ground.point_layer, np.arange(ground.boundary.shape[1]))
    on_slices = np.empty((lanes.n_block, n_kind, n_slice, LANES))
    strength_on_slices(
        edge,
        lanes.pack(ground.boundary),
        first_point.astype(np.int64),
        lanes.pack(ground.point_depth),
        at_points,
        np.where(np.arange(n_kind) < N_ZONE, _FIRM, 0.0),
        on_slices,
    )
    return on_slices.reshape(lanes.n_block, n_kind * n_slice, LANES)
