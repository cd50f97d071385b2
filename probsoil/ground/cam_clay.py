"""Modified Cam clay: its parameters, states of an element, and the yield ellipse."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.ground._checks import checked

_OUTSIDE = 1e-9  # share of the yield size by which rounding may place a state outside its ellipse


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class CamClay:
    r"""Parameters of Modified Cam clay, one set per realisation.

    Attributes
    ----------
    lam, kap : ndarray, shape (n,), [-]
        Slopes of void ratio against ln p', virgin and elastic; `kap` below `lam`.
    m : ndarray, shape (n,), [-]
        Slope M of the critical state line in triaxial compression, below 3.
    m_extension : ndarray, shape (n,), [-]
        The same in triaxial extension, below 1.5. If not given, that of the friction angle which
        belongs to `m`, :math:`3M/(3 + M)`.
    poisson : ndarray, shape (n,), [-]
        Poisson's ratio of the elastic part, from 0 to below 0.5; 0.3 if not given.

    Raises
    ------
    ParameterError
        If a number is out of its range.
    ShapeError
        If the numbers of realisations differ.

    References
    ----------
    .. [1] K. H. Roscoe and J. B. Burland, On the generalised stress-strain behaviour of "wet" clay, in
       Engineering Plasticity. Cambridge University Press, 1968 (from memory, not opened).
    """

    lam: FloatArray
    kap: FloatArray
    m: FloatArray
    m_extension: FloatArray | None = None
    poisson: ArrayLike = 0.3

    def __post_init__(self) -> None:
        lam, kap = checked("lam", self.lam, above=0.0), checked("kap", self.kap, above=0.0)
        m, poisson = checked("m", self.m, above=0.0), checked("poisson", self.poisson, at_least=0.0)
        given = 3.0 * m / (3.0 + m) if self.m_extension is None else self.m_extension
        extension = checked("m_extension", given, above=0.0)
        _below("m", m, 3.0)
        _below("m_extension", extension, 1.5)
        _below("poisson", poisson, 0.5)
        _own(self, ("lam", "kap", "m", "m_extension", "poisson"), (lam, kap, m, extension, poisson))
        if (self.kap >= self.lam).any():
            raise ParameterError("kap must be below lam")

    @property
    def n_sample(self) -> int:
        """Number of realisations [-]."""
        return int(self.lam.size)

    @property
    def shear_to_bulk(self) -> FloatArray:
        """Elastic shear over bulk modulus [-], shape (n,): constant, as Poisson's ratio is."""
        nu = np.asarray(self.poisson)
        return np.asarray(1.5 * (1.0 - 2.0 * nu) / (1.0 + nu))

    def slope(self, stress_ratio: FloatArray) -> FloatArray:
        """Critical state slope on the side of a stress ratio.

        Parameters
        ----------
        stress_ratio : ndarray, shape (n,) or (n, k), [-]
            q/p', negative in extension.

        Returns
        -------
        slope : ndarray, shape of `stress_ratio`, [-]
            `m` or `m_extension`.
        """
        compression, extension = self.m, np.asarray(self.m_extension)
        if stress_ratio.ndim > 1:
            compression, extension = compression[:, None], extension[:, None]
        return np.where(stress_ratio < 0.0, extension, compression)

    def ellipse_ratio(self, stress_ratio: FloatArray) -> FloatArray:
        r"""Size of the ellipse through a state, over its mean effective stress.

        Parameters
        ----------
        stress_ratio : ndarray, shape (n,) or (n, k), [-]
            q/p', negative in extension.

        Returns
        -------
        ratio : ndarray, shape of `stress_ratio`, [-]
            :math:`p'_c/p' = 1 + (q/p')^2/M^2`.
        """
        share = stress_ratio / self.slope(stress_ratio)
        return np.asarray(1.0 + share * share)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ClayState:
    """State of one element, one per realisation.

    Attributes
    ----------
    mean_stress : ndarray, shape (n,), [kPa]
        Mean effective stress p', above zero; not a number where the clay has no answer.
    deviator : ndarray, shape (n,), [kPa]
        Axial less radial effective stress q, negative in extension.
    void_ratio : ndarray, shape (n,), [-]
        e.
    yield_size : ndarray, shape (n,), [kPa]
        p'c, where the yield ellipse meets the axis of p'.

    Raises
    ------
    ParameterError
        If a number is out of its range.
    ShapeError
        If the numbers of realisations differ.
    """

    mean_stress: FloatArray
    deviator: FloatArray
    void_ratio: FloatArray
    yield_size: FloatArray

    def __post_init__(self) -> None:
        names = ("mean_stress", "deviator", "void_ratio", "yield_size")
        _own(self, names, [np.asarray(getattr(self, name), dtype=np.float64) for name in names])
        known = ~np.isnan(self.mean_stress)
        for name, low in zip(names, (0.0, None, 0.0, 0.0), strict=True):
            checked(name, getattr(self, name)[known], above=low)

    @property
    def axial_stress(self) -> FloatArray:
        """Axial effective stress [kPa], shape (n,)."""
        return np.asarray(self.mean_stress + 2.0 / 3.0 * self.deviator)

    @property
    def radial_stress(self) -> FloatArray:
        """Radial effective stress [kPa], shape (n,)."""
        return np.asarray(self.mean_stress - self.deviator / 3.0)


def isotropic_state(
    clay: CamClay, mean_stress: ArrayLike, overconsolidation: ArrayLike, void_ratio: ArrayLike
) -> ClayState:
    """Return the state of a specimen consolidated, and perhaps swollen, under equal stress all round.

    Parameters
    ----------
    clay : CamClay
        The clay.
    mean_stress : array_like, shape (n,) or (), [kPa]
        Present mean effective stress p'0.
    overconsolidation : array_like, shape (n,) or (), [-]
        R, greatest mean effective stress over the present one, at least 1.
    void_ratio : array_like, shape (n,) or (), [-]
        Present void ratio.

    Returns
    -------
    state : ClayState
        With q = 0.

    Raises
    ------
    ParameterError
        If a number is out of its range.
    """
    ratio = checked("overconsolidation", overconsolidation, at_least=1.0)
    one = np.ones(clay.n_sample)
    stress = checked("mean_stress", mean_stress, above=0.0) * one
    return ClayState(
        mean_stress=stress,
        deviator=0.0 * one,
        void_ratio=one * np.asarray(void_ratio),
        yield_size=stress * ratio,
    )


def consolidated_state(
    clay: CamClay,
    stresses: tuple[ArrayLike, ArrayLike],
    preconsolidation_stress: ArrayLike,
    void_ratio: ArrayLike,
    *,
    k0: ArrayLike | None = None,
) -> ClayState:
    r"""Return the state of a specimen consolidated to stated stresses after a history at rest.

    Parameters
    ----------
    clay : CamClay
        The clay.
    stresses : tuple of two array_like, shape (n,) or (), [kPa]
        Axial and radial effective stress now.
    preconsolidation_stress : array_like, shape (n,) or (), [kPa]
        Greatest axial stress of the history at rest.
    void_ratio : array_like, shape (n,) or (), [-]
        Present void ratio.
    k0 : array_like, shape (n,) or (), or None, [-]
        Radial over axial effective stress at `preconsolidation_stress`; if None that of Jaky,
        :math:`1 - \sin\phi'` with the friction angle of M.

    Returns
    -------
    state : ClayState
        Its ellipse passes through the stresses at preconsolidation, or through the present ones where
        those lie outside: such a specimen is normally consolidated.

    Raises
    ------
    ParameterError
        If a number is out of its range.

    Notes
    -----
    With Jaky's ratio the undrained strength of a normally consolidated specimen is Wroth's, as in
    `normally_consolidated_strength_ratio`.

    References
    ----------
    .. [1] J. Jaky, The coefficient of earth pressure at rest, 1944 (from memory, not opened).
    """
    one = np.ones(clay.n_sample)
    axial, radial = (checked("stresses", stress, above=0.0) * one for stress in stresses)
    largest = checked("preconsolidation_stress", preconsolidation_stress, above=0.0) * one
    ratio = 1.0 - 3.0 * clay.m / (6.0 + clay.m) if k0 is None else checked("k0", k0, above=0.0) * one
    past = largest * (1.0 + 2.0 * ratio) / 3.0
    past_size = past * clay.ellipse_ratio(largest * (1.0 - ratio) / past)
    mean, deviator = (axial + 2.0 * radial) / 3.0, axial - radial
    size = np.maximum(past_size, mean * clay.ellipse_ratio(deviator / mean))
    return ClayState(
        mean_stress=mean, deviator=deviator, void_ratio=one * np.asarray(void_ratio), yield_size=size
    )


def ellipse_excess(clay: CamClay, state: ClayState) -> FloatArray:
    r"""Return by how much a state lies outside its yield ellipse.

    Parameters
    ----------
    clay : CamClay
        The clay.
    state : ClayState
        State of each realisation.

    Returns
    -------
    excess : ndarray, shape (n,), [-]
        Size of the ellipse through the stresses over the yield size, less 1: zero on the ellipse,
        negative within.

    Notes
    -----
    The ellipse is :math:`q^2 = M^2 p' (p'_c - p')`.
    """
    return np.asarray(
        state.mean_stress * clay.ellipse_ratio(state.deviator / state.mean_stress) / state.yield_size - 1.0
    )


def check_within(clay: CamClay, state: ClayState) -> None:
    """Refuse a state outside its yield ellipse or of another number of realisations.

    Parameters
    ----------
    clay : CamClay
        The clay.
    state : ClayState
        State of each realisation.

    Raises
    ------
    ParameterError
        If a state lies outside its ellipse.
    ShapeError
        If clay and state differ in their number of realisations.
    """
    if state.mean_stress.size != clay.n_sample:
        raise ShapeError(f"state: {state.mean_stress.size} realisations; the clay has {clay.n_sample}")
    outside = ellipse_excess(clay, state) > _OUTSIDE
    if outside.any():
        raise ParameterError(
            f"yield_size must not be below that of the ellipse through the stresses; got "
            f"{state.yield_size[outside][0]:g} ({int(outside.sum())} of {outside.size} values)"
        )


def check_compressed(state: ClayState) -> None:
    """Refuse a state without axial or radial effective stress.

    Parameters
    ----------
    state : ClayState
        State of each realisation.

    Raises
    ------
    ParameterError
        If a stress is not above zero.
    """
    for name in ("axial_stress", "radial_stress"):
        least = np.nanmin(getattr(state, name), initial=np.inf)
        if least <= 0.0:
            raise ParameterError(f"{name} of a state must be above 0; got {least:g}")


def _below(name: str, values: FloatArray, limit: float) -> None:
    if (values >= limit).any():
        raise ParameterError(f"{name} must be below {limit:g}; got {values.max():g}")


def _own(
    record: object, names: tuple[str, ...], columns: "list[FloatArray] | tuple[FloatArray, ...]"
) -> None:
    """Give a frozen record its own read-only columns of one length; single numbers are repeated."""
    try:
        alike = np.broadcast_arrays(*(np.atleast_1d(column) for column in columns))
    except ValueError:
        shapes = ", ".join(f"{name} {np.shape(column)}" for name, column in zip(names, columns, strict=True))
        raise ShapeError(f"one value per realisation each; got {shapes}") from None
    if alike[0].ndim != 1:
        raise ShapeError(f"{names[0]} must have shape (n,); got {alike[0].shape}")
    for name, column in zip(names, alike, strict=True):
        own = np.array(column, dtype=np.float64)
        own.setflags(write=False)
        object.__setattr__(record, name, own)
