"""Which parameters decide whether a limit is exceeded, ranked where they can be told apart."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Literal, TypeAlias

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.errors import ShapeError
from probsoil.sensitivity.accumulate import DriverSums, Gathering
from probsoil.sensitivity.elasticities import Elasticity, elasticities
from probsoil.sensitivity.shares import Shares, shares

if TYPE_CHECKING:
    import pandas as pd

Direction: TypeAlias = Literal["raises", "lowers", "unclear"]
Measure: TypeAlias = Literal["spread", "mean"]
MIDDLING = (0.3, 0.7)  # probabilities from the one to the other: spread says little, the mean ranks
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
        Place by the measure that `Drivers.ranked_by` names; None where the parameter is not
        distinguishable by it, where more spread makes the rarer side rarer, or where too few
        realisations lie on one side.
    spread_elasticity, mean_elasticity : float, [-]
        See `probsoil.sensitivity.elasticities`; not a number where nothing exceeds or everything does.
    spread_interval, mean_interval : tuple of float, [-]
        Limits of each, for this parameter alone.
    spread_clear, mean_clear : bool or None
        Whether each is distinguishable from zero with all parameters judged together; None where too
        few realisations lie on one side to judge.
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
    spread_clear: bool | None
    mean_elasticity: float
    mean_interval: tuple[float, float]
    mean_clear: bool | None
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
    ranked_by : {"spread", "mean"}
        Elasticity that the ranks go by.
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
    ranked_by: Measure
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
            clear = {"spread_clear": row.spread_clear, "mean_clear": row.mean_clear}
            records.append(record | clear | {"direction": row.direction})
        return pd.DataFrame(records).astype({"rank": "Int64"}) if records else pd.DataFrame()


def drivers(
    sums: DriverSums,
    correlation: FloatArray,
    names: Sequence[str],
    *,
    confidence: float = 0.95,
    gathering: Gathering | None = None,
) -> Drivers:
    """Drivers of a limit from the sums over all realisations.

    Parameters
    ----------
    sums : DriverSums
        Sums over all realisations, merged in the order of the chunks.
    correlation : ndarray, shape (d, d), [-]
        Correlation R of the latent normals.
    names : sequence of str
        Addresses of the parameters: d of them, or as many as are gathered.
    confidence : float, [-]
        Confidence of the limits.
    gathering : Gathering or None
        As the sums were made with.

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
    More spread makes the rarer side of a limit less rare, so parameters are ranked by the elasticity of
    the probability of the rarer side to spread: that of P up to one half, and
    :math:`-P/(1-P)` times it, the elasticity of 1 - P, beyond. A parameter is ranked where it is positive
    and its interval excludes zero with all d intervals holding at once (Bonferroni). From P = 0.3 to 0.7
    neither side is rare and spread says little: there parameters are ranked by the size of the mean
    elasticity, where its interval excludes zero likewise. Nothing is ranked unless at least 50
    realisations lie on either side of the limit.
    """
    dimension = sums.dimension
    if len(names) != sums.mean_score.shape[1] or correlation.shape != (dimension, dimension):
        raise ShapeError(
            f"sums over {sums.mean_score.shape[1]} parameters match neither {len(names)} names "
            f"nor correlation {correlation.shape}"
        )
    part = shares(sums, correlation, confidence, gathering=gathering)
    met, exceeding = (int(number) for number in sums.count)
    cases = Cases(
        realisations=met + exceeding,
        exceeding=exceeding,
        rarer=min(met, exceeding),
        probability=exceeding / max(met + exceeding, 1),
    )
    return ranked_drivers(names, elasticities(sums), part, cases, confidence)


@dataclass(frozen=True, slots=True, kw_only=True)
class Cases:
    """Realisations on the sides of a limit.

    Attributes
    ----------
    realisations, exceeding : int, [-]
        Realisations in all, and those that exceed.
    rarer : int, [-]
        Realisations on the rarer side; of weighted ones, how many equal ones they are worth.
    probability : float, [-]
        Probability of exceedance.
    """

    realisations: int
    exceeding: int
    rarer: int
    probability: float


def ranked_drivers(
    names: Sequence[str],
    measures: tuple[Elasticity, Elasticity],
    part: Shares,
    cases: Cases,
    confidence: float,
) -> Drivers:
    """Rank what can be told apart.

    Parameters
    ----------
    names : sequence of str
        Addresses of the parameters.
    measures : tuple of Elasticity
        To spread and to mean.
    part : Shares
        Shares of the quantity's variance.
    cases : Cases
        Realisations on the sides of the limit.
    confidence : float, [-]
        Confidence of the limits.

    Returns
    -------
    drivers : Drivers
        Rows by the rule of `drivers`.
    """
    spread, mean = measures
    ranked_by = _measure(cases)
    rows = _rows(names, measures, part, confidence)
    if cases.rarer >= LEAST_CASES:
        signs = _sign(spread, confidence), _sign(mean, confidence)
        rarer = 1 if cases.probability <= 0.5 else -1  # more spread lowers P where exceeding is the rule
        by_spread, by_mean = _ranks(spread, signs[0] == rarer), _ranks(mean, signs[1] != 0)
        ranks = by_mean if ranked_by == "mean" else by_spread
        rows = [
            replace(row, rank=rank, spread_clear=bool(first), mean_clear=bool(second))
            for row, rank, first, second in zip(rows, ranks, *signs, strict=True)
        ]
    return Drivers(
        rows=tuple(sorted(rows, key=_order)),
        ranked_by=ranked_by,
        realisations=cases.realisations,
        exceeding=cases.exceeding,
        fitted=part.fitted,
        r_squared=part.r_squared,
        confidence=confidence,
        note=_note(cases, part) if len(names) else "no parameter is uncertain",
    )


def _measure(cases: Cases) -> Measure:
    low, high = MIDDLING
    return "mean" if low <= cases.probability <= high else "spread"


def _sign(measure: Elasticity, confidence: float) -> IntArray:
    """Sign of each elasticity; 0 where its interval, all holding at once, includes zero."""
    low, high = measure.interval(confidence, together=len(measure.value))
    return (low > 0.0).astype(np.int64) - (high < 0.0)


def _ranks(measure: Elasticity, ranked: BoolArray) -> list[int | None]:
    """Places by size of those that are ranked."""
    ranks: list[int | None] = [None] * len(ranked)
    order = [i for i in np.argsort(-np.abs(measure.value), kind="stable") if ranked[i]]
    for place, index in enumerate(order, start=1):
        ranks[index] = place
    return ranks


def _rows(
    names: Sequence[str], measures: tuple[Elasticity, Elasticity], part: Shares, confidence: float
) -> list[Driver]:
    """Drivers before anything is ranked."""
    spread, mean = measures
    spread_low, spread_high = spread.interval(confidence)
    mean_low, mean_high = mean.interval(confidence)
    return [
        Driver(
            parameter=name,
            rank=None,
            spread_elasticity=float(spread.value[i]),
            spread_interval=(float(spread_low[i]), float(spread_high[i])),
            spread_clear=None,
            mean_elasticity=float(mean.value[i]),
            mean_interval=(float(mean_low[i]), float(mean_high[i])),
            mean_clear=None,
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


def few_cases_note(cases: Cases) -> str | None:
    """Say that too few realisations lie on one side of a limit, and how many would do.

    Parameters
    ----------
    cases : Cases
        Realisations on the sides of the limit.

    Returns
    -------
    note : str or None
        None where there are enough.
    """
    n, exceeding, fewer = cases.realisations, cases.exceeding, cases.rarer
    if exceeding in (0, n):
        which = "no realisation exceeds" if exceeding == 0 else "every realisation exceeds"
        return f"{which} the limit, so nothing can be said of what decides it"
    if fewer >= LEAST_CASES:
        return None
    rare = cases.probability < 0.5
    count = exceeding if rare else n - exceeding
    which = ("exceed" if rare else "meet") + ("s" if count == 1 else "")
    worth = "" if fewer == count else f", unequal in weight and worth {fewer} equal ones"
    enough = float(f"{GOOD_CASES * n / max(fewer, 1):.2g}")
    return (
        f"only {count} of {n:,} realisations {which} the limit{worth}, too few to rank parameters "
        f"(at least {LEAST_CASES} are needed); about {enough:,.0f} realisations would do"
    )


def _note(cases: Cases, part: Shares) -> str | None:
    few = few_cases_note(cases)
    remarks = [] if few is None else [few]
    n = cases.realisations
    if np.isnan(part.r_squared):
        remarks.append(_no_shares(part))
    elif part.r_squared < GOOD_FIT:
        remarks.append(
            "the shares are of the part of the quantity that follows the parameters in a straight line, each "
            f"put on a normal scale first, {100.0 * part.r_squared:.0f} % of its variance"
        )
    if part.fitted < n:
        left = n - part.fitted
        remarks.append(
            f"{left:,} realisation{'' if left == 1 else 's'} without a finite value "
            f"{'is' if left == 1 else 'are'} left out of the shares"
        )
    return "; ".join(remarks) or None


def _no_shares(part: Shares) -> str:
    if not part.enough:
        return (
            f"there are no shares: {part.fitted} realisations with a finite value are too few for "
            f"{len(part.share)} parameters, which take at least {part.needed}"
        )
    return "there are no shares: the quantity does not vary"
