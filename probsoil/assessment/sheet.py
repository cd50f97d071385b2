"""One deterministic calculation, layer by layer, for a checker."""

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.description import fixed_values
from probsoil.assessment.evaluation import space_of
from probsoil.ground.applied_load import stress_at
from probsoil.ground.clay_settlement import cell_settlement
from probsoil.ground.profile import Values, column
from probsoil.ground.response import GroundState, ground_state, screened
from probsoil.ground.site_model import SiteModel, site_model
from probsoil.scenario import Scenario

if TYPE_CHECKING:
    import pandas as pd

_CREST = 2  # zone under the crest


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Sheet:
    """A deterministic calculation.

    Attributes
    ----------
    at : {"mean", "median"}
        Which value every parameter took.
    times : tuple of float, [years]
        Time axis.
    settlement : tuple of float, [m]
        Settlement at each time.
    final_settlement : float, [m]
        Settlement at the horizon.
    layers : tuple of dict
        Stresses, strain and settlement of every layer, [kPa], [-], [m]; ``stress_increase`` is that of
        the load at the horizon, before any loss of weight by submergence.
    strength : tuple of dict
        Undrained strength with depth before loading and at the end of every stage, [kPa].
    slip_safety : dict of str to float, [-]
        Least factor of safety at the end of every stage with fill on the ground.
    values : dict of str to float
        Every quantity as used, in its unit.
    """

    at: str
    times: tuple[float, ...]
    settlement: tuple[float, ...]
    final_settlement: float
    layers: tuple[dict[str, Any], ...]
    strength: tuple[dict[str, Any], ...]
    slip_safety: dict[str, float]
    values: dict[str, float]

    def to_dict(self) -> dict[str, Any]:
        """Return the sheet for JSON.

        Returns
        -------
        record : dict
            The attributes by name.
        """
        record = {name: getattr(self, name) for name in self.__slots__}
        return {key: list(value) if isinstance(value, tuple) else value for key, value in record.items()}

    def to_frame(self) -> "pd.DataFrame":
        """Return the layers as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per layer.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        return pd.DataFrame(list(self.layers))

    def _repr_html_(self) -> str:
        """Return the table of layers for a notebook."""
        return str(self.to_frame().to_html(index=False))


def sheet(scenario: Scenario, at: Literal["mean", "median"] = "mean") -> Sheet:
    """Return one deterministic calculation.

    Parameters
    ----------
    scenario : Scenario
        As read.
    at : {"mean", "median"}
        Which value every uncertain parameter takes. The model error is not applied.

    Returns
    -------
    sheet : Sheet
        Stresses, settlement and strength layer by layer.

    Raises
    ------
    ParameterError
        If `at` is neither.
    """
    values = space_of(scenario).at(at)
    one = fixed_values(values)
    site = screened(site_model(scenario), one, within=0.0)
    state = ground_state(site, one)
    response = state.response
    ends = {stage.end: stage.name for stage in site.stages}
    slip = {
        ends[float(time)]: float(response.slip[0, index])
        for index, time in enumerate(site.slip_times)
        if float(time) in ends
    }
    return Sheet(
        at=at,
        times=tuple(response.times.tolist()),
        settlement=tuple(response.settlement[0].tolist()),
        final_settlement=float(response.settlement[0, -1]),
        layers=tuple(_layer_rows(site, state, values)),
        strength=tuple(_strength_rows(site, state)),
        slip_safety=slip,
        values=values,
    )


def _layer_rows(site: SiteModel, state: GroundState, values: Values) -> list[dict[str, Any]]:
    points = state.ground.points
    added = stress_at(site, state.ground.load, site.horizon)[0]
    settled = _point_settlement(site, state, values)
    rows = []
    for index, layer in enumerate(site.layers):
        mine = points.layer == index
        top, bottom = float(points.boundary[0, index]), float(points.boundary[0, index + 1])
        middle = 0.5 * (top + bottom)

        def at_middle(profile: FloatArray, mine: Any = mine, middle: float = middle) -> float:
            return float(np.interp(middle, points.depth[0, mine], profile[mine]))

        settlement = float(settled[mine].sum())
        rows.append(
            {
                "name": layer.name,
                "soil": "clay" if layer.is_clay else "granular",
                "top": top,
                "bottom": bottom,
                "initial_stress": at_middle(points.stress[0]),
                "preconsolidation": at_middle(state.ground.yield_stress[0]) if layer.is_clay else None,
                "stress_increase": at_middle(added),
                "void_ratio": float(state.ground.columns.void_ratio[0, index]) if layer.is_clay else None,
                "strain": settlement / (bottom - top),
                "settlement": settlement,
            }
        )
    return rows


def _point_settlement(site: SiteModel, state: GroundState, values: Values) -> FloatArray:
    """Return the settlement that each point stands for at the horizon, shape (n_point,), [m]."""
    ground = state.ground
    settled = np.zeros(ground.points.layer.size)
    settled[ground.clay] = cell_settlement(site, ground, state.consolidation)[0]
    added = stress_at(site, ground.load, site.horizon)[0]
    for index, layer in enumerate(site.layers):
        if not layer.is_clay:
            mine = ground.points.layer == index
            modulus = float(column(values, f"{layer.name}.constrained_modulus", 1)[0])
            settled[mine] = added[mine] * ground.points.thickness[0, mine] / modulus
    return settled


def _strength_rows(site: SiteModel, state: GroundState) -> list[dict[str, Any]]:
    ground = state.ground
    rows = []
    for point in np.flatnonzero(ground.clay):
        after = {
            stage.name: float(state.strength[np.searchsorted(site.record, stage.end), 0, _CREST, point])
            for stage in site.stages
        }
        rows.append(
            {
                "depth": float(ground.points.depth[0, point]),
                "layer": site.layers[ground.points.layer[point]].name,
                "before": float(state.strength_before[0, point]),
                "at_end_of_stage": after,
            }
        )
    return rows
