"""All formulas of a calculation sheet, in the order in which it is followed."""

from typing import Any

from probsoil.assessment import sheet_formulas as stress
from probsoil.assessment import sheet_further_formulas as further
from probsoil.assessment.bearing_formulas import bearing_formulas
from probsoil.assessment.distortion_formulas import distortion_formulas
from probsoil.assessment.influence_formulas import influence_formulas
from probsoil.assessment.load_formulas import load_formulas
from probsoil.assessment.sheet_run import SheetRun
from probsoil.assessment.sheet_sublayers import Sublayer


def worked_lines(run: SheetRun, example: Sublayer, content: dict[str, Any]) -> list[dict[str, Any]]:
    """Return every formula with the numbers of one row put in.

    Parameters
    ----------
    run : SheetRun
        The computation.
    example : Sublayer
        The sub-layer whose numbers are put in.
    content : dict
        Parts of the sheet: ``sublayers``, ``through_time``, ``segments``, ``drains``,
        ``strength_in_rows``, ``slip``, ``distortion`` and ``bearing``.

    Returns
    -------
    lines : list of dict
        Each a `worked.Worked`, ready for JSON.
    """
    rows = content["sublayers"]
    row = rows[example.number - 1]
    lines = [
        *stress.in_situ_formulas(run, example, row),
        *influence_formulas(run, row),
        *load_formulas(run, row),
        *stress.compression_formulas(run, example, row),
        *stress.granular_formulas(run, rows),
        *distortion_formulas(run, content["distortion"]),
        *stress.sum_formula(run, rows),
        *further.degree_formulas(content["through_time"]),
        *further.drain_formulas(content["drains"]),
        *further.creep_formulas(run, rows, content["segments"]),
        *further.strength_formulas(run, example, content["strength_in_rows"]),
        *further.slip_formulas(run, content["slip"]),
        *bearing_formulas(content["bearing"]),
    ]
    return [line.to_dict() for line in lines]
