"""Which parameters decide whether a limit is exceeded, ranked where they can be told apart."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal, TypeAlias, cast

import numpy as np

from probsoil._typing import FloatArray
from probsoil.errors import ShapeError
from probsoil.sensitivity.accumulate import DriverSums
from probsoil.sensitivity.elasticities import Elasticity, elasticities
from probsoil.sensitivity.shares import Shares, shares

if TYPE_CHECKING:
    import pandas as pd

Direction: TypeAlias = Literal["raises", "lowers", "unclear"]
LEAST_CASES = 50  # exceedances (and realisations that meet the limit) below which nothing is ranked
GOOD_CASES = 100
GOOD_FIT = 0.9


@dataclass(frozen=True, slots=True, kw_only=True)
class Driver:
    """What one parameter does to the chance of exceeding a limit.

    Attributes
    ----------
    parameter : str
        Address of the parameter.
    rank : int or None, [-]
        Place by spread elasticity; None where it cannot be told from zero or too few exceed.
    spread_elasticity, mean_elasticity : float, [-]
        See `probsoil.sensitivity.elasticities`; not a number where nothing exceeds or everything does.
    spread_interval, mean_interval : tuple of float, [-]
        Limits of each, for this parameter alone.
    share : float, [-]
        Share of the variance of the quantity's linear part.
    share_interval : tuple of float, [-]
        Limits of the share.
    direction : {"raises", "lowers", "unclear"}
        What a larger value of the parameter does to the chance of exceedance.
    """

    parameter: str
    rank: int | None
    spread_elasticity: float
    spread_interval: tuple[float, float]
    mean_elasticity: float
    mean_interval: tuple[float, float]
    share: float
    share_interval: tuple[float, float]
    direction: Direction


@dataclass(frozen=True, slots=True, kw_only=True)
class Drivers:
    """Drivers of one limit.

    Attributes
    ----------
    rows : tuple of Driver
        One per parameter: the ranked first, then the others by falling share.
    realisations, exceeding : int, [-]
        Realisations behind the result and those that exceed.
    fitted : int, [-]
        Realisations with a finite quantity, which the shares are found from.
    r_squared : float, [-]
        Part of the quantity's variance that its linear fit explains.
    confidence : float, [-]
        Confidence of the limits.
    note : str or None
        What to beware of.
    """

    rows: tuple[Driver, ...]
    realisations: int
    exceeding: int
    fitted: int
    r_squared: float
    confidence: float
    note: str | None

    def to_frame(self) -> "pd.DataFrame":
        """Return the drivers as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per parameter; the limits in columns of their own.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        names = ("spread_elasticity", "mean_elasticity", "share")
        records = []
        for row in self.rows:
            record: dict[str, object] = {"parameter": row.parameter, "rank": row.rank}
            for name in names:
                record[name] = getattr(row, name)
                low, high = getattr(row, f"{name.removesuffix('_elasticity')}_interval")
                record |= {f"{name}_low": low, f"{name}_high": high}
            records.append(record | {"direction": row.direction})
        return pd.DataFrame(records).astype({"rank": "Int64"}) if records else pd.DataFrame()


def drivers(
    sums: DriverSums, correlation: FloatArray, names: Sequence[str], *, confidence: float = 0.95
) -> Drivers:
    """Drivers of a limit from the sums over all realisations.

    Parameters
    ----------
    sums : DriverSums
        Sums over all realisations, merged in the order of the chunks.
    correlation : ndarray, shape (d, d), [-]
        Correlation R of the latent normals.
    names : sequence of str
        Addresses of the d parameters.
    confidence : float, [-]
        Confidence of the limits.

    Returns
    -------
    drivers : Drivers
        Elasticities, shares, ranks and directions.

    Raises
    ------
    ShapeError
        If the names or the correlation do not match the sums.

    Notes
    -----
    A parameter is ranked when its spread elasticity is positive and its interval excludes zero with all d
    intervals holding at once (Bonferroni), and at least 50 realisations lie on either side of the limit.
    """
    dimension = sums.dimension
    if len(names) != dimension or correlation.shape != (dimension, dimension):
        raise ShapeError(
            f"sums over {dimension} parameters match neither {len(names)} names "
            f"nor correlation {correlation.shape}"
        )
    spread, mean = elasticities(sums)
    part = shares(sums, correlation, confidence)
    met, exceeding = (int(number) for number in sums.count)
    rankable = min(met, exceeding) >= LEAST_CASES
    ranks = _ranks(spread, confidence) if rankable else cast("list[int | None]", [None] * dimension)
    rows = _rows(names, ranks, (spread, mean), part, confidence)
    return Drivers(
        rows=tuple(sorted(rows, key=_order)),
        realisations=met + exceeding,
        exceeding=exceeding,
        fitted=part.fitted,
        r_squared=part.r_squared,
        confidence=confidence,
        note=_note(met, exceeding, part) if dimension else "no parameter is uncertain",
    )


def _ranks(spread: Elasticity, confidence: float) -> list[int | None]:
    low, _ = spread.interval(confidence, together=len(spread.value))
    ranks: list[int | None] = [None] * len(low)
    place = 0
    for index in np.argsort(-spread.value, kind="stable"):
        if low[index] > 0.0:
            place += 1
            ranks[index] = place
    return ranks


def _rows(
    names: Sequence[str],
    ranks: list[int | None],
    measures: tuple[Elasticity, Elasticity],
    part: Shares,
    confidence: float,
) -> list[Driver]:
    spread, mean = measures
    spread_low, spread_high = spread.interval(confidence)
    mean_low, mean_high = mean.interval(confidence)
    return [
        Driver(
            parameter=name,
            rank=ranks[i],
            spread_elasticity=float(spread.value[i]),
            spread_interval=(float(spread_low[i]), float(spread_high[i])),
            mean_elasticity=float(mean.value[i]),
            mean_interval=(float(mean_low[i]), float(mean_high[i])),
            share=float(part.share[i]),
            share_interval=(float(part.low[i]), float(part.high[i])),
            direction=_direction(float(mean_low[i]), float(mean_high[i])),
        )
        for i, name in enumerate(names)
    ]


def _direction(low: float, high: float) -> Direction:
    if low > 0.0:
        return "raises"
    return "lowers" if high < 0.0 else "unclear"


def _order(row: Driver) -> tuple[float, float]:
    return (np.inf if row.rank is None else row.rank, -row.share if np.isfinite(row.share) else 0.0)


def _note(met: int, exceeding: int, part: Shares) -> str | None:
    remarks = []
    n = met + exceeding
    fewer = min(met, exceeding)
    if fewer == 0:
        which = "no realisation exceeds" if exceeding == 0 else "every realisation exceeds"
        remarks.append(f"{which} the limit, so nothing can be said of what decides it")
    elif fewer < LEAST_CASES:
        which = "exceed" if exceeding < met else "meet"
        enough = float(f"{GOOD_CASES * n / fewer:.2g}")
        remarks.append(
            f"only {fewer} of {n:,} realisations {which} the limit, too few to rank parameters "
            f"(at least {LEAST_CASES} are needed); about {enough:,.0f} realisations would do"
        )
    if np.isnan(part.r_squared):
        remarks.append("there are no shares: the quantity does not vary or has too few finite values")
    elif part.r_squared < GOOD_FIT:
        remarks.append(
            f"the shares are of the part of the quantity that is linear in the latent normals, "
            f"{100.0 * part.r_squared:.0f} % of its variance"
        )
    if part.fitted < n:
        remarks.append(f"{n - part.fitted:,} realisations without a finite value are left out of the shares")
    return "; ".join(remarks) or None
