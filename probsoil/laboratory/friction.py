"""Stress ratio at failure and friction angle, in compression and in extension."""

import math

from probsoil.laboratory.regression import Estimate


def friction_angle(slope: float, *, extension: bool = False) -> float:
    """Return the friction angle of a stress ratio at failure.

    Parameters
    ----------
    slope : float, [-]
        q/p' at failure, positive.
    extension : bool
        Whether in extension.

    Returns
    -------
    angle : float, [rad]
        From sin phi' = 3M/(6 + M) in compression and 3M/(6 - M) in extension.
    """
    return math.asin(3.0 * slope / (6.0 - slope if extension else 6.0 + slope))


def greatest_slope(*, extension: bool) -> float:
    """Return the stress ratio that no ground without cohesion reaches: a friction angle of 90 degrees.

    Parameters
    ----------
    extension : bool
        Whether in extension.

    Returns
    -------
    slope : float, [-]
        3 in compression, 1.5 in extension.
    """
    return 1.5 if extension else 3.0


def compression_slope(angle: float) -> float:
    """Return M in compression of a friction angle.

    Parameters
    ----------
    angle : float, [rad]
        Friction angle.

    Returns
    -------
    slope : float, [-]
        6 sin phi'/(3 - sin phi').
    """
    return 6.0 * math.sin(angle) / (3.0 - math.sin(angle))


def carried_to_compression(ratio: Estimate, *, extension: bool) -> Estimate:
    """Return M in compression of a stress ratio at failure.

    Parameters
    ----------
    ratio : Estimate, [-]
        q/p' at failure, positive, below `greatest_slope`.
    extension : bool
        Whether it was found in extension.

    Returns
    -------
    slope : Estimate, [-]
        Of the same friction angle.

    Notes
    -----
    One friction angle gives Mc = 3 Me/(3 - Me), so d ln Mc/d ln Me = 3/(3 - Me): an error grows on the way.
    """
    if not extension:
        return ratio
    value = compression_slope(friction_angle(ratio.value, extension=True))
    steep = 3.0 / (3.0 - ratio.value)
    return Estimate(value=value, standard_error=value * ratio.relative_error * steep)
