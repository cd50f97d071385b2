"""What of the parameters of a scenario varies from place to place."""

from collections.abc import Sequence

import numpy as np

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError
from probsoil.parameters.local_parts import LocalPart, LocalParts, Position, local_parts, mixing_matrix
from probsoil.parameters.marginals import UncertainQuantity
from probsoil.scenario.base import RESERVED_NAMES
from probsoil.scenario.distributions import Lognormal, Normal
from probsoil.scenario.spatial_averaging import local_share


def parts_at_stations(
    uncertain: Sequence[UncertainQuantity], at_station: FloatArray, positions: Sequence[Position]
) -> LocalParts | None:
    """Return what varies between stations, with its latent normals behind those of the parameters.

    Parameters
    ----------
    uncertain : sequence of UncertainQuantity
        Uncertain parameters.
    at_station : ndarray, shape (n, n), [-]
        Correlation of their normal scores at any one station.
    positions : sequence of (float, float), [m]
        Plan positions of the stations, at least one.

    Returns
    -------
    parts : LocalParts or None
        None where nothing varies.

    Raises
    ------
    ParameterError
        If there are several stations and variability from point to point has no horizontal scale.
    DependenceError
        If the correlations cannot hold at every station.
    """
    parts: list[LocalPart] = []
    count = len(positions)
    for place, quantity in enumerate(uncertain):
        law = quantity.distribution
        share = local_share(law, quantity.averaging_length)
        if share == 0.0 or not isinstance(law, Normal | Lognormal):
            continue
        first = len(uncertain) + count * len(parts)
        parts.append(
            LocalPart(
                parameter=place,
                share=share,
                latent=np.arange(first, first + count),
                mixing=_mixing(quantity, law, positions),
            )
        )
    tables = tuple(f"{name}." for name in RESERVED_NAMES)
    rigid = [place for place, quantity in enumerate(uncertain) if quantity.address.startswith(tables)]
    names = [quantity.address for quantity in uncertain]
    return local_parts(at_station, parts, rigid, names) if parts else None


def _mixing(
    quantity: UncertainQuantity, law: Normal | Lognormal, positions: Sequence[Position]
) -> FloatArray:
    if len(positions) == 1:
        return np.ones((1, 1))
    if law.horizontal_scale is None:
        raise ParameterError(
            f"{quantity.address} varies from point to point and there are {len(positions)} stations: it "
            "needs horizontal_scale, over which it varies in plan"
        )
    return mixing_matrix(positions, law.horizontal_scale)
