"""How much sampling has disturbed a specimen, by the strain on the way back to the stress in situ."""

from dataclasses import dataclass

CLASSES = ("very good to excellent", "good to fair", "poor", "very poor")

_LIMITS = {"1 to 2": (0.04, 0.07, 0.14), "2 to 4": (0.03, 0.05, 0.10)}


@dataclass(frozen=True, slots=True, kw_only=True)
class Disturbance:
    """Disturbance of a specimen.

    Attributes
    ----------
    change : float, [-]
        Fall of void ratio up to the stress in situ over the initial void ratio.
    strain : float, [-]
        The same as vertical strain.
    quality : str
        Class of Lunne et al.; empty where the overconsolidation ratio is not within theirs.
    """

    change: float
    strain: float
    quality: str


def disturbance(initial_void_ratio: float, at_in_situ_stress: float, ocr: float) -> Disturbance:
    """Return the disturbance of a specimen.

    Parameters
    ----------
    initial_void_ratio : float, [-]
        Before loading.
    at_in_situ_stress : float, [-]
        Void ratio when loaded back to the effective vertical stress in situ.
    ocr : float, [-]
        Overconsolidation ratio.

    Returns
    -------
    disturbance : Disturbance
        With its class for overconsolidation ratios up to 4; below 1 counts as 1.

    References
    ----------
    Lunne, T., Berre, T. and Strandvik, S. (1997). Sample disturbance effects in soft low plastic Norwegian
    clay. Proc. Conf. Recent Developments in Soil and Pavement Mechanics, Rio de Janeiro, 81-102. Recalled;
    not opened.
    """
    change = (initial_void_ratio - at_in_situ_stress) / initial_void_ratio
    limits = _LIMITS["1 to 2"] if ocr <= 2.0 else _LIMITS["2 to 4"]
    quality = CLASSES[sum(change >= limit for limit in limits)] if ocr <= 4.0 else ""
    return Disturbance(
        change=change,
        strain=change * initial_void_ratio / (1.0 + initial_void_ratio),
        quality=quality,
    )
