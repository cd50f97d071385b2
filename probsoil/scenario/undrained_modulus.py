"""Stiffness of clay that has no time to drain."""

from typing import Annotated

from pydantic import ConfigDict

from probsoil.scenario.base import Table
from probsoil.scenario.distributions import Distribution
from probsoil.scenario.fields import Uncertain


class UndrainedModulus(Table):
    """Undrained Young's modulus of a clay layer, in one of two forms.

    Attributes
    ----------
    Eu : Distribution or None, [kPa]
        The modulus, one value for the layer.
    ratio : Distribution or None, [-]
        The modulus over the undrained strength in triaxial compression before the works.
    """

    model_config = ConfigDict(json_schema_extra={"oneOf": [{"required": [key]} for key in ("Eu", "ratio")]})

    Eu: Annotated[
        Distribution | None,
        Uncertain(
            kind="pressure",
            low=100.0,
            high=1e6,
            source="common practice",
            meaning="undrained Young's modulus, one value for the layer",
            spatial=True,
        ),
    ] = None
    ratio: Annotated[
        Distribution | None,
        Uncertain(
            kind="number",
            low=20.0,
            high=3000.0,
            source="common practice",
            meaning="undrained Young's modulus / undrained strength in triaxial compression before the "
            "works, at every depth",
            symbol="Eu_su",
            spatial=True,
        ),
    ] = None
