"""Interpretation of cone soundings: net resistance by layer; strength and preconsolidation stress shown."""

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import FloatArray
from probsoil.laboratory.ground_column import GroundColumn
from probsoil.laboratory.observations import Observation, observation
from probsoil.laboratory.sheets import ConeSheet

if TYPE_CHECKING:
    import pandas as pd

CONE_FACTOR, CONE_FACTOR_SCATTER = 12.7, 0.34
"""Net resistance over undrained strength, and the standard deviation of its logarithm [-].

A compilation of the kind Ching and Phoon published for clays worldwide; recalled, not opened.
"""

YIELD_FACTOR, YIELD_FACTOR_SCATTER = 0.33, 0.30
"""Preconsolidation stress over net resistance, and the standard deviation of its logarithm [-].

Kulhawy and Mayne 1990, recalled, not opened; the scatter is a judgement.
"""

ASSUMED_AREA_RATIO, AREA_RATIO_ERROR = 0.8, 0.05
"""Net area ratio where the sheet gives none, and its standard error [-]; a judgement."""

WEIGHT_ERROR = 0.03
"""Relative standard error of the total vertical stress [-]; a judgement."""

ZERO_DRIFT = 20.0
"""Standard error of the zero reading of a cone [kPa]; a judgement within 15 to 35 of good soundings."""

SLICE = 1.0
"""Thickness over which resistance is averaged where layers are not known [m]."""

_LEAST_READINGS = 5


@dataclass(frozen=True, slots=True, kw_only=True)
class ConeAverage:
    """Net resistance averaged over one layer.

    Attributes
    ----------
    layer : str
        Layer; empty where not known.
    top, bottom : float, [m]
        Of the readings averaged.
    readings : int, [-]
        Their number.
    independent : float, [-]
        What they count for, as neighbours resemble each other.
    net_resistance, standard_error : float, [kPa]
        Mean and its error, those of total stress, area ratio and zero reading included.
    scatter : float, [kPa]
        Standard deviation of a reading about the line with depth.
    clay : bool
        Whether the layer may be clay: nothing is derived in a granular one.
    """

    layer: str
    top: float
    bottom: float
    readings: int
    independent: float
    net_resistance: float
    standard_error: float
    scatter: float
    clay: bool = True

    @property
    def strength(self) -> float | None:
        """Undrained strength by the cone factor [kPa]; shown, not evidence."""
        return self.net_resistance / CONE_FACTOR if self.clay else None

    @property
    def preconsolidation(self) -> float | None:
        """Preconsolidation stress by its factor [kPa]; shown, not evidence."""
        return YIELD_FACTOR * self.net_resistance if self.clay else None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ConeResult:
    """What one sounding gives.

    Attributes
    ----------
    sheet : ConeSheet
        The sounding.
    net_resistance : ndarray, shape (n,), [kPa]
        Corrected cone resistance less total vertical stress; not a number where it cannot be known.
    averages : tuple of ConeAverage
        By layer, or by slices where layers are not known.
    flag : str
        Why all of it is doubtful; empty where it is not.
    remarks : tuple of str
        What could not be interpreted, and why.
    """

    sheet: ConeSheet
    net_resistance: FloatArray
    averages: tuple[ConeAverage, ...]
    flag: str
    remarks: tuple[str, ...]

    def observations(self) -> tuple[Observation, ...]:
        """Return the observed numbers.

        Returns
        -------
        rows : tuple of Observation
            Net resistance, one per average.
        """
        return tuple(
            replace(
                observation(
                    "cone",
                    (
                        self.sheet.test,
                        replace(self.sheet.place, depth=0.5 * (one.top + one.bottom)),
                    ),
                    "q_net",
                    one.net_resistance,
                    one.standard_error,
                    flag=self.flag,
                ),
                layer=one.layer,
            )
            for one in self.averages
        )

    def to_frame(self) -> "pd.DataFrame":
        """Return one row per average.

        Returns
        -------
        frame : DataFrame
            Net resistance, and what the transformation factors make of it.
        """
        import pandas as pd

        return pd.DataFrame(
            [
                {
                    "test": self.sheet.test,
                    "hole": self.sheet.place.hole,
                    "layer": one.layer,
                    "top [m]": one.top,
                    "bottom [m]": one.bottom,
                    "readings [-]": one.readings,
                    "independent readings [-]": one.independent,
                    "q_net [kPa]": one.net_resistance,
                    "q_net error [kPa]": one.standard_error,
                    "q_net scatter [kPa]": one.scatter,
                    "su by cone factor [kPa]": one.strength,
                    "ln scatter of su [-]": CONE_FACTOR_SCATTER,
                    "preconsolidation by factor [kPa]": one.preconsolidation,
                    "ln scatter of preconsolidation [-]": YIELD_FACTOR_SCATTER,
                }
                for one in self.averages
            ]
        )


def interpreted_cone(sheet: ConeSheet, column: GroundColumn | None) -> ConeResult:
    """Interpret one sounding.

    Parameters
    ----------
    sheet : ConeSheet
        The sounding.
    column : GroundColumn or None
        Stresses in situ; None where not known.

    Returns
    -------
    result : ConeResult
        Without a value where the total vertical stress is not known.

    Notes
    -----
    ``q_net = q_c + (1 - a) u_2 - s_v``. In each layer readings nearer than 0.2 m to its top or bottom are
    left out of the average, as the cone feels the next layer there.
    """
    if column is None:
        reason = "q_net: the total vertical stress is not known; give the layers or a unit weight"
        return ConeResult(
            sheet=sheet,
            net_resistance=np.full(sheet.depth.shape, np.nan),
            averages=(),
            flag="",
            remarks=(reason,),
        )
    measured = np.isfinite(sheet.pore_pressure)
    flags, remarks = [], []
    if not measured.all():
        flags.append("pore pressure not measured everywhere: resistance not corrected there")
    if sheet.area_ratio is None and measured.any():
        flags.append(f"area ratio not given, {ASSUMED_AREA_RATIO:g} taken")
    ratio = ASSUMED_AREA_RATIO if sheet.area_ratio is None else sheet.area_ratio
    pressure = np.where(measured, sheet.pore_pressure, 0.0)
    total = np.array([column.total_stress(float(depth)) for depth in sheet.depth])
    net = sheet.cone_resistance + (1.0 - ratio) * pressure - total
    area = AREA_RATIO_ERROR * pressure if sheet.area_ratio is None else 0.0
    doubt = np.hypot(np.hypot(WEIGHT_ERROR * total, area), ZERO_DRIFT)
    averages = []
    for layer, top, bottom in _slices(sheet.depth, column):
        inside = (sheet.depth >= top) & (sheet.depth < bottom) & np.isfinite(net)
        if inside.sum() < _LEAST_READINGS:
            continue
        found = _average(layer, sheet.depth[inside], net[inside], float(doubt[inside].mean()))
        averages.append(replace(found, clay=layer not in column.granular))
    if not averages:
        remarks.append(f"q_net: no layer with {_LEAST_READINGS} readings or more")
    negative = [one.layer or f"{one.top:g} m" for one in averages if one.net_resistance <= 0.0]
    if negative:
        remarks.append(
            f"q_net: not above zero in {', '.join(negative)}; unit weight or zero reading is wrong"
        )
        averages = [one for one in averages if one.net_resistance > 0.0]
    return ConeResult(
        sheet=sheet,
        net_resistance=np.asarray(net),
        averages=tuple(averages),
        flag="; ".join(flags),
        remarks=tuple(remarks),
    )


def _slices(depth: FloatArray, column: GroundColumn) -> list[tuple[str, float, float]]:
    edge = 0.2
    if column.layers:
        return [
            (name, top + edge, bottom - edge)
            for name, top, bottom in column.layers
            if bottom - top > 3.0 * edge
        ]
    first, last = np.floor(depth[0] / SLICE) * SLICE, depth[-1]
    return [("", float(top), float(top + SLICE)) for top in np.arange(first, last, SLICE)]


def _average(layer: str, depth: FloatArray, net: FloatArray, doubt: float) -> ConeAverage:
    """Average readings whose neighbours resemble each other, about a straight line with depth."""
    left = net - np.polyval(np.polyfit(depth, net, 1), depth)
    scatter = float(left.std(ddof=2))
    alike = float(np.clip((left[1:] * left[:-1]).sum() / max((left * left).sum(), 1e-12), 0.0, 0.98))
    independent = max(depth.size * (1.0 - alike) / (1.0 + alike), 1.0)
    return ConeAverage(
        layer=layer,
        top=float(depth[0]),
        bottom=float(depth[-1]),
        readings=int(depth.size),
        independent=independent,
        net_resistance=float(net.mean()),
        standard_error=float(np.hypot(scatter / np.sqrt(independent), doubt)),
        scatter=scatter,
    )
