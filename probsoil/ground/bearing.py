"""Safety of a foundation against undrained bearing failure, with the strength that the clay has then."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.ground.applied_load import LoadedGround, fill_weight
from probsoil.ground.bearing_capacity import (
    STRIP_FACTOR,
    circle_shape_factor,
    depth_factor,
    growth_ratio,
    rectangle_shape_factor,
    strip_capacity,
)
from probsoil.ground.excavation import pressure_on_base
from probsoil.ground.foundation import Foundation
from probsoil.ground.profile import Values
from probsoil.ground.site_model import SiteModel

_EDGE = 1  # zone of strength below the edge


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class BearingLevel:
    """A level at which bearing is looked at: the base, or the top of a clay layer below it.

    Attributes
    ----------
    layer : int, [-]
        Clay layer below the level.
    depth : ndarray, shape (n_sample,), [m]
        Depth of the level below ground level.
    width : ndarray, shape (n_sample,), [m]
        Width of the foundation there, spread at 2 vertical to 1 horizontal.
    share : ndarray, shape (n_sample,), [-]
        Its pressure over that at the base.
    below : ndarray, shape (n_sample, n_point), [m]
        Depth of each clay point below the level, negative above it.
    weight : ndarray, shape (n_sample, n_point), [m]
        Thickness of each clay point within one width below the level; zero elsewhere.
    exists : ndarray of bool, shape (n_sample,), [-]
        Whether any of that clay lies below the base.
    """

    layer: int
    depth: FloatArray
    width: FloatArray
    share: FloatArray
    below: FloatArray
    weight: FloatArray
    exists: BoolArray


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class LevelCapacity:
    """Bearing capacity at one level and time, and what it comes from.

    Attributes
    ----------
    strength : ndarray, shape (n_sample,), [kPa]
        Strength at the level, of the line through the profile.
    growth : ndarray, shape (n_sample,), [kPa/m]
        Its growth with depth.
    least : ndarray, shape (n_sample,), [kPa]
        Least strength of the clay within one width below the level.
    strip : ndarray, shape (n_sample,), [kPa]
        Capacity of a strip at the surface.
    shape_factor, depth_factor : ndarray, shape (n_sample,), [-]
        Factors on it.
    capacity : ndarray, shape (n_sample,), [kPa]
        Net bearing capacity.
    pressure : ndarray, shape (n_sample,), [kPa]
        Net pressure at the level.
    safety : ndarray, shape (n_sample,), [-]
        Capacity over pressure; infinite where the level does not exist.
    """

    strength: FloatArray
    growth: FloatArray
    least: FloatArray
    strip: FloatArray
    shape_factor: FloatArray
    depth_factor: FloatArray
    capacity: FloatArray
    pressure: FloatArray
    safety: FloatArray


def bearing_levels(site: SiteModel, shape: Foundation, ground: LoadedGround) -> tuple[BearingLevel, ...]:
    """Return the levels at which bearing is looked at.

    Parameters
    ----------
    site : SiteModel
        Layers.
    shape : Foundation
        Plan and depth.
    ground : LoadedGround
        Points and layer boundaries.

    Returns
    -------
    levels : tuple of BearingLevel
        One for each clay layer.

    Notes
    -----
    Clay that lies wholly above the base is passed over. Below a stronger layer, clay or granular,
    the foundation is taken to press on the top of the next clay with its load spread at 2 vertical
    to 1 horizontal (common practice): the check against punching through.
    """
    clay, points = ground.clay, ground.points
    top = points.depth[:, clay] - 0.5 * points.thickness[:, clay]
    bottom = points.depth[:, clay] + 0.5 * points.thickness[:, clay]
    levels = []
    for index, layer in enumerate(site.layers):
        if not layer.is_clay:
            continue
        depth = np.maximum(points.boundary[:, index], shape.depth)
        width, share = shape.spread_area(depth - shape.depth)
        upper = np.maximum(top, depth[:, None])
        lower = np.minimum(bottom, (depth + width)[:, None])
        levels.append(
            BearingLevel(
                layer=index,
                depth=depth,
                width=width,
                share=share,
                below=points.depth[:, clay] - depth[:, None],
                weight=np.maximum(lower - upper, 0.0),
                exists=points.boundary[:, index + 1] > depth,
            )
        )
    return tuple(levels)


def line_of_strength(
    strength: FloatArray, below: FloatArray, weight: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return the straight line that stands for a strength profile, and the least strength in it.

    Parameters
    ----------
    strength : ndarray, shape (n_sample, n_point), [kPa]
        Undrained strength.
    below : ndarray, shape (n_sample, n_point), [m]
        Depth below the level.
    weight : ndarray, shape (n_sample, n_point), [m]
        Thickness that each point stands for; zero to leave it out.

    Returns
    -------
    at_level : ndarray, shape (n_sample,), [kPa]
        Strength at the level, zero or more.
    growth : ndarray, shape (n_sample,), [kPa/m]
        Growth with depth, zero or more.
    least : ndarray, shape (n_sample,), [kPa]
        Least strength of the points.

    Notes
    -----
    Least squares, weighted by thickness. Where the line would fall with depth (a crust) the weighted
    mean takes its place; where it would start below zero, the best line from zero does.
    """
    # sums run along each row in one order, so that no realisation depends on its company
    strength, below, weight = (np.ascontiguousarray(one) for one in (strength, below, weight))
    total = np.where(weight.any(axis=1), weight.sum(axis=1), 1.0)
    mean_depth = (weight * below).sum(axis=1) / total
    mean = (weight * strength).sum(axis=1) / total
    apart = weight * (below - mean_depth[:, None])
    spread = (apart * below).sum(axis=1)
    slope = (apart * strength).sum(axis=1) / np.where(spread > 0.0, spread, 1.0)
    growth = np.maximum(slope, 0.0)
    at_level = mean - growth * mean_depth
    squares = (weight * below * below).sum(axis=1)
    from_zero = (weight * below * strength).sum(axis=1) / np.where(squares > 0.0, squares, 1.0)
    growth = np.where(at_level < 0.0, from_zero, growth)
    least = np.where(weight > 0.0, strength, np.inf).min(axis=1)
    return np.maximum(at_level, 0.0), growth, np.where(np.isfinite(least), least, 0.0)


def level_capacity(
    shape: Foundation, level: BearingLevel, strength: FloatArray, pressure: FloatArray
) -> LevelCapacity:
    """Return the bearing capacity at one level.

    Parameters
    ----------
    shape : Foundation
        Plan and depth.
    level : BearingLevel
        Where.
    strength : ndarray, shape (n_sample, n_point), [kPa]
        Undrained strength of the clay points.
    pressure : ndarray, shape (n_sample,), [kPa]
        Net pressure at the base; where it is not above zero nothing can fail.

    Returns
    -------
    found : LevelCapacity
        Capacity and safety.

    Notes
    -----
    Davis and Booker on the line of strength, but never less than a strip on clay of the least
    strength within one width (a lower bound), times the factors of shape and depth. The depth is
    that of the foundation also for deeper levels, and its width the spread one: on the safe side.
    """
    c0, growth, least = line_of_strength(strength, level.below, level.weight)
    on_line = strip_capacity(c0, growth, level.width, shape.contact)
    strip = np.maximum(on_line, STRIP_FACTOR * least)
    ratio = growth_ratio(c0, growth * level.width)
    if shape.shape == "circle":
        shape_factor = circle_shape_factor(ratio, shape.contact)
    else:
        across = level.width / (level.width - shape.width + shape.length)
        shape_factor = rectangle_shape_factor(ratio, across, shape.contact)
    deep = depth_factor(shape.depth, level.width)
    capacity, there = strip * shape_factor * deep, pressure * level.share
    pressed = pressure > 0.0
    return LevelCapacity(
        strength=c0,
        growth=growth,
        least=least,
        strip=strip,
        shape_factor=shape_factor,
        depth_factor=deep,
        capacity=capacity,
        pressure=there,
        safety=np.where(level.exists & pressed, capacity / np.where(pressed, there, 1.0), np.inf),
    )


def net_pressure(site: SiteModel, values: Values, n_sample: int, time: float) -> FloatArray:
    """Return the net pressure of a foundation at a time.

    Parameters
    ----------
    site : SiteModel
        Stages.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    n_sample : int, [-]
        Number of realisations.
    time : float, [years]
        Time.

    Returns
    -------
    pressure : ndarray, shape (n_sample,), [kPa]
        Fill height times unit weight, and pressure; where soil is dug out for it, less that soil and the
        water under the base.
    """
    placed = np.asarray(fill_weight(values, n_sample) * site.fill_height(time) + site.pressure(time))
    return pressure_on_base(site, values, placed, time)


def capacities_at(
    site: SiteModel, values: Values, ground: LoadedGround, strength: FloatArray, time: float
) -> tuple[tuple[BearingLevel, LevelCapacity], ...]:
    """Return the bearing capacity at every level at one time.

    Parameters
    ----------
    site : SiteModel
        Foundation, stages and recorded times.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        Points and layer boundaries.
    strength : ndarray, shape (n_record, n_sample, 3, n_point), [kPa]
        Undrained strength at the recorded times, mode factor included.
    time : float, [years]
        One of `bearing_times`.

    Returns
    -------
    found : tuple of (BearingLevel, LevelCapacity)
        One pair for each clay layer; empty without a foundation.

    Notes
    -----
    The strength is that below the edge, between the full gain below the middle and none beside the
    foundation, as the surfaces of failure run from the one to the other.
    """
    if site.foundation is None:
        return ()
    here = strength[int(np.searchsorted(site.record, time)), :, _EDGE][:, ground.clay]
    pressure = net_pressure(site, values, here.shape[0], time)
    levels = bearing_levels(site, site.foundation, ground)
    return tuple((level, level_capacity(site.foundation, level, here, pressure)) for level in levels)


def bearing_at_checks(
    site: SiteModel, values: Values, ground: LoadedGround, strength: FloatArray
) -> FloatArray:
    """Return the least factor of safety against bearing failure at every time it is looked at.

    Parameters
    ----------
    site : SiteModel
        Foundation, stages and times.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        Points and layer boundaries.
    strength : ndarray, shape (n_record, n_sample, 3, n_point), [kPa]
        Undrained strength at the recorded times, mode factor included.

    Returns
    -------
    factor : ndarray, shape (n_sample, n_bearing), [-]
        Least over the levels; infinite where no clay lies below the base.
    """
    factor = np.empty((ground.points.depth.shape[0], site.bearing_times.size))
    for check, time in enumerate(site.bearing_times):
        found = capacities_at(site, values, ground, strength, float(time))
        factor[:, check] = np.min([capacity.safety for _, capacity in found], axis=0)
    return factor
