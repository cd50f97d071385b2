"""Tests drawn from a known truth, fixed before any interpretation of them was seen.

Clay with a rounded yield, a steeper first branch than its loop, hysteresis on reloading, specimen-to-specimen
scatter that the sheet does not tell of, correlated from one increment to the next, and rounded dials.
"""

from dataclasses import dataclass, replace

import numpy as np
from compression_laws import Branches, first_loading, mean_slope

from probsoil.laboratory.sheets import (
    ConeSheet,
    OedometerSheet,
    Origin,
    Place,
    SiteSheets,
    TimeReadings,
    TriaxialSheet,
    VaneSheet,
)

PLACE = Place(hole="B1", depth=5.0)
ORIGIN = Origin(file="made up", row=1)
STRESSES = np.array(
    [10, 20, 40, 80, 160, 320, 160, 80, 40, 80, 160, 320, 640, 1280, 320, 80, 20], dtype=float
)
READING_SD, SCATTER_SD, SCATTER_CORRELATION = 0.002, 0.003, 0.3


@dataclass(frozen=True)
class Clay:
    """What a test should find."""

    lam: float
    kappa: float
    yield_stress: float


SHORT = np.array([12.5, 25, 50, 100, 200, 400, 800], dtype=float)
SMALL_STEPS = np.array([10, 20, 30, 45, 65, 90, 130, 190, 280, 400, 600, 900, 300, 75], dtype=float)


def oedometer(
    rng: np.random.Generator, law: str = "straight", stresses: np.ndarray = STRESSES
) -> tuple[OedometerSheet, Clay]:
    e0 = rng.normal(1.4, 0.15)
    lam = 0.30 * np.exp(0.2 * rng.standard_normal())
    kappa = lam * rng.uniform(0.08, 0.20)
    initial = kappa * rng.uniform(1.0, 1.6)
    yielding = 80.0 * np.exp(0.3 * rng.standard_normal())
    width = rng.uniform(0.05, 0.15)
    x = np.log(stresses)
    made = Branches(initial=initial, lam=lam, meeting=np.log(yielding), void_ratio=e0)
    shape = np.random.default_rng(int(1e9 * width))  # leaves the stream of the straight law as it was
    first, branches = first_loading(law, made, shape, width)
    greatest = np.maximum.accumulate(x)
    void_ratio = first(greatest) - kappa * (x - greatest)
    before = np.concatenate([[-np.inf], greatest[:-1]])
    reloading = (x <= before) & (np.diff(x, prepend=np.inf) > 0.0)
    rounded = (lam - kappa) * width * np.logaddexp(0.0, (x - greatest) / width)
    void_ratio = e0 + void_ratio - np.where(reloading, rounded, 0.0) - first(np.array(0.0))
    noise = rng.standard_normal(x.size)
    for k in range(1, x.size):
        noise[k] = SCATTER_CORRELATION * noise[k - 1] + np.sqrt(1.0 - SCATTER_CORRELATION**2) * noise[k]
    read = void_ratio + SCATTER_SD * noise + READING_SD * rng.standard_normal(x.size)
    sheet = OedometerSheet(
        test="O1",
        place=PLACE,
        origin=ORIGIN,
        initial_void_ratio=e0,
        initial_height=20.0,
        stress=stresses,
        void_ratio=read,
        reading_sd=READING_SD,
        reported_cv=np.full(x.size, np.nan),
    )
    mean = mean_slope(branches, made.meeting, float(x.max()))
    return sheet, Clay(lam=mean, kappa=kappa, yield_stress=yielding)


TIMES = np.array([0.0, 0.1, 0.25, 0.5, 1, 2, 4, 8, 15, 30, 60, 120, 240, 480, 1440])
_MODES = (2 * np.arange(200) + 1) * np.pi / 2


def degree(factor: np.ndarray) -> np.ndarray:
    """Terzaghi: parabola where the series needs many terms, else the series."""
    series = 1.0 - (2.0 / _MODES**2 * np.exp(-(_MODES**2) * factor[..., None])).sum(axis=-1)
    return np.where(factor < 0.01, 2.0 * np.sqrt(factor / np.pi), series)


def time_readings(
    rng: np.random.Generator, path: float = 9.0, dial: float = 0.002
) -> tuple[TimeReadings, float, float]:
    """Return readings, drainage path [mm] and cv [m2/year]: Terzaghi, initial compression, creep, dial."""
    cv = np.exp(rng.normal(np.log(0.8), 0.7))  # m2/year
    per_minute = cv * 1e6 / (365.25 * 1440.0) / path**2
    primary = rng.uniform(0.4, 1.6)
    initial = primary * rng.uniform(0.02, 0.10) * (TIMES > 0.0)
    creep = primary * rng.uniform(0.02, 0.08) * np.log10(1.0 + TIMES * per_minute / 1.1)
    noise = rng.normal(0.0, dial, TIMES.size)
    read = initial + primary * degree(per_minute * TIMES) + creep + noise
    read = np.round(read / 0.002) * 0.002
    read[0] = 0.0
    return TimeReadings(time=TIMES, compression=read), path, float(cv)


def triaxials(
    rng: np.random.Generator, n: int, stresses: tuple[float, float] = (60.0, 200.0), shape: str = "hyperbola"
) -> tuple[list[TriaxialSheet], float]:
    """Return undrained tests on specimens of one layer and its M: specimens differ, readings err.

    The stress ratio grows as a hyperbola, or as an exponential that is level after a third of the test.
    """
    grown = {
        "hyperbola": lambda at: at / (at + 0.003) * 1.003 / 1.0 / (0.12 / (0.12 + 0.003)),
        "exponential": lambda at: -np.expm1(-at / 0.008),
    }[shape]
    layer = 1.0 * np.exp(0.1 * rng.standard_normal())
    strain = np.array([0, 0.25, 0.5, 1, 2, 3, 4, 6, 8, 10, 12]) / 100.0
    sheets = []
    for k in range(n):
        own = layer * np.exp(0.05 * rng.standard_normal())
        p0 = rng.uniform(*stresses)
        mobilised = strain / (strain + 0.006)
        q = 0.5 * own * p0 * 1.05 * mobilised * (1.0 - 0.5 * strain)
        ratio = own * grown(strain)
        p = np.where(strain > 0.0, q / np.maximum(ratio, 1e-9), p0)
        u = p0 + q / 3.0 - p
        sheets.append(
            TriaxialSheet(
                test=f"T{k + 1}",
                place=PLACE,
                origin=ORIGIN,
                kind="CIUC",
                axial_stress=p0,
                radial_stress=p0,
                initial_void_ratio=1.2,
                axial_strain=strain,
                deviator=q + 0.5 * rng.standard_normal(q.size),
                pore_pressure_change=u + 0.5 * rng.standard_normal(q.size),
                volumetric_strain=np.full(q.size, np.nan),
            )
        )
    return sheets, float(layer)


def site() -> SiteSheets:
    """Return the sheets of an invented site: five oedometers with readings in time, triaxials, vane, cone."""
    oedometers = []
    for k in range(5):
        rng = np.random.default_rng(k)
        sheet, _ = oedometer(rng)
        rising = (0, 1, 2, 3, 4, 5, 12, 13)
        readings = tuple(time_readings(rng)[0] if one in rising else None for one in range(STRESSES.size))
        place = Place(hole=f"B{k + 1}", depth=2.5 + 1.2 * k, x=10.0 * k, y=0.0)
        oedometers.append(replace(sheet, test=f"O{k + 1}", place=place, time_readings=readings))
    specimens, _ = triaxials(np.random.default_rng(3), 6)
    depth = np.arange(2.0, 9.0, 0.5)
    vane = VaneSheet(
        test="V1",
        place=Place(hole="V1", depth=2.0),
        origin=ORIGIN,
        corrected=False,
        depth=depth,
        strength=15.0 + 2.0 * depth,
        remoulded=3.0 + 0.5 * depth,
        plasticity_index=np.full(depth.size, 45.0),
    )
    down = np.arange(0.5, 14.0, 0.05)
    cone = ConeSheet(
        test="C1",
        place=Place(hole="C1", depth=0.5),
        origin=ORIGIN,
        area_ratio=0.8,
        depth=down,
        cone_resistance=200.0 + 60.0 * down + 10.0 * np.random.default_rng(5).standard_normal(down.size),
        sleeve_friction=np.full(down.size, np.nan),
        pore_pressure=10.0 + 25.0 * down,
    )
    return SiteSheets(
        oedometers=tuple(oedometers),
        triaxials=tuple(
            replace(one, place=Place(hole="B1", depth=3.0 + 0.7 * k)) for k, one in enumerate(specimens)
        ),
        vanes=(vane,),
        cones=(cone,),
    )
