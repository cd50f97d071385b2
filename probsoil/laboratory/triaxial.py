"""Interpretation of triaxial tests: stress path, failure, friction and undrained strength."""

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.laboratory.observations import Observation, observation
from probsoil.laboratory.regression import Estimate, widened
from probsoil.laboratory.sheets import TriaxialSheet

if TYPE_CHECKING:
    import pandas as pd

FailureBy = Literal["stress ratio", "peak deviator"]

PRESSURE_ERROR = 1.0
"""Standard error of a deviator or a mean effective stress [kPa]; a judgement."""

STRENGTH_ERROR = 0.03
"""Relative standard error of a strength for area and membrane correction [-]; a judgement."""

FRICTION_SCATTER = 0.07
"""Coefficient of variation of M between specimens of a layer, taken where there is one [-]; a judgement."""

_LEAST_READINGS = 4
_SMALL_STRESS = 2.0  # kPa: below it a stress ratio means nothing


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
    """

    place: int
    strain: float
    deviator: float
    mean_stress: float

    @property
    def ratio(self) -> float:
        """Stress ratio q/p', extension positive too [-]."""
        return abs(self.deviator) / self.mean_stress


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
    remarks : tuple of str
        What could not be interpreted, and why.
    """

    sheet: TriaxialSheet
    mean_stress: FloatArray
    peak: Failure | None
    greatest_ratio: Failure | None
    failure: FailureBy
    in_situ_stress: float | None
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
        if failure is None or not np.isfinite(failure.mean_stress) or failure.mean_stress < _SMALL_STRESS:
            return None
        relative = math.hypot(PRESSURE_ERROR / abs(failure.deviator), PRESSURE_ERROR / failure.mean_stress)
        if failure.ratio >= greatest_slope(extension=self.extension):
            return None
        value = compression_slope(friction_angle(failure.ratio, extension=self.extension))
        return Estimate(value=value, standard_error=value * relative)

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
        return Estimate(value=value, standard_error=math.hypot(0.5 * PRESSURE_ERROR, STRENGTH_ERROR * value))

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
            flag = "from extension, carried over by the friction angle" if self.extension else ""
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
    def _strength_flag(self) -> str:
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


def interpreted_triaxial(
    sheet: TriaxialSheet, in_situ_stress: float | None = None, *, failure: FailureBy = "stress ratio"
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
    if reason:
        remarks.append(reason)
    else:
        pushed = np.where(readable, (-1.0 if sheet.kind.endswith("E") else 1.0) * sheet.deviator, -np.inf)
        peak = _failure(sheet, path, int(np.argmax(pushed)))
        ratio = _greatest_ratio(sheet, path, pushed)
        if ratio is not None and ratio.ratio >= greatest_slope(extension=sheet.kind.endswith("E")):
            remarks.append("M: a stress ratio no friction gives: pore pressures or stresses are wrong")
        if readable.sum() == 1:
            remarks.append("only the state at failure is given: both definitions of failure are that one")
        elif _still_rises(pushed[readable]):
            remarks.append("the deviator still rises at the last reading: strength is a lower bound")
    return TriaxialResult(
        sheet=sheet,
        mean_stress=path,
        peak=peak,
        greatest_ratio=ratio,
        failure=failure,
        in_situ_stress=in_situ_stress,
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


def _still_rises(deviator: FloatArray) -> bool:
    return bool(deviator[-1] > (1.0 + STRENGTH_ERROR) * deviator[:-1].max())


def _mean_stress(sheet: TriaxialSheet) -> tuple[FloatArray, list[str]]:
    if sheet.kind == "UU":
        return np.full(sheet.deviator.shape, np.nan), []
    pore = sheet.pore_pressure_change if "U" in sheet.kind else np.zeros_like(sheet.deviator)
    start = (sheet.axial_stress + 2.0 * sheet.radial_stress) / 3.0
    path = start + (sheet.deviator - (sheet.axial_stress - sheet.radial_stress)) / 3.0 - pore
    missing = not np.isfinite(path).any()
    return path, ["M: pore pressure or consolidation stress is missing"] if missing else []


def _failure(sheet: TriaxialSheet, path: FloatArray, place: int) -> Failure:
    return Failure(
        place=place,
        strain=float(sheet.axial_strain[place]),
        deviator=float(sheet.deviator[place]),
        mean_stress=float(path[place]),
    )


def _greatest_ratio(sheet: TriaxialSheet, path: FloatArray, pushed: FloatArray) -> Failure | None:
    sound = np.isfinite(path) & np.isfinite(pushed) & (path > _SMALL_STRESS)
    if not sound.any():
        return None
    ratio = np.where(sound, pushed, -np.inf) / np.where(sound, path, 1.0)
    return _failure(sheet, path, int(np.argmax(ratio)))


def pooled_slope(results: tuple[TriaxialResult, ...], failure: FailureBy) -> tuple[Estimate, float] | None:
    """Return M of several tests by regression of q on p' through the origin.

    Parameters
    ----------
    results : tuple of TriaxialResult
        Tests of one layer.
    failure : str
        Definition of failure.

    Returns
    -------
    found : tuple of Estimate and float, or None, [-]
        M and the coefficient of variation of a test about it; None without a test. The scatter of q is
        taken in proportion to p', so that every test counts the same and M is the mean of q/p'. The error
        is Student's by the scatter found, however few the tests; of one test alone by `FRICTION_SCATTER`.
    """
    slopes = [one.slope(one.greatest_ratio if failure == "stress ratio" else one.peak) for one in results]
    values = np.array([one.value for one in slopes if one is not None])
    if not values.size:
        return None
    mean = float(values.mean())
    if values.size == 1:
        return Estimate(value=mean, standard_error=FRICTION_SCATTER * mean), FRICTION_SCATTER
    scatter = float(values.std(ddof=1))
    error = widened(scatter / math.sqrt(values.size), values.size - 1.0)
    return Estimate(value=mean, standard_error=error), scatter / mean


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
