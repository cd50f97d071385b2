"""Which headings of the AGS4 standard (4.0.4 to 4.2) fill which column, and which are seen and not used."""

from dataclasses import dataclass

HOLE = ("LOCA_ID",)
SAMPLE = ("LOCA_ID", "SAMP_TOP", "SAMP_REF", "SAMP_TYPE", "SAMP_ID")
SPECIMEN = (*SAMPLE, "SPEC_REF", "SPEC_DPTH")
_DEPTH = ("SPEC_DPTH", "SAMP_TOP")


@dataclass(frozen=True, slots=True, kw_only=True)
class Filling:
    """How a group fills a table.

    Attributes
    ----------
    group, table : str
        Where from and where to.
    cells : dict of str to tuple of str
        Headings of a column; the first that is not empty in a row counts.
    suffix : str
        Kind of test, at the end of its name; empty where rows have no test.
    """

    group: str
    table: str
    cells: dict[str, tuple[str, ...]]
    suffix: str = ""


FILLINGS: tuple[Filling, ...] = (
    Filling(
        group="LOCA",
        table="holes",
        cells={
            "hole": HOLE,
            "x": ("LOCA_LOCX", "LOCA_NATE"),
            "y": ("LOCA_LOCY", "LOCA_NATN"),
            "final depth": ("LOCA_FDEP",),
        },
    ),
    Filling(
        group="GEOL",
        table="strata",
        cells={
            "hole": HOLE,
            "top": ("GEOL_TOP",),
            "base": ("GEOL_BASE",),
            "stratum": ("GEOL_FORM", "GEOL_GEOL", "GEOL_DESC"),
        },
    ),
    Filling(
        group="LLPL",
        table="plasticity",
        cells={"hole": HOLE, "depth": _DEPTH, "plasticity index": ("LLPL_PI",)},
    ),
    Filling(
        group="CONG",
        table="oedometer specimens",
        cells={
            "hole": HOLE,
            "depth": _DEPTH,
            "initial void ratio": ("CONG_IVR",),
            "initial height": ("CONG_HIGT",),
        },
        suffix="oedometer",
    ),
    Filling(
        group="CONS",
        table="oedometer increments",
        cells={
            "increment": ("CONS_INCN",),
            "stress": ("CONS_INCF",),
            "void ratio": ("CONS_INCE",),
            "cv": ("CONS_CVLG", "CONS_CVRT"),
        },
        suffix="oedometer",
    ),
    Filling(
        group="ESCG",
        table="oedometer specimens",
        cells={
            "hole": HOLE,
            "depth": _DEPTH,
            "initial void ratio": ("ESCG_IVR",),
            "initial height": ("ESCG_HIGT",),
            "drainage": ("ESCG_DRAG",),
            "preconsolidation stress": ("ESCG_PCP",),
        },
        suffix="consolidation",
    ),
    Filling(
        group="ESCT",
        table="oedometer increments",
        cells={
            "increment": ("ESCT_INCN",),
            "stress": ("ESCT_INCF",),
            "void ratio": ("ESCT_VRE",),
            "cv": ("ESCT_INCV",),
        },
        suffix="consolidation",
    ),
    Filling(
        group="TRIT",
        table="triaxial specimens",
        cells={"hole": HOLE, "depth": _DEPTH, "kind": ("TRIG_TYPE",)},
        suffix="triaxial",
    ),
    Filling(
        group="TRIT",
        table="triaxial readings",
        cells={"axial strain": ("TRIT_STRN",), "deviator stress": ("TRIT_DEVF",)},
        suffix="triaxial",
    ),
    Filling(
        group="TRET",
        table="triaxial specimens",
        cells={
            "hole": HOLE,
            "depth": _DEPTH,
            "kind": ("TREG_TYPE",),
            "axial stress": ("TRET_CVP", "TRET_CONP"),
            "radial stress": ("TRET_CRP", "TRET_CONP"),
            "void ratio": ("TRET_IVR",),
        },
        suffix="triaxial",
    ),
    Filling(
        group="TRET",
        table="triaxial readings",
        cells={
            "axial strain": ("TRET_STRN",),
            "deviator stress": ("TRET_DEVF",),
            "pore pressure change": ("TRET_PWPF",),
            "volumetric strain": ("TRET_STV",),
        },
        suffix="triaxial",
    ),
    Filling(
        group="IVAN",
        table="vane",
        cells={
            "hole": HOLE,
            "depth": ("IVAN_DPTH",),
            "strength": ("IVAN_IVAN",),
            "remoulded strength": ("IVAN_IVAR",),
            "corrected": ("IVAN_METH", "IVAN_REM"),
        },
    ),
    Filling(
        group="SCPT",
        table="cone",
        cells={
            "hole": HOLE,
            "test": ("SCPG_TESN",),
            "depth": ("SCPT_DPTH",),
            "cone resistance": ("SCPT_RES",),
            "sleeve friction": ("SCPT_FRES",),
            "pore pressure": ("SCPT_PWP2",),
            "area ratio": ("SCPG_CAR",),
        },
    ),
    Filling(
        group="CPTT",
        table="cone",
        cells={
            "hole": HOLE,
            "test": ("CPTG_TESN",),
            "depth": ("CPTT_DPTH", "CPTT_PLEN"),
            "cone resistance": ("CPTT_QC",),
            "sleeve friction": ("CPTT_FS",),
            "pore pressure": ("CPTT_U2",),
            "area ratio": ("CPTG_CAR",),
        },
    ),
)
PARENTS: dict[str, tuple[str, ...]] = {
    "SAMP": SAMPLE,
    "CONG": SPECIMEN,
    "TRIG": SPECIMEN,
    "TREG": SPECIMEN,
    "SCPG": ("LOCA_ID", "SCPG_TESN"),
    "CPTG": ("LOCA_ID", "CPTG_TESN"),
}
PARENT_OF: dict[str, str] = {
    "CONS": "CONG",
    "TRIT": "TRIG",
    "TRET": "TREG",
    "SCPT": "SCPG",
    "CPTT": "CPTG",
}
"""Groups whose rows take something from a row of another group."""

LENT: dict[str, tuple[str, ...]] = {
    "TRIT": ("TRIG_TYPE",),
    "TRET": ("TREG_TYPE",),
    "SCPT": ("SCPG_CAR",),
    "CPTT": ("CPTG_CAR",),
}
"""Headings of the parent that stand for a column of the child."""

NOT_FIELD_TESTS: dict[str, dict[str, frozenset[str]]] = {
    "CONS": {"CONG_TYPE": frozenset({"EXPANDABILITY", "SETTLESAT", "SWELL", "SWELLPRESS"})},
    "CPTT": {"CPTG_TYPE": frozenset({"BALL", "T-BAR"})},
}
"""Kinds of test that share a group with the one wanted and are no such test."""

DERIVED: dict[str, str] = {
    "SCPP": "parameters somebody derived from cone soundings",
    "CPTP": "parameters somebody derived from cone soundings",
    "SCDG": "dissipation tests",
    "SCDT": "readings of dissipation tests",
}
"""Groups that are seen, counted and not used."""

DERIVED_HEADINGS = frozenset(
    {
        *("CONS_INMV", "CONS_INSC", "ESCG_CC", "ESCG_CS", "ESCG_YSR", "ESCT_INMV", "ESCT_INSC", "ESCT_INK"),
        *("TRIT_CU", "TRET_CU", "TRET_E50", "SCPT_QT", "SCPT_QNET", "SCPT_BQ"),
        *("CPTT_QT", "CPTT_QNET", "CPTT_BQ"),
    }
)
"""Headings of groups that are read whose values are computed here anew."""

ADMINISTRATION = frozenset({"PROJ", "TRAN", "ABBR", "TYPE", "UNIT", "DICT", "FILE"})
DISTURBED = frozenset({"AMAL", "B", "COMP", "D", "LB", "SPTLS"})
