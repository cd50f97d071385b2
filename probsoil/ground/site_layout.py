"""What is laid out once for all realisations: the embankment, when things are looked at, slip circles."""

from collections.abc import Sequence
from functools import reduce
from itertools import accumulate

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.amounts import Amount, Reading, greater, lesser, mean_of
from probsoil.ground.embankment import Embankment
from probsoil.ground.foundation import further_foundation
from probsoil.ground.further_load import FurtherLoadForm
from probsoil.ground.site_forms import LayerForm, StageForm, height_at, laid_share
from probsoil.ground.slip_circles import CircleLayout
from probsoil.scenario import Scenario
from probsoil.scenario.distributions import Constant
from probsoil.scenario.further_loads import FurtherEmbankment
from probsoil.scenario.loads import EmbankmentLoad, Load
from probsoil.scenario.quantities import further_address

_DEEPER = 1.25  # circles reach this far below the mean bottom of the profile, for thicker realisations
_WIDTHS = 0.75  # and never deeper than this share of the embankment's base
_ROUNDING = 1e-9  # m; sums of heights carry rounding
NONE = Constant(value=0.0)
"""What is given for nothing."""


def embankment_of(
    scenario: Scenario, stages: Sequence[StageForm], read: Reading = mean_of
) -> Embankment | None:
    """Return the embankment that a load is.

    Parameters
    ----------
    scenario : Scenario
        As read.
    stages : sequence of StageForm
        In order of time.
    read : callable
        Gives width and slope; the means if left out.

    Returns
    -------
    embankment : Embankment or None
        None for any other load.
    """
    load = scenario.load
    if not isinstance(load, EmbankmentLoad):
        return None
    pit = pit_depth(stages)
    full_height = greatest_height(stages) - pit
    return Embankment(
        pit=pit,
        crest_width=read("load.crest_width", load.crest_width),
        side_slope=read("load.side_slope", load.side_slope),
        full_height=full_height,
        berm_width=load.berm_width or 0.0,
        berm_height=lesser(load.berm_height or 0.0, full_height),
    )


def pit_depth(stages: Sequence[StageForm]) -> float:
    """Return to what depth stages dig soil out in all.

    Parameters
    ----------
    stages : sequence of StageForm
        In order of time.

    Returns
    -------
    depth : float, [m]
        Below ground level.
    """
    return sum((stage.excavate for stage in stages), 0.0)


def greatest_height(stages: Sequence[StageForm], load: str | None = None) -> Amount:
    """Return the greatest height of fill that a load ever has.

    Parameters
    ----------
    stages : sequence of StageForm
        In order of time.
    load : str or None
        Which further load; None for the load that is assessed.

    Returns
    -------
    height : float or ndarray, shape (n_sample,), [m]
        Greatest over the ends of its stages.
    """
    return reduce(greater, accumulate(stage.height for stage in stages if stage.load == load))


def further_load_forms(
    scenario: Scenario, stages: Sequence[StageForm], read: Reading = mean_of
) -> tuple[FurtherLoadForm, ...]:
    """Return the further loads of a scenario.

    Parameters
    ----------
    scenario : Scenario
        As read.
    stages : sequence of StageForm
        In order of time.
    read : callable
        Gives widths, slopes and depths; the means if left out.

    Returns
    -------
    loads : tuple of FurtherLoadForm
        In the order given.
    """
    return tuple(
        FurtherLoadForm(
            name=load.name,
            address=further_address(load.name),
            embankment=Embankment(
                crest_width=read(f"{further_address(load.name)}.crest_width", load.crest_width),
                side_slope=read(f"{further_address(load.name)}.side_slope", load.side_slope),
                full_height=greatest_height(stages, load.name),
                berm_width=load.berm_width or 0.0,
                berm_height=lesser(load.berm_height or 0.0, greatest_height(stages, load.name)),
            )
            if isinstance(load, FurtherEmbankment)
            else None,
            foundation=further_foundation(load, read),
            x=getattr(load, "x", 0.0),
            y=getattr(load, "y", 0.0),
        )
        for load in scenario.further_loads
    )


def traffic_start(load: Load, stages: Sequence[StageForm]) -> float:
    """Return when traffic begins to count: as given, or when the fill is first at its greatest height.

    Parameters
    ----------
    load : Load
        Load of a scenario.
    stages : sequence of StageForm
        In order of time.

    Returns
    -------
    time : float, [years]
        Infinite without traffic.
    """
    if not isinstance(load, EmbankmentLoad) or load.traffic == NONE:
        return float(np.inf)
    if load.traffic_from is not None:
        return load.traffic_from
    own = [stage for stage in stages if stage.load is None]
    heights = np.cumsum([float(stage.height) for stage in own])
    highest = int(np.argmax(heights > heights.max() - _ROUNDING))
    return own[highest].end


def limit_times(scenario: Scenario) -> list[float]:
    """Return the times that limits look at.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    times : list of float, [years]
        In the order of the limits.
    """
    times: list[float] = []
    for limit in scenario.limits:
        at, between = getattr(limit, "at", None), getattr(limit, "between", None)
        times += [] if at is None else [at]
        times += [] if between is None else list(between)
        if limit.quantity == "time_to_consolidation" and limit.threshold <= scenario.horizon:
            times.append(limit.threshold)
    return times


def recorded_times(
    scenario: Scenario, stages: Sequence[StageForm], embankment: Embankment | None
) -> tuple[FloatArray, FloatArray]:
    """Return the times at which stresses are kept, and those at which slip is looked at.

    Parameters
    ----------
    scenario : Scenario
        As read.
    stages : sequence of StageForm
        In order of time.
    embankment : Embankment or None
        As laid out.

    Returns
    -------
    record, slip_times : ndarray, shape (n_record,) and (n_check,), [years]
        Rising.
    """
    ends = {stage.end for stage in stages}
    degree = {limit.at for limit in scenario.limits if limit.quantity == "degree_of_consolidation"}
    slip = _times_of(scenario, "slip_safety")
    if embankment is not None and np.isfinite(traffic := traffic_start(scenario.load, stages)):
        slip.add(traffic)
    hold = getattr(scenario.load, "hold_level_until", None)
    kept = ends | degree | slip | _times_of(scenario, "bearing_safety") | {float(scenario.horizon)}
    kept |= set() if hold is None else {hold}
    record = np.array(sorted(time for time in kept if time > 0.0), dtype=np.float64)
    fill_phi = getattr(scenario.load, "fill_phi", None)
    if embankment is None or embankment.pit > 0.0 or fill_phi is None:  # no slip through replaced ground
        return record, np.zeros(0)
    check = [time for time in sorted(ends | slip) if time > 0.0 and height_at(stages, time) > 0.0]
    return record, np.array(check, dtype=np.float64)


def _times_of(scenario: Scenario, quantity: str) -> set[float]:
    """Return the single times at which limits of a quantity look."""
    times = {getattr(limit, "at", None) for limit in scenario.limits if limit.quantity == quantity}
    return {time for time in times if time is not None}


def bearing_check_times(scenario: Scenario, stages: Sequence[StageForm]) -> FloatArray:
    """Return when bearing is looked at: stage ends and times of limits, where there is a load.

    Parameters
    ----------
    scenario : Scenario
        As read.
    stages : sequence of StageForm
        In order of time.

    Returns
    -------
    times : ndarray, shape (n_bearing,), [years]
        Rising.
    """
    times = {stage.end for stage in stages} | _times_of(scenario, "bearing_safety")
    loaded = [time for time in sorted(times) if time > 0.0 and _pressed(stages, time)]
    return np.array(loaded, dtype=np.float64)


def _pressed(stages: Sequence[StageForm], time: float) -> bool:
    own = [stage for stage in stages if stage.load is None]
    pressure = sum(stage.pressure * laid_share(stage, time) for stage in own)
    return bool(height_at(stages, time) > 0.0 or pressure > 1e-9)


def circle_depth(embankment: Embankment, layers: Sequence[LayerForm]) -> float:
    """Return the depth below which no slip circle goes.

    Parameters
    ----------
    embankment : Embankment
        In plain numbers.
    layers : sequence of LayerForm
        From ground level down.

    Returns
    -------
    depth : float, [m]
        Somewhat below the mean bottom of the profile, at most a share of the width of the embankment.
    """
    bottom = np.cumsum([layer.mean_thickness for layer in layers]).tolist()[-1]
    return float(min(_DEEPER * bottom, _WIDTHS * embankment.base_width))


def circle_layouts(
    embankment: Embankment | None,
    layers: Sequence[LayerForm],
    stages: Sequence[StageForm],
    slip_times: FloatArray,
    *,
    density: float,
    cohesive_fill: bool,
) -> tuple[CircleLayout, ...]:
    """Return the slip circles to look at.

    Parameters
    ----------
    embankment : Embankment or None
        As laid out.
    layers : sequence of LayerForm
        From ground level down.
    stages : sequence of StageForm
        In order of time.
    slip_times : ndarray, shape (n_check,), [years]
        When slip is looked at.
    density : float, [-]
        Circles are this many times denser.
    cohesive_fill : bool
        Whether circles wholly in the fill count.

    Returns
    -------
    layouts : tuple of CircleLayout
        One for each of `slip_times`; empty without an embankment.
    """
    if embankment is None:
        return ()
    boundaries = np.cumsum([layer.mean_thickness for layer in layers]).tolist()
    depth = circle_depth(embankment, layers)
    frictional = any(not layer.is_clay for layer in layers)
    return tuple(
        CircleLayout(
            section=embankment.section(height_at(stages, float(time))),
            depth=depth,
            boundaries=tuple(boundaries),
            density=density,
            frictional_ground=frictional,
            within_fill=cohesive_fill,
        )
        for time in slip_times
    )
