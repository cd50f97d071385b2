"""The invented site Tern Marsh: what its ground truly is, and what tests of it would read.

Modified Cam clay with yield rounded as in real specimens, point-to-point scatter, reading error, and figures
rounded as a laboratory rounds them. `marsh_files.py` writes the sheets; both are kept for the record, and a
test holds them to the files under `scenarios/tern_marsh/`.
"""

from dataclasses import dataclass

import numpy as np

SEED = 20260314
WATER_TABLE = 0.8  # m
WATER = 9.81  # kN/m3
READING_ERROR = 0.003  # of a void ratio
YIELD_WIDTH = 0.15  # of ln stress, over which yield is rounded
CONE_FACTOR = 14.0  # net cone resistance over undrained strength
PORE_RATIO = 0.55  # excess pore pressure behind the cone over net resistance
AREA_RATIO = 0.80
STRENGTH_RATIO = 0.24  # of normally consolidated clay
TIMES = (0.1, 0.25, 0.5, 1.0, 2.0, 4.0, 8.0, 15.0, 30.0, 60.0, 120.0, 240.0, 480.0, 1440.0)  # min
LOADS = (6, 12, 25, 50, 100, 200, 100, 50, 100, 200, 400, 800, 200, 50)  # kPa
STRAINS = (0.05, 0.1, 0.2, 0.35, 0.5, 0.75, 1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.5, 8.0, 10.0, 12.0)  # %
YEAR = 525960.0  # min


@dataclass(frozen=True, kw_only=True)
class Clay:
    """Truth of one layer; scatter as coefficients of variation from point to point."""

    name: str
    top: float
    base: float
    unit_weight: float
    void_ratio: float
    lam: float
    kappa: float
    overstress: float  # preconsolidation less in-situ stress, kPa
    slope: float  # M
    cv: float  # m2/year, virgin
    creep: float  # C_alpha over C_c
    plasticity: float  # %
    scatter_lambda: float = 0.12
    scatter_kappa: float = 0.18
    scatter_overstress: float = 0.20
    scatter_void_ratio: float = 0.05
    scatter_slope: float = 0.05
    scatter_cv: float = 0.35


CRUST = Clay(
    name="crust",
    top=0.0,
    base=1.4,
    unit_weight=17.6,
    void_ratio=1.15,
    lam=0.13,
    kappa=0.020,
    overstress=80.0,
    slope=1.15,
    cv=8.0,
    creep=0.03,
    plasticity=32.0,
)
SOFT = Clay(
    name="soft clay",
    top=1.4,
    base=7.2,
    unit_weight=15.4,
    void_ratio=2.05,
    lam=0.35,
    kappa=0.048,
    overstress=16.0,
    slope=1.05,
    cv=1.1,
    creep=0.042,
    plasticity=46.0,
)
LOWER = Clay(
    name="lower clay",
    top=7.2,
    base=11.8,
    unit_weight=16.6,
    void_ratio=1.50,
    lam=0.23,
    kappa=0.034,
    overstress=28.0,
    slope=1.10,
    cv=2.4,
    creep=0.038,
    plasticity=34.0,
)
CLAYS = (CRUST, SOFT, LOWER)
HOLES = {  # x, y, final depth [m]
    "BH1": (0.0, 0.0, 13.5),
    "BH2": (45.0, 6.0, 13.0),
    "BH3": (90.0, -4.0, 13.5),
    "CPT1": (22.0, 3.0, 12.6),
    "CPT2": (68.0, 1.0, 12.4),
}
OEDOMETERS = (  # hole, sample, depth [m], increments with readings in time
    ("BH1", "P1", 0.9, ()),
    ("BH1", "P2", 2.3, (5, 6)),
    ("BH1", "P3", 4.2, ()),
    ("BH1", "P4", 6.4, (6, 11)),
    ("BH1", "P5", 8.6, ()),
    ("BH2", "P1", 1.9, ()),
    ("BH2", "P2", 3.6, (5, 6, 11)),
    ("BH2", "P4", 8.1, (6, 11)),
    ("BH2", "P5", 10.4, ()),
    ("BH3", "P1", 2.8, ()),
    ("BH3", "P3", 5.6, (6,)),
    ("BH3", "P4", 9.5, ()),
)
TRIAXIALS = (  # hole, sample, depth [m], kind, radial stress of an isotropic test over that in situ
    ("BH1", "P3", 4.5, "CAUC", 0.0),
    ("BH1", "P5", 8.9, "CIUC", 2.5),
    ("BH2", "P2", 3.9, "CAUC", 0.0),
    ("BH2", "P3", 5.4, "CIUC", 3.0),
    ("BH2", "P5", 10.7, "CAUC", 0.0),
    ("BH3", "P2", 4.0, "CAUC", 0.0),
)
VANES = ("BH1", "BH2", "BH3")
CONES = ("CPT1", "CPT2")


def clay_at(depth: float) -> Clay | None:
    """Return the layer at a depth; None in the sand below."""
    return next((clay for clay in CLAYS if clay.top <= depth < clay.base), None)


def total_stress(depth: float) -> float:
    """Return the total vertical stress [kPa]."""
    stress = sum(clay.unit_weight * (min(depth, clay.base) - clay.top) for clay in CLAYS if depth > clay.top)
    return stress + 19.5 * max(depth - CLAYS[-1].base, 0.0)


def pore_pressure(depth: float) -> float:
    """Return the pore pressure at rest [kPa]; none above the water table."""
    return WATER * max(depth - WATER_TABLE, 0.0)


def effective_stress(depth: float) -> float:
    """Return the effective vertical stress [kPa]."""
    return total_stress(depth) - pore_pressure(depth)


def scattered(rng: np.random.Generator, mean: float, cov: float) -> float:
    """Draw a lognormal value of the given mean."""
    log_sd = np.sqrt(np.log1p(cov**2))
    return float(mean * np.exp(log_sd * rng.standard_normal() - 0.5 * log_sd**2))


@dataclass(frozen=True, kw_only=True)
class Specimen:
    """Truth of one specimen."""

    hole: str
    sample: str
    depth: float
    clay: Clay
    lam: float
    kappa: float
    preconsolidation: float
    void_ratio: float
    slope: float
    cv: float


def specimen(rng: np.random.Generator, hole: str, sample: str, depth: float) -> Specimen:
    """Draw the truth of a specimen."""
    clay = clay_at(depth)
    assert clay is not None
    common = rng.standard_normal()  # a looser specimen is a more compressible one
    own = rng.standard_normal()
    log_lambda = np.sqrt(np.log1p(clay.scatter_lambda**2)) * (0.7 * common + np.sqrt(0.51) * own)
    return Specimen(
        hole=hole,
        sample=sample,
        depth=depth,
        clay=clay,
        lam=float(clay.lam * np.exp(log_lambda)),
        kappa=scattered(rng, clay.kappa, clay.scatter_kappa),
        preconsolidation=effective_stress(depth) + scattered(rng, clay.overstress, clay.scatter_overstress),
        void_ratio=float(clay.void_ratio * (1.0 + clay.scatter_void_ratio * common)),
        slope=scattered(rng, clay.slope, clay.scatter_slope),
        cv=scattered(rng, clay.cv, clay.scatter_cv),
    )


def void_ratio_at(specimen: Specimen, stress: float, greatest: float) -> float:
    """Return the void ratio at a stress after the greatest stress so far, from 3 kPa on."""

    def first_loading(value: float) -> float:
        def bend(at: float) -> float:
            return YIELD_WIDTH * np.logaddexp(0.0, np.log(at / specimen.preconsolidation) / YIELD_WIDTH)

        steeper = (specimen.lam - specimen.kappa) * (bend(value) - bend(3.0))
        return specimen.void_ratio - specimen.kappa * np.log(value / 3.0) - steeper

    return float(first_loading(greatest) + specimen.kappa * np.log(greatest / stress))


def degree_of_consolidation(time_factor: float) -> float:
    """Return the average degree of consolidation, uniform initial pressure."""
    if time_factor < 0.05:
        return float(2.0 * np.sqrt(time_factor / np.pi))
    mode = (2.0 * np.arange(20) + 1.0) * np.pi / 2.0
    return float(1.0 - np.sum(2.0 / mode**2 * np.exp(-(mode**2) * time_factor)))


def coefficient_of_consolidation(specimen: Specimen, stress: float) -> float:
    """Return cv at a stress [m2/year]: several times larger before yield than after."""
    yielded = 1.0 / (1.0 + (specimen.preconsolidation / stress) ** 4)
    return float(specimen.cv * 6.0 ** (1.0 - yielded))


def time_curve(
    rng: np.random.Generator, specimen: Specimen, stress: float, whole: float, height: float
) -> list[tuple[float, float]]:
    """Return time [min] and compression [mm] of a specimen that compresses by `whole` in a day.

    It is `height` high half-way and drains at both faces.
    """
    cv = coefficient_of_consolidation(specimen, stress) / YEAR * 1e6  # mm2/min
    drainage_path = 0.5 * height
    end = 1.13 * drainage_path**2 / cv  # 95 % of primary
    rate = specimen.clay.creep * specimen.lam * np.log(10.0) / (1.0 + specimen.void_ratio) * 20.0
    creep = rate * np.log10(max(TIMES[-1] / end, 1.0))
    seating = 0.03 * whole
    primary = whole - seating - creep
    rows = []
    for time in TIMES:
        later = rate * np.log10(max(time / end, 1.0))
        reading = seating + primary * degree_of_consolidation(cv * time / drainage_path**2) + later
        rows.append((time, round(float(reading + 0.002 * rng.standard_normal()), 3)))
    return [*rows[:-1], (TIMES[-1], round(whole, 3))]


@dataclass(frozen=True, kw_only=True)
class Shear:
    """What a triaxial test reads."""

    axial_stress: float
    radial_stress: float
    void_ratio: float
    rows: list[tuple[float, float, float]]  # strain [%], deviator, pore pressure change [kPa]


def shear(rng: np.random.Generator, specimen: Specimen, kind: str, ratio: float) -> Shear:
    """Shear a specimen undrained in compression, Modified Cam clay."""
    sine = 3.0 * specimen.slope / (6.0 + specimen.slope)
    at_rest = 1.0 - sine
    in_situ = effective_stress(specimen.depth)
    over = max(specimen.preconsolidation / in_situ, 1.0)
    if kind == "CAUC":
        vertical, radial = in_situ, in_situ * at_rest * over**sine
    else:
        vertical = radial = ratio * in_situ
    vertical, radial = round(vertical), round(radial)
    mean, deviator = (vertical + 2.0 * radial) / 3.0, float(vertical - radial)
    strain_path = _path(specimen, mean, deviator, at_rest)
    rows = []
    for strain in STRAINS:
        q = float(np.interp(strain / 100.0, strain_path[0], strain_path[1]))
        p = float(np.interp(strain / 100.0, strain_path[0], strain_path[2]))
        pore = mean + (q - deviator) / 3.0 - p
        q, pore = q + 0.4 * rng.standard_normal(), pore + 0.4 * rng.standard_normal()
        rows.append((strain, round(q, 1), round(pore, 1) + 0.0))  # no -0.0
    loaded = max(mean, 3.0)
    void_ratio = void_ratio_at(specimen, loaded, loaded)
    return Shear(axial_stress=vertical, radial_stress=radial, void_ratio=round(void_ratio, 3), rows=rows)


def _path(specimen: Specimen, mean: float, deviator: float, at_rest: float) -> np.ndarray:
    """Return strain, deviator and mean stress from consolidation to the critical state."""
    m, kappa = specimen.slope, specimen.kappa
    ratio_kept = 1.0 - kappa / specimen.lam
    at_yield = specimen.preconsolidation
    p_yield, q_yield = at_yield * (1.0 + 2.0 * at_rest) / 3.0, at_yield * (1.0 - at_rest)
    size = max(p_yield + (q_yield / m) ** 2 / p_yield, mean + (deviator / m) ** 2 / mean)
    volume = 1.0 + specimen.void_ratio
    shear_modulus = 0.5 * volume * mean / kappa  # a drained Poisson ratio of about 0.28
    elastic_end = m * np.sqrt(max(mean * (size - mean), 0.0))
    path = [(0.0, deviator, mean)]
    strain = (elastic_end - deviator) / (3.0 * shear_modulus)
    path.append((strain, elastic_end, mean))
    eta = np.linspace(elastic_end / mean, 0.9995 * m, 4000)
    p = mean * ((m**2 + eta[0] ** 2) / (m**2 + eta**2)) ** ratio_kept
    for before, here in zip(range(len(eta) - 1), range(1, len(eta)), strict=True):
        plastic_volume = -kappa / volume * np.log(p[here] / p[before])
        middle = 0.5 * (eta[before] + eta[here])
        plastic = plastic_volume * 2.0 * middle / (m**2 - middle**2)
        elastic = (eta[here] * p[here] - eta[before] * p[before]) / (3.0 * shear_modulus)
        strain += plastic + elastic
        path.append((strain, eta[here] * p[here], p[here]))
    path.append((1.0, eta[-1] * p[-1], p[-1]))
    rows = np.array(path)
    return rows[np.argsort(rows[:, 0], kind="stable")].T


def strength(depth: float, wave: float) -> float:
    """Return the undrained strength of the ground [kPa], scattered by a standard normal wave."""
    clay = clay_at(depth)
    assert clay is not None
    in_situ = effective_stress(depth)
    over = (in_situ + clay.overstress) / in_situ
    return float(STRENGTH_RATIO * in_situ * over ** (1.0 - clay.kappa / clay.lam) * np.exp(0.12 * wave))


def waves(rng: np.random.Generator, depths: np.ndarray, scale: float = 1.2) -> np.ndarray:
    """Return a standard normal along depth, correlated over `scale` [m]."""
    values = [float(rng.standard_normal())]
    for step in np.diff(depths):
        kept = np.exp(-2.0 * step / scale)
        values.append(float(kept * values[-1] + np.sqrt(1.0 - kept**2) * rng.standard_normal()))
    return np.array(values)


def vane_rows(rng: np.random.Generator) -> list[tuple[float, float, float]]:
    """Return depth, peak and remoulded strength of one profile, not corrected for rate and anisotropy."""
    depths = np.arange(1.5, 11.6, 1.0)
    rows = []
    for depth, wave in zip(depths, waves(rng, depths), strict=True):
        clay = clay_at(float(depth))
        assert clay is not None
        fast = 1.0 + 0.006 * (clay.plasticity - 20.0)  # a vane turns faster than an embankment fails
        peak = strength(float(depth), float(wave)) * fast * np.exp(0.08 * rng.standard_normal())
        rows.append((float(depth), round(2.0 * float(peak)) / 2.0, round(2.0 * float(peak) / 5.5) / 2.0))
    return rows


def cone_rows(rng: np.random.Generator, end: float) -> list[tuple[float, float, float, float]]:
    """Return depth, cone resistance [MPa], sleeve friction and pore pressure [kPa] of one sounding."""
    depths = np.arange(1, round(end * 10) + 1) / 10.0
    wave = waves(rng, depths)
    rows = []
    for depth, one in zip(depths.tolist(), wave.tolist(), strict=True):
        if clay_at(depth) is None:  # sand
            net, pore, friction = 6500.0 * np.exp(0.25 * one), pore_pressure(depth), 0.008
        else:
            net = CONE_FACTOR * strength(max(depth, 0.3), one) * np.exp(0.03 * rng.standard_normal())
            dry = depth < WATER_TABLE
            pore, friction = 0.0 if dry else pore_pressure(depth) + PORE_RATIO * net, 0.022
        corrected = net + total_stress(depth)
        measured = corrected - (1.0 - AREA_RATIO) * pore
        sleeve = friction * net * np.exp(0.1 * rng.standard_normal())
        rows.append((depth, round(measured / 1000.0, 3), round(float(sleeve), 1), round(float(pore))))
    return rows
