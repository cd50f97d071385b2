"""What was assessed, in words and tables: ground, load, stages, parameters."""

from collections.abc import Mapping, Sequence

import numpy as np

from probsoil.assessment.evaluation import Study
from probsoil.assessment.works_text import further_load_text, load_text, stage_rows, uncertain_works
from probsoil.ground.applied_load import stress_at
from probsoil.ground.response import GroundState
from probsoil.ground.site_model import SiteModel
from probsoil.scenario import Scenario

Row = dict[str, object]


def ground_record(study: Study, at_means: GroundState) -> Row:
    """Return layers, load, stages and the stress profile at the means.

    Parameters
    ----------
    study : Study
        Scenario and site.
    at_means : GroundState
        One realisation with every parameter at its mean.

    Returns
    -------
    record : dict
        Ready for JSON.
    """
    scenario = study.scenario
    texts = {quantity.address: quantity for quantity in scenario.quantities()}
    table, base_head = texts["site.water_table"], texts.get("site.base_head")
    return {
        "water_table": table.distribution.describe(table.unit),
        "base": scenario.site.base,
        "base_head": None if base_head is None else base_head.distribution.describe(base_head.unit),
        "layers": _layers(scenario),
        "load": {"shape": scenario.load.shape, "text": load_text(scenario, study.site)},
        "further_loads": [
            {"name": one.name, "text": further_load_text(one) + uncertain_works(scenario, one.address)}
            for one in study.site.further_loads
        ],
        "stages": stage_rows(scenario, study.site),
        "drains": None if scenario.drains is None else scenario.drains.describe(),
        "profile": _profile(study.site, at_means),
    }


def _layers(scenario: Scenario) -> list[Row]:
    rows: list[Row] = []
    top = 0.0
    for layer in scenario.layers:
        bottom = top + layer.thickness.expectation
        properties = [
            {
                "symbol": quantity.address.removeprefix(f"{layer.name}."),
                "meaning": quantity.meaning,
                "text": quantity.distribution.describe(quantity.unit),
                "unit": quantity.unit,
            }
            for quantity in scenario.quantities()
            if quantity.address.rpartition(".")[0] == layer.name
        ]
        rows.append(
            {"name": layer.name, "soil": layer.soil, "top": top, "bottom": bottom, "properties": properties}
        )
        top = bottom
    return rows


def _profile(site: SiteModel, state: GroundState) -> Row:
    """Return stresses with depth before loading and at the horizon, [m] and [kPa]."""
    points, ground = state.ground.points, state.ground
    final = points.stress[0] + stress_at(site, ground.load, site.horizon)[0]
    final[ground.clay] = state.consolidation.stress[0, -1]
    preconsolidation = [
        float(value) if is_clay else None
        for value, is_clay in zip(ground.yield_stress[0], ground.clay, strict=True)
    ]
    return {
        "depth": points.depth[0].tolist(),
        "initial_stress": points.stress[0].tolist(),
        "preconsolidation": preconsolidation,
        "final_stress": final.tolist(),
    }


def parameter_rows(study: Study) -> list[Row]:
    """Return the uncertain parameters as drawn.

    Parameters
    ----------
    study : Study
        Its parameter space.

    Returns
    -------
    rows : list of dict
        One per parameter; bounds that are infinite become null. With stations also the share of its
        variance that differs between them.
    """
    rows = []
    local = _local_shares(study)
    tested = study.space.updated is not None and len(study.space.updated.observations) > 0
    for summary in study.space.summary():
        row = {name: getattr(summary, name) for name in summary.__slots__}
        row |= local.get(summary.name, {})
        if tested:
            row["text"] += "; before the tests"
        rows.append({key: finite(value) if isinstance(value, float) else value for key, value in row.items()})
    return rows


def _local_shares(study: Study) -> dict[str, Row]:
    """Return the share of each parameter's variance that differs between stations, by its address."""
    space = study.space
    if space.local is None:
        return {}
    share = np.clip(1.0 - space.local.shared_weight**2, 0.0, 1.0)
    return {name: {"local_share": float(one)} for name, one in zip(space.names, share, strict=True)}


def dependence_rows(study: Study) -> list[Row]:
    """Return the rank correlations given and the latent ones they became.

    Parameters
    ----------
    study : Study
        Scenario and parameter space.

    Returns
    -------
    rows : list of dict
        One per pair.
    """
    place = {name: index for index, name in enumerate(study.space.names)}
    return [
        {
            "between": list(pair.between),
            "rank_correlation": pair.rank_correlation,
            "latent_correlation": float(
                study.space.at_station[place[pair.between[0]], place[pair.between[1]]]
            ),
        }
        for pair in study.scenario.dependence
    ]


LEAST_FOR_TAILS = 40
"""Realisations below which no 5 % and 95 % point is given, [-]: two would be expected beyond either."""

_TAIL = 0.1  # levels nearer than this to 0 or 1 are tails


def quantiles(
    values: np.ndarray, levels: Sequence[float] = (0.05, 0.25, 0.5, 0.75, 0.95), *, worst: float = np.inf
) -> Row:
    """Return quantiles by level, along the first axis, of all values.

    Parameters
    ----------
    values : ndarray, shape (n_sample,) or (n_sample, n), [any]
        Sample; infinite values sort as they stand.
    levels : sequence of float, [-]
        Levels.
    worst : float, [any]
        Infinity that a value that is not a number sorts as: such a realisation did not converge and
        counts as exceeding, so plus where a limit says "not more than", minus where "not less than".

    Returns
    -------
    quantiles : dict of str to float or list of float
        By level in figures, e.g. ``"0.05"``, interpolated between neighbours; null where one of
        these is infinite, where there are no values, and below 0.1 and above 0.9 with fewer than 40
        values, which would rest on one or two of them.
    """
    order = np.sort(np.where(np.isnan(values), worst, values), axis=0)
    found: Row = {}
    few = len(order) < LEAST_FOR_TAILS
    nothing = None if order.ndim == 1 or not len(order) else [None] * order.shape[1]
    for level in levels:
        withheld = not len(order) or (few and min(level, 1.0 - level) < _TAIL)
        found[f"{level:g}"] = nothing if withheld else _at_level(order, level)
    return found


def _at_level(order: np.ndarray, level: float) -> object:
    """Return one quantile of sorted values."""
    place = level * (len(order) - 1)
    below = int(place)
    low, high = order[below], order[min(below + (place > below), len(order) - 1)]
    known = np.isfinite(low) & np.isfinite(high)
    step = np.subtract(high, low, out=np.zeros_like(low), where=known)
    return numbers(np.where(known, low + (place - below) * step, np.nan))


def numbers(values: np.ndarray) -> object:
    """Return an array for JSON, which knows neither infinity nor not-a-number.

    Parameters
    ----------
    values : ndarray, shape () or (n,), [any]
        Numbers.

    Returns
    -------
    numbers : float, None or list of float and None, [any]
        None for what is not finite.
    """
    if values.ndim == 0:
        return finite(float(values))
    return [finite(value) for value in values.tolist()]


def finite(value: float | None) -> float | None:
    """Return a number for JSON, which knows neither infinity nor not-a-number.

    Parameters
    ----------
    value : float or None, [any]
        Number.

    Returns
    -------
    value : float or None, [any]
        None if it is not finite.
    """
    return None if value is None or not np.isfinite(value) else float(value)


def fixed_values(values: Mapping[str, float]) -> dict[str, np.ndarray]:
    """Return one realisation from one number per quantity.

    Parameters
    ----------
    values : mapping of str to float
        Value of every quantity by its address.

    Returns
    -------
    values : dict of str to ndarray, shape (1,)
        The same as arrays.
    """
    return {address: np.array([float(value)]) for address, value in values.items()}
