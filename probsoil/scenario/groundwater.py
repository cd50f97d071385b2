"""Water in the ground that is not at rest: piezometric levels, steady seepage, excess pressure left over."""

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Annotated, Literal, TypeVar

from pydantic import ConfigDict, Field

from probsoil.scenario.base import Table
from probsoil.scenario.distributions import Distribution
from probsoil.scenario.fields import Uncertain

if TYPE_CHECKING:
    from probsoil._typing import FloatArray

Level = TypeVar("Level", float, "FloatArray")


def _head(meaning: str) -> Uncertain:
    return Uncertain(kind="length", low=-50.0, high=200.0, source="common practice", meaning=meaning)


_LEVEL = (
    "depth below ground level of the level to which water rises in a standpipe {where}; negative above "
    "ground level (artesian), deeper than the water table where the ground is drained from below"
)
BaseHead = Annotated[
    Distribution | None,
    _head(_LEVEL.format(where="at the bottom of the last layer") + "; the water table if left out"),
]
LayerHead = Annotated[
    Distribution | None,
    _head(
        _LEVEL.format(where="in this layer")
        + "; if left out it follows from the levels above and below, the water table where there are none"
    ),
]


class InitialExcess(Table):
    """Pore pressure in a clay layer that is still to dissipate when the works begin, in one of two forms.

    Attributes
    ----------
    pressure : Distribution or None, [kPa]
        Greatest excess pore pressure, as measured.
    shape : str
        How it varies with depth: ``sine``, ``uniform`` or ``triangular``; goes with `pressure`.
    degree : Distribution or None, [-]
        Average degree of consolidation reached under `load`.
    load : Distribution or None, [kPa]
        Load under which the clay is still consolidating; goes with `degree`.
    """

    model_config = ConfigDict(
        json_schema_extra={
            "oneOf": [
                {
                    "required": ["pressure"],
                    "not": {"anyOf": [{"required": ["degree"]}, {"required": ["load"]}]},
                },
                {
                    "required": ["degree", "load"],
                    "not": {"anyOf": [{"required": ["pressure"]}, {"required": ["shape"]}]},
                },
            ]
        }
    )

    pressure: Annotated[
        Distribution | None,
        Uncertain(
            kind="pressure",
            low=0.0,
            high=1000.0,
            source="common practice",
            meaning="greatest pore pressure in excess of the steady state when the works begin",
            symbol="initial_excess",
        ),
    ] = None
    shape: Literal["sine", "uniform", "triangular"] = Field(
        default="sine",
        description="how that pressure varies with depth: sine (nothing at drained faces), uniform, or "
        "triangular (nothing at the top, most at the bottom); not with degree",
    )
    degree: Annotated[
        Distribution | None,
        Uncertain(
            kind="number",
            low=0.0,
            high=1.0,
            source="by definition",
            meaning="average degree of consolidation reached under load when the works begin; needs load",
            symbol="initial_degree",
        ),
    ] = None
    load: Annotated[
        Distribution | None,
        Uncertain(
            kind="pressure",
            low=0.0,
            high=1000.0,
            source="common practice",
            meaning="earlier load under which the layer is still consolidating, whose weight the layers "
            "already hold; needs degree",
            symbol="initial_load",
        ),
    ] = None


def piezometric_levels(
    water_table: Level, resistance: Sequence[Level], controls: Mapping[int, Level]
) -> list[Level]:
    """Return the piezometric level at every layer boundary in steady vertical seepage.

    Parameters
    ----------
    water_table : float or ndarray, shape (n_sample,), [m]
        Depth of the water table.
    resistance : sequence of float or ndarray, shape (n_sample,), [year]
        Of every layer: thickness below the water table over permeability, nothing where it is granular.
    controls : mapping of int to float or ndarray, shape (n_sample,), [m]
        Level that is known at a layer boundary (0 is ground level), as depth below ground level.

    Returns
    -------
    levels : list of float or ndarray, shape (n_sample,), [m]
        At ground level and the bottom of every layer, as depths below ground level.

    Notes
    -----
    Between two known levels the flow is the same through every layer, so each loses head in proportion
    to its resistance (Darcy's law); below the last one nothing flows.
    """
    levels, place, start = [water_table], 0, water_table
    for boundary in sorted(controls):
        between = list(resistance[place:boundary])
        total = sum(between[1:], start=between[0]) if between else 0.0 * start
        safe, passed = total + (total <= 0.0), 0.0 * start
        for part in between:
            passed = passed + part
            levels.append(start + (controls[boundary] - start) * (passed / safe))
        levels[boundary] = controls[boundary]
        place, start = boundary, controls[boundary]
    return levels + [start] * (len(resistance) - place)


def controlled_boundaries(heads: Sequence[bool], *, base_drained: bool) -> dict[int, int | None]:
    """Return at which layer boundaries the piezometric level is known, and from what.

    Parameters
    ----------
    heads : sequence of bool, [-]
        Whether each layer has a level of its own.
    base_drained : bool
        Whether what lies below the last layer drains freely.

    Returns
    -------
    controls : dict of int to int or None
        Boundary (0 is ground level) to the layer whose level acts there; None for the base.
    """
    known: dict[int, int | None] = {len(heads): None} if base_drained else {}
    for index, given in enumerate(heads):
        if given:
            known |= {index: index, index + 1: index}
    return known


def excess_runs(given: Sequence[bool], *, base_drained: bool) -> list[tuple[int, int, bool]]:
    """Return over which layers the initial excess pore pressure of each layer is spread.

    Parameters
    ----------
    given : sequence of bool, [-]
        Whether each layer has any.
    base_drained : bool
        Whether what lies below the last layer drains freely.

    Returns
    -------
    runs : list of (int, int, bool), [-]
        First and last layer of the run of neighbours that each belongs to, and whether no water leaves at
        its bottom (it ends at an undrained base).
    """
    runs = []
    for index in range(len(given)):
        first = last = index
        while first > 0 and given[first - 1] and given[index]:
            first -= 1
        while last + 1 < len(given) and given[last + 1] and given[index]:
            last += 1
        runs.append((first, last, last + 1 == len(given) and not base_drained))
    return runs
