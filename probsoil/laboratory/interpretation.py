"""Interpretation of all tests of a site: each by itself, then what only several together can give."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from probsoil.errors import ParameterError
from probsoil.laboratory.cone import ConeResult, interpreted_cone
from probsoil.laboratory.ground_column import GroundColumn, assumed_column, scenario_column
from probsoil.laboratory.observations import TOGETHER, Observation, evidence_text, observation
from probsoil.laboratory.oedometer import OedometerResult, interpreted_oedometer
from probsoil.laboratory.outliers import flagged
from probsoil.laboratory.pooled_friction import PooledFriction, pooled_friction
from probsoil.laboratory.sheets import (
    ConeSheet,
    OedometerSheet,
    Place,
    SiteSheets,
    TriaxialSheet,
    VaneSheet,
)
from probsoil.laboratory.strength_ratio import StrengthRatio, strength_ratio
from probsoil.laboratory.triaxial import FailureBy, TriaxialResult, interpreted_triaxial
from probsoil.laboratory.usual_values import unusual_flagged
from probsoil.laboratory.vane import VaneResult, interpreted_vane
from probsoil.laboratory.yield_profile import YieldProfile, yield_profile

if TYPE_CHECKING:
    import pandas as pd

    from probsoil.scenario import Scenario

Sheet = OedometerSheet | TriaxialSheet | VaneSheet | ConeSheet
Result = OedometerResult | TriaxialResult | VaneResult | ConeResult
_FAILURES: tuple[FailureBy, ...] = ("stress ratio", "peak deviator")


@dataclass(frozen=True, slots=True, kw_only=True)
class Choices:
    """What the user says of the tests and the ground.

    Attributes
    ----------
    vane_corrected : bool or None
        Whether vane strengths already carry a correction; None to take each sheet's word.
    failure : str
        Definition of failure at which M is taken: ``stress ratio`` (the greatest) or ``peak deviator``.
    unit_weight : float or None, [kN/m3]
        Bulk unit weight of the ground where no layers are given.
    water_table : float, [m]
        Depth of the water table that goes with it.
    """

    vane_corrected: bool | None = None
    failure: FailureBy = "stress ratio"
    unit_weight: float | None = None
    water_table: float = 0.0

    def __post_init__(self) -> None:
        if self.failure not in _FAILURES:
            raise ParameterError(f"failure is one of {', '.join(_FAILURES)}; got '{self.failure}'")


@dataclass(frozen=True, slots=True, kw_only=True)
class Interpretation:
    """All tests of a site, interpreted.

    Attributes
    ----------
    column : GroundColumn or None
        Layers and stresses in situ; None where not known.
    choices : Choices
        What the user said.
    oedometers, triaxials, vanes, cones : tuple of results
        Test by test, in the order read.
    friction : tuple of PooledFriction
        By layer and definition of failure.
    strength_ratios : tuple of StrengthRatio
        By layer.
    observations : tuple of Observation
        The evidence, flagged.
    remarks : tuple of str
        What the reader and the interpretation have to say, test by test.
    """

    column: GroundColumn | None
    choices: Choices
    oedometers: tuple[OedometerResult, ...] = ()
    triaxials: tuple[TriaxialResult, ...] = ()
    vanes: tuple[VaneResult, ...] = ()
    cones: tuple[ConeResult, ...] = ()
    friction: tuple[PooledFriction, ...] = ()
    strength_ratios: tuple[StrengthRatio, ...] = ()
    observations: tuple[Observation, ...] = ()
    remarks: tuple[str, ...] = field(default=())

    def to_frame(self) -> "pd.DataFrame":
        """Return the evidence.

        Returns
        -------
        frame : DataFrame
            One row per observed number, columns as in the evidence table.
        """
        import pandas as pd

        from probsoil.laboratory.observations import EVIDENCE_COLUMNS

        rows = [{name: getattr(one, name) for name in EVIDENCE_COLUMNS} for one in self.observations]
        return pd.DataFrame(rows, columns=list(EVIDENCE_COLUMNS))

    def evidence(self) -> str:
        """Return the evidence as the table that a scenario may name.

        Returns
        -------
        text : str
            Comma-separated values.
        """
        return evidence_text(self.observations)


def interpret(
    paths: Iterable[str | Path],
    *,
    layers: "Scenario | str | Path | None" = None,
    keep_good_rows: bool = False,
    choices: Choices | None = None,
) -> Interpretation:
    """Read test sheets and interpret them.

    Parameters
    ----------
    paths : iterable of str or Path
        Files of test sheets.
    layers : Scenario, str, Path or None
        Scenario, or its file, whose layers the tests are put into.
    keep_good_rows : bool
        Whether to go on with the good rows of a file with mistakes.
    choices : Choices or None
        What the user says of tests and ground; None for the usual.

    Returns
    -------
    interpretation : Interpretation
        Every result with its standard error; a remark for what could not be interpreted.
    """
    from probsoil.laboratory.reading import read_sheets
    from probsoil.scenario import read_scenario

    scenario = read_scenario(layers, evidence=False) if isinstance(layers, str | Path) else layers
    sheets = read_sheets([Path(one) for one in paths], keep_good_rows=keep_good_rows)
    return interpreted_site(sheets, scenario, choices)


def interpreted_site(
    sheets: SiteSheets, scenario: "Scenario | None" = None, choices: Choices | None = None
) -> Interpretation:
    """Interpret the sheets of a site.

    Parameters
    ----------
    sheets : SiteSheets
        As read.
    scenario : Scenario or None
        Whose layers the tests are put into.
    choices : Choices or None
        What the user says of tests and ground; None for the usual.

    Returns
    -------
    interpretation : Interpretation
        All tests.
    """
    said = Choices() if choices is None else choices
    column = _column(scenario, said)

    def stress(sheet: Sheet) -> float | None:
        return None if column is None else column.stress_at(sheet.place.depth)

    oedometers = tuple(interpreted_oedometer(one, stress(one)) for one in sheets.oedometers)
    yields = _yields(oedometers, column)
    triaxials = tuple(
        interpreted_triaxial(one, stress(one), failure=said.failure, ocr=_ocr(one, yields, column))
        for one in sheets.triaxials
    )
    vanes = tuple(interpreted_vane(one, corrected=said.vane_corrected) for one in sheets.vanes)
    cones = tuple(interpreted_cone(one, column) for one in sheets.cones)
    layers = _by_layer(oedometers, triaxials, column)
    ratios = tuple(_ratio(name, *tests, yields.get(name)) for name, tests in layers.items() if tests[1])
    results: list[Result] = [*oedometers, *triaxials, *vanes, *cones]
    singles = [
        replace(row, layer=row.layer or ground_of(row.depth, one.sheet.place, column))
        for one in results
        for row in one.observations()
    ]
    singles += [row for ratio in ratios for row in _ratio_rows(ratio, triaxials)]
    of_clay, aside = _of_clay(singles, column)
    grounds = [one.layer for one in of_clay]
    return Interpretation(
        column=column,
        choices=said,
        oedometers=oedometers,
        triaxials=triaxials,
        vanes=vanes,
        cones=cones,
        friction=_friction(layers),
        strength_ratios=ratios,
        observations=flagged(unusual_flagged(_told_where(of_clay, column)), grounds),
        remarks=(*sheets.remarks, *_remarks(results, ratios), *aside),
    )


def _column(scenario: "Scenario | None", choices: Choices) -> GroundColumn | None:
    if scenario is not None:
        return scenario_column(scenario)
    if choices.unit_weight is None:
        return None
    return assumed_column(choices.unit_weight, choices.water_table)


def ground_of(depth: float, place: Place, column: GroundColumn | None) -> str:
    """Return the ground that a number belongs to.

    Parameters
    ----------
    depth : float, [m]
        Of the number.
    place : Place
        Of the sheet.
    column : GroundColumn or None
        Layers of the scenario.

    Returns
    -------
    layer : str
        Of a specimen the layer that bears the name its file gives, if there is one; else the one at the
        depth; without layers the name the file gives; empty where not known.
    """
    if column is None or not column.layers:
        return place.stratum or "" if depth == place.depth else ""
    named = depth == place.depth and any(name == place.stratum for name, _, _ in column.layers)
    return place.stratum if named and place.stratum else column.layer_at(depth)


_Tests = tuple[list[OedometerResult], list[TriaxialResult]]


def _by_layer(
    oedometers: Sequence[OedometerResult], triaxials: Sequence[TriaxialResult], column: GroundColumn | None
) -> dict[str, _Tests]:
    """Sort specimens by layer, or by the name their file gives the ground where layers are not known."""
    found: dict[str, _Tests] = {}
    specimens: list[OedometerResult | TriaxialResult] = [*oedometers, *triaxials]
    for one in specimens:
        place = one.sheet.place
        name = ground_of(place.depth, place, column)
        tests = found.setdefault(name, ([], []))
        if isinstance(one, OedometerResult):
            tests[0].append(one)
        else:
            tests[1].append(one)
    return found


def _yields(oedometers: Sequence[OedometerResult], column: GroundColumn | None) -> dict[str, YieldProfile]:
    """Return preconsolidation stress with depth for each ground whose oedometer tests give it."""
    profiles = {
        name: yield_profile(tests, column) for name, (tests, _) in _by_layer(oedometers, (), column).items()
    }
    return {name: one for name, one in profiles.items() if one is not None}


def _ocr(sheet: TriaxialSheet, yields: dict[str, YieldProfile], column: GroundColumn | None) -> float | None:
    profile = yields.get(ground_of(sheet.place.depth, sheet.place, column))
    if profile is None or not np.isfinite(sheet.axial_stress):
        return None
    stress = profile.stress(sheet.place.depth)
    return max(stress / sheet.axial_stress, 1.0) if stress > 0.0 else None


def _friction(layers: dict[str, _Tests]) -> tuple[PooledFriction, ...]:
    found = [pooled_friction(name, tests[1], by) for name, tests in layers.items() for by in _FAILURES]
    return tuple(one for one in found if one is not None)


def _ratio(
    name: str,
    oedometers: list[OedometerResult],
    triaxials: list[TriaxialResult],
    profile: YieldProfile | None,
) -> StrengthRatio:
    if profile is None:
        return strength_ratio(name, triaxials, oedometers, None)
    error = profile.relative_error
    return strength_ratio(name, triaxials, oedometers, profile.stress, stress_error=error)


def _ratio_rows(ratio: StrengthRatio, triaxials: Sequence[TriaxialResult]) -> list[Observation]:
    """Return what tests of a layer give together: of one alone under its name, else at their mean depth."""
    places = [one.sheet.place for one in triaxials if one.sheet.test in ratio.tests]
    if not places:
        return []
    mean = Place(hole="", depth=float(np.mean([one.depth for one in places])))
    test = (TOGETHER.join(ratio.tests), places[0] if len(places) == 1 else mean)
    words = {
        "su_ratio": "consolidated under equal stresses, which gives more than as in the ground",
        "Lambda": "from specimens consolidated under equal stresses",
    }
    rows = []
    for parameter, found in (("su_ratio", ratio.ratio), ("Lambda", ratio.exponent)):
        if found is not None and found.value > 0.0:
            flag = words[parameter] if ratio.isotropic else ""
            row = observation("triaxial", test, parameter, found.value, found.standard_error, flag=flag)
            rows.append(replace(row, layer=ratio.layer))
    return rows


def _of_clay(rows: list[Observation], column: GroundColumn | None) -> tuple[list[Observation], list[str]]:
    """Leave out of the evidence what was observed in ground that the models have no such number for."""
    granular = () if column is None else column.granular
    counts: dict[tuple[str, str], int] = {}
    for one in rows:
        if one.layer in granular:
            counts[one.test, one.layer] = counts.get((one.test, one.layer), 0) + 1
    remarks = [
        f"{test}: what it gave in {layer}, which is no clay, is shown but is no evidence (rows: {count})"
        for (test, layer), count in counts.items()
    ]
    return [one for one in rows if one.layer not in granular], remarks


def _told_where(rows: list[Observation], column: GroundColumn | None) -> list[Observation]:
    """Flag numbers from where the scenario has no layer."""
    if column is None or not column.layers:
        return [replace(one, layer="") for one in rows]
    lost = "no layer of the scenario at this depth"
    return [
        one if one.layer else replace(one, flag="; ".join(part for part in (one.flag, lost) if part))
        for one in rows
    ]


def _remarks(
    results: Sequence[Result],
    ratios: Sequence[StrengthRatio],
) -> list[str]:
    told = [f"{one.sheet.origin}: {one.sheet.test}: {words}" for one in results for words in one.remarks]
    told += [f"{ratio.layer or 'triaxial tests'}: {words}" for ratio in ratios for words in ratio.remarks]
    return told
