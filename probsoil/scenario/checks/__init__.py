"""Checks that look at more than one key: what cannot be true together.

Each takes a scenario read in full or in part (what could not be read is `UNREAD`) and
returns slips, so that one pass over a file finds every mistake.
"""

from typing import Any

from probsoil.scenario.checks.combinations import combination_slips
from probsoil.scenario.checks.dependence import dependence_slips
from probsoil.scenario.checks.drains import drain_slips
from probsoil.scenario.checks.embankment import embankment_slips
from probsoil.scenario.checks.evidence import evidence_slips
from probsoil.scenario.checks.excavation import excavation_slips
from probsoil.scenario.checks.further_loads import further_load_slips
from probsoil.scenario.checks.ground import ground_slips
from probsoil.scenario.checks.groundwater import groundwater_slips
from probsoil.scenario.checks.limits import limit_slips
from probsoil.scenario.checks.programme import programme_slips
from probsoil.scenario.checks.stations import station_slips
from probsoil.scenario.checks.top_up import top_up_slips
from probsoil.scenario.slips import Slip

__all__ = ["cross_checks"]


def cross_checks(scenario: Any) -> list[Slip]:
    """Return every mistake that shows only when keys are seen together.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    checks = (
        ground_slips,
        groundwater_slips,
        programme_slips,
        further_load_slips,
        excavation_slips,
        embankment_slips,
        top_up_slips,
        drain_slips,
        limit_slips,
        dependence_slips,
        evidence_slips,
        station_slips,
        combination_slips,
    )
    return [slip for check in checks for slip in check(scenario)]
