"""Pore pressure in situ that is not hydrostatic: steady seepage, and excess pressure still to dissipate."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from probsoil._typing import ArrayLike, FloatArray, IntArray
from probsoil.ground._checks import checked
from probsoil.ground.constants import SECONDS_PER_YEAR, WATER_UNIT_WEIGHT
from probsoil.ground.in_situ_stress import (
    hydrostatic_pressure,
    preconsolidation_stress,
    total_vertical_stress,
)
from probsoil.ground.quantity_values import Values, column, slope
from probsoil.ground.site_forms import LayerForm
from probsoil.ground.site_model import SiteModel
from probsoil.scenario.groundwater import controlled_boundaries, excess_runs, piezometric_levels

_EARLY_FACTOR = 0.05  # below it the root-time form is exact to 1e-9
_EARLY_DEGREE = 2.0 * np.sqrt(_EARLY_FACTOR / np.pi)
_MODE = (2.0 * np.arange(8) + 1.0) * np.pi / 2.0  # exp(-M^2 T) of the next is below 1e-60 at T = 0.05
_MOST_DEGREE = 1.0 - 1e-12
_ITERATIONS = 6


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Seepage:
    """Steady vertical seepage through the profile.

    Attributes
    ----------
    boundary : ndarray, shape (n_sample, n_layer + 1), [m]
        Depths of layer boundaries.
    level : ndarray, shape (n_sample, n_layer + 1), [m]
        Piezometric level there, as depth below ground level.
    head : ndarray, shape (n_sample, n_layer), [m]
        Level of a layer that has one of its own; not a number elsewhere.
    water_table : ndarray, shape (n_sample,), [m]
        Depth of the water table.
    permeability : ndarray, shape (n_sample, n_layer), [m/year]
        Vertical permeability by which clay layers share the loss of head; infinite where granular.
    resistance : ndarray, shape (n_sample, n_layer), [year]
        Thickness below the water table over permeability.
    """

    boundary: FloatArray
    level: FloatArray
    head: FloatArray
    water_table: FloatArray
    permeability: FloatArray
    resistance: FloatArray

    def level_at(self, depth: FloatArray, layer: IntArray) -> FloatArray:
        """Return the piezometric level at points.

        Parameters
        ----------
        depth : ndarray, shape (n_sample, n_point), [m]
            Depths.
        layer : ndarray of int, shape (n_point,), [-]
            Layer of each.

        Returns
        -------
        level : ndarray, shape (n_sample, n_point), [m]
            Linear over the part of a layer below the water table.
        """
        water = self.water_table[:, None]
        bottom = self.boundary[:, layer + 1]
        top = np.minimum(np.maximum(self.boundary[:, layer], water), bottom)
        part = np.clip((depth - top) / np.where(bottom > top, bottom - top, 1.0), 0.0, 1.0)
        above, below = self.level[:, layer], self.level[:, layer + 1]
        own = self.head[:, layer]
        return np.where(np.isfinite(own), own, above + (below - above) * part)

    def pressure(self, depth: FloatArray, layer: IntArray) -> FloatArray:
        """Return the steady pore pressure at points.

        Parameters
        ----------
        depth : ndarray, shape (n_sample, n_point), [m]
            Depths.
        layer : ndarray of int, shape (n_point,), [-]
            Layer of each.

        Returns
        -------
        pressure : ndarray, shape (n_sample, n_point), [kPa]
            Zero or more: suction is neglected.
        """
        return WATER_UNIT_WEIGHT * np.maximum(depth - self.level_at(depth, layer), 0.0)

    def at_boundaries(self) -> FloatArray:
        """Return the steady pore pressure at the layer boundaries, shape (n_sample, n_layer + 1), [kPa]."""
        return WATER_UNIT_WEIGHT * np.maximum(self.boundary - self.level, 0.0)


def layer_seepage(
    site: SiteModel, values: Values, boundary: FloatArray, weights: Mapping[str, FloatArray]
) -> Seepage:
    """Return the steady seepage between the water table and the levels that are given.

    Parameters
    ----------
    site : SiteModel
        Layers, and which levels are given.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    boundary : ndarray, shape (n_sample, n_layer + 1), [m]
        Depths of layer boundaries.
    weights : mapping of str to ndarray, [kN/m3] and [m]
        Unit weights and water table, as `in_situ_stress.total_vertical_stress` takes them.

    Returns
    -------
    seepage : Seepage
        Levels at the layer boundaries.

    Notes
    -----
    One-dimensional steady flow (Darcy): every clay layer between two known levels loses head in proportion
    to its thickness below the water table over its permeability. That is k where it is given, and where
    cv is given the k that goes with it on the virgin line at the preconsolidation stress of the middle of
    the layer, with the water at rest. Granular layers lose none. A level below the boundary at which it acts
    leaves atmospheric pressure there.
    """
    n_sample, water = boundary.shape[0], weights["water_table"]
    head = np.full((n_sample, len(site.layers)), np.nan)
    for index, form in enumerate(site.layers):
        if form.has_head:
            head[:, index] = column(values, f"{form.name}.head", n_sample)
    permeability = _permeability(site, values, boundary, weights)
    saturated = np.maximum(boundary[:, 1:] - np.maximum(boundary[:, :-1], water[:, None]), 0.0)
    resistance = saturated / permeability
    base = column(values, "site.base_head", n_sample) if site.base_head else water
    owners = controlled_boundaries([form.has_head for form in site.layers], base_drained=site.base_drained)
    controls = {
        place: np.minimum(base if owner is None else head[:, owner], boundary[:, place])
        for place, owner in owners.items()
    }
    levels = piezometric_levels(water, list(resistance.T), controls)
    return Seepage(
        boundary=boundary,
        level=np.stack(levels, axis=1),
        head=head,
        water_table=water,
        permeability=permeability,
        resistance=resistance,
    )


def _permeability(
    site: SiteModel, values: Values, boundary: FloatArray, weights: Mapping[str, FloatArray]
) -> FloatArray:
    middle = 0.5 * (boundary[:, :-1] + boundary[:, 1:])
    at_rest = total_vertical_stress(middle, boundary, **weights)
    at_rest = at_rest - hydrostatic_pressure(middle, weights["water_table"])
    found = np.full(middle.shape, np.inf)
    for index, form in enumerate(site.layers):
        if form.is_clay:
            found[:, index] = _clay_permeability(form, values, at_rest[:, index])
    return found


def _clay_permeability(form: LayerForm, values: Values, stress: FloatArray) -> FloatArray:
    given = column(values, f"{form.name}.{form.flow}", stress.size)
    if form.flow == "k":
        return given * SECONDS_PER_YEAR
    void_ratio = column(values, f"{form.name}.void_ratio", stress.size)
    lam = slope(form.name, form.compression, values, void_ratio)
    yielding = column(values, f"{form.name}.{form.yielding}", stress.size)
    past, _ = preconsolidation_stress(stress[:, None], form.yielding, yielding)
    return given * WATER_UNIT_WEIGHT * lam / ((1.0 + void_ratio) * np.maximum(past[:, 0], 1.0))


def initial_excess(
    site: SiteModel, values: Values, boundary: FloatArray, depth: FloatArray, layer: IntArray
) -> FloatArray:
    r"""Return the excess pore pressure that is still to dissipate when the works begin.

    Parameters
    ----------
    site : SiteModel
        Which layers have any, and in which form.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    boundary : ndarray, shape (n_sample, n_layer + 1), [m]
        Depths of layer boundaries.
    depth : ndarray, shape (n_sample, n_point), [m]
        Depths of points.
    layer : ndarray of int, shape (n_point,), [-]
        Layer of each.

    Returns
    -------
    excess : ndarray, shape (n_sample, n_point), [kPa]
        Zero in layers that have none.

    Notes
    -----
    With Z the depth below the top of the run of neighbouring clay layers that have an excess, over the
    thickness of the run: :math:`\sin \pi Z` (at an undrained base :math:`\sin \frac{\pi}{2} Z`), 1 or Z
    times the pressure; or, for a degree U under an earlier load, that load times Terzaghi's
    `isochrone` at the time factor of U.
    """
    excess = np.zeros_like(depth)
    runs = excess_runs([bool(form.excess) for form in site.layers], base_drained=site.base_drained)
    for index in site.excess_layers:
        form, mine = site.layers[index], layer == index
        first, last, closed = runs[index]
        top, bottom = boundary[:, first, None], boundary[:, last + 1, None]
        place = (depth[:, mine] - top) / (bottom - top)
        if form.excess == "degree":
            degree = column(values, f"{form.name}.initial_degree", depth.shape[0])
            amount = column(values, f"{form.name}.initial_load", depth.shape[0])
            share = isochrone(place if closed else 2.0 * place, time_factor(degree)[:, None])
        else:
            amount = column(values, f"{form.name}.initial_excess", depth.shape[0])
            share = {
                "sine": np.sin((0.5 if closed else 1.0) * np.pi * place),
                "uniform": np.ones_like(place),
                "triangular": place,
            }[form.excess]
        excess[:, mine] = amount[:, None] * share
    return excess


def time_factor(degree: ArrayLike) -> FloatArray:
    r"""Return the time factor at which uniform excess pore pressure has dissipated to a degree.

    Parameters
    ----------
    degree : array_like, shape (...,), [-]
        Average degree of consolidation U, 0 to 1.

    Returns
    -------
    factor : ndarray, shape (...,), [-]
        :math:`T_v` with :math:`U(T_v) = U`; finite also at U = 1, where nothing noticeable is left.

    Raises
    ------
    ParameterError
        If a degree is below 0.

    Notes
    -----
    :math:`\pi U^2/4` below T = 0.05, where it is exact to rounding; beyond, Newton's method on the series
    :math:`U = 1 - \sum 2 M^{-2} e^{-M^2 T}`, :math:`M = (2m + 1)\pi/2` (Terzaghi, recalled, not opened).
    """
    wanted = np.minimum(checked("degree", degree, at_least=0.0), _MOST_DEGREE)
    early = 0.25 * np.pi * wanted * wanted
    late = np.maximum(early, -4.0 / np.pi**2 * np.log((1.0 - wanted) * np.pi**2 / 8.0))
    factor = np.where(wanted < 0.6, early, late)
    for _ in range(_ITERATIONS):
        decay = np.exp(-np.multiply.outer(np.maximum(factor, _EARLY_FACTOR), _MODE**2))
        left, rate = (2.0 / _MODE**2 * decay).sum(axis=-1), (2.0 * decay).sum(axis=-1)
        factor = factor + (left - (1.0 - wanted)) / rate
    return np.asarray(np.where(wanted < _EARLY_DEGREE, early, factor))


def isochrone(place: ArrayLike, factor: ArrayLike) -> FloatArray:
    r"""Return what is left of uniform excess pore pressure at a depth.

    Parameters
    ----------
    place : array_like, shape (...,), [-]
        Distance from the drained face over the drainage path, 0 to 2 (the path and its mirror image).
    factor : array_like, shape (...,), [-]
        Time factor, zero or more; broadcast against `place`.

    Returns
    -------
    share : ndarray, shape (...,), [-]
        Excess over its initial value.

    Raises
    ------
    ParameterError
        If an argument is out of range.

    Notes
    -----
    Terzaghi's :math:`\sum (2/M) \sin(M Z) e^{-M^2 T}`; below T = 0.05 the half-spaces on both sides,
    :math:`1 - \mathrm{erfc}[Z/(2\sqrt{T})] - \mathrm{erfc}[(2 - Z)/(2\sqrt{T})]` (recalled, not opened;
    tested against each other).
    """
    from scipy.special import erfc  # deferred: only where a layer is still consolidating

    z, t = np.broadcast_arrays(checked("place", place, at_least=0.0), checked("factor", factor, at_least=0.0))
    late = np.maximum(t, _EARLY_FACTOR)
    series = np.zeros(z.shape)
    for mode in _MODE:
        series += 2.0 / mode * np.sin(mode * z) * np.exp(-mode * mode * late)
    root = 2.0 * np.sqrt(np.maximum(t, 1e-30))
    early = 1.0 - erfc(z / root) - erfc((2.0 - z) / root)
    return np.asarray(np.clip(np.where(t < _EARLY_FACTOR, early, series), 0.0, 1.0))
