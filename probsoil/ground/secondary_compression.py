"""Secondary compression (creep) of clay after its primary consolidation."""

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.ground._checks import checked
from probsoil.ground.applied_load import LoadedGround
from probsoil.ground.clay_settlement import final_added_stress, segment_settlement_when_done
from probsoil.ground.compression import LN10
from probsoil.ground.consolidation import ConsolidationResult
from probsoil.ground.degree import time_to_degree
from probsoil.ground.profile import Values, column
from probsoil.ground.rows import chosen, row_sum
from probsoil.ground.site_model import SiteModel

PRIMARY = 0.95
"""Degree of consolidation from which a drainage segment creeps, [-]."""

_FADING = 0.1  # of overconsolidation, over which creep fades to that of the reloading line


def creep_reduction(overconsolidation: ArrayLike, kappa_over_lambda: ArrayLike) -> FloatArray:
    r"""Return creep of a clay that has carried more, as a share of that when normally consolidated.

    Parameters
    ----------
    overconsolidation : array_like, shape (...,), [-]
        Preconsolidation stress over effective stress once the load is final, at least 1.
    kappa_over_lambda : array_like, shape (...,), [-]
        Ratio of the slopes of reloading and virgin compression, 0 to 1.

    Returns
    -------
    reduction : ndarray, shape (...,), [-]
        :math:`\kappa/\lambda + (1 - \kappa/\lambda) \exp[-(OCR - 1)/0.1]`.

    Raises
    ------
    ParameterError
        If an argument is out of range.

    Notes
    -----
    The secondary compression index is in proportion to the slope of the line in force (Mesri and
    Godlewski 1977), so far from the preconsolidation stress it falls to kappa/lambda. The way there is
    a judgement drawn to recalled trends of surcharged embankments (about a half at an overconsolidation
    of 1.1, a quarter at 1.2). That creep restarts only some time after a removal is left out, which is
    on the large side.

    References
    ----------
    .. [1] G. Mesri and P. M. Godlewski, Time- and stress-compressibility interrelationship, J. Geotech.
       Eng. Div. ASCE 103(GT5), 1977 (from memory, not opened).
    """
    ratio = checked("kappa_over_lambda", kappa_over_lambda, at_least=0.0)
    fading = np.exp(-(checked("overconsolidation", overconsolidation, at_least=1.0) - 1.0) / _FADING)
    return np.asarray(ratio + (1.0 - ratio) * fading)


def secondary_settlement(
    site: SiteModel, values: Values, ground: LoadedGround, result: ConsolidationResult
) -> FloatArray:
    r"""Return the settlement by secondary compression through time.

    Parameters
    ----------
    site : SiteModel
        Time axis and stages.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        The ground before loading and the added stress.
    result : ConsolidationResult
        Consolidation of the clay.

    Returns
    -------
    settlement : ndarray, shape (n_sample, n_time), [m]
        :math:`\sum C_\alpha/(1 + e_0)\,\Delta z \log_{10}[(t - t_0)/(t_p - t_0)]` from tp on; zero where no
        layer creeps.

    Notes
    -----
    Every drainage segment creeps from its own tp, the first time after the last stage at which it has
    reached 95 % of its consolidation under the load that stays, in that realisation. Time counts from
    t0, the middle of the last stage that added load. :math:`C_\alpha` is `C_alpha_ratio` times
    :math:`C_c = \lambda \ln 10` times `creep_reduction`, with the overconsolidation that the largest
    load has left. Creep before tp and between stages is part of the compression line as measured and
    is not added; creep does not wait for pore pressure.
    """
    n_sample = ground.points.depth.shape[0]
    settled = np.zeros((n_sample, site.times.size))
    if not any(layer.creeps for layer in site.layers):
        return settled
    per_cell, segment = creep_per_decade(site, values, ground, result), site.cells.segment
    start, origin = end_of_primary(site, ground, result), site.last_increase
    for one in range(site.cells.n_segment):
        rate = row_sum(per_cell[:, segment == one])
        since = np.maximum(site.times - origin, 0.0)[None, :] / (start[:, one, None] - origin)
        decades = np.log10(np.maximum(since, 1.0))
        settled += rate[:, None] * decades
    return settled


def end_of_primary(site: SiteModel, ground: LoadedGround, result: ConsolidationResult) -> FloatArray:
    """Return when every drainage segment has reached 95 % of its consolidation after the last stage.

    Parameters
    ----------
    site : SiteModel
        Time axis and stages.
    ground : LoadedGround
        The ground before loading and the added stress.
    result : ConsolidationResult
        Consolidation of the clay.

    Returns
    -------
    time : ndarray, shape (n_sample, n_segment), [years]
        tp, infinite where it is not reached by the horizon.
    """
    first = int(np.searchsorted(site.times, site.last_change))
    done = segment_settlement_when_done(site, ground, result)
    start = np.empty_like(done)
    for segment in range(site.cells.n_segment):
        so_far = result.by_segment[:, segment, first:]
        degree = np.where(so_far >= done[:, segment, None], 1.0, so_far / done[:, segment, None])
        start[:, segment] = time_to_degree(site.times[first:], degree, PRIMARY)
    return start


def creep_per_decade(
    site: SiteModel, values: Values, ground: LoadedGround, result: ConsolidationResult
) -> FloatArray:
    """Return the secondary compression of every cell in a tenfold of time.

    Parameters
    ----------
    site : SiteModel
        Which layers creep.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        The ground before loading and the added stress.
    result : ConsolidationResult
        Consolidation of the clay.

    Returns
    -------
    settlement : ndarray, shape (n_sample, n_cell), [m]
        Per decade of time; zero in layers that do not creep.
    """
    layer = site.cells.layer
    n_sample = ground.points.depth.shape[0]
    ratio = np.zeros((n_sample, len(site.layers)))
    for index, form in enumerate(site.layers):
        if form.creeps:
            ratio[:, index] = column(values, f"{form.name}.C_alpha_ratio", n_sample)
    columns = ground.columns
    lam, kap, void_ratio = (chosen(one, layer) for one in (columns.lam, columns.kap, columns.void_ratio))
    final = chosen(ground.points.stress, ground.clay) + final_added_stress(site, ground, result)
    largest = np.maximum(result.yield_stress[:, -1], final)
    creep_index = chosen(ratio, layer) * lam * LN10 * creep_reduction(largest / final, kap / lam)
    return np.asarray(creep_index / (1.0 + void_ratio) * chosen(ground.points.thickness, ground.clay))
