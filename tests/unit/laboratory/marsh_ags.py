"""The AGS4 file of Tern Marsh: triaxial tests at failure only, oedometers without readings in time."""

from collections.abc import Iterable, Sequence

from marsh_files import Sheets, sheets
from marsh_truth import AREA_RATIO, HOLES, VANES, WATER_TABLE

Head = list[tuple[str, str, str]]  # heading, unit, type
Row = Sequence[object]
LOCA: Head = [("LOCA_ID", "", "ID")]
SAMPLE: Head = [
    *LOCA,
    ("SAMP_TOP", "m", "2DP"),
    ("SAMP_REF", "", "X"),
    ("SAMP_TYPE", "", "PA"),
    ("SAMP_ID", "", "ID"),
]
SPECIMEN: Head = [*SAMPLE, ("SPEC_REF", "", "X"), ("SPEC_DPTH", "m", "2DP")]
DATE = "2026-02-03"


class Samples:
    """Keys of samples and specimens, the same wherever a test of them stands."""

    def __init__(self, made: Sheets) -> None:
        self.tops: dict[tuple[str, str, str], float] = {}
        self.places = {str(row[0]): row for row in [*made.specimens, *made.triaxials]}
        for test, row in self.places.items():
            key = (str(row[1]), _reference(test), "P")
            top = float(row[2]) - 0.2  # type: ignore[arg-type]
            self.tops[key] = min(top, self.tops.get(key, top))
        for hole, depth, _ in made.plasticity:
            self.tops[str(hole), f"D{depth}", "D"] = float(depth)  # type: ignore[arg-type]

    def sample(self, hole: str, reference: str, kind: str) -> Row:
        return hole, self.tops[hole, reference, kind], reference, kind, f"{hole}-{reference}"

    def specimen(self, test: str) -> Row:
        _, hole, depth, *_ = self.places[test]
        number = "2" if "C" in test.split()[1] else "1"  # a triaxial specimen lies below the oedometer's
        return *self.sample(str(hole), _reference(test), "P"), number, depth

    def index(self, hole: str, depth: object) -> Row:
        return *self.sample(hole, f"D{depth}", "D"), "1", depth


def _reference(test: str) -> str:
    return test.split()[0].split("-")[1]


def ags_file() -> str:
    """Return the text of the file."""
    made = sheets()
    samples = Samples(made)
    data = {
        "LOCA": _holes(),
        "GEOL": (
            [
                *LOCA,
                ("GEOL_TOP", "m", "2DP"),
                ("GEOL_BASE", "m", "2DP"),
                ("GEOL_DESC", "", "X"),
                ("GEOL_FORM", "", "X"),
            ],
            [(*row[:3], _description(str(row[3])), row[3]) for row in made.strata],
        ),
        "SAMP": (
            [*SAMPLE, ("SAMP_BASE", "m", "2DP"), ("SAMP_SDIA", "mm", "0DP"), ("SAMP_CLSS", "", "X")],
            [
                (
                    *samples.sample(*key),
                    top + (0.8 if key[2] == "P" else 0.2),
                    100,
                    "1" if key[2] == "P" else "4",
                )
                for key, top in samples.tops.items()
            ],
        ),
        "LLPL": (
            [*SPECIMEN, ("LLPL_PI", "", "0DP")],
            [(*samples.index(str(hole), depth), index) for hole, depth, index in made.plasticity],
        ),
        **_consolidation(made, samples),
        **_triaxial(made, samples),
        **_field(made),
    }
    groups = {name: (head, list(rows)) for name, (head, rows) in data.items()}
    return "".join(group(name, head, rows) for name, (head, rows) in {**_front(groups), **groups}.items())


def group(name: str, head: Head, rows: Iterable[Row]) -> str:
    """Return a group: heading, unit and type of each column, then the rows, written to their type."""
    types = [kind for _, _, kind in head]
    lines: list[Sequence[str]] = [
        ("GROUP", name),
        ("HEADING", *(heading for heading, _, _ in head)),
        ("UNIT", *(unit for _, unit, _ in head)),
        ("TYPE", *types),
    ]
    lines += [("DATA", *(_cell(cell, kind) for cell, kind in zip(row, types, strict=True))) for row in rows]
    return "".join(",".join(f'"{cell}"' for cell in line) + "\r\n" for line in lines) + "\r\n"


def _cell(cell: object, kind: str) -> str:
    if isinstance(cell, str) or not kind.endswith("DP"):
        return str(cell)
    return f"{float(cell):.{int(kind[:-2])}f}"  # type: ignore[arg-type]


def _description(stratum: str) -> str:
    words = {
        "crust": "Firm grey brown CLAY",
        "soft clay": "Very soft to soft grey silty CLAY with shell traces",
        "lower clay": "Soft to firm dark grey silty CLAY",
        "sand": "Dense grey medium SAND",
    }
    return words[stratum]


def _holes() -> tuple[Head, list[Row]]:
    head = [
        *LOCA,
        ("LOCA_TYPE", "", "PA"),
        ("LOCA_FDEP", "m", "2DP"),
        ("LOCA_LOCX", "m", "2DP"),
        ("LOCA_LOCY", "m", "2DP"),
    ]
    return head, [(hole, "CP" if hole in VANES else "SCP", end, x, y) for hole, (x, y, end) in HOLES.items()]


def _consolidation(made: Sheets, samples: Samples) -> dict[str, tuple[Head, list[Row]]]:
    general = [
        *SPECIMEN,
        ("CONG_TYPE", "", "PA"),
        ("CONG_COND", "", "PA"),
        ("CONG_SDIA", "mm", "2DP"),
        ("CONG_HIGT", "mm", "2DP"),
        ("CONG_IVR", "", "3DP"),
        ("CONG_METH", "", "X"),
    ]
    increments = [
        *SPECIMEN,
        ("CONS_INCN", "", "X"),
        ("CONS_IVR", "", "3DP"),
        ("CONS_INCF", "kPa", "0DP"),
        ("CONS_INCE", "", "3DP"),
        ("CONS_CVLG", "m2/yr", "2SF"),
    ]
    rows: list[Row] = []
    before = {row[0]: row[3] for row in made.specimens}
    for test, number, stress, void_ratio, cv in made.increments:
        rows.append((*samples.specimen(str(test)), str(number), before[test], stress, void_ratio, str(cv)))
        before[test] = void_ratio
    method = "Incremental loading, 24 h steps"
    return {
        "CONG": (
            general,
            [
                (*samples.specimen(str(row[0])), "OEDOMETER", "UNDISTURBED", 75, row[4], row[3], method)
                for row in made.specimens
            ],
        ),
        "CONS": (increments, rows),
    }


def _triaxial(made: Sheets, samples: Samples) -> dict[str, tuple[Head, list[Row]]]:
    results = [
        *SPECIMEN,
        ("TRET_TESN", "", "X"),
        ("TRET_CONP", "kPa", "0DP"),
        ("TRET_PWPI", "kPa", "0DP"),
        ("TRET_STRN", "%", "1DP"),
        ("TRET_DEVF", "kPa", "0DP"),
        ("TRET_PWPF", "kPa", "0DP"),
        ("TRET_CVP", "kPa", "0DP"),
        ("TRET_CRP", "kPa", "0DP"),
    ]
    rows: list[Row] = []
    back = 300.0  # kPa
    for test, _, _, _, axial, radial, _ in made.triaxials:
        strain, deviator, pore = failure(made, str(test))
        rows.append(
            (*samples.specimen(str(test)), "1", radial, back, strain, deviator, back + pore, axial, radial)
        )
    return {
        "TREG": (
            [*SPECIMEN, ("TREG_TYPE", "", "PA"), ("TREG_COND", "", "PA")],
            [(*samples.specimen(str(row[0])), row[3], "UNDISTURBED") for row in made.triaxials],
        ),
        "TRET": (results, rows),
    }


def failure(made: Sheets, test: str) -> tuple[float, float, float]:
    """Return strain [%], deviator and pore pressure change [kPa] at the largest deviator of a test."""
    rows = [row[1:] for row in made.shear if row[0] == test]
    return max(rows, key=lambda row: row[1])  # type: ignore[arg-type, return-value]


def _field(made: Sheets) -> dict[str, tuple[Head, list[Row]]]:
    vane = [
        *LOCA,
        ("IVAN_DPTH", "m", "2DP"),
        ("IVAN_TESN", "", "X"),
        ("IVAN_TYPE", "", "PA"),
        ("IVAN_IVAN", "kPa", "XN"),
        ("IVAN_IVAR", "kPa", "XN"),
        ("IVAN_DATE", "yyyy-mm-dd", "DT"),
        ("IVAN_METH", "", "X"),
    ]
    general = [
        *LOCA,
        ("SCPG_TESN", "", "X"),
        ("SCPG_TYPE", "", "PA"),
        ("SCPG_WAT", "m", "2DP"),
        ("SCPG_CAR", "", "3DP"),
    ]
    readings = [
        *LOCA,
        ("SCPG_TESN", "", "X"),
        ("SCPT_DPTH", "m", "2DP"),
        ("SCPT_RES", "MPa", "3DP"),
        ("SCPT_FRES", "MPa", "4DP"),
        ("SCPT_PWP2", "MPa", "4DP"),
    ]
    soundings = dict.fromkeys(str(row[0]) for row in made.cone)
    return {
        "IVAN": (
            vane,
            [
                (hole, depth, "1", "BOREHOLE", str(peak), str(low), DATE, "6 deg/min, not corrected")
                for hole, depth, peak, low, _ in made.vane
            ],
        ),
        "SCPG": (general, [(hole, "1", "PC", WATER_TABLE, AREA_RATIO) for hole in soundings]),
        "SCPT": (
            readings,
            [
                (hole, "1", depth, resistance, float(friction) / 1e3, float(pore) / 1e3)  # type: ignore[arg-type]
                for hole, depth, resistance, friction, pore, _ in made.cone
            ],
        ),
    }


def _front(groups: dict[str, tuple[Head, list[Row]]]) -> dict[str, tuple[Head, list[Row]]]:
    """Return the groups that name project, file, codes, types and units."""
    project = [("PROJ_ID", "", "ID"), ("PROJ_NAME", "", "X"), ("PROJ_MEMO", "", "X")]
    transmission = [
        ("TRAN_ISNO", "", "X"),
        ("TRAN_DATE", "yyyy-mm-dd", "DT"),
        ("TRAN_PROD", "", "X"),
        ("TRAN_STAT", "", "X"),
        ("TRAN_DESC", "", "X"),
        ("TRAN_AGS", "", "X"),
        ("TRAN_RECV", "", "X"),
        ("TRAN_DLIM", "", "X"),
        ("TRAN_RCON", "", "X"),
    ]
    codes = sorted(
        {
            (heading, str(row[place]))
            for head, rows in groups.values()
            for place, (heading, _, kind) in enumerate(head)
            if kind == "PA"
            for row in rows
        }
    )
    heads = [project, transmission, *(head for head, _ in groups.values())]
    types = sorted({kind for head in heads for _, _, kind in head} | {"X", "PA", "PT", "PU"})
    units = sorted({unit for head in heads for _, unit, _ in head if unit})
    return {
        "PROJ": (
            project,
            [("TM1", "Tern Marsh, an invented site", "All values are made up by a computer")],
        ),
        "TRAN": (
            transmission,
            [("1", DATE, "Nobody", "DRAFT", "Invented data", "4.1.1", "Anybody", "|", "+")],
        ),
        "ABBR": (
            [("ABBR_HDNG", "", "X"), ("ABBR_CODE", "", "X"), ("ABBR_DESC", "", "X")],
            [(heading, code, MEANINGS[code]) for heading, code in codes],
        ),
        "TYPE": (
            [("TYPE_TYPE", "", "X"), ("TYPE_DESC", "", "X")],
            [(kind, f"Data type {kind}") for kind in types],
        ),
        "UNIT": ([("UNIT_UNIT", "", "X"), ("UNIT_DESC", "", "X")], [(unit, NAMES[unit]) for unit in units]),
    }


MEANINGS = {
    "CP": "Cable percussion (shell and auger)",
    "SCP": "Static cone penetrometer",
    "P": "Piston sample",
    "D": "Small disturbed sample",
    "OEDOMETER": "Oedometer",
    "UNDISTURBED": "Undisturbed",
    "CAUC": "Anisotropically consolidated undrained compression with pwp measurement",
    "CIUC": "Isotropically consolidated undrained compression with pwp measurement",
    "BOREHOLE": "Borehole vane",
    "PC": "Piezo cone",
}
NAMES = {
    "m": "metre",
    "mm": "millimetre",
    "%": "per cent",
    "kPa": "kilopascal",
    "MPa": "megapascal",
    "m2/yr": "square metre per year",
    "yyyy-mm-dd": "year month day",
}
