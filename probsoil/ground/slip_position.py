"""Where the critical slip circles lie."""

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.response import Response
from probsoil.ground.site_model import SiteModel
from probsoil.ground.slip_moving import POSITION

__all__ = ["POSITION", "critical_positions"]


def critical_positions(site: SiteModel, response: Response) -> FloatArray:
    """Return where the critical circle of every realisation and check lies.

    Parameters
    ----------
    site : SiteModel
        With the families of circles that the response was computed with.
    response : Response
        The ground's answer.

    Returns
    -------
    position : ndarray, shape (n_sample, n_check, 6), [m]
        Centre, radius, depth of the lowest point of the arc (negative above ground level), and where the
        arc leaves and enters; x from the outer toe towards the embankment, y upward from ground
        level. Not a number where the realisation did not converge.
    """
    chosen = response.critical_circle
    position = (
        np.empty((*chosen.shape, len(POSITION))) if not response.circle.size else response.circle.copy()
    )
    for check, family in enumerate(site.families):
        table = np.stack([getattr(family.circles, name) for name in POSITION], axis=1)
        position[:, check] = table[np.maximum(chosen[:, check], 0)]
    position[~response.converged] = np.nan
    return position
