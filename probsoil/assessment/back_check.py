"""Back-check: whether interpreted parameters give the test again that they came from.

Realisations of the parameters of a specimen are taken along the path of the test, through one element of
Modified Cam clay. Their band stands against the measured curve; where the curve leaves it, rules stated on
the theory page say what that looks like.
"""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.assessment.departures import departures
from probsoil.assessment.measured_bands import BandCurve, band_curve
from probsoil.assessment.specimen_parameters import SpecimenParameters
from probsoil.errors import ParameterError
from probsoil.ground.cam_clay import CamClay, ClayState, consolidated_state
from probsoil.ground.element_paths import (
    ElementPath,
    elastic_slope,
    oedometer_path,
    state_at_rest,
    triaxial_path,
)
from probsoil.laboratory.sheets import OedometerSheet, TriaxialSheet

if TYPE_CHECKING:
    import pandas as pd

_STAGE = 3  # of the random numbers, see DEVELOPERS.md


@dataclass(frozen=True, slots=True, kw_only=True)
class BackCheckOptions:
    """How a back-check is run.

    Attributes
    ----------
    realisations : int, [-]
        Number of draws of the parameters.
    seed : int, [-]
        Of the random numbers.
    poisson : float, [-]
        Poisson's ratio of the element.
    stress_error : float, [kPa]
        Standard deviation of a reading of deviator or pore pressure; a judgement.
    volume_error : float, [-]
        Standard deviation of a reading of volumetric strain; a judgement.
    """

    realisations: int = 500
    seed: int = 1
    poisson: float = 0.3
    stress_error: float = 0.5
    volume_error: float = 0.0005

    def __post_init__(self) -> None:
        if self.realisations < 20:
            raise ParameterError(
                f"realisations must be at least 20 for a band of 90 %; got {self.realisations}"
            )
        if not (self.stress_error >= 0.0 and self.volume_error >= 0.0):
            raise ParameterError("stress_error and volume_error must be at least 0")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class BackCheck:
    """A test beside the band of its own parameters.

    Attributes
    ----------
    test : str
        Name of the test.
    kind : str
        ``oedometer``, or the kind of the triaxial test.
    curves : tuple of BandCurve
        Void ratio; or deviator, then pore pressure or volumetric strain where measured.
    share_inside : float, [-]
        Share of the counted readings of all curves within the band; not a number without any.
    words : tuple of str
        Where the data leave the band and what that looks like; empty where they do not.
    parameters : SpecimenParameters
        What was drawn from.
    realisations : int, [-]
        Number of draws.
    without_answer : int, [-]
        Draws without an answer: kappa too near lambda, M beyond its range, or no radial stress left.
    dry_share : float, [-]
        Share of the others that yield first dry of critical.
    """

    test: str
    kind: str
    curves: tuple[BandCurve, ...]
    share_inside: float
    words: tuple[str, ...]
    parameters: SpecimenParameters
    realisations: int
    without_answer: int
    dry_share: float

    def to_frame(self) -> "pd.DataFrame":
        """Return one row per curve and reading.

        Returns
        -------
        frame : DataFrame
            Columns test, quantity, unit, at, measured, low, median, high, counted, inside.
        """
        import pandas as pd  # deferred: slow to import

        rows = [row for curve in self.curves for row in curve.rows()]
        return pd.DataFrame([{"test": self.test} | row for row in rows])


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Drawn:
    """Realisations of the clay, and the generator of the errors of reading."""

    clay: CamClay
    preconsolidation: FloatArray
    generator: np.random.Generator
    options: BackCheckOptions

    def errors(self, count: int) -> FloatArray:
        return self.generator.standard_normal((self.clay.n_sample, count))


def back_check(
    sheet: OedometerSheet | TriaxialSheet,
    parameters: SpecimenParameters,
    *,
    void_ratio: float | None = None,
    options: BackCheckOptions | None = None,
    number: int = 0,
) -> BackCheck:
    """Run an element along the path of a test and hold the band against the readings.

    Parameters
    ----------
    sheet : OedometerSheet or TriaxialSheet
        The test as measured.
    parameters : SpecimenParameters
        What is known of the parameters of the specimen.
    void_ratio : float or None, [-]
        At the end of consolidation, for a triaxial sheet that does not say.
    options : BackCheckOptions or None
        How to run it; None for the usual.
    number : int, [-]
        Of the test among several: each has random numbers of its own.

    Returns
    -------
    check : BackCheck
        Bands, shares and words.

    Raises
    ------
    ParameterError
        If the test cannot be run again: an unconsolidated test, no void ratio, too few readings, strains
        against the kind of the test, or parameters of which no realisation has an answer.

    Notes
    -----
    Every parameter enters as the forecast uses it. Kappa is the slope of one-dimensional swelling: an
    oedometer is given the larger one against mean stress that swells so (`elastic_slope`), a triaxial test
    the stated one, so that its strength is that of Lambda = 1 - kappa/lambda. An oedometer starts at its
    first reading, with the ellipse of a history at rest up to the preconsolidation stress and a radial stress
    anywhere between that history's and the axial one. A triaxial test starts from its consolidation stresses
    and the ellipse through the preconsolidation stress with Jaky's earth pressure, as the forecast of
    strength has it.
    """
    said = BackCheckOptions() if options is None else options
    drawn = _drawn(parameters, said, number, one_dimensional=isinstance(sheet, OedometerSheet))
    if isinstance(sheet, OedometerSheet):
        path, curves = _oedometer(sheet, drawn)
    else:
        path, curves = _triaxial(sheet, drawn, void_ratio)
    answered = np.isfinite(path.void_ratio).all(axis=1)
    if not answered.any():
        raise ParameterError(f"{sheet.test}: no realisation of the parameters has an answer along this test")
    counted = [curve.inside[curve.counted] for curve in curves]
    inside: BoolArray = np.concatenate(counted)
    dry = float(path.dry[answered].mean())
    return BackCheck(
        test=sheet.test,
        kind="oedometer" if isinstance(sheet, OedometerSheet) else sheet.kind,
        curves=curves,
        share_inside=float(inside.mean()) if inside.size else float("nan"),
        words=departures(curves, parameters, dry_share=dry),
        parameters=parameters,
        realisations=said.realisations,
        without_answer=said.realisations - int(answered.sum()),
        dry_share=dry,
    )


def _drawn(
    parameters: SpecimenParameters, options: BackCheckOptions, number: int, *, one_dimensional: bool
) -> _Drawn:
    generator = np.random.default_rng(np.random.SeedSequence(options.seed, spawn_key=(_STAGE, number)))
    values = parameters.values(generator.standard_normal((options.realisations, 4)))
    values = values[(values[:, 1] < values[:, 0]) & (values[:, 2] < 3.0)]
    if not len(values):
        raise ParameterError("parameters: in no realisation is kappa below lambda and M below 3")
    lam, kap, m, stress = values.T
    if one_dimensional:
        kap = elastic_slope(kap, lam, m, poisson=options.poisson)
    usable = np.isfinite(kap)
    if not usable.any():
        raise ParameterError("parameters: in no realisation does the element swell as stated by kappa")
    clay = CamClay(lam=lam[usable], kap=kap[usable], m=m[usable], poisson=options.poisson)
    return _Drawn(clay=clay, preconsolidation=stress[usable], generator=generator, options=options)


def _oedometer(sheet: OedometerSheet, drawn: _Drawn) -> tuple[ElementPath, tuple[BandCurve, ...]]:
    if sheet.stress.size < 3:
        raise ParameterError(f"{sheet.test}: at least 3 increments are needed; got {sheet.stress.size}")
    path = oedometer_path(drawn.clay, _in_the_ring(sheet, drawn), sheet.stress)
    errors = sheet.reading_sd * drawn.errors(sheet.stress.size)
    # the first reading sets where the element starts, its error with it
    predicted = path.void_ratio + errors - errors[:, :1]
    counted = np.arange(sheet.stress.size) > 0
    return path, (band_curve("void_ratio", sheet.stress, sheet.void_ratio, predicted, counted=counted),)


def _in_the_ring(sheet: OedometerSheet, drawn: _Drawn) -> ClayState:
    """State at the first reading: nobody knows how much of the radial stress of its history was left."""
    axial = float(sheet.stress[0])
    history = state_at_rest(drawn.clay, axial, drawn.preconsolidation, sheet.void_ratio[0])
    left = drawn.generator.uniform(size=drawn.clay.n_sample)
    radial = axial + left * (history.radial_stress - axial)
    return ClayState(
        mean_stress=(axial + 2.0 * radial) / 3.0,
        deviator=axial - radial,
        void_ratio=history.void_ratio,
        yield_size=history.yield_size,
    )


def _triaxial(
    sheet: TriaxialSheet, drawn: _Drawn, void_ratio: float | None
) -> tuple[ElementPath, tuple[BandCurve, ...]]:
    start_void_ratio = sheet.initial_void_ratio
    if not np.isfinite(start_void_ratio):
        start_void_ratio = np.nan if void_ratio is None else void_ratio
    strain = _shear_strain(sheet, start_void_ratio)
    stresses = (sheet.axial_stress, sheet.radial_stress)
    state = consolidated_state(drawn.clay, stresses, drawn.preconsolidation, start_void_ratio)
    drained, options = sheet.kind[2] == "D", drawn.options
    path = triaxial_path(drawn.clay, state, strain, drained=drained)
    readings = [("deviator", sheet.deviator, path.deviator, options.stress_error)]
    if drained:
        readings.append(
            ("volumetric_strain", sheet.volumetric_strain, path.volumetric_strain, options.volume_error)
        )
    else:
        change = path.pore_pressure_change
        readings.append(("pore_pressure_change", sheet.pore_pressure_change, change, options.stress_error))
    curves = []
    for name, measured, predicted, error in readings:
        noise = error * drawn.errors(strain.size)
        if np.isfinite(measured).any():
            counted = np.isfinite(measured) & (strain != 0.0)
            curves.append(band_curve(name, sheet.axial_strain, measured, predicted + noise, counted=counted))
    return path, tuple(curves)


def _shear_strain(sheet: TriaxialSheet, void_ratio: float) -> FloatArray:
    """Strains of the sheet once it is known that the test can be run again."""
    if sheet.kind == "UU":
        raise ParameterError(f"{sheet.test}: an unconsolidated test states no effective stress to start from")
    if not (sheet.axial_stress > 0.0 and sheet.radial_stress > 0.0):
        raise ParameterError(f"{sheet.test}: stresses at the end of consolidation must be above 0")
    if not void_ratio > 0.0:
        raise ParameterError(f"{sheet.test}: the void ratio after consolidation is not known; give one")
    sign = -1.0 if sheet.kind.endswith("E") else 1.0
    strain = sign * np.maximum(sign * sheet.axial_strain, 0.0)
    if not (strain != 0.0).sum() >= 3:
        raise ParameterError(
            f"{sheet.test}: a {sheet.kind} test needs at least 3 readings with "
            f"{'negative' if sign < 0.0 else 'positive'} axial strain"
        )
    return np.asarray(strain)
