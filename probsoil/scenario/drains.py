"""Prefabricated vertical drains."""

from typing import Annotated, Literal

from pydantic import Field

from probsoil.scenario.amounts import text_of
from probsoil.scenario.base import Table
from probsoil.scenario.distributions import Constant, Distribution
from probsoil.scenario.fields import Number, Uncertain


class Drains(Table):
    """A grid of vertical drains from ground level down.

    Attributes
    ----------
    pattern : str
        ``triangular`` or ``square``.
    spacing : Distribution, [m]
        Distance between drains.
    equivalent_diameter : Distribution, [m]
        Diameter of a round drain of the same effect.
    smear_ratio : Distribution, [-]
        Diameter of the smear zone over that of the drain.
    smear_kh_ks : Distribution, [-]
        Horizontal permeability of the undisturbed soil over that of the smear zone.
    installed : float, [year]
        Time from which the drains work.
    bottom : Distribution, [m]
        Depth that they reach.
    discharge_capacity : Distribution or None, [m3/year]
        Flow through a drain at a hydraulic gradient of one; None for drains without resistance.
    """

    pattern: Literal["triangular", "square"] = Field(description="grid of the drains")
    spacing: Annotated[
        Distribution,
        Uncertain(
            kind="length",
            low=0.3,
            high=20.0,
            source="common practice",
            meaning="distance between drains",
            of_works=True,
        ),
    ]
    equivalent_diameter: Annotated[
        Distribution,
        Uncertain(
            kind="length",
            low=0.01,
            high=1.0,
            source="common practice",
            meaning="diameter of a round drain of the same effect, for a band (width + thickness) / 2 or so",
            of_works=True,
        ),
    ]
    smear_ratio: Annotated[
        Distribution,
        Uncertain(
            kind="number",
            low=1.0,
            high=10.0,
            source="common practice",
            meaning="diameter of the smear zone / diameter of the drain; 1 for no smear",
            of_works=True,
        ),
    ] = Constant(value=1.0)
    smear_kh_ks: Annotated[
        Distribution,
        Uncertain(
            kind="number",
            low=1.0,
            high=30.0,
            source="common practice",
            meaning="horizontal permeability of the soil / that of the smear zone",
        ),
    ] = Constant(value=1.0)
    installed: Annotated[
        float,
        Number(
            kind="time",
            low=-100.0,
            high=1000.0,
            source="by definition",
            meaning="time from which the drains work; before 0 is before the first stage",
        ),
    ] = 0.0
    bottom: Annotated[
        Distribution,
        Uncertain(
            kind="length",
            low=0.0,
            high=100.0,
            open_low=True,
            source="by definition",
            meaning="depth that the drains reach",
            of_works=True,
        ),
    ]
    discharge_capacity: Annotated[
        Distribution | None,
        Uncertain(
            kind="discharge capacity",
            low=1.0,
            high=1e5,
            source="common practice",
            meaning="flow through one drain at a hydraulic gradient of one; no resistance if left out",
            of_works=True,
        ),
    ] = None

    def describe(self) -> str:
        """Return the drains in words.

        Returns
        -------
        text : str
            One phrase.
        """
        smear, flow = "", ""
        if self.smear_ratio != Constant(value=1.0):
            wide, ratio = text_of(self.smear_ratio, what="diameters wide"), self.smear_kh_ks.describe("-")
            smear = f", smear zone {wide}, kh/ks {ratio}"
        if self.discharge_capacity is not None:
            flow = f", discharge capacity {text_of(self.discharge_capacity, 'm3/year')}"
        return (
            f"vertical drains in a {self.pattern} grid {text_of(self.spacing, 'm', what='apart')} to "
            f"{text_of(self.bottom, 'm', what='depth')}, equivalent diameter "
            f"{text_of(self.equivalent_diameter, 'm')}{smear}{flow}, at work from {self.installed:.3g} years"
        )
