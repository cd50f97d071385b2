"""What was assessed, in words and tables: ground, load, stages, parameters."""

from collections.abc import Mapping, Sequence

import numpy as np

from probsoil.assessment.evaluation import Study
from probsoil.ground.applied_load import stress_at
from probsoil.ground.further_load import FurtherLoadForm
from probsoil.ground.response import GroundState
from probsoil.ground.site_model import SiteModel
from probsoil.scenario import Scenario
from probsoil.scenario.checks.common import years_text
from probsoil.scenario.distributions import Constant, Distribution
from probsoil.scenario.loads import EmbankmentLoad, Stage
from probsoil.scenario.quantities import Quantity

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


def load_text(scenario: Scenario, site: SiteModel) -> str:
    """Return the load in words.

    Parameters
    ----------
    scenario : Scenario
        As read.
    site : SiteModel
        As laid out, at the means.

    Returns
    -------
    text : str
        Shape and sides; what of them is uncertain and how.
    """
    return _shape_text(scenario, site) + uncertain_works(scenario, "load")


def uncertain_works(scenario: Scenario, address: str) -> str:
    """Return in words which numbers of a load are uncertain, and how.

    Parameters
    ----------
    scenario : Scenario
        As read.
    address : str
        First part of the load's addresses.

    Returns
    -------
    text : str
        Begins with a semicolon; empty where all are plain numbers.
    """
    found: list[Quantity] = [
        one for one in scenario.quantities() if one.of_works and one.address.rpartition(".")[0] == address
    ]
    parts = [
        f"{one.address.rpartition('.')[2].replace('_', ' ')} {one.distribution.describe(one.unit)}"
        for one in found
    ]
    return f"; these are means, of {' and of '.join(parts)}" if parts else ""


def _shape_text(scenario: Scenario, site: SiteModel) -> str:
    if isinstance(scenario.load, EmbankmentLoad) and site.embankment is not None:
        shape = site.embankment
        return (
            f"embankment, top {shape.crest_width:g} m wide at its greatest height, {shape.full_height:g} m, "
            f"side slopes {shape.side_slope:g} horizontal to 1 vertical, base {shape.base_width:g} m wide"
            + _beside(scenario.load)
            + _replaced(site)
            + _held(site)
        )
    return (
        "load over a wide area" + _replaced(site) + _held(site)
        if site.foundation is None
        else site.foundation.title
    )


def further_load_text(load: FurtherLoadForm) -> str:
    """Return a further load in words.

    Parameters
    ----------
    load : FurtherLoadForm
        Shape and place.

    Returns
    -------
    text : str
        Shape, sides and where its centre is.
    """
    if load.embankment is not None:
        shape, across = load.embankment, f"centreline {load.x:g} m across"
        return (
            f"embankment, top {shape.crest_width:g} m wide at its greatest height, {shape.full_height:g} m, "
            f"side slopes {shape.side_slope:g} horizontal to 1 vertical; {across}"
        )
    if load.foundation is None:
        return "load over a wide area"
    plan = load.foundation.title.partition(", rough")[0]
    if load.foundation.shape == "strip":
        return f"strip, {plan}; centreline {load.x:g} m across"
    return f"{load.foundation.shape}, {plan}; centre {load.x:g} m across and {load.y:g} m along"


def _replaced(site: SiteModel) -> str:
    """Return in words what ground is dug out below the load, where any is."""
    if site.foundation is not None or site.face == 0.0:
        return ""
    return f"; the ground below it is dug out {site.face:g} m deep, and its fill stands on the bottom"


def _held(site: SiteModel) -> str:
    """Return in words until when the level is held, where it is."""
    if site.hold_level_until is None:
        return ""
    until = years_text(site.hold_level_until)
    return f"; fill is added as the ground settles, to hold its level until {until}"


def _beside(load: EmbankmentLoad) -> str:
    """Return berms and traffic in words, where there are any."""
    text = ""
    if load.berm_width is not None:
        text += f", with a berm {load.berm_width:g} m wide and {load.berm_height:g} m high on each side"
    if load.traffic != Constant(value=0.0):
        text += f"; traffic on the top {load.traffic.describe('kPa')}"
    return text


def stage_change(stage: Stage) -> str:
    """Return in words what a stage changes.

    Parameters
    ----------
    stage : Stage
        As read.

    Returns
    -------
    text : str
        Such as ``1.2 m of fill laid``; with its distribution where the amount is uncertain.
    """
    change = []
    if stage.height is not None:
        change.append(_amount(stage.height, "m", "of fill ", ("laid", "taken away")))
    if stage.pressure is not None:
        change.append(_amount(stage.pressure, "kPa", "", ("added", "removed")))
    if stage.excavate is not None:
        change.append(f"{stage.excavate:g} m of soil dug out")
    return " and ".join(change) + ("" if stage.load is None else f" on {stage.load}")


def _amount(amount: Distribution, unit: str, what: str, done: tuple[str, str]) -> str:
    mean = amount.expectation
    text = f"{abs(mean):g} {unit} {what}{done[0] if mean > 0.0 else done[1]}"
    return text if isinstance(amount, Constant) else f"about {text} ({amount.describe(unit)})"


def stage_rows(scenario: Scenario, site: SiteModel) -> list[Row]:
    """Return the stages of the load.

    Parameters
    ----------
    scenario : Scenario
        As read.
    site : SiteModel
        Its stages, at the means.

    Returns
    -------
    rows : list of dict
        Name, times, change in words, and fill and pressure of the load that is assessed after each stage.
    """
    rows: list[Row] = []
    pressed = any(stage.pressure is not None for stage in scenario.stages if stage.load is None)
    for stage in scenario.stages:
        pressure = float(site.pressure(stage.end))
        rows.append(
            {
                "name": stage.name,
                "start": stage.start,
                "end": stage.end,
                "change_text": stage_change(stage),
                "height_after": round(float(site.fill_height(stage.end)), 9),
                "pressure_after": round(pressure, 9) if pressed else None,
            }
        )
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
