"""What is built in every realisation, where heights, widths, spacings and the like are uncertain."""

from dataclasses import replace

import numpy as np

from probsoil._typing import BoolArray
from probsoil.ground.amounts import Reading, drawn_from, single
from probsoil.ground.foundation import foundation_of
from probsoil.ground.profile import Values
from probsoil.ground.site_forms import drain_form, height_at, stage_forms, takes_too_much
from probsoil.ground.site_layout import circle_depth, embankment_of, further_load_forms
from probsoil.ground.site_model import SiteModel


def built(site: SiteModel, values: Values, n_sample: int) -> SiteModel:
    """Return a site with what is built in every realisation.

    Parameters
    ----------
    site : SiteModel
        As laid out, at the means.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    n_sample : int, [-]
        Number of realisations.

    Returns
    -------
    site : SiteModel
        The same where nothing of the works is uncertain; else heights, widths and so on are arrays of one
        number for each realisation. Cells, times and slip circles stay as laid out.
    """
    return site if site.works is None else _built(site, drawn_from(values, n_sample))


def built_once(site: SiteModel, values: Values) -> SiteModel:
    """Return a site with what is built in one realisation, as if it had been given in plain numbers.

    Parameters
    ----------
    site : SiteModel
        As laid out, at the means.
    values : mapping of str to ndarray, shape (1,), or float
        Value of every quantity by its address.

    Returns
    -------
    site : SiteModel
        With slip circles laid out for its own section; cells and times stay as they are.
    """
    if site.works is None:
        return site
    found = replace(_built(site, single(values)), works=None)
    shape = found.embankment
    if shape is None:
        return found
    depth = circle_depth(shape, site.layers)
    layouts = tuple(
        replace(layout, section=shape.section(height_at(found.stages, float(time))), depth=depth)
        for time, layout in zip(site.slip_times, site.layouts, strict=True)
    )
    return replace(found, layouts=layouts)


def overdrawn(site: SiteModel, values: Values, n_sample: int) -> BoolArray:
    """Return in which realisations a stage was to take off more than is there, and took what was.

    Parameters
    ----------
    site : SiteModel
        As laid out.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    n_sample : int, [-]
        Number of realisations.

    Returns
    -------
    overdrawn : ndarray of bool, shape (n_sample,), [-]
        In none where nothing of the works is uncertain.
    """
    if site.works is None:
        return np.zeros(n_sample, dtype=np.bool_)
    return takes_too_much(site.works, drawn_from(values, n_sample), n_sample)


def _built(site: SiteModel, read: Reading) -> SiteModel:
    scenario = site.works
    if scenario is None:
        return site
    stages = stage_forms(scenario, read)
    return replace(
        site,
        stages=stages,
        embankment=embankment_of(scenario, stages, read),
        foundation=foundation_of(scenario.load, read),
        drains=drain_form(scenario, read),
        further_loads=further_load_forms(scenario, stages, read),
    )
