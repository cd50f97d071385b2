"""Test sheets as they were read: what was measured, where, and in which row of which file.

Readings keep the units of the trade's sheets (minutes, millimetres) where a checker would hold them against
the paper; stresses are kPa and depths m as everywhere. Nothing here is interpreted.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from probsoil._typing import FloatArray
from probsoil.errors import ShapeError

TriaxialKind = Literal["CIUC", "CAUC", "CIUE", "CAUE", "CIDC", "CADC", "UU"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Origin:
    """Where a sheet stands.

    Attributes
    ----------
    file : str
        Name of the file as given.
    row : int, [-]
        First row (line) of the sheet, counted from 1 with the headings.
    """

    file: str
    row: int

    def __str__(self) -> str:
        return f"{self.file}, row {self.row}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """Where in the ground a specimen or profile was taken.

    Attributes
    ----------
    hole : str
        Borehole or sounding.
    depth : float, [m]
        Below ground level; of a profile, the depth of its first reading.
    x, y : float or None, [m]
        Plan position in the grid of the site; None where not given.
    stratum : str or None
        Name of the ground as the file gives it; None where not given.
    """

    hole: str
    depth: float
    x: float | None = None
    y: float | None = None
    stratum: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TimeReadings:
    """Compression against time within one increment.

    Attributes
    ----------
    time : ndarray, shape (n,), [min]
        Since the increment was applied, rising.
    compression : ndarray, shape (n,), [mm]
        Of the specimen, positive when it grows shorter, from the reading before the increment.
    """

    time: FloatArray
    compression: FloatArray

    def __post_init__(self) -> None:
        _own_columns(self, ("time", "compression"))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class OedometerSheet:
    """Stepwise loaded one-dimensional compression.

    Attributes
    ----------
    test : str
        Name of the test, unique within the site.
    place : Place
        Where the specimen was taken.
    origin : Origin
        Where the sheet stands.
    initial_void_ratio : float, [-]
        Before loading.
    initial_height : float, [mm]
        Of the specimen.
    two_way : bool
        Whether water leaves at both faces.
    stress : ndarray, shape (n,), [kPa]
        Effective vertical stress at the end of each increment, in the order tested, unloading too.
    void_ratio : ndarray, shape (n,), [-]
        At the end of each increment.
    reading_sd : float, [-]
        Standard deviation of the reading error of a void ratio; 0 where the sheet does not say.
    time_readings : tuple of TimeReadings or None
        One per increment; None where there are none.
    reported_preconsolidation : float or None, [kPa]
        As the laboratory states it: shown beside, never used.
    reported_cv : ndarray, shape (n,), [m2/year]
        As the laboratory states it per increment, not a number where it does not.
    """

    test: str
    place: Place
    origin: Origin
    initial_void_ratio: float
    initial_height: float
    two_way: bool = True
    stress: FloatArray
    void_ratio: FloatArray
    reading_sd: float = 0.0
    time_readings: tuple[TimeReadings | None, ...] = ()
    reported_preconsolidation: float | None = None
    reported_cv: FloatArray

    def __post_init__(self) -> None:
        _own_columns(self, ("stress", "void_ratio", "reported_cv"))
        if self.time_readings and len(self.time_readings) != self.stress.size:
            raise ShapeError(
                f"time_readings: {len(self.time_readings)} for {self.stress.size} increments; one each"
            )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TriaxialSheet:
    """One triaxial specimen.

    Attributes
    ----------
    test : str
        Name of the test, unique within the site.
    place : Place
        Where the specimen was taken.
    origin : Origin
        Where the sheet stands.
    kind : str
        Consolidation isotropic (CI) or anisotropic (CA), then undrained (U) or drained (D), compression
        (C) or extension (E); or UU.
    axial_stress, radial_stress : float, [kPa]
        Effective stresses at the end of consolidation; of a UU test not a number.
    initial_void_ratio : float, [-]
        At the end of consolidation; not a number where not given.
    axial_strain : ndarray, shape (n,), [-]
        During shear, compression positive, rising in compression.
    deviator : ndarray, shape (n,), [kPa]
        Axial minus radial stress.
    pore_pressure_change : ndarray, shape (n,), [kPa]
        During shear; not a number where not measured (drained tests).
    volumetric_strain : ndarray, shape (n,), [-]
        During shear, compression positive; not a number where not measured (undrained tests).
    """

    test: str
    place: Place
    origin: Origin
    kind: TriaxialKind
    axial_stress: float
    radial_stress: float
    initial_void_ratio: float
    axial_strain: FloatArray
    deviator: FloatArray
    pore_pressure_change: FloatArray
    volumetric_strain: FloatArray

    def __post_init__(self) -> None:
        _own_columns(self, ("axial_strain", "deviator", "pore_pressure_change", "volumetric_strain"))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class VaneSheet:
    """Field vane tests of one hole.

    Attributes
    ----------
    test : str
        Name of the profile, unique within the site.
    place : Place
        Hole and first depth.
    origin : Origin
        Where the sheet stands.
    corrected : bool or None
        Whether the strengths already carry a correction for rate and anisotropy; None where not said.
    depth : ndarray, shape (n,), [m]
        Of each test.
    strength : ndarray, shape (n,), [kPa]
        Peak strength.
    remoulded : ndarray, shape (n,), [kPa]
        After many turns; not a number where not given.
    plasticity_index : ndarray, shape (n,), [%]
        Of the clay at that depth; not a number where not given.
    """

    test: str
    place: Place
    origin: Origin
    corrected: bool | None
    depth: FloatArray
    strength: FloatArray
    remoulded: FloatArray
    plasticity_index: FloatArray

    def __post_init__(self) -> None:
        _own_columns(self, ("depth", "strength", "remoulded", "plasticity_index"))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ConeSheet:
    """One cone sounding.

    Attributes
    ----------
    test : str
        Name of the sounding, unique within the site.
    place : Place
        Hole and first depth.
    origin : Origin
        Where the sheet stands.
    area_ratio : float or None, [-]
        Net area ratio of the cone; None where not given.
    depth : ndarray, shape (n,), [m]
        Of each reading, rising.
    cone_resistance : ndarray, shape (n,), [kPa]
        As measured, q_c.
    sleeve_friction : ndarray, shape (n,), [kPa]
        Not a number where not given.
    pore_pressure : ndarray, shape (n,), [kPa]
        Behind the cone, u_2; not a number where not given.
    """

    test: str
    place: Place
    origin: Origin
    area_ratio: float | None
    depth: FloatArray
    cone_resistance: FloatArray
    sleeve_friction: FloatArray
    pore_pressure: FloatArray

    def __post_init__(self) -> None:
        _own_columns(self, ("depth", "cone_resistance", "sleeve_friction", "pore_pressure"))


@dataclass(frozen=True, slots=True, kw_only=True)
class SiteSheets:
    """All sheets of one site.

    Attributes
    ----------
    oedometers, triaxials, vanes, cones : tuple
        Sheets of each kind, in the order read.
    remarks : tuple of str
        What a reader let pass and the user should know, each with file and row.
    """

    oedometers: tuple[OedometerSheet, ...] = ()
    triaxials: tuple[TriaxialSheet, ...] = ()
    vanes: tuple[VaneSheet, ...] = ()
    cones: tuple[ConeSheet, ...] = ()
    remarks: tuple[str, ...] = ()


def _own_columns(sheet: object, names: tuple[str, ...]) -> None:
    """Give a frozen sheet its own read-only columns of one length."""
    columns = [np.array(getattr(sheet, name), dtype=np.float64) for name in names]
    for name, column in zip(names, columns, strict=True):
        if column.shape != (columns[0].size,):
            raise ShapeError(f"{name}: {column.shape} is not ({columns[0].size},), that of {names[0]}")
        column.setflags(write=False)
        object.__setattr__(sheet, name, column)
