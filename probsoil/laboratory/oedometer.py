"""Interpretation of one oedometer test."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from probsoil.laboratory.compression_curve import (
    Branches,
    branches,
    evened,
    expected_scatter,
    legs_slope,
)
from probsoil.laboratory.disturbance import Disturbance, disturbance
from probsoil.laboratory.increments import Increment, TimeAnswers, increments, time_answers
from probsoil.laboratory.observations import Observation, observation
from probsoil.laboratory.preconsolidation import (
    Construction,
    carried_to_meeting,
    constructions,
    preconsolidation_stress,
)
from probsoil.laboratory.regression import Estimate
from probsoil.laboratory.sheets import OedometerSheet
from probsoil.laboratory.two_branches import TwoBranchFit, two_branch_fit

if TYPE_CHECKING:
    import pandas as pd

VOID_RATIO_ERROR = 0.01
"""Standard error of the initial specific volume over itself [-]: weighing and trimming; a judgement."""

ANSWER = "meeting of the branches, constructions carried to it"
"""What the preconsolidation stress given is."""


@dataclass(frozen=True, slots=True, kw_only=True)
class OedometerResult:
    """What one oedometer test gives.

    Attributes
    ----------
    sheet : OedometerSheet
        The test.
    branches : Branches
        Its readings by branch.
    fit : TwoBranchFit or None
        Two branches of first loading.
    kappa_loop, kappa_rebound, kappa_initial : Estimate or None, [-]
        Slope of unloading and reloading in loops, of the last unloading, and of first loading before yield.
    kappa_from : str
        Which of them is the answer.
    constructions : tuple of Construction
        Of the preconsolidation stress.
    preconsolidation : Estimate or None, [kPa]
        Where the branches meet, constructions carried to it.
    carried : dict of str to float, [kPa]
        Each construction carried to where the branches meet.
    in_situ_stress : float or None, [kPa]
        Effective vertical stress in situ.
    disturbance : Disturbance or None
        Where the stress in situ is known and was reached.
    increments : tuple of Increment
        Those with readings in time.
    time : TimeAnswers
        What they give together.
    remarks : tuple of str
        What could not be interpreted, and why.
    """

    sheet: OedometerSheet
    branches: Branches
    fit: TwoBranchFit | None
    kappa_loop: Estimate | None
    kappa_rebound: Estimate | None
    kappa_from: str
    constructions: tuple[Construction, ...]
    preconsolidation: Estimate | None
    carried: dict[str, float]
    in_situ_stress: float | None
    disturbance: Disturbance | None
    increments: tuple[Increment, ...]
    time: TimeAnswers
    remarks: tuple[str, ...]

    @property
    def lam(self) -> Estimate | None:
        """Slope of the virgin branch [-]."""
        return None if self.fit is None else self.fit.lam

    @property
    def kappa_initial(self) -> Estimate | None:
        """Slope of first loading before yield [-]."""
        return None if self.fit is None else self.fit.initial_slope

    @property
    def kappa(self) -> Estimate | None:
        """Slope of unloading and reloading that is used [-]."""
        return {
            "loop": self.kappa_loop,
            "rebound": self.kappa_rebound,
            "initial branch": self.kappa_initial,
        }.get(self.kappa_from)

    @property
    def void_ratio(self) -> Estimate:
        """Initial void ratio, taken as that in situ [-]."""
        e0 = self.sheet.initial_void_ratio
        return Estimate(value=e0, standard_error=VOID_RATIO_ERROR * (1.0 + e0))

    def observations(self) -> tuple[Observation, ...]:
        """Return the observed numbers.

        Returns
        -------
        rows : tuple of Observation
            One per parameter that has a value.
        """
        poor = self.disturbance is not None and self.disturbance.quality in ("poor", "very poor")
        disturbed = f"specimen quality {self.disturbance.quality}" if poor and self.disturbance else ""
        initial = self.kappa_from == "initial branch"
        answers = (
            ("lambda", self.lam, disturbed),
            ("kappa", self.kappa, "from the initial branch, no unloading" if initial else ""),
            ("preconsolidation_stress", self.preconsolidation, disturbed),
            ("cv", self.time.cv, ""),
            ("k", self.time.k, ""),
            ("C_alpha_ratio", self.time.creep_ratio, ""),
            ("void_ratio", self.void_ratio, ""),
        )
        test = (self.sheet.test, self.sheet.place)
        return tuple(
            observation("oedometer", test, name, found.value, found.standard_error, flag=flag)
            for name, found, flag in answers
            if found is not None
        )

    def to_frame(self) -> "pd.DataFrame":
        """Return every estimate as a row.

        Returns
        -------
        frame : DataFrame
            Test, quantity, method, value, standard error and unit.
        """
        import pandas as pd

        return pd.DataFrame([{"test": self.sheet.test} | row for row in _rows(self)])


def interpreted_oedometer(sheet: OedometerSheet, in_situ_stress: float | None = None) -> OedometerResult:
    """Interpret one oedometer test.

    Parameters
    ----------
    sheet : OedometerSheet
        The test.
    in_situ_stress : float or None, [kPa]
        Effective vertical stress in situ; None where not known.

    Returns
    -------
    result : OedometerResult
        What can be read off it; a remark for what cannot.
    """
    readable = np.isfinite(sheet.stress) & np.isfinite(sheet.void_ratio)
    found = branches(np.where(readable, sheet.stress, 0.0))
    stress, void_ratio = evened(sheet.stress[found.first], sheet.void_ratio[found.first])
    fitted = two_branch_fit(stress, void_ratio, expected_scatter(sheet))
    remarks = []
    fit, yielding = None, None
    drawn: tuple[Construction, ...] = ()
    carried: dict[str, float] = {}
    if isinstance(fitted, str):
        remarks.append(f"lambda and preconsolidation stress: {fitted}")
    else:
        fit = fitted
        drawn = constructions(stress, void_ratio, sheet.initial_void_ratio)
        remarks += [f"{one.method}: {one.reason}" for one in drawn if one.stress is None]
        carried = carried_to_meeting(fit, drawn, stress, sheet.initial_void_ratio)
        yielding = preconsolidation_stress(fit, carried)
    loop, rebound, why = _unloading(sheet, found)
    remarks += why
    made = increments(sheet, found, None if yielding is None else yielding.value)
    time = time_answers(sheet, made, None if fit is None else fit.lam)
    remarks += [
        f"{one.from_stress:g} to {one.to_stress:g} kPa, {words}"
        for one in made
        for words in one.curve.remarks
    ]
    return OedometerResult(
        sheet=sheet,
        branches=found,
        fit=fit,
        kappa_loop=loop,
        kappa_rebound=rebound,
        kappa_from=_chosen(loop, rebound, fit),
        constructions=drawn,
        preconsolidation=yielding,
        carried=carried,
        in_situ_stress=in_situ_stress,
        disturbance=_disturbance(sheet, found, in_situ_stress, yielding),
        increments=made,
        time=time,
        remarks=(*remarks, *time.remarks),
    )


def _unloading(sheet: OedometerSheet, found: Branches) -> tuple[Estimate | None, Estimate | None, list[str]]:
    estimates, remarks = [], []
    for legs in (found.loops, (found.rebound,) if found.rebound.size else ()):
        estimate = legs_slope(sheet, legs).estimate(0) if legs else None
        if estimate is not None and estimate.value <= 0.0:
            remarks.append("kappa: void ratio does not rise on unloading")
            estimate = None
        estimates.append(estimate)
    if not found.loops and not found.rebound.size:
        remarks.append(
            "kappa: the test has no unloading; only the initial branch gives it, if it can be fitted"
        )
    return estimates[0], estimates[1], remarks


def _chosen(loop: Estimate | None, rebound: Estimate | None, fit: TwoBranchFit | None) -> str:
    named = (("loop", loop), ("rebound", rebound), ("initial branch", fit))
    return next((name for name, found in named if found is not None), "")


def _disturbance(
    sheet: OedometerSheet, found: Branches, in_situ_stress: float | None, yielding: Estimate | None
) -> Disturbance | None:
    stress = sheet.stress[found.first]
    if in_situ_stress is None or yielding is None or not stress[0] <= in_situ_stress <= stress[-1]:
        return None
    there = np.interp(np.log(in_situ_stress), np.log(stress), sheet.void_ratio[found.first])
    return disturbance(sheet.initial_void_ratio, float(there), yielding.value / in_situ_stress)


def _rows(result: OedometerResult) -> list[dict[str, object]]:
    estimates: list[tuple[str, str, Estimate | None, str]] = [
        ("lambda", "two branches, mean of the virgin branch", result.lam, "-"),
        (
            "lambda",
            "two branches, just beyond yield",
            None if result.fit is None else result.fit.first_lam,
            "-",
        ),
        (
            "lambda",
            "two branches, at the last load",
            None if result.fit is None else result.fit.last_lam,
            "-",
        ),
        ("kappa", "loop", result.kappa_loop, "-"),
        ("kappa", "rebound", result.kappa_rebound, "-"),
        ("kappa", "initial branch", result.kappa_initial, "-"),
        ("preconsolidation stress", ANSWER, result.preconsolidation, "kPa"),
        ("preconsolidation stress", "two branches", _break(result.fit), "kPa"),
    ]
    estimates += [
        ("preconsolidation stress", one.method, Estimate(value=one.stress, standard_error=np.nan), "kPa")
        for one in result.constructions
        if one.stress is not None
    ]
    estimates += [
        (
            "preconsolidation stress",
            f"{method}, carried to where the branches meet",
            Estimate(value=stress, standard_error=np.nan),
            "kPa",
        )
        for method, stress in result.carried.items()
    ]
    time = result.time
    estimates += [
        ("cv", "virgin increments", time.cv, "m2/year"),
        ("k", "at the initial void ratio", time.k, "m/s"),
        ("ck", "virgin increments", time.ck, "-"),
        ("C_alpha/Cc", "virgin increments", time.creep_ratio, "-"),
        ("void ratio", "before loading", result.void_ratio, "-"),
    ]
    return [
        {
            "quantity": quantity,
            "method": method,
            "value": found.value,
            "standard error": None if np.isnan(found.standard_error) else found.standard_error,
            "unit": unit,
        }
        for quantity, method, found, unit in estimates
        if found is not None
    ]


def _break(fit: TwoBranchFit | None) -> Estimate | None:
    if fit is None:
        return None
    value = float(np.exp(fit.ln_break.value))
    return Estimate(value=value, standard_error=value * fit.ln_break.standard_error)
