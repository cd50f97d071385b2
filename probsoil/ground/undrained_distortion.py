"""Settlement of clay at constant volume: what a load of limited size brings before any water leaves."""

from collections.abc import Callable

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.amounts import Amount, beside_depths, greater, key_of
from probsoil.ground.applied_load import LoadedGround, fill_weight
from probsoil.ground.embankment import Embankment
from probsoil.ground.granular_settlement import between_knots
from probsoil.ground.load_displacement import embankment_displacement
from probsoil.ground.profile import Values, column
from probsoil.ground.site_model import SiteModel
from probsoil.ground.undrained_strength import undrained_shear_strength

_Curve = Callable[[FloatArray], FloatArray]


def undrained_distortion(site: SiteModel, values: Values, ground: LoadedGround) -> FloatArray:
    r"""Return the settlement by undrained distortion of the clay through time.

    Parameters
    ----------
    site : SiteModel
        Load, stages and time axis.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        The ground before loading.

    Returns
    -------
    settlement : ndarray, shape (n_sample, n_time), [m]
        Zero where no layer has an undrained modulus.

    Notes
    -----
    :math:`s = q \sum (f_t - f_b)/E_u` over the clay cells, f the displacement of `load_displacement` at
    their top and bottom: the strain at constant volume, integrated exactly over every cell, with the
    stresses of a homogeneous half-space (Steinbrenner's superposition). It follows the load at once,
    both ways. Local yield is left out, and so is loss of weight by submergence.
    """
    # a sum along contiguous rows keeps its order, whatever the number of realisations
    return between_knots(site, np.ascontiguousarray(distortion_by_point(site, values, ground)).sum(axis=2))


def distortion_by_point(site: SiteModel, values: Values, ground: LoadedGround) -> FloatArray:
    """Return the undrained distortion of every point at the load knots.

    Parameters
    ----------
    site : SiteModel
        Load and stages.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        The ground before loading.

    Returns
    -------
    settlement : ndarray, shape (n_knot, n_sample, n_point), [m]
        Zero in granular layers, in clay without an undrained modulus and above the base of a foundation.
    """
    modulus = undrained_modulus(site, values, ground)
    top, bottom = below_base(site, ground)
    compliance = np.where(np.isfinite(modulus), 1.0 / modulus, 0.0)
    weight = fill_weight(values, top.shape[0])[:, None]
    known: dict[float | bytes, FloatArray] = {}
    settlement = []
    for time in site.knots:
        height = site.fill_height(float(time))
        if (key := key_of(height)) not in known:
            curve = displacement_of(site, height)
            known[key] = (curve(top) - curve(bottom)) * compliance
        if site.embankment is None:
            pressure = weight * beside_depths(height) + beside_depths(site.pressure(float(time)))
            settlement.append(pressure * known[key])
        else:
            settlement.append(weight * known[key])
    return np.stack(settlement)


def undrained_modulus(site: SiteModel, values: Values, ground: LoadedGround) -> FloatArray:
    """Return the undrained Young's modulus of every point.

    Parameters
    ----------
    site : SiteModel
        In which form each layer gives it.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        The ground before loading, for the strength in triaxial compression.

    Returns
    -------
    modulus : ndarray, shape (n_sample, n_point), [kPa]
        Infinite where none is given.
    """
    points, columns = ground.points, ground.columns
    modulus = np.full(points.depth.shape, np.inf)
    for index, form in enumerate(site.layers):
        if not form.modulus:
            continue
        mine = points.layer == index
        given = column(values, f"{form.name}.{form.modulus}", points.depth.shape[0])[:, None]
        if form.modulus == "Eu_su":
            given = given * undrained_shear_strength(
                points.stress[:, mine],
                ground.yield_stress[:, mine],
                columns.strength_ratio[:, index, None],
                columns.strength_exponent[:, index, None],
            )
        modulus[:, mine] = given
    return modulus


def below_base(site: SiteModel, ground: LoadedGround) -> tuple[FloatArray, FloatArray]:
    """Return how far top and bottom of every point lie below the load.

    Parameters
    ----------
    site : SiteModel
        Its foundation, if any.
    ground : LoadedGround
        Points.

    Returns
    -------
    top, bottom : ndarray, shape (n_sample, n_point), [m]
        Zero for what lies above the base of a foundation.
    """
    base = 0.0 if site.foundation is None else beside_depths(site.foundation.depth)
    half = 0.5 * ground.points.thickness
    depth = ground.points.depth - base
    return np.maximum(depth - half, 0.0), np.maximum(depth + half, 0.0)


def displacement_of(site: SiteModel, height: Amount) -> _Curve:
    """Return the displacement below the reported point as a function of the depth below the load.

    Parameters
    ----------
    site : SiteModel
        Its load, not one over a wide area, below which clay of constant volume does not move.
    height : float or ndarray, shape (n_sample,), [m]
        Height of fill; only an embankment changes its form with it.

    Returns
    -------
    curve : callable, [m]
        Modulus times displacement over the pressure of a foundation [m], or over the unit weight of the fill
        of an embankment [m2].
    """
    shape = site.embankment
    if site.foundation is not None:
        foundation = site.foundation.beside_depths
        return lambda depth: foundation.displacement(depth, *foundation.at)
    if shape is None:
        return np.zeros_like
    return lambda depth: _fill_displacement(shape, height, depth, site.offset)


def _fill_displacement(shape: Embankment, height: Amount, depth: FloatArray, offset: float) -> FloatArray:
    total = np.zeros_like(depth)
    for part in shape.beside_depths.trapezia(greater(beside_depths(height), 0.0)):
        widths = {"base_width": part.base_width, "top_width": part.top_width}
        total += part.height * embankment_displacement(depth, offset, **widths)
    return total
