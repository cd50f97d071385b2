"""Settlement of granular layers, which drain as fast as they are loaded."""

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.applied_load import LoadedGround
from probsoil.ground.profile import Values, column
from probsoil.ground.site_model import SiteModel


def granular_settlement(site: SiteModel, values: Values, ground: LoadedGround) -> FloatArray:
    r"""Return the settlement of the granular layers through time.

    Parameters
    ----------
    site : SiteModel
        Layers, load knots and time axis.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        Points and added stress.

    Returns
    -------
    settlement : ndarray, shape (n_sample, n_time), [m]
        :math:`\sum \Delta\sigma\,\Delta z / M` over the points of granular layers.

    Notes
    -----
    One-dimensional elastic compression with a constant constrained modulus (common practice); it
    comes back when load is removed. The loss of weight of submerged fill is left out here, which
    is on the large side.
    """
    return between_knots(site, granular_at_knots(site, values, ground, ground.load.stress))


def granular_at_knots(
    site: SiteModel, values: Values, ground: LoadedGround, stress: FloatArray
) -> FloatArray:
    """Return the settlement of the granular layers under given stresses.

    Parameters
    ----------
    site : SiteModel
        Layers.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        Points.
    stress : ndarray, shape (n_knot, n_sample, n_point), [kPa]
        Added stress.

    Returns
    -------
    settlement : ndarray, shape (n_knot, n_sample), [m]
        For each of the stresses.
    """
    n_sample = ground.points.depth.shape[0]
    at_knots = np.zeros((len(stress), n_sample))
    for index, layer in enumerate(site.layers):
        if layer.is_clay:
            continue
        mine = ground.points.layer == index
        modulus = column(values, f"{layer.name}.constrained_modulus", n_sample)
        squeezed = (stress[:, :, mine] * ground.points.thickness[:, mine]).sum(axis=2)
        at_knots += squeezed / modulus
    return at_knots


def between_knots(site: SiteModel, at_knots: FloatArray) -> FloatArray:
    """Return through time what follows the load at once.

    Parameters
    ----------
    site : SiteModel
        Load knots and time axis.
    at_knots : ndarray, shape (n_knot, n_sample), [m]
        Settlement at the load knots.

    Returns
    -------
    settlement : ndarray, shape (n_sample, n_time), [m]
        Linear between knots.
    """
    knots, times = site.knots, site.times
    after = np.clip(np.searchsorted(knots, times), 1, knots.size - 1)
    share = (times - knots[after - 1]) / (knots[after] - knots[after - 1])
    return np.asarray((at_knots[after - 1].T * (1.0 - share) + at_knots[after].T * share), dtype=np.float64)
