"""Secondary compression (creep) of clay after its primary consolidation."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.ground._checks import checked
from probsoil.ground.applied_load import LoadedGround
from probsoil.ground.clay_settlement import (
    added_stress_when_done,
    by_segment,
    segment_settlement_when_done,
    shortening,
)
from probsoil.ground.compression import LN10
from probsoil.ground.consolidation import ConsolidationResult
from probsoil.ground.degree import time_to_degree
from probsoil.ground.profile import Values, column
from probsoil.ground.rows import chosen
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


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class CreepSpell:
    """Secondary compression under the load between the middle of one stage and that of the next.

    Attributes
    ----------
    end : float, [years]
        Middle of the next stage; infinite after the last.
    per_cell : ndarray, shape (n_sample, n_cell), [m]
        Secondary compression in a tenfold of time; zero in layers that do not creep.
    origin : ndarray, shape (n_sample, n_segment), [years]
        t0, from which the clay's age counts.
    begin : ndarray, shape (n_sample, n_segment), [years]
        tp, from which the segment creeps; infinite where it does not before `end`.
    """

    end: float
    per_cell: FloatArray
    origin: FloatArray
    begin: FloatArray

    def decades(self, time: FloatArray, segment: int) -> FloatArray:
        """Return for how many tenfolds of its age a segment has crept in this spell.

        Parameters
        ----------
        time : ndarray, shape (n_time,), [years]
            Times.
        segment : int, [-]
            Number of the segment.

        Returns
        -------
        decades : ndarray, shape (n_sample, n_time), [-]
            Zero up to tp, and the same from the end of the spell on.
        """
        origin, begin = self.origin[:, segment, None], self.begin[:, segment, None]
        age = np.maximum(np.minimum(time, self.end)[None, :] - origin, 0.0)
        return np.log10(np.maximum(age / (begin - origin), 1.0))


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
        Sum over the spells, cells and times of :math:`C_\alpha/(1 + e_0)\,\Delta z
        \log_{10}[(t - t_0)/(t_p - t_0)]`; zero where no layer creeps.

    Notes
    -----
    Every drainage segment creeps while it has reached 95 % of its consolidation under the load of the
    time, in that realisation. :math:`C_\alpha` is `C_alpha` as given or `C_alpha_ratio` times
    :math:`C_c = \lambda \ln 10`, times `creep_reduction` by the overconsolidation of the time. How the
    age carries over from stage to stage see `creep_spells`. Creep before tp is part of the
    compression line as measured and is not added; creep does not wait for pore pressure. What comes
    later changes nothing that went before.
    """
    settled = np.zeros((ground.points.depth.shape[0], site.times.size))
    for spell in creep_spells(site, values, ground, result):
        rate = by_segment(site, spell.per_cell)
        for segment in range(site.cells.n_segment):
            settled += rate[:, segment, None] * spell.decades(site.times, segment)
    return settled


def creep_spells(
    site: SiteModel, values: Values, ground: LoadedGround, result: ConsolidationResult
) -> list[CreepSpell]:
    r"""Return the spells of secondary compression, one after the middle of every stage.

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
    spells : list of CreepSpell
        In order of time; none where no layer creeps.

    Notes
    -----
    Stages of several loads that overlap count as one. No clay creeps while a pit stands open in which
    nothing has been placed, nor while fill is added to hold its level.

    The age of the clay counts from the middle of the first stage. A later stage that takes it beyond
    the largest stress it knew makes it younger: with r the ratio of the new largest stress to the old,
    the age is multiplied by :math:`r^{-(1 - \kappa/\lambda) C_c/C_\alpha}`, the mean over the segment by
    its creep. That keeps to lines of equal age parallel to the virgin line (Bjerrum 1967): a large
    increase begins anew, a small one hardly matters, a removal leaves the age as it is.

    References
    ----------
    .. [1] L. Bjerrum, Engineering geology of Norwegian normally-consolidated marine clays,
       Geotechnique 17(2), 1967 (from memory, not opened).
    """
    if not any(layer.creeps for layer in site.layers):
        return []
    ratio, kappa_share = _creep_ratios(site, values, ground)
    known = chosen(ground.yield_stress, ground.clay)
    spells: list[CreepSpell] = []
    middles = [0.5 * (change.start + change.end) for change in site.changes] + [np.inf]
    for index, change in enumerate(site.changes):
        settled = _load_settles(site, index)
        present = _stress_when_done(site, ground, result, settled, middles[index + 1])
        seen = int(np.searchsorted(site.record, min(middles[index + 1], site.horizon), side="right")) - 1
        reached = result.yield_stress[:, seen]
        largest = np.maximum(reached, present)
        per_cell = _per_decade(site, ground, ratio, creep_reduction(largest / present, kappa_share))
        origin = np.full((present.shape[0], site.cells.n_segment), middles[index])
        if spells:
            age = middles[index] - spells[-1].origin
            origin -= age * _rejuvenation(site, per_cell, ratio, kappa_share, largest / known)
        begin = np.maximum(
            _nearly_done(
                site, result, by_segment(site, shortening(site, ground, present, largest)), middles[index]
            ),
            np.maximum(
                np.inf if change.digs else max(middles[index], site.hold_level_until or 0.0),
                origin + (change.end - middles[index]),
            ),
        )
        spells.append(
            CreepSpell(
                end=middles[index + 1],
                per_cell=per_cell,
                origin=origin,
                begin=np.where(begin < middles[index + 1], begin, np.inf),
            )
        )
        known = largest
    return spells


def _load_settles(site: SiteModel, index: int) -> float:
    """Return when the load of a spell is what it stays: also no more fill is added to hold its level."""
    following = site.changes[index + 1].start if index + 1 < len(site.changes) else site.horizon
    return max(site.changes[index].end, min(site.hold_level_until or 0.0, following))


def _creep_ratios(site: SiteModel, values: Values, ground: LoadedGround) -> tuple[FloatArray, FloatArray]:
    """Return C_alpha over Cc, zero where a layer does not creep, and kappa over lambda, of every cell."""
    layer, n_sample = site.cells.layer, ground.points.depth.shape[0]
    ratio = np.zeros((n_sample, len(site.layers)))
    for index, form in enumerate(site.layers):
        if form.creeps:
            ratio[:, index] = column(values, f"{form.name}.{form.creep}", n_sample)
        if form.creep == "C_alpha":
            ratio[:, index] /= ground.columns.lam[:, index] * LN10
    return chosen(ratio, layer), chosen(ground.columns.kap, layer) / chosen(ground.columns.lam, layer)


def _stress_when_done(
    site: SiteModel, ground: LoadedGround, result: ConsolidationResult, time: float, until: float
) -> FloatArray:
    """Return the effective stress that the load of a time comes to, with what has sunk until another."""
    last = int(np.searchsorted(site.times, min(until, site.horizon), side="right")) - 1
    settled = np.nan_to_num(result.settlement[:, last])
    return chosen(ground.points.stress, ground.clay) + added_stress_when_done(site, ground, time, settled)


def _per_decade(
    site: SiteModel, ground: LoadedGround, ratio: FloatArray, reduction: FloatArray
) -> FloatArray:
    """Return the secondary compression of every cell in a tenfold of time, (n_sample, n_cell), [m]."""
    lam, void_ratio = (
        chosen(part, site.cells.layer) for part in (ground.columns.lam, ground.columns.void_ratio)
    )
    return ratio * lam * LN10 * reduction / (1.0 + void_ratio) * chosen(ground.points.thickness, ground.clay)


def _rejuvenation(
    site: SiteModel, per_cell: FloatArray, ratio: FloatArray, kappa_share: FloatArray, growth: FloatArray
) -> FloatArray:
    """Return the share of its age that a growth of the largest stress leaves a segment, [-]."""
    exponent = (1.0 - kappa_share) / np.where(ratio > 0.0, ratio, 1.0)
    loss = by_segment(site, per_cell * exponent * np.log(np.maximum(growth, 1.0)))
    whole = by_segment(site, per_cell)
    return np.exp(-loss / np.where(whole > 0.0, whole, 1.0))


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
        Infinite where it is not reached by the horizon.
    """
    done = segment_settlement_when_done(site, ground, result)
    return _nearly_done(site, result, done, site.last_load_change)


def _nearly_done(site: SiteModel, result: ConsolidationResult, done: FloatArray, since: float) -> FloatArray:
    """Return when every segment has reached 95 % of a settlement, (n_sample, n_segment), [years]."""
    first = max(int(np.searchsorted(site.times, since, side="right")) - 1, 0)
    time = np.empty_like(done)
    for segment in range(site.cells.n_segment):
        so_far = result.by_segment[:, segment, first:]
        degree = np.where(so_far >= done[:, segment, None], 1.0, so_far / done[:, segment, None])
        time[:, segment] = time_to_degree(site.times[first:], degree, PRIMARY)
    return time


def secondary_by_cell(site: SiteModel, spells: Sequence[CreepSpell], time: float) -> FloatArray:
    """Return the secondary compression of every cell at a time.

    Parameters
    ----------
    site : SiteModel
        Cells.
    spells : sequence of CreepSpell
        All of them.
    time : float, [years]
        Time.

    Returns
    -------
    settlement : ndarray, shape (n_sample, n_cell), [m]
        Sum over the spells.
    """
    settled = np.zeros_like(spells[0].per_cell)
    for spell in spells:
        decades = [spell.decades(np.array([time]), one) for one in range(site.cells.n_segment)]
        settled += spell.per_cell * np.concatenate(decades, axis=1)[:, site.cells.segment]
    return settled
