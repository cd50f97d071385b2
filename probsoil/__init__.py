"""Probabilistic settlement and undrained stability of works on soft clay.

The names below are imported when first used, so that ``import probsoil`` costs next to nothing.

Examples
--------
>>> import probsoil
>>> scenario = probsoil.read("bridge.toml")  # doctest: +SKIP
>>> assessment = probsoil.assess(scenario)  # doctest: +SKIP
"""

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from probsoil.assessment import Assessment, Sheet, assess
    from probsoil.assessment.back_check import BackCheck, back_check
    from probsoil.assessment.sheet import sheet
    from probsoil.assessment.specimen_parameters import specimen_parameters
    from probsoil.errors import (
        ConvergenceError,
        DependenceError,
        ParameterError,
        ProbsoilError,
        ResultsError,
        ScenarioError,
        ShapeError,
        StoppedEarly,
        UnfitFolderError,
    )
    from probsoil.ground.cam_clay import CamClay, ClayState, isotropic_state
    from probsoil.ground.element_paths import oedometer_path, triaxial_path
    from probsoil.laboratory.interpretation import Interpretation, interpret
    from probsoil.scenario import Scenario
    from probsoil.scenario import read_scenario as read

    __version__: str

__all__ = [
    "Assessment",
    "BackCheck",
    "CamClay",
    "ClayState",
    "ConvergenceError",
    "DependenceError",
    "Interpretation",
    "ParameterError",
    "ProbsoilError",
    "ResultsError",
    "Scenario",
    "ScenarioError",
    "ShapeError",
    "Sheet",
    "StoppedEarly",
    "UnfitFolderError",
    "__version__",
    "assess",
    "back_check",
    "interpret",
    "isotropic_state",
    "oedometer_path",
    "read",
    "sheet",
    "specimen_parameters",
    "triaxial_path",
]

_HOMES = {
    "Assessment": "assessment",
    "BackCheck": "assessment.back_check",
    "CamClay": "ground.cam_clay",
    "ClayState": "ground.cam_clay",
    "Sheet": "assessment",
    "Interpretation": "laboratory.interpretation",
    "assess": "assessment",
    "back_check": "assessment.back_check",
    "interpret": "laboratory.interpretation",
    "isotropic_state": "ground.cam_clay",
    "oedometer_path": "ground.element_paths",
    "sheet": "assessment",
    "specimen_parameters": "assessment.specimen_parameters",
    "triaxial_path": "ground.element_paths",
    "Scenario": "scenario",
    "read": "scenario",
}


def __getattr__(name: str) -> object:
    """Import a public name when it is first asked for."""
    if name not in __all__:
        raise AttributeError(f"module 'probsoil' has no attribute '{name}'")
    if name == "__version__":
        value: object = _version()
    else:
        home = import_module(f"probsoil.{_HOMES.get(name, 'errors')}")
        value = getattr(home, "read_scenario" if name == "read" else name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    """List the public names, imported yet or not."""
    return sorted({*globals(), *__all__})


def _version() -> str:
    from importlib import metadata

    try:
        return metadata.version("probsoil")
    except metadata.PackageNotFoundError:  # run from a source tree
        return "not installed"
