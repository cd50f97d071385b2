"""Interpretation of field vane profiles: strength with the correction for rate and anisotropy."""

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import FloatArray
from probsoil.laboratory.observations import Observation, observation
from probsoil.laboratory.sheets import VaneSheet

if TYPE_CHECKING:
    import pandas as pd

PLASTICITY_ERROR = 5.0
"""Standard error of a plasticity index [%]; a judgement."""

_RANGE = (20.0, 120.0)  # of plasticity index, %, where the curve was drawn


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class VaneResult:
    """What one vane profile gives.

    Attributes
    ----------
    sheet : VaneSheet
        The profile.
    factor : ndarray, shape (n,), [-]
        Correction applied; 1 where the strengths already carry one, not a number where there is none.
    strength, standard_error : ndarray, shape (n,), [kPa]
        Corrected strength and its error for the plasticity index; not a number where there is none.
    sensitivity : ndarray, shape (n,), [-]
        Peak over remoulded.
    corrected_by : str
        Where the correction comes from, in words.
    remarks : tuple of str
        What could not be interpreted, and why.
    """

    sheet: VaneSheet
    factor: FloatArray
    strength: FloatArray
    standard_error: FloatArray
    sensitivity: FloatArray
    corrected_by: str
    remarks: tuple[str, ...]

    def observations(self) -> tuple[Observation, ...]:
        """Return the observed numbers.

        Returns
        -------
        rows : tuple of Observation
            Corrected strength at each depth.
        """
        rows = []
        for place, depth in enumerate(self.sheet.depth):
            if not np.isfinite(self.strength[place]):
                continue
            index, error = self.sheet.plasticity_index[place], float(self.standard_error[place])
            outside = self.factor[place] != 1.0 and not _RANGE[0] <= index <= _RANGE[1]
            row = observation(
                "vane",
                (self.sheet.test, replace(self.sheet.place, depth=float(depth))),
                "su",
                float(self.strength[place]),
                error if np.isfinite(error) else None,
                flag="plasticity index outside the range of the correction" if outside else "",
            )
            rows.append(row)
        return tuple(rows)

    def to_frame(self) -> "pd.DataFrame":
        """Return one row per depth.

        Returns
        -------
        frame : DataFrame
            As measured, correction, corrected.
        """
        import pandas as pd

        return pd.DataFrame(
            {
                "test": self.sheet.test,
                "hole": self.sheet.place.hole,
                "depth [m]": self.sheet.depth,
                "as measured [kPa]": self.sheet.strength,
                "remoulded [kPa]": self.sheet.remoulded,
                "sensitivity [-]": self.sensitivity,
                "plasticity index [%]": self.sheet.plasticity_index,
                "correction [-]": self.factor,
                "su [kPa]": self.strength,
                "su error [kPa]": self.standard_error,
            }
        )


def vane_correction(plasticity_index: FloatArray) -> FloatArray:
    """Return the factor on a vane strength that Bjerrum found from failures of embankments.

    Parameters
    ----------
    plasticity_index : ndarray, shape (n,), [%]
        Of the clay.

    Returns
    -------
    factor : ndarray, shape (n,), [-]
        1.7 - 0.54 log10(PI), a fit to the curve, no more than 1.

    References
    ----------
    Bjerrum, L. (1972). Embankments on soft ground. ASCE Conf. Performance of Earth and Earth-Supported
    Structures, 2, 1-54. The fit and the source recalled; not opened.
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        factor = 1.7 - 0.54 * np.log10(plasticity_index)
    return np.asarray(np.where(plasticity_index > 0.0, np.minimum(factor, 1.0), np.nan))


def interpreted_vane(sheet: VaneSheet, *, corrected: bool | None = None) -> VaneResult:
    """Interpret one vane profile.

    Parameters
    ----------
    sheet : VaneSheet
        The profile.
    corrected : bool or None
        Whether its strengths already carry a correction; None to take the sheet's word.

    Returns
    -------
    result : VaneResult
        Without strengths where neither says, and where a plasticity index is missing.
    """
    said = sheet.corrected if corrected is None else corrected
    remarks: list[str] = []
    nothing = np.full(sheet.depth.shape, np.nan)
    factor, error = nothing, nothing
    if said is None:
        by = "not known"
        remarks.append(
            "su: neither the sheet nor the command says whether the strengths are corrected; "
            "say so with --vane-corrected or --vane-as-measured"
        )
    elif said:
        by = "corrected as given"
        factor = np.ones(sheet.depth.shape)
    else:
        by = "corrected here after Bjerrum"
        factor = vane_correction(sheet.plasticity_index)
        steep = 0.54 / np.log(10.0) * PLASTICITY_ERROR / sheet.plasticity_index
        error = sheet.strength * steep
        missing = int(np.isnan(factor).sum())
        if missing:
            remarks.append(f"su: no plasticity index for {missing} of {factor.size} tests, so no correction")
    with np.errstate(divide="ignore", invalid="ignore"):
        sensitivity = np.where(sheet.remoulded > 0.0, sheet.strength / sheet.remoulded, np.nan)
    return VaneResult(
        sheet=sheet,
        factor=factor,
        strength=np.asarray(factor * sheet.strength),
        standard_error=np.asarray(np.where(np.isfinite(factor), error, np.nan)),
        sensitivity=np.asarray(sensitivity),
        corrected_by=by,
        remarks=tuple(remarks),
    )
