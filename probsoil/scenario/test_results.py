"""One result of one test, and what results there may be."""

from dataclasses import dataclass, replace
from typing import Literal, get_args

from probsoil.units import Kind

TestKind = Literal["oedometer", "triaxial", "vane", "cone"]
KINDS: tuple[TestKind, ...] = get_args(TestKind)
TestParameter = Literal[
    "lambda",
    "kappa",
    "preconsolidation_stress",
    "cv",
    "k",
    "C_alpha_ratio",
    "M",
    "su",
    "su_ratio",
    "Lambda",
    "void_ratio",
    "q_net",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class ResultKind:
    """What one number of a test is.

    Attributes
    ----------
    kind : str
        Kind of quantity, which fixes the unit.
    low, high : float, [base unit]
        Range; 0 itself is outside.
    meaning : str
        In words.
    """

    kind: Kind
    low: float
    high: float
    meaning: str


PARAMETERS: dict[TestParameter, ResultKind] = {
    "lambda": ResultKind(
        kind="number", low=0.0, high=10.0, meaning="drop of void ratio per unit of ln stress"
    ),
    "kappa": ResultKind(kind="number", low=0.0, high=5.0, meaning="the same in unloading and reloading"),
    "preconsolidation_stress": ResultKind(
        kind="pressure", low=0.0, high=20000.0, meaning="effective vertical preconsolidation stress"
    ),
    "cv": ResultKind(
        kind="coefficient of consolidation", low=0.0, high=1e4, meaning="coefficient of consolidation, virgin"
    ),
    "k": ResultKind(
        kind="permeability", low=0.0, high=1e-2, meaning="vertical permeability at the void ratio in situ"
    ),
    "C_alpha_ratio": ResultKind(
        kind="number", low=0.0, high=1.0, meaning="secondary compression index / compression index"
    ),
    "M": ResultKind(
        kind="number", low=0.0, high=3.0, meaning="slope q/p' of the critical state line in compression"
    ),
    "su": ResultKind(
        kind="pressure",
        low=0.0,
        high=2000.0,
        meaning="undrained strength in situ, in triaxial compression; of a vane, along a slip surface",
    ),
    "su_ratio": ResultKind(
        kind="number",
        low=0.0,
        high=3.0,
        meaning="undrained strength / effective stress, normally consolidated",
    ),
    "Lambda": ResultKind(
        kind="number",
        low=0.0,
        high=2.0,
        meaning="exponent of the overconsolidation ratio in the strength",
    ),
    "void_ratio": ResultKind(kind="number", low=0.0, high=20.0, meaning="void ratio in situ"),
    "q_net": ResultKind(kind="pressure", low=0.0, high=50000.0, meaning="net cone resistance"),
}
"""What a test may give."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Measured:
    """A measured number.

    Attributes
    ----------
    value : float, [base unit]
        As measured.
    standard_error : float, [base unit]
        Of the interpretation alone; 0 where not given.
    """

    value: float
    standard_error: float


@dataclass(frozen=True, slots=True, kw_only=True)
class TestResult:
    """One number that one test gave.

    Attributes
    ----------
    kind, test, hole : str
        Kind of test, its name and the borehole or sounding; the last may be empty.
    x, y : float or None, [m]
        Plan position where known.
    layer : str
        Layer; empty where the depth tells.
    depth : float, [m]
        Below ground level.
    parameter : str
        What was measured.
    value, standard_error : float, [base unit]
        The number, and the error of its interpretation.
    flag : str
        Why it is doubtful; empty if it is not.
    """

    __test__ = False  # not a class of tests

    kind: TestKind
    test: str
    hole: str
    x: float | None
    y: float | None
    layer: str
    depth: float
    parameter: TestParameter
    value: float
    standard_error: float
    flag: str

    def moved(self, origin: tuple[float, float]) -> "TestResult":
        """Return the same result with its plan position from another centre.

        Parameters
        ----------
        origin : tuple of float, [m]
            The other centre, from the present one.

        Returns
        -------
        result : TestResult
            Without a position as it is.
        """
        if self.x is None or self.y is None:
            return self
        return replace(self, x=self.x - origin[0], y=self.y - origin[1])
