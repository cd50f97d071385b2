"""Safety against a slip where the section of the fill is uncertain."""

from collections.abc import Iterator, Sequence

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.embankment import Embankment
from probsoil.ground.site_layout import circle_depth
from probsoil.ground.site_model import SiteModel
from probsoil.ground.slip import FillStrength, GroundStrength, chosen_circles, chosen_in_fill
from probsoil.ground.slip_circles import CircleLayout
from probsoil.ground.slip_moving import (
    MovingFamily,
    moving_family,
    moving_safety,
    serving,
    with_section,
)

Section = tuple[GroundStrength, FillStrength]

_LOW = 1e-9  # m; what is lower is no fill
_SIZES = ("height", "side_slope")
_ENDS = (0.05, 0.95)  # of each of these: sections besides the mean one on which circles are chosen
_AT_ENDS, _WEIGHED = 128, 256  # realisations looked at there, and on their own sections


def slip_on_sections(
    site: SiteModel, sections: Iterator[Section], n_sample: int
) -> tuple[FloatArray, FloatArray]:
    """Return the least factor of safety at every time at which slip is looked at.

    Parameters
    ----------
    site : SiteModel
        With what is built in every realisation; where it holds no circles, all are laid out afresh.
    sections : iterator of (GroundStrength, FillStrength)
        At those times.
    n_sample : int, [-]
        Number of realisations.

    Returns
    -------
    factor : ndarray, shape (n_sample, n_check), [-]
        Least factor of safety; infinite where no fill is left.
    position : ndarray, shape (n_sample, n_check, 6), [m]
        Where the critical circle lies, as in `slip_moving.POSITION`.
    """
    n_check = site.slip_times.size
    factor, position = np.empty((n_sample, n_check)), np.empty((n_sample, n_check, 6))
    for check, (here, fill) in enumerate(sections):
        family = site.moving[check] if site.moving else None
        layouts = layouts_of(site, check, n_sample)
        factor[:, check], position[:, check] = moving_safety(here, fill, family, layouts)
    return factor, position


def layouts_of(site: SiteModel, check: int, n_sample: int) -> list[CircleLayout | None]:
    """Return the layout of circles on the section of every realisation.

    Parameters
    ----------
    site : SiteModel
        With what is built in every realisation.
    check : int, [-]
        Which of the times at which slip is looked at.
    n_sample : int, [-]
        Number of realisations.

    Returns
    -------
    layouts : list of CircleLayout or None
        None where no fill is left.
    """
    shape, time = site.embankment, float(site.slip_times[check])
    if shape is None:
        return [None] * n_sample
    height = np.broadcast_to(site.fill_height(time), (n_sample,))
    return [
        _layout(site, check, shape.alone(place), float(height[place])) if height[place] > _LOW else None
        for place in range(n_sample)
    ]


def _layout(site: SiteModel, check: int, shape: Embankment, height: float) -> CircleLayout:
    return with_section(site.layouts[check], shape.section(height), circle_depth(shape, site.layers))


def families_on_sections(
    site: SiteModel, sections: Iterator[Section], n_sample: int, *, within: float
) -> tuple[MovingFamily, ...]:
    """Return circles that come near to being critical, as ones that move with the section.

    Parameters
    ----------
    site : SiteModel
        With what is built in every realisation.
    sections : iterator of (GroundStrength, FillStrength)
        At the times at which slip is looked at.
    n_sample : int, [-]
        Number of realisations.
    within : float, [-]
        How far above the least factor a circle may be, as a share of it; with 0 circles are chosen on the
        section of every realisation, for it alone.

    Returns
    -------
    families : tuple of MovingFamily
        One for each of those times.

    Notes
    -----
    Circles are chosen on the mean section, with the ground and the weights of all realisations, and on
    those of realisations near either end of the heights, slopes and widths; where in some realisations the
    fill reaches above its berms and in others not, on a section of either kind. Of all these, moved to the
    section of each realisation, those are kept that serve. What that loses is part of the discretisation
    error that a campaign reports.
    """
    families = []
    for check, (here, fill) in enumerate(sections):
        layouts = layouts_of(site, check, n_sample)
        if within > 0.0:
            cases = list(_typical(site, check, layouts))
        else:
            each = [(layout, slice(place, place + 1)) for place, layout in enumerate(layouts)]
            cases = [(layout, place) for layout, place in each if layout is not None]
            cases = cases or [(site.layouts[check], slice(0, 1))]
        chosen = [
            (layout, chosen_circles(here[some], fill[some], layout, within=within)) for layout, some in cases
        ]
        if within > 0.0:  # on another section it may be the fill that slips
            chosen += [
                (layout, chosen_in_fill(here[some], fill[some], layout, within=within))
                for layout, some in cases
            ]
        family = moving_family(chosen)
        if within > 0.0:
            some = slice(0, _WEIGHED)
            parts = (here[some], fill[some], family, layouts[some], site.layouts[check])
            family = serving(*parts, within=within)
        families.append(family)
    return tuple(families)


def _typical(
    site: SiteModel, check: int, layouts: Sequence[CircleLayout | None]
) -> Iterator[tuple[CircleLayout, slice]]:
    """Yield sections to choose circles on, and the realisations to look at there."""
    mean = site.layouts[check]
    yield mean, slice(None)
    there = [layout for layout in layouts if layout is not None]
    if not there:
        return
    for name in _SIZES:
        there.sort(key=lambda layout: getattr(layout.section, name))
        low, high = (there[round(end * (len(there) - 1))] for end in _ENDS)
        if getattr(high.section, name) - getattr(low.section, name) > _LOW:
            yield from ((layout, slice(0, _AT_ENDS)) for layout in (low, high))
    others = [one for one in there if one.section.above_berms != mean.section.above_berms]
    if others:
        yield others[len(others) // 2], slice(0, _AT_ENDS)
