"""Where measured curves leave their band, and what that looks like: rules, each stated in its words.

The rules are judgement, made for the engineer's eye; they are listed on the theory page.
"""

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.measured_bands import BandCurve
from probsoil.assessment.specimen_parameters import SpecimenParameters

_FLATTER = 0.8  # share of the steepest slope to which a collapsing curve falls back
_SOFTENED = 0.9  # share of the peak that is left at the end of a softening test
_KEPT = 0.97  # the same of an element that does not soften
_EARLY = 0.8  # share of the final deviator up to which strains are small
_NEAR_YIELD = 2.0  # preconsolidation stresses up to which a curve is near yield
_UPPER = 1.645  # 95 % of a normal
_NAMES = {
    "void_ratio": "void ratio",
    "deviator": "deviator",
    "pore_pressure_change": "pore pressure",
    "volumetric_strain": "volumetric strain",
}


def departures(
    curves: tuple[BandCurve, ...], parameters: SpecimenParameters, *, dry_share: float
) -> tuple[str, ...]:
    """Say where curves leave their bands and what that looks like.

    Parameters
    ----------
    curves : tuple of BandCurve
        Of one test.
    parameters : SpecimenParameters
        What the bands were drawn from.
    dry_share : float, [-]
        Share of realisations that yield first dry of critical.

    Returns
    -------
    words : tuple of str
        One sentence for each stretch outside (`BandCurve.runs`), then what the curve
        looks like; empty where none leaves.
    """
    told = [words for curve in curves for words in _stretches(curve)]
    if not told:
        return ()
    main = curves[0]
    looks = _oedometer(main, parameters) if main.quantity == "void_ratio" else _triaxial(main, dry_share)
    return (*told, looks)


def _stretches(curve: BandCurve) -> list[str]:
    oedometer = curve.quantity == "void_ratio"
    scale, unit, name = (1.0, "kPa", "stress") if oedometer else (100.0, "%", "axial strain")
    told = []
    for first, last, side in curve.runs():
        where = f"{name} {scale * curve.at[first]:.3g} to {scale * curve.at[last]:.3g} {unit}"
        count = f"{last - first + 1} readings in succession" if last > first else "one reading, far"
        told.append(
            f"{_NAMES[curve.quantity]} {'above' if side > 0.0 else 'below'} the band at {count}, {where}"
        )
    return told


def _oedometer(curve: BandCurve, parameters: SpecimenParameters) -> str:
    greatest = np.maximum.accumulate(curve.at)
    first_loading = np.concatenate([[True], curve.at[1:] > greatest[:-1]])
    stress, void_ratio = curve.at[first_loading], curve.measured[first_loading]
    leaves = _sides(curve)[first_loading]
    yield_stress = parameters.median[3]
    steep = np.exp(parameters.log_mean[0] + _UPPER * parameters.log_sd[0])
    slope = -np.diff(void_ratio) / np.diff(np.log(stress))
    collapses = slope.size > 1 and slope.max() > steep and slope[-1] < _FLATTER * slope.max()
    if collapses and (leaves > 0.0).any():
        return (
            f"looks structured: above the band, then steeper (slope {slope.max():.3g}) than 95 % of the "
            f"virgin lines ({steep:.3g}) and flatter again; the bonds that break are not in the model"
        )
    if not collapses and (leaves[stress <= _NEAR_YIELD * yield_stress] < 0.0).any():
        return (
            f"looks disturbed: below the band up to {_NEAR_YIELD:g} preconsolidation stresses without a "
            "collapse; lambda and the preconsolidation stress of such a specimen are too low"
        )
    if not leaves.any():
        return "only unloading or reloading leaves the band: kappa of this specimen is not that of the others"
    return "lambda or the preconsolidation stress of this specimen is not that of the others"


def _triaxial(curve: BandCurve, dry_share: float) -> str:
    sign = -1.0 if curve.at[-1] < 0.0 else 1.0
    measured, model = sign * curve.measured, sign * curve.median
    leaves = sign * _sides(curve)
    if dry_share > 0.5:
        return (
            f"heavily overconsolidated: {100.0 * dry_share:.0f} % of the realisations yield dry of "
            "critical, where the ellipse overstates the peak and the softening of a real specimen "
            "gathers in a shear zone"
        )
    peak, model_peak = np.nanmax(measured), model.max()
    softens = measured[-1] < _SOFTENED * peak and model[-1] > _KEPT * model_peak
    if softens:
        return (
            f"looks structured or sensitive: {100.0 * (1.0 - measured[-1] / peak):.0f} % below its peak at "
            "the end, wet of critical, where the element does not soften"
        )
    early = np.abs(model) < _EARLY * np.abs(model[-1])
    if (leaves[early] < 0.0).any() and not leaves[-1] > 0.0:
        return (
            "looks disturbed: too soft at small strain; or a stiffness at small strain that the elastic "
            "part with its one Poisson's ratio does not give"
        )
    if leaves[-1] != 0.0:
        return "M or the preconsolidation stress of this specimen is not that of the others"
    return "the strength agrees and the way to it does not: kappa or Poisson's ratio"


def _sides(curve: BandCurve) -> FloatArray:
    """Side of each reading that belongs to a stretch outside."""
    side = np.zeros(curve.at.size)
    for first, last, which in curve.runs():
        side[first : last + 1] = which
    return side
