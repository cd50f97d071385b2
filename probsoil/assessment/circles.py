"""Where the critical slip circles lie, in the form that results.json promises."""

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.description import Row, finite, quantiles
from probsoil.assessment.evaluation import Study
from probsoil.ground.response import GroundState
from probsoil.ground.slip_position import POSITION, critical_positions

_SHOWN = 60  # realisations whose circles a figure shows beside that at the medians
_SPREAD = {"touch_depth": "touch", "exit": "exit_x", "entry": "entry_x"}


def circle_rows(study: Study, position: FloatArray, at_medians: GroundState) -> list[Row]:
    """Return where the critical circle lies at every check, at the medians and over realisations.

    Parameters
    ----------
    study : Study
        Checks and section.
    position : ndarray, shape (n_sample, n_check, 6), [m]
        As `slip_position.critical_positions` gives it.
    at_medians : GroundState
        One realisation with every parameter at its median, on the same circles.

    Returns
    -------
    rows : list of dict
        Ready for JSON.
    """
    site = study.site
    central = critical_positions(site, at_medians.response)
    rows = []
    for check, time in enumerate(site.slip_times.tolist()):
        found = position[:, check].astype(np.float64)
        known = np.isfinite(found).all(axis=1)
        shape = site.embankment
        outline = () if shape is None else shape.section(site.fill_height(time)).outline
        spread: Row = {key: quantiles(found[known, POSITION.index(name)]) for key, name in _SPREAD.items()}
        rows.append(
            spread
            | {
                "realisations": int(known.sum()),
                "at_medians": _one(study, at_medians, central, check),
                "others": _others(found[known][:_SHOWN]),
                "outline": np.round(outline, 9).tolist(),
            }
        )
    return rows


def _one(study: Study, state: GroundState, position: FloatArray, check: int) -> Row | None:
    """Return the circle of one realisation; none where it did not converge."""
    if not state.response.converged[0]:
        return None
    error = study.space.at("median").get("model_error.stability", 1.0)
    row = dict(zip(POSITION, position[0, check].tolist(), strict=True))
    if not np.isfinite(row["radius"]):  # no fill is left
        return None
    exit_y, entry_y = _ends(study, state, row, check)
    return {
        "factor": finite(error * state.response.slip[0, check]),
        "centre": [row["centre_x"], row["centre_y"]],
        "radius": row["radius"],
        "touch_depth": row["touch"],
        "exit": [row["exit_x"], exit_y],
        "entry": [row["entry_x"], entry_y],
    }


def _ends(study: Study, state: GroundState, row: dict[str, float], check: int) -> tuple[float, float]:
    """Return how high above ground level the circle of one realisation leaves and enters, [m]."""
    if study.site.families:
        circle, chosen = study.site.families[check].circles, int(state.response.critical_circle[0, check])
        return float(circle.exit_y[chosen]), float(circle.entry_y[chosen])
    aside = np.array([row["exit_x"], row["entry_x"]]) - row["centre_x"]
    level = row["centre_y"] - np.sqrt(np.maximum(row["radius"] ** 2 - aside**2, 0.0))
    return float(level[0]), float(level[1])


def _others(found: FloatArray) -> list[Row]:
    """Return the circles of some realisations, each once."""
    kept = [POSITION.index(name) for name in ("centre_x", "centre_y", "radius", "exit_x", "entry_x")]
    return [
        {"centre": row[:2], "radius": row[2], "exit_x": row[3], "entry_x": row[4]}
        for row in np.unique(np.round(found[:, kept], 4), axis=0).tolist()
    ]
