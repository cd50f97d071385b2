"""Tests at points of a layer beside the average over it: how far the one tells of the other.

In units of each parameter's normal score, a parameter at a point is a shared part (what is not known of the
layer's mean) and local parts, which vary from point to point; the average over the layer at a station is
made of the same shared part and the averages of the local ones.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from probsoil._typing import FloatArray
from probsoil.parameters.local_parts import LocalParts, Position
from probsoil.scenario.spatial_averaging import point_weight

Spot = Position | str
"""Where in plan: coordinates [m], or the name of a hole whose coordinates are not known."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Field:
    """How one local part varies within its layer.

    Attributes
    ----------
    layer : str
        Name of the layer.
    ratio : float, [-]
        Variance function of the layer.
    vertical_scale, horizontal_scale : float or None, [m]
        Scales of fluctuation; None where not given.
    length : float or None, [m]
        Thickness averaged over; None for none.
    group : int, [-]
        0 where the variability is known; from 1 the unknown one that it belongs to.
    """

    layer: str
    ratio: float
    vertical_scale: float | None
    horizontal_scale: float | None
    length: float | None
    group: int = 0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PlacesOfTests:
    """Where tests were made.

    Attributes
    ----------
    layer : tuple of str
        Layer of each.
    depth : ndarray, shape (n_test,), [m]
        Depth below the top of its layer.
    spot : tuple of (float, float) or str
        Where in plan.
    """

    layer: tuple[str, ...]
    depth: FloatArray
    spot: tuple[Spot, ...]


def spots(places: Sequence[Position | None], holes: Sequence[str]) -> tuple[Spot, ...]:
    """Where tests were made in plan.

    Parameters
    ----------
    places : sequence of (float, float) or None, [m]
        Plan position of each test where it is given.
    holes : sequence of str
        Hole of each; empty where not named.

    Returns
    -------
    spot : tuple of (float, float) or str
        The position; without one that of another test in the same hole; else the hole, those without a name
        counting as one.
    """
    known: dict[str, Position] = {}
    for place, hole in zip(places, holes, strict=True):
        if place is not None and hole:
            known.setdefault(hole, place)
    return tuple(
        place if place is not None else known.get(hole, hole)
        for place, hole in zip(places, holes, strict=True)
    )


def plan_correlation(first: Sequence[Spot], second: Sequence[Spot], scale: float | None) -> FloatArray:
    r"""Correlation in plan of what varies from point to point.

    Parameters
    ----------
    first, second : sequence of (float, float) or str, [m]
        Plan positions or holes.
    scale : float or None, [m]
        Horizontal scale of fluctuation; None where it is not known.

    Returns
    -------
    correlation : ndarray, shape (n_first, n_second), [-]
        :math:`\exp(-2 d / \delta_h)` between positions; without a position or a scale one in the same hole or
        spot and zero otherwise, which lets a test tell least of the ground elsewhere.
    """
    places = list(dict.fromkeys([*first, *second]))
    whole = np.eye(len(places))
    for i, one in enumerate(places):
        for j, other in enumerate(places[:i]):
            if not (isinstance(one, str) or isinstance(other, str) or scale is None):
                apart = np.hypot(one[0] - other[0], one[1] - other[1])
                whole[i, j] = whole[j, i] = np.exp(-2.0 * apart / scale)
    number = {one: index for index, one in enumerate(places)}
    rows, columns = ([number[one] for one in listed] for listed in (first, second))
    return whole[np.ix_(rows, columns)]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PointVariability:
    """Local parts at the points of tests and their averages at stations.

    Attributes
    ----------
    split : LocalParts
        Shared and local parts.
    fields : tuple of Field
        How each local part varies, in the same order.
    positions : tuple of (float, float), [m]
        Plan positions of the stations, at least one.
    tests : PlacesOfTests
        Where the tests were made.
    """

    split: LocalParts
    fields: tuple[Field, ...]
    positions: tuple[Position, ...]
    tests: PlacesOfTests

    @property
    def dimension(self) -> int:
        """Number of latent normals, shared and local [-]."""
        return len(self.split.shared_weight) + sum(len(part.latent) for part in self.split.parts)

    @property
    def groups(self) -> int:
        """Number of unknown variabilities [-]."""
        return max((one.group for one in self.fields), default=0)

    def own(self, part: int) -> FloatArray:
        """Which tests lie in the layer of a local part, 0 or 1, shape (n_test,), [-]."""
        layer = self.fields[part].layer
        return np.array([float(one == layer) for one in self.tests.layer])

    def slope(self, part: int) -> FloatArray:
        """Covariance of a local part at each test with its average there, shape (n_test,), [-].

        The average has variance one. A test in another layer stands for the average.
        """
        field, own = self.fields[part], self.own(part)
        if field.length is None or field.vertical_scale is None:
            return np.ones_like(own)
        weight = point_weight(self.tests.depth, scale=field.vertical_scale, length=field.length)
        return np.where(own > 0.0, weight / field.ratio, 1.0)

    def across_plan(
        self, parts: tuple[int, int], first: Sequence[Spot], second: Sequence[Spot]
    ) -> FloatArray:
        """Correlation in plan between the averages of two local parts, (n_first, n_second), [-].

        Parts with different horizontal scales keep step at the first station only.
        """
        scales = [self.fields[part].horizontal_scale for part in parts]
        if parts[0] == parts[1] or scales[0] == scales[1]:
            return plan_correlation(first, second, scales[0])
        centre = self.positions[:1]
        before = plan_correlation(first, centre, scales[0])
        return before * plan_correlation(second, centre, scales[1]).T

    def between_tests(self, first: int, second: int) -> FloatArray:
        """Correlation of two local parts between tests, but for that of the parts, (n_test, n_test), [-].

        In units of the variance of the averages. Within a layer and with the same scales it falls off with
        depth and distance; otherwise only the averages of the parts keep step.
        """
        plan = self.across_plan((first, second), self.tests.spot, self.tests.spot)
        averages = np.outer(self.slope(first), self.slope(second)) * plan
        one, other = self.fields[first], self.fields[second]
        if (
            (one.layer, one.vertical_scale, one.horizontal_scale)
            != (
                other.layer,
                other.vertical_scale,
                other.horizontal_scale,
            )
            or one.length is None
            or one.vertical_scale is None
        ):
            return averages
        apart = np.abs(self.tests.depth[:, np.newaxis] - self.tests.depth)
        both = np.outer(self.own(first), self.own(second)) > 0.0
        return np.where(both, np.exp(-2.0 * apart / one.vertical_scale) / one.ratio * plan, averages)

    def at_one_test(self, first: int, second: int, number: int) -> float:
        """Covariance of two local parts at the point of a test, but for the parts' correlation, [-]."""
        tests = self.tests
        alone = PlacesOfTests(
            layer=tests.layer[number : number + 1],
            depth=tests.depth[number : number + 1],
            spot=tests.spot[number : number + 1],
        )
        return float(replace(self, tests=alone).between_tests(first, second)[0, 0])

    def with_station(self, part: int, other: int, station: int) -> FloatArray:
        """Covariance of a local part at each test with the average of another at a station, (n_test,), [-].

        But for the correlation of the parts.
        """
        place = self.positions[station : station + 1]
        return self.slope(part) * self.across_plan((part, other), self.tests.spot, place)[:, 0]

    def data_blocks(self, rows: FloatArray) -> FloatArray:
        """Covariance of what tests observe that local parts make, by unknown variability.

        Parameters
        ----------
        rows : ndarray, shape (n_test, n_parameter), [-]
            Weights of the parameters' scores in each observation.

        Returns
        -------
        blocks : ndarray, shape (n_group + 1, n_group + 1, n_test, n_test), [-]
            Entry (g, h) grows with the product of the variabilities g and h.
        """
        count, size = self.groups + 1, len(rows)
        blocks = np.zeros((count, count, size, size))
        weights = rows @ self.split.local_weight
        between = self.split.local_correlation
        for j, k in zip(*np.nonzero(between), strict=True):
            if weights[:, j].any() and weights[:, k].any():
                part = between[j, k] * np.outer(weights[:, j], weights[:, k]) * self.between_tests(j, k)
                blocks[self.fields[j].group, self.fields[k].group] += part
        return blocks

    def latent_blocks(self, rows: FloatArray) -> FloatArray:
        """Covariance of the latent normals with what tests observe, by unknown variability.

        Parameters
        ----------
        rows : ndarray, shape (n_test, n_parameter), [-]
            Weights of the parameters' scores in each observation.

        Returns
        -------
        blocks : ndarray, shape (n_group + 1, d, n_test), [-]
            The first holds the shared parts; others grow with their variability.
        """
        split, shared = self.split, len(self.split.shared_weight)
        blocks = np.zeros((self.groups + 1, self.dimension, len(rows)))
        blocks[0, :shared] = split.shared_correlation @ (rows * split.shared_weight).T
        weights = rows @ split.local_weight
        for j, k in zip(*np.nonzero(split.local_correlation), strict=True):
            part = split.parts[j]
            if not weights[:, k].any():
                continue
            at_stations = np.stack(
                [weights[:, k] * self.with_station(k, j, t) for t in range(len(self.positions))]
            )
            blocks[self.fields[k].group, part.latent] += split.local_correlation[j, k] * np.linalg.solve(
                part.mixing, at_stations
            )
        return blocks

    def station_matrix(self, station: int, scale: FloatArray) -> FloatArray:
        """Weights of the latent normals in the scores of all parameters at a station.

        Parameters
        ----------
        station : int, [-]
            Place of the station.
        scale : sequence of float, shape (n_part,), [-]
            Factor on each local part.

        Returns
        -------
        weights : ndarray, shape (n_parameter, d), [-]
            Scores are these times the latent normals.
        """
        split, shared = self.split, len(self.split.shared_weight)
        weights = np.zeros((shared, self.dimension))
        weights[:, :shared] = np.diag(split.shared_weight)
        for j, part in enumerate(split.parts):
            weights[:, part.latent] += scale[j] * np.outer(split.local_weight[:, j], part.mixing[station])
        return weights
