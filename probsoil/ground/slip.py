"""Least factor of safety against an undrained slip on a circle."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.ground._slip_kernel import Moments, least_factor, near_least, strength_on_slices
from probsoil.ground.lanes import LANES, Lanes
from probsoil.ground.slip_circles import N_ZONE, CircleFamily

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
    factor, critical = _least(_packed(ground, fill, family), family)
    return factor.reshape(-1)[:n_sample], critical.reshape(-1)[:n_sample]


def competing_circles(
    ground: GroundStrength, fill: FillStrength, family: CircleFamily, *, within: float
) -> CircleFamily:
    """Return the circles that are nearly critical in at least one realisation.

    Parameters
    ----------
    ground : GroundStrength
        Strength of the layers, n_sample realisations.
    fill : FillStrength
        Fill of the same realisations.
    family : CircleFamily
        Circles to choose from.
    within : float, [-]
        How far above the least factor a circle may be, as a share of it.

    Returns
    -------
    family : CircleFamily
        The circles kept, in their order.
    """
    packed = _packed(ground, fill, family)
    factor, _ = _least(packed, family)
    near = np.zeros(family.n_circle)
    near_least(_moments(packed, family), factor, within, near)
    return family.subset(near > 0.0)


@dataclass(frozen=True, slots=True, eq=False)
class _Packed:
    strength: FloatArray  # (n_block, n_column, LANES)
    fill: FloatArray  # (n_block, 3, LANES): unit weight, tangent of friction angle, cohesion


def _packed(ground: GroundStrength, fill: FillStrength, family: CircleFamily) -> _Packed:
    lanes = Lanes(fill.unit_weight.size)
    kinds = [ground.cohesive] if ground.frictional is None else [ground.cohesive, ground.frictional]
    strength = np.concatenate(kinds, axis=1)
    n_kind, n_slice = strength.shape[1], family.slice_depth.size
    at_points = np.stack([lanes.pack(strength[:, kind]) for kind in range(n_kind)], axis=1)
    first_point = np.searchsorted(ground.point_layer, np.arange(ground.boundary.shape[1]))
    on_slices = np.empty((lanes.n_block, n_kind, n_slice, LANES))
    strength_on_slices(
        family.slice_depth,
        lanes.pack(ground.boundary),
        first_point.astype(np.int64),
        lanes.pack(ground.point_depth),
        at_points,
        np.where(np.arange(n_kind) < N_ZONE, _FIRM, 0.0),
        on_slices,
    )
    tangent = np.tan(np.radians(fill.friction_angle))
    return _Packed(
        on_slices.reshape(lanes.n_block, n_kind * n_slice, LANES),
        lanes.pack(np.stack([fill.unit_weight, tangent, fill.cohesion], axis=1)),
    )


def _moments(packed: _Packed, family: CircleFamily) -> Moments:
    return Moments(
        strength=packed.strength,
        row_start=family.row_start,
        column=family.column,
        weight=family.weight,
        fill=packed.fill,
        fill_terms=np.stack([family.driving, family.fill_friction, family.fill_cohesion]),
    )


def _least(packed: _Packed, family: CircleFamily) -> tuple[FloatArray, IntArray]:
    factor = np.empty((packed.strength.shape[0], LANES))
    critical = np.empty(factor.shape, dtype=np.int64)
    least_factor(_moments(packed, family), factor, critical)
    return factor, critical
