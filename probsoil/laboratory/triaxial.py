"""Interpretation of triaxial tests: stress path, failure, friction and undrained strength."""

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.laboratory.friction import carried_to_compression, friction_angle, greatest_slope
from probsoil.laboratory.observations import Observation, observation
from probsoil.laboratory.regression import Estimate
from probsoil.laboratory.shear_curve import TAIL, SmoothRatio, late_change, smooth_ratio
from probsoil.laboratory.sheets import TriaxialSheet

if TYPE_CHECKING:
    import pandas as pd

FailureBy = Literal["stress ratio", "peak deviator"]

PRESSURE_ERROR = 1.0
"""Standard error of a deviator or a mean effective stress [kPa]; a judgement."""

STRENGTH_ERROR = 0.03
"""Relative standard error of a strength for area and membrane correction [-]; a judgement."""

UNCONSOLIDATED_ERROR = 0.20
"""The same of a UU test [-]; within the 8 to 38 % of Phoon and Kulhawy 1999; recalled, not opened."""

_LEAST_READINGS = 4
_SMALL_STRESS = 2.0  # kPa: below it a stress ratio means nothing
_CRITICAL_OCR = 2.0  # above it a clay dilates: its greatest stress ratio is a peak
_RISE, _PORE_CHANGE, _VOLUME_CHANGE = (
    0.03,
    0.05,
    0.05,
)  # of q, of p' and of strain, over the last quarter of it
_FALL = 0.05  # of the stress ratio after its greatest
_TOLD = 2.0 * PRESSURE_ERROR  # a smaller change may be error of reading


@dataclass(frozen=True, slots=True, kw_only=True)
class Failure:
    """One definition of failure applied to one test.

    Attributes
    ----------
    place : int, [-]
        Reading.
    strain : float, [-]
        Axial.
    deviator, mean_stress : float, [kPa]
        q and p'; p' not a number of a UU test.
    ratio : Estimate or None, [-]
        Stress ratio q/p', extension positive too: by the curve through the readings about failure where
        they are enough (`smooth_ratio`), else of this reading alone; None where p' is not known or next to
        nothing.
    excess : float, [-]
        What was taken off it, as the greatest of a curve that errs lies too high.
    """

    place: int
    strain: float
    deviator: float
    mean_stress: float
    ratio: Estimate | None
    excess: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TriaxialResult:
    """What one triaxial test gives.

    Attributes
    ----------
    sheet : TriaxialSheet
        The test.
    mean_stress : ndarray, shape (n,), [kPa]
        p' at every reading; not a number where it cannot be known.
    peak : Failure or None
        Failure at the largest deviator.
    greatest_ratio : Failure or None
        Failure at the greatest stress ratio.
    failure : str
        Which of the two M is taken at.
    in_situ_stress : float or None, [kPa]
        Effective vertical stress in situ.
    ocr : float or None, [-]
        Overconsolidation ratio at which it was sheared; None where not known.
    doubts : tuple of str
        Why M may be no critical state.
    remarks : tuple of str
        What could not be interpreted, and why.
    """

    sheet: TriaxialSheet
    mean_stress: FloatArray
    peak: Failure | None
    greatest_ratio: Failure | None
    failure: FailureBy
    in_situ_stress: float | None
    ocr: float | None
    doubts: tuple[str, ...]
    remarks: tuple[str, ...]

    @property
    def extension(self) -> bool:
        """Whether the specimen was extended."""
        return self.sheet.kind.endswith("E")

    @property
    def undrained(self) -> bool:
        """Whether no water left during shear."""
        return "U" in self.sheet.kind

    def slope(self, failure: Failure | None) -> Estimate | None:
        """Return M at one definition of failure, of an extension test carried over to compression.

        Parameters
        ----------
        failure : Failure or None
            The definition applied.

        Returns
        -------
        slope : Estimate or None, [-]
            M with the error of the readings.
        """
        found = None if failure is None else failure.ratio
        if found is None or not 0.0 < found.value < greatest_slope(extension=self.extension):
            return None
        return carried_to_compression(found, extension=self.extension)

    @property
    def slope_at_failure(self) -> Estimate | None:
        """M at the definition of failure chosen [-]."""
        return self.slope(self.greatest_ratio if self.failure == "stress ratio" else self.peak)

    @property
    def strength(self) -> Estimate | None:
        """Undrained strength, half the largest deviator [kPa]; None of a drained test."""
        if self.peak is None or not self.undrained:
            return None
        value = 0.5 * abs(self.peak.deviator)
        relative = UNCONSOLIDATED_ERROR if self.sheet.kind == "UU" else STRENGTH_ERROR
        return Estimate(value=value, standard_error=math.hypot(0.5 * PRESSURE_ERROR, relative * value))

    @property
    def strength_over_stress(self) -> float | None:
        """Undrained strength over the axial consolidation stress [-]."""
        known = self.strength is not None and np.isfinite(self.sheet.axial_stress)
        return self.strength.value / self.sheet.axial_stress if known and self.strength else None

    def observations(self) -> tuple[Observation, ...]:
        """Return the observed numbers: M, and the strength where the test stands for the ground as it lies.

        Returns
        -------
        rows : tuple of Observation
            One per parameter that has a value.
        """
        test, rows = (self.sheet.test, self.sheet.place), []
        slope, strength = self.slope_at_failure, self.strength
        if slope is not None:
            flag = "; ".join(self._slope_doubts)
            rows.append(observation("triaxial", test, "M", slope.value, slope.standard_error, flag=flag))
        if strength is not None and self.as_in_situ is not False:
            rows.append(
                observation(
                    "triaxial", test, "su", strength.value, strength.standard_error, flag=self._strength_flag
                )
            )
        return tuple(rows)

    @property
    def as_in_situ(self) -> bool | None:
        """Whether the specimen was sheared from about the stress in situ; None where that is not known."""
        if self.sheet.kind == "UU":
            return True
        if self.in_situ_stress is None:
            return None
        return abs(self.sheet.axial_stress / self.in_situ_stress - 1.0) <= 0.25

    @property
    def _slope_doubts(self) -> list[str]:
        words = ["from extension, carried over by the friction angle"] if self.extension else []
        if self.ocr is not None and self.ocr > _CRITICAL_OCR:
            words.append(f"overconsolidated {self.ocr:.1f} times: a peak rather than critical state")
        return words + list(self.doubts)

    @property
    def _strength_flag(self) -> str:
        if self.sheet.kind == "UU":
            return "unconsolidated: disturbance and effective stress not known"
        if self.extension:
            return "in extension"
        return "" if self.as_in_situ else "stress in situ not known: may not stand for the strength in situ"

    def to_frame(self) -> "pd.DataFrame":
        """Return the answers as one row.

        Returns
        -------
        frame : DataFrame
            Both definitions of failure, friction and strength.
        """
        import pandas as pd

        return pd.DataFrame([_row(self)])


def interpreted_triaxial(
    sheet: TriaxialSheet,
    in_situ_stress: float | None = None,
    *,
    failure: FailureBy = "stress ratio",
    ocr: float | None = None,
) -> TriaxialResult:
    """Interpret one triaxial test.

    Parameters
    ----------
    sheet : TriaxialSheet
        The test.
    in_situ_stress : float or None, [kPa]
        Effective vertical stress in situ; None where not known.
    failure : str
        Definition of failure at which M is taken: ``stress ratio`` (the greatest) or ``peak deviator``.
    ocr : float or None, [-]
        Overconsolidation ratio at which it was sheared; None where not known.

    Returns
    -------
    result : TriaxialResult
        What can be read off it; a remark for what cannot.

    Notes
    -----
    The total radial stress is taken as held while the axial one changes, so that
    ``p' = p'c + (q - qc)/3 - du``; with the axial stress held instead, p' would be out by a third of the
    change of q.
    """
    path, remarks = _mean_stress(sheet)
    readable = np.isfinite(sheet.deviator) & np.isfinite(sheet.axial_strain)
    reason = _unreadable(sheet, readable)
    peak = ratio = None
    doubts: list[str] = []
    if reason:
        remarks.append(reason)
    else:
        extension = sheet.kind.endswith("E")
        pushed = np.where(readable, (-1.0 if extension else 1.0) * sheet.deviator, -np.inf)
        peak, ratio = _failures(sheet, path, pushed)
        if ratio and ratio.ratio and ratio.ratio.value >= greatest_slope(extension=extension):
            remarks.append("M: a stress ratio no friction gives: pore pressures or stresses are wrong")
        if readable.sum() == 1:
            remarks.append("only the state at failure is given: both definitions of failure are that one")
        else:
            remarks += _rising(sheet, pushed)
            doubts = (
                _rising(sheet, pushed) + _not_at_rest(sheet, path, readable) + _beyond(ratio, path, pushed)
            )
    return TriaxialResult(
        sheet=sheet,
        mean_stress=path,
        peak=peak,
        greatest_ratio=ratio,
        failure=failure,
        in_situ_stress=in_situ_stress,
        ocr=ocr,
        doubts=tuple(doubts),
        remarks=tuple(remarks),
    )


def _unreadable(sheet: TriaxialSheet, readable: BoolArray) -> str:
    count = int(readable.sum())
    if count != 1 and count < _LEAST_READINGS:
        return f"{count} readings during shear; {_LEAST_READINGS} are needed, or the state at failure alone"
    if np.any(np.diff(np.abs(sheet.axial_strain[readable])) < 0.0):
        return "axial strain does not go on in one direction"
    pushed = (-1.0 if sheet.kind.endswith("E") else 1.0) * sheet.deviator[readable]
    return "no deviator in the direction of the test" if pushed.max() <= _SMALL_STRESS else ""


def _rising(sheet: TriaxialSheet, pushed: FloatArray) -> list[str]:
    known = np.isfinite(pushed)
    rise = late_change(np.abs(sheet.axial_strain[known]), pushed[known])
    fell = pushed[known][-1] < pushed.max() - _TOLD
    if fell or rise <= max(_RISE * pushed.max(), _TOLD):
        return []
    bound = "strength" if "U" in sheet.kind else "M"
    return [f"the deviator still rises at the last reading: {bound} is a lower bound"]


def _not_at_rest(sheet: TriaxialSheet, path: FloatArray, readable: BoolArray) -> list[str]:
    """Say whether the volume, or the pore pressure in its place, still changes at the end."""
    undrained = "U" in sheet.kind
    reading = sheet.pore_pressure_change if undrained else sheet.volumetric_strain
    known = readable & np.isfinite(reading) & np.isfinite(path)
    if not known.any():
        return []
    strain = np.abs(sheet.axial_strain[known])
    change = abs(late_change(strain, reading[known]))
    least = max(_PORE_CHANGE * path[known][-1], _TOLD) if undrained else _VOLUME_CHANGE * TAIL * strain[-1]
    what = "pore pressure" if undrained else "volume"
    return [f"{what} still changes at the last reading"] if change > least else []


def _beyond(greatest: Failure | None, path: FloatArray, pushed: FloatArray) -> list[str]:
    """Say whether the stress ratio falls again after its greatest, by the mean of the last three readings."""
    sound = _sound(path, pushed)
    if greatest is None or greatest.ratio is None or sound.sum() < _LEAST_READINGS:
        return []
    last = float(np.mean(pushed[sound][-3:] / path[sound][-3:]))
    fall = greatest.ratio.value - last
    peak = fall > max(_FALL * greatest.ratio.value, 2.0 * greatest.ratio.standard_error)
    return ["the stress ratio falls after its greatest: a peak rather than critical state"] if peak else []


def _mean_stress(sheet: TriaxialSheet) -> tuple[FloatArray, list[str]]:
    if sheet.kind == "UU":
        return np.full(sheet.deviator.shape, np.nan), []
    pore = sheet.pore_pressure_change if "U" in sheet.kind else np.zeros_like(sheet.deviator)
    start = (sheet.axial_stress + 2.0 * sheet.radial_stress) / 3.0
    path = start + (sheet.deviator - (sheet.axial_stress - sheet.radial_stress)) / 3.0 - pore
    missing = not np.isfinite(path).any()
    return path, ["M: pore pressure or consolidation stress is missing"] if missing else []


def _sound(path: FloatArray, pushed: FloatArray) -> BoolArray:
    return np.isfinite(path) & np.isfinite(pushed) & (path > _SMALL_STRESS)


def _failures(sheet: TriaxialSheet, path: FloatArray, pushed: FloatArray) -> tuple[Failure, Failure | None]:
    """Return failure at the largest deviator and at the greatest stress ratio."""
    sound, largest = _sound(path, pushed), int(np.argmax(pushed))
    if not sound.any():
        return _failure(sheet, path, largest, None), None
    ratio = np.where(sound, pushed, -np.inf) / np.where(sound, path, 1.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        error = np.abs(ratio) * np.hypot(PRESSURE_ERROR / pushed, PRESSURE_ERROR / path)
    curve = smooth_ratio(np.abs(sheet.axial_strain), ratio, error, sound)
    place = int(np.argmax(ratio)) if curve is None else int(curve.place[np.argmax(curve.ratio)])
    return _failure(sheet, path, largest, curve), _failure(sheet, path, place, curve)


def _failure(sheet: TriaxialSheet, path: FloatArray, place: int, curve: SmoothRatio | None) -> Failure:
    deviator, mean_stress = float(sheet.deviator[place]), float(path[place])
    ratio, excess = None, 0.0
    if np.isfinite(mean_stress) and mean_stress >= _SMALL_STRESS:
        value = abs(deviator) / mean_stress
        relative = math.hypot(PRESSURE_ERROR / abs(deviator), PRESSURE_ERROR / mean_stress)
        ratio = Estimate(value=value, standard_error=value * relative)
    if curve is not None and place in curve.place:
        at = int(np.searchsorted(curve.place, place))
        value, error, excess = float(curve.ratio[at]), float(curve.standard_error[at]), curve.excess
        ratio = Estimate(value=value - excess, standard_error=error)
    return Failure(
        place=place,
        strain=float(sheet.axial_strain[place]),
        deviator=deviator,
        mean_stress=mean_stress,
        ratio=ratio,
        excess=excess,
    )


def _row(result: TriaxialResult) -> dict[str, object]:
    row: dict[str, object] = {
        "test": result.sheet.test,
        "kind": result.sheet.kind,
        "depth [m]": result.sheet.place.depth,
        "axial stress [kPa]": _or_none(result.sheet.axial_stress),
        "radial stress [kPa]": _or_none(result.sheet.radial_stress),
    }
    for label, failure in (("peak deviator", result.peak), ("stress ratio", result.greatest_ratio)):
        slope = result.slope(failure)
        row |= {
            f"q at {label} [kPa]": None if failure is None else failure.deviator,
            f"p' at {label} [kPa]": None if failure is None else _or_none(failure.mean_stress),
            f"strain at {label} [-]": None if failure is None else failure.strain,
            f"M at {label} [-]": None if slope is None else slope.value,
            f"M error at {label} [-]": None if slope is None else slope.standard_error,
            f"phi' at {label} [deg]": None if slope is None else _degrees(slope.value),
        }
    strength = result.strength
    return row | {
        "su [kPa]": None if strength is None else strength.value,
        "su error [kPa]": None if strength is None else strength.standard_error,
        "su/axial stress [-]": result.strength_over_stress,
    }


def _degrees(slope: float) -> float:
    return math.degrees(friction_angle(slope))


def _or_none(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None
