"""Test sheets of invented specimens: the element with errors of reading, or with something wrong."""

import numpy as np

from probsoil.assessment.specimen_parameters import specimen_parameters
from probsoil.ground.cam_clay import CamClay, ClayState, consolidated_state
from probsoil.ground.element_paths import elastic_slope, oedometer_path, state_at_rest, triaxial_path
from probsoil.laboratory.sheets import OedometerSheet, Origin, Place, TriaxialSheet

MEAN = np.array([0.30, 0.045, 1.05, 60.0])
SD = np.array([0.036, 0.009, 0.06, 9.0])
CORRELATION = np.array(
    [[1.0, 0.5, 0.0, 0.0], [0.5, 1.0, 0.0, 0.0], [0.0, 0.0, 1.0, 0.2], [0.0, 0.0, 0.2, 1.0]]
)
KNOWN = specimen_parameters(MEAN, SD, CORRELATION)
READING = 0.003
STRESSES = np.array(
    [6.0, 12.5, 25.0, 50.0, 100.0, 200.0, 100.0, 50.0, 100.0, 200.0, 400.0, 800.0, 200.0, 50.0]
)
STRAINS = np.array([0.0005, 0.001, 0.002, 0.0035, 0.005, 0.0075, 0.01, 0.015, 0.02, 0.03, 0.05, 0.08, 0.12])


def clay(values: np.ndarray, *, one_dimensional: bool = False) -> CamClay:
    lam, kap, m, _ = np.atleast_2d(values).T
    return CamClay(lam=lam, kap=elastic_slope(kap, lam, m) if one_dimensional else kap, m=m)


def oedometer(void_ratio: np.ndarray, stress: np.ndarray = STRESSES, **more: float) -> OedometerSheet:
    return OedometerSheet(
        test="B1-2",
        place=Place(hole="B1", depth=5.0),
        origin=Origin(file="oedometer.csv", row=2),
        initial_void_ratio=void_ratio[0] + 0.02,
        initial_height=20.0,
        stress=stress,
        void_ratio=void_ratio,
        reading_sd=READING,
        reported_cv=np.full(stress.size, np.nan),
        **more,
    )


def void_ratios(values: np.ndarray, left: np.ndarray | float = 0.5) -> np.ndarray:
    """Void ratios of the element, one row per specimen, of which a share of the radial stress was left."""
    one = clay(values, one_dimensional=True)
    history = state_at_rest(one, STRESSES[0], np.atleast_2d(values)[:, 3], 1.8)
    radial = STRESSES[0] + left * (history.radial_stress - STRESSES[0])
    start = ClayState(
        mean_stress=(STRESSES[0] + 2.0 * radial) / 3.0,
        deviator=STRESSES[0] - radial,
        void_ratio=history.void_ratio,
        yield_size=history.yield_size,
    )
    found = oedometer_path(one, start, STRESSES).void_ratio
    return found[0] if values.ndim == 1 else found


def triaxial(
    deviator: np.ndarray, kind: str = "CAUC", stresses: tuple[float, float] = (45.0, 30.0), **more: object
) -> TriaxialSheet:
    unknown = np.full(STRAINS.size, np.nan)
    columns = {"pore_pressure_change": unknown, "volumetric_strain": unknown, "initial_void_ratio": 1.7}
    columns["axial_strain"] = STRAINS
    return TriaxialSheet(
        test="B1-3",
        place=Place(hole="B1", depth=5.5),
        origin=Origin(file="triaxial.csv", row=2),
        kind=kind,
        axial_stress=stresses[0],
        radial_stress=stresses[1],
        deviator=deviator,
        **(columns | more),
    )


def sheared(
    values: np.ndarray, kind: str = "CAUC", stresses: tuple[float, float] = (45.0, 30.0)
) -> TriaxialSheet:
    """Sheet of the element itself."""
    return sheets_of(np.atleast_2d(values), kind, stresses, error=0.0)[0]


def sheets_of(
    values: np.ndarray, kind: str, stresses: tuple[float, float], *, error: float
) -> list[TriaxialSheet]:
    """Sheets of many specimens, with errors of reading in kPa, a thousandth of it in strain."""
    many = clay(values)
    strain = -STRAINS if kind.endswith("E") else STRAINS
    state = consolidated_state(many, stresses, values[:, 3], 1.7)
    path = triaxial_path(many, state, strain, drained=kind[2] == "D")
    noise = error * np.random.default_rng(21).standard_normal((2, *path.deviator.shape))
    name, second, unit = (
        ("volumetric_strain", path.volumetric_strain, 1e-3)
        if kind[2] == "D"
        else ("pore_pressure_change", path.pore_pressure_change, 1.0)
    )
    rows = zip(path.deviator + noise[0], second + unit * noise[1], strict=True)
    return [
        triaxial(deviator, kind, stresses, axial_strain=strain, **{name: other}) for deviator, other in rows
    ]
