"""One element of Modified Cam clay taken along the paths of the laboratory.

Oedometer, and drained and undrained triaxial tests in compression and extension, from any state; vectorised
over realisations. Equations, error and limits: docs/theory/cam_clay_element.md.
"""

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.ground._checks import checked
from probsoil.ground.cam_clay import CamClay, ClayState, check_compressed, check_within
from probsoil.ground.cam_clay_flow import N_PANEL
from probsoil.ground.element_flows import stress_ratio_at_rest
from probsoil.ground.element_steps import DrainedStep, OneDimensionalStep, Travelled, UndrainedStep

if TYPE_CHECKING:
    import pandas as pd

_SLOPE_STEPS = 20  # of a contraction; a few are enough unless kappa is near lambda


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ElementPath(Travelled):
    """Answer of one element along a path, for every realisation.

    Attributes
    ----------
    mean_stress, deviator, yield_size, void_ratio, dry, jumps
        As in `Travelled`, with shapes (n, n_point) and (n,).
    axial_strain, volumetric_strain : ndarray, shape (n, n_point), [-]
        Change of length and of volume over those at the start; compression positive.
    start : ClayState
        Where the path began.
    """

    axial_strain: FloatArray
    volumetric_strain: FloatArray
    start: ClayState

    @property
    def axial_stress(self) -> FloatArray:
        """Axial effective stress [kPa], shape (n, n_point)."""
        return np.asarray(self.mean_stress + 2.0 / 3.0 * self.deviator)

    @property
    def radial_stress(self) -> FloatArray:
        """Radial effective stress [kPa], shape (n, n_point)."""
        return np.asarray(self.mean_stress - self.deviator / 3.0)

    @property
    def pore_pressure_change(self) -> FloatArray:
        """Growth of pore pressure [kPa], shape (n, n_point), at constant total radial stress."""
        return np.asarray(self.start.radial_stress[:, None] - self.radial_stress)

    def to_frame(self) -> "pd.DataFrame":
        """Return one row per realisation and point.

        Returns
        -------
        frame : DataFrame
            Columns realisation, point, axial_strain, volumetric_strain, mean_stress, deviator, void_ratio,
            yield_size.
        """
        import pandas as pd  # deferred: slow to import

        names = ("axial_strain", "volumetric_strain", "mean_stress", "deviator", "void_ratio", "yield_size")
        n, n_point = self.mean_stress.shape
        place = {"realisation": np.repeat(np.arange(n), n_point), "point": np.tile(np.arange(n_point), n)}
        return pd.DataFrame(place | {name: getattr(self, name).ravel() for name in names})


def triaxial_path(
    clay: CamClay, state: ClayState, axial_strain: ArrayLike, *, drained: bool, n_panel: int = N_PANEL
) -> ElementPath:
    r"""Return the answer of an element sheared at constant radial total stress.

    Parameters
    ----------
    clay : CamClay
        The clay.
    state : ClayState
        Where the test begins; its axial and radial stresses above zero.
    axial_strain : array_like, shape (n_point,), [-]
        Shortening over initial length, all at least zero (compression) or all at most zero (extension).
    drained : bool
        Whether water leaves freely, so that the radial effective stress stays; if not, the volume stays.
    n_panel : int, [-]
        Panels of the integration.

    Returns
    -------
    path : ElementPath
        At those strains.

    Raises
    ------
    ParameterError
        If strains have both signs or reach 1, or a state lies outside its ellipse.
    ShapeError
        If clay and state differ in their number of realisations.

    Notes
    -----
    The logarithmic strain is integrated. Error of the integration below 1e-6 of the greatest stress.
    """
    log_strain, direction = _log_strain(axial_strain)
    check_within(clay, state)
    check_compressed(state)
    kind = DrainedStep if drained else UndrainedStep
    one = np.ones(clay.n_sample)
    gone = kind(clay=clay, state=state, direction=direction * one).travelled(
        log_strain * one[:, None], n_panel
    )
    return _joined(clay, state, [gone], axial_strain)


def oedometer_path(
    clay: CamClay, state: ClayState, axial_stress: ArrayLike, *, n_panel: int = N_PANEL
) -> ElementPath:
    r"""Return the answer of an element compressed and unloaded without radial strain.

    Parameters
    ----------
    clay : CamClay
        The clay.
    state : ClayState
        Where the test begins; its axial and radial stresses above zero.
    axial_stress : array_like, shape (n_point,), [kPa]
        Axial effective stresses in the order of the test, loading and unloading, above zero.
    n_panel : int, [-]
        Panels of the integration, for each run between reversals.

    Returns
    -------
    path : ElementPath
        At those stresses; not a number from where the radial stress would have to vanish.

    Raises
    ------
    ParameterError
        If a stress is not above zero, or a state lies outside its ellipse.
    ShapeError
        If clay and state differ in their number of realisations.

    Notes
    -----
    Error of the integration below 1e-6 of the greatest stress.
    """
    targets = np.atleast_1d(checked("axial_stress", axial_stress, above=0.0))
    check_within(clay, state)
    check_compressed(state)
    gone: list[Travelled] = []
    now = state
    with np.errstate(all="ignore"):  # realisations without an answer carry not-a-number along
        for run in _runs(targets):
            direction = np.where(run[-1] >= now.axial_stress, 1.0, -1.0)
            step = OneDimensionalStep(clay=clay, state=now, direction=direction)
            gone.append(step.to_stress(run + np.zeros((clay.n_sample, 1)), n_panel))
            now = gone[-1].last_state()
    return _joined(clay, state, gone, None)


def state_at_rest(
    clay: CamClay, axial_stress: ArrayLike, preconsolidation_stress: ArrayLike, void_ratio: ArrayLike
) -> ClayState:
    r"""Return the state of an element compressed at rest and unloaded at rest.

    Parameters
    ----------
    clay : CamClay
        The clay.
    axial_stress : array_like, shape (n,) or (), [kPa]
        Present axial effective stress.
    preconsolidation_stress : array_like, shape (n,) or (), [kPa]
        Greatest axial effective stress; where it is below the present one, the present one.
    void_ratio : array_like, shape (n,) or (), [-]
        Present void ratio.

    Returns
    -------
    state : ClayState
        Loaded again at rest it yields at the preconsolidation stress, unless unloading made it yield in
        extension; not a number where the clay has no answer.

    Raises
    ------
    ParameterError
        If a stress is not above zero.

    Notes
    -----
    The ratio of stresses on the virgin line is the one the model itself keeps (`earth_pressure_at_rest`),
    which is higher than Jaky's.
    """
    one = np.ones(clay.n_sample)
    stress = checked("axial_stress", axial_stress, above=0.0) * one
    largest = np.maximum(stress, checked("preconsolidation_stress", preconsolidation_stress, above=0.0))
    ratio = stress_ratio_at_rest(clay)
    mean = largest / (1.0 + ratio / 1.5)
    volume = 1.0 + checked("void_ratio", void_ratio, above=0.0) * one
    virgin = ClayState(
        mean_stress=mean,
        deviator=ratio * mean,
        void_ratio=volume - 1.0,
        yield_size=mean * clay.ellipse_ratio(ratio),
    )
    with np.errstate(all="ignore"):
        step = OneDimensionalStep(clay=clay, state=virgin, direction=-one)
        swollen = step.to_stress(stress[:, None], N_PANEL).last_state()
    return replace(swollen, void_ratio=volume - 1.0)


def earth_pressure_at_rest(clay: CamClay) -> FloatArray:
    r"""Return the ratio of radial to axial effective stress that virgin compression keeps.

    Parameters
    ----------
    clay : CamClay
        The clay.

    Returns
    -------
    k0 : ndarray, shape (n,), [-]
        :math:`K_0 = (3 - \eta)/(3 + 2\eta)`.

    Notes
    -----
    :math:`\eta` solves :math:`\eta(1+\nu)(1-\Lambda)/(3(1-2\nu)) + 3\eta\Lambda/(M^2-\eta^2) = 1`, which
    follows from the flow rule and no radial strain (derived on the theory page). It is higher than
    Jaky's :math:`1 - \sin\phi'`.

    References
    ----------
    .. [1] D. M. Wood, Soil Behaviour and Critical State Soil Mechanics. Cambridge University Press, 1990
       (from memory, not opened).
    """
    ratio = stress_ratio_at_rest(clay)
    return np.asarray((3.0 - ratio) / (3.0 + 2.0 * ratio))


def elastic_slope(
    swelling: ArrayLike, lam: ArrayLike, m: ArrayLike, *, poisson: ArrayLike = 0.3, unloading: float = 4.0
) -> FloatArray:
    r"""Return the kappa of the model that gives a measured slope of one-dimensional swelling.

    Parameters
    ----------
    swelling : array_like, shape (n,), [-]
        Rise of void ratio per unit of ln of the axial stress in an oedometer.
    lam, m : array_like, shape (n,), [-]
        Lambda and M.
    poisson : array_like, shape (n,) or (), [-]
        Poisson's ratio.
    unloading : float, [-]
        Axial stress before unloading over that after it, over which the slope was read.

    Returns
    -------
    kap : ndarray, shape (n,), [-]
        Slope against ln p'; not a number where none below `lam` gives the measured slope.

    Raises
    ------
    ParameterError
        If a number is out of its range.

    Notes
    -----
    Unloaded without radial strain the radial stress falls less than the axial one, so ln p' falls less than
    ln of the axial stress: kappa is larger than the slope, by about 1.7 for a fourfold unloading. Elastic
    from the virgin line, with the earth pressure of the model, which itself depends on kappa; a clay that
    yields in extension so soon (low M and Poisson's ratio) swells more.
    """
    slope, ones = checked("swelling", swelling, above=0.0), np.ones(np.shape(np.atleast_1d(swelling)))
    largest, m_all, nu = (np.asarray(one) * ones for one in (checked("lam", lam, above=0.0), m, poisson))
    kap = np.minimum(slope * ones, 0.99 * largest)
    for _ in range(_SLOPE_STEPS):
        clay = CamClay(lam=largest, kap=kap, m=m_all, poisson=nu)
        axial = 1.0 + stress_ratio_at_rest(clay) / 1.5  # over the mean stress, on the virgin line
        fallen = (1.0 - 1.0 / unloading) * axial / (1.0 + clay.shear_to_bulk / 0.75)
        wanted = slope * np.log(unloading) / -np.log1p(-np.minimum(fallen, 1.0))
        kap = np.minimum(wanted, 0.99 * largest)
    return np.where(wanted < 0.99 * largest, wanted, np.nan)


def _log_strain(axial_strain: ArrayLike) -> tuple[FloatArray, float]:
    strain = np.atleast_1d(checked("axial_strain", axial_strain))
    if strain.ndim != 1 or strain.size == 0:
        raise ShapeError(f"axial_strain must have shape (n_point,); got {strain.shape}")
    if (strain < 0.0).any() and (strain > 0.0).any():
        raise ParameterError("axial_strain must not change its sign: a test in compression or in extension")
    if (strain >= 1.0).any():
        raise ParameterError(f"axial_strain must be below 1; got {strain.max():g}")
    return np.abs(np.log1p(-strain)), -1.0 if (strain < 0.0).any() else 1.0


def _runs(targets: FloatArray) -> list[FloatArray]:
    """Split stresses where loading turns into unloading or back; the first stands alone.

    From a state of its own, each realisation may have to load or to unload to the first stress.
    """
    if targets.ndim != 1 or targets.size == 0:
        raise ShapeError(f"axial_stress must have shape (n_point,); got {targets.shape}")
    rest, change = targets[1:], np.sign(np.diff(targets))
    turns = np.flatnonzero(change[1:] * change[:-1] <= 0.0) + 1
    return [targets[:1], *(part for part in np.split(rest, turns) if part.size)]


def _joined(
    clay: CamClay, start: ClayState, gone: list[Travelled], axial_strain: ArrayLike | None
) -> ElementPath:
    mean, deviator, size, void_ratio = (
        np.concatenate([getattr(part, name) for part in gone], axis=1)
        for name in ("mean_stress", "deviator", "yield_size", "void_ratio")
    )
    origin = start.void_ratio[:, None]
    volumetric = (origin - void_ratio) / (1.0 + origin)
    given = volumetric if axial_strain is None else np.atleast_1d(np.asarray(axial_strain, dtype=np.float64))
    return ElementPath(
        mean_stress=mean,
        deviator=deviator,
        yield_size=size,
        void_ratio=void_ratio,
        axial_strain=given + np.zeros((clay.n_sample, 1)),
        volumetric_strain=volumetric,
        start=start,
        dry=np.any([part.dry for part in gone], axis=0),
        jumps=np.any([part.jumps for part in gone], axis=0),
    )
