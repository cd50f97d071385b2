"""The tables of an interpretation, units in the headings."""

from typing import TYPE_CHECKING

import numpy as np

from probsoil.laboratory.friction import friction_angle
from probsoil.laboratory.interpretation import Interpretation
from probsoil.laboratory.observations import Observation
from probsoil.laboratory.oedometer import OedometerResult
from probsoil.report.text import trimmed_text

if TYPE_CHECKING:
    import pandas as pd

GIST = ("layer", "parameter", "kind", "numbers [-]", "least", "median", "greatest", "unit")
"""Headings of the gist."""


def gist_rows(interpretation: Interpretation) -> tuple[tuple[str, ...], list[tuple[str, ...]]]:
    """Sum up the evidence by layer, parameter and kind of test.

    Parameters
    ----------
    interpretation : Interpretation
        The tests.

    Returns
    -------
    headings : tuple of str
        `GIST`.
    rows : list of tuple of str
        Cells written out.
    """
    groups: dict[tuple[str, str, str], list[Observation]] = {}
    for one in interpretation.observations:
        groups.setdefault((one.layer, one.parameter, one.kind), []).append(one)
    rows = []
    for (layer, parameter, kind), members in groups.items():
        values = [one.value for one in members]
        numbers = (trimmed_text(float(one)) for one in (min(values), np.median(values), max(values)))
        rows.append((layer or "not known", parameter, kind, str(len(values)), *numbers, members[0].unit))
    return GIST, rows


def interpretation_tables(interpretation: Interpretation) -> "dict[str, pd.DataFrame]":
    """Arrange an interpretation as tables.

    Parameters
    ----------
    interpretation : Interpretation
        The tests.

    Returns
    -------
    frames : dict of str to DataFrame
        ``evidence``, and where there are such tests ``oedometer``, ``oedometer_summary``, ``increments``,
        ``disturbance``, ``triaxial``, ``friction``, ``strength_ratio``, ``vane`` and ``cone``.
    """
    import pandas as pd

    frames = {"evidence": interpretation.to_frame()}
    for name, results in (
        ("oedometer", interpretation.oedometers),
        ("triaxial", interpretation.triaxials),
        ("vane", interpretation.vanes),
        ("cone", interpretation.cones),
    ):
        parts = [one.to_frame() for one in results]
        parts = [one for one in parts if len(one)]
        if parts:
            frames[name] = pd.concat(parts, ignore_index=True)
    for name, rows in (
        ("oedometer_summary", [_summary_row(one) for one in interpretation.oedometers]),
        ("increments", _increment_rows(interpretation)),
        ("disturbance", _disturbance_rows(interpretation)),
        ("friction", _friction_rows(interpretation)),
        ("strength_ratio", _ratio_rows(interpretation)),
    ):
        if rows:
            frames[name] = pd.DataFrame(rows)
    return frames


def _summary_row(result: OedometerResult) -> dict[str, object]:
    by_method = {one.method: one.stress for one in result.constructions}
    pressure = [("two branches", None if result.fit is None else float(np.exp(result.fit.ln_break.value)))]
    pressure += list(by_method.items())
    pressure += [(f"{name}, carried", stress) for name, stress in result.carried.items()]
    row: dict[str, object] = {"test": result.sheet.test, "depth [m]": result.sheet.place.depth}
    for name, unit, found in (
        ("lambda", "-", result.lam),
        ("kappa", "-", result.kappa),
        ("preconsolidation", "kPa", result.preconsolidation),
        ("cv", "m2/year", result.time.cv),
        ("k", "m/s", result.time.k),
        ("C_alpha/Cc", "-", result.time.creep_ratio),
    ):
        row[f"{name} [{unit}]"] = None if found is None else found.value
        row[f"{name} error [{unit}]"] = None if found is None else found.standard_error
        if name == "kappa":
            row["kappa from"] = result.kappa_from or None
        if name == "preconsolidation":
            row |= {f"{method} [kPa]": stress for method, stress in pressure}
    return row


def _increment_rows(interpretation: Interpretation) -> list[dict[str, object]]:
    return [
        {
            "test": result.sheet.test,
            "from [kPa]": one.from_stress,
            "to [kPa]": one.to_stress,
            "virgin": "yes" if one.virgin else "no",
            "void ratio [-]": one.void_ratio,
            "drainage path [mm]": one.curve.path,
            "t50 [min]": one.curve.log_time.time if one.curve.log_time else None,
            "t90 [min]": one.curve.root_time.time if one.curve.root_time else None,
            "cv log-time [m2/year]": one.curve.cv_log_time.value if one.curve.cv_log_time else None,
            "cv root-time [m2/year]": one.curve.cv_root_time.value if one.curve.cv_root_time else None,
            "cv [m2/year]": one.curve.cv.value if one.curve.cv else None,
            "cv error [m2/year]": one.curve.cv.standard_error if one.curve.cv else None,
            "reported cv [m2/year]": _finite(result.sheet.reported_cv, one.place),
            "mv [m2/kN]": one.mv,
            "k [m/s]": one.k,
            "C_alpha [-]": one.creep_index.value if one.creep_index else None,
            "C_alpha error [-]": one.creep_index.standard_error if one.creep_index else None,
        }
        for result in interpretation.oedometers
        for one in result.increments
    ]


def _finite(values: np.ndarray, place: int) -> float | None:
    return float(values[place]) if place < values.size and np.isfinite(values[place]) else None


def _disturbance_rows(interpretation: Interpretation) -> list[dict[str, object]]:
    return [
        {
            "test": one.sheet.test,
            "depth [m]": one.sheet.place.depth,
            "stress in situ [kPa]": one.in_situ_stress,
            "overconsolidation ratio [-]": one.preconsolidation.value / one.in_situ_stress,
            "reported preconsolidation [kPa]": one.sheet.reported_preconsolidation,
            "change of void ratio/e0 [-]": one.disturbance.change,
            "strain [-]": one.disturbance.strain,
            "quality": one.disturbance.quality or "no class at this ratio",
        }
        for one in interpretation.oedometers
        if one.disturbance is not None and one.preconsolidation is not None and one.in_situ_stress is not None
    ]


def _friction_rows(interpretation: Interpretation) -> list[dict[str, object]]:
    return [
        {
            "layer": one.layer or "not known",
            "failure at": one.failure,
            "tests [-]": one.tests,
            "M [-]": one.slope.value,
            "M error [-]": one.slope.standard_error,
            "phi' [deg]": float(np.degrees(friction_angle(one.slope.value))),
            "coefficient of variation of a test [-]": one.scatter,
        }
        for one in interpretation.friction
    ]


def _ratio_rows(interpretation: Interpretation) -> list[dict[str, object]]:
    rows = []
    for one in interpretation.strength_ratios:
        row: dict[str, object] = {"layer": one.layer or "not known", "tests": ", ".join(one.tests)}
        for name, found in (
            ("su/s'v normally consolidated", one.ratio),
            ("Lambda from tests", one.exponent),
            ("Lambda from kappa/lambda, kappa over ln s'v", one.exponent_from_slopes),
        ):
            row |= {
                f"{name} [-]": None if found is None else found.value,
                f"{name}, error [-]": None if found is None else found.standard_error,
            }
        row["correlation of errors of S and Lambda [-]"] = one.correlation
        rows.append(row)
    return rows
