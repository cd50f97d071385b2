"""The ground before loading, as arrays over realisations."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.ground.in_situ_stress import (
    hydrostatic_pressure,
    preconsolidation_stress,
    total_vertical_stress,
)
from probsoil.ground.pore_pressure import initial_excess, layer_seepage
from probsoil.ground.quantity_values import Values, column, sample_size, slope
from probsoil.ground.rows import chosen
from probsoil.ground.site_model import LayerForm, SiteModel
from probsoil.ground.undrained_strength import (
    m_from_friction_angle,
    normally_consolidated_strength_ratio,
    plastic_volumetric_ratio,
)

GREATEST_KAPPA_SHARE = 0.95  # of lambda; above it the two lines would cross
_GRANULAR_POINTS = np.array([0.125, 0.375, 0.625, 0.875])  # depths of points, as shares of a granular layer
_INNER = (
    0.4  # of a layer's thickness from its middle; no excess pressure stands in the skin at a drained face
)
_ROUNDING = 1e-9  # kPa; the uplift of nothing at ground level
LEAST_STRESS = 1.0  # kPa; the first centimetres carry suction and roots, never nothing

__all__ = [
    "LEAST_STRESS",
    "ClayColumns",
    "Points",
    "Values",
    "clay_columns",
    "column",
    "points_in_situ",
    "sample_size",
    "yield_stresses",
]


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Points:
    """Depths at which the ground is looked at: clay cells and points in granular layers.

    Attributes
    ----------
    layer : ndarray of int, shape (n_point,), [-]
        Layer of each point, rising.
    boundary : ndarray, shape (n_sample, n_layer + 1), [m]
        Depths of layer boundaries.
    depth, thickness : ndarray, shape (n_sample, n_point), [m]
        Depth of each point and the thickness it stands for.
    stress : ndarray, shape (n_sample, n_point), [kPa]
        Effective vertical stress in situ.
    pore : ndarray, shape (n_sample, n_point), [kPa]
        Pore pressure in situ: at rest or in steady seepage.
    excess : ndarray or None, shape (n_sample, n_point), [kPa]
        Pore pressure above that, still to dissipate; None where no layer has any.
    uplifted : ndarray of bool, shape (n_sample,), [-]
        Whether pore pressure beyond that at rest is no less than the weight of the ground somewhere.
    """

    layer: IntArray
    boundary: FloatArray
    depth: FloatArray
    thickness: FloatArray
    stress: FloatArray
    pore: FloatArray
    excess: FloatArray | None
    uplifted: BoolArray


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class ClayColumns:
    """Properties of clay layers, one column per layer, zero for granular layers.

    Attributes
    ----------
    lam, kap : ndarray, shape (n_sample, n_layer), [-]
        Slopes of void ratio against the natural logarithm of stress.
    void_ratio : ndarray, shape (n_sample, n_layer), [-]
        Initial void ratio.
    strength_ratio, strength_exponent : ndarray, shape (n_sample, n_layer), [-]
        S and m of the undrained strength.
    kappa_clipped : ndarray of bool, shape (n_sample, n_layer), [-]
        Where kappa was brought down to its greatest share of lambda.
    """

    lam: FloatArray
    kap: FloatArray
    void_ratio: FloatArray
    strength_ratio: FloatArray
    strength_exponent: FloatArray
    kappa_clipped: BoolArray


def layers_by_weight(
    site: SiteModel, values: Values, n_sample: int
) -> tuple[FloatArray, FloatArray, dict[str, FloatArray]]:
    """Return where the layers lie and what makes the stress of their weight.

    Parameters
    ----------
    site : SiteModel
        Layers.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    n_sample : int, [-]
        Number of realisations.

    Returns
    -------
    thickness : ndarray, shape (n_sample, n_layer), [m]
        Of each layer.
    boundary : ndarray, shape (n_sample, n_layer + 1), [m]
        Depths of the layer boundaries, ground level first.
    weights : dict of str to ndarray
        Arguments of `in_situ_stress.total_vertical_stress`: unit weights [kN/m3] and water table [m].
    """

    def per_layer(key: Callable[[LayerForm], str]) -> FloatArray:
        columns = [column(values, f"{layer.name}.{key(layer)}", n_sample) for layer in site.layers]
        return np.stack(columns, axis=1)

    thickness = per_layer(lambda _: "thickness")
    boundary = np.concatenate([np.zeros((n_sample, 1)), np.cumsum(thickness, axis=1)], axis=1)
    weights = {
        "unit_weight": per_layer(lambda _: "unit_weight"),
        "unit_weight_above": per_layer(
            lambda form: "unit_weight_above" if form.weight_above else "unit_weight"
        ),
        "water_table": column(values, "site.water_table", n_sample),
    }
    return thickness, boundary, weights


def points_in_situ(site: SiteModel, values: Values, n_sample: int) -> Points:
    """Return depths and stresses in situ of every point of the profile.

    Parameters
    ----------
    site : SiteModel
        Layers and cells.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    n_sample : int, [-]
        Number of realisations.

    Returns
    -------
    points : Points
        Clay cells and four points in every granular layer, from ground level down.

    Notes
    -----
    The effective stress is nowhere taken below 1 kPa (judgement): on the compression line a clay
    without any stress would have no lower end to its strain. What excess pore pressure is then left is
    less than given, so that it dissipates to the effective stress of the steady state.
    """
    thickness, boundary, weights = layers_by_weight(site, values, n_sample)
    layer, centre, share = _relative_points(site)
    if site.foundation is not None or site.face > 0.0:
        base = np.broadcast_to(site.base, (n_sample,))
        centre, share = _with_face_at(base, site, boundary, centre, share)
    each = chosen(thickness, layer)
    depth = chosen(boundary, layer) + centre * each
    total = total_vertical_stress(depth, boundary, **weights)
    pore, excess = hydrostatic_pressure(depth, weights["water_table"]), None
    uplifted = np.zeros(n_sample, dtype=np.bool_)
    if site.seeps:
        seepage = layer_seepage(site, values, boundary, weights)
        pore = seepage.pressure(depth, layer)
        at_boundary = total_vertical_stress(boundary, boundary, **weights)
        uplifted |= (seepage.at_boundaries() > at_boundary + _ROUNDING).any(axis=1)
    steady = np.maximum(total - pore, LEAST_STRESS)
    effective = steady
    if site.excess_layers:
        excess = initial_excess(site, values, boundary, depth, layer)
        effective = np.maximum(steady - excess, LEAST_STRESS)
        inner = np.abs((depth - chosen(boundary, layer)) / each - 0.5) <= _INNER
        uplifted |= (excess >= total - pore).any(axis=1, where=inner & (excess > 0.0))
        excess = steady - effective
    return Points(
        layer=layer,
        boundary=boundary,
        depth=depth,
        thickness=share * each,
        stress=effective,
        pore=pore,
        excess=excess,
        uplifted=uplifted,
    )


def _relative_points(site: SiteModel) -> tuple[IntArray, FloatArray, FloatArray]:
    """Return layer, centre and share (of its layer's thickness) of every point."""
    layer, centre, share = [], [], []
    for index, form in enumerate(site.layers):
        if form.is_clay:
            mine = site.cells.layer == index
            centre.append(site.cells.centre[mine])
            share.append(site.cells.share[mine])
        else:
            centre.append(_GRANULAR_POINTS)
            share.append(np.full(_GRANULAR_POINTS.size, 1.0 / _GRANULAR_POINTS.size))
        layer.append(np.full(centre[-1].size, index, dtype=np.int64))
    return np.concatenate(layer), np.concatenate(centre), np.concatenate(share)


def _with_face_at(
    base: FloatArray, site: SiteModel, boundary: FloatArray, centre: FloatArray, share: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return points of which, in each realisation, none reaches across the base of a foundation.

    One face lies on the base at mean thicknesses. Where the layers are thicker or thinner, the parts of
    the layer above and below the base are stretched so that the face stays there.
    """
    bottom = np.cumsum([form.mean_thickness for form in site.layers])
    index = int(np.searchsorted(bottom, site.face, side="right"))
    if index >= bottom.size or not site.layers[index].is_clay:
        return centre, share
    thickness = boundary[:, index + 1] - boundary[:, index]
    at_mean = 1.0 - (bottom[index] - site.face) / site.layers[index].mean_thickness
    here = (base - boundary[:, index]) / thickness
    if at_mean <= 0.0:
        return centre, share
    inside = (here > 0.0) & (here < 1.0)
    here = np.where(inside, here, at_mean)[:, None]
    mine = _relative_points(site)[0] == index

    def moved(place: FloatArray) -> FloatArray:
        above, below = place * here / at_mean, 1.0 - (1.0 - place) * (1.0 - here) / (1.0 - at_mean)
        return np.where(mine, np.where(place <= at_mean + 1e-9, above, below), place)

    upper, lower = moved(centre - 0.5 * share), moved(centre + 0.5 * share)
    return 0.5 * (upper + lower), lower - upper


def clay_columns(site: SiteModel, values: Values, n_sample: int) -> ClayColumns:
    """Return the properties of the clay layers in their basic form.

    Parameters
    ----------
    site : SiteModel
        Which form each layer's properties have.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    n_sample : int, [-]
        Number of realisations.

    Returns
    -------
    columns : ClayColumns
        Lambda, kappa, void ratio and undrained strength ratio of every layer.
    """
    shape = (n_sample, len(site.layers))
    lam, kap, void, ratio, exponent = (np.zeros(shape) for _ in range(5))
    clipped = np.zeros(shape, dtype=np.bool_)
    for index, layer in enumerate(site.layers):
        if not layer.is_clay:
            continue
        void[:, index] = column(values, f"{layer.name}.void_ratio", n_sample)
        lam[:, index] = slope(layer.name, layer.compression, values, void[:, index])
        swelling = slope(layer.name, layer.swelling, values, void[:, index])
        greatest = GREATEST_KAPPA_SHARE * lam[:, index]
        clipped[:, index] = swelling > greatest
        kap[:, index] = np.minimum(swelling, greatest)
        ratio[:, index], exponent[:, index] = _strength(layer, values, lam[:, index], kap[:, index])
    return ClayColumns(
        lam=lam,
        kap=kap,
        void_ratio=void,
        strength_ratio=ratio,
        strength_exponent=exponent,
        kappa_clipped=clipped,
    )


def _strength(
    layer: LayerForm, values: Values, lam: FloatArray, kap: FloatArray
) -> tuple[FloatArray, FloatArray]:
    if layer.strength_given:
        return (
            column(values, f"{layer.name}.strength_S", lam.size),
            column(values, f"{layer.name}.strength_m", lam.size),
        )
    friction = column(values, f"{layer.name}.{layer.friction}", lam.size)
    m = friction if layer.friction == "M" else m_from_friction_angle(friction)
    ratio = plastic_volumetric_ratio(lam, kap)
    return normally_consolidated_strength_ratio(m, ratio), ratio


def yield_stresses(site: SiteModel, values: Values, points: Points) -> tuple[FloatArray, BoolArray]:
    """Return the preconsolidation stress of every point, and where the present stress is its floor.

    Parameters
    ----------
    site : SiteModel
        Which form each layer's preconsolidation stress has.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    points : Points
        Where.

    Returns
    -------
    stress : ndarray, shape (n_sample, n_point), [kPa]
        Preconsolidation stress; in granular layers the stress in situ.
    floored : ndarray of bool, shape (n_sample, n_point), [-]
        Where the stress in situ replaced a smaller number.
    """
    stress, floored = points.stress.copy(), np.zeros(points.stress.shape, dtype=np.bool_)
    for index, layer in enumerate(site.layers):
        if layer.is_clay:
            mine = points.layer == index
            given = column(values, f"{layer.name}.{layer.yielding}", points.stress.shape[0])
            stress[:, mine], floored[:, mine] = preconsolidation_stress(
                points.stress[:, mine], layer.yielding, given
            )
    return stress, floored
