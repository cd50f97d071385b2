"""From the laws of a scenario and its tests to parameters after the tests."""

from collections.abc import Sequence

import numpy as np

from probsoil._typing import FloatArray
from probsoil.parameters.laws import LognormalLaw
from probsoil.parameters.local_parts import LocalParts, Position
from probsoil.parameters.marginals import Marginal, UncertainQuantity
from probsoil.parameters.observations import Observation, PointLaw
from probsoil.parameters.point_variability import Field, PlacesOfTests, PointVariability, spots
from probsoil.parameters.station_parts import parts_at_stations
from probsoil.parameters.updated import Updated
from probsoil.parameters.updating import UnknownVariability, update
from probsoil.scenario.distributions import Distribution, Lognormal, Normal
from probsoil.scenario.inherent_range import log_sd_law
from probsoil.scenario.spatial_averaging import inherent_variance, variance_function

AT_CENTRE: Position = (0.0, 0.0)


def tested(
    uncertain: Sequence[UncertainQuantity],
    marginals: Sequence[Marginal],
    at_station: FloatArray,
    *,
    local: LocalParts | None,
    positions: Sequence[Position],
    observations: Sequence[Observation],
) -> Updated | None:
    """Parameters after tests.

    Parameters
    ----------
    uncertain : sequence of UncertainQuantity
        Uncertain parameters.
    marginals : sequence of Marginal
        Law of each.
    at_station : ndarray, shape (n, n), [-]
        Correlation of their normal scores.
    local : LocalParts or None
        What varies between stations, where there are several.
    positions : sequence of (float, float), [m]
        Plan positions of the stations.
    observations : sequence of Observation
        The tests.

    Returns
    -------
    updated : Updated or None
        None where there is neither a test nor a variability from point to point given as a range.

    Raises
    ------
    ParameterError
        If more variabilities are unknown than can be told apart, or an observation makes no sense.
    DependenceError
        If the correlations cannot hold at every place where there are tests.
    """
    unknown = [
        _unknown(place, one)
        for place, one in enumerate(uncertain)
        if isinstance(one.distribution, Lognormal) and one.distribution.inherent_range is not None
    ]
    if not observations and not unknown:
        return None
    places = tuple(positions) if positions else (AT_CENTRE,)
    split = local
    if split is None:
        split = parts_at_stations(uncertain, at_station, places[:1]) or _all_shared(at_station)
        places = places[:1]
    groups = {one.parameter: number for number, one in enumerate(unknown, start=1)}
    variability = PointVariability(
        split=split,
        fields=tuple(
            _field(uncertain[part.parameter], groups.get(part.parameter, 0)) for part in split.parts
        ),
        positions=places,
        tests=PlacesOfTests(
            layer=tuple(one.layer for one in observations),
            depth=np.array([one.below_top for one in observations], dtype=np.float64),
            spot=spots([one.place for one in observations], [one.hole for one in observations]),
        ),
    )
    laws = [_point_law(quantity, law) for quantity, law in zip(uncertain, marginals, strict=True)]
    return update(variability, laws, unknown, observations, [one.address for one in uncertain])


def _all_shared(correlation: FloatArray) -> LocalParts:
    count = len(correlation)
    return LocalParts(
        parts=(),
        shared_weight=np.ones(count),
        local_weight=np.zeros((count, 0)),
        shared_correlation=correlation,
        local_correlation=np.zeros((0, 0)),
    )


def _ratio(law: Distribution, length: float | None) -> float:
    """Variance function of a layer."""
    scale = getattr(law, "vertical_scale", None)
    return 1.0 if scale is None or length is None else float(variance_function(length / scale))


def _field(quantity: UncertainQuantity, group: int) -> Field:
    law = quantity.distribution
    return Field(
        layer=quantity.address.rpartition(".")[0],
        ratio=_ratio(law, quantity.averaging_length),
        vertical_scale=getattr(law, "vertical_scale", None),
        horizontal_scale=getattr(law, "horizontal_scale", None),
        length=quantity.averaging_length,
        group=group,
    )


def _point_law(quantity: UncertainQuantity, marginal: Marginal) -> PointLaw:
    law, length = quantity.distribution, quantity.averaging_length
    if not isinstance(law, Normal | Lognormal) or law.inherent_cov == 0.0:
        return PointLaw(marginal=marginal)
    extra = inherent_variance(law, length)
    ratio = _ratio(law, length)
    if isinstance(law, Normal):
        whole = law.sd**2 + extra
        spread = float(np.sqrt((law.sd**2 + extra / ratio) / whole))
        # the law of a harmonic average is that of the arithmetic one times a factor
        scale = float(getattr(marginal.law, "mean", law.mean)) / law.mean if law.mean else 1.0
        return PointLaw(marginal=marginal, spread=spread, scale=scale)
    whole, point = law.log_sd**2 + extra, extra / ratio
    centre = np.log(law.median) - 0.5 * point
    assert isinstance(marginal.law, LognormalLaw)
    shift = float(centre - np.log(marginal.law.median)) / float(np.sqrt(whole))
    return PointLaw(marginal=marginal, spread=float(np.sqrt((law.log_sd**2 + point) / whole)), centre=shift)


def _unknown(place: int, quantity: UncertainQuantity) -> UnknownVariability:
    law = quantity.distribution
    assert isinstance(law, Lognormal)
    median, log_sd = log_sd_law(*(law.inherent_range or (law.inherent_cov, law.inherent_cov)))
    extra = inherent_variance(law, quantity.averaging_length)
    return UnknownVariability(
        parameter=place,
        reference=float(np.sqrt(np.log1p(law.inherent_cov**2))),
        median=median,
        log_sd=log_sd,
        spread=float(np.sqrt(law.log_sd**2 + extra)),
        ratio=_ratio(law, quantity.averaging_length),
        in_series=quantity.in_series,
    )
