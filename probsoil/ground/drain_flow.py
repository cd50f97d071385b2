"""Flow to vertical drains in the cells of a site."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.amounts import beside_depths
from probsoil.ground.applied_load import LoadedGround
from probsoil.ground.conductivity import RadialDrainage
from probsoil.ground.constants import SECONDS_PER_YEAR, WATER_UNIT_WEIGHT
from probsoil.ground.profile import Values, column
from probsoil.ground.rows import chosen
from probsoil.ground.site_model import DrainForm, SiteModel
from probsoil.ground.vertical_drains import drain_factor, well_resistance


def radial_drainage(
    site: SiteModel, drains: DrainForm, values: Values, ground: LoadedGround
) -> RadialDrainage:
    """Return the sink that the drains make in every cell, by the share of the cell they reach.

    Parameters
    ----------
    site : SiteModel
        Layers and cells.
    drains : DrainForm
        The drains.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        The ground before loading.

    Returns
    -------
    drainage : RadialDrainage
        Its rate and when it begins.
    """
    found = drain_terms(site, drains, values, ground)
    factor = found.factor + found.resistance
    return RadialDrainage(
        rate=found.reached * 8.0 * found.ratio / (factor * beside_depths(drains.influence_diameter) ** 2),
        start=drains.installed,
    )


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class DrainTerms:
    """What makes up the sink to the drains in every cell.

    Attributes
    ----------
    ratio : ndarray, shape (n_sample, n_cell), [-]
        Horizontal over vertical permeability.
    factor : ndarray, shape (n_sample, 1), [-]
        mu of spacing and smear.
    resistance : ndarray, shape (n_sample, n_cell), [-]
        What the drain's own resistance adds to it; zero where it has none.
    permeability : ndarray, shape (n_sample, n_cell), [m/year]
        Horizontal permeability in situ.
    reached : ndarray, shape (n_sample, n_cell), [-]
        Share of the cell that drains reach.
    """

    ratio: FloatArray
    factor: FloatArray
    resistance: FloatArray
    permeability: FloatArray
    reached: FloatArray


def drain_terms(site: SiteModel, drains: DrainForm, values: Values, ground: LoadedGround) -> DrainTerms:
    """Return what makes up the sink to vertical drains.

    Parameters
    ----------
    site : SiteModel
        Layers and cells.
    drains : DrainForm
        The drains.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        The ground before loading.

    Returns
    -------
    terms : DrainTerms
        Factor mu, what well resistance adds, and the share of each cell that is reached.
    """
    layer, clay = site.cells.layer, ground.clay
    n_sample = ground.points.depth.shape[0]
    depth, thickness = chosen(ground.points.depth, clay), chosen(ground.points.thickness, clay)
    ratios = [
        column(values, f"{form.name}.kh_kv", n_sample) if form.is_clay else np.ones(n_sample)
        for form in site.layers
    ]
    ratio = chosen(np.stack(ratios, axis=1), layer)
    smear = column(values, "drains.smear_kh_ks", n_sample)[:, None]
    permeability = ratio * _initial_permeability(site, values, ground)
    resistance, bottom = np.zeros_like(depth), beside_depths(drains.bottom)
    spacing_ratio = beside_depths(drains.influence_diameter / drains.diameter)
    if drains.discharge_capacity is not None:
        capacity = beside_depths(drains.discharge_capacity)
        resistance = well_resistance(depth, bottom, permeability, capacity)
    return DrainTerms(
        ratio=ratio,
        factor=drain_factor(spacing_ratio, beside_depths(drains.smear_ratio), smear),
        resistance=resistance,
        permeability=permeability,
        reached=np.clip((bottom - depth) / thickness + 0.5, 0.0, 1.0),
    )


def _initial_permeability(site: SiteModel, values: Values, ground: LoadedGround) -> FloatArray:
    """Return the vertical permeability in situ, shape (n_sample, n_cell), [m/year]."""
    layer, columns = site.cells.layer, ground.columns
    lam, void_ratio = chosen(columns.lam, layer), chosen(columns.void_ratio, layer)
    yield_stress = chosen(ground.yield_stress, ground.clay)
    permeability = np.empty_like(lam)
    for index, form in enumerate(site.layers):
        if form.is_clay:
            mine = layer == index
            given = column(values, f"{form.name}.{form.flow}", lam.shape[0])[:, None]
            if form.flow == "k":
                permeability[:, mine] = given * SECONDS_PER_YEAR
            else:
                compressibility = lam[:, mine] / (1.0 + void_ratio[:, mine])
                permeability[:, mine] = given * WATER_UNIT_WEIGHT * compressibility / yield_stress[:, mine]
    return permeability
